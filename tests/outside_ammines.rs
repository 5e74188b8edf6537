//! Ammonia as a ligand: copper ammines over free ammonia, and silver chloride dissolved by ammonia.

mod outside_common;

use outside_common::{Chemistry, Solved, close, close_ratio, library_bath, solve, solve_at};

const STEPS: [&str; 4] = ["Cu(NH3)+2", "Cu(NH3)2+2", "Cu(NH3)3+2", "Cu(NH3)4+2"];

fn copper_ammines(source: &str, log_k: [f64; 4]) -> Chemistry {
    let reactions = [
        ("Cu+2 + NH3 = Cu(NH3)+2", log_k[0]),
        ("Cu(NH3)+2 + NH3 = Cu(NH3)2+2", log_k[1]),
        ("Cu(NH3)2+2 + NH3 = Cu(NH3)3+2", log_k[2]),
        ("Cu(NH3)3+2 + NH3 = Cu(NH3)4+2", log_k[3]),
    ];
    Chemistry::of("Cu+2: Metal, NH3: Agent").reactions(source, &reactions)
}

fn bound_per_copper(solved: &Solved) -> f64 {
    (solved.dissolved("NH3") - solved.c("NH3")) / solved.dissolved("Cu+2")
}

/// Stepwise constants at 25 °C and I = 0 of Skoog, West, Holler & Crouch, Fundamentals of Analytical Chemistry,
/// Appendix 4 (from memory), the same as in D. T. Harvey, Analytical Chemistry 2.1, Appendix 12 and in the
/// library. The fractions are βₙ[NH3]ⁿ/Σβ[NH3]ᵏ, worked out here apart from the solver, so they agree to
/// rounding.
#[test]
fn copper_ammines_share_the_copper_as_the_published_steps_say() {
    let log_k = [4.04, 3.43, 2.80, 1.48];
    let chemistry = copper_ammines("Skoog, Appendix 4", log_k);
    for total in [1e-5, 1e-4, 1e-3, 4e-3, 1e-2, 0.1, 1.0] {
        let solved = solve(&chemistry.bath(&format!("Cu+2: 1 mmol/L, NH3: {total} mol/L")), None);
        let free = solved.c("NH3");
        let mut terms = vec![1.0];
        for step in log_k {
            terms.push(terms[terms.len() - 1] * 10f64.powf(step) * free);
        }
        let sum: f64 = terms.iter().sum();
        for (n, token) in ["Cu+2"].iter().chain(&STEPS).enumerate() {
            let fraction = solved.c(token) / 1e-3;
            close_ratio(&format!("{token} at {total} M ammonia"), fraction, terms[n] / sum, 1e-9);
        }
        let ligand_number: f64 = terms.iter().enumerate().map(|(n, term)| n as f64 * term / sum).sum();
        close("ligand number", bound_per_copper(&solved), ligand_number, 1e-9);
    }
}

/// log β1 to β4 of copper ammines: 3.99, 7.33, 10.06, 12.03 at 30 °C, I = 0 (Harris, Quantitative Chemical
/// Analysis, 8th ed., Appendix I), and 4.15, 7.65, 10.54, 12.67 at 18 °C in 2 M NH4NO3 (J. Bjerrum, Metal Ammine
/// Formation in Aqueous Solution, 1941; from memory). Steps scatter by 0.3 between media and authors, β by that
/// and the root of n.
#[test]
fn copper_ammines_of_the_library_agree_with_two_other_measurements() {
    let bath = library_bath("Cu+2: 1 mmol/L, NH3: 1 mol/L, NO3-: 2 mmol/L");
    for (temperature, published) in [(30.0, [3.99, 7.33, 10.06, 12.03]), (18.0, [4.15, 7.65, 10.54, 12.67])] {
        let solved = solve_at(&bath, temperature, Some(11.0));
        for (n, (token, log_beta)) in STEPS.iter().zip(published).enumerate() {
            let what = format!("log beta of {token} at {temperature} C");
            close(&what, solved.log_beta(token), log_beta, 0.3 * f64::sqrt(n as f64 + 1.0));
        }
    }
}

/// AgCl in 10.0 M ammonia: Ksp 1.6e-10, K1 2.1e3, K2 8.2e3 give 0.48 M and 9.0 M free ammonia: Zumdahl,
/// Chemistry, section on complex ions and solubility (numbers read in a worked answer on mathskey.com, 0.475 M
/// and 9.05 M).
#[test]
fn ammonia_dissolves_silver_chloride_as_in_the_textbook() {
    let chemistry = Chemistry::of("Ag+: Metal, NH3: Agent, Cl-: Ion")
        .reactions(
            "Zumdahl",
            &[("Ag+ + NH3 = Ag(NH3)+", 2.1e3f64.log10()), ("Ag(NH3)+ + NH3 = Ag(NH3)2+", 8.2e3f64.log10())],
        )
        .solid("Zumdahl", "AgCl(s)", "AgCl(s) = Ag+ + Cl-", 1.6e-10f64.log10());
    let solved = solve(&chemistry.bath("Ag+: 1 mol/L, Cl-: 1 mol/L, NH3: 10 mol/L"), None);
    close("dissolved silver", solved.dissolved("Ag+"), 0.475, 0.001);
    close("free ammonia", solved.c("NH3"), 9.05, 0.01);
}

/// The library against the same textbook at 0.10 M ammonia, where the ionic strength stays under 0.01: 4.9e-3 M
/// from the textbook's constants without activity coefficients. The library's log β2 7.26 at I = 0.1 has sigma
/// 0.3 (a factor 1.4 in the solubility, which goes with the root).
#[test]
fn ammonia_dissolves_silver_chloride_with_the_library_within_its_uncertainty() {
    let solved = solve(&library_bath("Ag+: 0.1 mol/L, Cl-: 0.1 mol/L, NH3: 0.1 mol/L"), None);
    let root = f64::sqrt(1.6e-10 * 2.1e3 * 8.2e3);
    let textbook = 0.1 * root / (1.0 + 2.0 * root);
    close_ratio("silver in 0.1 M ammonia", solved.dissolved("Ag+"), textbook, 0.4);
}

/// AgCl in pure water: 1.33e-5 M at 25 °C (from memory: Ksp 1.77e-10, CRC Handbook; 1.93 mg/L). The neutral
/// AgCl(aq) adds 3.6e-7 M here; tolerance 5 % for Ksp (sigma 0.02 in log) and the undissociated part.
#[test]
fn silver_chloride_dissolves_in_water_as_the_handbook_says() {
    let solved = solve(&library_bath("Ag+: 0.1 mol/L, Cl-: 0.1 mol/L"), None);
    close_ratio("silver in water", solved.dissolved("Ag+"), 1.33e-5, 0.05);
}
