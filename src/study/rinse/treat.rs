//! One treatment: reagent and acid or alkali to a pH, what precipitates, what stays dissolved.

use super::dissolved::{Watched, dissolved_mol_l};
use super::water::RinseWater;
use crate::equilibrium::{Equilibrium, EquilibriumError};

/// Grams of a product per litre of water.
#[derive(Clone, Debug, PartialEq)]
pub struct Poured {
    /// Product id.
    pub product: String,
    /// Product name.
    pub name: String,
    /// g/L of water.
    pub g_l: f64,
}

/// Water at its treatment pH.
#[derive(Clone, Debug, PartialEq)]
pub struct Treated {
    /// The pH it was brought to.
    pub ph: f64,
    /// Acid or alkali that brings it there; `None` when it stands there already.
    pub poured: Option<Poured>,
    /// Totals with all that was added, mol/L.
    pub totals: Vec<f64>,
    /// The equilibrium.
    pub solution: Equilibrium,
    /// Dissolved total of each watched metal, mg/L.
    pub dissolved_mg_l: Vec<f64>,
}

impl Treated {
    /// Largest share of a limit that a dissolved metal reaches; 0 without limits.
    pub fn worst_share(&self, watched: &[Watched]) -> f64 {
        let shares = watched.iter().zip(&self.dissolved_mg_l);
        shares.filter_map(|(metal, mg)| Some(mg / metal.limit.as_ref()?.mg_l)).fold(0.0, f64::max)
    }
}

/// Most of a product that is tried, g/L.
const MOST_G_L: f64 = 300.0;
const ROOT_STEPS: usize = 60;
const ROOT_WIDTH: f64 = 1e-9;
/// A pH within this of its target needs nothing.
const NEAR_PH: f64 = 1e-3;

/// Brings totals to a pH with the acid or alkali at hand. `None` when no amount of it does (lime ends where its own
/// hydroxide stays undissolved), or when it would take acid that must not be poured.
///
/// # Errors
/// [`EquilibriumError`] for ill-posed totals.
pub fn to_ph(
    water: &mut RinseWater,
    totals: &[f64],
    ph: f64,
    watched: &[Watched],
) -> Result<Option<Treated>, EquilibriumError> {
    let now = water.solve(totals, None)?.ph(water.proton);
    let (totals, poured) = if (now - ph).abs() < NEAR_PH {
        (totals.to_vec(), None)
    } else {
        if now > ph && water.no_acid {
            return Ok(None);
        }
        let adjuster = if now < ph { water.bath.alkali.clone() } else { water.bath.acid.clone() };
        let Some(g_l) = amount(water, totals, ph, &adjuster.per_gram)? else { return Ok(None) };
        let product = &adjuster.product;
        let poured = Poured { product: product.id.clone(), name: product.name.clone(), g_l };
        (with(totals, &adjuster.per_gram, g_l), Some(poured))
    };
    let solution = water.solve(&totals, Some(ph))?;
    let dissolved_mg_l = watched
        .iter()
        .map(|metal| dissolved_mol_l(&water.bath.system, &solution, &metal.components) * metal.g_mol * 1e3)
        .collect();
    Ok(Some(Treated { ph, poured, totals, solution, dissolved_mg_l }))
}

/// Totals with some g/L of a product.
pub fn with(totals: &[f64], per_gram: &[f64], g_l: f64) -> Vec<f64> {
    totals.iter().zip(per_gram).map(|(total, per_gram)| total + g_l * per_gram).collect()
}

/// How much of what brings so many moles of each component, after which the water holds at the wanted pH just the hydrogen that it was given: the root of a
/// balance and not a quotient, because lime brings calcium that precipitates and takes the agent.
///
/// # Errors
/// [`EquilibriumError`] for ill-posed totals.
pub fn amount(
    water: &mut RinseWater,
    totals: &[f64],
    ph: f64,
    brings: &[f64],
) -> Result<Option<f64>, EquilibriumError> {
    let proton = water.proton;
    let per_gram = brings[proton];
    if per_gram == 0.0 {
        return Ok(None);
    }
    let mut wanted = |g_l: f64| -> Result<f64, EquilibriumError> {
        let totals = with(totals, brings, g_l);
        Ok(water.solve(&totals, Some(ph))?.totals[proton] - totals[proton])
    };
    let (mut low, mut f_low) = (0.0, wanted(0.0)?);
    if f_low == 0.0 {
        return Ok(Some(0.0));
    }
    // With nothing but hydrogen in the product the quotient would be the answer.
    let mut high = (f_low / per_gram).abs().max(1e-9) * 1.01;
    let mut f_high = wanted(high)?;
    while f_low.signum() == f_high.signum() {
        if high > MOST_G_L {
            return Ok(None);
        }
        (low, f_low) = (high, f_high);
        high *= 2.0;
        f_high = wanted(high)?;
    }
    // Regula falsi with the weight of a stuck end halved (Illinois rule); the root stays between a and b.
    let ((mut a, mut f_a), (mut b, mut f_b)) = ((low, f_low), (high, f_high));
    for _ in 0..ROOT_STEPS {
        let c = (a * f_b - b * f_a) / (f_b - f_a);
        let f_c = wanted(c)?;
        let settled = (c - b).abs() <= ROOT_WIDTH * c.abs();
        if f_c.signum() == f_b.signum() {
            f_a *= 0.5;
        } else {
            (a, f_a) = (b, f_b);
        }
        (b, f_b) = (c, f_c);
        if settled || f_c == 0.0 {
            break;
        }
    }
    Ok(Some(b))
}
