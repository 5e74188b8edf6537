//! Why a chelate is strong: the free energy of the 1:1 complex split into heat and disorder, with the particles that are
//! set free and the rings that close.
//!
//! M(H₂O)ₙ + L = ML(H₂O)ₙ₋d + d H₂O: two particles become 1 + d. ΔG° = −RT ln K(T) and ΔH° = RT² d ln K/dT come from the
//! same published constants that the bath is solved with, at zero ionic strength; −TΔS° is what is left over.

use crate::bath::Bath;
use crate::equilibrium::{ActivityModel, GAS_CONSTANT, LN_10, TemperatureBasis};
use crate::quantity::kelvin;

/// The 1:1 complex of a metal with a fully deprotonated agent.
#[derive(Clone, Debug, PartialEq)]
pub struct ChelateEffect {
    /// Token of the complex.
    pub complex: String,
    /// log10 K at the bath's temperature and zero ionic strength.
    pub log_k: f64,
    /// Standard uncertainty of it.
    pub sigma: f64,
    /// −RT ln K, kJ/mol.
    pub dg_kj: f64,
    /// Heat of complexation, kJ/mol; `None` when a constant in the chain has no enthalpy.
    pub dh_kj: Option<f64>,
    /// Donor atoms that the agent can bind with.
    pub donors: Option<u8>,
    /// Water molecules of the hydrated ion that they push out.
    pub released: Option<u8>,
}

/// Kelvin to each side for the slope of ln K.
const SLOPE_K: f64 = 0.1;
/// Water molecules around a metal ion; six but for the linear ions (structural chemistry, from memory).
const AQUA: u8 = 6;
const LINEAR: [&str; 2] = ["Ag+", "Cu+"];

impl ChelateEffect {
    /// −TΔS°, kJ/mol.
    pub fn minus_tds_kj(&self) -> Option<f64> {
        self.dh_kj.map(|dh| self.dg_kj - dh)
    }

    /// Chelate rings: bound donor atoms less one.
    pub fn rings(&self) -> Option<u8> {
        self.released.map(|bound| bound.saturating_sub(1))
    }

    /// Particles before and after.
    pub fn particles(&self) -> Option<(u8, u8)> {
        self.released.map(|released| (2, 1 + released))
    }
}

/// The 1:1 complex of two system components at a temperature in °C; `None` when the library has none.
pub fn chelate_effect(bath: &Bath, metal: usize, agent: usize, temperature_c: f64) -> Option<ChelateEffect> {
    let system = &bath.system;
    let is_complex = |terms: &[(usize, f64)]| {
        terms.len() == 2 && terms.iter().all(|&(i, n)| n == 1.0 && (i == metal || i == agent))
    };
    let index = system.species.iter().position(|species| is_complex(&species.components))?;
    let t = kelvin(temperature_c);
    let ln_k = |t: f64| system.constants_at(t, ActivityModel::Davies).ln_beta[index];
    let chain = &system.species[index].chain;
    let known = chain.iter().all(|&(i, _)| system.constants[i].temperature_basis() != TemperatureBasis::None);
    let slope = (ln_k(t + SLOPE_K) - ln_k(t - SLOPE_K)) / (2.0 * SLOPE_K);
    let variance: f64 = chain.iter().map(|&(i, n)| (n * system.constants[i].sigma_ln).powi(2)).sum();
    let donors = bath.component(agent).donors;
    let aqua = if LINEAR.contains(&system.components[metal].as_str()) { 2 } else { AQUA };
    Some(ChelateEffect {
        complex: system.species[index].token.clone(),
        log_k: ln_k(t) / LN_10,
        sigma: variance.sqrt() / LN_10,
        dg_kj: -GAS_CONSTANT * t * ln_k(t) * 1e-3,
        dh_kj: known.then_some(GAS_CONSTANT * t * t * slope * 1e-3),
        donors,
        released: donors.map(|donors| donors.min(aqua)),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bath::Demo;

    /// Calcium and EDTA in the soak cleaner: the constant's own enthalpy record, moved by no heat capacity, is the heat.
    #[test]
    fn the_heat_is_the_enthalpy_of_the_record_and_the_rest_is_disorder() {
        let bath = Bath::resolve(&Demo::named("hard_water_cleaner.ron").unwrap().project().unwrap()).unwrap();
        let of = |token: &str| bath.system.component(token).unwrap();
        let effect = chelate_effect(&bath, of("Ca+2"), of("EDTA-4"), 25.0).unwrap();
        assert_eq!(effect.complex, "CaEDTA-2");
        let record = bath
            .library
            .constants
            .iter()
            .find(|constant| constant.record.reaction == "Ca+2 + EDTA-4 = CaEDTA-2")
            .unwrap();
        let dh = effect.dh_kj.unwrap();
        assert!((dh - record.record.dh_kj.unwrap()).abs() < 0.01, "{dh}");
        let sum = dh + effect.minus_tds_kj().unwrap();
        assert!((sum - effect.dg_kj).abs() < 1e-9);
        assert_eq!((effect.particles(), effect.rings()), (Some((2, 7)), Some(5)));
    }
}
