//! Formulas, equilibrium constants with their sources, and bought products.
//!
//! The numbers live in `assets/constants/*.ron` and `assets/products.ron`, where a chemist can read and edit them;
//! this floor reads them, checks that every reaction balances, and resolves each species to its components. It
//! knows nothing of baths, solvers or files on disk.

mod constant;
mod discharge;
mod error;
mod formula;
mod interaction;
mod library;
mod notation;
mod own_constants;
mod potential;
mod product;
mod reaction;
mod resolve;
mod solid_record;

pub use constant::{Basis, Component, ComponentKind, Constant, Convention};
pub use discharge::{DischargeLimit, Regime};
pub use error::ChemistryError;
pub use formula::Formula;
pub use interaction::{Epsilon, EpsilonOrigin, EpsilonRule, Interaction, Interactions, Ions, ModelNumber};
pub use library::{Gas, Library, Origin, Solid, Species};
pub use notation::{pretty, pretty_reaction};
pub use own_constants::OwnConstants;
pub use potential::{Couple, Potentials, ReferenceElectrode};
pub use product::{Assay, Catalogue, Evidence, Form, PriceRange, Product, Role};
pub use reaction::{Reaction, charge_of};
pub use solid_record::{Freshness, SolidRecord};

/// Token of the hydrogen ion.
pub const PROTON: &str = "H+";
/// Token of the hydroxide ion.
pub const HYDROXIDE: &str = "OH-";
/// Token of water, which is the solvent and never a component.
pub const WATER: &str = "H2O";
/// Token of the sodium ion.
pub const SODIUM: &str = "Na+";
/// Token of the chloride ion.
pub const CHLORIDE: &str = "Cl-";
