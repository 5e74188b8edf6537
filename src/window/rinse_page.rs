//! The rinse behind the bath: what reaches the treatment, what the agents keep dissolved there, what breaks the complex.

use super::app::App;
use super::story::{Story, Wanted};
use super::theme::{GAP, INSET, Palette, RADIUS, Text, palette};
use crate::quantity::{fixed, significant};
use crate::study::rinse::{RinseStudy, ScanPoint};
use eframe::egui::{CentralPanel, Frame, Grid, Margin, RichText, ScrollArea, Ui};

/// Draws the page.
pub fn show(app: &App, ui: &mut Ui) {
    let p = palette(ui);
    let desk = Frame::new().fill(p.desk).inner_margin(Margin::same(INSET as i8));
    CentralPanel::default().frame(desk).show(ui, |ui| {
        ui.horizontal(|ui| {
            ui.label(Text::Heading.rich("Rinse water and its treatment", p.ink));
            ui.label(Text::Small.rich("for the doses as they stand; your permit rules", p.ink2));
        });
        ui.add_space(GAP);
        match app.story_of(|wanted| *wanted == Wanted::Rinse) {
            Some(Ok(Story::Rinse(study))) => {
                ScrollArea::both().auto_shrink(false).show(ui, |ui| {
                    if study.assumed {
                        let text = "Drag-out, water and treatment are assumed: type your own under rinse in the project file.";
                        ui.label(Text::Body.rich(text, p.unsure));
                        ui.add_space(GAP);
                    }
                    card(ui, "Waters", |ui| stages(study, ui));
                    card(ui, "Treated with acid or alkali alone: metal that stays dissolved, mg/L", |ui| scan(study, ui));
                    card(ui, "What breaks the complex: smallest dose that reaches every limit, g per L of water", |ui| breaking(study, ui));
                    remarks(study, ui);
                });
            }
            Some(Err(error)) => {
                ui.label(Text::Body.rich(error.to_string(), p.not_held));
            }
            _ => {
                ui.horizontal(|ui| {
                    ui.spinner();
                    ui.label("Treating the rinse water.");
                });
            }
        }
    });
}

fn card(ui: &mut Ui, title: &str, inside: impl FnOnce(&mut Ui)) {
    let p = palette(ui);
    Frame::new().fill(p.panel).corner_radius(RADIUS).inner_margin(Margin::same(12)).show(ui, |ui| {
        ui.label(Text::Strong.rich(title, p.ink));
        ui.add_space(4.0);
        inside(ui);
    });
    ui.add_space(GAP);
}

fn head(ui: &mut Ui, cells: impl IntoIterator<Item = String>) {
    let p = palette(ui);
    for cell in cells {
        ui.label(Text::SmallStrong.rich(cell, p.ink2));
    }
    ui.end_row();
}

fn stages(study: &RinseStudy, ui: &mut Ui) {
    Grid::new("waters").spacing([22.0, 5.0]).striped(true).show(ui, |ui| {
        let metals = study.watched.iter().map(|metal| format!("{} mg/L", metal.name));
        head(ui, ["water", "bath in it", "its own pH"].map(str::to_owned).into_iter().chain(metals));
        let stages = study.stages.iter().enumerate().map(|(i, water)| (format!("stage {}", i + 1), water));
        for (name, water) in stages.chain([("to treatment".to_owned(), &study.waste)]) {
            ui.label(name);
            ui.label(format!("1 : {}", significant(1.0 / water.share, 3)));
            ui.label(fixed(water.ph, 2));
            for metal in &water.metal_mg_l {
                ui.label(significant(*metal, 3));
            }
            ui.end_row();
        }
    });
}

fn scan(study: &RinseStudy, ui: &mut Ui) {
    let p = palette(ui);
    Grid::new("treatment").spacing([22.0, 5.0]).striped(true).show(ui, |ui| {
        let metals = study.watched.iter().flat_map(|metal| {
            let limit = metal
                .limit
                .as_ref()
                .map_or("no limit".to_owned(), |limit| format!("limit {}", significant(limit.mg_l, 3)));
            [format!("{} ({limit})", metal.name), "without agents".to_owned()]
        });
        head(ui, std::iter::once("pH".to_owned()).chain(metals));
        for (number, point) in study.scan.iter().enumerate() {
            let best = study.best == Some(number);
            let ph = fixed(point.ph, 1);
            ui.label(if best {
                Text::Strong.rich(format!("▶ {ph}"), p.ink)
            } else {
                Text::Body.rich(ph, p.ink)
            });
            for metal in 0..study.watched.len() {
                let (with, without) = cells(study, point, metal, p);
                ui.label(with);
                ui.label(without);
            }
            ui.end_row();
        }
    });
}

/// Dissolved metal with and without the agents; over its limit it says so by a mark.
fn cells(study: &RinseStudy, point: &ScanPoint, metal: usize, p: &Palette) -> (RichText, RichText) {
    let limit = study.watched[metal].limit.as_ref().map(|limit| limit.mg_l);
    let cell = |mg: Option<f64>, strong: bool| match mg {
        None => Text::Body.rich("not reached", p.ink2),
        Some(mg) if limit.is_some_and(|limit| mg > limit) => {
            Text::Body.rich(format!("◆ {}", significant(mg, 2)), p.not_held)
        }
        Some(mg) if strong && limit.is_some() => {
            Text::Strong.rich(format!("■ {}", significant(mg, 2)), p.held)
        }
        Some(mg) => Text::Body.rich(significant(mg, 2), p.ink),
    };
    let with = point.with_agents.as_ref().and_then(|treated| treated.dissolved_mg_l.get(metal).copied());
    let without = point.without_mg_l.as_ref().and_then(|all| all.get(metal).copied());
    (cell(with, true), cell(without, false))
}

fn breaking(study: &RinseStudy, ui: &mut Ui) {
    let p = palette(ui);
    if study.breaking.is_empty() {
        ui.label(Text::Body.rich("No metal in this water has a limit.", p.ink2));
        return;
    }
    Grid::new("breaking").spacing([18.0, 5.0]).striped(true).show(ui, |ui| {
        let ph = study.scan.iter().map(|point| format!("pH {}", fixed(point.ph, 1)));
        head(ui, std::iter::once("before the alkali".to_owned()).chain(ph));
        for tried in &study.breaking {
            ui.label(tried.method.name);
            for broken in &tried.by_ph {
                ui.label(broken.as_ref().map_or("–".to_owned(), |broken| significant(broken.dose_g_l, 2)));
            }
            ui.end_row();
        }
    });
}

fn remarks(study: &RinseStudy, ui: &mut Ui) {
    let p = palette(ui);
    let forbidden = study
        .forbidden
        .iter()
        .map(|(agent, rule)| format!("{agent} must not be in the waste water under {rule}"));
    let leaving = study.agents.iter().map(|(agent, mg, kg)| {
        format!("{agent} leaves: {} mg/L, {} kg a day", significant(*mg, 3), significant(*kg, 3))
    });
    let fixed_remarks = [
        "Limits are meant for treated water; rinsing harder is dilution, which rules forbid in place of treatment.",
        "A jar test with the real water comes before any treatment.",
    ];
    for remark in forbidden
        .chain(leaving)
        .chain(study.flags.iter().map(ToString::to_string))
        .chain(fixed_remarks.map(str::to_owned))
    {
        ui.label(Text::Small.rich(remark, p.ink2));
    }
}
