//! The main page: the tank on the left, the diagram in the middle, the doses on the right.

use super::app::App;
use super::theme::{INSET, palette};
use super::{diagram, doses, ledger, tank};
use eframe::egui::{CentralPanel, Frame, Margin, Panel, ScrollArea, Ui};

/// Widths of the side panels on a wide and on a narrow window, points.
const WIDE: (f32, f32) = (312.0, 404.0);
const NARROW: (f32, f32) = (304.0, 360.0);
const WIDE_FROM: f32 = 1400.0;

/// Under this width the three parts take turns.
const ONE_AT_A_TIME: f32 = 960.0;

/// The parts of the page, for windows that can't show them side by side.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Part {
    /// Tank, contents, limits.
    Tank,
    /// The diagram and who holds the agent.
    Diagram,
    /// Sliders, gauges, verdict.
    Doses,
}

/// Draws the page.
pub fn show(app: &mut App, ui: &mut Ui) {
    if ui.available_width() < ONE_AT_A_TIME {
        one_part(app, ui);
        return;
    }
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

/// One part at a time under a row of tabs; the verdict stays in sight.
fn one_part(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    let bar = Frame::new().fill(p.panel).inner_margin(Margin::symmetric(INSET as i8, 4));
    Panel::top("parts").resizable(false).frame(bar).show(ui, |ui| {
        ui.horizontal(|ui| {
            for (part, name) in [(Part::Tank, "Tank"), (Part::Diagram, "Diagram"), (Part::Doses, "Doses")] {
                ui.selectable_value(&mut app.part, part, name);
            }
        });
    });
    if app.part != Part::Doses {
        let below = Frame::new().fill(p.panel);
        Panel::bottom("verdict below").resizable(false).frame(below).show(ui, |ui| doses::verdict(app, ui));
    }
    let fill = if app.part == Part::Diagram { p.desk } else { p.panel };
    let inside = Frame::new().fill(fill).inner_margin(Margin::symmetric(INSET as i8, 8));
    CentralPanel::default().frame(inside).show(ui, |ui| match app.part {
        Part::Doses => doses::show(app, ui),
        Part::Tank => {
            ScrollArea::vertical().id_salt("tank").auto_shrink(false).show(ui, |ui| tank::show(app, ui));
        }
        Part::Diagram => {
            ScrollArea::vertical().id_salt("diagram").auto_shrink(false).show(ui, |ui| {
                diagram::show(app, ui, 300.0);
                ledger::show(app, ui);
            });
        }
    });
}
