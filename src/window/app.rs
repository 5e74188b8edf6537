//! The application: receives answers and runs commands in `logic`, draws in `ui`.

use super::answer::{Across, Answer, Quick, Request, Thorough, View};
use super::command::Command;
use super::dialogs::{Ask, Pending, Purpose, dialogs};
use super::document::Document;
use super::story::{Story, Told, Wanted};
use super::worker::Worker;
use super::{bath_page, compare_page, frame, rinse_page, sheet_page, shift_page, theme};
use crate::bath::{BathError, DEMOS, Project};
use crate::dosing::Hold;
use crate::sheet::{to_pdf, to_text};
use eframe::egui::{self, Context, Theme, ViewportCommand};
use std::path::{Path, PathBuf};
use std::sync::Arc;

/// The pages of the window.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Page {
    /// Tank, diagram, doses.
    Bath,
    /// Two agents side by side.
    Compare,
    /// The shifts ahead.
    Shift,
    /// The rinse water.
    Rinse,
    /// The dosing sheet.
    Sheet,
}

/// A line that tells how the last command went.
#[derive(Clone, Debug, PartialEq)]
pub struct Notice {
    /// The text.
    pub text: String,
    /// Whether something went wrong.
    pub bad: bool,
}

/// Everything the window shows, read by the drawing functions.
pub struct App {
    pub(super) document: Document,
    pub(super) view: View,
    pub(super) page: Page,
    pub(super) part: bath_page::Part,
    pub(super) quick: Option<Box<Quick>>,
    pub(super) thorough: Option<Box<Thorough>>,
    pub(super) error: Option<BathError>,
    told: Option<Box<Told>>,
    compared: [Option<String>; 2],
    pub(super) notice: Option<Notice>,
    pub(super) generation: u64,
    asked: Option<(Project, View)>,
    answered: u64,
    find: Option<usize>,
    worker: Option<Worker>,
    dialogs: Arc<dyn Ask>,
    pending: Option<Pending>,
    close_anyway: bool,
    ask_before_close: bool,
}

impl App {
    /// The window's state for a project, with the system's file dialogs.
    pub fn new(ctx: &Context, project: Project, path: Option<PathBuf>) -> Self {
        Self::with_dialogs(ctx, project, path, dialogs())
    }

    /// As [`App::new`], with something else to answer the file dialogs.
    pub fn with_dialogs(
        ctx: &Context,
        project: Project,
        path: Option<PathBuf>,
        dialogs: Arc<dyn Ask>,
    ) -> Self {
        theme::install(ctx);
        let wake = {
            let ctx = ctx.clone();
            move || ctx.request_repaint()
        };
        let (worker, notice) = match Worker::start(wake) {
            Ok(worker) => (Some(worker), None),
            Err(error) => {
                let text = format!("the worker threads did not start ({error}): nothing will be computed");
                (None, Some(Notice { text, bad: true }))
            }
        };
        Self {
            document: Document::new(project, path),
            view: View { across: Across::Ph, basis: None, wanted: None },
            page: Page::Bath,
            part: bath_page::Part::Doses,
            quick: None,
            thorough: None,
            error: None,
            told: None,
            compared: [None, None],
            notice,
            generation: 0,
            asked: None,
            answered: 0,
            find: None,
            worker,
            dialogs,
            pending: None,
            close_anyway: false,
            ask_before_close: false,
        }
    }

    /// The project as edited.
    pub fn project(&self) -> &Project {
        &self.document.project
    }

    /// Changes the project as one edit.
    pub fn edit(&mut self, change: impl FnOnce(&mut Project), name: &str) {
        change(&mut self.document.project);
        self.document.settle(name);
    }

    /// The state of the doses as last computed.
    pub fn verdict_state(&self) -> Option<crate::dosing::State> {
        self.thorough.as_ref().map(|thorough| thorough.verdict.state)
    }

    /// Whether every picture answers the project as it stands.
    pub fn is_current(&self) -> bool {
        let searched = self.thorough.as_ref().is_some_and(|thorough| thorough.generation == self.generation);
        self.answered == self.generation && (searched || self.error.is_some())
    }

    /// Whether the fast part answers the project as it stands.
    pub(super) fn picture_is_current(&self) -> bool {
        self.answered == self.generation
    }

    /// Whether a dose is being searched for the slider.
    pub(super) fn is_finding(&self) -> bool {
        self.find.is_some()
    }

    pub(super) fn must_ask_before_close(&self) -> bool {
        self.ask_before_close
    }

    /// The two products of the comparison: those picked, else the first two agents of the bath.
    pub(super) fn compared(&self) -> [Option<String>; 2] {
        let listed = |number: usize| self.project().agents.get(number).map(|agent| agent.product.clone());
        [0, 1].map(|number| self.compared[number].clone().or_else(|| listed(number)))
    }

    /// What the open page wants to be told.
    pub(super) fn wanted(&self) -> Option<Wanted> {
        match self.page {
            Page::Bath | Page::Sheet => None,
            Page::Shift => Some(Wanted::Shift),
            Page::Rinse => Some(Wanted::Rinse),
            Page::Compare => match self.compared() {
                [Some(a), Some(b)] if a != b => Some(Wanted::Comparison(a, b)),
                _ => None,
            },
        }
    }

    /// The newest story of a kind; that of an older version stays until the new one is there.
    pub(super) fn story_of(&self, is: impl Fn(&Wanted) -> bool) -> Option<Result<&Story, &BathError>> {
        let told = self.told.as_ref().filter(|told| is(&told.wanted))?;
        Some(told.story.as_ref())
    }

    /// Sends the project to the worker when it differs from what was asked last.
    fn ask_if_changed(&mut self) {
        self.view.wanted = self.wanted();
        let now = (&self.document.project, &self.view);
        if self.asked.as_ref().is_some_and(|(project, view)| (project, view) == now) {
            return;
        }
        self.generation += 1;
        self.asked = Some((self.document.project.clone(), self.view.clone()));
        let request = Request {
            generation: self.generation,
            project: self.document.project.clone(),
            view: self.view.clone(),
        };
        if let Some(worker) = &self.worker {
            worker.ask(&request);
        }
    }

    fn receive(&mut self) {
        while let Some(answer) = self.worker.as_ref().and_then(Worker::answer) {
            match answer {
                Answer::Failed { generation, error } if generation >= self.answered => {
                    self.answered = generation;
                    self.error = Some(error);
                    if generation == self.generation && self.find.take().is_some() {
                        self.say_bad("no dose can be found until the bath is complete".to_owned());
                    }
                }
                Answer::Quick(quick) if quick.generation >= self.answered => {
                    self.answered = quick.generation;
                    self.error = None;
                    self.quick = Some(quick);
                }
                Answer::Thorough(thorough) => {
                    let newer =
                        self.thorough.as_ref().is_none_or(|old| thorough.generation >= old.generation);
                    if newer {
                        self.thorough = Some(thorough);
                    }
                }
                Answer::Told(told)
                    if self.told.as_ref().is_none_or(|old| told.generation >= old.generation) =>
                {
                    self.told = Some(told);
                }
                _ => {}
            }
        }
        self.finish_find();
    }

    /// Moves the slider once the search of the present project is there.
    fn finish_find(&mut self) {
        let Some(agent) = self.find else { return };
        let Some(thorough) = self.thorough.as_ref().filter(|t| t.generation == self.generation) else {
            return;
        };
        self.find = None;
        let Some(search) = thorough.searches.get(agent) else {
            self.say_bad("set a ceiling under Limits first, then find the dose".to_owned());
            return;
        };
        let name = self.document.project.agents[agent].product.clone();
        match &search.found {
            Some(found) => {
                let from = self.document.project.agents[agent].dose_g_l;
                let dose = round_up(found.dose_g_l);
                self.document.project.agents[agent].dose_g_l = dose;
                self.document.settle(&format!("dose {name} {} → {} g/L", shown(from), shown(dose)));
                let sure = if found.hold == Hold::Sure {
                    "with 95 % confidence"
                } else {
                    "by plain numbers, not with 95 % confidence"
                };
                self.say(format!("smallest dose that holds {sure}: {} g/L", shown(dose)));
            }
            None => self.say_bad(format!(
                "no dose of {name} up to {} g/L holds",
                shown(search.bands.last().map_or(0.0, |b| b.to))
            )),
        }
    }

    pub(super) fn say(&mut self, text: String) {
        self.notice = Some(Notice { text, bad: false });
    }

    pub(super) fn say_bad(&mut self, text: String) {
        self.notice = Some(Notice { text, bad: true });
    }

    /// Carries out a command.
    pub fn run(&mut self, ctx: &Context, command: Command) {
        match command {
            Command::New => self.replace(Document::new(Project::empty(), None)),
            Command::OpenDemo(number) => match DEMOS.get(number).map(crate::bath::Demo::project) {
                Some(Ok(project)) => self.replace(Document::new(project, None)),
                Some(Err(error)) => self.say_bad(error.to_string()),
                None => {}
            },
            Command::Open => self.open_dialog(ctx, Purpose::Open, String::new()),
            Command::Save => match self.document.path.clone() {
                Some(path) => self.save(&path),
                None => self.run(ctx, Command::SaveAs),
            },
            Command::SaveAs => self.open_dialog(ctx, Purpose::SaveAs, self.suggestion("ron")),
            Command::ExportSheet => self.open_dialog(ctx, Purpose::ExportSheet, self.suggestion("pdf")),
            Command::Quit => ctx.send_viewport_cmd(ViewportCommand::Close),
            Command::Undo => {
                if let Some(name) = self.document.undo() {
                    self.say(format!("undone: {name}"));
                }
            }
            Command::Redo => {
                if let Some(name) = self.document.redo() {
                    self.say(format!("redone: {name}"));
                }
            }
            Command::FindDose => match self.document.project.agents.iter().position(|agent| !agent.locked) {
                Some(agent) => self.find = Some(agent),
                None => self.say_bad("add a complexing agent first".to_owned()),
            },
            Command::ShowBath => self.page = Page::Bath,
            Command::ShowCompare => self.page = Page::Compare,
            Command::ShowShift => self.page = Page::Shift,
            Command::ShowRinse => self.page = Page::Rinse,
            Command::ShowSheet => self.page = Page::Sheet,
            Command::Compare(a, b) => {
                self.compared = [Some(a), Some(b)];
                self.page = Page::Compare;
            }
            Command::SwitchTheme => {
                let dark = ctx.theme() == Theme::Dark;
                ctx.set_theme(if dark { Theme::Light } else { Theme::Dark });
            }
        }
    }

    fn replace(&mut self, document: Document) {
        self.document = document;
        self.asked = None;
        self.view = View { across: Across::Ph, basis: None, wanted: None };
        self.told = None;
        self.compared = [None, None];
        self.thorough = None;
        self.find = None;
        self.notice = None;
        self.page = Page::Bath;
    }

    /// "copper-strike.pdf"
    fn suggestion(&self, ending: &str) -> String {
        let words = self.document.project.name.to_lowercase();
        let slug: String = words.chars().map(|c| if c.is_alphanumeric() { c } else { '-' }).collect();
        format!("{}.{ending}", slug.trim_matches('-'))
    }

    fn open_dialog(&mut self, ctx: &Context, purpose: Purpose, suggestion: String) {
        if self.pending.is_some() {
            self.say_bad("a file dialog is open already".to_owned());
            return;
        }
        let ctx = ctx.clone();
        match Pending::open(Arc::clone(&self.dialogs), purpose, suggestion, move || ctx.request_repaint()) {
            Ok(pending) => self.pending = Some(pending),
            Err(error) => self.say_bad(format!("the file dialog did not open: {error}")),
        }
    }

    fn finish_dialog(&mut self) {
        let Some((purpose, answer)) = self.pending.as_ref().and_then(Pending::poll) else { return };
        self.pending = None;
        let Some(path) = answer else { return };
        match purpose {
            Purpose::Open => self.open(&path),
            Purpose::SaveAs => self.save(&with_ending(path, "ron")),
            Purpose::ExportSheet => self.export(&with_ending(path, "pdf")),
        }
    }

    fn open(&mut self, path: &Path) {
        match Document::load(path) {
            Ok(document) => self.replace(document),
            Err(error) => self.say_bad(error.to_string()),
        }
    }

    fn save(&mut self, path: &Path) {
        match self.document.save(path) {
            Ok(()) => self.say(format!("saved {}", path.display())),
            Err(error) => self.say_bad(error.to_string()),
        }
    }

    fn export(&mut self, path: &Path) {
        let Some(thorough) = self.thorough.as_ref().filter(|t| t.generation == self.generation) else {
            self.say_bad("the sheet is still being computed; export it again in a moment".to_owned());
            return;
        };
        let bytes = match path.extension().and_then(|end| end.to_str()) {
            Some("csv") => Ok(thorough.sheet_csv.clone().into_bytes()),
            Some("txt") => Ok(to_text(&thorough.sheet).into_bytes()),
            _ => to_pdf(&thorough.sheet).map_err(|error| error.to_string()),
        };
        match bytes
            .and_then(|bytes| crate::bath::replace_file(path, &bytes).map_err(|error| error.to_string()))
        {
            Ok(()) => self.say(format!("sheet written to {}", path.display())),
            Err(error) => self.say_bad(format!("{}: {error}", path.display())),
        }
    }

    fn take_shortcuts(&mut self, ctx: &Context) {
        for command in Command::WITH_SHORTCUT {
            let Some(shortcut) = command.shortcut() else { continue };
            // A text field has its own undo.
            let in_text = matches!(&command, Command::Undo | Command::Redo) && ctx.text_edit_focused();
            if !in_text && ctx.input_mut(|input| input.consume_shortcut(&shortcut)) {
                self.run(ctx, command);
            }
        }
    }

    fn guard_close(&mut self, ctx: &Context) {
        if ctx.input(|input| input.viewport().close_requested())
            && self.document.is_dirty()
            && !self.close_anyway
        {
            ctx.send_viewport_cmd(ViewportCommand::CancelClose);
            self.ask_before_close = true;
        }
    }

    /// The answer to "close without saving?".
    pub(super) fn answer_close(&mut self, ctx: &Context, close: bool) {
        self.ask_before_close = false;
        if close {
            self.close_anyway = true;
            ctx.send_viewport_cmd(ViewportCommand::Close);
        }
    }
}

impl eframe::App for App {
    fn logic(&mut self, ctx: &Context, _frame: &mut eframe::Frame) {
        self.receive();
        self.finish_dialog();
        self.take_shortcuts(ctx);
        self.guard_close(ctx);
        self.ask_if_changed();
    }

    fn ui(&mut self, ui: &mut egui::Ui, _frame: &mut eframe::Frame) {
        frame::top(self, ui);
        frame::status(self, ui);
        match self.page {
            Page::Bath => bath_page::show(self, ui),
            Page::Compare => compare_page::show(self, ui),
            Page::Shift => shift_page::show(self, ui),
            Page::Rinse => rinse_page::show(self, ui),
            Page::Sheet => sheet_page::show(self, ui),
        }
        frame::close_question(self, ui);
        // Edits of this frame are asked for at once, so that the answer is on its way before the next.
        self.ask_if_changed();
    }
}

/// A dose rounded up in its fourth decimal: it still holds, and rounds to the same amount on the scale.
fn round_up(dose: f64) -> f64 {
    (dose * 1e4 - 1e-9).ceil() / 1e4
}

/// A dose as the window shows it.
pub(super) fn shown(dose: f64) -> String {
    crate::quantity::plain(dose, 2)
}

fn with_ending(path: PathBuf, ending: &str) -> PathBuf {
    if path.extension().is_some() { path } else { path.with_extension(ending) }
}
