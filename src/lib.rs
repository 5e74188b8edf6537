//! Bathwright: complexing-agent dosing for plating and cleaning baths.
//!
//! One chain answers every question that the window, the commands and the printed sheet ask:
//!
//! ```text
//! Project (RON on disk) -> Bath (resolved recipe, mol/L) -> System (components, species, solids) -> Equilibrium
//! ```
//!
//! The floors, each importing only what is below it:
//!
//! | floor | what lives there |
//! |---|---|
//! | [`window`], [`command`] | what a person touches: the window, the commands without a window |
//! | [`sheet`] | the dosing sheet as data, laid out once, then PDF, CSV and text |
//! | [`dosing`], [`study`] | the dose search and its verdict; diagrams |
//! | [`bath`] | the project file, the recipe, limits, operating ranges, and how they become a bath |
//! | [`equilibrium`] | system, activity, temperature, solver, solids, sensitivities |
//! | [`chemistry`] | formulas, constants with their sources, bought products |
//! | [`quantity`] | units, reading and printing of amounts |
#![forbid(unsafe_code)]
#![warn(missing_docs)]

pub mod bath;
pub mod chemistry;
pub mod command;
pub mod dosing;
pub mod equilibrium;
pub mod quantity;
pub mod sheet;
pub mod study;
pub mod window;
