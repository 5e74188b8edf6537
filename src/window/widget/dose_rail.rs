//! The dose slider. Its rail shows, before anyone drags, at which doses the limits hold; the cap of one addition is a
//! mark on it. Zones come in finished: which dose holds is the dose search's business.

use eframe::egui;
use std::fmt::Write as _;
use std::ops::RangeInclusive;

use eframe::egui::{
    CursorIcon, Painter, Pos2, Rangef, Rect, Response, Sense, Stroke, Ui, WidgetInfo, pos2, vec2,
};

use super::band::to_pixel;
use super::label_row::LabelRow;
use super::numbers::padded;
use super::slide::{Scale, Slide};
use super::{Edit, fixed, paint_band};
use crate::window::theme::{HAIRLINE, Palette, State, Text, palette};

const KNOB: f32 = 10.0;
const RAIL: f32 = 10.0;
const RAIL_ROW: f32 = 28.0;
const LABEL_ROW: f32 = 15.0;

/// A stretch of doses in one state.
#[derive(Clone, Debug, PartialEq)]
pub struct Zone<'a> {
    /// First dose of the stretch.
    pub from: f64,
    /// Last dose of the stretch.
    pub to: f64,
    /// What the limits do there.
    pub state: State,
    /// Words under the rail, such as "unsure: floor"; empty for "held 13.9 to 31.2".
    pub words: &'a str,
}

/// The dose slider; build it, then [`show`](Self::show) it.
#[must_use = "call show"]
pub struct DoseRail<'a> {
    label: &'a str,
    unit: &'a str,
    range: RangeInclusive<f64>,
    zones: &'a [Zone<'a>],
    cap: Option<f64>,
    step: f64,
    scale: Scale,
}

impl<'a> DoseRail<'a> {
    /// A rail over `range` in `unit`. `label` names it to screen readers and must be unique in its `Ui`.
    pub fn new(label: &'a str, unit: &'a str, range: RangeInclusive<f64>) -> Self {
        Self { label, unit, range, zones: &[], cap: None, step: 0.1, scale: Scale::Linear }
    }

    /// Where each dose holds, in rising order. What no zone covers is drawn as not yet known.
    pub fn zones(mut self, zones: &'a [Zone<'a>]) -> Self {
        self.zones = zones;
        self
    }

    /// The largest dose of one addition.
    pub fn cap(mut self, cap: Option<f64>) -> Self {
        self.cap = cap;
        self
    }

    /// The finest step, of an arrow key and of the pointer.
    pub fn step(mut self, step: f64) -> Self {
        self.step = step;
        self
    }

    /// Spreads doses by ratio; the range must then start above zero.
    pub fn log(mut self) -> Self {
        self.scale = Scale::Log;
        self
    }

    /// Shows the rail with the knob at `value`.
    pub fn show(self, ui: &mut Ui, value: f64) -> Edit<f64> {
        let slide = Slide::new(*self.range.start(), *self.range.end(), self.step, self.scale);
        let words_row = if self.zones.is_empty() { 0.0 } else { LABEL_ROW };
        let size = vec2(ui.available_width().max(120.0), RAIL_ROW + LABEL_ROW + words_row);
        let (_, rect) = ui.allocate_space(size);
        let hit = Rect::from_min_size(rect.min, vec2(rect.width(), RAIL_ROW));
        let id = ui.make_persistent_id(("dose rail", self.label));
        let response = ui
            .interact(hit, id, Sense::click_and_drag())
            .on_hover_and_drag_cursor(CursorIcon::ResizeHorizontal);
        let rail = Rect::from_center_size(hit.center(), vec2(hit.width() - 2.0 * KNOB, RAIL));

        let pointed = pointed_value(ui, &response, rail, &slide, value);
        let nudged = slide.nudged(ui, &response, value);
        let moved = nudged.or(pointed).filter(|moved| *moved != value);
        let now = moved.unwrap_or(value);

        let mut response = response;
        if moved.is_some() {
            response.mark_changed();
        }
        self.announce(ui, &response, &slide, now);
        if ui.is_rect_visible(rect) {
            self.paint(ui, &response, rail, &slide, now);
        }
        let done = nudged.is_some() || response.drag_stopped() || response.clicked();
        Edit { response, value: moved, done }
    }

    fn announce(&self, ui: &Ui, response: &Response, slide: &Slide, value: f64) {
        response.widget_info(|| {
            let mut info = WidgetInfo::slider(ui.is_enabled(), value, self.label);
            info.current_text_value = Some(self.spoken(slide, value));
            info
        });
        slide.describe(ui, response.id);
    }

    /// Value, state at the value, cap and zones, in one sentence.
    fn spoken(&self, slide: &Slide, value: f64) -> String {
        let mut text = format!("{} {}", padded(value, slide.decimals()), self.unit);
        if let Some(zone) = self.zones.iter().find(|zone| (zone.from..=zone.to).contains(&value)) {
            let _ = write!(text, ", {}", zone.state.word().to_lowercase());
        }
        if let Some(cap) = self.cap {
            let above = if value > cap { "above" } else { "under" };
            let _ = write!(text, ", {above} the cap of {}", fixed(cap, slide.decimals()));
        }
        for zone in self.zones {
            let _ = write!(text, "; {}", zone_words(zone, slide));
            if !zone.words.is_empty() {
                let _ = write!(text, " {}", stretch(zone, slide));
            }
        }
        text
    }

    fn paint(&self, ui: &Ui, response: &Response, rail: Rect, slide: &Slide, value: f64) {
        let palette = palette(ui);
        let painter = ui.painter();
        let x_of = |dose: f64| egui::lerp(rail.x_range(), slide.place(dose));

        paint_band(painter, rail, State::Unknown, palette);
        for zone in self.zones.iter().filter(|zone| zone.to > zone.from) {
            let (left, right) = (to_pixel(painter, x_of(zone.from)), to_pixel(painter, x_of(zone.to)));
            let part = Rect::from_x_y_ranges(left..=right, rail.y_range());
            paint_band(painter, part, zone.state, palette);
        }
        self.paint_scale(painter, rail, slide, palette, x_of);
        self.paint_words(painter, rail, slide, palette, x_of);
        paint_knob(painter, pos2(x_of(value), rail.center().y), response, palette);
    }

    fn paint_scale(
        &self,
        painter: &Painter,
        rail: Rect,
        slide: &Slide,
        palette: &Palette,
        x_of: impl Fn(f64) -> f32,
    ) {
        let y = rail.center().y + RAIL_ROW / 2.0;
        let mut row = LabelRow::new(painter, y, rail.x_range().expand(KNOB));
        let (low, high) = (*self.range.start(), *self.range.end());
        let low_text = fixed(low, slide.decimals().max(2));
        let high_text = format!("{} {}", fixed(high, slide.decimals().max(2)), self.unit);
        row.put(rail.left(), 0.0, low_text, Text::Axis.font(), palette.ink2);
        row.put(rail.right(), 1.0, high_text, Text::Axis.font(), palette.ink2);
        // After the ends, which mark the scale; the words of the cap may step aside.
        if let Some(cap) = self.cap {
            let mark = Rangef::new(rail.top() - 6.0, rail.bottom() + 6.0);
            painter.vline(x_of(cap), mark, Stroke::new(4.0 * HAIRLINE, palette.panel));
            painter.vline(x_of(cap), mark, Stroke::new(2.0 * HAIRLINE, palette.ink));
            let text = format!("cap {}", fixed(cap, slide.decimals()));
            row.put(x_of(cap), 0.5, text, Text::Axis.font(), palette.ink);
        }
    }

    /// Words under their zones; held ones first, then the wider, and what finds no room is left to the screen reader.
    fn paint_words(
        &self,
        painter: &Painter,
        rail: Rect,
        slide: &Slide,
        palette: &Palette,
        x_of: impl Fn(f64) -> f32,
    ) {
        let y = rail.center().y + RAIL_ROW / 2.0 + LABEL_ROW;
        let mut row = LabelRow::new(painter, y, rail.x_range().expand(KNOB));
        for held in [true, false] {
            for zone in self.zones.iter().filter(|zone| (zone.state == State::Held) == held) {
                let centre = (x_of(zone.from) + x_of(zone.to)) / 2.0;
                let colour = zone.state.colour(palette);
                row.put(centre, 0.5, zone_words(zone, slide), Text::AxisStrong.font(), colour);
            }
        }
    }
}

fn zone_words(zone: &Zone<'_>, slide: &Slide) -> String {
    if zone.words.is_empty() {
        format!("{} {}", zone.state.word().to_lowercase(), stretch(zone, slide))
    } else {
        zone.words.to_owned()
    }
}

fn stretch(zone: &Zone<'_>, slide: &Slide) -> String {
    let places = slide.decimals();
    format!("{} to {}", fixed(zone.from, places), fixed(zone.to, places))
}

/// The dose under the pointer while the button is down. Whoever takes the knob by its edge does not move it by that.
fn pointed_value(ui: &Ui, response: &Response, rail: Rect, slide: &Slide, value: f64) -> Option<f64> {
    let pointer: Pos2 = response.interact_pointer_pos()?;
    let knob = egui::lerp(rail.x_range(), slide.place(value));
    let pressed = ui.input(|input| input.pointer.any_pressed());
    let grip_id = response.id.with("grip");
    let grip = if pressed {
        let reach = pointer.x - knob;
        let grip = if reach.abs() <= KNOB { reach } else { 0.0 };
        ui.data_mut(|data| data.insert_temp(grip_id, grip));
        response.request_focus();
        grip
    } else {
        ui.data(|data| data.get_temp(grip_id)).unwrap_or(0.0)
    };
    let place = (pointer.x - grip - rail.left()) / rail.width();
    let pointed = slide.value_at(f64::from(place));
    // A press on the knob alone must not round a dose that was typed more finely than the step.
    let still = (pointer.x - grip - knob).abs() < 0.5;
    (!still).then_some(pointed)
}

fn paint_knob(painter: &Painter, centre: Pos2, response: &Response, palette: &Palette) {
    let grabbed = response.is_pointer_button_down_on();
    let fill = if grabbed || response.hovered() { palette.accent_soft } else { palette.raised };
    if response.has_focus() {
        painter.circle_stroke(centre, KNOB + 2.5, Stroke::new(2.0, palette.accent));
        painter.circle_stroke(centre, KNOB + 0.5, Stroke::new(2.0, palette.panel));
    } else {
        painter.circle_filled(centre, KNOB + 1.0, palette.panel);
    }
    painter.circle(centre, KNOB - 1.5, fill, Stroke::new(2.5, palette.accent));
    painter.vline(centre.x, centre.y - 4.0..=centre.y + 4.0, Stroke::new(2.0, palette.accent));
}

#[cfg(test)]
mod tests;
