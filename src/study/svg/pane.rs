//! A pane: a rectangle of the picture with an axis along the bottom and one up the side.

use super::palette::{FRAME, GRID, INK_SOFT, SOLID, SOLID_SOFT, hatch_solid};
use super::paper::{Hold, Paper, Type};
use crate::quantity::fixed;
use crate::study::labels::Area;
use crate::study::{Diagram, SolidRegion};

/// Look of the numbers at an axis.
pub const TICK: Type = Type::plain(13.0, INK_SOFT);

/// Where a pane is on the paper, and what its edges stand for.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pane {
    pub left: f64,
    pub right: f64,
    pub top: f64,
    pub bottom: f64,
    /// Axis values at the left and right edge.
    pub x: (f64, f64),
    /// Axis values at the bottom and top edge.
    pub y: (f64, f64),
}

impl Pane {
    /// Pixels from the left of a place on the axis.
    pub fn px(&self, x: f64) -> f64 {
        self.left + (self.right - self.left) * (x - self.x.0) / (self.x.1 - self.x.0)
    }

    /// Pixels from the top of a height, kept from running far off.
    pub fn py(&self, y: f64) -> f64 {
        let far = self.bottom - self.top;
        let place = self.bottom - far * (y - self.y.0) / (self.y.1 - self.y.0);
        place.clamp(self.top - 10.0 * far, self.bottom + 10.0 * far)
    }

    /// Pixels of a point.
    pub fn at(&self, (x, y): (f64, f64)) -> (f64, f64) {
        (self.px(x), self.py(y))
    }

    /// Width and height in axis units of something so many pixels large.
    pub fn units(&self, width: f64, height: f64) -> (f64, f64) {
        let x = (self.x.1 - self.x.0) / (self.right - self.left);
        (width * x, height * (self.y.1 - self.y.0) / (self.bottom - self.top))
    }

    /// The whole pane in axis units.
    pub fn frame(&self) -> Area {
        Area { left: self.x.0, right: self.x.1, bottom: self.y.0, top: self.y.1 }
    }

    /// Height in pixels.
    pub fn height(&self) -> f64 {
        self.bottom - self.top
    }

    /// A band across the whole height between two x, cut to the pane; at least three pixels wide.
    pub fn band(&self, from: f64, to: f64) -> Option<(f64, f64)> {
        let (from, to) = (from.max(self.x.0), to.min(self.x.1));
        if from > to {
            return None;
        }
        let (left, right) = (self.px(from), self.px(to));
        let short = (3.0 - (right - left)).max(0.0) / 2.0;
        Some((left - short, right + short))
    }

    /// Opens a clipped group that shows only what is inside the pane.
    pub fn clip(&self, paper: &mut Paper, id: &str) {
        paper.clip(id, (self.left, self.top), (self.right - self.left, self.height()));
    }

    /// Grid, numbers up the side and the frame.
    pub fn grid(&self, paper: &mut Paper, marks: &[(f64, String)], upright: &[f64]) {
        for &x in upright {
            paper.line((self.px(x), self.top), (self.px(x), self.bottom), GRID, 1.0);
        }
        for (y, text) in marks {
            paper.line((self.left, self.py(*y)), (self.right, self.py(*y)), GRID, 1.0);
            paper.text((self.left - 8.0, self.py(*y) + 4.5), Hold::End, TICK, text);
        }
    }

    /// The frame, to be drawn last.
    pub fn edge(&self, paper: &mut Paper) {
        paper.outline((self.left, self.top), (self.right - self.left, self.height()), FRAME);
    }

    /// Shades where solids are present.
    pub fn solids(&self, paper: &mut Paper, regions: &[SolidRegion]) {
        let bands = |region: &SolidRegion| self.band(region.from, region.to);
        for (left, right) in regions.iter().filter_map(bands) {
            paper.rectangle((left, self.top), (right - left, self.height()), SOLID_SOFT);
        }
        for region in regions {
            if let Some((left, right)) = bands(region) {
                let order = rank(regions, region.solid);
                paper.rectangle((left, self.top), (right - left, self.height()), &hatch_solid(order));
                for x in [left, right] {
                    paper.line((x, self.top), (x, self.bottom), SOLID, 1.2);
                }
            }
        }
    }
}

/// Number of a solid among the solids of the picture.
pub fn rank(regions: &[SolidRegion], solid: usize) -> usize {
    let mut seen: Vec<usize> = Vec::new();
    for region in regions {
        if !seen.contains(&region.solid) {
            seen.push(region.solid);
        }
    }
    seen.iter().position(|&known| known == solid).unwrap_or(0)
}

/// Round values between two ends, at most `most` of them, with the decimals they need.
pub fn ticks(from: f64, to: f64, most: usize) -> (Vec<f64>, usize) {
    let raw = (to - from) / most.max(1) as f64;
    if !(raw.is_finite() && raw > 0.0) {
        return (Vec::new(), 0);
    }
    let power = 10f64.powf(raw.log10().floor());
    let step = [1.0, 2.0, 5.0, 10.0].map(|n| n * power).into_iter().find(|s| *s >= raw * 0.999);
    let step = step.unwrap_or(10.0 * power);
    let decimals = (-step.log10() - 1e-9).ceil().max(0.0) as usize;
    let first = (from / step - 1e-9).ceil() as i64;
    let last = (to / step + 1e-9).floor() as i64;
    ((first..=last).map(|n| n as f64 * step).collect(), decimals)
}

/// As [`ticks`], with more of them when fewer than two fall inside.
pub fn at_least_two(from: f64, to: f64, most: usize) -> (Vec<f64>, usize) {
    let few = ticks(from, to, most);
    if few.0.len() < 2 { ticks(from, to, 2 * most.max(1)) } else { few }
}

/// A curve as a path: broken where there is no answer, a short dash for a point on its own.
pub fn path(pane: &Pane, x: &[f64], y: &[f64]) -> String {
    let mut d = String::new();
    let mut run: Vec<(f64, f64)> = Vec::new();
    let mut flush = |run: &mut Vec<(f64, f64)>| {
        match run.as_slice() {
            [] => {}
            [(x, y)] => d.push_str(&format!("M{:.1} {y:.1} h3 ", x - 1.5)),
            points => {
                for (i, (x, y)) in points.iter().enumerate() {
                    d.push_str(&format!("{}{x:.1} {y:.1} ", if i == 0 { 'M' } else { 'L' }));
                }
            }
        }
        run.clear();
    };
    for (x, y) in x.iter().zip(y) {
        if y.is_finite() { run.push(pane.at((*x, *y))) } else { flush(&mut run) }
    }
    flush(&mut run);
    d.trim_end().to_owned()
}

/// Height of a curve at an x between its points; none in a gap or off the axis.
pub fn height_at(diagram: &Diagram, y: &[f64], x: f64) -> Option<f64> {
    let right = diagram.x.partition_point(|&v| v < x);
    let value =
        match (right.checked_sub(1).and_then(|i| Some((diagram.x[i], *y.get(i)?))), diagram.x.get(right)) {
            (_, Some(&at)) if at == x => *y.get(right)?,
            (Some((from, low)), Some(to)) => low + (y.get(right)? - low) * (x - from) / (to - from),
            _ => return None,
        };
    value.is_finite().then_some(value)
}

/// Values with their text.
pub fn numbered((values, decimals): (Vec<f64>, usize), text: impl Fn(f64) -> f64) -> Vec<(f64, String)> {
    values.into_iter().map(|v| (v, fixed(text(v), decimals))).collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    const PANE: Pane =
        Pane { left: 0.0, right: 100.0, top: 0.0, bottom: 50.0, x: (0.0, 10.0), y: (0.0, 5.0) };

    #[test]
    fn a_gap_breaks_the_line_and_a_lone_point_stays_visible() {
        let nan = f64::NAN;
        let d = path(&PANE, &[0.0, 1.0, 2.0, 3.0, 4.0], &[1.0, 2.0, nan, 3.0, nan]);
        assert_eq!(d, "M0.0 40.0 L10.0 30.0 M28.5 20.0 h3");
        assert_eq!(path(&PANE, &[0.0], &[nan]), "");
    }

    #[test]
    fn ticks_are_round_and_inside() {
        assert_eq!(ticks(0.0, 40.0, 8), (vec![0.0, 5.0, 10.0, 15.0, 20.0, 25.0, 30.0, 35.0, 40.0], 0));
        let (values, decimals) = ticks(-12.6, -10.4, 5);
        assert_eq!((values.first(), values.last(), decimals), (Some(&-12.5), Some(&-10.5), 1));
        assert_eq!(ticks(1.0, 1.0, 5).0, Vec::<f64>::new());
    }

    #[test]
    fn a_band_is_cut_to_the_pane_and_never_vanishes() {
        assert_eq!(PANE.band(-5.0, 5.0), Some((0.0, 50.0)));
        assert_eq!(PANE.band(5.0, 5.0), Some((48.5, 51.5)));
        assert_eq!(PANE.band(11.0, 12.0), None);
    }
}
