//! File dialogs off the window's thread, behind a trait so that tests can answer for the user.

use std::path::PathBuf;
use std::sync::mpsc::{Receiver, channel};

/// What a dialog was opened for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Purpose {
    /// Choose a project to open.
    Open,
    /// Name the project file.
    SaveAs,
    /// Name the sheet's file.
    ExportSheet,
}

/// Asks the user for a path; `None` when the user cancelled.
pub trait Ask: Send + Sync {
    /// Blocks until the user has answered. `suggestion` is a file name.
    fn ask(&self, purpose: Purpose, suggestion: &str) -> Option<PathBuf>;
}

/// The system's dialogs.
struct SystemDialogs;

impl Ask for SystemDialogs {
    fn ask(&self, purpose: Purpose, suggestion: &str) -> Option<PathBuf> {
        let dialog = rfd::FileDialog::new().set_file_name(suggestion);
        match purpose {
            Purpose::Open => dialog.add_filter("Bathwright project", &["ron"]).pick_file(),
            Purpose::SaveAs => dialog.add_filter("Bathwright project", &["ron"]).save_file(),
            Purpose::ExportSheet => dialog
                .add_filter("PDF", &["pdf"])
                .add_filter("Spreadsheet (CSV)", &["csv"])
                .add_filter("Text", &["txt"])
                .save_file(),
        }
    }
}

/// Environment variable that answers every dialog with a path, for scripts that drive the window.
const ANSWER: &str = "BATHWRIGHT_DIALOG_ANSWER";

/// One path for every question.
struct Scripted(PathBuf);

impl Ask for Scripted {
    fn ask(&self, _purpose: Purpose, _suggestion: &str) -> Option<PathBuf> {
        Some(self.0.clone())
    }
}

/// The system's dialogs, or the answer that a script has given in advance.
pub fn dialogs() -> std::sync::Arc<dyn Ask> {
    match std::env::var_os(ANSWER) {
        Some(path) => std::sync::Arc::new(Scripted(PathBuf::from(path))),
        None => std::sync::Arc::new(SystemDialogs),
    }
}

/// A dialog that is open.
pub struct Pending {
    purpose: Purpose,
    answer: Receiver<Option<PathBuf>>,
}

impl Pending {
    /// Opens a dialog on a thread of its own; `wake` is called when it is answered.
    pub fn open(
        asker: std::sync::Arc<dyn Ask>,
        purpose: Purpose,
        suggestion: String,
        wake: impl FnOnce() + Send + 'static,
    ) -> std::io::Result<Self> {
        let (sender, answer) = channel();
        std::thread::Builder::new().name("file dialog".to_owned()).spawn(move || {
            // The window may be gone by the time the dialog is answered.
            let _ = sender.send(asker.ask(purpose, &suggestion));
            wake();
        })?;
        Ok(Self { purpose, answer })
    }

    /// The purpose with the answer, once there is one.
    pub fn poll(&self) -> Option<(Purpose, Option<PathBuf>)> {
        match self.answer.try_recv() {
            Ok(path) => Some((self.purpose, path)),
            Err(std::sync::mpsc::TryRecvError::Disconnected) => Some((self.purpose, None)),
            Err(std::sync::mpsc::TryRecvError::Empty) => None,
        }
    }
}
