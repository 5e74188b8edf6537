//! A plain dense Newton iteration on the logarithms of the balances: what one writes first, and the yardstick of the
//! solver's speed. Dense stoichiometry, `f64::exp`, general LU, a limit on the step, nothing else.

use super::systems::Case;
use nalgebra::{DMatrix, DVector};

const MAX_STEPS: usize = 200;
const LONGEST: f64 = 4.0;
const TOLERANCE: f64 = 1e-12;

pub struct Yardstick {
    stoichiometry: DMatrix<f64>,
    ln_beta: Vec<f64>,
}

impl Yardstick {
    pub fn new(case: &Case) -> Self {
        let (n, m) = (case.system.species.len(), case.system.components.len());
        let mut stoichiometry = DMatrix::zeros(n, m);
        for (j, species) in case.system.species.iter().enumerate() {
            for &(i, nu) in &species.components {
                stoichiometry[(j, i)] = nu;
            }
        }
        Self { stoichiometry, ln_beta: case.constants.ln_beta.clone() }
    }

    /// A start as one would choose it: every component free, hydrogen at pH 7.
    pub fn start(case: &Case) -> DVector<f64> {
        DVector::from_iterator(
            case.totals.len(),
            case.totals.iter().enumerate().map(|(i, total)| if i == 0 { 1e-7f64.ln() } else { total.ln() }),
        )
    }

    /// Whether the balances were met; `x` is overwritten.
    pub fn solve(&self, totals: &[f64], x: &mut DVector<f64>) -> bool {
        let (n, m) = self.stoichiometry.shape();
        let mut jacobian = DMatrix::zeros(m, m);
        let mut residual = DVector::zeros(m);
        let (mut above, mut below) = (vec![0.0; m], vec![0.0; m]);
        let (mut above_slope, mut below_slope) = (DMatrix::zeros(m, m), DMatrix::zeros(m, m));
        for _ in 0..MAX_STEPS {
            let exponents = &self.stoichiometry * &*x;
            for i in 0..m {
                above[i] = (-totals[i]).max(0.0);
                below[i] = totals[i].max(0.0);
            }
            above_slope.fill(0.0);
            below_slope.fill(0.0);
            for j in 0..n {
                let c = (self.ln_beta[j] + exponents[j]).exp();
                for i in 0..m {
                    let nu = self.stoichiometry[(j, i)];
                    if nu == 0.0 {
                        continue;
                    }
                    let (side, slope, part) = if nu > 0.0 {
                        (&mut above[i], &mut above_slope, nu * c)
                    } else {
                        (&mut below[i], &mut below_slope, -nu * c)
                    };
                    *side += part;
                    for k in 0..m {
                        slope[(i, k)] += part * self.stoichiometry[(j, k)];
                    }
                }
            }
            let mut worst: f64 = 0.0;
            for i in 0..m {
                residual[i] = (above[i] / below[i]).ln();
                worst = worst.max((above[i] - below[i]).abs() / (above[i] + below[i]));
                for k in 0..m {
                    jacobian[(i, k)] = above_slope[(i, k)] / above[i] - below_slope[(i, k)] / below[i];
                }
            }
            if worst <= TOLERANCE {
                return true;
            }
            let Some(step) = jacobian.clone().lu().solve(&residual) else { return false };
            let longest = step.amax();
            if !longest.is_finite() {
                return false;
            }
            x.axpy(-(LONGEST / longest).min(1.0), &step, 1.0);
        }
        false
    }
}
