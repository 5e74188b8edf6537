//! Writes a laid-out sheet as plain text, at most 100 columns wide, page by page.
//!
//! It walks the same pages as the PDF, so every word and number printed there stands here too. Tables are set again
//! with character widths, because a cell two inches wide on paper holds a different number of letters.

mod table;

use std::collections::BTreeMap;

use self::table::TextTable;
use super::layout::wrap::{Ruler, wrap};
use super::layout::{Item, Join, LaidOut, Page, Role, Span, Style, TextRun};

/// Widest line, characters.
pub(super) const COLUMNS: usize = 100;

/// The sheet as plain text (UTF-8, lines ended by `\n`).
pub fn to_text(sheet: &LaidOut) -> String {
    let pages: Vec<Vec<Block>> = sheet.pages.iter().map(blocks).collect();
    let mut tables: BTreeMap<usize, TextTable> = BTreeMap::new();
    for block in pages.iter().flatten().filter(|b| b.is_table()) {
        tables.entry(block.number).or_default().learn(&block.cells);
    }
    let mut out = String::new();
    for (index, page) in pages.iter().enumerate() {
        if index > 0 {
            out.push('\n');
        }
        let mut list_before = false;
        for block in page {
            let is_footer = block.cells.values().any(|c| c.role == Role::Footer);
            if is_footer {
                push_line(&mut out, &"=".repeat(COLUMNS));
            } else if !out.is_empty() && !out.ends_with("\n\n") && !list_before {
                out.push('\n');
            }
            match tables.get(&block.number) {
                Some(table) if block.is_table() => table.write(&block.cells, &mut out),
                _ => write_paragraphs(block, &mut out),
            }
            // A heading stands right above what it heads.
            list_before = block.cells.values().all(|c| c.role == Role::Heading);
        }
    }
    out
}

/// What stands in one cell.
#[derive(Clone, Debug)]
pub(super) struct CellText {
    pub paragraphs: Vec<String>,
    pub role: Role,
    pub align: super::model::Align,
    pub write_in: bool,
    pub tick: bool,
}

/// Cells of a block by row and column.
pub(super) type Cells = BTreeMap<(usize, usize), CellText>;

struct Block {
    number: usize,
    cells: Cells,
}

impl Block {
    fn is_table(&self) -> bool {
        self.cells.values().any(|c| matches!(c.role, Role::HeaderCell | Role::Cell))
    }
}

/// The blocks of a page, in reading order.
fn blocks(page: &Page) -> Vec<Block> {
    let mut blocks: Vec<Block> = Vec::new();
    for item in &page.items {
        let place = match item {
            Item::Text(run) => run.place,
            Item::CheckBox(tick) => tick.place,
            Item::WriteIn(area) => area.place,
            Item::Rule(_) | Item::Frame(_) => continue,
        };
        if blocks.last().is_none_or(|b| b.number != place.block) {
            blocks.push(Block { number: place.block, cells: Cells::new() });
        }
        let Some(block) = blocks.last_mut() else { continue };
        let cell = block.cells.entry((place.row, place.cell)).or_insert_with(|| CellText {
            paragraphs: Vec::new(),
            role: Role::Cell,
            align: super::model::Align::Left,
            write_in: false,
            tick: false,
        });
        match item {
            Item::Text(run) => add_run(cell, run),
            Item::CheckBox(_) => cell.tick = true,
            Item::WriteIn(_) => cell.write_in = true,
            Item::Rule(_) | Item::Frame(_) => {}
        }
    }
    blocks
}

fn add_run(cell: &mut CellText, run: &TextRun) {
    cell.role = run.role;
    cell.align = run.align;
    match (cell.paragraphs.last_mut(), run.join) {
        (None, _) | (_, Join::Start) => cell.paragraphs.push(run.text.clone()),
        (Some(last), Join::Space) => {
            last.push(' ');
            last.push_str(&run.text);
        }
        (Some(last), Join::Tight) => last.push_str(&run.text),
    }
}

fn write_paragraphs(block: &Block, out: &mut String) {
    let alone = block.cells.len() == 1;
    for cell in block.cells.values() {
        let tick = if cell.tick { "[ ] " } else { "" };
        for paragraph in &cell.paragraphs {
            let (text, hang) = match cell.role {
                Role::Bullet => (paragraph.replacen("• ", "- ", 1), 2),
                Role::CheckLabel => (format!("{tick}{paragraph}"), 4),
                _ => (paragraph.clone(), 0),
            };
            let lines = wrap_text(&text, COLUMNS - hang);
            for (index, line) in lines.iter().enumerate() {
                let indent = if index > 0 { hang } else { 0 };
                push_line(out, &format!("{}{line}", " ".repeat(indent)));
            }
            let longest = lines.iter().map(|l| l.chars().count()).max().unwrap_or(0);
            match cell.role {
                Role::Title if block.number == 1 && out.lines().count() == 1 => {
                    push_line(out, &"=".repeat(longest))
                }
                Role::Heading if alone || cell.paragraphs.len() == 1 => push_line(out, &"-".repeat(longest)),
                _ => {}
            }
        }
    }
}

/// Measures in characters.
pub(super) struct Characters;

impl Ruler for Characters {
    fn width(&self, text: &str, _: Style) -> f32 {
        text.chars().count() as f32
    }
}

/// A span in a style that does not matter, because characters are counted.
pub(super) fn span(text: &str) -> Span {
    Span { text: text.to_owned(), style: Style::regular(1.0) }
}

/// Wraps to a number of characters, with the rules of the printed sheet.
pub(super) fn wrap_text(text: &str, columns: usize) -> Vec<String> {
    wrap(&[span(text)], columns.max(1) as f32, &Characters)
        .into_iter()
        .map(|line| line.pieces.into_iter().map(|p| p.text).collect())
        .collect()
}

pub(super) fn push_line(out: &mut String, line: &str) {
    out.push_str(&line.trim_end().replace('\u{a0}', " "));
    out.push('\n');
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::sheet::sample;
    use crate::sheet::{Paper, lay_out};

    fn numbers(text: &str) -> Vec<String> {
        text.split(|c: char| !(c.is_ascii_digit() || c == '.'))
            .map(|n| n.trim_matches('.').to_owned())
            .filter(|n| !n.is_empty())
            .collect()
    }

    #[test]
    fn every_number_in_the_pdf_is_in_the_text() {
        for sheet in [sample::four_additions(), sample::nine_additions(), sample::refused()] {
            for paper in [Paper::A4, Paper::Letter] {
                let laid_out = lay_out(&sheet, paper);
                let in_text = numbers(&to_text(&laid_out));
                for run in sample::runs(&laid_out) {
                    for number in numbers(&run.text) {
                        assert!(in_text.contains(&number), "{number} of {:?} is missing", run.text);
                    }
                }
            }
        }
    }

    #[test]
    fn the_text_has_every_amount_of_every_addition() {
        let sheet = sample::nine_additions();
        let text = to_text(&lay_out(&sheet, Paper::A4));
        for step in &sheet.additions {
            // "up to" may stand on the line above.
            let amount = step.amount.trim_start_matches("up to ");
            assert!(text.contains(amount), "{amount} is missing");
        }
    }

    #[test]
    fn no_line_is_wider_than_a_hundred_columns() {
        for sheet in [sample::four_additions(), sample::nine_additions(), sample::endless_words()] {
            let text = to_text(&lay_out(&sheet, Paper::A4));
            for line in text.lines() {
                assert!(line.chars().count() <= COLUMNS, "{line:?}");
            }
        }
    }

    #[test]
    fn tick_boxes_and_empty_fields_stay_usable_on_paper() {
        let text = to_text(&lay_out(&sample::four_additions(), Paper::A4));
        assert!(text.contains("[ ] parts out"));
        assert!(text.contains("____"));
    }

    #[test]
    fn a_refused_sheet_names_no_amount() {
        let text = to_text(&lay_out(&sample::refused(), Paper::A4));
        assert!(text.contains("NO ADDITION"));
        assert!(text.contains("cyanide"));
        for step in &sample::refused().additions {
            assert!(!text.contains(&step.amount));
        }
    }
}
