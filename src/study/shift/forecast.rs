//! The forecast: free metals against time with their confidence, when a wall is crossed, which solids appear, what
//! runs out.

use super::confidence::sigmas;
use super::crossings::{Crossing, crossings};
use super::judge::{Judge, Place};
use super::stirred::Contents;
use super::walk::{Change, Leg, Moment, walk};
use crate::bath::{Rule, Running, Wall};
use crate::dosing::CONFIDENCE_95;
use crate::equilibrium::EquilibriumError;

/// A limited metal at one moment, log10 of mol/L.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MetalAt {
    /// Free metal at the set point.
    pub log10_free: f64,
    /// Its standard uncertainty.
    pub sigma: f64,
    /// Most free metal at the followed places of the operating range, and with 95 % confidence.
    pub most: f64,
    /// See [`MetalAt::most`].
    pub most_95: f64,
    /// Least free metal, and with 95 % confidence.
    pub least: f64,
    /// See [`MetalAt::least`].
    pub least_95: f64,
}

/// A wall at one moment.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WallAt {
    /// Which wall.
    pub wall: Wall,
    /// log10 of the excess over the wall at the worst place of the operating range: zero or less holds.
    pub excess: f64,
    /// The same with 95 % confidence, one-sided.
    pub excess_95: f64,
}

/// The bath at one moment. Where something is added there are two moments of the same hour, before and after.
#[derive(Clone, Debug, PartialEq)]
pub struct TimePoint {
    /// Running hours from the beginning.
    pub hour: f64,
    /// What is in the tank.
    pub contents: Contents,
    /// Every limited metal, in the order of the limits.
    pub metals: Vec<MetalAt>,
    /// Every wall.
    pub walls: Vec<WallAt>,
    /// Amount of each solid at the set point, mol/L.
    pub solids: Vec<f64>,
}

impl TimePoint {
    /// log10 of the excess over the nearest wall, with 95 % confidence or by plain numbers.
    pub fn excess(&self, sure: bool) -> f64 {
        let excesses = self.walls.iter().map(|wall| if sure { wall.excess_95 } else { wall.excess });
        excesses.fold(f64::NEG_INFINITY, f64::max)
    }
}

/// A solid that appears in the course of the forecast.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Appearance {
    /// System index of the solid.
    pub solid: usize,
    /// When it begins to form; 0 when it is there from the beginning.
    pub hour: f64,
    /// How it is treated.
    pub rule: Rule,
}

/// What happens to a bath over some shifts.
#[derive(Clone, Debug, PartialEq)]
pub struct Forecast {
    /// Places of the operating range that are followed; the first is the set point.
    pub places: Vec<Place>,
    /// The bath from step to step.
    pub points: Vec<TimePoint>,
    /// Walls that are crossed, the first in time first.
    pub crossings: Vec<Crossing>,
    /// Solids that appear: those that may form at the set point, those that must not at the worst place.
    pub solids: Vec<Appearance>,
    /// Components that the shift uses up, with the hour.
    pub used_up: Vec<(usize, f64)>,
}

impl Forecast {
    /// When the first wall is crossed, with 95 % confidence or by plain numbers.
    pub fn crossed(&self, sure: bool) -> Option<f64> {
        let hours = self.crossings.iter().filter_map(|c| if sure { c.hour_95 } else { c.hour });
        hours.min_by(f64::total_cmp)
    }
}

/// Forecasts a bath that is left alone, from its doses.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn forecast(running: &Running) -> Result<Forecast, EquilibriumError> {
    let start = Contents::at_start(&running.bath)?;
    let mut judge = judge(running, &start)?;
    replay(running, &mut judge, &start, &[])
}

/// Moments of an untouched course at which the operating range is scanned.
const SCANS: usize = 5;

/// A judge that follows the places which are worst in the course of an untouched bath.
pub fn judge<'a>(running: &'a Running, start: &Contents) -> Result<Judge<'a>, EquilibriumError> {
    let none = vec![0.0; start.totals.len()];
    let hours = running.steps() as f64 * running.step_h;
    let moments: Vec<Vec<f64>> = (0..SCANS)
        .map(|i| start.later(running, &none, hours * i as f64 / (SCANS - 1) as f64).totals)
        .collect();
    Judge::over(&running.bath, &moments)
}

/// Forecasts a bath with changes at the tank.
pub fn replay(
    running: &Running,
    judge: &mut Judge,
    start: &Contents,
    changes: &[Change],
) -> Result<Forecast, EquilibriumError> {
    let legs = walk(running, judge, start, changes)?;
    let mut points = Vec::new();
    let mut sigmas_by_leg = Vec::with_capacity(legs.len());
    for leg in &legs {
        let sigmas = sigmas(judge, leg)?;
        points.extend(leg.iter().enumerate().map(|(i, moment)| {
            let here: Vec<&[f64]> = sigmas.iter().map(|place| place[i].as_slice()).collect();
            point(judge, running, moment, &here)
        }));
        sigmas_by_leg.push(sigmas);
    }
    let crossings = crossings(running, judge, &legs, &sigmas_by_leg)?;
    let mut solids: Vec<Appearance> = crossings
        .iter()
        .filter_map(|crossing| match crossing.wall {
            Wall::Solid(solid) => {
                Some(Appearance { solid, hour: crossing.hour?, rule: running.bath.rules[solid] })
            }
            _ => None,
        })
        .collect();
    for solid in 0..running.bath.rules.len() {
        solids.extend(appearance(running, judge, &legs, solid)?);
    }
    solids.sort_by(|a, b| a.hour.total_cmp(&b.hour));
    let places = (0..judge.places()).map(|place| judge.place(place)).collect();
    Ok(Forecast { places, points, crossings, solids, used_up: used_up(running, &legs) })
}

fn point(judge: &Judge, running: &Running, moment: &Moment, sigmas: &[&[f64]]) -> TimePoint {
    let places = || moment.values.iter().zip(sigmas);
    let metals = (0..running.bath.limits.len()).map(|value| {
        let of = |sign: f64, confidence: f64| {
            let ends = places().map(|(values, sigmas)| sign * values[value] + confidence * sigmas[value]);
            sign * ends.fold(f64::NEG_INFINITY, f64::max)
        };
        MetalAt {
            log10_free: moment.values[0][value],
            sigma: sigmas[0][value],
            most: of(1.0, 0.0),
            most_95: of(1.0, CONFIDENCE_95),
            least: of(-1.0, 0.0),
            least_95: of(-1.0, CONFIDENCE_95),
        }
    });
    let walls = judge.walls.iter().enumerate().map(|(number, (wall, _))| {
        let of = |sure: bool| {
            let excesses =
                places().map(|(values, sigmas)| judge.excess(number, values, sure.then_some(sigmas)));
            excesses.fold(f64::NEG_INFINITY, f64::max)
        };
        WallAt { wall: *wall, excess: of(false), excess_95: of(true) }
    });
    TimePoint {
        hour: moment.hour,
        contents: moment.contents.clone(),
        metals: metals.collect(),
        walls: walls.collect(),
        solids: moment.solids.clone(),
    }
}

/// Bisections within a step until an appearance is known to a second or so.
const BISECTIONS: usize = 12;

/// When a solid that may form begins to.
fn appearance(
    running: &Running,
    judge: &mut Judge,
    legs: &[Leg],
    solid: usize,
) -> Result<Option<Appearance>, EquilibriumError> {
    let found = |hour| Some(Appearance { solid, hour, rule: running.bath.rules[solid] });
    for (number, leg) in legs.iter().enumerate() {
        if leg[0].solids[solid] > 0.0 {
            return Ok(found(if number == 0 { 0.0 } else { leg[0].hour }));
        }
        let Some(after) = leg.iter().position(|moment| moment.solids[solid] > 0.0) else { continue };
        let from = &leg[after - 1];
        let (mut low, mut high) = (0.0, running.step_h);
        for _ in 0..BISECTIONS {
            let middle = 0.5 * (low + high);
            let contents = from.contents.later(running, &from.bound, middle);
            let there = judge.solve(0, &contents.totals)?.solids[solid] > 0.0;
            if there { high = middle } else { low = middle }
        }
        return Ok(found(from.hour + high));
    }
    Ok(None)
}

fn used_up(running: &Running, legs: &[Leg]) -> Vec<(usize, f64)> {
    let mut all: Vec<(usize, f64)> = Vec::new();
    for moment in legs.iter().flat_map(|leg| leg.iter().take(leg.len() - 1)) {
        for (component, hours) in moment.contents.used_up(running, &moment.bound, running.step_h) {
            if all.iter().all(|(known, _)| *known != component) {
                all.push((component, moment.hour + hours));
            }
        }
    }
    all
}
