//! What the rinse water does with the bath's complexing agent: the water of each stage, its treatment with alkali, the
//! metal that the agent keeps dissolved against the limits, and what breaks the complex.
//!
//! Limits are meant for treated water. Rinsing harder only dilutes, and rules forbid dilution in place of treatment, so
//! the same treatment is also told for water with a tenth of the rinse water in it: hydroxide then leaves the same
//! metal behind, a complex ten times as much.

mod breaking;
mod dissolved;
mod stages;
mod treat;
mod water;

pub use breaking::{AcidStep, Breaking, Broken, METHODS, Method};
pub use dissolved::{
    AppliedLimit, Watched, dissolved_mol_l, holders, sigma_log10 as dissolved_sigma, watched as watched_in,
};
pub use stages::{shares, waste_share};
pub use treat::{Poured, Treated, to_ph};
pub use water::RinseWater;

use crate::bath::{Bath, BathError, Flag, flags};
use crate::chemistry::{Basis, Formula, Regime};
use crate::dosing::CONFIDENCE_95;
use crate::equilibrium::Equilibrium;

/// The water of one rinse stage, or the waste water of all.
#[derive(Clone, Debug, PartialEq)]
pub struct Water {
    /// Share of bath liquid in it.
    pub share: f64,
    /// Its own pH: nothing holds it.
    pub ph: f64,
    /// Totals, mol/L.
    pub totals: Vec<f64>,
    /// All of each watched metal, dissolved or not, mg/L.
    pub metal_mg_l: Vec<f64>,
    /// Fresh solids that form in it: system index and mol/L.
    pub solids: Vec<(usize, f64)>,
}

/// Water treated at one pH, with and without the agents.
#[derive(Clone, Debug, PartialEq)]
pub struct ScanPoint {
    /// Treatment pH.
    pub ph: f64,
    /// With all complexing agents; `None` when the pH can't be reached.
    pub with_agents: Option<Treated>,
    /// Standard uncertainty of log10 of each dissolved total in it.
    pub sigma: Vec<f64>,
    /// The same water without any complexing agent, dissolved totals in mg/L.
    pub without_mg_l: Option<Vec<f64>>,
}

impl ScanPoint {
    /// Largest share of a limit with 95 % confidence, one-sided.
    pub fn worst_share_95(&self, watched: &[Watched]) -> Option<f64> {
        let treated = self.with_agents.as_ref()?;
        let shares = watched.iter().zip(&treated.dissolved_mg_l).zip(&self.sigma);
        let sure = |((metal, mg), sigma): ((&Watched, &f64), &f64)| {
            Some(mg * 10f64.powf(CONFIDENCE_95 * sigma) / metal.limit.as_ref()?.mg_l)
        };
        Some(shares.filter_map(sure).fold(0.0, f64::max))
    }
}

/// What the solubility of a treatment rests on.
#[derive(Clone, Debug, PartialEq)]
pub struct Rests {
    /// Name of the solid.
    pub solid: String,
    /// log10 of its constant, as published.
    pub log_k: f64,
    /// Standard uncertainty of that.
    pub sigma: f64,
    /// Seen or recalled.
    pub basis: Basis,
    /// Where it is published.
    pub source: String,
}

/// The rinse behind a bath and the treatment of its water.
pub struct RinseStudy {
    /// The chemical system of the water, for names and sources.
    pub water: RinseWater,
    /// The project says nothing about its rinse: every number of it is assumed.
    pub assumed: bool,
    /// Metals that are followed.
    pub watched: Vec<Watched>,
    /// Stages in the order of the work.
    pub stages: Vec<Water>,
    /// The waste water of all stages.
    pub waste: Water,
    /// Complexing agents that leave: name, mg/L of waste water (as their acid), kg a day.
    pub agents: Vec<(String, f64, f64)>,
    /// Phosphorus and nitrogen in the waste water, mg/L.
    pub phosphorus_nitrogen_mg_l: (f64, f64),
    /// Treatment with alkali alone over pH.
    pub scan: Vec<ScanPoint>,
    /// Number of the point that comes nearest to the limits, or under them.
    pub best: Option<usize>,
    /// Dissolved totals at that point for water with a tenth of the rinse water, mg/L.
    pub concentrated_mg_l: Option<Vec<f64>>,
    /// What breaks the complex.
    pub breaking: Vec<Breaking>,
    /// What the solids of the best point rest on.
    pub rests_on: Vec<Rests>,
    /// Agents in the water that a published rule forbids: (agent, rule).
    pub forbidden: Vec<(String, String)>,
    /// Remarks on the treated water.
    pub flags: Vec<Flag>,
}

/// Steps of treatment pH.
const PH_STEP: f64 = 0.5;
/// How much less rinse water the concentrated case has.
const CONCENTRATED: f64 = 10.0;

/// Studies the rinse behind a bath with the given doses in g/L.
///
/// # Errors
/// [`BathError`] for a bad rinse section or an ill-posed bath.
pub fn rinse(bath: &Bath, doses: &[f64]) -> Result<RinseStudy, BathError> {
    let line = &bath.project.rinse;
    let mut reagents: Vec<&str> = METHODS.iter().map(|method| method.reagent).collect();
    reagents.sort_unstable();
    reagents.dedup();
    let mut water = RinseWater::new(bath, doses, &reagents)?;
    let watched = watched_in(bath, &water)?;
    let mut stages = Vec::new();
    for share in shares(line) {
        stages.push(plain_water(&mut water, &watched, share)?);
    }
    let waste = plain_water(&mut water, &watched, waste_share(line))?;
    let bare = water.without_agents(&waste.totals)?;
    let ph = treatment_ph(line.treatment_ph.low, line.treatment_ph.high);
    let mut scan = Vec::with_capacity(ph.len());
    for &ph in &ph {
        let with_agents = to_ph(&mut water, &waste.totals, ph, &watched)?;
        let mut sigma = Vec::new();
        if let Some(treated) = &with_agents {
            for metal in &watched {
                let (totals, solution) = (&treated.totals, &treated.solution);
                sigma.push(dissolved::sigma_log10(&water, totals, ph, solution, &metal.components)?);
            }
        }
        let without_mg_l = to_ph(&mut water, &bare, ph, &watched)?.map(|treated| treated.dissolved_mg_l);
        scan.push(ScanPoint { ph, with_agents, sigma, without_mg_l });
    }
    let best = best_point(&scan, &watched);
    let concentrated_mg_l = match best.and_then(|best| scan[best].with_agents.as_ref()) {
        Some(treated) => {
            let totals = water.mixed((waste.share * CONCENTRATED).min(1.0));
            to_ph(&mut water, &totals, treated.ph, &watched)?.map(|treated| treated.dissolved_mg_l)
        }
        None => None,
    };
    let mut breaking = Vec::new();
    if watched.iter().any(|metal| metal.limit.is_some()) {
        for method in METHODS {
            breaking.extend(breaking::try_method(&mut water, &waste.totals, &watched, &ph, method)?);
        }
    }
    let at_best = best.and_then(|best| scan[best].with_agents.as_ref());
    let rests_on = at_best.map_or_else(Vec::new, |treated| rests_on(&water, &treated.solution));
    let flags =
        at_best.map_or_else(Vec::new, |treated| flags(&water.bath, &treated.solution, line.temperature_c));
    Ok(RinseStudy {
        assumed: line.is_default(),
        agents: agents_leaving(&water, &waste, line.flow_l_h * line.hours_per_day),
        phosphorus_nitrogen_mg_l: (element_mg_l(&water, &waste, "P"), element_mg_l(&water, &waste, "N")),
        forbidden: forbidden(&water, &waste),
        water,
        watched,
        stages,
        waste,
        scan,
        best,
        concentrated_mg_l,
        breaking,
        rests_on,
        flags,
    })
}

/// Dry mass of the solids in a treated water, g/L; what comes from the filter press holds several times as much water.
pub fn sludge_g_l(water: &RinseWater, solution: &Equilibrium) -> f64 {
    let library = &water.bath.library;
    let solids = water.bath.system.solids.iter().zip(&solution.solids).filter(|(_, n)| **n > 0.0);
    solids
        .filter_map(|(entry, n)| {
            let solid = library.solids.iter().find(|solid| solid.record.token == entry.token)?;
            Some(n * Formula::parse(&solid.record.formula).ok()?.molar_mass())
        })
        .sum()
}

/// Treatment pH values from low to high.
fn treatment_ph(low: f64, high: f64) -> Vec<f64> {
    let mut values: Vec<f64> =
        (0..).map(|i| low + PH_STEP * f64::from(i)).take_while(|ph| *ph < high).collect();
    values.push(high);
    values
}

fn plain_water(water: &mut RinseWater, watched: &[Watched], share: f64) -> Result<Water, BathError> {
    let totals = water.mixed(share);
    let solution = water.solve(&totals, None)?;
    let metal_mg_l = watched
        .iter()
        .map(|metal| metal.components.iter().map(|&i| totals[i]).sum::<f64>() * metal.g_mol * 1e3)
        .collect();
    let solids = solution.solids.iter().copied().enumerate().filter(|(_, n)| *n > 0.0).collect();
    Ok(Water { share, ph: solution.ph(water.proton), totals, metal_mg_l, solids })
}

/// The point with the lowest share of a limit; without limits that with the least dissolved metal.
fn best_point(scan: &[ScanPoint], watched: &[Watched]) -> Option<usize> {
    let limited = watched.iter().any(|metal| metal.limit.is_some());
    let score = |point: &ScanPoint| -> Option<f64> {
        let treated = point.with_agents.as_ref()?;
        Some(if limited { treated.worst_share(watched) } else { treated.dissolved_mg_l.iter().sum() })
    };
    let scored = scan.iter().enumerate().filter_map(|(i, point)| Some((i, score(point)?)));
    scored.min_by(|a, b| a.1.total_cmp(&b.1)).map(|(i, _)| i)
}

fn rests_on(water: &RinseWater, solution: &Equilibrium) -> Vec<Rests> {
    let library = &water.bath.library;
    let present = water.bath.system.solids.iter().zip(&solution.solids).filter(|(_, n)| **n > 0.0);
    present
        .filter_map(|(entry, _)| {
            let solid = library.solids.iter().find(|solid| solid.record.token == entry.token)?;
            let record = &solid.record.dissolution;
            Some(Rests {
                solid: solid.record.name.clone(),
                log_k: record.log_k,
                sigma: record.sigma,
                basis: record.basis,
                source: record.source.clone(),
            })
        })
        .collect()
}

fn agents_leaving(water: &RinseWater, waste: &Water, litres_a_day: f64) -> Vec<(String, f64, f64)> {
    let present = water.agents().filter(|&i| waste.totals[i] > 0.0);
    present
        .filter_map(|i| {
            let component = water.bath.component(i);
            let mg_l = waste.totals[i] * component.reported_molar_mass()? * 1e3;
            Some((component.name.clone(), mg_l, mg_l * litres_a_day * 1e-6))
        })
        .collect()
}

fn element_mg_l(water: &RinseWater, waste: &Water, element: &str) -> f64 {
    let g_mol = Formula::parse(element).map_or(0.0, |formula| formula.molar_mass());
    let counted = waste.totals.iter().enumerate().map(|(i, total)| {
        let formula = &water.bath.component(i).formula;
        total * Formula::parse(formula).map_or(0.0, |formula| formula.count(element))
    });
    counted.sum::<f64>() * g_mol * 1e3
}

fn forbidden(water: &RinseWater, waste: &Water) -> Vec<(String, String)> {
    let mut found = Vec::new();
    for regime in Regime::built_in() {
        for token in &regime.forbidden_agents {
            if let Some(i) = water.bath.system.component(token)
                && waste.totals[i] > 0.0
            {
                found.push((water.bath.component(i).short().to_owned(), regime.name.clone()));
            }
        }
    }
    found
}
