//! Draws a map of free metal or of the excess over pH and dose: lines of equal value, hatched where a limit is crossed.

use super::palette::{ACCENT, FRAME, INK, INK_SOFT, LIMIT};
use super::pane::{Pane, TICK, numbered, ticks};
use super::paper::{HEIGHT, Hold, Paper, Type, WIDTH};
use super::{LEFT, RIGHT, head, title};
use crate::bath::Bath;
use crate::quantity::{fixed, plain};
use crate::study::{Map, MapOf};

const TOP: f64 = 96.0;
const BOTTOM: f64 = 562.0;
/// Lines of equal value at most.
const LINES: usize = 9;

/// The map as an SVG document of 960 × 640 pixels.
pub fn map_to_svg(bath: &Bath, map: &Map) -> String {
    let title = title(bath);
    let heading = heading(bath, map);
    let mut paper = Paper::new(&title, &heading);
    head(&mut paper, bath, &title, [&heading, &limit_words(bath, map), ""]);
    let ends = |values: &[f64]| (values[0], values[values.len() - 1]);
    let pane =
        Pane { left: LEFT, right: RIGHT, top: TOP, bottom: BOTTOM, x: ends(&map.ph), y: ends(&map.dose) };
    let up = numbered(ticks(pane.y.0, pane.y.1, 8), |v| v);
    let along = numbered(ticks(pane.x.0, pane.x.1, 12), |v| v);
    pane.grid(&mut paper, &up, &along.iter().map(|(x, _)| *x).collect::<Vec<_>>());
    pane.clip(&mut paper, "map");
    for (hatch, crossed) in crossed(bath, map) {
        hatched(&mut paper, &pane, map, hatch, crossed);
    }
    for (level, words) in levels(bath, map) {
        for line in map.contour(level) {
            paper.path(&path(&pane, &line), (INK_SOFT, ""), 1.0);
            label(&mut paper, &pane, &line, &words, Type::plain(12.0, INK_SOFT));
        }
    }
    for (level, words) in limits(bath, map) {
        for line in map.contour(level) {
            paper.path(&path(&pane, &line), (LIMIT, ""), 2.6);
            label(&mut paper, &pane, &line, words, Type::bold(13.0, LIMIT));
        }
    }
    paper.close();
    pane.edge(&mut paper);
    standing(&mut paper, &pane, bath, map.agent);
    for (x, text) in along {
        paper.line((pane.px(x), pane.bottom), (pane.px(x), pane.bottom + 4.0), FRAME, 1.0);
        paper.text((pane.px(x), pane.bottom + 18.0), Hold::Middle, TICK, &text);
    }
    let axis = Type::bold(13.0, INK_SOFT);
    paper.text((pane.right, pane.bottom + 40.0), Hold::End, axis, "pH");
    let product = &bath.agents[map.agent].product.name;
    paper.upward((24.0, 0.5 * (TOP + BOTTOM)), axis, &axis.fit(&format!("dose of {product}, g/L"), 440.0));
    let remark = Type::plain(12.0, INK_SOFT);
    let words = "Hatched: a limit is crossed. Diamond: set point and dose of today, with the operating range of the pH.";
    paper.text((24.0, HEIGHT - 12.0), Hold::Start, remark, &remark.fit(words, WIDTH - 48.0));
    paper.finish()
}

fn heading(bath: &Bath, map: &Map) -> String {
    let what = match map.of {
        MapOf::Free(component) => {
            let component = bath.component(component);
            format!("Free {} (p{})", component.name, component.short())
        }
        MapOf::Excess => "Share of the nearest limit".to_owned(),
    };
    let temperature = plain(bath.project.tank.temperature_c.set, 1);
    let activity = bath.project.activity.name();
    format!("{what} over pH and dose · {temperature} °C · ionic activity: {activity}")
}

/// Ceiling and floor of the metal, or the wall itself, as levels of the map.
fn limits(bath: &Bath, map: &Map) -> Vec<(f64, &'static str)> {
    match map.of {
        MapOf::Excess => vec![(0.0, "limit")],
        MapOf::Free(component) => bath
            .limits
            .iter()
            .filter(|limit| limit.component == component)
            .flat_map(|limit| {
                [limit.ceiling.map(|c| (c.log10(), "ceiling")), limit.floor.map(|f| (f.log10(), "floor"))]
            })
            .flatten()
            .collect(),
    }
}

fn limit_words(bath: &Bath, map: &Map) -> String {
    let MapOf::Free(component) = map.of else { return String::new() };
    let words = |(level, name): (f64, &str)| {
        format!("{name} p{} {}", bath.component(component).short(), fixed(-level, 1))
    };
    limits(bath, map).into_iter().map(words).collect::<Vec<_>>().join(", ")
}

/// Hatch and test of each region where a limit is crossed.
fn crossed(bath: &Bath, map: &Map) -> Vec<(&'static str, impl Fn(f64) -> bool + use<>)> {
    limits(bath, map)
        .into_iter()
        .map(|(level, name)| {
            let floor = name == "floor";
            let hatch = if floor { "url(#floor)" } else { "url(#ceiling)" };
            (hatch, move |value: f64| if floor { value < level } else { value > level })
        })
        .collect()
}

/// Fills the cells whose value is crossed, each row in runs.
fn hatched(paper: &mut Paper, pane: &Pane, map: &Map, hatch: &str, crossed: impl Fn(f64) -> bool) {
    let (columns, rows) = (map.ph.len(), map.dose.len());
    let middle = |values: &[f64], i: usize| {
        let last = values.len() - 1;
        let low = if i == 0 { values[0] } else { 0.5 * (values[i - 1] + values[i]) };
        let high = if i == last { values[last] } else { 0.5 * (values[i] + values[i + 1]) };
        (low, high)
    };
    for row in 0..rows {
        let (low, high) = middle(&map.dose, row);
        let mut start = None;
        for column in 0..=columns {
            match (column < columns && crossed(map.at(column, row)), start) {
                (true, None) => start = Some(column),
                (false, Some(from)) => {
                    let (left, right) = (middle(&map.ph, from).0, middle(&map.ph, column - 1).1);
                    let at = (pane.px(left), pane.py(high));
                    paper.rectangle(at, (pane.px(right) - at.0, pane.py(low) - at.1), hatch);
                    start = None;
                }
                _ => {}
            }
        }
    }
}

/// Levels of the thin lines with their words: whole p-units, or shares of the limit.
fn levels(bath: &Bath, map: &Map) -> Vec<(f64, String)> {
    let Some((low, high)) = map.span() else { return Vec::new() };
    let step = ((high - low) / LINES as f64).ceil().max(1.0);
    let first = (low / step).ceil() as i64;
    let last = (high / step).floor() as i64;
    let whole = (first..=last).map(|n| n as f64 * step);
    match map.of {
        MapOf::Free(component) => {
            let short = bath.component(component).short();
            whole.map(|level| (level, format!("p{short} {}", fixed(-level, 0)))).collect()
        }
        MapOf::Excess => whole
            .filter(|level| *level != 0.0)
            .map(|level| (level, crate::quantity::significant(10f64.powf(level), 1) + " ×"))
            .collect(),
    }
}

fn path(pane: &Pane, line: &[(f64, f64)]) -> String {
    let step = |(i, point): (usize, &(f64, f64))| {
        let (x, y) = pane.at(*point);
        format!("{}{x:.1} {y:.1}", if i == 0 { 'M' } else { 'L' })
    };
    line.iter().enumerate().map(step).collect::<Vec<_>>().join(" ")
}

/// Names a line in its middle, when it is long enough to be worth a name.
fn label(paper: &mut Paper, pane: &Pane, line: &[(f64, f64)], words: &str, look: Type) {
    let points: Vec<(f64, f64)> = line.iter().map(|point| pane.at(*point)).collect();
    let length: f64 = points.windows(2).map(|w| (w[1].0 - w[0].0).hypot(w[1].1 - w[0].1)).sum();
    if length > 3.0 * look.width(words) {
        paper.plate(points[points.len() / 2], look, words);
    }
}

/// Where the bath stands: set point and dose, with the operating range of the pH.
fn standing(paper: &mut Paper, pane: &Pane, bath: &Bath, agent: usize) {
    let Some(range) = bath.ph() else { return };
    let y = pane.py(bath.project.agents[agent].dose_g_l);
    let (left, right) = (pane.px(range.low.max(pane.x.0)), pane.px(range.high.min(pane.x.1)));
    paper.line((left, y), (right, y), ACCENT, 3.0);
    for x in [left, right] {
        paper.line((x, y - 7.0), (x, y + 7.0), ACCENT, 2.0);
    }
    paper.diamond((pane.px(range.set), y), INK);
}
