//! The project as it is saved: what the chemist typed, in the units it was typed in.

use super::air::Air;
use super::analysis::Analysis;
use super::drift::Drift;
use super::operating::{Ph, Range};
use super::rinse::Rinse;
use super::shift::Shift;
use super::wall::Derived;
use crate::chemistry::{OwnConstants, Product};
use crate::equilibrium::ActivityModel;
use crate::quantity::{Amount, Level};
use serde::{Deserialize, Serialize};

/// Version of the file format that this program writes.
pub const FORMAT: u32 = 1;

/// A bath with its doses and limits.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Project {
    /// Version of the file format.
    pub format: u32,
    /// Name of the bath, "Copper strike".
    pub name: String,
    /// Where it stands, "Line 2, tank 7".
    #[serde(default)]
    pub place: String,
    /// What there is to know about it.
    #[serde(default)]
    pub about: String,
    /// Invented numbers, for trying the program; printed on every sheet.
    #[serde(default)]
    pub invented: bool,
    /// Volume, pH and temperature.
    pub tank: Tank,
    /// What is in the bath.
    #[serde(default)]
    pub contents: Vec<Content>,
    /// The complexing agents to dose.
    #[serde(default)]
    pub agents: Vec<AgentDose>,
    /// Ranges beside pH and temperature.
    #[serde(default, skip_serializing_if = "Drift::is_default")]
    pub drift: Drift,
    /// Ceilings and floors of free metals.
    #[serde(default)]
    pub limits: Vec<Limit>,
    /// Solids treated other than by default.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub solids: Vec<SolidRule>,
    /// Products that bring the pH back.
    #[serde(default)]
    pub adjust: Adjust,
    /// Correction for ionic strength.
    #[serde(default)]
    pub activity: ActivityModel,
    /// What the sheet needs to know.
    #[serde(default)]
    pub sheet: SheetDetails,
    /// The rinse behind the bath and the treatment of its water.
    #[serde(default, skip_serializing_if = "Rinse::is_default")]
    pub rinse: Rinse,
    /// What the laboratory found.
    #[serde(default, skip_serializing_if = "Analysis::is_default")]
    pub analysis: Analysis,
    /// What a shift does to the bath.
    #[serde(default, skip_serializing_if = "Shift::is_default")]
    pub shift: Shift,
    /// Own products.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub products: Vec<Product>,
    /// Own constants.
    #[serde(default, skip_serializing_if = "OwnConstants::is_default")]
    pub constants: OwnConstants,
}

/// The tank and its operating point.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Tank {
    /// Working volume today in litres.
    pub volume_l: f64,
    /// pH, held or predicted.
    pub ph: Ph,
    /// Temperature in °C.
    pub temperature_c: Range,
    /// Exchange with the air.
    #[serde(default, skip_serializing_if = "Air::is_closed")]
    pub air: Air,
}

/// What an input rests on.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub enum Trust {
    /// Measured today.
    Today,
    /// Measured earlier.
    Earlier,
    /// Inferred from make-up and drag-out.
    Inferred,
    /// Assumed.
    #[default]
    Assumed,
}

impl Trust {
    /// The word beside an input.
    pub fn word(self) -> &'static str {
        match self {
            Trust::Today => "measured today",
            Trust::Earlier => "measured earlier",
            Trust::Inferred => "inferred",
            Trust::Assumed => "assumed",
        }
    }
}

/// One constituent of the bath.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Content {
    /// A product id or name ("niso4-6"), a component ("Cu+2", "copper", "EDTA") or a species ("HCO3-"). A
    /// complexing agent in g/L counts as its acid.
    pub what: String,
    /// How much of it.
    pub amount: Amount,
    /// What the number rests on.
    #[serde(default)]
    pub trust: Trust,
    /// When or how it was found.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub note: String,
}

/// A complexing agent to add to the bath as it stands.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct AgentDose {
    /// Product id or name.
    pub product: String,
    /// Grams of the product per litre of bath.
    #[serde(default)]
    pub dose_g_l: f64,
    /// Smallest dose to consider, grams of the product per litre of bath.
    #[serde(default, skip_serializing_if = "is_zero")]
    pub min_g_l: f64,
    /// Largest dose to consider, grams of the product per litre of bath.
    pub max_g_l: f64,
    /// The dose may not be moved by the search.
    #[serde(default, skip_serializing_if = "std::ops::Not::not")]
    pub locked: bool,
}

fn is_zero(value: &f64) -> bool {
    *value == 0.0
}

/// Ceiling and floor of a free metal.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Limit {
    /// The metal: component token, symbol or name.
    pub metal: String,
    /// Free metal must stay under this.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub ceiling: Option<Level>,
    /// Free metal must stay over this.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub floor: Option<Level>,
    /// A wall that follows from chemistry.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub derived: Option<Derived>,
    /// Which wall the limit stands for, and how it was found.
    #[serde(default)]
    pub wall: String,
}

/// How a solid is treated.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub enum Rule {
    /// A dose at which it forms does not hold. Default of fresh solids of a metal that has a limit.
    MustNotForm,
    /// It may form and is reported. Default of other fresh solids.
    MayForm,
    /// It does not form in the time of a shift; its saturation index is shown. Default of aged solids.
    TooSlow,
}

/// A solid treated other than by default.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct SolidRule {
    /// Solid token, "CaCO3(cr)".
    pub solid: String,
    /// How it is treated.
    pub rule: Rule,
}

/// Products that bring the pH back after a dose.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Adjust {
    /// Product that raises pH.
    pub alkali: String,
    /// Product that lowers pH.
    pub acid: String,
}

impl Default for Adjust {
    fn default() -> Self {
        Self { alkali: "naoh-50".to_owned(), acid: "h2so4-96".to_owned() }
    }
}

/// What the dosing sheet needs beyond the chemistry.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct SheetDetails {
    /// Who prepares it.
    pub prepared_by: String,
    /// Shift it is for.
    pub shift: String,
    /// Step of the scale in kg; empty for the trade's usual steps.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub scale_step_kg: Option<f64>,
    /// Step of the jug or pump in litres; empty for the trade's usual steps.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub jug_step_l: Option<f64>,
    /// The tank holds or may hold cyanide, sulfide or hypochlorite: no acid is printed.
    pub holds_cyanide_sulfide_or_hypochlorite: bool,
    /// Largest share of the agent in the bath that one addition may bring, per cent.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub addition_cap_percent: Option<f64>,
}

impl Project {
    /// An empty bath to start from.
    pub fn empty() -> Self {
        Self {
            format: FORMAT,
            name: "New bath".to_owned(),
            place: String::new(),
            about: String::new(),
            invented: false,
            tank: Tank {
                volume_l: 1000.0,
                ph: Ph::Held { low: 8.8, set: 9.0, high: 9.2 },
                temperature_c: Range::new(20.0, 25.0, 30.0),
                air: Air::default(),
            },
            contents: Vec::new(),
            agents: Vec::new(),
            drift: Drift::default(),
            limits: Vec::new(),
            solids: Vec::new(),
            adjust: Adjust::default(),
            activity: ActivityModel::default(),
            sheet: SheetDetails::default(),
            rinse: Rinse::default(),
            analysis: Analysis::default(),
            shift: Shift::default(),
            products: Vec::new(),
            constants: OwnConstants::default(),
        }
    }
}
