//! Project files: RON, versioned, written atomically, read with limits, refused with line, column and reason.

use super::project::{FORMAT, Project};
use std::io::Write as _;
use std::path::Path;
use thiserror::Error;

/// Largest project file that is read, in bytes.
const MAX_BYTES: u64 = 8 * 1024 * 1024;
/// Deepest nesting of brackets that is read.
const MAX_DEPTH: usize = 64;

/// A project file that can't be read or written.
#[derive(Debug, Error)]
pub enum FileError {
    /// The operating system refused.
    #[error("{path}: {source}")]
    Io {
        /// The file.
        path: String,
        /// The system's reason.
        source: std::io::Error,
    },
    /// Larger than any project.
    #[error(
        "{path}: {bytes} bytes is more than a project file may have ({MAX_BYTES}); is it the right file?"
    )]
    TooLarge {
        /// The file.
        path: String,
        /// Its size.
        bytes: u64,
    },
    /// Not RON, or not a project.
    #[error("{path}: line {line}, column {column}: {reason}")]
    Syntax {
        /// The file.
        path: String,
        /// Line from 1.
        line: usize,
        /// Column from 1.
        column: usize,
        /// What was found.
        reason: String,
    },
    /// Written by a newer program.
    #[error("{path}: format {found} is newer than this program reads ({FORMAT}); update Bathwright")]
    Newer {
        /// The file.
        path: String,
        /// Its format.
        found: u32,
    },
}

fn options() -> ron::Options {
    ron::Options::default()
        .with_default_extension(ron::extensions::Extensions::IMPLICIT_SOME)
        .with_recursion_limit(MAX_DEPTH)
}

/// Only the version, so that a file of a newer format is refused as such and not as a syntax error.
#[derive(serde::Deserialize)]
struct Version {
    #[serde(default)]
    format: u32,
}

/// Reads a project from text; `path` is only for messages.
///
/// # Errors
/// [`FileError::Syntax`] with line and column, [`FileError::Newer`].
pub fn read(text: &str, path: &str) -> Result<Project, FileError> {
    let syntax = |error: ron::error::SpannedError| FileError::Syntax {
        path: path.to_owned(),
        line: error.span.start.line,
        column: error.span.start.col,
        reason: plain_reason(&error.code),
    };
    if let Ok(Version { format }) = options().from_str::<Version>(text)
        && format > FORMAT
    {
        return Err(FileError::Newer { path: path.to_owned(), found: format });
    }
    options().from_str(text).map_err(syntax)
}

/// The reader's reason, with the fix for the commonest case.
fn plain_reason(code: &ron::Error) -> String {
    match code {
        ron::Error::Eof
        | ron::Error::ExpectedStructLikeEnd
        | ron::Error::ExpectedArrayEnd
        | ron::Error::ExpectedStringEnd => {
            format!("{code}; the file ends too early, open the kept previous version beside it")
        }
        other => other.to_string(),
    }
}

/// The text of a project file.
///
/// # Errors
/// [`FileError::Syntax`] when the project holds what RON can't write, which it never should.
pub fn write(project: &Project) -> Result<String, FileError> {
    let pretty = ron::ser::PrettyConfig::new().depth_limit(6).struct_names(false).compact_arrays(false);
    let body = options().to_string_pretty(project, pretty).map_err(|error| FileError::Syntax {
        path: project.name.clone(),
        line: 0,
        column: 0,
        reason: error.to_string(),
    })?;
    Ok(body + "\n")
}

/// Loads a project file.
///
/// # Errors
/// [`FileError`].
pub fn load(path: &Path) -> Result<Project, FileError> {
    let shown = path.display().to_string();
    let io = |source| FileError::Io { path: shown.clone(), source };
    let bytes = std::fs::metadata(path).map_err(io)?.len();
    if bytes > MAX_BYTES {
        return Err(FileError::TooLarge { path: shown, bytes });
    }
    read(&std::fs::read_to_string(path).map_err(io)?, &shown)
}

/// Saves a project file: a temporary file beside it, flushed, then renamed over it. The previous version is kept as
/// `NAME.ron.previous`.
///
/// # Errors
/// [`FileError::Io`]; the old file is untouched then.
pub fn save(project: &Project, path: &Path) -> Result<(), FileError> {
    let text = write(project)?;
    replace(path, text.as_bytes(), true)
        .map_err(|source| FileError::Io { path: path.display().to_string(), source })
}

/// Writes a file so that either the old or the new one is there, whole.
///
/// # Errors
/// The system's reason; the old file is untouched then.
pub fn replace_file(path: &Path, bytes: &[u8]) -> std::io::Result<()> {
    replace(path, bytes, false)
}

fn replace(path: &Path, bytes: &[u8], keep_previous: bool) -> std::io::Result<()> {
    let target = if path.exists() { path.canonicalize()? } else { path.to_path_buf() };
    let folder = target.parent().filter(|folder| !folder.as_os_str().is_empty()).unwrap_or(Path::new("."));
    let mut file = tempfile::NamedTempFile::new_in(folder)?;
    file.write_all(bytes)?;
    file.as_file().sync_all()?;
    match std::fs::metadata(&target) {
        Ok(old) => file.as_file().set_permissions(old.permissions())?,
        Err(_) => make_readable(file.as_file())?,
    }
    if keep_previous && target.exists() {
        let mut kept = target.clone().into_os_string();
        kept.push(".previous");
        std::fs::copy(&target, kept)?;
    }
    file.persist(&target).map_err(|error| error.error)?;
    Ok(())
}

/// Temporary files are private to their owner; a project is an ordinary document.
fn make_readable(file: &std::fs::File) -> std::io::Result<()> {
    #[cfg(unix)]
    {
        use std::os::unix::fs::PermissionsExt as _;
        file.set_permissions(std::fs::Permissions::from_mode(0o644))?;
    }
    let _ = file;
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_project_reads_back_as_it_was_written() {
        let project = Project::empty();
        assert_eq!(read(&write(&project).unwrap(), "x").unwrap(), project);
    }

    #[test]
    fn saving_keeps_the_previous_version_beside_the_new_one() {
        let folder = tempfile::tempdir().unwrap();
        let path = folder.path().join("bath.ron");
        let mut project = Project::empty();
        save(&project, &path).unwrap();
        project.name = "Second".to_owned();
        save(&project, &path).unwrap();
        assert_eq!(load(&path).unwrap().name, "Second");
        assert_eq!(load(&folder.path().join("bath.ron.previous")).unwrap().name, "New bath");
    }

    #[test]
    fn a_truncated_file_is_refused_with_line_and_column() {
        let text = write(&Project::empty()).unwrap();
        let error = read(&text[..text.len() / 2], "bath.ron").unwrap_err().to_string();
        assert!(error.starts_with("bath.ron: line "), "{error}");
    }

    #[test]
    fn unknown_fields_and_newer_formats_are_refused() {
        let text = write(&Project::empty()).unwrap();
        let misspelt = text.replacen("about", "abuot", 1);
        assert!(read(&misspelt, "x").unwrap_err().to_string().contains("abuot"));
        let newer = text.replacen("format: 1", "format: 99, colour: \"red\"", 1);
        assert!(
            matches!(read(&newer, "x"), Err(FileError::Newer { found: 99, .. })),
            "{:?}",
            read(&newer, "x")
        );
    }

    #[test]
    fn a_deeply_nested_file_is_refused() {
        assert!(read(&"(a:".repeat(5000), "x").is_err());
    }
}
