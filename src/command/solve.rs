//! `bathwright solve`: the equilibrium at the set point, with the doses of the project.

use super::table::Table;
use super::{CommandError, Outcome, print};
use crate::bath::{Bath, Rule, Solids, flags};
use crate::chemistry::{Potentials, pretty};
use crate::equilibrium::{Equilibrium, Solver, nernst};
use crate::quantity::{fixed, kelvin, p_value, significant};
use serde_json::{Map, Value, json};
use std::io::Write;

/// Species under this share of the largest are left out of the printed table (never of the JSON).
const SMALLEST_PRINTED: f64 = 1e-12;

pub fn run(bath: &Bath, as_json: bool, out: &mut dyn Write) -> Result<Outcome, CommandError> {
    let doses = bath.doses();
    let solution = at_set_point(bath, &doses)?;
    if as_json {
        let object = json_object(bath, &solution, &doses);
        print(out, &format!("{:#}\n", Value::Object(object)))?;
    } else {
        print(out, &text(bath, &solution, &doses))?;
    }
    Ok(Outcome::Done)
}

/// The real bath at its set point.
pub fn at_set_point(bath: &Bath, doses: &[f64]) -> Result<Equilibrium, CommandError> {
    let constants = bath.constants_at(bath.project.tank.temperature_c.set);
    let totals = bath.corrected(doses)?.totals;
    Ok(bath.solve_totals(&mut Solver::new(), &constants, &totals, bath.ph_set(), Solids::Real)?)
}

fn ph(bath: &Bath, solution: &Equilibrium) -> Option<f64> {
    bath.system.proton.map(|proton| solution.ph(proton))
}

fn finite(value: f64) -> Value {
    if value.is_finite() { json!(value) } else { Value::Null }
}

/// Potential of a metal in this bath, V against the standard hydrogen electrode.
fn potential(bath: &Bath, solution: &Equilibrium, metal: usize) -> Option<f64> {
    let couple = Potentials::built_in().couple(&bath.system.components[metal])?;
    let temperature = kelvin(bath.project.tank.temperature_c.set);
    solution.ln_a[metal].is_finite().then(|| nernst(couple, solution.ln_a[metal], temperature))
}

/// Potential of a metal in this bath against each reference electrode that stands on a salt bridge at room temperature, V.
fn against_references<'a>(
    bath: &'a Bath,
    solution: &'a Equilibrium,
    metal: usize,
) -> impl Iterator<Item = (&'static str, f64)> + 'a {
    let references = Potentials::built_in().references.iter();
    let potential = potential(bath, solution, metal);
    references.filter_map(move |reference| Some((reference.name.as_str(), potential? - reference.e_v)))
}

/// The potentials of all metals, where any is known.
fn potentials_table(bath: &Bath, solution: &Equilibrium) -> String {
    let references = &Potentials::built_in().references;
    let known: Vec<(usize, f64)> =
        bath.metals().filter_map(|metal| Some((metal, potential(bath, solution, metal)?))).collect();
    if known.is_empty() {
        return String::new();
    }
    let mut text = "\nPotential of each metal in this bath, V, against\n".to_owned();
    for (number, chunk) in known.chunks(METALS_IN_A_ROW).enumerate() {
        let name =
            |i: usize| chunk.get(i).map_or(String::new(), |(m, _)| pretty(&bath.system.components[*m]));
        let names: [String; METALS_IN_A_ROW] = std::array::from_fn(name);
        let head: Vec<&str> = std::iter::once("electrode").chain(names.iter().map(String::as_str)).collect();
        let mut table = Table::new(&head);
        let electrodes = std::iter::once(("standard hydrogen", 0.0))
            .chain(references.iter().map(|reference| (reference.name.as_str(), reference.e_v)));
        for (electrode, e_v) in electrodes {
            let cell = |i: usize| chunk.get(i).map_or(String::new(), |(_, e)| fixed(e - e_v, 3));
            let [a, b, c, d] = std::array::from_fn(cell);
            table.row([electrode.to_owned(), a, b, c, d]);
        }
        text += if number > 0 { "\n" } else { "" };
        text += &table.text();
    }
    text + "  Reference electrodes on a salt bridge at 25 °C.\n"
}

/// Metals beside each other in the table of potentials.
const METALS_IN_A_ROW: usize = 4;

/// Rule of a solid in words.
fn rule_word(rule: Rule) -> &'static str {
    match rule {
        Rule::MayForm => "may form",
        Rule::MustNotForm => "must not form",
        Rule::TooSlow => "too slow",
    }
}

/// The fields that `solve` and `dose` share; their meaning is documented in the README.
pub fn json_object(bath: &Bath, solution: &Equilibrium, doses: &[f64]) -> Map<String, Value> {
    let temperature = bath.project.tank.temperature_c.set;
    let mut free = Map::new();
    for metal in bath.metals() {
        let value = solution.free(metal);
        let entry = json!({
            "mol_per_L": finite(value),
            "pM": finite(-solution.ln_c[metal] / crate::equilibrium::LN_10),
            "E_SHE_V": potential(bath, solution, metal).map_or(Value::Null, finite),
            "E_V": against_references(bath, solution, metal)
                .map(|(name, e)| (name.to_owned(), finite(e)))
                .collect::<Map<String, Value>>(),
        });
        free.insert(bath.system.components[metal].clone(), entry);
    }
    let species = bath.system.species.iter().zip(&solution.c);
    let species: Map<String, Value> =
        species.filter(|(_, c)| **c > 0.0).map(|(s, c)| (s.token.clone(), finite(*c))).collect();
    let mut solids = Map::new();
    let possible = |k: &usize| solution.ln_saturation[*k].is_finite();
    for k in (0..bath.system.solids.len()).filter(possible) {
        let solid = &bath.system.solids[k];
        let entry = json!({
            "mol_per_L": solution.solids[k],
            "saturation_index": finite(solution.saturation_index(k)),
            "rule": rule_word(bath.rules[k]),
        });
        solids.insert(solid.token.clone(), entry);
    }
    let agents: Vec<Value> = bath
        .agents
        .iter()
        .zip(doses)
        .map(|(agent, dose)| json!({ "product": agent.product.id, "name": agent.product.name, "g_per_L": dose }))
        .collect();
    let gases: Map<String, Value> = bath
        .system
        .gases
        .iter()
        .zip(&solution.ln_pressure)
        .map(|(gas, ln_pressure)| (gas.token.clone(), finite(ln_pressure.exp())))
        .collect();
    let certificate = solution.certificate;
    let flags: Vec<Value> =
        flags(bath, solution, temperature).iter().map(|flag| json!(flag.to_string())).collect();
    let mut object = Map::new();
    object.insert("bath".into(), json!(bath.project.name));
    object.insert("invented".into(), json!(bath.project.invented));
    object.insert("pH".into(), ph(bath, solution).map_or(Value::Null, finite));
    object.insert("temperature_C".into(), json!(temperature));
    object.insert("activity".into(), json!(bath.project.activity.name()));
    object.insert("ionic_strength".into(), json!(solution.ionic_strength));
    object.insert("doses".into(), Value::Array(agents));
    object.insert("free_metals".into(), Value::Object(free));
    object.insert("species".into(), Value::Object(species));
    object.insert("solids".into(), Value::Object(solids));
    object.insert("gases_bar".into(), Value::Object(gases));
    object.insert(
        "certificate".into(),
        json!({
            "holds": certificate.holds(),
            "balance_residual": finite(certificate.balance_residual),
            "kkt_residual": finite(certificate.kkt_residual),
            "activity_residual": finite(certificate.activity_residual),
            "charge_gap_mol_per_L": finite(solution.charge_gap),
            "iterations": certificate.iterations,
        }),
    );
    object.insert("flags".into(), Value::Array(flags));
    object
}

fn text(bath: &Bath, solution: &Equilibrium, doses: &[f64]) -> String {
    let mut text = heading(bath, solution, doses);
    text += "\nFree metals\n";
    let mut table = Table::new(&["metal", "mol/L", "pM", "mg/L"]);
    for metal in bath.metals().filter(|&metal| solution.free(metal) > 0.0) {
        let value = solution.free(metal);
        let mg = bath
            .component(metal)
            .molar_mass()
            .map_or("–".to_owned(), |mass| significant(value * mass * 1e3, 2));
        table.row([pretty(&bath.system.components[metal]), significant(value, 2), p_value(value), mg]);
    }
    text += &table.text();
    text += &potentials_table(bath, solution);
    text += "\nSpecies, largest first\n";
    let mut order: Vec<usize> = (0..solution.c.len()).filter(|&j| solution.c[j] > 0.0).collect();
    order.sort_by(|&a, &b| solution.c[b].total_cmp(&solution.c[a]));
    let largest = order.first().map_or(0.0, |&j| solution.c[j]);
    let mut table = Table::new(&["species", "mol/L"]);
    for &j in order.iter().filter(|&&j| solution.c[j] > SMALLEST_PRINTED * largest) {
        table.row([pretty(&bath.system.species[j].token), significant(solution.c[j], 4)]);
    }
    text += &table.text();
    let mut solids: Vec<usize> =
        (0..solution.solids.len()).filter(|&k| solution.ln_saturation[k].is_finite()).collect();
    if !solids.is_empty() {
        solids.sort_by(|&a, &b| solution.ln_saturation[b].total_cmp(&solution.ln_saturation[a]));
        text += "\nSolids, nearest to saturation first\n";
        let mut table = Table::new(&["solid", "mol/L", "saturation index", "rule"]);
        for k in solids {
            let amount =
                if solution.solids[k] > 0.0 { significant(solution.solids[k], 4) } else { "–".to_owned() };
            table.row([
                pretty(&bath.system.solids[k].token),
                amount,
                fixed(solution.saturation_index(k), 2),
                rule_word(bath.rules[k]).to_owned(),
            ]);
        }
        text += &table.text();
    }
    text + &footing(bath, solution)
}

/// Bath, set point and doses.
pub fn heading(bath: &Bath, solution: &Equilibrium, doses: &[f64]) -> String {
    let project = &bath.project;
    let place = if project.place.is_empty() { String::new() } else { format!("{}: ", project.place) };
    let invented = if project.invented { " (demo bath, invented numbers)" } else { "" };
    let mut text = format!("{place}{}{invented}\n", project.name);
    let ph = ph(bath, solution).map_or(String::new(), |ph| {
        let how = if bath.ph().is_some() { "held" } else { "predicted" };
        format!("pH {} ({how}), ", fixed(ph, 2))
    });
    text += &format!(
        "{ph}{} °C, ionic strength {} mol/L, activity: {}\n",
        fixed(project.tank.temperature_c.set, 1),
        significant(solution.ionic_strength, 3),
        project.activity.name(),
    );
    for (agent, dose) in bath.agents.iter().zip(doses) {
        text += &format!("dose of {}: {} g/L\n", agent.product.name, significant(*dose, 4));
    }
    text
}

/// Certificate and flags.
pub fn footing(bath: &Bath, solution: &Equilibrium) -> String {
    let certificate = solution.certificate;
    let mut text = format!(
        "\nBalances close to {:.0e}, solids to {:.0e}; charge gap {} mol/L made up by {}.\n",
        certificate.balance_residual,
        certificate.kkt_residual,
        significant(solution.charge_gap, 3),
        if bath.ph().is_some() {
            "the acid or alkali that holds the pH"
        } else {
            "ions that the recipe does not list"
        },
    );
    for flag in flags(bath, solution, bath.project.tank.temperature_c.set) {
        text += &format!("Note: {flag}.\n");
    }
    text
}
