//! The dosing sheet: data first, laid out once, then walked by PDF, plain text and the preview.
//!
//! Why this shape: an operator acts on paper, so what is on screen, in the PDF and in the text file must be the same
//! words and numbers. [`lay_out`] is the only place that decides where something stands; the writers only walk it.
//!
//! [`content`] turns a planned dose into the data, wording and rounding every number once. What the layout and the
//! writers must not know: chemistry, files, the window. They place what they are given and never drop any of it.

mod content;
mod csv;
mod error;
mod evidence;
mod fonts;
mod layout;
mod model;
mod pdf;
#[cfg(test)]
mod sample;
mod text;

pub use content::content;
pub use csv::to_csv;
pub use error::SheetError;
pub use fonts::{BOLD_TTF, REGULAR_TTF, printable};
pub use layout::{
    CheckBox, Frame, Item, Join, LaidOut, Page, Paper, Place, Role, Rule, TextRun, Weight, WriteIn, lay_out,
};
pub use model::{
    Addition, Align, Column, DosingSheet, FileCopy, Finding, Header, Retest, RetestColumn, Table, Target,
};
pub use pdf::to_pdf;
pub use text::to_text;
