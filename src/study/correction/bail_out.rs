//! Bail-out: the smallest part of a bath to throw away and to refill with water, or with fresh bath, such that every wall
//! holds; with a dose afterwards where that alone can't do it.

use super::CorrectionError;
use super::input::{Effect, Input};
use super::remedy::surely;
use super::window::Window;
use crate::bath::{AgentDose, Bath, Content, Project};
use crate::dosing::{Assessor, Hold, search};

/// What the tank is refilled with.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Refill {
    /// Water.
    Water,
    /// A fresh bath as made up.
    Fresh,
}

/// A bail-out that makes every wall hold.
#[derive(Clone, Debug, PartialEq)]
pub struct BailOut {
    /// What the tank is refilled with.
    pub refill: Refill,
    /// Share of the bath to replace, 0…1.
    pub share: f64,
    /// The bath afterwards, with the dose it then needs.
    pub project: Project,
    /// Number of the agent and g/L of its product, where refilling alone can't do it.
    pub dose: Option<(usize, f64)>,
    /// How well it holds, with the uncertainty of the inputs counted; the refill counts as exact.
    pub hold: Hold,
}

/// Largest share that still is a correction and not a new bath.
pub const MOST: f64 = 0.95;
/// Shares tried before the crossing is refined, alone and with a dose; and the widths of the crossings.
const SAMPLES: usize = 38;
const SAMPLES_WITH_DOSE: usize = 19;
const WIDTH: f64 = 1e-4;
const WIDTH_WITH_DOSE: f64 = 1e-3;
/// Steps of the search for the lowest point between two shares.
const DIP_STEPS: usize = 16;

/// A share of the bath replaced.
///
/// # Errors
/// [`CorrectionError`] when the refill can't be read.
pub fn refilled(bath: &Bath, refill: Refill, share: f64) -> Result<Project, CorrectionError> {
    let mut project = bath.project.clone();
    let scaled = |contents: &[Content], factor: f64| -> Vec<Content> {
        let mut contents = contents.to_vec();
        contents.iter_mut().for_each(|content| content.amount.value *= factor);
        contents
    };
    let fresh = match refill {
        Refill::Water => Vec::new(),
        Refill::Fresh => scaled(&bath.project.analysis.make_up, share),
    };
    project.contents = scaled(&bath.project.contents, 1.0 - share);
    project.contents.extend(fresh);
    // The range that a load wanders in moves with the load.
    if !project.drift.loads.is_empty() {
        let after = Bath::resolve(&Project { drift: Default::default(), ..project.clone() })?;
        for load in &mut project.drift.loads {
            let Some(component) = bath.library.component_named(&load.of) else { continue };
            let total = |bath: &Bath| {
                let place = bath.present.iter().position(|present| *present == component);
                place.map_or(0.0, |place| bath.contents[place])
            };
            let ratio = if total(bath) > 0.0 { total(&after) / total(bath) } else { 1.0 };
            load.low.value *= ratio;
            load.high.value *= ratio;
        }
    }
    Ok(project)
}

/// The bath after a share was replaced, and what is left of the inputs in it.
fn after(
    bath: &Bath,
    inputs: &[Input],
    refill: Refill,
    share: f64,
) -> Result<(Bath, Vec<Input>), CorrectionError> {
    let after = Bath::resolve(&refilled(bath, refill, share)?)?;
    // A fresh bath may bring components that the old one lacked.
    let place = |component: usize| after.present.iter().position(|present| *present == component);
    let mut inputs = inputs.to_vec();
    for input in &mut inputs {
        let Effect::Totals(moles) = &mut input.effect else { continue };
        let mut left = vec![0.0; after.present.len()];
        for (moles, component) in moles.iter().zip(&bath.present) {
            if let Some(place) = place(*component) {
                left[place] = (1.0 - share) * moles;
            }
        }
        *moles = left;
    }
    Ok((after, inputs))
}

/// The smallest bail-out that holds without a dose: with 95 % confidence, else by plain numbers.
///
/// # Errors
/// [`CorrectionError`] for a refill that can't be read or an ill-posed bath.
pub(super) fn bail_out(
    bath: &Bath,
    inputs: &[Input],
    refill: Refill,
) -> Result<Option<BailOut>, CorrectionError> {
    for hold in [Hold::Sure, Hold::Plain] {
        let excess = |share: f64| {
            let (after, inputs) = after(bath, inputs, refill, share)?;
            let doses = after.doses();
            let assessment = Assessor::new(&after)?.assess(&doses)?;
            if hold == Hold::Plain {
                return Ok(assessment.excess());
            }
            let positions: Vec<_> = assessment.walls.iter().map(|wall| wall.worst.position).collect();
            let counted = Window::new(&after, &inputs, &positions)?.excess_95(&doses)?;
            Ok(assessment.excess_95().max(counted))
        };
        if let Some(share) = smallest(excess)? {
            let project = refilled(bath, refill, share)?;
            return Ok(Some(BailOut { refill, share, project, dose: None, hold }));
        }
    }
    Ok(None)
}

/// The smallest bail-out after which some dose of an agent holds.
///
/// # Errors
/// [`CorrectionError`] for a refill that can't be read or an ill-posed bath.
pub(super) fn bail_out_with_dose(
    bath: &Bath,
    inputs: &[Input],
    refill: Refill,
    agent: usize,
) -> Result<Option<BailOut>, CorrectionError> {
    let at = |share: f64| -> Result<Option<(f64, Hold)>, CorrectionError> {
        let (after, inputs) = after(bath, inputs, refill, share)?;
        let search = search(&after, agent)?;
        let Some(found) = &search.found else { return Ok(None) };
        let mut window = Window::new(&after, &inputs, &[])?;
        surely(&after, agent, &search, found.dose_g_l, &mut window).map(Some)
    };
    let step = MOST / SAMPLES_WITH_DOSE as f64;
    let mut tried = Vec::new();
    for i in 0..=SAMPLES_WITH_DOSE {
        let found = at(step * i as f64)?;
        tried.push(found);
        if found.is_some_and(|(_, hold)| hold == Hold::Sure) {
            break;
        }
    }
    for wanted in [Hold::Sure, Hold::Plain] {
        let reaches = |found: &Option<(f64, Hold)>| found.is_some_and(|(_, hold)| hold >= wanted);
        let Some(first) = tried.iter().position(reaches) else { continue };
        let (mut fails, mut holds) = (step * first.saturating_sub(1) as f64, step * first as f64);
        let mut best = tried[first];
        while holds - fails > WIDTH_WITH_DOSE {
            let middle = 0.5 * (fails + holds);
            let found = at(middle)?;
            if reaches(&found) {
                (holds, best) = (middle, found);
            } else {
                fails = middle;
            }
        }
        let Some((dose, hold)) = best else { continue };
        let mut project = refilled(bath, refill, holds)?;
        project.agents[agent] = AgentDose { dose_g_l: dose, ..project.agents[agent].clone() };
        return Ok(Some(BailOut { refill, share: holds, project, dose: Some((agent, dose)), hold }));
    }
    Ok(None)
}

/// The smallest share at which an excess is zero or less: every change of sign, and every dip that could hide one.
fn smallest(
    mut excess: impl FnMut(f64) -> Result<f64, CorrectionError>,
) -> Result<Option<f64>, CorrectionError> {
    let step = MOST / SAMPLES as f64;
    let mut last = [(0.0, excess(0.0)?), (0.0, f64::NAN)];
    if last[0].1 <= 0.0 {
        return Ok(Some(0.0));
    }
    for i in 1..=SAMPLES {
        let share = step * i as f64;
        let here = (share, excess(share)?);
        if here.1 <= 0.0 {
            return crossing(last[0].0, share, &mut excess).map(Some);
        }
        let [middle, before] = last;
        if middle.1 <= here.1 && middle.1 <= before.1 {
            let lowest = lowest(before.0, here.0, &mut excess)?;
            if lowest.1 <= 0.0 {
                return crossing(before.0, lowest.0, &mut excess).map(Some);
            }
        }
        last = [here, last[0]];
    }
    Ok(None)
}

/// The holding side of a crossing between a share that fails and one that holds.
fn crossing(
    mut fails: f64,
    mut holds: f64,
    excess: &mut impl FnMut(f64) -> Result<f64, CorrectionError>,
) -> Result<f64, CorrectionError> {
    while holds - fails > WIDTH {
        let middle = 0.5 * (fails + holds);
        if excess(middle)? <= 0.0 { holds = middle } else { fails = middle }
    }
    Ok(holds)
}

/// The lowest point met by a ternary search.
fn lowest(
    mut low: f64,
    mut high: f64,
    excess: &mut impl FnMut(f64) -> Result<f64, CorrectionError>,
) -> Result<(f64, f64), CorrectionError> {
    let mut best = (low, f64::INFINITY);
    for _ in 0..DIP_STEPS {
        let (left, right) = (low + (high - low) / 3.0, high - (high - low) / 3.0);
        let (f_left, f_right) = (excess(left)?, excess(right)?);
        for (x, f) in [(left, f_left), (right, f_right)] {
            if f < best.1 {
                best = (x, f);
            }
        }
        if f_left <= f_right { high = right } else { low = left }
    }
    Ok(best)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn root(f: impl Fn(f64) -> f64) -> Option<f64> {
        smallest(|x| Ok(f(x))).unwrap()
    }

    #[test]
    fn the_first_share_that_holds_is_found_even_in_a_narrow_dip() {
        assert_eq!(root(|_| -1.0), Some(0.0));
        assert_eq!(root(|_| 1.0), None);
        let plain = root(|x| 0.4 - x).unwrap();
        assert!((0.4..=0.4 + WIDTH).contains(&plain), "{plain}");
        // Holds only between 0.5037 and 0.5063, between two samples.
        let narrow = root(|x| (x - 0.505).abs() - 0.0013).unwrap();
        assert!((0.5037..=0.5037 + WIDTH).contains(&narrow), "{narrow}");
    }
}
