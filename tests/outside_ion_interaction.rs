//! The ion interaction coefficients against measured mean activity coefficients of strong salt solutions and a pH
//! standard, evaluated by hand: no solver takes part.

mod outside_common;

use bathwright::chemistry::Interactions;
use bathwright::equilibrium::debye_huckel_a_molal;
use outside_common::{close, close_ratio};

/// A √I/(1 + 1.5 √I) at 25 °C.
fn debye(ionic_strength: f64) -> f64 {
    let root = ionic_strength.sqrt();
    debye_huckel_a_molal(298.15) * root / (1.0 + Interactions::built_in().denominator.value * root)
}

fn epsilon(cation: &str, anion: &str) -> f64 {
    Interactions::built_in().epsilon(cation, anion).value
}

/// Mean activity coefficient of a salt of one cation of charge z and z anions of charge −1.
fn mean_gamma(cation: &str, anion: &str, z: f64, molality: f64) -> f64 {
    let ionic_strength = molality * z * (z + 1.0) / 2.0;
    10f64.powf(-z * debye(ionic_strength) + 2.0 * z / (1.0 + z) * epsilon(cation, anion) * molality)
}

/// Compares with a measured coefficient: 0.02 in log γ, the scatter that fits of this model leave, and the published
/// uncertainty of the pair's own coefficient.
fn measured(cation: &str, anion: &str, z: f64, molality: f64, gamma: f64) {
    let sigma = Interactions::built_in().epsilon(cation, anion).sigma;
    let tolerance = 10f64.powf(0.02 + 2.0 * z / (1.0 + z) * sigma * molality) - 1.0;
    let found = mean_gamma(cation, anion, z, molality);
    close_ratio(&format!("{cation} {anion} {molality}"), found, gamma, tolerance);
}

/// 25 °C, mol/kg. NaCl and KCl: data accompanying Li, Chou & Liu, Fluid Phase Equilib. 565 (2023) 113662 and work of
/// the same group (read). The others: CRC Handbook of Chemistry and Physics, 92nd ed., p. 5-106 (read).
#[test]
fn strong_salt_solutions_have_their_measured_mean_activity_coefficients() {
    for (cation, anion, z, molality, gamma) in [
        ("Na+", "Cl-", 1.0, 0.5, 0.681),
        ("Na+", "Cl-", 1.0, 1.0, 0.657),
        ("Na+", "Cl-", 1.0, 2.0, 0.668),
        ("K+", "Cl-", 1.0, 0.5, 0.649),
        ("K+", "Cl-", 1.0, 1.0, 0.604),
        ("K+", "Cl-", 1.0, 2.0, 0.573),
        ("Ag+", "NO3-", 1.0, 0.1, 0.732),
        ("Ag+", "NO3-", 1.0, 0.5, 0.536),
        ("Ca+2", "Cl-", 2.0, 0.1, 0.517),
        ("Ca+2", "Cl-", 2.0, 0.5, 0.444),
        ("Ca+2", "Cl-", 2.0, 1.0, 0.495),
        ("Co+2", "Cl-", 2.0, 0.1, 0.528),
        ("Co+2", "Cl-", 2.0, 0.5, 0.465),
        ("Co+2", "Cl-", 2.0, 1.0, 0.532),
        ("Co+2", "NO3-", 2.0, 0.1, 0.516),
        ("Co+2", "NO3-", 2.0, 0.5, 0.446),
        ("Cd+2", "NO3-", 2.0, 0.1, 0.515),
        ("Cd+2", "NO3-", 2.0, 0.5, 0.428),
        ("Cd+2", "NO3-", 2.0, 1.0, 0.437),
        ("Ba+2", "Cl-", 2.0, 0.1, 0.492),
        ("Ba+2", "Cl-", 2.0, 1.0, 0.393),
    ] {
        measured(cation, anion, z, molality, gamma);
    }
}

/// Robinson & Stokes, Electrolyte Solutions, 2nd ed., Appendix 8.10, 25 °C, 1 mol/kg (from memory): HCl 0.809, NaOH
/// 0.678, KOH 0.756, KNO3 0.443, NaNO3 0.548, NH4Cl 0.603, NiCl2 0.536, MgCl2 0.570.
#[test]
fn coefficients_of_bath_salts_agree_with_recalled_tables() {
    for (cation, anion, z, gamma) in [
        ("H+", "Cl-", 1.0, 0.809),
        ("Na+", "OH-", 1.0, 0.678),
        ("K+", "OH-", 1.0, 0.756),
        ("K+", "NO3-", 1.0, 0.443),
        ("Na+", "NO3-", 1.0, 0.548),
        ("NH4+", "Cl-", 1.0, 0.603),
        ("Ni+2", "Cl-", 2.0, 0.536),
        ("Mg+2", "Cl-", 2.0, 0.570),
    ] {
        measured(cation, anion, z, 1.0, gamma);
    }
}

/// Sodium carbonate standard of 0.025 mol/kg each, pH 10.012 (Bates, Determination of pH, 1973; from memory): the
/// published coefficients already hold the pair NaCO3⁻, so without it the standard comes out.
#[test]
fn the_carbonate_standard_comes_out_when_sodium_pairs_are_not_counted_twice() {
    assert!(Interactions::built_in().contained_species().any(|pair| pair == "NaCO3-"));
    let (carbonate, sodium, ionic_strength) = (0.025, 0.075, 0.1);
    let gamma_log = |anion: &str, z: f64| -z * z * debye(ionic_strength) + epsilon("Na+", anion) * sodium;
    let hydrolysis: f64 = 2e-4; // carbonate + water gives as much bicarbonate and hydroxide
    let ratio = ((carbonate - hydrolysis) / (carbonate + hydrolysis)).log10();
    let ph = 10.329 + ratio + gamma_log("CO3-2", 2.0) - gamma_log("HCO3-", 1.0);
    close("carbonate at 25 C", ph, 10.012, 0.03);
}
