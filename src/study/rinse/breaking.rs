//! What breaks the complex: reagents that take the agent off the metal, each with the smallest dose that reaches the
//! limits.
//!
//! An equilibrium does not remember its way: an acid step before the reagent changes nothing but the salt and the
//! alkali afterwards. What it does change is the speed, because a complex that is apart at low pH exchanges there in
//! minutes; its share of freed metal is told beside the result. Doses are tried in multiples of the agent, as the
//! trade states them (calcium 2 to 10 moles per mole of agent, iron 3 to 10 per mole of copper: common practice).

use super::dissolved::{Watched, holders};
use super::treat::{Poured, Treated, to_ph, with};
use super::water::RinseWater;
use crate::equilibrium::EquilibriumError;

/// A way to break complexes.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Method {
    /// What is done before the alkali, in words.
    pub name: &'static str,
    /// Product id of the reagent.
    pub reagent: &'static str,
    /// pH of an acid step before the alkali.
    pub acid_ph: Option<f64>,
}

/// Methods that are tried (accepted ways, common practice).
pub const METHODS: [Method; 4] = [
    Method { name: "calcium chloride", reagent: "cacl2-2", acid_ph: None },
    Method { name: "iron(II) sulfate", reagent: "feso4-7", acid_ph: None },
    Method { name: "acid and calcium chloride", reagent: "cacl2-2", acid_ph: Some(2.5) },
    Method { name: "acid and iron(III) chloride", reagent: "fecl3-40", acid_ph: Some(2.5) },
];

/// The acid step of a method.
#[derive(Clone, Debug, PartialEq)]
pub struct AcidStep {
    /// The pH of the step: that of the reagent alone where it is lower than the wanted one.
    pub ph: f64,
    /// The acid that brings it there.
    pub poured: Option<Poured>,
    /// Share of the dissolved watched metals that no agent holds there.
    pub freed: f64,
}

/// A dose of a reagent and what it does.
#[derive(Clone, Debug, PartialEq)]
pub struct Broken {
    /// Reagent in g/L of water.
    pub dose_g_l: f64,
    /// Moles of its metal for each mole of complexing agent.
    pub per_agent: f64,
    /// The acid step.
    pub acid: Option<AcidStep>,
    /// The water afterwards.
    pub treated: Treated,
}

/// What a method achieves.
#[derive(Clone, Debug, PartialEq)]
pub struct Breaking {
    /// The method.
    pub method: Method,
    /// Name of the reagent.
    pub reagent: String,
    /// The smallest dose that reaches every limit at each treatment pH; `None` where none does.
    pub by_ph: Vec<Option<Broken>>,
    /// The dose that comes nearest to the limits, at any treatment pH.
    pub best: Option<Broken>,
}

impl Breaking {
    /// The smallest dose that reaches every limit at any treatment pH; of equal ones that with the lowest pH.
    pub fn smallest(&self) -> Option<&Broken> {
        self.by_ph.iter().flatten().min_by(|a, b| a.dose_g_l.total_cmp(&b.dose_g_l))
    }
}

/// Multiples of the agent that are tried before the crossing is refined.
const MULTIPLES: [f64; 10] = [0.0, 0.5, 1.0, 2.0, 3.0, 5.0, 8.0, 12.0, 20.0, 30.0];
const BISECTIONS: usize = 14;

/// Tries one method on waste water at every treatment pH; `None` when it can't be tried: no agent, no constants for the
/// reagent, or acid must not be poured.
///
/// # Errors
/// [`EquilibriumError`] for ill-posed totals.
pub fn try_method(
    water: &mut RinseWater,
    totals: &[f64],
    watched: &[Watched],
    ph: &[f64],
    method: Method,
) -> Result<Option<Breaking>, EquilibriumError> {
    let Some(reagent) = water.bath.agents.iter().find(|agent| agent.product.id == method.reagent).cloned()
    else {
        return Ok(None);
    };
    let agents = water.chelant_mol_l(totals);
    let per_gram = reagent.per_gram[reagent.active];
    if agents <= 0.0 || per_gram <= 0.0 || (method.acid_ph.is_some() && water.no_acid) {
        return Ok(None);
    }
    let mut best: Option<Broken> = None;
    let mut by_ph = Vec::with_capacity(ph.len());
    for &ph in ph {
        let at = |multiple: f64| -> Result<Option<Broken>, EquilibriumError> {
            let dose_g_l = multiple * agents / per_gram;
            let dosed = with(totals, &reagent.per_gram, dose_g_l);
            let (acid, dosed) = acidify(water, &dosed, method, watched)?;
            let treated = to_ph(water, &dosed, ph, watched)?;
            Ok(treated.map(|treated| Broken { dose_g_l, per_agent: multiple, acid, treated }))
        };
        by_ph.push(smallest_at(at, watched, &mut best)?);
    }
    Ok(Some(Breaking { method, reagent: reagent.product.name, by_ph, best }))
}

/// The smallest multiple that reaches every limit at one pH, and the best of all that were tried.
fn smallest_at(
    mut at: impl FnMut(f64) -> Result<Option<Broken>, EquilibriumError>,
    watched: &[Watched],
    best: &mut Option<Broken>,
) -> Result<Option<Broken>, EquilibriumError> {
    let share = |broken: &Broken| broken.treated.worst_share(watched);
    let mut fails = None;
    for multiple in MULTIPLES {
        let Some(broken) = at(multiple)? else { continue };
        if best.as_ref().is_none_or(|known| share(&broken) < share(known)) {
            *best = Some(broken.clone());
        }
        if share(&broken) > 1.0 {
            fails = Some(multiple);
            continue;
        }
        let mut holds = broken;
        if let Some(mut low) = fails {
            for _ in 0..BISECTIONS {
                let middle = 0.5 * (low + holds.per_agent);
                match at(middle)? {
                    Some(broken) if share(&broken) <= 1.0 => holds = broken,
                    _ => low = middle,
                }
            }
        }
        return Ok(Some(holds));
    }
    Ok(None)
}

/// The acid step of a method, with the totals after it.
fn acidify(
    water: &mut RinseWater,
    totals: &[f64],
    method: Method,
    watched: &[Watched],
) -> Result<(Option<AcidStep>, Vec<f64>), EquilibriumError> {
    let Some(wanted) = method.acid_ph else { return Ok((None, totals.to_vec())) };
    let solution = water.solve(totals, None)?;
    let alone = solution.ph(water.proton);
    let metals: Vec<usize> = watched.iter().flat_map(|metal| metal.components.clone()).collect();
    let freed = |water: &RinseWater, solution: &crate::equilibrium::Equilibrium| {
        let shares = holders(water, solution, &metals);
        shares.iter().filter(|(name, _)| name == "no agent").map(|(_, share)| share).sum()
    };
    if alone <= wanted {
        let step = AcidStep { ph: alone, poured: None, freed: freed(water, &solution) };
        return Ok((Some(step), totals.to_vec()));
    }
    Ok(match to_ph(water, totals, wanted, watched)? {
        Some(acid) => {
            let freed = freed(water, &acid.solution);
            (Some(AcidStep { ph: wanted, poured: acid.poured, freed }), acid.totals)
        }
        None => (None, totals.to_vec()),
    })
}
