//! Undo and redo over whole projects. No clock, no window: the caller says when an edit has ended and what it was.

use super::project::Project;

/// Edits kept at most.
const DEPTH: usize = 200;

/// The current project with the states before and after it.
#[derive(Clone, Debug)]
pub struct History {
    past: Vec<(String, Project)>,
    future: Vec<(String, Project)>,
    settled: Project,
}

impl History {
    /// Starts from a project.
    pub fn new(project: Project) -> Self {
        Self { past: Vec::new(), future: Vec::new(), settled: project }
    }

    /// Records that an edit has ended; nothing happens when the project is as it was.
    pub fn settle(&mut self, project: &Project, name: &str) {
        if *project == self.settled {
            return;
        }
        self.past.push((name.to_owned(), std::mem::replace(&mut self.settled, project.clone())));
        self.future.clear();
        if self.past.len() > DEPTH {
            self.past.remove(0);
        }
    }

    /// Name of the edit that undo would take back.
    pub fn undo_name(&self) -> Option<&str> {
        self.past.last().map(|(name, _)| name.as_str())
    }

    /// Name of the edit that redo would bring back.
    pub fn redo_name(&self) -> Option<&str> {
        self.future.last().map(|(name, _)| name.as_str())
    }

    /// Takes the last edit back.
    pub fn undo(&mut self) -> Option<&Project> {
        let (name, project) = self.past.pop()?;
        self.future.push((name, std::mem::replace(&mut self.settled, project)));
        Some(&self.settled)
    }

    /// Brings the last undone edit back.
    pub fn redo(&mut self) -> Option<&Project> {
        let (name, project) = self.future.pop()?;
        self.past.push((name, std::mem::replace(&mut self.settled, project)));
        Some(&self.settled)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn named(name: &str) -> Project {
        Project { name: name.to_owned(), ..Project::empty() }
    }

    #[test]
    fn undo_and_redo_walk_the_edits_and_a_new_edit_clears_redo() {
        let mut history = History::new(named("a"));
        history.settle(&named("b"), "rename to b");
        history.settle(&named("b"), "nothing");
        history.settle(&named("c"), "rename to c");
        assert_eq!(history.undo_name(), Some("rename to c"));
        assert_eq!(history.undo().map(|p| p.name.clone()), Some("b".into()));
        assert_eq!(history.redo_name(), Some("rename to c"));
        assert_eq!(history.redo().map(|p| p.name.clone()), Some("c".into()));
        history.undo();
        history.settle(&named("d"), "rename to d");
        assert!(history.redo().is_none());
        assert_eq!(history.undo().map(|p| p.name.clone()), Some("b".into()));
        assert_eq!(history.undo().map(|p| p.name.clone()), Some("a".into()));
        assert!(history.undo().is_none());
    }
}
