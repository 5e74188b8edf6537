//! From doses to additions at the tank: rounded to what can be measured, solved again, split into steps that keep
//! the pH inside its range, refused where an acid could free a poison.

use super::assess::{Assessment, Assessor};
use super::measure::{Direction, Measured, measure};
use crate::bath::{Adjustment, Bath};
use crate::chemistry::{PROTON, Product};
use crate::equilibrium::EquilibriumError;

/// One addition for the whole tank.
#[derive(Clone, Debug, PartialEq)]
pub struct Addition {
    /// The product.
    pub product: Product,
    /// Its amount.
    pub measured: Measured,
    /// Exact dose in g/L, before rounding.
    pub exact_g_l: f64,
    /// Number of the agent, `None` for the acid or alkali.
    pub agent: Option<usize>,
}

/// One step at the tank, in order.
#[derive(Clone, Debug, PartialEq)]
pub struct Step {
    /// Which addition, in part or whole.
    pub addition: usize,
    /// The amount of this step.
    pub measured: Measured,
    /// Portion number and count: (1, 2) is the first of two.
    pub portion: (usize, usize),
    /// pH that the tank should read afterwards.
    pub ph_after: Option<f64>,
}

/// The additions of a set of doses.
#[derive(Clone, Debug, PartialEq)]
pub struct Plan {
    /// Doses as measured out, g/L.
    pub rounded_doses: Vec<f64>,
    /// What is added, agents first.
    pub additions: Vec<Addition>,
    /// How it is added.
    pub steps: Vec<Step>,
    /// The bath as it stands.
    pub before: Assessment,
    /// The bath with the rounded doses.
    pub after: Assessment,
    /// Share of an agent in the bath that one portion brings, where it is over the cap of one addition.
    pub over_cap: Option<f64>,
    /// Why the pH is not brought back by the additions.
    pub uncorrected: Option<String>,
    /// Why nothing may be printed: an acid into a bath that may hold cyanide, sulfide or hypochlorite.
    pub refused: Option<String>,
}

/// Most portions that one addition is split into.
const MAX_PORTIONS: usize = 6;
/// Largest share of the agent in the bath that one addition may bring, when the project names none (common
/// practice: 15 %).
const ADDITION_CAP: f64 = 0.15;
/// Components that acid turns into a poisonous gas.
const POISON_SOURCES: [(&str, &str); 3] = [("CN-", "cyanide"), ("HS-", "sulfide"), ("OCl-", "hypochlorite")];

/// Plans the additions for given doses in g/L.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn plan(bath: &Bath, doses: &[f64]) -> Result<Plan, EquilibriumError> {
    let volume = bath.project.tank.volume_l;
    let details = &bath.project.sheet;
    let mut additions = Vec::new();
    let mut rounded_doses = doses.to_vec();
    for (i, (agent, &dose)) in bath.agents.iter().zip(doses).enumerate() {
        if dose > 0.0 {
            let measured = measure(&agent.product, dose, volume, details, Direction::Up);
            rounded_doses[i] = measured.rounded_kg * 1000.0 / volume;
            additions.push(Addition {
                product: agent.product.clone(),
                measured,
                exact_g_l: dose,
                agent: Some(i),
            });
        }
    }
    let corrected = bath.corrected(&rounded_doses)?;
    if let Some(Adjustment { product, dose_g_l }) = &corrected.adjustment {
        let measured = measure(product, *dose_g_l, volume, details, Direction::Down);
        additions.push(Addition { product: product.clone(), measured, exact_g_l: *dose_g_l, agent: None });
    }
    let mut assessor = Assessor::new(bath)?;
    let none = vec![0.0; doses.len()];
    let before = assessor.assess(&none)?;
    let after = assessor.assess(&rounded_doses)?;
    let refused = refusal(bath, &additions);
    let portions = portions(bath, &rounded_doses, &additions)?;
    let share = largest_share(bath, &rounded_doses) / portions as f64;
    let over_cap = (share > addition_cap(bath) * (1.0 + 1e-9)).then_some(share);
    let steps =
        if refused.is_some() { Vec::new() } else { steps(bath, &rounded_doses, &additions, portions)? };
    let uncorrected = corrected.failure;
    Ok(Plan { rounded_doses, additions, steps, before, after, over_cap, uncorrected, refused })
}

fn refusal(bath: &Bath, additions: &[Addition]) -> Option<String> {
    additions.iter().find_map(|addition| acid_refused(bath, &addition.product))
}

/// Why a product may not be added: it is acid, and the bath holds or may hold what acid turns into a poisonous gas.
pub fn acid_refused(bath: &Bath, product: &Product) -> Option<String> {
    if product.released(PROTON) <= 0.0 {
        return None;
    }
    let held: Vec<&str> = POISON_SOURCES
        .iter()
        .filter(|(token, _)| bath.system.component(token).is_some_and(|i| bath.contents[i] > 0.0))
        .map(|(_, name)| *name)
        .collect();
    let what = if !held.is_empty() {
        held.join(" and ")
    } else if bath.project.sheet.holds_cyanide_sulfide_or_hypochlorite {
        "cyanide, sulfide or hypochlorite".to_owned()
    } else {
        return None;
    };
    Some(format!(
        "{} is acid and this bath holds {what}: acid would free a poisonous gas. No addition is printed. Choose a neutral or alkaline product.",
        product.name
    ))
}

/// Largest share of an agent in the bath that one addition may bring.
pub fn addition_cap(bath: &Bath) -> f64 {
    bath.project.sheet.addition_cap_percent.map_or(ADDITION_CAP, |percent| percent / 100.0)
}

/// The largest part of an agent already in the bath that the doses bring; 0 for agents that the bath does not hold yet.
fn largest_share(bath: &Bath, doses: &[f64]) -> f64 {
    let shares = bath.agents.iter().zip(doses).map(|(agent, dose)| {
        let there = bath.contents[agent.active];
        if there > 0.0 { dose * agent.per_gram[agent.active] / there } else { 0.0 }
    });
    shares.fold(0.0, f64::max)
}

/// How many portions keep the pH inside its range and each addition under its cap, up to the most that is reasonable.
fn portions(bath: &Bath, doses: &[f64], additions: &[Addition]) -> Result<usize, EquilibriumError> {
    let by_cap = (largest_share(bath, doses) / addition_cap(bath)).ceil().max(1.0) as usize;
    let mut portions = by_cap.min(MAX_PORTIONS);
    let corrected = additions.iter().any(|addition| addition.agent.is_none());
    if let Some(range) = bath.ph().filter(|_| corrected) {
        while portions < MAX_PORTIONS {
            let share: Vec<f64> = doses.iter().map(|dose| dose / portions as f64).collect();
            match bath.ph_after(&share, None)? {
                Some(ph) if ph < range.low || ph > range.high => portions += 1,
                _ => break,
            }
        }
    }
    Ok(portions)
}

/// Agents in portions, each followed by its share of acid or alkali.
fn steps(
    bath: &Bath,
    doses: &[f64],
    additions: &[Addition],
    portions: usize,
) -> Result<Vec<Step>, EquilibriumError> {
    let volume = bath.project.tank.volume_l;
    let mut steps = Vec::new();
    let mut added = vec![0.0; doses.len()];
    let mut poured = 0.0;
    let mut left: Vec<f64> = additions.iter().map(|addition| addition.measured.rounded_kg).collect();
    for portion in 1..=portions {
        for (index, addition) in additions.iter().enumerate() {
            let last = portion == portions;
            let share_kg = left[index] / (portions - portion + 1) as f64;
            let direction = if last || addition.agent.is_none() { Direction::Down } else { Direction::Up };
            let measured = if last {
                measure(
                    &addition.product,
                    left[index] * 1000.0 / volume,
                    volume,
                    &bath.project.sheet,
                    direction,
                )
            } else {
                measure(&addition.product, share_kg * 1000.0 / volume, volume, &bath.project.sheet, direction)
            };
            let kg = if last { left[index] } else { measured.rounded_kg.min(left[index]) };
            left[index] -= kg;
            match addition.agent {
                Some(agent) => added[agent] += kg * 1000.0 / volume,
                None => poured += kg * 1000.0 / volume,
            }
            let adjusted = additions.iter().find(|addition| addition.agent.is_none());
            let adjusted =
                adjusted.map(|addition| Adjustment { product: addition.product.clone(), dose_g_l: poured });
            let ph_after = bath.ph_after(&added, adjusted.as_ref())?;
            if kg > 0.0 {
                steps.push(Step { addition: index, measured, portion: (portion, portions), ph_after });
            }
        }
    }
    Ok(steps)
}
