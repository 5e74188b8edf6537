//! The middle: where a metal or an agent is, over pH or dose, and below it the free metal on the same axis.
//!
//! Up is more free metal in the strip, so a ceiling is a hatched plate above and a floor one below, as in the gauges.

use super::answer::{Across, Quick};
use super::app::App;
use super::theme::{GAP, Palette, Series, Text, palette};
use super::widget::{Lean, hatch};
use crate::bath::ResolvedLimit;
use crate::chemistry::{ComponentKind, pretty};
use crate::quantity::{percent, plain};
use crate::study::{Axis, Diagram};
use eframe::egui::{
    Align, Align2, Color32, ComboBox, Id, Layout, Pos2, Rangef, Rect, Stroke, Ui, pos2, vec2,
};
use egui_plot::{
    AxisHints, GridInput, GridMark, HoverPosition, Line, Plot, PlotPoint, PlotPoints, PlotTransform, VLine,
};

/// Share of the height that the free-metal strip takes.
const STRIP: f32 = 0.36;
/// Width of the numbers and the name beside both plots, so that they share one left edge.
const AXIS_WIDTH: f32 = 58.0;
/// Smallest peak whose name stands at its line.
const NAMED_PEAK: f64 = 0.05;

/// Draws header, plot and strip.
pub fn show(app: &mut App, ui: &mut Ui, height: f32) {
    let top = ui.cursor().top();
    header(app, ui);
    let Some(quick) = &app.quick else {
        ui.label(Text::Body.rich("The picture appears once the bath is complete.", palette(ui).ink2));
        return;
    };
    let left = (height - (ui.cursor().top() - top) - GAP).max(160.0);
    let link = Id::unique("diagram");
    shares(app, quick, ui, left * (1.0 - STRIP), link);
    strip(quick, ui, left * STRIP, link);
}

fn header(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    let Some(quick) = &app.quick else { return };
    let bath = &quick.bath;
    let shown = bath.component(quick.diagram.basis.0).name.clone();
    let mut view = app.view.clone();
    ui.horizontal(|ui| {
        ui.label(Text::Heading.rich(format!("Where the {shown} is"), p.ink));
        ui.label(Text::Body.rich("across", p.ink2));
        let name = |across: Across| match across {
            Across::Ph => "pH".to_owned(),
            Across::Dose(agent) => {
                bath.agents.get(agent).map_or("dose".to_owned(), |a| format!("dose of {}", a.product.name))
            }
        };
        ComboBox::from_id_salt("across")
            .selected_text(name(view.across))
            .width(70.0)
            .show_ui(ui, |ui| {
                for across in std::iter::once(Across::Ph).chain((0..bath.agents.len()).map(Across::Dose)) {
                    ui.selectable_value(&mut view.across, across, name(across));
                }
            })
            .response
            .on_hover_text("what runs along the bottom");
        ui.label(Text::Body.rich("for", p.ink2));
        ComboBox::from_id_salt("basis")
            .selected_text(&shown)
            .width(110.0)
            .show_ui(ui, |ui| {
                for index in 0..bath.present.len() {
                    let component = bath.component(index);
                    let drawable = matches!(component.kind, ComponentKind::Metal | ComponentKind::Agent);
                    if drawable && quick.solution.totals[index] > 0.0 {
                        let token = Some(component.token.clone());
                        ui.selectable_value(&mut view.basis, token, &component.name);
                    }
                }
            })
            .response
            .on_hover_text("metal or agent whose whereabouts are drawn");
        ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
            let set = bath.project.tank.temperature_c.set;
            let strength = crate::quantity::significant(quick.solution.ionic_strength, 2);
            ui.label(Text::Small.rich(format!("{} °C, I = {strength} mol/L", plain(set, 1)), p.ink2));
        });
    });
    app.view = view;
}

/// Operating range and set point on the axis.
fn marks(quick: &Quick) -> (Option<(f64, f64)>, Option<f64>) {
    match quick.diagram.axis {
        Axis::Ph { .. } => {
            let range = quick.bath.ph();
            (range.map(|range| (range.low, range.high)), range.map(|range| range.set))
        }
        Axis::Dose { agent, .. } => (None, quick.bath.project.agents.get(agent).map(|agent| agent.dose_g_l)),
    }
}

fn ends(diagram: &Diagram) -> (f64, f64) {
    (diagram.x.first().copied().unwrap_or(0.0), diagram.x.last().copied().unwrap_or(1.0))
}

fn axis_name(quick: &Quick) -> String {
    match quick.diagram.axis {
        Axis::Ph { .. } => "pH".to_owned(),
        Axis::Dose { agent, .. } => {
            let name = quick.bath.agents.get(agent).map_or("", |agent| agent.product.name.as_str());
            format!("{name}, g/L")
        }
    }
}

/// A plot that can be read but not lost: no zoom, no drag.
fn plot<'a>(id: &'a str, link: Id, diagram: &Diagram, height: f32, grid_colour: Color32) -> Plot<'a> {
    let (from, to) = ends(diagram);
    Plot::new(id)
        .height(height)
        .allow_zoom(false)
        .allow_drag(false)
        .allow_scroll(false)
        .allow_boxed_zoom(false)
        .allow_double_click_reset(false)
        .show_background(true)
        .set_margin_fraction(vec2(0.0, 0.0))
        .default_x_bounds(from, to)
        .link_cursor(link, [true, false])
        .grid_fade(0.0)
        .grid_color(grid_colour)
        .x_grid_spacer(|input| grid(input, 8.0))
}

/// Grid lines at round numbers, about `count` of them.
pub(super) fn grid(input: GridInput, count: f64) -> Vec<GridMark> {
    let (low, high) = input.bounds;
    let rough = (high - low) / count;
    if !(rough.is_finite() && rough > 0.0) {
        return Vec::new();
    }
    let decade = 10f64.powf(rough.log10().floor());
    let step =
        [1.0, 2.0, 2.5, 5.0, 10.0].map(|m| m * decade).into_iter().find(|s| *s >= rough).unwrap_or(rough);
    let first = (low / step).ceil() as i64;
    let last = (high / step).floor() as i64;
    (first..=last).map(|i| GridMark { value: i as f64 * step, step_size: step }).collect()
}

/// Stretches of a line without gaps.
fn stretches(x: &[f64], y: &[f64]) -> Vec<Vec<PlotPoint>> {
    let mut stretches = vec![Vec::new()];
    for (&x, &y) in x.iter().zip(y) {
        match (y.is_finite(), stretches.last_mut()) {
            (true, Some(last)) => last.push(PlotPoint::new(x, y)),
            (false, Some(last)) if !last.is_empty() => stretches.push(Vec::new()),
            _ => {}
        }
    }
    stretches.retain(|stretch| stretch.len() > 1);
    stretches
}

fn shares(app: &App, quick: &Quick, ui: &mut Ui, height: f32, link: Id) {
    let p = palette(ui);
    let diagram = &quick.diagram;
    let (from, to) = ends(diagram);
    let axes = vec![
        AxisHints::new_y()
            .min_thickness(AXIS_WIDTH)
            .label_spacing(Rangef::new(14.0, 22.0))
            .label("share, %")
            .formatter(|mark, _| format!("{:.0}", mark.value)),
    ];
    let tell = |position: &HoverPosition<'_>| hover(diagram, quick, position);
    let (range, set) = marks(quick);
    let stale = !app.picture_is_current();
    let shown = plot("shares", link, diagram, height, p.grid)
        .custom_y_axes(axes)
        .y_grid_spacer(|input| grid(input, 5.0))
        .show_axes([false, true])
        .include_y(0.0)
        .include_y(100.0)
        .default_y_bounds(0.0, 104.0)
        .label_formatter(tell)
        .show(ui, |plot| {
            plot.set_plot_bounds_x(from..=to);
            plot.set_plot_bounds_y(0.0..=104.0);
            if let Some((low, high)) = range {
                plot.span(
                    egui_plot::Span::new("", low..=high)
                        .fill(p.accent_soft.gamma_multiply(0.55))
                        .border_width(0.0),
                );
            }
            for (i, series) in diagram.series.iter().enumerate() {
                let percent: Vec<f64> = series.share.iter().map(|share| share * 100.0).collect();
                let style = Series::new(p, i);
                for stretch in stretches(&diagram.x, &percent) {
                    let line = Line::new(pretty(&series.token), PlotPoints::Owned(stretch))
                        .color(style.colour)
                        .width(if series.solid { 3.0 } else { 2.0 })
                        .style(style.plot_line_style());
                    plot.line(line);
                }
            }
            if let Some(set) = set {
                let style =
                    if stale { egui_plot::LineStyle::dashed_dense() } else { egui_plot::LineStyle::Solid };
                plot.vline(VLine::new("set point", set).color(p.accent).width(1.5).style(style));
            }
        });
    let transform = shown.transform;
    let frame = shown.response.rect;
    let taken = shade_solids(ui, quick, &transform, frame, true);
    name_lines(ui, diagram, &transform, frame, taken);
}

/// What stands at the pointer: every species at that x.
fn hover(diagram: &Diagram, quick: &Quick, position: &HoverPosition<'_>) -> Option<String> {
    let x = match position {
        HoverPosition::NearDataPoint { position, .. } | HoverPosition::Elsewhere { position } => position.x,
    };
    let (from, to) = ends(diagram);
    if x < from || x > to || diagram.x.is_empty() {
        return None;
    }
    let at = diagram.nearest(x);
    let mut text = format!("{} {}", axis_name(quick), plain(diagram.x[at], 2));
    let mut lines: Vec<(f64, String)> = diagram
        .series
        .iter()
        .filter(|series| series.share[at] >= 0.001)
        .map(|series| {
            (series.share[at], format!("\n{}  {}", pretty(&series.token), percent(series.share[at])))
        })
        .collect();
    lines.sort_by(|a, b| b.0.total_cmp(&a.0));
    text.extend(lines.into_iter().map(|(_, line)| line));
    for free in &diagram.free {
        if quick.bath.limits.iter().any(|limit| limit.component == free.component) {
            text +=
                &format!("\np{} {:.1}", quick.bath.component(free.component).short(), -free.log10_free[at]);
        }
    }
    Some(text)
}

/// Hatches where solids are present, names them at the top, and returns where the names stand.
fn shade_solids(ui: &Ui, quick: &Quick, transform: &PlotTransform, frame: Rect, named: bool) -> Vec<Rect> {
    let p = palette(ui);
    let painter = ui.painter().with_clip_rect(frame);
    let mut taken = Vec::new();
    let mut row = 0.0;
    for region in &quick.diagram.solids {
        let left = transform.position_from_point(&PlotPoint::new(region.from, 0.0)).x;
        let right = transform.position_from_point(&PlotPoint::new(region.to, 0.0)).x;
        let rect = Rect::from_min_max(pos2(left, frame.top()), pos2(right.max(left + 2.0), frame.bottom()));
        hatch(&painter, rect, Lean::Rising, 9.0, Stroke::new(1.0, p.line));
        if named {
            let text = format!("{} forms", quick.bath.solid_name(region.solid));
            let galley = painter.layout_no_wrap(text, Text::Axis.font(), p.ink2);
            let x = (left + 6.0).min(frame.right() - galley.size().x - 6.0).max(frame.left() + 4.0);
            let at = pos2(x, frame.top() + 5.0 + row);
            let galley_size = galley.size();
            painter.rect_filled(Rect::from_min_size(at, galley_size).expand(2.0), 2.0, p.panel);
            painter.galley(at, galley, p.ink2);
            row += 17.0;
            taken.push(Rect::from_min_size(at, galley_size).expand(3.0));
        }
    }
    taken
}

/// Writes each name at its line, where the line is highest and nothing is written yet.
fn name_lines(ui: &Ui, diagram: &Diagram, transform: &PlotTransform, frame: Rect, mut taken: Vec<Rect>) {
    let p = palette(ui);
    let painter = ui.painter().with_clip_rect(frame);
    for (i, series) in diagram.series.iter().enumerate().filter(|(_, series)| series.peak >= NAMED_PEAK) {
        let galley =
            painter.layout_no_wrap(pretty(&series.token), Text::SmallStrong.font(), Series::new(p, i).colour);
        let size = galley.size();
        let mut order: Vec<usize> = (0..diagram.x.len()).filter(|&k| series.share[k].is_finite()).collect();
        order.sort_by(|&a, &b| series.share[b].total_cmp(&series.share[a]));
        let places = order.iter().take(order.len() / 2 + 1).filter_map(|&k| {
            let point = transform.position_from_point(&PlotPoint::new(diagram.x[k], series.share[k] * 100.0));
            let rect = label_rect(point, size, frame)?;
            (!taken.iter().any(|other| other.intersects(rect))).then_some(rect)
        });
        if let Some(rect) = { places }.next() {
            painter.rect_filled(rect.expand(1.0), 2.0, p.panel.gamma_multiply(0.85));
            painter.galley(rect.min, galley, Color32::PLACEHOLDER);
            taken.push(rect.expand(3.0));
        }
    }
}

/// Just above a point, inside the frame.
fn label_rect(point: Pos2, size: eframe::egui::Vec2, frame: Rect) -> Option<Rect> {
    let above = Align2::CENTER_BOTTOM.anchor_size(point - vec2(0.0, 3.0), size);
    let below = Align2::CENTER_TOP.anchor_size(point + vec2(0.0, 4.0), size);
    let inside = |rect: &Rect| {
        rect.left() > frame.left() + 2.0
            && rect.right() < frame.right() - 2.0
            && rect.top() > frame.top() + 1.0
            && rect.bottom() < frame.bottom()
    };
    [above, below].into_iter().find(inside)
}

/// The limited metal that the strip shows: the basis when it has a limit, else the first limited one.
fn strip_metal(quick: &Quick) -> Option<(usize, Option<&ResolvedLimit>)> {
    let limits = &quick.bath.limits;
    let of_basis = limits.iter().find(|limit| limit.component == quick.diagram.basis.0);
    match of_basis.or_else(|| limits.first()) {
        Some(limit) => Some((limit.component, Some(limit))),
        None => quick.diagram.free.first().map(|free| (free.component, None)),
    }
}

fn strip(quick: &Quick, ui: &mut Ui, height: f32, link: Id) {
    let p = palette(ui);
    let diagram = &quick.diagram;
    let Some((metal, limit)) = strip_metal(quick) else { return };
    let Some(line) = diagram.free.iter().find(|free| free.component == metal) else { return };
    let component = quick.bath.component(metal);
    let (from, to) = ends(diagram);
    let levels = limit.map(|limit| (limit.ceiling.map(f64::log10), limit.floor.map(f64::log10)));
    let (ceiling, floor) = levels.unwrap_or((None, None));
    let finite = line.log10_free.iter().copied().filter(|v| v.is_finite()).chain(ceiling).chain(floor);
    let (low, high) = finite.fold((f64::INFINITY, f64::NEG_INFINITY), |(l, h), v| (l.min(v), h.max(v)));
    let room = 0.12 * (high - low).max(0.8);
    let (low, high) = (low - room, high + room);
    let label = format!("free {}, p{}", component.name, component.short());
    let y = vec![
        AxisHints::new_y()
            .min_thickness(AXIS_WIDTH)
            .label_spacing(Rangef::new(14.0, 22.0))
            .label(label)
            .formatter(|mark, _| plain(-mark.value, 1)),
    ];
    let x = vec![AxisHints::new_x().label_spacing(Rangef::new(14.0, 22.0)).label(axis_name(quick))];
    let tell = |position: &HoverPosition<'_>| hover(diagram, quick, position);
    let (range, set) = marks(quick);
    let shown = plot("free metal", link, diagram, height, p.grid)
        .custom_y_axes(y)
        .custom_x_axes(x)
        .y_grid_spacer(|input| grid(input, 4.0))
        .label_formatter(tell)
        .show(ui, |plot| {
            plot.set_plot_bounds_x(from..=to);
            plot.set_plot_bounds_y(low..=high);
            if let Some((low, high)) = range {
                plot.span(
                    egui_plot::Span::new("", low..=high)
                        .fill(p.accent_soft.gamma_multiply(0.55))
                        .border_width(0.0),
                );
            }
            for stretch in stretches(&diagram.x, &line.log10_free) {
                plot.line(
                    Line::new(format!("free {}", component.name), PlotPoints::Owned(stretch))
                        .color(p.series[0])
                        .width(2.0),
                );
            }
            if let Some(set) = set {
                plot.vline(VLine::new("set point", set).color(p.accent).width(1.5));
            }
        });
    let frame = shown.response.rect;
    shade_solids(ui, quick, &shown.transform, frame, false);
    plates(
        ui,
        p,
        &shown.transform,
        frame,
        (ceiling, floor),
        limit.map_or("", |limit| limit.wall.as_str()),
        component.short(),
    );
}

/// The wall up to its first stop, short enough to stand beside the ceiling; the tank panel has the whole of it.
fn first_clause(wall: &str) -> String {
    const MOST: usize = 44;
    let clause = wall.split(['.', ';', ':', ',']).next().unwrap_or(wall).trim();
    if clause.chars().count() <= MOST {
        return clause.to_lowercase();
    }
    let cut: String = clause.chars().take(MOST).collect();
    format!("{}…", cut.to_lowercase().trim_end())
}

/// Ceiling and floor as hatched plates with their names.
fn plates(
    ui: &Ui,
    p: &Palette,
    transform: &PlotTransform,
    frame: Rect,
    (ceiling, floor): (Option<f64>, Option<f64>),
    wall: &str,
    symbol: &str,
) {
    let painter = ui.painter().with_clip_rect(frame);
    let y_of = |level: f64| transform.position_from_point(&PlotPoint::new(0.0, level)).y;
    let stroke = Stroke::new(1.0, p.limit_plate.gamma_multiply(0.7));
    let edge = Stroke::new(2.0, p.limit_plate);
    let name = |text: String, corner: Pos2, anchor: Align2| {
        let galley = painter.layout(text, Text::SmallStrong.font(), p.limit_plate, frame.width() - 16.0);
        let rect = anchor.anchor_size(corner, galley.size());
        painter.rect_filled(rect.expand(2.0), 2.0, p.panel);
        painter.galley(rect.min, galley, p.limit_plate);
    };
    if let Some(level) = ceiling {
        let y = y_of(level);
        hatch(&painter, Rect::from_min_max(frame.min, pos2(frame.right(), y)), Lean::Rising, 7.0, stroke);
        painter.hline(frame.x_range(), y, edge);
        let of = if wall.is_empty() { String::new() } else { format!(", {}", first_clause(wall)) };
        name(
            format!("ceiling p{symbol} {}{of}", plain(-level, 1)),
            pos2(frame.right() - 6.0, y - 4.0),
            Align2::RIGHT_BOTTOM,
        );
    }
    if let Some(level) = floor {
        let y = y_of(level);
        hatch(&painter, Rect::from_min_max(pos2(frame.left(), y), frame.max), Lean::Falling, 7.0, stroke);
        painter.hline(frame.x_range(), y, edge);
        name(
            format!("floor p{symbol} {}", plain(-level, 1)),
            pos2(frame.left() + 6.0, y + 4.0),
            Align2::LEFT_TOP,
        );
    }
}
