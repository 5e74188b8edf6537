//! Pictures of a bath: distribution of metals and agents over pH or dose.

mod diagram;

pub use diagram::{Axis, Basis, Diagram, FreeLine, Series, SolidRegion, diagram};

/// temp
pub fn to_svg(_: &crate::bath::Bath, _: &Diagram) -> String {
    String::new()
}
/// temp
pub fn to_csv(_: &crate::bath::Bath, _: &Diagram) -> String {
    String::new()
}
