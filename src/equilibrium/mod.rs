//! From totals to free concentrations: one convex problem with one answer, and a certificate for it.
//!
//! Unknowns are xᵢ = ln aᵢ of the components. For given activity coefficients the solution is the minimum of
//! Φ(x) = Σⱼ cⱼ(x) − Σᵢ Tᵢxᵢ under Σᵢ νₖᵢxᵢ ≤ ln Kₖ for every solid k, the dual of Gibbs-energy minimisation
//! (White, Johnson & Dantzig, J. Chem. Phys. 28 (1958) 751; Smith & Missen, Chemical Reaction Equilibrium
//! Analysis, 1982). The multipliers of the constraints are the amounts of solid.
//!
//! This floor knows components, species and solids; it knows no baths, units, files or windows.

mod activity;
mod assemble;
mod balances;
mod certificate;
mod cholesky;
mod convex;
mod coupling;
mod error;
mod gradient;
mod lanes;
mod layout;
mod potential;
mod problem;
mod report;
mod sensitivity;
mod solids;
mod solver;
mod stage;
mod start;
mod system;
mod temperature;
mod water;

pub use activity::{ActivityModel, DAVIES_LIMIT, ION_INTERACTION_LIMIT, Interaction};
pub use assemble::assemble;
pub use certificate::Certificate;
pub use error::EquilibriumError;
pub use gradient::{Gradient, Value};
pub use potential::nernst;
pub use problem::{Equilibrium, Problem};
pub use sensitivity::{Response, Sensitivities};
pub use solver::Solver;
pub use system::{Constants, GasEntry, SolidEntry, SpeciesEntry, System, SystemParts, Terms};
pub use temperature::{ConstantModel, TemperatureBasis};
pub use water::{debye_huckel_a, debye_huckel_a_molal, density_kg_l, log10_kw, permittivity};

/// Gas constant, J/(mol K) (exact, SI 2019).
pub const GAS_CONSTANT: f64 = 8.314_462_618;
/// ln 10.
pub const LN_10: f64 = std::f64::consts::LN_10;
