//! Sizes and spacing of the sheet, in points.
//!
//! The operator reads this at arm's length, in poor light, with gloves on: numbers to act on are 14 points or more,
//! amounts 26. When a page is full, white space shrinks, and labels and cautions a little (see [`Density`]); the
//! numbers never do.

use super::rich::Style;

/// Margin left and right: what an office printer leaves free, and a little for the punch.
pub(super) const MARGIN_SIDE: f32 = 31.0;
/// Margin above.
pub(super) const MARGIN_TOP: f32 = 23.0;
/// Margin below the footer.
pub(super) const MARGIN_BOTTOM: f32 = 19.0;
/// Space under the running line of a following page.
pub(super) const RUNNING_GAP: f32 = 8.0;

/// Name of the tank.
pub(super) const TITLE: Style = Style::bold(21.0);
/// Number of the sheet.
pub(super) const SHEET_NO: Style = Style::bold(15.0);
/// Line, shift and date.
pub(super) const SUBTITLE: Style = Style::regular(12.0);
/// Line, shift and date, the part not to overlook.
pub(super) const SUBTITLE_STRONG: Style = Style::bold(12.0);
/// Heading of a section.
pub(super) const HEADING: Style = Style::bold(12.0);
/// Words of an instruction.
pub(super) const WORD: Style = Style::regular(11.0);
/// Words of an instruction that matter most.
pub(super) const WORD_STRONG: Style = Style::bold(11.0);
/// Numbers of an instruction.
pub(super) const NUMBER: Style = Style::bold(14.0);
/// The amount to measure out.
pub(super) const AMOUNT: Style = Style::bold(26.0);
/// Words inside the amount, such as "up to".
pub(super) const AMOUNT_WORD: Style = Style::bold(14.0);
/// Number of a step.
pub(super) const STEP: Style = Style::bold(19.0);
/// Name of a material.
pub(super) const MATERIAL: Style = Style::bold(12.5);
/// STOP, REFUSED.
pub(super) const ALARM: Style = Style::bold(25.0);
/// Text of the file copy.
pub(super) const FILE: Style = Style::regular(9.0);
/// Header rows of the file copy.
pub(super) const FILE_STRONG: Style = Style::bold(9.0);
/// Footer.
pub(super) const FOOTER: Style = Style::regular(8.5);

/// Thin line.
pub(super) const THIN: f32 = 0.7;
/// Hairline between the rows of the file copy.
pub(super) const HAIR: f32 = 0.4;
/// Outline of the amounts.
pub(super) const HEAVY: f32 = 2.2;
/// Outline of the STOP box.
pub(super) const ALARM_FRAME: f32 = 3.2;

/// How much white space there is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(super) struct Density {
    /// Before a section.
    pub section_gap: f32,
    /// Between a heading and what follows.
    pub heading_gap: f32,
    /// Above and below the text of a cell.
    pub cell_pad: f32,
    /// Above and below the text of an addition.
    pub step_pad: f32,
    /// Height of an empty box to write in.
    pub write_in: f32,
    /// Line height as a multiple of the font size.
    pub leading: f32,
    /// Font size of labels, notes and cautions. Numbers to act on have fixed sizes.
    pub small: f32,
}

impl Density {
    /// Labels and notes.
    pub(super) fn small(self) -> Style {
        Style::regular(self.small)
    }

    /// Labels and notes not to overlook.
    pub(super) fn small_strong(self) -> Style {
        Style::bold(self.small)
    }

    /// Cautions.
    pub(super) fn caution(self) -> Style {
        Style::regular(self.small + 0.5)
    }
}

/// As airy as it gets.
const AIRY: Density = Density {
    section_gap: 11.0,
    heading_gap: 4.0,
    cell_pad: 4.0,
    step_pad: 9.0,
    write_in: 32.0,
    leading: 1.24,
    small: 9.8,
};
/// As dense as it gets and still reads well.
const DENSE: Density = Density {
    section_gap: 3.8,
    heading_gap: 1.0,
    cell_pad: 1.4,
    step_pad: 1.7,
    write_in: 21.0,
    leading: 1.15,
    small: 9.0,
};
/// Used when one page is not enough anyway.
pub(super) const NORMAL: Density = Density {
    section_gap: 9.0,
    heading_gap: 3.0,
    cell_pad: 3.0,
    step_pad: 6.0,
    write_in: 28.0,
    leading: 1.22,
    small: 9.5,
};

/// The densest step; step 0 is the airiest.
pub(super) const DENSEST: u8 = 16;

/// The density at a step from airy to dense.
pub(super) fn density(step: u8) -> Density {
    let share = f32::from(step.min(DENSEST)) / f32::from(DENSEST);
    let between = |airy: f32, dense: f32| airy + (dense - airy) * share;
    Density {
        section_gap: between(AIRY.section_gap, DENSE.section_gap),
        heading_gap: between(AIRY.heading_gap, DENSE.heading_gap),
        cell_pad: between(AIRY.cell_pad, DENSE.cell_pad),
        step_pad: between(AIRY.step_pad, DENSE.step_pad),
        write_in: between(AIRY.write_in, DENSE.write_in),
        leading: between(AIRY.leading, DENSE.leading),
        small: between(AIRY.small, DENSE.small),
    }
}

/// Height of capitals as a share of the font size, in the embedded fonts.
const CAP_HEIGHT: f32 = 0.714;

/// Height of a line set at `size`; large type needs less room between lines.
pub(super) fn line_height(size: f32, density: Density) -> f32 {
    size * if size > 20.0 { density.leading - 0.07 } else { density.leading }
}

/// Base line of a line whose top is at `top`: capitals stand in the middle of it.
pub(super) fn baseline(top: f32, height: f32, size: f32) -> f32 {
    top + (height + CAP_HEIGHT * size) / 2.0
}
