//! A row of small labels that never overlap: the first to come keeps its place, so the caller puts what matters first.

use std::sync::Arc;

use eframe::egui::{Color32, FontId, Galley, Painter, Rangef, pos2};

/// Room between two labels.
const APART: f32 = 8.0;
/// How far a label may be from its place and still be read as belonging there.
const FURTHEST: f32 = 56.0;

/// One row, while it is being filled.
pub(super) struct LabelRow<'p> {
    painter: &'p Painter,
    top: f32,
    bounds: Rangef,
    taken: Vec<Rangef>,
}

impl<'p> LabelRow<'p> {
    pub(super) fn new(painter: &'p Painter, top: f32, bounds: Rangef) -> Self {
        Self { painter, top, bounds, taken: Vec::new() }
    }

    /// Puts text so that `anchor` (0 left, 1 right) of its width falls on `x`, shifted as little as the bounds ask for.
    pub(super) fn put(&mut self, x: f32, anchor: f32, text: String, font: FontId, colour: Color32) {
        let galley: Arc<Galley> = self.painter.layout_no_wrap(text, font, colour);
        let width = galley.size().x;
        let most = (self.bounds.max - width).max(self.bounds.min);
        let wanted = (x - anchor * width).clamp(self.bounds.min, most);
        let Some(left) = self.free_place(wanted, width, most) else { return };
        let place = Rangef::new(left, left + width);
        self.taken.push(place);
        self.painter.galley(pos2(left, self.top), galley, colour);
    }

    /// The wanted place, or the nearest free one beside a label in the way, if that is not far.
    fn free_place(&self, wanted: f32, width: f32, most: f32) -> Option<f32> {
        let beside = self.taken.iter().flat_map(|other| [other.min - APART - width, other.max + APART]);
        std::iter::once(wanted)
            .chain(beside)
            .filter(|left| (self.bounds.min..=most).contains(left) && (left - wanted).abs() <= FURTHEST)
            .filter(|left| {
                let place = Rangef::new(left - APART + 0.5, left + width + APART - 0.5);
                self.taken.iter().all(|other| !place.intersects(*other))
            })
            .min_by(|a, b| (a - wanted).abs().total_cmp(&(b - wanted).abs()))
    }
}
