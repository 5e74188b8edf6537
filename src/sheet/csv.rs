//! Writes the sheet as a table for a spreadsheet: section, item, value, unit-or-range, note.
//!
//! Text typed by a user is data: a cell that a spreadsheet would run as a formula is given a leading apostrophe. Plain
//! numbers such as `-3.2` are left alone, so that columns can still be summed.

use super::error::SheetError;
use super::model::{Addition, DosingSheet, FileCopy, Header};
use crate::quantity::spreadsheet_text as neutral;

/// The sheet as CSV text (UTF-8, no byte order mark, comma separated).
pub fn to_csv(sheet: &DosingSheet) -> Result<String, SheetError> {
    let mut out = Rows(::csv::Writer::from_writer(Vec::new()));
    out.row(["section", "item", "value", "unit-or-range", "note"])?;
    header(&mut out, &sheet.header)?;
    for f in &sheet.found {
        out.row(["found", &f.label, &f.value, &f.range, &f.evidence])?;
    }
    for t in &sheet.targets {
        out.row(["ceiling", &t.metal, &t.ceiling, "", &t.wall])?;
        out.row(["ceiling", &t.metal, &t.before, "", "predicted before"])?;
        out.row(["ceiling", &t.metal, &t.after, "", "predicted after"])?;
    }
    match &sheet.refused {
        Some(reason) => out.row(["refused", "no addition", reason, "", ""])?,
        None => instructions(&mut out, sheet)?,
    }
    list(&mut out, "stop and call", &sheet.stop)?;
    out.text("chemist's number", "", &sheet.chemists_number)?;
    list(&mut out, "caution", &sheet.cautions)?;
    list(&mut out, "sign off", &sheet.sign_off)?;
    file_copy(&mut out, &sheet.file_copy)?;
    let bytes = out.0.into_inner().map_err(|error| SheetError::CsvBuffer(error.to_string()))?;
    String::from_utf8(bytes).map_err(|error| SheetError::CsvBuffer(error.to_string()))
}

struct Rows(::csv::Writer<Vec<u8>>);

impl Rows {
    fn row(&mut self, cells: [&str; 5]) -> Result<(), SheetError> {
        Ok(self.0.write_record(cells.map(neutral))?)
    }

    /// A row with nothing but a value; left out when the value is blank.
    fn text(&mut self, section: &str, item: &str, value: &str) -> Result<(), SheetError> {
        if value.trim().is_empty() { Ok(()) } else { self.row([section, item, value, "", ""]) }
    }
}

fn header(out: &mut Rows, header: &Header) -> Result<(), SheetError> {
    let optional = |value: &Option<String>| value.clone().unwrap_or_default();
    let rows = [
        ("bath", header.bath.clone()),
        ("tank", header.tank.clone()),
        ("line", optional(&header.line)),
        ("title", header.title.clone()),
        ("sheet no.", optional(&header.sheet_no)),
        ("date", optional(&header.date)),
        ("shift", optional(&header.shift)),
        ("valid to", optional(&header.valid_until)),
        ("prepared by", optional(&header.prepared_by)),
        ("program", header.program_version.clone()),
        ("project", header.project_hash.clone()),
        ("basis", optional(&header.basis)),
    ];
    for (item, value) in &rows {
        out.text("sheet", item, value)?;
    }
    if header.invented {
        out.text("sheet", "warning", "demo bath, invented numbers")?;
    }
    Ok(())
}

fn instructions(out: &mut Rows, sheet: &DosingSheet) -> Result<(), SheetError> {
    list(out, "before you start", &sheet.before_you_start)?;
    for (index, step) in sheet.printed_additions().iter().enumerate() {
        addition(out, index + 1, step)?;
    }
    out.text("re-test", "", &sheet.retest.intro)?;
    for test in &sheet.retest.columns {
        out.row(["re-test", &test.label, &test.expect, "", "expected"])?;
    }
    Ok(())
}

fn addition(out: &mut Rows, number: usize, step: &Addition) -> Result<(), SheetError> {
    let section = format!("addition {number}");
    out.row([&section, "amount", &step.amount, "", &step.material])?;
    for line in &step.details {
        out.text(&section, "material", line)?;
    }
    for line in &step.measure {
        out.text(&section, "measure", line)?;
    }
    let rows = [
        ("before rounding", step.exact.as_deref()),
        ("how", Some(step.how.as_str())),
        ("add over", step.add_over.as_deref()),
        ("wait", step.wait.as_deref()),
        ("then pH", step.then_ph.as_deref()),
    ];
    for (item, value) in rows {
        out.text(&section, item, value.unwrap_or(""))?;
    }
    Ok(())
}

fn list(out: &mut Rows, section: &str, lines: &[String]) -> Result<(), SheetError> {
    for (index, line) in lines.iter().enumerate() {
        out.text(section, &(index + 1).to_string(), line)?;
    }
    Ok(())
}

/// One row for each cell of a table: item is the row's first cell, note the label of the column.
fn file_copy(out: &mut Rows, file: &FileCopy) -> Result<(), SheetError> {
    for table in &file.tables {
        for row in &table.rows {
            let name = row.first().map_or("", String::as_str);
            if row.len() < 2 {
                out.text(&table.title, name, name)?;
            }
            for (index, cell) in row.iter().enumerate().skip(1) {
                let label = table.columns.get(index).map_or("", |c| c.label.as_str());
                out.row([&table.title, name, cell, "", label])?;
            }
        }
    }
    list(out, "flag", &file.flags)?;
    list(out, "certificate", &file.certificate)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sheet::sample;

    fn records(sheet: &DosingSheet) -> Vec<Vec<String>> {
        let text = to_csv(sheet).expect("the sheet can be written");
        let mut reader = ::csv::ReaderBuilder::new().has_headers(false).from_reader(text.as_bytes());
        reader.records().map(|r| r.expect("rows are even").iter().map(str::to_owned).collect()).collect()
    }

    #[test]
    fn every_addition_has_its_amount_and_material() {
        let sheet = sample::four_additions();
        let rows = records(&sheet);
        for (index, step) in sheet.additions.iter().enumerate() {
            let section = format!("addition {}", index + 1);
            assert!(rows.iter().any(|r| r[0] == section && r[2] == step.amount && r[4] == step.material));
        }
    }

    #[test]
    fn a_refused_addition_is_not_in_the_table() {
        let rows = records(&sample::refused());
        assert!(rows.iter().any(|r| r[0] == "refused"));
        assert!(!rows.iter().any(|r| r[0].starts_with("addition") || r[0] == "before you start"));
    }

    #[test]
    fn cells_that_look_like_formulas_are_neutralised() {
        for cell in ["=1+1", "+cmd|x", "-2+3", "@SUM(A1)", "\tx", "\r=1", "  =1", "＝1", "-3.2 g/L"] {
            assert!(neutral(cell).starts_with('\''), "{cell:?} became {:?}", neutral(cell));
        }
    }

    #[test]
    fn plain_numbers_are_left_alone() {
        for cell in ["-3.2", "+1,5", "-4e-11", "-4E+3", "12", "9.4 to 9.5", "−3.2", "copper", ""] {
            assert_eq!(neutral(cell), cell);
        }
    }

    #[test]
    fn nothing_a_user_types_starts_a_formula_or_a_new_row() {
        let mut sheet = sample::four_additions();
        sheet.header.bath = "=HYPERLINK(\"x\")\n=1".into();
        sheet.additions[0].material = "@evil, \"quoted\"\r\nnext".into();
        let rows = records(&sheet);
        assert!(rows.iter().all(|r| r.len() == 5));
        assert!(rows.iter().flatten().all(|c| !c.starts_with(['=', '@']) && !c.contains('\n')));
        assert!(rows.iter().flatten().any(|c| c == "'@evil, \"quoted\"  next"));
    }
}
