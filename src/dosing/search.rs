//! All doses of one agent that hold, not only the first: an overdose can starve a floor or precipitate a salt of
//! the agent.

use super::assess::{Assessment, Assessor};
use crate::bath::Bath;
use crate::equilibrium::EquilibriumError;

/// How well the doses of a band hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Hold {
    /// Some wall is crossed.
    Not,
    /// The plain numbers hold, but not with 95 % confidence.
    Plain,
    /// Holds with 95 % confidence, one-sided.
    Sure,
}

/// A range of doses that hold alike, g/L.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Band {
    /// Lowest dose.
    pub from: f64,
    /// Highest dose.
    pub to: f64,
    /// How well they hold.
    pub hold: Hold,
}

/// The smallest dose that holds.
#[derive(Clone, Debug, PartialEq)]
pub struct Found {
    /// Grams of product per litre of bath.
    pub dose_g_l: f64,
    /// With or without confidence.
    pub hold: Hold,
    /// Its worst cases.
    pub assessment: Assessment,
}

/// What a search over one agent found.
#[derive(Clone, Debug, PartialEq)]
pub struct Search {
    /// Number of the agent.
    pub agent: usize,
    /// All doses from zero to the cap, each in one band.
    pub bands: Vec<Band>,
    /// Smallest dose that holds with confidence, else the smallest that holds by plain numbers.
    pub found: Option<Found>,
    /// Smallest dose that holds by plain numbers.
    pub plain_g_l: Option<f64>,
    /// The dose that comes nearest when none holds, with its excess (log10).
    pub best: (f64, f64),
}

/// Doses sampled before crossings are refined.
const SAMPLES: usize = 40;
/// Bisection steps of a crossing: the band ends are exact to 2⁻³⁰ of a sample's width.
const BISECTIONS: usize = 30;
const DIP_STEPS: usize = 16;

/// Searches the doses of one agent from zero to its cap, the other doses as they are.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn search(bath: &Bath, agent: usize) -> Result<Search, EquilibriumError> {
    let mut assessor = Assessor::new(bath);
    search_with(bath, agent, &mut assessor)
}

/// As [`search`] with a prepared assessor.
pub(super) fn search_with(
    bath: &Bath,
    agent: usize,
    assessor: &mut Assessor,
) -> Result<Search, EquilibriumError> {
    let mut doses = bath.doses();
    let max = bath.agents[agent].max_g_l;
    let mut scan = Scan { points: Vec::new() };
    for dose in sample_doses(max) {
        doses[agent] = dose;
        scan.points.push(Sample::take(dose, &doses, assessor)?);
    }
    for level in [Level::Plain, Level::Sure] {
        scan.add_dips(level, |dose| {
            doses[agent] = dose;
            Sample::take(dose, &doses, assessor)
        })?;
        scan.add_crossings(level, |dose| {
            doses[agent] = dose;
            Sample::take(dose, &doses, assessor)
        })?;
    }
    let bands = scan.bands();
    let smallest = |hold: Hold| scan.points.iter().find(|sample| sample.hold() >= hold);
    let plain_g_l = smallest(Hold::Plain).map(|sample| sample.dose);
    let found = match smallest(Hold::Sure).or_else(|| smallest(Hold::Plain)) {
        Some(sample) => {
            doses[agent] = sample.dose;
            let assessment = assessor.assess(&doses)?;
            Some(Found { dose_g_l: sample.dose, hold: sample.hold(), assessment })
        }
        None => None,
    };
    let best = scan
        .points
        .iter()
        .min_by(|a, b| a.plain.total_cmp(&b.plain))
        .map_or((0.0, f64::INFINITY), |s| (s.dose, s.plain));
    Ok(Search { agent, bands, found, plain_g_l, best })
}

/// Doses from zero to the cap: denser near zero, where free metal falls by orders of magnitude.
fn sample_doses(max: f64) -> Vec<f64> {
    let mut doses = vec![0.0];
    doses.extend((0..8).map(|i| max / (SAMPLES as f64) * 2f64.powi(i - 8)));
    doses.extend((1..=SAMPLES).map(|i| max * i as f64 / SAMPLES as f64));
    doses.dedup();
    doses
}

#[derive(Clone, Copy, PartialEq)]
enum Level {
    Plain,
    Sure,
}

#[derive(Clone, Copy, Debug)]
struct Sample {
    dose: f64,
    plain: f64,
    sure: f64,
}

impl Sample {
    fn take(dose: f64, doses: &[f64], assessor: &mut Assessor) -> Result<Self, EquilibriumError> {
        let assessment = assessor.assess(doses)?;
        Ok(Self { dose, plain: assessment.excess(), sure: assessment.excess_95() })
    }

    fn excess(&self, level: Level) -> f64 {
        if level == Level::Plain { self.plain } else { self.sure }
    }

    fn hold(&self) -> Hold {
        match (self.plain <= 0.0, self.sure <= 0.0) {
            (true, true) => Hold::Sure,
            (true, false) => Hold::Plain,
            _ => Hold::Not,
        }
    }
}

/// Samples in rising order of dose.
struct Scan {
    points: Vec<Sample>,
}

impl Scan {
    fn insert(&mut self, sample: Sample) {
        let at = self.points.partition_point(|known| known.dose < sample.dose);
        self.points.insert(at, sample);
    }

    /// A narrow band can hide between two samples: every local minimum above zero is followed down.
    fn add_dips(
        &mut self,
        level: Level,
        mut take: impl FnMut(f64) -> Result<Sample, EquilibriumError>,
    ) -> Result<(), EquilibriumError> {
        let dips: Vec<(f64, f64)> = self
            .points
            .windows(3)
            .filter(|w| {
                let [a, b, c] = [w[0].excess(level), w[1].excess(level), w[2].excess(level)];
                b > 0.0 && b <= a && b <= c
            })
            .map(|w| (w[0].dose, w[2].dose))
            .collect();
        let ratio = 0.5 * (5f64.sqrt() - 1.0);
        for (mut a, mut b) in dips {
            for _ in 0..DIP_STEPS {
                let left = take(b - ratio * (b - a))?;
                let right = take(a + ratio * (b - a))?;
                let lower = if left.excess(level) < right.excess(level) { left } else { right };
                if lower.excess(level) <= 0.0 {
                    self.insert(lower);
                    break;
                }
                if lower.dose == left.dose { b = right.dose } else { a = left.dose }
            }
        }
        Ok(())
    }

    /// Puts a sample on the holding side of every crossing, as near as bisection gets.
    fn add_crossings(
        &mut self,
        level: Level,
        mut take: impl FnMut(f64) -> Result<Sample, EquilibriumError>,
    ) -> Result<(), EquilibriumError> {
        let crossings: Vec<(Sample, Sample)> = self
            .points
            .windows(2)
            .filter(|w| (w[0].excess(level) <= 0.0) != (w[1].excess(level) <= 0.0))
            .map(|w| (w[0], w[1]))
            .collect();
        for (a, b) in crossings {
            let (mut holds, mut fails) = if a.excess(level) <= 0.0 { (a, b) } else { (b, a) };
            for _ in 0..BISECTIONS {
                let middle = take(0.5 * (holds.dose + fails.dose))?;
                if middle.excess(level) <= 0.0 { holds = middle } else { fails = middle }
            }
            self.insert(fails);
            self.insert(holds);
        }
        Ok(())
    }

    fn bands(&self) -> Vec<Band> {
        let mut bands: Vec<Band> = Vec::new();
        for sample in &self.points {
            match bands.last_mut() {
                Some(band) if band.hold == sample.hold() => band.to = sample.dose,
                _ => {
                    let from = bands.last().map_or(0.0, |_| sample.dose);
                    bands.push(Band { from, to: sample.dose, hold: sample.hold() });
                }
            }
        }
        bands
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn bands_follow_the_samples_and_cover_every_dose() {
        let sample = |dose, plain, sure| Sample { dose, plain, sure };
        let scan = Scan {
            points: vec![
                sample(0.0, 1.0, 2.0),
                sample(1.0, 0.0, 0.5),
                sample(2.0, -1.0, -0.1),
                sample(3.0, -1.0, -0.1),
                sample(4.0, 0.5, 0.9),
            ],
        };
        let holds: Vec<(f64, f64, Hold)> = scan.bands().iter().map(|b| (b.from, b.to, b.hold)).collect();
        assert_eq!(
            holds,
            vec![
                (0.0, 0.0, Hold::Not),
                (1.0, 1.0, Hold::Plain),
                (2.0, 3.0, Hold::Sure),
                (4.0, 4.0, Hold::Not)
            ]
        );
    }
}
