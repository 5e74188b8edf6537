//! `bathwright shift` as a process: what scripts rely on.

use serde_json::Value;
use std::ffi::OsStr;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn demo(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("demo_baths").join(name)
}

fn shift(file: &Path, options: &[&OsStr]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_bathwright"))
        .arg("shift")
        .arg(file)
        .args(options)
        .env_remove("DISPLAY")
        .env_remove("WAYLAND_DISPLAY")
        .output()
        .expect("the program starts")
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("text")
}

fn json(file: &Path, options: &[&str]) -> Value {
    let options: Vec<&OsStr> = ["--json"].iter().chain(options).map(OsStr::new).collect();
    let output = shift(file, &options);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    serde_json::from_slice(&output.stdout).unwrap()
}

#[test]
fn the_plan_of_each_demo_bath_with_a_shift_holds_and_alone_it_does_not() {
    for file in ["derusting.ron", "hard_water_cleaner.ron", "electroless_nickel.ron"] {
        let object = json(&demo(file), &[]);
        assert_eq!(
            (&object["holds"], &object["invented"]),
            (&Value::Bool(true), &Value::Bool(true)),
            "{file}"
        );
        assert_eq!(object["confidence"], "95 %");
        let most = |course: &str| {
            let points = object[course]["points"].as_array().unwrap();
            points.iter().map(|point| point["share_of_limit_95"].as_f64().unwrap()).fold(0.0, f64::max)
        };
        assert!(most("left_alone") > 1.0 && most("with_additions") < 1.02, "{file}");
        assert!(!object["left_alone"]["crossings"].as_array().unwrap().is_empty());
        let additions = object["additions"].as_array().unwrap();
        let kg: f64 = additions.iter().map(|addition| addition["measured_kg"].as_f64().unwrap()).sum();
        assert!((kg - object["total_kg"].as_f64().unwrap()).abs() < 1e-9);
        assert!(!additions.is_empty() || !object["bail_outs"].as_array().unwrap().is_empty(), "{file}");
    }
}

#[test]
fn more_shifts_take_more_additions() {
    let additions = |shifts: &str| {
        let object = json(&demo("hard_water_cleaner.ron"), &["--shifts", shifts]);
        assert_eq!(object["shifts"].to_string(), shifts);
        object["additions"].as_array().unwrap().len()
    };
    assert!(additions("1") < additions("8"));
}

#[test]
fn the_table_names_the_crossing_the_additions_and_the_bail_out() {
    let told = text(&shift(&demo("derusting.ron"), &[]).stdout);
    for needle in ["the iron(III) ceiling: not sure from shift 1", "Additions of EDTA", "kg in all"] {
        assert!(told.contains(needle), "{needle} is not in\n{told}");
    }
    let told = text(&shift(&demo("electroless_nickel.ron"), &[]).stdout);
    assert!(told.contains("Take out") && told.contains("fresh bath"), "{told}");
}

#[test]
fn the_hours_are_written_as_table_and_picture() {
    let folder = tempfile::tempdir().unwrap();
    let csv = folder.path().join("forecast.csv");
    let output = shift(&demo("derusting.ron"), &[OsStr::new("--out"), csv.as_os_str()]);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let table = std::fs::read_to_string(&csv).unwrap();
    let rows: Vec<&str> = table.lines().collect();
    let columns = rows[0].split(',').count();
    assert!(rows.iter().all(|row| row.split(',').count() == columns));
    // 49 moments left alone; with additions as many and one more for each that comes after the beginning.
    assert_eq!(rows.iter().filter(|row| row.starts_with("left alone,")).count(), 49);
    assert_eq!(rows.iter().filter(|row| row.starts_with("with additions,")).count(), 50);
    let svg = folder.path().join("forecast.svg");
    shift(&demo("derusting.ron"), &[OsStr::new("--out"), svg.as_os_str()]);
    assert!(std::fs::read_to_string(&svg).unwrap().starts_with("<svg"));
}

#[test]
fn what_can_not_be_forecast_is_refused_with_field_and_fix() {
    let output = shift(&demo("copper_strike.ron"), &[]);
    assert_eq!(output.status.code(), Some(2));
    assert!(text(&output.stderr).contains("shift is missing"), "{}", text(&output.stderr));
    let output = shift(&demo("derusting.ron"), &[OsStr::new("--out"), OsStr::new("forecast.pdf")]);
    assert_eq!(output.status.code(), Some(2));
    assert!(text(&output.stderr).contains(".svg or .csv"));
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("bath.ron");
    let project = std::fs::read_to_string(demo("derusting.ron")).unwrap();
    std::fs::write(&file, project.replace("drag_out_l_h: 4", "drag_out_l_h: -4")).unwrap();
    let output = shift(&file, &[]);
    assert_eq!(output.status.code(), Some(2));
    assert!(text(&output.stderr).contains("shift.drag_out_l_h is -4: give litres per hour"));
}
