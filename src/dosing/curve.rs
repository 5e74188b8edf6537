//! The excess over the nearest wall against the dose of one agent, judged at the places known so far.

use super::assess::Assessor;
use super::extreme::{crossing, highest};
use super::judge::{Judge, Level, Sample};
use super::search::{Band, Hold};
use crate::bath::Bath;
use crate::equilibrium::EquilibriumError;

/// Evenly spaced doses sampled before crossings are refined, and halvings of the first of them towards zero, where free
/// metal falls by orders of magnitude.
const SAMPLES: usize = 24;
const HALVINGS: usize = 6;
/// Width of a crossing as a share of the largest dose.
const WIDTH: f64 = 1e-7;
/// Doses closer than this share of the largest dose count as the same: less than the two sides of a crossing are apart.
const SAME: f64 = 1e-10;
/// How many times its last fall the excess can fall between two samples.
const DIP_DEPTH: f64 = 2.0;
/// Width of samples around a dip, as a share of the largest dose, that are close enough.
const DIP_WIDTH: f64 = 1e-3;

/// A judged dose of the agent.
#[derive(Clone, Debug)]
pub(super) struct Dose {
    pub g_l: f64,
    pub sample: Sample,
}

/// Judged doses of one agent in rising order.
pub(super) struct Curve<'a, 'b> {
    judge: Judge<'a, 'b>,
    doses: Vec<f64>,
    agent: usize,
    min: f64,
    max: f64,
    samples: Vec<Dose>,
}

impl<'a, 'b> Curve<'a, 'b> {
    pub fn new(bath: &'a Bath, agent: usize, assessor: &'b mut Assessor<'a>) -> Self {
        Self {
            judge: Judge::new(bath, assessor, SAME),
            doses: bath.doses(),
            min: bath.project.agents[agent].min_g_l,
            max: bath.agents[agent].max_g_l,
            samples: Vec::new(),
            agent,
        }
    }

    pub fn samples(&self) -> impl Iterator<Item = &Dose> {
        self.samples.iter()
    }

    /// Adds the worst places of a dose; whether any was worse than those known.
    pub fn learn(&mut self, dose: f64) -> Result<bool, EquilibriumError> {
        self.doses[self.agent] = dose;
        self.judge.learn(&self.doses)
    }

    /// Samples all doses from the smallest to the largest.
    pub fn sample(&mut self) -> Result<(), EquilibriumError> {
        let step = (self.max - self.min) / SAMPLES as f64;
        let small = (1..=HALVINGS).rev().map(|halvings| step * 0.5f64.powi(halvings as i32));
        let mut doses: Vec<f64> =
            std::iter::once(0.0).chain(small).chain((1..=SAMPLES).map(|i| step * i as f64)).collect();
        doses.dedup();
        for dose in doses {
            let sample = self.take(self.min + dose)?;
            self.samples.push(sample);
        }
        Ok(())
    }

    /// Learns from the holding ends and the middles of all bands; whether any place was added, with all samples judged
    /// anew at it.
    pub fn learn_from_bands(&mut self) -> Result<bool, EquilibriumError> {
        let mut gained = false;
        let bands = self.bands();
        let hold = |at: Option<usize>| at.and_then(|at| bands.get(at)).map_or(Hold::Not, |band| band.hold);
        for (number, band) in bands.iter().enumerate().filter(|(_, band)| band.hold != Hold::Not) {
            // Where a band passes into a better one, the end of the better one is what counts.
            let (before, after) = (hold(number.checked_sub(1)), hold(Some(number + 1)));
            let from = (before < band.hold).then_some(band.from);
            let to = (after < band.hold).then_some(band.to);
            let middle = (band.hold == Hold::Sure).then_some(0.5 * (band.from + band.to));
            for dose in [from, to, middle].into_iter().flatten() {
                gained |= self.learn(dose)?;
            }
        }
        if gained {
            let mut samples = std::mem::take(&mut self.samples);
            for dose in &mut samples {
                self.judge.judge(&mut dose.sample)?;
            }
            self.samples = samples;
        }
        Ok(gained)
    }

    fn take(&mut self, dose: f64) -> Result<Dose, EquilibriumError> {
        self.doses[self.agent] = dose;
        Ok(Dose { g_l: dose, sample: self.judge.take(&self.doses)? })
    }

    fn insert(&mut self, sample: Dose) {
        let at = self.samples.partition_point(|known| known.g_l < sample.g_l);
        if self.samples.get(at).is_some_and(|known| known.g_l == sample.g_l) {
            return;
        }
        self.samples.insert(at, sample);
    }

    /// A narrow band can hide between two samples: every local minimum above zero that could reach down to it is
    /// followed.
    pub fn add_dips(&mut self, level: Level) -> Result<(), EquilibriumError> {
        let could_hold = |w: &&[Dose]| {
            let [a, b, c] = [w[0].sample.excess(level), w[1].sample.excess(level), w[2].sample.excess(level)];
            // What it falls by between the samples is of the size of what it fell by before.
            b > 0.0 && b <= a && b <= c && b <= DIP_DEPTH * (a - b).max(c - b)
        };
        let dips: Vec<(f64, f64)> =
            self.samples.windows(3).filter(could_hold).map(|w| (w[0].g_l, w[2].g_l)).collect();
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
                let excess = sample.sample.excess(level);
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
            .filter(|w| (w[0].sample.excess(level) <= 0.0) != (w[1].sample.excess(level) <= 0.0))
            .filter(|w| w[1].g_l - w[0].g_l > width)
            .map(|w| [(w[0].g_l, w[0].sample.excess(level)), (w[1].g_l, w[1].sample.excess(level))])
            .collect();
        for [a, b] in crossings {
            let (holds, fails) = if a.1 <= 0.0 { (a, b) } else { (b, a) };
            let mut taken = Vec::new();
            let ends = crossing(holds, fails, width, |dose| {
                let sample = self.take(dose)?;
                let excess = sample.sample.excess(level);
                taken.push(sample);
                Ok(excess)
            })?;
            for sample in taken.into_iter().filter(|sample| ends.contains(&sample.g_l)) {
                self.insert(sample);
            }
        }
        Ok(())
    }

    pub fn bands(&self) -> Vec<Band> {
        let mut bands: Vec<Band> = Vec::new();
        for Dose { g_l, sample } in &self.samples {
            match bands.last_mut() {
                Some(band) if band.hold == sample.hold() => band.to = *g_l,
                _ => bands.push(Band { from: *g_l, to: *g_l, hold: sample.hold() }),
            }
        }
        bands
    }
}
