//! Blends: the cheapest or lightest doses of two or three agents that hold every wall over the operating window.
//!
//! The doses are judged at a few places of the window, which are added to until none is worse (an exchange method). A
//! coarse grid finds where to begin, once for each choice of agents; from each beginning a descent with exact slopes
//! finds the cheapest doses near it.

mod certificate;
mod descent;
mod linear;
mod slope;

pub use certificate::{Binding, Worsening};

use self::descent::{Descended, Goal, descend};
use super::assess::{Assessment, Assessor};
use super::judge::{Judge, Level};
use super::search::Hold;
use crate::bath::Bath;
use crate::equilibrium::EquilibriumError;
use thiserror::Error;

/// What a blend is to be least in.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Aim {
    /// Price of the products.
    Cheapest,
    /// Weight of the products.
    Lightest,
}

/// A blend that holds.
#[derive(Clone, Debug, PartialEq)]
pub struct Blend {
    /// Numbers of the agents that were free to move.
    pub agents: Vec<usize>,
    /// Doses of all agents of the bath, g/L.
    pub doses: Vec<f64>,
    /// With or without confidence.
    pub hold: Hold,
    /// What it is least in.
    pub aim: Aim,
    /// Price or grams per litre of bath.
    pub per_litre: f64,
    /// Its worst cases.
    pub assessment: Assessment,
    /// The scenarios that keep it from being less, with what each costs.
    pub binding: Vec<Binding>,
}

/// Why no blend could be looked for.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum BlendError {
    /// No equilibrium.
    #[error("{0}")]
    Equilibrium(#[from] EquilibriumError),
    /// A product without a price.
    #[error("{0} has no price: give price_per_kg under products, or look for the lightest blend")]
    NoPrice(String),
    /// Too few or too many agents.
    #[error("{0} agents are free to move: unlock one to three of the bath's agents")]
    Count(usize),
    /// A bath without limits.
    #[error("limits is empty: set a ceiling for a free metal, then look for a blend")]
    NoWall,
}

/// Agents of a blend at most.
pub const MOST_AGENTS: usize = 3;
/// Shares of the caps on the grid, by the number of agents.
const GRIDS: [&[f64]; MOST_AGENTS] = [
    &[0.0, 0.01, 0.02, 0.04, 0.07, 0.1, 0.15, 0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0],
    &[0.0, 0.02, 0.05, 0.1, 0.18, 0.3, 0.45, 0.65, 1.0],
    &[0.0, 0.05, 0.15, 0.4, 1.0],
];
/// Descents that are begun, and rounds of the exchange.
const STARTS: usize = 4;
const ROUNDS: usize = 10;
/// Doses closer than this share of their caps count as the same.
const RESOLUTION: f64 = 1e-6;
/// Excess (log10) over the places judged that still counts as holding: a rounding error.
const HOLDS: f64 = 1e-9;

/// The best blend of the given agents, the other doses as they are; `None` when none holds even by plain numbers.
///
/// # Errors
/// [`BlendError`] naming what is missing.
pub fn blend(bath: &Bath, agents: &[usize], aim: Aim) -> Result<Option<Blend>, BlendError> {
    if agents.is_empty() || agents.len() > MOST_AGENTS {
        return Err(BlendError::Count(agents.len()));
    }
    let cost = agents
        .iter()
        .map(|&agent| match aim {
            Aim::Lightest => Ok(1.0),
            Aim::Cheapest => {
                let product = &bath.agents[agent].product;
                let price = product.price().ok_or_else(|| BlendError::NoPrice(product.name.clone()))?;
                Ok(price * 1e-3)
            }
        })
        .collect::<Result<Vec<f64>, BlendError>>()?;
    let bounds = agents
        .iter()
        .map(|&agent| (bath.project.agents[agent].min_g_l, bath.agents[agent].max_g_l))
        .collect();
    let mut assessor = Assessor::new(bath)?;
    if !assessor.has_walls() {
        return Err(BlendError::NoWall);
    }
    let mut goal = Goal { agents, cost, bounds, level: Level::Sure };
    for (level, hold) in [(Level::Sure, Hold::Sure), (Level::Plain, Hold::Plain)] {
        goal.level = level;
        let mut judge = Judge::new(bath, &mut assessor, RESOLUTION);
        let Some(doses) = best(&mut judge, &goal)? else { continue };
        let binding = certificate::binding(&mut judge, &goal, &doses)?;
        let per_litre = goal.cost(&doses);
        let assessment = assessor.assess(&doses)?;
        let agents = agents.to_vec();
        return Ok(Some(Blend { agents, doses, hold, aim, per_litre, assessment, binding }));
    }
    Ok(None)
}

/// The best doses of all agents, at the level of the goal.
fn best(judge: &mut Judge, goal: &Goal) -> Result<Option<Vec<f64>>, EquilibriumError> {
    for share in [0.1, 0.6] {
        judge.learn(&at_shares(judge.bath, goal, &vec![share; goal.agents.len()]))?;
    }
    let mut found: Vec<Descended> = Vec::new();
    for start in starts(judge, goal)? {
        found.push(descend(judge, goal, &start)?);
    }
    for _ in 0..ROUNDS {
        let holding = found.iter().filter(|end| end.excess <= HOLDS);
        let best = holding.min_by(|a, b| goal.cost(&a.doses).total_cmp(&goal.cost(&b.doses)));
        let Some(best) = best.cloned() else {
            // Nothing holds at the places known; others would only make it worse.
            return Ok(None);
        };
        if !judge.learn(&best.doses)? {
            return Ok(Some(best.doses));
        }
        for end in &mut found {
            *end = descend(judge, goal, &end.doses)?;
        }
    }
    Ok(None)
}

fn at_shares(bath: &Bath, goal: &Goal, shares: &[f64]) -> Vec<f64> {
    let mut doses = bath.doses();
    for ((&agent, (low, high)), share) in goal.agents.iter().zip(&goal.bounds).zip(shares) {
        doses[agent] = low + share * (high - low);
    }
    doses
}

/// Doses to begin with: of a coarse grid the cheapest that hold, one for each choice of agents that are used at all, and
/// the one that comes nearest when none does.
fn starts(judge: &mut Judge, goal: &Goal) -> Result<Vec<Vec<f64>>, EquilibriumError> {
    let n = goal.agents.len();
    let shares = GRIDS[n - 1];
    let mut holding: Vec<(f64, Vec<bool>, Vec<f64>)> = Vec::new();
    // Where no dose is nearer than another, as with a floor for a metal that is not there, nothing is as good as any.
    let mut nearest = (f64::INFINITY, at_shares(judge.bath, goal, &vec![0.0; n]));
    // Odometer over the grid, back and forth so that neighbours follow each other.
    for number in 0..shares.len().pow(n as u32) {
        let mut rest = number;
        let point: Vec<usize> = (0..n)
            .map(|_| {
                let (digit, turn) = (rest % shares.len(), rest / shares.len());
                rest = turn;
                if turn % 2 == 1 { shares.len() - 1 - digit } else { digit }
            })
            .collect();
        let point: Vec<f64> = point.into_iter().map(|digit| shares[digit]).collect();
        let doses = at_shares(judge.bath, goal, &point);
        let sample = judge.take(&doses)?;
        let excess = sample.excess(goal.level);
        if excess <= 0.0 {
            let used: Vec<bool> = point.iter().map(|share| *share > 0.0).collect();
            let cost = goal.cost(&doses);
            match holding.iter_mut().find(|(_, known, _)| *known == used) {
                Some(known) if known.0 > cost => *known = (cost, used, doses),
                Some(_) => {}
                None => holding.push((cost, used, doses)),
            }
        } else if excess < nearest.0 {
            nearest = (excess, doses);
        }
    }
    holding.sort_by(|a, b| a.0.total_cmp(&b.0));
    holding.truncate(STARTS);
    let mut starts: Vec<Vec<f64>> = holding.into_iter().map(|(_, _, doses)| doses).collect();
    if starts.is_empty() {
        starts.push(nearest.1);
    }
    Ok(starts)
}
