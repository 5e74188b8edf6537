//! The program without a window, run as a process: what scripts rely on.

use serde_json::Value;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};

fn demo(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("demo_baths").join(name)
}

fn demos() -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo_baths");
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder)
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|end| end == "ron"))
        .collect();
    files.sort();
    files
}

/// Runs the program without any display.
fn bathwright(arguments: &[&std::ffi::OsStr]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_bathwright"))
        .args(arguments)
        .env_remove("DISPLAY")
        .env_remove("WAYLAND_DISPLAY")
        .output()
        .expect("the program starts")
}

macro_rules! run {
    ($($argument:expr),* $(,)?) => { bathwright(&[$(std::ffi::OsStr::new($argument)),*]) };
}

fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("text")
}

fn json(output: &Output) -> Value {
    serde_json::from_slice(&output.stdout).unwrap_or_else(|error| panic!("{error}: {}", text(&output.stdout)))
}

#[test]
fn nine_demo_baths_solve_with_a_certificate_that_holds() {
    assert!(demos().len() >= 9);
    for file in demos() {
        let output = run!("solve", &file, "--json");
        assert_eq!(output.status.code(), Some(0), "{}: {}", file.display(), text(&output.stderr));
        let object = json(&output);
        for field in [
            "pH",
            "temperature_C",
            "ionic_strength",
            "free_metals",
            "species",
            "solids",
            "certificate",
            "flags",
        ] {
            assert!(object.get(field).is_some(), "{}: {field}", file.display());
        }
        assert_eq!(object["certificate"]["holds"], true, "{}", file.display());
        assert_eq!(object["invented"], true);
        let metals = object["free_metals"].as_object().unwrap();
        for (metal, entry) in metals {
            let (free, p) = (entry["mol_per_L"].as_f64().unwrap(), entry["pM"].as_f64());
            if free > 0.0 {
                assert!((p.unwrap() + free.log10()).abs() < 1e-9, "{metal}");
            }
        }
    }
}

#[test]
fn every_demo_bath_opens_with_a_problem_and_finds_a_dose_that_solves_it() {
    for file in demos() {
        let output = run!("dose", &file, "--json");
        assert_eq!(output.status.code(), Some(0), "{}: {}", file.display(), text(&output.stderr));
        let object = json(&output);
        let worst = |key: &str| {
            let cases = object[key].as_array().unwrap();
            cases.iter().map(|case| case["share_of_limit"].as_f64().unwrap()).fold(0.0, f64::max)
        };
        assert!(worst("worst_cases_before") > 1.0, "{} has no problem at first", file.display());
        assert!(worst("worst_cases") <= 1.0, "{} is not solved by its dose", file.display());
        assert!(object["dose_g_per_L"].as_f64().unwrap() > 0.0);
        let bands = object["bands"].as_array().unwrap();
        assert!(
            bands.windows(2).all(|pair| pair[0]["to_g_per_L"].as_f64() <= pair[1]["from_g_per_L"].as_f64())
        );
    }
}

#[test]
fn every_demo_bath_prints_its_sheet_with_the_dose_in_all_three_formats() {
    let folder = tempfile::tempdir().unwrap();
    for file in demos() {
        let object = json(&run!("dose", &file, "--json"));
        let amount = object["additions"][0]["measure_out"].as_str().unwrap().to_owned();
        for ending in ["pdf", "csv", "txt"] {
            let sheet = folder.path().join(format!("sheet.{ending}"));
            let output = run!("sheet", &file, "--out", &sheet);
            assert_eq!(output.status.code(), Some(0), "{}: {}", file.display(), text(&output.stderr));
            let bytes = std::fs::read(&sheet).unwrap();
            match ending {
                "pdf" => assert!(bytes.starts_with(b"%PDF")),
                _ => assert!(
                    has_amount(&text(&bytes), &amount, &object),
                    "{}: {amount} not in {ending}",
                    file.display()
                ),
            }
        }
    }
}

/// The whole amount, or its portions when the sheet splits it.
fn has_amount(sheet: &str, amount: &str, object: &Value) -> bool {
    let name = object["additions"][0]["name"].as_str().unwrap();
    sheet.contains(amount) || (sheet.contains(name) && sheet.contains("part 1 of"))
}

#[test]
fn a_machine_without_a_display_gets_one_clear_line_and_the_main_job_as_text() {
    let output = run!(&demo("copper_strike.ron"));
    let (out, err) = (text(&output.stdout), text(&output.stderr));
    assert_eq!(output.status.code(), Some(0), "{err}");
    let complaints: Vec<&str> = err.lines().filter(|line| !line.trim().is_empty()).collect();
    assert_eq!(complaints.len(), 1, "{err}");
    assert!(complaints[0].contains("no window can open"), "{err}");
    for needed in
        ["Copper strike", "ceiling", "Dose found", "Additions for", "measure out", "--out sheet.pdf"]
    {
        assert!(out.contains(needed), "{needed} is not in:\n{out}");
    }
}

#[test]
fn the_program_without_a_file_does_the_main_job_on_the_first_demo_bath() {
    let output = bathwright(&[]);
    assert_eq!(output.status.code(), Some(0));
    assert!(text(&output.stdout).contains("invented numbers"));
}

#[test]
fn diagrams_are_written_as_svg_and_csv() {
    let folder = tempfile::tempdir().unwrap();
    let (svg, csv) = (folder.path().join("d.svg"), folder.path().join("d.csv"));
    assert_eq!(run!("diagram", &demo("copper_strike.ron"), "--out", &svg).status.code(), Some(0));
    assert!(std::fs::read_to_string(&svg).unwrap().contains("<svg"));
    let output =
        run!("diagram", &demo("copper_strike.ron"), "--out", &csv, "--against", "dose", "--points", "50");
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    assert_eq!(std::fs::read_to_string(&csv).unwrap().trim().lines().count(), 51);
}

#[test]
fn maps_are_written_as_svg_and_csv() {
    let folder = tempfile::tempdir().unwrap();
    let (svg, csv) = (folder.path().join("m.svg"), folder.path().join("m.csv"));
    let output = run!("map", &demo("copper_strike.ron"), "--out", &svg);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let picture = std::fs::read_to_string(&svg).unwrap();
    assert!(picture.contains("ceiling") && picture.contains("pCu"), "the ceiling is drawn and named");
    let output = run!("map", &demo("copper_strike.ron"), "--out", &csv, "--of", "limit");
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    assert_eq!(std::fs::read_to_string(&csv).unwrap().trim().lines().count(), 1 + 200 * 150);
    assert_eq!(run!("map", &demo("copper_strike.ron"), "--out", "map.doc").status.code(), Some(2));
}

/// The descaler has no typed ceiling: its wall is a solid.
#[test]
fn a_bath_whose_only_wall_follows_from_chemistry_is_compared_and_blended_too() {
    let file = demo("citric_descaler.ron");
    let output = run!("compare", &file, "--with", "citric-mono", "--and", "edta-na4-39");
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let output = run!("dose", &file, "--blend");
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
}

#[test]
fn a_blend_is_found_and_says_what_binds_it() {
    let output = run!("dose", &demo("hard_water_cleaner.ron"), "--blend", "lightest", "--json");
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let found: serde_json::Value = serde_json::from_str(&text(&output.stdout)).unwrap();
    assert_eq!(found["holds"], true);
    assert!(!found["binding"].as_array().unwrap().is_empty());
    let words = text(&run!("dose", &demo("hard_water_cleaner.ron"), "--blend").stdout);
    assert!(words.contains("cheapest blend") && words.contains("What keeps it from being less"), "{words}");
}

/// Replaces a piece of the copper strike and expects exit 2 with a message that names the field and the fix.
fn refused(from: &str, to: &str, needles: &[&str]) {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("bath.ron");
    let good = std::fs::read_to_string(demo("copper_strike.ron")).unwrap();
    assert!(good.contains(from), "{from} is not in the demo bath");
    std::fs::write(&file, good.replacen(from, to, 1)).unwrap();
    for command in ["solve", "dose"] {
        let output = run!(command, &file);
        let error = text(&output.stderr);
        assert_eq!(output.status.code(), Some(2), "{to}: {error}");
        assert_eq!(error.trim().lines().count(), 1, "{error}");
        for needle in needles {
            assert!(error.contains(needle), "{needle} is not in: {error}");
        }
    }
    let untouched = std::fs::read_to_string(&file).unwrap();
    assert!(untouched.contains(to), "the file was changed");
}

#[test]
fn an_analysis_is_answered_with_an_addition_or_a_bail_out() {
    let object = json(&run!("correct", &demo("copper_strike.ron"), "--json"));
    assert_eq!(object["remedy"]["kind"], "add");
    let kg = object["remedy"]["dose_kg"].as_f64().unwrap();
    assert!((kg - 1.84 * object["remedy"]["dose_g_per_L"].as_f64().unwrap()).abs() < 1e-9);
    let (meter, bath) = (object["pH"]["meter"].as_f64().unwrap(), object["pH"]["bath"].as_f64().unwrap());
    assert!(meter == 9.31 && bath < meter, "{bath}");
    let inputs = object["inputs"].as_array().unwrap();
    assert!(inputs.iter().any(|input| input["evidence"] == "assumed" && input["analysed"] == false));

    let nickel = demo("electroless_nickel.ron");
    let object = json(&run!("correct", &nickel, "--json"));
    assert_eq!(object["remedy"]["kind"], "bail-out");
    let output = run!("correct", &nickel);
    assert_eq!(output.status.code(), Some(0));
    let printed = text(&output.stdout);
    for needle in ["Bail out", "measured earlier, analysis", "inferred, recipe", "with the same hydrogen"] {
        assert!(printed.contains(needle), "{needle}: {printed}");
    }

    let output = run!("correct", &demo("derusting.ron"));
    assert_eq!(output.status.code(), Some(2));
    assert!(text(&output.stderr).contains("analysis is empty"), "{}", text(&output.stderr));
}

#[test]
fn bad_numbers_are_refused_with_field_and_fix() {
    refused("volume_l: 1840", "volume_l: -5", &["tank.volume_l", "-5", "more than 0"]);
    refused("volume_l: 1840", "volume_l: NaN", &["tank.volume_l", "NaN"]);
    refused("(low: 38", "(low: -38", &["tank.temperature_c.low", "between 0 and 100"]);
    refused(
        "ph: Held(low: ",
        "ph: Held(low: -3.0, set: 1.0, high: 2.0), //",
        &["tank.ph.low", "between -1 and 15"],
    );
    refused(
        "what: \"copper\", amount: \"",
        "what: \"copper\", amount: \"-",
        &["contents[0].amount", "positive"],
    );
    refused("what: \"copper\", amount: \"", "what: \"copper\", amount: \"inf", &["line", "number"]);
}

#[test]
fn unknown_names_and_formulas_are_refused_with_field_and_fix() {
    refused("what: \"copper\"", "what: \"Xy2Z\"", &["contents[0].what", "Xy2Z"]);
    refused("product: \"hedp-60\"", "product: \"miracle\"", &["agents[0].product", "miracle"]);
    refused("metal: \"copper\"", "metal: \"zinc\"", &["limits[0].metal", "not in the bath"]);
}

#[test]
fn truncated_empty_and_missing_files_are_refused() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("bath.ron");
    let good = std::fs::read_to_string(demo("copper_strike.ron")).unwrap();
    for bad in [&good[..good.len() / 2], "", "not a bath", "\u{0}"] {
        std::fs::write(&file, bad).unwrap();
        let output = run!("solve", &file);
        assert_eq!(output.status.code(), Some(2));
        assert!(text(&output.stderr).contains("line "), "{}", text(&output.stderr));
    }
    let output = run!("solve", &folder.path().join("absent.ron"));
    assert_eq!(output.status.code(), Some(2));
    let output = run!("sheet", &demo("copper_strike.ron"), "--out", &folder.path().join("sheet.docx"));
    assert_eq!(output.status.code(), Some(2));
    assert!(text(&output.stderr).contains(".pdf"));
}

/// A small bath that brings its whole chemistry, with one extra line to break it.
fn own_chemistry(reaction: &str, assay: &str, contents: &str, agents: &str) -> String {
    format!(
        r#"(format: 1, name: "Own", tank: (volume_l: 100, ph: Held(low: 7, set: 7, high: 7), temperature_c: (low: 25, set: 25, high: 25)),
        contents: [{contents}], agents: [{agents}], activity: AsMeasured,
        products: [(id: "mine", name: "Mine", formula: "NaCl", assay_percent: (low: {assay}, typical: {assay}, high: {assay}), form: Powder,
            releases: [("L-", 1), ("Na+", 1)], role: Agent, active: "L-")],
        constants: (library: false,
            components: [(token: "H+", name: "hydrogen ion", kind: Proton, formula: "H"), (token: "M+2", name: "metal", kind: Metal),
                (token: "L-", name: "ligand", kind: Agent), (token: "Na+", name: "sodium", kind: Ion, formula: "Na")],
            reactions: [(reaction: "{reaction}", log_k: 5, convention: Concentration, basis: Read, source: "test")]))"#
    )
}

fn solve_text(project: &str) -> Output {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("own.ron");
    std::fs::write(&file, project).unwrap();
    run!("solve", &file, "--json")
}

#[test]
fn a_file_can_describe_its_whole_chemistry() {
    let contents = r#"(what: "M+2", amount: "1 mmol/L"), (what: "L-", amount: "2 mmol/L")"#;
    let output =
        solve_text(&own_chemistry("M+2 + L- = ML+", "99", contents, r#"(product: "mine", max_g_l: 10)"#));
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let object = json(&output);
    let species = |token: &str| object["species"][token].as_f64().unwrap();
    let k = species("ML+") / (species("M+2") * species("L-"));
    assert!((k / 1e5 - 1.0).abs() < 1e-9, "{k}");
    assert!((species("M+2") + species("ML+") - 1e-3).abs() < 1e-15);
}

#[test]
fn own_chemistry_that_can_not_be_is_refused_with_field_and_fix() {
    let metal = r#"(what: "M+2", amount: "1 mmol/L")"#;
    for (project, needle) in [
        (own_chemistry("M+2 + L- = ML", "99", metal, ""), "charges do not balance"),
        (own_chemistry("M+2 + X- = MX+", "99", metal, ""), "no other reaction forms it"),
        (own_chemistry("M+2 + L- = ML+", "140", metal, ""), "assay_percent"),
        (own_chemistry("M+2 + L- = ML+", "99", "", ""), "contents is empty"),
        (
            own_chemistry("M+2 + L- = ML+", "99", r#"(what: "M+2", amount: "1 g/L")"#, ""),
            "formula is not known",
        ),
    ] {
        let output = solve_text(&project);
        let error = text(&output.stderr);
        assert_eq!(output.status.code(), Some(2), "{error}");
        assert!(error.contains(needle), "{needle} is not in: {error}");
    }
}

#[test]
fn a_bath_without_an_agent_says_so_when_a_dose_is_asked_for() {
    let folder = tempfile::tempdir().unwrap();
    let file = folder.path().join("own.ron");
    let metal = r#"(what: "M+2", amount: "1 mmol/L")"#;
    std::fs::write(&file, own_chemistry("M+2 + L- = ML+", "99", metal, "")).unwrap();
    let output = run!("dose", &file);
    assert_eq!(output.status.code(), Some(2));
    assert!(text(&output.stderr).contains("agents is empty"), "{}", text(&output.stderr));
}
