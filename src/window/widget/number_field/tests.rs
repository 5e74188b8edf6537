//! What a person does with a number field, and what the field makes of it.

use super::*;
use crate::window::widget::lab;
use eframe::egui::accesskit::Role;
use egui_kittest::Harness;
use egui_kittest::kittest::{NodeT as _, Queryable as _};

/// The value and how often it was committed.
type Seen = (f64, usize);

fn harness<'a>() -> Harness<'a, Seen> {
    lab([320.0, 90.0], (9.45, 0), |ui, (value, commits): &mut Seen| {
        let field = NumberField::new("pH").decimals(2).step(0.05).range(0.0..=14.0);
        let edit = field.show(ui, *value);
        *commits += usize::from(edit.done);
        *value = edit.value.unwrap_or(*value);
        let _ = ui.button("Elsewhere");
    })
}

/// Replaces the text and leaves the field with `last`.
fn enter(harness: &mut Harness<'_, Seen>, text: &str, last: Key) {
    let field = || (Role::TextInput, "pH");
    let (role, label) = field();
    harness.get_by_role_and_label(role, label).focus();
    harness.run();
    harness.key_press_modifiers(Modifiers::COMMAND, Key::A);
    harness.get_by_role_and_label(role, label).type_text(text);
    harness.run();
    harness.key_press(last);
    harness.run();
}

fn text(harness: &Harness<'_, Seen>) -> String {
    let node = harness.get_by_role_and_label(Role::TextInput, "pH");
    node.accesskit_node().value().unwrap_or_default()
}

#[test]
fn enter_commits_once_with_point_or_comma() {
    let mut harness = harness();
    enter(&mut harness, "8,75", Key::Enter);
    assert_eq!(*harness.state(), (8.75, 1));
    enter(&mut harness, "9.1", Key::Tab);
    assert_eq!(*harness.state(), (9.1, 2));
    assert_eq!(text(&harness), "9.10");
}

#[test]
fn text_that_is_no_number_keeps_the_old_value_and_says_why() {
    let mut harness = harness();
    enter(&mut harness, "abc", Key::Enter);
    assert_eq!(*harness.state(), (9.45, 0));
    assert_eq!(text(&harness), "abc", "it stays, to be mended");
    harness.get_by_label("“abc” is not a number");
    enter(&mut harness, "xyz", Key::Tab);
    assert_eq!(*harness.state(), (9.45, 0));
    assert_eq!(text(&harness), "9.45");
    harness.get_by_label("“xyz” is not a number; 9.45 kept");
}

#[test]
fn a_value_outside_the_range_is_refused_with_the_range() {
    let mut harness = harness();
    enter(&mut harness, "15", Key::Enter);
    assert_eq!(*harness.state(), (9.45, 0));
    harness.get_by_label("0 to 14");
}

#[test]
fn escape_gives_the_old_text_back_and_takes_the_error_away() {
    let mut harness = harness();
    enter(&mut harness, "abc", Key::Enter);
    harness.key_press(Key::Escape);
    harness.run();
    assert_eq!((*harness.state(), text(&harness)), ((9.45, 0), "9.45".to_owned()));
    assert!(harness.query_by_label_contains("not a number").is_none());
}

#[test]
fn looking_without_typing_commits_nothing() {
    let mut harness = harness();
    harness.state_mut().0 = 9.4512;
    harness.get_by_role_and_label(Role::TextInput, "pH").focus();
    harness.run();
    assert_eq!(text(&harness), "9.45");
    harness.key_press(Key::Enter);
    harness.run();
    assert_eq!(*harness.state(), (9.4512, 0));
}

#[test]
fn arrows_step_at_once_and_stop_at_the_range() {
    let mut harness = harness();
    harness.get_by_role_and_label(Role::TextInput, "pH").focus();
    harness.run();
    harness.key_press(Key::ArrowUp);
    harness.run();
    assert_eq!(harness.state().0, 9.5);
    harness.key_press_modifiers(Modifiers::SHIFT, Key::ArrowDown);
    harness.run();
    assert_eq!(harness.state().0, 9.0);
    assert_eq!(text(&harness), "9.00");
}

#[test]
fn an_error_goes_when_the_value_changes_from_outside() {
    let mut harness = harness();
    enter(&mut harness, "abc", Key::Tab);
    harness.state_mut().0 = 8.0;
    harness.run();
    assert!(harness.query_by_label_contains("kept").is_none());
}
