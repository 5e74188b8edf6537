//! How much drift each dose stands, and how near it comes to a solid that must not form.

use super::super::band::Band;
use super::super::side::Side;
use super::{Better, Cell, Row, because, not_equal, rank, reach, words};
use crate::bath::Wall;
use crate::quantity::fixed;

/// A drift of pH under this is within what a shop's meter shows (common practice).
const METER_PH: f64 = 0.1;
/// A drift of temperature under this is within what a controller holds (common practice).
const CONTROLLER_C: f64 = 2.0;

/// The rows of drift and clouding.
pub fn rows(a: &Side, b: &Side) -> Vec<Row> {
    bands(a, b).into_iter().chain(solids(a, b)).collect()
}

fn bands(a: &Side, b: &Side) -> [Row; 2] {
    let row =
        |key: &str, label: &str, unit, of: fn(&Side) -> Option<Band>, decimals, tolerance, alike: &str| {
            let cell = |side: &Side| match of(side) {
                Some(band) => {
                    let mark = |open: bool| if open { " or beyond" } else { "" };
                    Cell {
                        value: Some(band.width()),
                        text: format!(
                            "{}{} to {}{}",
                            fixed(band.low, decimals),
                            mark(band.open.0),
                            fixed(band.high, decimals),
                            mark(band.open.1)
                        ),
                    }
                }
                None => words("none"),
            };
            let sure = |side: &Side| of(side).map(|band| band.sure);
            let width = |side: &Side| of(side).map(|band| band.width());
            let (better, why) = if sure(a) != sure(b) {
                (Better::Unranked, not_equal(a, b))
            } else {
                let better = rank(width(a), width(b), tolerance, false);
                (better, because(better, "stands more drift at its dose", alike))
            };
            Row { key: key.to_owned(), label: label.to_owned(), a: cell(a), b: cell(b), unit, better, why }
        };
    [
        row("ph_band", "pH that still holds", "", |s| s.ph_band, 2, METER_PH, "within what a meter shows"),
        row(
            "temperature_band",
            "temperature that still holds",
            "°C",
            |s| s.temperature_band,
            0,
            CONTROLLER_C,
            "within what a controller holds",
        ),
    ]
}

/// The forbidden solid that comes nearest at the worst of the range: saturation index, its uncertainty, name.
fn nearest_solid(side: &Side) -> Option<(f64, f64, String)> {
    let solids = side.assessment.walls.iter().filter_map(|wall| match wall.wall {
        Wall::Solid(k) => Some((wall.excess, wall.worst.sigma, side.bath.solid_name(k).to_owned())),
        _ => None,
    });
    solids.filter(|(excess, ..)| excess.is_finite()).max_by(|x, y| x.0.total_cmp(&y.0))
}

fn solids(a: &Side, b: &Side) -> Option<Row> {
    let (x, y) = (nearest_solid(a), nearest_solid(b));
    if x.is_none() && y.is_none() {
        return None;
    }
    let cell = |solid: &Option<(f64, f64, String)>| match solid {
        Some((index, _, name)) => Cell { value: Some(*index), text: format!("{} {name}", fixed(*index, 2)) },
        None => words("none can form"),
    };
    let index = |solid: &Option<(f64, f64, String)>| solid.as_ref().map(|s| s.0);
    let sigma = |solid: &Option<(f64, f64, String)>| solid.as_ref().map_or(0.0, |s| s.1);
    let better = rank(index(&x), index(&y), reach(sigma(&x), sigma(&y)), true);
    Some(Row {
        key: "solid".into(),
        label: "nearest solid that must not form, saturation index at worst".into(),
        a: cell(&x),
        b: cell(&y),
        unit: "",
        better,
        why: because(better, "further from clouding", "within the uncertainty of the constants"),
    })
}
