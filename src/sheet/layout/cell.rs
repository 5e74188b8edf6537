//! The content of one table cell: paragraphs, wrapped to the cell's width.

use super::flow::Flow;
use super::item::{CheckBox, Item, Join, Place, Role, Weight, WriteIn};
use super::rich::{Span, Style};
use super::style::{self, Density};
use super::widths::Need;
use super::wrap::{Line, Piece, Points, Ruler, least_width, wrap};
use crate::sheet::model::Align;

/// Space between a tick box and its label, points.
const TICK_GAP: f32 = 6.0;
/// Side of a tick box, points.
const TICK_SIDE: f32 = 11.0;
/// Indent of the lines behind a bullet, points.
const BULLET_HANG: f32 = 9.0;
/// The bullet, with the space that the text writer needs.
const BULLET: &str = "• ";

/// A paragraph of styled text.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Para {
    pub spans: Vec<Span>,
    /// White space above it, points.
    pub before: f32,
    /// Hung behind a bullet.
    pub bullet: bool,
    /// Font size for which its lines are spaced at least, so that columns of a list keep step, points.
    pub least_size: f32,
}

impl Para {
    pub(super) fn new(text: &str, style: Style) -> Self {
        Self::of(vec![Span::new(text, style)])
    }

    pub(super) fn of(spans: Vec<Span>) -> Self {
        Self { spans, before: 0.0, bullet: false, least_size: 0.0 }
    }

    /// The paragraph behind a bullet, its lines hung in.
    pub(super) fn bullet(mut self) -> Self {
        self.bullet = true;
        self
    }

    /// Spaces its lines as if they held type of this size.
    pub(super) fn spaced_for(mut self, size: f32) -> Self {
        self.least_size = size;
        self
    }

    fn hang(&self) -> f32 {
        if self.bullet { BULLET_HANG } else { 0.0 }
    }

    pub(super) fn before(mut self, points: f32) -> Self {
        self.before = points;
        self
    }

    fn is_empty(&self) -> bool {
        self.spans.iter().all(|span| span.text.trim().is_empty())
    }
}

/// What goes into a cell.
#[derive(Clone, Debug, PartialEq)]
pub(super) struct Cell {
    pub paras: Vec<Para>,
    pub role: Role,
    pub align: Align,
    /// Centred from top to bottom, else at the top.
    pub middle: bool,
    /// Outlined heavily.
    pub heavy: bool,
    /// To be written in by hand.
    pub write_in: bool,
    /// With a tick box before the text.
    pub tick: bool,
}

impl Cell {
    pub(super) fn new(role: Role, paras: Vec<Para>) -> Self {
        let paras = paras.into_iter().filter(|p| !p.is_empty()).collect();
        Self { paras, role, align: Align::Left, middle: false, heavy: false, write_in: false, tick: false }
    }

    pub(super) fn text(role: Role, text: &str, style: Style) -> Self {
        Self::new(role, vec![Para::new(text, style)])
    }

    pub(super) fn write_in() -> Self {
        Self { write_in: true, ..Self::new(Role::Cell, Vec::new()) }
    }

    pub(super) fn align(mut self, align: Align) -> Self {
        self.align = align;
        self
    }

    pub(super) fn middle(mut self) -> Self {
        self.middle = true;
        self
    }

    pub(super) fn heavy(mut self) -> Self {
        self.heavy = true;
        self
    }

    pub(super) fn tick(mut self) -> Self {
        self.tick = true;
        self
    }

    fn indent(&self) -> f32 {
        if self.tick { TICK_SIDE + TICK_GAP } else { 0.0 }
    }

    /// Width the cell wants, without padding.
    pub(super) fn need(&self) -> Need {
        let mut need = Need::default();
        for para in &self.paras {
            let best = para.spans.iter().map(|s| Points.width(&s.text, s.style)).sum::<f32>();
            let least = least_width(&para.spans, &Points);
            need = need.and(Need { least: least + para.hang(), best: best + para.hang() + 0.5 });
        }
        Need { least: need.least + self.indent(), best: need.best + self.indent() }
    }

    /// Wraps the cell to `width` points.
    pub(super) fn lay(&self, width: f32, density: Density) -> LaidCell {
        let mut lines = Vec::new();
        for (index, para) in self.paras.iter().enumerate() {
            let room = width - self.indent() - para.hang();
            for (number, mut line) in wrap(&para.spans, room, &Points).into_iter().enumerate() {
                let first = number == 0;
                line.size = line.size.max(para.least_size);
                if para.bullet {
                    hang(&mut line, first);
                }
                lines.push(LaidLine {
                    height: style::line_height(line.size, density),
                    gap: if first && index > 0 { para.before } else { 0.0 },
                    starts: first,
                    line,
                });
            }
        }
        LaidCell { cell: self.clone(), lines, width, tick_due: self.tick }
    }
}

/// Moves a line in by the hanging indent, with the bullet before the first one.
fn hang(line: &mut Line, first: bool) {
    for piece in &mut line.pieces {
        piece.x += BULLET_HANG;
    }
    line.width += BULLET_HANG;
    if let (true, Some(start)) = (first, line.pieces.first_mut()) {
        start.join = Join::Tight;
        let style = Style { weight: Weight::Regular, ..start.style };
        let width = Points.width(BULLET.trim_end(), style);
        line.pieces.insert(0, Piece { text: BULLET.to_owned(), style, x: 0.0, width, join: Join::Start });
    }
}

/// A wrapped line with its height, points.
#[derive(Clone, Debug)]
struct LaidLine {
    line: Line,
    height: f32,
    gap: f32,
    /// Begins a paragraph.
    starts: bool,
}

/// A cell wrapped to its width.
#[derive(Clone, Debug)]
pub(super) struct LaidCell {
    cell: Cell,
    lines: Vec<LaidLine>,
    width: f32,
    tick_due: bool,
}

impl LaidCell {
    /// Height of the text, points.
    pub(super) fn height(&self) -> f32 {
        self.lines.iter().map(|l| l.height + l.gap).sum()
    }

    pub(super) fn is_heavy(&self) -> bool {
        self.cell.heavy
    }

    pub(super) fn is_empty(&self) -> bool {
        self.lines.is_empty()
    }

    /// Takes off the lines that fit into `height`; the rest stays.
    pub(super) fn take(&mut self, height: f32) -> LaidCell {
        let mut used = 0.0;
        let count = self
            .lines
            .iter()
            .take_while(|l| {
                used += l.height + l.gap;
                used <= height
            })
            .count();
        let rest = self.lines.split_off(count);
        let mut head = self.clone();
        head.cell.middle = false;
        self.cell.middle = false;
        if !head.lines.is_empty() {
            self.tick_due = false;
        }
        self.lines = rest;
        head
    }

    /// Puts the cell into the box whose inside (padding taken off) is at `x`, `y` and `height` high.
    pub(super) fn put(&self, flow: &mut Flow, x: f32, y: f32, height: f32, place: Place) {
        if self.cell.write_in {
            flow.put(Item::WriteIn(WriteIn { x, y, width: self.width, height, place }));
        }
        let mut y = if self.cell.middle { y + ((height - self.height()) / 2.0).max(0.0) } else { y };
        let x = x + self.cell.indent();
        let width = self.width - self.cell.indent();
        for (index, laid) in self.lines.iter().enumerate() {
            y += laid.gap;
            if index == 0 && self.tick_due {
                let top = y + (laid.height - TICK_SIDE) / 2.0;
                flow.put(Item::CheckBox(CheckBox {
                    x: x - self.cell.indent() + 0.5,
                    y: top,
                    side: TICK_SIDE,
                    place,
                }));
            }
            let spare = (width - laid.line.width).max(0.0);
            let shift = match self.cell.align {
                Align::Left => 0.0,
                Align::Centre => spare / 2.0,
                Align::Right => spare,
            };
            flow.put_line(
                &laid.line,
                x + shift,
                y,
                laid.height,
                self.cell.role,
                self.cell.align,
                place,
                laid.starts,
            );
            y += laid.height;
        }
    }
}
