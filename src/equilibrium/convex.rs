//! Minimises Φ(y) = Σⱼ exp(kⱼ + νⱼ·y) − T·y, the heart of the solver.
//!
//! Each step solves H d = r with the Hessian H = Σ c ν νᵀ. For Newton's method on Φ the right side is −(S − T);
//! on the logarithms of the totals it is −S ln(S/T), with the same matrix. The logarithmic step is fast from far
//! away, the plain one always descends; the line search works on the slope of Φ, which is convex along any line,
//! so it can't be fooled by rounding.

use super::balances::Balances;
use super::cholesky::Cholesky;
use super::lanes::{Lane, WIDTH, ZERO_LANE, add_scaled, both_sides, dot, exp, larger, multiply};
use pulp::Simd;

/// Relative balance residual at which the iteration is at its end in double precision.
const TOLERANCE: f64 = 1e-14;
/// Residual that still counts as converged when rounding stops the iteration.
const ACCEPTED: f64 = 1e-11;
/// Smallest pivot of the scaled Hessian at which a step is mostly rounding.
const HOPELESS: f64 = 1e-10;
/// Farthest that one step may move an unknown, ln units: farther than any real jump, nearer than underflow.
const FARTHEST: f64 = 100.0;
/// Rise of ln c of a species that no balance bounds, in one step.
const UNBOUNDED_RISE: f64 = 40.0;
/// Relative residual of a start that is orders of magnitude away.
const FAR: f64 = 0.9;
const MAX_STEPS: usize = 400;
const MAX_SWEEPS: usize = 60;

/// How a minimisation ended.
#[derive(Clone, Copy, Debug)]
pub(super) struct Outcome {
    /// Largest |S − T| relative to the sum of the magnitudes in its balance.
    pub residual: f64,
    /// Newton steps taken.
    pub steps: usize,
    /// Smallest pivot of the scaled Hessian in the last factorisation; small when two unknowns are nearly one.
    pub smallest_pivot: f64,
    /// Whether the residual is within tolerance.
    pub converged: bool,
}

/// Buffers of the iteration; kept between calls so that nothing allocates inside it.
#[derive(Clone, Debug, Default)]
pub(super) struct Minimiser {
    /// Concentrations at the current point; zero in the places that fill up the last lane.
    pub c: Vec<Lane>,
    /// Their logarithms.
    pub exponent: Vec<Lane>,
    /// The scaled Hessian's factor.
    pub factor: Cholesky,
    cap: Vec<Lane>,
    caps_known: bool,
    weighted: Vec<Lane>,
    plus: Vec<f64>,
    minus: Vec<f64>,
    step: Vec<f64>,
    trial: Vec<f64>,
}

impl Minimiser {
    /// Makes room for a problem.
    pub fn resize(&mut self, balances: &Balances) {
        let (n, m) = (balances.species_lanes(), balances.live.len());
        for buffer in [&mut self.c, &mut self.exponent, &mut self.cap, &mut self.weighted] {
            buffer.resize(n, ZERO_LANE);
        }
        for buffer in [&mut self.plus, &mut self.minus, &mut self.step, &mut self.trial] {
            buffer.resize(m, 0.0);
        }
        self.factor.resize(m);
    }

    /// Finds the minimum from the start `y`, which is overwritten. Without `patience` it gives up, unconverged, as soon
    /// as two unknowns are one to rounding: the caller can then choose better ones.
    pub fn minimise(&mut self, balances: &Balances, k: &[Lane], y: &mut [f64], patience: bool) -> Outcome {
        pulp::Arch::new().dispatch(Descent { minimiser: self, balances, k, y, patience })
    }

    #[inline(always)]
    fn descend<S: Simd>(
        &mut self,
        simd: S,
        balances: &Balances,
        k: &[Lane],
        y: &mut [f64],
        patience: bool,
    ) -> Outcome {
        self.resize(balances);
        self.caps_known = false;
        let mut outcome =
            Outcome { residual: f64::INFINITY, steps: 0, smallest_pivot: 1.0, converged: false };
        let (mut best, mut idle) = (f64::INFINITY, 0);
        self.evaluate(simd, balances, k, y);
        if self.residual(balances) >= FAR {
            self.approach(simd, balances, k, y);
        }
        while outcome.steps < MAX_STEPS {
            outcome.residual = self.residual(balances);
            idle = if outcome.residual < 0.5 * best { 0 } else { idle + 1 };
            best = best.min(outcome.residual);
            if outcome.residual <= TOLERANCE || (idle >= 3 && outcome.residual <= ACCEPTED) {
                break;
            }
            outcome.steps += 1;
            self.build_hessian(simd, balances);
            outcome.smallest_pivot = self.factor.factorise();
            if !patience && outcome.smallest_pivot < HOPELESS && outcome.residual > ACCEPTED {
                break;
            }
            if !self.search(simd, balances, k, y) {
                break;
            }
        }
        outcome.residual = self.residual(balances);
        outcome.converged = outcome.residual <= ACCEPTED;
        outcome
    }

    /// Brings a start from orders of magnitude away to where Newton's method is at home.
    fn approach<S: Simd>(&mut self, simd: S, balances: &Balances, k: &[Lane], y: &mut [f64]) {
        for _ in 0..MAX_SWEEPS {
            let settled = self.sweep(simd, balances, k, y) < 1.0;
            self.evaluate(simd, balances, k, y);
            if settled || self.residual(balances) < FAR {
                break;
            }
        }
    }

    /// One pass of coordinate steps on the logarithm of each balance. Returns the largest move.
    #[inline(always)]
    fn sweep<S: Simd>(&mut self, simd: S, balances: &Balances, k: &[Lane], y: &mut [f64]) -> f64 {
        let mut largest: f64 = 0.0;
        for (place, &column) in balances.live.iter().enumerate() {
            let entries = balances.column(column);
            let (mut plus, mut minus) = (0.0, 0.0);
            let (mut plus_slope, mut minus_slope) = (0.0, 0.0);
            let (mut highest, mut order) = (f64::NEG_INFINITY, 1.0);
            for (q, entry) in entries.iter().enumerate() {
                if *entry == ZERO_LANE {
                    continue;
                }
                let exponent = exponents(simd, balances, k, y, q);
                let mut c = [ZERO_LANE];
                exp(simd, &[exponent], &mut c);
                let c = c[0];
                for l in 0..WIDTH {
                    if entry[l] > 0.0 && exponent[l] > highest {
                        (highest, order) = (exponent[l], entry[l]);
                    }
                    let part = entry[l] * c[l].min(1e304);
                    if part > 0.0 {
                        plus += part;
                        plus_slope += entry[l] * part;
                    } else {
                        minus -= part;
                        minus_slope += entry[l] * part;
                    }
                }
            }
            let total = balances.totals[column];
            let (above, below) = (plus + (-total).max(0.0), minus + total.max(0.0));
            if plus == 0.0 && total > 0.0 && highest.is_finite() {
                // All its species are below the smallest number: lift the largest to the total.
                let step = (total.ln() - highest) / order;
                y[place] += step;
                largest = largest.max(step.abs());
            } else if above > 0.0 && below > 0.0 && plus_slope + minus_slope > 0.0 {
                let slope = plus_slope / above + minus_slope / below;
                let step = ((below / above).ln() / slope).clamp(-200.0, 200.0);
                y[place] += step;
                largest = largest.max(step.abs());
            }
        }
        largest
    }

    /// Bound of ln c of each species: no species can hold more than the total of a component that nothing
    /// counts negatively.
    #[inline(always)]
    fn find_caps(&mut self, balances: &Balances) {
        self.cap.fill([f64::INFINITY; WIDTH]);
        for &column in &balances.live {
            let entries = balances.column(column);
            let total = balances.totals[column];
            if total <= 0.0 || any_negative(entries) {
                continue;
            }
            let ln_total = total.ln();
            for (cap, entry) in self.cap.iter_mut().zip(entries) {
                for l in 0..WIDTH {
                    let bounded = if cap[l] < ln_total { cap[l] } else { ln_total };
                    cap[l] = if entry[l] > 0.0 { bounded } else { cap[l] };
                }
            }
        }
    }

    /// Exponents, concentrations and both sides of each balance at `y`.
    #[inline(always)]
    pub fn evaluate<S: Simd>(&mut self, simd: S, balances: &Balances, k: &[Lane], y: &[f64]) {
        let Self { exponent, c, plus, minus, .. } = self;
        for (q, exponent) in exponent.iter_mut().enumerate() {
            *exponent = exponents(simd, balances, k, y, q);
        }
        exp(simd, exponent, c);
        for (place, &column) in balances.live.iter().enumerate() {
            (plus[place], minus[place]) =
                both_sides(simd, balances.column(column), c, balances.lanes_of(column));
        }
    }

    /// Largest relative balance residual at the current point.
    #[inline(always)]
    pub fn residual(&self, balances: &Balances) -> f64 {
        let mut worst: f64 = 0.0;
        for (place, &column) in balances.live.iter().enumerate() {
            let total = balances.totals[column];
            let size = self.plus[place] + self.minus[place] + total.abs();
            let gap = (self.plus[place] - self.minus[place] - total).abs();
            if !gap.is_finite() {
                return f64::INFINITY;
            }
            if size > 0.0 {
                worst = worst.max(gap / size);
            }
        }
        worst
    }

    /// S − T of a live unknown at the current point.
    pub fn gap(&self, balances: &Balances, place: usize) -> f64 {
        self.plus[place] - self.minus[place] - balances.totals[balances.live[place]]
    }

    #[inline(always)]
    fn build_hessian<S: Simd>(&mut self, simd: S, balances: &Balances) {
        let Self { c, weighted, factor, .. } = self;
        for (row, &column) in balances.live.iter().enumerate() {
            multiply(simd, weighted, c, balances.column(column));
            let lanes = balances.lanes_of(column);
            for (place, &other) in balances.live[..=row].iter().enumerate() {
                let shared = lanes.and(balances.lanes_of(other));
                factor.set(row, place, dot(simd, weighted, balances.column(other), shared));
            }
        }
    }

    /// Factorises the Hessian at the current point; returns the smallest pivot.
    #[inline(always)]
    pub fn factorise_here<S: Simd>(&mut self, simd: S, balances: &Balances) -> f64 {
        self.build_hessian(simd, balances);
        self.factor.factorise()
    }

    /// Takes one step. Returns false when no step along a descent direction helps any more.
    #[inline(always)]
    fn search<S: Simd>(&mut self, simd: S, balances: &Balances, k: &[Lane], y: &mut [f64]) -> bool {
        let m = balances.live.len();
        let mut slope = 0.0;
        for logarithmic in [true, false] {
            for place in 0..m {
                let total = balances.totals[balances.live[place]];
                let (plus, minus) = (self.plus[place], self.minus[place]);
                let gap = plus - minus - total;
                let (above, below) = (plus + (-total).max(0.0), minus + total.max(0.0));
                self.step[place] =
                    if logarithmic && above > 0.0 && below > 0.0 && gap.abs() > 1e-3 * (above + below) {
                        -plus.max(minus) * (above / below).ln()
                    } else {
                        -gap
                    };
            }
            self.factor.solve(&mut self.step);
            slope = self.slope(balances);
            if slope < 0.0 {
                break;
            }
        }
        if slope.is_nan() || slope >= 0.0 {
            return false;
        }
        let mut length = self.longest_step(simd, balances);
        let mut trial = std::mem::take(&mut self.trial);
        let mut helped = false;
        for _ in 0..80 {
            for ((trial, y), step) in trial.iter_mut().zip(&*y).zip(&self.step) {
                *trial = y + length * step;
            }
            self.evaluate(simd, balances, k, &trial);
            let there = self.slope(balances);
            if there.is_finite() && there <= 0.5 * slope.abs() {
                y.copy_from_slice(&trial);
                helped = true;
                break;
            }
            length *= 0.3;
        }
        self.trial = trial;
        if !helped {
            self.evaluate(simd, balances, k, y);
        }
        helped
    }

    /// Slope of Φ along the step at the current point.
    #[inline(always)]
    fn slope(&self, balances: &Balances) -> f64 {
        (0..balances.live.len()).map(|place| self.gap(balances, place) * self.step[place]).sum()
    }

    /// Full step unless a species would leap past what its components can hold.
    #[inline(always)]
    fn longest_step<S: Simd>(&mut self, simd: S, balances: &Balances) -> f64 {
        let farthest = self.step.iter().fold(0.0f64, |max, step| max.max(step.abs()));
        if farthest * balances.order() <= 1.0 {
            return 1.0;
        }
        if !self.caps_known {
            self.find_caps(balances);
            self.caps_known = true;
        }
        let mut length = if farthest > FARTHEST { FARTHEST / farthest } else { 1.0 };
        let mut shortest = [length; WIDTH];
        for q in 0..balances.species_lanes() {
            let mut rise = [ZERO_LANE];
            for (&column, &step) in balances.live.iter().zip(&self.step) {
                add_scaled(simd, &mut rise, step, &balances.column(column)[q..=q]);
            }
            let rise = rise[0];
            let (cap, exponent) = (&self.cap[q], &self.exponent[q]);
            for l in 0..WIDTH {
                let capped = larger(cap[l] - exponent[l], 0.0) + 2.0;
                let room = if cap[l] < f64::INFINITY { capped } else { UNBOUNDED_RISE };
                let allowed = if rise[l] > 1.0 { room / rise[l] } else { length };
                shortest[l] = if allowed < shortest[l] { allowed } else { shortest[l] };
            }
        }
        for allowed in shortest {
            length = length.min(allowed);
        }
        length
    }
}

/// A minimisation with the widest instructions of the processor at hand.
struct Descent<'a> {
    minimiser: &'a mut Minimiser,
    balances: &'a Balances,
    k: &'a [Lane],
    y: &'a mut [f64],
    patience: bool,
}

impl pulp::WithSimd for Descent<'_> {
    type Output = Outcome;

    #[inline(always)]
    fn with_simd<S: Simd>(self, simd: S) -> Outcome {
        self.minimiser.descend(simd, self.balances, self.k, self.y, self.patience)
    }
}

/// k + Σ ν y of eight species.
#[inline(always)]
fn exponents<S: Simd>(simd: S, balances: &Balances, k: &[Lane], y: &[f64], q: usize) -> Lane {
    let mut exponent = [k[q]];
    for (&column, &y) in balances.live.iter().zip(y) {
        add_scaled(simd, &mut exponent, y, &balances.column(column)[q..=q]);
    }
    exponent[0]
}

#[inline(always)]
fn any_negative(entries: &[Lane]) -> bool {
    let mut least = ZERO_LANE;
    for entry in entries {
        for l in 0..WIDTH {
            least[l] = if entry[l] < least[l] { entry[l] } else { least[l] };
        }
    }
    least.iter().any(|&value| value < 0.0)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::equilibrium::lanes::put;

    #[test]
    fn a_one_to_one_complex_is_found_from_far_away() {
        let mut balances = Balances::new(2, 3, 0);
        for (row, column) in [(0, 0), (1, 1), (2, 0), (2, 1)] {
            balances.set(row, column, 1.0);
        }
        balances.totals = vec![0.01, 0.02];
        balances.survey();
        let mut k = vec![[f64::NEG_INFINITY; WIDTH]];
        for (row, value) in [0.0, 0.0, 18.0 * std::f64::consts::LN_10].into_iter().enumerate() {
            put(&mut k, row, value);
        }
        let mut y = [(0.01f64).ln(), (0.02f64).ln()];
        let mut minimiser = Minimiser::default();
        let outcome = minimiser.minimise(&balances, &k, &mut y, true);
        assert!(outcome.converged, "{outcome:?}");
        assert!((y[0] - (0.01 / (0.01 * 1e18f64)).ln()).abs() < 1e-10, "{}", y[0]);
    }
}
