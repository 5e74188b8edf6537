//! The shift forecast: what loads, drag-out, make-up water and wear do to the free metals hour by hour, when a wall is
//! crossed, and what to add or take out so that it holds.

mod bail_out;
mod confidence;
mod crossings;
mod csv;
mod forecast;
mod judge;
mod planner;
mod stirred;
mod top_ups;
mod walk;
mod words;

pub use super::svg::shift::to_svg;
pub use bail_out::{BailOut, Refill};
pub use crossings::Crossing;
pub use csv::to_csv;
pub use forecast::{Appearance, Forecast, MetalAt, TimePoint, WallAt, forecast};
pub use judge::Place;
pub use stirred::Contents;
pub use top_ups::{TopUp, TopUpPlan, plan_top_ups};
pub use walk::Change;
pub use words::{bail_out_words, crossing_words, events, hours_words, in_shift};
