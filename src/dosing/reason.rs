//! Why no dose holds, with numbers: the best that can be reached, who takes the agent, the nearest change that works.

use super::assess::{Assessment, Assessor};
use super::ledger::{LedgerEntry, ledger};
use super::search::{Hold, Search, search, search_with};
use crate::bath::{AgentDose, Bath, Range, Solids};
use crate::chemistry::Role;
use crate::equilibrium::{EquilibriumError, Solver};

/// A change of the bath that lets a dose hold.
#[derive(Clone, Debug, PartialEq)]
pub enum Change {
    /// Shift the whole pH range so that its set point is here.
    Ph {
        /// New set point.
        set: f64,
        /// Smallest dose that holds there, g/L.
        dose_g_l: f64,
    },
    /// Allow doses up to here, g/L.
    Cap(f64),
    /// Use another product, at this dose in g/L.
    Agent {
        /// Product id.
        product: String,
        /// Product name.
        name: String,
        /// Smallest dose that holds, g/L.
        dose_g_l: f64,
    },
}

/// Why no dose of an agent holds.
#[derive(Clone, Debug, PartialEq)]
pub struct Reason {
    /// The dose that comes nearest, g/L.
    pub best_dose_g_l: f64,
    /// Its worst cases.
    pub best: Assessment,
    /// Who holds the agent there, at the worst case.
    pub ledger: Vec<LedgerEntry>,
    /// Changes that work, the smallest of each kind.
    pub changes: Vec<Change>,
}

/// Largest shift of pH that is tried, and its step.
const PH_REACH: f64 = 1.5;
const PH_STEP: f64 = 0.1;
/// Largest multiple of the cap that is tried.
const CAP_REACH: f64 = 4.0;
/// Other products offered at most.
const OFFERS: usize = 3;

/// Explains a search that found nothing.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn why_none(bath: &Bath, result: &Search) -> Result<Reason, EquilibriumError> {
    let mut doses = bath.doses();
    doses[result.agent] = result.best.0;
    let best = Assessor::new(bath)?.assess(&doses)?;
    let ledger = match best.nearest() {
        Some(wall) => {
            let constants = bath.constants_at(wall.worst.temperature_c);
            let ph = bath.ph().map(|_| wall.worst.ph);
            let corrected = bath.corrected(&doses)?;
            let mut totals = corrected.totals;
            bath.drifted(&wall.worst.position, corrected.dilution, &mut totals);
            let solution = bath.solve_totals(&mut Solver::new(), &constants, &totals, ph, Solids::Walls)?;
            ledger(bath, &solution, bath.agents[result.agent].active)
        }
        None => Vec::new(),
    };
    let mut changes = Vec::new();
    changes.extend(other_ph(bath, result)?);
    changes.extend(larger_cap(bath, result.agent)?);
    changes.extend(other_agents(bath, result.agent)?);
    Ok(Reason { best_dose_g_l: result.best.0, best, ledger, changes })
}

/// The smallest shift of the pH range at which some dose holds by plain numbers.
fn other_ph(bath: &Bath, result: &Search) -> Result<Option<Change>, EquilibriumError> {
    let Some(range) = bath.ph() else { return Ok(None) };
    let max = bath.agents[result.agent].max_g_l;
    let tries = (PH_REACH / PH_STEP) as i32;
    for step in 1..=tries {
        for sign in [1.0, -1.0] {
            let shift = sign * PH_STEP * f64::from(step);
            let moved = Range::new(range.low + shift, range.set + shift, range.high + shift);
            if moved.low < -1.0 || moved.high > 15.0 {
                continue;
            }
            let mut assessor = Assessor::over(bath, Some(moved))?;
            // A few doses tell whether a whole search is worth its time.
            let mut doses = bath.doses();
            let mut holds = false;
            for share in [0.1, 0.3, 0.6, 1.0] {
                doses[result.agent] = share * max;
                holds |= assessor.excess(&doses)? <= 0.0;
            }
            if holds && let Some(dose_g_l) = search_with(bath, result.agent, &mut assessor)?.plain_g_l {
                return Ok(Some(Change::Ph { set: moved.set, dose_g_l }));
            }
        }
    }
    Ok(None)
}

/// The smallest doubling of the cap under which some dose holds.
fn larger_cap(bath: &Bath, agent: usize) -> Result<Option<Change>, EquilibriumError> {
    let mut wider = bath.clone();
    let mut factor = 2.0;
    while factor <= CAP_REACH {
        wider.agents[agent].max_g_l = bath.agents[agent].max_g_l * factor;
        if let Some(dose) = search(&wider, agent)?.plain_g_l {
            return Ok(Some(Change::Cap(dose)));
        }
        factor *= 2.0;
    }
    Ok(None)
}

/// Other products with another active component that hold under the same cap, smallest dose first.
fn other_agents(bath: &Bath, agent: usize) -> Result<Vec<Change>, EquilibriumError> {
    let mut offers: Vec<(f64, String, String)> = Vec::new();
    let current = &bath.agents[agent].product;
    let mut seen = vec![current.active.clone()];
    for product in bath.catalogue.iter().filter(|product| product.role == Role::Agent) {
        if seen.contains(&product.active) {
            continue;
        }
        seen.push(product.active.clone());
        let mut project = bath.project.clone();
        project.agents[agent] = AgentDose {
            product: product.id.clone(),
            max_g_l: bath.agents[agent].max_g_l,
            ..AgentDose::default()
        };
        let Ok(other) = Bath::resolve(&project) else { continue };
        let Ok(mut assessor) = Assessor::new(&other) else { continue };
        let mut doses = other.doses();
        let mut holds = false;
        for share in [0.05, 0.2, 0.5, 1.0] {
            doses[agent] = share * other.agents[agent].max_g_l;
            holds |= assessor.excess(&doses).is_ok_and(|excess| excess <= 0.0);
        }
        if holds
            && let Ok(found) = search_with(&other, agent, &mut assessor)
            && let Some(dose) = found.found.filter(|found| found.hold >= Hold::Plain)
        {
            offers.push((dose.dose_g_l, product.id.clone(), product.name.clone()));
        }
    }
    offers.sort_by(|a, b| a.0.total_cmp(&b.0));
    let offers = offers.into_iter().take(OFFERS);
    Ok(offers.map(|(dose_g_l, product, name)| Change::Agent { product, name, dose_g_l }).collect())
}
