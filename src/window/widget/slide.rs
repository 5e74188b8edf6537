//! A value on a track: where it stands, what the keyboard does to it, and what a screen reader may ask of it.
//! The dose rail and the range bar share this, so they feel the same.

use eframe::egui;
use eframe::egui::accesskit::{Action, ActionData};
use eframe::egui::{Event, EventFilter, Key, Painter, Rect, Response, Stroke, StrokeKind, Ui};

use crate::window::theme::{HAIRLINE, Palette, RADIUS};

/// How values spread along a track.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Scale {
    /// Equal distances for equal differences.
    #[default]
    Linear,
    /// Equal distances for equal ratios; needs a range above zero, else the track is linear.
    Log,
}

/// A track with its range and its finest step.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Slide {
    low: f64,
    high: f64,
    step: f64,
    scale: Scale,
}

/// How many fine steps one coarse step is.
const COARSE: f64 = 10.0;
/// One fine step on a log track, as a part of its length.
const LOG_STEP: f64 = 0.005;

impl Slide {
    pub(super) fn new(low: f64, high: f64, step: f64, scale: Scale) -> Self {
        let (low, high) = if low <= high { (low, high) } else { (high, low) };
        let scale = if low > 0.0 { scale } else { Scale::Linear };
        let span = high - low;
        let step = if step > 0.0 { step } else { span / 200.0 };
        Self { low, high, step, scale }
    }

    /// Where `value` stands, 0 at the low end and 1 at the high end.
    pub(super) fn place(&self, value: f64) -> f32 {
        let value = value.clamp(self.low, self.high);
        let part = match self.scale {
            Scale::Linear => (value - self.low) / (self.high - self.low),
            Scale::Log => (value / self.low).ln() / (self.high / self.low).ln(),
        };
        if part.is_finite() { part as f32 } else { 0.0 }
    }

    /// The value at a place, on the grid of the step.
    pub(super) fn value_at(&self, place: f64) -> f64 {
        let place = place.clamp(0.0, 1.0);
        let raw = match self.scale {
            Scale::Linear => self.low + place * (self.high - self.low),
            Scale::Log => self.low * (self.high / self.low).powf(place),
        };
        self.snapped(raw)
    }

    /// The value `steps` fine steps further on.
    pub(super) fn moved(&self, value: f64, steps: f64) -> f64 {
        match self.scale {
            Scale::Linear => self.snapped(value + steps * self.step),
            Scale::Log => self.value_at(f64::from(self.place(value)) + steps * LOG_STEP),
        }
    }

    /// Decimal places that show one step.
    pub(super) fn decimals(&self) -> usize {
        let places = -(self.step * 1.000_001).log10().floor();
        places.clamp(0.0, 6.0) as usize
    }

    fn snapped(&self, value: f64) -> f64 {
        let snapped = match self.scale {
            // Dividing by a whole number gives 13.9 where multiplying by 0.1 gives 13.900000000000002.
            Scale::Linear if self.step < 1.0 => {
                let per_unit = 1.0 / self.step;
                (value * per_unit).round() / per_unit
            }
            Scale::Linear => (value / self.step).round() * self.step,
            Scale::Log => {
                let unit = 10_f64.powf(value.log10().floor() - 3.0);
                (value / unit).round() * unit
            }
        };
        snapped.clamp(self.low, self.high)
    }

    /// What keys and screen readers make of `value`; `None` when they leave it alone.
    pub(super) fn nudged(&self, ui: &Ui, response: &Response, value: f64) -> Option<f64> {
        let focused = response.has_focus();
        if focused {
            let arrows =
                EventFilter { horizontal_arrows: true, vertical_arrows: true, ..EventFilter::default() };
            ui.memory_mut(|memory| memory.set_focus_lock_filter(response.id, arrows));
        }
        let moved = ui.input(|input| {
            let mut moved = value;
            if focused {
                for event in &input.events {
                    moved = self.after_event(event, moved);
                }
            }
            for (action, sign) in [(Action::Increment, 1.0), (Action::Decrement, -1.0)] {
                let count = input.num_accesskit_action_requests(response.id, action);
                if count > 0 {
                    moved = self.moved(moved, sign * count as f64);
                }
            }
            for request in input.accesskit_action_requests(response.id, Action::SetValue) {
                if let Some(ActionData::NumericValue(asked)) = request.data {
                    moved = self.snapped(asked);
                }
            }
            moved
        });
        (moved != value).then_some(moved)
    }

    fn after_event(&self, event: &Event, value: f64) -> f64 {
        let Event::Key { key, pressed: true, modifiers, .. } = event else {
            return value;
        };
        if modifiers.command || modifiers.alt {
            return value;
        }
        let arrow = if modifiers.shift { COARSE } else { 1.0 };
        match key {
            Key::ArrowRight | Key::ArrowUp => self.moved(value, arrow),
            Key::ArrowLeft | Key::ArrowDown => self.moved(value, -arrow),
            Key::PageUp => self.moved(value, COARSE),
            Key::PageDown => self.moved(value, -COARSE),
            Key::Home => self.low,
            Key::End => self.high,
            _ => value,
        }
    }

    /// Tells screen readers the range, the step and what they may ask for.
    pub(super) fn describe(&self, ui: &Ui, id: egui::Id) {
        ui.ctx().accesskit_node_builder(id, |node| {
            node.set_min_numeric_value(self.low);
            node.set_max_numeric_value(self.high);
            node.set_numeric_value_step(self.step);
            node.add_action(Action::SetValue);
            node.add_action(Action::Increment);
            node.add_action(Action::Decrement);
        });
    }
}

/// A frame around something hand-painted that has the keyboard (or, thinner, the pointer).
pub(super) fn paint_focus_frame(painter: &Painter, rect: Rect, focused: bool, palette: &Palette) {
    let width = if focused { 2.0 } else { HAIRLINE };
    let stroke = Stroke::new(width, palette.accent);
    painter.rect_stroke(rect, RADIUS, stroke, StrokeKind::Inside);
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn places_and_values_are_inverse_on_both_scales() {
        for slide in [Slide::new(0.0, 40.0, 0.1, Scale::Linear), Slide::new(0.01, 100.0, 0.0, Scale::Log)] {
            for part in [0.0, 0.25, 0.5, 0.9, 1.0] {
                let back = f64::from(slide.place(slide.value_at(part)));
                assert!((back - part).abs() < 2e-3, "{slide:?} {part} {back}");
            }
        }
    }

    #[test]
    fn steps_give_clean_decimals_and_stop_at_the_ends() {
        let slide = Slide::new(0.0, 40.0, 0.1, Scale::Linear);
        assert_eq!(slide.moved(13.8, 1.0), 13.9);
        assert_eq!(slide.moved(0.2, -10.0), 0.0);
        assert_eq!(slide.moved(39.95, 5.0), 40.0);
        assert_eq!(slide.decimals(), 1);
    }

    #[test]
    fn a_log_track_needs_a_range_above_zero() {
        let slide = Slide::new(0.0, 10.0, 0.5, Scale::Log);
        assert_eq!(slide.value_at(0.5), 5.0);
    }

    #[test]
    fn every_key_press_moves_a_log_value() {
        let slide = Slide::new(1.0, 2.0, 0.0, Scale::Log);
        let mut value = 1.0;
        for _ in 0..50 {
            let next = slide.moved(value, 1.0);
            assert!(next > value, "{value}");
            value = next;
        }
    }
}
