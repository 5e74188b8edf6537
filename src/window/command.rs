//! The table of commands: menu text, shortcut and tooltip of each derive from it.

use eframe::egui::{Key, KeyboardShortcut, Modifiers};

/// Something a person can tell the program to do.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Command {
    /// An empty bath.
    New,
    /// A project file.
    Open,
    /// A demo bath, by number.
    OpenDemo(usize),
    /// To its own file.
    Save,
    /// To a file that is asked for.
    SaveAs,
    /// The dosing sheet.
    ExportSheet,
    /// Ends the program.
    Quit,
    /// Takes the last edit back.
    Undo,
    /// Brings it back.
    Redo,
    /// The smallest dose of the first free agent that holds.
    FindDose,
    /// The main page.
    ShowBath,
    /// Two agents side by side.
    ShowCompare,
    /// The shifts ahead.
    ShowShift,
    /// The rinse water.
    ShowRinse,
    /// The sheet.
    ShowSheet,
    /// Two products by id, side by side.
    Compare(String, String),
    /// The other of light and dark.
    SwitchTheme,
}

const COMMAND_SHIFT: Modifiers =
    Modifiers { alt: false, ctrl: false, shift: true, mac_cmd: false, command: true };

impl Command {
    /// Commands with a shortcut, those with more modifiers first: egui ignores extra ones when it matches.
    pub const WITH_SHORTCUT: [Command; 14] = [
        Command::SaveAs,
        Command::Redo,
        Command::New,
        Command::Open,
        Command::Save,
        Command::ExportSheet,
        Command::Quit,
        Command::Undo,
        Command::FindDose,
        Command::ShowBath,
        Command::ShowCompare,
        Command::ShowShift,
        Command::ShowRinse,
        Command::ShowSheet,
    ];

    /// Commands that show a page, in the order of the tabs.
    pub const PAGES: [Command; 5] =
        [Command::ShowBath, Command::ShowCompare, Command::ShowShift, Command::ShowRinse, Command::ShowSheet];

    /// Menu text.
    pub fn text(&self) -> &'static str {
        match self {
            Command::New => "New bath",
            Command::Open => "Open…",
            Command::OpenDemo(_) => "Open demo bath",
            Command::Save => "Save",
            Command::SaveAs => "Save as…",
            Command::ExportSheet => "Export dosing sheet…",
            Command::Quit => "Quit",
            Command::Undo => "Undo",
            Command::Redo => "Redo",
            Command::FindDose => "Find the dose",
            Command::ShowBath => "Bath and dose",
            Command::ShowCompare => "Compare",
            Command::ShowShift => "Shift",
            Command::ShowRinse => "Rinse",
            Command::ShowSheet => "Sheet",
            Command::Compare(..) => "Compare two agents",
            Command::SwitchTheme => "Light or dark",
        }
    }

    /// What it does, in a sentence.
    pub fn tip(&self) -> &'static str {
        match self {
            Command::New => "Start an empty bath",
            Command::Open => "Open a project file",
            Command::OpenDemo(_) => "Open one of the invented demo baths",
            Command::Save => "Save the project; the previous version is kept beside it",
            Command::SaveAs => "Save the project under another name",
            Command::ExportSheet => "Write the dosing sheet as PDF, CSV or text",
            Command::Quit => "Close the program",
            Command::Undo => "Take the last edit back",
            Command::Redo => "Bring the undone edit back",
            Command::FindDose => {
                "Move the slider to the smallest dose that holds every limit over the operating range"
            }
            Command::ShowBath => "The tank, the diagram and the doses",
            Command::ShowCompare => "Two agents side by side, each at its own smallest dose that holds",
            Command::ShowShift => "Free metal through the shifts ahead, and the additions that hold it",
            Command::ShowRinse => "What the rinse water keeps dissolved, and what breaks the complex",
            Command::ShowSheet => "The dosing sheet as it will be printed",
            Command::Compare(..) => "Put two products side by side",
            Command::SwitchTheme => "Switch between the light and the dark theme",
        }
    }

    /// Its shortcut.
    pub fn shortcut(&self) -> Option<KeyboardShortcut> {
        let command = |key| Some(KeyboardShortcut::new(Modifiers::COMMAND, key));
        match self {
            Command::New => command(Key::N),
            Command::Open => command(Key::O),
            Command::Save => command(Key::S),
            Command::SaveAs => Some(KeyboardShortcut::new(COMMAND_SHIFT, Key::S)),
            Command::ExportSheet => command(Key::E),
            Command::Quit => command(Key::Q),
            Command::Undo => command(Key::Z),
            Command::Redo => Some(KeyboardShortcut::new(COMMAND_SHIFT, Key::Z)),
            Command::FindDose => Some(KeyboardShortcut::new(Modifiers::NONE, Key::F5)),
            Command::ShowBath => command(Key::Num1),
            Command::ShowCompare => command(Key::Num2),
            Command::ShowShift => command(Key::Num3),
            Command::ShowRinse => command(Key::Num4),
            Command::ShowSheet => command(Key::Num5),
            Command::OpenDemo(_) | Command::SwitchTheme | Command::Compare(..) => None,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn no_two_commands_share_a_shortcut() {
        let mut seen = Vec::new();
        for command in Command::WITH_SHORTCUT {
            let shortcut = command.shortcut().expect("listed as having one");
            assert!(!seen.contains(&shortcut), "{command:?}");
            seen.push(shortcut);
        }
    }

    #[test]
    fn shortcuts_with_more_modifiers_are_asked_first() {
        let count = |command: &Command| {
            let modifiers = command.shortcut().expect("listed as having one").modifiers;
            usize::from(modifiers.shift) + usize::from(modifiers.alt)
        };
        let counts: Vec<usize> = Command::WITH_SHORTCUT.iter().map(count).collect();
        assert!(counts.windows(2).all(|pair| pair[0] >= pair[1]), "{counts:?}");
    }
}
