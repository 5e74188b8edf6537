//! A bath open to the carbon dioxide of the air.

use bathwright::bath::{Bath, Point, read};
use bathwright::equilibrium::{Equilibrium, LN_10, Sensitivities, Solver};

fn solve(air: &str, ph: &str, contents: &str) -> (Bath, Equilibrium) {
    let text = format!(
        "(format: 1, name: \"Open water\", tank: (volume_l: 1, ph: {ph}, temperature_c: (low: 25, set: 25, high: 25), \
         air: {air}), contents: [{contents}])"
    );
    let bath = Bath::resolve(&read(&text, "test").unwrap()).unwrap();
    let constants = bath.constants_at(25.0);
    let point = Point { ph: bath.ph_set(), doses: &[] };
    let solved = bath.solve(&mut Solver::new(), &constants, point).unwrap();
    assert!(solved.certificate.holds(), "{:?}", solved.certificate);
    (bath, solved)
}

fn ph(bath: &Bath, solved: &Equilibrium) -> f64 {
    solved.ph(bath.system.proton.unwrap())
}

const OUTDOORS: &str = "Open(co2_bar: 3.16228e-4)";

/// Stumm & Morgan, Aquatic Chemistry, 3rd ed. 1996, ch. 4 (from memory): pure water under 10^−3.5 bar CO2 has pH 5.65.
#[test]
fn rain_water_has_its_published_ph() {
    let (bath, solved) = solve(OUTDOORS, "Predicted", "(what: \"nacl\", amount: \"1e-9 mol/L\")");
    assert!((ph(&bath, &solved) - 5.65).abs() < 0.02, "{}", ph(&bath, &solved));
}

/// Stumm & Morgan, as above (from memory): water over calcite under 10^−3.5 bar CO2 has pH 8.3 and 10^−3.3 mol/L of
/// calcium.
#[test]
fn water_over_calcite_in_air_has_its_published_composition() {
    let text = "(format: 1, name: \"Calcite\", tank: (volume_l: 1, ph: Predicted, temperature_c: (low: 25, set: 25, high: \
                25), air: Open(co2_bar: 3.16228e-4)), contents: [(what: \"calcium\", amount: \"0.01 mol/L\"), (what: \
                \"CO3-2\", amount: \"0.01 mol/L\")], solids: [(solid: \"CaCO3(cr)\", rule: MayForm)])";
    let bath = Bath::resolve(&read(text, "test").unwrap()).unwrap();
    let constants = bath.constants_at(25.0);
    let solved = bath.solve(&mut Solver::new(), &constants, Point { ph: None, doses: &[] }).unwrap();
    assert!(solved.certificate.holds(), "{:?}", solved.certificate);
    let calcium = bath.system.component("Ca+2").unwrap();
    let dissolved = solved.totals[calcium] - solved.solids.iter().sum::<f64>();
    assert!((ph(&bath, &solved) - 8.3).abs() < 0.05, "{}", ph(&bath, &solved));
    assert!((dissolved.log10() + 3.3).abs() < 0.05, "{dissolved}");
}

/// What the open bath has taken up, given to a closed one, leaves the same solution: no check of the open solver by
/// itself.
#[test]
fn a_closed_bath_with_the_same_carbon_dioxide_is_the_same_bath() {
    let caustic = "(what: \"naoh-flake\", amount: \"4 g/L\")";
    let (open, in_air) = solve(OUTDOORS, "Predicted", caustic);
    let gas = open.system.gases.iter().position(|gas| gas.token == "CO2(g)").unwrap();
    let uptake = in_air.uptake[gas];
    assert!(uptake > 0.05 && uptake < 0.11, "caustic takes up nearly its own amount: {uptake}");
    let carbonate = format!("{caustic}, (what: \"CO3-2\", amount: \"{uptake} mol/L\")");
    // Carbonate without its hydrogen: the closed bath gets that as the total of H+.
    let (closed, _) = solve("Closed", "Held(low: 9, set: 9, high: 9)", &carbonate);
    let constants = closed.constants_at(25.0);
    let mut totals = closed.totals(&[]);
    totals[closed.system.proton.unwrap()] += 2.0 * uptake;
    let solids = bathwright::bath::Solids::Real;
    let sealed = closed.solve_totals(&mut Solver::new(), &constants, &totals, None, solids).unwrap();
    for (token, ln_a) in open.system.components.iter().zip(&in_air.ln_a) {
        let i = closed.system.component(token).unwrap();
        if ln_a.is_finite() {
            assert!((ln_a - sealed.ln_a[i]).abs() < 1e-8, "{token}: {ln_a} {}", sealed.ln_a[i]);
        }
    }
    assert!((sealed.ln_pressure[gas] / LN_10 + 3.5).abs() < 1e-6);
}

#[test]
fn a_held_ph_in_air_holds_its_carbonate_too() {
    let held = "Held(low: 10, set: 10, high: 10)";
    let (bath, solved) = solve(OUTDOORS, held, "(what: \"naoh-flake\", amount: \"4 g/L\")");
    let gas = bath.system.gases.iter().position(|gas| gas.token == "CO2(g)").unwrap();
    assert!((solved.ln_pressure[gas] - f64::ln(3.16228e-4)).abs() < 1e-9);
    assert!(solved.uptake[gas] > 0.0);
}

/// Derivatives in air against differences: more sodium takes up more carbon dioxide. Away from the balanced charge, at
/// which the counter-ion changes its sign.
#[test]
fn derivatives_in_air_agree_with_differences() {
    let (bath, _) = solve(OUTDOORS, "Predicted", "(what: \"naoh-flake\", amount: \"4 g/L\")");
    let constants = bath.constants_at(25.0);
    let solids = bathwright::bath::Solids::Real;
    let (sodium, proton) = (bath.system.component("Na+").unwrap(), bath.system.proton.unwrap());
    let mut totals = bath.totals(&[]);
    totals[sodium] += 0.01;
    let at = |change: f64| {
        let mut moved = totals.clone();
        moved[sodium] += change;
        bath.solve_totals(&mut Solver::new(), &constants, &moved, None, solids).unwrap()
    };
    let here = at(0.0);
    let ask = |answers: &Sensitivities| answers.by_total(sodium).ln_a[proton];
    let exact = bath.sensitivities(&constants, &totals, None, solids, &here, ask).unwrap();
    let numeric = (at(1e-5).ln_a[proton] - at(-1e-5).ln_a[proton]) / 2e-5;
    assert!(exact.abs() > 1e-3, "{exact}");
    assert!((numeric - exact).abs() < 1e-5 * exact.abs(), "{numeric} {exact}");
}

#[test]
fn an_impossible_pressure_is_refused_with_its_field() {
    let text = "(format: 1, name: \"x\", tank: (volume_l: 1, ph: Predicted, temperature_c: (low: 25, set: 25, high: 25), \
                air: Open(co2_bar: -1)), contents: [(what: \"nacl\", amount: \"1 g/L\")])";
    let error = Bath::resolve(&read(text, "test").unwrap()).unwrap_err().to_string();
    assert!(error.contains("tank.air.co2_bar") && error.contains("-1"), "{error}");
}
