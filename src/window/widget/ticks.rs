//! Where an axis puts its numbers: multiples of 1, 2 or 5, and decades on a log axis.

/// Evenly spaced ticks inside a range.
#[derive(Clone, Debug, PartialEq)]
pub struct Ticks {
    /// Distance of two neighbours.
    pub step: f64,
    /// Decimal places that tell them apart.
    pub decimals: usize,
    first: i64,
    last: i64,
}

impl Ticks {
    /// The tick values, rising.
    pub fn values(&self) -> impl Iterator<Item = f64> + '_ {
        (self.first..=self.last).map(|i| i as f64 * self.step)
    }
}

/// At most `at_most` ticks between `from` and `to`, on multiples of 1, 2 or 5 times a power of ten.
pub fn ticks(from: f64, to: f64, at_most: usize) -> Ticks {
    let (from, to) = (from.min(to), from.max(to));
    let span = to - from;
    let usable = span.is_finite() && span > 0.0 && from.is_finite();
    if !usable {
        return Ticks { step: 1.0, decimals: 0, first: 0, last: -1 };
    }
    let step = nice_step(span, at_most);
    // A little slack, so that a tick on the very end is not lost to rounding.
    let slack = step * 1e-6;
    Ticks {
        step,
        decimals: (-step.log10().floor()).clamp(0.0, 9.0) as usize,
        first: ((from - slack) / step).ceil() as i64,
        last: ((to + slack) / step).floor() as i64,
    }
}

/// The smallest of 1, 2, 5 × 10ⁿ that divides `span` into fewer than `at_most` parts.
pub(super) fn nice_step(span: f64, at_most: usize) -> f64 {
    let rough = span / (at_most.max(2) - 1) as f64;
    let power = 10_f64.powf(rough.log10().floor());
    let factor = [1.0, 2.0, 5.0, 10.0]
        .into_iter()
        .find(|factor| factor * power >= rough * (1.0 - 1e-9))
        .unwrap_or(10.0);
    factor * power
}

/// Ticks of a log axis between two positive values: decades, with 2 and 5 between them when there are few.
pub fn log_ticks(from: f64, to: f64) -> Vec<f64> {
    let (from, to) = (from.min(to), from.max(to));
    if from <= 0.0 || !to.is_finite() || from == to {
        return Vec::new();
    }
    let decades = (to / from).log10();
    let factors: &[f64] = if decades > 3.0 { &[1.0] } else { &[1.0, 2.0, 5.0] };
    let every = (decades / 8.0).ceil().max(1.0) as i32;
    let first = from.log10().floor() as i32;
    let last = to.log10().ceil() as i32;
    (first..=last)
        .filter(|power| power.rem_euclid(every) == 0)
        .flat_map(|power| factors.iter().map(move |factor| factor * 10_f64.powi(power)))
        .filter(|value| (from * (1.0 - 1e-9)..=to * (1.0 + 1e-9)).contains(value))
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn ticks_fall_on_round_numbers() {
        let found = ticks(10.5, 12.5, 5);
        assert_eq!(found.values().collect::<Vec<_>>(), [10.5, 11.0, 11.5, 12.0, 12.5]);
        assert_eq!(found.decimals, 1);
        assert_eq!(ticks(24.0, 29.5, 4).values().collect::<Vec<_>>(), [24.0, 26.0, 28.0]);
    }

    #[test]
    fn there_are_never_more_ticks_than_asked_for_plus_one_end() {
        for to in [0.3, 1.0, 2.7, 9.9, 40.0, 123.0] {
            assert!(ticks(0.0, to, 5).values().count() <= 5, "{to}");
        }
    }

    #[test]
    fn a_range_without_width_has_no_ticks() {
        assert_eq!(ticks(3.0, 3.0, 5).values().count(), 0);
        assert_eq!(ticks(0.0, f64::NAN, 5).values().count(), 0);
        assert!(log_ticks(0.0, 10.0).is_empty());
    }

    #[test]
    fn log_ticks_are_decades_or_finer() {
        assert_eq!(log_ticks(1e-6, 1e-1).len(), 6);
        assert_eq!(log_ticks(1.0, 10.0), [1.0, 2.0, 5.0, 10.0]);
        assert!(log_ticks(1e-30, 1.0).len() <= 9);
    }
}
