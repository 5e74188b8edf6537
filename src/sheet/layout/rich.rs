//! Text with styles, and the one typographic device of the sheet: in operator text, a number and its unit are set
//! bold and at 14 points or more, the words around it smaller.

use super::item::Weight;
use crate::sheet::fonts;

/// Size and weight of a piece of text.
#[derive(Clone, Copy, Debug, PartialEq)]
pub(in crate::sheet) struct Style {
    /// Font size in points.
    pub size: f32,
    /// Weight.
    pub weight: Weight,
}

impl Style {
    pub(in crate::sheet) const fn regular(size: f32) -> Self {
        Self { size, weight: Weight::Regular }
    }

    pub(super) const fn bold(size: f32) -> Self {
        Self { size, weight: Weight::Bold }
    }
}

/// A text in one style.
#[derive(Clone, Debug, PartialEq)]
pub(in crate::sheet) struct Span {
    pub text: String,
    pub style: Style,
}

impl Span {
    /// A span of cleaned text.
    pub(super) fn new(text: &str, style: Style) -> Self {
        Self { text: fonts::printable(text), style }
    }
}

/// Units that belong to the number before them: never parted at a line end, emphasised together.
const UNITS: &[&str] = &[
    "L", "mL", "µL", "l", "ml", "kg", "g", "mg", "t", "lb", "oz", "gal", "qt", "m³", "°C", "°F", "K", "%",
    "‰", "ppm", "ppb", "min", "minutes", "minute", "h", "hours", "hour", "s", "seconds", "cm", "mm", "m",
    "in", "ft", "V", "mV", "A", "A/dm²", "mol", "mmol", "mol/L", "mmol/L", "M", "mM", "g/L", "mg/L", "mL/L",
    "oz/gal", "g/mL", "bar", "rpm",
];

/// The word without the punctuation around it.
fn core(word: &str) -> &str {
    word.trim_matches(|c: char| matches!(c, ',' | '.' | ';' | ':' | '(' | ')' | '!' | '?'))
}

/// Whether a word is a unit, with or without punctuation after it.
pub(super) fn is_unit(word: &str) -> bool {
    UNITS.contains(&core(word))
}

/// Whether a word is a number such as `10.2`, `−3`, `≤4`, `07:55`.
pub(super) fn is_number(word: &str) -> bool {
    let digits = core(word).trim_start_matches(['-', '+', '−', '±', '<', '>', '≤', '≥', '≈', '~']);
    digits.starts_with(|c: char| c.is_ascii_digit())
        && digits
            .chars()
            .all(|c| c.is_ascii_digit() || matches!(c, '.' | ',' | ':' | '/' | '\u{a0}' | '×' | '–' | '%'))
}

/// Whether the space between two words must not become a line end: `10.0 L`, `1 840`, `pH 9.4`, `9.0 to 9.4`.
pub(super) fn is_bound(before: &str, word: &str) -> bool {
    let ends_in_digit = before.ends_with(|c: char| c.is_ascii_digit());
    let group = core(word);
    let is_group = group.len() >= 3
        && group.chars().take(3).all(|c| c.is_ascii_digit())
        && !group.chars().nth(3).is_some_and(|c| c.is_ascii_digit());
    (is_number(before) && ends_in_digit && (is_unit(word) || is_group))
        || (core(before) == "pH" && is_number(word))
        || matches!(word, "·" | "=")
        || before == "="
        || (word == "to" && (before == "up" || ends_in_digit))
        || (before == "to" && is_number(word))
}

/// Splits operator text into words in `plain` and numbers with their units in `strong`.
pub(super) fn emphasise_numbers(text: &str, plain: Style, strong: Style) -> Vec<Span> {
    let text = fonts::printable(text);
    let mut spans: Vec<Span> = Vec::new();
    let mut push = |piece: &str, style: Style| match spans.last_mut() {
        _ if piece.is_empty() => {}
        Some(last) if last.style == style => last.text.push_str(piece),
        _ => spans.push(Span { text: piece.to_owned(), style }),
    };
    let mut number_before = false;
    for (index, word) in text.split(' ').enumerate() {
        let strong_word = is_number(word) || (number_before && is_unit(word));
        if index > 0 {
            push(" ", if strong_word && number_before { strong } else { plain });
        }
        if strong_word {
            let inner = core(word);
            let start = word.find(inner).unwrap_or(0);
            push(&word[..start], plain);
            push(inner, strong);
            push(&word[start + inner.len()..], plain);
        } else {
            push(word, plain);
        }
        // A unit ends a quantity; punctuation after a number does too.
        number_before = is_number(word) && word.ends_with(|c: char| c.is_ascii_digit());
    }
    spans
}

#[cfg(test)]
mod tests {
    use super::*;

    const PLAIN: Style = Style::regular(11.0);
    const STRONG: Style = Style::bold(14.0);

    fn marked(text: &str) -> String {
        emphasise_numbers(text, PLAIN, STRONG)
            .iter()
            .map(|s| if s.style == STRONG { format!("[{}]", s.text) } else { s.text.clone() })
            .collect()
    }

    #[test]
    fn a_number_and_its_unit_are_emphasised_together() {
        assert_eq!(marked("10 L jug, full to the mark"), "[10 L] jug, full to the mark");
        assert_eq!(marked("above 47 °C, or 5 °C up in 2 min."), "above [47 °C], or [5 °C] up in [2 min].");
        assert_eq!(marked("pH under 9.0 or over 9.8"), "pH under [9.0] or over [9.8]");
    }

    #[test]
    fn words_and_codes_stay_plain() {
        assert_eq!(marked("HEDP 2809-21-4 jug B2"), "HEDP 2809-21-4 jug B2");
    }

    #[test]
    fn emphasis_changes_no_character_of_the_text() {
        let text = "up to 11.5 L, (2 × 5 L) · ≤ 40 °C";
        let joined: String = emphasise_numbers(text, PLAIN, STRONG).into_iter().map(|s| s.text).collect();
        assert_eq!(joined, text);
    }

    #[test]
    fn a_line_never_ends_between_number_and_unit() {
        assert!(is_bound("10.0", "L"));
        assert!(is_bound("1", "840"));
        assert!(is_bound("pH", "9.45"));
        assert!(is_bound("9.0", "to") && is_bound("to", "9.4"));
        assert!(!is_bound("add", "to") && !is_bound("to", "the"));
        assert!(!is_bound("jug,", "full"));
    }
}
