//! The acid or alkali that a dose makes necessary, and the pH that the tank shows between two additions.
//!
//! With pH held, the hydrogen that the bath holds before and after is known from the equilibrium; what a dose brings
//! more than that has to be taken out with alkali, what it lacks to be put in with acid. The product brings its own
//! ions along (potassium that pairs, phosphate that precipitates, ammonia that binds), so its amount is the root of
//! that balance and not a quotient.

use super::resolve::{Bath, Solids};
use crate::chemistry::Product;
use crate::equilibrium::{Constants, EquilibriumError, Solver};

/// A product that brings the pH back, with what one gram of it releases.
#[derive(Clone, Debug, PartialEq)]
pub struct Adjuster {
    /// The bought product.
    pub product: Product,
    /// Moles of each system component per gram of product.
    pub per_gram: Vec<f64>,
}

/// The pH correction of a dose.
#[derive(Clone, Debug, PartialEq)]
pub struct Adjustment {
    /// The product to add.
    pub product: Product,
    /// Grams of it per litre of bath.
    pub dose_g_l: f64,
}

/// A bath with its doses and the correction of its pH.
#[derive(Clone, Debug, PartialEq)]
pub struct Corrected {
    /// Totals with doses and correction, mol/L.
    pub totals: Vec<f64>,
    /// The correction; `None` when the pH is not held or none is needed.
    pub adjustment: Option<Adjustment>,
    /// Why the pH can't be brought back, when the product at hand can't do it.
    pub failure: Option<String>,
}

/// A dose that moves the pH by less than this needs no correction: no meter in a shop shows it.
const NEGLIGIBLE_PH: f64 = 0.02;
/// Most of a product that is tried, g/L.
const MOST_G_L: f64 = 1000.0;
/// Steps of the root search, and its relative width at the end.
const ROOT_STEPS: usize = 60;
const ROOT_WIDTH: f64 = 1e-10;

/// The hydrogen balance at the set point.
struct Balance<'a> {
    bath: &'a Bath,
    constants: Constants,
    solver: Solver,
    ph: f64,
    proton: usize,
    /// Moles of H⁺ per litre that the bath as it stands holds beyond what its recipe lists.
    unlisted: f64,
}

impl<'a> Balance<'a> {
    /// `None` when the pH is not held.
    fn new(bath: &'a Bath) -> Result<Option<Self>, EquilibriumError> {
        let (Some(ph), Some(proton)) = (bath.ph_set(), bath.system.proton) else { return Ok(None) };
        let constants = bath.constants_at(bath.project.tank.temperature_c.set);
        let mut balance = Self { bath, constants, solver: Solver::new(), ph, proton, unlisted: 0.0 };
        balance.unlisted = balance.held(&bath.contents)? - bath.contents[proton];
        Ok(Some(balance))
    }

    /// Moles of H⁺ per litre that given totals hold at the set pH.
    fn held(&mut self, totals: &[f64]) -> Result<f64, EquilibriumError> {
        let solution =
            self.bath.solve_totals(&mut self.solver, &self.constants, totals, Some(self.ph), Solids::Real)?;
        // What the air brings is there without a product, as the recipe's own hydrogen is: carbonic acid calls for alkali.
        Ok(solution.totals[self.proton] - solution.taken_up(&self.bath.system, self.proton))
    }

    /// H⁺ that the set pH wants beyond what is there: negative when alkali is needed.
    fn wanted(&mut self, totals: &[f64]) -> Result<f64, EquilibriumError> {
        Ok(self.held(totals)? - totals[self.proton] - self.unlisted)
    }

    /// The pH that given totals have when nothing holds it.
    fn ph_of(&mut self, totals: &[f64]) -> Result<f64, EquilibriumError> {
        let mut totals = totals.to_vec();
        totals[self.proton] += self.unlisted;
        let solution =
            self.bath.solve_totals(&mut self.solver, &self.constants, &totals, None, Solids::Real)?;
        Ok(solution.ph(self.proton))
    }

    /// Grams per litre of a product that bring the balance to zero, if any amount does.
    fn root(&mut self, start: &[f64], adjuster: &Adjuster) -> Result<Option<f64>, EquilibriumError> {
        let mut at = |grams: f64| {
            let totals = with(start, adjuster, grams);
            self.wanted(&totals)
        };
        let (mut low, mut f_low) = (0.0, at(0.0)?);
        let (mut high, mut f_high) = (1e-3, at(1e-3)?);
        while f_low.signum() == f_high.signum() {
            if high > MOST_G_L {
                return Ok(None);
            }
            (low, f_low) = (high, f_high);
            high *= 4.0;
            f_high = at(high)?;
        }
        // Regula falsi with the weight of a stuck end halved (Illinois rule).
        let (mut w_low, mut w_high) = (f_low, f_high);
        for _ in 0..ROOT_STEPS {
            let middle = (low * w_high - high * w_low) / (w_high - w_low);
            let f = at(middle)?;
            if f == 0.0 || high - low <= ROOT_WIDTH * high {
                return Ok(Some(middle));
            }
            if f.signum() == f_low.signum() {
                (low, f_low, w_low) = (middle, f, f);
                w_high *= 0.5;
            } else {
                (high, f_high, w_high) = (middle, f, f);
                w_low *= 0.5;
            }
            if f.signum() != w_low.signum() && f.signum() != w_high.signum() {
                (w_low, w_high) = (f_low, f_high);
            }
        }
        Ok(Some(0.5 * (low + high)))
    }
}

/// Totals with some grams per litre of a product.
fn with(totals: &[f64], adjuster: &Adjuster, grams: f64) -> Vec<f64> {
    totals.iter().zip(&adjuster.per_gram).map(|(total, per_gram)| total + grams * per_gram).collect()
}

impl Bath {
    /// The bath with doses in g/L and with the acid or alkali that brings it back to its set pH.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn corrected(&self, doses: &[f64]) -> Result<Corrected, EquilibriumError> {
        let totals = self.totals(doses);
        let as_it_is = |totals| Corrected { totals, adjustment: None, failure: None };
        if doses.iter().all(|dose| *dose == 0.0) {
            return Ok(as_it_is(totals));
        }
        let Some(mut balance) = Balance::new(self)? else { return Ok(as_it_is(totals)) };
        let left_alone = balance.ph_of(&totals)?;
        if (left_alone - balance.ph).abs() < NEGLIGIBLE_PH {
            return Ok(as_it_is(totals));
        }
        let adjuster = if left_alone < balance.ph { &self.alkali } else { &self.acid };
        match balance.root(&totals, adjuster)? {
            Some(dose_g_l) => Ok(Corrected {
                totals: with(&totals, adjuster, dose_g_l),
                adjustment: Some(Adjustment { product: adjuster.product.clone(), dose_g_l }),
                failure: None,
            }),
            None => Ok(Corrected {
                totals,
                adjustment: None,
                failure: Some(format!(
                    "{} can't bring the pH back to {}; choose a stronger product under adjust",
                    adjuster.product.name,
                    crate::quantity::plain(balance.ph, 2)
                )),
            }),
        }
    }

    /// The pH that the tank reads after doses in g/L and some grams per litre of the product that `adjustment` names;
    /// `None` when the pH is not held.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn ph_after(
        &self,
        doses: &[f64],
        adjustment: Option<&Adjustment>,
    ) -> Result<Option<f64>, EquilibriumError> {
        let Some(mut balance) = Balance::new(self)? else { return Ok(None) };
        let mut totals = self.totals(doses);
        if let Some(Adjustment { product, dose_g_l }) = adjustment {
            let adjuster = if *product == self.alkali.product { &self.alkali } else { &self.acid };
            totals = with(&totals, adjuster, *dose_g_l);
        }
        balance.ph_of(&totals).map(Some)
    }
}

#[cfg(test)]
mod tests {
    use crate::bath::{Adjust, Air, Bath, Demo};

    fn copper_strike(alkali: &str) -> Bath {
        let mut project = Demo::named("copper_strike.ron").unwrap().project().unwrap();
        project.adjust = Adjust { alkali: alkali.to_owned(), ..project.adjust };
        Bath::resolve(&project).unwrap()
    }

    #[test]
    fn after_dose_and_correction_the_tank_reads_its_set_ph() {
        for alkali in ["koh-45", "naoh-50", "k2co3", "ammonia-25"] {
            let bath = copper_strike(alkali);
            let doses = [10.0, 0.0];
            let corrected = bath.corrected(&doses[..bath.agents.len()]).unwrap();
            let adjustment = corrected.adjustment.expect("an acid agent calls for alkali");
            assert_eq!(adjustment.product.id, alkali);
            let ph = bath.ph_after(&doses[..bath.agents.len()], Some(&adjustment)).unwrap().unwrap();
            assert!((ph - bath.ph_set().unwrap()).abs() < 1e-6, "{alkali}: {ph}");
            let alone = bath.ph_after(&doses[..bath.agents.len()], None).unwrap().unwrap();
            assert!(alone < ph - 0.1, "{alkali}: {alone}");
        }
    }

    #[test]
    fn a_bath_in_air_is_brought_back_to_its_set_ph_too() {
        let mut project = Demo::named("copper_strike.ron").unwrap().project().unwrap();
        project.tank.air = Air::Open { co2_bar: 4.2e-4 };
        let bath = Bath::resolve(&project).unwrap();
        let mut doses = bath.doses();
        doses[0] = 10.0;
        let adjustment = bath.corrected(&doses).unwrap().adjustment.expect("an acid agent calls for alkali");
        let ph = bath.ph_after(&doses, Some(&adjustment)).unwrap().unwrap();
        assert!((ph - bath.ph_set().unwrap()).abs() < 1e-6, "{ph}");
    }

    #[test]
    fn a_product_that_can_not_bring_the_ph_back_is_named() {
        let bath = copper_strike("nacl");
        let mut doses = bath.doses();
        doses[0] = 10.0;
        let corrected = bath.corrected(&doses).unwrap();
        assert!(corrected.adjustment.is_none());
        assert!(corrected.failure.unwrap().contains("can't bring the pH back"));
    }
}
