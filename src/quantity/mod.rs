//! Units, and the reading and printing of amounts.
//!
//! Everything inside the program is mol per litre of bath and kelvin. This floor is the only place that knows
//! what a person types or reads: g/L, mL/L, oz/gal, degrees of hardness, pM.

mod amount;
mod print;
mod spreadsheet;
mod unit;

pub use amount::{Amount, AmountError, Level, LevelError};
pub use print::{fixed, grouped, p_value, percent, plain, scientific, significant};
pub use spreadsheet::spreadsheet_text;
pub use unit::{Dimension, Unit};

/// 0 °C in kelvin.
pub const ZERO_CELSIUS_K: f64 = 273.15;

/// Litres in one US liquid gallon (exact: 231 cubic inches).
pub const LITRES_PER_US_GALLON: f64 = 3.785_411_784;

/// Temperature in kelvin from °C.
pub fn kelvin(celsius: f64) -> f64 {
    celsius + ZERO_CELSIUS_K
}

/// Temperature in °C from kelvin.
pub fn celsius(kelvin: f64) -> f64 {
    kelvin - ZERO_CELSIUS_K
}
