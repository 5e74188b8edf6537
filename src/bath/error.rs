//! What is wrong with a project: the field, the value and the fix, in one sentence.

use crate::chemistry::ChemistryError;
use crate::equilibrium::EquilibriumError;
use thiserror::Error;

/// A project that can't become a bath.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum BathError {
    /// A number outside its possible range.
    #[error("{field} is {value}: {fix}")]
    Number {
        /// Path of the field, "tank.ph.set".
        field: String,
        /// The value as given.
        value: f64,
        /// What it has to be.
        fix: &'static str,
    },
    /// A set point outside its range.
    #[error("{field}: low {low}, set {set}, high {high} are not in order; give low ≤ set ≤ high")]
    Order {
        /// Path of the field.
        field: String,
        /// Low end.
        low: f64,
        /// Set point.
        set: f64,
        /// High end.
        high: f64,
    },
    /// A name that nothing answers to.
    #[error("{field} is \"{name}\": {fix}")]
    Unknown {
        /// Path of the field.
        field: String,
        /// The name as given.
        name: String,
        /// What could be meant.
        fix: String,
    },
    /// A unit that does not fit.
    #[error("{field} is \"{amount}\": {fix}")]
    Unit {
        /// Path of the field.
        field: String,
        /// The amount as given.
        amount: String,
        /// Which unit fits.
        fix: String,
    },
    /// Nothing in the bath.
    #[error("contents is empty: add what is in the bath, a metal at least")]
    EmptyBath,
    /// Own constants or products that can't be used.
    #[error("{field}: {source}")]
    Chemistry {
        /// Path of the field.
        field: String,
        /// What is wrong.
        source: ChemistryError,
    },
    /// No equilibrium for this bath.
    #[error("{0}")]
    Equilibrium(#[from] EquilibriumError),
}

impl BathError {
    /// Path of the field at fault, to show the message beside it.
    pub fn field(&self) -> &str {
        match self {
            BathError::Number { field, .. }
            | BathError::Order { field, .. }
            | BathError::Unknown { field, .. }
            | BathError::Unit { field, .. }
            | BathError::Chemistry { field, .. } => field,
            BathError::EmptyBath => "contents",
            BathError::Equilibrium(_) => "",
        }
    }
}
