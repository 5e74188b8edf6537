//! The strips under the shares: free metal along the same axis, more of it upwards, with the limits as hatched plates.

use super::mark::Scene;
use super::palette::{HATCH_CEILING, HATCH_FLOOR, INK, INK_SOFT, LIMIT, WHITE, pen};
use super::pane::{Pane, at_least_two, numbered, path};
use super::paper::{Paper, Type};
use crate::bath::Bath;
use crate::quantity::{fixed, p_value};
use crate::study::Diagram;
use crate::study::labels::{Area, quietest};

/// Strips that the picture has room for.
pub const MOST: usize = 3;

/// Look of the words on a plate.
const ON_PLATE: Type = Type::bold(13.0, LIMIT);
/// Pixels that a plate needs for its words.
const PLATE: f64 = 22.0;
/// Decades that a strip shows when the line covers as many.
const LEAST: f64 = 2.5;
/// Widest words on a plate, pixels.
const WIDEST: f64 = 420.0;

/// A metal with its line and limits, in log10 of mol/L.
pub struct Strip<'a> {
    /// System index.
    pub component: usize,
    free: &'a [f64],
    ceilings: Vec<(f64, &'a str)>,
    floors: Vec<(f64, &'a str)>,
}

/// Metals that have a limit, that of the picture first; without any limit the metal of the picture; for the picture of
/// an agent in a bath without limits, all metals.
pub fn strips<'a>(bath: &'a Bath, diagram: &'a Diagram) -> Vec<Strip<'a>> {
    let basis = diagram.basis.0;
    let has_limit = |component: usize| bath.limits.iter().any(|limit| limit.component == component);
    let mut chosen: Vec<_> = diagram.free.iter().filter(|line| has_limit(line.component)).collect();
    if chosen.is_empty() {
        chosen = diagram.free.iter().filter(|line| line.component == basis).collect();
    }
    if chosen.is_empty() {
        chosen = diagram.free.iter().collect();
    }
    chosen.sort_by_key(|line| line.component != basis);
    let levels = |component: usize, level: fn(&crate::bath::ResolvedLimit) -> Option<f64>| {
        let own = bath.limits.iter().filter(move |limit| limit.component == component);
        own.filter_map(|limit| Some((level(limit)?.log10(), limit.wall.as_str()))).collect()
    };
    chosen
        .into_iter()
        .map(|line| Strip {
            component: line.component,
            free: &line.log10_free,
            ceilings: levels(line.component, |limit| limit.ceiling),
            floors: levels(line.component, |limit| limit.floor),
        })
        .collect()
}

impl Strip<'_> {
    /// Ends of the upright axis for a strip so many pixels high: limits and the operating range in view, with room for
    /// the words on the plates.
    pub fn span(&self, scene: &Scene, height: f64) -> (f64, f64) {
        let (x, mark) = (&scene.diagram.x, scene.mark.as_ref());
        let limits = self.ceilings.iter().chain(&self.floors).map(|(level, _)| *level);
        let range = mark.map(|mark| mark.range.unwrap_or((mark.set, mark.set)));
        let operating = x
            .iter()
            .zip(self.free)
            .filter_map(|(x, y)| range.is_some_and(|(low, high)| (low..=high).contains(x)).then_some(*y));
        let at_set = scene.at_mark(self.free).map(|(_, y)| y);
        let ends = |values: &mut dyn Iterator<Item = f64>| {
            values
                .filter(|v| v.is_finite())
                .fold((f64::INFINITY, f64::NEG_INFINITY), |(low, high), v| (low.min(v), high.max(v)))
        };
        let all = ends(&mut self.free.iter().copied());
        let mut focus = ends(&mut limits.chain(operating).chain(at_set));
        let free_of_limits = self.ceilings.is_empty() && self.floors.is_empty();
        if free_of_limits && all.0.is_finite() {
            focus = all;
        }
        if !focus.0.is_finite() {
            focus = (-8.0, -6.0);
        }
        let more = (LEAST - (focus.1 - focus.0)).max(0.0) / 2.0;
        if all.0.is_finite() {
            let (low, high) = (all.0.max(focus.0 - more), all.1.min(focus.1 + more));
            focus = (focus.0.min(low), focus.1.max(high));
        }
        let span = (focus.1 - focus.0).max(0.4);
        let pad = span * (PLATE / (height - 2.0 * PLATE).max(PLATE)).max(0.2);
        (focus.0 - pad, focus.1 + pad)
    }

    /// Draws the strip.
    pub fn draw(&self, paper: &mut Paper, scene: &Scene, pane: &Pane) {
        let symbol = scene.bath.component(self.component).short();
        let most = (pane.height() / 26.0) as usize;
        scene.ground(paper, pane, &numbered(at_least_two(pane.y.0, pane.y.1, most), |v| -v));
        self.plates(paper, pane);
        let x = &scene.diagram.x;
        pane.clip(paper, &format!("strip{}", self.component));
        let d = path(pane, x, self.free);
        paper.path(&d, (WHITE, ""), 5.0);
        paper.path(&d, (pen(0).0, ""), 2.6);
        paper.close();
        let mut taken = scene.taken(pane);
        let mut write = |paper: &mut Paper, look: Type, words: &str, rooms: Vec<Area>| {
            if let Some(area) = quietest(x, &[self.free], rooms, &taken) {
                paper.plate(pane.at(area.middle()), look, words);
                taken.push(area);
            }
        };
        let ceilings = self.ceilings.iter().map(|limit| (limit, "ceiling", 1.0));
        let floors = self.floors.iter().map(|limit| (limit, "floor", -1.0));
        for ((level, wall), kind, side) in ceilings.chain(floors) {
            let comma = if wall.is_empty() { "" } else { ", " };
            let words = format!("{kind} p{symbol} {}{comma}{wall}", p_value(10f64.powf(*level)));
            let words = ON_PLATE.fit(&words, WIDEST);
            let size = pane.units(ON_PLATE.width(&words) + 10.0, 18.0);
            let off = side * pane.units(0.0, PLATE / 2.0).1;
            let rows = [level + off, level - off].into_iter();
            let rooms = rows.flat_map(|y| along(pane, size, y)).collect();
            write(paper, ON_PLATE, &words, rooms);
        }
        if let Some((x, y)) = scene.at_mark(self.free) {
            let look = Type::bold(13.0, INK);
            paper.dot(pane.at((x, y)), pen(0).0);
            let words = format!("p{symbol} {}", fixed(-y, 1));
            let (far, off) = pane.units(look.width(&words) / 2.0 + 14.0, 12.0);
            let spots = [(far, off), (-far, -off), (far, -off), (-far, off), (far, 0.0), (-far, 0.0)];
            let size = pane.units(look.width(&words) + 6.0, 17.0);
            let room = |(dx, dy)| Area::about(x + dx, y + dy, size).moved_into(pane.frame());
            write(paper, look, &words, spots.map(room).to_vec());
        }
        pane.edge(paper);
        let name =
            if pane.height() > 110.0 { format!("p{symbol}, up: more free") } else { format!("p{symbol}") };
        paper.upward((24.0, (pane.top + pane.bottom) / 2.0), Type::plain(13.0, INK_SOFT), &name);
    }

    /// The hatched plates beyond the tightest ceiling and floor, and the edges of all.
    fn plates(&self, paper: &mut Paper, pane: &Pane) {
        let width = pane.right - pane.left;
        if let Some(level) = self.ceilings.iter().map(|limit| limit.0).reduce(f64::min) {
            let y = pane.py(level);
            paper.rectangle((pane.left, pane.top), (width, y - pane.top), HATCH_CEILING);
        }
        if let Some(level) = self.floors.iter().map(|limit| limit.0).reduce(f64::max) {
            let y = pane.py(level);
            paper.rectangle((pane.left, y), (width, pane.bottom - y), HATCH_FLOOR);
        }
        for (level, _) in self.ceilings.iter().chain(&self.floors) {
            paper.line((pane.left, pane.py(*level)), (pane.right, pane.py(*level)), LIMIT, 2.4);
        }
    }
}

/// Rooms at one height, from the right edge to the left.
fn along(pane: &Pane, size: (f64, f64), y: f64) -> impl Iterator<Item = Area> {
    let frame = pane.frame();
    let way = frame.right - frame.left - size.0;
    (0..=12).rev().map(move |i| {
        Area::about(frame.left + size.0 / 2.0 + way * i as f64 / 12.0, y, size).moved_into(frame)
    })
}
