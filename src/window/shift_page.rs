//! The shifts ahead: free metal against time left alone and with additions, and what to add when.

use super::app::App;
use super::story::{ShiftStory, Story, Wanted};
use super::theme::{GAP, INSET, RADIUS, Text, palette};
use super::widget::NumberField;
use crate::bath::Shift;
use crate::quantity::{fixed, p_value, plain, significant};
use crate::study::shift::{Forecast, TimePoint, TopUpPlan, bail_out_words, crossing_words, events, in_shift};
use eframe::egui::{CentralPanel, Frame, Grid, Margin, Panel, ScrollArea, Ui};
use egui_plot::{FilledArea, HLine, HoverPosition, Line, LineStyle, Plot, PlotPoints, VLine};

/// Width of the inputs, points.
const INPUTS: f32 = 300.0;
const PLOT: f32 = 230.0;

/// Draws the page.
pub fn show(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    let panel = Frame::new().fill(p.panel).inner_margin(Margin::same(INSET as i8));
    Panel::left("shift inputs").default_size(INPUTS).resizable(false).frame(panel).show(ui, |ui| {
        ScrollArea::vertical().id_salt("shift inputs").show(ui, |ui| inputs(app, ui));
    });
    let desk = Frame::new().fill(p.desk).inner_margin(Margin::same(INSET as i8));
    CentralPanel::default().frame(desk).show(ui, |ui| {
        match app.story_of(|wanted| *wanted == Wanted::Shift) {
            Some(Ok(Story::Shift(story))) => {
                ScrollArea::vertical().auto_shrink(false).show(ui, |ui| told(story, ui));
            }
            Some(Err(error)) => {
                ui.label(Text::Body.rich(error.to_string(), p.not_held));
            }
            _ => {
                ui.horizontal(|ui| {
                    ui.spinner();
                    ui.label("Looking ahead.");
                });
            }
        }
    });
}

/// What the shift does to the bath.
fn inputs(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    ui.label(Text::Heading.rich("A shift", p.ink));
    let mut changed: Option<String> = None;
    let shift = &mut app.document.project.shift;
    let mut number = |ui: &mut Ui, label: &str, unit: &str, range: (f64, f64), step: f64, value: &mut f64| {
        ui.separator();
        ui.horizontal(|ui| {
            ui.label(Text::Body.rich(label, p.ink));
        });
        let field = NumberField::new(label).unit(unit).range(range.0..=range.1).step(step);
        if let Some(new) = field.show(ui, *value).value {
            *value = new;
            changed = Some(format!("{label} to {} {unit}", plain(new, 2)));
        }
    };
    number(ui, "Running hours", "h", (0.5, 24.0), 0.5, &mut shift.hours);
    let mut shifts = f64::from(shift.shifts);
    number(ui, "Shifts to look ahead", "", (1.0, 60.0), 1.0, &mut shifts);
    shift.shifts = shifts.round() as u32;
    number(ui, "Drag-out", "L/h", (0.0, 1000.0), 0.1, &mut shift.drag_out_l_h);
    number(ui, "Drag-in of water", "L/h", (0.0, 1000.0), 0.1, &mut shift.drag_in_l_h);
    number(ui, "Evaporation", "L/h", (0.0, 1000.0), 0.5, &mut shift.evaporation_l_h);
    number(
        ui,
        "Agent lost by decomposition",
        "% a shift",
        (0.0, 99.0),
        0.1,
        &mut shift.agent_loss_percent_per_shift,
    );
    ui.separator();
    ui.label(Text::Strong.rich("The work brings or takes", p.ink));
    if shift.loads.is_empty() {
        ui.label(Text::Small.rich("nothing: give loads under shift in the project file", p.ink2));
    }
    for load in &mut shift.loads {
        let grams = load.rate.grams_per_hour();
        ui.label(Text::Body.rich(format!("{}: {} g/h", load.what, significant(grams, 3)), p.ink));
    }
    let water = &shift.make_up_water;
    ui.label(Text::Small.rich(format!("Make-up water: {} hardness", water.hardness), p.ink2));
    if !shift.note.is_empty() {
        ui.label(Text::Small.rich(&shift.note, p.ink2));
    }
    if *shift == Shift::default() {
        ui.label(Text::Body.rich("No shift yet: type what leaves, arrives and evaporates.", p.unsure));
    }
    if let Some(name) = changed {
        app.document.settle(&name);
    }
}

fn told(story: &ShiftStory, ui: &mut Ui) {
    let p = palette(ui);
    let running = &story.running;
    if story.alone.points.first().is_some_and(|start| start.excess(false) > 0.0) {
        let words = "◆ The doses as they stand do not hold to begin with: find the dose first.";
        ui.label(Text::Strong.rich(words, p.not_held));
        ui.add_space(GAP);
    }
    for limit in 0..running.bath.limits.len() {
        card(ui, |ui| course(story, limit, ui));
    }
    card(ui, |ui| {
        ui.label(Text::Strong.rich("Left alone", p.ink));
        if story.alone.crossings.is_empty() {
            ui.label(Text::Body.rich("■ every limit holds to the end", p.held));
        }
        for crossing in &story.alone.crossings {
            ui.label(Text::Body.rich(format!("◆ {}", crossing_words(running, crossing)), p.not_held));
        }
        for event in events(running, &story.alone) {
            ui.label(Text::Body.rich(event, p.ink));
        }
    });
    let Some(plan) = &story.plan else {
        ui.label(Text::Body.rich("No agent is free to be added, or no limit is set.", p.ink2));
        return;
    };
    card(ui, |ui| {
        let product = &running.bath.agents[plan.agent].product.name;
        let sure = if plan.sure { "with 95 % confidence" } else { "by plain numbers" };
        ui.label(Text::Strong.rich(format!("Additions of {product} that hold it {sure}"), p.ink));
        if let Some(refused) = &plan.refused {
            ui.label(Text::Body.rich(refused, p.not_held));
        }
        let quiet = plan.top_ups.is_empty() && plan.bail_outs.is_empty();
        if quiet && plan.fails_from.is_none() && plan.refused.is_none() {
            ui.label(Text::Body.rich("■ none is needed", p.held));
        }
        if !plan.top_ups.is_empty() {
            top_ups(story, plan, ui);
        }
        for bail_out in &plan.bail_outs {
            let words = bail_out_words(running, plan.agent, bail_out);
            ui.label(Text::Body.rich(words, p.unsure));
        }
        if let Some(hour) = plan.fails_from {
            let words = format!("◆ from {} nothing that was tried holds", in_shift(running, hour));
            ui.label(Text::Body.rich(words, p.not_held));
        }
    });
}

/// When to add how much.
fn top_ups(story: &ShiftStory, plan: &TopUpPlan, ui: &mut Ui) {
    let p = palette(ui);
    let running = &story.running;
    Grid::new("top-ups").spacing([22.0, 5.0]).striped(true).show(ui, |ui| {
        for heading in ["when", "measure out", "g/L", "of what is in the bath", "then"] {
            ui.label(Text::SmallStrong.rich(heading, p.ink2));
        }
        ui.end_row();
        for top_up in &plan.top_ups {
            ui.label(in_shift(running, top_up.hour));
            ui.label(Text::Strong.rich(&top_up.measured.amount, p.ink));
            ui.label(significant(top_up.dose_g_l, 3));
            ui.label(crate::quantity::percent(top_up.share));
            ui.label(top_up.adjustment.as_ref().map_or(String::new(), |(adjustment, measured)| {
                format!("{} {}", measured.amount, adjustment.product.name)
            }));
            ui.end_row();
        }
    });
}

fn card(ui: &mut Ui, inside: impl FnOnce(&mut Ui)) {
    let p = palette(ui);
    Frame::new().fill(p.panel).corner_radius(RADIUS).inner_margin(Margin::same(12)).show(ui, |ui| {
        ui.set_width(ui.available_width());
        inside(ui);
    });
    ui.add_space(GAP);
}

/// Free metal of one limit against time; up is more free metal.
fn course(story: &ShiftStory, limit: usize, ui: &mut Ui) {
    let p = palette(ui);
    let bath = &story.running.bath;
    let resolved = &bath.limits[limit];
    let component = bath.component(resolved.component);
    ui.horizontal(|ui| {
        ui.label(Text::Strong.rich(format!("Free {} through the shifts", component.name), p.ink));
        let words = "thin dashed: left alone · thick: with additions, worst of the range to 95 % shaded";
        ui.label(Text::Small.rich(words, p.ink2));
    });
    let shown = story.plan.as_ref().map_or(&story.alone, |plan| &plan.forecast);
    let ceiling = resolved.ceiling.map(|level| format!("ceiling p{} {}", component.short(), p_value(level)));
    let floor = resolved.floor.map(|level| format!("floor p{} {}", component.short(), p_value(level)));
    let limits: Vec<String> = ceiling.into_iter().chain(floor).collect();
    ui.label(Text::Small.rich(format!("heavy line: {}", limits.join(", ")), p.ink2));
    let short = component.short();
    let tell = |position: &HoverPosition<'_>| {
        let (HoverPosition::Elsewhere { position } | HoverPosition::NearDataPoint { position, .. }) =
            position;
        Some(format!("{} h, p{short} {}", fixed(position.x, 1), fixed(-position.y, 2)))
    };
    Plot::new(("course", limit))
        .height(PLOT)
        .allow_zoom(false)
        .allow_drag(false)
        .allow_scroll(false)
        .allow_boxed_zoom(false)
        .show_background(false)
        .grid_color(p.grid)
        .x_grid_spacer(|input| super::diagram::grid(input, 10.0))
        .y_grid_spacer(|input| super::diagram::grid(input, 4.0))
        .x_axis_label("running hours")
        .y_axis_label(format!("p{}", component.short()))
        .y_axis_formatter(|mark, _| fixed(-mark.value, 1))
        .label_formatter(tell)
        .show(ui, |plot| {
            for leg in legs(shown) {
                let x: Vec<f64> = leg.iter().map(|at| at.hour).collect();
                let low: Vec<f64> = leg.iter().map(|at| at.metals[limit].least_95).collect();
                let high: Vec<f64> = leg.iter().map(|at| at.metals[limit].most_95).collect();
                plot.add(
                    FilledArea::new("95 % band", &x, &low, &high).fill_color(p.accent.gamma_multiply(0.2)),
                );
            }
            for leg in legs(&story.alone) {
                let alone = Line::new("left alone", line(leg, limit));
                plot.line(alone.color(p.ink2).width(1.2).style(LineStyle::dashed_dense()));
            }
            if let Some(plan) = &story.plan {
                for leg in legs(&plan.forecast) {
                    plot.line(Line::new("with additions", line(leg, limit)).color(p.accent).width(2.4));
                }
                for top_up in &plan.top_ups {
                    plot.vline(VLine::new("addition", top_up.hour).color(p.accent).width(1.0));
                }
            }
            for (name, level) in [("ceiling", resolved.ceiling), ("floor", resolved.floor)] {
                if let Some(level) = level {
                    plot.hline(HLine::new(name, level.log10()).color(p.limit_plate).width(2.4));
                }
            }
        });
}

/// The stretches between additions: where something is added there are two moments of the same hour.
fn legs(forecast: &Forecast) -> impl Iterator<Item = &[TimePoint]> {
    forecast.points.chunk_by(|before, after| before.hour < after.hour)
}

fn line(leg: &[TimePoint], limit: usize) -> PlotPoints<'static> {
    leg.iter().map(|at| [at.hour, at.metals[limit].log10_free]).collect()
}
