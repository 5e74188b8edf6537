//! The excess over the nearest wall against the dose of one agent, judged at the places known so far.

use super::assess::{Assessor, CONFIDENCE_95, CONFIDENCE_REACH};
use super::extreme::{crossing, highest};
use super::places::{Objective, Place};
use super::search::{Band, Hold};
use crate::bath::{Bath, Corrected};
use crate::equilibrium::{EquilibriumError, Value};

/// Evenly spaced doses sampled before crossings are refined, and halvings of the first of them towards zero, where free
/// metal falls by orders of magnitude.
const SAMPLES: usize = 32;
const HALVINGS: usize = 6;
/// A dose holds when its excess (log10) is under this: a rounding error inside the wall, never outside.
const TOUCH: f64 = -1e-9;
/// Width of a crossing as a share of the largest dose.
const WIDTH: f64 = 1e-7;
/// How many times its last fall the excess can fall between two samples.
const DIP_DEPTH: f64 = 2.0;
/// Width of samples around a dip, as a share of the largest dose, that are close enough.
const DIP_WIDTH: f64 = 1e-3;
/// A place is worth adding when it is worse (log10) by this than those known.
const WORSE: f64 = 1e-9;
/// Walls further (log10) from being the nearest than this bring no place of their own.
const BEHIND: f64 = 1.0;

/// Plain numbers, or 95 % confidence.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) enum Level {
    Plain,
    Sure,
}

/// A dose with its excess (log10) over the nearest wall.
#[derive(Clone, Debug)]
pub(super) struct Sample {
    pub dose: f64,
    pub plain: f64,
    /// Only worked out where the plain numbers hold; elsewhere the plain excess.
    pub sure: f64,
    dosed: Corrected,
    /// Places judged so far.
    judged: usize,
}

impl Sample {
    fn excess(&self, level: Level) -> f64 {
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

/// Samples in rising order of dose, and the places at which they are judged.
pub(super) struct Curve<'a, 'b> {
    bath: &'a Bath,
    assessor: &'b mut Assessor<'a>,
    objectives: Vec<Objective>,
    doses: Vec<f64>,
    agent: usize,
    max: f64,
    places: Vec<Place>,
    samples: Vec<Sample>,
    /// Doses whose worst places are known.
    learned: Vec<f64>,
    scores: Vec<f64>,
}

impl<'a, 'b> Curve<'a, 'b> {
    pub fn new(bath: &'a Bath, agent: usize, assessor: &'b mut Assessor<'a>) -> Self {
        Self {
            objectives: assessor.walls.iter().map(|wall| Objective::Wall(*wall)).collect(),
            places: vec![assessor.places.set()],
            doses: bath.doses(),
            max: bath.agents[agent].max_g_l,
            samples: Vec::new(),
            learned: Vec::new(),
            scores: Vec::new(),
            bath,
            assessor,
            agent,
        }
    }

    pub fn samples(&self) -> impl Iterator<Item = &Sample> {
        self.samples.iter()
    }

    /// Adds the worst places of a dose; whether any was worse than those known.
    pub fn learn(&mut self, dose: f64) -> Result<bool, EquilibriumError> {
        let known = |learned: &f64| (learned - dose).abs() <= 2.0 * WIDTH * self.max;
        if self.learned.iter().any(known) {
            return Ok(false);
        }
        self.learned.push(dose);
        let sample = self.take(dose)?;
        let worst = self.assessor.worst(&sample.dosed)?;
        let nearest = worst.iter().map(|wall| wall.excess_95).fold(f64::NEG_INFINITY, f64::max);
        let mut gained = false;
        for wall in worst {
            let is_new = wall.excess > sample.plain + WORSE || wall.excess_95 > sample.sure + WORSE;
            gained |= is_new;
            if is_new || (self.learned.len() <= 2 && wall.excess_95 > nearest - BEHIND) {
                for place in [wall.plain, wall.sure] {
                    if !self.places.contains(&place) {
                        self.places.push(place);
                        self.assessor.places.seat(place);
                    }
                }
            }
        }
        Ok(gained)
    }

    /// Samples all doses up to the largest.
    pub fn sample(&mut self, max: f64) -> Result<(), EquilibriumError> {
        let step = max / SAMPLES as f64;
        let small = (1..=HALVINGS).rev().map(|halvings| step * 0.5f64.powi(halvings as i32));
        let mut doses: Vec<f64> =
            std::iter::once(0.0).chain(small).chain((1..=SAMPLES).map(|i| step * i as f64)).collect();
        doses.dedup();
        for dose in doses {
            let sample = self.take(dose)?;
            self.samples.push(sample);
        }
        Ok(())
    }

    /// Learns from the holding ends and the middles of all bands; whether any place was added, with all samples judged
    /// anew at it.
    pub fn learn_from_bands(&mut self) -> Result<bool, EquilibriumError> {
        let mut gained = false;
        for band in self.bands().iter().filter(|band| band.hold != Hold::Not) {
            let middle = (band.hold == Hold::Sure).then_some(0.5 * (band.from + band.to));
            for dose in [band.from, band.to].into_iter().chain(middle) {
                gained |= self.learn(dose)?;
            }
        }
        if gained {
            let mut samples = std::mem::take(&mut self.samples);
            for sample in &mut samples {
                self.judge(sample)?;
            }
            self.samples = samples;
        }
        Ok(gained)
    }

    fn take(&mut self, dose: f64) -> Result<Sample, EquilibriumError> {
        self.doses[self.agent] = dose;
        let dosed = self.assessor.places.dose(&self.doses)?;
        let mut sample = Sample { dose, plain: f64::NEG_INFINITY, sure: f64::NEG_INFINITY, dosed, judged: 0 };
        self.judge(&mut sample)?;
        Ok(sample)
    }

    /// Judges a sample at the places that were added since.
    fn judge(&mut self, sample: &mut Sample) -> Result<(), EquilibriumError> {
        let walls = self.objectives.len();
        let first = sample.judged;
        self.scores.clear();
        for place in &self.places[first..] {
            self.assessor.places.score(&sample.dosed, place, &self.objectives, &mut self.scores)?;
        }
        let highest = self.scores.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        sample.plain = sample.plain.max(highest);
        sample.judged = self.places.len();
        if sample.plain - TOUCH > 0.0 {
            sample.sure = sample.plain;
            return Ok(());
        }
        for (scores, place) in self.scores.chunks_exact(walls).zip(&self.places[first..]) {
            let near = |score: &f64| *score > sample.plain - CONFIDENCE_REACH && score.is_finite();
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

    fn insert(&mut self, sample: Sample) {
        let at = self.samples.partition_point(|known| known.dose < sample.dose);
        if self.samples.get(at).is_some_and(|known| known.dose == sample.dose) {
            return;
        }
        self.samples.insert(at, sample);
    }

    /// A narrow band can hide between two samples: every local minimum above zero that could reach down to it is
    /// followed.
    pub fn add_dips(&mut self, level: Level) -> Result<(), EquilibriumError> {
        let could_hold = |w: &&[Sample]| {
            let [a, b, c] = [w[0].excess(level), w[1].excess(level), w[2].excess(level)];
            // What it falls by between the samples is of the size of what it fell by before.
            b > 0.0 && b <= a && b <= c && b <= DIP_DEPTH * (a - b).max(c - b)
        };
        let dips: Vec<(f64, f64)> =
            self.samples.windows(3).filter(could_hold).map(|w| (w[0].dose, w[2].dose)).collect();
        for (low, high) in dips {
            if high - low <= DIP_WIDTH * self.max {
                continue;
            }
            let mut found = None;
            let lowest = highest(low, high, |dose| {
                // Once a dose holds, the rest is for the crossings.
                if found.is_some() {
                    return Ok(f64::NEG_INFINITY);
                }
                let sample = self.take(dose)?;
                let excess = sample.excess(level);
                if excess <= 0.0 {
                    found = Some(sample);
                }
                Ok(-excess)
            })?;
            match found {
                Some(sample) => self.insert(sample),
                // Remembered, so that the next round does not go down here again.
                None => {
                    let sample = self.take(lowest.0)?;
                    self.insert(sample);
                }
            }
        }
        Ok(())
    }

    /// Puts a sample on both sides of every crossing, as near as is worth while.
    pub fn add_crossings(&mut self, level: Level) -> Result<(), EquilibriumError> {
        let width = WIDTH * self.max;
        let crossings: Vec<[(f64, f64); 2]> = self
            .samples
            .windows(2)
            .filter(|w| (w[0].excess(level) <= 0.0) != (w[1].excess(level) <= 0.0))
            .filter(|w| w[1].dose - w[0].dose > width)
            .map(|w| [(w[0].dose, w[0].excess(level)), (w[1].dose, w[1].excess(level))])
            .collect();
        for [a, b] in crossings {
            let (holds, fails) = if a.1 <= 0.0 { (a, b) } else { (b, a) };
            let mut taken = Vec::new();
            let ends = crossing(holds, fails, width, |dose| {
                let sample = self.take(dose)?;
                let excess = sample.excess(level);
                taken.push(sample);
                Ok(excess)
            })?;
            for sample in taken.into_iter().filter(|sample| ends.contains(&sample.dose)) {
                self.insert(sample);
            }
        }
        Ok(())
    }

    pub fn bands(&self) -> Vec<Band> {
        let mut bands: Vec<Band> = Vec::new();
        for sample in &self.samples {
            match bands.last_mut() {
                Some(band) if band.hold == sample.hold() => band.to = sample.dose,
                _ => bands.push(Band { from: sample.dose, to: sample.dose, hold: sample.hold() }),
            }
        }
        bands
    }
}
