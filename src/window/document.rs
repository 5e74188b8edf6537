//! The open project: its file, its history, and whether it is saved.

use crate::bath::{FileError, History, Project, load, save};
use std::path::{Path, PathBuf};

/// The open project.
pub struct Document {
    /// As edited.
    pub project: Project,
    /// Its file; none for a demo bath or a new one.
    pub path: Option<PathBuf>,
    history: History,
    saved: Project,
}

impl Document {
    /// A project as just read.
    pub fn new(project: Project, path: Option<PathBuf>) -> Self {
        Self { history: History::new(project.clone()), saved: project.clone(), project, path }
    }

    /// Reads a file.
    pub fn load(path: &Path) -> Result<Self, FileError> {
        Ok(Self::new(load(path)?, Some(path.to_path_buf())))
    }

    /// Writes the project to a file, which becomes its own.
    pub fn save(&mut self, path: &Path) -> Result<(), FileError> {
        save(&self.project, path)?;
        self.saved = self.project.clone();
        self.path = Some(path.to_path_buf());
        Ok(())
    }

    /// Whether there are edits that no file holds.
    pub fn is_dirty(&self) -> bool {
        self.project != self.saved
    }

    /// Ends an edit under a name.
    pub fn settle(&mut self, name: &str) {
        self.history.settle(&self.project, name);
    }

    /// Takes the last edit back. Returns its name.
    pub fn undo(&mut self) -> Option<String> {
        let name = self.history.undo_name()?.to_owned();
        self.project = self.history.undo()?.clone();
        Some(name)
    }

    /// Brings the last undone edit back. Returns its name.
    pub fn redo(&mut self) -> Option<String> {
        let name = self.history.redo_name()?.to_owned();
        self.project = self.history.redo()?.clone();
        Some(name)
    }

    /// Name of the edit that undo would take back.
    pub fn undo_name(&self) -> Option<&str> {
        self.history.undo_name()
    }

    /// Name of the edit that redo would bring back.
    pub fn redo_name(&self) -> Option<&str> {
        self.history.redo_name()
    }

    /// File name, or what stands for it.
    pub fn file_name(&self) -> String {
        let name = self.path.as_deref().and_then(Path::file_name);
        name.map_or_else(|| "not saved yet".to_owned(), |name| name.to_string_lossy().into_owned())
    }
}
