//! The hour at which a wall is crossed: bracketed by two steps, then found within the step as a root of the excess.

use super::judge::Judge;
use super::walk::{Leg, Moment};
use crate::bath::{Running, Wall};
use crate::equilibrium::EquilibriumError;

/// Width in hours at which a root is found: a third of a second.
const WIDTH_H: f64 = 1e-4;
/// Most evaluations of a root search.
const EVALUATIONS: usize = 40;

/// A wall that is crossed in the course of the forecast.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Crossing {
    /// Which wall.
    pub wall: Wall,
    /// First hour at which it is crossed by plain numbers; 0 when it is from the beginning.
    pub hour: Option<f64>,
    /// First hour at which it no longer holds with 95 % confidence.
    pub hour_95: Option<f64>,
}

/// All walls that are crossed, in the order of the hour at which confidence ends.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn crossings(
    running: &Running,
    judge: &mut Judge,
    legs: &[Leg],
    sigmas: &[Vec<Vec<Vec<f64>>>],
) -> Result<Vec<Crossing>, EquilibriumError> {
    let mut found = Vec::new();
    for wall in 0..judge.walls.len() {
        let hour_95 = first(running, judge, legs, sigmas, (wall, true))?;
        let hour = if hour_95.is_some() { first(running, judge, legs, sigmas, (wall, false))? } else { None };
        if hour_95.is_some() {
            found.push(Crossing { wall: judge.walls[wall].0, hour, hour_95 });
        }
    }
    found.sort_by(|a, b| a.hour_95.unwrap_or(f64::MAX).total_cmp(&b.hour_95.unwrap_or(f64::MAX)));
    Ok(found)
}

/// First hour at which a wall is crossed.
fn first(
    running: &Running,
    judge: &mut Judge,
    legs: &[Leg],
    sigmas: &[Vec<Vec<Vec<f64>>>],
    (wall, sure): (usize, bool),
) -> Result<Option<f64>, EquilibriumError> {
    for (leg, sigmas) in legs.iter().zip(sigmas) {
        let at = |judge: &Judge, moment: usize| {
            let excesses = leg[moment]
                .values
                .iter()
                .zip(sigmas)
                .map(|(values, sigmas)| judge.excess(wall, values, sure.then_some(&sigmas[moment])));
            excesses.fold(f64::NEG_INFINITY, f64::max)
        };
        let Some(after) = (0..leg.len()).find(|&moment| at(judge, moment) > 0.0) else { continue };
        let Some(before) = after.checked_sub(1) else { return Ok(Some(leg[0].hour)) };
        let ends = (at(judge, before), at(judge, after));
        let sigmas_at: Vec<[&[f64]; 2]> =
            sigmas.iter().map(|place| [place[before].as_slice(), place[after].as_slice()]).collect();
        let within = root(running.step_h, ends, |hours| {
            excess_within(running, judge, &leg[before], &sigmas_at, (wall, sure), hours)
        })?;
        return Ok(Some(leg[before].hour + within));
    }
    Ok(None)
}

/// Excess over a wall some hours after a moment, the uncertainty on the straight line between two steps.
fn excess_within(
    running: &Running,
    judge: &mut Judge,
    from: &Moment,
    sigmas: &[[&[f64]; 2]],
    (wall, sure): (usize, bool),
    hours: f64,
) -> Result<f64, EquilibriumError> {
    let contents = from.contents.later(running, &from.bound, hours);
    let share = hours / running.step_h;
    let mut worst = f64::NEG_INFINITY;
    for (place, [before, after]) in sigmas.iter().enumerate() {
        let values = judge.values(place, &contents.totals)?;
        let between: Vec<f64> = before.iter().zip(*after).map(|(a, b)| a + share * (b - a)).collect();
        worst = worst.max(judge.excess(wall, &values, sure.then_some(&between)));
    }
    Ok(worst)
}

/// Root of a function that is at most zero at 0 and above zero at `high`: false position, with the weight of an end
/// that stays halved (Illinois rule), and bisection when it is slow.
fn root(
    high: f64,
    ends: (f64, f64),
    mut f: impl FnMut(f64) -> Result<f64, EquilibriumError>,
) -> Result<f64, EquilibriumError> {
    let (mut a, mut b) = (0.0, high);
    let (mut fa, mut fb) = ends;
    let mut kept = 0i32;
    for turn in 0..EVALUATIONS {
        if b - a <= WIDTH_H || fa == 0.0 {
            break;
        }
        let straight = b - fb * (b - a) / (fb - fa);
        let inside = straight.is_finite() && straight > a && straight < b;
        let middle = if inside && turn % 4 != 3 { straight } else { 0.5 * (a + b) };
        let value = f(middle)?;
        if value > 0.0 {
            (b, fb) = (middle, value);
            kept = kept.max(0) + 1;
            if kept > 1 {
                fa *= 0.5;
            }
        } else {
            (a, fa) = (middle, value);
            kept = kept.min(0) - 1;
            if kept < -1 {
                fb *= 0.5;
            }
        }
    }
    Ok(if fa == 0.0 { a } else { b })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_root_of_a_bent_function_is_found_in_few_evaluations() {
        for power in [1, 3, 9] {
            let mut count = 0;
            let f = |x: f64| x.powi(power) - 0.3f64.powi(power);
            let found = root(1.0, (f(0.0), f(1.0)), |x| {
                count += 1;
                Ok(f(x))
            })
            .unwrap();
            assert!((found - 0.3).abs() <= 2.0 * WIDTH_H, "{power}: {found}");
            assert!(count <= 30, "{power}: {count}");
        }
    }
}
