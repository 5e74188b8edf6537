//! Solved salt solutions with ion interaction: mean activity coefficients and conditional constants as published.

use bathwright::chemistry::Library;
use bathwright::equilibrium::{ActivityModel, Equilibrium, LN_10, Problem, Solver, System, assemble};

/// A solution at 25 °C of these amounts in mol/kg of water, pH held.
fn solve(model: ActivityModel, contents: &[(&str, f64)], ph: f64) -> (System, Equilibrium) {
    let library = Library::built_in();
    let mut present = vec![library.proton().expect("H+ is a component")];
    present.extend(contents.iter().map(|(token, _)| library.component(token).expect("a component")));
    let system = assemble(library, &present, model);
    let constants = system.constants_at(298.15, model);
    let totals: Vec<f64> = std::iter::once(0.0)
        .chain(contents.iter().map(|(_, molality)| molality * constants.water_kg_l))
        .collect();
    let mut held = vec![None; totals.len()];
    held[0] = Some(-ph * LN_10);
    let may_form = vec![false; system.solids.len()];
    let problem = Problem {
        system: &system,
        constants: &constants,
        totals: &totals,
        held: &held,
        may_form: &may_form,
        open_to: &[],
        counter_ion: false,
    };
    let solved = Solver::new().solve(&problem).expect("a salt solution has an answer");
    assert!(solved.certificate.holds(), "{:?}", solved.certificate);
    (system, solved)
}

/// CRC Handbook of Chemistry and Physics, 92nd ed., p. 5-106, 25 °C (read): γ± against molality, within 0.02 in log γ.
#[test]
fn solved_salt_solutions_have_their_measured_mean_activity_coefficients() {
    for (cation, anion, charge, molality, measured) in [
        ("Na+", "Cl-", 1.0, 1.0, 0.657),
        ("K+", "Cl-", 1.0, 1.0, 0.604),
        ("Ca+2", "Cl-", 2.0, 0.1, 0.517),
        ("Ca+2", "Cl-", 2.0, 0.5, 0.444),
        ("Co+2", "Cl-", 2.0, 0.1, 0.528),
        ("Co+2", "Cl-", 2.0, 0.5, 0.465),
    ] {
        let contents = [(cation, molality), (anion, charge * molality)];
        let (system, solved) = solve(ActivityModel::IonInteraction, &contents, 6.0);
        let ln_gamma = |token: &str| solved.ln_gamma[system.species_index(token).expect("a species")];
        let mean = (ln_gamma(cation) + charge * ln_gamma(anion)) / (1.0 + charge);
        let gap = (mean - f64::ln(measured)) / LN_10;
        assert!(gap.abs() < 0.02, "{cation} {anion} {molality}: {} against {measured}", mean.exp());
    }
}

/// Harris, Quantitative Chemical Analysis, Appendix G (read): pKa 4.756 and 9.245 at I = 0, 4.56 and 9.26 at I = 0.1.
#[test]
fn conditional_acid_constants_follow_the_ionic_strength() {
    let conditional = |model, ligand: &str, acid: &str, ph: f64, salt: f64| {
        let contents = [("Na+", salt), ("Cl-", salt), (ligand, 1e-6)];
        let (system, solved) = solve(model, &contents, ph);
        let ln_c = |token: &str| solved.ln_c[system.species_index(token).expect("a species")];
        -(ln_c("H+") + ln_c(ligand) - ln_c(acid)) / LN_10
    };
    for model in [ActivityModel::Davies, ActivityModel::IonInteraction] {
        for (ligand, acid, at_zero, at_tenth) in
            [("OAc-", "H(OAc)", 4.756, 4.56), ("NH3", "NH4+", 9.245, 9.26)]
        {
            for (salt, published) in [(1e-7, at_zero), (0.1, at_tenth)] {
                let found = conditional(model, ligand, acid, published, salt);
                assert!((found - published).abs() < 0.035, "{acid} in {salt} mol/kg, {model:?}: {found}");
            }
        }
    }
}
