//! Exact derivatives of a solution by its totals, its constants and its held activities.
//!
//! At the solution the balances, the saturation of the present solids and the sums that activity coefficients depend on
//! hold together; differentiating them gives one linear system for every question.

use super::activity::{self, Coefficients};
use super::error::EquilibriumError;
use super::problem::{Equilibrium, Problem};
use nalgebra::{DMatrix, DVector, Dyn, LU};

/// The factored linear response of a solution.
pub struct Sensitivities<'a> {
    pub(super) problem: Problem<'a>,
    pub(super) solution: &'a Equilibrium,
    pub(super) free: Vec<usize>,
    /// Row of each component that is free.
    pub(super) places: Vec<Option<usize>>,
    pub(super) solids: Vec<usize>,
    /// Gases that the bath is open to.
    pub(super) gases: Vec<usize>,
    pub(super) coefficients: Coefficients,
    pub(super) factor: LU<f64, Dyn, Dyn>,
    /// What each row was multiplied by, and each column.
    pub(super) rows: DVector<f64>,
    pub(super) columns: DVector<f64>,
}

/// Response of a solution to one input.
#[derive(Clone, Debug, PartialEq)]
pub struct Response {
    /// d ln a of each component; 0 for absent ones.
    pub ln_a: Vec<f64>,
    /// d n of each solid.
    pub solids: Vec<f64>,
    /// d of the sums that activity coefficients depend on; the first is the ionic strength.
    pub sums: Vec<f64>,
}

impl<'a> Sensitivities<'a> {
    /// Factors the linear response at a solution.
    ///
    /// # Errors
    /// [`EquilibriumError::NotConverged`] when the response is singular, which a solution with independent
    /// solids never is.
    pub fn new(problem: Problem<'a>, solution: &'a Equilibrium) -> Result<Self, EquilibriumError> {
        let free: Vec<usize> = (0..problem.totals.len())
            .filter(|&i| problem.held[i].is_none() && solution.ln_a[i].is_finite())
            .collect();
        let solids: Vec<usize> = (0..solution.solids.len()).filter(|&k| solution.solids[k] > 0.0).collect();
        let open = problem.open_to.iter().take(solution.uptake.len()).enumerate();
        let gases: Vec<usize> = open.filter_map(|(gas, pressure)| pressure.map(|_| gas)).collect();
        let (m, s) = (free.len(), solids.len() + gases.len());
        let mut places = vec![None; problem.totals.len()];
        free.iter().enumerate().for_each(|(row, &component)| places[component] = Some(row));
        let place = |component: usize| places[component];
        let count = solution.sums.len();
        let coefficients = solution
            .sums
            .first()
            .map_or_else(Coefficients::default, |&strength| Coefficients::at(problem.constants, strength));
        let mut matrix = DMatrix::<f64>::zeros(m + s + count, m + s + count);
        let mut responses: Vec<(usize, f64)> = Vec::with_capacity(2);
        for (j, (species, &c)) in problem.system.species.iter().zip(&solution.c).enumerate() {
            if c == 0.0 {
                continue;
            }
            responses.clear();
            for sum in activity::sums_of(&problem, j) {
                responses.push((sum, activity::response(&problem, &coefficients, &solution.sums, j, sum)));
            }
            for &(i, nu) in &species.components {
                let Some(row) = place(i) else { continue };
                for &(k, other) in &species.components {
                    if let Some(column) = place(k) {
                        matrix[(row, column)] += nu * other * c;
                    }
                }
                for &(sum, response) in &responses {
                    matrix[(row, m + s + sum)] += nu * c * response;
                }
            }
            for sum in 0..count {
                let weight = whole_weight(&problem, solution, sum, j) * c;
                if weight == 0.0 {
                    continue;
                }
                for &(i, nu) in &species.components {
                    if let Some(column) = place(i) {
                        matrix[(m + s + sum, column)] -= weight * nu;
                    }
                }
                for &(other, response) in &responses {
                    matrix[(m + s + sum, m + s + other)] -= weight * response;
                }
            }
        }
        for sum in 0..count {
            matrix[(m + s + sum, m + s + sum)] += 1.0;
        }
        let solid_terms = solids.iter().map(|&solid| &problem.system.solids[solid].components);
        let gas_terms = gases.iter().map(|&gas| &problem.system.gases[gas].components);
        for (k, terms) in solid_terms.chain(gas_terms).enumerate() {
            for &(i, nu) in terms {
                if let Some(row) = place(i) {
                    matrix[(row, m + k)] += nu;
                    matrix[(m + k, row)] += nu;
                }
            }
        }
        let uptakes = gases.iter().map(|&gas| solution.uptake[gas].abs().max(1e-12));
        let amounts: Vec<f64> = solids.iter().map(|&solid| solution.solids[solid]).chain(uptakes).collect();
        let (rows, columns) = equilibrate(&mut matrix, m, &amounts);
        let factor = matrix.lu();
        if !factor.is_invertible() {
            let residual = solution.certificate.balance_residual;
            return Err(EquilibriumError::NotConverged { residual, iterations: 0 });
        }
        Ok(Self { problem, solution, free, places, solids, gases, coefficients, factor, rows, columns })
    }

    /// Response to the total of a component, per mol/L.
    pub fn by_total(&self, component: usize) -> Response {
        let mut rhs = self.zero();
        if let Some(row) = self.places[component] {
            rhs[row] = 1.0;
        }
        self.respond(rhs, &[])
    }

    /// Response to ln a of a held component (for H⁺: −ln 10 times the response to pH).
    pub fn by_held(&self, component: usize) -> Response {
        let shift = |terms: &[(usize, f64)]| {
            terms.iter().filter(|(i, _)| *i == component).map(|(_, nu)| nu).sum::<f64>()
        };
        let species: Vec<f64> = self.problem.system.species.iter().map(|s| shift(&s.components)).collect();
        let solids: Vec<f64> = self.problem.system.solids.iter().map(|s| -shift(&s.components)).collect();
        let gases: Vec<f64> = self.problem.system.gases.iter().map(|g| shift(&g.components)).collect();
        let mut response = self.shifted(&species, &solids, &gases);
        response.ln_a[component] = 1.0;
        response
    }

    /// Response to ln K of one published constant, which moves every species and solid in whose chain it stands.
    pub fn by_constant(&self, constant: usize) -> Response {
        let count = |chain: &[(usize, f64)]| {
            chain.iter().filter(|(index, _)| *index == constant).map(|(_, n)| n).sum::<f64>()
        };
        let species: Vec<f64> = self.problem.system.species.iter().map(|s| count(&s.chain)).collect();
        let solids: Vec<f64> = self.problem.system.solids.iter().map(|s| count(&s.chain)).collect();
        let gases: Vec<f64> = self.problem.system.gases.iter().map(|g| count(&g.chain)).collect();
        self.shifted(&species, &solids, &gases)
    }

    /// Response to a shift of ln β of every species and of ln Ks of every solid.
    pub fn by_shift(&self, ln_beta: &[f64], ln_ks: &[f64]) -> Response {
        self.shifted(ln_beta, ln_ks, &vec![0.0; self.problem.system.gases.len()])
    }

    /// The same with a shift of ln K of every gas.
    fn shifted(&self, ln_beta: &[f64], ln_ks: &[f64], ln_kg: &[f64]) -> Response {
        let (m, s) = (self.free.len(), self.solids.len() + self.gases.len());
        let mut rhs = self.zero();
        let concentrations = self.problem.system.species.iter().zip(&self.solution.c).enumerate();
        for ((j, (species, &c)), &shift) in concentrations.zip(ln_beta) {
            if shift == 0.0 || c == 0.0 {
                continue;
            }
            for &(i, nu) in &species.components {
                if let Some(row) = self.places[i] {
                    rhs[row] -= nu * c * shift;
                }
            }
            for sum in 0..self.solution.sums.len() {
                rhs[m + s + sum] += whole_weight(&self.problem, self.solution, sum, j) * c * shift;
            }
        }
        let shifts: Vec<(usize, f64)> = self
            .solids
            .iter()
            .map(|&solid| ln_ks[solid])
            .chain(self.gases.iter().map(|&gas| -ln_kg[gas]))
            .enumerate()
            .map(|(k, shift)| (m + k, shift))
            .collect();
        self.respond(rhs, &shifts)
    }

    /// d ln(free concentration) of a component from a response.
    pub fn ln_free(&self, response: &Response, component: usize) -> f64 {
        let sums = &self.solution.sums;
        let minus_ln_gamma: f64 = activity::sums_of(&self.problem, component)
            .map(|sum| {
                activity::response(&self.problem, &self.coefficients, sums, component, sum)
                    * response.sums[sum]
            })
            .sum();
        response.ln_a[component] + minus_ln_gamma
    }

    pub(super) fn zero(&self) -> DVector<f64> {
        DVector::zeros(self.free.len() + self.solids.len() + self.gases.len() + self.solution.sums.len())
    }

    fn respond(&self, mut rhs: DVector<f64>, shifts: &[(usize, f64)]) -> Response {
        for &(row, value) in shifts {
            rhs[row] += value;
        }
        rhs.component_mul_assign(&self.rows);
        let mut solved = self.factor.solve(&rhs).unwrap_or_else(|| self.zero());
        solved.component_mul_assign(&self.columns);
        let (m, s) = (self.free.len(), self.solids.len() + self.gases.len());
        let mut response = Response {
            ln_a: vec![0.0; self.problem.totals.len()],
            solids: vec![0.0; self.solution.solids.len()],
            sums: solved.iter().skip(m + s).copied().collect(),
        };
        for (row, &i) in self.free.iter().enumerate() {
            response.ln_a[i] = solved[row];
        }
        for (k, &solid) in self.solids.iter().enumerate() {
            response.solids[solid] = solved[m + k];
        }
        response
    }
}

/// Scales each balance (the first `m` rows) by the size of its component in solution and solids, and the change of each
/// solid by its amount, so that a scarce component is not drowned in the rounding of a plentiful one. Returns the
/// factors of rows and columns.
fn equilibrate(matrix: &mut DMatrix<f64>, m: usize, amounts: &[f64]) -> (DVector<f64>, DVector<f64>) {
    let size = matrix.nrows();
    let columns = DVector::from_fn(size, |column, _| {
        column.checked_sub(m).and_then(|solid| amounts.get(solid)).copied().unwrap_or(1.0)
    });
    for (column, factor) in columns.iter().enumerate() {
        matrix.column_mut(column).scale_mut(*factor);
    }
    let rows = DVector::from_fn(size, |row, _| {
        let largest = matrix.row(row).amax();
        if largest > 0.0 { 1.0 / largest } else { 1.0 }
    });
    for (row, factor) in rows.iter().enumerate() {
        matrix.row_mut(row).scale_mut(*factor);
    }
    (rows, columns)
}

/// ∂s/∂c of a species, with the part of the counter-ion that it calls for.
pub(super) fn whole_weight(problem: &Problem, solution: &Equilibrium, sum: usize, species: usize) -> f64 {
    let (cations, anions) = activity::counter_weight(problem, sum);
    let per_gap = if solution.charge_gap > 0.0 { anions } else { -cations };
    activity::weight(problem, sum, species) + per_gap * problem.system.species[species].charge
}
