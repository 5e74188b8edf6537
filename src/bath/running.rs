//! A shift resolved against its bath: flows in litres per hour, loads and losses by component.

use super::error::BathError;
use super::project::{Content, Trust};
use super::recipe;
use super::resolve::Bath;
use super::shift::Shift;
use crate::chemistry::{ComponentKind, charge_of};
use crate::quantity::{Amount, Unit};
use std::borrow::Cow;

/// Components of the hardness.
const CALCIUM: &str = "Ca+2";
const MAGNESIUM: &str = "Mg+2";

/// What happens to a bath in an hour. The working volume is held: what leaves or evaporates is made up by water.
#[derive(Clone, Debug)]
pub struct Running<'a> {
    /// The bath, with every component that the shift brings to it.
    pub bath: Cow<'a, Bath>,
    /// Working volume, L.
    pub volume_l: f64,
    /// Length of one step, h: an hour, or a little less when a shift is not whole hours.
    pub step_h: f64,
    /// Steps of one shift.
    pub steps_per_shift: usize,
    /// Shifts.
    pub shifts: usize,
    /// Solution that leaves, L/h: drag-out, and what the drag-in pushes over the rim.
    pub out_l_h: f64,
    /// Water that comes in, L/h: drag-in and make-up.
    pub in_l_h: f64,
    /// What that water holds, mol/L by system component.
    pub water: Vec<f64>,
    /// What the work brings, mol/h by system component; negative for what is used up.
    pub load_mol_h: Vec<f64>,
    /// Decomposition, 1/h by system component, first order in what is dissolved.
    pub decay_h: Vec<f64>,
}

impl Running<'_> {
    /// Steps of the whole forecast.
    pub fn steps(&self) -> usize {
        self.shifts * self.steps_per_shift
    }

    /// The same with a bath of its own.
    pub fn into_owned(self) -> Running<'static> {
        Running { bath: Cow::Owned(self.bath.into_owned()), ..self }
    }
}

impl Bath {
    /// Resolves a shift of this bath.
    ///
    /// A metal or other ion that the work brings or takes is exchanged for hydrogen ions of its charge, as metal
    /// dissolves in acid and is plated out by a reducer; a product brings its own counter-ions.
    ///
    /// # Errors
    /// [`BathError`], naming the first field of `shift` at fault.
    pub fn running(&self, shift: &Shift) -> Result<Running<'_>, BathError> {
        shift.check()?;
        let mut loads = recipe::Moles::new();
        for (i, load) in shift.loads.iter().enumerate() {
            let field = format!("shift.loads[{i}]");
            let gram = Amount::new(1.0, Unit::GramPerLitre);
            let per_gram = recipe::resolve(&field, &load.what, gram, &self.library, &self.catalogue)?;
            let grams = load.rate.grams_per_hour();
            // Of a product this is zero.
            let charge: f64 = per_gram
                .iter()
                .map(|(&component, moles)| moles * charge_of(&self.library.components[component].token))
                .sum();
            if let Some(proton) = self.library.proton() {
                *loads.entry(proton).or_insert(0.0) -= charge * grams;
            }
            for (component, moles) in per_gram {
                *loads.entry(component).or_insert(0.0) += moles * grams;
            }
        }
        let water = shift.make_up_water;
        let hardness = water.hardness.value * water.hardness.unit.factor();
        let parts = [(CALCIUM, 1.0 - water.magnesium_share), (MAGNESIUM, water.magnesium_share)];
        let mut carried = recipe::Moles::new();
        for (token, share) in parts.into_iter().filter(|(_, share)| share * hardness > 0.0) {
            // A bath that brings its whole chemistry need not know hardness.
            if let Some(component) = self.library.component(token) {
                carried.insert(component, share * hardness);
            }
        }
        let bath = self.with_components(loads.keys().chain(carried.keys()).copied())?;
        let spread = |moles: &recipe::Moles| -> Vec<f64> {
            bath.present.iter().map(|component| moles.get(component).copied().unwrap_or(0.0)).collect()
        };
        let kept = 1.0 - shift.agent_loss_percent_per_shift / 100.0;
        let decay = -kept.ln() / shift.hours;
        let wears = |i: usize| bath.component(i).kind == ComponentKind::Agent;
        let decay_h = (0..bath.present.len()).map(|i| if wears(i) { decay } else { 0.0 }).collect();
        let in_l_h = shift.drag_in_l_h.max(shift.drag_out_l_h + shift.evaporation_l_h);
        let steps_per_shift = shift.hours.ceil().max(1.0) as usize;
        Ok(Running {
            volume_l: bath.project.tank.volume_l,
            step_h: shift.hours / steps_per_shift as f64,
            steps_per_shift,
            shifts: shift.shifts as usize,
            out_l_h: in_l_h - shift.evaporation_l_h,
            in_l_h,
            water: spread(&carried),
            load_mol_h: spread(&loads),
            decay_h,
            bath,
        })
    }

    /// The bath with more components in its system, none of them in the tank yet.
    fn with_components(&self, wanted: impl Iterator<Item = usize>) -> Result<Cow<'_, Bath>, BathError> {
        let missing: Vec<usize> = wanted.filter(|component| !self.present.contains(component)).collect();
        if missing.is_empty() {
            return Ok(Cow::Borrowed(self));
        }
        let mut project = self.project.clone();
        project.contents.extend(missing.into_iter().map(|component| Content {
            what: self.library.components[component].token.clone(),
            amount: Amount::new(0.0, Unit::MolePerLitre),
            trust: Trust::Assumed,
            note: "comes with the shift".to_owned(),
        }));
        Bath::resolve(&project).map(Cow::Owned)
    }
}

#[cfg(test)]
mod tests {
    use crate::bath::{Bath, Demo, Load, Rate, Shift, Trust, Water};
    use crate::quantity::Amount;

    fn load(what: &str, grams: f64) -> Load {
        Load {
            what: what.to_owned(),
            rate: Rate::GramsPerHour(grams),
            trust: Trust::Assumed,
            note: String::new(),
        }
    }

    #[test]
    fn make_up_water_holds_the_volume_and_brings_its_hardness() {
        let bath = Bath::resolve(&Demo::named("copper_strike.ron").unwrap().project().unwrap()).unwrap();
        let shift = Shift {
            drag_out_l_h: 3.0,
            drag_in_l_h: 1.0,
            evaporation_l_h: 5.0,
            make_up_water: Water {
                hardness: Amount::parse("100 mg/L CaCO3").unwrap(),
                magnesium_share: 0.25,
            },
            loads: vec![load("zinc", 65.38)],
            ..Shift::default()
        };
        let running = bath.running(&shift).unwrap();
        assert_eq!((running.out_l_h, running.in_l_h), (3.0, 8.0));
        let at = |token: &str| running.bath.system.component(token).unwrap();
        assert!((running.water[at("Ca+2")] - 0.75e-3 / 1.00086).abs() < 1e-8);
        assert!((running.water[at("Mg+2")] - 0.25e-3 / 1.00086).abs() < 1e-8);
        assert!((running.load_mol_h[at("Zn+2")] - 1.0).abs() < 1e-6);
        assert!((running.load_mol_h[at("H+")] + 2.0).abs() < 1e-6);
        let flooded = bath.running(&Shift { drag_in_l_h: 20.0, ..shift }).unwrap();
        assert_eq!((flooded.out_l_h, flooded.in_l_h), (15.0, 20.0));
    }

    #[test]
    fn a_load_that_nothing_answers_to_is_named() {
        let bath = Bath::resolve(&Demo::named("copper_strike.ron").unwrap().project().unwrap()).unwrap();
        let shift = Shift { loads: vec![load("zinc", 1.0), load("unobtainium", 1.0)], ..Shift::default() };
        let error = bath.running(&shift).unwrap_err();
        assert_eq!(error.field(), "shift.loads[1].what");
    }
}
