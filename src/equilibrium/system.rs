//! The numbers of a chemical system: components, species, solids and the constants that make them.

use super::activity::{ActivityModel, Interaction};
use super::temperature::ConstantModel;
use super::water::{debye_huckel_a, debye_huckel_a_molal, density_kg_l};
use std::ops::Deref;
use std::sync::Arc;
use std::sync::atomic::{AtomicU64, Ordering};

/// A sparse row: (index, coefficient).
pub type Terms = Vec<(usize, f64)>;

/// A species in solution; the first species of a system are its bare components, in order.
#[derive(Clone, Debug, PartialEq)]
pub struct SpeciesEntry {
    /// Name with charge.
    pub token: String,
    /// Charge number.
    pub charge: f64,
    /// Components it is made of.
    pub components: Terms,
    /// Constants in its overall formation constant.
    pub chain: Terms,
}

/// A solid.
#[derive(Clone, Debug, PartialEq)]
pub struct SolidEntry {
    /// Name with its state.
    pub token: String,
    /// Exponents of the ion activity product over components.
    pub components: Terms,
    /// Constants in its overall solubility product.
    pub chain: Terms,
    /// Whether it is an aged form.
    pub aged: bool,
}

/// A gas over the solution.
#[derive(Clone, Debug, PartialEq)]
pub struct GasEntry {
    /// Name, ending in "(g)".
    pub token: String,
    /// Exponents of its partial pressure over components.
    pub components: Terms,
    /// Constants in its overall constant: ln p = Σ chain ln K + Σ ν ln a, p in bar.
    pub chain: Terms,
}

/// What a [`System`] is made of.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct SystemParts {
    /// Tokens of the components.
    pub components: Vec<String>,
    /// Species; `species[i]` is the bare component i for i below the number of components.
    pub species: Vec<SpeciesEntry>,
    /// Solids.
    pub solids: Vec<SolidEntry>,
    /// Gases.
    pub gases: Vec<GasEntry>,
    /// The constants that the chains refer to.
    pub constants: Vec<ConstantModel>,
    /// The same constants in the library that the system was assembled from, for their sources.
    pub library_constants: Vec<usize>,
    /// Index of H⁺ among the components.
    pub proton: Option<usize>,
    /// How the ions act upon each other.
    pub interaction: Interaction,
}

/// Components, species and solids that can occur in a bath. It never changes once it is made, and carries an identity, so
/// that a solver knows at a glance whether what it prepared for the last problem still serves.
#[derive(Clone, Debug)]
pub struct System {
    parts: Arc<SystemParts>,
    identity: u64,
    reverses_proton: bool,
}

impl From<SystemParts> for System {
    fn from(parts: SystemParts) -> Self {
        static MADE: AtomicU64 = AtomicU64::new(0);
        let counts_negatively =
            |terms: &Terms| terms.iter().any(|&(i, nu)| Some(i) == parts.proton && nu < 0.0);
        let reverses_proton = parts.species.iter().any(|species| counts_negatively(&species.components));
        Self { identity: MADE.fetch_add(1, Ordering::Relaxed), reverses_proton, parts: Arc::new(parts) }
    }
}

impl System {
    /// Equal only for a system and its clones.
    pub(super) fn identity(&self) -> u64 {
        self.identity
    }

    /// Whether any species counts H⁺ negatively, as OH⁻ does.
    pub(super) fn reverses_proton(&self) -> bool {
        self.reverses_proton
    }
}

impl Deref for System {
    type Target = SystemParts;

    fn deref(&self) -> &SystemParts {
        &self.parts
    }
}

/// A system's constants at one temperature and for one activity model.
#[derive(Clone, Debug, PartialEq)]
pub struct Constants {
    /// Overall ln β of each species.
    pub ln_beta: Vec<f64>,
    /// Overall ln Ks of each solid.
    pub ln_ks: Vec<f64>,
    /// Overall ln K of each gas: ln p = ln K + Σ ν ln a, p in bar.
    pub ln_kg: Vec<f64>,
    /// Activity model.
    pub model: ActivityModel,
    /// Debye–Hückel slope A at this temperature: per mol/L for Davies, per mol/kg for ion interaction.
    pub slope_a: f64,
    /// Kilograms of water in a litre: its density, the room of the solutes neglected.
    pub water_kg_l: f64,
}

fn sum(chain: &Terms, ln_k: &[f64]) -> f64 {
    chain.iter().map(|&(index, count)| count * ln_k[index]).sum()
}

impl SystemParts {
    /// Overall constants at a temperature in kelvin.
    pub fn constants_at(&self, temperature_k: f64, model: ActivityModel) -> Constants {
        let ln_k: Vec<f64> = self.constants.iter().map(|c| c.ln_k_at(temperature_k, model)).collect();
        Constants {
            ln_beta: self.species.iter().map(|species| sum(&species.chain, &ln_k)).collect(),
            ln_ks: self.solids.iter().map(|solid| sum(&solid.chain, &ln_k)).collect(),
            ln_kg: self.gases.iter().map(|gas| sum(&gas.chain, &ln_k)).collect(),
            model,
            slope_a: match model {
                ActivityModel::IonInteraction => debye_huckel_a_molal(temperature_k),
                _ => debye_huckel_a(temperature_k),
            },
            water_kg_l: density_kg_l(temperature_k),
        }
    }

    /// Index of a component by token.
    pub fn component(&self, token: &str) -> Option<usize> {
        self.components.iter().position(|known| known == token)
    }

    /// Index of a species by token.
    pub fn species_index(&self, token: &str) -> Option<usize> {
        self.species.iter().position(|species| species.token == token)
    }

    /// How often a component is in a species.
    pub fn coefficient(&self, species: usize, component: usize) -> f64 {
        self.species[species]
            .components
            .iter()
            .find(|(index, _)| *index == component)
            .map_or(0.0, |(_, c)| *c)
    }
}
