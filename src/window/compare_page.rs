//! Two agents side by side at equal result: which is better in what, and why.

use super::app::App;
use super::command::Command;
use super::story::{Story, Wanted};
use super::theme::{GAP, INSET, RADIUS, Text, palette};
use crate::chemistry::{Catalogue, Role};
use crate::study::compare::{Better, Comparison, Row};
use eframe::egui::{CentralPanel, ComboBox, Frame, Grid, Label, Margin, RichText, ScrollArea, Ui};

/// Width that the columns before the last take at most, and the least that the last is left, points.
const OTHER_COLUMNS: f32 = 1070.0;
const NARROWEST_WHY: f32 = 180.0;

/// Draws the page.
pub fn show(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    let desk = Frame::new().fill(p.desk).inner_margin(Margin::same(INSET as i8));
    CentralPanel::default().frame(desk).show(ui, |ui| {
        ui.horizontal(|ui| {
            ui.label(Text::Heading.rich("Two agents at equal result", p.ink));
            ui.label(Text::Small.rich("each at its own smallest dose that holds every limit", p.ink2));
        });
        ui.add_space(GAP);
        chooser(app, ui);
        ui.add_space(GAP);
        match app.story_of(|wanted| matches!(wanted, Wanted::Comparison(..))) {
            Some(Ok(Story::Comparison(comparison))) => {
                ScrollArea::both().auto_shrink(false).show(ui, |ui| table(comparison, ui));
            }
            Some(Err(error)) => {
                ui.label(Text::Body.rich(error.to_string(), p.not_held));
            }
            _ if app.wanted().is_none() => {
                ui.label(Text::Body.rich("Pick two different agents to compare.", p.ink2));
            }
            _ => {
                ui.horizontal(|ui| {
                    ui.spinner();
                    ui.label("Finding the dose of each agent and what follows from it.");
                });
            }
        }
    });
}

/// The two products, each from all agents of the catalogue.
fn chooser(app: &mut App, ui: &mut Ui) {
    let products: Vec<(String, String)> = match &app.quick {
        Some(quick) => products(&quick.bath.catalogue),
        None => products(Catalogue::built_in()),
    };
    let chosen = app.compared();
    let name = |id: &Option<String>| {
        let found = id.as_ref().and_then(|id| products.iter().find(|(known, _)| known == id));
        found.map_or("Pick an agent".to_owned(), |(_, name)| name.clone())
    };
    let mut picked = chosen.clone();
    ui.horizontal_wrapped(|ui| {
        for (number, label) in ["first agent", "second agent"].into_iter().enumerate() {
            ComboBox::from_id_salt(label)
                .selected_text(name(&chosen[number]))
                .width(260.0)
                .height(380.0)
                .show_ui(ui, |ui| {
                    for (id, name) in &products {
                        if ui.selectable_label(chosen[number].as_ref() == Some(id), name).clicked() {
                            picked[number] = Some(id.clone());
                        }
                    }
                })
                .response
                .on_hover_text(label);
            if number == 0 {
                ui.label("against");
            }
        }
    });
    if picked != chosen {
        let ctx = ui.ctx().clone();
        let [Some(a), Some(b)] = picked else { return };
        app.run(&ctx, Command::Compare(a, b));
    }
}

fn products(catalogue: &Catalogue) -> Vec<(String, String)> {
    let agents = catalogue.iter().filter(|product| product.role == Role::Agent);
    agents.map(|product| (product.id.clone(), product.name.clone())).collect()
}

fn table(comparison: &Comparison, ui: &mut Ui) {
    let p = palette(ui);
    let (a, b) = comparison.names();
    let why_width = (ui.available_width() - OTHER_COLUMNS).max(NARROWEST_WHY);
    let card = Frame::new().fill(p.panel).corner_radius(RADIUS).inner_margin(Margin::same(12));
    card.show(ui, |ui| {
        Grid::new("comparison").num_columns(5).spacing([22.0, 7.0]).striped(true).show(ui, |ui| {
            for heading in ["", a, b, "better", "why"] {
                ui.label(Text::SmallStrong.rich(heading, p.ink));
            }
            ui.end_row();
            for row in &comparison.rows {
                line(row, (a, b), why_width, ui);
            }
        });
    });
    ui.add_space(GAP);
    for (who, remark) in &comparison.remarks {
        ui.label(Text::Small.rich(format!("{who}: {remark}"), p.ink2));
    }
    ui.label(Text::Small.rich("Effluent: your permit rules.", p.ink2));
}

fn line(row: &Row, (a, b): (&str, &str), why_width: f32, ui: &mut Ui) {
    let p = palette(ui);
    let label = if row.unit.is_empty() { row.label.clone() } else { format!("{}, {}", row.label, row.unit) };
    ui.label(Text::Body.rich(label, p.ink));
    // The better one is told by a mark and by weight, not by colour alone.
    let cell = |text: &str, better: bool| -> RichText {
        if better { Text::Strong.rich(format!("■ {text}"), p.held) } else { Text::Body.rich(text, p.ink) }
    };
    ui.label(cell(&row.a.text, row.better == Better::A));
    ui.label(cell(&row.b.text, row.better == Better::B));
    let (who, look) = match row.better {
        Better::A => (a, p.ink),
        Better::B => (b, p.ink),
        Better::Alike => ("does not matter", p.ink2),
        Better::Unranked => ("–", p.ink2),
    };
    ui.label(Text::Body.rich(who, look));
    ui.scope(|ui| {
        ui.set_max_width(why_width);
        ui.add(Label::new(Text::Small.rich(&row.why, p.ink2)).wrap());
    });
    ui.end_row();
}
