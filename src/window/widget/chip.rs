//! The state chip: silhouette, word and a short text on the soft ground of the state, small enough for a row of tabs.

use eframe::egui;
use eframe::egui::{Rect, Response, Role, Sense, Ui, WidgetInfo, pos2, vec2};

use crate::window::theme::{MIN_HIT, RADIUS, State, Text, palette};

const MARK: f32 = 13.0;
const PADDING: f32 = 12.0;
const SPACE: f32 = 7.0;

/// Shows the state with its word in bold and `text` after it. Sensitive to clicks, so that it can lead to the verdict.
pub fn chip(ui: &mut Ui, state: State, text: &str) -> Response {
    let palette = palette(ui);
    let ink = palette.ink;
    let word = ui.painter().layout_no_wrap(state.word().to_owned(), Text::Strong.font(), ink);
    let text_galley = ui.painter().layout_no_wrap(text.to_owned(), Text::Body.font(), ink);
    let gap = if text.is_empty() { 0.0 } else { SPACE };
    let width = PADDING * 2.0 + MARK + SPACE + word.size().x + gap + text_galley.size().x;

    let (rect, response) = ui.allocate_exact_size(vec2(width, MIN_HIT), Sense::click());
    response.widget_info(|| {
        let spoken = format!("{}. {text}", state.word());
        WidgetInfo::labeled(Role::Button, ui.is_enabled(), spoken.trim_end())
    });
    if ui.is_rect_visible(rect) {
        let painter = ui.painter();
        painter.rect_filled(rect, RADIUS, state.soft(palette));
        if response.has_focus() || response.hovered() {
            super::slide::paint_focus_frame(painter, rect, response.has_focus(), palette);
        }
        let mark_left = rect.left() + PADDING;
        paint_mark(ui, pos2(mark_left, rect.center().y), MARK, state);
        let word_left = mark_left + MARK + SPACE;
        let y = rect.center().y - word.size().y / 2.0;
        let text_left = word_left + word.size().x + gap;
        painter.galley(pos2(word_left, y), word, ink);
        painter.galley(pos2(text_left, y), text_galley, ink);
    }
    response
}

/// Shows only the silhouette, for table rows that already say the word.
pub fn state_mark(ui: &mut Ui, state: State, size: f32) -> Response {
    let (rect, response) = ui.allocate_exact_size(vec2(size, size), Sense::hover());
    response.widget_info(|| WidgetInfo::labeled(Role::Image, true, state.word()));
    if ui.is_rect_visible(rect) {
        state.paint(ui.painter(), rect, palette(ui));
    }
    response
}

fn paint_mark(ui: &Ui, left_centre: egui::Pos2, size: f32, state: State) {
    let centre = left_centre + vec2(size / 2.0, 0.0);
    let rect = Rect::from_center_size(centre, vec2(size, size));
    state.paint(ui.painter(), rect, palette(ui));
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::widget::lab;
    use egui_kittest::kittest::Queryable as _;

    #[test]
    fn the_chip_reads_its_word_and_text() {
        let mut harness = lab([640.0, 400.0], (), |ui, ()| {
            chip(ui, State::Unsure, "126 % of the ceiling");
        });
        harness.run();
        harness.get_by_label("Unsure. 126 % of the ceiling");
    }
}
