//! A solid and its dissolution equilibrium as one flat record of a file.

use super::constant::{Basis, Constant, Convention, default_sigma, default_temperature_c};
use serde::{Deserialize, Serialize};

/// How far a solid has aged.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Freshness {
    /// What precipitates today: amorphous, active, hydrated.
    Fresh,
    /// What it turns into in days to weeks, or at once when hot.
    Aged,
}

impl Freshness {
    /// The word beside a solid's name.
    pub fn word(self) -> &'static str {
        match self {
            Freshness::Fresh => "fresh",
            Freshness::Aged => "aged",
        }
    }
}

/// A solid with its dissolution equilibrium. In a file all fields stand side by side.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(from = "Flat", into = "Flat")]
pub struct SolidRecord {
    /// Name with its state, "Ni(OH)2(am)"; unique.
    pub token: String,
    /// Name in words.
    pub name: String,
    /// How far it has aged.
    pub state: Freshness,
    /// Elemental formula with hydrate water; empty when unknown.
    pub formula: String,
    /// Dissolution, the solid alone on the left (with H⁺ or water), and its constant.
    pub dissolution: Constant,
}

/// The record as it is written: RON has no flattened structs, so the fields of [`Constant`] are repeated.
#[derive(Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
struct Flat {
    token: String,
    name: String,
    state: Freshness,
    #[serde(default, skip_serializing_if = "String::is_empty")]
    formula: String,
    reaction: String,
    log_k: f64,
    #[serde(default = "default_sigma")]
    sigma: f64,
    #[serde(default = "default_temperature_c")]
    temperature_c: f64,
    #[serde(default)]
    ionic_strength: f64,
    #[serde(default, skip_serializing_if = "String::is_empty")]
    medium: String,
    convention: Convention,
    #[serde(default, skip_serializing_if = "Option::is_none")]
    dh_kj: Option<f64>,
    #[serde(default, skip_serializing_if = "Option::is_none")]
    dcp_j: Option<f64>,
    basis: Basis,
    source: String,
    #[serde(default, skip_serializing_if = "Option::is_none")]
    dh_basis: Option<Basis>,
    #[serde(default, skip_serializing_if = "Option::is_none")]
    dh_source: Option<String>,
    #[serde(default, skip_serializing_if = "String::is_empty")]
    note: String,
}

impl From<Flat> for SolidRecord {
    fn from(flat: Flat) -> Self {
        Self {
            token: flat.token,
            name: flat.name,
            state: flat.state,
            formula: flat.formula,
            dissolution: Constant {
                reaction: flat.reaction,
                log_k: flat.log_k,
                sigma: flat.sigma,
                temperature_c: flat.temperature_c,
                ionic_strength: flat.ionic_strength,
                medium: flat.medium,
                convention: flat.convention,
                dh_kj: flat.dh_kj,
                dcp_j: flat.dcp_j,
                basis: flat.basis,
                source: flat.source,
                dh_basis: flat.dh_basis,
                dh_source: flat.dh_source,
                note: flat.note,
            },
        }
    }
}

impl From<SolidRecord> for Flat {
    fn from(record: SolidRecord) -> Self {
        let Constant {
            reaction,
            log_k,
            sigma,
            temperature_c,
            ionic_strength,
            medium,
            convention,
            dh_kj,
            dcp_j,
            basis,
            source,
            dh_basis,
            dh_source,
            note,
        } = record.dissolution;
        Self {
            token: record.token,
            name: record.name,
            state: record.state,
            formula: record.formula,
            reaction,
            log_k,
            sigma,
            temperature_c,
            ionic_strength,
            medium,
            convention,
            dh_kj,
            dcp_j,
            basis,
            source,
            dh_basis,
            dh_source,
            note,
        }
    }
}
