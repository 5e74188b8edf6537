//! `bathwright correct`: from today's analysis to the addition or bail-out that brings the bath back.

use super::dose::additions_text;
use super::table::Table;
use super::{CommandError, Outcome, choose_agent, print};
use crate::bath::{Bath, Project};
use crate::dosing::{CONFIDENCE_95, Hold, place_words, plan, share_of_limit, wall_name};
use crate::quantity::{fixed, grouped, p_value, percent, significant};
use crate::study::correction::{
    BailOut, Correction, Effect, FoundPh, Input, Refill, Remedy, WallSpread, correct,
};
use std::io::Write;

/// Inputs printed with their share of the variance at most.
const RANKED: usize = 5;
/// A dose for a perfect analysis is worth saying when it is under this share of the one found.
const WORTH_SAYING: f64 = 0.98;

pub fn run(
    bath: &Bath,
    name: Option<&str>,
    as_json: bool,
    out: &mut dyn Write,
) -> Result<Outcome, CommandError> {
    let (bath, agent) = choose_agent(bath, name)?;
    let correction = correct_project(&bath.project, agent)?;
    let text = if as_json {
        format!("{:#}\n", super::correct_json::object(&correction)?)
    } else {
        text(&correction)?
    };
    print(out, &text)?;
    Ok(if matches!(correction.remedy, Remedy::None(_)) { Outcome::NoDoseHolds } else { Outcome::Done })
}

fn correct_project(project: &Project, agent: usize) -> Result<Correction, CommandError> {
    correct(project, Some(agent)).map_err(|error| CommandError::Option(error.to_string()))
}

fn text(correction: &Correction) -> Result<String, CommandError> {
    let bath = &correction.bath;
    let project = &bath.project;
    let place = if project.place.is_empty() { String::new() } else { format!("{}: ", project.place) };
    let invented = if project.invented { " (demo bath, invented numbers)" } else { "" };
    let mut text = format!("{place}{}{invented}\n\nAs found\n", project.name);
    let nearest = correction.nearest();
    let mut table = Table::new(&["input", "value", "recipe", "± (one σ)", "evidence", "share of variance"]);
    for (number, input) in correction.inputs.iter().enumerate() {
        let share = nearest.map_or(0.0, |wall| wall.spread.share(number));
        table.row([
            input.name.clone(),
            input.amount.clone(),
            input.believed.map_or("–".to_owned(), |believed| significant(believed, 3)),
            sigma_words(input),
            evidence(input),
            percent(share),
        ]);
    }
    text += &table.text();
    if let Some(ph) = &correction.ph {
        text += &format!("\n{}\n", ph_sentence(ph));
    }
    for metal in &correction.metals {
        let component = bath.component(bath.limits[metal.limit].component);
        text += &format!(
            "Free {}: p{} {} ± {} (constants {}, analysis and recipe {}).\n",
            component.name,
            component.short(),
            p_value(metal.free),
            fixed(metal.spread.total(), 2),
            fixed(metal.spread.constants, 2),
            fixed((metal.spread.total().powi(2) - metal.spread.constants.powi(2)).max(0.0).sqrt(), 2),
        );
    }
    text += "\nWalls over the operating range, as found\n";
    let mut table = Table::new(&["wall", "of limit", "at 95 %", "worst at"]);
    for wall in &correction.walls {
        table.row([
            wall_name(bath, wall.wall),
            share_of_limit(wall.excess),
            share_of_limit(wall.excess_95),
            place_words(bath, &wall.worst),
        ]);
    }
    text += &table.text();
    text += &remedy_text(correction)?;
    text += &evidence_text(correction, nearest);
    Ok(text)
}

/// "2 %", "0.05 pH", with a star where it is only the usual one of its evidence.
fn sigma_words(input: &Input) -> String {
    let sigma = match input.effect {
        Effect::Totals(_) => format!("{} %", significant(100.0 * input.sigma, 2)),
        Effect::Ph => significant(input.sigma, 2),
    };
    if input.stated { sigma } else { format!("{sigma} (usual)") }
}

/// "measured today", and whether the analysis or the recipe says so.
fn evidence(input: &Input) -> String {
    let from = if input.analysed { "analysis" } else { "recipe" };
    format!("{}, {from}", input.trust.word())
}

fn ph_sentence(ph: &FoundPh) -> String {
    if ph.bath == ph.meter {
        return format!("pH {} in the bath, {}.", fixed(ph.meter, 2), ph.trust.word());
    }
    format!(
        "The meter read pH {} at {} °C ({}); with the same hydrogen the bath has pH {} at {} °C.",
        fixed(ph.meter, 2),
        fixed(ph.meter_temperature_c, 0),
        ph.trust.word(),
        fixed(ph.bath, 2),
        fixed(ph.bath_temperature_c, 0),
    )
}

/// What to do, in sentences.
fn remedy_text(correction: &Correction) -> Result<String, CommandError> {
    let bath = &correction.bath;
    if let Some(refused) = &correction.refused {
        return Ok(format!("\nRefused: {refused}\n"));
    }
    let mut text = String::from("\n");
    if correction.ph_outside {
        text += &match &correction.bring_back {
            Some(adjustment) => format!(
                "The pH lies outside its operating range: first add {} g/L of {}, {} for the tank, in portions with the meter in.\n",
                significant(adjustment.dose_g_l, 3),
                adjustment.product.name,
                kilograms(adjustment.dose_g_l * bath.project.tank.volume_l / 1000.0),
            ),
            None => {
                "The pH lies outside its operating range, and the product under adjust can't bring it back.\n"
                    .to_owned()
            }
        };
    }
    text += &match &correction.remedy {
        Remedy::Nothing => {
            "Nothing to add: every wall holds with 95 % confidence, analysis counted.\n".to_owned()
        }
        Remedy::Unsure => {
            "The plain numbers hold, but not with 95 % confidence, and no dose makes them surer.\n".to_owned()
        }
        Remedy::Add { agent, dose_g_l, hold, search } => {
            let product = &bath.agents[*agent].product;
            let mut text = format!(
                "Add {} g/L of {}, {} for the tank: it then holds {}.\n",
                significant(*dose_g_l, 3),
                product.name,
                kilograms(dose_g_l * bath.project.tank.volume_l / 1000.0),
                hold_words(*hold),
            );
            if let Some(found) =
                search.found.as_ref().filter(|found| found.dose_g_l < WORTH_SAYING * dose_g_l)
            {
                text +=
                    &format!("With a perfect analysis {} g/L would do.\n", significant(found.dose_g_l, 3));
            }
            let mut doses = vec![0.0; bath.agents.len()];
            doses[*agent] = *dose_g_l;
            text + &additions_text(bath, &plan(bath, &doses)?)
        }
        Remedy::BailOut(found) => bail_out_text(bath, found)?,
        Remedy::None(reason) => format!(
            "No dose and no bail-out holds. The best dose, {} g/L, reaches {} of the nearest limit.\n",
            significant(reason.best_dose_g_l, 3),
            share_of_limit(reason.best.excess()),
        ),
    };
    Ok(text)
}

fn bail_out_text(bath: &Bath, found: &BailOut) -> Result<String, CommandError> {
    let refill = match found.refill {
        Refill::Water => "water",
        Refill::Fresh => "fresh bath as made up",
    };
    let litres = found.share * bath.project.tank.volume_l;
    let how = format!("{} ({} L), refill with {refill}", percent(found.share), grouped(litres.ceil(), 0));
    let back = match bath.ph_set() {
        Some(ph) => format!(", bring the pH back to {}", fixed(ph, 2)),
        None => String::new(),
    };
    let hold = hold_words(found.hold);
    let Some((agent, dose)) = found.dose else {
        return Ok(format!("No dose holds. Bail out {how}{back}: it then holds {hold}.\n"));
    };
    let after = Bath::resolve(&found.project).map_err(|error| CommandError::Option(error.to_string()))?;
    Ok(format!(
        "No dose and no bail-out alone holds. Bail out {how}{back}, then add {} g/L of {}, {} for the tank: it then holds {hold}.\n",
        significant(dose, 3),
        bath.agents[agent].product.name,
        kilograms(dose * bath.project.tank.volume_l / 1000.0),
    ) + &additions_text(&after, &plan(&after, &after.doses())?))
}

fn hold_words(hold: Hold) -> &'static str {
    match hold {
        Hold::Sure => "with 95 % confidence",
        _ => "by plain numbers only",
    }
}

fn kilograms(kg: f64) -> String {
    format!("{} kg", significant(kg, 3))
}

/// Where the uncertainty of the nearest wall comes from, and what to measure first.
fn evidence_text(correction: &Correction, nearest: Option<&WallSpread>) -> String {
    let Some(wall) = nearest else { return String::new() };
    let spread = &wall.spread;
    let ranked: Vec<String> = spread
        .ranking()
        .into_iter()
        .take(RANKED)
        .filter(|&number| spread.share(number) >= 0.01)
        .map(|number| format!("{} {}", correction.inputs[number].name, percent(spread.share(number))))
        .collect();
    let constants = spread.constants.powi(2) / spread.total().powi(2);
    let mut text = format!(
        "\nUncertainty at {}: a factor of {} at 95 %; of its variance the constants bring {}{}.\n",
        wall_name(&correction.bath, wall.wall),
        significant(10f64.powf(CONFIDENCE_95 * spread.total()), 2),
        percent(constants),
        ranked.iter().map(|part| format!(", {part}")).collect::<String>(),
    );
    let names: Vec<String> = correction
        .rests_on
        .iter()
        .map(|&number| {
            format!("{} ({})", correction.inputs[number].name, correction.inputs[number].trust.word())
        })
        .collect();
    text += &match names.split_first() {
        Some((first, [])) => {
            format!("The decision rests on a value that nobody measured. Measure this first: {first}.\n")
        }
        Some((first, rest)) => format!(
            "The decision rests on values that nobody measured. Measure this first: {first}; then {}.\n",
            rest.join(", ")
        ),
        None => "No value that was only inferred or assumed could turn the decision.\n".to_owned(),
    };
    text
}
