//! How the excess at each place changes with each agent, exactly: from the gradient of the equilibrium.

use super::super::assess::CONFIDENCE_95;
use super::super::judge::{Judge, Level, TOUCH};
use super::super::places::{FAR, Objective, Place};
use crate::bath::Wall;
use crate::equilibrium::{EquilibriumError, LN_10};

/// A wall at a place, near the doses at hand.
#[derive(Clone, Debug)]
pub(super) struct Constraint {
    pub place: Place,
    pub wall: Wall,
    /// log10 of the excess, with confidence where asked for.
    pub excess: f64,
    /// Its change per g/L of each agent of the blend.
    pub slopes: Vec<f64>,
}

/// Walls further (log10) from the nearest than this do not bound a step.
const NEAR: f64 = 1.5;
/// Most constraints of a step.
const MOST: usize = 7;
/// Step of a dose, as a share of its cap, over which the acid or alkali that goes with it is differenced: its amount is
/// nearly straight in the dose.
const STEP: f64 = 1e-4;

/// The constraints that are near at given doses, the nearest first.
pub(super) fn constraints(
    judge: &mut Judge,
    doses: &[f64],
    agents: &[usize],
    level: Level,
) -> Result<Vec<Constraint>, EquilibriumError> {
    let sample = judge.take(doses)?;
    let mut moved = Vec::with_capacity(agents.len());
    for &agent in agents {
        let cap = judge.bath.agents[agent].max_g_l;
        let step = if doses[agent] + STEP * cap > cap { -STEP * cap } else { STEP * cap };
        let mut doses = doses.to_vec();
        doses[agent] += step;
        moved.push((judge.assessor.places.dose(&doses)?, step));
    }
    let reach = FAR.min(sample.plain - NEAR);
    let mut found = Vec::new();
    let mut scores = Vec::new();
    for place in judge.places_for(&sample)? {
        scores.clear();
        judge.assessor.places.score(&sample.dosed, &place, &judge.objectives, &mut scores)?;
        let near: Vec<usize> = (0..scores.len()).filter(|&wall| scores[wall] > reach).collect();
        if near.is_empty() {
            continue;
        }
        let here = judge.assessor.places.totals(&sample.dosed, &place);
        let directions: Vec<Vec<f64>> = moved
            .iter()
            .map(|(dosed, step)| {
                let there = judge.assessor.places.totals(dosed, &place);
                here.iter().zip(there).map(|(here, there)| (there - here) / step).collect()
            })
            .collect();
        let bath = judge.bath;
        let walls: Vec<Wall> = near
            .iter()
            .filter_map(|&number| match judge.objectives[number] {
                Objective::Wall(wall) => Some(wall),
                _ => None,
            })
            .collect();
        let values: Vec<_> = walls.iter().map(|wall| bath.limited_value(*wall)).collect();
        let gradients = judge.assessor.places.gradients(&sample.dosed, &place, &values)?;
        for ((wall, number), gradient) in walls.into_iter().zip(near).zip(gradients) {
            let sign = if bath.rises_towards(wall) { 1.0 } else { -1.0 } / LN_10;
            let confidence = match level {
                Level::Plain => 0.0,
                Level::Sure => CONFIDENCE_95 * gradient.sigma_log10(&bath.system),
            };
            found.push(Constraint {
                place,
                wall,
                excess: scores[number] + confidence - TOUCH,
                slopes: directions.iter().map(|direction| sign * gradient.along(direction)).collect(),
            });
        }
    }
    found.retain(|constraint| constraint.slopes.iter().all(|slope| slope.is_finite()));
    found.sort_by(|a, b| b.excess.total_cmp(&a.excess));
    found.truncate(MOST);
    Ok(found)
}

/// The largest excess.
pub(super) fn worst(constraints: &[Constraint]) -> f64 {
    constraints.iter().map(|constraint| constraint.excess).fold(f64::NEG_INFINITY, f64::max)
}
