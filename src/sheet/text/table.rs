//! A table set in characters: columns two spaces apart, or one line per cell when it is too wide for that.

use super::{COLUMNS, CellText, Cells, Characters, push_line, span, wrap_text};
use crate::sheet::layout::Role;
use crate::sheet::layout::widths::{Need, fits, share};
use crate::sheet::layout::wrap::least_width;
use crate::sheet::model::Align;

/// Between two columns, characters.
const GAP: usize = 2;
/// A word longer than this is broken rather than let it squeeze the other columns, characters.
const LONGEST_WORD: f32 = 24.0;
/// In a table that has to wrap, no column asks for more than this, characters.
const WIDEST: f32 = 40.0;
/// A field to write in, in a cell that is empty on paper.
const WRITE_IN: &str = "________";

/// Widths of a table's columns, learned from all its parts so that they agree on every page.
#[derive(Default)]
pub(super) struct TextTable {
    needs: Vec<Need>,
    labels: Vec<String>,
}

impl TextTable {
    /// Takes the cells of one part of the table into account.
    pub(super) fn learn(&mut self, cells: &Cells) {
        for ((_, column), cell) in cells {
            if self.needs.len() <= *column {
                self.needs.resize(column + 1, Need::default());
                self.labels.resize(column + 1, String::new());
            }
            for paragraph in paragraphs(cell) {
                let least = least_width(&[span(&paragraph)], &Characters);
                let need = Need { least, best: paragraph.chars().count() as f32 };
                self.needs[*column] = self.needs[*column].and(need);
            }
            if cell.role == Role::HeaderCell && self.labels[*column].is_empty() {
                self.labels[*column] = cell.paragraphs.join(" ");
            }
        }
    }

    /// Writes one part of the table.
    pub(super) fn write(&self, cells: &Cells, out: &mut String) {
        let gaps = GAP * self.needs.len().saturating_sub(1);
        let room = COLUMNS.saturating_sub(gaps) as f32;
        let Some(widths) = self.widths(room) else {
            return self.write_as_list(cells, out);
        };
        let rows = rows(cells);
        let many_lines = rows.iter().any(|(_, row)| {
            row.iter()
                .zip(&widths)
                .filter(|(cell, _)| cell.is_some_and(|c| c.role == Role::Cell))
                .any(|(cell, width)| cell.is_some_and(|c| lines(c, *width).len() > 1))
        });
        let line = "-".repeat(widths.iter().sum::<usize>() + gaps);
        for (index, (is_header, row)) in rows.iter().enumerate() {
            write_row(row, &widths, out);
            let last = index + 1 == rows.len();
            if (*is_header || many_lines) && !last {
                push_line(out, &line);
            }
        }
    }

    /// Widths in characters; `None` if the columns cannot stand side by side.
    fn widths(&self, room: f32) -> Option<Vec<usize>> {
        let best: f32 = self.needs.iter().map(|n| n.best.max(1.0)).sum();
        if self.needs.is_empty() {
            return None;
        }
        if best <= room {
            return Some(self.needs.iter().map(|n| n.best.max(1.0) as usize).collect());
        }
        let tamed: Vec<Need> = self
            .needs
            .iter()
            .map(|n| Need { least: n.least.min(LONGEST_WORD), best: n.best.min(WIDEST) })
            .collect();
        fits(room, &tamed).then(|| share(room, &tamed).into_iter().map(|w| (w as usize).max(1)).collect())
    }

    fn write_as_list(&self, cells: &Cells, out: &mut String) {
        let mut row_before = None;
        for ((row, column), cell) in cells {
            if cell.role == Role::HeaderCell && self.needs.len() > 1 {
                continue;
            }
            if row_before.is_some_and(|before| before != *row) {
                out.push('\n');
            }
            row_before = Some(*row);
            let label = self.labels.get(*column).filter(|l| !l.is_empty()).filter(|_| self.needs.len() > 1);
            let text = paragraphs(cell).join("; ");
            let text = label.map_or(text.clone(), |label| format!("{label}: {text}"));
            for (index, line) in wrap_text(&text, COLUMNS - 4).into_iter().enumerate() {
                let indent = if index > 0 { "    " } else { "" };
                push_line(out, &format!("{indent}{line}"));
            }
        }
    }
}

/// The paragraphs of a cell, with a field to write in where the paper has one.
fn paragraphs(cell: &CellText) -> Vec<String> {
    if cell.write_in && cell.paragraphs.is_empty() {
        vec![WRITE_IN.to_owned()]
    } else {
        cell.paragraphs.clone()
    }
}

/// Rows with their cells in order, and whether they are header rows.
fn rows(cells: &Cells) -> Vec<(bool, Vec<Option<&CellText>>)> {
    let columns = cells.keys().map(|(_, column)| column + 1).max().unwrap_or(0);
    let mut rows: Vec<(usize, bool, Vec<Option<&CellText>>)> = Vec::new();
    for ((number, column), cell) in cells {
        if rows.last().is_none_or(|(row, ..)| row != number) {
            rows.push((*number, false, vec![None; columns]));
        }
        if let Some((_, is_header, row)) = rows.last_mut() {
            *is_header |= cell.role == Role::HeaderCell;
            row[*column] = Some(cell);
        }
    }
    rows.into_iter().map(|(_, is_header, row)| (is_header, row)).collect()
}

fn lines(cell: &CellText, width: usize) -> Vec<String> {
    paragraphs(cell).iter().flat_map(|p| wrap_text(p, width)).collect()
}

fn write_row(row: &[Option<&CellText>], widths: &[usize], out: &mut String) {
    let cells: Vec<(Align, Vec<String>)> = row
        .iter()
        .zip(widths)
        .map(|(cell, width)| cell.map_or((Align::Left, Vec::new()), |c| (c.align, lines(c, *width))))
        .collect();
    let height = cells.iter().map(|(_, lines)| lines.len()).max().unwrap_or(0);
    for number in 0..height {
        let mut line = String::new();
        for (index, ((align, lines), width)) in cells.iter().zip(widths).enumerate() {
            if index > 0 {
                line.push_str(&" ".repeat(GAP));
            }
            let text = lines.get(number).map_or("", String::as_str);
            let spare = width.saturating_sub(text.chars().count());
            let before = match align {
                Align::Left => 0,
                Align::Centre => spare / 2,
                Align::Right => spare,
            };
            line.push_str(&" ".repeat(before));
            line.push_str(text);
            line.push_str(&" ".repeat(spare - before));
        }
        push_line(out, &line);
    }
}
