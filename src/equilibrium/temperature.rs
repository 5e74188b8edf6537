//! A published constant moved to the bath's temperature and standard state.

use super::activity::ActivityModel;
use super::water::{debye_huckel_a_molal, density_kg_l, log10_kw};
use super::{GAS_CONSTANT, LN_10};
use crate::chemistry::{
    CHLORIDE, Constant, Convention, Interactions, PROTON, Reaction, SODIUM, WATER, charge_of,
};
use crate::quantity::kelvin;

/// How well a constant's temperature dependence is known.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum TemperatureBasis {
    /// Enthalpy and heat capacity, or a published function of temperature.
    Function,
    /// Enthalpy only (van 't Hoff).
    Enthalpy,
    /// Neither: the value is used as it is; hydrolysis still follows the ion product of water.
    None,
}

/// One constant, ready to be evaluated at any temperature.
#[derive(Clone, Debug, PartialEq)]
pub struct ConstantModel {
    /// ln K as published.
    pub ln_k: f64,
    /// Standard uncertainty of ln K.
    pub sigma_ln: f64,
    temperature_k: f64,
    ionic_strength: f64,
    convention: Convention,
    enthalpy: Option<f64>,
    heat_capacity: f64,
    has_heat_capacity: bool,
    /// Σ ν z² over solutes, and that of H⁺ alone.
    charge_square_change: f64,
    proton_change: f64,
    /// Σ ν Σ ε m over the ions of the medium that it was measured in, and that of H⁺ alone.
    interaction: (f64, f64),
    /// H⁺ set free from water: the reaction is moved in the form that consumes this many OH⁻.
    hydroxide_count: f64,
    is_water: bool,
}

impl ConstantModel {
    /// Prepares a published constant. `built_in_water` marks the program's own H2O = H⁺ + OH⁻, which follows
    /// the published formulation of the ion product instead of van 't Hoff.
    pub fn new(constant: &Constant, reaction: &Reaction, built_in_water: bool) -> Self {
        let solids = |token: &str| ["(s)", "(am)", "(cr)", "(g)"].iter().any(|end| token.ends_with(end));
        let charge_square_change: f64 = reaction
            .solutes()
            .filter(|(token, _)| !solids(token))
            .map(|(token, nu)| nu * charge_of(token) * charge_of(token))
            .sum();
        let proton_change = reaction.coefficient(PROTON);
        let consumes_water = reaction.coefficient(WATER) < 0.0;
        Self {
            ln_k: constant.log_k * LN_10,
            sigma_ln: constant.sigma * LN_10,
            temperature_k: kelvin(constant.temperature_c),
            ionic_strength: constant.ionic_strength,
            convention: constant.convention,
            enthalpy: constant.dh_kj.map(|kj| kj * 1e3),
            heat_capacity: constant.dcp_j.unwrap_or(0.0),
            has_heat_capacity: constant.dcp_j.is_some(),
            charge_square_change,
            proton_change,
            interaction: medium_interaction(constant, reaction, solids),
            hydroxide_count: if consumes_water && !built_in_water { proton_change.max(0.0) } else { 0.0 },
            is_water: built_in_water,
        }
    }

    /// ln K at a temperature in kelvin: the thermodynamic value for [`ActivityModel::Davies`]; for
    /// [`ActivityModel::AsMeasured`] the value with H⁺ as activity and all else as concentration, at the ionic
    /// strength of its measurement.
    pub fn ln_k_at(&self, temperature_k: f64, model: ActivityModel) -> f64 {
        if self.is_water {
            return log10_kw(temperature_k) * LN_10;
        }
        self.ln_k + self.convention_shift(model) + self.temperature_shift(temperature_k)
    }

    /// What the constant's temperature dependence rests on.
    pub fn temperature_basis(&self) -> TemperatureBasis {
        match self.enthalpy {
            _ if self.is_water => TemperatureBasis::Function,
            Some(_) if self.has_heat_capacity => TemperatureBasis::Function,
            Some(_) => TemperatureBasis::Enthalpy,
            None => TemperatureBasis::None,
        }
    }

    /// From the constant's own convention to the model's: ln K° = ln Kc + Σ ν ln γ at its own I and T.
    fn convention_shift(&self, model: ActivityModel) -> f64 {
        if model == ActivityModel::IonInteraction {
            return self.interaction_shift();
        }
        let davies = ActivityModel::Davies;
        let (per_square, _) = davies.ln_gamma_per_charge_squared(self.ionic_strength, self.temperature_k);
        let squares = match (model, self.convention) {
            (_, Convention::Thermodynamic) | (ActivityModel::AsMeasured, Convention::Mixed) => 0.0,
            (ActivityModel::AsMeasured, Convention::Concentration) => self.proton_change,
            (_, Convention::Concentration) => self.charge_square_change,
            (_, Convention::Mixed) => self.charge_square_change - self.proton_change,
        };
        -per_square * squares
    }

    /// The same by specific ion interaction with the medium of the measurement.
    fn interaction_shift(&self) -> f64 {
        let (t, water) = (self.temperature_k, density_kg_l(self.temperature_k));
        let (squares, interaction) = match self.convention {
            Convention::Thermodynamic => return 0.0,
            Convention::Concentration => (self.charge_square_change, self.interaction.0),
            Convention::Mixed => {
                (self.charge_square_change - self.proton_change, self.interaction.0 - self.interaction.1)
            }
        };
        let (per_square, _) =
            ActivityModel::IonInteraction.per_square(debye_huckel_a_molal(t), water, self.ionic_strength);
        LN_10 * interaction / water - per_square * squares
    }

    /// Van 't Hoff with constant heat capacity; reactions that set H⁺ free from water are extrapolated in the
    /// form that consumes OH⁻ (isocoulombic, small enthalpy) and moved back with the ion product at T.
    fn temperature_shift(&self, temperature_k: f64) -> f64 {
        let (t0, t, n) = (self.temperature_k, temperature_k, self.hydroxide_count);
        if (t - t0).abs() < 1e-9 {
            return 0.0;
        }
        // An enthalpy measured for the H⁺ form becomes that of the OH⁻ form; unknown, the OH⁻ form has none.
        let (enthalpy, heat_capacity) = match self.enthalpy {
            Some(h) if n > 0.0 => (
                h - n * WATER_ENTHALPY,
                if self.has_heat_capacity { self.heat_capacity - n * WATER_HEAT_CAPACITY } else { 0.0 },
            ),
            Some(h) => (h, self.heat_capacity),
            None => (0.0, 0.0),
        };
        let van_t_hoff = -enthalpy / GAS_CONSTANT * (1.0 / t - 1.0 / t0);
        let curvature = heat_capacity / GAS_CONSTANT * ((t / t0).ln() + t0 / t - 1.0);
        van_t_hoff + curvature + n * (log10_kw(t) - log10_kw(t0)) * LN_10
    }
}

/// Σ ν Σ ε I over the ions of a medium, kg/L, and that of H⁺ alone; uncharged species salt out. A medium that is not
/// named counts as sodium chloride.
fn medium_interaction(constant: &Constant, reaction: &Reaction, solid: impl Fn(&str) -> bool) -> (f64, f64) {
    let interactions = Interactions::built_in();
    let (cation, anion) = match constant.medium.as_str() {
        "KNO3" => ("K+", "NO3-"),
        "KCl" => ("K+", "Cl-"),
        "NaClO4" => (SODIUM, "ClO4-"),
        "NaNO3" => (SODIUM, "NO3-"),
        _ => (SODIUM, CHLORIDE),
    };
    let per_molar = |token: &str| match charge_of(token) {
        charge if charge > 0.0 => interactions.epsilon(token, anion).value,
        charge if charge < 0.0 => interactions.epsilon(cation, token).value,
        _ => interactions.neutral.value,
    };
    let strength = constant.ionic_strength;
    let all: f64 = reaction
        .solutes()
        .filter(|(token, _)| !solid(token))
        .map(|(token, nu)| nu * strength * per_molar(token))
        .sum();
    (all, reaction.coefficient(PROTON) * strength * per_molar(PROTON))
}

/// Enthalpy of H2O = H⁺ + OH⁻ at 25 °C, J/mol: Olofsson & Hepler, J. Solution Chem. 4 (1975) 127 (from memory).
const WATER_ENTHALPY: f64 = 55_800.0;
/// Heat capacity of the same reaction, J/(mol K), as above.
const WATER_HEAT_CAPACITY: f64 = -224.0;

#[cfg(test)]
mod tests {
    use super::*;
    use crate::chemistry::Basis;

    fn model(reaction: &str, log_k: f64, convention: Convention, dh_kj: Option<f64>) -> ConstantModel {
        let constant = Constant {
            reaction: reaction.into(),
            log_k,
            sigma: 0.1,
            temperature_c: 25.0,
            ionic_strength: if convention == Convention::Thermodynamic { 0.0 } else { 0.1 },
            medium: String::new(),
            convention,
            dh_kj,
            dcp_j: None,
            basis: Basis::Read,
            source: "test".into(),
            dh_basis: None,
            dh_source: None,
            note: String::new(),
        };
        ConstantModel::new(&constant, &Reaction::parse(reaction).unwrap(), false)
    }

    #[test]
    fn a_concentration_constant_returns_to_itself_at_its_own_ionic_strength() {
        let constant = model("Ni+2 + EDTA-4 = NiEDTA-2", 18.52, Convention::Concentration, None);
        let thermodynamic = constant.ln_k_at(298.15, ActivityModel::Davies);
        let (per_square, _) = ActivityModel::Davies.ln_gamma_per_charge_squared(0.1, 298.15);
        // Σ ν z² = 4 − 4 − 16 = −16, so the thermodynamic constant is larger.
        assert!((thermodynamic - 18.52 * LN_10 - 16.0 * per_square).abs() < 1e-12);
        assert!((constant.ln_k_at(298.15, ActivityModel::AsMeasured) - 18.52 * LN_10).abs() < 1e-12);
    }

    #[test]
    fn as_measured_turns_hydrogen_concentration_into_activity() {
        let constant = model("H+ + L- = HL", 9.0, Convention::Concentration, None);
        let shift = (constant.ln_k_at(298.15, ActivityModel::AsMeasured) - 9.0 * LN_10) / LN_10;
        assert!((shift - 0.107).abs() < 0.003, "{shift}");
    }

    #[test]
    fn hydrolysis_without_enthalpy_follows_the_ion_product_of_water() {
        let constant = model("Ni+2 + H2O = NiOH+ + H+", -9.9, Convention::Thermodynamic, None);
        let shift = constant.ln_k_at(368.15, ActivityModel::Davies) / LN_10 + 9.9;
        assert!((shift - (log10_kw(368.15) - log10_kw(298.15))).abs() < 1e-9);
        assert_eq!(constant.temperature_basis(), TemperatureBasis::None);
    }
}
