//! Activity coefficients of ions, as functions of a few sums over concentrations.
//!
//! Davies needs one sum, the ionic strength. Specific ion interaction needs beside it, for every class of ions with the
//! same coefficients, the sum of coefficient times concentration over all ions. Both are then
//! −ln γⱼ = zⱼ² P(I) + nⱼ I − f(I) s_class(j), which is all that the solver and the derivatives have to know.
//!
//! For given coefficients an equilibrium has one answer; coefficients that depend on the answer can give more than one.
//! With invented interaction coefficients and very high charges that was seen now and then, and the result is then the
//! one on the side of the start.

use super::LN_10;
use super::problem::Problem;
use super::system::Constants;
use super::water::debye_huckel_a;
use serde::{Deserialize, Serialize};

/// Which correction for ionic strength is made.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
pub enum ActivityModel {
    /// Constants are used at the ionic strength they were measured at, H⁺ as activity, no correction.
    AsMeasured,
    /// Davies, J. Chem. Soc. 1938, 2093 with the coefficient 0.3 (Davies, Ion Association, 1962).
    #[default]
    Davies,
    /// Specific ion interaction: Brønsted, Guggenheim and Scatchard's equation with Ciavatta's denominator, Ann. Chim.
    /// (Rome) 70 (1980) 551.
    IonInteraction,
}

/// Ionic strength in mol/L above which the Davies bracket is held at its value here, and a flag is raised: the
/// linear term would turn activity coefficients far above one in strong baths.
pub const DAVIES_LIMIT: f64 = 0.5;
/// Ionic strength in mol/kg up to which specific ion interaction is recommended (OECD Nuclear Energy Agency, TDB-2).
pub const ION_INTERACTION_LIMIT: f64 = 3.5;
/// Ionic strength in mol/kg above which the interaction terms are held: no coefficient was fitted so far out.
const ION_INTERACTION_HELD: f64 = 6.0;

/// Coefficient of the linear term of the Davies equation.
const DAVIES_LINEAR: f64 = 0.3;
/// Denominator of the Debye–Hückel term of specific ion interaction, kg^½ mol^−½.
const SCATCHARD: f64 = 1.5;

impl ActivityModel {
    /// Name on screen and paper.
    pub fn name(self) -> &'static str {
        match self {
            ActivityModel::AsMeasured => "as measured",
            ActivityModel::Davies => "Davies",
            ActivityModel::IonInteraction => "ion interaction (SIT)",
        }
    }

    /// Ionic strength up to which the model is recommended: mol/L for Davies, mol/kg for ion interaction.
    pub fn limit(self) -> f64 {
        match self {
            ActivityModel::AsMeasured => f64::INFINITY,
            ActivityModel::Davies => DAVIES_LIMIT,
            ActivityModel::IonInteraction => ION_INTERACTION_LIMIT,
        }
    }

    /// −ln γ / z² of the Davies equation at an ionic strength in mol/L and a temperature in kelvin, and its
    /// derivative by ionic strength; zero without correction, the Debye–Hückel term alone for ion interaction.
    pub fn ln_gamma_per_charge_squared(self, ionic_strength: f64, temperature_k: f64) -> (f64, f64) {
        self.per_square(debye_huckel_a(temperature_k), 1.0, ionic_strength)
    }

    /// The same for a given Debye–Hückel slope A (log10) and kilograms of water per litre.
    pub(super) fn per_square(self, a: f64, water_kg_l: f64, ionic_strength: f64) -> (f64, f64) {
        match self {
            ActivityModel::AsMeasured => (0.0, 0.0),
            ActivityModel::Davies => {
                let clamped = ionic_strength.clamp(0.0, DAVIES_LIMIT);
                let root = clamped.sqrt();
                let value = a * LN_10 * (root / (1.0 + root) - DAVIES_LINEAR * clamped);
                let slope = if ionic_strength < DAVIES_LIMIT && root > 0.0 {
                    a * LN_10 * (0.5 / (root * (1.0 + root) * (1.0 + root)) - DAVIES_LINEAR)
                } else {
                    0.0
                };
                (value, slope)
            }
            ActivityModel::IonInteraction => {
                let root = (ionic_strength.max(0.0) / water_kg_l).sqrt();
                let below = 1.0 + SCATCHARD * root;
                let slope = if root > 0.0 { 0.5 / (root * below * below * water_kg_l) } else { 0.0 };
                (a * LN_10 * root / below, a * LN_10 * slope)
            }
        }
    }

    /// Whether the model has anything to correct.
    pub(super) fn corrects(self) -> bool {
        self != ActivityModel::AsMeasured
    }
}

/// Interaction coefficients of a system's species, gathered into classes of ions that share them.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Interaction {
    /// Class of each species; none for neutral ones.
    pub class: Vec<Option<usize>>,
    /// Coefficient of each class with each species, kg/mol; zero between like charges.
    pub epsilon: Vec<Vec<f64>>,
    /// Coefficient of each class with the counter-ions that make up a missing charge: Na⁺ and Cl⁻, kg/mol.
    pub counter: Vec<(f64, f64)>,
    /// log10 γ per mol/kg of ionic strength of each species: salting-out of neutral ones.
    pub salting_out: Vec<f64>,
}

/// −ln γⱼ = zⱼ² P + nⱼ I·g − f s_class(j) at given sums, with the derivatives that a solver needs.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub(super) struct Coefficients {
    /// P(I) and its derivative.
    pub per_square: (f64, f64),
    /// f(I) and its derivative: ln 10 per kg/L, held above the last ionic strength that was ever fitted.
    pub per_interaction: (f64, f64),
    /// −ln γ of a neutral species per unit of its salting-out coefficient, and its derivative by I.
    pub per_salting: (f64, f64),
}

impl Coefficients {
    /// At an ionic strength in mol/L.
    pub fn at(constants: &Constants, ionic_strength: f64) -> Self {
        let (model, water) = (constants.model, constants.water_kg_l);
        let per_square = model.per_square(constants.slope_a, water, ionic_strength);
        if model != ActivityModel::IonInteraction {
            return Self { per_square, ..Self::default() };
        }
        let (plain, held) = (LN_10 / water, ION_INTERACTION_HELD * water);
        if ionic_strength <= held {
            let per_salting = (-plain * ionic_strength, -plain);
            return Self { per_square, per_interaction: (plain, 0.0), per_salting };
        }
        let per_interaction =
            (plain * held / ionic_strength, -plain * held / (ionic_strength * ionic_strength));
        Self { per_square, per_interaction, per_salting: (-plain * held, 0.0) }
    }
}

impl Coefficients {
    /// A share of the correction.
    pub fn times(self, share: f64) -> Self {
        let times = |(value, slope): (f64, f64)| (share * value, share * slope);
        Self {
            per_square: times(self.per_square),
            per_interaction: times(self.per_interaction),
            per_salting: times(self.per_salting),
        }
    }
}

/// Number of sums that a problem's activity coefficients depend on.
pub(super) fn sum_count(problem: &Problem) -> usize {
    match problem.constants.model {
        ActivityModel::AsMeasured => 0,
        ActivityModel::Davies => 1,
        ActivityModel::IonInteraction => 1 + problem.system.interaction.epsilon.len(),
    }
}

/// The sums that the activity coefficient of a species depends on.
pub(super) fn sums_of(problem: &Problem, species: usize) -> impl Iterator<Item = usize> {
    let strength = problem.constants.model.corrects().then_some(0);
    strength.into_iter().chain(class_sum(problem, species))
}

/// Weight of a species in a sum: ½ z² in the ionic strength, the coefficient in that of a class.
pub(super) fn weight(problem: &Problem, sum: usize, species: usize) -> f64 {
    match sum.checked_sub(1) {
        None => 0.5 * problem.system.species[species].charge.powi(2),
        Some(class) => problem.system.interaction.epsilon[class][species],
    }
}

/// Weight of the missing charge in a sum, where a counter-ion makes it up: for missing cations and for missing anions.
pub(super) fn counter_weight(problem: &Problem, sum: usize) -> (f64, f64) {
    match (problem.counter_ion, sum.checked_sub(1)) {
        (false, _) => (0.0, 0.0),
        (true, None) => (0.5, 0.5),
        (true, Some(class)) => problem.system.interaction.counter[class],
    }
}

/// The class of a species as the number of its sum, where the model has classes.
pub(super) fn class_sum(problem: &Problem, species: usize) -> Option<usize> {
    let with_classes = problem.constants.model == ActivityModel::IonInteraction;
    if with_classes { problem.system.interaction.class[species].map(|class| class + 1) } else { None }
}

/// Salting-out coefficient of a species, where the model has one.
pub(super) fn salting_out(problem: &Problem, species: usize) -> f64 {
    let with_salting = problem.constants.model == ActivityModel::IonInteraction;
    if with_salting { problem.system.interaction.salting_out[species] } else { 0.0 }
}

/// Derivative of −ln γ of a species by a sum.
pub(super) fn response(
    problem: &Problem,
    at: &Coefficients,
    sums: &[f64],
    species: usize,
    sum: usize,
) -> f64 {
    let class = class_sum(problem, species);
    if sum == 0 {
        let square = problem.system.species[species].charge.powi(2);
        square * at.per_square.1 + salting_out(problem, species) * at.per_salting.1
            - at.per_interaction.1 * class.map_or(0.0, |sum| sums[sum])
    } else if class == Some(sum) {
        -at.per_interaction.0
    } else {
        0.0
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_slope_is_the_derivative_of_the_value() {
        for model in [ActivityModel::Davies, ActivityModel::IonInteraction] {
            for ionic_strength in [1e-6, 1e-3, 0.05, 0.3, 0.49, 0.8] {
                let h = ionic_strength * 1e-6;
                let at = |i| model.ln_gamma_per_charge_squared(i, 298.15).0;
                let numeric = (at(ionic_strength + h) - at(ionic_strength - h)) / (2.0 * h);
                let (_, slope) = model.ln_gamma_per_charge_squared(ionic_strength, 298.15);
                assert!((numeric - slope).abs() < 1e-5 * slope.abs().max(1e-3), "{ionic_strength}");
            }
        }
    }
}
