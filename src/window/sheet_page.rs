//! The sheet as it will be printed: the laid-out pages painted on paper white.

use super::app::App;
use super::command::Command;
use super::theme::{INSET, Text, palette};
use crate::sheet::{Item, Page, Weight};
use eframe::egui::{
    Button, CentralPanel, Color32, FontFamily, FontId, Frame, Margin, Painter, Rect, ScrollArea, Sense,
    Stroke, StrokeKind, Ui, WidgetInfo, pos2, vec2,
};

/// Widest a page is shown, points on screen.
const WIDEST: f32 = 860.0;

/// Draws the page.
pub fn show(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    let desk = Frame::new().fill(p.desk).inner_margin(Margin::same(INSET as i8));
    let mut export = false;
    CentralPanel::default().frame(desk).show(ui, |ui| {
        ui.horizontal(|ui| {
            ui.label(Text::Heading.rich("Dosing sheet", p.ink));
            ui.label(Text::Small.rich("as it will be printed, for the doses as they stand", p.ink2));
            export = ui
                .add(Button::new(Command::ExportSheet.text()))
                .on_hover_text(Command::ExportSheet.tip())
                .clicked();
        });
        let Some(thorough) = &app.thorough else {
            ui.label("The sheet is being computed.");
            return;
        };
        ScrollArea::vertical().auto_shrink(false).show(ui, |ui| {
            ui.vertical_centered(|ui| {
                for (number, page) in thorough.sheet.pages.iter().enumerate() {
                    paint_page(ui, page, (page.width_pt, page.height_pt), number);
                    ui.add_space(INSET);
                }
            });
        });
    });
    if export {
        let ctx = ui.ctx().clone();
        app.run(&ctx, Command::ExportSheet);
    }
}

fn paint_page(ui: &mut Ui, page: &Page, (width, height): (f32, f32), number: usize) {
    let scale = (ui.available_width().min(WIDEST) / width).max(0.5);
    let (rect, response) = ui.allocate_exact_size(vec2(width, height) * scale, Sense::hover());
    response.widget_info(|| {
        WidgetInfo::labeled(
            eframe::egui::Role::Image,
            true,
            format!("page {} of the dosing sheet", number + 1),
        )
    });
    if !ui.is_rect_visible(rect) {
        return;
    }
    let painter = ui.painter().with_clip_rect(rect.intersect(ui.clip_rect()));
    painter.rect_filled(rect, 0.0, Color32::WHITE);
    for item in &page.items {
        paint_item(&painter, item, rect, scale);
    }
}

/// Paper is white and ink black in both themes: this is what comes out of the printer.
fn paint_item(painter: &Painter, item: &Item, page: Rect, scale: f32) {
    let at = |x: f32, y: f32| pos2(page.left() + x * scale, page.top() + y * scale);
    let ink = Color32::BLACK;
    match item {
        Item::Text(run) => {
            let family = match run.weight {
                Weight::Bold => FontFamily::Name("bold".into()),
                Weight::Regular => FontFamily::Proportional,
            };
            let galley = painter.layout_no_wrap(run.text.clone(), FontId::new(run.size * scale, family), ink);
            let ascent = galley.rows.first().map_or(run.size * scale, |row| {
                row.glyphs.first().map_or(run.size * scale, |glyph| glyph.font_ascent)
            });
            painter.galley(at(run.x, run.baseline) - vec2(0.0, ascent), galley, ink);
        }
        Item::Rule(rule) => {
            painter.line_segment(
                [at(rule.x1, rule.y1), at(rule.x2, rule.y2)],
                Stroke::new(rule.thickness * scale, ink),
            );
        }
        Item::Frame(frame) => {
            let rect = Rect::from_min_size(at(frame.x, frame.y), vec2(frame.width, frame.height) * scale);
            painter.rect_stroke(rect, 0.0, Stroke::new(frame.thickness * scale, ink), StrokeKind::Middle);
        }
        Item::CheckBox(square) => {
            let rect = Rect::from_min_size(at(square.x, square.y), vec2(square.side, square.side) * scale);
            painter.rect_stroke(rect, 0.0, Stroke::new(0.8 * scale, ink), StrokeKind::Middle);
        }
        Item::WriteIn(_) => {}
    }
}
