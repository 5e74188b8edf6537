//! Free metal, or how far over the nearest wall the bath is, over pH and the dose of one agent at the set temperature.

use super::contour::{Grid, contour};
use crate::bath::{Bath, Corrector, Points, Solids, Wall};
use crate::equilibrium::{Equilibrium, EquilibriumError, LN_10};

/// What a map shows.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum MapOf {
    /// log10 of the free concentration of a system component in mol/L, with the solids that will be in the tank.
    Free(usize),
    /// log10 of the excess over the nearest wall; solids that must not form are kept in solution, as the dose search does.
    Excess,
}

/// Which part of the plane is computed, at how many points.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MapArea {
    /// Number of the agent whose dose runs upwards, from nothing to its cap.
    pub agent: usize,
    /// Lowest and highest pH.
    pub ph: (f64, f64),
    /// Points along pH and along the dose, two at least.
    pub points: (usize, usize),
}

/// A map.
#[derive(Clone, Debug, PartialEq)]
pub struct Map {
    /// What it shows.
    pub of: MapOf,
    /// Number of the agent.
    pub agent: usize,
    /// pH along the bottom.
    pub ph: Vec<f64>,
    /// Doses along the side, g/L.
    pub dose: Vec<f64>,
    /// One row for each dose; NaN where there is no answer.
    pub values: Vec<f64>,
}

impl Map {
    /// The value at a pH and a dose by number.
    pub fn at(&self, ph: usize, dose: usize) -> f64 {
        self.values[dose * self.ph.len() + ph]
    }

    /// Lines of a level as (pH, dose), each as long as it is unbroken.
    pub fn contour(&self, level: f64) -> Vec<Vec<(f64, f64)>> {
        contour(Grid { x: &self.ph, y: &self.dose, values: &self.values }, level)
    }

    /// Lowest and highest value.
    pub fn span(&self) -> Option<(f64, f64)> {
        let finite = || self.values.iter().copied().filter(|value| value.is_finite());
        let low = finite().reduce(f64::min)?;
        Some((low, finite().reduce(f64::max)?))
    }
}

/// Threads that share the rows.
const THREADS: usize = 2;

/// Computes a map; the other doses are those of the project.
///
/// # Errors
/// [`EquilibriumError`] for a bath that is ill-posed as it stands; a point without an answer is NaN.
pub fn map(bath: &Bath, of: MapOf, area: MapArea) -> Result<Map, EquilibriumError> {
    let (columns, rows) = (area.points.0.max(2), area.points.1.max(2));
    let ph: Vec<f64> =
        (0..columns).map(|i| area.ph.0 + (area.ph.1 - area.ph.0) * i as f64 / (columns - 1) as f64).collect();
    let max = bath.agents[area.agent].max_g_l;
    let dose: Vec<f64> = (0..rows).map(|i| max * i as f64 / (rows - 1) as f64).collect();
    let corrector = Corrector::new(bath)?;
    let mut values = vec![f64::NAN; columns * rows];
    let share = rows.div_ceil(THREADS);
    std::thread::scope(|scope| {
        for (doses, values) in dose.chunks(share).zip(values.chunks_mut(share * columns)) {
            let (corrector, ph) = (corrector.clone(), &ph);
            scope.spawn(move || {
                let mut painter = Painter::new(bath, of, corrector);
                for (row, (dose, values)) in doses.iter().zip(values.chunks_mut(columns)).enumerate() {
                    painter.row((area.agent, *dose), ph, row % 2 == 1, values);
                }
            });
        }
    });
    Ok(Map { of, agent: area.agent, ph, dose, values })
}

/// What one thread works with.
struct Painter<'a> {
    bath: &'a Bath,
    of: MapOf,
    walls: Vec<Wall>,
    constants: crate::equilibrium::Constants,
    corrector: Corrector<'a>,
    points: Points<'a>,
    solution: Equilibrium,
    doses: Vec<f64>,
}

impl<'a> Painter<'a> {
    fn new(bath: &'a Bath, of: MapOf, corrector: Corrector<'a>) -> Self {
        let solids = if of == MapOf::Excess { Solids::Walls } else { Solids::Real };
        Self {
            of,
            walls: bath.walls(),
            constants: bath.constants_at(bath.project.tank.temperature_c.set),
            corrector,
            points: Points::new(bath, solids),
            solution: Equilibrium::default(),
            doses: bath.doses(),
            bath,
        }
    }

    /// One dose over all pH values; every other row backwards, so that each point starts beside the last.
    fn row(&mut self, (agent, dose): (usize, f64), ph: &[f64], backwards: bool, values: &mut [f64]) {
        self.doses[agent] = dose;
        let Ok((totals, _)) = self.corrector.balanced(&self.doses) else { return };
        for step in 0..ph.len() {
            let at = if backwards { ph.len() - 1 - step } else { step };
            let Self { points, constants, solution, .. } = self;
            if points.solve_into(constants, &totals, Some(ph[at]), solution).is_ok() {
                values[at] = self.value();
            }
        }
    }

    fn value(&self) -> f64 {
        match self.of {
            MapOf::Free(component) => self.solution.ln_c[component] / LN_10,
            MapOf::Excess => {
                let temperature_c = self.bath.project.tank.temperature_c.set;
                let excess = |wall: &Wall| self.bath.excess(*wall, &self.solution, temperature_c);
                self.walls.iter().map(excess).fold(f64::NEG_INFINITY, f64::max)
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bath::Demo;
    use crate::equilibrium::Solver;

    fn bath() -> Bath {
        Bath::resolve(&Demo::named("copper_strike.ron").unwrap().project().unwrap()).unwrap()
    }

    const AREA: MapArea = MapArea { agent: 0, ph: (7.0, 12.0), points: (24, 17) };

    #[test]
    fn a_map_is_what_each_of_its_points_is_on_its_own() {
        let bath = bath();
        let copper = bath.limits[0].component;
        let constants = bath.constants_at(bath.project.tank.temperature_c.set);
        for of in [MapOf::Free(copper), MapOf::Excess] {
            let map = map(&bath, of, AREA).unwrap();
            assert_eq!((map.ph.len(), map.dose.len()), AREA.points);
            for (i, j) in [(0, 0), (5, 3), (23, 16), (11, 9), (20, 1)] {
                let mut doses = bath.doses();
                doses[0] = map.dose[j];
                let totals = bath.corrected(&doses).unwrap().totals;
                let solids = if of == MapOf::Excess { Solids::Walls } else { Solids::Real };
                let s = bath
                    .solve_totals(&mut Solver::new(), &constants, &totals, Some(map.ph[i]), solids)
                    .unwrap();
                let walls = bath.walls();
                let alone = match of {
                    MapOf::Free(component) => s.ln_c[component] / LN_10,
                    MapOf::Excess => {
                        let t = bath.project.tank.temperature_c.set;
                        walls.iter().map(|w| bath.excess(*w, &s, t)).fold(f64::NEG_INFINITY, f64::max)
                    }
                };
                assert!((map.at(i, j) - alone).abs() < 1e-8, "{of:?} {i} {j}: {} {alone}", map.at(i, j));
            }
        }
    }

    #[test]
    fn the_contour_of_a_level_runs_where_the_bath_has_it() {
        let bath = bath();
        let copper = bath.limits[0].component;
        let ceiling = bath.limits[0].ceiling.unwrap().log10();
        let map = map(&bath, MapOf::Free(copper), MapArea { points: (120, 100), ..AREA }).unwrap();
        let lines = map.contour(ceiling);
        assert!(lines.iter().map(Vec::len).sum::<usize>() > 20, "the ceiling crosses the map");
        let constants = bath.constants_at(bath.project.tank.temperature_c.set);
        let mut solver = Solver::new();
        for (ph, dose) in lines.iter().flatten().step_by(7) {
            let mut doses = bath.doses();
            doses[0] = *dose;
            let totals = bath.corrected(&doses).unwrap().totals;
            let s = bath.solve_totals(&mut solver, &constants, &totals, Some(*ph), Solids::Real).unwrap();
            let found = s.ln_c[copper] / LN_10;
            // A straight line between two points of the grid leaves an error of its second order.
            assert!((found - ceiling).abs() < 0.02, "pH {ph}, {dose} g/L: {found} against {ceiling}");
        }
    }
}
