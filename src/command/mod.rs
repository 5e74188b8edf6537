//! Bathwright without a window, for scripts and machines without a display: one file for each command.
//!
//! Exit codes: 0 done, 1 no dose holds, 2 bad input.

mod arguments;
mod blend;
mod compare;
mod correct;
mod correct_json;
mod diagram;
mod dose;
mod map;
mod report;
mod rinse;
mod sheet;
mod shift;
mod shift_json;
mod solve;
mod table;

pub use arguments::{Arguments, Command};
pub use report::report;

use crate::bath::{Bath, BathError, FileError, load};
use crate::chemistry::Product;
use crate::equilibrium::EquilibriumError;
use std::io::Write;
use std::path::Path;
use thiserror::Error;

/// How a command ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Outcome {
    /// Done.
    Done,
    /// Done, and no dose holds.
    NoDoseHolds,
}

impl Outcome {
    /// The exit code.
    pub fn code(self) -> u8 {
        match self {
            Outcome::Done => 0,
            Outcome::NoDoseHolds => 1,
        }
    }
}

/// Exit code for input that can't be used.
pub const BAD_INPUT: u8 = 2;

/// Why a command could not be carried out.
#[derive(Debug, Error)]
pub enum CommandError {
    /// The project file.
    #[error("{0}")]
    File(#[from] FileError),
    /// The project in it.
    #[error("{path}: {source}")]
    Bath {
        /// The file.
        path: String,
        /// What is wrong.
        source: BathError,
    },
    /// No equilibrium.
    #[error("{0}")]
    Equilibrium(#[from] EquilibriumError),
    /// An option that does not fit the bath.
    #[error("{0}")]
    Option(String),
    /// The sheet.
    #[error("{0}")]
    Sheet(#[from] crate::sheet::SheetError),
    /// Writing the answer.
    #[error("{path}: {source}")]
    Write {
        /// Where.
        path: String,
        /// The system's reason.
        source: std::io::Error,
    },
}

/// Carries out a command, printing to `out`.
///
/// # Errors
/// [`CommandError`], one line each; the exit code is then [`BAD_INPUT`].
pub fn run(command: &Command, out: &mut dyn Write) -> Result<Outcome, CommandError> {
    match command {
        Command::Solve { file, json } => solve::run(&open(file)?, *json, out),
        Command::Dose { file, blend: Some(least), json, .. } => {
            let aim = match least {
                arguments::LeastIn::Cheapest => crate::dosing::Aim::Cheapest,
                arguments::LeastIn::Lightest => crate::dosing::Aim::Lightest,
            };
            blend::run(&open(file)?, aim, *json, out)
        }
        Command::Dose { file, agent, json, .. } => dose::run(&open(file)?, agent.as_deref(), *json, out),
        Command::Compare { file, with, and, json } => {
            compare::run(&open(file)?, (with, and), *json, &file.display().to_string(), out)
        }
        Command::Rinse { file, agent, json } => {
            rinse::run(&open(file)?, agent.as_deref(), *json, &file.display().to_string(), out)
        }
        Command::Correct { file, agent, json } => correct::run(&open(file)?, agent.as_deref(), *json, out),
        Command::Sheet { file, out: path, agent, paper } => {
            sheet::run(&open(file)?, agent.as_deref(), *paper, path, file, out)
        }
        Command::Map { file, out: path, of, agent } => {
            map::run(&open(file)?, of.as_deref(), agent.as_deref(), path, out)
        }
        Command::Diagram { file, out: path, of, against, agent, points } => {
            let wish = diagram::Wish {
                of: of.as_deref(),
                against: *against,
                agent: agent.as_deref(),
                points: *points,
            };
            diagram::run(&open(file)?, &wish, path, out)
        }
        Command::Shift { file, shifts, agent, json, out: path } => {
            let wish =
                shift::Wish { shifts: *shifts, agent: agent.as_deref(), json: *json, out: path.as_deref() };
            shift::run(&open(file)?, &wish, out)
        }
    }
}

/// Loads and resolves a project file.
fn open(path: &Path) -> Result<Bath, CommandError> {
    let project = load(path)?;
    Bath::resolve(&project).map_err(|source| CommandError::Bath { path: path.display().to_string(), source })
}

/// Number of the agent to dose: the named one, else the first that is not locked. A product that the bath does not
/// list yet is put in the place of the first.
fn choose_agent(bath: &Bath, name: Option<&str>) -> Result<(Bath, usize), CommandError> {
    let fail = |text: String| Err(CommandError::Option(text));
    let Some(name) = name else {
        return match bath.project.agents.iter().position(|agent| !agent.locked) {
            Some(agent) => Ok((bath.clone(), agent)),
            None if bath.agents.is_empty() => fail(
                "agents is empty: add a complexing agent to the bath, or name one with --agent".to_owned(),
            ),
            None => fail("every agent is locked: unlock one, or name one with --agent".to_owned()),
        };
    };
    if let Some(agent) = bath.agents.iter().position(|agent| answers_to(&agent.product, bath, name)) {
        return Ok((bath.clone(), agent));
    }
    let Some(product) = bath.catalogue.iter().find(|product| answers_to(product, bath, name)) else {
        let known: Vec<&str> = bath.agents.iter().map(|agent| agent.product.id.as_str()).collect();
        return fail(format!(
            "--agent is \"{name}\": no product has this id or name; this bath lists {}",
            if known.is_empty() { "no agent".to_owned() } else { known.join(", ") }
        ));
    };
    let mut project = bath.project.clone();
    let max_g_l = project.agents.first().map_or(100.0, |agent| agent.max_g_l);
    let dose = crate::bath::AgentDose { product: product.id.clone(), max_g_l, ..Default::default() };
    project.agents = vec![dose];
    let other = Bath::resolve(&project)
        .map_err(|source| CommandError::Bath { path: format!("--agent {name}"), source })?;
    Ok((other, 0))
}

fn answers_to(product: &Product, bath: &Bath, name: &str) -> bool {
    let symbol = bath.library.component(&product.active).map(|i| bath.library.components[i].short());
    product.id == name
        || product.name.eq_ignore_ascii_case(name)
        || symbol.is_some_and(|symbol| symbol.eq_ignore_ascii_case(name))
}

fn print(out: &mut dyn Write, text: &str) -> Result<(), CommandError> {
    match out.write_all(text.as_bytes()) {
        // A reader that has seen enough (`| head`) is no error.
        Err(error) if error.kind() == std::io::ErrorKind::BrokenPipe => Ok(()),
        other => other.map_err(|source| CommandError::Write { path: "standard output".to_owned(), source }),
    }
}

fn write_file(path: &Path, bytes: &[u8]) -> Result<(), CommandError> {
    crate::bath::replace_file(path, bytes)
        .map_err(|source| CommandError::Write { path: path.display().to_string(), source })
}

/// Refuses a bath that has nothing to hold; `then` says what was wanted.
fn needs_walls(bath: &Bath, then: &str) -> Result<(), CommandError> {
    if bath.walls().is_empty() {
        return Err(CommandError::Option(format!(
            "limits is empty: set a ceiling for a free metal, then {then}"
        )));
    }
    Ok(())
}

/// Writes a picture or its table, by the ending of the path.
fn write_picture(
    path: &Path,
    svg: impl FnOnce() -> String,
    csv: impl FnOnce() -> String,
) -> Result<(), CommandError> {
    let text = match path.extension().and_then(|end| end.to_str()) {
        Some("svg") => svg(),
        Some("csv") => csv(),
        _ => {
            return Err(CommandError::Option(format!(
                "--out is \"{}\": give a name that ends in .svg or .csv",
                path.display()
            )));
        }
    };
    write_file(path, text.as_bytes())
}
