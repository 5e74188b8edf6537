//! The free-metal gauge. Up is more free metal, so the pM axis runs downwards: a ceiling is a hatched plate above, a
//! floor one below, the bar is the operating range, the whiskers its confidence, the arrows the set point.

use std::fmt::Write as _;
use std::ops::RangeInclusive;

use eframe::egui::{Response, Role, Sense, Ui, WidgetInfo, vec2};

use super::gauge_paint::{self, Frame};
use super::numbers::padded;
use crate::window::theme::{State, Text, palette};

/// What a gauge shows. All numbers are pM: lower means more free metal.
#[derive(Clone, Debug)]
pub struct Gauge<'a> {
    /// The metal.
    pub title: &'a str,
    /// The axis, with what its numbers rest on: "pCu · from constants".
    pub subtitle: &'a str,
    /// Most free metal allowed.
    pub ceiling: Option<f64>,
    /// Least free metal needed.
    pub floor: Option<f64>,
    /// At the set point.
    pub set: f64,
    /// Most free metal in the operating range.
    pub worst: f64,
    /// Least free metal in the operating range.
    pub least: f64,
    /// The two ends again at the chosen confidence, one side each: (below `worst`, above `least`).
    pub confidence: Option<(f64, f64)>,
    /// What the limits say.
    pub state: State,
    /// Replaces the word of the state, as in "Held, slow".
    pub word: Option<&'a str>,
    /// Small lines under the word; the first in full ink.
    pub lines: &'a [String],
    /// A fixed axis, top first and lower number first; without it the axis fits the numbers. Keep it fixed while
    /// somebody drags, or the picture swims.
    pub axis: Option<RangeInclusive<f64>>,
    /// The numbers belong to an older input; the set point line turns dashed.
    pub stale: bool,
    /// Stands in the empty well when there is no limit.
    pub empty_text: &'a str,
    /// Height of the well.
    pub height: f32,
}

impl Default for Gauge<'_> {
    fn default() -> Self {
        Self {
            title: "",
            subtitle: "",
            ceiling: None,
            floor: None,
            set: f64::NAN,
            worst: f64::NAN,
            least: f64::NAN,
            confidence: None,
            state: State::Unknown,
            word: None,
            lines: &[],
            axis: None,
            stale: false,
            empty_text: "No limit yet",
            height: 196.0,
        }
    }
}

impl Gauge<'_> {
    /// Shows the gauge over the available width (at least 96).
    pub fn show(&self, ui: &mut Ui) -> Response {
        let frame = Frame::new(ui, self);
        let size = vec2(ui.available_width().max(96.0), frame.height(self));
        let (rect, response) = ui.allocate_exact_size(size, Sense::hover());
        response.widget_info(|| self.info());
        if ui.is_rect_visible(rect) {
            gauge_paint::paint(ui, rect, &frame, self);
        }
        response
    }

    /// True when there is nothing to measure against or nothing to measure.
    pub fn is_empty(&self) -> bool {
        let no_limit = self.ceiling.is_none() && self.floor.is_none();
        no_limit || ![self.set, self.worst, self.least].into_iter().all(f64::is_finite)
    }

    /// The word beside the mark.
    pub(super) fn shown_word(&self) -> &str {
        self.word.unwrap_or(self.state.word())
    }

    /// Every number the axis has to show.
    pub(super) fn numbers(&self) -> impl Iterator<Item = f64> {
        let (safe_worst, safe_least) = self.confidence.unzip();
        [self.ceiling, self.floor, safe_worst, safe_least]
            .into_iter()
            .flatten()
            .chain([self.set, self.worst, self.least])
            .filter(|number| number.is_finite())
    }

    fn info(&self) -> WidgetInfo {
        let mut info = WidgetInfo::labeled(Role::Meter, true, self.spoken());
        info.value = self.set.is_finite().then_some(self.set);
        info
    }

    /// Name, state, values and limits, in the order a person asks for them.
    fn spoken(&self) -> String {
        let mut text = format!("{}, {}: ", self.title, self.subtitle);
        if self.is_empty() {
            text.push_str(self.empty_text);
            return text;
        }
        let _ = write!(text, "{}. ", self.shown_word());
        let _ = write!(
            text,
            "Set point {}, operating range {} to {}",
            padded(self.set, 1),
            padded(self.worst, 1),
            padded(self.least, 1)
        );
        if let Some((worst, least)) = self.confidence {
            let _ = write!(text, ", with confidence {} to {}", padded(worst, 1), padded(least, 1));
        }
        for (name, limit) in [("ceiling", self.ceiling), ("floor", self.floor)] {
            if let Some(limit) = limit {
                let _ = write!(text, "; {name} {}", padded(limit, 1));
            }
        }
        for line in self.lines {
            let _ = write!(text, "; {line}");
        }
        if self.stale {
            text.push_str("; being computed again");
        }
        text
    }
}

/// One line that explains the marks of the gauges; wraps when there is little room.
pub fn gauge_legend(ui: &mut Ui, confidence_percent: u32) {
    let at_confidence = format!("at {confidence_percent} %, one side");
    ui.horizontal_wrapped(|ui| {
        ui.spacing_mut().item_spacing.x = 5.0;
        let entries = [
            (gauge_paint::Key::Range, "operating range"),
            (gauge_paint::Key::Whisker, at_confidence.as_str()),
            (gauge_paint::Key::SetPoint, "set point"),
            (gauge_paint::Key::Limit, "limit"),
        ];
        for (key, words) in entries {
            gauge_paint::paint_key(ui, key);
            let ink2 = palette(ui).ink2;
            ui.label(Text::Axis.rich(words, ink2));
            ui.add_space(4.0);
        }
    });
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::window::widget::lab;
    use egui_kittest::kittest::{NodeT as _, Queryable as _};

    fn copper() -> Gauge<'static> {
        Gauge {
            title: "Copper",
            subtitle: "pCu",
            ceiling: Some(10.8),
            floor: Some(12.2),
            set: 11.4,
            worst: 11.0,
            least: 11.9,
            confidence: Some((10.82, 12.08)),
            state: State::Held,
            ..Gauge::default()
        }
    }

    fn label_of(gauge: Gauge<'static>) -> String {
        let mut harness = lab([640.0, 400.0], (), move |ui, ()| {
            gauge.show(ui);
        });
        harness.run();
        let node = harness.get_by_role(Role::Meter);
        node.accesskit_node().label().unwrap_or_default()
    }

    #[test]
    fn a_gauge_reads_state_values_and_limits() {
        let label = label_of(copper());
        for part in ["Copper, pCu: Held.", "Set point 11.4", "10.8 to 12.1", "ceiling 10.8", "floor 12.2"] {
            assert!(label.contains(part), "{part} in {label}");
        }
    }

    #[test]
    fn without_a_limit_the_gauge_is_an_empty_well() {
        let label = label_of(Gauge { ceiling: None, floor: None, empty_text: "No ceiling yet.", ..copper() });
        assert_eq!(label, "Copper, pCu: No ceiling yet.");
    }

    #[test]
    fn a_number_that_does_not_exist_empties_the_gauge_instead_of_breaking_it() {
        let gauge = Gauge { worst: f64::NAN, ..copper() };
        assert!(gauge.is_empty());
        assert!(label_of(gauge).ends_with("No limit yet"));
    }
}
