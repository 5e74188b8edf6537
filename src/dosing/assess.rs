//! One dose over the operating window: the worst case of every wall, and how sure it is.
//!
//! Solids that must not form are kept in solution here: their saturation index then says how far off a dose is, and
//! wherever they do not form the result is that of the real bath.

use super::places::{FAR, Objective, Place, Places, Survey};
use crate::bath::{Bath, Corrected, Position, Range, Wall};
use crate::equilibrium::{EquilibriumError, Value};

/// Standard normal quantile of 95 %, one-sided.
pub const CONFIDENCE_95: f64 = 1.644_853_627;

/// Places whose excess is this much (log10) under the worst are not asked for their uncertainty.
pub(super) const CONFIDENCE_REACH: f64 = 0.7;
/// Most places of a scan that are asked for the uncertainty of one wall, the nearest first.
const CONFIDENCE_PLACES: usize = 12;

/// A value at a point of operation.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Reading {
    /// pH, held or as it turns out.
    pub ph: f64,
    /// Temperature in °C.
    pub temperature_c: f64,
    /// Where the drifts are.
    pub position: Position,
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
    pub(super) walls: Vec<Wall>,
    pub(super) places: Places<'a>,
}

/// The worst places of one wall.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WorstPlaces {
    /// By plain numbers.
    pub plain: Place,
    /// log10 of the excess there.
    pub excess: f64,
    /// With 95 % confidence.
    pub sure: Place,
    /// log10 of the excess there, one-sided.
    pub excess_95: f64,
    /// Whether the surest place is where a solid comes or goes.
    pub at_edge: bool,
}

/// A place that is asked for uncertainties, with the walls it is asked for and their excess.
struct Asked {
    place: Place,
    at_edge: bool,
    walls: Vec<(usize, f64)>,
}

impl<'a> Assessor<'a> {
    /// Prepares the operating window of a bath.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn new(bath: &'a Bath) -> Result<Self, EquilibriumError> {
        Self::over(bath, bath.ph())
    }

    /// As [`Assessor::new`] over another range of pH.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn over(bath: &'a Bath, ph: Option<Range>) -> Result<Self, EquilibriumError> {
        Ok(Self { walls: bath.walls(), places: Places::new(bath, ph)?, bath })
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
        let dosed = self.places.dose(doses)?;
        let limits = 0..self.bath.limits.len();
        let mut objectives: Vec<Objective> = self.walls.iter().map(|wall| Objective::Wall(*wall)).collect();
        objectives.extend(limits.clone().flat_map(|limit| [Objective::Most(limit), Objective::Least(limit)]));
        let survey = self.places.survey(&dosed, &objectives)?;
        let worst = self.worst_places(&dosed, &survey)?;
        let mut walls = Vec::with_capacity(worst.len());
        for (wall, worst) in self.walls.clone().into_iter().zip(worst) {
            let reading = self.read(&dosed, self.bath.limited_value(wall), worst.plain)?;
            walls.push(WallReading {
                wall,
                worst: reading,
                excess: worst.excess,
                excess_95: worst.excess_95,
            });
        }
        let mut metals = Vec::with_capacity(limits.len());
        for limit in limits {
            let value = Value::Free(self.bath.limits[limit].component);
            let at = self.walls.len() + 2 * limit;
            metals.push(MetalReading {
                limit,
                set: self.read(&dosed, value, self.places.set())?,
                most: self.read(&dosed, value, survey.worst[at].0)?,
                least: self.read(&dosed, value, survey.worst[at + 1].0)?,
            });
        }
        Ok(Assessment { walls, metals })
    }

    /// The worst places of every wall for a bath that holds these totals in mol/L, with its pH held as it is.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn worst_of(&mut self, totals: &[f64]) -> Result<Vec<WorstPlaces>, EquilibriumError> {
        let totals = totals.to_vec();
        self.worst(&Corrected { totals, dilution: 1.0, adjustment: None, failure: None })
    }

    /// The worst places of every wall, plain and with 95 % confidence.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub(super) fn worst(&mut self, dosed: &Corrected) -> Result<Vec<WorstPlaces>, EquilibriumError> {
        let objectives: Vec<Objective> = self.walls.iter().map(|wall| Objective::Wall(*wall)).collect();
        let survey = self.places.survey(dosed, &objectives)?;
        self.worst_places(dosed, &survey)
    }

    /// The confident excess of a wall is its largest over the window: a place with a little less excess and a larger
    /// uncertainty can be the worse one.
    fn worst_places(
        &mut self,
        dosed: &Corrected,
        survey: &Survey,
    ) -> Result<Vec<WorstPlaces>, EquilibriumError> {
        let values: Vec<Value> = self.walls.iter().map(|wall| self.bath.limited_value(*wall)).collect();
        let mut found: Vec<WorstPlaces> = survey
            .worst
            .iter()
            .take(values.len())
            .map(|&(plain, excess)| WorstPlaces {
                plain,
                excess,
                sure: plain,
                excess_95: f64::NEG_INFINITY,
                at_edge: false,
            })
            .collect();
        // Each place is solved once for all the walls that it is near the worst of.
        let mut asked: Vec<Asked> = Vec::new();
        for (wall, worst) in found.iter().enumerate() {
            let reach = worst.excess - CONFIDENCE_REACH;
            let asked_for = |(_, score): &(Place, f64)| worst.excess > FAR && *score > reach;
            let mut near: Vec<(Place, f64)> = survey.of(wall).filter(asked_for).collect();
            near.sort_by(|a, b| b.1.total_cmp(&a.1));
            near.truncate(CONFIDENCE_PLACES);
            let inner = std::iter::once((worst.plain, worst.excess)).chain(near);
            let edges = survey.edges_of(wall).filter(asked_for);
            for ((place, score), at_edge) in inner.map(|p| (p, false)).chain(edges.map(|p| (p, true))) {
                match asked.iter_mut().find(|known| known.place == place) {
                    Some(known) => {
                        known.at_edge |= at_edge;
                        known.walls.push((wall, score));
                    }
                    None => asked.push(Asked { place, at_edge, walls: vec![(wall, score)] }),
                }
            }
        }
        for Asked { place, at_edge, walls } in asked {
            let wanted: Vec<Value> = walls.iter().map(|(wall, _)| values[*wall]).collect();
            let sigmas = self.places.sigmas(dosed, &place, &wanted)?;
            for ((wall, score), sigma) in walls.into_iter().zip(sigmas) {
                let excess_95 = if score.is_finite() { score + CONFIDENCE_95 * sigma } else { score };
                let worst = &mut found[wall];
                if excess_95 > worst.excess_95 {
                    (worst.sure, worst.excess_95, worst.at_edge) = (place, excess_95, at_edge);
                }
            }
        }
        Ok(found)
    }

    /// log10 of the excess over the nearest wall, plain numbers only.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn excess(&mut self, doses: &[f64]) -> Result<f64, EquilibriumError> {
        let dosed = self.places.dose(doses)?;
        let objectives: Vec<Objective> = self.walls.iter().map(|wall| Objective::Wall(*wall)).collect();
        let survey = self.places.survey(&dosed, &objectives)?;
        Ok(survey.worst.iter().map(|(_, score)| *score).fold(f64::NEG_INFINITY, f64::max))
    }

    /// A value with its uncertainty at a place.
    pub(super) fn read(
        &mut self,
        dosed: &Corrected,
        value: Value,
        place: Place,
    ) -> Result<Reading, EquilibriumError> {
        let sigma = self.places.sigmas(dosed, &place, &[value])?[0];
        let solution = self.places.solve(dosed, &place)?;
        Ok(Reading {
            ph: self.bath.system.proton.map_or(f64::NAN, |proton| solution.ph(proton)),
            temperature_c: place.temperature_c,
            position: place.position,
            value: value.ln(&self.bath.system, solution).exp(),
            sigma,
        })
    }
}
