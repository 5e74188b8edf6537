//! A pH read in a sample that was colder or hotter than the bath, and the acid or alkali that brings a pH back.
//!
//! A sample that cools keeps its total hydrogen, not its pH: buffers and the ion product of water move with temperature.

use crate::bath::{Adjustment, Bath, MeterReading, Solids, Trust};
use crate::equilibrium::{Constants, EquilibriumError, Solver};

/// The pH of the bath as found.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FoundPh {
    /// What the meter showed.
    pub meter: f64,
    /// Temperature of the sample, °C.
    pub meter_temperature_c: f64,
    /// pH of the bath itself.
    pub bath: f64,
    /// Temperature of the bath, °C.
    pub bath_temperature_c: f64,
    /// Standard uncertainty of the bath's pH: that of the reading, carried to the bath's temperature.
    pub sigma: f64,
    /// Whether the uncertainty of the reading was given.
    pub stated: bool,
    /// What the reading rests on.
    pub trust: Trust,
}

/// Half the step of the difference that carries the uncertainty over.
const STEP: f64 = 0.01;
/// Temperatures closer than this (K) are one.
const SAME: f64 = 0.05;
/// Most acid or alkali tried, g/L, and halvings of the bracket.
const MOST_G_L: f64 = 1000.0;
const HALVINGS: usize = 60;

/// The bath's own pH from a reading; `None` where no pH is held.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub(super) fn found_ph(bath: &Bath, reading: MeterReading) -> Result<Option<FoundPh>, EquilibriumError> {
    let (Some(_), Some(proton)) = (bath.ph_set(), bath.system.proton) else { return Ok(None) };
    let bath_temperature_c = bath.project.tank.temperature_c.set;
    let meter_temperature_c = reading.temperature_c.unwrap_or(bath_temperature_c);
    let sigma = reading.uncertainty.unwrap_or_else(|| super::input::usual_ph(reading.trust));
    let mut found = FoundPh {
        meter: reading.value,
        meter_temperature_c,
        bath: reading.value,
        bath_temperature_c,
        sigma,
        stated: reading.uncertainty.is_some(),
        trust: reading.trust,
    };
    if (meter_temperature_c - bath_temperature_c).abs() > SAME {
        let sample = bath.constants_at(meter_temperature_c);
        let tank = bath.constants_at(bath_temperature_c);
        let at = |ph: f64| {
            let mut totals = bath.contents.clone();
            totals[proton] = hydrogen(bath, &sample, &totals, ph)?;
            let solution = bath.solve_totals(&mut Solver::new(), &tank, &totals, None, Solids::Real)?;
            Ok::<f64, EquilibriumError>(solution.ph(proton))
        };
        let slope = (at(reading.value + STEP)? - at(reading.value - STEP)?) / (2.0 * STEP);
        found.bath = at(reading.value)?;
        found.sigma = sigma * slope.abs();
    }
    Ok(Some(found))
}

/// Total hydrogen of given totals at a held pH, mol/L, less what the air has brought.
fn hydrogen(bath: &Bath, constants: &Constants, totals: &[f64], ph: f64) -> Result<f64, EquilibriumError> {
    let Some(proton) = bath.system.proton else { return Ok(0.0) };
    let solution = bath.solve_totals(&mut Solver::new(), constants, totals, Some(ph), Solids::Real)?;
    Ok(solution.totals[proton] - solution.taken_up(&bath.system, proton))
}

/// The acid or alkali that brings the bath from one pH to its set pH; `None` when the product at hand can't.
///
/// # Errors
/// [`EquilibriumError`] for an ill-posed bath.
pub(super) fn brought_back(bath: &Bath, from: f64) -> Result<Option<Adjustment>, EquilibriumError> {
    let (Some(to), Some(proton)) = (bath.ph_set(), bath.system.proton) else { return Ok(None) };
    let constants = bath.constants_at(bath.project.tank.temperature_c.set);
    let adjuster = if from < to { &bath.alkali } else { &bath.acid };
    let there = hydrogen(bath, &constants, &bath.contents, from)?;
    // What the set pH wants beyond what is there and what the product brings; it changes sign at the answer.
    let wanted = |grams: f64| {
        let dilution = 1.0 + grams * adjuster.litres_per_gram;
        let parts = bath.contents.iter().zip(&adjuster.per_gram);
        let totals: Vec<f64> = parts.map(|(total, part)| (total + grams * part) / dilution).collect();
        let brought = (there + grams * adjuster.per_gram[proton]) / dilution;
        hydrogen(bath, &constants, &totals, to).map(|held| held - brought)
    };
    let sign = wanted(0.0)?.signum();
    let (mut low, mut high) = (0.0, 0.01);
    while wanted(high)?.signum() == sign {
        if high > MOST_G_L {
            return Ok(None);
        }
        (low, high) = (high, 2.0 * high);
    }
    for _ in 0..HALVINGS {
        let middle = 0.5 * (low + high);
        if wanted(middle)?.signum() == sign { low = middle } else { high = middle }
    }
    Ok(Some(Adjustment { product: adjuster.product.clone(), dose_g_l: high }))
}
