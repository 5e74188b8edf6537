//! Two agents side by side at equal result: each at its own smallest dose that holds, and what follows from that.

mod band;
mod chelate;
mod rows;
mod side;

pub use band::{Band, ph_band, temperature_band};
pub use chelate::{ChelateEffect, chelate_effect};
pub use rows::{Better, Cell, Row};
pub use side::{EFFLUENT_PH, Effluent, Side, bath_with, conditional_log_k};

use crate::bath::{Bath, BathError};
use crate::chemistry::Regime;

/// Two agents side by side.
#[derive(Clone, Debug)]
pub struct Comparison {
    /// The first agent.
    pub a: Side,
    /// The second.
    pub b: Side,
    /// Row by row.
    pub rows: Vec<Row>,
    /// What must be read with them: a name of [`Comparison::names`] or "both", and the remark.
    pub remarks: Vec<(String, String)>,
}

/// Compares two products by id.
///
/// # Errors
/// [`BathError`] for an unknown product, a bad rinse section or an ill-posed bath.
pub fn compare(bath: &Bath, a: &str, b: &str) -> Result<Comparison, BathError> {
    let (a, b) = (Side::new(bath, a, b)?, Side::new(bath, b, a)?);
    Ok(Comparison { rows: rows::rows(&a, &b), remarks: remarks(&a, &b), a, b })
}

impl Comparison {
    /// Short names of both: the agents', or the product ids where both bring the same agent.
    pub fn names(&self) -> (&str, &str) {
        names(&self.a, &self.b)
    }

    /// A row by its short name.
    pub fn row(&self, key: &str) -> Option<&Row> {
        self.rows.iter().find(|row| row.key == key)
    }

    /// Labels of the rows that speak for a side.
    pub fn better_in(&self, side: Better) -> Vec<&str> {
        self.rows.iter().filter(|row| row.better == side).map(|row| row.label.as_str()).collect()
    }
}

fn names<'a>(a: &'a Side, b: &'a Side) -> (&'a str, &'a str) {
    if a.short() == b.short() { (&a.product().id, &b.product().id) } else { (a.short(), b.short()) }
}

fn remarks(a: &Side, b: &Side) -> Vec<(String, String)> {
    let (of_a, of_b) = (remarks_of(a), remarks_of(b));
    let (first, second) = names(a, b);
    let mut remarks = Vec::new();
    for (own, other, name) in [(&of_a, &of_b, first), (&of_b, &of_a, second)] {
        remarks.extend(own.iter().filter(|r| !other.contains(r)).map(|r| (name.to_owned(), r.clone())));
    }
    remarks.extend(of_a.iter().filter(|r| of_b.contains(r)).map(|r| ("both".to_owned(), r.clone())));
    remarks
}

fn remarks_of(side: &Side) -> Vec<String> {
    let mut remarks: Vec<String> = side.flags.iter().map(ToString::to_string).collect();
    if let Some(failure) = &side.corrected.failure {
        remarks.push(failure.clone());
    }
    for metal in side.effluent.iter().flat_map(|effluent| &effluent.watched) {
        if let Some(limit) = &metal.limit {
            remarks.push(format!(
                "limit of {}: {} mg/L, {}; your permit rules",
                metal.name, limit.mg_l, limit.rule
            ));
        }
    }
    let product = side.product();
    for regime in Regime::built_in().iter().filter(|r| r.forbidden_agents.contains(&product.active)) {
        remarks.push(format!("must not be in the waste water under {}", regime.name));
    }
    if product.hazards.iter().any(|hazard| hazard == "H351") {
        remarks.push("labelled as a suspected carcinogen (H351)".to_owned());
    }
    remarks
}
