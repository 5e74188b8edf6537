//! Every wall over the operating window, with the uncertainty of the constants and of the inputs together.

use super::input::{Input, Spread};
use crate::bath::{Bath, Corrector, Points, Position, Solids, Wall};
use crate::dosing::{CONFIDENCE_95, Reading};
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError};

/// pH values over the operating range.
const PH_SAMPLES: usize = 13;
/// Walls this far (log10) under their limit are not asked for their uncertainty: no spread reaches them.
const OUT_OF_REACH: f64 = -3.0;

/// How near a bath comes to one wall, inputs counted.
#[derive(Clone, Debug, PartialEq)]
pub struct WallSpread {
    /// Which wall.
    pub wall: Wall,
    /// The place where the confident excess is largest; its σ is that of constants and inputs together.
    pub worst: Reading,
    /// log10 of the excess over the wall at that place: zero or less holds.
    pub excess: f64,
    /// The same with 95 % confidence, one-sided.
    pub excess_95: f64,
    /// Where its uncertainty comes from.
    pub spread: Spread,
}

/// The operating window of a bath whose inputs are uncertain.
pub(super) struct Window<'a> {
    bath: &'a Bath,
    inputs: &'a [Input],
    corrector: Corrector<'a>,
    points: Points<'a>,
    levels: Vec<(f64, Constants)>,
    ph: Vec<Option<f64>>,
    positions: Vec<Position>,
    walls: Vec<Wall>,
}

impl<'a> Window<'a> {
    /// Prepares the window; `positions` are the drifts to look at besides the set point.
    pub fn new(
        bath: &'a Bath,
        inputs: &'a [Input],
        positions: &[Position],
    ) -> Result<Self, EquilibriumError> {
        let t = bath.project.tank.temperature_c;
        let mut temperatures = vec![t.low, t.set, t.high];
        temperatures.dedup();
        let mut all = vec![Position::default()];
        for position in positions {
            if !all.contains(position) {
                all.push(*position);
            }
        }
        Ok(Self {
            bath,
            inputs,
            corrector: Corrector::new(bath)?,
            points: Points::new(bath, Solids::Walls),
            levels: temperatures.into_iter().map(|t| (t, bath.constants_at(t))).collect(),
            ph: bath.ph().map_or_else(
                || vec![None],
                |range| range.samples(PH_SAMPLES).into_iter().map(Some).collect(),
            ),
            positions: all,
            walls: bath.walls(),
        })
    }

    /// Every wall at given doses, g/L.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn walls(&mut self, doses: &[f64]) -> Result<Vec<WallSpread>, EquilibriumError> {
        let dosed = self.corrector.corrected(doses)?;
        let mut worst: Vec<Option<WallSpread>> = vec![None; self.walls.len()];
        let mut solution = Equilibrium::default();
        let Self { bath, inputs, points, .. } = self;
        for position in &self.positions {
            let mut totals = dosed.totals.clone();
            bath.drifted(position, dosed.dilution, &mut totals);
            for (temperature_c, constants) in &self.levels {
                for ph in &self.ph {
                    points.solve_into(constants, &totals, *ph, &mut solution)?;
                    let excesses: Vec<f64> =
                        self.walls.iter().map(|wall| bath.excess(*wall, &solution, *temperature_c)).collect();
                    let near: Vec<usize> = (0..excesses.len())
                        .filter(|&wall| excesses[wall].is_finite())
                        .filter(|&wall| worst[wall].is_none() || excesses[wall] > OUT_OF_REACH)
                        .collect();
                    let spreads = points.sensitivities(constants, &totals, *ph, &solution, |answers| {
                        let spread = |wall: &usize| {
                            let gradient = answers.gradient(bath.limited_value(self.walls[*wall]));
                            Spread::of(&gradient, &bath.system, inputs, dosed.dilution)
                        };
                        near.iter().map(spread).collect::<Vec<_>>()
                    })?;
                    for (wall, spread) in near.into_iter().zip(spreads) {
                        let (excess, sigma) = (excesses[wall], spread.total());
                        let excess_95 = excess + CONFIDENCE_95 * sigma;
                        if worst[wall].as_ref().is_none_or(|known| excess_95 > known.excess_95) {
                            let value = bath.limited_value(self.walls[wall]);
                            let reading = Reading {
                                ph: bath.system.proton.map_or(f64::NAN, |proton| solution.ph(proton)),
                                temperature_c: *temperature_c,
                                position: *position,
                                value: value.ln(&bath.system, &solution).exp(),
                                sigma,
                            };
                            let wall_number = self.walls[wall];
                            worst[wall] = Some(WallSpread {
                                wall: wall_number,
                                worst: reading,
                                excess,
                                excess_95,
                                spread,
                            });
                        }
                    }
                }
            }
        }
        Ok(worst.into_iter().flatten().collect())
    }

    /// log10 of the excess over the nearest wall with 95 % confidence.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn excess_95(&mut self, doses: &[f64]) -> Result<f64, EquilibriumError> {
        let walls = self.walls(doses)?;
        Ok(walls.iter().map(|wall| wall.excess_95).fold(f64::NEG_INFINITY, f64::max))
    }
}
