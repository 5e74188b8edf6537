//! The main job as text, for a machine where no window can open.

use super::dose::{additions, decide, limits_table};
use super::{CommandError, Outcome, print};
use crate::bath::{Bath, Project};
use crate::quantity::significant;
use std::io::Write;

/// Prints the bath, its free metals against their ceilings, the dose found, the additions, and how to write the sheet.
///
/// # Errors
/// [`CommandError`] when the project can't be used.
pub fn report(project: &Project, file: &str, out: &mut dyn Write) -> Result<Outcome, CommandError> {
    let bath =
        Bath::resolve(project).map_err(|source| CommandError::Bath { path: file.to_owned(), source })?;
    let place = if project.place.is_empty() { String::new() } else { format!("{}: ", project.place) };
    let invented = if project.invented { " (demo bath, invented numbers)" } else { "" };
    let mut text = format!("{place}{}{invented}\n", project.name);
    if !project.about.is_empty() {
        text += &format!("{}\n", project.about);
    }
    let decision = decide(&bath, None)?;
    text += "\nFree metals over the operating range, worst case\n";
    text += &limits_table(&decision.bath, &decision.plan.before, &decision.plan.after);
    let product = &decision.bath.agents[decision.agent].product;
    text += &match &decision.search.found {
        Some(found) => format!("\nDose found: {} g/L of {}.\n", significant(found.dose_g_l, 4), product.name),
        None => format!("\nNo dose of {} holds; `bathwright dose {file}` says why.\n", product.name),
    };
    if decision.search.found.is_some() {
        text += &additions(&decision);
    }
    text += &format!("\n{}. {}\n", decision.verdict.state.word(), decision.verdict.sentence);
    text += &format!("\nTo write the dosing sheet: bathwright sheet {file} --out sheet.pdf\n");
    print(out, &text)?;
    Ok(if decision.search.found.is_some() { Outcome::Done } else { Outcome::NoDoseHolds })
}
