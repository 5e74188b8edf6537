//! What the picture points at: the set point of the pH with its operating range, or the dose of today.

use super::palette::{ACCENT, ACCENT_SOFT};
use super::pane::{Pane, height_at, ticks};
use super::paper::{Hold, Paper, Type};
use crate::bath::Bath;
use crate::chemistry::pretty;
use crate::quantity::{percent, plain};
use crate::study::labels::Area;
use crate::study::{Axis, Diagram};

/// All that a picture is made from.
pub struct Scene<'a> {
    pub bath: &'a Bath,
    pub diagram: &'a Diagram,
    pub mark: Option<Mark>,
}

impl<'a> Scene<'a> {
    /// The scene of a diagram, with its mark.
    pub fn new(bath: &'a Bath, diagram: &'a Diagram) -> Self {
        Self { bath, diagram, mark: Mark::of(bath, diagram) }
    }

    /// Place and height of a curve at the mark.
    pub fn at_mark(&self, y: &[f64]) -> Option<(f64, f64)> {
        let set = self.mark.as_ref()?.set;
        Some((set, height_at(self.diagram, y, set)?))
    }

    /// What names must keep off in a pane: the line of the set point.
    pub fn taken(&self, pane: &Pane) -> Vec<Area> {
        let (half, _) = pane.units(7.0, 0.0);
        let line = |mark: &Mark| Area { left: mark.set - half, right: mark.set + half, ..pane.frame() };
        self.mark.iter().map(line).collect()
    }

    /// Solids, operating range and grid of a pane.
    pub fn ground(&self, paper: &mut Paper, pane: &Pane, marks: &[(f64, String)]) {
        pane.solids(paper, &self.diagram.solids);
        if let Some(mark) = &self.mark {
            mark.shade(paper, pane);
        }
        pane.grid(paper, marks, &ticks(pane.x.0, pane.x.1, 12).0);
        if let Some(mark) = &self.mark {
            mark.line(paper, pane);
        }
    }
}

/// The marked place on the axis.
#[derive(Clone, Debug, PartialEq)]
pub struct Mark {
    /// Where the bath stands.
    pub set: f64,
    /// Ends of the operating range, when it drifts.
    pub range: Option<(f64, f64)>,
    /// "set point pH 9.45".
    pub words: String,
}

impl Mark {
    /// The mark of a diagram; none when the pH is not held, or the place is off the axis.
    pub fn of(bath: &Bath, diagram: &Diagram) -> Option<Self> {
        let mark = match diagram.axis {
            Axis::Ph { .. } => {
                let held = bath.ph()?;
                let range = (held.low < held.high).then_some((held.low, held.high));
                Self { set: held.set, range, words: format!("set point pH {}", plain(held.set, 2)) }
            }
            Axis::Dose { agent, .. } => {
                let set = *bath.doses().get(agent)?;
                Self { set, range: None, words: format!("dose now {} g/L", plain(set, 2)) }
            }
        };
        let (first, last) = (diagram.x.first()?, diagram.x.last()?);
        (*first..=*last).contains(&mark.set).then_some(mark)
    }

    /// The operating range as a soft band behind everything.
    pub fn shade(&self, paper: &mut Paper, pane: &Pane) {
        if let Some((left, right)) = self.range.and_then(|(low, high)| pane.band(low, high)) {
            paper.rectangle((left, pane.top), (right - left, pane.height()), ACCENT_SOFT);
        }
    }

    /// The line of the set point through a pane.
    pub fn line(&self, paper: &mut Paper, pane: &Pane) {
        let x = pane.px(self.set);
        paper.line((x, pane.top), (x, pane.bottom), ACCENT, 1.6);
    }

    /// Diamond and words over the uppermost pane.
    pub fn flag(&self, paper: &mut Paper, pane: &Pane) {
        let look = Type::bold(13.0, ACCENT);
        let x = pane.px(self.set);
        paper.diamond((x, pane.top), ACCENT);
        let fits = x + 12.0 + look.width(&self.words) < pane.right;
        let (at, hold) = if fits { (x + 10.0, Hold::Start) } else { (x - 10.0, Hold::End) };
        paper.text((at, pane.top - 6.0), hold, look, &self.words);
    }

    /// Bracket and words of the operating range under the lowest pane; where the words begin and end.
    pub fn bracket(&self, paper: &mut Paper, pane: &Pane, y: f64) -> Option<(f64, f64)> {
        let (low, high) = self.range?;
        let (left, right) = pane.band(low, high)?;
        let d = format!("M{left:.1} {:.1} v6 H{right:.1} v-6", y - 6.0);
        paper.path(&d, (ACCENT, ""), 1.4);
        let look = Type::plain(13.0, ACCENT);
        let words = format!("operating range {} to {}", plain(low, 2), plain(high, 2));
        let width = look.width(&words);
        let start = ((left + right - width) / 2.0).clamp(pane.left, (pane.right - width).max(pane.left));
        paper.text((start + width / 2.0, y + 16.0), Hold::Middle, look, &words);
        Some((start, start + width))
    }

    /// "At set point pH 9.45: Cu(HEDP)²⁻ 45 %, …", largest share first.
    pub fn reading(&self, diagram: &Diagram) -> String {
        let mut shares: Vec<(&str, f64)> = diagram
            .series
            .iter()
            .filter_map(|series| Some((series.token.as_str(), height_at(diagram, &series.share, self.set)?)))
            .filter(|(_, share)| *share >= 0.01)
            .collect();
        shares.sort_by(|a, b| b.1.total_cmp(&a.1));
        let parts: Vec<String> =
            shares.iter().map(|(token, share)| format!("{} {}", pretty(token), percent(*share))).collect();
        let what = if parts.is_empty() { "no answer".to_owned() } else { parts.join(", ") };
        let mut words = self.words.clone();
        if let Some(first) = words.get_mut(..1) {
            first.make_ascii_uppercase();
        }
        format!("{words}: {what}")
    }
}
