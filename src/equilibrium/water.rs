//! Water: its ion product and its Debye–Hückel slope between 0 and 100 °C.

use crate::quantity::celsius;

/// log10 of the ion product of water (molal standard state) at a temperature in kelvin, 0.1 MPa.
///
/// Fit within 8e−4 between 0 and 100 °C to IAPWS R11-07 (2007); Bandura & Lvov, J. Phys. Chem. Ref. Data 35
/// (2006) 15.
pub fn log10_kw(temperature_k: f64) -> f64 {
    let t = temperature_k;
    129.119_862 - 7830.8087 / t - 49.249_653_6 * t.log10() + 0.016_821_619_1 * t
}

/// Debye–Hückel slope A in log10 γ = −A z² √I/(1 + √I), I in mol/L, at a temperature in kelvin.
///
/// Fit within 2e−5 between 0 and 100 °C to A = e³√(2 N ρ)/(ln 10 · 8π (ε k T)^{3/2}) with density from IAPWS-95
/// and static permittivity from IAPWS R8-97.
pub fn debye_huckel_a(temperature_k: f64) -> f64 {
    let t = celsius(temperature_k);
    0.490_463 + t * (6.7163e-4 + t * (5.2062e-6 + t * 2.136e-9))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::kelvin;

    /// IAPWS R11-07 (2007) at 0.1 MPa; A from IAPWS-95 and R8-97 (computed).
    #[test]
    fn ion_product_and_slope_follow_the_published_formulations() {
        for (t, log_kw, a) in [
            (0.0, -14.9465, 0.49046),
            (25.0, -13.9944, 0.51053),
            (60.0, -13.0206, 0.54997),
            (80.0, -12.5995, 0.57860),
            (100.0, -12.2538, 0.61184),
        ] {
            assert!((log10_kw(kelvin(t)) - log_kw).abs() < 1e-3, "{t}");
            assert!((debye_huckel_a(kelvin(t)) - a).abs() < 5e-5, "{t}");
        }
    }
}
