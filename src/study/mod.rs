//! Pictures and stories of a bath: distribution of metals and agents over pH or dose, the shift forecast.

mod csv;
mod diagram;
mod labels;
pub mod shift;
mod svg;

pub use csv::to_csv;
pub use diagram::{Axis, Basis, Diagram, FreeLine, Series, SolidRegion, diagram};
pub use svg::to_svg;
