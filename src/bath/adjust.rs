//! The acid or alkali that a dose makes necessary, and the pH that the tank shows between two additions.
//!
//! With pH held, the hydrogen that the bath holds before and after is known from the equilibrium; what a dose brings
//! more than that has to be taken out with alkali, what it lacks to be put in with acid. The product brings its own
//! ions along (potassium that pairs, phosphate that precipitates, ammonia that binds), so its amount is the root of
//! that balance and not a quotient.

use super::resolve::Bath;
use super::solving::{Points, Solids};
use crate::chemistry::Product;
use crate::equilibrium::{Constants, Equilibrium, EquilibriumError};

/// A product that brings the pH back, with what one gram of it releases.
#[derive(Clone, Debug, PartialEq)]
pub struct Adjuster {
    /// The bought product.
    pub product: Product,
    /// Moles of each system component per gram of product.
    pub per_gram: Vec<f64>,
    /// Litres that one gram of product adds to the bath.
    pub litres_per_gram: f64,
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
    /// Volume after the additions over that before.
    pub dilution: f64,
    /// The correction; `None` when the pH is not held or none is needed.
    pub adjustment: Option<Adjustment>,
    /// Why the pH can't be brought back, when the product at hand can't do it.
    pub failure: Option<String>,
}

/// Totals after additions, and the volume that they made of one litre.
#[derive(Clone, Debug, Default, PartialEq)]
pub(super) struct Mixed {
    pub totals: Vec<f64>,
    pub dilution: f64,
}

/// Which end of a bracket stayed.
#[derive(Clone, Copy, PartialEq)]
enum End {
    Low,
    High,
}

/// A dose that moves the pH by less than this needs no correction: no meter in a shop shows it.
const NEGLIGIBLE_PH: f64 = 0.02;
/// Most of a product that is tried, g/L.
const MOST_G_L: f64 = 1000.0;
/// Steps of the root search, and its relative width at the end.
const ROOT_STEPS: usize = 60;
const ROOT_WIDTH: f64 = 1e-11;
/// The same of the secant that goes before it; a width of the last step.
const SECANT_STEPS: usize = 12;
const SECANT_WIDTH: f64 = 1e-6;
/// Steps from the last correction before a whole search for the next.
const SHORT_STEPS: usize = 4;

/// The hydrogen balance of a bath at its set point, kept for many doses.
#[derive(Clone, Debug)]
pub struct Corrector<'a> {
    bath: &'a Bath,
    /// What the balance needs; `None` when the pH is not held.
    balance: Option<Balance<'a>>,
}

#[derive(Clone, Debug)]
struct Balance<'a> {
    constants: Constants,
    points: Points<'a>,
    solution: Equilibrium,
    ph: f64,
    proton: usize,
    /// Moles of H⁺ per litre that the bath as it stands holds beyond what its recipe lists.
    unlisted: f64,
    /// The last root over what the hydrogen of the product alone would ask for: close to that of the next dose.
    share: f64,
    last: Option<Last>,
}

impl<'a> Corrector<'a> {
    /// Solves the bath as it stands.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn new(bath: &'a Bath) -> Result<Self, EquilibriumError> {
        let (Some(ph), Some(proton)) = (bath.ph_set(), bath.system.proton) else {
            return Ok(Self { bath, balance: None });
        };
        let mut balance = Balance {
            constants: bath.constants_at(bath.project.tank.temperature_c.set),
            points: Points::new(bath, Solids::Real),
            solution: Equilibrium::default(),
            ph,
            proton,
            unlisted: 0.0,
            share: 1.0,
            last: None,
        };
        balance.unlisted = balance.held(&bath.contents, ph)? - bath.contents[proton];
        Ok(Self { bath, balance: Some(balance) })
    }

    /// The bath with doses in g/L and with the acid or alkali that brings it back to its set pH.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn corrected(&mut self, doses: &[f64]) -> Result<Corrected, EquilibriumError> {
        let Mixed { totals, dilution } = self.bath.mixed(doses, None);
        let Some(balance) = self.balance.as_mut().filter(|_| doses.iter().any(|dose| *dose != 0.0)) else {
            return Ok(Corrected { totals, dilution, adjustment: None, failure: None });
        };
        let mixed = Mixed { totals, dilution };
        // Left alone the bath is more acid than its set pH when it holds more hydrogen than that pH wants.
        let wanted = balance.wanted(&mixed, balance.ph)?;
        let (adjuster, other_ph) = if wanted < 0.0 {
            (&self.bath.alkali, balance.ph - NEGLIGIBLE_PH)
        } else {
            (&self.bath.acid, balance.ph + NEGLIGIBLE_PH)
        };
        // No addition is asked for where no meter shows the difference. It is counted all the same: what the bath is
        // must not jump where a correction begins to be worth while.
        let negligible = wanted == 0.0 || wanted.signum() != balance.wanted(&mixed, other_ph)?.signum();
        let root =
            if wanted == 0.0 { Some(0.0) } else { balance.root(self.bath, doses, adjuster, wanted)? };
        Ok(match root {
            Some(dose_g_l) => {
                let Mixed { totals, dilution } = self.bath.mixed(doses, Some((adjuster, dose_g_l)));
                let adjustment = Adjustment { product: adjuster.product.clone(), dose_g_l };
                let adjustment = Some(adjustment).filter(|_| !negligible);
                Corrected { totals, dilution, adjustment, failure: None }
            }
            None => Corrected {
                totals: mixed.totals,
                dilution: mixed.dilution,
                adjustment: None,
                failure: (!negligible).then(|| {
                    format!(
                        "{} can't bring the pH back to {}; choose a stronger product under adjust",
                        adjuster.product.name,
                        crate::quantity::plain(balance.ph, 2)
                    )
                }),
            },
        })
    }
}

impl<'a> Corrector<'a> {
    /// Totals with doses in g/L and with the acid or alkali that brings the pH back, and the volume that they made of one
    /// litre: [`Corrector::corrected`] for a search, which starts from the last doses and asks no name of a product.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn balanced(&mut self, doses: &[f64]) -> Result<(Vec<f64>, f64), EquilibriumError> {
        if let Some(balance) = self.balance.as_mut().filter(|_| doses.iter().any(|dose| *dose != 0.0)) {
            if let Some(Mixed { totals, dilution }) = balance.near_last(self.bath, doses)? {
                return Ok((totals, dilution));
            }
            let before = self.bath.mixed(doses, None);
            let wanted = balance.wanted(&before, balance.ph)?;
            let alkali = wanted < 0.0;
            let adjuster = if alkali { &self.bath.alkali } else { &self.bath.acid };
            if wanted != 0.0
                && let Some(grams) = balance.root(self.bath, doses, adjuster, wanted)?
            {
                balance.remember(alkali, doses, grams, wanted / -grams);
                let Mixed { totals, dilution } = self.bath.mixed(doses, Some((adjuster, grams)));
                return Ok((totals, dilution));
            }
            balance.last = None;
        }
        let Mixed { totals, dilution } = self.bath.mixed(doses, None);
        Ok((totals, dilution))
    }
}

/// The correction of the last doses, from which the next ones start.
#[derive(Clone, Debug)]
struct Last {
    alkali: bool,
    doses: Vec<f64>,
    grams: f64,
    /// Change of what is wanted per gram.
    slope: f64,
    /// Change of the grams per gram of each agent, as far as it was seen.
    per_dose: Vec<f64>,
}

impl Balance<'_> {
    /// The mixture of doses near the last ones, by a step or two from what these needed; `None` where that does not lead
    /// there: the first time, or where acid takes the place of alkali.
    fn near_last(&mut self, bath: &Bath, doses: &[f64]) -> Result<Option<Mixed>, EquilibriumError> {
        let Some(last) = self.last.take() else { return Ok(None) };
        let adjuster = if last.alkali { &bath.alkali } else { &bath.acid };
        let moved = doses.iter().zip(&last.doses).zip(&last.per_dose);
        let change: f64 = moved.map(|((now, then), per_dose)| per_dose * (now - then)).sum();
        let (mut grams, mut slope) = (last.grams + change, last.slope);
        let mut before: Option<(f64, f64)> = None;
        for _ in 0..SHORT_STEPS {
            if !(grams > 0.0 && grams <= MOST_G_L) {
                return Ok(None);
            }
            let f = self.wanted(&bath.mixed(doses, Some((adjuster, grams))), self.ph)?;
            if let Some((x, g)) = before.filter(|(x, _)| *x != grams) {
                slope = (f - g) / (grams - x);
            }
            let next = grams - f / slope;
            if next <= 0.0 || next.is_nan() {
                return Ok(None);
            }
            if (next - grams).abs() <= SECANT_WIDTH * next {
                self.last = Some(last);
                self.remember(adjuster.product == bath.alkali.product, doses, next, slope);
                return Ok(Some(bath.mixed(doses, Some((adjuster, next)))));
            }
            before = Some((grams, f));
            grams = next;
        }
        Ok(None)
    }

    /// Keeps a correction, and what it says of the agent that alone was moved.
    fn remember(&mut self, alkali: bool, doses: &[f64], grams: f64, slope: f64) {
        let mut per_dose = vec![0.0; doses.len()];
        if let Some(last) = self.last.take().filter(|last| last.alkali == alkali) {
            per_dose = last.per_dose;
            let moved: Vec<usize> = (0..doses.len()).filter(|&i| doses[i] != last.doses[i]).collect();
            if let [agent] = moved[..] {
                per_dose[agent] = (grams - last.grams) / (doses[agent] - last.doses[agent]);
            }
        }
        self.last = Some(Last { alkali, doses: doses.to_vec(), grams, slope, per_dose });
    }

    /// Moles of H⁺ per litre that given totals hold at a pH.
    fn held(&mut self, totals: &[f64], ph: f64) -> Result<f64, EquilibriumError> {
        self.points.solve_into(&self.constants, totals, Some(ph), &mut self.solution)?;
        // What the air brings is there without a product, as the recipe's own hydrogen is: carbonic acid calls for alkali.
        let of_the_air = self.solution.taken_up(&self.points.bath().system, self.proton);
        Ok(self.solution.totals[self.proton] - of_the_air)
    }

    /// H⁺ that a pH wants beyond what is there: negative when alkali is needed.
    fn wanted(&mut self, mixed: &Mixed, ph: f64) -> Result<f64, EquilibriumError> {
        let there = mixed.totals[self.proton] + self.unlisted / mixed.dilution;
        Ok(self.held(&mixed.totals, ph)? - there)
    }

    /// The pH that a mixture has when nothing holds it.
    fn ph_of(&mut self, mut mixed: Mixed) -> Result<f64, EquilibriumError> {
        mixed.totals[self.proton] += self.unlisted / mixed.dilution;
        self.points.solve_into(&self.constants, &mixed.totals, None, &mut self.solution)?;
        Ok(self.solution.ph(self.proton))
    }

    /// Grams per litre of a product that bring the balance to zero, if any amount does, from what is wanted without it.
    fn root(
        &mut self,
        bath: &Bath,
        doses: &[f64],
        adjuster: &Adjuster,
        wanted: f64,
    ) -> Result<Option<f64>, EquilibriumError> {
        let ph = self.ph;
        // Strong acid and alkali bring nothing but their hydrogen, so this is nearly the answer.
        let straight = wanted / adjuster.per_gram[self.proton];
        let guess = straight * self.share;
        let mut at = |grams: f64| self.wanted(&bath.mixed(doses, Some((adjuster, grams))), ph);
        let found = match guess.is_finite() && guess > 0.0 {
            true => secant_root(wanted, guess, &mut at)?,
            false => None,
        };
        let root = match found {
            Some(root) => Some(root),
            None => enclosed_root(wanted, at)?,
        };
        if let Some(root) = root.filter(|_| guess.is_finite()) {
            self.share = root / straight;
        }
        Ok(root)
    }
}

/// The root of a nearly straight balance that is `f_zero` at nothing, from a guess; `None` where that leads nowhere.
fn secant_root<E>(
    f_zero: f64,
    guess: f64,
    at: &mut impl FnMut(f64) -> Result<f64, E>,
) -> Result<Option<f64>, E> {
    let ((mut x_old, mut f_old), mut x) = ((0.0, f_zero), guess);
    for _ in 0..SECANT_STEPS {
        if !(x > 0.0 && x <= MOST_G_L) {
            return Ok(None);
        }
        let f = at(x)?;
        let next = x - f * (x - x_old) / (f - f_old);
        // The error left is about the product of the last two.
        if f == 0.0 || (next - x).abs() <= SECANT_WIDTH * x {
            return Ok(Some(if next.is_finite() { next } else { x }));
        }
        ((x_old, f_old), x) = ((x, f), next);
    }
    Ok(None)
}

/// The root by enclosing it and regula falsi, the weight of a stuck end halved (Illinois rule); `None` when no amount up to
/// the most turns the sign.
fn enclosed_root<E>(f_zero: f64, mut at: impl FnMut(f64) -> Result<f64, E>) -> Result<Option<f64>, E> {
    let ((mut low, mut f_low), mut high) = ((0.0, f_zero), 1e-3);
    let mut f_high = at(high)?;
    while f_low.signum() == f_high.signum() {
        if high > MOST_G_L {
            return Ok(None);
        }
        (low, f_low) = (high, f_high);
        high *= 4.0;
        f_high = at(high)?;
    }
    let (mut w_low, mut w_high) = (f_low, f_high);
    let mut stuck = None;
    for _ in 0..ROOT_STEPS {
        let middle = (low * w_high - high * w_low) / (w_high - w_low);
        let f = at(middle)?;
        if f == 0.0 || high - low <= ROOT_WIDTH * high {
            return Ok(Some(middle));
        }
        if f.signum() == f_low.signum() {
            (low, f_low) = (middle, f);
            (w_low, w_high) = (f, if stuck == Some(End::High) { 0.5 * w_high } else { f_high });
            stuck = Some(End::High);
        } else {
            (high, f_high) = (middle, f);
            (w_high, w_low) = (f, if stuck == Some(End::Low) { 0.5 * w_low } else { f_low });
            stuck = Some(End::Low);
        }
    }
    Ok(Some(0.5 * (low + high)))
}

impl Bath {
    /// The bath with doses in g/L and with the acid or alkali that brings it back to its set pH; a [`Corrector`] answers
    /// for many doses.
    ///
    /// # Errors
    /// [`EquilibriumError`] for an ill-posed bath.
    pub fn corrected(&self, doses: &[f64]) -> Result<Corrected, EquilibriumError> {
        Corrector::new(self)?.corrected(doses)
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
        let Some(mut balance) = Corrector::new(self)?.balance else { return Ok(None) };
        let added = adjustment.map(|Adjustment { product, dose_g_l }| {
            let adjuster = if *product == self.alkali.product { &self.alkali } else { &self.acid };
            (adjuster, *dose_g_l)
        });
        balance.ph_of(self.mixed(doses, added)).map(Some)
    }

    /// Totals with doses in g/L and some grams per litre of acid or alkali, in the volume that they make.
    pub(super) fn mixed(&self, doses: &[f64], added: Option<(&Adjuster, f64)>) -> Mixed {
        let mut mixed = Mixed { totals: self.contents.clone(), dilution: 1.0 };
        let agents = self.agents.iter().zip(doses);
        let parts = agents
            .map(|(agent, dose)| (*dose, &agent.per_gram, agent.litres_per_gram))
            .chain(added.map(|(adjuster, grams)| (grams, &adjuster.per_gram, adjuster.litres_per_gram)));
        for (grams, per_gram, litres_per_gram) in parts {
            mixed.totals.iter_mut().zip(per_gram).for_each(|(total, part)| *total += grams * part);
            mixed.dilution += grams * litres_per_gram;
        }
        mixed.totals.iter_mut().for_each(|total| *total /= mixed.dilution);
        mixed
    }
}

#[cfg(test)]
mod tests {
    use crate::bath::{Adjust, Air, Bath, Corrector, Demo};

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
    fn a_walk_of_doses_is_balanced_as_each_of_them_alone() {
        for alkali in ["koh-45", "ammonia-25"] {
            let bath = copper_strike(alkali);
            let mut corrector = Corrector::new(&bath).unwrap();
            for step in [1.0, 1.5, 7.0, 40.0, 39.9, 0.0, 0.01, 80.0] {
                for other in [0.0, 2.0] {
                    let doses = [step, other];
                    let (totals, dilution) = corrector.balanced(&doses).unwrap();
                    let alone = bath.corrected(&doses).unwrap();
                    assert!((dilution - alone.dilution).abs() < 1e-9);
                    for (found, expected) in totals.iter().zip(&alone.totals) {
                        assert!(
                            (found - expected).abs() < 1e-8 * expected.abs().max(1e-3),
                            "{alkali} {doses:?}"
                        );
                    }
                }
            }
        }
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
