//! The line at the foot of each page: what the sheet was computed with, and which page this is.

use super::flow::Flow;
use super::front::joined;
use super::item::{Item, Join, Place, Role, Rule};
use super::rich::{Span, Style};
use super::style;
use super::wrap::{Line, Piece, Points, Ruler, wrap};
use crate::sheet::fonts::printable;
use crate::sheet::model::{Align, Header};

/// Share of the width for the program's stamp; the rest is for the page number.
const STAMP_SHARE: f32 = 0.67;
/// The stamp is the program's own text; more lines than this would only eat the page.
const MOST_LINES: usize = 3;
/// Between the text of the page and the rule, and between the rule and the footer, points.
const GAP: f32 = 4.0;

/// The stamp, wrapped once for all pages.
pub(super) struct Foot {
    stamp: Vec<Line>,
}

impl Foot {
    /// Wraps the stamp for a printable width in points.
    pub(super) fn new(header: &Header, width: f32) -> Self {
        let hash = if header.project_hash.trim().is_empty() {
            String::new()
        } else {
            format!("project {}", header.project_hash.trim())
        };
        let basis = header.basis.as_deref().unwrap_or("");
        let text = joined(&[&header.program_version, &hash, basis], " · ");
        let span = Span::new(&text, style::FOOTER);
        let mut stamp = wrap(&[span], width * STAMP_SHARE, &Points);
        if stamp.len() > MOST_LINES {
            let rest: String =
                stamp[MOST_LINES - 1..].iter().flat_map(|l| &l.pieces).map(|p| p.text.as_str()).collect();
            stamp.truncate(MOST_LINES - 1);
            stamp.extend(one_line(&rest, style::FOOTER, width * STAMP_SHARE));
        }
        Self { stamp }
    }

    fn line_height() -> f32 {
        style::line_height(style::FOOTER.size, style::NORMAL)
    }

    /// Height to keep free, points.
    pub(super) fn height(&self) -> f32 {
        2.0 * GAP + self.stamp.len().max(1) as f32 * Self::line_height()
    }

    /// Adds the footer to every page. `file_page` is the number of the first page for the file.
    pub(super) fn put(&self, flow: &mut Flow, file_page: Option<usize>) {
        let pages = std::mem::take(&mut flow.pages);
        let count = pages.len();
        for (index, page) in pages.into_iter().enumerate() {
            flow.pages.push(page);
            let number = index + 1;
            let pointer = match file_page {
                Some(first) if number < first => format!("Margins and sources: page {first}"),
                _ => String::new(),
            };
            let text = joined(&[&pointer, &format!("page {number} of {count}")], " · ");
            self.put_on_page(flow, &text);
        }
    }

    fn put_on_page(&self, flow: &mut Flow, page: &str) {
        let block = flow.next_block();
        let area = flow.area;
        let y = area.bottom + GAP;
        flow.put(Item::Rule(Rule { x1: area.left, y1: y, x2: area.right, y2: y, thickness: style::THIN }));
        let height = Self::line_height();
        let top = y + GAP;
        for (row, line) in self.stamp.iter().enumerate() {
            let place = Place { block, row: 0, cell: 0 };
            let y = top + row as f32 * height;
            flow.put_line(line, area.left, y, height, Role::Footer, Align::Left, place, row == 0);
        }
        let room = area.width() * (1.0 - STAMP_SHARE);
        if let Some(line) = one_line(page, style::FOOTER, room) {
            let place = Place { block, row: 0, cell: 1 };
            let x = area.right - line.width;
            flow.put_line(&line, x, top, height, Role::Footer, Align::Right, place, true);
        }
    }
}

/// The text in one line of at most `width` points; what does not fit ends in an ellipsis.
///
/// Only for text that stands in full elsewhere on the sheet or is the program's own.
pub(super) fn one_line(text: &str, style: Style, width: f32) -> Option<Line> {
    let mut text = printable(text);
    if Points.width(&text, style) > width {
        while !text.is_empty() && Points.width(&format!("{text}…"), style) > width {
            let excess = text.chars().count() / 2;
            let keep =
                if Points.width(&text, style) > 2.0 * width { excess } else { text.chars().count() - 1 };
            text = text.chars().take(keep).collect();
        }
        text.push('…');
    }
    if text.is_empty() {
        return None;
    }
    let width = Points.width(&text, style);
    let piece = Piece { text, style, x: 0.0, width, join: Join::Start };
    Some(Line { pieces: vec![piece], width, size: style.size })
}
