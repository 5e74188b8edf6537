//! The two embedded fonts: their bytes, the width of a text, and the characters they can show.
//!
//! Why measure with the shaper: the PDF writer shapes with the same library, so a line that fits here fits on paper,
//! kerning included.

use std::cell::RefCell;
use std::collections::HashMap;
use std::sync::LazyLock;

use rustybuzz::ttf_parser::GlyphId;
use rustybuzz::{Direction, Face, UnicodeBuffer};

use super::layout::Weight;

/// The regular sans font (TrueType).
pub const REGULAR_TTF: &[u8] = include_bytes!("../../assets/fonts/sans-regular.ttf");
/// The bold sans font (TrueType).
pub const BOLD_TTF: &[u8] = include_bytes!("../../assets/fonts/sans-bold.ttf");

static REGULAR: LazyLock<Option<Face<'static>>> = LazyLock::new(|| Face::from_slice(REGULAR_TTF, 0));
static BOLD: LazyLock<Option<Face<'static>>> = LazyLock::new(|| Face::from_slice(BOLD_TTF, 0));

/// Texts whose widths are remembered, for each weight; a long sheet has about 2000 different words and lines.
const MOST_REMEMBERED: usize = 8192;

thread_local! {
    /// Widths already measured, regular and bold. Trying several densities asks for the same words again and again,
    /// and shaping is nine tenths of the time of a layout.
    static MEASURED: RefCell<(HashMap<String, i32>, HashMap<String, i32>)> = RefCell::default();
}

/// Width of a character in em when a font cannot be read; wide enough that lines only get shorter.
const FALLBACK_EM: f32 = 0.95;

fn face(weight: Weight) -> Option<&'static Face<'static>> {
    match weight {
        Weight::Regular => REGULAR.as_ref(),
        Weight::Bold => BOLD.as_ref(),
    }
}

/// Width of `text` in points, set in one line at `size_pt`.
pub(super) fn width_pt(text: &str, size_pt: f32, weight: Weight) -> f32 {
    let Some(face) = face(weight) else {
        return text.chars().count() as f32 * FALLBACK_EM * size_pt;
    };
    let units = MEASURED.with_borrow_mut(|measured| {
        let widths = match weight {
            Weight::Regular => &mut measured.0,
            Weight::Bold => &mut measured.1,
        };
        if let Some(units) = widths.get(text) {
            return *units;
        }
        if widths.len() >= MOST_REMEMBERED {
            widths.clear();
        }
        let units = shaped_width(face, text);
        widths.insert(text.to_owned(), units);
        units
    });
    units as f32 * size_pt / face.units_per_em() as f32
}

/// Width in the font's own units.
fn shaped_width(face: &Face<'_>, text: &str) -> i32 {
    let mut buffer = UnicodeBuffer::new();
    buffer.push_str(text);
    buffer.guess_segment_properties();
    buffer.set_direction(Direction::LeftToRight);
    let shaped = rustybuzz::shape(face, &[], buffer);
    shaped.glyph_positions().iter().map(|p| p.x_advance).sum()
}

/// Whether both fonts can show `character`.
fn has_glyph(character: char) -> bool {
    let in_face =
        |weight| face(weight).is_none_or(|f| f.glyph_index(character).is_some_and(|g| g != GlyphId(0)));
    in_face(Weight::Regular) && in_face(Weight::Bold)
}

/// Makes any text safe to print: one line, no invisible controls, only characters the fonts can show.
///
/// Line breaks, tabs and other controls become a space, runs of spaces one space, narrow spaces a no-break space.
/// Characters that would turn or hide text (bidirectional marks, zero-width ones) are taken out, because a hidden
/// character on a dosing sheet can change what a number seems to say. What the fonts cannot show becomes `?`.
pub fn printable(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for character in text.chars() {
        match character {
            c if is_invisible(c) => {}
            '\u{2007}' | '\u{2009}' | '\u{200a}' | '\u{202f}' => out.push('\u{a0}'),
            '\u{a0}' => out.push('\u{a0}'),
            c if c.is_control() || c.is_whitespace() => {
                if !out.is_empty() && !out.ends_with(' ') {
                    out.push(' ');
                }
            }
            c if has_glyph(c) => out.push(c),
            _ => out.push('?'),
        }
    }
    out.truncate(out.trim_end_matches(' ').len());
    out
}

fn is_invisible(c: char) -> bool {
    matches!(c,
        '\u{ad}' | '\u{61c}' | '\u{180e}' | '\u{200b}'..='\u{200f}' | '\u{202a}'..='\u{202e}'
        | '\u{2060}'..='\u{206f}' | '\u{feff}' | '\u{fe00}'..='\u{fe0f}' | '\u{e0000}'..='\u{e007f}')
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_fonts_can_be_read() {
        assert!(face(Weight::Regular).is_some());
        assert!(face(Weight::Bold).is_some());
    }

    #[test]
    fn characters_without_a_glyph_become_question_marks() {
        assert_eq!(printable("浴 7"), "? 7");
        assert_eq!(printable("Cu²⁺ → Cu(OH)₂ ≤ 1 °C −3 ☐ Σ Ж"), "Cu²⁺ → Cu(OH)₂ ≤ 1 °C −3 ☐ Σ Ж");
    }

    #[test]
    fn newlines_tabs_and_controls_become_single_spaces() {
        assert_eq!(printable("  a\r\n\tb\u{0}\u{7}c \n"), "a b c");
    }

    #[test]
    fn hidden_and_turning_characters_are_taken_out() {
        assert_eq!(printable("1\u{202e}2\u{200b}3\u{feff}"), "123");
    }

    #[test]
    fn digits_have_one_width_so_columns_of_numbers_line_up() {
        for weight in [Weight::Regular, Weight::Bold] {
            let one = width_pt("1", 10.0, weight);
            assert!((width_pt("8", 10.0, weight) - one).abs() < 1e-4);
        }
    }
}
