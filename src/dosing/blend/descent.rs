//! From one set of doses to the cheapest near it: a linear programme in a trust region, with what the walls are crossed by
//! counted at a high price until nothing is (an exact penalty).

use super::super::judge::{Judge, Level};
use super::linear::{Row, lowest_corner};
use super::slope::{Constraint, constraints, worst};
use crate::equilibrium::EquilibriumError;

/// What is minimised, and between which doses.
pub(super) struct Goal<'a> {
    /// Agents of the blend.
    pub agents: &'a [usize],
    /// Price or weight per gram of each.
    pub cost: Vec<f64>,
    /// Least and most of each, g/L.
    pub bounds: Vec<(f64, f64)>,
    pub level: Level,
}

impl Goal<'_> {
    /// Cost of doses of all agents, per litre of bath.
    pub fn cost(&self, doses: &[f64]) -> f64 {
        self.agents.iter().zip(&self.cost).map(|(&agent, cost)| cost * doses[agent]).sum()
    }
}

/// Steps of a descent.
const STEPS: usize = 40;
/// First and last radius of the trust region, as a share of the width of the bounds.
const FIRST_RADIUS: f64 = 0.15;
const LAST_RADIUS: f64 = 1e-8;
/// Gain over the radius, as a share of the cost of all agents at their caps, under which the doses are at rest.
const REST: f64 = 1e-6;
/// Price of one decade of excess, as a multiple of the cost of all agents at their caps.
const PENALTY: f64 = 10.0;
/// Excess (log10) under the wall that the last steps aim at, so that rounding does not end outside.
const INSIDE: f64 = 1e-8;
/// Steps that bring doses back inside.
const REPAIRS: usize = 12;

/// Doses after a descent with their worst excess.
#[derive(Clone, Debug)]
pub(super) struct Descended {
    pub doses: Vec<f64>,
    pub excess: f64,
}

/// Descends from doses of all agents.
pub(super) fn descend(judge: &mut Judge, goal: &Goal, start: &[f64]) -> Result<Descended, EquilibriumError> {
    let most: f64 = goal.cost.iter().zip(&goal.bounds).map(|(cost, (_, high))| cost * high).sum();
    let penalty = PENALTY * most;
    let merit = |doses: &[f64], found: &[Constraint]| goal.cost(doses) + penalty * worst(found).max(0.0);
    let mut doses = start.to_vec();
    let mut here = constraints(judge, &doses, goal.agents, goal.level)?;
    let mut radius = FIRST_RADIUS;
    for _ in 0..STEPS {
        let Some((step, over)) = step(goal, &doses, &here, radius, penalty) else { break };
        let mut next = doses.clone();
        for (&agent, change) in goal.agents.iter().zip(&step) {
            next[agent] += change;
        }
        clamp(goal, &mut next);
        let predicted = merit(&doses, &here) - goal.cost(&next) - penalty * over;
        if predicted <= REST * radius * most {
            break;
        }
        let there = constraints(judge, &next, goal.agents, goal.level)?;
        let gained = merit(&doses, &here) - merit(&next, &there);
        if gained > 0.1 * predicted {
            (doses, here) = (next, there);
            radius = if gained > 0.75 * predicted { (2.0 * radius).min(0.5) } else { radius };
        } else {
            radius *= 0.35;
        }
        if radius < LAST_RADIUS {
            break;
        }
    }
    repair(judge, goal, doses, here)
}

/// The step that the straight picture promises most of, with the excess it leaves.
fn step(
    goal: &Goal,
    doses: &[f64],
    here: &[Constraint],
    radius: f64,
    penalty: f64,
) -> Option<(Vec<f64>, f64)> {
    let n = goal.agents.len();
    let unit =
        |i: usize, sign: f64| -> Vec<f64> { (0..=n).map(|k| if k == i { sign } else { 0.0 }).collect() };
    let mut rows = vec![Row { slopes: unit(n, -1.0), most: 0.0 }];
    for (i, (&agent, (low, high))) in goal.agents.iter().zip(&goal.bounds).enumerate() {
        let reach = radius * (high - low).max(f64::MIN_POSITIVE);
        rows.push(Row { slopes: unit(i, 1.0), most: reach.min(high - doses[agent]).max(0.0) });
        rows.push(Row { slopes: unit(i, -1.0), most: reach.min(doses[agent] - low).max(0.0) });
    }
    for constraint in here {
        let slopes = constraint.slopes.iter().copied().chain([-1.0]).collect();
        rows.push(Row { slopes, most: -constraint.excess - INSIDE });
    }
    let cost: Vec<f64> = goal.cost.iter().copied().chain([penalty]).collect();
    let mut x = lowest_corner(&cost, &rows)?;
    let over = x.pop()?;
    Some((x, over))
}

/// Small steps along the steepest way until every wall holds; the cheapest doses often end a rounding error outside.
fn repair(
    judge: &mut Judge,
    goal: &Goal,
    mut doses: Vec<f64>,
    mut here: Vec<Constraint>,
) -> Result<Descended, EquilibriumError> {
    for _ in 0..REPAIRS {
        let Some(nearest) = here.first().filter(|nearest| nearest.excess > 0.0) else { break };
        // What is at its bound can't move that way.
        let free: Vec<bool> = goal
            .agents
            .iter()
            .zip(&goal.bounds)
            .zip(&nearest.slopes)
            .map(
                |((&agent, (low, high)), slope)| {
                    if *slope < 0.0 { doses[agent] < *high } else { doses[agent] > *low }
                },
            )
            .collect();
        let weight = |i: usize| goal.bounds[i].1 - goal.bounds[i].0;
        let length: f64 =
            (0..free.len()).filter(|&i| free[i]).map(|i| (nearest.slopes[i] * weight(i)).powi(2)).sum();
        if length == 0.0 {
            break;
        }
        let factor = -(nearest.excess + INSIDE) / length;
        for i in (0..free.len()).filter(|&i| free[i]) {
            doses[goal.agents[i]] += factor * nearest.slopes[i] * weight(i).powi(2);
        }
        clamp(goal, &mut doses);
        here = constraints(judge, &doses, goal.agents, goal.level)?;
    }
    Ok(Descended { excess: worst(&here), doses })
}

fn clamp(goal: &Goal, doses: &mut [f64]) {
    for (&agent, (low, high)) in goal.agents.iter().zip(&goal.bounds) {
        doses[agent] = doses[agent].clamp(*low, *high);
    }
}
