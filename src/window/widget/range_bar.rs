//! The operating range of one input on a track: the bar is the range, the diamond the set point. All three can be
//! dragged, and each is a slider of its own for the keyboard and for screen readers.

use eframe::egui;
use std::ops::RangeInclusive;

use eframe::egui::{
    CursorIcon, Id, Painter, Pos2, Rect, Response, Sense, Shape, Stroke, StrokeKind, Ui, WidgetInfo, pos2,
    vec2,
};

use super::numbers::padded;
use super::slide::{Scale, Slide, paint_focus_frame};
use super::{Edit, fixed};
use crate::window::theme::{HAIRLINE, MIN_HIT, Palette, palette};

const ROW: f32 = 16.0;
const BAR: f32 = 9.0;
const DIAMOND: f32 = 6.5;
/// How near an end must be to win against the set point, which is the part most often moved.
const SET_LEAD: f32 = 3.0;

/// Low end, set point and high end of an input.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Span {
    /// Lowest value the operating range allows for.
    pub low: f64,
    /// Where the bath is meant to stand.
    pub set: f64,
    /// Highest value the operating range allows for.
    pub high: f64,
}

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Part {
    Low,
    Set,
    High,
}

impl Part {
    const ALL: [Self; 3] = [Self::Low, Self::Set, Self::High];

    fn of(self, span: &Span) -> f64 {
        match self {
            Self::Low => span.low,
            Self::Set => span.set,
            Self::High => span.high,
        }
    }

    /// The span with this part moved; it stops at its neighbours, so the order always stands.
    fn moved(self, span: Span, to: f64) -> Span {
        match self {
            Self::Low => Span { low: to.min(span.set), ..span },
            Self::Set => Span { set: to.max(span.low).min(span.high), ..span },
            Self::High => Span { high: to.max(span.set), ..span },
        }
    }

    fn name(self) -> &'static str {
        match self {
            Self::Low => "low end",
            Self::Set => "set point",
            Self::High => "high end",
        }
    }
}

/// The part that is being dragged, and how far from its middle it was taken.
type Grip = (Part, f32);

/// The range editor; build it, then [`show`](Self::show) it.
#[must_use = "call show"]
pub struct RangeBar<'a> {
    label: &'a str,
    unit: &'a str,
    track: RangeInclusive<f64>,
    step: f64,
    scale: Scale,
}

impl<'a> RangeBar<'a> {
    /// A bar on a track. `label` names it to screen readers and must be unique in its `Ui`.
    pub fn new(label: &'a str, unit: &'a str, track: RangeInclusive<f64>) -> Self {
        Self { label, unit, track, step: 0.1, scale: Scale::Linear }
    }

    /// The finest step, of an arrow key and of the pointer.
    pub fn step(mut self, step: f64) -> Self {
        self.step = step;
        self
    }

    /// Spreads values by ratio; the track must then start above zero.
    pub fn log(mut self) -> Self {
        self.scale = Scale::Log;
        self
    }

    /// Shows the bar over the available width.
    pub fn show(self, ui: &mut Ui, span: Span) -> Edit<Span> {
        let slide = Slide::new(*self.track.start(), *self.track.end(), self.step, self.scale);
        let (_, rect) = ui.allocate_space(vec2(ui.available_width().max(80.0), ROW));
        let id = ui.make_persistent_id(("range bar", self.label));
        let hit = rect.expand2(vec2(0.0, (MIN_HIT - ROW).max(0.0) / 2.0));
        let response = ui
            .interact(hit, id, Sense::click_and_drag())
            .on_hover_and_drag_cursor(CursorIcon::ResizeHorizontal);
        let track = rect.shrink2(vec2(DIAMOND, 0.0));
        let x_of = |value: f64| egui::lerp(track.x_range(), slide.place(value));

        let mut now = span;
        if let Some((part, x)) = grabbed(ui, &response, id, |part| x_of(part.of(&span))) {
            let place = f64::from((x - track.left()) / track.width());
            if (x - x_of(part.of(&span))).abs() >= 0.5 {
                now = part.moved(now, slide.value_at(place));
            }
        }
        let mut keyed = false;
        let handles = Part::ALL.map(|part| {
            let centre = pos2(x_of(part.of(&span)), rect.center().y);
            let area = Rect::from_center_size(centre, vec2(MIN_HIT, MIN_HIT));
            let handle = ui.interact(area, part_id(id, part), Sense::focusable_noninteractive());
            if let Some(to) = slide.nudged(ui, &handle, part.of(&now)) {
                now = part.moved(now, to);
                keyed = true;
            }
            self.announce(ui, &handle, &slide, part, &now);
            handle
        });
        response.widget_info(|| self.summary(&slide, &now));

        let mut response = response;
        let changed = now != span;
        if changed {
            response.mark_changed();
        }
        if ui.is_rect_visible(hit) {
            paint(ui, &response, &handles, track, [now.low, now.set, now.high].map(x_of));
        }
        let done = (keyed && changed) || response.drag_stopped() || response.clicked();
        Edit { response, value: changed.then_some(now), done }
    }

    fn announce(&self, ui: &Ui, handle: &Response, slide: &Slide, part: Part, span: &Span) {
        let value = part.of(span);
        handle.widget_info(|| {
            let name = format!("{}, {}", self.label, part.name());
            let mut info = WidgetInfo::slider(ui.is_enabled(), value, name);
            let number = padded(value, slide.decimals());
            info.current_text_value = Some(format!("{number} {}", self.unit).trim_end().to_owned());
            info
        });
        slide.describe(ui, handle.id);
    }

    fn summary(&self, slide: &Slide, span: &Span) -> WidgetInfo {
        let [low, set, high] = [span.low, span.set, span.high].map(|v| fixed(v, slide.decimals()));
        let text = format!("{}: {low} to {high} {}, set at {set}", self.label, self.unit);
        WidgetInfo::labeled(egui::Role::Group, true, text)
    }
}

fn part_id(bar: Id, part: Part) -> Id {
    bar.with(part.name())
}

/// Which part the pointer holds, and where it would put the part's middle.
fn grabbed(ui: &Ui, response: &Response, id: Id, x_of: impl Fn(Part) -> f32) -> Option<(Part, f32)> {
    let pointer = response.interact_pointer_pos()?;
    let grip_id = id.with("grip");
    let pressed = ui.input(|input| input.pointer.any_pressed());
    let held: Option<Grip> = ui.data(|data| data.get_temp(grip_id));
    let (part, offset) = match held {
        Some(grip) if !pressed => grip,
        _ => {
            let part = nearest(pointer.x, [x_of(Part::Low), x_of(Part::Set), x_of(Part::High)]);
            let reach = pointer.x - x_of(part);
            let grip = (part, if reach.abs() <= MIN_HIT / 2.0 { reach } else { 0.0 });
            ui.data_mut(|data| data.insert_temp(grip_id, grip));
            ui.memory_mut(|memory| memory.request_focus(part_id(id, part)));
            grip
        }
    };
    Some((part, pointer.x - offset))
}

/// Between ends that lie on one another, the side of the pointer decides.
fn nearest(pointer: f32, [low, set, high]: [f32; 3]) -> Part {
    let set_gap = (pointer - set).abs() - SET_LEAD;
    let (end, end_gap) =
        if pointer < set { (Part::Low, (pointer - low).abs()) } else { (Part::High, (pointer - high).abs()) };
    if end_gap < set_gap { end } else { Part::Set }
}

fn paint(ui: &Ui, response: &Response, handles: &[Response; 3], track: Rect, [low, set, high]: [f32; 3]) {
    let palette = palette(ui);
    let painter = ui.painter();
    let y = painter.round_to_pixel_center(track.center().y);
    painter.hline(track.x_range().expand(DIAMOND), y, Stroke::new(2.0 * HAIRLINE, palette.line));

    let bar = Rect::from_x_y_ranges(low..=high.max(low + 1.0), y - BAR / 2.0..=y + BAR / 2.0);
    painter.rect(bar, 0.0, palette.accent_soft, Stroke::new(HAIRLINE, palette.accent), StrokeKind::Inside);
    if response.hovered() || response.dragged() {
        for x in [low, high] {
            painter.vline(x, bar.y_range().expand(2.0), Stroke::new(3.0, palette.accent));
        }
    }
    paint_diamond(painter, pos2(set, y), palette);
    for (handle, x) in handles.iter().zip([low, set, high]) {
        if handle.has_focus() {
            let frame = Rect::from_center_size(pos2(x, y), vec2(18.0, 18.0));
            paint_focus_frame(painter, frame, true, palette);
        }
    }
}

fn paint_diamond(painter: &Painter, centre: Pos2, palette: &Palette) {
    let corners =
        [vec2(0.0, -1.0), vec2(1.0, 0.0), vec2(0.0, 1.0), vec2(-1.0, 0.0)].map(|v| centre + v * DIAMOND);
    painter.add(Shape::convex_polygon(
        corners.to_vec(),
        palette.accent,
        Stroke::new(HAIRLINE, palette.panel),
    ));
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::widget::lab;
    use eframe::egui::{Key, Modifiers};
    use egui_kittest::{Harness, kittest::Queryable as _};

    const START: Span = Span { low: 9.2, set: 9.5, high: 9.8 };

    fn harness<'a>() -> Harness<'a, (Span, usize)> {
        lab([300.0, 60.0], (START, 0), |ui, (span, done): &mut (Span, usize)| {
            ui.add_space(12.0);
            let edit = RangeBar::new("pH", "", 7.0..=12.0).step(0.05).show(ui, *span);
            *span = edit.value.unwrap_or(*span);
            *done += usize::from(edit.done);
        })
    }

    #[test]
    fn each_part_moves_by_keyboard_and_stops_at_its_neighbour() {
        let mut harness = harness();
        harness.get_by_label("pH, low end").focus();
        harness.run();
        harness.key_press(Key::ArrowLeft);
        harness.run();
        assert_eq!(harness.state().0.low, 9.15);
        harness.key_press(Key::End);
        harness.run();
        assert_eq!(harness.state().0.low, START.set);
        harness.get_by_label("pH, set point").focus();
        harness.run();
        harness.key_press_modifiers(Modifiers::SHIFT, Key::ArrowRight);
        harness.run();
        assert_eq!(harness.state().0.set, START.high);
    }

    #[test]
    fn dragging_the_high_end_leaves_the_set_point_alone() {
        let mut harness = harness();
        harness.run();
        let end = harness.get_by_label("pH, high end").rect().center();
        harness.drag_at(end);
        harness.step();
        harness.hover_at(end + vec2(40.0, 0.0));
        harness.step();
        harness.drop_at(end + vec2(40.0, 0.0));
        harness.run();
        let (span, done) = *harness.state();
        assert!(span.high > 10.2, "{span:?}");
        assert_eq!((span.low, span.set, done), (START.low, START.set, 1));
    }

    #[test]
    fn between_ends_that_coincide_the_side_of_the_pointer_decides() {
        assert_eq!(nearest(110.0, [100.0; 3]), Part::Set);
        assert_eq!(nearest(90.0, [80.0, 100.0, 120.0]), Part::Set);
        assert_eq!(nearest(84.0, [80.0, 100.0, 120.0]), Part::Low);
        assert_eq!(nearest(119.0, [80.0, 100.0, 120.0]), Part::High);
    }

    #[test]
    fn the_bar_as_a_whole_reads_its_range() {
        let mut harness = harness();
        harness.run();
        harness.get_by_label_contains("pH: 9.2 to 9.8");
    }
}
