//! The card under the diagram: who holds each agent.

use super::app::App;
use super::theme::{GAP, RADIUS, Text, palette};
use super::widget::{Fill, Lean, Share, ledger_bar, swatch};
use crate::dosing::{Holder, LedgerEntry};
use crate::quantity::{percent, significant};
use eframe::egui::{Frame, Grid, Margin, Ui};

/// Rows of the table at most.
const ROWS: usize = 4;
const HEAD: f32 = 96.0;
const ROW: f32 = 27.0;

/// Height that the card takes, points.
pub fn height(app: &App) -> f32 {
    match first(app) {
        Some((_, entries)) => HEAD + GAP + ROW * (entries.len().min(ROWS) as f32 + 1.0) + 24.0,
        None => 0.0,
    }
}

fn first(app: &App) -> Option<&(usize, Vec<LedgerEntry>)> {
    app.quick.as_ref()?.ledgers.first()
}

/// Draws the card.
pub fn show(app: &App, ui: &mut Ui) {
    let (Some(quick), Some((agent, entries))) = (&app.quick, first(app)) else { return };
    let p = palette(ui);
    ui.add_space(GAP);
    let card = Frame::new().fill(p.panel).corner_radius(RADIUS).inner_margin(Margin::same(12));
    card.show(ui, |ui| {
        ui.set_width(ui.available_width());
        let component = quick.bath.component(*agent);
        let total: f64 = entries.iter().map(|entry| entry.mol_l).sum();
        let in_grams = component.reported_molar_mass().map(|mass| {
            let acid = if component.acid_form.is_some() { " as acid" } else { "" };
            format!("{} g/L{acid}", significant(total * mass, 3))
        });
        ui.horizontal(|ui| {
            ui.label(Text::Strong.rich(format!("Who holds the {}", component.name), p.ink));
            ui.label(
                Text::Small
                    .rich(in_grams.unwrap_or_else(|| format!("{} mol/L", significant(total, 3))), p.ink2),
            );
        });
        let names: Vec<String> = entries.iter().map(|entry| entry.holder.name(&quick.bath)).collect();
        let shares: Vec<Share> = entries
            .iter()
            .zip(&names)
            .enumerate()
            .map(|(i, (entry, name))| Share {
                label: name,
                part: entry.share,
                series: i,
                fill: fill(&entry.holder),
            })
            .collect();
        ledger_bar(ui, &format!("who holds the {}", component.name), &shares);
        Grid::new("ledger").num_columns(4).spacing([18.0, 3.0]).show(ui, |ui| {
            for heading in ["held by", "mol/L", "share"] {
                ui.label(Text::Small.rich(heading, p.ink2));
            }
            ui.end_row();
            for (i, (entry, name)) in entries.iter().zip(&names).enumerate().take(ROWS) {
                ui.horizontal(|ui| {
                    swatch(ui, i, fill(&entry.holder));
                    ui.label(name);
                });
                ui.label(significant(entry.mol_l, 3));
                ui.label(percent(entry.share));
                ui.end_row();
            }
        });
    });
}

fn fill(holder: &Holder) -> Fill {
    match holder {
        Holder::Metal(_) => Fill::Solid,
        Holder::Protons | Holder::Others => Fill::Hatched(Lean::Falling),
        Holder::Solid(_) | Holder::Free => Fill::Hatched(Lean::Rising),
    }
}
