//! One side of a comparison: the bath with its agent at the smallest dose that holds, and what follows from it.

use super::band::{Band, ph_band, temperature_band};
use super::chelate::{ChelateEffect, chelate_effect};
use crate::bath::{AgentDose, Bath, BathError, Corrected, Flag, Solids, flags};
use crate::dosing::{Assessment, Assessor, Hold, LedgerEntry, Search, ledger, search};
use crate::equilibrium::{Equilibrium, EquilibriumError, Solver};
use crate::study::rinse::{RinseWater, Watched, dissolved_sigma, sludge_g_l, to_ph, watched_in};

/// Treatment pH at which effluents are compared: mixed waste is run at 8.8 to 9.5 (common practice).
pub const EFFLUENT_PH: f64 = 9.0;

/// One agent at its own dose.
#[derive(Clone, Debug)]
pub struct Side {
    /// The bath with this agent and without the other.
    pub bath: Bath,
    /// Its number among the agents.
    pub agent: usize,
    /// What the search found.
    pub search: Search,
    /// The smallest dose that holds, else the one that comes nearest, g/L.
    pub dose_g_l: f64,
    /// How well it holds.
    pub hold: Hold,
    /// All doses, g/L.
    pub doses: Vec<f64>,
    /// Totals with the pH correction.
    pub corrected: Corrected,
    /// The dose over the operating range.
    pub assessment: Assessment,
    /// The bath at its set point.
    pub solution: Equilibrium,
    /// Who holds the agent there.
    pub ledger: Vec<LedgerEntry>,
    /// pH over which the dose still holds, the temperature in its range.
    pub ph_band: Option<Band>,
    /// Temperature in °C over which it still holds, the pH in its range.
    pub temperature_band: Option<Band>,
    /// log10 of the conditional constant of the first limited metal with the agent, and its standard uncertainty.
    pub conditional: Option<(f64, f64)>,
    /// The 1:1 complex.
    pub chelate: Option<ChelateEffect>,
    /// The rinse water after treatment; `None` where it can't be brought to [`EFFLUENT_PH`].
    pub effluent: Option<Effluent>,
    /// Remarks.
    pub flags: Vec<Flag>,
}

/// Treated rinse water.
#[derive(Clone, Debug, PartialEq)]
pub struct Effluent {
    /// Metals and their limits.
    pub watched: Vec<Watched>,
    /// Dissolved totals, mg/L.
    pub dissolved_mg_l: Vec<f64>,
    /// Standard uncertainties of their log10.
    pub sigma: Vec<f64>,
    /// Acid or alkali of the treatment, kg a day, and its name.
    pub poured_kg_day: Option<(f64, String)>,
    /// Dry sludge, kg a day.
    pub sludge_kg_day: f64,
}

/// The bath with one product and without the other; caps as listed, else that of the first agent.
pub fn bath_with(bath: &Bath, product: &str, other: &str) -> Result<(Bath, usize), BathError> {
    let mut project = bath.project.clone();
    let listed = bath.agents.iter().position(|agent| agent.product.id == product);
    let max_g_l = listed.or(Some(0)).and_then(|i| bath.agents.get(i)).map_or(100.0, |agent| agent.max_g_l);
    let kept = bath.agents.iter().zip(&bath.project.agents);
    let kept = kept.filter(|(agent, _)| agent.product.id != product && agent.product.id != other);
    project.agents = kept.map(|(_, dose)| dose.clone()).collect();
    project.agents.push(AgentDose { product: product.to_owned(), max_g_l, ..AgentDose::default() });
    let agent = project.agents.len() - 1;
    Ok((Bath::resolve(&project)?, agent))
}

impl Side {
    /// Finds the dose of a product and follows it.
    ///
    /// # Errors
    /// [`BathError`] for an unknown product, a bad rinse section or an ill-posed bath.
    pub fn new(bath: &Bath, product: &str, other: &str) -> Result<Side, BathError> {
        let (bath, agent) = bath_with(bath, product, other)?;
        let search = search(&bath, agent)?;
        let (dose_g_l, hold) =
            search.found.as_ref().map_or((search.best.0, Hold::Not), |found| (found.dose_g_l, found.hold));
        let mut doses = bath.doses();
        doses[agent] = dose_g_l;
        let corrected = bath.corrected(&doses)?;
        let assessment = Assessor::new(&bath)?.assess(&doses)?;
        let set = bath.project.tank.temperature_c.set;
        let constants = bath.constants_at(set);
        let solution = bath.solve_totals(
            &mut Solver::new(),
            &constants,
            &corrected.totals,
            bath.ph_set(),
            Solids::Real,
        )?;
        let active = bath.agents[agent].active;
        let metal = bath.limits.first().map(|limit| limit.component);
        let sigma = assessment.metals.first().map_or(0.0, |metal| metal.set.sigma);
        let conditional = metal.and_then(|metal| conditional_log_k(&bath, &solution, metal, active));
        Ok(Side {
            ledger: ledger(&bath, &solution, active),
            ph_band: ph_band(&bath, &corrected.totals, hold)?,
            temperature_band: temperature_band(&bath, &corrected.totals, hold)?,
            conditional: conditional.map(|log_k| (log_k, sigma)),
            chelate: metal.and_then(|metal| chelate_effect(&bath, metal, active, set)),
            effluent: effluent(&bath, &doses)?,
            flags: flags(&bath, &solution, set),
            agent,
            search,
            dose_g_l,
            hold,
            doses,
            corrected,
            assessment,
            solution,
            bath,
        })
    }

    /// The product.
    pub fn product(&self) -> &crate::chemistry::Product {
        &self.bath.agents[self.agent].product
    }

    /// Largest dose considered, g/L.
    pub fn cap(&self) -> f64 {
        self.bath.agents[self.agent].max_g_l
    }

    /// Kilograms of the product for the tank.
    pub fn kg(&self) -> f64 {
        self.dose_g_l * self.bath.project.tank.volume_l * 1e-3
    }

    /// Kilograms of the dosed product that leave a day by drag-out.
    pub fn lost_kg_day(&self) -> f64 {
        let line = &self.bath.project.rinse;
        self.dose_g_l * line.drag_out_l_h * line.hours_per_day * 1e-3
    }

    /// Short name of the agent: "EDTA".
    pub fn short(&self) -> &str {
        self.bath.component(self.bath.agents[self.agent].active).short()
    }

    /// Moles of the agent per litre that the dose brings.
    pub fn mol_l(&self) -> f64 {
        let agent = &self.bath.agents[self.agent];
        self.dose_g_l * agent.per_gram[agent.active]
    }
}

/// log10 of ML′/(M · L′) in the bath: metal in complexes with the agent over free metal and agent not bound to the metal,
/// so that pM = log K′ + log(L′/ML′).
pub fn conditional_log_k(bath: &Bath, solution: &Equilibrium, metal: usize, agent: usize) -> Option<f64> {
    let system = &bath.system;
    let (mut bound, mut other) = (0.0, 0.0);
    for (j, c) in solution.c.iter().enumerate() {
        let (metals, agents) = (system.coefficient(j, metal), system.coefficient(j, agent));
        if metals != 0.0 && agents != 0.0 {
            bound += metals * c;
        } else {
            other += agents * c;
        }
    }
    let k = bound / (solution.free(metal) * other);
    (k.is_finite() && k > 0.0).then(|| k.log10())
}

fn effluent(bath: &Bath, doses: &[f64]) -> Result<Option<Effluent>, BathError> {
    let mut water = RinseWater::new(bath, doses, &[])?;
    let watched = watched_in(bath, &water)?;
    let line = &bath.project.rinse;
    let totals = water.mixed(crate::study::rinse::waste_share(line));
    let Some(treated) = to_ph(&mut water, &totals, EFFLUENT_PH, &watched)? else { return Ok(None) };
    let sigma: Result<Vec<f64>, EquilibriumError> = watched
        .iter()
        .map(|metal| {
            dissolved_sigma(&water, &treated.totals, EFFLUENT_PH, &treated.solution, &metal.components)
        })
        .collect();
    let litres = line.flow_l_h * line.hours_per_day;
    Ok(Some(Effluent {
        poured_kg_day: treated.poured.map(|poured| (poured.g_l * litres * 1e-3, poured.name)),
        sludge_kg_day: sludge_g_l(&water, &treated.solution) * litres * 1e-3,
        dissolved_mg_l: treated.dissolved_mg_l,
        sigma: sigma?,
        watched,
    }))
}
