//! What is asked, and what is answered.

use super::LN_10;
use super::certificate::Certificate;
use super::system::{Constants, System};

/// What is to be solved.
#[derive(Clone, Copy, Debug)]
pub struct Problem<'a> {
    /// Components, species, solids.
    pub system: &'a System,
    /// Their constants at the bath's temperature.
    pub constants: &'a Constants,
    /// Total of each component, mol/L. That of H⁺ may be negative; ignored for held components.
    pub totals: &'a [f64],
    /// ln activity of each held component.
    pub held: &'a [Option<f64>],
    /// Whether each solid may precipitate; one that may not is only given its saturation index.
    pub may_form: &'a [bool],
    /// ln of the partial pressure in bar of each gas that the bath is open to; a gas beyond the end of the slice, or
    /// without a pressure, can neither come nor go.
    pub open_to: &'a [Option<f64>],
    /// Whether a monovalent counter-ion that makes up the charge counts in the ionic strength: the acid or alkali
    /// that holds the pH.
    pub counter_ion: bool,
}

/// A solved system. Logarithms are natural; absent components and species have −∞.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Equilibrium {
    /// ln activity of each component.
    pub ln_a: Vec<f64>,
    /// ln concentration of each species.
    pub ln_c: Vec<f64>,
    /// Concentration of each species, mol/L.
    pub c: Vec<f64>,
    /// ln of the activity coefficient of each species.
    pub ln_gamma: Vec<f64>,
    /// The sums over concentrations that the activity coefficients were taken at; the first is the ionic strength.
    pub sums: Vec<f64>,
    /// Amount of each solid, mol per litre of bath.
    pub solids: Vec<f64>,
    /// ln(IAP/Ks) of each solid.
    pub ln_saturation: Vec<f64>,
    /// ln of the partial pressure of each gas over the solution, bar.
    pub ln_pressure: Vec<f64>,
    /// Amount of each open gas taken up, mol per litre of bath; negative when it has left.
    pub uptake: Vec<f64>,
    /// Ionic strength, mol/L, with the counter-ion where asked for.
    pub ionic_strength: f64,
    /// Σ z c, mol/L: positive when anions are missing.
    pub charge_gap: f64,
    /// Σ ν c + Σ ν n of each component, mol/L; for held components what the bath holds of them.
    pub totals: Vec<f64>,
    /// Σ |ν c| + Σ |ν n| of each component, mol/L: what rounding of a balance is measured by.
    pub magnitudes: Vec<f64>,
    /// What was left over.
    pub certificate: Certificate,
}

impl Equilibrium {
    /// Free concentration of a component, mol/L.
    pub fn free(&self, component: usize) -> f64 {
        self.c[component]
    }

    /// Concentration of a component in all its dissolved species, mol/L.
    pub fn dissolved(&self, system: &System, component: usize) -> f64 {
        (0..self.c.len()).map(|species| system.coefficient(species, component) * self.c[species]).sum()
    }

    /// What open gases have brought of a component, mol/L.
    pub fn taken_up(&self, system: &System, component: usize) -> f64 {
        let parts = system.gases.iter().zip(&self.uptake).flat_map(|(gas, uptake)| {
            gas.components.iter().filter(|(i, _)| *i == component).map(move |(_, nu)| nu * uptake)
        });
        parts.sum()
    }

    /// −log10 of the hydrogen-ion activity.
    pub fn ph(&self, proton: usize) -> f64 {
        -self.ln_a[proton] / LN_10
    }

    /// Saturation index log10(IAP/Ks) of a solid.
    pub fn saturation_index(&self, solid: usize) -> f64 {
        self.ln_saturation[solid] / LN_10
    }
}
