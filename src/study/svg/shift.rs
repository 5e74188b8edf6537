//! Draws a shift forecast for reports: free metal against time with its operating range and 95 % band between the
//! hatched plates of ceiling and floor, what is added when, and the dose in the tank.

use super::palette::{ACCENT, FRAME, HATCH_CEILING, HATCH_FLOOR, INK_SOFT, LIMIT, WHITE, pen};
use super::pane::{Pane, TICK, at_least_two, numbered, path, ticks};
use super::paper::{HEIGHT, Hold, Paper, Type, WIDTH};
use super::{BETWEEN, BOTTOM, LEFT, RIGHT, head, title};
use crate::bath::{Running, Wall};
use crate::quantity::{fixed, p_value, plain};
use crate::study::labels::{Area, quietest};
use crate::study::shift::{Forecast, MetalAt, TopUpPlan, crossing_words};

/// Top of the upper pane; what is added stands above it.
const TOP: f64 = 158.0;
/// Height of the pane of the dose.
const DOSE: f64 = 86.0;
/// Limits that the picture has room for.
const MOST: usize = 3;
/// Additions that are written out.
const WRITTEN: usize = 14;
/// Pixels that a plate needs for its words.
const PLATE: f64 = 24.0;
/// How far (log10) the bath left alone is followed beyond the limits.
const BEYOND: f64 = 0.8;
const ON_PLATE: Type = Type::bold(13.0, LIMIT);

/// A number of a metal at a moment.
type Value = fn(&MetalAt) -> f64;

/// Both courses as an SVG document of 960 × 640 pixels.
pub fn to_svg(running: &Running, alone: &Forecast, plan: &TopUpPlan) -> String {
    let bath = &running.bath;
    let name = title(bath);
    let product = &bath.agents[plan.agent].product.name;
    let hours = running.steps() as f64 * running.step_h;
    let heading = format!(
        "Free metal through {} shifts of {} h, with additions of {product}",
        running.shifts,
        plain(hours / running.shifts as f64, 2)
    );
    let key = "solid: with additions · shaded: operating range, paler: 95 % · dashed: left alone, dotted: its 95 % edge";
    let reading = match alone.crossings.first() {
        Some(crossing) => format!("Left alone, {}", crossing_words(running, crossing)),
        None => "Left alone, every limit holds".to_owned(),
    };
    let mut paper = Paper::new(&name, &format!("{heading}. {reading}. {}", added(running, plan)));
    head(&mut paper, bath, &name, [&heading, key, &reading]);
    let x = (0.0, hours);
    let shown = bath.limits.len().min(MOST);
    let room = BOTTOM - TOP - DOSE - BETWEEN * shown as f64;
    let height = room / shown.max(1) as f64;
    let mut top = TOP;
    for limit in 0..shown {
        let y = span(running, alone, plan, limit, height);
        let pane = Pane { left: LEFT, right: RIGHT, top, bottom: top + height, x, y };
        metal(&mut paper, running, &pane, alone, plan, limit);
        top += height + BETWEEN;
    }
    let lowest = Pane { left: LEFT, right: RIGHT, top: BOTTOM - DOSE, bottom: BOTTOM, x, y: (0.0, 1.0) };
    dose(&mut paper, running, lowest, plan);
    above(&mut paper, &Pane { top: TOP, ..lowest }, plan);
    foot(&mut paper, running, &lowest);
    let mut words = vec![
        "Worst of the operating range counts; solids that must not form are kept in solution".to_owned(),
    ];
    if bath.limits.len() > shown {
        words.push(format!("No room for {} more limits", bath.limits.len() - shown));
    }
    let look = Type::plain(12.0, INK_SOFT);
    paper.text((24.0, HEIGHT - 12.0), Hold::Start, look, &look.fit(&words.join(". "), WIDTH - 48.0));
    paper.finish()
}

/// What is added, for a reader who hears the picture.
fn added(running: &Running, plan: &TopUpPlan) -> String {
    let top_ups = plan.top_ups.iter().map(|t| format!("{} after {} h", t.measured.amount, plain(t.hour, 1)));
    let bail_outs = plan
        .bail_outs
        .iter()
        .map(|b| format!("bail-out of {} L after {} h", fixed(b.litres, 0), plain(b.hour, 1)));
    let all: Vec<String> = top_ups.chain(bail_outs).collect();
    match (all.is_empty(), plan.fails_from) {
        (_, Some(hour)) => format!("Nothing holds from hour {} of {}", plain(hour, 1), running.steps()),
        (true, None) => "No addition is needed".to_owned(),
        (false, None) => format!("Additions: {}", all.join(", ")),
    }
}

/// Ends of the upright axis: limits and the planned course in view, the bath left alone a little beyond.
fn span(running: &Running, alone: &Forecast, plan: &TopUpPlan, limit: usize, height: f64) -> (f64, f64) {
    let own = &running.bath.limits[limit];
    let limits = [own.ceiling, own.floor].into_iter().flatten().map(f64::log10);
    let planned = plan.forecast.points.iter().flat_map(|point| {
        let metal = &point.metals[limit];
        [metal.most_95, metal.least_95]
    });
    let ends = |values: &mut dyn Iterator<Item = f64>| {
        values
            .filter(|value| value.is_finite())
            .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), v| (low.min(v), high.max(v)))
    };
    let (low, high) = ends(&mut limits.chain(planned));
    let others = ends(&mut alone.points.iter().map(|point| point.metals[limit].log10_free));
    if !low.is_finite() {
        return (-8.0, -6.0);
    }
    let (low, high) = (low.min(others.0.max(low - BEYOND)), high.max(others.1.min(high + BEYOND)));
    let pad = (high - low).max(0.3) * PLATE / (height - 2.0 * PLATE).max(PLATE);
    (low - pad, high + pad)
}

fn metal(
    paper: &mut Paper,
    running: &Running,
    pane: &Pane,
    alone: &Forecast,
    plan: &TopUpPlan,
    limit: usize,
) {
    let own = &running.bath.limits[limit];
    let symbol = running.bath.component(own.component).short();
    let most = (pane.height() / 26.0) as usize;
    ground(paper, running, pane, &numbered(at_least_two(pane.y.0, pane.y.1, most), |v| -v));
    plates(paper, pane, own.ceiling, own.floor);
    let hours = |forecast: &Forecast| forecast.points.iter().map(|point| point.hour).collect::<Vec<f64>>();
    let of = |forecast: &Forecast, value: Value| {
        forecast.points.iter().map(|point| value(&point.metals[limit])).collect::<Vec<f64>>()
    };
    let with = &plan.forecast;
    pane.clip(paper, &format!("shift{limit}"));
    let x = hours(with);
    let ribbons: [[Value; 2]; 2] = [[|m| m.most_95, |m| m.least_95], [|m| m.most, |m| m.least]];
    for edges in ribbons {
        let [upper, lower] = edges.map(|edge| of(with, edge));
        paper.tint(&ribbon(pane, &x, &upper, &lower), pen(0).0, 0.2);
    }
    let x_alone = hours(alone);
    let edges: [(Option<f64>, Value); 2] = [(own.ceiling, |m| m.most_95), (own.floor, |m| m.least_95)];
    for edge in edges.into_iter().filter_map(|(level, edge)| level.map(|_| edge)) {
        paper.path(&path(pane, &x_alone, &of(alone, edge)), (pen(1).0, "1.5 4"), 1.6);
    }
    let left = path(pane, &x_alone, &of(alone, |m| m.log10_free));
    paper.path(&left, (WHITE, ""), 3.4);
    paper.path(&left, (pen(1).0, pen(1).1), 2.2);
    let free = of(with, |m| m.log10_free);
    let line = path(pane, &x, &free);
    paper.path(&line, (WHITE, ""), 5.0);
    paper.path(&line, (pen(0).0, ""), 2.6);
    paper.close();
    let ends = alone.crossings.iter().filter_map(|crossing| {
        let level = match crossing.wall {
            Wall::Ceiling(i) if i == limit => own.ceiling,
            Wall::Floor(i) if i == limit => own.floor,
            _ => None,
        };
        Some((crossing.hour_95?, level?.log10()))
    });
    for end in ends {
        paper.dot(pane.at(end), pen(1).0);
    }
    let mut taken: Vec<Area> = Vec::new();
    let limits = [(own.ceiling, "ceiling", 1.0), (own.floor, "floor", -1.0)];
    for (level, kind, side) in limits.into_iter().filter_map(|(level, kind, side)| Some((level?, kind, side)))
    {
        let comma = if own.wall.is_empty() { "" } else { ", " };
        let words = format!("{kind} p{symbol} {}{comma}{}", p_value(level), own.wall);
        let words = ON_PLATE.fit(&words, 420.0);
        let size = pane.units(ON_PLATE.width(&words) + 10.0, 18.0);
        let y = level.log10() + side * pane.units(0.0, PLATE / 2.0).1;
        let frame = pane.frame();
        let way = frame.right - frame.left - size.0;
        let rooms = (0..=12).map(|i| {
            Area::about(frame.left + size.0 / 2.0 + way * f64::from(i) / 12.0, y, size).moved_into(frame)
        });
        if let Some(area) = quietest(&x, &[&free], rooms, &taken) {
            paper.plate(pane.at(area.middle()), ON_PLATE, &words);
            taken.push(area);
        }
    }
    pane.edge(paper);
    let name = if pane.height() > 110.0 { format!("p{symbol}, up: more free") } else { format!("p{symbol}") };
    paper.upward((24.0, (pane.top + pane.bottom) / 2.0), Type::plain(13.0, INK_SOFT), &name);
}

fn ground(paper: &mut Paper, running: &Running, pane: &Pane, marks: &[(f64, String)]) {
    pane.grid(paper, marks, &ticks(pane.x.0, pane.x.1, 12).0);
    let length = running.steps_per_shift as f64 * running.step_h;
    for shift in 1..running.shifts {
        let x = pane.px(shift as f64 * length);
        paper.line((x, pane.top), (x, pane.bottom), FRAME, 1.2);
    }
}

fn plates(paper: &mut Paper, pane: &Pane, ceiling: Option<f64>, floor: Option<f64>) {
    let width = pane.right - pane.left;
    if let Some(y) = ceiling.map(|level| pane.py(level.log10())) {
        paper.rectangle((pane.left, pane.top), (width, y - pane.top), HATCH_CEILING);
        paper.line((pane.left, y), (pane.right, y), LIMIT, 2.4);
    }
    if let Some(y) = floor.map(|level| pane.py(level.log10())) {
        paper.rectangle((pane.left, y), (width, pane.bottom - y), HATCH_FLOOR);
        paper.line((pane.left, y), (pane.right, y), LIMIT, 2.4);
    }
}

/// The area between two curves as a closed path.
fn ribbon(pane: &Pane, x: &[f64], upper: &[f64], lower: &[f64]) -> String {
    let there = x.iter().zip(upper).map(|(x, y)| (*x, *y));
    let back = x.iter().zip(lower).rev().map(|(x, y)| (*x, *y));
    let mut d = String::new();
    for point in there.chain(back).filter(|(_, y)| y.is_finite()) {
        let (x, y) = pane.at(point);
        d.push_str(&format!("{}{x:.1} {y:.1} ", if d.is_empty() { 'M' } else { 'L' }));
    }
    if d.is_empty() { d } else { d + "Z" }
}

/// The product in the tank through the hours.
fn dose(paper: &mut Paper, running: &Running, pane: Pane, plan: &TopUpPlan) {
    let x: Vec<f64> = plan.forecast.points.iter().map(|point| point.hour).collect();
    let y: Vec<f64> = plan.forecast.points.iter().map(|point| point.contents.doses[plan.agent]).collect();
    let (low, high) = y.iter().fold((f64::INFINITY, 0.0f64), |(low, high), v| (low.min(*v), high.max(*v)));
    let pad = ((high - low) * 0.2).max(0.05 * high).max(1e-3);
    let pane = Pane { y: ((low - pad).max(0.0), high + pad), ..pane };
    ground(paper, running, &pane, &numbered(at_least_two(pane.y.0, pane.y.1, 3), |v| v));
    pane.clip(paper, "dose");
    paper.path(&path(&pane, &x, &y), (pen(2).0, ""), 2.4);
    paper.close();
    pane.edge(paper);
    paper.upward((24.0, (pane.top + pane.bottom) / 2.0), Type::plain(13.0, INK_SOFT), "dose, g/L");
}

/// Marks of what is added, over the uppermost pane.
fn above(paper: &mut Paper, pane: &Pane, plan: &TopUpPlan) {
    let look = Type::bold(12.0, ACCENT);
    let mut end = f64::NEG_INFINITY;
    let written = plan.top_ups.len() + plan.bail_outs.len() <= WRITTEN;
    let top_ups = plan.top_ups.iter().map(|t| (t.hour, t.measured.amount.clone(), false));
    let bail_outs =
        plan.bail_outs.iter().map(|b| (b.hour, format!("bail-out {} L", fixed(b.litres, 0)), true));
    let mut all: Vec<(f64, String, bool)> = top_ups.chain(bail_outs).collect();
    all.sort_by(|a, b| a.0.total_cmp(&b.0));
    for (hour, words, bail_out) in all {
        let x = pane.px(hour);
        if bail_out {
            paper.diamond((x, pane.top - 8.0), ACCENT);
        } else {
            paper.arrow_down((x, pane.top - 2.0), ACCENT);
        }
        if written {
            paper.line((x, pane.top), (x, BOTTOM), ACCENT, 0.7);
        }
        let width = look.width(&words);
        let start = (x - width / 2.0).clamp(pane.left, pane.right - width);
        if written && start > end + 6.0 {
            paper.text((start, pane.top - 18.0), Hold::Start, look, &words);
            end = start + width;
        }
    }
}

/// Hours and shifts under the lowest pane.
fn foot(paper: &mut Paper, running: &Running, pane: &Pane) {
    for (x, text) in numbered(ticks(pane.x.0, pane.x.1, 12), |v| v) {
        paper.line((pane.px(x), pane.bottom), (pane.px(x), pane.bottom + 4.0), FRAME, 1.0);
        paper.text((pane.px(x), pane.bottom + 18.0), Hold::Middle, TICK, &text);
    }
    let length = running.steps_per_shift as f64 * running.step_h;
    let look = Type::plain(13.0, INK_SOFT);
    let wide = pane.px(length) - pane.px(0.0);
    for shift in 0..running.shifts {
        let words = format!("shift {}", shift + 1);
        if look.width(&words) + 8.0 < wide {
            let middle = pane.px((shift as f64 + 0.5) * length);
            paper.text((middle, pane.bottom + 38.0), Hold::Middle, look, &words);
        }
    }
    paper.text((pane.right, pane.bottom + 56.0), Hold::End, Type::bold(13.0, INK_SOFT), "running hours");
}
