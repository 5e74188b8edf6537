//! Reactions as chemists write them, "Cu(OH)EDTA-3 + H+ = CuEDTA-2 + H2O".

use super::{ChemistryError, WATER};

/// A balanced reaction: signed stoichiometric coefficients, products positive.
#[derive(Clone, Debug, PartialEq)]
pub struct Reaction {
    /// (token, coefficient): negative for the left side, positive for the right. Water is included.
    pub terms: Vec<(String, f64)>,
}

/// Charge that a token carries in its name: "Ni+2" is 2, "HEDTA-3" is −3, "Cl-" is −1, "NH3" is 0.
pub fn charge_of(token: &str) -> f64 {
    let digits = token.len() - token.trim_end_matches(|c: char| c.is_ascii_digit()).len();
    let head = &token[..token.len() - digits];
    let sign = if head.ends_with('+') {
        1.0
    } else if head.ends_with('-') {
        -1.0
    } else {
        return 0.0;
    };
    let size = &token[token.len() - digits..];
    if size.is_empty() { sign } else { sign * size.parse().unwrap_or(0.0) }
}

impl Reaction {
    /// Reads a reaction and checks that its charges balance.
    ///
    /// # Errors
    /// [`ChemistryError::Reaction`] when it can't be read, [`ChemistryError::ChargeBalance`] when charges differ.
    pub fn parse(text: &str) -> Result<Self, ChemistryError> {
        let fail =
            |reason: &str| ChemistryError::Reaction { reaction: text.to_owned(), reason: reason.to_owned() };
        let mut sides = text.split(" = ");
        let (Some(left), Some(right), None) = (sides.next(), sides.next(), sides.next()) else {
            return Err(fail("it needs exactly one \" = \" with spaces around it"));
        };
        let mut terms: Vec<(String, f64)> = Vec::new();
        let mut charge = [0.0; 2];
        for (side, (sign, half)) in [(-1.0, left), (1.0, right)].into_iter().enumerate() {
            for term in half.split(" + ") {
                let (coefficient, token) = read_term(term.trim())
                    .ok_or_else(|| fail("a term is empty or has a coefficient that is not positive"))?;
                charge[side] += coefficient * charge_of(token);
                match terms.iter_mut().find(|(known, _)| known == token) {
                    Some((_, total)) => *total += sign * coefficient,
                    None => terms.push((token.to_owned(), sign * coefficient)),
                }
            }
        }
        terms.retain(|(_, coefficient)| *coefficient != 0.0);
        if terms.is_empty() {
            return Err(fail("both sides are the same"));
        }
        if (charge[0] - charge[1]).abs() > 1e-6 {
            return Err(ChemistryError::ChargeBalance {
                reaction: text.to_owned(),
                left: charge[0],
                right: charge[1],
            });
        }
        Ok(Self { terms })
    }

    /// Coefficient of a token, 0 when it takes no part.
    pub fn coefficient(&self, token: &str) -> f64 {
        self.terms.iter().find(|(known, _)| known == token).map_or(0.0, |(_, c)| *c)
    }

    /// Terms other than water, which is the solvent.
    pub fn solutes(&self) -> impl Iterator<Item = (&str, f64)> {
        self.terms.iter().filter(|(token, _)| token != WATER).map(|(token, c)| (token.as_str(), *c))
    }

    /// Whether two reactions are the same equilibrium written in the same direction.
    pub fn same_as(&self, other: &Self) -> bool {
        self.terms.len() == other.terms.len()
            && self.terms.iter().all(|(token, c)| (other.coefficient(token) - c).abs() < 1e-9)
    }
}

fn read_term(term: &str) -> Option<(f64, &str)> {
    let (coefficient, token) = match term.split_once(' ') {
        Some((number, token)) => (number.parse::<f64>().ok()?, token.trim()),
        None => (1.0, term),
    };
    let usable = coefficient.is_finite() && coefficient > 0.0 && !token.is_empty() && !token.contains(' ');
    usable.then_some((coefficient, token))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn charges_are_read_from_the_end_of_the_token() {
        for (token, charge) in [
            ("Ni+2", 2.0),
            ("HEDTA-3", -3.0),
            ("Cl-", -1.0),
            ("H+", 1.0),
            ("NH3", 0.0),
            ("CuH-1(Cit)-2", -2.0),
            ("Cu2H-2(Cit)2-4", -4.0),
            ("Ni(OH)2", 0.0),
            ("CO2(aq)", 0.0),
        ] {
            assert_eq!(charge_of(token), charge, "{token}");
        }
    }

    #[test]
    fn a_reaction_is_read_with_its_coefficients() {
        let reaction = Reaction::parse("2 Cu+2 + 2 Cit-3 = Cu2H-2(Cit)2-4 + 2 H+").unwrap();
        assert_eq!(reaction.coefficient("Cu+2"), -2.0);
        assert_eq!(reaction.coefficient("H+"), 2.0);
        assert_eq!(reaction.coefficient("absent"), 0.0);
    }

    #[test]
    fn unbalanced_charges_are_refused_with_both_sums() {
        let error = Reaction::parse("Ni+2 + EDTA-4 = NiEDTA-3").unwrap_err();
        assert_eq!(
            error,
            ChemistryError::ChargeBalance {
                reaction: "Ni+2 + EDTA-4 = NiEDTA-3".into(),
                left: -2.0,
                right: -3.0
            }
        );
        assert!(Reaction::parse("Ni+2 -> Ni").is_err());
        assert!(Reaction::parse("0 Ni+2 = Ni+2").is_err());
    }
}
