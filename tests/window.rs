//! The window, driven by its accessibility labels: edit, number changes, undo, number returns.

use bathwright::bath::{DEMOS, Project};
use bathwright::window::{App, Ask, Command, Purpose};
use eframe::egui::accesskit::Role;
use egui_kittest::Harness;
use egui_kittest::kittest::Queryable as _;
use std::path::PathBuf;
use std::sync::Arc;
use std::time::{Duration, Instant};

/// Answers every dialog with one path.
struct Always(PathBuf);

impl Ask for Always {
    fn ask(&self, _purpose: Purpose, _suggestion: &str) -> Option<PathBuf> {
        Some(self.0.clone())
    }
}

fn demo() -> Project {
    DEMOS[0].project().unwrap()
}

fn open(project: Project, dialogs: Arc<dyn Ask>) -> Harness<'static, App> {
    let mut harness = Harness::builder()
        .with_size([1440.0, 900.0])
        .build_eframe(move |cc| App::with_dialogs(&cc.egui_ctx, project, None, dialogs));
    settle(&mut harness);
    harness
}

fn lab() -> Harness<'static, App> {
    open(demo(), Arc::new(Always(PathBuf::from("unused"))))
}

/// Steps until every picture answers the project as it stands.
fn settle(harness: &mut Harness<'static, App>) {
    let deadline = Instant::now() + Duration::from_secs(120);
    harness.step();
    harness.step();
    while !harness.state().is_current() {
        assert!(Instant::now() < deadline, "the worker did not answer");
        std::thread::sleep(Duration::from_millis(5));
        harness.step();
    }
    harness.step();
}

fn command(harness: &mut Harness<'static, App>, command: Command) {
    let ctx = harness.ctx.clone();
    harness.state_mut().run(&ctx, command);
    settle(harness);
}

fn dose(harness: &Harness<'static, App>) -> f64 {
    harness.state().project().agents[0].dose_g_l
}

#[test]
fn the_window_opens_on_a_bath_with_a_problem_and_says_so() {
    let harness = lab();
    assert!(harness.query_all_by_label_contains("Not held").count() > 0);
    harness.get_by_label("Find the dose F5");
}

#[test]
fn finding_the_dose_moves_the_slider_and_undo_brings_it_back() {
    let mut harness = lab();
    let before = dose(&harness);
    command(&mut harness, Command::FindDose);
    settle(&mut harness);
    let found = dose(&harness);
    assert!(found > before, "{found}");
    let state = harness.state().verdict_state().unwrap();
    assert!(
        matches!(state, bathwright::dosing::State::Held | bathwright::dosing::State::Unsure),
        "{state:?}"
    );
    command(&mut harness, Command::Undo);
    assert_eq!(dose(&harness), before);
    command(&mut harness, Command::Redo);
    assert_eq!(dose(&harness), found);
}

#[test]
fn the_dose_slider_moves_with_the_keyboard() {
    let mut harness = lab();
    let product = harness.state().project().agents[0].product.clone();
    harness.get_by_role_and_label(Role::Slider, &product).focus();
    harness.step();
    for _ in 0..5 {
        harness.key_press(eframe::egui::Key::ArrowRight);
        harness.step();
    }
    settle(&mut harness);
    assert!((dose(&harness) - 0.5).abs() < 1e-9, "{}", dose(&harness));
}

#[test]
fn a_typed_volume_changes_the_amounts_and_nonsense_is_refused() {
    let mut harness = lab();
    let field = harness.get_by_role_and_label(Role::TextInput, "working volume");
    field.focus();
    harness.step();
    harness.key_press_modifiers(eframe::egui::Modifiers::COMMAND, eframe::egui::Key::A);
    harness.get_by_role_and_label(Role::TextInput, "working volume").type_text("920");
    harness.step();
    harness.key_press(eframe::egui::Key::Enter);
    settle(&mut harness);
    assert_eq!(harness.state().project().tank.volume_l, 920.0);
    harness.get_by_role_and_label(Role::TextInput, "working volume").focus();
    harness.step();
    harness.key_press_modifiers(eframe::egui::Modifiers::COMMAND, eframe::egui::Key::A);
    harness.get_by_role_and_label(Role::TextInput, "working volume").type_text("lots");
    harness.step();
    harness.key_press(eframe::egui::Key::Enter);
    settle(&mut harness);
    assert_eq!(harness.state().project().tank.volume_l, 920.0);
}

#[test]
fn the_sheet_page_shows_the_pages_that_export_writes() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("sheet.pdf");
    let mut harness = open(demo(), Arc::new(Always(path.clone())));
    command(&mut harness, Command::FindDose);
    settle(&mut harness);
    command(&mut harness, Command::ShowSheet);
    harness.get_by_label("page 1 of the dosing sheet");
    command(&mut harness, Command::ExportSheet);
    let deadline = Instant::now() + Duration::from_secs(20);
    while !path.exists() {
        assert!(Instant::now() < deadline, "no sheet was written");
        std::thread::sleep(Duration::from_millis(5));
        harness.step();
    }
    assert!(std::fs::read(&path).unwrap().starts_with(b"%PDF"));
}

#[test]
fn saving_and_opening_bring_the_same_project_back() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("mine.ron");
    let mut harness = open(demo(), Arc::new(Always(path.clone())));
    harness.state_mut().edit(|project| project.agents[0].dose_g_l = 12.5, "dose to 12.5 g/L");
    settle(&mut harness);
    command(&mut harness, Command::SaveAs);
    let deadline = Instant::now() + Duration::from_secs(20);
    while !path.exists() {
        assert!(Instant::now() < deadline);
        std::thread::sleep(Duration::from_millis(5));
        harness.step();
    }
    command(&mut harness, Command::New);
    assert!(harness.state().project().agents.is_empty());
    let ctx = harness.ctx.clone();
    harness.state_mut().run(&ctx, Command::Open);
    while harness.state().project().agents.is_empty() {
        assert!(Instant::now() < deadline);
        std::thread::sleep(Duration::from_millis(5));
        harness.step();
    }
    settle(&mut harness);
    assert_eq!(dose(&harness), 12.5);
}

#[test]
fn an_impossible_bath_keeps_the_last_picture_and_names_the_field() {
    let mut harness = lab();
    harness.state_mut().edit(|project| project.contents[0].what = "unobtainium".to_owned(), "rename");
    settle(&mut harness);
    assert!(harness.query_all_by_label_contains("unobtainium").count() > 0);
    command(&mut harness, Command::Undo);
    assert_eq!(harness.query_all_by_label_contains("unobtainium").count(), 0);
}

#[test]
fn an_empty_bath_says_what_to_do_first() {
    let mut harness = lab();
    command(&mut harness, Command::New);
    assert!(harness.query_all_by_label_contains("contents is empty").count() > 0);
}

#[test]
fn every_demo_bath_opens_and_is_solved() {
    let mut harness = lab();
    for (number, demo) in DEMOS.iter().enumerate() {
        command(&mut harness, Command::OpenDemo(number));
        assert!(harness.state().verdict_state().is_some(), "{}", demo.file);
    }
}

/// Steps until a label appears.
fn wait_for(harness: &mut Harness<'static, App>, label: &str) {
    let deadline = Instant::now() + Duration::from_secs(120);
    while harness.query_all_by_label_contains(label).count() == 0 {
        assert!(Instant::now() < deadline, "\"{label}\" did not appear");
        std::thread::sleep(Duration::from_millis(5));
        harness.step();
    }
}

#[test]
fn the_compare_page_sets_two_agents_side_by_side_and_takes_another() {
    let mut harness = lab();
    command(&mut harness, Command::ShowCompare);
    wait_for(&mut harness, "chelate rings");
    assert!(harness.query_all_by_label_contains("smallest dose").count() > 0);
    let agents = &harness.state().project().agents;
    let first = agents[0].product.clone();
    command(&mut harness, Command::Compare(first, "glycine".to_owned()));
    wait_for(&mut harness, "agent held by");
    wait_for(&mut harness, "glycine");
}

#[test]
fn the_shift_page_forecasts_and_an_input_changes_it_until_undone() {
    let project = bathwright::bath::Demo::named("derusting.ron").unwrap().project().unwrap();
    let mut harness = open(project, Arc::new(Always(PathBuf::from("unused"))));
    command(&mut harness, Command::FindDose);
    settle(&mut harness);
    command(&mut harness, Command::ShowShift);
    wait_for(&mut harness, "Additions of");
    let before = harness.state().project().shift.evaporation_l_h;
    let change = |project: &mut Project| project.shift.evaporation_l_h = before + 5.0;
    harness.state_mut().edit(change, "evaporation");
    settle(&mut harness);
    wait_for(&mut harness, "Additions of");
    command(&mut harness, Command::Undo);
    assert_eq!(harness.state().project().shift.evaporation_l_h, before);
}

#[test]
fn the_rinse_page_treats_the_water_and_says_whose_rules_count() {
    let mut harness = lab();
    command(&mut harness, Command::ShowRinse);
    wait_for(&mut harness, "to treatment");
    assert!(harness.query_all_by_label_contains("your permit rules").count() > 0);
    assert!(harness.query_all_by_label_contains("without agents").count() > 0);
}

#[test]
fn each_page_has_a_key() {
    let mut harness = lab();
    for (key, label) in
        [(egui_key(2), "Two agents at equal result"), (egui_key(4), "Rinse water and its treatment")]
    {
        harness.key_press_modifiers(eframe::egui::Modifiers::COMMAND, key);
        settle(&mut harness);
        wait_for(&mut harness, label);
    }
}

fn egui_key(number: usize) -> eframe::egui::Key {
    eframe::egui::Key::from_name(&number.to_string()).unwrap()
}
