//! One dose over the operating range: the worst case of every wall, and how sure it is.
//!
//! Free metal against pH has interior extremes, so the worst case is searched inside the range and not only at its
//! corners. Solids that must not form are kept in solution here: their saturation index then says how far off a
//! dose is, and wherever they do not form the result is that of the real bath.

use crate::bath::{Bath, Point, Range, Solids, Wall};
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError, Solver};

/// Standard normal quantile of 95 %, one-sided.
pub const CONFIDENCE_95: f64 = 1.644_853_627;

/// pH values scanned over the range before an extreme is refined.
const PH_SAMPLES: usize = 7;
/// Golden-section steps of a refinement.
const REFINEMENTS: usize = 14;

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
        let grid = self.scan(doses)?;
        let mut walls = Vec::with_capacity(self.walls.len());
        for wall in self.walls.clone() {
            let (worst, excess) =
                self.worst(&grid, doses, |bath, solution| excess_of(bath, wall, solution))?;
            let (value, sigma) = self.value_and_sigma(wall, doses, worst)?;
            let reading = Reading { ph: worst.2, temperature_c: self.temperatures[worst.0].0, value, sigma };
            walls.push(WallReading {
                wall,
                worst: reading,
                excess,
                excess_95: excess + CONFIDENCE_95 * sigma,
            });
        }
        let mut metals = Vec::with_capacity(self.bath.limits.len());
        for limit in 0..self.bath.limits.len() {
            let component = self.bath.limits[limit].component;
            let as_wall = Wall::Ceiling(limit);
            let (most, _) = self.worst(&grid, doses, |_, s| s.ln_c[component])?;
            let (least, _) = self.worst(&grid, doses, |_, s| -s.ln_c[component])?;
            let set_t = self.temperatures.iter().position(|(t, _)| *t == self.set.0).unwrap_or(0);
            let mut readings = Vec::with_capacity(3);
            for place in [(set_t, self.set.1, f64::NAN), most, least] {
                let solution = self.solve(doses, place.0, place.1)?;
                let ph = self.bath.system.proton.map_or(f64::NAN, |h| solution.ph(h));
                let (value, sigma) = self.value_and_sigma(as_wall, doses, place)?;
                readings.push(Reading { ph, temperature_c: self.temperatures[place.0].0, value, sigma });
            }
            metals.push(MetalReading { limit, set: readings[0], most: readings[1], least: readings[2] });
        }
        Ok(Assessment { walls, metals })
    }

    /// log10 of the excess over the nearest wall, plain numbers only: what a search bisects.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn excess(&mut self, doses: &[f64]) -> Result<f64, EquilibriumError> {
        let grid = self.scan(doses)?;
        let mut highest = f64::NEG_INFINITY;
        for wall in self.walls.clone() {
            let (_, excess) = self.worst(&grid, doses, |bath, solution| excess_of(bath, wall, solution))?;
            highest = highest.max(excess);
        }
        Ok(highest)
    }

    fn solve(
        &mut self,
        doses: &[f64],
        temperature: usize,
        ph: Option<f64>,
    ) -> Result<Equilibrium, EquilibriumError> {
        let constants = &self.temperatures[temperature].1;
        self.bath.solve_with(&mut self.solver, constants, Point { ph, doses }, Solids::Walls)
    }

    fn scan(&mut self, doses: &[f64]) -> Result<Vec<(usize, Option<f64>, Equilibrium)>, EquilibriumError> {
        let mut grid = Vec::with_capacity(self.temperatures.len() * self.ph.len());
        for temperature in 0..self.temperatures.len() {
            for ph in self.ph.clone() {
                grid.push((temperature, ph, self.solve(doses, temperature, ph)?));
            }
        }
        Ok(grid)
    }

    /// The place (temperature, pH to hold, pH found) of the highest value of `measure`, refined between the scanned
    /// pH values.
    fn worst(
        &mut self,
        grid: &[(usize, Option<f64>, Equilibrium)],
        doses: &[f64],
        measure: impl Fn(&Bath, &Equilibrium) -> f64,
    ) -> Result<((usize, Option<f64>, f64), f64), EquilibriumError> {
        let found_ph = |s: &Equilibrium| self.bath.system.proton.map_or(f64::NAN, |h| s.ph(h));
        let scored: Vec<f64> = grid.iter().map(|(_, _, solution)| measure(self.bath, solution)).collect();
        let best = (0..grid.len()).max_by(|&a, &b| scored[a].total_cmp(&scored[b])).unwrap_or(0);
        let (temperature, ph, solution) = &grid[best];
        let mut place = (*temperature, *ph, found_ph(solution));
        let mut highest = scored[best];
        let Some(centre) = *ph else { return Ok((place, highest)) };
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
                *value = measure(self.bath, &self.solve(doses, place.0, Some(ph))?);
                if *value > highest {
                    highest = *value;
                    place = (place.0, Some(ph), ph);
                }
            }
            if values[0] > values[1] { b = right } else { a = left }
        }
        Ok((place, highest))
    }

    fn value_and_sigma(
        &mut self,
        wall: Wall,
        doses: &[f64],
        (temperature, ph, _): (usize, Option<f64>, f64),
    ) -> Result<(f64, f64), EquilibriumError> {
        let solution = self.solve(doses, temperature, ph)?;
        let constants = &self.temperatures[temperature].1;
        let (value, component) = match wall {
            Wall::Ceiling(limit) | Wall::Floor(limit) => {
                let component = self.bath.limits[limit].component;
                (solution.free(component), Some(component))
            }
            Wall::Solid(solid) => (solution.ln_saturation[solid].exp(), None),
        };
        let sigma =
            self.bath.sensitivities(constants, Point { ph, doses }, Solids::Walls, &solution, |answers| {
                match (component, wall) {
                    (Some(component), _) => answers.sigma_log10_free(component),
                    (None, Wall::Solid(solid)) => answers.sigma_saturation_index(solid),
                    (None, _) => 0.0,
                }
            })?;
        Ok((value, sigma))
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
