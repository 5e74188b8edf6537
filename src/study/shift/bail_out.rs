//! Bail-out: when no addition holds the bath any more, some of it is taken out and replaced, with fresh bath or with
//! water, and the agent that went with it is dosed again.

use super::planner::Planner;
use super::stirred::Contents;
use super::walk::Change;
use crate::bath::{Adjustment, Bath, Running, Wall};
use crate::dosing::{Direction, Measured, addition_cap, measure};
use crate::equilibrium::EquilibriumError;

/// Parts of the volume that are tried.
const PARTS: usize = 19;
const PART: f64 = 0.05;
/// Litres that a bail-out is rounded up to.
const ROUND_L: f64 = 5.0;
/// Doses that are tried with each part, besides none.
const DOSES: usize = 8;

/// What replaces the bath that is taken out.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Refill {
    /// Make-up water.
    Water,
    /// The bath as it was at the beginning, without what the loads build up.
    FreshBath,
}

impl Refill {
    /// What it is called.
    pub fn name(self) -> &'static str {
        match self {
            Refill::Water => "make-up water",
            Refill::FreshBath => "fresh bath",
        }
    }
}

/// A bail-out.
#[derive(Clone, Debug, PartialEq)]
pub struct BailOut {
    /// Running hours from the beginning.
    pub hour: f64,
    /// Number of the step.
    pub step: usize,
    /// Walls that no addition keeps any more.
    pub walls: Vec<Wall>,
    /// Litres to take out and replace.
    pub litres: f64,
    /// With what.
    pub refill: Refill,
    /// Litres that the other refill would take, where it would do.
    pub otherwise: Option<(Refill, f64)>,
    /// Agent to dose with the refill, g of product per litre of bath, and the amount for the tank.
    pub dose_g_l: f64,
    /// See [`BailOut::dose_g_l`]; `None` without a dose.
    pub measured: Option<Measured>,
    /// Acid or alkali that goes with it.
    pub adjustment: Option<(Adjustment, Measured)>,
    /// Hour up to which it holds without a further addition.
    pub holds_to: f64,
    /// What is changed in the tank.
    pub change: Change,
}

/// The smallest bail-out at the beginning of a step that holds for a shift, else the one that holds longest; `None`
/// when none gets past step `late`.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn bail_out(
    planner: &mut Planner,
    changes: &[Change],
    step: usize,
    late: usize,
) -> Result<Option<BailOut>, EquilibriumError> {
    let crossed = planner.contents_at(late, changes)?;
    let walls = planner.judge.crossed_walls(&crossed.totals, planner.sure())?;
    let others: Vec<Change> = changes.iter().filter(|change| change.step != step).cloned().collect();
    let contents = planner.contents_at(step, &others)?;
    let mut found = Vec::new();
    for refill in [Refill::Water, Refill::FreshBath] {
        found.extend(smallest(planner, &others, &contents, (step, late), refill)?);
    }
    found.sort_by(|a, b| b.lasts.cmp(&a.lasts).then(a.litres.total_cmp(&b.litres)));
    let mut found = found.into_iter();
    let Some(best) = found.next() else { return Ok(None) };
    let otherwise = found.next().filter(|other| other.lasts == best.lasts);
    Ok(Some(BailOut {
        hour: step as f64 * planner.running.step_h,
        step,
        walls,
        litres: best.litres,
        refill: best.refill,
        otherwise: otherwise.map(|other| (other.refill, other.litres)),
        dose_g_l: best.dose_g_l,
        measured: best.measured,
        adjustment: best.adjustment,
        holds_to: (best.reach - 1) as f64 * planner.running.step_h,
        change: best.change,
    }))
}

/// A bail-out that was tried.
struct Tried {
    litres: f64,
    refill: Refill,
    dose_g_l: f64,
    measured: Option<Measured>,
    adjustment: Option<(Adjustment, Measured)>,
    change: Change,
    /// First step that it does not hold.
    reach: usize,
    /// Whether it holds for a shift.
    lasts: bool,
}

fn smallest(
    planner: &mut Planner,
    changes: &[Change],
    contents: &Contents,
    (step, late): (usize, usize),
    refill: Refill,
) -> Result<Option<Tried>, EquilibriumError> {
    let running = planner.running;
    let enough = (step + running.steps_per_shift).min(running.steps());
    let mut best: Option<Tried> = None;
    for part in 1..=PARTS {
        let litres = (PART * part as f64 * running.volume_l / ROUND_L).ceil() * ROUND_L;
        if litres >= running.volume_l {
            break;
        }
        let Some(tried) = with_dose(planner, changes, contents, (step, enough), (refill, litres))? else {
            continue;
        };
        if tried.lasts {
            return Ok(Some(tried));
        }
        if tried.reach > late && best.as_ref().is_none_or(|best| tried.reach > best.reach) {
            best = Some(tried);
        }
    }
    Ok(best)
}

/// A bail-out with the smallest dose that holds for a shift, else with the one that holds longest.
fn with_dose(
    planner: &mut Planner,
    changes: &[Change],
    contents: &Contents,
    (step, enough): (usize, usize),
    (refill, litres): (Refill, f64),
) -> Result<Option<Tried>, EquilibriumError> {
    let running = planner.running;
    let part = litres / running.volume_l;
    let put_in = match refill {
        Refill::Water => Contents { totals: running.water.clone(), doses: vec![0.0; contents.doses.len()] },
        Refill::FreshBath => fresh(running, &planner.start),
    };
    let scaled = |values: &[f64]| values.iter().map(|value| part * value).collect::<Vec<f64>>();
    let plain = Change { step, keep: 1.0 - part, add: scaled(&put_in.totals), doses: scaled(&put_in.doses) };
    let bound = planner.bound(contents)?;
    let after = plain.apply(contents, &bound);
    let largest = largest_dose(running, planner.agent, contents, &after);
    let mixture = if largest > 0.0 { Some(planner.mixture(&after, largest)?) } else { None };
    let mut best: Option<Tried> = None;
    for i in 0..=DOSES {
        let (change, measured) = match &mixture {
            Some(mixture) if i > 0 => {
                let exact = largest * i as f64 / DOSES as f64;
                let measured = amount(running, planner.agent, exact, Direction::Down);
                let dose = planner.change(step, mixture, measured.rounded_kg * 1000.0 / running.volume_l);
                (added(&plain, &dose), Some(measured))
            }
            _ if i > 0 => break,
            _ => (plain.clone(), None),
        };
        let reach = planner.reach(&change.apply(contents, &bound), step, enough, changes, false)?;
        if reach > step && best.as_ref().is_none_or(|best| reach > best.reach) {
            let dose_g_l = measured.as_ref().map_or(0.0, |m| m.rounded_kg * 1000.0 / running.volume_l);
            let adjustment = mixture.as_ref().filter(|_| dose_g_l > 0.0);
            let adjustment = adjustment.and_then(|mixture| mixture.adjustment(running, dose_g_l));
            let lasts = reach > enough;
            best = Some(Tried { litres, refill, dose_g_l, measured, adjustment, change, reach, lasts });
            if lasts {
                break;
            }
        }
    }
    Ok(best)
}

/// The largest dose with a refill: it may bring the agent back to where it was and, as any addition, to its cap above.
fn largest_dose(running: &Running, agent: usize, before: &Contents, after: &Contents) -> f64 {
    let bath = &running.bath;
    let product = &bath.agents[agent];
    let per_gram = product.per_gram[product.active];
    if per_gram <= 0.0 {
        return 0.0;
    }
    let wanted = (1.0 + addition_cap(bath)) * before.totals[product.active] - after.totals[product.active];
    (wanted / per_gram).min(product.max_g_l - after.doses[agent]).max(0.0)
}

fn amount(running: &Running, agent: usize, dose_g_l: f64, direction: Direction) -> Measured {
    let bath: &Bath = &running.bath;
    measure(&bath.agents[agent].product, dose_g_l, running.volume_l, &bath.project.sheet, direction)
}

fn added(change: &Change, more: &Change) -> Change {
    let sum = |a: &[f64], b: &[f64]| a.iter().zip(b).map(|(a, b)| a + b).collect();
    Change { add: sum(&change.add, &more.add), doses: sum(&change.doses, &more.doses), ..change.clone() }
}

/// The bath as it was at the beginning, without the components that the loads build up; a metal that has a floor is
/// part of the make-up.
fn fresh(running: &Running, start: &Contents) -> Contents {
    let bath = &running.bath;
    let has_floor = |i: usize| bath.limits.iter().any(|limit| limit.component == i && limit.floor.is_some());
    let mut fresh = start.clone();
    for (i, total) in fresh.totals.iter_mut().enumerate() {
        if running.load_mol_h[i] > 0.0 && bath.system.proton != Some(i) && !has_floor(i) {
            *total = 0.0;
        }
    }
    fresh
}
