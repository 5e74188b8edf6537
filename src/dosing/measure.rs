//! From an exact amount to what a scale or a jug can measure.
//!
//! Steps as the trade uses them (common practice): the coarser the amount, the coarser the step. An agent is
//! rounded up, because too little of it is the failure; acid and alkali are rounded down, because the pH meter
//! finishes them.

use crate::bath::SheetDetails;
use crate::chemistry::Product;
use crate::quantity::{fixed, grouped};

/// Which way to round.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Direction {
    /// Complexing agents.
    Up,
    /// Acid, alkali, metal.
    Down,
}

/// An amount for the tank, exact and as measured out.
#[derive(Clone, Debug, PartialEq)]
pub struct Measured {
    /// Exact mass for the tank, kg.
    pub exact_kg: f64,
    /// Exact volume for the tank, litres; liquids only.
    pub exact_l: Option<f64>,
    /// Mass as measured out, kg.
    pub rounded_kg: f64,
    /// What to measure out: "20.5 L".
    pub amount: String,
    /// What is exact: "20.3 L (29.4 kg)".
    pub exact: String,
    /// How to measure: "platform scale, to 0.1 kg".
    pub how: String,
    /// Relative change by rounding.
    pub change: f64,
}

/// Largest change by rounding that is not flagged.
pub const ROUNDING_FLAG: f64 = 0.02;

/// Usual steps: (below this amount, step), kg for solids and litres for liquids.
const SOLID_STEPS: [(f64, f64); 5] =
    [(0.1, 0.001), (1.0, 0.005), (10.0, 0.05), (50.0, 0.1), (f64::INFINITY, 0.5)];
const LIQUID_STEPS: [(f64, f64); 5] =
    [(0.1, 0.001), (1.0, 0.01), (5.0, 0.05), (20.0, 0.1), (f64::INFINITY, 0.5)];

/// The amount of a product for the whole tank.
pub fn measure(
    product: &Product,
    dose_g_l: f64,
    volume_l: f64,
    details: &SheetDetails,
    direction: Direction,
) -> Measured {
    let exact_kg = dose_g_l * volume_l / 1000.0;
    let liquid = product.density_g_ml.filter(|_| product.is_liquid());
    let (exact, steps, own_step) = match liquid {
        Some(density) => (exact_kg / density, LIQUID_STEPS, details.jug_step_l),
        None => (exact_kg, SOLID_STEPS, details.scale_step_kg),
    };
    let step = own_step
        .unwrap_or_else(|| steps.iter().find(|(below, _)| exact < *below).map_or(0.5, |(_, step)| *step));
    let count = exact / step;
    // A dose that was rounded once must not grow by another step through the last bit of a division.
    let nearest = count.round();
    let whole = match direction {
        _ if (count - nearest).abs() < 1e-6 => nearest,
        Direction::Up => count.ceil(),
        Direction::Down => count.floor(),
    };
    let rounded = whole * step;
    let rounded_kg = liquid.map_or(rounded, |density| rounded * density);
    Measured {
        exact_kg,
        exact_l: liquid.map(|density| exact_kg / density),
        rounded_kg,
        amount: in_unit(rounded, step, liquid.is_some()),
        exact: match liquid {
            Some(_) => {
                format!("{} ({})", in_unit(exact, step / 10.0, true), in_unit(exact_kg, step / 10.0, false))
            }
            None => in_unit(exact, step / 10.0, false),
        },
        how: how(exact, step, liquid.is_some()),
        change: if exact > 0.0 { (rounded - exact) / exact } else { 0.0 },
    }
}

/// "20.5 L", "350 mL", "3.25 kg", "85 g".
fn in_unit(value: f64, step: f64, liquid: bool) -> String {
    let (small, large) = if liquid { ("mL", "L") } else { ("g", "kg") };
    if value < 1.0 {
        let decimals = decimals_of(step * 1000.0);
        format!("{} {small}", fixed(value * 1000.0, decimals))
    } else {
        format!("{} {large}", grouped(value, decimals_of(step).max(1)))
    }
}

fn decimals_of(step: f64) -> usize {
    (0..4).find(|&d| (step * 10f64.powi(d) - (step * 10f64.powi(d)).round()).abs() < 1e-6).unwrap_or(3)
        as usize
}

fn how(exact: f64, step: f64, liquid: bool) -> String {
    let to = in_unit(step, step, liquid);
    match (liquid, exact) {
        (true, e) if e < 0.1 => format!("measuring cylinder, to {to}"),
        (true, e) if e <= 20.0 => format!("jug, to {to}"),
        (true, _) => format!("pump or marked can, to {to}"),
        (false, e) if e < 6.0 => format!("bench scale, to {to}"),
        (false, _) => format!("platform scale, to {to}"),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::Catalogue;

    fn product(id: &str) -> &'static Product {
        Catalogue::built_in().find(id).unwrap()
    }

    #[test]
    fn an_agent_is_rounded_up_and_an_alkali_down() {
        let details = SheetDetails::default();
        let agent = measure(product("hedp-60"), 16.0, 1840.0, &details, Direction::Up);
        assert_eq!(agent.amount, "20.5 L");
        assert!((agent.exact_l.unwrap() - 16.0 * 1.84 / 1.447).abs() < 1e-9 && agent.change > 0.0);
        let alkali = measure(product("koh-45"), 18.7, 1840.0, &details, Direction::Down);
        assert_eq!(alkali.amount, "23.5 L");
        assert!(alkali.change < 0.0);
    }

    #[test]
    fn small_and_large_amounts_use_the_unit_of_their_vessel() {
        let details = SheetDetails::default();
        let of = |kg: f64| measure(product("citric-anh"), kg, 1000.0, &details, Direction::Up).amount;
        assert_eq!(of(0.0123), "13 g");
        assert_eq!(of(0.733), "735 g");
        assert_eq!(of(3.21), "3.25 kg");
        assert_eq!(of(61.2), "61.5 kg");
    }

    #[test]
    fn rounding_twice_changes_nothing() {
        let details = SheetDetails::default();
        let once = measure(product("hedp-60"), 16.0, 1840.0, &details, Direction::Up);
        let twice =
            measure(product("hedp-60"), once.rounded_kg * 1000.0 / 1840.0, 1840.0, &details, Direction::Up);
        assert_eq!(once.amount, twice.amount);
    }
}
