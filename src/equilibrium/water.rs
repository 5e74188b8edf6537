//! Water between 0 and 100 °C: density, static permittivity, ion product and Debye–Hückel slope.

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
/// A = e³ √(2 N) / (ln 10 · 8π (ε₀ ε k T)^{3/2}) · √(1000 L/m³): Debye & Hückel, Phys. Z. 24 (1923) 185, with the
/// constants of CODATA 2018.
pub fn debye_huckel_a(temperature_k: f64) -> f64 {
    let thermal = VACUUM_PERMITTIVITY * permittivity(temperature_k) * BOLTZMANN * temperature_k;
    let charge = ELEMENTARY_CHARGE.powi(3) * (2.0 * AVOGADRO * LITRES_PER_CUBIC_METRE).sqrt();
    charge / (std::f64::consts::LN_10 * 8.0 * std::f64::consts::PI * thermal.powf(1.5))
}

/// The same slope for I in mol/kg of water.
pub fn debye_huckel_a_molal(temperature_k: f64) -> f64 {
    debye_huckel_a(temperature_k) * density_kg_l(temperature_k).sqrt()
}

/// Density of water in kg/L at a temperature in kelvin, 0.1 MPa: Kell, J. Chem. Eng. Data 20 (1975) 97, eq. 16
/// (from memory; within 1.5e−5 of IAPWS-95 over the whole range).
pub fn density_kg_l(temperature_k: f64) -> f64 {
    let t = celsius(temperature_k);
    let above = 999.839_52
        + t * (16.945_176
            + t * (-7.987_040_1e-3 + t * (-46.170_461e-6 + t * (105.563_02e-9 - t * 280.542_53e-12))));
    above / (1.0 + 16.879_850e-3 * t) / 1000.0
}

/// Static permittivity of water relative to vacuum at a temperature in kelvin, 0.1 MPa.
///
/// Fit within 2e−3 between 0 and 100 °C to IAPWS R8-97; Fernández et al., J. Phys. Chem. Ref. Data 26 (1997) 1125.
pub fn permittivity(temperature_k: f64) -> f64 {
    let t = celsius(temperature_k);
    87.901_337_7 + t * (-0.401_512_992 + t * (9.082_484_15e-4 + t * (-1.574_426_91e-6 + t * 2.698_352_48e-9)))
}

/// C.
const ELEMENTARY_CHARGE: f64 = 1.602_176_634e-19;
/// 1/mol.
const AVOGADRO: f64 = 6.022_140_76e23;
/// J/K.
const BOLTZMANN: f64 = 1.380_649e-23;
/// F/m.
const VACUUM_PERMITTIVITY: f64 = 8.854_187_812_8e-12;
const LITRES_PER_CUBIC_METRE: f64 = 1000.0;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::kelvin;

    /// °C, density in kg/m³ (IAPWS-95), static permittivity (IAPWS R8-97), log10 Kw (IAPWS R11-07), molal and molar A
    /// computed from those with the constants of CODATA; 0.1 MPa, at 100 °C the vapour pressure.
    const PUBLISHED: [(f64, f64, f64, f64, f64, f64); 21] = [
        (0.0, 999.843, 87.903, -14.9465, 0.49043, 0.49046),
        (5.0, 999.966, 85.915, -14.7341, 0.49395, 0.49396),
        (10.0, 999.702, 83.974, -14.5336, 0.49763, 0.49771),
        (15.0, 999.102, 82.077, -14.3440, 0.50149, 0.50171),
        (20.0, 998.207, 80.223, -14.1645, 0.50553, 0.50599),
        (25.0, 997.047, 78.408, -13.9944, 0.50978, 0.51053),
        (30.0, 995.649, 76.634, -13.8330, 0.51422, 0.51535),
        (35.0, 994.033, 74.898, -13.6798, 0.51888, 0.52044),
        (40.0, 992.216, 73.201, -13.5343, 0.52375, 0.52580),
        (45.0, 990.212, 71.540, -13.3961, 0.52882, 0.53143),
        (50.0, 988.034, 69.916, -13.2646, 0.53411, 0.53734),
        (55.0, 985.693, 68.328, -13.1396, 0.53962, 0.54352),
        (60.0, 983.195, 66.774, -13.0206, 0.54533, 0.54997),
        (65.0, 980.550, 65.256, -12.9074, 0.55127, 0.55671),
        (70.0, 977.764, 63.770, -12.7997, 0.55742, 0.56372),
        (75.0, 974.842, 62.318, -12.6971, 0.56379, 0.57102),
        (80.0, 971.790, 60.898, -12.5995, 0.57038, 0.57860),
        (85.0, 968.611, 59.509, -12.5065, 0.57719, 0.58646),
        (90.0, 965.309, 58.152, -12.4181, 0.58422, 0.59463),
        (95.0, 961.887, 56.825, -12.3339, 0.59148, 0.60308),
        (100.0, 958.349, 55.527, -12.2538, 0.59897, 0.61184),
    ];

    #[test]
    fn density_and_permittivity_follow_the_published_formulations() {
        for (t, density, epsilon, ..) in PUBLISHED {
            let t_k = kelvin(t);
            assert!((density_kg_l(t_k) * 1000.0 - density).abs() < 0.02, "{t}: {}", density_kg_l(t_k));
            assert!((permittivity(t_k) - epsilon).abs() < 0.003, "{t}: {}", permittivity(t_k));
        }
    }

    #[test]
    fn both_slopes_are_those_of_the_formula() {
        for (t, _, _, _, molal, molar) in PUBLISHED {
            assert!((debye_huckel_a(kelvin(t)) - molar).abs() < 3e-5, "{t}: {}", debye_huckel_a(kelvin(t)));
            let found = debye_huckel_a_molal(kelvin(t));
            assert!((found - molal).abs() < 3e-5, "{t}: {found}");
        }
    }

    #[test]
    fn the_ion_product_follows_its_formulation_at_every_temperature() {
        for (t, _, _, log_kw, ..) in PUBLISHED {
            assert!((log10_kw(kelvin(t)) - log_kw).abs() < 1e-3, "{t}: {}", log10_kw(kelvin(t)));
        }
    }

    /// NEA Thermochemical Database, Appendix B, Table B-2 (from memory): an older permittivity, 2e−3 apart at most.
    #[test]
    fn the_molal_slope_agrees_with_the_table_used_for_ion_interaction() {
        for (t, a) in [(0.0, 0.4913), (25.0, 0.5091), (50.0, 0.5336), (75.0, 0.5639), (100.0, 0.5998)] {
            assert!((debye_huckel_a_molal(kelvin(t)) - a).abs() < 2e-3, "{t}");
        }
    }
}
