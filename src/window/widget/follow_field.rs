//! A number that follows from others: it looks like a field with a dashed frame, and cannot be typed into.

use eframe::egui;
use eframe::egui::{Align2, Response, Role, Sense, Shape, Stroke, Ui, WidgetInfo, pos2, vec2};

use crate::window::theme::{HAIRLINE, MIN_HIT, Text, palette};

/// Shows `value` (already printed) with its unit. `label` names it to screen readers.
pub fn follow_field(ui: &mut Ui, label: &str, value: &str, unit: &str, width: f32) -> Response {
    let palette = palette(ui);
    let unit_galley = ui.painter().layout_no_wrap(unit.to_owned(), Text::Body.font(), palette.ink2);
    let gap = if unit.is_empty() { 0.0 } else { 5.0 };
    let size = vec2(width + gap + unit_galley.size().x, MIN_HIT);
    let (rect, response) = ui.allocate_exact_size(size, Sense::hover());
    response.widget_info(|| {
        let spoken = format!("{label}: {value} {unit}, follows from the rest");
        WidgetInfo::labeled(Role::Label, true, spoken)
    });
    if ui.is_rect_visible(rect) {
        let painter = ui.painter();
        let field = egui::Rect::from_min_size(rect.min, vec2(width, rect.height()));
        let frame = field.shrink(0.5);
        let corners = [
            frame.left_top(),
            frame.right_top(),
            frame.right_bottom(),
            frame.left_bottom(),
            frame.left_top(),
        ];
        painter.extend(Shape::dashed_line(&corners, Stroke::new(HAIRLINE, palette.ink2), 3.0, 3.0));
        let at = pos2(field.right() - 6.0, field.center().y);
        painter.text(at, Align2::RIGHT_CENTER, value, Text::Value.font(), palette.ink);
        let y = field.center().y - unit_galley.size().y / 2.0;
        painter.galley(pos2(field.right() + gap, y), unit_galley, palette.ink2);
    }
    response
}
