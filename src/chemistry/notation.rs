//! Tokens as people read them: "Cu(P2O7)2-6" becomes "Cu(P₂O₇)₂⁶⁻".

/// A token or formula with subscripts and a superscript charge.
pub fn pretty(token: &str) -> String {
    let (body, phase) = match token.rfind('(') {
        Some(at) if ["(am)", "(cr)", "(s)", "(aq)", "(g)"].contains(&&token[at..]) => {
            (&token[..at], &token[at..])
        }
        _ => (token, ""),
    };
    let digits = body.len() - body.trim_end_matches(|c: char| c.is_ascii_digit()).len();
    let head = &body[..body.len() - digits];
    let (stem, charge) = match head.chars().next_back() {
        Some(sign @ ('+' | '-')) => (&head[..head.len() - 1], Some((sign, &body[body.len() - digits..]))),
        _ => (body, None),
    };
    let mut text = String::with_capacity(token.len() + 8);
    let mut previous = ' ';
    for c in stem.chars() {
        if c == '-' && previous == 'H' {
            text.push('₋');
        } else if c.is_ascii_digit() && (previous.is_alphanumeric() || previous == ')' || previous == '-') {
            text.push(subscript(c));
        } else {
            text.push(if c == '.' { '·' } else { c });
        }
        previous = c;
    }
    if let Some((sign, size)) = charge {
        text.extend(size.chars().map(superscript));
        text.push(superscript(sign));
    }
    if !phase.is_empty() {
        text.push_str(phase);
    }
    text
}

/// A whole reaction in pretty notation, with ⇌ for the equals sign.
pub fn pretty_reaction(reaction: &str) -> String {
    reaction
        .split(' ')
        .map(|part| match part {
            "=" => "⇌".to_owned(),
            "+" => "+".to_owned(),
            number if number.parse::<f64>().is_ok() => number.to_owned(),
            token => pretty(token),
        })
        .collect::<Vec<_>>()
        .join(" ")
}

fn subscript(c: char) -> char {
    char::from_u32('₀' as u32 + c as u32 - '0' as u32).unwrap_or(c)
}

fn superscript(c: char) -> char {
    match c {
        '+' => '⁺',
        '-' => '⁻',
        '1' => '¹',
        '2' => '²',
        '3' => '³',
        '0' | '4'..='9' => char::from_u32('⁰' as u32 + c as u32 - '0' as u32).unwrap_or(c),
        other => other,
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn charges_go_up_and_counts_go_down() {
        for (token, text) in [
            ("Ni+2", "Ni²⁺"),
            ("EDTA-4", "EDTA⁴⁻"),
            ("Cu(P2O7)2-6", "Cu(P₂O₇)₂⁶⁻"),
            ("H+", "H⁺"),
            ("NH3", "NH₃"),
            ("CuH-1(Cit)-2", "CuH₋₁(Cit)²⁻"),
            ("Ni(OH)2(am)", "Ni(OH)₂(am)"),
            ("CO2(aq)", "CO₂(aq)"),
            ("NiSO4.6H2O", "NiSO₄·6H₂O"),
        ] {
            assert_eq!(pretty(token), text);
        }
        assert_eq!(pretty_reaction("Ni+2 + 2 NH3 = Ni(NH3)2+2"), "Ni²⁺ + 2 NH₃ ⇌ Ni(NH₃)₂²⁺");
    }
}
