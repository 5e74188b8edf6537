//! Why an equilibrium has no answer.

use thiserror::Error;

/// An ill-posed equilibrium; a well-posed one always has an answer.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum EquilibriumError {
    /// A total that is not a number, or negative for a component other than H⁺.
    #[error("total of {component} is {value} mol/L; give zero or a positive number")]
    BadTotal {
        /// Component token.
        component: String,
        /// The total.
        value: f64,
    },
    /// A held activity that is not a number.
    #[error("the held activity of {component} is not a number; give a pH between -1 and 15")]
    BadHeld {
        /// Component token.
        component: String,
    },
    /// A solid that stays supersaturated whatever amount of it forms, because all it is made of is held.
    #[error(
        "{solid} is supersaturated by held activities alone (saturation index {index:.2}), so it would form without end; release the pH or leave this solid out"
    )]
    UnboundedSolid {
        /// Solid token.
        solid: String,
        /// log10 of the saturation ratio.
        index: f64,
    },
    /// The pressure of an open gas is fixed by held activities already.
    #[error(
        "the pressure of {gas} follows from held activities alone, so it can't be given as well; close the bath to it"
    )]
    GasFixed {
        /// Gas token.
        gas: String,
    },
    /// Hydrogen can neither be taken up nor given off.
    #[error(
        "the hydrogen balance can't be met: no species binds or releases H+; hold the pH or add the water reaction H2O = H+ + OH-"
    )]
    NoProtonBalance,
    /// The iteration ended above its tolerance; a defect of the solver.
    #[error(
        "no equilibrium found: the largest relative balance residual is {residual:.1e} after {iterations} steps; please report this bath"
    )]
    NotConverged {
        /// Largest relative balance residual.
        residual: f64,
        /// Newton steps taken.
        iterations: usize,
    },
}
