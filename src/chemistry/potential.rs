//! Standard potentials of metals, and the reference electrodes that a shop measures against.

use super::constant::Basis;
use crate::quantity::celsius;
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

/// A reference electrode.
#[derive(Clone, Debug, PartialEq, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct ReferenceElectrode {
    /// Name with its filling.
    pub name: String,
    /// Potential at 25 °C against the standard hydrogen electrode, V.
    pub e_v: f64,
    /// Standard uncertainty, V: the spread of published values, with and without the liquid junction.
    pub sigma_v: f64,
    /// Seen, recalled or computed.
    pub basis: Basis,
    /// Where it is published.
    pub source: String,
    /// Slope at 25 °C against the standard hydrogen electrode at the same temperature, mV/K.
    pub de_dt_mv: f64,
    /// Curvature, µV/K²: the factor of (t − 25 °C)².
    #[serde(default)]
    pub curvature_uv: f64,
    /// Whether slope and curvature were seen in their source.
    pub de_dt_basis: Basis,
    /// Where slope and curvature are published.
    pub de_dt_source: String,
    /// Highest temperature of use, °C.
    pub highest_c: f64,
    /// Remark.
    #[serde(default)]
    pub note: String,
}

impl ReferenceElectrode {
    /// Potential in V against the standard hydrogen electrode when the electrode itself is at a temperature in kelvin.
    ///
    /// One on a salt bridge stays at room temperature, whatever the bath is.
    pub fn e_v_at(&self, temperature_k: f64) -> f64 {
        let t = celsius(temperature_k) - 25.0;
        self.e_v + self.de_dt_mv * 1e-3 * t + self.curvature_uv * 1e-6 * t * t
    }
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

    /// A reference electrode by its name.
    pub fn reference(&self, name: &str) -> Option<&ReferenceElectrode> {
        self.references.iter().find(|electrode| electrode.name == name)
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::{Library, charge_of};
    use crate::quantity::kelvin;

    #[test]
    fn every_couple_is_a_metal_of_the_library_with_as_many_electrons_as_charges() {
        for couple in &Potentials::built_in().couples {
            assert!(Library::built_in().component(&couple.metal).is_some(), "{}", couple.metal);
            assert_eq!(f64::from(couple.electrons), charge_of(&couple.metal), "{}", couple.metal);
            assert!(!couple.source.is_empty() && couple.sigma_v > 0.0);
        }
    }

    fn at(name: &str, temperature_c: f64) -> f64 {
        let electrode = Potentials::built_in().reference(name).unwrap_or_else(|| panic!("no {name}"));
        electrode.e_v_at(kelvin(temperature_c))
    }

    #[test]
    fn every_reference_electrode_states_sources_spread_and_range() {
        let references = &Potentials::built_in().references;
        assert!(references.len() >= 6);
        for electrode in references {
            assert!(!electrode.source.is_empty() && !electrode.de_dt_source.is_empty(), "{}", electrode.name);
            assert!(electrode.sigma_v > 0.0 && electrode.highest_c > 25.0, "{}", electrode.name);
            assert_eq!(electrode.e_v_at(kelvin(25.0)), electrode.e_v);
        }
    }

    /// Sawyer, Sobkowiak & Roberts, Electrochemistry for Chemists, 2nd ed., Wiley 1995 (read as tabulated elsewhere; with
    /// liquid junction).
    #[test]
    fn silver_electrodes_fall_with_temperature_as_tabulated() {
        for (t, in_3_5, saturated) in
            [(10.0, 0.215, 0.214), (20.0, 0.208, 0.204), (30.0, 0.201, 0.194), (40.0, 0.193, 0.184)]
        {
            assert!((at("Ag/AgCl, 3.5 M KCl", t) - in_3_5).abs() < 0.0015, "{t}");
            assert!((at("Ag/AgCl, saturated KCl", t) - saturated).abs() < 0.003, "{t}");
        }
    }

    /// Electrode handbook table to 90 °C (from memory).
    #[test]
    fn silver_electrodes_follow_their_table_in_a_hot_bath() {
        for (t, in_3, saturated) in
            [(0.0, 0.2242, 0.2205), (50.0, 0.1884, 0.1707), (70.0, 0.1721, 0.1488), (90.0, 0.1533, 0.1269)]
        {
            assert!((at("Ag/AgCl, 3 M KCl", t) - in_3).abs() < 0.001, "{t}");
            assert!((at("Ag/AgCl, saturated KCl", t) - saturated).abs() < 0.001, "{t}");
        }
    }

    /// A web glossary's table of calomel electrodes (read; with liquid junction, 3 mV higher).
    #[test]
    fn the_calomel_electrode_falls_as_tabulated() {
        for (t, e) in [(15.0, 0.2511), (20.0, 0.2479), (30.0, 0.2411), (35.0, 0.2376)] {
            assert!((at("calomel, saturated KCl", t) + 0.0032 - e).abs() < 0.0005, "{t}");
        }
    }
}
