//! Numbers as people read them: significant figures, p values, grouped thousands.

/// A number with `figures` significant figures; powers of ten outside 1e−3…1e5 as "1.2 × 10⁻⁸".
pub fn significant(value: f64, figures: usize) -> String {
    if value == 0.0 {
        return "0".to_owned();
    }
    if !value.is_finite() {
        return "–".to_owned();
    }
    let exponent = exponent_after_rounding(value, figures);
    if (-3..5).contains(&exponent) {
        fixed(value, (figures as i32 - 1 - exponent).max(0) as usize)
    } else {
        scientific(value, figures)
    }
}

/// Decimal exponent of the value once it is rounded to `figures` significant figures.
fn exponent_after_rounding(value: f64, figures: usize) -> i32 {
    let text = format!("{:.*e}", figures.saturating_sub(1), value.abs());
    text.split_once('e').and_then(|(_, exponent)| exponent.parse().ok()).unwrap_or(0)
}

/// A number with a fixed count of decimals; never "−0.0".
pub fn fixed(value: f64, decimals: usize) -> String {
    let text = format!("{value:.decimals$}");
    if text.starts_with('-') && text[1..].chars().all(|c| c == '0' || c == '.') {
        text[1..].to_owned()
    } else {
        text
    }
}

/// "1.2 × 10⁻⁸".
pub fn scientific(value: f64, figures: usize) -> String {
    let text = format!("{:.*e}", figures.saturating_sub(1), value);
    match text.split_once('e') {
        Some((mantissa, exponent)) => format!("{mantissa} × 10{}", superscript(exponent)),
        None => text,
    }
}

fn superscript(text: &str) -> String {
    text.chars()
        .map(|c| match c {
            '-' => '⁻',
            '1' => '¹',
            '2' => '²',
            '3' => '³',
            '0' | '4'..='9' => char::from_u32('⁰' as u32 + (c as u32 - '0' as u32)).unwrap_or(c),
            other => other,
        })
        .collect()
}

/// p value of a concentration in mol/L to 0.1, "–" when there is none.
pub fn p_value(mol_per_litre: f64) -> String {
    if mol_per_litre > 0.0 && mol_per_litre.is_finite() {
        fixed(-mol_per_litre.log10(), 1)
    } else {
        "–".to_owned()
    }
}

/// A share as whole per cent, with one decimal under 10 %, "under 0.1 %" below.
pub fn percent(share: f64) -> String {
    let value = share * 100.0;
    if value > 0.0 && value < 0.1 {
        "under 0.1 %".to_owned()
    } else if value.abs() < 9.95 {
        format!("{} %", fixed(value, 1))
    } else {
        format!("{} %", grouped(value, 0))
    }
}

/// Thousands separated by a space: "1 840".
pub fn grouped(value: f64, decimals: usize) -> String {
    let text = fixed(value, decimals);
    let (sign, digits) = text.strip_prefix('-').map_or(("", text.as_str()), |rest| ("-", rest));
    let (whole, fraction) = digits.split_once('.').map_or((digits, None), |(w, f)| (w, Some(f)));
    let mut grouped = String::new();
    for (i, c) in whole.chars().enumerate() {
        if i > 0 && (whole.len() - i) % 3 == 0 && whole.len() > 3 {
            grouped.push(' ');
        }
        grouped.push(c);
    }
    match fraction {
        Some(fraction) => format!("{sign}{grouped}.{fraction}"),
        None => format!("{sign}{grouped}"),
    }
}

/// At most `decimals` decimals, trailing zeros cut: for values that people typed.
pub fn plain(value: f64, decimals: usize) -> String {
    let text = fixed(value, decimals);
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.').to_owned() } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn significant_figures_survive_rounding_over_a_power_of_ten() {
        assert_eq!(significant(0.0999, 2), "0.10");
        assert_eq!(significant(12.34, 3), "12.3");
        assert_eq!(significant(1.234e-8, 2), "1.2 × 10⁻⁸");
        assert_eq!(significant(1840.0, 2), "1840");
        assert_eq!(significant(0.0, 3), "0");
    }

    #[test]
    fn p_values_have_one_decimal_and_nothing_is_minus_zero() {
        assert_eq!(p_value(1.6e-11), "10.8");
        assert_eq!(p_value(0.0), "–");
        assert_eq!(fixed(-0.0001, 2), "0.00");
    }

    #[test]
    fn thousands_are_grouped_and_typed_values_keep_their_look() {
        assert_eq!(grouped(1840.0, 0), "1 840");
        assert_eq!(grouped(-12345.678, 1), "-12 345.7");
        assert_eq!(plain(9.45, 3), "9.45");
        assert_eq!(plain(42.0, 2), "42");
    }

    #[test]
    fn shares_print_as_whole_per_cent_unless_small() {
        assert_eq!(percent(0.974), "97 %");
        assert_eq!(percent(0.0312), "3.1 %");
        assert_eq!(percent(0.0001), "under 0.1 %");
        assert_eq!(percent(1.26), "126 %");
    }
}
