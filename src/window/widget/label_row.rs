//! A row of small labels that never overlap: the first to come keeps its place, so the caller puts what matters first.

use std::sync::Arc;

use eframe::egui::{Color32, FontId, Galley, Painter, Rangef, pos2};

/// Room between two labels.
const APART: f32 = 8.0;

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
        let left = (x - anchor * width).clamp(self.bounds.min, most);
        let place = Rangef::new(left, left + width);
        if self.taken.iter().any(|other| place.expand(APART).intersects(*other)) {
            return;
        }
        self.taken.push(place);
        self.painter.galley(pos2(left, self.top), galley, colour);
    }
}
