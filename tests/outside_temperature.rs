//! The library's constants away from 25 °C, against published functions and tables of temperature.
//!
//! Tolerances are in log10 K. "Read" means the source's text or abstract was seen, else the numbers are from memory.

use bathwright::chemistry::{Library, Reaction};
use bathwright::equilibrium::{ActivityModel, ConstantModel, LN_10};
use bathwright::quantity::kelvin;

/// log10 of one published constant of the library, moved to a temperature.
fn moved(constant: usize, temperature_c: f64) -> f64 {
    let constant = &Library::built_in().constants[constant];
    let water = constant.record.reaction == "H2O = H+ + OH-";
    let model = ConstantModel::new(&constant.record, &constant.reaction, water);
    model.ln_k_at(kelvin(temperature_c), ActivityModel::Davies) / LN_10
}

/// log10 K of any reaction among species, gases and solids of the library, at infinite dilution.
fn log_k(reaction: &str, temperature_c: f64) -> f64 {
    let library = Library::built_in();
    let chain = |terms: &std::collections::BTreeMap<usize, f64>| -> f64 {
        terms.iter().map(|(&constant, &times)| times * moved(constant, temperature_c)).sum()
    };
    let reaction = Reaction::parse(reaction).unwrap();
    let terms = reaction.solutes().map(|(token, count)| {
        if let Some(solid) = library.solids.iter().find(|solid| solid.record.token == token) {
            return -count * chain(&solid.dissolution.chain);
        }
        let formation = library.formation(token).unwrap_or_else(|| panic!("no {token}"));
        count * chain(&formation.chain)
    });
    terms.sum()
}

/// Compares with a published function of the temperature in kelvin.
fn follows(reaction: &str, temperatures_c: &[f64], tolerance: f64, published: impl Fn(f64) -> f64) {
    let table: Vec<(f64, f64)> = temperatures_c.iter().map(|&t| (t, published(kelvin(t)))).collect();
    tabulated(reaction, tolerance, &table);
}

/// Compares with a published table of (°C, log10 K).
fn tabulated(reaction: &str, tolerance: f64, table: &[(f64, f64)]) {
    for &(t, published) in table {
        let found = log_k(reaction, t);
        println!("{reaction} at {t} °C: {found:.4} against {published:.4}, off by {:+.4}", found - published);
        assert!((found - published).abs() <= tolerance, "{reaction} at {t} °C: {found} against {published}");
    }
}

/// Plummer & Busenberg, Geochim. Cosmochim. Acta 46 (1982) 1011, abstract (read).
#[test]
fn carbonic_acid_follows_its_measured_functions_from_0_to_90_degrees() {
    let temperatures = [0.0, 10.0, 40.0, 60.0, 90.0];
    follows("CO2(aq) + H2O = H+ + HCO3-", &temperatures, 0.02, |t| {
        -356.3094 - 0.060_919_64 * t + 21_834.37 / t + 126.8339 * t.log10() - 1_684_915.0 / (t * t)
    });
    follows("HCO3- = H+ + CO3-2", &temperatures, 0.02, |t| {
        -107.8871 - 0.032_528_49 * t + 5151.79 / t + 38.925_61 * t.log10() - 563_713.9 / (t * t)
    });
}

/// The same abstract (read).
#[test]
fn calcite_and_vaterite_follow_their_measured_solubility_from_0_to_90_degrees() {
    let temperatures = [0.0, 10.0, 40.0, 60.0, 90.0];
    follows("CaCO3(cr) = Ca+2 + CO3-2", &temperatures, 0.03, |t| {
        -171.9065 - 0.077_993 * t + 2839.319 / t + 71.595 * t.log10()
    });
    follows("CaCO3(s) = Ca+2 + CO3-2", &temperatures, 0.03, |t| {
        -172.1295 - 0.077_993 * t + 3074.688 / t + 71.595 * t.log10()
    });
}

/// The same abstract (read): ± 0.14 and ± 0.07.
#[test]
fn calcium_pairs_with_carbonate_as_measured_from_5_to_80_degrees() {
    let temperatures = [5.0, 15.0, 40.0, 60.0, 80.0];
    follows("Ca+2 + CO3-2 = CaCO3(aq)", &temperatures, 0.05, |t| {
        -1228.732 - 0.299_444 * t + 35_512.75 / t + 485.818 * t.log10()
    });
    follows("Ca+2 + HCO3- = CaHCO3+", &temperatures, 0.06, |t| {
        1209.12 + 0.312_94 * t - 34_765.05 / t - 478.782 * t.log10()
    });
}

/// R. G. Bates & G. D. Pinching, J. Res. NBS 42 (1949) 419 (from memory).
#[test]
fn ammonium_follows_its_table_from_0_to_50_degrees() {
    tabulated(
        "NH4+ = H+ + NH3",
        0.02,
        &[(0.0, -10.081), (10.0, -9.731), (20.0, -9.400), (30.0, -9.093), (40.0, -8.805), (50.0, -8.539)],
    );
}

/// A. G. Dickson, Deep-Sea Res. 37 (1990) 755, at zero salinity (function read in a description of sea-water
/// chemistry).
#[test]
fn boric_acid_follows_its_function_from_5_to_45_degrees() {
    follows("H3BO3 + H2O = H+ + B(OH)4-", &[5.0, 15.0, 35.0, 45.0], 0.02, |t| {
        (148.0248 - 8966.9 / t - 24.4344 * t.ln()) / LN_10
    });
}

/// H. S. Harned & R. W. Ehlers, J. Am. Chem. Soc. 55 (1933) 652 (from memory).
#[test]
fn acetic_acid_follows_its_table_from_0_to_60_degrees() {
    tabulated(
        "H(OAc) = H+ + OAc-",
        0.01,
        &[
            (0.0, -4.7807),
            (10.0, -4.7622),
            (20.0, -4.7562),
            (40.0, -4.7687),
            (50.0, -4.7870),
            (60.0, -4.8119),
        ],
    );
}

/// R. G. Bates & S. F. Acree, J. Res. NBS 34 (1945) 373 (from memory).
#[test]
fn dihydrogen_phosphate_follows_its_table_from_0_to_60_degrees() {
    tabulated(
        "H2PO4- = H+ + HPO4-2",
        0.01,
        &[
            (0.0, -7.3131),
            (10.0, -7.2537),
            (20.0, -7.2130),
            (40.0, -7.1809),
            (50.0, -7.1831),
            (60.0, -7.1944),
        ],
    );
}

/// A. G. Dickson, J. Chem. Thermodyn. 22 (1990) 113, at zero salinity (function read as above); A. G. Dickson et al.,
/// J. Phys. Chem. 94 (1990) 7978, to 250 °C (from memory).
#[test]
fn hydrogen_sulfate_follows_its_functions() {
    follows("HSO4- = H+ + SO4-2", &[5.0, 15.0, 35.0, 45.0], 0.03, |t| {
        (141.328 - 4276.1 / t - 23.093 * t.ln()) / LN_10
    });
    follows("HSO4- = H+ + SO4-2", &[5.0, 50.0, 75.0, 95.0], 0.05, |t| {
        562.694_86 - 102.5154 * t.ln() - 1.117_033e-4 * t * t + 0.247_753_8 * t - 13_273.75 / t
    });
}

/// F. J. Millero, Geochim. Cosmochim. Acta 59 (1995) 661, at zero salinity (function read as above), 0 to 45 °C.
#[test]
fn water_follows_a_second_source_from_0_to_45_degrees() {
    follows("H2O = H+ + OH-", &[0.0, 10.0, 35.0, 45.0], 0.02, |t| {
        (148.9652 - 13_847.26 / t - 23.6521 * t.ln()) / LN_10
    });
}

/// CRC Handbook of Chemistry and Physics, solubility of carbon dioxide in water (after Carroll et al. 1991 and Crovetto
/// 1991; read): 1000 × mole fraction under 100 kPa of the gas, accurate to 2 %.
#[test]
fn carbon_dioxide_dissolves_as_tabulated_from_0_to_95_degrees() {
    let mole_fraction = [
        (0.0, 1.337),
        (10.0, 0.950),
        (25.0, 0.614),
        (40.0, 0.431),
        (60.0, 0.300),
        (80.0, 0.232),
        (95.0, 0.203),
    ];
    let table = mole_fraction.map(|(t, x): (f64, f64)| (t, (x / 1000.0 * 55.508).log10()));
    tabulated("CO2(g) = CO2(aq)", 0.02, &table);
}

/// Reviews of Yoo et al. (1986) and Edwards et al. (1975) as listed in R. Sander, Atmos. Chem. Phys. 23 (2023) 10901
/// (read): mol/(m³ Pa) at 25 °C and slope in K. The reviews differ among themselves by 0.07 at 80 °C.
#[test]
fn ammonia_dissolves_as_in_other_reviews_from_5_to_80_degrees() {
    for (at_25, slope) in [(0.58_f64, 4400.0), (0.59, 4100.0)] {
        follows("NH3(g) = NH3", &[5.0, 25.0, 50.0, 80.0], 0.08, |t| {
            (at_25 * 100.0).log10() + slope * (1.0 / t - 1.0 / 298.15) / LN_10
        });
    }
}

/// Open water under 4.2e−4 bar of carbon dioxide reads pH 5.6 (common textbook result).
#[test]
fn carbonated_rain_follows_from_the_gas_constants() {
    let both = log_k("CO2(g) + H2O = H+ + HCO3-", 25.0);
    let ph = -0.5 * (both + 4.2e-4_f64.log10());
    assert!((ph - 5.6).abs() < 0.05, "{ph}");
}

/// F. J. Millero, Geochim. Cosmochim. Acta 59 (1995) 661, at zero salinity (function read as above), 0 to 45 °C.
#[test]
fn silicic_acid_follows_its_function_from_0_to_45_degrees() {
    follows("H4SiO4 = H+ + H3SiO4-", &[0.0, 10.0, 35.0, 45.0], 0.03, |t| {
        (117.385 - 8904.2 / t - 19.334 * t.ln()) / LN_10
    });
}

/// R. O. Fournier & J. J. Rowe, Am. Mineral. 62 (1977) 1052: log10 of SiO2 in mg/kg = 4.52 − 731/T (from memory).
#[test]
fn silica_gel_dissolves_as_in_geothermal_water_from_25_to_95_degrees() {
    follows("SiO2(am) + 2 H2O = H4SiO4", &[25.0, 50.0, 75.0, 95.0], 0.05, |t| {
        4.52 - 731.0 / t - (60_084.0_f64).log10()
    });
}

/// Gibbsite in caustic, Wesolowski, Geochim. Cosmochim. Acta 56 (1992) 1065: log K −1.12 at 25 °C with 22 kJ/mol (from
/// memory); the library's two constants have sigma 0.1 and 0.08, their enthalpies a few kJ/mol.
#[test]
fn gibbsite_dissolves_in_caustic_as_measured_and_more_so_in_the_heat() {
    tabulated("Al(OH)3(cr) + OH- = Al(OH)4-", 0.15, &[(25.0, -1.12)]);
    tabulated("Al(OH)3(cr) + OH- = Al(OH)4-", 0.3, &[(80.0, -0.52)]);
}

/// Nordstrom et al., ACS Symp. Ser. 416 (1990) 398, function of temperature of Al³⁺ + 4 H2O = Al(OH)4⁻ + 4 H⁺ (from
/// memory); the library's value at 25 °C is of another review, 0.25 lower.
#[test]
fn aluminate_forms_in_the_heat_as_its_published_function_says() {
    follows("Al+3 + 4 H2O = Al(OH)4- + 4 H+", &[5.0, 50.0, 80.0, 95.0], 0.3, |t| {
        51.578 - 11_168.9 / t - 14.865 * t.log10()
    });
}
