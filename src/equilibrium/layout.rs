//! Which part of a system a problem touches: absent components out, held activities fixed, solids that may form in.

use super::LN_10;
use super::error::EquilibriumError;
use super::reduced::Reduced;
use super::solver::Problem;

/// Which parts of the system take part, and the balances over them.
pub(super) struct Layout {
    /// Present components, and the column of each component.
    pub columns: Vec<usize>,
    pub column_of: Vec<Option<usize>>,
    pub species: Vec<usize>,
    pub solids: Vec<usize>,
    pub base: Reduced,
    pub solid_rows: Vec<Vec<f64>>,
    pub ln_ks: Vec<f64>,
}

impl Layout {
    pub fn new(problem: &Problem) -> Result<Self, EquilibriumError> {
        let system = problem.system;
        let reverses = |i: usize| {
            system
                .species
                .iter()
                .any(|s| s.components.iter().any(|&(component, nu)| component == i && nu < 0.0))
        };
        let present: Vec<bool> = (0..system.components.len())
            .map(|i| {
                problem.held[i].is_some()
                    || problem.totals[i] != 0.0
                    || (system.proton == Some(i) && reverses(i))
            })
            .collect();
        let columns: Vec<usize> = (0..present.len()).filter(|&i| present[i]).collect();
        let mut column_of = vec![None; present.len()];
        for (column, &component) in columns.iter().enumerate() {
            column_of[component] = Some(column);
        }
        let occurs = |terms: &[(usize, f64)]| terms.iter().all(|&(i, _)| present[i]);
        let species: Vec<usize> =
            (0..system.species.len()).filter(|&j| occurs(&system.species[j].components)).collect();
        let solids: Vec<usize> = (0..system.solids.len())
            .filter(|&k| problem.may_form[k] && occurs(&system.solids[k].components))
            .collect();
        let mut base = Reduced::new(columns.len(), species.len(), solids.len());
        let place = |terms: &[(usize, f64)]| -> Vec<(usize, f64)> {
            terms.iter().filter_map(|&(i, nu)| column_of[i].map(|column| (column, nu))).collect()
        };
        for (row, &j) in species.iter().enumerate() {
            base.offset[row] = problem.constants.ln_beta[j];
            for (column, nu) in place(&system.species[j].components) {
                base.set(row, column, nu);
            }
        }
        let mut solid_rows = Vec::with_capacity(solids.len());
        for (k, &solid) in solids.iter().enumerate() {
            let mut dense = vec![0.0; columns.len()];
            for (column, nu) in place(&system.solids[solid].components) {
                base.set(base.solid_row(k), column, nu);
                dense[column] = nu;
            }
            solid_rows.push(dense);
        }
        let totals_row = base.totals_row();
        for (column, &component) in columns.iter().enumerate() {
            if problem.held[component].is_none() {
                base.set(totals_row, column, problem.totals[component]);
            }
        }
        for (column, &component) in columns.iter().enumerate() {
            if let Some(ln_a) = problem.held[component] {
                base.fix(column, ln_a);
            }
        }
        let ln_ks: Vec<f64> = solids.iter().map(|&k| problem.constants.ln_ks[k]).collect();
        Self::refuse_unbounded(problem, solids_of(&base, &solids, &ln_ks))?;
        Ok(Self { columns, column_of, species, solids, base, solid_rows, ln_ks })
    }

    /// Refuses solids that held activities alone supersaturate.
    fn refuse_unbounded(
        problem: &Problem,
        mut fixed: impl Iterator<Item = (usize, f64)>,
    ) -> Result<(), EquilibriumError> {
        match fixed.find(|&(_, excess)| excess > 1e-9) {
            Some((solid, excess)) => Err(EquilibriumError::UnboundedSolid {
                solid: problem.system.solids[solid].token.clone(),
                index: excess / LN_10,
            }),
            None => Ok(()),
        }
    }

    /// Reciprocal size of each balance; that of H⁺, a difference of large numbers, counts as the largest.
    pub fn weights(&self, problem: &Problem) -> Vec<f64> {
        let sum: f64 = self.columns.iter().map(|&i| problem.totals[i].abs()).sum::<f64>() + 1e-30;
        let size = |i: usize| if problem.system.proton == Some(i) { sum } else { problem.totals[i].abs() };
        self.columns.iter().map(|&i| 1.0 / size(i).max(1e-300)).collect()
    }

    pub fn present(&self) -> Vec<bool> {
        self.column_of.iter().map(Option::is_some).collect()
    }

    /// ln a over the columns to start from.
    pub fn start(&self, problem: &Problem, warm: Option<&[f64]>) -> Vec<f64> {
        self.columns
            .iter()
            .map(|&component| match (problem.held[component], warm) {
                (Some(ln_a), _) => ln_a,
                (None, Some(ln_a)) => ln_a[component],
                (None, None) if problem.system.proton == Some(component) => -7.0 * LN_10,
                (None, None) => problem.totals[component].max(1e-30).ln(),
            })
            .collect()
    }

    /// Values over the columns spread over all components.
    pub fn spread(&self, x: &[f64], absent: f64) -> Vec<f64> {
        self.column_of.iter().map(|column| column.map_or(absent, |column| x[column])).collect()
    }
}

/// Solids whose ion product is fixed by held activities, with ln(IAP/Ks).
fn solids_of<'a>(
    base: &'a Reduced,
    solids: &'a [usize],
    ln_ks: &'a [f64],
) -> impl Iterator<Item = (usize, f64)> + 'a {
    solids.iter().enumerate().filter_map(move |(k, &solid)| {
        let row = base.solid_row(k);
        base.is_fixed(row).then(|| (solid, base.offset[row] - ln_ks[k]))
    })
}
