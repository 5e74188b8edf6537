//! Pictures of a bath: distribution of metals and agents over pH or dose, free metal over both.

mod contour;
mod csv;
mod diagram;
mod labels;
mod map;
mod svg;

pub use csv::{map_to_csv, to_csv};
pub use diagram::{Axis, Basis, Diagram, FreeLine, Series, SolidRegion, diagram};
pub use map::{Map, MapArea, MapOf, map};
pub use svg::{map_to_svg, to_svg};
