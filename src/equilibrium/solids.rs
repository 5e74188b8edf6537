//! Which solids are present, and how much: active set on the conditions amount ≥ 0, saturation ≤ 1, product 0.
//!
//! The amounts are the multipliers of a convex problem, so the dual function grows with every exchange and no set
//! comes back: the scheme of Lawson & Hanson (Solving Least Squares Problems, 1974, ch. 23) carried over from
//! least squares. Solids that are combinations of present ones (parallel solids, or two hydroxides of one metal
//! at held pH) enter by a ratio test instead, because their row adds no new equation.

use super::convex::{Minimiser, Outcome};
use super::stage::{Fixed, Stage};

/// Saturation (ln units) above one at which a solid has to form.
const SUPERSATURATED: f64 = 1e-11;
const MAX_EXCHANGES: usize = 300;

/// Why no set of solids was found.
#[derive(Clone, Copy, Debug)]
pub(super) enum Unsettled {
    /// This solid would form without end; it exceeds saturation by so much, ln units.
    Unbounded { solid: usize, excess: f64 },
    /// The exchanges did not end within these steps.
    Endless { steps: usize },
}

/// Finds the present solids and the minimum. Fills `amounts` and ln a over all columns; returns the outcome of the last
/// minimisation.
pub(super) fn settle(
    fixed: &Fixed,
    stage: &mut Stage,
    minimiser: &mut Minimiser,
    amounts: &mut Vec<(usize, f64)>,
    x: &mut [f64],
) -> Result<Outcome, Unsettled> {
    amounts.clear();
    amounts.extend(stage.active.iter().map(|&(solid, _)| (solid, 0.0)));
    let mut barred: Vec<usize> = Vec::new();
    let mut steps = 0;
    for _ in 0..MAX_EXCHANGES {
        let mut outcome = stage.minimise(fixed, minimiser);
        steps += outcome.steps;
        outcome.steps = steps;
        stage.ln_activities(x);
        match exchange(fixed, stage, minimiser, amounts, &mut barred) {
            Exchange::None => return Ok(outcome),
            Exchange::Unbounded { solid, excess } => return Err(Unsettled::Unbounded { solid, excess }),
            Exchange::Made => {
                let active: Vec<usize> = amounts.iter().map(|&(solid, _)| solid).collect();
                stage.weigh(fixed, &minimiser.c);
                stage.prepare(fixed, &active, x);
            }
        }
    }
    Err(Unsettled::Endless { steps })
}

/// What a look at the solids led to.
pub(super) enum Exchange {
    /// The present solids are the right ones.
    None,
    /// The amounts are those of another set of solids.
    Made,
    /// A solid forms without end.
    Unbounded { solid: usize, excess: f64 },
}

/// Looks whether the present solids are the right ones, fills their amounts, and exchanges one set for another if not.
pub(super) fn exchange(
    fixed: &Fixed,
    stage: &Stage,
    minimiser: &Minimiser,
    amounts: &mut Vec<(usize, f64)>,
    barred: &mut Vec<usize>,
) -> Exchange {
    if !stage.active.is_empty() {
        let found = stage.amounts(fixed, &minimiser.c);
        let sizes: Vec<f64> = stage.active.iter().map(|&(solid, _)| largest_amount(fixed, solid)).collect();
        if retreat(amounts, &found, &sizes, barred) {
            return Exchange::Made;
        }
    }
    let Some((solid, excess)) = most_supersaturated(fixed, stage, barred) else { return Exchange::None };
    if !stage.balances.is_fixed(stage.balances.solid_row(solid)) {
        amounts.push((solid, 0.0));
    } else if swap(amounts, &stage.combination(fixed, solid), solid).is_none() {
        return Exchange::Unbounded { solid, excess };
    }
    Exchange::Made
}

/// What the scarcest component of a solid allows of it. Rounding of an amount is judged by this, not by the amounts
/// of other solids: 1e−14 mol/L of one is no rounding error because there are 5 mol/L of another.
fn largest_amount(fixed: &Fixed, solid: usize) -> f64 {
    let weighted =
        fixed.base.live.iter().map(|&i| fixed.solid_entry(solid, i).abs() * fixed.column_weight[i]);
    1.0 / weighted.fold(1e-300, f64::max)
}

/// Moves the amounts towards those found. When one would turn negative the move stops where the first reaches
/// zero and that solid leaves. Returns whether one left.
fn retreat(amounts: &mut Vec<(usize, f64)>, found: &[f64], sizes: &[f64], barred: &mut Vec<usize>) -> bool {
    let negative = |n: f64, size: f64| n < -1e-13 * size || (n < 0.0 && n > -1e-300);
    if !found.iter().zip(sizes).any(|(&n, &size)| negative(n, size)) {
        for (amount, &n) in amounts.iter_mut().zip(found) {
            amount.1 = n.max(0.0);
        }
        barred.clear();
        return false;
    }
    let mut share: f64 = 1.0;
    for ((amount, &n), &size) in amounts.iter().zip(found).zip(sizes) {
        if negative(n, size) {
            share = share.min(amount.1 / (amount.1 - n));
        }
    }
    let before = amounts.len();
    let mut place = 0;
    amounts.retain_mut(|amount| {
        let (n, size) = (found[place], sizes[place]);
        place += 1;
        let leaves = negative(n, size) && amount.1 / (amount.1 - n) <= share * (1.0 + 1e-12);
        amount.1 += share * (n - amount.1);
        if leaves {
            // A solid that leaves as soon as it came must not come straight back (rounding at saturation one).
            if place == before && share == 0.0 {
                barred.push(amount.0);
            }
        }
        !leaves
    });
    true
}

fn most_supersaturated(fixed: &Fixed, stage: &Stage, barred: &[usize]) -> Option<(usize, f64)> {
    let absent = (0..fixed.ln_ks.len())
        .filter(|solid| !barred.contains(solid) && stage.active.iter().all(|(active, _)| active != solid));
    absent
        .map(|solid| (solid, stage.ln_saturation(fixed, solid)))
        .filter(|&(_, excess)| excess > SUPERSATURATED)
        .max_by(|a, b| a.1.total_cmp(&b.1))
}

/// Lets a dependent solid in: it grows at the expense of the solids it is made of until the first of them is used up.
fn swap(amounts: &mut Vec<(usize, f64)>, combination: &[f64], solid: usize) -> Option<()> {
    let consumed = amounts.iter().zip(combination).enumerate().filter(|(_, (_, alpha))| **alpha > 1e-9);
    let (leaving, growth) = consumed
        .map(|(place, (amount, alpha))| (place, amount.1 / alpha))
        .min_by(|a, b| a.1.total_cmp(&b.1))?;
    for (amount, alpha) in amounts.iter_mut().zip(combination) {
        amount.1 = (amount.1 - alpha * growth).max(0.0);
    }
    amounts.remove(leaving);
    amounts.push((solid, growth));
    Some(())
}
