//! Painting of the free-metal gauge: layout of its parts, the well with plates and bar, and the keys of its legend.

use std::sync::Arc;

use eframe::egui::{
    Align2, Color32, Galley, Painter, Pos2, Rangef, Rect, Response, Sense, Shape, Stroke, StrokeKind, Ui,
    pos2, vec2,
};

use super::band::dotted_outline;
use super::band::to_pixel;
use super::gauge_axis::GaugeAxis;
use super::{Gauge, Lean, fixed, hatch, paint_band};
use crate::window::theme::{HAIRLINE, Palette, State, Text, palette};

const WELL: f32 = 52.0;
const AXIS: f32 = 48.0;
const BAR: f32 = 18.0;
const WHISKER: f32 = 16.0;
const LIMIT_OVERHANG: f32 = 5.0;
const MARK: f32 = 13.0;

/// Texts of a gauge, laid out, and where its parts begin.
pub(super) struct Frame {
    title: Arc<Galley>,
    subtitle: Arc<Galley>,
    word: Arc<Galley>,
    line_height: f32,
    well_top: f32,
}

impl Frame {
    pub(super) fn new(ui: &Ui, gauge: &Gauge<'_>) -> Self {
        let palette = palette(ui);
        let text = |text: &str, role: Text, colour| {
            ui.painter().layout_no_wrap(text.to_owned(), role.font(), colour)
        };
        let title = text(gauge.title, Text::Heading, palette.ink);
        let subtitle = text(gauge.subtitle, Text::Axis, palette.ink2);
        let word = text(gauge.shown_word(), Text::Strong, palette.ink);
        let line_height = ui.fonts_mut(|fonts| fonts.row_height(&Text::Small.font()));
        let well_top = title.size().y + subtitle.size().y + 8.0;
        Self { title, subtitle, word, line_height, well_top }
    }

    pub(super) fn height(&self, gauge: &Gauge<'_>) -> f32 {
        let texts = self.word.size().y + self.line_height * gauge.lines.len() as f32;
        self.well_top + gauge.height + 8.0 + texts
    }
}

pub(super) fn paint(ui: &Ui, rect: Rect, frame: &Frame, gauge: &Gauge<'_>) {
    let palette = palette(ui);
    let painter = ui.painter();
    painter.galley(rect.min, frame.title.clone(), palette.ink);
    painter.galley(rect.min + vec2(0.0, frame.title.size().y), frame.subtitle.clone(), palette.ink2);

    let wells = Rangef::new(rect.top() + frame.well_top, rect.top() + frame.well_top + gauge.height);
    if gauge.is_empty() {
        let well = Rect::from_x_y_ranges(rect.left()..=rect.right() - 8.0, wells);
        paint_empty(painter, well, gauge.empty_text, palette);
        return;
    }
    let left = rect.left() + AXIS.min((rect.width() - WELL - LIMIT_OVERHANG).max(24.0));
    let well = Rect::from_x_y_ranges(left..=left + WELL, wells);
    let axis = GaugeAxis::new(gauge, wells);
    painter.rect(well, 0.0, palette.raised, Stroke::new(HAIRLINE, palette.line), StrokeKind::Outside);
    paint_ticks(painter, well, &axis, palette);
    paint_limits(painter, well, &axis, gauge, palette);
    paint_reading(painter, well, &axis, gauge, palette);
    paint_texts(painter, pos2(rect.left(), wells.max + 8.0), frame, gauge, palette);
}

fn paint_empty(painter: &Painter, well: Rect, text: &str, palette: &Palette) {
    dotted_outline(painter, well, palette);
    let width = well.width() - 16.0;
    let galley = painter.layout(text.to_owned(), Text::Small.font(), palette.ink2, width);
    painter.galley(well.left_center() + vec2(8.0, -galley.size().y / 2.0), galley, palette.ink2);
}

fn paint_ticks(painter: &Painter, well: Rect, axis: &GaugeAxis, palette: &Palette) {
    let ticks = axis.ticks();
    for pm in ticks.values() {
        let y = axis.y(pm);
        painter.hline(well.left() - 5.0..=well.left() - 1.0, y, Stroke::new(HAIRLINE, palette.ink2));
        let at = pos2(well.left() - 9.0, y);
        painter.text(at, Align2::RIGHT_CENTER, fixed(pm, ticks.decimals), Text::Axis.font(), palette.ink2);
    }
}

fn paint_limits(painter: &Painter, well: Rect, axis: &GaugeAxis, gauge: &Gauge<'_>, palette: &Palette) {
    let thin = Stroke::new(HAIRLINE, palette.limit_plate.gamma_multiply(0.75));
    let edge = Stroke::new(2.0 * HAIRLINE, palette.limit_plate);
    let sides = well.x_range().expand(LIMIT_OVERHANG);
    for (limit, lean) in [(gauge.ceiling, Lean::Rising), (gauge.floor, Lean::Falling)] {
        let Some(limit) = limit else { continue };
        let y = to_pixel(painter, axis.y(limit));
        let plate = match lean {
            Lean::Rising => Rangef::new(well.top(), y),
            Lean::Falling => Rangef::new(y, well.bottom()),
        };
        hatch(painter, Rect::from_x_y_ranges(well.x_range(), plate).shrink(0.5), lean, 4.0, thin);
        painter.hline(sides, y, edge);
    }
}

fn paint_reading(painter: &Painter, well: Rect, axis: &GaugeAxis, gauge: &Gauge<'_>, palette: &Palette) {
    let colour = gauge.state.colour(palette);
    let x = well.center().x;
    let top = axis.y(gauge.worst.min(gauge.least));
    let bottom = axis.y(gauge.worst.max(gauge.least)).max(top + 3.0);
    let bar = Rect::from_x_y_ranges(x - BAR / 2.0..=x + BAR / 2.0, top..=bottom);
    if let Some((worst, least)) = gauge.confidence {
        for (from, to) in [(bar.top(), worst), (bar.bottom(), least)] {
            paint_whisker(painter, x, from, axis.y(to), axis.shows(to), colour, palette);
        }
    }
    // A ground of its own, so that a plate behind it does not mix with the hatch of the bar.
    painter.rect_filled(bar.expand2(vec2(1.0, 0.0)), 0.0, palette.raised);
    paint_band(painter, bar, gauge.state, palette);
    for (pm, y, sign) in [(gauge.worst, bar.top(), -1.0), (gauge.least, bar.bottom(), 1.0)] {
        if !axis.shows(pm) {
            paint_beyond(painter, pos2(x, y), sign, colour);
        }
    }

    let y = axis.y(gauge.set);
    for side in [-1.0, 1.0] {
        let tip = pos2(x + side * (BAR / 2.0 + 1.5), y);
        let back = side * 10.0;
        let corners = vec![tip, tip + vec2(back, -5.5), tip + vec2(back, 5.5)];
        painter.add(Shape::convex_polygon(corners, palette.accent, Stroke::NONE));
    }
    paint_set_line(painter, [pos2(bar.left(), y), pos2(bar.right(), y)], gauge, palette);
}

/// The set point across the bar: light on the solid bar, dark on a light band where the bar is hatched or empty.
fn paint_set_line(painter: &Painter, ends: [Pos2; 2], gauge: &Gauge<'_>, palette: &Palette) {
    let mut colour = palette.raised;
    if gauge.state != State::Held {
        painter.line_segment(ends, Stroke::new(6.0, palette.raised));
        colour = gauge.state.colour(palette);
    }
    let stroke = Stroke::new(2.0, colour);
    if gauge.stale {
        painter.extend(Shape::dashed_line(&ends, stroke, 3.0, 3.0));
    } else {
        painter.line_segment(ends, stroke);
    }
}

fn paint_whisker(
    painter: &Painter,
    x: f32,
    from: f32,
    to: f32,
    capped: bool,
    colour: Color32,
    palette: &Palette,
) {
    let cap = Rangef::new(x - WHISKER / 2.0, x + WHISKER / 2.0);
    // The ground line lifts the whisker off a plate it reaches into.
    painter.vline(x, from..=to, Stroke::new(5.0, palette.raised));
    painter.vline(x, from..=to, Stroke::new(2.0, colour));
    if capped {
        painter.hline(cap, to, Stroke::new(2.0, colour));
    }
}

/// A small wedge where the bar runs out of the axis.
fn paint_beyond(painter: &Painter, tip: Pos2, sign: f32, colour: Color32) {
    let corners = vec![tip + vec2(0.0, sign * 5.0), tip + vec2(-5.0, 0.0), tip + vec2(5.0, 0.0)];
    painter.add(Shape::convex_polygon(corners, colour, Stroke::NONE));
}

fn paint_texts(painter: &Painter, at: Pos2, frame: &Frame, gauge: &Gauge<'_>, palette: &Palette) {
    let middle = at.y + frame.word.size().y / 2.0;
    let mark = Rect::from_center_size(pos2(at.x + MARK / 2.0, middle), vec2(MARK, MARK));
    gauge.state.paint(painter, mark, palette);
    painter.galley(pos2(mark.right() + 6.0, at.y), frame.word.clone(), palette.ink);
    let mut y = at.y + frame.word.size().y;
    for (i, line) in gauge.lines.iter().enumerate() {
        let colour = if i == 0 { palette.ink } else { palette.ink2 };
        painter.text(pos2(at.x, y), Align2::LEFT_TOP, line, Text::Small.font(), colour);
        y += frame.line_height;
    }
}

/// A mark in the legend.
#[derive(Clone, Copy)]
pub(super) enum Key {
    Range,
    Whisker,
    SetPoint,
    Limit,
}

pub(super) fn paint_key(ui: &mut Ui, key: Key) -> Response {
    let (rect, response) = ui.allocate_exact_size(vec2(14.0, 14.0), Sense::hover());
    let palette = palette(ui);
    let painter = ui.painter();
    let centre = rect.center();
    match key {
        Key::Range => {
            let bar = Rect::from_center_size(centre, vec2(14.0, 9.0));
            paint_band(painter, bar, State::Held, palette);
        }
        Key::Whisker => {
            let stroke = Stroke::new(2.0, palette.held);
            painter.hline(centre.x - 4.0..=centre.x + 4.0, centre.y - 4.0, stroke);
            painter.vline(centre.x, centre.y - 4.0..=centre.y + 5.0, stroke);
        }
        Key::SetPoint => {
            let corners = vec![centre + vec2(5.0, 0.0), centre + vec2(-4.0, -5.0), centre + vec2(-4.0, 5.0)];
            painter.add(Shape::convex_polygon(corners, palette.accent, Stroke::NONE));
        }
        Key::Limit => {
            let stroke = Stroke::new(HAIRLINE, palette.limit_plate);
            hatch(painter, Rect::from_center_size(centre, vec2(14.0, 10.0)), Lean::Rising, 3.0, stroke);
        }
    }
    response
}
