//! How far pH and temperature may drift before a dose no longer holds.

use crate::bath::{Bath, Ph, Range};
use crate::dosing::{Assessor, Hold};
use crate::equilibrium::EquilibriumError;

/// A stretch around the set point over which a dose holds.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Band {
    /// Lowest value at which it holds.
    pub low: f64,
    /// Highest value at which it holds.
    pub high: f64,
    /// Whether it ends because nothing further was tried.
    pub open: (bool, bool),
    /// Whether it holds with 95 % confidence, or by plain numbers only.
    pub sure: bool,
}

impl Band {
    /// Its width.
    pub fn width(&self) -> f64 {
        self.high - self.low
    }
}

/// Steps of the walk from the set point, how far it goes, and how near the end is found.
const PH_STEP: f64 = 0.02;
const PH_REACH: f64 = 3.0;
const TEMPERATURE_STEP: f64 = 0.5;
const TEMPERATURE_REACH: f64 = 60.0;
const BISECTIONS: usize = 5;

/// The bath with its doses and their correction as contents, so that a drift moves nothing but the drifting value.
fn as_it_stands(bath: &Bath, totals: &[f64]) -> Bath {
    let mut drifting = bath.clone();
    drifting.contents = totals.to_vec();
    drifting
}

/// The pH band around the set point over the operating temperatures; `None` when the pH is not held, or the dose does
/// not hold at the set point.
pub fn ph_band(bath: &Bath, totals: &[f64], hold: Hold) -> Result<Option<Band>, EquilibriumError> {
    let Some(set) = bath.ph_set() else { return Ok(None) };
    let drifting = as_it_stands(bath, totals);
    let none = vec![0.0; bath.agents.len()];
    let sure = hold == Hold::Sure;
    let holds = |ph: f64| {
        let assessment = Assessor::over(&drifting, Some(Range::fixed(ph)))?.assess(&none)?;
        Ok(if sure { assessment.excess_95() } else { assessment.excess() } <= 0.0)
    };
    let reach = ((set - PH_REACH).max(-1.0), (set + PH_REACH).min(15.0));
    walk(set, PH_STEP, reach, sure, holds)
}

/// The temperature band around the set point over the operating pH.
pub fn temperature_band(bath: &Bath, totals: &[f64], hold: Hold) -> Result<Option<Band>, EquilibriumError> {
    let set = bath.project.tank.temperature_c.set;
    let mut drifting = as_it_stands(bath, totals);
    let none = vec![0.0; bath.agents.len()];
    let sure = hold == Hold::Sure;
    let ph = match bath.project.tank.ph {
        Ph::Held { low, set, high } => Some(Range { low, set, high }),
        Ph::Predicted => None,
    };
    let holds = |temperature: f64| {
        drifting.project.tank.temperature_c = Range::fixed(temperature);
        let assessment = Assessor::over(&drifting, ph)?.assess(&none)?;
        Ok(if sure { assessment.excess_95() } else { assessment.excess() } <= 0.0)
    };
    let reach = ((set - TEMPERATURE_REACH).max(0.0), (set + TEMPERATURE_REACH).min(100.0));
    walk(set, TEMPERATURE_STEP, reach, sure, holds)
}

/// Walks from the set point to both sides and halves the last step.
fn walk(
    set: f64,
    step: f64,
    reach: (f64, f64),
    sure: bool,
    mut holds: impl FnMut(f64) -> Result<bool, EquilibriumError>,
) -> Result<Option<Band>, EquilibriumError> {
    if !holds(set)? {
        return Ok(None);
    }
    let mut end = |sign: f64, limit: f64| -> Result<(f64, bool), EquilibriumError> {
        let mut inside = set;
        loop {
            let next = if sign > 0.0 { (inside + step).min(limit) } else { (inside - step).max(limit) };
            if next == inside {
                return Ok((inside, true));
            }
            if !holds(next)? {
                let mut outside = next;
                for _ in 0..BISECTIONS {
                    let middle = 0.5 * (inside + outside);
                    if holds(middle)? { inside = middle } else { outside = middle }
                }
                return Ok((inside, false));
            }
            inside = next;
        }
    };
    let (low, open_low) = end(-1.0, reach.0)?;
    let (high, open_high) = end(1.0, reach.1)?;
    Ok(Some(Band { low, high, open: (open_low, open_high), sure }))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_walk_stops_at_both_walls_and_at_the_end_of_its_reach() {
        let band = walk(7.0, 0.1, (4.0, 10.0), true, |x| Ok((6.234..).contains(&x))).unwrap().unwrap();
        assert!((band.low - 6.234).abs() < 1e-3 && band.low >= 6.234, "{band:?}");
        assert_eq!((band.high, band.open), (10.0, (false, true)));
        assert!(walk(7.0, 0.1, (4.0, 10.0), true, |_| Ok(false)).unwrap().is_none());
    }
}
