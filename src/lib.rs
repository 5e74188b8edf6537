#![forbid(unsafe_code)]
pub mod bath;
pub mod chemistry;
pub mod command;
pub mod dosing;
pub mod equilibrium;
pub mod quantity;
pub mod sheet;
pub mod study;
