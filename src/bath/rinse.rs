//! The rinse behind a bath and the treatment of its water, as they are saved in a project.

use super::error::BathError;
use crate::quantity::{Amount, Unit};
use serde::{Deserialize, Serialize};

/// How the water of several rinse stages runs.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub enum Arrangement {
    /// Through all stages against the work: fresh water enters the last one, waste water leaves the first.
    #[default]
    Counterflow,
    /// Each stage has its own equal part of the fresh water and its own overflow.
    Separate,
}

impl Arrangement {
    /// The word for it.
    pub fn word(self) -> &'static str {
        match self {
            Arrangement::Counterflow => "counterflow",
            Arrangement::Separate => "separate",
        }
    }
}

/// The fresh water of the rinse. Its hardness counts as hydrogen carbonate where no alkalinity is given, else what
/// the alkalinity leaves over as chloride.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct FreshWater {
    /// Calcium.
    pub calcium: Amount,
    /// Magnesium.
    pub magnesium: Amount,
    /// Hydrogen carbonate; as much as the hardness calls for without it.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub hydrogen_carbonate: Option<Amount>,
    /// Its pH: so much carbon dioxide is in it (town water is commonly near 7.5).
    pub ph: f64,
}

impl Default for FreshWater {
    fn default() -> Self {
        let hardness = |value| Amount::new(value, Unit::MilligramCalciumCarbonatePerLitre);
        Self { calcium: hardness(150.0), magnesium: hardness(50.0), hydrogen_carbonate: None, ph: 7.5 }
    }
}

/// From lowest to highest pH.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PhSpan {
    /// Lowest.
    pub low: f64,
    /// Highest.
    pub high: f64,
}

/// A limit that the shop's own permit sets on the dissolved total of a metal.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct PermitLimit {
    /// The metal: component token, symbol or name.
    pub metal: String,
    /// mg of the metal per litre of treated water.
    pub mg_l: f64,
    /// Where it stands.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub note: String,
}

/// The rinse behind a bath and the treatment of its water.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct Rinse {
    /// Bath that leaves with the work, litres per hour.
    pub drag_out_l_h: f64,
    /// Fresh water, litres per hour, all stages together.
    pub flow_l_h: f64,
    /// Rinse stages in series.
    pub stages: u32,
    /// How their water runs.
    pub arrangement: Arrangement,
    /// The fresh water.
    pub water: FreshWater,
    /// Temperature of rinse and treatment, °C.
    pub temperature_c: f64,
    /// Hours of work a day.
    pub hours_per_day: f64,
    /// Product that raises the pH of the waste water.
    pub alkali: String,
    /// Product that lowers it.
    pub acid: String,
    /// Treatment pH to try.
    pub treatment_ph: PhSpan,
    /// Published limits to compare with, by section.
    pub regime: String,
    /// Own permit numbers; they win over published ones.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub limits: Vec<PermitLimit>,
}

/// Assumed until the shop types its own: 80 mL/m² of drag-out on 100 m²/h, water for one good rinse (common practice).
impl Default for Rinse {
    fn default() -> Self {
        Self {
            drag_out_l_h: 8.0,
            flow_l_h: 600.0,
            stages: 2,
            arrangement: Arrangement::Counterflow,
            water: FreshWater::default(),
            temperature_c: 20.0,
            hours_per_day: 16.0,
            alkali: "lime-hydrated".to_owned(),
            acid: "h2so4-96".to_owned(),
            treatment_ph: PhSpan { low: 7.0, high: 12.0 },
            regime: "433.15".to_owned(),
            limits: Vec::new(),
        }
    }
}

impl Rinse {
    /// Whether the project says nothing about its rinse.
    pub fn is_default(&self) -> bool {
        *self == Self::default()
    }

    /// Checks every number.
    ///
    /// # Errors
    /// [`BathError::Number`], naming the field.
    pub fn check(&self) -> Result<(), BathError> {
        let PhSpan { low, high } = self.treatment_ph;
        let numbers = [
            ("drag_out_l_h", self.drag_out_l_h, 1e-6..=1e6, "give litres of bath per hour, more than 0"),
            ("flow_l_h", self.flow_l_h, 1e-6..=1e9, "give litres of fresh water per hour, more than 0"),
            ("stages", f64::from(self.stages), 1.0..=10.0, "give 1 to 10 rinse stages"),
            ("water.ph", self.water.ph, 4.0..=11.0, "give the pH of the fresh water, 4 to 11"),
            ("temperature_c", self.temperature_c, 0.0..=60.0, "give a temperature between 0 and 60 °C"),
            ("hours_per_day", self.hours_per_day, 0.01..=24.0, "give hours a day, up to 24"),
            ("treatment_ph.low", low, 2.0..=13.0, "give the lowest treatment pH, 2 to 13"),
            ("treatment_ph.high", high, low..=13.0, "give a highest treatment pH from the lowest up to 13"),
        ];
        for (field, value, range, fix) in numbers {
            if !range.contains(&value) {
                return Err(BathError::Number { field: format!("rinse.{field}"), value, fix });
            }
        }
        for (i, limit) in self.limits.iter().enumerate() {
            if !(limit.mg_l.is_finite() && limit.mg_l > 0.0) {
                let fix = "give mg of metal per litre, more than 0";
                return Err(BathError::Number {
                    field: format!("rinse.limits[{i}].mg_l"),
                    value: limit.mg_l,
                    fix,
                });
            }
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_project_without_a_rinse_reads_as_the_assumed_one_and_writes_nothing() {
        let project = crate::bath::Project::empty();
        let text = crate::bath::write(&project).unwrap();
        assert!(project.rinse.is_default() && !text.contains("rinse"), "{text}");
    }

    #[test]
    fn a_typed_rinse_survives_saving() {
        let mut project = crate::bath::Project::empty();
        project.rinse.stages = 3;
        project.rinse.arrangement = Arrangement::Separate;
        let limit = PermitLimit { metal: "nickel".into(), mg_l: 0.5, note: "permit (invented)".into() };
        project.rinse.limits.push(limit);
        let text = crate::bath::write(&project).unwrap();
        assert_eq!(crate::bath::read(&text, "x.ron").unwrap(), project, "{text}");
    }

    #[test]
    fn a_bad_number_names_its_field() {
        let bad = [
            (Rinse { flow_l_h: 0.0, ..Rinse::default() }, "rinse.flow_l_h"),
            (Rinse { drag_out_l_h: f64::NAN, ..Rinse::default() }, "rinse.drag_out_l_h"),
            (Rinse { stages: 0, ..Rinse::default() }, "rinse.stages"),
            (
                Rinse { treatment_ph: PhSpan { low: 9.0, high: 8.0 }, ..Rinse::default() },
                "rinse.treatment_ph.high",
            ),
        ];
        for (rinse, field) in bad {
            assert_eq!(rinse.check().unwrap_err().field(), field);
        }
        assert!(Rinse::default().check().is_ok());
    }
}
