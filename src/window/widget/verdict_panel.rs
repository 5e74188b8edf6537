//! The verdict: silhouette, bold word, one plain sentence and a small second line, on the soft ground of the state.

use eframe::egui::text::{LayoutJob, TextFormat};
use eframe::egui::{Rect, Response, Role, Sense, Stroke, Ui, WidgetInfo, pos2, vec2};

use crate::window::theme::{GAP, INSET, State, Text, palette};

const MARK: f32 = 20.0;

/// Shows the verdict over the available width. `sentence` goes on after the word; `second` may be empty.
pub fn verdict_panel(ui: &mut Ui, state: State, sentence: &str, second: &str) -> Response {
    let palette = palette(ui);
    let indent = INSET + MARK + 14.0;
    let width = ui.available_width();
    let text_width = (width - indent - INSET).max(60.0);

    let format = |role: Text| TextFormat::simple(role.font(), palette.ink);
    let mut job = LayoutJob::default();
    job.wrap.max_width = text_width;
    job.append(state.word(), 0.0, format(Text::VerdictStrong));
    job.append(". ", 0.0, format(Text::VerdictStrong));
    // A percent sign must not start a line.
    let unbroken = sentence.replace(" %", "\u{a0}%");
    job.append(&unbroken, 0.0, format(Text::Verdict));
    let main = ui.painter().layout_job(job);
    let small = ui.painter().layout(second.to_owned(), Text::Small.font(), palette.ink, text_width);
    let small_height = if second.is_empty() { 0.0 } else { small.size().y + 6.0 };

    let height = GAP + main.size().y + small_height + GAP;
    let (rect, response) = ui.allocate_exact_size(vec2(width, height), Sense::hover());
    response.widget_info(|| {
        let spoken = format!("{}. {sentence} {second}", state.word());
        WidgetInfo::labeled(Role::Status, true, spoken.trim_end())
    });
    if ui.is_rect_visible(rect) {
        let painter = ui.painter();
        let colour = state.colour(palette);
        painter.rect_filled(rect, 0.0, state.soft(palette));
        painter.hline(rect.x_range(), rect.top() + 1.0, Stroke::new(2.0, colour));
        let text = rect.min + vec2(indent, GAP);
        let first_row = main.rows.first().map_or(MARK, |row| row.height());
        let mark = Rect::from_center_size(
            pos2(rect.left() + INSET + MARK / 2.0, text.y + first_row / 2.0),
            vec2(MARK, MARK),
        );
        state.paint(painter, mark, palette);
        let below = text + vec2(0.0, main.size().y + 6.0);
        painter.galley(text, main, palette.ink);
        painter.galley(below, small, palette.ink);
    }
    response
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::widget::lab;
    use egui_kittest::kittest::Queryable as _;

    #[test]
    fn the_verdict_is_read_as_one_sentence() {
        let mut harness = lab([640.0, 400.0], (), |ui, ()| {
            verdict_panel(ui, State::NotHeld, "At pH 9.2 free copper is 1.6 × the ceiling.", "");
        });
        harness.run();
        harness.get_by_label("Not held. At pH 9.2 free copper is 1.6 × the ceiling.");
    }
}
