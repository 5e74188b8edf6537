//! `bathwright shift`: the forecast of a bath through its shifts, and the additions that hold it.

use super::dose::decide;
use super::shift_json::json_text;
use super::table::Table;
use super::{CommandError, Outcome, choose_agent, needs_walls, print, write_picture};
use crate::bath::{Bath, Running, Shift};
use crate::dosing::share_of_limit;
use crate::quantity::{fixed, grouped, percent, plain, significant};
use crate::study::shift::{
    Forecast, TopUpPlan, bail_out_words, crossing_words, events, forecast, in_shift, plan_top_ups, to_csv,
    to_svg,
};
use std::io::Write;
use std::path::Path;

/// What the user asked for.
pub struct Wish<'a> {
    pub shifts: Option<u32>,
    pub agent: Option<&'a str>,
    pub json: bool,
    pub out: Option<&'a Path>,
}

/// Everything that is told.
pub struct Story<'a> {
    pub running: &'a Running<'a>,
    /// The dose that the shifts begin with was found, because that of the project does not hold.
    pub found_first: bool,
    pub alone: Forecast,
    pub plan: TopUpPlan,
}

pub fn run(bath: &Bath, wish: &Wish, out: &mut dyn Write) -> Result<Outcome, CommandError> {
    let mut shift = bath.project.shift.clone();
    if shift.is_default() {
        let text =
            "shift is missing: add the section with loads, drag_out_l_h, evaporation_l_h and make_up_water";
        return Err(CommandError::Option(text.to_owned()));
    }
    shift.shifts = wish.shifts.unwrap_or(shift.shifts);
    let (bath, agent, found_first) = begin(bath, &shift, wish.agent)?;
    let running = bath.running(&shift).map_err(in_project)?;
    let alone = forecast(&running)?;
    let sure = alone.points[0].excess(true) <= 0.0 || alone.points[0].excess(false) > 0.0;
    let plan = plan_top_ups(&running, agent, shift.replenish, sure)?;
    let holds = plan.fails_from.is_none() && plan.refused.is_none();
    let story = Story { running: &running, found_first, alone, plan };
    if let Some(path) = wish.out {
        let courses = [("left alone", &story.alone), ("with additions", &story.plan.forecast)];
        let svg = || to_svg(&running, &story.alone, &story.plan);
        write_picture(path, svg, || to_csv(&running, &courses))?;
    }
    let told = if wish.json { format!("{:#}\n", json_text(&story)) } else { text(&story, wish.out) };
    print(out, &told)?;
    Ok(if holds { Outcome::Done } else { Outcome::NoDoseHolds })
}

fn in_project(source: crate::bath::BathError) -> CommandError {
    CommandError::Bath { path: "shift".to_owned(), source }
}

/// The bath to begin with: as the project doses it when that holds, else with the dose that is found.
fn begin(bath: &Bath, shift: &Shift, agent: Option<&str>) -> Result<(Bath, usize, bool), CommandError> {
    let (chosen, number) = choose_agent(bath, agent)?;
    needs_walls(&chosen, "look ahead")?;
    let short = Shift { shifts: 1, hours: 1.0, ..shift.clone() };
    let first = forecast(&chosen.running(&short).map_err(in_project)?)?;
    if first.points[0].excess(true) <= 0.0 {
        return Ok((chosen, number, false));
    }
    let decision = decide(bath, agent)?;
    if decision.search.found.is_none() {
        return Ok((chosen, number, false));
    }
    Ok((decision.bath, decision.agent, true))
}

fn text(story: &Story, out: Option<&Path>) -> String {
    let Story { running, found_first, alone, plan } = story;
    let bath = &running.bath;
    let project = &bath.project;
    let place = if project.place.is_empty() { String::new() } else { format!("{}: ", project.place) };
    let invented = if project.invented { " (demo bath, invented numbers)" } else { "" };
    let mut text = format!("{place}{}{invented}\n", project.name);
    text += &format!(
        "{} shifts of {} h, {} L; out {} L/h with all in solution, in {} L/h of water\n",
        running.shifts,
        plain(running.steps_per_shift as f64 * running.step_h, 2),
        grouped(running.volume_l, 0),
        plain(running.out_l_h, 2),
        plain(running.in_l_h, 2),
    );
    let why = if *found_first { ", the dose found, because that of the project does not hold" } else { "" };
    let product = &bath.agents[plan.agent].product;
    let dose = significant(bath.doses()[plan.agent], 4);
    text += &format!("Begins with {dose} g/L of {}{why}.\n", product.name);
    text += "\nFree metal at the set point; share of the nearest limit at the worst of the operating range\n";
    text += &course_table(story);
    text += "\nLeft alone\n";
    text +=
        &list(alone.crossings.iter().map(|crossing| crossing_words(running, crossing)), "every limit holds");
    text += &list(events(running, alone), "");
    text += &plan_text(story);
    if let Some(failure) = &plan.uncorrected {
        text += &format!("Note: {failure}.\n");
    }
    if let Some(path) = out {
        text += &format!("\n{} written\n", path.display());
    }
    text
}

fn list(lines: impl IntoIterator<Item = String>, none: &str) -> String {
    let lines: Vec<String> = lines.into_iter().map(|line| format!("  {line}\n")).collect();
    match (lines.is_empty(), none) {
        (true, "") => String::new(),
        (true, none) => format!("  {none}\n"),
        (false, _) => lines.concat(),
    }
}

/// Longest forecast, in steps, of which every step is printed.
const EVERY_STEP: usize = 24;

fn course_table(story: &Story) -> String {
    let Story { running, alone, plan, .. } = story;
    let metal = running.bath.limits.first().map(|limit| running.bath.component(limit.component).short());
    let p = format!("p{}", metal.unwrap_or("M"));
    let mut table = Table::new(&[
        "hour",
        &format!("{p} alone"),
        "of limit",
        "at 95 %",
        &format!("{p} with"),
        "of limit",
        "at 95 %",
    ]);
    let every = if running.steps() <= EVERY_STEP { 1 } else { running.steps_per_shift };
    for step in (0..=running.steps()).step_by(every) {
        let hour = step as f64 * running.step_h;
        // The last of an hour is after what is added there.
        let at = |forecast: &Forecast| {
            let point = forecast.points.iter().rev().find(|point| (point.hour - hour).abs() < 1e-9);
            point.map_or(["–".to_owned(), "–".to_owned(), "–".to_owned()], |point| {
                [
                    point.metals.first().map_or("–".to_owned(), |metal| fixed(-metal.log10_free, 1)),
                    share_of_limit(point.excess(false)),
                    share_of_limit(point.excess(true)),
                ]
            })
        };
        let ([a, b, c], [d, e, f]) = (at(alone), at(&plan.forecast));
        table.row([plain(hour, 2), a, b, c, d, e, f]);
    }
    table.text()
}

fn plan_text(story: &Story) -> String {
    let Story { running, plan, .. } = story;
    let bath = &running.bath;
    let product = &bath.agents[plan.agent].product;
    if let Some(refused) = &plan.refused {
        return format!("\nRefused: {refused}\n");
    }
    let sure = if plan.sure { "with 95 % confidence" } else { "by plain numbers only" };
    let mut text = format!("\nAdditions of {} ({sure})\n", product.name);
    if plan.top_ups.is_empty() {
        text += if plan.bail_outs.is_empty() && plan.fails_from.is_none() {
            "  none is needed\n"
        } else {
            "  none helps\n"
        };
    } else {
        let mut table = Table::new(&["when", "measure out", "kg", "of the agent", "with it"]);
        for top_up in &plan.top_ups {
            table.row([
                in_shift(running, top_up.hour),
                top_up.measured.amount.clone(),
                significant(top_up.measured.rounded_kg, 3),
                if top_up.share.is_finite() { percent(top_up.share) } else { "new".to_owned() },
                top_up.adjustment.as_ref().map_or(String::new(), |(adjustment, measured)| {
                    format!("{} of {}", measured.amount, adjustment.product.name)
                }),
            ]);
        }
        text += &table.text();
        text += &per_shift(story);
    }
    if !plan.bail_outs.is_empty() {
        text += "\nBail-out\n";
        text +=
            &list(plan.bail_outs.iter().map(|bail_out| bail_out_words(running, plan.agent, bail_out)), "");
    }
    if let Some(hour) = plan.fails_from {
        text += &format!(
            "\nNothing holds from {}: neither an addition of {} nor a bail-out.\n",
            in_shift(running, hour),
            product.name
        );
    }
    text
}

/// "shift 1: 21.3 kg in 1 addition, …".
fn per_shift(story: &Story) -> String {
    let Story { running, plan, .. } = story;
    let mut parts = Vec::new();
    for shift in 0..running.shifts {
        let steps = shift * running.steps_per_shift..(shift + 1) * running.steps_per_shift;
        let own: Vec<f64> = plan
            .top_ups
            .iter()
            .filter(|top_up| steps.contains(&top_up.step))
            .map(|top_up| top_up.measured.rounded_kg)
            .collect();
        if !own.is_empty() {
            let plural = if own.len() == 1 { "" } else { "s" };
            let kg = significant(own.iter().sum(), 3);
            parts.push(format!("shift {}: {kg} kg in {} addition{plural}", shift + 1, own.len()));
        }
    }
    format!("  {}; {} kg in all\n", parts.join(", "), significant(plan.total_kg(), 3))
}
