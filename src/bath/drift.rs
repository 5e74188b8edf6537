//! What drifts beside pH and temperature: metal load, hardness carried in, working volume.

use super::error::BathError;
use super::recipe;
use crate::chemistry::{Catalogue, Library};
use crate::quantity::{Amount, Dimension, significant};
use serde::{Deserialize, Serialize};

/// Most ranges that a bath may have beside pH and temperature.
pub const MAX_DRIFTS: usize = 8;

/// The part of the operating window beyond pH and temperature, as typed.
#[derive(Clone, Debug, Default, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct Drift {
    /// Metals (or other components) whose total wanders.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub loads: Vec<LoadRange>,
    /// Hardness that drag-in and make-up water bring on top of the contents.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub hardness: Option<HardnessRange>,
    /// Working volume between boiled down and filled up, litres.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub volume_l: Option<Span>,
}

impl Drift {
    /// Whether nothing drifts but pH and temperature.
    pub fn is_default(&self) -> bool {
        *self == Self::default()
    }
}

/// Lowest and highest total of one component.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct LoadRange {
    /// Component token, symbol or name: "Cu+2", "copper".
    pub of: String,
    /// Lowest total met in operation.
    pub low: Amount,
    /// Highest total met in operation.
    pub high: Amount,
}

/// Hardness carried in.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct HardnessRange {
    /// Least that is carried in.
    pub low: Amount,
    /// Most that is carried in.
    pub high: Amount,
    /// Share of magnesium in it, 0…1, mole by mole; the rest is calcium.
    #[serde(default = "usual_magnesium_share")]
    pub magnesium_share: f64,
}

/// One part of magnesium to four of calcium, as in many tap waters (common practice).
fn usual_magnesium_share() -> f64 {
    0.2
}

/// Lowest and highest value.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Span {
    /// Lowest value met in operation.
    pub low: f64,
    /// Highest value met in operation.
    pub high: f64,
}

/// Where the bath is on each of its drifts: −1 at the low end, 0 at the set point, +1 at the high end.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Position(pub [f64; MAX_DRIFTS]);

/// What a drift changes.
#[derive(Clone, Debug, PartialEq)]
enum Effect {
    /// Moles of each system component per unit.
    Totals(Vec<f64>),
    /// Everything in the tank, by concentration.
    Volume,
}

/// One drift of a resolved bath.
#[derive(Clone, Debug, PartialEq)]
pub struct DriftAxis {
    /// What drifts: "copper", "hardness", "volume".
    pub name: String,
    /// Unit of the three values.
    pub unit: String,
    /// Low end.
    pub low: f64,
    /// Set point.
    pub set: f64,
    /// High end.
    pub high: f64,
    effect: Effect,
}

impl DriftAxis {
    /// The value at a place between −1 and +1.
    pub fn value(&self, t: f64) -> f64 {
        self.set + if t < 0.0 { t * (self.set - self.low) } else { t * (self.high - self.set) }
    }

    /// "copper 11.5 g/L".
    pub fn words(&self, t: f64) -> String {
        format!("{} {} {}", self.name, significant(self.value(t), 3), self.unit)
    }
}

/// Moves totals at the set point, which additions have thinned by `dilution`, to a position.
pub(super) fn move_totals(axes: &[DriftAxis], position: &Position, dilution: f64, totals: &mut [f64]) {
    let mut concentration = 1.0;
    for (axis, &t) in axes.iter().zip(&position.0) {
        match &axis.effect {
            Effect::Totals(per_unit) => {
                let change = (axis.value(t) - axis.set) / dilution;
                totals.iter_mut().zip(per_unit).for_each(|(total, part)| *total += change * part);
            }
            Effect::Volume => concentration *= axis.set / axis.value(t),
        }
    }
    totals.iter_mut().for_each(|total| *total *= concentration);
}

/// Library components that drifts bring into the bath.
pub(super) fn brought(drift: &Drift, library: &Library) -> Vec<usize> {
    let loads = drift.loads.iter().filter_map(|load| library.component_named(&load.of));
    let hardness = drift.hardness.iter().flat_map(|_| HARDNESS.map(|token| library.component(token)));
    loads.chain(hardness.flatten()).collect()
}

/// The components of hardness.
const HARDNESS: [&str; 2] = ["Ca+2", "Mg+2"];

/// What the resolution of drifts needs to know of the bath.
pub(super) struct Surroundings<'a> {
    pub library: &'a Library,
    pub catalogue: &'a Catalogue,
    pub present: &'a [usize],
    pub contents: &'a [f64],
    pub volume_l: f64,
}

/// Resolves the drifts of a project.
pub(super) fn axes(drift: &Drift, around: &Surroundings) -> Result<Vec<DriftAxis>, BathError> {
    let mut axes = Vec::new();
    for (i, load) in drift.loads.iter().enumerate() {
        axes.push(load_axis(&format!("drift.loads[{i}]"), load, around)?);
    }
    if let Some(range) = &drift.hardness {
        axes.push(hardness_axis(range, around)?);
    }
    if let Some(span) = drift.volume_l {
        axes.push(volume_axis(span, around.volume_l)?);
    }
    if axes.len() > MAX_DRIFTS {
        let fix = "give at most eight ranges; leave out those that move free metal least";
        return Err(BathError::Number { field: "drift".to_owned(), value: axes.len() as f64, fix });
    }
    Ok(axes)
}

fn load_axis(field: &str, load: &LoadRange, around: &Surroundings) -> Result<DriftAxis, BathError> {
    let component = around.library.component_named(&load.of).ok_or_else(|| BathError::Unknown {
        field: format!("{field}.of"),
        name: load.of.clone(),
        fix: "no component has this name; write a metal like \"Cu+2\" or \"copper\"".to_owned(),
    })?;
    let known = &around.library.components[component];
    let moles = |part: &str, amount: Amount| {
        let field = format!("{field}.{part}");
        let moles = recipe::resolve(&field, &known.token, amount, around.library, around.catalogue)?;
        Ok::<f64, BathError>(moles.get(&component).copied().unwrap_or(0.0))
    };
    let (low, high) = (moles("low", load.low)?, moles("high", load.high)?);
    let per_unit = moles("high", Amount::new(1.0, load.high.unit))?;
    let place = around.present.iter().position(|&present| present == component);
    let set = place.map_or(0.0, |place| around.contents[place]);
    let axis = DriftAxis {
        name: known.name.clone(),
        unit: load.high.unit.symbol().to_owned(),
        low: low / per_unit,
        set: set / per_unit,
        high: high / per_unit,
        effect: Effect::Totals(
            (0..around.present.len()).map(|i| if Some(i) == place { per_unit } else { 0.0 }).collect(),
        ),
    };
    ordered(field, axis, "the recipe's total lies outside; widen the range or correct the contents")
}

fn hardness_axis(range: &HardnessRange, around: &Surroundings) -> Result<DriftAxis, BathError> {
    for (part, amount) in [("low", range.low), ("high", range.high)] {
        let field = format!("drift.hardness.{part}");
        if amount.unit.dimension() != Dimension::Hardness {
            let fix = "give a hardness in mg/L CaCO3, °dH, °fH or gpg".to_owned();
            return Err(BathError::Unit { field, amount: amount.to_string(), fix });
        }
        if !(amount.value.is_finite() && amount.value >= 0.0) {
            let fix = "give zero or a positive number";
            return Err(BathError::Number { field, value: amount.value, fix });
        }
    }
    let magnesium = range.magnesium_share;
    if !(0.0..=1.0).contains(&magnesium) {
        let fix = "give a share between 0 and 1";
        let field = "drift.hardness.magnesium_share".to_owned();
        return Err(BathError::Number { field, value: magnesium, fix });
    }
    let unit = range.high.unit;
    let mut per_unit = vec![0.0; around.present.len()];
    for (token, share) in HARDNESS.iter().zip([1.0 - magnesium, magnesium]) {
        let component = around.library.component(token);
        if let Some(place) = around.present.iter().position(|present| Some(*present) == component) {
            per_unit[place] = share * unit.factor();
        }
    }
    let low = range.low.value * range.low.unit.factor() / unit.factor();
    let axis = DriftAxis {
        name: "hardness".to_owned(),
        unit: unit.symbol().to_owned(),
        low,
        // The contents already hold the least.
        set: low,
        high: range.high.value,
        effect: Effect::Totals(per_unit),
    };
    ordered("drift.hardness", axis, "low is above high; swap them")
}

fn volume_axis(span: Span, set: f64) -> Result<DriftAxis, BathError> {
    if !(span.low.is_finite() && span.low > 0.0) {
        let (field, fix) = ("drift.volume_l.low".to_owned(), "give litres, more than 0");
        return Err(BathError::Number { field, value: span.low, fix });
    }
    let (name, unit) = ("volume".to_owned(), "L".to_owned());
    let axis = DriftAxis { name, unit, low: span.low, set, high: span.high, effect: Effect::Volume };
    ordered("drift.volume_l", axis, "the working volume lies outside; widen the range")
}

/// Rounding of a conversion between units that a set point may lie outside by.
const ROUNDING: f64 = 1e-9;

fn ordered(field: &str, mut axis: DriftAxis, fix: &'static str) -> Result<DriftAxis, BathError> {
    let slack = ROUNDING * axis.set.abs();
    for (part, value, wrong) in [
        ("low", axis.low, axis.low > axis.set + slack),
        ("high", axis.high, !axis.high.is_finite() || axis.high < axis.set - slack),
    ] {
        if wrong {
            return Err(BathError::Number { field: format!("{field}.{part}"), value, fix });
        }
    }
    axis.low = axis.low.min(axis.set);
    axis.high = axis.high.max(axis.set);
    Ok(axis)
}
