//! Pictures and stories of a bath: distribution of metals and agents over pH or dose, free metal over both, rinse water
//! and its treatment, two agents side by side, the shift forecast.

pub mod compare;
mod contour;
pub mod correction;
mod csv;
mod diagram;
mod labels;
mod map;
pub mod rinse;
pub mod shift;
mod svg;

pub use csv::{map_to_csv, to_csv};
pub use diagram::{Axis, Basis, Diagram, FreeLine, Series, SolidRegion, diagram};
pub use map::{Map, MapArea, MapOf, map};
pub use svg::{map_to_svg, to_svg};
