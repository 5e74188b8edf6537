//! Amounts as people type them ("10,2 g/L") and levels of free metal ("pM 10.8"), kept as typed.

use super::unit::Unit;
use serde::{Deserialize, Serialize};
use thiserror::Error;

/// A concentration as the user stated it: nothing is converted until a molar mass is at hand.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(try_from = "String", into = "String")]
pub struct Amount {
    /// The number in [`Amount::unit`].
    pub value: f64,
    /// The unit it was typed in.
    pub unit: Unit,
}

/// Why a text is not an amount.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum AmountError {
    /// No number at the front.
    #[error("\"{0}\" does not start with a number; write it like \"10.2 g/L\"")]
    NoNumber(String),
    /// The unit is not one we know.
    #[error(
        "\"{0}\" is not a unit Bathwright knows; use g/L, mg/L, mol/L, mmol/L, mL/L, oz/gal, % w/v, % v/v, mg/L CaCO3, °dH, °fH or gpg"
    )]
    UnknownUnit(String),
}

/// Reads a decimal number with point or comma; thousands separators are refused, because "1.250" has cost a bath.
pub(super) fn parse_number(text: &str) -> Option<f64> {
    let text = text.trim().replace('−', "-").replace(',', ".");
    if text.is_empty() || text.chars().any(|c| c.is_alphabetic() && c != 'e' && c != 'E') {
        return None;
    }
    text.parse::<f64>().ok()
}

/// Splits "10.2 g/L" into the number and the rest.
fn split_number(text: &str) -> Option<(f64, &str)> {
    let text = text.trim();
    let end = text
        .char_indices()
        .find(|&(i, c)| {
            let exponent = (c == 'e' || c == 'E')
                && text[i + 1..].starts_with(|d: char| d.is_ascii_digit() || d == '-' || d == '+');
            !(c.is_ascii_digit() || matches!(c, '.' | ',' | '-' | '+' | '−') || exponent)
        })
        .map_or(text.len(), |(i, _)| i);
    Some((parse_number(&text[..end])?, text[end..].trim()))
}

impl Amount {
    /// An amount from its number and unit.
    pub fn new(value: f64, unit: Unit) -> Self {
        Self { value, unit }
    }

    /// Reads "10.2 g/L"; decimal point or comma.
    pub fn parse(text: &str) -> Result<Self, AmountError> {
        let (value, rest) = split_number(text).ok_or_else(|| AmountError::NoNumber(text.to_owned()))?;
        let unit = Unit::parse(rest).ok_or_else(|| AmountError::UnknownUnit(rest.to_owned()))?;
        Ok(Self { value, unit })
    }
}

impl std::fmt::Display for Amount {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{} {}", self.value, self.unit.symbol())
    }
}

impl From<Amount> for String {
    fn from(amount: Amount) -> Self {
        amount.to_string()
    }
}

impl TryFrom<String> for Amount {
    type Error = AmountError;
    fn try_from(text: String) -> Result<Self, AmountError> {
        Amount::parse(&text)
    }
}

/// A level of free metal as a chemist states it.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(try_from = "String", into = "String")]
pub enum Level {
    /// −log10 of the free concentration in mol/L.
    P(f64),
    /// mol/L.
    MolePerLitre(f64),
    /// mg of the metal per litre.
    MilligramPerLitre(f64),
}

/// Why a text is not a level of free metal.
#[derive(Clone, Debug, PartialEq, Error)]
#[error("\"{0}\" is not a level of free metal; write it like \"pM 10.8\", \"2e-8 mol/L\" or \"0.05 mg/L\"")]
pub struct LevelError(String);

impl Level {
    /// Reads "pM 10.8", "pCu 10.8", "2e-8 mol/L", "0.05 mg/L".
    pub fn parse(text: &str) -> Result<Self, LevelError> {
        let fail = || LevelError(text.to_owned());
        let trimmed = text.trim();
        if let Some(rest) = trimmed.strip_prefix('p')
            && let Some((_, number)) = rest.split_once(' ')
        {
            return parse_number(number).map(Level::P).ok_or_else(fail);
        }
        let (value, unit) = split_number(trimmed).ok_or_else(fail)?;
        match Unit::parse(unit).ok_or_else(fail)? {
            Unit::MolePerLitre => Ok(Level::MolePerLitre(value)),
            Unit::MillimolePerLitre => Ok(Level::MolePerLitre(value * 1e-3)),
            Unit::MilligramPerLitre => Ok(Level::MilligramPerLitre(value)),
            Unit::GramPerLitre => Ok(Level::MilligramPerLitre(value * 1e3)),
            _ => Err(fail()),
        }
    }

    /// The level in mol/L for a metal of the given molar mass in g/mol.
    pub fn mol_per_litre(self, molar_mass_g: f64) -> f64 {
        match self {
            Level::P(p) => 10f64.powf(-p),
            Level::MolePerLitre(value) => value,
            Level::MilligramPerLitre(value) => value * 1e-3 / molar_mass_g,
        }
    }

    /// The number as typed, for checks.
    pub fn value(self) -> f64 {
        match self {
            Level::P(v) | Level::MolePerLitre(v) | Level::MilligramPerLitre(v) => v,
        }
    }
}

impl std::fmt::Display for Level {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self {
            Level::P(p) => write!(f, "pM {p}"),
            Level::MolePerLitre(value) => write!(f, "{value:e} mol/L"),
            Level::MilligramPerLitre(value) => write!(f, "{value} mg/L"),
        }
    }
}

impl From<Level> for String {
    fn from(level: Level) -> Self {
        level.to_string()
    }
}

impl TryFrom<String> for Level {
    type Error = LevelError;
    fn try_from(text: String) -> Result<Self, LevelError> {
        Level::parse(&text)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn an_amount_is_read_with_point_comma_or_exponent() {
        for (text, value, unit) in [
            ("10.2 g/L", 10.2, Unit::GramPerLitre),
            ("10,2g/L", 10.2, Unit::GramPerLitre),
            ("2.5e-3 mol/L", 2.5e-3, Unit::MolePerLitre),
            ("1E2 mg/L", 100.0, Unit::MilligramPerLitre),
            ("14 °dH", 14.0, Unit::GermanDegree),
            ("-3 g/L", -3.0, Unit::GramPerLitre),
            ("250 mg/L CaCO3", 250.0, Unit::MilligramCalciumCarbonatePerLitre),
        ] {
            let amount = Amount::parse(text).unwrap();
            assert_eq!((amount.value, amount.unit), (value, unit), "{text}");
            assert_eq!(Amount::parse(&amount.to_string()), Ok(amount));
        }
    }

    #[test]
    fn a_bad_amount_says_what_is_wrong() {
        assert!(matches!(Amount::parse("ten g/L"), Err(AmountError::NoNumber(_))));
        assert!(
            matches!(Amount::parse("10 furlong"), Err(AmountError::UnknownUnit(unit)) if unit == "furlong")
        );
        assert!(Amount::parse("1.2.3 g/L").is_err());
    }

    #[test]
    fn a_level_is_read_as_p_value_mole_or_mass() {
        assert_eq!(Level::parse("pM 10.8"), Ok(Level::P(10.8)));
        assert_eq!(Level::parse("pCu 10,8"), Ok(Level::P(10.8)));
        assert_eq!(Level::parse("2e-8 mol/L"), Ok(Level::MolePerLitre(2e-8)));
        assert_eq!(Level::parse("0.05 mg/L"), Ok(Level::MilligramPerLitre(0.05)));
        assert!(Level::parse("pM").is_err() && Level::parse("3 oz/gal").is_err());
        let nickel = Level::MilligramPerLitre(58.693).mol_per_litre(58.693);
        assert!((nickel - 1e-3).abs() < 1e-15);
        for level in [Level::P(10.8), Level::MolePerLitre(2e-8), Level::MilligramPerLitre(0.05)] {
            assert_eq!(Level::parse(&level.to_string()), Ok(level));
        }
    }
}
