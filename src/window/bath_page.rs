//! The main page: the tank on the left, the diagram in the middle, the doses on the right.

use super::app::App;
use super::theme::{INSET, palette};
use super::{diagram, doses, ledger, tank};
use eframe::egui::{CentralPanel, Frame, Margin, Panel, ScrollArea, Ui};

/// Widths of the side panels on a wide and on a narrow window, points.
const WIDE: (f32, f32) = (312.0, 404.0);
const NARROW: (f32, f32) = (276.0, 360.0);
const WIDE_FROM: f32 = 1400.0;

/// Draws the page.
pub fn show(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    let (left, right) = if ui.available_width() >= WIDE_FROM { WIDE } else { NARROW };
    let panel =
        Frame::new().fill(p.panel).inner_margin(Margin { left: INSET as i8, right: 8, top: 12, bottom: 0 });
    Panel::left("tank").default_size(left).min_size(left).resizable(true).frame(panel).show(ui, |ui| {
        ScrollArea::vertical().id_salt("tank").auto_shrink(false).show(ui, |ui| {
            ui.set_max_width(ui.available_width() - 10.0);
            tank::show(app, ui);
        });
    });
    let panel =
        Frame::new().fill(p.panel).inner_margin(Margin { left: INSET as i8, right: 0, top: 12, bottom: 0 });
    Panel::right("doses").default_size(right).min_size(right).resizable(true).frame(panel).show(ui, |ui| {
        doses::show(app, ui);
    });
    let desk = Frame::new().fill(p.desk).inner_margin(Margin::same(INSET as i8));
    CentralPanel::default().frame(desk).show(ui, |ui| {
        let card = ledger::height(app);
        let height = (ui.available_height() - card).max(240.0);
        diagram::show(app, ui, height);
        ledger::show(app, ui);
    });
}
