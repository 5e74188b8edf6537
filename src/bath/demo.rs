//! The demo baths, built in so that the program opens on one wherever it is started. They are the files of
//! `demo_baths/`, of one invented shop.

use super::file::{FileError, read};
use super::project::Project;

/// A demo bath.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Demo {
    /// File name under `demo_baths/`.
    pub file: &'static str,
    text: &'static str,
}

macro_rules! demos {
    ($($file:literal),* $(,)?) => {
        &[$(Demo { file: $file, text: include_str!(concat!("../../demo_baths/", $file)) }),*]
    };
}

/// All demo baths; the program opens on the first.
pub const DEMOS: &[Demo] = demos![
    "electroless_nickel.ron",
    "copper_strike.ron",
    "electroless_copper.ron",
    "hard_water_cleaner.ron",
    "pyrophosphate_copper.ron",
    "derusting.ron",
    "zinc_nickel.ron",
    "citric_descaler.ron",
    "aluminium_etch.ron",
];

impl Demo {
    /// A demo bath by its file name.
    pub fn named(file: &str) -> Option<&'static Demo> {
        DEMOS.iter().find(|demo| demo.file == file)
    }

    /// The bath.
    ///
    /// # Errors
    /// [`FileError`] when the file does not read, which a test rules out.
    pub fn project(&self) -> Result<Project, FileError> {
        read(self.text, self.file)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bath::Bath;

    #[test]
    fn every_demo_bath_reads_resolves_and_says_that_it_is_invented() {
        for demo in DEMOS {
            let project = demo.project().unwrap_or_else(|error| panic!("{error}"));
            assert!(project.invented && !project.about.is_empty(), "{}", demo.file);
            Bath::resolve(&project).unwrap_or_else(|error| panic!("{}: {error}", demo.file));
        }
    }
}
