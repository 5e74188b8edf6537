//! How the window looks: colours by role, one font in two weights, spacing, and the marks of a verdict.
//!
//! Widgets ask for a role (`palette(ui).held`), never for a colour, so light and dark stay in step and the
//! contrast tests cover everything that is drawn. This module knows no chemistry and no application state.

use eframe::egui;

mod fonts;
mod palette;
mod series;
mod state;
mod style;
mod text;

pub use palette::{Palette, contrast};
pub use series::{SERIES_COUNT, Series};
pub use state::State;
pub use style::{GAP, HAIRLINE, INSET, MIN_HIT, RADIUS};
pub use text::Text;

/// Installs fonts, text sizes and both colour themes. Call once, when the window is made.
pub fn install(ctx: &egui::Context) {
    fonts::install(ctx);
    style::install(ctx);
}

/// The palette of the theme that `ui` is drawn in.
pub fn palette(ui: &egui::Ui) -> &'static Palette {
    Palette::of_dark(ui.visuals().dark_mode)
}
