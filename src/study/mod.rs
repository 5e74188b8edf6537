//! Pictures of a bath: distribution of metals and agents over pH or dose.

mod diagram;

pub use diagram::{Axis, Basis, Diagram, FreeLine, Series, SolidRegion, diagram};
