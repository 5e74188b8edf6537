//! What must hold for every laid-out sheet.

use super::{Item, LaidOut, Paper, Role, TextRun, lay_out};
use crate::sheet::sample;

const MARGIN: f32 = 18.0;

fn assert_inside(sheet: &LaidOut) {
    for (number, page) in sheet.pages.iter().enumerate() {
        let (right, bottom) = (page.width_pt - MARGIN, page.height_pt - MARGIN);
        for item in &page.items {
            let (x1, y1, x2, y2) = match item {
                Item::Text(t) => (t.x, t.baseline - 0.75 * t.size, t.x + t.width, t.baseline + 0.25 * t.size),
                Item::Rule(r) => (r.x1, r.y1, r.x2, r.y2),
                Item::Frame(f) => (f.x, f.y, f.x + f.width, f.y + f.height),
                Item::CheckBox(c) => (c.x, c.y, c.x + c.side, c.y + c.side),
                Item::WriteIn(w) => (w.x, w.y, w.x + w.width, w.y + w.height),
            };
            assert!(
                x1 >= MARGIN && y1 >= MARGIN && x2 <= right && y2 <= bottom && x1 <= x2 && y1 <= y2,
                "page {} of {}: {item:?}",
                number + 1,
                sheet.pages.len()
            );
        }
    }
}

/// Runs of one page may touch but never lie on one another.
fn assert_no_overlap(sheet: &LaidOut) {
    for page in &sheet.pages {
        let runs: Vec<&TextRun> =
            page.items.iter().filter_map(|i| if let Item::Text(t) = i { Some(t) } else { None }).collect();
        for (index, a) in runs.iter().enumerate() {
            for b in &runs[index + 1..] {
                let apart_x = a.x + a.width <= b.x + 0.3 || b.x + b.width <= a.x + 0.3;
                let (top_a, top_b) = (a.baseline - 0.7 * a.size, b.baseline - 0.7 * b.size);
                let apart_y = a.baseline <= top_b + 0.3 || b.baseline <= top_a + 0.3;
                assert!(apart_x || apart_y, "{a:?} lies on {b:?}");
            }
        }
    }
}

fn text_of(sheet: &LaidOut) -> String {
    sample::runs(sheet).iter().map(|r| r.text.replace(' ', "")).collect()
}

#[test]
fn everything_stays_inside_the_page_and_nothing_lies_on_anything_else() {
    for (_, sheet) in sample::all() {
        for paper in [Paper::A4, Paper::Letter] {
            let laid_out = lay_out(&sheet, paper);
            assert_inside(&laid_out);
            assert_no_overlap(&laid_out);
        }
    }
}

#[test]
fn no_word_of_a_long_text_is_lost() {
    let mut sheet = sample::four_additions();
    let long: String = (0..3000).map(|n| format!("word{n} ")).collect();
    sheet.additions[1].how = long.clone();
    sheet.cautions[0] = long.clone();
    sheet.header.bath = long.clone();
    let laid_out = lay_out(&sheet, Paper::Letter);
    assert_inside(&laid_out);
    let text = text_of(&laid_out);
    for n in [0, 1, 1500, 2998, 2999] {
        assert!(text.matches(&format!("word{n}")).count() >= 3, "word{n}");
    }
}

#[test]
fn an_ordinary_sheet_is_one_page_for_the_operator_and_one_for_the_file() {
    for paper in [Paper::A4, Paper::Letter] {
        assert_eq!(lay_out(&sample::four_additions(), paper).pages.len(), 2, "{paper:?}");
    }
}

#[test]
fn the_header_row_of_the_additions_is_repeated_on_each_page_they_reach() {
    let laid_out = lay_out(&sample::nine_additions(), Paper::A4);
    let with = |page: &super::Page, text: &str| {
        page.items.iter().any(|i| matches!(i, Item::Text(t) if t.text == text))
    };
    let pages_with_amounts: Vec<_> =
        laid_out.pages.iter().filter(|p| with(p, "10.0 L") || with(p, "95 mL")).collect();
    assert_eq!(pages_with_amounts.len(), 2);
    assert!(pages_with_amounts.iter().all(|p| with(p, "Measure out")));
}

#[test]
fn a_long_table_for_the_file_repeats_its_header_row_and_keeps_every_row() {
    let mut sheet = sample::four_additions();
    let row =
        |n: usize| vec![format!("reaction-{n}"), "1".into(), "2".into(), "3".into(), "4".into(), "5".into()];
    sheet.file_copy.tables[3].rows = (0..150).map(row).collect();
    let laid_out = lay_out(&sheet, Paper::Letter);
    assert_inside(&laid_out);
    let mut rows = 0;
    for page in &laid_out.pages {
        let has = |text: &str| page.items.iter().any(|i| matches!(i, Item::Text(t) if t.text == text));
        let here = (0..150).filter(|n| has(&format!("reaction-{n}"))).count();
        assert!(here == 0 || has("log K used"));
        rows += here;
    }
    assert_eq!(rows, 150);
}

#[test]
fn when_the_additions_need_two_pages_the_stop_box_comes_before_them() {
    let runs = sample::runs(&lay_out(&sample::nine_additions(), Paper::A4));
    let position = |text: &str| runs.iter().position(|r| r.text == text);
    assert!(position("STOP") < position("10.0 L"));
    assert!(runs.iter().any(|r| r.text.starts_with("Go on with step")));
}

#[test]
fn numbers_to_act_on_are_fourteen_points_or_more_and_amounts_larger() {
    for sheet in [sample::four_additions(), sample::nine_additions()] {
        let runs = sample::runs(&lay_out(&sheet, Paper::Letter));
        let size = |text: &str| runs.iter().filter(|r| r.text == text).map(|r| r.size).fold(0.0, f32::max);
        assert!(size("10.0 L") >= 24.0);
        assert!(size("11.5 L") >= 24.0);
        assert!(size("9.0 to 9.4") >= 14.0);
        assert!(size("10 min") >= 14.0);
        assert!(size("9.4 to 9.5") >= 14.0);
        assert!(size("47 °C") >= 14.0);
    }
}

#[test]
fn a_refused_sheet_shows_the_reason_and_no_amount() {
    let sheet = sample::refused();
    let text = text_of(&lay_out(&sheet, Paper::A4));
    assert!(text.contains("NOADDITION"));
    assert!(text.contains("hydrogencyanide"));
    for step in &sheet.additions {
        assert!(!text.contains(&step.amount.replace(' ', "")));
    }
}

#[test]
fn every_page_says_which_page_it_is_and_what_computed_it() {
    let laid_out = lay_out(&sample::nine_additions(), Paper::A4);
    let count = laid_out.pages.len();
    for (index, page) in laid_out.pages.iter().enumerate() {
        let foot: String = page
            .items
            .iter()
            .filter_map(|i| if let Item::Text(t) = i { Some(t) } else { None })
            .filter(|t| t.role == Role::Footer)
            .map(|t| t.text.clone())
            .collect();
        assert!(foot.contains(&format!("page {} of {count}", index + 1)));
        assert!(foot.contains("Bathwright 0.1.0"));
        assert!(foot.contains("7f3a 91c4"));
    }
}

#[test]
fn newlines_controls_and_unknown_characters_never_reach_the_page() {
    let mut sheet = sample::four_additions();
    sheet.additions[0].material = "HEDP\n60 %\u{7} 溶液\u{202e}".into();
    let runs = sample::runs(&lay_out(&sheet, Paper::A4));
    assert!(runs.iter().all(|r| r.text.chars().all(|c| !c.is_control() && c != '\u{202e}')));
    assert!(runs.iter().any(|r| r.text.contains("??")));
}

mod random {
    use proptest::prelude::*;

    use super::*;
    use crate::sheet::model::{Addition, Finding};

    /// Text as careless as users are: long words, spaces, controls, other scripts.
    fn any_text() -> impl Strategy<Value = String> {
        prop_oneof![
            "\\PC{0,60}",
            "[a-z0-9 ,.()-]{0,400}",
            "[A-Za-z0-9]{100,300}",
            "[\\s\u{0}-\u{1f}\u{200b}\u{202e}a=+@-]{0,40}",
        ]
    }

    proptest! {
        #![proptest_config(ProptestConfig { cases: 24, failure_persistence: None, ..ProptestConfig::default() })]

        #[test]
        fn whatever_is_typed_stays_on_the_page(
            text in proptest::collection::vec(any_text(), 12),
            steps in 0_usize..6,
            letter in any::<bool>(),
        ) {
            let mut sheet = sample::four_additions();
            sheet.header.bath = text[0].clone();
            sheet.header.tank = text[1].clone();
            sheet.header.sheet_no = Some(text[2].clone());
            sheet.header.prepared_by = Some(text[3].clone());
            sheet.found.push(Finding { label: text[4].clone(), value: text[5].clone(), ..Finding::default() });
            sheet.before_you_start.push(text[6].clone());
            sheet.stop.push(text[7].clone());
            sheet.additions = (0..steps)
                .map(|n| Addition {
                    material: text[n].clone(),
                    amount: text[n + 1].clone(),
                    measure: vec![text[n + 2].clone()],
                    how: text[n + 3].clone(),
                    then_ph: Some(text[n + 4].clone()),
                    ..Addition::default()
                })
                .collect();
            sheet.retest.columns[0].expect = text[8].clone();
            sheet.sign_off[0] = text[9].clone();
            sheet.file_copy.tables[0].rows[0][1] = text[10].clone();
            sheet.file_copy.tables[1].columns[0].width = f32::NAN;
            sheet.file_copy.flags.push(text[11].clone());
            let laid_out = lay_out(&sheet, if letter { Paper::Letter } else { Paper::A4 });
            assert_inside(&laid_out);
            assert_no_overlap(&laid_out);
            prop_assert!(crate::sheet::to_pdf(&laid_out).is_ok());
            let as_text = crate::sheet::to_text(&laid_out);
            prop_assert!(as_text.lines().all(|line| line.chars().count() <= 100));
            prop_assert!(crate::sheet::to_csv(&sheet).is_ok());
        }
    }

    #[test]
    #[ignore = "prints a time"]
    fn time_of_one_layout() {
        let sheet = sample::four_additions();
        let start = std::time::Instant::now();
        for _ in 0..20 {
            std::hint::black_box(lay_out(&sheet, Paper::A4));
        }
        println!("{:?} a layout", start.elapsed() / 20);
    }
}
