//! The upper pane: the share of the component in each species and solid, with the names at the lines.

use super::mark::Scene;
use super::palette::{INK_SOFT, hatch_solid, pen};
use super::pane::{Pane, TICK, numbered, path, rank, ticks};
use super::paper::{Hold, Paper, Type};
use crate::chemistry::pretty;
use crate::study::labels::{Area, Curve, place, quietest};

/// A series that reaches this share is named at all costs.
pub const NAMED: f64 = 0.05;
/// Per cent under which a line is not drawn, so that the bottom is not a bundle of lines at nothing.
const NOTHING: f64 = 0.05;
/// Size of the names at the lines.
const NAME: f64 = 14.0;
/// Room that a line at 100 % has over it, per cent.
pub const HEADROOM: f64 = 2.0;

/// Draws the pane; gives back the names of small series that found no room.
pub fn draw(paper: &mut Paper, scene: &Scene, pane: &Pane) -> Vec<String> {
    let diagram = scene.diagram;
    let most = if pane.height() > 180.0 { 5 } else { 2 };
    scene.ground(paper, pane, &numbered(ticks(0.0, 100.0, most), |v| v));
    let name = &scene.bath.component(diagram.basis.0).name;
    let words = TICK.fit(&format!("share of {name}, %"), pane.height());
    paper.upward((24.0, (pane.top + pane.bottom) / 2.0), TICK, &words);
    let lines: Vec<Vec<f64>> = diagram.series.iter().map(|series| drawn(&series.share)).collect();
    pane.clip(paper, "shares");
    for (n, (line, series)) in lines.iter().zip(&diagram.series).enumerate().rev() {
        paper.path(&path(pane, &diagram.x, line), pen(n), if series.solid { 4.0 } else { 2.4 });
    }
    paper.close();
    pane.edge(paper);
    for (n, line) in lines.iter().enumerate() {
        if let Some(at) = scene.at_mark(line).filter(|(_, share)| *share >= 1.0) {
            paper.dot(pane.at(at), pen(n).0);
        }
    }
    let mut taken = scene.taken(pane);
    name_solids(paper, scene, pane, &lines, &mut taken);
    name_series(paper, scene, pane, &lines, &taken)
}

/// Shares in per cent, without the stretches where there is next to nothing.
fn drawn(share: &[f64]) -> Vec<f64> {
    let some = |i: usize| share.get(i).is_some_and(|v| v * 100.0 >= NOTHING);
    let near = |i: usize| some(i) || some(i + 1) || i.checked_sub(1).is_some_and(some);
    share.iter().enumerate().map(|(i, v)| if near(i) { v * 100.0 } else { f64::NAN }).collect()
}

/// The names of the solids within their stretches, each after a patch of its hatch.
fn name_solids(paper: &mut Paper, scene: &Scene, pane: &Pane, lines: &[Vec<f64>], taken: &mut Vec<Area>) {
    let look = Type::plain(13.0, INK_SOFT);
    let swatch = (26.0, 13.0);
    let curves: Vec<&[f64]> = lines.iter().map(Vec::as_slice).collect();
    let regions = &scene.diagram.solids;
    for region in regions {
        let words = look.fit(&format!("solid: {}", scene.bath.solid_name(region.solid)), 320.0);
        let width = look.width(&words);
        let size = pane.units(width + swatch.0 + 18.0, 19.0);
        let (_, row) = pane.units(0.0, 21.0);
        let (from, to) = (region.from.max(pane.x.0), region.to.min(pane.x.1));
        let rooms =
            (0..8).flat_map(|line| [0.5, 0.7, 0.3, 0.0, 1.0].map(|part| (line, part))).map(|(line, part)| {
                let x = from + (to - from) * part + (0.5 - part) * size.0;
                Area::about(x, pane.y.1 - row * (line as f64 + 0.75), size).moved_into(pane.frame())
            });
        let Some(area) = quietest(&scene.diagram.x, &curves, rooms, taken) else { continue };
        let (x, y) = pane.at(area.middle());
        let all = width + swatch.0 + 12.0;
        paper.backing((x, y), (all, 18.0));
        let start = x - all / 2.0 + 4.0;
        let hatch = hatch_solid(rank(regions, region.solid));
        paper.swatch((start + swatch.0 / 2.0, y), swatch, &hatch);
        paper.text((start + swatch.0 + 6.0, y + 4.6), Hold::Start, look, &words);
        taken.push(area);
    }
}

/// Names at the lines; gives back those that found no room.
fn name_series(
    paper: &mut Paper,
    scene: &Scene,
    pane: &Pane,
    lines: &[Vec<f64>],
    taken: &[Area],
) -> Vec<String> {
    let look = |n: usize| Type::bold(NAME, pen(n).0);
    let series = &scene.diagram.series;
    let names: Vec<String> = series.iter().map(|s| look(0).fit(&pretty(&s.token), 300.0)).collect();
    let curves: Vec<Curve> = lines
        .iter()
        .zip(&names)
        .zip(series)
        .map(|((y, name), series)| Curve {
            y,
            size: pane.units(look(0).width(name) + 8.0, NAME * 1.35),
            optional: series.peak < NAMED,
        })
        .collect();
    let labels = place(&scene.diagram.x, &curves, pane.frame(), taken);
    for (n, label) in labels.iter().enumerate() {
        if let Some(label) = label.filter(|label| label.leader) {
            paper.line(pane.at(label.anchor), pane.at(label.leader_end()), pen(n).0, 0.9);
        }
    }
    let mut small = Vec::new();
    for (n, (label, name)) in labels.iter().zip(&names).enumerate() {
        match label {
            Some(label) => paper.plate(pane.at(label.area.middle()), look(n), name),
            None => small.push(name.clone()),
        }
    }
    small
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_line_is_drawn_from_the_last_point_at_nothing() {
        let line = drawn(&[0.0, 0.0, 0.3, f64::NAN, 0.0, 0.0]);
        let shown: Vec<bool> = line.iter().map(|v| v.is_finite()).collect();
        assert_eq!(shown, [false, true, true, false, false, false]);
    }
}
