//! A small picture of the tank: open at the top, filled to its level, with the distance to the lip marked beside it.

use eframe::egui;
use eframe::egui::{Painter, Rect, Response, Role, Sense, Stroke, Ui, Vec2, WidgetInfo, vec2};

use super::band::to_pixel;
use crate::window::theme::{HAIRLINE, Palette, palette};

const WALL: f32 = 2.0;
const LIP_MARK: f32 = 18.0;

/// Shows the tank filled to `level` (0 empty, 1 to the lip). `label` says the same in words.
pub fn tank_glyph(ui: &mut Ui, size: Vec2, level: f64, label: &str) -> Response {
    let (rect, response) = ui.allocate_exact_size(size, Sense::hover());
    response.widget_info(|| WidgetInfo::labeled(Role::Image, true, label));
    if ui.is_rect_visible(rect) {
        let tank = Rect::from_min_size(rect.min, vec2(rect.width() - LIP_MARK, rect.height()));
        paint(ui.painter(), tank, level, palette(ui));
    }
    response
}

fn paint(painter: &Painter, tank: Rect, level: f64, palette: &Palette) {
    let inside = Rect::from_min_max(tank.min + vec2(WALL, 0.0), tank.max - vec2(WALL, WALL));
    let level = if level.is_finite() { level.clamp(0.0, 1.0) as f32 } else { 0.0 };
    let surface = to_pixel(painter, egui::lerp(inside.bottom()..=inside.top(), level));
    if surface < inside.bottom() {
        let liquid = Rect::from_x_y_ranges(inside.x_range(), surface..=inside.bottom());
        painter.rect_filled(liquid, 0.0, palette.water);
        painter.hline(inside.x_range(), surface, Stroke::new(1.5, palette.series[0]));
    }
    let wall = |min, max| painter.rect_filled(Rect::from_min_max(min, max), 0.0, palette.ink2);
    wall(tank.left_top(), tank.left_bottom() + vec2(WALL, 0.0));
    wall(tank.right_top() - vec2(WALL, 0.0), tank.right_bottom());
    wall(tank.left_bottom() - vec2(0.0, WALL), tank.right_bottom());

    // The freeboard, as a dimension between two ticks.
    if surface > tank.top() + 3.0 {
        let stroke = Stroke::new(HAIRLINE, palette.ink2);
        let x = tank.right() + LIP_MARK * 0.5;
        painter.vline(x, tank.top()..=surface, stroke);
        for y in [tank.top(), surface] {
            painter.hline(x - 5.0..=x + 5.0, y, stroke);
        }
    }
}
