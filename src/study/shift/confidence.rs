//! Uncertainties along a walk. One costs as much as dozens of equilibria and changes slowly, so it is computed at some
//! moments of a leg and interpolated between them, where a moment in the middle says that this is good enough.

use super::judge::Judge;
use super::walk::Moment;
use crate::equilibrium::EquilibriumError;

/// Largest miss of the interpolated uncertainty (log10) at the middle of a stretch: under 2 % of a free metal at 95 %.
const TOLERANCE: f64 = 0.005;
/// A stretch over which a value moves more than this (log10) is always divided.
const FAR_APART: f64 = 1.0;

/// Uncertainty of every value at every place and moment of a leg: `[place][moment][value]`.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn sigmas(judge: &mut Judge, leg: &[Moment]) -> Result<Vec<Vec<Vec<f64>>>, EquilibriumError> {
    (0..judge.places())
        .map(|place| {
            let mut known: Vec<Option<Vec<f64>>> = vec![None; leg.len()];
            let last = leg.len() - 1;
            for moment in [0, last / 2, last] {
                know(judge, leg, place, moment, &mut known)?;
            }
            divide(judge, leg, place, (0, last / 2), &mut known)?;
            divide(judge, leg, place, (last / 2, last), &mut known)?;
            Ok(fill(known))
        })
        .collect()
}

fn know(
    judge: &mut Judge,
    leg: &[Moment],
    place: usize,
    moment: usize,
    known: &mut [Option<Vec<f64>>],
) -> Result<(), EquilibriumError> {
    if known[moment].is_none() {
        known[moment] = Some(judge.sigmas(place, &leg[moment].contents.totals)?);
    }
    Ok(())
}

fn divide(
    judge: &mut Judge,
    leg: &[Moment],
    place: usize,
    (from, to): (usize, usize),
    known: &mut [Option<Vec<f64>>],
) -> Result<(), EquilibriumError> {
    if to <= from + 1 {
        return Ok(());
    }
    let middle = (from + to) / 2;
    know(judge, leg, place, middle, known)?;
    let (Some(a), Some(b), Some(m)) = (&known[from], &known[to], &known[middle]) else { return Ok(()) };
    let share = (middle - from) as f64 / (to - from) as f64;
    let values = |moment: usize| &leg[moment].values[place];
    let (before, after) = (values(from), values(to));
    let doubted = (0..m.len()).filter(|&i| judge.counts(i, before[i].max(after[i]))).any(|i| {
        (a[i] + share * (b[i] - a[i]) - m[i]).abs() > TOLERANCE || (before[i] - after[i]).abs() > FAR_APART
    });
    if doubted {
        divide(judge, leg, place, (from, middle), known)?;
        divide(judge, leg, place, (middle, to), known)?;
    }
    Ok(())
}

/// Straight lines between the known moments; the first and the last are known.
fn fill(known: Vec<Option<Vec<f64>>>) -> Vec<Vec<f64>> {
    let mut filled: Vec<Vec<f64>> = Vec::with_capacity(known.len());
    for (moment, sigmas) in known.iter().enumerate() {
        let next = known[moment..].iter().position(Option::is_some).map(|ahead| moment + ahead);
        filled.push(
            match (sigmas, filled.last(), next.and_then(|next| Some((next, known[next].as_ref()?)))) {
                (Some(sigmas), _, _) => sigmas.clone(),
                (None, Some(before), Some((next, after))) => {
                    let share = 1.0 / (next - moment + 1) as f64;
                    before.iter().zip(after).map(|(a, b)| a + share * (b - a)).collect()
                }
                _ => Vec::new(),
            },
        );
    }
    filled
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn between_known_moments_the_line_is_straight() {
        let known = vec![Some(vec![1.0]), None, None, Some(vec![4.0]), None, Some(vec![0.0])];
        let filled: Vec<f64> = fill(known).into_iter().map(|sigmas| sigmas[0]).collect();
        for (found, expected) in filled.iter().zip([1.0, 2.0, 3.0, 4.0, 2.0, 0.0]) {
            assert!((found - expected).abs() < 1e-12, "{filled:?}");
        }
    }
}
