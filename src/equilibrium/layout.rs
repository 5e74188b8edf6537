//! Which part of a system a problem touches: absent components out, held activities fixed, solids that may form in.

use super::LN_10;
use super::balances::Balances;
use super::error::EquilibriumError;
use super::problem::Problem;
use super::system::System;

/// Which parts of the system take part, and the balances over them. Prepared once for all problems of one shape.
#[derive(Clone, Debug, Default)]
pub(super) struct Layout {
    shape: Shape,
    /// Present components, and the column of each component.
    pub columns: Vec<usize>,
    column_of: Vec<Option<usize>>,
    /// Species and solids that take part, by their index in the system.
    pub species: Vec<usize>,
    pub solids: Vec<usize>,
    /// Charge of each of the species.
    pub charge: Vec<f64>,
    /// The balances of the problem at hand.
    pub base: Balances,
    /// ln Ks of each of the solids.
    pub ln_ks: Vec<f64>,
    /// Gases that the bath is open to, by their index in the system, with the column that each took out.
    pub gases: Vec<(usize, usize)>,
    /// The balances before open gases were taken out; empty without any.
    closed: Balances,
    /// ln p − ln K of each open gas, in the places behind the solids.
    ln_levels: Vec<f64>,
    /// Reciprocal size of the balance of each column.
    pub weights: Vec<f64>,
}

/// What two problems must share to be laid out alike.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
struct Shape {
    system: Option<u64>,
    present: Vec<bool>,
    held: Vec<bool>,
    may_form: Vec<bool>,
    open: Vec<bool>,
}

impl Shape {
    fn is_of(&self, problem: &Problem) -> bool {
        let components = 0..problem.totals.len();
        self.system == Some(problem.system.identity())
            && self.may_form == problem.may_form
            && self.open.iter().copied().eq(problem.open_to.iter().map(Option::is_some))
            && self.held.len() == problem.held.len()
            && self.held.iter().zip(problem.held).all(|(held, value)| *held == value.is_some())
            && components.clone().all(|i| self.present[i] == is_present(problem, i))
    }

    fn of(problem: &Problem) -> Self {
        Self {
            system: Some(problem.system.identity()),
            present: (0..problem.totals.len()).map(|i| is_present(problem, i)).collect(),
            held: problem.held.iter().map(Option::is_some).collect(),
            may_form: problem.may_form.to_vec(),
            open: problem.open_to.iter().map(Option::is_some).collect(),
        }
    }
}

fn is_present(problem: &Problem, component: usize) -> bool {
    problem.held[component].is_some()
        || problem.totals[component] != 0.0
        || open_gases(problem)
            .any(|gas| problem.system.gases[gas].components.iter().any(|&(i, _)| i == component))
        || (problem.system.proton == Some(component) && problem.system.reverses_proton())
}

/// The gases that a bath is open to.
fn open_gases<'a>(problem: &'a Problem) -> impl Iterator<Item = usize> + 'a {
    let open = problem.open_to.iter().take(problem.system.gases.len()).enumerate();
    open.filter_map(|(gas, pressure)| pressure.map(|_| gas))
}

impl Layout {
    /// Takes over a problem. Returns whether it has the shape of the last one.
    ///
    /// # Errors
    /// [`EquilibriumError::UnboundedSolid`] for a solid that held activities alone supersaturate.
    pub fn load(&mut self, problem: &Problem) -> Result<bool, EquilibriumError> {
        let known = self.shape.is_of(problem);
        if !known {
            *self = Self::new(problem)?;
        }
        let balances = if self.gases.is_empty() { &mut self.base } else { &mut self.closed };
        balances.clear_offset();
        for (row, &j) in self.species.iter().enumerate() {
            balances.set_offset(row, problem.constants.ln_beta[j]);
        }
        for (column, &component) in self.columns.iter().enumerate() {
            match problem.held[component] {
                Some(ln_a) => balances.shift_by(column, ln_a),
                None => balances.totals[column] = problem.totals[component],
            }
        }
        if !self.gases.is_empty() {
            for (place, &(gas, _)) in self.gases.iter().enumerate() {
                let level = problem.open_to[gas].unwrap_or(f64::NAN) - problem.constants.ln_kg[gas];
                self.ln_levels[self.solids.len() + place] = level;
            }
            self.base.reload(&self.closed, &self.ln_levels);
        }
        for (ln_ks, &k) in self.ln_ks.iter_mut().zip(&self.solids) {
            *ln_ks = problem.constants.ln_ks[k];
        }
        self.weigh(problem);
        if let Err(unbounded) = self.refuse_unbounded(problem) {
            // Nothing else was prepared for this layout yet: the next problem begins anew.
            self.shape = Shape::default();
            return Err(unbounded);
        }
        Ok(known)
    }

    fn new(problem: &Problem) -> Result<Self, EquilibriumError> {
        let (system, shape) = (problem.system, Shape::of(problem));
        let present = &shape.present;
        let columns: Vec<usize> = (0..present.len()).filter(|&i| present[i]).collect();
        let mut column_of = vec![None; present.len()];
        for (column, &component) in columns.iter().enumerate() {
            column_of[component] = Some(column);
        }
        let occurs = |terms: &[(usize, f64)]| terms.iter().all(|&(i, _)| present[i]);
        let mut species: Vec<usize> =
            (0..system.species.len()).filter(|&j| occurs(&system.species[j].components)).collect();
        gather(system, &mut species[columns.len()..]);
        let solids: Vec<usize> = (0..system.solids.len())
            .filter(|&k| problem.may_form[k] && occurs(&system.solids[k].components))
            .collect();
        let open: Vec<usize> = open_gases(problem).collect();
        let mut base = Balances::new(columns.len(), species.len(), solids.len() + open.len());
        let place = |terms: &[(usize, f64)]| -> Vec<(usize, f64)> {
            terms.iter().filter_map(|&(i, nu)| column_of[i].map(|column| (column, nu))).collect()
        };
        for (row, &j) in species.iter().enumerate() {
            for (column, nu) in place(&system.species[j].components) {
                base.set(row, column, nu);
            }
        }
        let solid_terms = solids.iter().map(|&solid| &system.solids[solid].components);
        let gas_terms = open.iter().map(|&gas| &system.gases[gas].components);
        for (k, terms) in solid_terms.chain(gas_terms).enumerate() {
            for (column, nu) in place(terms) {
                base.set(base.solid_row(k), column, nu);
            }
        }
        for (column, &component) in columns.iter().enumerate() {
            if problem.held[component].is_some() {
                base.hold(column);
            }
        }
        let closed = if open.is_empty() { Balances::default() } else { base.clone() };
        let mut gases = Vec::with_capacity(open.len());
        for (place, &gas) in open.iter().enumerate() {
            let row = base.solid_row(solids.len() + place);
            // Its own component goes out, not hydrogen, which many share.
            let weight = |column: usize| if system.proton == Some(columns[column]) { 1e-6 } else { 1.0 };
            let Some(column) = base.largest(row, weight) else {
                return Err(EquilibriumError::GasFixed { gas: system.gases[gas].token.clone() });
            };
            base.pivot(column, row);
            base.saturate(column, solids.len() + place, 0.0);
            gases.push((gas, column));
        }
        base.survey();
        Ok(Self {
            charge: species.iter().map(|&j| system.species[j].charge).collect(),
            ln_ks: vec![0.0; solids.len()],
            ln_levels: vec![0.0; solids.len() + open.len()],
            gases,
            closed,
            weights: vec![0.0; columns.len()],
            shape,
            columns,
            column_of,
            species,
            solids,
            base,
        })
    }

    /// Refuses solids that held activities alone supersaturate.
    fn refuse_unbounded(&self, problem: &Problem) -> Result<(), EquilibriumError> {
        for (k, &solid) in self.solids.iter().enumerate() {
            let row = self.base.solid_row(k);
            let excess = self.base.offset(row) - self.ln_ks[k];
            if excess > 1e-9 && self.base.is_fixed(row) {
                let solid = problem.system.solids[solid].token.clone();
                return Err(EquilibriumError::UnboundedSolid { solid, index: excess / LN_10 });
            }
        }
        Ok(())
    }

    /// Weighs each balance by its size; that of H⁺, a difference of large numbers, counts as the largest.
    fn weigh(&mut self, problem: &Problem) {
        let sum: f64 = self.columns.iter().map(|&i| problem.totals[i].abs()).sum::<f64>() + 1e-30;
        for (weight, &i) in self.weights.iter_mut().zip(&self.columns) {
            let size = if problem.system.proton == Some(i) { sum } else { problem.totals[i].abs() };
            *weight = 1.0 / size.max(1e-300);
        }
    }

    /// Writes values over the columns to the components; `absent` to the others.
    pub fn spread(&self, x: &[f64], absent: f64, to: &mut Vec<f64>) {
        to.clear();
        to.extend(self.column_of.iter().map(|column| column.map_or(absent, |column| x[column])));
    }
}

/// Puts species of the same components side by side, by their rarest component first, so that most columns have entries
/// in few lanes only.
fn gather(system: &System, species: &mut [usize]) {
    let mut count = vec![0usize; system.components.len()];
    for &j in &*species {
        for &(i, _) in &system.species[j].components {
            count[i] += 1;
        }
    }
    let key = |j: usize| {
        let mut parts: Vec<(usize, usize)> =
            system.species[j].components.iter().map(|&(i, _)| (count[i], i)).collect();
        parts.sort_unstable();
        parts
    };
    species.sort_by_cached_key(|&j| key(j));
}
