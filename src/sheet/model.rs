//! The dosing sheet as plain data.
//!
//! Why plain strings: rounding, units and wording are decided once, where the numbers are known. The sheet only
//! arranges them, so no writer can print a number that differs from the one another writer prints.

/// Everything that is printed, in the order in which an operator reads it.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct DosingSheet {
    /// Which tank, which sheet, who and when.
    pub header: Header,
    /// The analysis the doses rest on, and where each value should be.
    pub found: Vec<Finding>,
    /// Ceilings on free metal, with the predicted values before and after.
    pub targets: Vec<Target>,
    /// Tick boxes to work through before the first addition.
    pub before_you_start: Vec<String>,
    /// The additions, in order; the layout numbers them from 1.
    pub additions: Vec<Addition>,
    /// Set when an addition is refused: the reason is printed in a box **instead of** every addition.
    pub refused: Option<String>,
    /// Conditions at which to stop and call the chemist.
    pub stop: Vec<String>,
    /// What to test afterwards.
    pub retest: Retest,
    /// The chemist's sentence: plain and safe margin.
    pub chemists_number: String,
    /// Cautions, one paragraph each.
    pub cautions: Vec<String>,
    /// Labels of the boxes to sign.
    pub sign_off: Vec<String>,
    /// The pages for the file.
    pub file_copy: FileCopy,
}

/// Head of the sheet. A missing optional value prints as a line to fill in by hand.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Header {
    /// Name of the bath, e.g. `copper strike`.
    pub bath: String,
    /// Tank, e.g. `Tank 7`.
    pub tank: String,
    /// Line, e.g. `Line 2`; left out when `None`.
    pub line: Option<String>,
    /// What the paper is, e.g. `Dosing sheet`.
    pub title: String,
    /// Number and revision, e.g. `118, rev. 0`.
    pub sheet_no: Option<String>,
    /// Date and time of issue.
    pub date: Option<String>,
    /// Shift, e.g. `early shift`.
    pub shift: Option<String>,
    /// Until when the doses may be used, e.g. `14:00`.
    pub valid_until: Option<String>,
    /// Who prepared the sheet.
    pub prepared_by: Option<String>,
    /// Name and version of the program, e.g. `Bathwright 0.1.0`.
    pub program_version: String,
    /// Hash of the project, e.g. `7f3a 91c4`.
    pub project_hash: String,
    /// What the numbers rest on, e.g. `25 °C constants moved to 42 °C, equilibrium only` (footer).
    pub basis: Option<String>,
    /// Prints the banner "demo bath, invented numbers" on every page.
    pub invented: bool,
}

/// One value of the analysis.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Finding {
    /// What was measured, e.g. `pH at 25 °C`.
    pub label: String,
    /// Value with unit, e.g. `10.2 g/L`.
    pub value: String,
    /// Where it should be, e.g. `range 9.5 to 11.5`.
    pub range: String,
    /// What it rests on, e.g. `measured 07:55`, `inferred`.
    pub evidence: String,
    /// Prints the evidence in bold capitals: inferred or assumed values an operator should doubt.
    pub emphasised: bool,
}

/// A ceiling on one free metal.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Target {
    /// Metal, e.g. `copper`.
    pub metal: String,
    /// Ceiling with unit, e.g. `2.0e−11 mol/L (pCu 10.7)`.
    pub ceiling: String,
    /// The wall the ceiling stands for, e.g. `coupon series, empirical`.
    pub wall: String,
    /// Predicted before the additions, e.g. `89 % of the ceiling`.
    pub before: String,
    /// Predicted after them.
    pub after: String,
}

/// One numbered addition.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Addition {
    /// Name on the label, e.g. `HEDP 60 % solution`.
    pub material: String,
    /// Small lines below it: as acid or as salt, hydrate, CAS number, density.
    pub details: Vec<String>,
    /// The rounded amount, printed big, e.g. `10.0 L` or `up to 11.5 L`.
    pub amount: String,
    /// How to measure it, e.g. `10 L jug, full to the mark`.
    pub measure: Vec<String>,
    /// The amount before rounding, printed small, e.g. `exact 10.2 L`.
    pub exact: Option<String>,
    /// Where and how to add, e.g. `Over the weir, thin stream. May fizz.`
    pub how: String,
    /// Time to spread it over, e.g. `10 min`; printed as "add over 10 min".
    pub add_over: Option<String>,
    /// Time to wait afterwards, e.g. `5 min`; printed as "wait 5 min".
    pub wait: Option<String>,
    /// What the meter must read afterwards, e.g. `9.0 to 9.4`; `None` prints a dash.
    pub then_ph: Option<String>,
}

/// What to test after the last addition.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Retest {
    /// Heading, e.g. `Wait 20 minutes with the pump on, then test.`
    pub intro: String,
    /// One column for each test.
    pub columns: Vec<RetestColumn>,
}

/// One test after the additions.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct RetestColumn {
    /// What to test, e.g. `pH at 25 °C`.
    pub label: String,
    /// What to expect, e.g. `9.4 to 9.5`.
    pub expect: String,
}

/// The pages for the file: the equilibrium behind the sheet.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct FileCopy {
    /// Tables in order: equilibrium, margins, solids, constants with sources.
    pub tables: Vec<Table>,
    /// Flags: models outside their range, slow metals, constants without ΔH.
    pub flags: Vec<String>,
    /// Lines of the solver's certificate: residuals, charge gap, activity model.
    pub certificate: Vec<String>,
}

/// A table of ready-made strings.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Table {
    /// Heading above the table.
    pub title: String,
    /// Columns, left to right. At most ten are printed side by side; further cells join the tenth.
    pub columns: Vec<Column>,
    /// Rows of cells. A short row is filled with empty cells; surplus cells join the last column.
    pub rows: Vec<Vec<String>>,
}

/// One column of a [`Table`].
#[derive(Clone, Debug, PartialEq)]
pub struct Column {
    /// Label in the header row.
    pub label: String,
    /// How its cells are aligned.
    pub align: Align,
    /// Width relative to the other columns, e.g. 2.0 for twice a column of 1.0; odd values count as 1.0.
    pub width: f32,
}

/// Horizontal alignment.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Align {
    /// Against the left edge.
    #[default]
    Left,
    /// In the middle.
    Centre,
    /// Against the right edge (numbers).
    Right,
}

impl DosingSheet {
    /// The additions that may be printed: none when an addition is refused.
    ///
    /// Every writer asks this instead of the field, so a refused dose cannot slip into one of the formats.
    pub fn printed_additions(&self) -> &[Addition] {
        if self.refused.is_some() { &[] } else { &self.additions }
    }
}

impl Column {
    /// A column with its label, alignment and relative width.
    pub fn new(label: impl Into<String>, align: Align, width: f32) -> Self {
        Self { label: label.into(), align, width }
    }
}
