//! Pictures and stories of a bath: distribution of metals and agents over pH or dose, rinse water and its
//! treatment, two agents side by side.

pub mod compare;
mod csv;
mod diagram;
mod labels;
pub mod rinse;
mod svg;

pub use csv::to_csv;
pub use diagram::{Axis, Basis, Diagram, FreeLine, Series, SolidRegion, diagram};
pub use svg::to_svg;
