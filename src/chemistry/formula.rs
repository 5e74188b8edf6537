//! Elemental formulas ("Ca3(C6H5O7)2.4H2O") and their molar mass.

use super::ChemistryError;
use std::collections::BTreeMap;
use std::sync::LazyLock;

/// Standard atomic weights, g/mol (IUPAC 2021, abridged), by element symbol.
static ATOMIC_WEIGHTS: LazyLock<BTreeMap<String, f64>> = LazyLock::new(|| {
    let rows: Vec<(String, f64)> = ron::from_str(include_str!("../../assets/constants/atomic_weights.ron"))
        .expect("the embedded atomic weights are read by every test run");
    rows.into_iter().collect()
});

/// The count of atoms of each element in a substance.
#[derive(Clone, Debug, PartialEq)]
pub struct Formula {
    atoms: BTreeMap<String, f64>,
}

impl Formula {
    /// Reads a formula without charge: elements, counts, nested parentheses, and hydrate parts behind a dot.
    ///
    /// # Errors
    /// [`ChemistryError::Formula`] for unknown elements, unclosed parentheses or stray characters.
    pub fn parse(text: &str) -> Result<Self, ChemistryError> {
        let fail = |reason: String| ChemistryError::Formula { formula: text.to_owned(), reason };
        if text.trim().is_empty() {
            return Err(fail("it is empty".to_owned()));
        }
        let mut atoms = BTreeMap::new();
        for part in split_hydrate(text.trim()) {
            let digits = part.find(|c: char| !c.is_ascii_digit()).unwrap_or(part.len());
            let factor = if digits == 0 { 1.0 } else { part[..digits].parse().unwrap_or(1.0) };
            let body: Vec<char> = part[digits..].chars().collect();
            let mut at = 0;
            let counted = read_group(&body, &mut at, 0).map_err(&fail)?;
            if at != body.len() || counted.is_empty() {
                return Err(fail(format!("\"{part}\" has a part that is not an element")));
            }
            for (element, count) in counted {
                *atoms.entry(element).or_insert(0.0) += factor * count;
            }
        }
        Ok(Self { atoms })
    }

    /// Molar mass in g/mol.
    pub fn molar_mass(&self) -> f64 {
        self.atoms.iter().map(|(element, count)| count * ATOMIC_WEIGHTS[element]).sum()
    }

    /// Count of atoms of an element; 0 when absent.
    pub fn count(&self, element: &str) -> f64 {
        self.atoms.get(element).copied().unwrap_or(0.0)
    }
}

/// Splits at hydrate dots; a dot between digits ("CaSO4.0.5H2O") is not supported and reads as two parts.
fn split_hydrate(text: &str) -> impl Iterator<Item = &str> {
    text.split(['.', '·', '*']).filter(|part| !part.is_empty())
}

type Counts = Vec<(String, f64)>;

/// Deepest nesting of parentheses that a formula may have.
const MAX_DEPTH: usize = 8;

fn read_group(body: &[char], at: &mut usize, depth: usize) -> Result<Counts, String> {
    let mut counts = Counts::new();
    while let Some(&c) = body.get(*at) {
        let inner = match c {
            '(' | '[' => {
                if depth == MAX_DEPTH {
                    return Err("parentheses are nested too deeply".to_owned());
                }
                *at += 1;
                let inner = read_group(body, at, depth + 1)?;
                match body.get(*at) {
                    Some(')' | ']') => *at += 1,
                    _ => return Err("a parenthesis is not closed".to_owned()),
                }
                inner
            }
            ')' | ']' if depth > 0 => return Ok(counts),
            c if c.is_ascii_uppercase() => vec![(read_element(body, at)?, 1.0)],
            c => return Err(format!("\"{c}\" does not belong in a formula")),
        };
        let factor = read_count(body, at);
        counts.extend(inner.into_iter().map(|(element, count)| (element, count * factor)));
    }
    if depth > 0 {
        return Err("a parenthesis is not closed".to_owned());
    }
    Ok(counts)
}

fn read_element(body: &[char], at: &mut usize) -> Result<String, String> {
    let mut symbol = body[*at].to_string();
    *at += 1;
    if let Some(&c) = body.get(*at)
        && c.is_ascii_lowercase()
    {
        symbol.push(c);
        *at += 1;
    }
    if ATOMIC_WEIGHTS.contains_key(&symbol) {
        Ok(symbol)
    } else {
        Err(format!("\"{symbol}\" is not an element Bathwright has a weight for"))
    }
}

fn read_count(body: &[char], at: &mut usize) -> f64 {
    let start = *at;
    while body.get(*at).is_some_and(char::is_ascii_digit) {
        *at += 1;
    }
    let digits: String = body[start..*at].iter().collect();
    digits.parse().unwrap_or(1.0)
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Molar masses: CRC Handbook of Chemistry and Physics, physical constants tables (from memory), g/mol.
    #[test]
    fn molar_masses_agree_with_the_handbook() {
        for (formula, mass) in [
            ("NiSO4.6H2O", 262.85),
            ("CuSO4.5H2O", 249.69),
            ("C10H16N2O8", 292.24),
            ("Ca3(C6H5O7)2.4H2O", 570.49),
            ("K4P2O7", 330.34),
            ("Na2EDTA", f64::NAN),
        ] {
            match Formula::parse(formula) {
                Ok(read) => {
                    assert!((read.molar_mass() - mass).abs() < 0.02, "{formula} {}", read.molar_mass())
                }
                Err(error) => assert!(mass.is_nan(), "{error}"),
            }
        }
    }

    #[test]
    fn a_bad_formula_is_refused_with_its_reason() {
        for (text, reason) in [
            ("Ca(OH2", "not closed"),
            ("Xx2", "not an element"),
            ("ni", "does not belong"),
            ("", "empty"),
            ("Ca)2", "does not belong"),
        ] {
            let error = Formula::parse(text).unwrap_err().to_string();
            assert!(error.contains(reason), "{text}: {error}");
        }
    }

    #[test]
    fn deep_nesting_is_refused_instead_of_overflowing_the_stack() {
        assert!(Formula::parse(&"(".repeat(10_000)).is_err());
    }
}
