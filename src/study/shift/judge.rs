//! How near the contents of the tank come to every wall, at the set point and at the worst places of the operating
//! range.
//!
//! The places are found once, by a scan of the range at some moments of the forecast; on the way each is solved from its
//! own last point. Solids that must not form are kept in solution, as in the dose search.

use crate::bath::{Bath, Points, Solids, Wall};
use crate::dosing::{Assessor, CONFIDENCE_95};
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError, LN_10, Value};

/// A wall that stays this far off (log10) is not followed at a place of its own.
const FAR: f64 = -2.0;
/// Values that moved by less than this (log10) have about the uncertainty they had.
const NEAR: f64 = 0.1;
/// How much the uncertainty may have grown since it was last computed, and still be trusted to decide a clear case.
const GROWTH: f64 = 1.25;
const GROWTH_FLOOR: f64 = 0.02;

/// A place of the operating range.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Place {
    /// pH to hold; `None` lets the charge balance decide.
    pub ph: Option<f64>,
    /// Temperature in °C.
    pub temperature_c: f64,
}

/// A place with what is needed to solve there again and again.
struct Spot<'a> {
    place: Place,
    constants: Constants,
    points: Points<'a>,
    /// Values and their uncertainties when these were last computed.
    last: Option<(Vec<f64>, Vec<f64>)>,
}

impl Spot<'_> {
    fn solve(&mut self, totals: &[f64]) -> Result<Equilibrium, EquilibriumError> {
        let mut solution = Equilibrium::default();
        self.points.solve_into(&self.constants, totals, self.place.ph, &mut solution)?;
        Ok(solution)
    }
}

/// Something that is followed.
#[derive(Clone, Copy, Debug)]
enum Followed {
    /// log10 of the free metal of a limit.
    Free(usize),
    /// log10 of the excess over a wall that is none of free metal alone.
    Excess(Wall),
}

/// Follows the walls of a bath; the first place is the set point.
pub struct Judge<'a> {
    bath: &'a Bath,
    /// Every wall with the number of the value that it limits.
    pub walls: Vec<(Wall, usize)>,
    /// What is followed: the free metal of each limit, then the other walls.
    followed: Vec<Followed>,
    spots: Vec<Spot<'a>>,
}

impl<'a> Judge<'a> {
    /// Finds the places to follow, from what the tank will hold at some moments: those that the dose search finds worst
    /// for the walls that are not far off, by plain numbers and with confidence.
    pub fn over(bath: &'a Bath, moments: &[Vec<f64>]) -> Result<Self, EquilibriumError> {
        let mut followed: Vec<Followed> = (0..bath.limits.len()).map(Followed::Free).collect();
        let mut walls = Vec::new();
        for wall in bath.walls() {
            match wall {
                Wall::Ceiling(limit) | Wall::Floor(limit) => walls.push((wall, limit)),
                Wall::Solid(_) | Wall::Derived(_) => {
                    walls.push((wall, followed.len()));
                    followed.push(Followed::Excess(wall));
                }
            }
        }
        let mut judge = Self { bath, walls, followed, spots: Vec::new() };
        judge.follow(Place { ph: bath.ph_set(), temperature_c: bath.project.tank.temperature_c.set });
        // The forecast itself says how load, hardness and volume drift.
        let mut still = bath.clone();
        still.drifts.clear();
        let mut assessor = Assessor::new(&still)?;
        for totals in moments {
            for worst in assessor.worst_of(totals)? {
                if worst.excess > FAR {
                    for place in [worst.plain, worst.sure] {
                        judge.follow(Place { ph: place.ph, temperature_c: place.temperature_c });
                    }
                }
            }
        }
        Ok(judge)
    }

    fn follow(&mut self, place: Place) {
        if self.spots.iter().all(|spot| spot.place != place) {
            let constants = self.bath.constants_at(place.temperature_c);
            let points = Points::new(self.bath, Solids::Walls);
            self.spots.push(Spot { place, constants, points, last: None });
        }
    }

    /// How many places are followed.
    pub fn places(&self) -> usize {
        self.spots.len()
    }

    /// A place that is followed.
    pub fn place(&self, index: usize) -> Place {
        self.spots[index].place
    }

    /// The equilibrium at a place.
    pub fn solve(&mut self, place: usize, totals: &[f64]) -> Result<Equilibrium, EquilibriumError> {
        self.spots[place].solve(totals)
    }

    /// log10 of every value at a place, from its solution.
    pub fn read(&self, place: usize, solution: &Equilibrium) -> Vec<f64> {
        let temperature_c = self.spots[place].place.temperature_c;
        let read = |followed: &Followed| match *followed {
            Followed::Free(limit) => solution.ln_c[self.bath.limits[limit].component] / LN_10,
            Followed::Excess(wall) => self.bath.excess(wall, solution, temperature_c),
        };
        self.followed.iter().map(read).collect()
    }

    /// log10 of every value at a place.
    pub fn values(&mut self, place: usize, totals: &[f64]) -> Result<Vec<f64>, EquilibriumError> {
        let solution = self.solve(place, totals)?;
        Ok(self.read(place, &solution))
    }

    /// Standard uncertainty of log10 of every value at a place.
    pub fn sigmas(&mut self, place: usize, totals: &[f64]) -> Result<Vec<f64>, EquilibriumError> {
        let bath = self.bath;
        let values: Vec<Value> = self
            .followed
            .iter()
            .map(|followed| match *followed {
                Followed::Free(limit) => Value::Free(bath.limits[limit].component),
                Followed::Excess(wall) => bath.limited_value(wall),
            })
            .collect();
        let solution = self.solve(place, totals)?;
        let Spot { points, constants, place, .. } = &mut self.spots[place];
        points.sensitivities(constants, totals, place.ph, &solution, |answers| answers.sigma_log10(&values))
    }

    /// log10 of the excess over a wall, from log10 of the values; with confidence when uncertainties are given.
    pub fn excess(&self, wall: usize, values: &[f64], sigmas: Option<&[f64]>) -> f64 {
        let (wall, value) = self.walls[wall];
        excess(self.bath, wall, values[value]) + sigmas.map_or(0.0, |sigmas| CONFIDENCE_95 * sigmas[value])
    }

    /// Whether every wall holds with 95 % confidence, or by plain numbers. The uncertainty, which costs many times
    /// the equilibrium, is computed only where the answer hangs on it.
    pub fn holds(&mut self, totals: &[f64], sure: bool) -> Result<bool, EquilibriumError> {
        for place in 0..self.spots.len() {
            let values = self.values(place, totals)?;
            if self.crossed(&values, None) {
                return Ok(false);
            }
            if !sure || self.clearly_holds(place, &values) {
                continue;
            }
            let sigmas = self.sigmas(place, totals)?;
            let crossed = self.crossed(&values, Some(&sigmas));
            self.spots[place].last = Some((values, sigmas));
            if crossed {
                return Ok(false);
            }
        }
        Ok(true)
    }

    /// Walls that are crossed, the farthest first.
    pub fn crossed_walls(&mut self, totals: &[f64], sure: bool) -> Result<Vec<Wall>, EquilibriumError> {
        let mut worst = vec![f64::NEG_INFINITY; self.walls.len()];
        for place in 0..self.spots.len() {
            let values = self.values(place, totals)?;
            let sigmas = if sure { Some(self.sigmas(place, totals)?) } else { None };
            for (wall, worst) in worst.iter_mut().enumerate() {
                *worst = worst.max(self.excess(wall, &values, sigmas.as_deref()));
            }
        }
        let mut crossed: Vec<usize> = (0..worst.len()).filter(|&wall| worst[wall] > 0.0).collect();
        crossed.sort_by(|&a, &b| worst[b].total_cmp(&worst[a]));
        Ok(crossed.into_iter().map(|wall| self.walls[wall].0).collect())
    }

    /// Whether a value with this log10 is drawn, or near enough to its wall to count.
    pub fn counts(&self, value: usize, log10: f64) -> bool {
        matches!(self.followed[value], Followed::Free(_)) || log10 > FAR
    }

    fn crossed(&self, values: &[f64], sigmas: Option<&[f64]>) -> bool {
        (0..self.walls.len()).any(|wall| self.excess(wall, values, sigmas) > 0.0)
    }

    /// Whether the walls would hold with more than the uncertainty that was found near these values.
    fn clearly_holds(&self, place: usize, values: &[f64]) -> bool {
        let Some((then, sigmas)) = &self.spots[place].last else { return false };
        let near = values.iter().zip(then).all(|(now, then)| (now - then).abs() < NEAR);
        let most: Vec<f64> = sigmas.iter().map(|sigma| sigma * GROWTH + GROWTH_FLOOR).collect();
        near && !self.crossed(values, Some(&most))
    }
}

/// log10 of the excess of a value over its wall.
fn excess(bath: &Bath, wall: Wall, log10: f64) -> f64 {
    match wall {
        Wall::Ceiling(i) => log10 - bath.limits[i].ceiling.map_or(f64::INFINITY, f64::log10),
        Wall::Floor(i) => bath.limits[i].floor.map_or(f64::NEG_INFINITY, f64::log10) - log10,
        Wall::Solid(_) | Wall::Derived(_) => log10,
    }
}
