//! Specific ion interaction coefficients ε of pairs of ions, with their sources and rules for pairs not measured.
//!
//! log10 γᵢ = −zᵢ² A √I/(1 + 1.5 √I) + Σₖ ε(i,k) mₖ over ions k of the other sign, on the molal scale: Brønsted,
//! Guggenheim and Scatchard; Ciavatta, Ann. Chim. (Rome) 70 (1980) 551. An estimated ε depends only on the charge
//! of one ion and on the other ion itself, so that ions of equal charge without measured values can share one γ.

use super::constant::Basis;
use super::reaction::charge_of;
use serde::Deserialize;
use std::collections::BTreeMap;
use std::sync::{Arc, LazyLock};

/// Coefficient of one pair of ions.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Epsilon {
    /// ε, kg/mol.
    pub value: f64,
    /// Standard uncertainty, kg/mol.
    pub sigma: f64,
    /// Where the value is from.
    pub origin: EpsilonOrigin,
}

/// Where a coefficient comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum EpsilonOrigin {
    /// A published pair, [`Interactions::pairs`] at this index.
    Table {
        /// Index of the record.
        index: usize,
    },
    /// An estimate, [`Interactions::rules`] at this index.
    Rule {
        /// Index of the rule.
        index: usize,
    },
    /// Nothing to tell: charges of the same sign or an uncharged partner, 0 by convention.
    None,
}

/// Published coefficient of a pair.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Interaction {
    /// Token of the cation.
    pub cation: String,
    /// Token of the anion.
    pub anion: String,
    /// ε at 25 °C, kg/mol.
    pub epsilon: f64,
    /// Standard uncertainty, kg/mol.
    pub sigma: f64,
    /// Tokens of species that this ε already accounts for: they must not be explicit beside it.
    #[serde(default)]
    pub contains: Vec<String>,
    /// Seen, recalled or computed.
    pub basis: Basis,
    /// Where it is published.
    pub source: String,
    /// Remark.
    #[serde(default)]
    pub note: String,
}

/// Ions that a rule speaks of.
#[derive(Clone, Debug, PartialEq, Deserialize)]
pub enum Ions {
    /// These tokens.
    Named(Vec<String>),
    /// Any ion of this absolute charge.
    Exactly(u8),
    /// Any ion of at least this absolute charge.
    AtLeast(u8),
    /// Any ion.
    Any,
}

impl Ions {
    fn hold(&self, token: &str, absolute_charge: f64) -> bool {
        match self {
            Ions::Named(tokens) => tokens.iter().any(|known| known == token),
            Ions::Exactly(charge) => absolute_charge == f64::from(*charge),
            Ions::AtLeast(charge) => absolute_charge >= f64::from(*charge),
            Ions::Any => true,
        }
    }
}

/// Estimate for pairs without a published value: ε = constant + per_cation_charge z + per_anion_charge |z|.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct EpsilonRule {
    /// Cations it covers.
    pub cations: Ions,
    /// Anions it covers.
    pub anions: Ions,
    /// Constant part, kg/mol.
    #[serde(default)]
    pub constant: f64,
    /// Part proportional to the charge of the cation, kg/mol.
    #[serde(default)]
    pub per_cation_charge: f64,
    /// Part proportional to the absolute charge of the anion, kg/mol.
    #[serde(default)]
    pub per_anion_charge: f64,
    /// Standard uncertainty, kg/mol.
    pub sigma: f64,
    /// Seen, recalled, or our own choice (`Computed`).
    pub basis: Basis,
    /// Where it is published, or that it is our own choice.
    pub source: String,
    /// Remark.
    #[serde(default)]
    pub note: String,
}

/// A number of the model itself.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ModelNumber {
    /// The value; its unit is in the note.
    pub value: f64,
    /// Standard uncertainty, where it has one.
    #[serde(default)]
    pub sigma: f64,
    /// Seen or recalled.
    pub basis: Basis,
    /// Where it is published.
    pub source: String,
    /// Unit and remark.
    pub note: String,
}

/// The model's numbers, the published pairs and the rules.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Interactions {
    /// What the table holds.
    pub about: String,
    /// Factor of √I in the denominator, kg^½ mol^−½.
    pub denominator: ModelNumber,
    /// Ionic strength to which the model is recommended, mol/kg.
    pub highest_ionic_strength: ModelNumber,
    /// log10 γ of an uncharged species per ionic strength, kg/mol.
    pub neutral: ModelNumber,
    /// dε/dT, kg/(mol K).
    pub drift_per_kelvin: ModelNumber,
    /// Estimates, the first that fits counts.
    pub rules: Vec<EpsilonRule>,
    /// Published pairs, each once.
    pub pairs: Vec<Interaction>,
    #[serde(skip)]
    index: BTreeMap<String, BTreeMap<String, usize>>,
}

static BUILT_IN: LazyLock<Arc<Interactions>> = LazyLock::new(|| {
    let mut table: Interactions = super::library::read_asset(include_str!("../../assets/interactions.ron"))
        .expect("the embedded interactions are read by every test run");
    for (index, pair) in table.pairs.iter().enumerate() {
        table.index.entry(pair.cation.clone()).or_default().insert(pair.anion.clone(), index);
    }
    Arc::new(table)
});

impl Interactions {
    /// The table that ships with the program.
    pub fn built_in() -> Arc<Interactions> {
        Arc::clone(&BUILT_IN)
    }

    /// ε of two species named by token, in either order; 0 between charges of the same sign and for uncharged ones.
    pub fn epsilon(&self, one: &str, other: &str) -> Epsilon {
        let (z_one, z_other) = (charge_of(one), charge_of(other));
        if z_one * z_other >= 0.0 {
            return Epsilon { value: 0.0, sigma: 0.0, origin: EpsilonOrigin::None };
        }
        let (cation, anion, z) = if z_one > 0.0 { (one, other, z_one) } else { (other, one, z_other) };
        let z_anion = z_one.min(z_other).abs();
        if let Some(&index) = self.index.get(cation).and_then(|anions| anions.get(anion)) {
            let pair = &self.pairs[index];
            return Epsilon {
                value: pair.epsilon,
                sigma: pair.sigma,
                origin: EpsilonOrigin::Table { index },
            };
        }
        let fits = |rule: &EpsilonRule| rule.cations.hold(cation, z) && rule.anions.hold(anion, z_anion);
        match self.rules.iter().position(fits) {
            Some(index) => {
                let rule = &self.rules[index];
                let value = rule.constant + rule.per_cation_charge * z + rule.per_anion_charge * z_anion;
                Epsilon { value, sigma: rule.sigma, origin: EpsilonOrigin::Rule { index } }
            }
            None => Epsilon { value: 0.0, sigma: 0.0, origin: EpsilonOrigin::None },
        }
    }

    /// Species that the published coefficients already account for; with this model they are left out.
    pub fn contained_species(&self) -> impl Iterator<Item = &str> {
        self.pairs.iter().flat_map(|pair| &pair.contains).map(String::as_str)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::Library;

    fn epsilon(one: &str, other: &str) -> Epsilon {
        Interactions::built_in().epsilon(one, other)
    }

    #[test]
    fn every_pair_is_a_cation_with_an_anion_listed_once_with_source_and_uncertainty() {
        let table = Interactions::built_in();
        for (index, pair) in table.pairs.iter().enumerate() {
            assert!(charge_of(&pair.cation) > 0.0 && charge_of(&pair.anion) < 0.0, "{pair:?}");
            assert!(!pair.source.is_empty() && pair.sigma > 0.0, "{pair:?}");
            let found = table.epsilon(&pair.cation, &pair.anion);
            assert_eq!(found.origin, EpsilonOrigin::Table { index }, "{pair:?} is listed twice");
        }
        assert!(table.pairs.len() > 110, "{}", table.pairs.len());
    }

    #[test]
    fn tokens_are_those_of_the_library_but_for_ions_it_does_not_carry() {
        let library = Library::built_in();
        let strangers = ["Li+", "Ba+2", "ClO4-", "SCN-", "NO2-"];
        let table = Interactions::built_in();
        let tokens = table.pairs.iter().flat_map(|pair| [pair.cation.as_str(), pair.anion.as_str()]);
        for token in tokens.chain(table.contained_species()).filter(|token| !strangers.contains(token)) {
            assert!(library.formation(token).is_some(), "{token} is not in the library");
        }
    }

    #[test]
    fn either_order_gives_the_same_coefficient() {
        assert_eq!(epsilon("Na+", "Cl-"), epsilon("Cl-", "Na+"));
        assert_eq!(epsilon("Cl-", "Na+").value, 0.03);
        assert_eq!(epsilon("Al(OH)4-", "K+"), epsilon("K+", "Al(OH)4-"));
    }

    #[test]
    fn like_charges_and_uncharged_species_do_not_interact() {
        for (one, other) in [("Na+", "K+"), ("Cl-", "SO4-2"), ("NH3", "Cl-"), ("Na+", "CO2(aq)")] {
            let found = epsilon(one, other);
            assert_eq!((found.value, found.sigma, found.origin), (0.0, 0.0, EpsilonOrigin::None));
        }
    }

    #[test]
    fn pairs_without_a_measurement_follow_the_published_rules() {
        for (cation, anion, value) in [
            ("Ni(NH3)4+2", "Cl-", 0.15),
            ("Cr(OH)+2", "ClO4-", 0.4),
            ("Mn+2", "NO3-", 0.15),
            ("Na+", "GLDA-4", -0.2),
            ("K+", "NTA-3", -0.15),
            ("Ni+2", "SO4-2", 0.0),
            ("NH4+", "Cit-3", -0.15),
            ("Cu+2", "H2PO2-", 0.15),
            ("Fe+3", "EDTA-4", 0.0),
        ] {
            let found = epsilon(cation, anion);
            assert!((found.value - value).abs() < 1e-12, "{cation} {anion}: {}", found.value);
            assert!(matches!(found.origin, EpsilonOrigin::Rule { .. }) && found.sigma >= 0.1);
        }
    }

    /// The solver shares one γ among ions of equal charge: estimates may not tell ions of a library apart.
    #[test]
    fn an_estimate_knows_only_the_charge_of_a_complex() {
        let library = Library::built_in();
        let table = Interactions::built_in();
        let measured = |token: &str| table.pairs.iter().any(|p| p.cation == token || p.anion == token);
        let named = ["Na+", "K+", "Cl-", "NO3-", "SO4-2", "ClO4-"];
        for counter in ["Na+", "K+", "NH4+", "H+", "Ni+2", "Cl-", "NO3-", "SO4-2", "OAc-"] {
            let mut seen: BTreeMap<i64, f64> = BTreeMap::new();
            for species in library.species.iter().filter(|s| !measured(&s.token)) {
                assert!(!named.contains(&species.token.as_str()));
                let value = table.epsilon(&species.token, counter).value;
                let first = *seen.entry(species.charge as i64).or_insert(value);
                assert_eq!(value, first, "{} with {counter}", species.token);
            }
        }
    }

    /// NaCl: Li, Chou & Liu, Fluid Phase Equilib. 565 (2023) 113662, accompanying data (read). CaCl2: CRC Handbook of
    /// Chemistry and Physics, 92nd ed., p. 5-106 (read). 25 °C, mol/kg.
    #[test]
    fn mean_activity_coefficients_of_sodium_and_calcium_chloride_come_out() {
        for (cation, z, per_formula, molality, published) in
            [("Na+", 1.0, 1.0, 1.0, 0.657), ("Na+", 1.0, 1.0, 2.0, 0.668), ("Ca+2", 2.0, 2.0, 0.5, 0.444)]
        {
            let epsilon = epsilon(cation, "Cl-").value;
            let strength = molality * (z * z + per_formula) / 2.0;
            let root: f64 = f64::sqrt(strength);
            let debye = -z * 0.5098 * root / (1.0 + Interactions::built_in().denominator.value * root);
            let exchange = 2.0 * per_formula / (1.0 + per_formula) * molality * epsilon;
            let found: f64 = 10f64.powf(debye + exchange);
            assert!((found / published - 1.0).abs() < 0.02, "{cation} {molality}: {found} for {published}");
        }
    }
}
