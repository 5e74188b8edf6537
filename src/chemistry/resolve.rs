//! From reactions as published to species as multiples of components.
//!
//! Each reaction defines the one species that nothing before it explained. What is kept is the *chain*: how many
//! times each published constant enters a species' overall formation constant. The overall value is summed later,
//! at the bath's temperature and ionic strength, and two species that share a constant stay correlated.

use super::{ChemistryError, Reaction, WATER};
use std::collections::BTreeMap;

/// How a species is made: components and published constants, each with its multiplicity.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Formation {
    /// Component index → coefficient.
    pub components: BTreeMap<usize, f64>,
    /// Constant index → multiplicity: ln β = Σ multiplicity · ln K.
    pub chain: BTreeMap<usize, f64>,
}

impl Formation {
    fn add(&mut self, factor: f64, other: &Formation) {
        for (&component, &coefficient) in &other.components {
            *self.components.entry(component).or_insert(0.0) += factor * coefficient;
        }
        for (&constant, &multiplicity) in &other.chain {
            *self.chain.entry(constant).or_insert(0.0) += factor * multiplicity;
        }
    }

    fn drop_zeros(&mut self) {
        self.components.retain(|_, c| c.abs() > 1e-9);
        self.chain.retain(|_, c| c.abs() > 1e-9);
    }
}

/// A species that a reaction defined.
#[derive(Clone, Debug, PartialEq)]
pub struct Defined {
    /// The species.
    pub token: String,
    /// How it is made.
    pub formation: Formation,
    /// The constant that defined it.
    pub constant: usize,
}

/// Resolves all reactions against the components.
///
/// `reactions` holds (constant index, text, parsed reaction).
///
/// # Errors
/// [`ChemistryError::DefinedTwice`] for a reaction whose species are all known already, and
/// [`ChemistryError::Unresolved`] for one that never becomes resolvable.
pub fn resolve(
    components: &[String],
    reactions: &[(usize, &str, &Reaction)],
) -> Result<Vec<Defined>, ChemistryError> {
    let mut known: BTreeMap<String, Formation> = BTreeMap::new();
    for (index, token) in components.iter().enumerate() {
        let formation = Formation { components: BTreeMap::from([(index, 1.0)]), chain: BTreeMap::new() };
        if token == WATER || known.insert(token.clone(), formation).is_some() {
            return Err(ChemistryError::DuplicateToken { token: token.clone() });
        }
    }
    let mut defined: Vec<Defined> = Vec::new();
    let mut waiting: Vec<&(usize, &str, &Reaction)> = reactions.iter().collect();
    while !waiting.is_empty() {
        let mut still_waiting = Vec::new();
        for &entry in &waiting {
            let (constant, text, reaction) = *entry;
            let unknown: Vec<(&str, f64)> =
                reaction.solutes().filter(|(token, _)| !known.contains_key(*token)).collect();
            match unknown[..] {
                [(token, coefficient)] => {
                    let formation = formation_of(reaction, constant, token, coefficient, &known);
                    known.insert(token.to_owned(), formation.clone());
                    defined.push(Defined { token: token.to_owned(), formation, constant });
                }
                [] => return Err(defined_twice(text, reaction, &defined, reactions)),
                _ => still_waiting.push(entry),
            }
        }
        if still_waiting.len() == waiting.len() {
            let (_, text, reaction) = still_waiting[0];
            let unknown: Vec<&str> = reaction
                .solutes()
                .map(|(token, _)| token)
                .filter(|token| !known.contains_key(*token))
                .collect();
            return Err(ChemistryError::Unresolved {
                reaction: (*text).to_owned(),
                unknown: unknown.join(", "),
            });
        }
        waiting = still_waiting;
    }
    Ok(defined)
}

/// With Σ sᵢ·Aᵢ = 0 and ln K = Σ sᵢ ln aᵢ, the unknown A has ln a = (ln K − Σ_known sᵢ ln aᵢ)/s.
fn formation_of(
    reaction: &Reaction,
    constant: usize,
    target: &str,
    coefficient: f64,
    known: &BTreeMap<String, Formation>,
) -> Formation {
    let mut formation = Formation::default();
    formation.chain.insert(constant, 1.0 / coefficient);
    for (token, s) in reaction.solutes().filter(|(token, _)| *token != target) {
        formation.add(-s / coefficient, &known[token]);
    }
    formation.drop_zeros();
    formation
}

fn defined_twice(
    text: &str,
    reaction: &Reaction,
    defined: &[Defined],
    reactions: &[(usize, &str, &Reaction)],
) -> ChemistryError {
    let culprit = defined.iter().rev().find(|species| reaction.coefficient(&species.token) != 0.0);
    let first =
        culprit.and_then(|species| reactions.iter().find(|(constant, ..)| *constant == species.constant));
    ChemistryError::DefinedTwice {
        token: culprit.map_or_else(|| "of known components".to_owned(), |species| species.token.clone()),
        first: first.map_or_else(|| "another reaction".to_owned(), |(_, first, _)| (*first).to_owned()),
        second: text.to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn run(components: &[&str], texts: &[&str]) -> Result<Vec<Defined>, ChemistryError> {
        let components: Vec<String> = components.iter().map(|c| (*c).to_owned()).collect();
        let parsed: Vec<Reaction> = texts.iter().map(|text| Reaction::parse(text).unwrap()).collect();
        let entries: Vec<(usize, &str, &Reaction)> =
            texts.iter().zip(&parsed).enumerate().map(|(i, (text, r))| (i, *text, r)).collect();
        resolve(&components, &entries)
    }

    #[test]
    fn chains_are_followed_in_any_order_and_direction() {
        let defined = run(
            &["H+", "Cu+2", "L-2"],
            &["Cu(OH)L- + H+ = CuL + H2O", "Cu+2 + L-2 = CuL", "2 CuL = Cu2L2", "H+ + L-2 = HL-"],
        )
        .unwrap();
        let find = |token: &str| &defined.iter().find(|d| d.token == token).unwrap().formation;
        assert_eq!(find("Cu(OH)L-").components, BTreeMap::from([(0, -1.0), (1, 1.0), (2, 1.0)]));
        assert_eq!(find("Cu(OH)L-").chain, BTreeMap::from([(0, -1.0), (1, 1.0)]));
        assert_eq!(find("Cu2L2").chain, BTreeMap::from([(1, 2.0), (2, 1.0)]));
    }

    #[test]
    fn a_second_constant_for_a_species_is_refused() {
        let error = run(&["H+", "L-"], &["H+ + L- = HL", "HL = H+ + L-"]).unwrap_err();
        assert!(matches!(error, ChemistryError::DefinedTwice { token, .. } if token == "HL"));
    }

    #[test]
    fn a_reaction_with_strangers_is_named() {
        let error = run(&["H+"], &["Zn+2 + L- = ZnL+"]).unwrap_err();
        assert!(error.to_string().contains("Zn+2, L-, ZnL+"), "{error}");
    }
}
