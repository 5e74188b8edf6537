//! A typed number with its unit. The value changes when the text is entered (Enter, Tab, a click elsewhere), never
//! between two key strokes, so a half-typed "1" on the way to "16" computes nothing. What cannot be read leaves the old
//! value alone and says why under the field.

use eframe::egui;
use std::ops::RangeInclusive;

use eframe::egui::text::{CCursor, CCursorRange};
use eframe::egui::text_edit::TextEditState;
use eframe::egui::{
    Align2, Id, Key, Label, Margin, Modifiers, Rect, Response, Stroke, TextEdit, Ui, UiBuilder, pos2, vec2,
};

use super::numbers::padded;
use super::{Edit, figures, parse_number};
use crate::window::theme::{HAIRLINE, MIN_HIT, Text, palette};

/// Longest text a field takes.
const MOST_CHARS: usize = 40;
/// Room an error message is given at least.
const ERROR_WIDTH: f32 = 170.0;

type Parser<'a> = &'a dyn Fn(&str) -> Result<f64, String>;

/// A numeric field; build it, then [`show`](Self::show) it.
#[must_use = "call show"]
pub struct NumberField<'a> {
    label: &'a str,
    unit: &'a str,
    range: RangeInclusive<f64>,
    decimals: Option<usize>,
    step: f64,
    width: f32,
    text: Text,
    parser: Option<Parser<'a>>,
}

/// What is being typed, and what was wrong with what was typed last.
#[derive(Clone, Default)]
struct Draft {
    /// The field has the keyboard; the text is what is being typed, not what the value is.
    editing: bool,
    text: String,
    /// The text the edit began with: leaving it as it was is no edit, even where it shows a rounded value.
    at_start: String,
    error: Option<String>,
    /// The value beside which the error appeared; when it changes from outside, the error is no longer about it.
    error_beside: f64,
}

impl<'a> NumberField<'a> {
    /// A field named `label` for screen readers; the label must be unique in its `Ui` and is not drawn.
    pub fn new(label: &'a str) -> Self {
        Self {
            label,
            unit: "",
            range: f64::NEG_INFINITY..=f64::INFINITY,
            decimals: None,
            step: 1.0,
            width: 62.0,
            text: Text::Value,
            parser: None,
        }
    }

    /// Unit, shown after the field.
    pub fn unit(mut self, unit: &'a str) -> Self {
        self.unit = unit;
        self
    }

    /// Values outside are refused with the range as the reason.
    pub fn range(mut self, range: RangeInclusive<f64>) -> Self {
        self.range = range;
        self
    }

    /// Decimal places shown; without it five significant figures.
    pub fn decimals(mut self, decimals: usize) -> Self {
        self.decimals = Some(decimals);
        self
    }

    /// Step of the up and down arrows; ten times that with Shift.
    pub fn step(mut self, step: f64) -> Self {
        self.step = step;
        self
    }

    /// Width of the field without its unit.
    pub fn width(mut self, width: f32) -> Self {
        self.width = width;
        self
    }

    /// Shows the number in bold.
    pub fn strong(mut self) -> Self {
        self.text = Text::Heading;
        self
    }

    /// Reads the text in another way, such as with units; the error is shown as it is.
    pub fn parser(mut self, parser: Parser<'a>) -> Self {
        self.parser = Some(parser);
        self
    }

    /// Shows the field with `value`.
    pub fn show(self, ui: &mut Ui, value: f64) -> Edit<f64> {
        let id = ui.make_persistent_id(("number field", self.label));
        let mut draft = ui.data(|data| data.get_temp::<Draft>(id)).unwrap_or_default();
        if draft.error_beside.to_bits() != value.to_bits() {
            draft.error = None;
        }
        if !draft.editing {
            draft.text = self.shown(value);
            draft.at_start.clone_from(&draft.text);
        }
        let has_focus = ui.memory(|memory| memory.has_focus(id));
        let mut committed = has_focus.then(|| self.stepped(ui, &mut draft, value)).flatten();

        let (field, error_rect) = self.allocate(ui, draft.error.as_deref());
        let mut response = self.edit(ui, id, field, &mut draft);
        if response.changed() {
            draft.error = None;
        }
        // egui reports a lost focus in two frames running; only the first ends the edit.
        if draft.editing && response.lost_focus() {
            committed = self.entered(ui, &response, &mut draft, value).or(committed);
        }
        committed = committed.filter(|new| *new != value);
        if committed.is_some() {
            response.mark_changed();
        }
        self.describe(ui, id, draft.error.as_deref());
        if let Some((message, rect)) = draft.error.as_deref().zip(error_rect) {
            let words = Text::Small.rich(message, palette(ui).not_held);
            ui.new_child(UiBuilder::new().max_rect(rect)).add(Label::new(words).wrap());
        }
        draft.editing = response.has_focus();
        let keep = draft.editing || draft.error.is_some();
        ui.data_mut(|data| {
            if keep {
                data.insert_temp(id, draft);
            } else {
                data.remove_temp::<Draft>(id);
            }
        });
        let done = committed.is_some();
        Edit { response, value: committed, done }
    }

    fn shown(&self, value: f64) -> String {
        match self.decimals {
            _ if !value.is_finite() => String::new(),
            Some(decimals) => padded(value, decimals),
            None => figures(value, 5),
        }
    }

    fn parsed(&self, text: &str) -> Result<f64, String> {
        let value = match self.parser {
            Some(parser) => parser(text)?,
            None => parse_number(text).map_err(|error| error.to_string())?,
        };
        if self.range.contains(&value) {
            return Ok(value);
        }
        let (low, high) = (*self.range.start(), *self.range.end());
        Err(match (low.is_finite(), high.is_finite()) {
            (true, true) => format!("{} to {}", figures(low, 5), figures(high, 5)),
            (true, false) => format!("{} or more", figures(low, 5)),
            _ => format!("{} or less", figures(high, 5)),
        })
    }

    /// Up and down arrows: step what is typed and take it at once.
    fn stepped(&self, ui: &Ui, draft: &mut Draft, value: f64) -> Option<f64> {
        let steps = ui.input_mut(|input| {
            let mut steps = 0.0;
            for (key, sign) in [(Key::ArrowUp, 1.0), (Key::ArrowDown, -1.0)] {
                // With Shift first: asking for no modifier ignores Shift.
                for (modifiers, size) in [(Modifiers::SHIFT, 10.0), (Modifiers::NONE, 1.0)] {
                    steps += sign * size * input.count_and_consume_key(modifiers, key) as f64;
                }
            }
            steps
        });
        if steps == 0.0 {
            return None;
        }
        let start = self.parsed(&draft.text).unwrap_or(value);
        let from = if start.is_finite() { start } else { 0.0 };
        let per_unit = 1.0 / self.step;
        let raw = from + steps * self.step;
        let new = if self.step < 1.0 { (raw * per_unit).round() / per_unit } else { raw };
        let new = new.clamp(*self.range.start(), *self.range.end());
        draft.text = self.shown(new);
        draft.at_start.clone_from(&draft.text);
        draft.error = None;
        Some(new)
    }

    /// The text was left. Enter on something unreadable stays in the field, so that it can be mended.
    fn entered(&self, ui: &Ui, response: &Response, draft: &mut Draft, value: f64) -> Option<f64> {
        let (escape, enter) =
            ui.input(|input| (input.key_pressed(Key::Escape), input.key_pressed(Key::Enter)));
        if escape || draft.text == draft.at_start {
            draft.error = None;
            return None;
        }
        match self.parsed(&draft.text) {
            Ok(new) => {
                draft.error = None;
                Some(new)
            }
            Err(reason) => {
                draft.error_beside = value;
                draft.error = Some(if enter {
                    response.request_focus();
                    reason
                } else {
                    format!("{reason}; {} kept", self.shown(value))
                });
                None
            }
        }
    }

    /// Takes space for field, unit and error; draws the unit.
    fn allocate(&self, ui: &mut Ui, error: Option<&str>) -> (Rect, Option<Rect>) {
        let palette = palette(ui);
        let unit = ui.painter().layout_no_wrap(self.unit.to_owned(), Text::Body.font(), palette.ink2);
        let gap = if self.unit.is_empty() { 0.0 } else { 5.0 };
        let size = vec2(self.width + gap + unit.size().x, MIN_HIT);
        let wrap = ERROR_WIDTH.max(size.x);
        let error_size = error.map(|message| {
            ui.painter().layout(message.to_owned(), Text::Small.font(), palette.not_held, wrap).size()
        });
        let below = error_size.map_or(0.0, |size| size.y + 2.0);
        let (_, rect) = ui.allocate_space(size + vec2(0.0, below));
        let field = Rect::from_min_size(rect.min, vec2(self.width, MIN_HIT));
        let y = field.center().y - unit.size().y / 2.0;
        ui.painter().galley(pos2(field.right() + gap, y), unit, palette.ink2);
        // An error longer than the field reaches to the left where the panel ends.
        let error_rect = error_size.map(|size| {
            let most = ui.clip_rect().right().min(ui.max_rect().right().max(rect.right()));
            let left = rect.left().min(most - size.x);
            Rect::from_min_size(pos2(left, field.bottom() + 2.0), size + vec2(1.0, 0.0))
        });
        (field, error_rect)
    }

    fn edit(&self, ui: &mut Ui, id: Id, field: Rect, draft: &mut Draft) -> Response {
        let palette = palette(ui);
        let mut child = ui.new_child(UiBuilder::new().max_rect(field));
        if draft.error.is_some() {
            let stroke = Stroke::new(2.0 * HAIRLINE, palette.not_held);
            let visuals = child.visuals_mut();
            visuals.widgets.inactive.bg_stroke = stroke;
            visuals.widgets.hovered.bg_stroke = stroke;
            visuals.selection.stroke = stroke;
        }
        let output = TextEdit::singleline(&mut draft.text)
            .id(id)
            .font(self.text.font())
            .char_limit(MOST_CHARS)
            .margin(Margin::symmetric(6, 2))
            .min_size(field.size())
            .desired_width(field.width())
            .align(Align2::RIGHT_CENTER)
            .show(&mut child);
        let response = output.response.response;
        // Coming by Tab, typing replaces; coming by the mouse, the click says where.
        if response.gained_focus()
            && !ui.input(|input| input.pointer.any_pressed() || input.pointer.any_released())
        {
            select_all(ui, id, draft.text.chars().count());
        }
        response.accessible_name(self.label)
    }

    fn describe(&self, ui: &Ui, id: Id, error: Option<&str>) {
        ui.ctx().accesskit_node_builder(id, |node| {
            if let Some(error) = error {
                node.set_invalid(egui::accesskit::Invalid::True);
                node.set_description(error);
            } else if !self.unit.is_empty() {
                node.set_description(format!("in {}", self.unit));
            }
        });
    }
}

fn select_all(ui: &Ui, id: Id, chars: usize) {
    let mut state = TextEditState::load(ui.ctx(), id).unwrap_or_default();
    let all = CCursorRange::two(CCursor::default(), CCursor::new(chars));
    state.cursor.set_char_range(Some(all));
    state.store(ui.ctx(), id);
}

#[cfg(test)]
mod tests;
