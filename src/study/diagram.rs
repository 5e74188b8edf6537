//! Where a metal or an agent is, against pH or against a dose, with the free metals at the same points.

use crate::bath::{Bath, Solids};
use crate::equilibrium::{EquilibriumError, Solver};

/// What runs along the bottom.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Axis {
    /// pH held at each value, all else as in the bath.
    Ph {
        /// Lowest pH.
        from: f64,
        /// Highest pH.
        to: f64,
    },
    /// Dose of one agent in g/L at the set pH and temperature.
    Dose {
        /// Number of the agent.
        agent: usize,
        /// Highest dose.
        to: f64,
    },
}

/// Which component's whereabouts are drawn: system index of a metal or of an agent.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Basis(pub usize);

/// The share of the basis component in one species or solid.
#[derive(Clone, Debug, PartialEq)]
pub struct Series {
    /// Token of the species or solid.
    pub token: String,
    /// Whether it is a solid.
    pub solid: bool,
    /// Share of the component's total, 0…1, at each x; NaN where there is no answer.
    pub share: Vec<f64>,
    /// Largest share on the axis.
    pub peak: f64,
}

/// Free concentration of a metal along the axis.
#[derive(Clone, Debug, PartialEq)]
pub struct FreeLine {
    /// System index of the metal.
    pub component: usize,
    /// log10 of the free concentration in mol/L; NaN where there is no answer.
    pub log10_free: Vec<f64>,
}

/// A stretch of the axis over which a solid is present.
#[derive(Clone, Debug, PartialEq)]
pub struct SolidRegion {
    /// System index of the solid.
    pub solid: usize,
    /// Start and end on the axis.
    pub from: f64,
    /// End on the axis.
    pub to: f64,
}

/// A distribution diagram.
#[derive(Clone, Debug, PartialEq)]
pub struct Diagram {
    /// What runs along the bottom.
    pub axis: Axis,
    /// Whose whereabouts are drawn.
    pub basis: Basis,
    /// Points along the axis.
    pub x: Vec<f64>,
    /// Species and solids, largest peak first; those that never reach one per cent are left out.
    pub series: Vec<Series>,
    /// Free metals.
    pub free: Vec<FreeLine>,
    /// Where solids are present.
    pub solids: Vec<SolidRegion>,
    /// Points without an answer, with the first reason.
    pub gaps: Option<(usize, EquilibriumError)>,
}

/// Shares below this at every point are not drawn.
const SMALLEST_PEAK: f64 = 0.01;

/// Computes a diagram with `count` points at the set temperature.
pub fn diagram(bath: &Bath, axis: Axis, basis: Basis, count: usize) -> Diagram {
    let system = &bath.system;
    let constants = bath.constants_at(bath.project.tank.temperature_c.set);
    let x = points(axis, count.max(2));
    let mut doses = bath.doses();
    let species: Vec<(usize, f64)> = (0..system.species.len())
        .map(|j| (j, system.coefficient(j, basis.0)))
        .filter(|(_, count)| *count > 0.0)
        .collect();
    let solids: Vec<(usize, f64)> = system
        .solids
        .iter()
        .enumerate()
        .filter_map(|(k, solid)| {
            solid.components.iter().find(|(i, n)| *i == basis.0 && *n > 0.0).map(|(_, n)| (k, *n))
        })
        .collect();
    let mut share = vec![Vec::with_capacity(x.len()); species.len() + solids.len()];
    let metals: Vec<usize> = bath.metals().collect();
    let mut free: Vec<FreeLine> = metals
        .iter()
        .map(|&component| FreeLine { component, log10_free: Vec::with_capacity(x.len()) })
        .collect();
    let mut present: Vec<Vec<bool>> = vec![Vec::with_capacity(x.len()); system.solids.len()];
    let mut gaps: Option<(usize, EquilibriumError)> = None;
    let mut solver = Solver::new();
    let as_dosed = bath.corrected(&doses).map(|corrected| corrected.totals);
    for &value in &x {
        let (ph, totals) = match axis {
            Axis::Ph { .. } => (Some(value), as_dosed.clone()),
            Axis::Dose { agent, .. } => {
                doses[agent] = value;
                (bath.ph_set(), bath.corrected(&doses).map(|corrected| corrected.totals))
            }
        };
        let solved =
            totals.and_then(|totals| bath.solve_totals(&mut solver, &constants, &totals, ph, Solids::Real));
        match solved {
            Ok(solution) => {
                let total = solution.totals[basis.0];
                let dissolved = species.iter().map(|&(j, n)| n * solution.c[j] / total);
                let solid = solids.iter().map(|&(k, n)| n * solution.solids[k] / total);
                share.iter_mut().zip(dissolved.chain(solid)).for_each(|(line, value)| line.push(value));
                for line in &mut free {
                    line.log10_free.push(solution.ln_c[line.component] / crate::equilibrium::LN_10);
                }
                present.iter_mut().zip(&solution.solids).for_each(|(line, n)| line.push(*n > 0.0));
            }
            Err(error) => {
                share.iter_mut().for_each(|line| line.push(f64::NAN));
                free.iter_mut().for_each(|line| line.log10_free.push(f64::NAN));
                present.iter_mut().for_each(|line| line.push(false));
                let (count, first) = gaps.take().map_or((0, error), |(count, first)| (count, first));
                gaps = Some((count + 1, first));
            }
        }
    }
    let tokens = species.iter().map(|&(j, _)| (system.species[j].token.clone(), false));
    let solid_tokens = solids.iter().map(|&(k, _)| (system.solids[k].token.clone(), true));
    let mut series: Vec<Series> = tokens
        .chain(solid_tokens)
        .zip(share)
        .map(|((token, solid), share)| {
            let peak = share.iter().copied().filter(|v| v.is_finite()).fold(0.0, f64::max);
            Series { token, solid, share, peak }
        })
        .filter(|series| series.peak >= SMALLEST_PEAK)
        .collect();
    series.sort_by(|a, b| b.peak.total_cmp(&a.peak));
    let solids = regions(&x, &present);
    Diagram { axis, basis, x, series, free, solids, gaps }
}

fn points(axis: Axis, count: usize) -> Vec<f64> {
    let (from, to) = match axis {
        Axis::Ph { from, to } => (from, to),
        Axis::Dose { to, .. } => (0.0, to),
    };
    (0..count).map(|i| from + (to - from) * i as f64 / (count - 1) as f64).collect()
}

fn regions(x: &[f64], present: &[Vec<bool>]) -> Vec<SolidRegion> {
    let mut regions = Vec::new();
    for (solid, line) in present.iter().enumerate() {
        let mut start = None;
        for (i, &is) in line.iter().enumerate() {
            match (is, start) {
                (true, None) => start = Some(i),
                (false, Some(from)) => {
                    regions.push(SolidRegion { solid, from: x[from], to: x[i - 1] });
                    start = None;
                }
                _ => {}
            }
        }
        if let Some(from) = start {
            regions.push(SolidRegion { solid, from: x[from], to: x[x.len() - 1] });
        }
    }
    regions
}

impl Diagram {
    /// Index of the point nearest to a value on the axis.
    pub fn nearest(&self, value: f64) -> usize {
        let distance = |i: &usize| (self.x[*i] - value).abs();
        (0..self.x.len()).min_by(|a, b| distance(a).total_cmp(&distance(b))).unwrap_or(0)
    }
}
