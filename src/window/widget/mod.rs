//! Hand-painted widgets: what egui does not have and the trade needs.
//!
//! Each is a function of its inputs: no chemistry, no application state, no knowledge of where it stands. Interactive
//! ones hand back an [`Edit`]; all of them describe themselves to screen readers, and what is drawn in colour is also
//! drawn as a shape or said in a word.

use eframe::egui;

mod band;
mod chip;
mod dose_rail;
mod evidence;
mod follow_field;
mod gauge;
mod gauge_axis;
mod gauge_paint;
mod hatch;
mod label_row;
mod ledger_bar;
mod number_field;
mod numbers;
mod range_bar;
mod slide;
mod tank_glyph;
mod ticks;
mod verdict_panel;

pub use band::paint_band;
pub use chip::{chip, state_mark};
pub use dose_rail::{DoseRail, Zone};
pub use evidence::{Evidence, evidence};
pub use follow_field::follow_field;
pub use gauge::{Gauge, gauge_legend};
pub use hatch::{Lean, hatch};
pub use ledger_bar::{Fill, Share, ledger_bar, swatch};
pub use number_field::NumberField;
pub use numbers::{NotANumber, figures, fixed, parse_number};
pub use range_bar::{RangeBar, Span};
pub use slide::Scale;
pub use tank_glyph::tank_glyph;
pub use ticks::{Ticks, log_ticks, ticks};
pub use verdict_panel::verdict_panel;

/// What a person did to an editable widget in this frame.
#[derive(Debug)]
pub struct Edit<T> {
    /// egui's response of the part that was touched last.
    pub response: egui::Response,
    /// The new value, only when it differs from the one that was passed in.
    pub value: Option<T>,
    /// True when a gesture ended here: the drag was released, the key was pressed, the text was entered. This is the
    /// place for an undo step; between press and release there are many values and no step.
    pub done: bool,
}

/// A window of the given size with the program's fonts and themes, showing `app`.
#[cfg(test)]
fn lab<'a, State: 'a>(
    size: [f32; 2],
    state: State,
    app: impl FnMut(&mut eframe::egui::Ui, &mut State) + 'a,
) -> egui_kittest::Harness<'a, State> {
    egui_kittest::Harness::builder()
        .with_size(size)
        .with_context_setup(crate::window::theme::install)
        .build_ui_state(app, state)
}
