//! Writes a distribution diagram or a map as a table for a spreadsheet: one row per point of the axis.
//!
//! Shares are fractions of the component's total, pM is −log10 of the free metal in mol/L. A cell stays empty where
//! there is no answer. Tokens can be typed by a user, so a heading that a spreadsheet would run as a formula is given
//! a leading apostrophe; numbers are left alone.

use super::{Axis, Diagram, Map, MapOf};
use crate::bath::Bath;
use crate::quantity::spreadsheet_text;

/// Figures that a share or pM is written with.
const FIGURES: usize = 6;

/// The map as CSV text: pH, dose and pM, or the excess over the nearest limit in decades, one row for each point.
pub fn map_to_csv(bath: &Bath, map: &Map) -> String {
    let (name, sign) = match map.of {
        MapOf::Free(component) => (format!("pM {}", bath.system.components[component]), -1.0),
        MapOf::Excess => ("log10_share_of_limit".to_owned(), 1.0),
    };
    let head = ["pH".to_owned(), "dose_g_per_L".to_owned(), spreadsheet_text(&name)];
    let points = (0..map.dose.len()).flat_map(|row| (0..map.ph.len()).map(move |column| (column, row)));
    let rows = points.map(|(column, row)| {
        vec![number(map.ph[column]), number(map.dose[row]), number(sign * map.at(column, row))]
    });
    table(std::iter::once(head.into()).chain(rows))
}

/// The diagram as CSV text (UTF-8, no byte order mark, comma separated, decimal point).
pub fn to_csv(bath: &Bath, diagram: &Diagram) -> String {
    let x = match diagram.axis {
        Axis::Ph { .. } => "pH",
        Axis::Dose { .. } => "dose_g_per_L",
    };
    let shares = diagram.series.iter().map(|series| spreadsheet_text(&series.token));
    let free = diagram
        .free
        .iter()
        .map(|line| spreadsheet_text(&format!("pM {}", bath.system.components[line.component])));
    let head = std::iter::once(x.to_owned()).chain(shares).chain(free).collect();
    let rows = diagram.x.iter().enumerate().map(|(i, x)| {
        let shares = diagram.series.iter().map(|series| number(at(&series.share, i)));
        let free = diagram.free.iter().map(|line| number(-at(&line.log10_free, i)));
        std::iter::once(number(*x)).chain(shares).chain(free).collect()
    });
    table(std::iter::once(head).chain(rows))
}

fn table(rows: impl Iterator<Item = Vec<String>>) -> String {
    let mut writer = ::csv::WriterBuilder::new().flexible(true).from_writer(Vec::new());
    for row in rows {
        if let Err(error) = writer.write_record(&row) {
            log::error!("a row of the table could not be written: {error}");
        }
    }
    let bytes = writer.into_inner().unwrap_or_else(|error| {
        log::error!("the table could not be finished: {}", error.error());
        Vec::new()
    });
    String::from_utf8_lossy(&bytes).into_owned()
}

fn at(values: &[f64], index: usize) -> f64 {
    values.get(index).copied().unwrap_or(f64::NAN)
}

/// A number with [`FIGURES`] figures; empty when there is none.
pub(super) fn number(value: f64) -> String {
    let scientific = format!("{value:.*e}", FIGURES - 1);
    match scientific.parse::<f64>() {
        Ok(0.0) => "0".to_owned(),
        Ok(rounded) if rounded.is_finite() && (1e-4..1e9).contains(&rounded.abs()) => rounded.to_string(),
        Ok(rounded) if rounded.is_finite() => format!("{rounded:e}"),
        _ => String::new(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::study::svg::sample;

    fn rows(text: &str) -> Vec<Vec<String>> {
        let mut reader = ::csv::ReaderBuilder::new().has_headers(false).from_reader(text.as_bytes());
        reader.records().map(|row| row.unwrap().iter().map(str::to_owned).collect()).collect()
    }

    #[test]
    fn there_is_a_row_per_point_and_a_column_per_line() {
        let (bath, diagram) = sample::over_ph();
        let rows = rows(&to_csv(&bath, &diagram));
        assert_eq!(rows.len(), diagram.x.len() + 1);
        assert!(rows.iter().all(|row| row.len() == 1 + diagram.series.len() + diagram.free.len()));
        assert_eq!(rows[0][0], "pH");
        assert_eq!(rows[0][1], diagram.series[0].token);
        assert!(rows[0].contains(&"pM Cu+2".to_owned()));
        let (bath, diagram) = sample::over_dose();
        assert!(to_csv(&bath, &diagram).starts_with("dose_g_per_L,"));
    }

    #[test]
    fn numbers_survive_the_round_trip_to_six_figures() {
        let (bath, diagram) = sample::over_ph();
        for (i, row) in rows(&to_csv(&bath, &diagram))[1..].iter().enumerate() {
            let shares = diagram.series.iter().map(|series| series.share[i]);
            let free = diagram.free.iter().map(|line| -line.log10_free[i]);
            let values = std::iter::once(diagram.x[i]).chain(shares).chain(free);
            for (cell, value) in row.iter().zip(values) {
                let read: f64 = cell.parse().unwrap();
                assert!((read - value).abs() <= 1e-5 * value.abs(), "{cell} for {value}");
            }
        }
    }

    #[test]
    fn a_point_without_an_answer_leaves_its_cells_empty() {
        let (bath, mut diagram) = sample::over_ph();
        diagram.series[0].share[3] = f64::NAN;
        diagram.free[0].log10_free[3] = f64::NAN;
        let row = &rows(&to_csv(&bath, &diagram))[4];
        assert_eq!(row.iter().filter(|cell| cell.is_empty()).count(), 2);
        assert_eq!((number(f64::NAN), number(f64::INFINITY)), (String::new(), String::new()));
    }

    #[test]
    fn tokens_that_look_like_formulas_are_neutralised_and_numbers_are_not() {
        let (bath, mut diagram) = sample::over_ph();
        diagram.series[0].token = "=HYPERLINK(\"x\"),1\n".to_owned();
        diagram.series[1].token = "@evil".to_owned();
        diagram.free[0].log10_free[0] = 0.3;
        let rows = rows(&to_csv(&bath, &diagram));
        assert_eq!(rows[0][1], "'=HYPERLINK(\"x\"),1 ");
        assert_eq!(rows[0][2], "'@evil");
        assert!(rows[1].contains(&"-0.3".to_owned()));
        assert_eq!(
            (spreadsheet_text("Cu+2"), spreadsheet_text(" -2")),
            ("Cu+2".to_owned(), "' -2".to_owned())
        );
    }

    #[test]
    fn numbers_are_plain_unless_very_small() {
        assert_eq!(number(9.450000000000001), "9.45");
        assert_eq!(number(-0.0), "0");
        assert_eq!(number(1.23456789e-9), "1.23457e-9");
    }
}
