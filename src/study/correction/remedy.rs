//! What brings a bath back: a dose, a bail-out, or both; and whether guesses decide it.

use super::bail_out::{BailOut, Refill, bail_out, bail_out_with_dose};
use super::input::Input;
use super::window::{WallSpread, Window};
use super::{CorrectionError, Remedy};
use crate::bath::Bath;
use crate::dosing::{CONFIDENCE_95, Hold, Search, search, why_none};
use crate::equilibrium::EquilibriumError;

/// Shares of the range above the dose found at which the confident excess is tried, and halvings of the crossing.
const DOSE_SAMPLES: usize = 24;
const DOSE_HALVINGS: usize = 24;

/// A dose first, then a bail-out, then both.
pub(super) fn remedy(
    bath: &Bath,
    inputs: &[Input],
    agent: usize,
    window: &mut Window,
) -> Result<Remedy, CorrectionError> {
    let search = search(bath, agent)?;
    if let Some(found) = &search.found {
        let (dose_g_l, hold) = surely(bath, agent, &search, found.dose_g_l, window)?;
        return Ok(if dose_g_l == 0.0 {
            Remedy::Unsure
        } else {
            Remedy::Add { agent, dose_g_l, hold, search: Box::new(search) }
        });
    }
    let fresh = !bath.project.analysis.make_up.is_empty();
    let refills =
        [Refill::Water, Refill::Fresh].into_iter().filter(|refill| fresh || *refill == Refill::Water);
    let mut best: Option<BailOut> = None;
    for refill in refills.clone() {
        let found = bail_out(bath, inputs, refill)?;
        keep_better(&mut best, found);
    }
    if best.is_none() {
        for refill in refills {
            let found = bail_out_with_dose(bath, inputs, refill, agent)?;
            keep_better(&mut best, found);
        }
    }
    Ok(match best {
        Some(found) => Remedy::BailOut(Box::new(found)),
        None => Remedy::None(Box::new(why_none(bath, &search)?)),
    })
}

/// The surer bail-out, then the smaller one.
fn keep_better(best: &mut Option<BailOut>, found: Option<BailOut>) {
    let Some(found) = found else { return };
    let better = best.as_ref().is_none_or(|known| {
        found.hold > known.hold || (found.hold == known.hold && found.share < known.share)
    });
    if better {
        *best = Some(found);
    }
}

/// The smallest dose from the one found on that holds with the uncertainty of the inputs counted, else the one found.
pub(super) fn surely(
    bath: &Bath,
    agent: usize,
    search: &Search,
    from: f64,
    window: &mut Window,
) -> Result<(f64, Hold), CorrectionError> {
    let mut excess = |dose: f64| {
        let mut doses = bath.doses();
        doses[agent] = dose;
        window.excess_95(&doses)
    };
    if excess(from)? <= 0.0 {
        return Ok((from, Hold::Sure));
    }
    // Not beyond the band of plain numbers that the dose lies in.
    let holds = |dose: f64| search.bands.iter().find(|band| band.from <= dose && dose <= band.to);
    let most = bath.agents[agent].max_g_l;
    let mut fails = from;
    for i in 1..=DOSE_SAMPLES {
        let dose = from + (most - from) * (i as f64 / DOSE_SAMPLES as f64).powi(2);
        if holds(dose).is_some_and(|band| band.hold == Hold::Not) {
            break;
        }
        if excess(dose)? <= 0.0 {
            let mut holds = dose;
            for _ in 0..DOSE_HALVINGS {
                let middle = 0.5 * (fails + holds);
                if excess(middle)? <= 0.0 { holds = middle } else { fails = middle }
            }
            return Ok((holds, Hold::Sure));
        }
        fails = dose;
    }
    Ok((from, Hold::Plain))
}

/// Share of the variance from which a guess is worth measuring.
const WORTH_MEASURING: f64 = 0.05;

/// Inputs that nobody measured, when together they could turn the decision: whether the bath holds as found, or whether
/// it does with the dose.
pub(super) fn rests_on(
    bath: &Bath,
    inputs: &[Input],
    walls: &[WallSpread],
    remedy: &Remedy,
    window: &mut Window,
) -> Result<Vec<usize>, EquilibriumError> {
    let after = match remedy {
        Remedy::Add { agent, dose_g_l, .. } => {
            let mut doses = vec![0.0; bath.agents.len()];
            doses[*agent] = *dose_g_l;
            window.walls(&doses)?
        }
        _ => Vec::new(),
    };
    let guessed = |number: usize| !inputs[number].is_measured();
    let mut shares = vec![0.0f64; inputs.len()];
    let mut count = |wall: &WallSpread| {
        for number in (0..inputs.len()).filter(|&number| guessed(number)) {
            shares[number] = shares[number].max(wall.spread.share(number));
        }
    };
    for wall in walls {
        let measured = wall.spread.with(|number| !guessed(number));
        let guesses = (wall.spread.total().powi(2) - measured.powi(2)).max(0.0).sqrt();
        if wall.excess.abs() < CONFIDENCE_95 * guesses {
            count(wall);
        }
    }
    for wall in &after {
        let measured = wall.excess + CONFIDENCE_95 * wall.spread.with(|number| !guessed(number));
        if wall.excess_95 > 0.0 && measured <= 0.0 {
            count(wall);
        }
    }
    let mut order: Vec<usize> =
        (0..inputs.len()).filter(|&number| shares[number] >= WORTH_MEASURING).collect();
    order.sort_by(|&a, &b| shares[b].total_cmp(&shares[a]));
    Ok(order)
}
