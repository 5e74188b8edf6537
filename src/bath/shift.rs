//! What a shift does to the bath: work that brings or takes metal, drag-out, water carried in, evaporation, wear of the
//! agents, and how the shop replenishes.

use super::error::BathError;
use super::project::Trust;
use crate::quantity::{Amount, Dimension, Unit};
use serde::{Deserialize, Serialize};

/// The running of the bath, as the chemist typed it.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields, default)]
pub struct Shift {
    /// Running hours of one shift.
    pub hours: f64,
    /// Shifts to look ahead.
    pub shifts: u32,
    /// What the work brings into the bath or takes out of it.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub loads: Vec<Load>,
    /// Bath that leaves on the work, litres per hour; everything in solution goes with it.
    pub drag_out_l_h: f64,
    /// Water that arrives on the work, litres per hour, of the same hardness as the make-up water.
    pub drag_in_l_h: f64,
    /// Water that evaporates, litres per hour.
    pub evaporation_l_h: f64,
    /// The water that holds the working volume.
    pub make_up_water: Water,
    /// What each complexing agent loses by decomposition in one shift, per cent of it.
    pub agent_loss_percent_per_shift: f64,
    /// What the plan of top-ups spares.
    pub replenish: Replenish,
    /// Where the numbers come from.
    #[serde(skip_serializing_if = "String::is_empty")]
    pub note: String,
}

impl Default for Shift {
    fn default() -> Self {
        Self {
            hours: 8.0,
            shifts: 3,
            loads: Vec::new(),
            drag_out_l_h: 0.0,
            drag_in_l_h: 0.0,
            evaporation_l_h: 0.0,
            make_up_water: Water::default(),
            agent_loss_percent_per_shift: 0.0,
            replenish: Replenish::default(),
            note: String::new(),
        }
    }
}

/// One thing that the work brings or takes.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Load {
    /// A metal, or anything else that the contents of a bath may name.
    pub what: String,
    /// How fast.
    pub rate: Rate,
    /// What the number rests on.
    #[serde(default)]
    pub trust: Trust,
    /// When or how it was found.
    #[serde(default, skip_serializing_if = "String::is_empty")]
    pub note: String,
}

/// How fast something comes or goes; a negative rate is consumption.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub enum Rate {
    /// Grams per hour.
    GramsPerHour(f64),
    /// By the area of the work.
    Work {
        /// Square metres of work per hour.
        m2_h: f64,
        /// Grams for each square metre.
        g_m2: f64,
    },
}

impl Rate {
    /// Grams per hour.
    pub fn grams_per_hour(self) -> f64 {
        match self {
            Rate::GramsPerHour(grams) => grams,
            Rate::Work { m2_h, g_m2 } => m2_h * g_m2,
        }
    }
}

/// Water by its hardness. Only calcium and magnesium are counted; their anions are not listed.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Water {
    /// Total hardness, in a unit of hardness.
    pub hardness: Amount,
    /// Part of the hardness that is magnesium, 0 to 1 by moles.
    #[serde(default)]
    pub magnesium_share: f64,
}

impl Default for Water {
    /// Deionised water.
    fn default() -> Self {
        let hardness = Amount::new(0.0, Unit::MilligramCalciumCarbonatePerLitre);
        Self { hardness, magnesium_share: 0.0 }
    }
}

/// What the plan of top-ups spares.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub enum Replenish {
    /// The operator's time: as few additions as hold.
    #[default]
    Fewest,
    /// The agent: no sooner and no more than holds.
    LeastAgent,
}

impl Shift {
    /// Whether nothing was entered, so that the section need not be written.
    pub fn is_default(&self) -> bool {
        *self == Self::default()
    }

    /// Checks the numbers.
    ///
    /// # Errors
    /// [`BathError`], naming the first field at fault.
    pub fn check(&self) -> Result<(), BathError> {
        in_range("hours", self.hours, 0.25..=24.0, "give the running hours of one shift, 0.25 to 24")?;
        let shifts = f64::from(self.shifts);
        in_range("shifts", shifts, 1.0..=100.0, "give how many shifts to look ahead, 1 to 100")?;
        let flow = "give litres per hour, zero or more and not over 100000";
        for (field, value) in [
            ("drag_out_l_h", self.drag_out_l_h),
            ("drag_in_l_h", self.drag_in_l_h),
            ("evaporation_l_h", self.evaporation_l_h),
        ] {
            in_range(field, value, 0.0..=1e5, flow)?;
        }
        let loss = "give per cent of each agent lost in a shift, from 0 to 99";
        in_range("agent_loss_percent_per_shift", self.agent_loss_percent_per_shift, 0.0..=99.0, loss)?;
        let Water { hardness, magnesium_share } = self.make_up_water;
        let share = "give the part of the hardness that is magnesium, from 0 to 1";
        in_range("make_up_water.magnesium_share", magnesium_share, 0.0..=1.0, share)?;
        if !matches!(hardness.unit.dimension(), Dimension::Hardness | Dimension::Mole) {
            return Err(BathError::Unit {
                field: "shift.make_up_water.hardness".to_owned(),
                amount: hardness.to_string(),
                fix: "give the hardness in mg/L CaCO3, °dH, °fH, gpg or mmol/L".to_owned(),
            });
        }
        let hard = "give the hardness of the water, zero or more";
        in_range("make_up_water.hardness", hardness.value, 0.0..=1e5, hard)?;
        for (i, load) in self.loads.iter().enumerate() {
            let grams = "give grams per hour between -1000000 and 1000000, negative for what is used up";
            match load.rate {
                Rate::GramsPerHour(value) => {
                    in_range(&format!("loads[{i}].rate"), value, -1e6..=1e6, grams)?;
                }
                Rate::Work { m2_h, g_m2 } => {
                    let area = "give square metres of work per hour, zero or more";
                    in_range(&format!("loads[{i}].rate.m2_h"), m2_h, 0.0..=1e5, area)?;
                    let per_area = "give grams for each square metre, negative for what is used up";
                    in_range(&format!("loads[{i}].rate.g_m2"), g_m2, -1e5..=1e5, per_area)?;
                }
            }
        }
        Ok(())
    }
}

fn in_range(
    field: &str,
    value: f64,
    range: std::ops::RangeInclusive<f64>,
    fix: &'static str,
) -> Result<(), BathError> {
    if value.is_finite() && range.contains(&value) {
        Ok(())
    } else {
        Err(BathError::Number { field: format!("shift.{field}"), value, fix })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bath::{Project, read, write};

    #[test]
    fn a_project_without_a_shift_is_written_as_before_and_one_with_a_shift_comes_back() {
        let mut project = Project::empty();
        assert!(!write(&project).unwrap().contains("drag_out"));
        project.shift = Shift {
            loads: vec![Load {
                what: "nickel".to_owned(),
                rate: Rate::Work { m2_h: 2.0, g_m2: -75.0 },
                trust: Trust::Inferred,
                note: String::new(),
            }],
            make_up_water: Water { hardness: Amount::parse("14 °dH").unwrap(), magnesium_share: 0.25 },
            replenish: Replenish::LeastAgent,
            ..Shift::default()
        };
        let text = write(&project).unwrap();
        assert_eq!(read(&text, "memory").unwrap(), project);
        assert_eq!(project.shift.loads[0].rate.grams_per_hour(), -150.0);
    }

    #[test]
    fn a_number_out_of_range_is_refused_with_field_value_and_fix() {
        let cases: [(Shift, &str); 6] = [
            (Shift { hours: 0.0, ..Shift::default() }, "shift.hours is 0"),
            (Shift { shifts: 0, ..Shift::default() }, "shift.shifts is 0"),
            (Shift { drag_out_l_h: -1.0, ..Shift::default() }, "shift.drag_out_l_h is -1"),
            (Shift { evaporation_l_h: f64::NAN, ..Shift::default() }, "shift.evaporation_l_h is NaN"),
            (Shift { agent_loss_percent_per_shift: 100.0, ..Shift::default() }, "from 0 to 99"),
            (
                Shift {
                    make_up_water: Water {
                        hardness: Amount::parse("200 g/L").unwrap(),
                        magnesium_share: 0.0,
                    },
                    ..Shift::default()
                },
                "shift.make_up_water.hardness is \"200 g/L\": give the hardness in mg/L CaCO3",
            ),
        ];
        for (shift, needle) in cases {
            let error = shift.check().unwrap_err();
            assert!(error.to_string().contains(needle), "{error}");
            assert!(error.field().starts_with("shift."));
        }
        assert!(Shift::default().check().is_ok());
    }
}
