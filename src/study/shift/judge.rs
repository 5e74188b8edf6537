//! How near the contents of the tank come to every wall, at the set point and at the worst places of the operating
//! range.
//!
//! The places are found once, by a scan of the range at some moments of the forecast; on the way each is solved from its
//! own last point. Solids that must not form are kept in solution, as in the dose search.

use crate::bath::{Bath, Rule, Solids, Wall};
use crate::dosing::CONFIDENCE_95;
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError, LN_10, Sensitivities, Solver, Value};

/// pH values scanned over the operating range.
const PH_SAMPLES: usize = 7;
/// A wall that stays this far off (log10) is not followed at a place of its own.
const FAR: f64 = -2.0;
/// Uncertainties are asked for in the scan while the nearest wall is between these (log10): farther off nothing hangs
/// on them.
const IN_DOUBT: std::ops::Range<f64> = -1.5..0.5;
/// Places whose excess is this much (log10) under the worst are not asked for their uncertainty.
const REACH: f64 = 0.7;
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
struct Spot {
    place: Place,
    constants: Constants,
    solver: Solver,
    /// Values and their uncertainties when these were last computed.
    last: Option<(Vec<f64>, Vec<f64>)>,
}

impl Spot {
    fn solve(&mut self, bath: &Bath, totals: &[f64]) -> Result<Equilibrium, EquilibriumError> {
        bath.solve_totals(&mut self.solver, &self.constants, totals, self.place.ph, Solids::Walls)
    }

    fn sigmas(
        &mut self,
        bath: &Bath,
        values: &[Value],
        totals: &[f64],
    ) -> Result<Vec<f64>, EquilibriumError> {
        let solution = self.solve(bath, totals)?;
        let ask = |answers: &Sensitivities| answers.sigma_log10(values);
        bath.sensitivities(&self.constants, totals, self.place.ph, Solids::Walls, &solution, ask)
    }
}

/// A place of the operating range at one moment.
struct Scanned {
    place: Place,
    /// Number of the scanner of its temperature.
    scanner: usize,
    /// log10 of every value.
    values: Vec<f64>,
    /// Whether a solid comes or goes between here and a neighbour.
    bends: bool,
}

/// Follows the walls of a bath; the first place is the set point.
pub struct Judge<'a> {
    bath: &'a Bath,
    /// Every wall with the number of the value that it limits.
    pub walls: Vec<(Wall, usize)>,
    /// What is followed: the free metal of each limit, then the saturation of each solid that must not form.
    values: Vec<Value>,
    spots: Vec<Spot>,
}

impl<'a> Judge<'a> {
    /// Finds the places to follow, from what the tank will hold at some moments.
    pub fn over(bath: &'a Bath, moments: &[Vec<f64>]) -> Result<Self, EquilibriumError> {
        let mut values: Vec<Value> = bath.limits.iter().map(|limit| Value::Free(limit.component)).collect();
        let mut walls = Vec::new();
        for (i, limit) in bath.limits.iter().enumerate() {
            walls.extend(limit.ceiling.map(|_| (Wall::Ceiling(i), i)));
            walls.extend(limit.floor.map(|_| (Wall::Floor(i), i)));
        }
        for solid in (0..bath.rules.len()).filter(|&k| bath.rules[k] == Rule::MustNotForm) {
            walls.push((Wall::Solid(solid), values.len()));
            values.push(Value::Saturation(solid));
        }
        let mut judge = Self { bath, walls, values, spots: Vec::new() };
        let set = Place { ph: bath.ph_set(), temperature_c: bath.project.tank.temperature_c.set };
        judge.follow(set);
        let temperature = bath.project.tank.temperature_c;
        let mut temperatures = vec![temperature.low, temperature.set, temperature.high];
        temperatures.dedup();
        let places = temperatures.into_iter().map(|temperature_c| Place { ph: None, temperature_c });
        let mut scanners: Vec<Spot> = places.map(|place| judge.spot(place)).collect();
        for totals in moments {
            judge.add_worst(&mut scanners, totals)?;
        }
        Ok(judge)
    }

    fn follow(&mut self, place: Place) {
        if self.spots.iter().all(|spot| spot.place != place) {
            let spot = self.spot(place);
            self.spots.push(spot);
        }
    }

    fn spot(&self, place: Place) -> Spot {
        let constants = self.bath.constants_at(place.temperature_c);
        Spot { place, constants, solver: Solver::new(), last: None }
    }

    /// Adds the places of the operating range where each wall that is not far off is nearest, by plain numbers and
    /// with confidence. Confidence is asked for at the corners, and where a solid comes or goes, which bends the
    /// uncertainty.
    fn add_worst(&mut self, scanners: &mut [Spot], totals: &[f64]) -> Result<(), EquilibriumError> {
        let scan = self.scan(scanners, totals)?;
        let excesses: Vec<Vec<f64>> = scan
            .iter()
            .map(|at| (0..self.walls.len()).map(|wall| self.excess(wall, &at.values, None)).collect())
            .collect();
        let worst: Vec<f64> = (0..self.walls.len())
            .map(|wall| excesses.iter().map(|at| at[wall]).fold(f64::NEG_INFINITY, f64::max))
            .collect();
        for wall in (0..self.walls.len()).filter(|&wall| worst[wall] > FAR) {
            if let Some(at) = excesses.iter().position(|at| at[wall] == worst[wall]) {
                self.follow(scan[at].place);
            }
        }
        if !IN_DOUBT.contains(&worst.iter().copied().fold(f64::NEG_INFINITY, f64::max)) {
            return Ok(());
        }
        let mut surest = vec![(f64::NEG_INFINITY, self.spots[0].place); self.walls.len()];
        for (at, excesses) in
            scan.iter().zip(&excesses).filter(|(at, _)| at.bends || self.is_corner(&at.place))
        {
            let near = |wall: usize| worst[wall] > FAR && excesses[wall] > worst[wall] - REACH;
            if !(0..self.walls.len()).any(near) {
                continue;
            }
            let scanner = &mut scanners[at.scanner];
            scanner.place = at.place;
            let sigmas = scanner.sigmas(self.bath, &self.values, totals)?;
            for wall in (0..self.walls.len()).filter(|&wall| worst[wall] > FAR) {
                let excess = self.excess(wall, &at.values, Some(&sigmas));
                if excess > surest[wall].0 {
                    surest[wall] = (excess, at.place);
                }
            }
        }
        for (_, place) in surest {
            self.follow(place);
        }
        Ok(())
    }

    /// Values over the operating range; one scanner for each temperature.
    fn scan(&self, scanners: &mut [Spot], totals: &[f64]) -> Result<Vec<Scanned>, EquilibriumError> {
        let ph: Vec<Option<f64>> = match self.bath.ph() {
            Some(range) => range.samples(PH_SAMPLES).into_iter().map(Some).collect(),
            None => vec![None],
        };
        let mut scan: Vec<Scanned> = Vec::with_capacity(scanners.len() * ph.len());
        for (scanner, spot) in scanners.iter_mut().enumerate() {
            let mut before: Option<Vec<bool>> = None;
            for &ph in &ph {
                spot.place.ph = ph;
                let solution = spot.solve(self.bath, totals)?;
                let present: Vec<bool> = solution.solids.iter().map(|amount| *amount > 0.0).collect();
                let bends = before.as_ref().is_some_and(|before| *before != present);
                if let Some(last) = scan.last_mut().filter(|_| bends) {
                    last.bends = true;
                }
                scan.push(Scanned { place: spot.place, scanner, values: self.read(&solution), bends });
                before = Some(present);
            }
        }
        Ok(scan)
    }

    /// Whether pH and temperature are at an end of their range, or pH at its set point.
    fn is_corner(&self, place: &Place) -> bool {
        let temperature = self.bath.project.tank.temperature_c;
        let ph = self.bath.ph().zip(place.ph);
        ph.is_none_or(|(range, ph)| [range.low, range.set, range.high].contains(&ph))
            && [temperature.low, temperature.high].contains(&place.temperature_c)
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
        self.spots[place].solve(self.bath, totals)
    }

    /// log10 of every value at a solved place.
    pub fn read(&self, solution: &Equilibrium) -> Vec<f64> {
        self.values.iter().map(|value| value.ln(&self.bath.system, solution) / LN_10).collect()
    }

    /// log10 of every value at a place.
    pub fn values(&mut self, place: usize, totals: &[f64]) -> Result<Vec<f64>, EquilibriumError> {
        let solution = self.solve(place, totals)?;
        Ok(self.read(&solution))
    }

    /// Standard uncertainty of log10 of every value at a place.
    pub fn sigmas(&mut self, place: usize, totals: &[f64]) -> Result<Vec<f64>, EquilibriumError> {
        self.spots[place].sigmas(self.bath, &self.values, totals)
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
        matches!(self.values[value], Value::Free(_)) || log10 > FAR
    }

    /// log10 of the excess over the nearest wall at a place with these values, by plain numbers.
    pub fn nearest(&self, values: &[f64]) -> f64 {
        (0..self.walls.len()).map(|wall| self.excess(wall, values, None)).fold(f64::NEG_INFINITY, f64::max)
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
        Wall::Solid(_) => log10,
        // Not followed: see `over`.
        Wall::Derived(_) => f64::NEG_INFINITY,
    }
}
