//! Two agents side by side: every number of a row by another route than the comparison takes.

use bathwright::bath::{Bath, Demo, Range, Solids};
use bathwright::chemistry::ComponentKind;
use bathwright::dosing::{Assessor, Hold};
use bathwright::equilibrium::{GAS_CONSTANT, Solver};
use bathwright::study::compare::{Better, Comparison, Side, chelate_effect, compare};
use bathwright::study::rinse::rinse;
use serde_json::Value;
use std::sync::LazyLock;

fn bath(file: &str) -> Bath {
    Bath::resolve(&Demo::named(file).unwrap().project().unwrap()).unwrap()
}

/// Both comparisons that are checked throughout.
fn both() -> [(Bath, Comparison); 2] {
    static BOTH: LazyLock<[(Bath, Comparison); 2]> = LazyLock::new(compute_both);
    BOTH.clone()
}

fn compute_both() -> [(Bath, Comparison); 2] {
    [
        ("hard_water_cleaner.ron", "edta-na4-39", "mgda-na3-40"),
        ("copper_strike.ron", "hedp-60", "citric-mono"),
    ]
    .map(|(file, a, b)| (bath(file), compare(&bath(file), a, b).unwrap()))
}

fn sides() -> Vec<(Bath, Side)> {
    both().into_iter().flat_map(|(bath, found)| [(bath.clone(), found.a), (bath, found.b)]).collect()
}

/// Doses of the demo bath, which lists both agents, with only this side's agent dosed.
fn doses(bath: &Bath, side: &Side, dose: f64) -> Vec<f64> {
    bath.agents.iter().map(|agent| if agent.product.id == side.product().id { dose } else { 0.0 }).collect()
}

fn value(found: &Comparison, key: &str) -> (f64, f64) {
    let row = found.row(key).unwrap_or_else(|| panic!("no row {key}"));
    (row.a.value.unwrap(), row.b.value.unwrap())
}

#[test]
fn the_rows_of_the_cleaner_say_what_they_are_known_to_say() {
    let [(_, found), _] = both();
    assert_eq!((found.a.hold, found.b.hold), (Hold::Sure, Hold::Sure));
    let (edta, mgda) = value(&found, "dose");
    assert!((edta / 2.44 - 1.0).abs() < 0.03 && (mgda / 15.0 - 1.0).abs() < 0.03, "{edta} {mgda}");
    assert_eq!(value(&found, "rings"), (5.0, 3.0));
    assert_eq!(value(&found, "particles"), (5.0, 3.0));
    for (key, better) in [
        ("holds", Better::Alike),
        ("dose", Better::A),
        ("cost", Better::A),
        ("ph_band", Better::A),
        ("log_k_conditional", Better::A),
        ("dg", Better::Unranked),
        ("solid", Better::Alike),
    ] {
        assert_eq!(found.row(key).unwrap().better, better, "{key}");
    }
    let forbidden = |(who, remark): &(String, String)| who == "EDTA" && remark.contains("Annex 40");
    assert!(found.remarks.iter().any(forbidden), "{:?}", found.remarks);
}

#[test]
fn a_side_that_holds_by_plain_numbers_only_is_not_ranked_by_its_dose() {
    let [_, (_, found)] = both();
    assert_eq!((found.a.hold, found.b.hold), (Hold::Plain, Hold::Sure));
    assert_eq!(found.row("holds").unwrap().better, Better::B);
    for key in ["dose", "mass", "cost", "ph_band"] {
        let row = found.row(key).unwrap();
        assert_eq!(row.better, Better::Unranked, "{key}");
        assert!(row.why.contains("HEDP holds by plain numbers only"), "{key}: {}", row.why);
    }
    assert_eq!(found.row("plain_dose").unwrap().better, Better::B);
}

#[test]
fn no_smaller_dose_of_a_fine_scan_holds_as_well() {
    for (bath, side) in sides() {
        let mut assessor = Assessor::new(&bath).unwrap();
        let mut excess = |dose: f64| {
            let assessment = assessor.assess(&doses(&bath, &side, dose)).unwrap();
            if side.hold == Hold::Sure { assessment.excess_95() } else { assessment.excess() }
        };
        assert!(excess(side.dose_g_l) < 1e-6, "{}", side.product().id);
        for step in 0..120 {
            let less = side.dose_g_l * f64::from(step) / 120.0;
            assert!(excess(less) > 0.0, "{less} g/L of {} would do", side.product().id);
        }
    }
}

#[test]
fn mass_and_cost_follow_from_dose_volume_and_price() {
    for (bath, found) in both() {
        let (mass, cost) = (value(&found, "mass"), value(&found, "cost"));
        for (side, mass, cost) in [(&found.a, mass.0, cost.0), (&found.b, mass.1, cost.1)] {
            let kg = side.dose_g_l * bath.project.tank.volume_l / 1000.0;
            let product = bath.catalogue.find(&side.product().id).unwrap();
            let price = product.price_per_kg.unwrap();
            assert!((mass / kg - 1.0).abs() < 1e-12);
            assert!((cost / (kg * 0.5 * (price.low + price.high)) - 1.0).abs() < 1e-12);
        }
    }
}

/// The bands come from a bath with its doses as contents; here the demo bath itself is asked at each pH.
#[test]
fn the_ph_band_holds_all_through_and_not_beyond() {
    for (bath, side) in sides() {
        let band = side.ph_band.unwrap();
        let holds = |ph: f64| {
            // The assessor corrects the dose at the set pH of the bath, then lets the pH drift.
            let drift = Assessor::over(&bath, Some(Range::fixed(ph)))
                .unwrap()
                .assess(&doses(&bath, &side, side.dose_g_l))
                .unwrap();
            if band.sure { drift.excess_95() <= 1e-6 } else { drift.excess() <= 1e-6 }
        };
        let id = &side.product().id;
        for step in 0..=40 {
            let ph = band.low + band.width() * f64::from(step) / 40.0;
            assert!(holds(ph), "{id} does not hold at pH {ph} of {band:?}");
        }
        assert!(band.open.0 || !holds(band.low - 0.01), "{id} holds below {band:?}");
        assert!(band.open.1 || !holds(band.high + 0.01), "{id} holds above {band:?}");
    }
}

#[test]
fn the_temperature_band_holds_all_through_and_not_beyond() {
    for (bath, side) in sides() {
        let band = side.temperature_band.unwrap();
        let totals = bath.corrected(&doses(&bath, &side, side.dose_g_l)).unwrap().totals;
        let holds = |t: f64| {
            let mut drifting = bath.clone();
            drifting.contents = totals.clone();
            drifting.project.tank.temperature_c = Range::fixed(t);
            let none = vec![0.0; bath.agents.len()];
            let assessment = Assessor::new(&drifting).unwrap().assess(&none).unwrap();
            if band.sure { assessment.excess_95() <= 1e-6 } else { assessment.excess() <= 1e-6 }
        };
        for step in 0..=20 {
            assert!(holds(band.low + band.width() * f64::from(step) / 20.0), "{}", side.product().id);
        }
        assert!(band.open.0 || !holds(band.low - 0.1), "{band:?}");
        assert!(band.open.1 || !holds(band.high + 0.1), "{band:?}");
    }
}

/// Species of the printed equilibrium, sorted by the name of the agent in their token.
#[test]
fn log_k_conditional_is_that_of_the_printed_species() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("bath.ron");
    for (bath, side) in sides() {
        let mut project = bath.project.clone();
        for (agent, dose) in project.agents.iter_mut().zip(doses(&bath, &side, side.dose_g_l)) {
            agent.dose_g_l = dose;
        }
        bathwright::bath::save(&project, &path).unwrap();
        let solved = process(&["solve", path.to_str().unwrap(), "--json"]);
        let solved: Value = serde_json::from_slice(&solved.stdout).unwrap();
        let metal = bath.system.components[bath.limits[0].component].clone();
        let agent = side.bath.system.components[side.bath.agents[side.agent].active].clone();
        let (mut bound, mut other) = (0.0, 0.0);
        for (token, c) in solved["species"].as_object().unwrap() {
            let c = c.as_f64().unwrap();
            let formation = bath.library.formation(token).unwrap();
            let count = |token: &str| {
                let component = bath.library.component(token).unwrap();
                formation.components.get(&component).copied().unwrap_or(0.0)
            };
            match (count(&metal), count(&agent)) {
                (m, a) if m > 0.0 && a > 0.0 => bound += m * c,
                (_, a) => other += a * c,
            }
        }
        let p_metal = solved["free_metals"][&metal]["pM"].as_f64().unwrap();
        let log_k = p_metal + (bound / other).log10();
        let (found, sigma) = side.conditional.unwrap();
        assert!((found - log_k).abs() < 1e-5 && sigma > 0.0, "{}: {found} {log_k}", side.product().id);
    }
}

#[test]
fn the_free_energy_is_that_of_the_activities_in_the_solved_bath() {
    for (bath, side) in sides() {
        let chelate = side.chelate.clone().unwrap();
        let system = &side.bath.system;
        let t = bath.project.tank.temperature_c.set;
        let index = system.species_index(&chelate.complex).unwrap();
        let parts: f64 =
            system.species[index].components.iter().map(|&(i, n)| n * side.solution.ln_a[i]).sum();
        let ln_a = side.solution.ln_c[index] + side.solution.ln_gamma[index];
        let dg = -GAS_CONSTANT * (t + 273.15) * (ln_a - parts) / 1000.0;
        assert!((chelate.dg_kj - dg).abs() < 1e-6, "{}: {} {dg}", chelate.complex, chelate.dg_kj);
    }
}

/// Gibbs–Helmholtz over ten kelvin: ΔH = (ΔG₁/T₁ − ΔG₂/T₂)/(1/T₁ − 1/T₂).
#[test]
fn the_heat_is_the_slope_of_the_free_energy_over_temperature() {
    let mut checked = 0;
    for (bath, side) in sides() {
        let metal = side.bath.limits[0].component;
        let agent = side.bath.agents[side.agent].active;
        let t = bath.project.tank.temperature_c.set;
        let at = |t: f64| chelate_effect(&side.bath, metal, agent, t).unwrap();
        let Some(dh) = at(t).dh_kj else { continue };
        let (t1, t2) = (t - 5.0 + 273.15, t + 5.0 + 273.15);
        let (g1, g2) = (at(t - 5.0).dg_kj, at(t + 5.0).dg_kj);
        let slope = (g1 / t1 - g2 / t2) / (1.0 / t1 - 1.0 / t2);
        assert!((dh - slope).abs() < 0.05, "{}: {dh} {slope}", side.product().id);
        assert!((at(t).minus_tds_kj().unwrap() + dh - at(t).dg_kj).abs() < 1e-9);
        checked += 1;
    }
    assert!(checked >= 2, "{checked}");
}

/// Rings and particles of textbook complexes: EDTA closes five rings and sets six water molecules free (structural
/// chemistry, from memory).
#[test]
fn every_agent_of_the_library_says_how_many_donors_it_has() {
    let library = bathwright::chemistry::Library::built_in();
    let agents = library.components.iter().filter(|component| component.kind == ComponentKind::Agent);
    for agent in agents {
        let donors = agent.donors.unwrap_or_else(|| panic!("{} has no donors", agent.token));
        assert!((1..=10).contains(&donors), "{}", agent.token);
    }
    let donors = |token: &str| library.components[library.component(token).unwrap()].donors.unwrap();
    assert_eq!([donors("EDTA-4"), donors("NTA-3"), donors("DTPA-5"), donors("Cit-3")], [6, 4, 8, 3]);
}

#[test]
fn the_correction_brings_the_tank_back_to_its_ph_and_the_ledger_adds_up() {
    for (bath, side) in sides() {
        let adjustment = side.corrected.adjustment.as_ref();
        let ph = side.bath.ph_after(&side.doses, adjustment).unwrap().unwrap();
        assert!((ph - bath.ph_set().unwrap()).abs() < 0.02, "{}: {ph}", side.product().id);
        let sum: f64 = side.ledger.iter().map(|entry| entry.share).sum();
        assert!((sum - 1.0).abs() < 1e-9);
    }
}

#[test]
fn the_effluent_row_is_the_rinse_study_at_ph_9() {
    for (bath, side) in sides() {
        let study = rinse(&bath, &doses(&bath, &side, side.dose_g_l)).unwrap();
        let point = study.scan.iter().find(|point| point.ph == 9.0).unwrap();
        let treated = point.with_agents.as_ref().unwrap();
        let effluent = side.effluent.as_ref().unwrap();
        for (found, expected) in effluent.dissolved_mg_l.iter().zip(&treated.dissolved_mg_l) {
            assert!((found / expected - 1.0).abs() < 1e-6, "{found} {expected}");
        }
    }
}

#[test]
fn an_agent_that_never_holds_is_told_with_its_best() {
    let bath = bath("derusting.ron");
    let found = compare(&bath, "edta-na4-39", "nta-na3-powder").unwrap();
    assert_eq!(found.b.hold, Hold::Not);
    let row = found.row("holds").unwrap();
    assert_eq!(row.better, Better::A);
    assert!(row.b.text.starts_with("at no dose; the best reaches"), "{}", row.b.text);
    // The best is the best: a scan finds nothing nearer.
    let mut assessor = Assessor::new(&found.b.bath).unwrap();
    let mut excess = |dose: f64| {
        let mut doses = found.b.doses.clone();
        doses[found.b.agent] = dose;
        assessor.assess(&doses).unwrap().excess()
    };
    let best = excess(found.b.dose_g_l);
    assert!(best > 0.0);
    for step in 0..=40 {
        assert!(excess(found.b.cap() * f64::from(step) / 40.0) >= best - 1e-9);
    }
}

/// What forms at the set point is the same whether a bath lists the other agent at no dose or not at all.
#[test]
fn the_other_agent_takes_no_part() {
    for (bath, side) in sides() {
        let constants = bath.constants_at(bath.project.tank.temperature_c.set);
        let totals = bath.corrected(&doses(&bath, &side, side.dose_g_l)).unwrap().totals;
        let listed =
            bath.solve_totals(&mut Solver::new(), &constants, &totals, bath.ph_set(), Solids::Real).unwrap();
        let metal = bath.limits[0].component;
        let alone = side.solution.free(side.bath.limits[0].component);
        assert!((listed.free(metal) / alone - 1.0).abs() < 1e-6);
    }
}

fn process(arguments: &[&str]) -> std::process::Output {
    std::process::Command::new(env!("CARGO_BIN_EXE_bathwright")).args(arguments).output().unwrap()
}

#[test]
fn the_command_prints_both_and_its_json_has_every_row() {
    let file = format!("{}/demo_baths/hard_water_cleaner.ron", env!("CARGO_MANIFEST_DIR"));
    let text = process(&["compare", &file, "--with", "EDTA", "--and", "MGDA"]);
    assert_eq!(text.status.code(), Some(0));
    let text = String::from_utf8(text.stdout).unwrap();
    for needle in
        ["illustrative prices", "does not matter", "log K′ of calcium", "your permit rules", "invented"]
    {
        assert!(text.to_lowercase().contains(&needle.to_lowercase()), "{needle}: {text}");
    }
    let output = process(&["compare", &file, "--with", "EDTA", "--and", "MGDA", "--json"]);
    let object: Value = serde_json::from_slice(&output.stdout).unwrap();
    let [(_, found), _] = both();
    let rows = object["rows"].as_array().unwrap();
    assert_eq!(rows.len(), found.rows.len());
    let (printed, computed) = (rows[1]["with"]["value"].as_f64().unwrap(), found.rows[1].a.value.unwrap());
    assert!((printed / computed - 1.0).abs() < 1e-12);
}

#[test]
fn names_that_do_not_fit_are_refused() {
    let file = format!("{}/demo_baths/hard_water_cleaner.ron", env!("CARGO_MANIFEST_DIR"));
    for (with, and, needle) in
        [("EDTA", "edta-na4-39", "two different products"), ("EDTA", "moonshine", "--and is \"moonshine\"")]
    {
        let output = process(&["compare", &file, "--with", with, "--and", and]);
        assert_eq!(output.status.code(), Some(2));
        let error = String::from_utf8(output.stderr).unwrap();
        assert!(error.contains(needle), "{error}");
    }
}
