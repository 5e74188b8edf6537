//! `bathwright sheet`: the dosing sheet for the dose found.

use super::arguments::PaperSize;
use super::dose::{Decision, decide};
use super::{CommandError, Outcome, print, write_file};
use crate::bath::Bath;
use crate::sheet::{Paper, content, lay_out, to_csv, to_pdf, to_text};
use std::io::Write;
use std::path::Path;

pub fn run(
    bath: &Bath,
    agent: Option<&str>,
    paper: PaperSize,
    path: &Path,
    project_file: &Path,
    out: &mut dyn Write,
) -> Result<Outcome, CommandError> {
    let decision = decide(bath, agent)?;
    let bytes = sheet_bytes(&decision, paper, path)?;
    let found = decision.search.found.is_some();
    if !found {
        let text = format!(
            "no dose of {} holds, so no sheet is written; `bathwright dose {}` says why\n",
            decision.bath.agents[decision.agent].product.name,
            project_file.display()
        );
        print(out, &text)?;
        return Ok(Outcome::NoDoseHolds);
    }
    write_file(path, &bytes)?;
    let refused =
        decision.plan.refused.as_ref().map_or(String::new(), |reason| format!("Refused: {reason}\n"));
    print(out, &format!("{} written\n{refused}", path.display()))?;
    Ok(Outcome::Done)
}

/// The sheet in the format that the file's name asks for.
pub fn sheet_bytes(decision: &Decision, paper: PaperSize, path: &Path) -> Result<Vec<u8>, CommandError> {
    let paper = match paper {
        PaperSize::A4 => Paper::A4,
        PaperSize::Letter => Paper::Letter,
    };
    let now = jiff::ZonedDateTime::now().strftime("%-d %B %Y, %H:%M").to_string();
    let sheet = content(&decision.bath, &decision.plan, &decision.verdict, Some(now))?;
    match path.extension().and_then(|end| end.to_str()) {
        Some("pdf") => Ok(to_pdf(&lay_out(&sheet, paper))?),
        Some("csv") => Ok(to_csv(&sheet)?.into_bytes()),
        Some("txt") => Ok(to_text(&lay_out(&sheet, paper)).into_bytes()),
        _ => Err(CommandError::Option(format!(
            "--out is \"{}\": give a name that ends in .pdf, .csv or .txt",
            path.display()
        ))),
    }
}
