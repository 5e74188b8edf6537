//! Minimises Φ(y) = Σⱼ exp(kⱼ + νⱼ·y) − T·y, the heart of the solver.
//!
//! Each step solves H d = r with the Hessian H = Σ c ν νᵀ. For Newton's method on Φ the right side is −(S − T);
//! on the logarithms of the totals it is −S ln(S/T), with the same matrix. The logarithmic step is fast from far
//! away, the plain one always descends; the line search works on the slope of Φ, which is convex along any line,
//! so it can't be fooled by rounding.

use super::reduced::Sparse;

/// Relative balance residual at which the iteration is at its end in double precision.
const TOLERANCE: f64 = 1e-14;
/// Residual that still counts as converged when rounding stops the iteration.
const ACCEPTED: f64 = 1e-11;
/// Smallest pivot of the scaled Hessian at which a step is mostly rounding.
const HOPELESS: f64 = 1e-10;
/// Farthest that one step may move an unknown, ln units: farther than any real jump, nearer than underflow.
const FARTHEST: f64 = 100.0;
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
    /// Concentrations at the current point.
    pub c: Vec<f64>,
    exponent: Vec<f64>,
    exponent_step: Vec<f64>,
    cap: Vec<f64>,
    plus: Vec<f64>,
    minus: Vec<f64>,
    hessian: Vec<f64>,
    scale: Vec<f64>,
    rhs: Vec<f64>,
    step: Vec<f64>,
    trial: Vec<f64>,
}

impl Minimiser {
    fn resize(&mut self, sparse: &Sparse) {
        let (n, m) = (sparse.rows(), sparse.columns);
        for (buffer, size) in [
            (&mut self.c, n),
            (&mut self.exponent, n),
            (&mut self.exponent_step, n),
            (&mut self.cap, n),
            (&mut self.plus, m),
            (&mut self.minus, m),
            (&mut self.hessian, m * m),
            (&mut self.scale, m),
            (&mut self.rhs, m),
            (&mut self.step, m),
            (&mut self.trial, m),
        ] {
            buffer.resize(size, 0.0);
        }
    }

    /// Finds the minimum from the start `y`, which is overwritten. Without `patience` it gives up, unconverged, as soon
    /// as two unknowns are one to rounding: the caller can then choose better ones.
    pub fn minimise(&mut self, sparse: &Sparse, k: &[f64], y: &mut [f64], patience: bool) -> Outcome {
        self.resize(sparse);
        self.find_caps(sparse);
        let mut outcome =
            Outcome { residual: f64::INFINITY, steps: 0, smallest_pivot: 1.0, converged: false };
        let (mut best, mut idle) = (f64::INFINITY, 0);
        self.evaluate(sparse, k, y);
        while outcome.steps < MAX_STEPS {
            outcome.residual = self.residual(sparse);
            idle = if outcome.residual < 0.5 * best { 0 } else { idle + 1 };
            best = best.min(outcome.residual);
            if outcome.residual <= TOLERANCE || (idle >= 3 && outcome.residual <= ACCEPTED) {
                break;
            }
            outcome.steps += 1;
            self.build_hessian(sparse);
            outcome.smallest_pivot = self.factorise(sparse.columns);
            if !patience && outcome.smallest_pivot < HOPELESS && outcome.residual > ACCEPTED {
                break;
            }
            if !self.search(sparse, k, y) {
                break;
            }
        }
        outcome.residual = self.residual(sparse);
        outcome.converged = outcome.residual <= ACCEPTED;
        outcome
    }

    /// Brings a start from orders of magnitude away to where Newton's method is at home; leaves a good one alone.
    pub fn approach(&mut self, sparse: &Sparse, k: &[f64], y: &mut [f64]) {
        self.resize(sparse);
        for _ in 0..MAX_SWEEPS {
            self.evaluate(sparse, k, y);
            if self.residual(sparse) < 0.9 || self.sweep(sparse, k, y) < 1.0 {
                break;
            }
        }
    }

    /// One pass of coordinate steps on the logarithm of each balance. Returns the largest move.
    fn sweep(&mut self, sparse: &Sparse, k: &[f64], y: &mut [f64]) -> f64 {
        let mut largest: f64 = 0.0;
        for i in 0..sparse.columns {
            let (mut plus, mut minus) = (0.0, 0.0);
            let (mut plus_slope, mut minus_slope) = (0.0, 0.0);
            let (mut highest, mut order) = (f64::NEG_INFINITY, 1.0);
            for (j, k) in k.iter().enumerate() {
                let (columns, values) = sparse.row(j);
                let Some(at) = columns.iter().position(|&column| column as usize == i) else { continue };
                let exponent = k + sparse.dot(j, y);
                if values[at] > 0.0 && exponent > highest {
                    (highest, order) = (exponent, values[at]);
                }
                let part = values[at] * exponent.min(700.0).exp();
                if part > 0.0 {
                    plus += part;
                    plus_slope += values[at] * part;
                } else {
                    minus -= part;
                    minus_slope += values[at] * part;
                }
            }
            let total = sparse.totals[i];
            let (above, below) = (plus + (-total).max(0.0), minus + total.max(0.0));
            if plus == 0.0 && total > 0.0 && highest.is_finite() {
                // All its species are below the smallest number: lift the largest to the total.
                let step = (total.ln() - highest) / order;
                y[i] += step;
                largest = largest.max(step.abs());
            } else if above > 0.0 && below > 0.0 && plus_slope + minus_slope > 0.0 {
                let slope = plus_slope / above + minus_slope / below;
                let step = ((below / above).ln() / slope).clamp(-200.0, 200.0);
                y[i] += step;
                largest = largest.max(step.abs());
            }
        }
        largest
    }

    /// Bound of ln c of each species: no species can hold more than the total of a component that nothing
    /// counts negatively.
    fn find_caps(&mut self, sparse: &Sparse) {
        self.minus.fill(0.0);
        for j in 0..sparse.rows() {
            let (columns, values) = sparse.row(j);
            for (&column, &value) in columns.iter().zip(values) {
                if value < 0.0 {
                    self.minus[column as usize] = 1.0;
                }
            }
        }
        for j in 0..sparse.rows() {
            let (columns, values) = sparse.row(j);
            let mut cap = f64::INFINITY;
            for (&column, &value) in columns.iter().zip(values) {
                let total = sparse.totals[column as usize];
                if self.minus[column as usize] == 0.0 && total > 0.0 {
                    cap = cap.min(total / value);
                }
            }
            self.cap[j] = cap.ln();
        }
    }

    /// Exponents, concentrations and both sides of each balance at `y`.
    fn evaluate(&mut self, sparse: &Sparse, k: &[f64], y: &[f64]) {
        for (j, exponent) in self.exponent.iter_mut().enumerate() {
            *exponent = k[j] + sparse.dot(j, y);
        }
        for (c, exponent) in self.c.iter_mut().zip(&self.exponent) {
            *c = exponent.exp();
        }
        self.sum(sparse);
    }

    fn sum(&mut self, sparse: &Sparse) {
        self.plus.fill(0.0);
        self.minus.fill(0.0);
        for (j, &c) in self.c.iter().enumerate() {
            let (columns, values) = sparse.row(j);
            for (&column, &value) in columns.iter().zip(values) {
                let part = value * c;
                if part > 0.0 {
                    self.plus[column as usize] += part;
                } else {
                    self.minus[column as usize] -= part;
                }
            }
        }
    }

    fn residual(&self, sparse: &Sparse) -> f64 {
        let mut worst: f64 = 0.0;
        for (i, &total) in sparse.totals.iter().enumerate() {
            let size = self.plus[i] + self.minus[i] + total.abs();
            let gap = (self.plus[i] - self.minus[i] - total).abs();
            if size > 0.0 {
                worst = worst.max(gap / size);
            }
            if !gap.is_finite() {
                return f64::INFINITY;
            }
        }
        worst
    }

    fn build_hessian(&mut self, sparse: &Sparse) {
        let m = sparse.columns;
        self.hessian.fill(0.0);
        for (j, &c) in self.c.iter().enumerate() {
            let (columns, values) = sparse.row(j);
            for (a, (&row, &left)) in columns.iter().zip(values).enumerate() {
                let part = c * left;
                for (&column, &right) in columns[..=a].iter().zip(values) {
                    self.hessian[row as usize * m + column as usize] += part * right;
                }
            }
        }
    }

    /// In-place Cholesky of the Hessian scaled to a unit diagonal; pivots that rounding has eaten are lifted, which
    /// only shortens the step. Returns the smallest pivot met.
    fn factorise(&mut self, m: usize) -> f64 {
        for i in 0..m {
            let diagonal = self.hessian[i * m + i];
            self.scale[i] = if diagonal > 0.0 { 1.0 / diagonal.sqrt() } else { 0.0 };
        }
        let mut smallest: f64 = 1.0;
        for i in 0..m {
            for j in 0..=i {
                let mut value = self.hessian[i * m + j] * self.scale[i] * self.scale[j];
                for l in 0..j {
                    value -= self.hessian[i * m + l] * self.hessian[j * m + l];
                }
                if i == j {
                    smallest = smallest.min(value);
                    self.hessian[i * m + i] = value.max(1e-15).sqrt();
                } else {
                    self.hessian[i * m + j] = value / self.hessian[j * m + j];
                }
            }
        }
        smallest
    }

    /// Solves H x = b with the factor at hand; `b` becomes x.
    pub fn solve(&self, m: usize, b: &mut [f64]) {
        let row = |i: usize| &self.hessian[i * m..i * m + i + 1];
        for i in 0..m {
            let known: f64 = row(i).iter().zip(&b[..i]).map(|(factor, b)| factor * b).sum();
            b[i] = (b[i] * self.scale[i] - known) / row(i)[i];
        }
        for i in (0..m).rev() {
            let known: f64 = (i + 1..m).map(|l| self.hessian[l * m + i] * b[l]).sum();
            b[i] = (b[i] - known) / row(i)[i];
        }
        for (b, scale) in b.iter_mut().zip(&self.scale) {
            *b *= scale;
        }
    }

    /// Factorises the Hessian at the current point, for sensitivities.
    pub fn factorise_here(&mut self, sparse: &Sparse) {
        self.build_hessian(sparse);
        self.factorise(sparse.columns);
    }

    /// Takes one step. Returns false when no step along a descent direction helps any more.
    fn search(&mut self, sparse: &Sparse, k: &[f64], y: &mut [f64]) -> bool {
        let m = sparse.columns;
        let mut slope = 0.0;
        for logarithmic in [true, false] {
            for i in 0..m {
                let total = sparse.totals[i];
                let gap = self.plus[i] - self.minus[i] - total;
                let (above, below) = (self.plus[i] + (-total).max(0.0), self.minus[i] + total.max(0.0));
                let weight = self.plus[i].max(self.minus[i]);
                self.rhs[i] =
                    if logarithmic && above > 0.0 && below > 0.0 && gap.abs() > 1e-3 * (above + below) {
                        -weight * (above / below).ln()
                    } else {
                        -gap
                    };
            }
            self.step.copy_from_slice(&self.rhs);
            let mut step = std::mem::take(&mut self.step);
            self.solve(m, &mut step);
            self.step = step;
            slope = (0..m).map(|i| (self.plus[i] - self.minus[i] - sparse.totals[i]) * self.step[i]).sum();
            if slope < 0.0 {
                break;
            }
        }
        if slope.is_nan() || slope >= 0.0 {
            return false;
        }
        let mut length = self.longest_step(sparse);
        for _ in 0..80 {
            for ((trial, y), step) in self.trial.iter_mut().zip(&*y).zip(&self.step) {
                *trial = y + length * step;
            }
            let trial = std::mem::take(&mut self.trial);
            self.evaluate(sparse, k, &trial);
            self.trial = trial;
            let there: f64 =
                (0..m).map(|i| (self.plus[i] - self.minus[i] - sparse.totals[i]) * self.step[i]).sum();
            if there.is_finite() && there <= 0.5 * slope.abs() {
                y.copy_from_slice(&self.trial);
                return true;
            }
            length *= 0.3;
        }
        self.evaluate(sparse, k, y);
        false
    }

    /// Full step unless a species would leap past what its components can hold.
    fn longest_step(&mut self, sparse: &Sparse) -> f64 {
        let farthest = self.step.iter().fold(0.0f64, |max, step| max.max(step.abs()));
        let mut length = if farthest > FARTHEST { FARTHEST / farthest } else { 1.0 };
        for j in 0..sparse.rows() {
            let rise = sparse.dot(j, &self.step);
            self.exponent_step[j] = rise;
            if rise > 1.0 {
                let room = if self.cap[j].is_finite() {
                    (self.cap[j] - self.exponent[j]).max(0.0) + 2.0
                } else {
                    40.0
                };
                length = length.min(room / rise);
            }
        }
        length
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::equilibrium::reduced::Reduced;

    #[test]
    fn a_one_to_one_complex_is_found_from_far_away() {
        let mut reduced = Reduced::new(2, 3, 0);
        for (row, column) in [(0, 0), (1, 1), (2, 0), (2, 1), (3, 0), (3, 1)] {
            reduced.set(row, column, if row == 3 { [0.01, 0.02][column] } else { 1.0 });
        }
        let sparse = reduced.sparse();
        let k = [0.0, 0.0, 18.0 * std::f64::consts::LN_10];
        let mut y = [(0.01f64).ln(), (0.02f64).ln()];
        let mut minimiser = Minimiser::default();
        minimiser.approach(&sparse, &k, &mut y);
        let outcome = minimiser.minimise(&sparse, &k, &mut y, true);
        assert!(outcome.converged, "{outcome:?}");
        assert!((y[0] - (0.01 / (0.01 * 1e18f64)).ln()).abs() < 1e-10, "{}", y[0]);
    }
}
