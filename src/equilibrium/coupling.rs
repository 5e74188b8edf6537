//! Activity coefficients brought to rest together with the concentrations.
//!
//! The coefficients depend on a few sums s = W c over concentrations. The unknowns y and the sums are found together by
//! Newton's method on both sets of equations, S(c) = T and s = W c; the sums are eliminated first (Schur complement), so
//! that the Cholesky factor of the balances alone is needed.

use super::activity::{self, ActivityModel, Coefficients};
use super::balances::Balances;
use super::convex::Minimiser;
use super::lanes::{Lane, WIDTH, ZERO_LANE, dot, multiply, put};
use super::layout::Layout;
use super::problem::Problem;
use pulp::Simd;

/// Relative residual of balances and sums at which both are at their end in double precision.
const TOLERANCE: f64 = 1e-14;
/// Residual that still counts when rounding stops the iteration.
const ACCEPTED: f64 = 1e-12;
/// Residual from which Newton's method on both is tried.
const AT_HOME: f64 = 0.5;
/// Longest move of an unknown in one step, ln units.
const LONGEST: f64 = 2.0;
/// Smallest pivot of the scaled Hessian that serves here.
const LEAST_PIVOT: f64 = 1e-8;
const MAX_STEPS: usize = 14;

/// The sums with their weights over the species of a layout.
#[derive(Clone, Debug, Default)]
pub(super) struct Coupling {
    /// Model, and whether a counter-ion counts, that the rows were filled for.
    filled_for: Option<(ActivityModel, bool)>,
    /// Values of the sums that the activity coefficients are taken at.
    pub sums: Vec<f64>,
    /// −ln γ of each species.
    pub minus_ln_gamma: Vec<Lane>,
    /// Share of the full correction, below one only on the way to it.
    pub share: f64,
    coefficients: Coefficients,
    weights: Vec<Vec<Lane>>,
    counter: Vec<(f64, f64)>,
    charge: Vec<Lane>,
    square: Vec<Lane>,
    salting: Vec<Lane>,
    class: Vec<Option<usize>>,
    /// ∂(−ln γ)/∂s, by sum.
    response: Vec<Vec<Lane>>,
    /// The weights with the counter-ion's part.
    whole: Vec<Vec<Lane>>,
    buffers: Buffers,
}

#[derive(Clone, Debug, Default)]
struct Buffers {
    found: Vec<f64>,
    weighted: Vec<Lane>,
    step: Vec<f64>,
    /// H⁻¹B, a column for each sum.
    across: Vec<Vec<f64>>,
    /// The Schur complement with its right side as last column.
    schur: Vec<f64>,
    k: Vec<Lane>,
}

/// How the iteration on both ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Rest {
    Reached,
    NotReached,
}

impl Coupling {
    /// Takes over the species of a layout.
    pub fn prepare(&mut self, problem: &Problem, layout: &Layout) {
        let (count, lanes) = (activity::sum_count(problem), layout.base.species_lanes());
        let fill = |value: &dyn Fn(usize) -> f64| {
            let mut row = vec![ZERO_LANE; lanes];
            for (place, &species) in layout.species.iter().enumerate() {
                put(&mut row, place, value(species));
            }
            row
        };
        let charge = |species: usize| problem.system.species[species].charge;
        self.charge = fill(&charge);
        self.square = fill(&|species| charge(species).powi(2));
        self.salting = fill(&|species| activity::salting_out(problem, species));
        self.class = layout.species.iter().map(|&species| activity::class_sum(problem, species)).collect();
        self.weights =
            (0..count).map(|sum| fill(&|species| activity::weight(problem, sum, species))).collect();
        self.counter = (0..count).map(|sum| activity::counter_weight(problem, sum)).collect();
        self.response = vec![vec![ZERO_LANE; lanes]; count];
        self.whole = self.weights.clone();
        self.sums = vec![0.0; count];
        self.minus_ln_gamma = vec![ZERO_LANE; lanes];
        self.coefficients = Coefficients::default();
        self.share = 1.0;
        self.filled_for = Some((problem.constants.model, problem.counter_ion));
    }

    /// Whether the rows were filled for the model of a problem.
    pub fn serves(&self, problem: &Problem) -> bool {
        self.filled_for == Some((problem.constants.model, problem.counter_ion))
    }

    /// A first guess of the sums: the totals as free ions, at most as strong as the Davies equation bears.
    pub fn guess(&mut self, problem: &Problem) {
        self.sums.fill(0.0);
        let free = problem.system.species.iter().zip(problem.totals);
        let strength: f64 = free.map(|(species, total)| 0.5 * species.charge.powi(2) * total.abs()).sum();
        if let Some(first) = self.sums.first_mut() {
            *first = strength.clamp(1e-7, activity::DAVIES_LIMIT);
        }
    }

    /// Activity coefficients at the current sums.
    #[inline(always)]
    pub fn refresh(&mut self, problem: &Problem) {
        let Some(&strength) = self.sums.first() else { return };
        self.coefficients = Coefficients::at(problem.constants, strength).times(self.share);
        let Coefficients { per_square, per_interaction, per_salting } = self.coefficients;
        combine(&mut self.minus_ln_gamma, (per_square.0, &self.square), (per_salting.0, &self.salting));
        if self.sums.len() > 1 {
            for (place, class) in self.class.iter().enumerate() {
                if let Some(sum) = class {
                    self.minus_ln_gamma[place / WIDTH][place % WIDTH] -= per_interaction.0 * self.sums[*sum];
                }
            }
        }
    }

    /// The sums of given concentrations, into the buffer `found`; the counter-ion's sign settles `whole`.
    #[inline(always)]
    fn gather<S: Simd>(&mut self, simd: S, c: &[Lane]) {
        let gap = dot(simd, &self.charge, c, 0..c.len());
        self.buffers.found.clear();
        for (sum, weights) in self.weights.iter().enumerate() {
            let (cations, anions) = self.counter[sum];
            let per_gap = if gap > 0.0 { anions } else { -cations };
            for (whole, (weight, charge)) in self.whole[sum].iter_mut().zip(weights.iter().zip(&self.charge))
            {
                for l in 0..WIDTH {
                    whole[l] = weight[l] + per_gap * charge[l];
                }
            }
            self.buffers.found.push(dot(simd, &self.whole[sum], c, 0..c.len()));
        }
    }

    #[inline(always)]
    fn respond(&mut self) {
        let Coefficients { per_square, per_interaction, per_salting } = self.coefficients;
        combine(&mut self.response[0], (per_square.1, &self.square), (per_salting.1, &self.salting));
        if self.sums.len() > 1 {
            for (place, class) in self.class.iter().enumerate() {
                if let Some(sum) = *class {
                    let (q, l) = (place / WIDTH, place % WIDTH);
                    self.response[0][q][l] -= per_interaction.1 * self.sums[sum];
                    self.response[sum][q][l] = -per_interaction.0;
                }
            }
        }
    }

    /// Largest |W c − s| in units of the ionic strength.
    fn gap(&self) -> f64 {
        let size = self.sums[0].abs().max(1e-12);
        self.sums.iter().zip(&self.buffers.found).fold(0.0f64, |worst, (s, found)| {
            let gap = (found - s).abs() / size;
            if gap.is_nan() { f64::INFINITY } else { worst.max(gap) }
        })
    }

    /// |W c − s| of given concentrations, in units of the ionic strength.
    #[inline(always)]
    pub fn distance(&mut self, c: &[Lane]) -> f64 {
        if self.sums.is_empty() {
            return 0.0;
        }
        self.gather(pulp::Scalar::new(), c);
        self.gap()
    }

    /// The ionic strength of the concentrations that were looked at last.
    pub fn found_strength(&self) -> f64 {
        self.buffers.found.first().copied().unwrap_or(0.0)
    }

    /// The sums of given concentrations become those that coefficients are taken at.
    pub fn adopt(&mut self, share: f64) {
        for (sum, found) in self.sums.iter_mut().zip(&self.buffers.found) {
            *sum += share * (found - *sum);
        }
    }

    /// Newton's method on balances and sums together, from `y`. Leaves the last point behind whether it came to rest
    /// or not; counts its steps into `steps`.
    pub fn rest(
        &mut self,
        problem: &Problem,
        balances: &Balances,
        minimiser: &mut Minimiser,
        y: &mut [f64],
        steps: &mut usize,
    ) -> Rest {
        pulp::Arch::new().dispatch(Settling { coupling: self, problem, balances, minimiser, y, steps })
    }

    #[inline(always)]
    fn iterate<S: Simd>(
        &mut self,
        simd: S,
        problem: &Problem,
        balances: &Balances,
        minimiser: &mut Minimiser,
        y: &mut [f64],
        steps: &mut usize,
    ) -> Rest {
        minimiser.resize(balances);
        let (mut best, mut idle) = (f64::INFINITY, 0);
        for _ in 0..MAX_STEPS {
            self.refresh(problem);
            let mut k = std::mem::take(&mut self.buffers.k);
            k.clear();
            k.extend_from_slice(balances.species_offset());
            for (k, minus) in k.iter_mut().zip(&self.minus_ln_gamma) {
                for l in 0..WIDTH {
                    k[l] += minus[l];
                }
            }
            minimiser.evaluate(simd, balances, &k, y);
            self.buffers.k = k;
            self.gather(simd, &minimiser.c);
            let (balance, sums) = (minimiser.residual(balances), self.gap());
            let residual = if balance > sums { balance } else { sums };
            if residual <= TOLERANCE || (residual <= ACCEPTED && residual >= 0.25 * best) {
                return Rest::Reached;
            }
            idle = if residual < 0.5 * best { 0 } else { idle + 1 };
            best = best.min(residual);
            if balance > AT_HOME || !residual.is_finite() || idle > 3 {
                return Rest::NotReached;
            }
            *steps += 1;
            if minimiser.factorise_here(simd, balances) < LEAST_PIVOT
                || !self.step(simd, balances, minimiser, y)
            {
                return Rest::NotReached;
            }
        }
        Rest::NotReached
    }

    /// One step; false when it is no number.
    #[inline(always)]
    fn step<S: Simd>(&mut self, simd: S, balances: &Balances, minimiser: &Minimiser, y: &mut [f64]) -> bool {
        self.respond();
        let (m, count, c) = (balances.live.len(), self.sums.len(), &minimiser.c);
        let Self { buffers, response, whole, sums, .. } = self;
        let Buffers { found, weighted, step, across, schur, .. } = buffers;
        weighted.resize(c.len(), ZERO_LANE);
        step.clear();
        step.extend((0..m).map(|place| -minimiser.gap(balances, place)));
        minimiser.factor.solve(step);
        across.resize_with(count, Vec::new);
        for (column, response) in across.iter_mut().zip(&*response) {
            multiply(simd, weighted, response, c);
            column.clear();
            column.extend(
                balances
                    .live
                    .iter()
                    .map(|&live| dot(simd, weighted, balances.column(live), balances.lanes_of(live))),
            );
            minimiser.factor.solve(column);
        }
        let width = count + 1;
        schur.clear();
        schur.resize(count * width, 0.0);
        for sum in 0..count {
            multiply(simd, weighted, &whole[sum], c);
            let row = &mut schur[sum * width..(sum + 1) * width];
            row[count] = found[sum] - sums[sum];
            for (entry, response) in row.iter_mut().zip(&*response) {
                *entry = -dot(simd, weighted, response, 0..c.len());
            }
            row[sum] += 1.0;
            for (place, &live) in balances.live.iter().enumerate() {
                let share = dot(simd, weighted, balances.column(live), balances.lanes_of(live));
                for (entry, column) in row.iter_mut().zip(&*across) {
                    *entry += share * column[place];
                }
                row[count] += share * step[place];
            }
        }
        if !eliminate(schur, count) {
            return false;
        }
        for (sum, column) in across.iter().enumerate() {
            let change = schur[sum * width + count];
            for (step, across) in step.iter_mut().zip(column) {
                *step -= across * change;
            }
        }
        let farthest = step.iter().fold(0.0f64, |max, step| max.max(step.abs()));
        let strength = schur[count];
        let mut share = if farthest > LONGEST { LONGEST / farthest } else { 1.0 };
        if sums[0] + share * strength <= 0.1 * sums[0] {
            share = share.min(-0.9 * sums[0] / strength);
        }
        if !(farthest.is_finite() && share.is_finite() && share > 0.0) {
            return false;
        }
        for (y, step) in y.iter_mut().zip(&*step) {
            *y += share * step;
        }
        for (sum, value) in sums.iter_mut().enumerate() {
            *value += share * schur[sum * width + count];
        }
        true
    }
}

/// A linear combination of two rows.
#[inline(always)]
fn combine(to: &mut [Lane], (a, one): (f64, &[Lane]), (b, other): (f64, &[Lane])) {
    let parts = one.as_flattened().iter().zip(other.as_flattened());
    for (to, (one, other)) in to.as_flattened_mut().iter_mut().zip(parts) {
        *to = a * one + b * other;
    }
}

/// The iteration with the widest instructions of the processor at hand.
struct Settling<'a> {
    coupling: &'a mut Coupling,
    problem: &'a Problem<'a>,
    balances: &'a Balances,
    minimiser: &'a mut Minimiser,
    y: &'a mut [f64],
    steps: &'a mut usize,
}

impl pulp::WithSimd for Settling<'_> {
    type Output = Rest;

    #[inline(always)]
    fn with_simd<S: Simd>(self, simd: S) -> Rest {
        self.coupling.iterate(simd, self.problem, self.balances, self.minimiser, self.y, self.steps)
    }
}

/// Solves the rows of a system whose last column is the right side, by elimination with pivoting; the solution takes the
/// place of the right side. False when it is singular.
fn eliminate(rows: &mut [f64], count: usize) -> bool {
    let width = count + 1;
    for column in 0..count {
        let Some(best) = (column..count)
            .max_by(|&a, &b| rows[a * width + column].abs().total_cmp(&rows[b * width + column].abs()))
        else {
            return false;
        };
        let pivot = rows[best * width + column];
        if pivot == 0.0 || !pivot.is_finite() {
            return false;
        }
        if best != column {
            for i in column..width {
                rows.swap(best * width + i, column * width + i);
            }
        }
        for i in column..width {
            rows[column * width + i] /= pivot;
        }
        for row in (0..count).filter(|&row| row != column) {
            let factor = rows[row * width + column];
            if factor != 0.0 {
                for i in column..width {
                    rows[row * width + i] -= factor * rows[column * width + i];
                }
            }
        }
    }
    true
}
