//! One equilibrium constant and everything that must be known to use it: the records of `assets/constants`.

use super::Formula;
use serde::{Deserialize, Serialize};

/// What a component is in a bath.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum ComponentKind {
    /// The hydrogen ion.
    Proton,
    /// A metal ion whose free concentration is of interest.
    Metal,
    /// A complexing agent in its fully deprotonated form.
    Agent,
    /// Any other ion: counter-ions, buffers, by-products.
    Ion,
    /// An uncharged substance that is not sold as a complexing agent.
    Neutral,
}

/// A building block of species: a metal ion, a deprotonated ligand, a counter-ion.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Component {
    /// Name with its charge, "EDTA-4"; unique among components and species.
    pub token: String,
    /// Name in words, "nickel".
    pub name: String,
    /// Short name, "Ni", "Fe(III)"; the token without its charge when absent.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub symbol: Option<String>,
    /// What it is in a bath.
    pub kind: ComponentKind,
    /// Elemental formula without charge; empty when unknown, then only mol/L can be typed for it.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub formula: String,
    /// Elemental formula of the acid that shops weigh or report ("as acid").
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub acid_form: Option<String>,
    /// Most donor atoms in a 1:1 chelate; the file says what the counts rest on.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub donors: Option<u8>,
    /// Why this component does not follow equilibrium in a tank, in one clause.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub slow: Option<String>,
    /// Remark.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub note: Option<String>,
}

impl Component {
    /// The formulas it states, if any.
    pub(super) fn formulas(&self) -> impl Iterator<Item = &str> {
        let own = (!self.formula.is_empty()).then_some(self.formula.as_str());
        own.into_iter().chain(self.acid_form.as_deref())
    }

    /// Molar mass in g/mol of the component itself; `None` when its formula is unknown.
    pub fn molar_mass(&self) -> Option<f64> {
        (!self.formula.is_empty()).then(|| Formula::parse(&self.formula).ok())?.map(|f| f.molar_mass())
    }

    /// Molar mass in g/mol in which shops report it: the acid of an agent, else the component itself.
    pub fn reported_molar_mass(&self) -> Option<f64> {
        match &self.acid_form {
            Some(acid) => Formula::parse(acid).ok().map(|f| f.molar_mass()),
            None => self.molar_mass(),
        }
    }

    /// The short name: "Ni", "EDTA", "Fe(III)".
    pub fn short(&self) -> &str {
        match &self.symbol {
            Some(symbol) => symbol,
            None => {
                let head = self.token.trim_end_matches(|c: char| c.is_ascii_digit());
                let bare = head.trim_end_matches(['+', '-']);
                if bare.len() == head.len() { &self.token } else { bare }
            }
        }
    }
}

/// How a published constant counts concentrations.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Convention {
    /// Activities of all species: I = 0.
    Thermodynamic,
    /// Concentrations of all species at the stated ionic strength.
    Concentration,
    /// H⁺ as activity, all others as concentrations at the stated ionic strength.
    Mixed,
}

/// Whether the value was seen in the named source.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Basis {
    /// Seen in the text of the named source.
    Read,
    /// Recalled; the named source is where it is believed to stand.
    #[serde(alias = "FromMemory")]
    Memory,
    /// Evaluated from a published formulation or from other values.
    Computed,
}

impl Basis {
    /// The word printed beside a constant.
    pub fn word(self) -> &'static str {
        match self {
            Basis::Read => "read",
            Basis::Memory => "from memory",
            Basis::Computed => "computed",
        }
    }
}

pub(super) fn default_temperature_c() -> f64 {
    25.0
}

pub(super) fn default_sigma() -> f64 {
    0.3
}

/// A reaction, its constant and the evidence for it: one record of a constants file.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Constant {
    /// The equilibrium, "H+ + EDTA-4 = HEDTA-3".
    pub reaction: String,
    /// log10 K of the reaction as written.
    pub log_k: f64,
    /// Standard uncertainty of log10 K.
    #[serde(default = "default_sigma")]
    pub sigma: f64,
    /// Temperature of the measurement in °C.
    #[serde(default = "default_temperature_c")]
    pub temperature_c: f64,
    /// Ionic strength of the measurement in mol/L.
    #[serde(default)]
    pub ionic_strength: f64,
    /// Salt that set the ionic strength.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub medium: String,
    /// How it counts concentrations.
    pub convention: Convention,
    /// Reaction enthalpy in kJ/mol.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub dh_kj: Option<f64>,
    /// Reaction heat capacity in J/(mol K).
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub dcp_j: Option<f64>,
    /// Whether it was seen in its source.
    pub basis: Basis,
    /// Where it is published.
    pub source: String,
    /// Evidence of the enthalpy, when it differs.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub dh_basis: Option<Basis>,
    /// Source of the enthalpy, when it differs.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub dh_source: Option<String>,
    /// Grade and remarks.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub note: String,
}
