//! The window: draws what the chain Project → Bath → System → Equilibrium answers, and edits the project.
//!
//! It computes no chemistry. A worker answers each version of the project; the last good picture stays until the new
//! one is there. `logic` receives answers and runs commands, `ui` only draws.

mod answer;
mod app;
mod bath_page;
mod command;
mod compare_page;
mod diagram;
mod dialogs;
mod document;
mod doses;
mod frame;
mod ledger;
mod rinse_page;
mod sheet_page;
mod shift_page;
mod story;
mod tank;
pub mod theme;
pub mod widget;
mod worker;

pub use app::App;
pub use command::Command;
pub use dialogs::{Ask, Purpose};

use crate::bath::Project;
use std::path::PathBuf;
use thiserror::Error;

/// Why no window could open.
#[derive(Debug, Error)]
#[error("no window can open here ({reason})")]
pub struct WindowError {
    reason: &'static str,
}

/// Smallest window in points: the page still works at 1280 × 800 on a screen of 200 %.
const SMALLEST: [f32; 2] = [720.0, 450.0];
const FIRST_SIZE: [f32; 2] = [1440.0, 900.0];

/// Opens the window on a project and returns when it is closed.
///
/// # Errors
/// [`WindowError`] when there is no display or no working renderer.
pub fn open(project: Project, path: Option<PathBuf>) -> Result<(), WindowError> {
    let viewport = eframe::egui::ViewportBuilder::default()
        .with_title("Bathwright")
        .with_app_id("bathwright")
        .with_inner_size(FIRST_SIZE)
        .with_min_inner_size(SMALLEST);
    let options = eframe::NativeOptions { viewport, ..eframe::NativeOptions::default() };
    let start = Box::new(move |context: &eframe::CreationContext<'_>| {
        Ok(Box::new(App::new(&context.egui_ctx, project, path)) as Box<dyn eframe::App>)
    });
    eframe::run_native("bathwright", options, start).map_err(|error| {
        log::debug!("{error}");
        WindowError { reason: plain_reason(&error) }
    })
}

/// What is missing, in words; the library's own words go to the log.
fn plain_reason(error: &eframe::Error) -> &'static str {
    match error {
        eframe::Error::Winit(_) | eframe::Error::WinitEventLoop(_) => {
            "no display answers, neither Wayland nor X11"
        }
        _ => "no working OpenGL renderer; the software renderer of Mesa is enough",
    }
}
