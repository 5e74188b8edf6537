//! Correction from an analysis: the bath as found, how surely it is known, and what brings it back.
//!
//! The results of the day replace the recipe's amounts, their uncertainties join those of the constants, and the answer is
//! an addition, a bail-out, or both; it says which value to measure first when guesses decide it.

mod bail_out;
mod input;
mod meter;
mod remedy;
mod window;

pub use bail_out::{BailOut, MOST as MOST_BAIL_OUT, Refill, refilled};
pub use input::{Effect, Input, Spread, usual_ph, usual_share};
pub use meter::FoundPh;
pub use window::WallSpread;

use crate::bath::{Adjustment, Bath, BathError, Project, Solids};
use crate::dosing::{Assessor, Hold, Reason, Search, acid_refused, plan};
use crate::equilibrium::{EquilibriumError, Solver, Value};
use thiserror::Error;
use window::Window;

/// Why a bath can't be corrected.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum CorrectionError {
    /// The project or its analysis.
    #[error("{0}")]
    Bath(#[from] BathError),
    /// No equilibrium.
    #[error("{0}")]
    Equilibrium(#[from] EquilibriumError),
    /// Nothing was analysed.
    #[error("analysis is empty: enter today's results, a metal at least")]
    NoAnalysis,
    /// There is nothing to hold.
    #[error("limits is empty: set a ceiling for a free metal, then correct the bath")]
    NoLimit,
    /// There is nothing to dose.
    #[error("agents is empty, or every agent is locked: add a complexing agent to the bath")]
    NoAgent,
}

/// Free metal in the tank as found.
#[derive(Clone, Debug, PartialEq)]
pub struct FoundMetal {
    /// Number of the limit.
    pub limit: usize,
    /// Free metal, mol/L, at the pH found and the bath's set temperature.
    pub free: f64,
    /// Where the uncertainty of its log10 comes from; to first order, so that a solid which would begin to form within it
    /// is not seen.
    pub spread: Spread,
}

/// What brings the bath back.
#[derive(Clone, Debug, PartialEq)]
pub enum Remedy {
    /// Every wall holds with 95 % confidence, inputs counted.
    Nothing,
    /// The plain numbers hold, and no dose makes them surer.
    Unsure,
    /// A dose.
    Add {
        /// Number of the agent.
        agent: usize,
        /// What the search found with the uncertainty of the constants alone.
        search: Box<Search>,
        /// Grams of product per litre of bath.
        dose_g_l: f64,
        /// How well it holds, with the uncertainty of the inputs counted.
        hold: Hold,
    },
    /// A bail-out, with a dose where it needs one.
    BailOut(Box<BailOut>),
    /// Nothing that was tried.
    None(Box<Reason>),
}

/// The bath as found and its correction.
#[derive(Clone, Debug)]
pub struct Correction {
    /// The bath as found, nothing dosed.
    pub bath: Bath,
    /// What it rests on.
    pub inputs: Vec<Input>,
    /// Its pH, where one was read.
    pub ph: Option<FoundPh>,
    /// Acid or alkali that brings the pH back into its operating range; `None` when it lies inside.
    pub bring_back: Option<Adjustment>,
    /// Whether the pH lies outside its operating range.
    pub ph_outside: bool,
    /// Free metals as found.
    pub metals: Vec<FoundMetal>,
    /// Every wall as found over the operating window.
    pub walls: Vec<WallSpread>,
    /// What brings it back.
    pub remedy: Remedy,
    /// Why no addition may be told: an acid into a bath that may hold cyanide, sulfide or hypochlorite.
    pub refused: Option<String>,
    /// Inputs that were not measured and could turn the decision, largest share of the variance first.
    pub rests_on: Vec<usize>,
}

impl Correction {
    /// The wall that is nearest with 95 % confidence.
    pub fn nearest(&self) -> Option<&WallSpread> {
        self.walls.iter().max_by(|a, b| a.excess_95.total_cmp(&b.excess_95))
    }
}

/// Corrects a bath from its analysis, dosing agent number `agent`; the first that is not locked without one.
///
/// # Errors
/// [`CorrectionError`].
pub fn correct(project: &Project, agent: Option<usize>) -> Result<Correction, CorrectionError> {
    if project.analysis.results.is_empty() && project.analysis.ph.is_none() {
        return Err(CorrectionError::NoAnalysis);
    }
    let analyzed = project.analyzed()?;
    let mut bath = Bath::resolve(&analyzed.project)?;
    if bath.walls().is_empty() {
        return Err(CorrectionError::NoLimit);
    }
    let agent = match agent.or_else(|| project.agents.iter().position(|agent| !agent.locked)) {
        Some(agent) if agent < bath.agents.len() => agent,
        _ => return Err(CorrectionError::NoAgent),
    };
    // Kept for the bail-out; the results themselves are in the contents now.
    bath.project.analysis.make_up.clone_from(&project.analysis.make_up);
    let reading = project.analysis.ph;
    let ph = reading.map(|reading| meter::found_ph(&bath, reading)).transpose()?.flatten();
    let inputs = input::inputs(project, &analyzed, &bath, ph.as_ref())?;
    let ph_outside = bath.ph().zip(ph).is_some_and(|(range, ph)| ph.bath < range.low || ph.bath > range.high);
    let bring_back = match ph.filter(|_| ph_outside) {
        Some(found) => meter::brought_back(&bath, found.bath)?,
        None => None,
    };
    let metals = found_metals(&bath, &inputs, ph.map(|ph| ph.bath))?;
    let none = vec![0.0; bath.agents.len()];
    let mut assessor = Assessor::new(&bath)?;
    let plain = assessor.assess(&none)?;
    let positions: Vec<_> = plain.walls.iter().map(|wall| wall.worst.position).collect();
    let mut window = Window::new(&bath, &inputs, &positions)?;
    let walls = window.walls(&none)?;
    let excess_95 = walls.iter().map(|wall| wall.excess_95).fold(f64::NEG_INFINITY, f64::max);
    let remedy = if plain.excess() <= 0.0 && excess_95 <= 0.0 {
        Remedy::Nothing
    } else {
        remedy::remedy(&bath, &inputs, agent, &mut window)?
    };
    let rests_on = remedy::rests_on(&bath, &inputs, &walls, &remedy, &mut window)?;
    drop((window, assessor));
    let refused = refused(&bath, bring_back.as_ref(), &remedy)?;
    Ok(Correction { refused, bath, inputs, ph, bring_back, ph_outside, metals, walls, remedy, rests_on })
}

/// Why the additions may not be told, if one of them is an acid and must not be.
fn refused(
    bath: &Bath,
    bring_back: Option<&Adjustment>,
    remedy: &Remedy,
) -> Result<Option<String>, CorrectionError> {
    if let Some(refused) = bring_back.and_then(|adjustment| acid_refused(bath, &adjustment.product)) {
        return Ok(Some(refused));
    }
    Ok(match remedy {
        Remedy::Add { agent, dose_g_l, .. } => {
            let mut doses = vec![0.0; bath.agents.len()];
            doses[*agent] = *dose_g_l;
            plan(bath, &doses)?.refused
        }
        Remedy::BailOut(found) => {
            let after = Bath::resolve(&found.project)?;
            plan(&after, &after.doses())?.refused
        }
        Remedy::Nothing | Remedy::Unsure | Remedy::None(_) => None,
    })
}

fn found_metals(bath: &Bath, inputs: &[Input], ph: Option<f64>) -> Result<Vec<FoundMetal>, EquilibriumError> {
    let constants = bath.constants_at(bath.project.tank.temperature_c.set);
    let ph = ph.or(bath.ph_set());
    let totals = &bath.contents;
    let solution = bath.solve_totals(&mut Solver::new(), &constants, totals, ph, Solids::Real)?;
    bath.sensitivities(&constants, totals, ph, Solids::Real, &solution, |answers| {
        let metal = |limit: usize| {
            let component = bath.limits[limit].component;
            let gradient = answers.gradient(Value::Free(component));
            let spread = Spread::of(&gradient, &bath.system, inputs, 1.0);
            FoundMetal { limit, free: solution.free(component), spread }
        };
        (0..bath.limits.len()).map(metal).collect()
    })
}
