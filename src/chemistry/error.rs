//! What can be wrong with a formula, a reaction, a constant or a product: one sentence with the fix.

use thiserror::Error;

/// An error in chemical data, built in or typed by the user.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum ChemistryError {
    /// A formula that can't be read.
    #[error("formula \"{formula}\": {reason}; write it like \"NiSO4.6H2O\" or \"Ca(OH)2\"")]
    Formula {
        /// The text as given.
        formula: String,
        /// What is wrong with it.
        reason: String,
    },
    /// A reaction that can't be read.
    #[error("reaction \"{reaction}\": {reason}; write it like \"Ni+2 + 2 NH3 = Ni(NH3)2+2\"")]
    Reaction {
        /// The text as given.
        reaction: String,
        /// What is wrong with it.
        reason: String,
    },
    /// The charges of the two sides differ.
    #[error(
        "reaction \"{reaction}\": charges do not balance, {left:+} on the left and {right:+} on the right; correct a charge or a coefficient"
    )]
    ChargeBalance {
        /// The text as given.
        reaction: String,
        /// Charge of the left side.
        left: f64,
        /// Charge of the right side.
        right: f64,
    },
    /// A species of a reaction that no component or other reaction explains.
    #[error(
        "reaction \"{reaction}\": {unknown} is not a component and no other reaction forms it; add it as a component or correct its name"
    )]
    Unresolved {
        /// The text as given.
        reaction: String,
        /// The tokens without explanation.
        unknown: String,
    },
    /// A species with two constants.
    #[error("species {token} is defined twice, by \"{first}\" and by \"{second}\"; keep one")]
    DefinedTwice {
        /// The species.
        token: String,
        /// The reaction kept first.
        first: String,
        /// The reaction that repeats it.
        second: String,
    },
    /// A token used by two components, or by a component and a species.
    #[error("\"{token}\" is used twice as a component or species; rename one")]
    DuplicateToken {
        /// The token.
        token: String,
    },
    /// A number that is not a possible value.
    #[error("{place}: {field} is {value}, which is {reason}")]
    Value {
        /// Where: a reaction, a product.
        place: String,
        /// Which field.
        field: &'static str,
        /// Its value.
        value: f64,
        /// Why it can't be, and what it should be.
        reason: &'static str,
    },
    /// A product whose released ions are wrong.
    #[error("product {product}: {reason}")]
    Product {
        /// The product's id.
        product: String,
        /// What is wrong, and the fix.
        reason: String,
    },
    /// A constants or products file that can't be read.
    #[error("{file}: line {line}, column {column}: {reason}")]
    File {
        /// File name.
        file: String,
        /// Line, from 1.
        line: usize,
        /// Column, from 1.
        column: usize,
        /// The reader's reason.
        reason: String,
    },
}
