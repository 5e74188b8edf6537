//! Proof that a result is the equilibrium, computed from the original balances and not from the solver's own.

/// What was left over in the equations.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Certificate {
    /// Largest |Σ ν c + Σ ν n − T| of a balance, relative to the sum of the magnitudes in it.
    pub balance_residual: f64,
    /// Largest violation of amount ≥ 0, saturation ≤ 1, product 0 over all solids that may form (ln units for
    /// the saturation, share of the total for the amounts).
    pub kkt_residual: f64,
    /// |s(c) − s| relative to I: the ionic strength and interaction sums of the result against those that its activity
    /// coefficients were taken at.
    pub activity_residual: f64,
    /// Newton steps over all stages.
    pub iterations: usize,
}

impl Certificate {
    /// Whether all residuals are within the promise: balances 1e−10, conditions of solids 1e−9.
    pub fn holds(&self) -> bool {
        self.balance_residual <= 1e-10 && self.kkt_residual <= 1e-9 && self.activity_residual <= 1e-10
    }
}
