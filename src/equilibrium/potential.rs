//! The potential of a metal in its bath: Nernst's equation at the activity of its free ion.

use super::GAS_CONSTANT;
use crate::chemistry::Couple;

/// Faraday constant, C/mol (exact, SI 2019).
const FARADAY: f64 = 96_485.332_12;
/// Temperature of standard potentials, K.
const STANDARD_K: f64 = 298.15;

/// Equilibrium potential in V against the standard hydrogen electrode of a metal whose ion has the given ln activity, at
/// a temperature in kelvin: E = E°(T) + (RT/nF) ln a.
pub fn nernst(couple: &Couple, ln_activity: f64, temperature_k: f64) -> f64 {
    let standard = couple.e_v + couple.de_dt_mv * 1e-3 * (temperature_k - STANDARD_K);
    standard + GAS_CONSTANT * temperature_k / (f64::from(couple.electrons) * FARADAY) * ln_activity
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::Potentials;

    /// 59.16 mV for a tenfold activity and one electron at 25 °C: Nernst slope, common practice.
    #[test]
    fn a_tenfold_activity_moves_the_potential_by_the_nernst_slope() {
        for (metal, slope_mv) in [("Ag+", 59.16), ("Cu+2", 29.58), ("Al+3", 19.72)] {
            let couple = Potentials::built_in().couple(metal).unwrap();
            let at = |activity: f64| nernst(couple, activity.ln(), 298.15);
            assert!(((at(1.0) - at(0.1)) * 1e3 - slope_mv).abs() < 0.01, "{metal}");
            assert_eq!(at(1.0), couple.e_v);
        }
    }

    /// Displacement of copper by steel at -0.45 V needs pCu of about 27 (E° 0.340 V; common practice, computed).
    #[test]
    fn steel_at_its_rest_potential_asks_for_a_copper_level_that_no_agent_reaches() {
        let couple = Potentials::built_in().couple("Cu+2").unwrap();
        let p_at = |potential: f64| {
            (couple.e_v - potential)
                / (nernst(couple, 0.0, 298.15) - nernst(couple, -std::f64::consts::LN_10, 298.15))
        };
        assert!((p_at(-0.45) - 26.7).abs() < 0.3);
    }
}
