//! Why a blend can't be less: the scenarios that bind, and what each of them costs.
//!
//! At the cheapest doses the cost rises in no direction that the walls allow, so it is a sum of the binding walls' slopes
//! with positive weights (Karush, Kuhn and Tucker). The weight of a wall is what a decade of it costs: its shadow price.

use super::super::assess::Reading;
use super::super::judge::Judge;
use super::super::places::{Objective, Place};
use super::descent::Goal;
use super::slope::{Constraint, constraints};
use crate::bath::{Bath, Wall};
use crate::equilibrium::EquilibriumError;
use crate::quantity::significant;
use nalgebra::{DMatrix, DVector};

/// A scenario that keeps the blend from being less.
#[derive(Clone, Debug, PartialEq)]
pub struct Binding {
    /// The wall.
    pub wall: Wall,
    /// Where it binds.
    pub at: Reading,
    /// What the last tenfold of this wall costs: price or grams per litre of bath and decade; 0 where a little less fails
    /// at once.
    pub per_decade: f64,
    /// What it would cost if the window reached a little further there.
    pub worsenings: Vec<Worsening>,
}

/// A little more of the window, in plain words, with what it costs.
#[derive(Clone, Debug, PartialEq)]
pub struct Worsening {
    /// "0.1 pH lower", "5 °C hotter", "10 % more copper".
    pub what: String,
    /// Price or grams per litre of bath, first order.
    pub cost: f64,
}

/// Excess (log10) under which a wall counts as touched.
const TOUCHED: f64 = 1e-3;
/// Share of a cap by which less is tried at once.
const EDGE: f64 = 1e-5;
/// How much further the window is tried.
const PH_STEP: f64 = 0.1;
const TEMPERATURE_STEP_C: f64 = 5.0;
const DRIFT_STEP: f64 = 0.1;
/// Share of the least cost below which a weight is rounding.
const SMALLEST_WEIGHT: f64 = 1e-6;

/// The binding scenarios of doses that hold.
pub(super) fn binding(
    judge: &mut Judge,
    goal: &Goal,
    doses: &[f64],
) -> Result<Vec<Binding>, EquilibriumError> {
    let touched: Vec<Constraint> = constraints(judge, doses, goal.agents, goal.level)?
        .into_iter()
        .filter(|constraint| constraint.excess > -TOUCHED)
        .collect();
    let weights = weights(goal, doses, &touched);
    let dosed = judge.assessor.places.dose(doses)?;
    let mut found = Vec::new();
    for (constraint, weight) in touched.iter().zip(weights) {
        if weight <= SMALLEST_WEIGHT * goal.cost(doses) {
            continue;
        }
        let value = judge.bath.limited_value(constraint.wall);
        let at = judge.assessor.read(&dosed, value, constraint.place)?;
        let objective = [Objective::Wall(constraint.wall)];
        let mut scores = Vec::new();
        judge.assessor.places.score(&dosed, &constraint.place, &objective, &mut scores)?;
        let mut worsenings = Vec::new();
        for (what, place) in further(judge.bath, &constraint.place) {
            judge.assessor.places.score(&dosed, &place, &objective, &mut scores)?;
            let cost = weight * (scores[scores.len() - 1] - scores[0]);
            if cost > 0.0 {
                worsenings.push(Worsening { what, cost });
            }
        }
        worsenings.sort_by(|a, b| b.cost.total_cmp(&a.cost));
        found.push(Binding { wall: constraint.wall, at, per_decade: weight, worsenings });
    }
    if found.is_empty() {
        found.extend(edge(judge, goal, doses)?);
    }
    found.sort_by(|a, b| b.per_decade.total_cmp(&a.per_decade));
    Ok(found)
}

/// The wall that a little less of everything would cross at once: where the last of a solid dissolves, uncertainty
/// changes by a jump, and no slope tells a price.
fn edge(judge: &mut Judge, goal: &Goal, doses: &[f64]) -> Result<Option<Binding>, EquilibriumError> {
    let mut less = doses.to_vec();
    for (&agent, (low, high)) in goal.agents.iter().zip(&goal.bounds) {
        less[agent] = (less[agent] - EDGE * (high - low)).max(*low);
    }
    let crossed = constraints(judge, &less, goal.agents, goal.level)?;
    let Some(crossed) = crossed.first().filter(|crossed| crossed.excess > 0.0) else { return Ok(None) };
    let dosed = judge.assessor.places.dose(doses)?;
    let value = judge.bath.limited_value(crossed.wall);
    let at = judge.assessor.read(&dosed, value, crossed.place)?;
    Ok(Some(Binding { wall: crossed.wall, at, per_decade: 0.0, worsenings: Vec::new() }))
}

/// Places a little outside the window, beyond the ends that a place touches.
fn further(bath: &Bath, place: &Place) -> Vec<(String, Place)> {
    let mut found = Vec::new();
    let mut add = |what: String, change: &dyn Fn(&mut Place)| {
        let mut moved = *place;
        change(&mut moved);
        found.push((what, moved));
    };
    if let (Some(ph), Some(range)) = (place.ph, bath.ph()) {
        if ph <= range.low {
            add(format!("{PH_STEP} pH lower"), &|p| p.ph = Some(ph - PH_STEP));
        }
        if ph >= range.high {
            add(format!("{PH_STEP} pH higher"), &|p| p.ph = Some(ph + PH_STEP));
        }
    }
    let (t, range) = (place.temperature_c, bath.project.tank.temperature_c);
    if t <= range.low && t >= TEMPERATURE_STEP_C {
        add(format!("{TEMPERATURE_STEP_C} °C colder"), &|p| p.temperature_c = t - TEMPERATURE_STEP_C);
    }
    if t >= range.high {
        add(format!("{TEMPERATURE_STEP_C} °C hotter"), &|p| p.temperature_c = t + TEMPERATURE_STEP_C);
    }
    for (number, axis) in bath.drifts.iter().enumerate() {
        let t = place.position.0[number];
        let (end, word) = if t >= 1.0 {
            (axis.high, "more")
        } else if t <= -1.0 {
            (axis.low, "less")
        } else {
            continue;
        };
        let width = (end - axis.set).abs();
        if width > 0.0 && end != 0.0 {
            let change = t * DRIFT_STEP * end.abs() / width;
            let what = format!("{} % {word} {}", significant(100.0 * DRIFT_STEP, 2), axis.name);
            add(what, &|p| p.position.0[number] = t + change);
        }
    }
    found
}

/// Weights of the touched walls, none of them negative, that make up the cost where the doses are free to move: the best
/// of all choices of as many walls as there are free doses, or fewer.
fn weights(goal: &Goal, doses: &[f64], touched: &[Constraint]) -> Vec<f64> {
    let free: Vec<usize> = (0..goal.agents.len())
        .filter(|&i| {
            let ((low, high), dose) = (goal.bounds[i], doses[goal.agents[i]]);
            let edge = 1e-6 * (high - low);
            dose > low + edge && dose < high - edge
        })
        .collect();
    let cost = DVector::from_iterator(free.len(), free.iter().map(|&i| goal.cost[i]));
    let mut best = (cost.norm(), vec![0.0; touched.len()]);
    for choice in 1u32..1 << touched.len() {
        let chosen: Vec<usize> = (0..touched.len()).filter(|k| choice >> k & 1 == 1).collect();
        if chosen.len() > free.len() {
            continue;
        }
        let slopes = DMatrix::from_fn(free.len(), chosen.len(), |i, k| -touched[chosen[k]].slopes[free[i]]);
        let Ok(weights) = slopes.clone().svd(true, true).solve(&cost, 1e-12) else { continue };
        let left = (&slopes * &weights - &cost).norm();
        if weights.iter().all(|weight| *weight >= 0.0) && left < best.0 * (1.0 - 1e-9) {
            let mut all = vec![0.0; touched.len()];
            chosen.iter().zip(weights.iter()).for_each(|(&k, weight)| all[k] = *weight);
            best = (left, all);
        }
    }
    best.1
}
