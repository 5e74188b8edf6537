//! The pages for the file: tables, flags, certificate.

use super::cell::{Cell, Para};
use super::flow::Flow;
use super::item::Role;
use super::rich::Style;
use super::style;
use super::table::{Grid, Row, TableSpec, place};
use super::widths::{Need, share};
use crate::sheet::model::{Align, Column, DosingSheet, FileCopy, Table};

/// More columns than this cannot be read side by side.
const MOST_COLUMNS: usize = 10;
/// Left and right of the text of a cell, points.
const PAD_X: f32 = 5.0;

/// Whether there is anything for the file.
pub(super) fn is_empty(file: &FileCopy) -> bool {
    file.tables.is_empty() && file.flags.is_empty() && file.certificate.is_empty()
}

/// Places the file copy on new pages.
pub(super) fn file_copy(flow: &mut Flow, sheet: &DosingSheet) {
    flow.new_page();
    let title = vec![Para::new("For the file: the equilibrium behind this sheet", Style::bold(15.0))];
    let spec = TableSpec::paragraphs(flow, Role::Title, title);
    place(flow, &spec);
    for table in &sheet.file_copy.tables {
        place_table(flow, table);
    }
    list(flow, "Flags", &sheet.file_copy.flags);
    list(flow, "Certificate", &sheet.file_copy.certificate);
}

fn list(flow: &mut Flow, heading: &str, lines: &[String]) {
    let paras: Vec<Para> =
        lines.iter().filter(|l| !l.trim().is_empty()).map(|l| Para::new(l, style::FILE).bullet()).collect();
    if paras.is_empty() {
        return;
    }
    flow.gap(flow.density.section_gap);
    let spec = TableSpec::paragraphs(flow, Role::Bullet, paras);
    place(flow, &spec.heading(heading));
}

fn place_table(flow: &mut Flow, table: &Table) {
    let table = tidy(table);
    let cell = |role, text: &str, column: &Column, style| Cell::text(role, text, style).align(column.align);
    let header: Vec<Cell> =
        table.columns.iter().map(|c| cell(Role::HeaderCell, &c.label, c, style::FILE_STRONG)).collect();
    let rows: Vec<Row> = table
        .rows
        .iter()
        .map(|row| {
            let cells = row.iter().zip(&table.columns);
            Row::new(cells.map(|(text, c)| cell(Role::Cell, text, c, style::FILE)).collect())
        })
        .collect();
    let spec = TableSpec {
        header: vec![Row::new(header.clone())],
        grid: Grid::Rows,
        pad_x: PAD_X,
        pad_y: 2.0,
        ..TableSpec::plain(widths(flow.area.width(), &table, &header, &rows), rows)
    };
    flow.gap(flow.density.section_gap);
    place(flow, &spec.heading(&table.title));
}

/// Widths at which nothing wraps, with the spare room shared as asked; if that is too wide, the widths asked for,
/// widened where a word would be broken.
fn widths(total: f32, table: &Table, header: &[Cell], rows: &[Row]) -> Vec<f32> {
    let asked: Vec<f32> = table
        .columns
        .iter()
        .map(|c| if c.width.is_finite() && c.width > 0.0 { c.width.clamp(0.05, 50.0) } else { 1.0 })
        .collect();
    let sum: f32 = asked.iter().sum();
    let needs: Vec<Need> = (0..asked.len())
        .map(|index| {
            let cells = header.get(index).into_iter().chain(rows.iter().filter_map(|r| r.cells.get(index)));
            let need = cells.map(Cell::need).fold(Need::default(), Need::and);
            Need { least: need.least + 2.0 * PAD_X + 0.5, best: need.best + 2.0 * PAD_X + 0.5 }
        })
        .collect();
    let natural: f32 = needs.iter().map(|n| n.best).sum();
    if natural <= total {
        let spare = total - natural;
        return needs.iter().zip(&asked).map(|(need, width)| need.best + spare * width / sum).collect();
    }
    let as_asked = needs
        .iter()
        .zip(&asked)
        .map(|(need, width)| Need { least: need.least, best: (total * width / sum).max(need.least) });
    share(total, &as_asked.collect::<Vec<_>>())
}

/// A table whose rows all have as many cells as there are columns, with nothing dropped.
fn tidy(table: &Table) -> Table {
    let mut columns = table.columns.clone();
    if columns.is_empty() {
        columns.push(Column::new("", Align::Left, 1.0));
    }
    let labels: Vec<String> = columns.iter().map(|c| c.label.clone()).collect();
    let count = columns.len().min(MOST_COLUMNS);
    columns.truncate(count);
    if let Some(last) = columns.last_mut() {
        last.label = labels[count - 1..].join("; ");
    }
    let fit = |row: &Vec<String>| {
        let mut cells: Vec<String> = row.iter().take(count).cloned().collect();
        cells.resize(count, String::new());
        if let (true, Some(last)) = (row.len() > count, cells.last_mut()) {
            *last = row[count - 1..].join("; ");
        }
        cells
    };
    let mut rows: Vec<Vec<String>> = table.rows.iter().map(fit).collect();
    if rows.is_empty() {
        rows.push(fit(&vec!["none".to_owned()]));
    }
    Table { title: table.title.clone(), columns, rows }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn surplus_cells_join_the_last_column() {
        let table = Table {
            title: "t".into(),
            columns: vec![Column::new("a", Align::Left, 1.0), Column::new("b", Align::Left, 1.0)],
            rows: vec![vec!["1".into(), "2".into(), "3".into()], vec!["4".into()]],
        };
        assert_eq!(tidy(&table).rows, [["1", "2; 3"], ["4", ""]]);
    }

    #[test]
    fn an_empty_table_says_none() {
        let table = Table { title: "Solids".into(), ..Table::default() };
        assert_eq!(tidy(&table).rows, [["none"]]);
    }
}
