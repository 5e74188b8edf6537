//! Invented sheets for the tests of this module.

use super::{
    Addition, Align, Column, DosingSheet, FileCopy, Finding, Header, Item, LaidOut, Retest, RetestColumn,
    Table, Target, TextRun,
};

fn strings(items: &[&str]) -> Vec<String> {
    items.iter().map(|s| (*s).to_owned()).collect()
}

fn finding(label: &str, value: &str, range: &str, evidence: &str, emphasised: bool) -> Finding {
    Finding {
        label: label.into(),
        value: value.into(),
        range: range.into(),
        evidence: evidence.into(),
        emphasised,
    }
}

fn table(title: &str, columns: &[(&str, Align, f32)], rows: &[&[&str]]) -> Table {
    Table {
        title: title.into(),
        columns: columns.iter().map(|(l, a, w)| Column::new(*l, *a, *w)).collect(),
        rows: rows.iter().map(|r| strings(r)).collect(),
    }
}

/// Every piece of text of a laid-out sheet.
pub(super) fn runs(sheet: &LaidOut) -> Vec<TextRun> {
    let items = sheet.pages.iter().flat_map(|p| &p.items);
    items
        .filter_map(|item| match item {
            Item::Text(run) => Some(run.clone()),
            _ => None,
        })
        .collect()
}

/// All samples with their names.
pub(super) fn all() -> Vec<(&'static str, DosingSheet)> {
    vec![
        ("empty", DosingSheet::default()),
        ("one", one_addition()),
        ("four", four_additions()),
        ("nine", nine_additions()),
        ("refused", refused()),
        ("endless", endless_words()),
    ]
}

/// An ordinary sheet: four additions, one page for the operator, one for the file.
pub(super) fn four_additions() -> DosingSheet {
    DosingSheet {
        header: Header {
            bath: "copper strike".into(),
            tank: "Tank 7".into(),
            line: Some("Line 2".into()),
            title: "Dosing sheet".into(),
            sheet_no: Some("118, rev. 0".into()),
            date: Some("Tuesday 12 May 2026, 08:55".into()),
            shift: Some("early shift".into()),
            valid_until: Some("14:00".into()),
            prepared_by: Some("R. Example".into()),
            program_version: "Bathwright 0.1.0".into(),
            project_hash: "7f3a 91c4".into(),
            basis: Some("demo constants, 25 °C moved to 42 °C, I = 1.6 mol/L, equilibrium only".into()),
            invented: true,
        },
        found: vec![
            finding("Level", "1 840 L", "14 cm below lip", "read 07:30", false),
            finding("pH at 25 °C", "9.45", "range 9.2 to 9.8", "measured 07:40", false),
            finding("Temperature", "42 °C", "range 38 to 45 °C", "measured 07:30", false),
            finding("Copper", "10.2 g/L", "range 9.5 to 11.5", "measured 07:55", false),
            finding("HEDP, as acid", "86.0 g/L", "aim 95.6 after this sheet", "inferred, assay 12 days old", true),
        ],
        targets: vec![Target {
            metal: "copper".into(),
            ceiling: "2.0e−11 mol/L (pCu 10.7)".into(),
            wall: "coupon series on steel, empirical".into(),
            before: "1.8e−11".into(),
            after: "1.4e−11 mol/L".into(),
        }],
        before_you_start: strings(&["parts out", "current OFF", "heater OFF", "air and pump ON", "carbon filter OFF", "level 14 cm"]),
        additions: steps(),
        refused: None,
        stop: strings(&[
            "pH under 9.0 or over 9.8",
            "above 47 °C, or 5 °C up in 2 min",
            "haze or floc, colour jumps",
            "gas, smell or foam over the edge",
            "a label does not match",
        ]),
        retest: Retest {
            intro: "Wait 20 minutes with the pump on, then test. Do not add again meanwhile.".into(),
            columns: [("pH at 25 °C", "9.4 to 9.5"), ("Copper, g/L", "10.6 to 11.0"), ("Temperature", "41 to 45 °C"), ("Steel coupon, 30 s, no current", "no pink film")]
                .iter()
                .map(|(label, expect)| RetestColumn { label: (*label).into(), expect: (*expect).into() })
                .collect(),
        },
        chemists_number: "free copper at its worst, 89 % of the ceiling before and 69 % after (97 % at 95 % confidence). Calculated, not measured.".into(),
        cautions: strings(&[
            "HEDP 60 % is a corrosive acid; potassium hydroxide 45 % is a corrosive alkali and heats on dilution. Never let the two concentrates meet outside the tank; rinse the jug between them.",
            "Face shield, gauntlets, apron; eye-wash checked; second person at the tank.",
            "Never pour either into a tank that may hold cyanide, sulfide or hypochlorite. Spills: do not hose to the mixed drain.",
            "The safety data sheets, site rules and local law govern.",
        ]),
        sign_off: strings(&["Issued by (chemist)", "Measured out by", "Witnessed by", "Added by", "Re-tested by", "Tank released by"]),
        file_copy: file_copy(),
    }
}

fn steps() -> Vec<Addition> {
    let hedp = Addition {
        material: "HEDP 60 % solution".into(),
        details: strings(&["as acid · CAS 2809-21-4", "density 1.45"]),
        amount: "10.0 L".into(),
        measure: strings(&["10 L jug, full to the mark"]),
        exact: Some("exact half 10.2 L".into()),
        how: "Over the weir, thin stream. May fizz.".into(),
        add_over: Some("10 min".into()),
        wait: Some("5 min".into()),
        then_ph: Some("9.0 to 9.4".into()),
    };
    let alkali = Addition {
        material: "Potassium hydroxide 45 %".into(),
        details: strings(&["solution · CAS 1310-58-3", "density 1.46"]),
        amount: "12.0 L".into(),
        measure: strings(&["10 L jug + 2.0 L"]),
        exact: Some("exact half 11.9 L".into()),
        how: "Over the weir. Warms up.".into(),
        then_ph: Some("9.3 to 9.6".into()),
        ..hedp.clone()
    };
    vec![
        hedp.clone(),
        alkali.clone(),
        Addition {
            details: strings(&["same drum as step 1"]),
            amount: "10.5 L".into(),
            measure: strings(&["10 L jug + 0.5 L"]),
            exact: Some("both: 20.5 L, exact 20.3 L".into()),
            ..hedp
        },
        Addition {
            details: strings(&["same drum as step 2"]),
            amount: "up to 11.5 L".into(),
            measure: strings(&["stop at pH 9.45", "poured: ________ L"]),
            exact: None,
            how: "In 2 L portions, 2 min apart, by the meter.".into(),
            add_over: None,
            wait: None,
            then_ph: Some("9.4 to 9.5".into()),
            ..alkali
        },
    ]
}

fn file_copy() -> FileCopy {
    let (l, r) = (Align::Left, Align::Right);
    let constant: &[&str] = &[
        "Cu²⁺ + L⁴⁻ → CuL²⁻",
        "12.48",
        "42 °C, 1.6",
        "0.10",
        "mixed, ΔH known",
        "Demo Tables (2001), p. 12, entry 4",
    ];
    let weak: &[&str] =
        &["Ca²⁺ + HL³⁻ → CaHL⁻", "3.6", "25 °C, 0.1", "0.2", "concentration, no ΔH", "from memory"];
    FileCopy {
        tables: vec![
            table(
                "Equilibrium after the additions, at 42 °C and pH 9.45",
                &[("species", l, 2.0), ("of its metal or agent, %", r, 1.0), ("mol/L", r, 1.0)],
                &[
                    &["CuL²⁻", "71.3", "0.1146"],
                    &["CuL₂⁶⁻", "28.6", "0.0459"],
                    &["Cu(OH)L³⁻", "0.1", "1.6e−4"],
                    &["Cu²⁺ (from constants)", "9e−9", "1.4e−11"],
                    &["HL³⁻", "22.0", "0.1020"],
                ],
            ),
            table(
                "Margins over the operating window",
                &[
                    ("scenario", l, 2.2),
                    ("free copper, mol/L", r, 1.0),
                    ("share of the ceiling, %", r, 1.0),
                    ("at 95 %, %", r, 1.0),
                ],
                &[
                    &["set point", "1.1e−11", "55", "78"],
                    &["pH 9.2, copper 11.5 g/L (worst)", "1.4e−11", "69", "97"],
                    &["pH 9.8, 45 °C", "0.9e−11", "45", "64"],
                ],
            ),
            table(
                "Solids",
                &[("solid", l, 2.0), ("saturation index", r, 1.0), ("formed", l, 1.0)],
                &[
                    &["Cu(OH)₂", "−2.1", "no"],
                    &["CuO (slow)", "−0.8", "no"],
                    &["CaCO₃ (calcite)", "−0.3", "no"],
                ],
            ),
            table(
                "Constants used",
                &[
                    ("reaction", l, 2.2),
                    ("log K used", r, 0.8),
                    ("at T, I", l, 1.0),
                    ("σ", r, 0.6),
                    ("basis", l, 1.5),
                    ("source", l, 2.4),
                ],
                &[constant, weak, constant, weak, constant, weak, constant, weak],
            ),
        ],
        flags: strings(&[
            "Ionic strength 1.6 mol/L is above the Davies range (0.5): SIT used.",
            "Two constants have no ΔH: used as they are, σ widened to 0.2.",
        ]),
        certificate: strings(&[
            "largest balance residual 3e−14, KKT residual 0, charge gap 2e−16 mol/L",
            "11 iterations, 8 components, 43 species, 3 solids",
        ]),
    }
}

/// Nine additions with long names: the operator's part takes more than one page.
pub(super) fn nine_additions() -> DosingSheet {
    let mut sheet = four_additions();
    sheet.header.bath =
        "alkaline zinc–nickel for fasteners, drum line with the long name nobody shortens".into();
    sheet.header.prepared_by = None;
    sheet.header.valid_until = None;
    let mut all = steps();
    for (index, amount) in ["350 g", "1.25 kg", "0.80 L", "42.5 kg", "95 mL"].iter().enumerate() {
        all.push(Addition {
            material: "N-(2-hydroxyethyl)ethylenediaminetriacetic acid, trisodium salt, 41 % solution".into(),
            details: strings(&["as trisodium salt, dihydrate · CAS 139-89-9", "density 1.28 at 20 °C", "stock label B-17, shelf 3"]),
            amount: (*amount).into(),
            measure: strings(&["platform scale, 50 g steps; tare the bucket first", "one full 25 kg sack + 17.5 kg"]),
            exact: Some(format!("exact {}", amount)),
            how: "Dissolve in 40 L of soft water at 40 °C, then over the weir, never on the hot heater; scrape the bucket.".into(),
            add_over: Some(format!("{} min", 10 + index)),
            wait: Some("20 min".into()),
            then_ph: if index == 2 { None } else { Some("12.8 to 13.2".into()) },
        });
    }
    sheet.additions = all;
    sheet.found.push(finding("Zinc", "9.8 g/L", "range 8 to 12", "measured 07:55", false));
    sheet.found.push(finding(
        "Total hardness of the top-up water",
        "214 mg/L CaCO₃",
        "under 100",
        "assumed",
        true,
    ));
    sheet
}

/// A sheet whose acid addition is refused.
pub(super) fn refused() -> DosingSheet {
    let mut sheet = four_additions();
    sheet.refused = Some("The bath holds cyanide. Acid frees hydrogen cyanide, which can kill in minutes; no sheet with an acid addition is printed for this bath.".into());
    sheet.targets.clear();
    sheet
}

/// A short sheet: one addition, little else.
pub(super) fn one_addition() -> DosingSheet {
    let mut sheet = four_additions();
    sheet.header.invented = false;
    sheet.additions.truncate(1);
    sheet.cautions.truncate(2);
    sheet
}

/// Words without a space, longer than any cell.
pub(super) fn endless_words() -> DosingSheet {
    let word = "Aethylendiamintetraacetat".repeat(12);
    let mut sheet = nine_additions();
    sheet.header.bath = word.clone();
    sheet.header.shift = Some(word.clone());
    sheet.header.basis = Some(word.clone());
    sheet.found[0].value = word.clone();
    sheet.before_you_start.push(word.clone());
    sheet.stop.push(word.clone());
    sheet.additions[1].material = word.clone();
    sheet.additions[2].amount = word.clone();
    sheet.additions[3].how = word.repeat(30);
    sheet.retest.columns[0].label = word.clone();
    sheet.cautions.push(word.clone());
    sheet.sign_off.push(word.clone());
    sheet.file_copy.tables[0].rows[0][0] = word.repeat(10);
    sheet.file_copy.flags.push(word);
    sheet
}
