//! What a laid-out sheet consists of: pages of items at fixed positions.
//!
//! Why items keep their place in the document (block, row, cell) beside the position on paper: the text writer and a
//! screen reader need the order and the table structure, which cannot be guessed back from coordinates.
//!
//! Units: points (1/72 inch). Origin: top left corner of the page, y grows downwards.

use crate::sheet::model::Align;

/// Paper the sheet is printed on, upright.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Paper {
    /// 210 × 297 mm.
    #[default]
    A4,
    /// 8.5 × 11 inches.
    Letter,
}

impl Paper {
    /// Width and height in points.
    pub fn size_pt(self) -> (f32, f32) {
        match self {
            Paper::A4 => (595.28, 841.89),
            Paper::Letter => (612.0, 792.0),
        }
    }
}

/// A sheet with every item in place.
#[derive(Clone, Debug, PartialEq)]
pub struct LaidOut {
    /// The paper it was laid out for.
    pub paper: Paper,
    /// Title for the document's properties.
    pub title: String,
    /// Who prepared it, for the document's properties.
    pub author: Option<String>,
    /// Program and version, for the document's properties.
    pub creator: String,
    /// The pages; at least one.
    pub pages: Vec<Page>,
}

/// One page.
#[derive(Clone, Debug, PartialEq)]
pub struct Page {
    /// Width in points.
    pub width_pt: f32,
    /// Height in points.
    pub height_pt: f32,
    /// The items, in reading order.
    pub items: Vec<Item>,
}

/// One thing on a page. Everything is drawn in black.
#[derive(Clone, Debug, PartialEq)]
pub enum Item {
    /// A piece of text in one line.
    Text(TextRun),
    /// A straight line.
    Rule(Rule),
    /// A rectangle, outline only.
    Frame(Frame),
    /// A box to tick; its label has the same place.
    CheckBox(CheckBox),
    /// An empty area to be written in by hand; draws nothing itself.
    WriteIn(WriteIn),
}

/// A piece of text in one line and one style.
#[derive(Clone, Debug, PartialEq)]
pub struct TextRun {
    /// Left edge, points.
    pub x: f32,
    /// Base line, points.
    pub baseline: f32,
    /// Width as shaped, points.
    pub width: f32,
    /// Font size, points.
    pub size: f32,
    /// Regular or bold.
    pub weight: Weight,
    /// The text; printable characters only.
    pub text: String,
    /// What the text is.
    pub role: Role,
    /// How the cell it stands in is aligned.
    pub align: Align,
    /// Where it stands in the document.
    pub place: Place,
    /// How it continues the run before it.
    pub join: Join,
}

/// A straight line, centred on the two points.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Rule {
    /// Start, x in points.
    pub x1: f32,
    /// Start, y in points.
    pub y1: f32,
    /// End, x in points.
    pub x2: f32,
    /// End, y in points.
    pub y2: f32,
    /// Thickness in points.
    pub thickness: f32,
}

/// The outline of a rectangle, centred on its edges.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Frame {
    /// Left edge, points.
    pub x: f32,
    /// Top edge, points.
    pub y: f32,
    /// Width, points.
    pub width: f32,
    /// Height, points.
    pub height: f32,
    /// Thickness of the outline, points.
    pub thickness: f32,
}

/// A square to tick.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct CheckBox {
    /// Left edge, points.
    pub x: f32,
    /// Top edge, points.
    pub y: f32,
    /// Length of a side, points.
    pub side: f32,
    /// Where it stands in the document.
    pub place: Place,
}

/// An empty area to be written in by hand.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct WriteIn {
    /// Left edge, points.
    pub x: f32,
    /// Top edge, points.
    pub y: f32,
    /// Width, points.
    pub width: f32,
    /// Height, points.
    pub height: f32,
    /// Where it stands in the document.
    pub place: Place,
}

/// Weight of a text.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash)]
pub enum Weight {
    /// Regular.
    #[default]
    Regular,
    /// Bold.
    Bold,
}

/// What a text is, apart from how it looks.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Role {
    /// Name of the tank and number of the sheet.
    Title,
    /// Heading of a section.
    Heading,
    /// A paragraph.
    Body,
    /// One item of a list.
    Bullet,
    /// Label of a tick box.
    CheckLabel,
    /// Cell of a table's header row.
    HeaderCell,
    /// Cell of a table.
    Cell,
    /// Line at the top of a following page.
    Running,
    /// Line at the foot of a page.
    Footer,
}

/// Place in the document. Blocks count over the whole sheet, rows within a block, cells within a row.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Place {
    /// Heading, paragraph, list or table.
    pub block: usize,
    /// Row within the block.
    pub row: usize,
    /// Cell within the row.
    pub cell: usize,
}

/// How a run continues the run before it in the same cell.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Join {
    /// It begins a paragraph.
    Start,
    /// A line was broken at a space, which must be put back.
    Space,
    /// Nothing is missing in between: a change of style, or a long word broken at the line's end.
    Tight,
}
