//! Text for spreadsheets: a cell typed by a user is data and must never become a formula.

/// The cell on one line, and unable to become a formula.
pub fn spreadsheet_text(cell: &str) -> String {
    let line = cell.replace(|c: char| c.is_control(), " ");
    if starts_like_a_formula(cell) && !is_plain_number(cell) { format!("'{line}") } else { line }
}

/// Whether a spreadsheet may take the cell for a formula. Full-width signs count: some versions accept them.
fn starts_like_a_formula(cell: &str) -> bool {
    let sign = |c: char| matches!(c, '=' | '+' | '-' | '@' | '＝' | '＋' | '－' | '＠');
    cell.starts_with(['\t', '\r', '\n']) || cell.trim_start().starts_with(sign)
}

/// `-3.2`, `+1,5`, `-4e-11`: a sign, digits, one decimal mark, perhaps an exponent.
fn is_plain_number(cell: &str) -> bool {
    let unsigned = |text: &str| text.strip_prefix(['+', '-']).unwrap_or(text).to_owned();
    let (number, exponent) = match cell.split_once(['e', 'E']) {
        Some((number, exponent)) => (unsigned(number), Some(unsigned(exponent))),
        None => (unsigned(cell), None),
    };
    let digits = |text: &str| !text.is_empty() && text.chars().all(|c| c.is_ascii_digit());
    let number_ok = match number.split_once(['.', ',']) {
        Some((whole, fraction)) => digits(whole) && digits(fraction),
        None => digits(&number),
    };
    number_ok && exponent.is_none_or(|e| digits(&e))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn formulas_are_neutralised_and_numbers_are_left_alone() {
        for evil in ["=1+1", "+cmd", "-2+3", "@sum", "\t=1", " =1", "＝1"] {
            assert!(spreadsheet_text(evil).starts_with('\''), "{evil}");
        }
        for plain in ["-3.2", "+1,5", "-4e-11", "copper", "3 L", ""] {
            assert_eq!(spreadsheet_text(plain), plain);
        }
        assert!(!spreadsheet_text("a\nb").contains('\n'));
    }
}
