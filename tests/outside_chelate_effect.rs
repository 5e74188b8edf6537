//! Two facts of the trade, common practice: K = 1.2e9 for Ni²⁺ + 6 NH3 and 6.8e17 for Ni²⁺ + 3 en at 25 °C, and
//! what they mean: ΔG° = −RT ln K, the gain of a chelate over as many separate ligands, and where it comes from.

mod outside_common;

use bathwright::equilibrium::{GAS_CONSTANT, LN_10};
use outside_common::{Chemistry, Solved, close, close_ratio, library_bath, solve};

const AMMINE: f64 = 1.2e9;
const CHELATE: f64 = 6.8e17;

fn trade() -> Chemistry {
    let reactions =
        [("Ni+2 + 6 NH3 = Ni(NH3)6+2", AMMINE.log10()), ("Ni+2 + 3 en = Ni(en)3+2", CHELATE.log10())];
    Chemistry::of("Ni+2: Metal, NH3: Agent, en: Agent").reactions("common practice", &reactions)
}

/// kJ/mol at 25 °C from the constant that the program uses.
fn gibbs(solved: &Solved, token: &str) -> f64 {
    -GAS_CONSTANT * 298.15 * solved.log_beta(token) * LN_10 / 1e3
}

/// −RT ln K by hand, RT = 2.4790 kJ/mol: 2.4790 · 20.9056 = 51.82 and 2.4790 · 41.0609 = 101.79.
#[test]
fn the_free_energies_of_ammine_and_chelate_follow_from_their_constants() {
    let solved = solve(&trade().bath("Ni+2: 1 mmol/L, NH3: 0.6 mol/L, en: 0.3 mol/L"), None);
    let (ammine, chelate) = (gibbs(&solved, "Ni(NH3)6+2"), gibbs(&solved, "Ni(en)3+2"));
    close("free energy of the ammine", ammine, -51.82, 0.02);
    close("free energy of the chelate", chelate, -101.79, 0.02);
    close("gain of the chelate", chelate - ammine, -49.97, 0.03);
}

/// At the same nitrogen the chelate leaves less nickel free by K(en)·[en]³/(K(NH3)·[NH3]⁶), with what is left
/// free of each ligand once the nickel has taken its share.
#[test]
fn at_equal_nitrogen_ethylenediamine_leaves_hundreds_of_millions_times_less_nickel_free() {
    let ammine = solve(&trade().bath("Ni+2: 1 mmol/L, NH3: 0.6 mol/L"), None);
    let chelate = solve(&trade().bath("Ni+2: 1 mmol/L, en: 0.3 mol/L"), None);
    let gain = ammine.c("Ni+2") / chelate.c("Ni+2");
    let by_hand = CHELATE * 0.297f64.powi(3) / (AMMINE * 0.594f64.powi(6));
    close_ratio("free nickel with ammonia over free nickel with en", gain, by_hand, 1e-6);
    assert!(gain > 1e8, "{gain:e}");
}

/// [Ni(H2O)6]²⁺ + 6 NH3 → [Ni(NH3)6]²⁺ + 6 H2O keeps seven particles, [Ni(H2O)6]²⁺ + 3 en → [Ni(en)3]²⁺ + 6 H2O
/// makes seven of four. Water is the solvent, so what dilution moves is the solutes: seven to one against four to
/// one, a difference of three powers of the concentration.
#[test]
fn dilution_favours_the_chelate_by_three_powers_because_four_particles_become_seven() {
    let particles = |ligands: i32| (1 + ligands, 1 + 6);
    assert_eq!((particles(6), particles(3)), ((7, 7), (4, 7)));
    let gain = |nitrogen: f64| {
        let free = |ligand: String| {
            solve(&trade().bath(&format!("Ni+2: 1e-9 mol/L, {ligand} mol/L")), None).c("Ni+2")
        };
        free(format!("NH3: {nitrogen}")) / free(format!("en: {}", nitrogen / 2.0))
    };
    close("powers of ten gained by tenfold dilution", (gain(0.3) / gain(3.0)).log10(), 3.0, 1e-5);
    // The entropy gain of three more free particles at the usual 1 mol/L standard state: with the heats equal the whole
    // −49.97 kJ/mol would be TΔS, 168 J/(mol K); the share of mixing alone is 3·R·ln 55.5 = 100 J/(mol K).
    let mixing = 3.0 * GAS_CONSTANT * f64::ln(55.5);
    assert!(mixing > 0.5 * 168.0 && mixing < 168.0, "{mixing}");
}

/// The library's constants are from other sources. log β6 of the ammine is quoted as 8.3, 8.7 (5.3e8 to 5.5e8 in
/// school texts) and 9.1 (the trade's 1.2e9); log β3 of the chelate at 25 °C as 17.8 (the trade's), 18.06 (I =
/// 0.1), 18.28, 18.32, 18.35 (I = 1 KNO3) and 18.41 (KCl): Gmelin's list as quoted by Bowling Green State
/// University, chem 407 (web page). The library must lie inside these ranges, 0.05 added at each end for the
/// print.
#[test]
fn the_library_shows_the_same_chelate_effect_from_independent_constants() {
    let contents = "Ni+2: 1 mmol/L, NH3: 0.6 mol/L, en: 0.3 mol/L, NO3-: 2 mmol/L";
    let solved = solve(&library_bath(contents), Some(12.0));
    let (ammine, chelate) = (solved.log_beta("Ni(NH3)6+2"), solved.log_beta("Ni(en)3+2"));
    assert!((8.25..=9.15).contains(&ammine), "{ammine}");
    assert!((17.75..=18.46).contains(&chelate), "{chelate}");
    let gain = gibbs(&solved, "Ni(en)3+2") - gibbs(&solved, "Ni(NH3)6+2");
    assert!(gain < -49.0, "a chelate gain of {gain} kJ/mol");
    // Against the measurements at I = 1 themselves; Σ ν z² is zero, so no activity coefficient comes in.
    close("log beta3 against Gmelin's list at I = 1", solved.log_beta("Ni(en)3+2"), 18.32, 0.1);
}
