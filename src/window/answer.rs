//! What the worker is asked and what it answers.

use super::story::{Told, Wanted};
use crate::bath::{Adjustment, Bath, BathError, Flag, Project, Solids, flags};
use crate::chemistry::ComponentKind;
use crate::dosing::{Assessment, Assessor, LedgerEntry, Search, Verdict, ledger, plan, search, verdict};
use crate::equilibrium::{Equilibrium, Solver};
use crate::sheet::{LaidOut, Paper, content, lay_out};
use crate::study::{Axis, Basis, Diagram, diagram};
use std::sync::Arc;

/// What runs along the bottom of the diagram.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Across {
    /// pH.
    Ph,
    /// Dose of this agent.
    Dose(usize),
}

/// What the diagram shows.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct View {
    /// Along the bottom.
    pub across: Across,
    /// Token of the metal or agent; the first limited metal when it is not in the bath.
    pub basis: Option<String>,
    /// What the open page wants to be told.
    pub wanted: Option<Wanted>,
}

/// A version of the project to be answered.
#[derive(Clone, Debug)]
pub struct Request {
    /// Version number.
    pub generation: u64,
    /// The project.
    pub project: Project,
    /// The diagram asked for.
    pub view: View,
}

/// Everything that follows a slider.
#[derive(Debug)]
pub struct Quick {
    /// The version it answers.
    pub generation: u64,
    /// The resolved bath.
    pub bath: Arc<Bath>,
    /// The real bath at its set point, with the doses.
    pub solution: Equilibrium,
    /// The doses over the operating range.
    pub assessment: Assessment,
    /// The diagram.
    pub diagram: Diagram,
    /// Who holds each agent component: (system index, entries).
    pub ledgers: Vec<(usize, Vec<LedgerEntry>)>,
    /// Acid or alkali that the doses make necessary.
    pub adjustment: Option<Adjustment>,
    /// Remarks.
    pub flags: Vec<Flag>,
}

/// What takes a moment longer: the bands of doses, the additions, the sheet.
#[derive(Debug)]
pub struct Thorough {
    /// The version it answers.
    pub generation: u64,
    /// One search for each agent; empty without limits.
    pub searches: Vec<Search>,
    /// One sentence on the doses.
    pub verdict: Verdict,
    /// The sheet, laid out.
    pub sheet: LaidOut,
    /// The sheet as CSV.
    pub sheet_csv: String,
}

/// An answer of the worker.
#[derive(Debug)]
pub enum Answer {
    /// The project can't be used as it is.
    Failed {
        /// The version it answers.
        generation: u64,
        /// What is wrong.
        error: BathError,
    },
    /// The fast part.
    Quick(Box<Quick>),
    /// The slow part.
    Thorough(Box<Thorough>),
    /// What a page wanted.
    Told(Box<Told>),
}

/// Points of a live diagram.
const LIVE_POINTS: usize = 220;
/// Room beside the operating range on a pH axis.
const PH_ROOM: f64 = 2.5;

/// Computes the fast part.
pub fn quick(request: &Request) -> Result<Quick, BathError> {
    let bath = Bath::resolve(&request.project)?;
    let doses = bath.doses();
    let set = bath.project.tank.temperature_c.set;
    let constants = bath.constants_at(set);
    let corrected = bath.corrected(&doses)?;
    let solution =
        bath.solve_totals(&mut Solver::new(), &constants, &corrected.totals, bath.ph_set(), Solids::Real)?;
    let assessment = Assessor::new(&bath)?.assess(&doses)?;
    let agents = (0..bath.present.len()).filter(|&i| {
        bath.component(i).kind == ComponentKind::Agent
            && solution.totals[i] > 0.0
            && is_dosed_or_limited(&bath, i)
    });
    let ledgers = agents.map(|i| (i, ledger(&bath, &solution, i))).collect();
    let adjustment = corrected.adjustment;
    let flags = flags(&bath, &solution, set);
    let diagram = diagram(&bath, axis(&bath, request.view.across), basis(&bath, &request.view), LIVE_POINTS);
    Ok(Quick {
        generation: request.generation,
        bath: Arc::new(bath),
        solution,
        assessment,
        diagram,
        ledgers,
        adjustment,
        flags,
    })
}

fn is_dosed_or_limited(bath: &Bath, component: usize) -> bool {
    bath.agents.is_empty() || bath.agents.iter().any(|agent| agent.active == component)
}

/// Computes the slow part.
pub fn thorough(request: &Request) -> Result<Thorough, BathError> {
    let bath = Bath::resolve(&request.project)?;
    let doses = bath.doses();
    let mut searches = Vec::new();
    if Assessor::new(&bath)?.has_walls() {
        for agent in 0..bath.agents.len() {
            searches.push(search(&bath, agent)?);
        }
    }
    let plan = plan(&bath, &doses)?;
    let assessment = Assessor::new(&bath)?.assess(&doses)?;
    let free =
        bath.project.agents.iter().position(|agent| !agent.locked).and_then(|agent| searches.get(agent));
    let verdict = verdict(&bath, &assessment, free);
    let now = jiff::ZonedDateTime::now().strftime("%-d %B %Y, %H:%M").to_string();
    let sheet = content(&bath, &plan, &verdict, Some(now))?;
    let sheet_csv = crate::sheet::to_csv(&sheet).unwrap_or_default();
    let sheet = lay_out(&sheet, Paper::A4);
    Ok(Thorough { generation: request.generation, searches, verdict, sheet, sheet_csv })
}

fn axis(bath: &Bath, across: Across) -> Axis {
    match across {
        Across::Dose(agent) if agent < bath.agents.len() => {
            Axis::Dose { agent, to: bath.agents[agent].max_g_l }
        }
        _ => match bath.ph() {
            Some(range) => Axis::Ph {
                from: (range.low - PH_ROOM).floor().max(-1.0),
                to: (range.high + PH_ROOM).ceil().min(15.0),
            },
            None => Axis::Ph { from: 0.0, to: 14.0 },
        },
    }
}

fn basis(bath: &Bath, view: &View) -> Basis {
    let wished = view.basis.as_deref().and_then(|token| bath.system.component(token));
    let limited = || bath.limits.first().map(|limit| limit.component);
    Basis(wished.or_else(limited).or_else(|| bath.metals().next()).unwrap_or(0))
}
