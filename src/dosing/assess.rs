//! One dose over the operating range: the worst case of every wall, and how sure it is.
//!
//! Free metal against pH has interior extremes, so the worst case is searched inside the range and not only at its
//! corners. Solids that must not form are kept in solution here: their saturation index then says how far off a
//! dose is, and wherever they do not form the result is that of the real bath.

use crate::bath::{Bath, Range, Solids, Wall};
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError, Sensitivities, Solver, Value};

/// Standard normal quantile of 95 %, one-sided.
pub const CONFIDENCE_95: f64 = 1.644_853_627;

/// pH values scanned over the range before an extreme is refined.
const PH_SAMPLES: usize = 7;
/// Golden-section steps of a refinement.
const REFINEMENTS: usize = 14;

/// Points whose excess is this much (log10) under the worst are not asked for their uncertainty.
const CONFIDENCE_REACH: f64 = 0.7;

/// Number of a temperature, and the pH to hold there.
type Place = (usize, Option<f64>);

/// A value at a point of operation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Reading {
    /// pH, held or as it turns out.
    pub ph: f64,
    /// Temperature in °C.
    pub temperature_c: f64,
    /// Free metal in mol/L, or saturation ratio of a solid.
    pub value: f64,
    /// Standard uncertainty of log10 of the value.
    pub sigma: f64,
}

/// How near a dose comes to one wall.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WallReading {
    /// Which wall.
    pub wall: Wall,
    /// The worst case in the operating range.
    pub worst: Reading,
    /// log10 of the excess over the wall: zero or less holds.
    pub excess: f64,
    /// The same with 95 % confidence, one-sided.
    pub excess_95: f64,
}

/// A limited metal over the operating range.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MetalReading {
    /// Number of the limit.
    pub limit: usize,
    /// At the set point.
    pub set: Reading,
    /// Most free metal in the range.
    pub most: Reading,
    /// Least free metal in the range.
    pub least: Reading,
}

/// A dose over the operating range.
#[derive(Clone, Debug, PartialEq)]
pub struct Assessment {
    /// Every wall with its worst case.
    pub walls: Vec<WallReading>,
    /// Every limited metal.
    pub metals: Vec<MetalReading>,
}

impl Assessment {
    /// The wall that is nearest, plain numbers.
    pub fn nearest(&self) -> Option<&WallReading> {
        self.walls.iter().max_by(|a, b| a.excess.total_cmp(&b.excess))
    }

    /// log10 of the excess over the nearest wall; −∞ without walls.
    pub fn excess(&self) -> f64 {
        self.walls.iter().map(|wall| wall.excess).fold(f64::NEG_INFINITY, f64::max)
    }

    /// The same with 95 % confidence.
    pub fn excess_95(&self) -> f64 {
        self.walls.iter().map(|wall| wall.excess_95).fold(f64::NEG_INFINITY, f64::max)
    }
}

/// Assesses doses of one bath; keeps the constants at each temperature and the solver's last point.
pub struct Assessor<'a> {
    bath: &'a Bath,
    temperatures: Vec<(f64, Constants)>,
    ph: Vec<Option<f64>>,
    set: (f64, Option<f64>),
    walls: Vec<Wall>,
    solver: Solver,
    /// Totals of the doses at hand, with the acid or alkali that they make necessary.
    totals: Vec<f64>,
}

impl<'a> Assessor<'a> {
    /// Prepares the operating range of a bath.
    pub fn new(bath: &'a Bath) -> Self {
        Self::over(bath, bath.ph())
    }

    /// As [`Assessor::new`] over another range of pH.
    pub fn over(bath: &'a Bath, ph: Option<Range>) -> Self {
        let range = bath.project.tank.temperature_c;
        let mut temperatures = vec![range.low, range.set, range.high];
        temperatures.dedup();
        let walls = walls(bath);
        Self {
            temperatures: temperatures.into_iter().map(|t| (t, bath.constants_at(t))).collect(),
            ph: ph.map_or_else(
                || vec![None],
                |range| range.samples(PH_SAMPLES).into_iter().map(Some).collect(),
            ),
            set: (range.set, ph.map(|range| range.set)),
            walls,
            solver: Solver::new(),
            totals: Vec::new(),
            bath,
        }
    }

    /// Whether the bath has any wall to hold.
    pub fn has_walls(&self) -> bool {
        !self.walls.is_empty()
    }

    /// Worst cases of all walls at the given doses, g/L.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn assess(&mut self, doses: &[f64]) -> Result<Assessment, EquilibriumError> {
        self.totals = self.bath.corrected(doses)?.totals;
        let grid = self.scan()?;
        let mut walls = Vec::with_capacity(self.walls.len());
        for wall in self.walls.clone() {
            let (worst, excess) = self.worst(&grid, |bath, solution| excess_of(bath, wall, solution))?;
            let reading = self.read(value_of(self.bath, wall), worst)?;
            let excess_95 = excess + CONFIDENCE_95 * reading.sigma;
            walls.push(WallReading { wall, worst: reading, excess, excess_95 });
        }
        self.add_confidence(&grid, &mut walls)?;
        let mut metals = Vec::with_capacity(self.bath.limits.len());
        for limit in 0..self.bath.limits.len() {
            let component = self.bath.limits[limit].component;
            let value = Value::Free(component);
            let (most, _) = self.worst(&grid, |_, s| s.ln_c[component])?;
            let (least, _) = self.worst(&grid, |_, s| -s.ln_c[component])?;
            let set = self.temperatures.iter().position(|(t, _)| *t == self.set.0).unwrap_or(0);
            metals.push(MetalReading {
                limit,
                set: self.read(value, (set, self.set.1))?,
                most: self.read(value, most)?,
                least: self.read(value, least)?,
            });
        }
        Ok(Assessment { walls, metals })
    }

    /// The confident excess of a wall is its largest over the range: a point with a little less excess and a larger
    /// uncertainty can be the worse one.
    fn add_confidence(
        &mut self,
        grid: &[(Place, Equilibrium)],
        walls: &mut [WallReading],
    ) -> Result<(), EquilibriumError> {
        let values: Vec<Value> = walls.iter().map(|wall| value_of(self.bath, wall.wall)).collect();
        for (place, solution) in grid {
            let excesses: Vec<f64> =
                walls.iter().map(|wall| excess_of(self.bath, wall.wall, solution)).collect();
            let near =
                walls.iter().zip(&excesses).any(|(wall, excess)| *excess > wall.excess - CONFIDENCE_REACH);
            if !near {
                continue;
            }
            let sigmas = self.sigmas(&values, *place, solution)?;
            for ((wall, excess), sigma) in walls.iter_mut().zip(excesses).zip(sigmas) {
                wall.excess_95 = wall.excess_95.max(excess + CONFIDENCE_95 * sigma);
            }
        }
        Ok(())
    }

    /// log10 of the excess over the nearest wall, plain numbers only: what a search bisects.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn excess(&mut self, doses: &[f64]) -> Result<f64, EquilibriumError> {
        self.totals = self.bath.corrected(doses)?.totals;
        let grid = self.scan()?;
        let mut highest = f64::NEG_INFINITY;
        for wall in self.walls.clone() {
            let (_, excess) = self.worst(&grid, |bath, solution| excess_of(bath, wall, solution))?;
            highest = highest.max(excess);
        }
        Ok(highest)
    }

    fn solve(&mut self, (temperature, ph): Place) -> Result<Equilibrium, EquilibriumError> {
        let constants = &self.temperatures[temperature].1;
        self.bath.solve_totals(&mut self.solver, constants, &self.totals, ph, Solids::Walls)
    }

    fn scan(&mut self) -> Result<Vec<(Place, Equilibrium)>, EquilibriumError> {
        let mut grid = Vec::with_capacity(self.temperatures.len() * self.ph.len());
        for temperature in 0..self.temperatures.len() {
            for ph in self.ph.clone() {
                grid.push(((temperature, ph), self.solve((temperature, ph))?));
            }
        }
        Ok(grid)
    }

    /// The place of the highest value of `measure`, refined between the scanned pH values, with that value.
    fn worst(
        &mut self,
        grid: &[(Place, Equilibrium)],
        measure: impl Fn(&Bath, &Equilibrium) -> f64,
    ) -> Result<(Place, f64), EquilibriumError> {
        let scored: Vec<f64> = grid.iter().map(|(_, solution)| measure(self.bath, solution)).collect();
        let best = (0..grid.len()).max_by(|&a, &b| scored[a].total_cmp(&scored[b])).unwrap_or(0);
        let mut place = grid[best].0;
        let mut highest = scored[best];
        let Some(centre) = place.1 else { return Ok((place, highest)) };
        let at = self.ph.iter().position(|known| *known == Some(centre)).unwrap_or(0);
        let (Some(Some(low)), Some(Some(high))) =
            (at.checked_sub(1).and_then(|i| self.ph.get(i)).copied(), self.ph.get(at + 1).copied())
        else {
            return Ok((place, highest));
        };
        let ratio = 0.5 * (5f64.sqrt() - 1.0);
        let (mut a, mut b) = (low, high);
        for _ in 0..REFINEMENTS {
            let (left, right) = (b - ratio * (b - a), a + ratio * (b - a));
            let mut values = [0.0; 2];
            for (value, ph) in values.iter_mut().zip([left, right]) {
                *value = measure(self.bath, &self.solve((place.0, Some(ph)))?);
                if *value > highest {
                    highest = *value;
                    place.1 = Some(ph);
                }
            }
            if values[0] > values[1] { b = right } else { a = left }
        }
        Ok((place, highest))
    }

    /// A value with its uncertainty at a place.
    fn read(&mut self, value: Value, place: Place) -> Result<Reading, EquilibriumError> {
        let solution = self.solve(place)?;
        let sigma = self.sigmas(&[value], place, &solution)?[0];
        Ok(Reading {
            ph: self.bath.system.proton.map_or(f64::NAN, |proton| solution.ph(proton)),
            temperature_c: self.temperatures[place.0].0,
            value: value.ln(&self.bath.system, &solution).exp(),
            sigma,
        })
    }

    fn sigmas(
        &self,
        values: &[Value],
        (temperature, ph): Place,
        solution: &Equilibrium,
    ) -> Result<Vec<f64>, EquilibriumError> {
        let constants = &self.temperatures[temperature].1;
        let ask = |answers: &Sensitivities| answers.sigma_log10(values);
        self.bath.sensitivities(constants, &self.totals, ph, Solids::Walls, solution, ask)
    }
}

/// The value that a wall limits.
fn value_of(bath: &Bath, wall: Wall) -> Value {
    match wall {
        Wall::Ceiling(limit) | Wall::Floor(limit) => Value::Free(bath.limits[limit].component),
        Wall::Solid(solid) => Value::Saturation(solid),
    }
}

/// All walls of a bath: ceilings, floors, and solids that must not form.
fn walls(bath: &Bath) -> Vec<Wall> {
    let mut walls = Vec::new();
    for (i, limit) in bath.limits.iter().enumerate() {
        if limit.ceiling.is_some() {
            walls.push(Wall::Ceiling(i));
        }
        if limit.floor.is_some() {
            walls.push(Wall::Floor(i));
        }
    }
    let forbidden =
        bath.rules.iter().enumerate().filter(|(_, rule)| **rule == crate::bath::Rule::MustNotForm);
    walls.extend(forbidden.map(|(solid, _)| Wall::Solid(solid)));
    walls
}

/// log10 of the excess over a wall.
fn excess_of(bath: &Bath, wall: Wall, solution: &Equilibrium) -> f64 {
    let log10_free = |limit: usize| solution.ln_c[bath.limits[limit].component] / crate::equilibrium::LN_10;
    match wall {
        Wall::Ceiling(i) => log10_free(i) - bath.limits[i].ceiling.map_or(f64::INFINITY, f64::log10),
        Wall::Floor(i) => bath.limits[i].floor.map_or(f64::NEG_INFINITY, f64::log10) - log10_free(i),
        Wall::Solid(solid) => solution.saturation_index(solid),
    }
}
