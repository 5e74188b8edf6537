//! The acid or alkali that a dose makes necessary, and the pH that the tank shows between two additions.
//!
//! With pH held, the hydrogen that the bath holds before and after is known from the equilibrium; what the dose
//! brings more than that has to be taken out with alkali, what it lacks to be put in with acid.

use crate::bath::{Bath, Point, Solids, proton_moles_per_gram};
use crate::chemistry::Product;
use crate::equilibrium::{Constants, EquilibriumError, Solver};

/// The pH correction of a dose.
#[derive(Clone, Debug, PartialEq)]
pub struct Adjustment {
    /// The product to add.
    pub product: Product,
    /// Grams of it per litre of bath.
    pub dose_g_l: f64,
    /// Moles of hydrogen ion per litre that it brings; negative for alkali.
    pub proton_mol_l: f64,
}

/// A dose that moves the pH by less than this needs no correction: no meter in a shop shows it.
const NEGLIGIBLE_PH: f64 = 0.02;

/// The correction that keeps the set pH after the given doses; `None` when the pH is not held or none is needed.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn adjustment(bath: &Bath, doses: &[f64]) -> Result<Option<Adjustment>, EquilibriumError> {
    let (Some(ph), Some(proton)) = (bath.ph_set(), bath.system.proton) else { return Ok(None) };
    let constants = bath.constants_at(bath.project.tank.temperature_c.set);
    let mut solver = Solver::new();
    let none = vec![0.0; doses.len()];
    let before = hydrogen(bath, &mut solver, &constants, ph, &none, proton)?;
    let after = hydrogen(bath, &mut solver, &constants, ph, doses, proton)?;
    let brought = bath.totals(doses)[proton] - bath.contents[proton];
    let needed = after - before - brought;
    let drift = ph_after(bath, doses, 0.0)?.map_or(f64::INFINITY, |left_alone| (left_alone - ph).abs());
    if drift < NEGLIGIBLE_PH {
        return Ok(None);
    }
    let product = if needed < 0.0 { &bath.alkali } else { &bath.acid };
    let dose_g_l = needed / proton_moles_per_gram(product);
    Ok(Some(Adjustment { product: product.clone(), dose_g_l, proton_mol_l: needed }))
}

/// The pH that the tank reads after the given doses and after `proton_mol_l` moles of hydrogen ion per litre from
/// acid (positive) or alkali (negative), starting from the held pH.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub fn ph_after(bath: &Bath, doses: &[f64], proton_mol_l: f64) -> Result<Option<f64>, EquilibriumError> {
    let (Some(ph), Some(proton)) = (bath.ph_set(), bath.system.proton) else { return Ok(None) };
    let constants = bath.constants_at(bath.project.tank.temperature_c.set);
    let mut solver = Solver::new();
    let none = vec![0.0; doses.len()];
    let before = hydrogen(bath, &mut solver, &constants, ph, &none, proton)?;
    let mut totals = bath.totals(doses);
    totals[proton] = before + totals[proton] - bath.contents[proton] + proton_mol_l;
    let solution = bath.solve_totals(&mut solver, &constants, &totals, None, Solids::Real)?;
    Ok(Some(solution.ph(proton)))
}

/// Moles of hydrogen ion per litre that the bath holds at a pH.
fn hydrogen(
    bath: &Bath,
    solver: &mut Solver,
    constants: &Constants,
    ph: f64,
    doses: &[f64],
    proton: usize,
) -> Result<f64, EquilibriumError> {
    let point = Point { ph: Some(ph), doses };
    Ok(bath.solve_with(solver, constants, point, Solids::Real)?.totals[proton])
}
