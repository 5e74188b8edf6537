//! `bathwright dose`: the smallest dose that holds, its bands, and the reason when none does.

use super::solve::{at_set_point, heading, json_object};
use super::table::Table;
use super::{CommandError, Outcome, choose_agent, needs_walls, print};
use crate::bath::{Bath, Wall};
use crate::dosing::{
    Assessment, Change, Hold, Plan, Reason, Sampled, Search, Verdict, place_words, plan, sample, search,
    share_of_limit, verdict, wall_name, why_none,
};
use crate::quantity::{fixed, p_value, percent, significant};
use serde_json::{Value, json};
use std::io::Write;

/// Everything that a dose decision consists of.
pub struct Decision {
    /// The bath, with the found dose in it.
    pub bath: Bath,
    /// Number of the dosed agent.
    pub agent: usize,
    /// What the search found.
    pub search: Search,
    /// The additions for the dose found, or for no dose when none holds.
    pub plan: Plan,
    /// One sentence on the rounded dose.
    pub verdict: Verdict,
    /// Why none holds.
    pub reason: Option<Reason>,
    /// The rounded dose under draws of all constants.
    pub sampled: Option<Sampled>,
}

/// Draws of all constants, and their seed: the same answer every time.
const DRAWS: usize = 10_000;
const SEED: u64 = 1;

/// Searches, rounds, plans and judges.
pub fn decide(bath: &Bath, name: Option<&str>) -> Result<Decision, CommandError> {
    let (mut bath, agent) = choose_agent(bath, name)?;
    needs_walls(&bath, "find the dose")?;
    let search = search(&bath, agent)?;
    let reason = if search.found.is_none() { Some(why_none(&bath, &search)?) } else { None };
    let mut doses = bath.doses();
    doses[agent] = search.found.as_ref().map_or(0.0, |found| found.dose_g_l);
    let plan = plan(&bath, &doses)?;
    bath.project.agents[agent].dose_g_l = plan.rounded_doses[agent];
    let verdict = verdict(&bath, &plan.after, Some(&search));
    let sampled = sample(&bath, &plan.rounded_doses, DRAWS, SEED)?;
    Ok(Decision { bath, agent, search, plan, verdict, reason, sampled })
}

pub fn run(
    bath: &Bath,
    name: Option<&str>,
    as_json: bool,
    out: &mut dyn Write,
) -> Result<Outcome, CommandError> {
    let decision = decide(bath, name)?;
    let text = if as_json { format!("{:#}\n", json_text(&decision)?) } else { text(&decision)? };
    print(out, &text)?;
    Ok(if decision.search.found.is_some() { Outcome::Done } else { Outcome::NoDoseHolds })
}

fn hold_word(hold: Hold) -> &'static str {
    match hold {
        Hold::Not => "does not hold",
        Hold::Plain => "holds by plain numbers",
        Hold::Sure => "holds with 95 % confidence",
    }
}

fn wall_json(bath: &Bath, assessment: &Assessment) -> Vec<Value> {
    assessment
        .walls
        .iter()
        .map(|wall| {
            let (kind, of) = match wall.wall {
                Wall::Ceiling(i) => ("ceiling", bath.system.components[bath.limits[i].component].clone()),
                Wall::Floor(i) => ("floor", bath.system.components[bath.limits[i].component].clone()),
                Wall::Solid(k) => ("solid", bath.system.solids[k].token.clone()),
                Wall::Derived(i) => ("derived", bath.system.components[bath.limits[i].component].clone()),
            };
            json!({
                "wall": kind,
                "of": of,
                "pH": wall.worst.ph,
                "temperature_C": wall.worst.temperature_c,
                "drifts": bath.drifts.iter().zip(&wall.worst.position.0).map(|(axis, t)| json!({
                    "of": axis.name, "value": axis.value(*t), "unit": axis.unit })).collect::<Vec<_>>(),
                "value": wall.worst.value,
                "sigma_log10": wall.worst.sigma,
                "share_of_limit": 10f64.powf(wall.excess),
                "share_of_limit_95": 10f64.powf(wall.excess_95),
            })
        })
        .collect()
}

fn change_json(change: &Change) -> Value {
    match change {
        Change::Ph { set, dose_g_l } => json!({ "pH_set": set, "dose_g_per_L": dose_g_l }),
        Change::Cap(dose) => json!({ "cap_at_least_g_per_L": dose }),
        Change::Agent { product, name, dose_g_l } => {
            json!({ "product": product, "name": name, "dose_g_per_L": dose_g_l })
        }
    }
}

fn json_text(decision: &Decision) -> Result<Value, CommandError> {
    let Decision { bath, agent, search, plan, verdict, reason, sampled } = decision;
    let solution = at_set_point(bath, &plan.rounded_doses)?;
    let mut object = json_object(bath, &solution, &plan.rounded_doses);
    let product = &bath.agents[*agent].product;
    object.insert("agent".into(), json!({ "product": product.id, "name": product.name }));
    object.insert("holds".into(), json!(search.found.is_some()));
    object.insert(
        "confidence".into(),
        match &search.found {
            Some(found) => json!(if found.hold == Hold::Sure { "95 %" } else { "plain" }),
            None => Value::Null,
        },
    );
    let dose = search.found.as_ref().map(|found| found.dose_g_l);
    object.insert("dose_g_per_L".into(), json!(dose));
    object.insert("plain_dose_g_per_L".into(), json!(search.plain_g_l));
    object.insert(
        "bands".into(),
        search
            .bands
            .iter()
            .map(|band| json!({ "from_g_per_L": band.from, "to_g_per_L": band.to, "holds": hold_word(band.hold) }))
            .collect(),
    );
    object.insert(
        "additions".into(),
        plan.additions
            .iter()
            .map(|addition| {
                json!({
                    "product": addition.product.id,
                    "name": addition.product.name,
                    "exact_g_per_L": addition.exact_g_l,
                    "exact_kg_per_tank": addition.measured.exact_kg,
                    "exact_L_per_tank": addition.measured.exact_l,
                    "measure_out": addition.measured.amount,
                    "measured_kg_per_tank": addition.measured.rounded_kg,
                })
            })
            .collect(),
    );
    object.insert("refused".into(), json!(plan.refused));
    object.insert("worst_cases".into(), Value::Array(wall_json(bath, &plan.after)));
    object.insert("worst_cases_before".into(), Value::Array(wall_json(bath, &plan.before)));
    object.insert("verdict".into(), json!({ "state": verdict.state.word(), "sentence": verdict.sentence }));
    object.insert(
        "sampled".into(),
        json!(sampled.as_ref().map(|sampled| json!({
            "draws": sampled.draws,
            "holding": sampled.holding,
            "wall": wall_name(bath, sampled.wall),
            "share_of_limit_median": 10f64.powf(sampled.median),
            "share_of_limit_95": 10f64.powf(sampled.excess_95),
        }))),
    );
    object.insert(
        "reason".into(),
        match reason {
            Some(reason) => json!({
                "best_dose_g_per_L": reason.best_dose_g_l,
                "share_of_limit": 10f64.powf(reason.best.excess()),
                "agent_held_by": reason.ledger.iter().map(|entry| json!({
                    "holder": entry.holder.name(bath), "share": entry.share })).collect::<Vec<_>>(),
                "changes_that_work": reason.changes.iter().map(change_json).collect::<Vec<_>>(),
            }),
            None => Value::Null,
        },
    );
    Ok(Value::Object(object))
}

/// The decision in words and tables.
pub fn text(decision: &Decision) -> Result<String, CommandError> {
    let Decision { bath, agent, search, plan, verdict, reason, sampled } = decision;
    let product = &bath.agents[*agent].product;
    let solution = at_set_point(bath, &plan.rounded_doses)?;
    let mut text = heading(bath, &solution, &plan.rounded_doses);
    text += "\nFree metals over the operating range, worst case, with walls kept in solution\n";
    text += &limits_table(bath, &plan.before, &plan.after);
    text += &format!("\nDoses of {}\n", product.name);
    let mut table = Table::new(&["from g/L", "to g/L", ""]);
    for band in &search.bands {
        table.row([significant(band.from, 4), significant(band.to, 4), hold_word(band.hold).to_owned()]);
    }
    text += &table.text();
    match &search.found {
        Some(found) => {
            text += &format!(
                "\nSmallest dose: {} g/L, {}.\n",
                significant(found.dose_g_l, 4),
                hold_word(found.hold)
            );
            if let Some(plain) = search.plain_g_l.filter(|plain| *plain < found.dose_g_l) {
                text += &format!("By plain numbers {} g/L would do.\n", significant(plain, 4));
            }
            text += &additions(decision);
        }
        None => {
            if let Some(reason) = reason {
                text += &reason_text(bath, *agent, reason);
            }
        }
    }
    text += &format!("\n{}. {}\n", verdict.state.word(), verdict.sentence);
    if let Some(sampled) = sampled {
        text += &format!(
            "Of {} draws of all constants {} hold at the worst place; 19 of 20 stay under {} of {}.\n",
            crate::quantity::grouped(sampled.draws as f64, 0),
            percent(sampled.holding as f64 / sampled.draws as f64),
            share_of_limit(sampled.excess_95),
            wall_name(bath, sampled.wall),
        );
    }
    Ok(text + &super::solve::footing(bath, &solution))
}

/// Free metals before and after against their limits.
pub fn limits_table(bath: &Bath, before: &Assessment, after: &Assessment) -> String {
    let mut table = Table::new(&[
        "metal",
        "limit",
        "pM limit",
        "pM before",
        "pM after",
        "of limit",
        "at 95 %",
        "worst at",
    ]);
    for (old, new) in before.walls.iter().zip(&after.walls) {
        let (name, kind, limit) = match new.wall {
            Wall::Ceiling(i) => {
                (bath.component(bath.limits[i].component).name.clone(), "ceiling", bath.limits[i].ceiling)
            }
            Wall::Floor(i) => {
                (bath.component(bath.limits[i].component).name.clone(), "floor", bath.limits[i].floor)
            }
            Wall::Solid(_) | Wall::Derived(_) => continue,
        };
        table.row([
            name,
            kind.to_owned(),
            limit.map_or("–".to_owned(), p_value),
            p_value(old.worst.value),
            p_value(new.worst.value),
            share_of_limit(new.excess),
            share_of_limit(new.excess_95),
            place_words(bath, &new.worst),
        ]);
    }
    let mut text = table.text();
    for wall in after.walls.iter().filter(|wall| wall.excess > -1.0) {
        if let Wall::Solid(k) = wall.wall {
            text += &format!(
                "  {}: saturation index {} at its worst\n",
                bath.solid_name(k),
                fixed(wall.excess, 2)
            );
        }
    }
    for wall in after.walls.iter().filter(|wall| matches!(wall.wall, Wall::Derived(_))) {
        text += &format!(
            "  {} of {}, {} at 95 %, at its worst ({})\n",
            share_of_limit(wall.excess),
            wall_name(bath, wall.wall),
            share_of_limit(wall.excess_95),
            place_words(bath, &wall.worst)
        );
    }
    for limit in 0..bath.limits.len() {
        text += &format!("  {}\n", bath.limit_line(limit));
    }
    text
}

/// The additions for the tank.
pub fn additions(decision: &Decision) -> String {
    additions_text(&decision.bath, &decision.plan)
}

/// The additions of a plan.
pub fn additions_text(bath: &Bath, plan: &Plan) -> String {
    if let Some(refused) = &plan.refused {
        return format!("\nRefused: {refused}\n");
    }
    let volume = bath.project.tank.volume_l;
    let mut text = format!("\nAdditions for {} L\n", crate::quantity::grouped(volume, 0));
    let mut table = Table::new(&["product", "measure out", "exact", "g/L"]);
    for addition in &plan.additions {
        table.row([
            addition.product.name.clone(),
            addition.measured.amount.clone(),
            addition.measured.exact.clone(),
            significant(addition.exact_g_l, 4),
        ]);
    }
    text += &table.text();
    if let Some(failure) = &plan.uncorrected {
        text += &format!("Note: {failure}.\n");
    }
    text
}

fn reason_text(bath: &Bath, agent: usize, reason: &Reason) -> String {
    let name = &bath.agents[agent].product.name;
    let mut text = format!(
        "\nNo dose of {name} holds. The best, {} g/L, reaches {} of the nearest limit.\n",
        significant(reason.best_dose_g_l, 3),
        share_of_limit(reason.best.excess()),
    );
    let holders: Vec<String> = reason
        .ledger
        .iter()
        .filter(|entry| entry.share >= 0.01)
        .map(|entry| format!("{} {}", entry.holder.name(bath), percent(entry.share)))
        .collect();
    if !holders.is_empty() {
        text += &format!("There the agent is held by: {}.\n", holders.join(", "));
    }
    for change in &reason.changes {
        text += &match change {
            Change::Ph { set, dose_g_l } => {
                format!(
                    "It would hold with the pH range moved to a set point of {}, from {} g/L.\n",
                    fixed(*set, 1),
                    significant(*dose_g_l, 3)
                )
            }
            Change::Cap(dose) => {
                format!("It would hold from {} g/L if the cap allowed it.\n", significant(*dose, 3))
            }
            Change::Agent { name, dose_g_l, .. } => {
                format!("It would hold with {name}, from {} g/L.\n", significant(*dose_g_l, 3))
            }
        };
    }
    if reason.changes.is_empty() {
        text += "No shift of pH, larger cap or other product that was tried holds either.\n";
    }
    text
}
