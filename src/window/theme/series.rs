//! Series styles: a colour and a dash together, because colour alone does not tell five curves apart for everyone.

use eframe::egui::{Color32, Pos2, Shape, Stroke};

use super::Palette;

/// Number of series styles; a sixth curve starts again at the first.
pub const SERIES_COUNT: usize = 5;

/// How one curve or share is drawn.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Series {
    /// Line and label colour.
    pub colour: Color32,
    dashes: &'static [f32],
    gaps: &'static [f32],
}

/// Lengths of dashes and of the gaps after them, in points; empty means solid.
const PATTERNS: [(&[f32], &[f32]); SERIES_COUNT] =
    [(&[], &[]), (&[9.0], &[4.0]), (&[2.5], &[3.0]), (&[12.0, 2.5], &[3.0, 3.0]), (&[6.0], &[3.0])];

impl Series {
    /// Style of curve number `index`, counted from 0.
    pub fn new(palette: &Palette, index: usize) -> Self {
        let slot = index % SERIES_COUNT;
        let (dashes, gaps) = PATTERNS[slot];
        Self { colour: palette.series[slot], dashes, gaps }
    }

    /// True when the line has no dash.
    pub fn is_solid(&self) -> bool {
        self.dashes.is_empty()
    }

    /// Draws a curve given in screen points, in this colour and dash.
    pub fn shapes(&self, points: &[Pos2], width: f32, out: &mut Vec<Shape>) {
        let stroke = Stroke::new(width, self.colour);
        if self.is_solid() {
            out.push(Shape::line(points.to_vec(), stroke));
        } else {
            Shape::dashed_line_many_with_offset(points, stroke, self.dashes, self.gaps, 0.0, out);
        }
    }

    /// The nearest line style that `egui_plot` has; use [`Self::shapes`] where the exact dash matters.
    pub fn plot_line_style(&self) -> egui_plot::LineStyle {
        match self.dashes {
            [] => egui_plot::LineStyle::Solid,
            [dash] if *dash < 4.0 => egui_plot::LineStyle::Dotted { spacing: 5.5 },
            [first, ..] => egui_plot::LineStyle::Dashed { length: *first },
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use eframe::egui::Theme;

    #[test]
    fn no_two_series_share_a_dash() {
        for (i, a) in PATTERNS.iter().enumerate() {
            assert!(PATTERNS[..i].iter().all(|b| a != b), "series {i}");
        }
    }

    #[test]
    fn a_dashed_series_leaves_gaps() {
        let palette = Palette::of(Theme::Light);
        let line = [Pos2::new(0.0, 0.0), Pos2::new(130.0, 0.0)];
        let count = |index| {
            let mut shapes = Vec::new();
            Series::new(palette, index).shapes(&line, 2.0, &mut shapes);
            shapes.len()
        };
        assert_eq!(count(0), 1);
        assert_eq!(count(1), 10);
    }

    #[test]
    fn plot_styles_differ_as_well() {
        let palette = Palette::of(Theme::Dark);
        let styles: Vec<_> = (0..SERIES_COUNT).map(|i| Series::new(palette, i).plot_line_style()).collect();
        for (i, style) in styles.iter().enumerate() {
            assert!(styles[..i].iter().all(|other| other != style), "series {i}");
        }
    }
}
