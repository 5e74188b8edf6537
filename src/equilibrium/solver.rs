//! Solves a system: absent components out, held activities fixed, solids settled, ionic strength brought to rest.

use super::certificate::Certificate;
use super::convex::Minimiser;
use super::error::EquilibriumError;
use super::layout::Layout;
use super::solids::{Fixed, Stage, settle};
use super::system::{Constants, System};

/// Longest move of an unknown (ln units) that a prediction along the ionic strength may make.
const LONGEST_PREDICTION: f64 = 2.0;

/// What is to be solved.
#[derive(Clone, Copy, Debug)]
pub struct Problem<'a> {
    /// Components, species, solids.
    pub system: &'a System,
    /// Their constants at the bath's temperature.
    pub constants: &'a Constants,
    /// Total of each component, mol/L. That of H⁺ may be negative; ignored for held components.
    pub totals: &'a [f64],
    /// ln activity of each held component.
    pub held: &'a [Option<f64>],
    /// Whether each solid may precipitate; one that may not is only given its saturation index.
    pub may_form: &'a [bool],
    /// Whether a monovalent counter-ion that makes up the charge counts in the ionic strength: the acid or alkali
    /// that holds the pH.
    pub counter_ion: bool,
}

/// A solved system. Logarithms are natural; absent components and species have −∞.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Equilibrium {
    /// ln activity of each component.
    pub ln_a: Vec<f64>,
    /// ln concentration of each species.
    pub ln_c: Vec<f64>,
    /// Concentration of each species, mol/L.
    pub c: Vec<f64>,
    /// −ln γ/z² at the final ionic strength, and its derivative by ionic strength.
    pub gamma: (f64, f64),
    /// Amount of each solid, mol per litre of bath.
    pub solids: Vec<f64>,
    /// ln(IAP/Ks) of each solid.
    pub ln_saturation: Vec<f64>,
    /// Ionic strength, mol/L, with the counter-ion where asked for.
    pub ionic_strength: f64,
    /// Σ z c, mol/L: positive when anions are missing.
    pub charge_gap: f64,
    /// Σ ν c + Σ ν n of each component, mol/L; for held components what the bath holds of them.
    pub totals: Vec<f64>,
    /// What was left over.
    pub certificate: Certificate,
}

impl Equilibrium {
    /// Free concentration of a component, mol/L.
    pub fn free(&self, component: usize) -> f64 {
        self.c[component]
    }

    /// −log10 of the hydrogen-ion activity.
    pub fn ph(&self, proton: usize) -> f64 {
        -self.ln_a[proton] / super::LN_10
    }

    /// Saturation index log10(IAP/Ks) of a solid.
    pub fn saturation_index(&self, solid: usize) -> f64 {
        self.ln_saturation[solid] / super::LN_10
    }
}

/// Where the previous point ended, as a start for the next.
#[derive(Clone, Debug, Default)]
struct Warm {
    present: Vec<bool>,
    ln_a: Vec<f64>,
    active: Vec<usize>,
    ionic_strength: f64,
}

/// The solver with its buffers and its memory of the last point.
#[derive(Clone, Debug, Default)]
pub struct Solver {
    minimiser: Minimiser,
    warm: Option<Warm>,
}

impl Solver {
    /// A fresh solver.
    pub fn new() -> Self {
        Self::default()
    }

    /// Forgets the last point, so that the next solve starts cold.
    pub fn reset(&mut self) {
        self.warm = None;
    }

    /// Solves a problem, starting from the last one when it had the same components.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed problem; never for a well-posed one.
    pub fn solve(&mut self, problem: &Problem) -> Result<Equilibrium, EquilibriumError> {
        check(problem)?;
        let layout = Layout::new(problem)?;
        let warm = self.warm.take().filter(|warm| warm.present == layout.present());
        let first = self.solve_from(problem, &layout, warm.as_ref());
        let result = match first {
            Err(EquilibriumError::NotConverged { .. }) if warm.is_some() => {
                self.solve_from(problem, &layout, None)
            }
            other => other,
        };
        result.map_err(|error| match error {
            EquilibriumError::NotConverged { .. } if lacks_proton_balance(problem) => {
                EquilibriumError::NoProtonBalance
            }
            other => other,
        })
    }

    fn solve_from(
        &mut self,
        problem: &Problem,
        layout: &Layout,
        warm: Option<&Warm>,
    ) -> Result<Equilibrium, EquilibriumError> {
        let squares: Vec<f64> =
            layout.species.iter().map(|&j| problem.system.species[j].charge.powi(2)).collect();
        let names: Vec<&str> =
            layout.solids.iter().map(|&k| problem.system.solids[k].token.as_str()).collect();
        let weights = layout.weights(problem);
        let all: Vec<usize> = (0..layout.columns.len()).collect();
        let mut x = layout.start(problem, warm.map(|warm| warm.ln_a.as_slice()));
        let mut ionic_strength = warm.map_or_else(|| first_guess(problem), |warm| warm.ionic_strength);
        let corrected = problem.constants.model != super::ActivityModel::AsMeasured;
        let mut stage: Option<Stage> = None;
        let (mut low, mut high) = (0.0f64, f64::INFINITY);
        let mut iterations = 0;
        for round in 0..200 {
            let (per_square, slope) =
                problem.constants.model.with_slope(problem.constants.slope_a, ionic_strength);
            let minus_ln_gamma: Vec<f64> = squares.iter().map(|z2| z2 * per_square).collect();
            let fixed = Fixed {
                base: &layout.base,
                solid_rows: &layout.solid_rows,
                ln_ks: &layout.ln_ks,
                solid_names: &names,
                column_weight: &weights,
                minus_ln_gamma: &minus_ln_gamma,
            };
            let stage = match &mut stage {
                Some(stage) => stage,
                empty => empty.insert(Self::first_stage(&fixed, layout, warm, &x)),
            };
            let (amounts, outcome) = settle(&fixed, stage, &mut self.minimiser, &all, &mut x)?;
            iterations += outcome.steps;
            let now = strength(problem, layout, &self.minimiser.c);
            let excess = now - ionic_strength;
            let settled =
                !corrected || excess.abs() <= 2e-14 * now || (high.is_finite() && high - low <= 1e-15 * high);
            if settled || round == 199 {
                if !outcome.converged {
                    return Err(EquilibriumError::NotConverged { residual: outcome.residual, iterations });
                }
                self.warm = Some(Warm {
                    present: layout.present(),
                    ln_a: layout.spread(&x, 0.0),
                    active: stage.active.iter().map(|&(solid, _)| layout.solids[solid]).collect(),
                    ionic_strength: now,
                });
                let used = if corrected { ionic_strength } else { now };
                return Ok(self.report(problem, layout, &x, &amounts, used, (per_square, slope), iterations));
            }
            if excess > 0.0 {
                low = low.max(ionic_strength)
            } else {
                high = high.min(ionic_strength)
            }
            let next =
                self.next_strength(problem, layout, stage, slope, (ionic_strength, excess), (low, high));
            ionic_strength = next;
        }
        Err(EquilibriumError::NotConverged { residual: f64::NAN, iterations })
    }

    fn first_stage(fixed: &Fixed, layout: &Layout, warm: Option<&Warm>, x: &[f64]) -> Stage {
        if let Some(warm) = warm {
            let active: Vec<usize> = (0..layout.solids.len())
                .filter(|&place| warm.active.contains(&layout.solids[place]))
                .collect();
            return Stage::prepare(fixed, &active, x);
        }
        Stage::prepare(fixed, &[], x)
    }

    /// Newton step on I(c(I)) − I with the exact slope, kept inside its bracket; moves the unknowns along.
    fn next_strength(
        &mut self,
        problem: &Problem,
        layout: &Layout,
        stage: &mut Stage,
        gamma_slope: f64,
        (ionic_strength, excess): (f64, f64),
        (low, high): (f64, f64),
    ) -> f64 {
        let sparse = &stage.sparse;
        self.minimiser.factorise_here(sparse);
        let mut dy = vec![0.0; sparse.columns];
        let square = |j: usize| problem.system.species[layout.species[j]].charge.powi(2);
        for (j, &c) in self.minimiser.c.iter().enumerate() {
            let (columns, values) = sparse.row(j);
            for (&column, value) in columns.iter().zip(values) {
                dy[column as usize] -= value * c * square(j) * gamma_slope;
            }
        }
        self.minimiser.solve(sparse.columns, &mut dy);
        let change: Vec<f64> = (0..sparse.rows())
            .map(|j| self.minimiser.c[j] * (square(j) * gamma_slope + sparse.dot(j, &dy)))
            .collect();
        let response = strength_response(problem, layout, &self.minimiser.c, &change);
        let newton = ionic_strength + excess / (1.0 - response);
        let inside = newton > low && newton < high && newton.is_finite() && response < 1.0;
        let next = match (inside, high.is_finite()) {
            (true, _) => newton,
            (false, true) => 0.5 * (low + high),
            (false, false) => 2.0 * ionic_strength + 1e-6,
        };
        let move_by = next - ionic_strength;
        let longest = dy.iter().fold(0.0f64, |max, d| max.max((d * move_by).abs()));
        let share = if longest > LONGEST_PREDICTION { LONGEST_PREDICTION / longest } else { 1.0 };
        if share.is_finite() {
            for (y, d) in stage.y.iter_mut().zip(&dy) {
                *y += share * d * move_by;
            }
        }
        next
    }

    #[allow(clippy::too_many_arguments)]
    fn report(
        &self,
        problem: &Problem,
        layout: &Layout,
        x: &[f64],
        amounts: &[(usize, f64)],
        ionic_strength: f64,
        gamma: (f64, f64),
        iterations: usize,
    ) -> Equilibrium {
        let system = problem.system;
        let ln_a = layout.spread(x, f64::NEG_INFINITY);
        let mut ln_c = vec![f64::NEG_INFINITY; system.species.len()];
        let mut c = vec![0.0; system.species.len()];
        for (place, &j) in layout.species.iter().enumerate() {
            c[j] = self.minimiser.c[place];
            ln_c[j] = c[j].ln();
            if c[j] < f64::MIN_POSITIVE {
                let species = &system.species[j];
                let sum: f64 = species.components.iter().map(|&(i, nu)| nu * ln_a[i]).sum();
                ln_c[j] = problem.constants.ln_beta[j] + gamma.0 * species.charge.powi(2) + sum;
            }
        }
        let mut solids = vec![0.0; system.solids.len()];
        for &(place, amount) in amounts {
            solids[layout.solids[place]] = amount;
        }
        let ln_saturation: Vec<f64> = system
            .solids
            .iter()
            .zip(&problem.constants.ln_ks)
            .map(|(solid, ln_ks)| {
                let possible = solid.components.iter().all(|&(i, _)| ln_a[i].is_finite());
                let iap: f64 = solid.components.iter().map(|&(i, nu)| nu * ln_a[i]).sum();
                if possible { iap - ln_ks } else { f64::NEG_INFINITY }
            })
            .collect();
        let mut result = Equilibrium {
            charge_gap: system.species.iter().zip(&c).map(|(species, c)| species.charge * c).sum(),
            ln_a,
            ln_c,
            c,
            gamma,
            solids,
            ln_saturation,
            ionic_strength,
            totals: vec![0.0; system.components.len()],
            certificate: Certificate { iterations, ..Certificate::default() },
        };
        certify(problem, layout, &mut result);
        result
    }
}

/// Fills the totals and the certificate from the original balances.
fn certify(problem: &Problem, layout: &Layout, result: &mut Equilibrium) {
    let system = problem.system;
    let mut magnitude = vec![0.0f64; system.components.len()];
    let mut add = |components: &[(usize, f64)], amount: f64| {
        for &(i, nu) in components {
            result.totals[i] += nu * amount;
            magnitude[i] += (nu * amount).abs();
        }
    };
    for (species, &c) in system.species.iter().zip(&result.c) {
        add(&species.components, c);
    }
    for (solid, &n) in system.solids.iter().zip(&result.solids) {
        add(&solid.components, n);
    }
    let certificate = &mut result.certificate;
    for &i in layout.columns.iter().filter(|&&i| problem.held[i].is_none()) {
        let size = magnitude[i] + problem.totals[i].abs();
        if size > 0.0 {
            let gap = (result.totals[i] - problem.totals[i]).abs() / size;
            certificate.balance_residual = certificate.balance_residual.max(gap);
        }
    }
    for &k in &layout.solids {
        let excess = result.ln_saturation[k];
        let off = if result.solids[k] > 0.0 { excess.abs() } else { excess.max(0.0) };
        certificate.kkt_residual = certificate.kkt_residual.max(off);
    }
    if problem.constants.model != super::ActivityModel::AsMeasured && result.ionic_strength > 0.0 {
        let now = strength(problem, layout, &layout.species.iter().map(|&j| result.c[j]).collect::<Vec<_>>());
        certificate.ionic_strength_residual = (now - result.ionic_strength).abs() / result.ionic_strength;
    }
}

fn check(problem: &Problem) -> Result<(), EquilibriumError> {
    for (i, token) in problem.system.components.iter().enumerate() {
        let (total, is_proton) = (problem.totals[i], problem.system.proton == Some(i));
        match problem.held[i] {
            Some(ln_a) if !ln_a.is_finite() => {
                return Err(EquilibriumError::BadHeld { component: token.clone() });
            }
            None if !total.is_finite() || (total < 0.0 && !is_proton) => {
                return Err(EquilibriumError::BadTotal { component: token.clone(), value: total });
            }
            _ => {}
        }
    }
    Ok(())
}

/// Whether the hydrogen balance is free, not positive, and no species gives it a negative part.
fn lacks_proton_balance(problem: &Problem) -> bool {
    problem.system.proton.is_some_and(|h| {
        problem.held[h].is_none()
            && problem.totals[h] <= 0.0
            && !problem
                .system
                .species
                .iter()
                .any(|s| s.components.len() == 1 && s.components[0].0 == h && s.components[0].1 < 0.0)
    })
}

/// A start for the ionic strength: that of the totals as free ions, at most the Davies limit.
fn first_guess(problem: &Problem) -> f64 {
    let sum: f64 = problem
        .system
        .species
        .iter()
        .zip(problem.totals)
        .map(|(species, total)| 0.5 * species.charge.powi(2) * total.abs())
        .sum();
    sum.clamp(1e-7, 0.5)
}

fn charge(problem: &Problem, layout: &Layout, place: usize) -> f64 {
    problem.system.species[layout.species[place]].charge
}

/// ½ Σ z² c, with the monovalent counter-ion that makes up Σ z c where asked for.
fn strength(problem: &Problem, layout: &Layout, c: &[f64]) -> f64 {
    let (mut squares, mut gap) = (0.0, 0.0);
    for (place, &c) in c.iter().enumerate() {
        let z = charge(problem, layout, place);
        squares += z * z * c;
        gap += z * c;
    }
    0.5 * (squares + if problem.counter_ion { gap.abs() } else { 0.0 })
}

/// Change of [`strength`] for a change of the concentrations.
fn strength_response(problem: &Problem, layout: &Layout, c: &[f64], change: &[f64]) -> f64 {
    let (mut squares, mut gap, mut gap_change) = (0.0, 0.0, 0.0);
    for (place, (&c, &dc)) in c.iter().zip(change).enumerate() {
        let z = charge(problem, layout, place);
        squares += z * z * dc;
        gap += z * c;
        gap_change += z * dc;
    }
    0.5 * (squares + if problem.counter_ion { gap.signum() * gap_change } else { 0.0 })
}
