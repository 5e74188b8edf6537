//! The rows of a comparison: label, both values, which is better and why, or that it does not matter.

mod amounts;
mod drift;
mod effluent;
mod strength;

use super::side::Side;
use crate::dosing::{CONFIDENCE_95, Hold};
use crate::quantity::{fixed, significant};

/// Which side a row speaks for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Better {
    /// The first.
    A,
    /// The second.
    B,
    /// Neither: the difference is within its uncertainty.
    Alike,
    /// Neither: the row explains and does not rank.
    Unranked,
}

/// A value as a number and as text.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Cell {
    /// The number in the row's unit, where there is one.
    pub value: Option<f64>,
    /// As it is shown, without unit.
    pub text: String,
}

/// One line of a comparison.
#[derive(Clone, Debug, PartialEq)]
pub struct Row {
    /// Unique short name for scripts.
    pub key: String,
    /// What is compared.
    pub label: String,
    /// Of the first side.
    pub a: Cell,
    /// Of the second.
    pub b: Cell,
    /// Unit of both; empty without one.
    pub unit: &'static str,
    /// Which is better.
    pub better: Better,
    /// Why, in a short phrase.
    pub why: String,
}

/// All rows, in the order in which they are read.
pub fn rows(a: &Side, b: &Side) -> Vec<Row> {
    let mut rows = amounts::rows(a, b);
    rows.extend(drift::rows(a, b));
    rows.extend(strength::rows(a, b));
    rows.extend(effluent::rows(a, b));
    rows
}

fn number(value: Option<f64>, figures: usize) -> Cell {
    Cell { value, text: value.map_or("–".to_owned(), |value| significant(value, figures)) }
}

fn words(text: impl Into<String>) -> Cell {
    Cell { value: None, text: text.into() }
}

/// Ranks two values: alike within the tolerance, else the lower or the higher one.
fn rank(a: Option<f64>, b: Option<f64>, tolerance: f64, lower_is_better: bool) -> Better {
    match (a, b) {
        (Some(a), Some(b)) if (a - b).abs() <= tolerance => Better::Alike,
        (Some(a), Some(b)) if (a < b) == lower_is_better => Better::A,
        (Some(_), Some(_)) => Better::B,
        _ => Better::Unranked,
    }
}

fn because(better: Better, ranked: &str, alike: &str) -> String {
    match better {
        Better::A | Better::B => ranked.to_owned(),
        Better::Alike => alike.to_owned(),
        Better::Unranked => String::new(),
    }
}

/// Combined reach of two standard uncertainties at 95 %.
fn reach(a: f64, b: f64) -> f64 {
    CONFIDENCE_95 * a.hypot(b)
}

fn decimals(value: Option<f64>, decimals: usize) -> Cell {
    Cell { value, text: value.map_or("–".to_owned(), |value| fixed(value, decimals)) }
}

fn not_equal(a: &Side, b: &Side) -> String {
    let weaker = if a.hold < b.hold { a } else { b };
    match weaker.hold {
        Hold::Not => format!("not at equal result: {} holds at no dose", weaker.short()),
        _ => format!("not at equal result: {} holds by plain numbers only", weaker.short()),
    }
}
