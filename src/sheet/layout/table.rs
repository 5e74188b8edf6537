//! Tables that break across pages. Every block of the sheet is one: a paragraph is a table of one cell.
//!
//! Rules: the header rows are repeated on each page; a row moves to the next page as a whole; only a row taller than a
//! page is parted, between lines. A heading stays with the first row; a short table is not broken at all.

use super::cell::{Cell, LaidCell, Para};
use super::flow::Flow;
use super::item::{Frame, Item, Place, Role, Rule};
use super::style;

/// Lines drawn between cells.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Grid {
    /// None.
    None,
    /// Around every cell.
    Full,
    /// Between rows only.
    Rows,
}

/// A row of cells.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Row {
    pub cells: Vec<Cell>,
    /// Least height with padding, points.
    pub least_height: f32,
}

impl Row {
    pub(super) fn new(cells: Vec<Cell>) -> Self {
        Self { cells, least_height: 0.0 }
    }

    pub(super) fn at_least(mut self, height: f32) -> Self {
        self.least_height = height;
        self
    }
}

/// A table to be placed.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct TableSpec {
    /// Heading above, kept with the first row.
    pub heading: Option<Para>,
    /// Widths with padding, points; their sum is at most the width of the page.
    pub widths: Vec<f32>,
    /// Repeated on each page.
    pub header: Vec<Row>,
    pub rows: Vec<Row>,
    pub grid: Grid,
    /// Left and right of the text of a cell, points.
    pub pad_x: f32,
    /// Above and below it, points.
    pub pad_y: f32,
    /// Outline around the whole, points; 0 for none.
    pub frame: f32,
    /// At a page break, tell the operator which step follows on the next page.
    pub announce_steps: bool,
}

impl TableSpec {
    /// A table without heading, header, lines or padding.
    pub(super) fn plain(widths: Vec<f32>, rows: Vec<Row>) -> Self {
        Self {
            heading: None,
            widths,
            header: Vec::new(),
            rows,
            grid: Grid::None,
            pad_x: 0.0,
            pad_y: 0.0,
            frame: 0.0,
            announce_steps: false,
        }
    }

    /// A column of paragraphs across the page.
    pub(super) fn paragraphs(flow: &Flow, role: Role, paras: Vec<Para>) -> Self {
        let rows = paras.into_iter().map(|p| Row::new(vec![Cell::new(role, vec![p])])).collect();
        Self::plain(vec![flow.area.width()], rows)
    }

    pub(super) fn heading(mut self, text: &str) -> Self {
        self.heading = Some(Para::new(text, style::HEADING));
        self
    }
}

/// A header taller than this share of a page is not repeated, or nothing else would fit.
const REPEATED_HEADER_SHARE: f32 = 0.3;
/// A table shorter than this share of a page is not broken: a value must not part from its range.
const KEPT_WHOLE_SHARE: f32 = 0.25;
/// Height kept free for the announcement at a page break, points.
const ANNOUNCEMENT: f32 = 22.0;

/// Places a table, starting new pages as needed.
pub(super) fn place(flow: &mut Flow, spec: &TableSpec) {
    let mut placer = Placer::new(flow, spec);
    placer.begin(flow);
    placer.rows(flow);
    placer.close(flow);
}

#[derive(Clone)]
struct LaidRow {
    cells: Vec<LaidCell>,
    least_height: f32,
    index: usize,
}

struct Placer<'a> {
    spec: &'a TableSpec,
    heading: Option<LaidCell>,
    header: Vec<LaidRow>,
    rows: Vec<LaidRow>,
    block: usize,
    /// Where the part of the table on this page starts, points.
    part_top: f32,
    /// Whether the next row is the first on this page.
    first_on_page: bool,
}

impl<'a> Placer<'a> {
    fn new(flow: &mut Flow, spec: &'a TableSpec) -> Self {
        let heading = spec
            .heading
            .as_ref()
            .map(|para| Cell::new(Role::Heading, vec![para.clone()]).lay(flow.area.width(), flow.density))
            .filter(|cell| !cell.is_empty());
        let lay = |offset: usize, rows: &[Row]| -> Vec<LaidRow> {
            rows.iter()
                .enumerate()
                .map(|(index, row)| LaidRow {
                    cells: row
                        .cells
                        .iter()
                        .zip(&spec.widths)
                        .map(|(cell, width)| cell.lay(width - 2.0 * spec.pad_x, flow.density))
                        .collect(),
                    least_height: row.least_height,
                    index: offset + index,
                })
                .collect()
        };
        let mut header = lay(0, &spec.header);
        let mut rows = lay(header.len(), &spec.rows);
        let mut placer = Self {
            spec,
            heading,
            header: Vec::new(),
            rows: Vec::new(),
            block: 0,
            part_top: flow.y,
            first_on_page: true,
        };
        if placer.height_of(&header) > REPEATED_HEADER_SHARE * flow.full_room() {
            header.append(&mut rows);
            (header, rows) = (Vec::new(), header);
        }
        placer.header = header;
        placer.rows = rows;
        placer
    }

    fn height(&self, row: &LaidRow) -> f32 {
        let text = row.cells.iter().map(LaidCell::height).fold(0.0, f32::max);
        (text + 2.0 * self.spec.pad_y).max(row.least_height)
    }

    fn height_of(&self, rows: &[LaidRow]) -> f32 {
        rows.iter().map(|row| self.height(row)).sum()
    }

    /// Height kept free below a row when the rows from it onwards do not fit into `room`, points.
    fn reserve(&self, rows_left: &[LaidRow], room: f32) -> f32 {
        let breaks = self.spec.announce_steps && self.height_of(rows_left) > room;
        if breaks { ANNOUNCEMENT } else { 0.0 }
    }

    fn begin(&mut self, flow: &mut Flow) {
        let heading = self.heading.as_ref().map_or(0.0, |h| h.height() + flow.density.heading_gap);
        let all = self.height_of(&self.rows);
        let short = all <= KEPT_WHOLE_SHARE * flow.full_room() && !self.spec.announce_steps;
        let first = if short { all } else { self.rows.first().map_or(0.0, |row| self.height(row)) };
        let above = heading + self.height_of(&self.header) + self.spec.frame;
        let wanted = above + first + self.reserve(&self.rows, flow.room() - above);
        if wanted > flow.room()
            && (wanted <= flow.full_room() || flow.room() < flow.full_room() / 3.0)
            && !flow.at_top()
        {
            flow.new_page();
        }
        if let Some(mut rest) = self.heading.take() {
            let block = flow.next_block();
            while !rest.is_empty() {
                let head = rest.take(flow.room());
                if head.is_empty() {
                    flow.new_page();
                    continue;
                }
                let (x, y) = (flow.area.left, flow.y);
                head.put(flow, x, y, head.height(), Place { block, row: 0, cell: 0 });
                flow.y += head.height();
            }
            flow.y += flow.density.heading_gap;
        }
        self.block = flow.next_block();
        self.open(flow);
    }

    /// Starts the part of the table on this page.
    fn open(&mut self, flow: &mut Flow) {
        self.part_top = flow.y;
        flow.y += self.spec.frame / 2.0;
        self.first_on_page = true;
        for row in self.header.clone() {
            let height = self.height(&row);
            self.draw(flow, &row, height, true);
        }
    }

    /// Ends the part of the table on this page.
    fn close(&mut self, flow: &mut Flow) {
        flow.y += self.spec.frame / 2.0;
        if self.spec.frame > 0.0 {
            let half = self.spec.frame / 2.0;
            flow.put(Item::Frame(Frame {
                x: flow.area.left + half,
                y: self.part_top + half,
                width: flow.area.width() - self.spec.frame,
                height: (flow.y - self.part_top - self.spec.frame).max(0.0),
                thickness: self.spec.frame,
            }));
        }
    }

    fn next_page(&mut self, flow: &mut Flow, step: Option<usize>) {
        self.close(flow);
        if let (true, Some(step)) = (self.spec.announce_steps, step) {
            let text = format!("Go on with step {step} on the next page.");
            let cell = Cell::text(Role::Body, &text, style::WORD_STRONG).lay(flow.area.width(), flow.density);
            let block = flow.next_block();
            let (x, y) = (flow.area.left, flow.y + 4.0);
            if y + cell.height() <= flow.area.bottom {
                cell.put(flow, x, y, cell.height(), Place { block, row: 0, cell: 0 });
            }
        }
        flow.new_page();
        self.open(flow);
    }

    fn rows(&mut self, flow: &mut Flow) {
        let rows = std::mem::take(&mut self.rows);
        let header = self.height_of(&self.header) + self.spec.frame;
        for (index, row) in rows.iter().enumerate() {
            let height = self.height(row);
            let room = flow.room() - self.spec.frame / 2.0;
            let reserve = self.reserve(&rows[index..], room);
            let step = Some(index + 1);
            if height + reserve <= room {
                self.draw(flow, row, height, false);
            } else if height + reserve <= flow.full_room() - header {
                self.next_page(flow, step);
                self.draw(flow, row, height, false);
            } else {
                self.part_row(flow, row.clone(), step);
            }
        }
    }

    /// Parts a row that is taller than a page.
    fn part_row(&mut self, flow: &mut Flow, mut row: LaidRow, step: Option<usize>) {
        while row.cells.iter().any(|cell| !cell.is_empty()) {
            let room = flow.room() - 2.0 * self.spec.pad_y - self.spec.frame / 2.0 - ANNOUNCEMENT;
            let head = LaidRow {
                cells: row.cells.iter_mut().map(|cell| cell.take(room)).collect(),
                least_height: 0.0,
                index: row.index,
            };
            if head.cells.iter().all(LaidCell::is_empty) {
                self.next_page(flow, step);
                continue;
            }
            let height = self.height(&head);
            self.draw(flow, &head, height, false);
        }
    }

    fn draw(&mut self, flow: &mut Flow, row: &LaidRow, height: f32, is_header: bool) {
        let spec = self.spec;
        let top = flow.y;
        let mut x = flow.area.left;
        for (index, (cell, width)) in row.cells.iter().zip(&spec.widths).enumerate() {
            let place = Place { block: self.block, row: row.index, cell: index };
            cell.put(flow, x + spec.pad_x, top + spec.pad_y, height - 2.0 * spec.pad_y, place);
            x += width;
        }
        let right = x;
        self.lines(flow, row, top, top + height, right, is_header);
        flow.y = top + height;
        self.first_on_page = false;
    }

    fn lines(&self, flow: &mut Flow, row: &LaidRow, top: f32, bottom: f32, right: f32, is_header: bool) {
        let left = flow.area.left;
        let rule = |x1, y1, x2, y2, thickness| Item::Rule(Rule { x1, y1, x2, y2, thickness });
        match self.spec.grid {
            Grid::None => {}
            Grid::Rows => {
                if self.first_on_page {
                    flow.put(rule(left, top, right, top, style::THIN));
                }
                let thickness = if is_header { style::THIN } else { style::HAIR };
                flow.put(rule(left, bottom, right, bottom, thickness));
            }
            Grid::Full => {
                if self.first_on_page {
                    flow.put(rule(left, top, right, top, style::THIN));
                }
                flow.put(rule(left, bottom, right, bottom, style::THIN));
                let mut x = left;
                flow.put(rule(x, top, x, bottom, style::THIN));
                for width in &self.spec.widths {
                    x += width;
                    flow.put(rule(x, top, x, bottom, style::THIN));
                }
            }
        }
        let mut x = left;
        for (cell, width) in row.cells.iter().zip(&self.spec.widths) {
            if cell.is_heavy() {
                flow.put(Item::Frame(Frame {
                    x,
                    y: top,
                    width: *width,
                    height: bottom - top,
                    thickness: style::HEAVY,
                }));
            }
            x += width;
        }
    }
}
