//! Standard potentials of metals, and the reference electrodes that a shop measures against.

use super::constant::Basis;
use serde::Deserialize;
use std::sync::LazyLock;

/// A metal in contact with its ion.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Couple {
    /// Token of the ion.
    pub metal: String,
    /// Electrons exchanged.
    pub electrons: u8,
    /// Standard potential at 25 °C against the standard hydrogen electrode, V.
    pub e_v: f64,
    /// Isothermal temperature coefficient against the standard hydrogen electrode, mV/K.
    pub de_dt_mv: f64,
    /// Standard uncertainty, V: the spread between reviews.
    pub sigma_v: f64,
    /// Seen or recalled.
    pub basis: Basis,
    /// Where it is published.
    pub source: String,
    /// Remark.
    #[serde(default)]
    pub note: String,
}

/// A reference electrode, itself at 25 °C.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ReferenceElectrode {
    /// Name with its filling.
    pub name: String,
    /// Potential against the standard hydrogen electrode, V.
    pub e_v: f64,
    /// Seen or recalled.
    pub basis: Basis,
    /// Where it is published.
    pub source: String,
}

/// The built-in potentials.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Potentials {
    /// What the table holds.
    pub about: String,
    /// Metals.
    pub couples: Vec<Couple>,
    /// Reference electrodes.
    pub references: Vec<ReferenceElectrode>,
}

static BUILT_IN: LazyLock<Potentials> = LazyLock::new(|| {
    super::library::read_asset(include_str!("../../assets/constants/potentials.ron"))
        .expect("the embedded potentials are read by every test run")
});

impl Potentials {
    /// The table that ships with the program.
    pub fn built_in() -> &'static Potentials {
        &BUILT_IN
    }

    /// The couple of a metal ion.
    pub fn couple(&self, metal: &str) -> Option<&Couple> {
        self.couples.iter().find(|couple| couple.metal == metal)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::{Library, charge_of};

    #[test]
    fn every_couple_is_a_metal_of_the_library_with_as_many_electrons_as_charges() {
        for couple in &Potentials::built_in().couples {
            assert!(Library::built_in().component(&couple.metal).is_some(), "{}", couple.metal);
            assert_eq!(f64::from(couple.electrons), charge_of(&couple.metal), "{}", couple.metal);
            assert!(!couple.source.is_empty() && couple.sigma_v > 0.0);
        }
    }
}
