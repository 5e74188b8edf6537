//! The well-stirred tank between two moments.
//!
//! What is dissolved of a component obeys dD/dt = a − b D with a = (inflow · c_in + load) / V and
//! b = outflow / V + decay (a mass balance over the tank; volume held), so that
//! D(t) = D₀ e^(−bt) + a (1 − e^(−bt)) / b exactly. Solids stay in the tank; their amount is taken from the beginning
//! of the step.

use crate::bath::{Bath, Running};
use crate::equilibrium::{Equilibrium, EquilibriumError};

/// What is in the tank.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Contents {
    /// Totals by system component, mol/L.
    pub totals: Vec<f64>,
    /// Grams of each agent's product per litre of bath that the doses have brought and the shift has left.
    pub doses: Vec<f64>,
}

impl Contents {
    /// The bath as it stands with its doses and the pH brought back.
    pub fn at_start(bath: &Bath) -> Result<Self, EquilibriumError> {
        let doses = bath.doses();
        Ok(Self { totals: bath.corrected(&doses)?.totals, doses })
    }

    /// The contents some hours later; `bound` is what solids hold of each component, mol/L.
    pub fn later(&self, running: &Running, bound: &[f64], hours: f64) -> Self {
        let wash_out = running.out_l_h / running.volume_l;
        let proton = running.bath.system.proton;
        let totals = self.totals.iter().enumerate().map(|(i, total)| {
            let fed = inflow(running, i);
            let rate = wash_out + running.decay_h[i];
            let dissolved = total - bound[i];
            let later = bound[i] + dissolved * (-rate * hours).exp() + fed * hours * mean_decay(rate * hours);
            // The total of hydrogen ions may be negative: alkali is counted there.
            if proton == Some(i) { later } else { later.max(0.0) }
        });
        let doses = self.doses.iter().zip(&running.bath.agents).map(|(dose, agent)| {
            dose * (-(wash_out + running.decay_h.get(agent.active).copied().unwrap_or(0.0)) * hours).exp()
        });
        Self { totals: totals.collect(), doses: doses.collect() }
    }

    /// Components that are used up before some hours have passed, with the hour.
    pub fn used_up(&self, running: &Running, bound: &[f64], hours: f64) -> Vec<(usize, f64)> {
        let wash_out = running.out_l_h / running.volume_l;
        let known = |i: &usize| running.bath.system.proton != Some(*i) && self.totals[*i] > 0.0;
        (0..self.totals.len())
            .filter(known)
            .filter_map(|i| {
                let fed = inflow(running, i);
                let rate = wash_out + running.decay_h[i];
                let dissolved = (self.totals[i] - bound[i]).max(0.0);
                let asked = dissolved / -fed;
                let hour = if rate * asked < 1e-9 { asked } else { (1.0 + rate * asked).ln() / rate };
                (fed < 0.0 && hour <= hours).then_some((i, hour))
            })
            .collect()
    }
}

/// What comes in of a component, mol/L per hour.
fn inflow(running: &Running, component: usize) -> f64 {
    (running.in_l_h * running.water[component] + running.load_mol_h[component]) / running.volume_l
}

/// (1 − e^(−x)) / x, 1 at zero.
fn mean_decay(x: f64) -> f64 {
    if x.abs() < 1e-12 { 1.0 } else { -(-x).exp_m1() / x }
}

/// What solids hold of each component, mol/L.
pub fn bound(bath: &Bath, solution: &Equilibrium) -> Vec<f64> {
    let mut bound = vec![0.0; bath.system.components.len()];
    for (solid, amount) in bath.system.solids.iter().zip(&solution.solids).filter(|(_, n)| **n > 0.0) {
        for &(i, nu) in &solid.components {
            bound[i] += nu * amount;
        }
    }
    bound
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bath::{Demo, Load, Rate, Shift, Trust, Water};
    use crate::quantity::Amount;

    fn cleaner() -> Bath {
        Bath::resolve(&Demo::named("hard_water_cleaner.ron").unwrap().project().unwrap()).unwrap()
    }

    fn shift() -> Shift {
        Shift {
            drag_out_l_h: 30.0,
            evaporation_l_h: 45.0,
            agent_loss_percent_per_shift: 10.0,
            make_up_water: Water { hardness: Amount::parse("14 °dH").unwrap(), magnesium_share: 0.2 },
            ..Shift::default()
        }
    }

    /// Each step solves the balance exactly, so that steps of any length end at the closed form of the stirred tank,
    /// c(t) = c_in + (c₀ − c_in) e^(−qt/V) for water in = water out. What differs is rounding: 120 steps of a few
    /// operations at 2⁻⁵³ each, below 1e-13 of the concentration.
    #[test]
    fn steps_end_at_the_closed_form_of_a_stirred_tank() {
        let bath = cleaner();
        let rinsing = Shift { evaporation_l_h: 0.0, agent_loss_percent_per_shift: 0.0, ..shift() };
        let running = bath.running(&rinsing).unwrap();
        let mut contents = Contents::at_start(&running.bath).unwrap();
        let start = contents.clone();
        let none = vec![0.0; contents.totals.len()];
        for _ in 0..120 {
            contents = contents.later(&running, &none, 1.0);
        }
        let calcium = running.bath.system.component("Ca+2").unwrap();
        let c_in = 0.8 * 14.0 * 0.010 / 56.077;
        let washed = (-30.0 * 120.0 / 2400.0f64).exp();
        let expected = c_in + (start.totals[calcium] - c_in) * washed;
        assert!((contents.totals[calcium] / expected - 1.0).abs() < 1e-13);
        let gluconate = running.bath.system.component("Gluc-").unwrap();
        assert!((contents.totals[gluconate] / (start.totals[gluconate] * washed) - 1.0).abs() < 1e-13);
    }

    #[test]
    fn wear_takes_its_share_of_an_agent_in_a_shift_and_evaporation_takes_none() {
        let bath = cleaner();
        let running = bath.running(&Shift { drag_out_l_h: 0.0, ..shift() }).unwrap();
        let contents = Contents::at_start(&running.bath).unwrap();
        let none = vec![0.0; contents.totals.len()];
        let later = contents.later(&running, &none, 8.0);
        let at = |token: &str| running.bath.system.component(token).unwrap();
        assert!((later.totals[at("Gluc-")] / contents.totals[at("Gluc-")] - 0.9).abs() < 1e-12);
        assert_eq!(later.totals[at("CO3-2")], contents.totals[at("CO3-2")]);
        let brought = 8.0 * 45.0 * 14.0 * 0.010 / 56.077 / 2400.0;
        let more = later.totals[at("Ca+2")] - contents.totals[at("Ca+2")];
        assert!((more / (0.8 * brought) - 1.0).abs() < 1e-4);
    }

    #[test]
    fn solids_are_not_dragged_out() {
        let bath = cleaner();
        let running = bath.running(&Shift { drag_out_l_h: 2400.0, ..Shift::default() }).unwrap();
        let contents = Contents::at_start(&running.bath).unwrap();
        let calcium = running.bath.system.component("Ca+2").unwrap();
        let mut bound = vec![0.0; contents.totals.len()];
        bound[calcium] = 0.75 * contents.totals[calcium];
        let later = contents.later(&running, &bound, 40.0);
        assert!((later.totals[calcium] / bound[calcium] - 1.0).abs() < 1e-12);
    }

    #[test]
    fn what_is_used_up_runs_out_at_the_hour_of_the_balance_and_never_falls_below_zero() {
        let bath = cleaner();
        let load = Load {
            what: "calcium".to_owned(),
            rate: Rate::GramsPerHour(-20.0),
            trust: Trust::Assumed,
            note: String::new(),
        };
        let running =
            bath.running(&Shift { loads: vec![load], drag_out_l_h: 100.0, ..Shift::default() }).unwrap();
        let contents = Contents::at_start(&running.bath).unwrap();
        let calcium = running.bath.system.component("Ca+2").unwrap();
        let none = vec![0.0; contents.totals.len()];
        let used_up = contents.used_up(&running, &none, 24.0);
        let [(component, hour)] = used_up[..] else { panic!("{used_up:?}") };
        assert_eq!(component, calcium);
        assert!(contents.later(&running, &none, 0.999 * hour).totals[calcium] > 0.0);
        assert_eq!(contents.later(&running, &none, 1.001 * hour).totals[calcium], 0.0);
        assert!(contents.used_up(&running, &none, 0.9 * hour).is_empty());
    }
}
