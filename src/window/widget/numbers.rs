//! Numbers as the window prints and reads them: a decimal point, a thin space between thousands, a real minus sign.
//! Reading is wider than printing, because people type what their keyboard and their habit give.

use std::fmt::Write as _;

const THIN_SPACE: char = '\u{2009}';

/// Prints with at most `decimals` places; zeros at the end are dropped.
pub fn fixed(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    let text = if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { &text };
    dress(text)
}

/// Prints with exactly `decimals` places.
pub(super) fn padded(value: f64, decimals: usize) -> String {
    dress(&format!("{value:.decimals$}"))
}

/// Prints with `count` significant figures, as a power of ten where a plain number would be mostly zeros.
pub fn figures(value: f64, count: usize) -> String {
    let size = value.abs();
    if value == 0.0 {
        return "0".to_owned();
    }
    if !value.is_finite() || !(1e-4..1e7).contains(&size) {
        let places = count.saturating_sub(1);
        return dress(&format!("{value:.places$e}"));
    }
    let magnitude = size.log10().floor();
    let decimals = (count as f64 - 1.0 - magnitude).clamp(0.0, 12.0);
    fixed(value, decimals as usize)
}

/// Puts thin spaces between thousands and a real minus sign in front; leaves everything else as it is.
fn dress(text: &str) -> String {
    if text.contains("inf") || text.contains("NaN") {
        return "–".to_owned();
    }
    let (negative, digits) = match text.strip_prefix('-') {
        Some(rest) => (rest.contains(|c: char| ('1'..='9').contains(&c)), rest),
        None => (false, text),
    };
    let (mantissa, exponent) = digits.split_once('e').unwrap_or((digits, ""));
    let (whole, fraction) = mantissa.split_at(mantissa.find('.').unwrap_or(mantissa.len()));
    let mut out = String::with_capacity(text.len() + 8);
    if negative {
        out.push('−');
    }
    for (i, digit) in whole.chars().enumerate() {
        if i > 0 && (whole.len() - i).is_multiple_of(3) {
            out.push(THIN_SPACE);
        }
        out.push(digit);
    }
    out.push_str(fraction);
    if !exponent.is_empty() {
        let _ = write!(out, "e{}", exponent.replace('-', "−"));
    }
    out
}

/// Why typed text was not taken as a number.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum NotANumber {
    /// Nothing was typed.
    #[error("type a number")]
    Empty,
    /// It is no number at all.
    #[error("“{0}” is not a number")]
    Unreadable(String),
    /// One comma before three digits: a decimal comma to one reader, a thousand to another.
    #[error("“{0}” can be read two ways: leave the comma out, or use a point")]
    Ambiguous(String),
    /// Infinite or not a number.
    #[error("“{0}” is too large")]
    TooLarge(String),
}

/// Reads a number with a decimal point or comma, spaces between thousands, and an exponent.
pub fn parse_number(text: &str) -> Result<f64, NotANumber> {
    let typed = text.trim();
    if typed.is_empty() {
        return Err(NotANumber::Empty);
    }
    let plain: String = typed
        .chars()
        .filter(|c| !c.is_whitespace())
        .map(|c| if matches!(c, '−' | '–') { '-' } else { c })
        .collect();
    let unreadable = || NotANumber::Unreadable(shortened(typed));
    // Rust would also take "inf" and "nan".
    if plain.chars().any(|c| c.is_alphabetic() && !matches!(c, 'e' | 'E')) {
        return Err(unreadable());
    }
    let value: f64 = with_decimal_point(&plain, typed)?.parse().map_err(|_| unreadable())?;
    if value.is_finite() { Ok(value) } else { Err(NotANumber::TooLarge(shortened(typed))) }
}

/// The text with its decimal comma turned into a point and its grouping marks taken out.
fn with_decimal_point(plain: &str, typed: &str) -> Result<String, NotANumber> {
    let commas = plain.matches(',').count();
    if commas == 0 {
        return Ok(plain.to_owned());
    }
    let ambiguous = || NotANumber::Ambiguous(shortened(typed));
    let (before, after) = plain.rsplit_once(',').unwrap_or((plain, ""));
    match plain.find('.') {
        // 1,840.5 and 1.840,5: the mark that comes last is the decimal one.
        Some(point) if point > before.len() && commas == 1 => Ok(plain.replace(',', "")),
        Some(_) if commas == 1 => Ok(format!("{}.{after}", before.replace('.', ""))),
        Some(_) => Err(ambiguous()),
        None if commas > 1 => Err(ambiguous()),
        None => {
            let whole = before.trim_start_matches(['-', '+']);
            let looks_like_thousands = after.len() == 3
                && (1..=3).contains(&whole.len())
                && !whole.starts_with('0')
                && after.chars().all(|c| c.is_ascii_digit());
            if looks_like_thousands { Err(ambiguous()) } else { Ok(format!("{before}.{after}")) }
        }
    }
}

fn shortened(text: &str) -> String {
    match text.char_indices().nth(16) {
        Some((end, _)) => format!("{}…", &text[..end]),
        None => text.to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_decimal_marks_and_exponents_are_read() {
        for (text, value) in [
            ("9.45", 9.45),
            ("9,45", 9.45),
            (" 1.2e-9 ", 1.2e-9),
            ("1,2E-9", 1.2e-9),
            ("−3", -3.0),
            ("1 840", 1840.0),
            ("1\u{2009}840.5", 1840.5),
            ("1,840.5", 1840.5),
            ("1.840,5", 1840.5),
            ("0,125", 0.125),
            (".5", 0.5),
            ("16.", 16.0),
        ] {
            assert_eq!(parse_number(text), Ok(value), "{text}");
        }
    }

    #[test]
    fn text_that_is_no_number_is_refused_with_its_reason() {
        assert_eq!(parse_number("  "), Err(NotANumber::Empty));
        assert_eq!(parse_number("abc"), Err(NotANumber::Unreadable("abc".into())));
        assert_eq!(parse_number("1e999"), Err(NotANumber::TooLarge("1e999".into())));
        for text in ["inf", "NaN", "--2", "1.2.3", "4 g", "e", "1e", ","] {
            assert!(matches!(parse_number(text), Err(NotANumber::Unreadable(_))), "{text}");
        }
    }

    #[test]
    fn a_comma_that_can_mean_two_things_is_asked_about() {
        for text in ["1,840", "12,500", "1,200,000", "-1,840"] {
            assert!(matches!(parse_number(text), Err(NotANumber::Ambiguous(_))), "{text}");
        }
    }

    #[test]
    fn printing_groups_thousands_and_drops_idle_zeros() {
        assert_eq!(fixed(1840.0, 1), "1\u{2009}840");
        assert_eq!(fixed(-2.50, 2), "−2.5");
        assert_eq!(fixed(-0.0001, 2), "0");
        assert_eq!(padded(16.0, 1), "16.0");
        assert_eq!(figures(0.012_345, 3), "0.0123");
        assert_eq!(figures(1.24e-9, 2), "1.2e−9");
        assert_eq!(figures(1_234_567.0, 3), "1\u{2009}234\u{2009}567");
        assert_eq!(fixed(f64::NAN, 1), "–");
    }

    #[test]
    fn what_is_printed_can_be_read_back() {
        for value in [0.05, 1840.0, -12.5, 1.2e-9, 9.45] {
            assert_eq!(parse_number(&figures(value, 6)), Ok(value));
        }
    }
}
