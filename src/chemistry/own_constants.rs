//! The constants that a project file brings along.

use super::constant::{Component, Constant};
use super::solid_record::SolidRecord;
use serde::{Deserialize, Serialize};

/// Components, reactions and solids that a project brings along; they add to the library or replace its values.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct OwnConstants {
    /// Use the built-in library besides; off, the project describes its whole chemistry itself.
    #[serde(default = "yes")]
    pub library: bool,
    /// Own components.
    #[serde(default)]
    pub components: Vec<Component>,
    /// Own reactions in solution. One that writes a built-in equilibrium again replaces its value.
    #[serde(default)]
    pub reactions: Vec<Constant>,
    /// Own solids; one with the token of a built-in solid replaces it.
    #[serde(default)]
    pub solids: Vec<SolidRecord>,
}

fn yes() -> bool {
    true
}

impl Default for OwnConstants {
    fn default() -> Self {
        Self { library: true, components: Vec::new(), reactions: Vec::new(), solids: Vec::new() }
    }
}

impl OwnConstants {
    /// Whether nothing of one's own is in it.
    pub fn is_default(&self) -> bool {
        *self == Self::default()
    }
}
