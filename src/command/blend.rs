//! `bathwright dose --blend`: the cheapest or lightest doses of all agents that are not locked, and what binds them.

use super::dose::{additions_text, limits_table};
use super::solve::{at_set_point, footing, heading, json_object};
use super::table::Table;
use super::{CommandError, Outcome, print};
use crate::bath::Bath;
use crate::dosing::{
    Aim, Binding, Blend, Hold, blend, place_words, plan, share_of_limit, verdict, wall_name,
};
use crate::quantity::significant;
use serde_json::{Value, json};
use std::io::Write;

pub fn run(bath: &Bath, aim: Aim, as_json: bool, out: &mut dyn Write) -> Result<Outcome, CommandError> {
    let agents: Vec<usize> = (0..bath.agents.len()).filter(|&i| !bath.project.agents[i].locked).collect();
    let found = blend(bath, &agents, aim).map_err(|error| CommandError::Option(error.to_string()))?;
    let text = if as_json {
        format!("{:#}\n", json_text(bath, found.as_ref())?)
    } else {
        text(bath, found.as_ref())?
    };
    print(out, &text)?;
    Ok(if found.is_some() { Outcome::Done } else { Outcome::NoDoseHolds })
}

fn aim_words(aim: Aim) -> &'static str {
    match aim {
        Aim::Cheapest => "cheapest",
        Aim::Lightest => "lightest",
    }
}

/// Price or weight per 1000 L, as people compare it.
fn per_1000_l(aim: Aim, per_litre: f64) -> String {
    match aim {
        Aim::Cheapest => format!("{} at list prices per 1000 L", significant(1000.0 * per_litre, 3)),
        Aim::Lightest => format!("{} kg per 1000 L", significant(per_litre, 3)),
    }
}

fn text(bath: &Bath, found: Option<&Blend>) -> Result<String, CommandError> {
    let Some(found) = found else {
        return Ok("No blend of these agents holds up to their caps; `dose` says why for each.\n".to_owned());
    };
    let plan = plan(bath, &found.doses)?;
    let solution = at_set_point(bath, &plan.rounded_doses)?;
    let mut text = heading(bath, &solution, &plan.rounded_doses);
    let sure = if found.hold == Hold::Sure { "with 95 % confidence" } else { "by plain numbers only" };
    text += &format!(
        "\nThe {} blend that holds {sure}: {}\n",
        aim_words(found.aim),
        per_1000_l(found.aim, found.per_litre)
    );
    let mut table = Table::new(&["product", "g/L"]);
    for &agent in &found.agents {
        let name = bath.agents[agent].product.name.clone();
        table.row([name, significant(found.doses[agent], 4)]);
    }
    text += &table.text();
    text += "\nWhat keeps it from being less\n";
    for binding in &found.binding {
        text += &format!("  {}\n", binding_words(bath, found.aim, binding));
    }
    text += "\nFree metals over the operating range, worst case, with walls kept in solution\n";
    text += &limits_table(bath, &plan.before, &plan.after);
    text += &additions_text(bath, &plan);
    let verdict = verdict(bath, &plan.after, None);
    text += &format!("\n{}. {}\n", verdict.state.word(), verdict.sentence);
    Ok(text + &footing(bath, &solution))
}

/// "the copper ceiling at pH 9.2, 45 °C; 0.1 pH lower would cost 0.8 g/L".
fn binding_words(bath: &Bath, aim: Aim, binding: &Binding) -> String {
    let worsenings: Vec<String> = binding
        .worsenings
        .iter()
        .map(|worsening| format!("{} would cost {} more", worsening.what, per_1000_l(aim, worsening.cost)))
        .collect();
    let place = place_words(bath, &binding.at);
    let head = format!("{} at {place}", wall_name(bath, binding.wall));
    let edge = (binding.per_decade == 0.0)
        .then(|| "any less fails at once, as the last of a solid dissolves here".to_owned());
    std::iter::once(head).chain(edge).chain(worsenings).collect::<Vec<_>>().join("; ")
}

fn json_text(bath: &Bath, found: Option<&Blend>) -> Result<Value, CommandError> {
    let Some(found) = found else { return Ok(json!({ "holds": false })) };
    let plan = plan(bath, &found.doses)?;
    let solution = at_set_point(bath, &plan.rounded_doses)?;
    let mut object = json_object(bath, &solution, &plan.rounded_doses);
    object.insert("holds".into(), json!(true));
    object.insert("confidence".into(), json!(if found.hold == Hold::Sure { "95 %" } else { "plain" }));
    object.insert("aim".into(), json!(aim_words(found.aim)));
    object.insert("per_L".into(), json!(found.per_litre));
    let doses = found.agents.iter().map(|&agent| {
        let product = &bath.agents[agent].product;
        json!({ "product": product.id, "name": product.name, "dose_g_per_L": found.doses[agent] })
    });
    object.insert("blend".into(), doses.collect());
    let binding = found.binding.iter().map(|binding| {
        json!({
            "wall": wall_name(bath, binding.wall),
            "at": place_words(bath, &binding.at),
            "per_decade": binding.per_decade,
            "worsenings": binding.worsenings.iter().map(|worsening| json!({
                "what": worsening.what, "cost_per_L": worsening.cost })).collect::<Vec<_>>(),
        })
    });
    object.insert("binding".into(), binding.collect());
    let walls = plan.after.walls.iter().map(|wall| {
        json!({ "wall": wall_name(bath, wall.wall), "share_of_limit": share_of_limit(wall.excess),
            "share_of_limit_95": share_of_limit(wall.excess_95) })
    });
    object.insert("worst_cases".into(), walls.collect());
    Ok(Value::Object(object))
}
