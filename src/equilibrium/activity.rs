//! Activity coefficients of ions.

use super::LN_10;
use super::water::debye_huckel_a;
use serde::{Deserialize, Serialize};

/// Which correction for ionic strength is made.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub enum ActivityModel {
    /// Constants are used at the ionic strength they were measured at, H⁺ as activity, no correction.
    AsMeasured,
    /// Davies, J. Chem. Soc. 1938, 2093 with the coefficient 0.3 (Davies, Ion Association, 1962).
    #[default]
    Davies,
}

/// Ionic strength in mol/L above which the Davies bracket is held at its value here, and a flag is raised: the
/// linear term would turn activity coefficients far above one in strong baths.
pub const DAVIES_LIMIT: f64 = 0.5;

/// Coefficient of the linear term of the Davies equation.
const DAVIES_LINEAR: f64 = 0.3;

impl ActivityModel {
    /// Name on screen and paper.
    pub fn name(self) -> &'static str {
        match self {
            ActivityModel::AsMeasured => "as measured",
            ActivityModel::Davies => "Davies",
        }
    }

    /// −ln γ / z² at an ionic strength in mol/L and a temperature in kelvin, and its derivative by ionic strength.
    pub fn ln_gamma_per_charge_squared(self, ionic_strength: f64, temperature_k: f64) -> (f64, f64) {
        self.with_slope(debye_huckel_a(temperature_k), ionic_strength)
    }

    /// As [`Self::ln_gamma_per_charge_squared`] for a given Debye–Hückel slope A (log10, mol/L scale).
    pub(super) fn with_slope(self, a: f64, ionic_strength: f64) -> (f64, f64) {
        match self {
            ActivityModel::AsMeasured => (0.0, 0.0),
            ActivityModel::Davies => {
                let clamped = ionic_strength.clamp(0.0, DAVIES_LIMIT);
                let root = clamped.sqrt();
                let value = a * LN_10 * (root / (1.0 + root) - DAVIES_LINEAR * clamped);
                let slope = if ionic_strength < DAVIES_LIMIT && root > 0.0 {
                    a * LN_10 * (0.5 / (root * (1.0 + root) * (1.0 + root)) - DAVIES_LINEAR)
                } else {
                    0.0
                };
                (value, slope)
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_slope_is_the_derivative_of_the_value() {
        for ionic_strength in [1e-6, 1e-3, 0.05, 0.3, 0.49, 0.8] {
            let h = ionic_strength * 1e-6;
            let at = |i| ActivityModel::Davies.ln_gamma_per_charge_squared(i, 298.15).0;
            let numeric = (at(ionic_strength + h) - at(ionic_strength - h)) / (2.0 * h);
            let (_, slope) = ActivityModel::Davies.ln_gamma_per_charge_squared(ionic_strength, 298.15);
            assert!((numeric - slope).abs() < 1e-5 * slope.abs().max(1e-3), "{ionic_strength}");
        }
    }
}
