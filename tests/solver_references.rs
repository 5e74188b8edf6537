//! The solver against independent solutions: `tests/reference/equilibria.ron`, made by `tests/reference/generate.py`
//! with a homotopy in arbitrary-precision arithmetic, another method than the program's.

use bathwright::equilibrium::{
    ActivityModel, Constants, Problem, SolidEntry, Solver, SpeciesEntry, System, SystemParts,
};
use serde::Deserialize;

#[derive(Deserialize)]
struct File {
    systems: Vec<Reference>,
}

#[derive(Deserialize)]
struct Reference {
    name: String,
    note: String,
    davies_a: Option<f64>,
    held: Vec<Held>,
    components: Vec<Part>,
    species: Vec<Complex>,
    solids: Vec<Solid>,
    expect: Expect,
}

#[derive(Deserialize)]
struct Held {
    component: usize,
    log10_activity: String,
}

#[derive(Deserialize)]
struct Part {
    name: String,
    charge: f64,
    total: String,
}

#[derive(Deserialize)]
struct Complex {
    name: String,
    charge: f64,
    log10_beta: String,
    nu: Vec<(usize, f64)>,
}

#[derive(Deserialize)]
struct Solid {
    name: String,
    log10_ks: String,
    nu: Vec<(usize, f64)>,
}

#[derive(Deserialize)]
struct Expect {
    ionic_strength: String,
    charge_gap: String,
    log10_free: Vec<String>,
    species_log10: Vec<String>,
    solids: Vec<String>,
    saturation_index: Vec<String>,
    total_of_held: Vec<String>,
}

fn number(text: &str) -> f64 {
    if text == "-inf" { f64::NEG_INFINITY } else { text.parse().expect(text) }
}

fn number_ln(text: &str) -> f64 {
    number(text) * std::f64::consts::LN_10
}

/// Largest change of ln a per unit of relative error in one balance, from the generator's note.
fn condition(note: &str) -> f64 {
    note.rsplit("condition ")
        .next()
        .and_then(|text| text.trim().parse().ok())
        .expect("a condition in the note")
}

fn build(reference: &Reference) -> (System, Constants, Vec<f64>, Vec<Option<f64>>) {
    let mut system = SystemParts {
        components: reference.components.iter().map(|part| part.name.clone()).collect(),
        proton: reference.components.iter().position(|part| part.name == "H"),
        ..SystemParts::default()
    };
    let mut ln_beta = vec![0.0; reference.components.len()];
    for (i, part) in reference.components.iter().enumerate() {
        let (token, charge) = (part.name.clone(), part.charge);
        system.species.push(SpeciesEntry { token, charge, components: vec![(i, 1.0)], chain: vec![] });
    }
    for complex in &reference.species {
        let (token, charge) = (complex.name.clone(), complex.charge);
        system.species.push(SpeciesEntry { token, charge, components: complex.nu.clone(), chain: vec![] });
        ln_beta.push(number_ln(&complex.log10_beta));
    }
    for solid in &reference.solids {
        let entry = SolidEntry {
            token: solid.name.clone(),
            components: solid.nu.clone(),
            chain: vec![],
            aged: false,
        };
        system.solids.push(entry);
    }
    let ln_ks = reference.solids.iter().map(|solid| number_ln(&solid.log10_ks)).collect();
    let model = if reference.davies_a.is_some() { ActivityModel::Davies } else { ActivityModel::AsMeasured };
    let constants = Constants {
        ln_beta,
        ln_ks,
        ln_kg: Vec::new(),
        model,
        slope_a: reference.davies_a.unwrap_or(0.51),
        water_kg_l: 1.0,
    };
    let totals = reference.components.iter().map(|part| number(&part.total)).collect();
    let mut held = vec![None; reference.components.len()];
    for entry in &reference.held {
        held[entry.component] = Some(number_ln(&entry.log10_activity));
    }
    (system.into(), constants, totals, held)
}

/// Gap in log10 beyond which two values differ; both absent is equal.
fn gap(found: f64, expected: f64) -> f64 {
    if found == expected { 0.0 } else { (found - expected).abs() }
}

fn compare(reference: &Reference) -> Vec<String> {
    let (system, constants, totals, held) = build(reference);
    let may_form = vec![true; system.solids.len()];
    let problem = Problem {
        system: &system,
        constants: &constants,
        totals: &totals,
        held: &held,
        may_form: &may_form,
        open_to: &[],
        counter_ion: false,
    };
    let found = match Solver::new().solve(&problem) {
        Ok(found) => found,
        Err(error) => return vec![format!("{}: {error}", reference.name)],
    };
    let expect = &reference.expect;
    // Double precision reaches 1e-9 unless the balances themselves are more sensitive to their own last digit.
    let tolerance = 1e-9f64.max(4e-16 * condition(&reference.note));
    let mut wrong = Vec::new();
    let mut check = |what: String, gap: f64, tolerance: f64| {
        if gap.is_nan() || gap > tolerance {
            wrong.push(format!("{}: {what} off by {gap:.1e}, {tolerance:.1e} allowed", reference.name));
        }
    };
    let ln_10 = std::f64::consts::LN_10;
    for (i, text) in expect.log10_free.iter().enumerate() {
        check(format!("free {}", system.components[i]), gap(found.ln_c[i] / ln_10, number(text)), tolerance);
    }
    for (j, text) in expect.species_log10.iter().enumerate() {
        let species = system.components.len() + j;
        let order: f64 = system.species[species].components.iter().map(|(_, nu)| nu.abs()).sum();
        check(
            system.species[species].token.clone(),
            gap(found.ln_c[species] / ln_10, number(text)),
            tolerance * order.max(1.0),
        );
    }
    let size: f64 = totals.iter().map(|total| total.abs()).sum::<f64>()
        + found.totals.iter().map(|t| t.abs()).sum::<f64>();
    for (k, text) in expect.solids.iter().enumerate() {
        check(
            format!("amount of {}", system.solids[k].token),
            (found.solids[k] - number(text)).abs(),
            1e-9 * number(text) + 1e-14 * size + tolerance * number(text),
        );
        let index = number(&expect.saturation_index[k]);
        check(
            format!("index of {}", system.solids[k].token),
            gap(found.saturation_index(k), index),
            10.0 * tolerance,
        );
    }
    check(
        "ionic strength".into(),
        (found.ionic_strength / number(&expect.ionic_strength) - 1.0).abs(),
        1e-9 + tolerance,
    );
    check("charge gap".into(), (found.charge_gap - number(&expect.charge_gap)).abs(), 1e-9 * size.max(1e-6));
    for (entry, text) in reference.held.iter().zip(&expect.total_of_held) {
        let expected = number(text);
        check(
            "total of held".into(),
            (found.totals[entry.component] - expected).abs(),
            1e-9 * expected.abs() + 1e-12 * size,
        );
    }
    if !found.certificate.holds() {
        wrong.push(format!("{}: {:?}", reference.name, found.certificate));
    }
    wrong
}

#[test]
fn every_reference_system_is_reproduced_to_nine_decimals() {
    let options = ron::Options::default().with_default_extension(ron::extensions::Extensions::IMPLICIT_SOME);
    let text = include_str!("reference/equilibria.ron");
    let file: File = options.from_str(text).expect("the reference file reads");
    assert!(file.systems.len() >= 60);
    let wrong: Vec<String> = file.systems.iter().flat_map(compare).collect();
    assert!(wrong.is_empty(), "{} of {} systems:\n{}", wrong.len(), file.systems.len(), wrong.join("\n"));
}
