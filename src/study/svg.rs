//! Draws a distribution diagram as a picture for reports: shares above, free metals with their limits below, on white
//! paper, in one self-contained SVG text.
//!
//! Nothing is told by colour alone: series differ by dash and carry their names, limits by the direction of their
//! hatch, solids by their pattern.

mod chart;
mod mark;
mod palette;
mod pane;
mod paper;
#[cfg(test)]
pub(super) mod sample;
mod shares;
pub(super) mod shift;
mod strip;

pub use chart::map_to_svg;

use super::{Axis, Diagram};
use crate::bath::Bath;
use crate::quantity::plain;
use mark::Scene;
use palette::{ACCENT, FRAME, INK, INK_SOFT};
use pane::{Pane, TICK, numbered, ticks};
use paper::{HEIGHT, Hold, Paper, Type, WIDTH};
use strip::strips;

/// Edges of the panes.
const LEFT: f64 = 84.0;
const RIGHT: f64 = WIDTH - 24.0;
const TOP: f64 = 126.0;
const BOTTOM: f64 = 562.0;
/// Room between panes.
const BETWEEN: f64 = 12.0;
/// Height of a strip when there are none, one, two or three.
const STRIP: [f64; strip::MOST + 1] = [0.0, 132.0, 92.0, 66.0];

/// The diagram as an SVG document of 960 × 640 pixels.
pub fn to_svg(bath: &Bath, diagram: &Diagram) -> String {
    let scene = Scene::new(bath, diagram);
    let (title, heading, doses) = (title(bath), heading(bath, diagram), doses(bath, diagram));
    let reading = scene.mark.as_ref().map(|mark| mark.reading(diagram)).unwrap_or_default();
    let mut paper = Paper::new(&title, &format!("{heading}. {doses} {reading}"));
    head(&mut paper, bath, &title, [&heading, &doses, &reading]);

    let ends = (diagram.x.first().copied().unwrap_or(0.0), diagram.x.last().copied().unwrap_or(1.0));
    let x = if ends.1 > ends.0 { ends } else { (ends.0, ends.0 + 1.0) };
    let strips = strips(bath, diagram);
    let shown = strips.len().min(strip::MOST);
    let height = STRIP[shown];
    let upper_bottom = BOTTOM - shown as f64 * (height + BETWEEN);
    let shares = Pane {
        left: LEFT,
        right: RIGHT,
        top: TOP,
        bottom: upper_bottom,
        x,
        y: (0.0, 100.0 + shares::HEADROOM),
    };
    let small = shares::draw(&mut paper, &scene, &shares);
    let mut top = shares.bottom;
    for strip in &strips[..shown] {
        if let Some(mark) = &scene.mark {
            let at = shares.px(mark.set);
            paper.line((at, top), (at, top + BETWEEN), ACCENT, 1.6);
        }
        top += BETWEEN;
        let y = strip.span(&scene, height);
        strip.draw(&mut paper, &scene, &Pane { top, bottom: top + height, y, ..shares });
        top += height;
    }
    if let Some(mark) = &scene.mark {
        mark.flag(&mut paper, &shares);
    }
    foot(&mut paper, &scene, &Pane { bottom: BOTTOM, ..shares });
    let left_out: Vec<&str> = strips[shown..].iter().map(|s| bath.component(s.component).short()).collect();
    remarks(&mut paper, diagram, &small, &left_out);
    paper.finish()
}

/// Title and the lines under it.
fn head(paper: &mut Paper, bath: &Bath, title: &str, [heading, doses, reading]: [&str; 3]) {
    let mut right = RIGHT;
    if bath.project.invented {
        let (look, words) = (Type::bold(13.0, INK), "demo bath, invented numbers");
        let width = look.width(words) + 16.0;
        right -= width;
        paper.outline((right, 16.0), (width, 24.0), INK);
        paper.text((right + width / 2.0, 32.5), Hold::Middle, look, words);
        right -= 16.0;
    }
    let look = Type::bold(20.0, INK);
    paper.text((24.0, 34.0), Hold::Start, look, &look.fit(title, right - 24.0));
    let lines = [
        (Type::plain(14.0, INK), heading),
        (Type::plain(13.0, INK_SOFT), doses),
        (Type::plain(13.0, INK), reading),
    ];
    let written = lines.into_iter().filter(|(_, text)| !text.is_empty());
    for (row, (look, text)) in written.enumerate() {
        let y = 57.0 + 19.5 * row as f64;
        paper.text((24.0, y), Hold::Start, look, &look.fit(text, RIGHT - 24.0));
    }
}

fn title(bath: &Bath) -> String {
    let project = &bath.project;
    match (project.place.trim(), project.name.trim()) {
        ("", "") => "Bath without a name".to_owned(),
        ("", name) => name.to_owned(),
        (place, name) => format!("{place}: {name}"),
    }
}

fn heading(bath: &Bath, diagram: &Diagram) -> String {
    let project = &bath.project;
    let name = &bath.component(diagram.basis.0).name;
    let (over, ph) = match (diagram.axis, bath.ph_set()) {
        (Axis::Ph { .. }, _) => ("pH", String::new()),
        (Axis::Dose { .. }, Some(set)) => ("the dose", format!(" · pH {}", plain(set, 2))),
        (Axis::Dose { .. }, None) => ("the dose", " · pH as it comes".to_owned()),
    };
    let temperature = plain(project.tank.temperature_c.set, 1);
    let activity = project.activity.name();
    format!("Where the {name} is, across {over}{ph} · {temperature} °C · ionic activity: {activity}")
}

fn doses(bath: &Bath, diagram: &Diagram) -> String {
    let moved = match diagram.axis {
        Axis::Dose { agent, .. } => Some(agent),
        Axis::Ph { .. } => None,
    };
    let held = bath.agents.iter().zip(bath.doses()).enumerate().filter(|(i, _)| Some(*i) != moved);
    let words: Vec<String> =
        held.map(|(_, (agent, dose))| format!("{} {} g/L", agent.product.name, plain(dose, 2))).collect();
    if words.is_empty() { String::new() } else { format!("With {} dosed.", words.join(", ")) }
}

/// Numbers and name of the axis along the bottom, and the operating range.
fn foot(paper: &mut Paper, scene: &Scene, pane: &Pane) {
    for (x, text) in numbered(ticks(pane.x.0, pane.x.1, 12), |v| v) {
        paper.line((pane.px(x), pane.bottom), (pane.px(x), pane.bottom + 4.0), FRAME, 1.0);
        paper.text((pane.px(x), pane.bottom + 18.0), Hold::Middle, TICK, &text);
    }
    let words = match scene.diagram.axis {
        Axis::Ph { .. } => "pH".to_owned(),
        Axis::Dose { agent, .. } => {
            let product = scene.bath.agents.get(agent).map_or("agent", |agent| agent.product.name.as_str());
            format!("dose of {product}, g/L")
        }
    };
    let look = Type::bold(13.0, INK_SOFT);
    let words = look.fit(&words, 600.0);
    let bracket = scene.mark.as_ref().and_then(|mark| mark.bracket(paper, pane, pane.bottom + 30.0));
    let beside = bracket.is_some_and(|(_, end)| end + 20.0 > pane.right - look.width(&words));
    let (x, hold) = if beside { (pane.left, Hold::Start) } else { (pane.right, Hold::End) };
    paper.text((x, pane.bottom + 40.0), hold, look, &words);
}

/// What the picture does not show.
fn remarks(paper: &mut Paper, diagram: &Diagram, small: &[String], left_out: &[&str]) {
    let mut words = Vec::new();
    if let Some((count, error)) = &diagram.gaps {
        words.push(format!("{count} of {} points have no answer: {error}", diagram.x.len()));
    }
    if !small.is_empty() {
        words.push(format!("Drawn without a name, under 5 %: {}", small.join(", ")));
    }
    if !left_out.is_empty() {
        words.push(format!("No room for the limits of {}", left_out.join(", ")));
    }
    words.push("Not drawn: what stays under 1 %".to_owned());
    let look = Type::plain(12.0, INK_SOFT);
    paper.text((24.0, HEIGHT - 12.0), Hold::Start, look, &look.fit(&words.join(". "), WIDTH - 48.0));
}

#[cfg(test)]
mod tests;
