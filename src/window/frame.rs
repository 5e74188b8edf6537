//! What stands around every page: menu, page tabs with the state, status line, and the question before closing.

use super::app::{App, Page};
use super::command::Command;
use super::theme::{INSET, State, Text, palette};
use super::widget::chip;
use crate::bath::DEMOS;
use crate::dosing::State as Hold;
use eframe::egui::{self, Align, Button, Context, Frame, Layout, Margin, Modal, Panel, Stroke, Ui};

/// The window's mark for a state of the doses.
pub fn state_of(hold: Hold) -> State {
    match hold {
        Hold::Held => State::Held,
        Hold::Unsure => State::Unsure,
        Hold::NotHeld => State::NotHeld,
        Hold::Infeasible => State::Infeasible,
        Hold::NoLimit => State::Unknown,
    }
}

/// Width from which the file's name stands in the menu row, points.
const FILE_NAME_FROM: f32 = 960.0;

/// Menu and page tabs.
pub fn top(app: &mut App, ui: &mut Ui) {
    let p = palette(ui);
    let bar = |margin: i8| Frame::new().fill(p.panel).inner_margin(Margin::symmetric(margin, 2));
    let mut chosen = None;
    Panel::top("menu").resizable(false).show_separator_line(false).frame(bar(8)).show(ui, |ui| {
        ui.horizontal(|ui| {
            chosen = menus(app, ui);
            ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
                ui.add_space(8.0);
                let dirty = if app.document.is_dirty() { "edited, not saved" } else { "saved" };
                let file = format!("{} · {dirty}", app.document.file_name());
                // On a narrow window the bath's name needs the room.
                if ui.ctx().content_rect().width() >= FILE_NAME_FROM {
                    ui.label(Text::Small.rich(file, p.ink2));
                }
                ui.with_layout(Layout::centered_and_justified(egui::Direction::LeftToRight), |ui| {
                    let project = app.project();
                    let place =
                        if project.place.is_empty() { String::new() } else { format!("{}: ", project.place) };
                    let invented = if project.invented { "  demo bath, invented numbers" } else { "" };
                    ui.label(Text::Strong.rich(format!("{place}{}{invented}", project.name), p.ink));
                });
            });
        });
    });
    Panel::top("pages").resizable(false).frame(bar(8)).show(ui, |ui| {
        ui.horizontal(|ui| {
            let pages = [Page::Bath, Page::Compare, Page::Shift, Page::Rinse, Page::Sheet];
            for (page, command) in pages.into_iter().zip(Command::PAGES) {
                let selected = app.page == page;
                let text = if selected { Text::Strong } else { Text::Body }.rich(command.text(), p.ink);
                let tab = Button::new(text)
                    .fill(if selected { p.desk } else { p.panel })
                    .stroke(Stroke::new(1.0, if selected { p.line } else { p.panel }));
                if ui.add(tab).on_hover_text(command.tip()).clicked() {
                    chosen = Some(command);
                }
            }
            ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
                ui.add_space(8.0);
                let Some(thorough) = &app.thorough else { return };
                let state = state_of(thorough.verdict.state);
                chip(ui, state, &thorough.verdict.short);
            });
        });
    });
    if let Some(command) = chosen {
        let ctx = ui.ctx().clone();
        app.run(&ctx, command);
    }
}

fn menus(app: &App, ui: &mut Ui) -> Option<Command> {
    let mut chosen = None;
    let mut item = |ui: &mut Ui, command: Command, text: String, enabled: bool| {
        let mut button = Button::new(text);
        if let Some(shortcut) = command.shortcut() {
            button = button.shortcut_text(ui.ctx().format_shortcut(&shortcut));
        }
        if ui.add_enabled(enabled, button).on_hover_text(command.tip()).clicked() {
            chosen = Some(command);
            ui.close();
        }
    };
    ui.menu_button("File", |ui| {
        for command in [Command::New, Command::Open] {
            let text = command.text().to_owned();
            item(ui, command, text, true);
        }
        ui.menu_button("Open demo bath", |ui| {
            for (number, demo) in DEMOS.iter().enumerate() {
                let name = demo.project().map_or_else(|_| demo.file.to_owned(), |project| project.name);
                item(ui, Command::OpenDemo(number), name, true);
            }
        });
        ui.separator();
        for command in [Command::Save, Command::SaveAs, Command::ExportSheet] {
            let text = command.text().to_owned();
            item(ui, command, text, true);
        }
        ui.separator();
        item(ui, Command::Quit, Command::Quit.text().to_owned(), true);
    });
    ui.menu_button("Edit", |ui| {
        for (command, name) in
            [(Command::Undo, app.document.undo_name()), (Command::Redo, app.document.redo_name())]
        {
            let text =
                name.map_or_else(|| command.text().to_owned(), |name| format!("{}: {name}", command.text()));
            item(ui, command, text, name.is_some());
        }
        ui.separator();
        item(ui, Command::FindDose, Command::FindDose.text().to_owned(), true);
    });
    ui.menu_button("View", |ui| {
        for command in Command::PAGES.into_iter().chain([Command::SwitchTheme]) {
            let text = command.text().to_owned();
            item(ui, command, text, true);
        }
    });
    chosen
}

/// The line at the foot: what the numbers rest on, and how the last command went.
pub fn status(app: &App, ui: &mut Ui) {
    let p = palette(ui);
    let frame = Frame::new().fill(p.panel).inner_margin(Margin::symmetric(INSET as i8, 3));
    Panel::bottom("status").resizable(false).frame(frame).show(ui, |ui| {
        ui.horizontal(|ui| {
            ui.label(Text::Axis.rich(rests_on(app), p.ink2));
            ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
                if let Some(notice) = &app.notice {
                    let colour = if notice.bad { p.not_held } else { p.ink };
                    ui.label(Text::SmallStrong.rich(&notice.text, colour));
                }
            });
        });
    });
}

fn rests_on(app: &App) -> String {
    let state = if app.is_current() {
        "picture is current"
    } else if app.picture_is_current() {
        "searching doses"
    } else {
        "recomputing"
    };
    match &app.quick {
        Some(quick) => format!(
            "Equilibrium only · activity: {} · constants moved to {} °C, I = {} mol/L · balance residual {:.0e} · {state}",
            quick.bath.project.activity.name(),
            crate::quantity::plain(quick.bath.project.tank.temperature_c.set, 1),
            crate::quantity::significant(quick.solution.ionic_strength, 2),
            quick.solution.certificate.balance_residual,
        ),
        None => format!("Equilibrium only · {state}"),
    }
}

/// "Close without saving?"
pub fn close_question(app: &mut App, ui: &Ui) {
    if !app.must_ask_before_close() {
        return;
    }
    let ctx: Context = ui.ctx().clone();
    let mut answer = None;
    let modal = Modal::new(egui::Id::unique("close question")).show(&ctx, |ui| {
        ui.label(Text::Heading.rich("Close without saving?", palette(ui).ink));
        ui.label("The project has edits that no file holds.");
        ui.horizontal(|ui| {
            if ui.button("Keep working").clicked() {
                answer = Some(false);
            }
            if ui.button("Close without saving").clicked() {
                answer = Some(true);
            }
        });
    });
    if modal.should_close() {
        answer = Some(false);
    }
    if let Some(close) = answer {
        app.answer_close(&ctx, close);
    }
}
