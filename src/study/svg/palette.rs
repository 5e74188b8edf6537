//! Palette of the export, for white paper: colours, dashes and hatches. The window has its own.

/// The paper.
pub const WHITE: &str = "#FFFFFF";
/// Text.
pub const INK: &str = "#18211F";
/// Text of second rank.
pub const INK_SOFT: &str = "#495652";
/// Frames of the panes.
pub const FRAME: &str = "#8A938D";
/// Grid lines.
pub const GRID: &str = "#E3E7E1";
/// Set point and operating range.
pub const ACCENT: &str = "#34459A";
/// Ground of the operating range.
pub const ACCENT_SOFT: &str = "#DFE3F4";
/// Ceilings and floors.
pub const LIMIT: &str = "#5C4636";
/// Edges of the stretches with a solid.
pub const SOLID: &str = "#6E7772";
/// Hatch of the stretches with a solid.
pub const SOLID_HATCH: &str = "#A3ABA6";
/// Ground of the stretches with a solid.
pub const SOLID_SOFT: &str = "#F7F8F5";
/// Colours of the series; told apart by dash as well.
const SERIES: [&str; 5] = ["#0C6483", "#A6440D", "#5A4AA6", "#6F6200", "#9C2F6B"];
/// Dashes of the series. Seven against five colours: the pair repeats after 35 series.
const DASHES: [&str; 7] = ["", "9 4", "2.5 3", "12 3 2.5 3", "6 3", "14 3 2 3 2 3", "1.5 6"];

/// Colour and dash of series number n.
pub fn pen(n: usize) -> (&'static str, &'static str) {
    (SERIES[n % SERIES.len()], DASHES[n % DASHES.len()])
}

/// Hatches of limit plates: strokes rise to the right over a ceiling, fall to the right under a floor.
pub const HATCH_CEILING: &str = "url(#ceiling)";
/// See [`HATCH_CEILING`].
pub const HATCH_FLOOR: &str = "url(#floor)";

/// Hatch of solid number n of the picture.
pub fn hatch_solid(n: usize) -> String {
    format!("url(#solid{})", n % 3)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn thirty_five_series_have_different_pens() {
        let pens: Vec<_> = (0..35).map(pen).collect();
        assert!((0..35).all(|i| !pens[..i].contains(&pens[i])));
    }
}
