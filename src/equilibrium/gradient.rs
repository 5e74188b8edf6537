//! The gradient of one value by everything that moves it: totals, constants, held activities.
//!
//! One solve with the transposed response answers what would take one solve per input the other way round: the
//! adjoint of the linear system in `sensitivity.rs`.

use super::LN_10;
use super::activity;
use super::problem::Equilibrium;
use super::sensitivity::{Sensitivities, whole_weight};
use super::system::System;
use nalgebra::DVector;

/// A value whose gradient or uncertainty is asked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Value {
    /// Free concentration of a component.
    Free(usize),
    /// Concentration of a component in all its dissolved species.
    Dissolved(usize),
    /// Saturation ratio of a solid.
    Saturation(usize),
}

impl Value {
    /// ln of the value at a solution: mol/L, or the saturation ratio.
    pub fn ln(self, system: &System, solution: &Equilibrium) -> f64 {
        match self {
            Value::Free(component) => solution.ln_c[component],
            Value::Dissolved(component) => solution.dissolved(system, component).ln(),
            Value::Saturation(solid) => solution.ln_saturation[solid],
        }
    }
}

/// Derivatives of ln of a value.
#[derive(Clone, Debug, PartialEq)]
pub struct Gradient {
    /// By the total of each component, per mol/L; 0 for held and absent ones.
    pub by_total: Vec<f64>,
    /// By ln β of each species.
    pub by_ln_beta: Vec<f64>,
    /// By ln Ks of each solid.
    pub by_ln_ks: Vec<f64>,
    /// By ln K of each gas.
    pub by_ln_kg: Vec<f64>,
}

impl Gradient {
    /// By ln K of each published constant, which moves every species, solid and gas in whose chain it stands.
    pub fn by_constants(&self, system: &System) -> Vec<f64> {
        let mut slopes = vec![0.0; system.constants.len()];
        let mut add = |chain: &[(usize, f64)], slope: f64| {
            chain.iter().for_each(|&(constant, count)| slopes[constant] += count * slope);
        };
        system.species.iter().zip(&self.by_ln_beta).for_each(|(entry, slope)| add(&entry.chain, *slope));
        system.solids.iter().zip(&self.by_ln_ks).for_each(|(entry, slope)| add(&entry.chain, *slope));
        system.gases.iter().zip(&self.by_ln_kg).for_each(|(entry, slope)| add(&entry.chain, *slope));
        slopes
    }

    /// By ln a of a held component (for H⁺: −ln 10 times the slope by pH).
    pub fn by_held(&self, system: &System, component: usize) -> f64 {
        let count = |terms: &[(usize, f64)]| {
            terms.iter().filter(|(i, _)| *i == component).map(|(_, nu)| nu).sum::<f64>()
        };
        let species = system.species.iter().zip(&self.by_ln_beta);
        let solids = system.solids.iter().zip(&self.by_ln_ks);
        let gases = system.gases.iter().zip(&self.by_ln_kg);
        species.map(|(entry, slope)| count(&entry.components) * slope).sum::<f64>()
            - solids.map(|(entry, slope)| count(&entry.components) * slope).sum::<f64>()
            + gases.map(|(entry, slope)| count(&entry.components) * slope).sum::<f64>()
    }

    /// By a change of all totals along a direction, per unit of it.
    pub fn along(&self, direction: &[f64]) -> f64 {
        self.by_total.iter().zip(direction).map(|(slope, part)| slope * part).sum()
    }

    /// Standard uncertainty of log10 of the value, first order in the constants' uncertainties.
    pub fn sigma_log10(&self, system: &System) -> f64 {
        let slopes = self.by_constants(system);
        let parts =
            slopes.iter().zip(&system.constants).map(|(slope, constant)| (slope * constant.sigma_ln).powi(2));
        parts.sum::<f64>().sqrt() / LN_10
    }
}

impl Sensitivities<'_> {
    /// The gradient of a value.
    pub fn gradient(&self, value: Value) -> Gradient {
        let (problem, solution) = (&self.problem, self.solution);
        let system = problem.system;
        let (m, s) = (self.free.len(), self.solids.len() + self.gases.len());
        let sums = &solution.sums;
        let mut weights = vec![0.0; system.species.len()];
        match value {
            Value::Free(component) => weights[component] = 1.0,
            Value::Dissolved(component) => {
                let parts = (0..weights.len()).map(|j| system.coefficient(j, component) * solution.c[j]);
                let parts: Vec<f64> = parts.collect();
                let total: f64 = parts.iter().sum();
                weights.iter_mut().zip(parts).for_each(|(weight, part)| *weight = part / total);
            }
            Value::Saturation(_) => {}
        }
        let mut wanted = self.zero();
        for (j, weight) in weights.iter().enumerate().filter(|(_, weight)| **weight != 0.0) {
            for &(i, nu) in &system.species[j].components {
                if let Some(row) = self.places[i] {
                    wanted[row] += weight * nu;
                }
            }
            for sum in activity::sums_of(problem, j) {
                wanted[m + s + sum] += weight * activity::response(problem, &self.coefficients, sums, j, sum);
            }
        }
        if let Value::Saturation(solid) = value {
            for &(i, nu) in &system.solids[solid].components {
                if let Some(row) = self.places[i] {
                    wanted[row] += nu;
                }
            }
        }
        let y = self.adjoint(wanted);

        let by_ln_beta = system.species.iter().enumerate().map(|(j, entry)| {
            let c = solution.c[j];
            if c == 0.0 {
                return weights[j];
            }
            let balances: f64 =
                entry.components.iter().filter_map(|&(i, nu)| Some(nu * y[self.places[i]?])).sum();
            let of_sums: f64 =
                (0..sums.len()).map(|sum| whole_weight(problem, solution, sum, j) * y[m + s + sum]).sum();
            weights[j] + c * (of_sums - balances)
        });
        let mut gradient = Gradient {
            by_total: self.places.iter().map(|place| place.map_or(0.0, |row| y[row])).collect(),
            by_ln_beta: by_ln_beta.collect(),
            by_ln_ks: vec![0.0; system.solids.len()],
            by_ln_kg: vec![0.0; system.gases.len()],
        };
        for (k, &solid) in self.solids.iter().enumerate() {
            gradient.by_ln_ks[solid] = y[m + k];
        }
        for (k, &gas) in self.gases.iter().enumerate() {
            gradient.by_ln_kg[gas] = -y[m + self.solids.len() + k];
        }
        if let Value::Saturation(solid) = value {
            gradient.by_ln_ks[solid] -= 1.0;
        }
        gradient
    }

    /// Standard uncertainties of log10 of the given values, first order in the constants' uncertainties. A published
    /// constant counts once, in all species whose chain it stands in.
    pub fn sigma_log10(&self, values: &[Value]) -> Vec<f64> {
        values.iter().map(|value| self.gradient(*value).sigma_log10(self.problem.system)).collect()
    }

    /// Solves the transposed system: with P A = L U, Uᵀ w = g, Lᵀ v = w and y = Pᵀ v.
    fn adjoint(&self, mut wanted: DVector<f64>) -> DVector<f64> {
        wanted.component_mul_assign(&self.columns);
        let packed = self.factor.lu_internal();
        let n = wanted.len();
        for i in 0..n {
            let known: f64 = (0..i).map(|k| packed[(k, i)] * wanted[k]).sum();
            wanted[i] = (wanted[i] - known) / packed[(i, i)];
        }
        for i in (0..n).rev() {
            let known: f64 = (i + 1..n).map(|k| packed[(k, i)] * wanted[k]).sum();
            wanted[i] -= known;
        }
        self.factor.p().inv_permute_rows(&mut wanted);
        wanted.component_mul_assign(&self.rows);
        wanted
    }
}
