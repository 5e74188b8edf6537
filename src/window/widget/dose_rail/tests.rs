//! The dose rail under keyboard, mouse and screen reader.

use super::*;
use crate::window::widget::lab;
use eframe::egui::{Key, Modifiers};
use egui_kittest::Harness;
use egui_kittest::kittest::{NodeT as _, Queryable as _};

#[derive(Default)]
struct Seen {
    dose: f64,
    changes: usize,
    done: usize,
}

fn harness<'a>() -> Harness<'a, Seen> {
    let start = Seen { dose: 16.0, ..Seen::default() };
    lab([420.0, 120.0], start, |ui, seen: &mut Seen| {
        let zone = |from, to, state, words| Zone { from, to, state, words };
        let zones = [
            zone(0.0, 13.9, State::Unsure, "unsure: ceiling"),
            zone(13.9, 31.2, State::Held, ""),
            zone(31.2, 40.0, State::Unsure, "unsure: floor"),
        ];
        let rail = DoseRail::new("HEDP", "g/L", 0.0..=40.0).zones(&zones);
        let edit = rail.cap(Some(21.5)).show(ui, seen.dose);
        seen.changes += usize::from(edit.value.is_some());
        seen.done += usize::from(edit.done);
        seen.dose = edit.value.unwrap_or(seen.dose);
    })
}

#[test]
fn arrows_step_finely_and_with_shift_coarsely() {
    let mut harness = harness();
    harness.get_by_label("HEDP").focus();
    harness.run();
    harness.key_press(Key::ArrowRight);
    harness.run();
    assert_eq!(harness.state().dose, 16.1);
    harness.key_press_modifiers(Modifiers::SHIFT, Key::ArrowLeft);
    harness.run();
    assert_eq!(harness.state().dose, 15.1);
    harness.key_press(Key::PageUp);
    harness.run();
    assert_eq!(harness.state().dose, 16.1);
    assert_eq!(harness.state().done, 3);
}

#[test]
fn home_and_end_go_to_the_ends_and_no_further() {
    let mut harness = harness();
    harness.get_by_label("HEDP").focus();
    harness.run();
    harness.key_press(Key::End);
    harness.run();
    harness.key_press(Key::ArrowRight);
    harness.run();
    assert_eq!(harness.state().dose, 40.0);
    harness.key_press(Key::Home);
    harness.run();
    assert_eq!(harness.state().dose, 0.0);
}

#[test]
fn a_drag_moves_the_dose_many_times_and_ends_once() {
    let mut harness = harness();
    harness.run();
    let rail = harness.get_by_label("HEDP").rect();
    let x_of = |dose: f32| rail.left() + KNOB + dose / 40.0 * (rail.width() - 2.0 * KNOB);
    let at = |dose| pos2(x_of(dose), rail.center().y);
    harness.drag_at(at(16.0));
    harness.step();
    assert_eq!(harness.state().changes, 0, "taking the knob is no change");
    for dose in [20.0, 25.0, 30.0] {
        harness.hover_at(at(dose));
        harness.step();
    }
    assert!((harness.state().dose - 30.0).abs() < 0.15, "{}", harness.state().dose);
    assert_eq!(harness.state().done, 0);
    harness.drop_at(at(30.0));
    harness.run();
    assert_eq!(harness.state().done, 1);
}

#[test]
fn a_click_on_the_rail_brings_the_knob_there() {
    let mut harness = harness();
    harness.run();
    // The middle of the rail.
    harness.get_by_label("HEDP").click();
    harness.run();
    assert!((harness.state().dose - 20.0).abs() < 0.15);
    assert_eq!(harness.state().done, 1);
}

#[test]
fn a_screen_reader_hears_value_state_cap_and_zones() {
    let mut harness = harness();
    harness.run();
    let value = harness.get_by_label("HEDP").accesskit_node().value().unwrap_or_default();
    for part in ["16.0 g/L, held", "under the cap of 21.5", "held 13.9 to 31.2", "unsure: floor 31.2 to 40"] {
        assert!(value.contains(part), "{part} in {value}");
    }
}

#[test]
fn a_screen_reader_can_set_and_step_the_dose() {
    let mut harness = harness();
    harness.run();
    harness.get_by_label("HEDP").set_value_accesskit(20.04);
    harness.run();
    assert_eq!(harness.state().dose, 20.0);
    harness.get_by_label("HEDP").increment_accesskit();
    harness.run();
    assert_eq!(harness.state().dose, 20.1);
}

#[test]
fn a_dose_that_was_typed_finely_is_not_rounded_by_touching_the_knob() {
    let mut harness = harness();
    harness.state_mut().dose = 16.04;
    harness.run();
    let rail = harness.get_by_label("HEDP").rect();
    let x = rail.left() + KNOB + 16.04 / 40.0 * (rail.width() - 2.0 * KNOB);
    harness.drag_at(pos2(x + 3.0, rail.center().y));
    harness.step();
    harness.drop_at(pos2(x + 3.0, rail.center().y));
    harness.run();
    assert_eq!(harness.state().dose, 16.04);
}
