//! All doses of one agent that hold, not only the first: an overdose can starve a floor or precipitate a salt of
//! the agent.
//!
//! The doses are judged at a few places of the operating window at once (an exchange method): the worst places of a
//! few doses to begin with, then those of every band end that these suggest, until no band end has a worse place.

use super::assess::{Assessment, Assessor};
use super::curve::Curve;
use super::judge::Level;
use crate::bath::Bath;
use crate::equilibrium::EquilibriumError;

/// How well the doses of a band hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Hold {
    /// Some wall is crossed.
    Not,
    /// The plain numbers hold, but not with 95 % confidence.
    Plain,
    /// Holds with 95 % confidence, one-sided.
    Sure,
}

/// A range of doses that hold alike, g/L.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Band {
    /// Lowest dose.
    pub from: f64,
    /// Highest dose.
    pub to: f64,
    /// How well they hold.
    pub hold: Hold,
}

/// The smallest dose that holds.
#[derive(Clone, Debug, PartialEq)]
pub struct Found {
    /// Grams of product per litre of bath.
    pub dose_g_l: f64,
    /// With or without confidence.
    pub hold: Hold,
    /// Its worst cases.
    pub assessment: Assessment,
}

/// What a search over one agent found.
#[derive(Clone, Debug, PartialEq)]
pub struct Search {
    /// Number of the agent.
    pub agent: usize,
    /// All doses from zero to the cap, each in one band.
    pub bands: Vec<Band>,
    /// Smallest dose that holds with confidence, else the smallest that holds by plain numbers.
    pub found: Option<Found>,
    /// Smallest dose that holds by plain numbers.
    pub plain_g_l: Option<f64>,
    /// The dose that comes nearest when none holds, with its excess (log10).
    pub best: (f64, f64),
}

/// Shares of the largest dose whose worst places the search begins with.
const SEEDS: [f64; 2] = [0.1, 1.0];
/// Rounds of the exchange; each adds a place, and a window has few that matter.
const ROUNDS: usize = 12;

/// Searches the doses of one agent between its bounds, the other doses as they are.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn search(bath: &Bath, agent: usize) -> Result<Search, EquilibriumError> {
    search_with(bath, agent, &mut Assessor::new(bath)?)
}

/// As [`search`] with a prepared assessor.
pub(super) fn search_with<'a>(
    bath: &'a Bath,
    agent: usize,
    assessor: &mut Assessor<'a>,
) -> Result<Search, EquilibriumError> {
    let max = bath.agents[agent].max_g_l;
    let mut curve = Curve::new(bath, agent, assessor);
    for share in SEEDS {
        curve.learn(share * max)?;
    }
    curve.sample()?;
    for _ in 0..ROUNDS {
        for level in [Level::Plain, Level::Sure] {
            curve.add_dips(level)?;
            curve.add_crossings(level)?;
        }
        if !curve.learn_from_bands()? {
            break;
        }
    }
    let bands = curve.bands();
    let smallest = |hold: Hold| curve.samples().find(|dose| dose.sample.hold() >= hold).map(|dose| dose.g_l);
    let plain_g_l = smallest(Hold::Plain);
    let sure_g_l = smallest(Hold::Sure);
    let best = curve
        .samples()
        .min_by(|a, b| a.sample.plain.total_cmp(&b.sample.plain))
        .map_or((0.0, f64::INFINITY), |dose| (dose.g_l, dose.sample.plain));
    let found = match sure_g_l.or(plain_g_l) {
        Some(dose_g_l) => {
            let mut doses = bath.doses();
            doses[agent] = dose_g_l;
            let hold = if sure_g_l.is_some() { Hold::Sure } else { Hold::Plain };
            Some(Found { dose_g_l, hold, assessment: assessor.assess(&doses)? })
        }
        None => None,
    };
    Ok(Search { agent, bands, found, plain_g_l, best })
}
