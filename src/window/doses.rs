//! The right panel: one slider per agent, the acid or alkali that follows, the free-metal gauges, the verdict.

use super::app::{App, shown};
use super::command::Command;
use super::frame::state_of;
use super::tank::name_on_the_left;
use super::theme::{GAP, INSET, State, Text, palette};
use super::widget::{DoseRail, Gauge, NumberField, Zone, follow_field, gauge_legend, verdict_panel};
use crate::bath::{AgentDose, Wall};
use crate::chemistry::Role;
use crate::dosing::{
    CONFIDENCE_95, Direction, Hold, Measured, MetalReading, Search, measure, share_of_limit,
};
use crate::quantity::{plain, significant};
use eframe::egui::{Align, Button, ComboBox, Frame, Layout, Margin, Panel, RichText, ScrollArea, Ui};

/// Largest slider range offered when an agent is added, g/L.
const DEFAULT_MAX_G_L: f64 = 50.0;

/// Windows under this height, points, get lower gauges.
const LOW_WINDOW: f32 = 850.0;

/// Draws the panel.
pub fn show(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    let below = Frame::new().fill(p.panel).inner_margin(Margin { left: 0, right: 0, top: 0, bottom: 0 });
    Panel::bottom("verdict").resizable(false).frame(below).show(ui, |ui| verdict(app, ui));
    ScrollArea::vertical().id_salt("doses").auto_shrink(false).show(ui, |ui| {
        ui.set_max_width(ui.available_width() - INSET);
        heading(app, ui);
        let mut removed = None;
        for agent in 0..app.document.project.agents.len() {
            ui.push_id(("agent", agent), |ui| {
                ui.separator();
                if agent_row(app, ui, agent) {
                    removed = Some(agent);
                }
            });
        }
        if let Some(agent) = removed {
            let gone = app.document.project.agents.remove(agent);
            app.document.settle(&format!("remove {}", gone.product));
        }
        adjustment(app, ui);
        ui.separator();
        add_agent(app, ui);
        ui.add_space(GAP);
        gauges(app, ui);
        ui.add_space(GAP);
    });
}

fn heading(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    ui.horizontal(|ui| {
        ui.label(Text::Heading.rich("Doses", p.ink));
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            let command = Command::FindDose;
            let text = if app.is_finding() { "Searching…" } else { command.text() };
            let shortcut = command.shortcut().map_or(String::new(), |s| ui.ctx().format_shortcut(&s));
            let button = Button::new(RichText::new(text).color(p.on_accent).strong())
                .fill(p.accent)
                .shortcut_text(RichText::new(shortcut).color(p.on_accent));
            if ui.add_enabled(!app.is_finding(), button).on_hover_text(command.tip()).clicked() {
                let ctx = ui.ctx().clone();
                app.run(&ctx, command);
            }
        });
    });
}

/// One agent; true when it is to be removed.
fn agent_row(app: &mut App, ui: &mut Ui, agent: usize) -> bool {
    let mut remove = false;
    let resolved =
        app.quick.as_ref().and_then(|quick| quick.bath.agents.get(agent)).map(|agent| agent.product.clone());
    let product = resolved.filter(|product| {
        let typed = &app.document.project.agents[agent].product;
        product.id == *typed || product.name.eq_ignore_ascii_case(typed)
    });
    let (dose, max) =
        (app.document.project.agents[agent].dose_g_l, app.document.project.agents[agent].max_g_l);
    let id = app.document.project.agents[agent].product.clone();
    let mut edited: Option<(f64, bool)> = None;
    ui.horizontal(|ui| {
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            remove = ui.small_button("×").on_hover_text("Remove this agent").clicked();
            let field =
                NumberField::new("dose in g/L").unit("g/L").range(0.0..=max).decimals(2).step(0.1).strong();
            let edit = field.show(ui, dose);
            if let Some(value) = edit.value {
                edited = Some((value, true));
            }
            name_on_the_left(ui, product.as_ref().map_or(id.as_str(), |product| product.name.as_str()));
        });
    });
    let search = app
        .thorough
        .as_ref()
        .and_then(|thorough| thorough.searches.get(agent))
        .filter(|search| search.bands.last().is_some_and(|band| (band.to - max).abs() < 1e-6));
    let zones = search.map(zones).unwrap_or_default();
    let rail = DoseRail::new(&id, "g/L", 0.0..=max.max(0.1)).zones(&zones).step(0.1);
    let edit = rail.show(ui, dose);
    if let Some(value) = edit.value {
        edited = Some((value, edit.done));
    } else if edit.done {
        edited = Some((dose, true));
    }
    if let Some((value, done)) = edited {
        app.document.project.agents[agent].dose_g_l = value;
        if done {
            app.document.settle(&format!("dose {id} to {} g/L", shown(value)));
        }
    }
    if let Some(product) = product {
        let project = &app.document.project;
        let volume = project.tank.volume_l;
        if volume > 0.0 && app.document.project.agents[agent].dose_g_l > 0.0 {
            let measured = measure(
                &product,
                app.document.project.agents[agent].dose_g_l,
                volume,
                &project.sheet,
                Direction::Up,
            );
            let cost = product.price().map(|price| (measured.rounded_kg * price, "illustrative price"));
            amounts(ui, &measured, "rounded up", cost);
        }
    }
    remove
}

/// exact · measure out · cost
fn amounts(ui: &mut Ui, measured: &Measured, rounding: &str, cost: Option<(f64, &str)>) {
    let p = palette(ui);
    ui.horizontal(|ui| {
        ui.label(Text::Small.rich("exact", p.ink2));
        ui.label(Text::Small.rich(&measured.exact, p.ink));
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            if let Some((cost, basis)) = cost.filter(|(cost, _)| *cost > 0.0) {
                ui.label(Text::Small.rich(format!("cost {}", significant(cost, 3)), p.ink))
                    .on_hover_text(basis);
            }
        });
    });
    ui.horizontal(|ui| {
        ui.label(Text::Small.rich("measure out", p.ink2));
        ui.label(Text::Strong.rich(&measured.amount, p.ink));
        ui.label(Text::Small.rich(rounding, p.ink2)).on_hover_text(&measured.how);
    });
}

fn zones(search: &Search) -> Vec<Zone<'static>> {
    search
        .bands
        .iter()
        .map(|band| Zone {
            from: band.from,
            to: band.to,
            state: match band.hold {
                Hold::Not => State::NotHeld,
                Hold::Plain => State::Unsure,
                Hold::Sure => State::Held,
            },
            words: "",
        })
        .collect()
}

fn adjustment(app: &App, ui: &mut Ui) {
    let Some(adjustment) = app.quick.as_ref().and_then(|quick| quick.adjustment.as_ref()) else { return };
    let p = palette(ui);
    let project = &app.document.project;
    ui.separator();
    ui.horizontal(|ui| {
        ui.label(Text::Strong.rich(&adjustment.product.name, p.ink));
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            follow_field(ui, "acid or alkali in g/L", &shown(adjustment.dose_g_l), "g/L", 62.0);
        });
    });
    let set = project.tank.ph.range().map_or(String::new(), |range| plain(range.set, 2));
    ui.label(Text::Small.rich(format!("follows: keeps pH at {set}"), p.ink2));
    let measured = measure(
        &adjustment.product,
        adjustment.dose_g_l,
        project.tank.volume_l,
        &project.sheet,
        Direction::Down,
    );
    amounts(ui, &measured, "rounded down, finish by meter", None);
}

fn add_agent(app: &mut App, ui: &mut Ui) {
    let Some(quick) = &app.quick else { return };
    let products: Vec<(String, String)> = quick
        .bath
        .catalogue
        .iter()
        .filter(|product| product.role == Role::Agent)
        .map(|product| (product.id.clone(), product.name.clone()))
        .collect();
    let mut chosen = None;
    ComboBox::from_id_salt("add agent")
        .selected_text("Add an agent")
        .width(180.0)
        .height(360.0)
        .show_ui(ui, |ui| {
            for (id, name) in &products {
                if ui.selectable_label(false, name).clicked() {
                    chosen = Some((id.clone(), name.clone()));
                }
            }
        })
        .response
        .on_hover_text("complexing agent to add");
    if let Some((product, name)) = chosen {
        app.document.project.agents.push(AgentDose {
            product,
            dose_g_l: 0.0,
            max_g_l: DEFAULT_MAX_G_L,
            ..AgentDose::default()
        });
        app.document.settle(&format!("add {name}"));
    }
}

fn gauges(app: &App, ui: &mut Ui) {
    let p = palette(ui);
    ui.label(Text::Strong.rich("Free metal over the operating range", p.ink));
    let Some(quick) = app.quick.as_ref().filter(|quick| !quick.assessment.metals.is_empty()) else {
        ui.label(Text::Body.rich("No ceiling yet. Set one under Limits, then find the dose.", p.ink2));
        return;
    };
    let stale = !app.picture_is_current();
    for row in quick.assessment.metals.chunks(3) {
        ui.columns(3, |columns| {
            for (column, metal) in columns.iter_mut().zip(row) {
                gauge(app, column, metal, stale);
            }
        });
    }
    gauge_legend(ui, 95);
}

/// Height of the well: lower on a low window, so that gauge and verdict are both in sight.
fn gauge_height(ui: &Ui) -> f32 {
    if ui.ctx().content_rect().height() < LOW_WINDOW { 120.0 } else { Gauge::default().height }
}

fn gauge(app: &App, ui: &mut Ui, metal: &MetalReading, stale: bool) {
    let Some(quick) = &app.quick else { return };
    let limit = &quick.bath.limits[metal.limit];
    let component = quick.bath.component(limit.component);
    let walls = || {
        quick
            .assessment
            .walls
            .iter()
            .filter(|wall| matches!(wall.wall, Wall::Ceiling(i) | Wall::Floor(i) if i == metal.limit))
    };
    let plain = walls().map(|wall| wall.excess).fold(f64::NEG_INFINITY, f64::max);
    let sure = walls().map(|wall| wall.excess_95).fold(f64::NEG_INFINITY, f64::max);
    let state = match (plain <= 0.0, sure <= 0.0) {
        (true, true) => State::Held,
        (true, false) => State::Unsure,
        _ => State::NotHeld,
    };
    let lines: Vec<String> = walls()
        .map(|wall| match wall.wall {
            Wall::Floor(_) => format!("{} × floor", significant(10f64.powf(-wall.excess), 2)),
            _ => format!("{} of ceiling", share_of_limit(wall.excess)),
        })
        .chain([format!("{} mol/L at set point", significant(metal.set.value, 2))])
        .collect();
    let p_of = |value: f64| -value.log10();
    let measurable = if metal.most.value < 1e-9 { " · from constants" } else { "" };
    let subtitle = format!("p{}{measurable}", component.short());
    Gauge {
        title: &component.name,
        subtitle: &subtitle,
        ceiling: limit.ceiling.map(p_of),
        floor: limit.floor.map(p_of),
        set: p_of(metal.set.value),
        worst: p_of(metal.most.value),
        least: p_of(metal.least.value),
        confidence: Some((
            p_of(metal.most.value) - CONFIDENCE_95 * metal.most.sigma,
            p_of(metal.least.value) + CONFIDENCE_95 * metal.least.sigma,
        )),
        state,
        lines: &lines,
        stale,
        height: gauge_height(ui),
        ..Gauge::default()
    }
    .show(ui);
}

/// The state of the doses in one sentence.
pub fn verdict(app: &App, ui: &mut Ui) {
    if let Some(error) = &app.error {
        verdict_panel(
            ui,
            State::NotHeld,
            &format!("Nothing is computed: {error}."),
            "The last good picture stays.",
        );
        return;
    }
    match &app.thorough {
        Some(thorough) => {
            let flags = app.quick.as_ref().map_or(0, |quick| quick.flags.len());
            let second = match app.quick.as_ref().and_then(|quick| quick.flags.first()) {
                Some(flag) if flags > 1 => format!("Note: {flag} (and {} more).", flags - 1),
                Some(flag) => format!("Note: {flag}."),
                None => String::new(),
            };
            let response =
                verdict_panel(ui, state_of(thorough.verdict.state), &thorough.verdict.sentence, &second);
            response.on_hover_ui(|ui| {
                for flag in app.quick.iter().flat_map(|quick| &quick.flags) {
                    ui.label(format!("• {flag}"));
                }
            });
        }
        None => {
            verdict_panel(ui, State::Unknown, "Solving the bath…", "");
        }
    }
}
