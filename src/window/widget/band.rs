//! A stretch of a rail or gauge in one state: solid when held, hatched one way when unsure, hatched densely the other
//! way when not held, an empty outline when infeasible. The same fills everywhere, so they are learnt once.

use eframe::egui::emath::GuiRounding as _;
use eframe::egui::{Painter, Rect, Shape, Stroke, StrokeKind};

use super::{Lean, hatch};
use crate::window::theme::{HAIRLINE, Palette, State};

/// Fills `rect` with the look of `state`.
pub fn paint_band(painter: &Painter, rect: Rect, state: State, palette: &Palette) {
    let colour = state.colour(palette);
    let hatched = |lean, spacing, width| {
        painter.rect_filled(rect, 0.0, state.soft(palette));
        hatch(painter, rect.shrink(HAIRLINE), lean, spacing, Stroke::new(width, colour));
        painter.rect_stroke(rect, 0.0, Stroke::new(HAIRLINE, colour), StrokeKind::Inside);
    };
    match state {
        State::Held => {
            painter.rect_filled(rect, 0.0, colour);
        }
        State::Unsure => hatched(Lean::Rising, 4.0, 1.2),
        State::NotHeld => hatched(Lean::Falling, 2.6, 1.3),
        State::Infeasible => {
            painter.rect_filled(rect, 0.0, palette.panel);
            painter.rect_stroke(rect, 0.0, Stroke::new(HAIRLINE, colour), StrokeKind::Inside);
        }
        State::Unknown => dotted_outline(painter, rect, palette),
    }
}

/// The pixel edge nearest to a coordinate, for rectangles and hatches that meet there.
pub(super) fn to_pixel(painter: &Painter, at: f32) -> f32 {
    at.round_to_pixels(painter.pixels_per_point())
}

/// The outline of something that is not there yet.
pub(super) fn dotted_outline(painter: &Painter, rect: Rect, palette: &Palette) {
    let frame = rect.shrink(0.5);
    let corners =
        [frame.left_top(), frame.right_top(), frame.right_bottom(), frame.left_bottom(), frame.left_top()];
    let stroke = Stroke::new(HAIRLINE, palette.ink2);
    painter.extend(Shape::dashed_line(&corners, stroke, 2.0, 3.0));
}
