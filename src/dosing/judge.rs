//! Doses judged at the few places of the operating window that matter, which are found as the search goes on.

use super::assess::{Assessor, CONFIDENCE_95, CONFIDENCE_REACH};
use super::places::{FAR, Objective, Place};
use super::search::Hold;
use crate::bath::{Bath, Corrected};
use crate::equilibrium::{EquilibriumError, Value};

/// A dose holds when its excess (log10) is under this: a rounding error inside the wall, never outside.
pub(super) const TOUCH: f64 = -1e-9;
/// A place is worth adding when it is worse (log10) by this than those known.
const WORSE: f64 = 1e-9;
/// Walls further (log10) from being the nearest than this bring no place of their own.
const BEHIND: f64 = 1.0;
/// Doses at the beginning whose near walls bring their places even where none is worse.
const GENEROUS: usize = 2;

/// Plain numbers, or 95 % confidence.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Level {
    Plain,
    Sure,
}

/// Doses with their excess (log10) over the nearest wall.
#[derive(Clone, Debug)]
pub(super) struct Sample {
    pub plain: f64,
    /// Only worked out where the plain numbers hold; elsewhere the plain excess.
    pub sure: f64,
    pub dosed: Corrected,
    /// Places and lines judged so far.
    judged: (usize, usize),
}

impl Sample {
    pub fn excess(&self, level: Level) -> f64 {
        (if level == Level::Plain { self.plain } else { self.sure }) - TOUCH
    }

    pub fn hold(&self) -> Hold {
        match (self.excess(Level::Plain) <= 0.0, self.excess(Level::Sure) <= 0.0) {
            (true, true) => Hold::Sure,
            (true, false) => Hold::Plain,
            _ => Hold::Not,
        }
    }
}

/// The places known so far, and the means to judge doses at them.
pub(super) struct Judge<'a, 'b> {
    pub bath: &'a Bath,
    pub assessor: &'b mut Assessor<'a>,
    pub objectives: Vec<Objective>,
    pub places: Vec<Place>,
    /// Places along whose pH a solid comes or goes at another pH for every dose.
    lines: Vec<Place>,
    /// Doses whose worst places are known.
    learned: Vec<Vec<f64>>,
    /// Doses closer than this share of their caps count as the same.
    resolution: f64,
    scores: Vec<f64>,
}

impl<'a, 'b> Judge<'a, 'b> {
    pub fn new(bath: &'a Bath, assessor: &'b mut Assessor<'a>, resolution: f64) -> Self {
        Self {
            objectives: assessor.walls.iter().map(|wall| Objective::Wall(*wall)).collect(),
            places: vec![assessor.places.set()],
            lines: Vec::new(),
            learned: Vec::new(),
            scores: Vec::new(),
            bath,
            assessor,
            resolution,
        }
    }

    /// Adds the worst places of a set of doses; whether any was worse than those known.
    pub fn learn(&mut self, doses: &[f64]) -> Result<bool, EquilibriumError> {
        let caps = self.bath.agents.iter().map(|agent| self.resolution * agent.max_g_l);
        let caps: Vec<f64> = caps.collect();
        let same = |known: &Vec<f64>| {
            known.iter().zip(doses).zip(&caps).all(|((known, dose), cap)| (known - dose).abs() <= *cap)
        };
        if self.learned.iter().any(same) {
            return Ok(false);
        }
        self.learned.push(doses.to_vec());
        let sample = self.take(doses)?;
        let worst = self.assessor.worst(&sample.dosed)?;
        let nearest = worst.iter().map(|wall| wall.excess_95).fold(f64::NEG_INFINITY, f64::max);
        let mut gained = false;
        for wall in worst {
            let is_new = wall.excess > sample.plain + WORSE || wall.excess_95 > sample.sure + WORSE;
            gained |= is_new;
            if is_new || (self.learned.len() <= GENEROUS && wall.excess_95 > nearest - BEHIND) {
                let line = Place { ph: None, ..wall.sure };
                if wall.at_edge && !self.lines.contains(&line) {
                    self.lines.push(line);
                }
                let sure = (!wall.at_edge).then_some(wall.sure);
                for place in std::iter::once(wall.plain).chain(sure) {
                    if !self.places.contains(&place) {
                        self.places.push(place);
                        self.assessor.places.seat(place);
                    }
                }
            }
        }
        Ok(gained)
    }

    /// Judges a set of doses at all places.
    pub fn take(&mut self, doses: &[f64]) -> Result<Sample, EquilibriumError> {
        let dosed = self.assessor.places.dose(doses)?;
        let mut sample = Sample { plain: f64::NEG_INFINITY, sure: f64::NEG_INFINITY, dosed, judged: (0, 0) };
        self.judge(&mut sample)?;
        Ok(sample)
    }

    /// All places at which a sample is judged, those included that move with the dose.
    pub fn places_for(&mut self, sample: &Sample) -> Result<Vec<Place>, EquilibriumError> {
        let mut places = self.places.clone();
        for line in &self.lines {
            places.extend(self.assessor.places.edges_along(&sample.dosed, line)?);
        }
        Ok(places)
    }

    /// Judges a sample at the places that were added since.
    pub fn judge(&mut self, sample: &mut Sample) -> Result<(), EquilibriumError> {
        let (first, first_line) = sample.judged;
        sample.judged = (self.places.len(), self.lines.len());
        let mut places = self.places[first..].to_vec();
        self.scores.clear();
        for place in &places {
            self.assessor.places.score(&sample.dosed, place, &self.objectives, &mut self.scores)?;
        }
        let highest = |scores: &[f64]| scores.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        sample.plain = sample.plain.max(highest(&self.scores));
        // Lines only tell of confidence, which nobody asks for where the plain numbers fail.
        if sample.plain - TOUCH <= 0.0 {
            for line in &self.lines[first_line..] {
                for place in self.assessor.places.edges_along(&sample.dosed, line)? {
                    self.assessor.places.score(&sample.dosed, &place, &self.objectives, &mut self.scores)?;
                    places.push(place);
                }
            }
            sample.plain = sample.plain.max(highest(&self.scores));
        }
        if sample.plain - TOUCH > 0.0 {
            sample.sure = sample.plain;
            return Ok(());
        }
        let walls = self.objectives.len();
        for (scores, place) in self.scores.chunks_exact(walls).zip(&places) {
            // A wall behind the nearest can be the first with confidence, when its uncertainty is the larger.
            let reach = FAR.min(sample.plain - CONFIDENCE_REACH);
            let near = |score: &f64| *score > reach && score.is_finite();
            let near: Vec<usize> = (0..walls).filter(|wall| near(&scores[*wall])).collect();
            if near.is_empty() {
                continue;
            }
            let values: Vec<Value> =
                near.iter().map(|wall| self.bath.limited_value(self.assessor.walls[*wall])).collect();
            let sigmas = self.assessor.places.sigmas(&sample.dosed, place, &values)?;
            for (wall, sigma) in near.into_iter().zip(sigmas) {
                sample.sure = sample.sure.max(scores[wall] + CONFIDENCE_95 * sigma);
            }
        }
        sample.sure = sample.sure.max(sample.plain);
        Ok(())
    }
}
