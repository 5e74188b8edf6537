//! The house rules as tests: floors only look down, every source file says what it is for, no file grows too long.

use std::path::{Path, PathBuf};

/// Floors from the ground up; a floor may use those before it in this list (and itself).
const FLOORS: [&str; 9] =
    ["quantity", "chemistry", "equilibrium", "bath", "dosing", "study", "sheet", "command", "window"];

fn sources() -> Vec<PathBuf> {
    fn walk(folder: &Path, found: &mut Vec<PathBuf>) {
        for entry in std::fs::read_dir(folder).unwrap() {
            let path = entry.unwrap().path();
            if path.is_dir() {
                walk(&path, found);
            } else if path.extension().is_some_and(|end| end == "rs") {
                found.push(path);
            }
        }
    }
    let mut found = Vec::new();
    walk(&Path::new(env!("CARGO_MANIFEST_DIR")).join("src"), &mut found);
    assert!(found.len() > 60, "the source tree was not found");
    found
}

fn floor_of(path: &Path) -> Option<usize> {
    let parts: Vec<&str> = path.iter().filter_map(|part| part.to_str()).collect();
    let src = parts.iter().rposition(|part| *part == "src")?;
    FLOORS.iter().position(|floor| parts.get(src + 1) == Some(floor))
}

/// The part of a file before its tests.
fn code(text: &str) -> &str {
    text.split("#[cfg(test)]").next().unwrap_or(text)
}

#[test]
fn each_floor_uses_only_floors_below_it() {
    let mut wrong = Vec::new();
    for path in sources() {
        let Some(floor) = floor_of(&path) else { continue };
        let text = std::fs::read_to_string(&path).unwrap();
        for (above, name) in FLOORS.iter().enumerate().filter(|(above, _)| *above > floor) {
            if code(&text).contains(&format!("crate::{name}::")) {
                wrong.push(format!("{} uses {name} (floor {floor} below {above})", path.display()));
            }
        }
        let knows_window = code(&text).contains("egui");
        if knows_window && FLOORS[floor] != "window" {
            wrong.push(format!("{} knows the window's library", path.display()));
        }
    }
    assert!(wrong.is_empty(), "{}", wrong.join("\n"));
}

#[test]
fn every_source_file_begins_with_what_it_is_for() {
    for path in sources() {
        let text = std::fs::read_to_string(&path).unwrap();
        assert!(text.starts_with("//!"), "{} has no header comment", path.display());
    }
}

#[test]
fn no_source_file_is_longer_than_six_hundred_lines() {
    for path in sources() {
        let lines = std::fs::read_to_string(&path).unwrap().lines().count();
        assert!(lines <= 600, "{} has {lines} lines", path.display());
    }
}
