//! Solubility of hydroxides: magnesium, zinc over pH with its minimum, iron(III) with and without citrate.

mod outside_common;

use outside_common::{Chemistry, close, close_ratio, library_bath, library_bath_with, solve};

/// Saturated magnesia reads pH 10.5 (CRC Handbook, from memory; "milk of magnesia 10.5", pinkmonkey.com, web
/// page). The handbooks' solubility runs from 1.2e-4 M (0.69 mg in 100 mL, CRC, from memory) to 1.7e-4 M (Ksp
/// 1.8e-11, Lange, from memory) with crystal size; a tenth of a unit of pH is a quarter in the solubility, so
/// 0.05 of pH is the sharper test.
#[test]
fn saturated_magnesia_reads_ph_ten_and_a_half() {
    let bath = library_bath_with("Mg+2: 0.01 mol/L, OH-: 0.02 mol/L", "Mg(OH)2(cr): MayForm");
    let solved = solve(&bath, None);
    close("pH of the suspension", solved.ph(), 10.5, 0.05);
    let dissolved = solved.dissolved("Mg+2");
    assert!((1.1e-4..=1.8e-4).contains(&dissolved), "{dissolved:e}");
}

/// Ksp 7.1e-12: 1.21e-4 M in water: Skoog, West, Holler & Crouch, Fundamentals of Analytical Chemistry, 8th ed.,
/// example 11-5 (from memory), and pure arithmetic over pH: Ksp/[OH]² below saturation of the alkali.
#[test]
fn magnesium_hydroxide_dissolves_as_in_the_textbook_from_its_own_constants() {
    let chemistry = Chemistry::of("H+: Proton, Mg+2: Metal")
        .reactions("Skoog", &[("H2O = H+ + OH-", -14.0)])
        .solid("Skoog", "Mg(OH)2(s)", "Mg(OH)2(s) = Mg+2 + 2 OH-", 7.1e-12f64.log10());
    let bath = chemistry.bath("Mg+2: 0.5 mol/L, OH-: 1 mol/L");
    close_ratio("in water", solve(&bath, None).c("Mg+2"), 1.21e-4, 0.005);
    for ph in [9.5, 10.0, 11.0, 12.0, 13.0] {
        let by_hand = 7.1e-12 / 10f64.powf(ph - 14.0).powi(2);
        close_ratio(&format!("at pH {ph}"), solve(&bath, Some(ph)).c("Mg+2"), by_hand, 1e-9);
    }
}

/// log*β of zinc at 25 °C, I = 0, and log*Ks 11.50 of ε-Zn(OH)2: Baes & Mesmer, The Hydrolysis of Cations (1976)
/// p. 293 (β read in the COST CA18202 compilation; 11.50 from memory).
const ZINC: [f64; 4] = [-8.96, -16.9, -28.4, -41.2];
const ZINC_SOLID: f64 = 11.50;

/// The solubility is Ks Σ *βₙ a(H)^(2−n); its minimum worked out apart from the solver lies at pH 9.78 with
/// 4.12e-06 M.
#[test]
fn zinc_hydroxide_has_the_minimum_of_baes_and_mesmer_from_their_constants() {
    let reactions = [
        ("Zn+2 + H2O = ZnOH+ + H+", ZINC[0]),
        ("Zn+2 + 2 H2O = Zn(OH)2 + 2 H+", ZINC[1]),
        ("Zn+2 + 3 H2O = Zn(OH)3- + 3 H+", ZINC[2]),
        ("Zn+2 + 4 H2O = Zn(OH)4-2 + 4 H+", ZINC[3]),
    ];
    let chemistry = Chemistry::of("H+: Proton, Zn+2: Metal").reactions("Baes & Mesmer", &reactions).solid(
        "Baes & Mesmer",
        "Zn(OH)2(s)",
        "Zn(OH)2(s) + 2 H+ = Zn+2 + 2 H2O",
        ZINC_SOLID,
    );
    let bath = chemistry.bath("Zn+2: 0.01 mol/L");
    let by_hand = |ph: f64| -> f64 {
        let free = 10f64.powf(ZINC_SOLID - 2.0 * ph);
        free * (1.0 + (1..=4).map(|n| 10f64.powf(ZINC[n - 1] + n as f64 * ph)).sum::<f64>())
    };
    let mut lowest = (0.0, f64::INFINITY);
    for step in 0..=50 {
        let ph = 7.5 + 0.1 * f64::from(step);
        let dissolved = solve(&bath, Some(ph)).dissolved("Zn+2");
        close_ratio(&format!("zinc at pH {ph:.1}"), dissolved, by_hand(ph).min(0.01), 1e-9);
        if dissolved < lowest.1 {
            lowest = (ph, dissolved);
        }
    }
    close("pH of the minimum", lowest.0, 9.78, 0.06);
    close_ratio("zinc at the minimum", lowest.1, 4.12e-06, 0.02);
}

fn library_minimum(solid: &str) -> (f64, f64) {
    let bath = library_bath_with("Zn+2: 0.01 mol/L, NO3-: 0.02 mol/L", &format!("{solid}: MayForm"));
    let curve = (0..=50).map(|step| 7.5 + 0.1 * f64::from(step));
    curve
        .map(|ph| (ph, solve(&bath, Some(ph)).dissolved("Zn+2")))
        .fold((0.0, f64::INFINITY), |lowest, point| if point.1 < lowest.1 { point } else { lowest })
}

/// Where rinse-water zinc is least soluble: pH 9.0 to 10.5 (ChemREADY), 10.1 (Water Specialists; both web pages);
/// with fresh hydroxide it comes down to a few tenths of a milligram per litre (common practice: 0.1 to 1 mg/L).
/// The crystalline ε form lies a factor of ten lower, by the difference of the two Ks.
#[test]
fn zinc_hydroxide_of_the_library_is_least_soluble_where_waste_treatment_finds_it() {
    let (ph, fresh) = library_minimum("Zn(OH)2(am)");
    assert!((9.0..=10.5).contains(&ph), "{ph}");
    let milligrams = fresh * 65.38e3;
    assert!((0.1..=1.0).contains(&milligrams), "{milligrams} mg/L");
    let (aged_ph, aged) = library_minimum("Zn(OH)2(cr)");
    close("pH of the minimum of the aged form", aged_ph, ph, 0.11);
    close("log fresh over aged", (fresh / aged).log10(), 12.45 - 11.38, 0.1);
}

/// The pH that waste treatment sets for a metal: Cd 11.0, Cu 8.1, Cr(III) 7.5, Ni 10.8, Zn 10.1 (Water
/// Specialists, "Precipitation by pH", web page). There the library's solubility must be close to its own
/// minimum; half a unit of pH, by which such lists differ among themselves, is up to a factor of five on the arms
/// of these curves.
#[test]
fn the_ph_of_waste_treatment_lies_on_the_floor_of_each_solubility_curve() {
    for (metal, nitrate, set) in [
        ("Cd+2", 2.0, 11.0),
        ("Cu+2", 2.0, 8.1),
        ("Cr+3", 3.0, 7.5),
        ("Ni+2", 2.0, 10.8),
        ("Zn+2", 2.0, 10.1),
    ] {
        let bath = library_bath(&format!("{metal}: 1 mmol/L, NO3-: {nitrate} mmol/L"));
        let at = |ph: f64| solve(&bath, Some(ph)).dissolved(metal);
        let floor = (0..=70).map(|step| at(6.0 + 0.1 * f64::from(step))).fold(f64::INFINITY, f64::min);
        let over = at(set) / floor;
        println!("{metal} at pH {set}: {over:.2} times the floor of {floor:.2e} mol/L");
        assert!(over < 5.0, "{metal} at pH {set} is {over} times its minimum");
        assert!(floor < 1e-5, "{metal} never falls under {floor:e} mol/L");
    }
}

/// Fresh iron(III) hydroxide in neutral water leaves about 1e-9 to 1e-8 M (0.1 to 0.6 µg/L), least near pH 8:
/// common practice in water treatment. At pH 3 it is 1e-5 to 1e-3 M with the scatter of its Ks (−37 to −39).
#[test]
fn iron_hydroxide_is_least_soluble_near_ph_eight() {
    let bath = library_bath("Fe+3: 0.01 mol/L, NO3-: 0.03 mol/L");
    let at = |ph: f64| solve(&bath, Some(ph)).dissolved("Fe+3");
    let curve = (0..=30).map(|step| 6.0 + 0.2 * f64::from(step));
    let lowest = curve.min_by(|a, b| at(*a).total_cmp(&at(*b))).unwrap();
    close("pH of the minimum", lowest, 8.0, 0.5);
    assert!((1e-10..=1e-8).contains(&at(lowest)), "{:e}", at(lowest));
    assert!((1e-5..=1e-3).contains(&at(3.0)), "{:e}", at(3.0));
}

/// Citric acid cleaning: at pH 3.5 to 5 two citrate per iron hold iron(III) that would otherwise fall out (common
/// practice).
#[test]
fn citrate_holds_iron_in_acid_cleaning_where_the_hydroxide_would_fall_out() {
    let with = library_bath("Fe+3: 0.01 mol/L, Cit-3: 0.02 mol/L, Na+: 0.1 mol/L, NO3-: 0.03 mol/L");
    let without = library_bath("Fe+3: 0.01 mol/L, Na+: 0.1 mol/L, NO3-: 0.03 mol/L");
    for ph in [3.5, 4.0, 5.0] {
        assert_eq!(solve(&with, Some(ph)).formed("Fe(OH)3(am)"), 0.0, "pH {ph}");
        assert!(solve(&without, Some(ph)).formed("Fe(OH)3(am)") > 0.0099, "pH {ph}");
    }
}

/// Ammoniated citric acid of 3 % holds iron, mostly as iron(III) once air or nitrite was blown in, at pH 9 to 9.5
/// in the copper-removal stage of boiler cleaning: common practice, several grams per litre.
#[test]
fn citrate_holds_iron_at_ph_nine_in_boiler_cleaning() {
    let bath = library_bath("Fe+3: 0.05 mol/L, Cit-3: 0.156 mol/L, NH3: 0.6 mol/L, NO3-: 0.15 mol/L");
    let solved = solve(&bath, Some(9.0));
    assert!(solved.dissolved("Fe+3") > 0.02, "{:e}", solved.dissolved("Fe+3"));
}

/// Sodium metasilicate pentahydrate, 1 % in water: pH about 12.5 (product sheets, common practice); 10 g/L.
#[test]
fn one_percent_metasilicate_reads_ph_twelve_and_a_half() {
    let bath = library_bath("Na+: 0.0943 mol/L, H2SiO4-2: 0.04714 mol/L");
    close("metasilicate", solve(&bath, None).ph(), 12.5, 0.2);
}

/// Neutralised silicate sets to silica gel: under pH 10 no more than about 2 to 4 mmol/L stays dissolved at 25 °C
/// (common practice in waste treatment; 115 mg/L SiO2 near neutral).
#[test]
fn neutralised_silicate_sets_to_a_gel() {
    let bath = library_bath("Na+: 0.1 mol/L, H2SiO4-2: 0.05 mol/L, NO3-: 0.1 mol/L");
    for (ph, low, high) in [(7.0, 1.8e-3, 2.1e-3), (9.5, 2e-3, 4e-3)] {
        let left = solve(&bath, Some(ph)).dissolved("H2SiO4-2");
        assert!((low..=high).contains(&left), "{left:e} at pH {ph}");
    }
}
