#![forbid(unsafe_code)]
pub mod bath;
pub mod chemistry;
pub mod equilibrium;
pub mod quantity;
