//! The pen that moves down the pages: where it stands, how much room is left, and starting the next page.

use super::item::{Item, Join, Paper, Place, Role, TextRun};
use super::style::{self, Density};
use super::wrap::Line;
use crate::sheet::model::Align;

/// The part of a page that may be printed on, in points from the top left corner.
#[derive(Clone, Copy, Debug)]
pub(super) struct Area {
    pub left: f32,
    pub right: f32,
    pub top: f32,
    pub bottom: f32,
}

impl Area {
    /// The printable area of `paper` above a footer of the given height.
    pub(super) fn above_footer(paper: Paper, footer_height: f32) -> Self {
        let (width, height) = paper.size_pt();
        Self {
            left: style::MARGIN_SIDE,
            right: width - style::MARGIN_SIDE,
            top: style::MARGIN_TOP,
            bottom: height - style::MARGIN_BOTTOM - footer_height,
        }
    }

    pub(super) fn width(self) -> f32 {
        self.right - self.left
    }
}

/// Pages being filled from top to bottom.
#[derive(Clone)]
pub(super) struct Flow {
    pub area: Area,
    pub density: Density,
    pub pages: Vec<Vec<Item>>,
    /// Where the next item goes, points.
    pub y: f32,
    /// Top of the current page below its running line, points.
    page_top: f32,
    /// Printed at the top of every page but the first; never more than one line.
    running: Option<Line>,
    blocks: usize,
}

impl Flow {
    pub(super) fn new(area: Area, density: Density, running: Option<Line>) -> Self {
        Self { area, density, pages: vec![Vec::new()], y: area.top, page_top: area.top, running, blocks: 0 }
    }

    /// Number of the next block of the document.
    pub(super) fn next_block(&mut self) -> usize {
        self.blocks += 1;
        self.blocks
    }

    /// Room left on the page, points.
    pub(super) fn room(&self) -> f32 {
        self.area.bottom - self.y
    }

    /// Room on an empty following page, points.
    pub(super) fn full_room(&self) -> f32 {
        self.area.bottom - self.area.top - self.running_height()
    }

    /// Whether nothing stands on the page yet.
    pub(super) fn at_top(&self) -> bool {
        self.y <= self.page_top + 0.01
    }

    /// White space before the next block; none at the top of a page.
    pub(super) fn gap(&mut self, height: f32) {
        if !self.at_top() {
            self.y = (self.y + height).min(self.area.bottom);
        }
    }

    /// Adds an item to the current page.
    pub(super) fn put(&mut self, item: Item) {
        if let Some(page) = self.pages.last_mut() {
            page.push(item);
        }
    }

    /// Starts the next page, with the running line at its top.
    pub(super) fn new_page(&mut self) {
        self.pages.push(Vec::new());
        self.y = self.area.top;
        if let Some(line) = self.running.clone() {
            let block = self.next_block();
            let place = Place { block, row: 0, cell: 0 };
            let height = style::line_height(line.size, self.density);
            self.put_line(&line, self.area.left, self.y, height, Role::Running, Align::Left, place, true);
            self.y += self.running_height();
        }
        self.page_top = self.y;
    }

    fn running_height(&self) -> f32 {
        self.running
            .as_ref()
            .map_or(0.0, |line| style::line_height(line.size, self.density) + style::RUNNING_GAP)
    }

    /// Puts the pieces of a line with its top at `y`.
    #[expect(
        clippy::too_many_arguments,
        reason = "a line, where it goes and what it is; a struct would be built once"
    )]
    pub(super) fn put_line(
        &mut self,
        line: &Line,
        x: f32,
        y: f32,
        height: f32,
        role: Role,
        align: Align,
        place: Place,
        starts: bool,
    ) {
        let baseline = style::baseline(y, height, line.size);
        for (index, piece) in line.pieces.iter().enumerate() {
            self.put(Item::Text(TextRun {
                x: x + piece.x,
                baseline,
                width: piece.width,
                size: piece.style.size,
                weight: piece.style.weight,
                text: piece.text.clone(),
                role,
                align,
                place,
                join: if starts && index == 0 { Join::Start } else { piece.join },
            }));
        }
    }
}
