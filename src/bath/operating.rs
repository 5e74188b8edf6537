//! Where a bath runs: a set point with the range it drifts in.

use serde::{Deserialize, Serialize};

/// A set point between the ends of its operating range.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Range {
    /// Lowest value met in operation.
    pub low: f64,
    /// The value aimed at.
    pub set: f64,
    /// Highest value met in operation.
    pub high: f64,
}

impl Range {
    /// A range from its three numbers.
    pub fn new(low: f64, set: f64, high: f64) -> Self {
        Self { low, set, high }
    }

    /// A value that does not drift.
    pub fn fixed(value: f64) -> Self {
        Self { low: value, set: value, high: value }
    }

    /// Whether low ≤ set ≤ high, all of them numbers.
    pub fn is_ordered(&self) -> bool {
        self.low <= self.set && self.set <= self.high
    }

    /// `count` evenly spaced values from low to high, the set point among them; one value when nothing drifts.
    pub fn samples(&self, count: usize) -> Vec<f64> {
        if self.high <= self.low || count < 2 {
            return vec![self.set];
        }
        let step = (self.high - self.low) / (count - 1) as f64;
        let mut values: Vec<f64> = (0..count).map(|i| self.low + step * i as f64).collect();
        values.push(self.set);
        values.sort_by(f64::total_cmp);
        values.dedup();
        values
    }
}

/// How the pH of the bath is known.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub enum Ph {
    /// Held by the shop with acid or alkali; pH as a meter reads it.
    Held {
        /// Lowest value met in operation.
        low: f64,
        /// The value aimed at.
        set: f64,
        /// Highest value met in operation.
        high: f64,
    },
    /// Whatever the recipe makes it: the charge balance decides.
    Predicted,
}

impl Ph {
    /// The range of a held pH.
    pub fn range(&self) -> Option<Range> {
        match *self {
            Ph::Held { low, set, high } => Some(Range { low, set, high }),
            Ph::Predicted => None,
        }
    }
}

impl From<Range> for Ph {
    fn from(Range { low, set, high }: Range) -> Self {
        Ph::Held { low, set, high }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn samples_hold_both_ends_and_the_set_point() {
        let samples = Range::new(9.0, 9.45, 10.0).samples(5);
        assert_eq!(samples.first(), Some(&9.0));
        assert_eq!(samples.last(), Some(&10.0));
        assert!(samples.contains(&9.45));
        assert_eq!(Range::fixed(7.0).samples(5), vec![7.0]);
    }
}
