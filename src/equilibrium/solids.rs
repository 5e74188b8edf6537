//! Which solids are present, and how much: active set on the conditions amount ≥ 0, saturation ≤ 1, product 0.
//!
//! The amounts are the multipliers of a convex problem, so the dual function grows with every exchange and no set
//! comes back: the scheme of Lawson & Hanson (Solving Least Squares Problems, 1974, ch. 23) carried over from
//! least squares. Solids that are combinations of present ones (parallel solids, or two hydroxides of one metal
//! at held pH) enter by a ratio test instead, because their row adds no new equation.

use super::convex::{Minimiser, Outcome};
use super::error::EquilibriumError;
use super::reduced::{Reduced, Sparse};
use nalgebra::{DMatrix, DVector};

/// Saturation (ln units) above one at which a solid has to form.
const SUPERSATURATED: f64 = 1e-11;
/// Smallest pivot of the scaled Hessian below which the unknowns are changed to dominant species.
const ILL_CONDITIONED: f64 = 1e-4;
/// Times that the unknowns may be changed on the way to one solution.
const MAX_TURNS: usize = 25;
const MAX_EXCHANGES: usize = 300;

/// The problem at fixed activity coefficients.
pub(super) struct Fixed<'a> {
    /// Balances with held activities taken out.
    pub base: &'a Reduced,
    /// Row-wise original coefficients of each solid over the columns of `base`.
    pub solid_rows: &'a [Vec<f64>],
    /// ln Ks of each solid.
    pub ln_ks: &'a [f64],
    /// Tokens of the solids, for errors.
    pub solid_names: &'a [&'a str],
    /// Reciprocal size of the balance of each column.
    pub column_weight: &'a [f64],
    /// −ln γ of each species.
    pub minus_ln_gamma: &'a [f64],
}

/// The current set of present solids with the unknowns that remain.
#[derive(Clone, Debug, Default)]
pub(super) struct Stage {
    /// Present solids and the column each one took out.
    pub active: Vec<(usize, usize)>,
    pub reduced: Reduced,
    pub sparse: Sparse,
    /// ln c of each species at y = 0.
    pub k: Vec<f64>,
    /// One value for each live column.
    pub y: Vec<f64>,
    /// The balances before their unknowns were turned into species, and the species that are the unknowns now; none
    /// while they are the components.
    origin: Reduced,
    unknowns: Vec<usize>,
}

impl Stage {
    /// Takes the given solids out of `base`; `x` is a guess of ln a over all columns.
    pub fn prepare(fixed: &Fixed, active: &[usize], x: &[f64]) -> Self {
        let mut reduced = fixed.base.clone();
        let mut taken: Vec<Option<usize>> = vec![None; active.len()];
        // The scarcest component of a solid tells its amount most exactly. All solids are looked at before each
        // elimination, so that the order in which they formed doesn't decide which balances are mixed.
        while let Some((place, column)) = scarcest(fixed, &reduced, active, &taken) {
            let row = reduced.solid_row(active[place]);
            let value = fixed.ln_ks[active[place]] - reduced.offset[row];
            reduced.pivot(column, row);
            reduced.fix(column, value);
            taken[place] = Some(column);
        }
        let taken = active.iter().zip(taken).filter_map(|(&solid, column)| Some((solid, column?))).collect();
        let y = reduced.live.iter().map(|&column| x[column]).collect();
        let sparse = reduced.sparse();
        let origin = reduced.clone();
        Self { active: taken, reduced, sparse, k: Vec::new(), y, origin, unknowns: Vec::new() }
    }

    fn refresh(&mut self, fixed: &Fixed) {
        self.k.clear();
        self.k.extend(self.reduced.offset.iter().zip(fixed.minus_ln_gamma).map(|(offset, g)| offset + g));
    }

    /// Minimises over the live unknowns, changing to better ones when two of them have grown together.
    pub fn minimise(&mut self, fixed: &Fixed, minimiser: &mut Minimiser) -> Outcome {
        self.refresh(fixed);
        minimiser.approach(&self.sparse, &self.k, &mut self.y);
        let mut outcome = minimiser.minimise(&self.sparse, &self.k, &mut self.y, false);
        for turn in 0..=MAX_TURNS {
            // Unknowns that were chosen far from the solution are chosen again until they suit it.
            let well_posed = outcome.converged && outcome.smallest_pivot > ILL_CONDITIONED;
            if well_posed && self.unknowns.is_empty() {
                break;
            }
            let better = turn < MAX_TURNS && self.turn(fixed, &minimiser.c);
            if !better && outcome.converged {
                break;
            }
            self.refresh(fixed);
            minimiser.approach(&self.sparse, &self.k, &mut self.y);
            let steps = outcome.steps;
            outcome = minimiser.minimise(&self.sparse, &self.k, &mut self.y, !better);
            outcome.steps += steps;
            if !better {
                break;
            }
        }
        outcome
    }

    /// Makes the most concentrated independent species the unknowns. Returns false when they are already.
    ///
    /// Always from the components anew: totals that were turned twice would carry the rounding of both turns.
    fn turn(&mut self, fixed: &Fixed, c: &[f64]) -> bool {
        let mut order: Vec<usize> = (0..self.reduced.species_count()).collect();
        order.sort_by(|&a, &b| c[b].total_cmp(&c[a]));
        let mut turned = self.origin.clone();
        let mut y: Vec<f64> = turned.live.iter().map(|&column| self.reduced.value(column, &self.y)).collect();
        let mut unknowns = vec![usize::MAX; y.len()];
        for species in order {
            // It stands for its scarcest component, whose balance would drown in that of a plentiful one.
            let weight = |column: usize| match turned.live.iter().position(|&live| live == column) {
                Some(place) if unknowns[place] == usize::MAX => fixed.column_weight[column],
                _ => 0.0,
            };
            let Some(column) = turned.largest(species, weight) else { continue };
            let Some(place) = turned.live.iter().position(|&live| live == column) else { continue };
            unknowns[place] = species;
            let z = turned.value(species, &y) - turned.offset[species];
            turned.pivot(column, species);
            y[place] = z;
            if unknowns.iter().all(|&species| species != usize::MAX) {
                break;
            }
        }
        if unknowns == self.unknowns {
            return false;
        }
        (self.reduced, self.y, self.unknowns) = (turned, y, unknowns);
        self.sparse = self.reduced.sparse();
        true
    }

    /// ln a over all columns of the base problem; bare components are the first species rows.
    pub fn ln_activities(&self, columns: &[usize], x: &mut [f64]) {
        for &column in columns {
            x[column] = self.reduced.value(column, &self.y);
        }
    }

    /// Amounts of the present solids from the balances of the columns that they took out.
    fn amounts(&self, fixed: &Fixed, c: &[f64]) -> Vec<f64> {
        let size = self.active.len();
        if size == 0 {
            return Vec::new();
        }
        // Each balance in units of its own size, so that no pivot mixes a scarce component with a plentiful one.
        let weight = |r: usize| fixed.column_weight[self.active[r].1];
        let matrix = DMatrix::from_fn(size, size, |r, s| {
            weight(r) * fixed.solid_rows[self.active[s].0][self.active[r].1]
        });
        let missing = DVector::from_fn(size, |r, _| {
            let column = self.active[r].1;
            let bound: f64 = (0..fixed.base.species_count()).map(|j| fixed.base.get(j, column) * c[j]).sum();
            weight(r) * (fixed.base.get(fixed.base.totals_row(), column) - bound)
        });
        matrix.lu().solve(&missing).map_or_else(|| vec![0.0; size], |n| n.iter().copied().collect())
    }

    /// How a solid whose row is fixed already is made of the present ones.
    fn combination(&self, fixed: &Fixed, solid: usize) -> Vec<f64> {
        let size = self.active.len();
        let matrix =
            DMatrix::from_fn(size, size, |r, s| fixed.solid_rows[self.active[s].0][self.active[r].1]);
        let target = DVector::from_fn(size, |r, _| fixed.solid_rows[solid][self.active[r].1]);
        matrix.lu().solve(&target).map_or_else(|| vec![0.0; size], |alpha| alpha.iter().copied().collect())
    }
}

/// The place among `active` and the column of the next elimination: the largest entry in units of the totals.
fn scarcest(
    fixed: &Fixed,
    reduced: &Reduced,
    active: &[usize],
    taken: &[Option<usize>],
) -> Option<(usize, usize)> {
    let candidates = active.iter().enumerate().filter(|&(place, _)| taken[place].is_none());
    let entries = candidates.filter_map(|(place, &solid)| {
        let row = reduced.solid_row(solid);
        let column = reduced.largest(row, |column| fixed.column_weight[column])?;
        Some((place, column, reduced.get(row, column).abs() * fixed.column_weight[column]))
    });
    entries.max_by(|a, b| a.2.total_cmp(&b.2)).map(|(place, column, _)| (place, column))
}

/// Finds the present solids and the minimum; returns their amounts beside the outcome of the last minimisation.
pub(super) fn settle(
    fixed: &Fixed,
    stage: &mut Stage,
    minimiser: &mut Minimiser,
    all_columns: &[usize],
    x: &mut [f64],
) -> Result<(Vec<(usize, f64)>, Outcome), EquilibriumError> {
    let mut amounts: Vec<(usize, f64)> = stage.active.iter().map(|&(solid, _)| (solid, 0.0)).collect();
    let mut barred: Vec<usize> = Vec::new();
    let mut steps = 0;
    for _ in 0..MAX_EXCHANGES {
        let mut outcome = stage.minimise(fixed, minimiser);
        steps += outcome.steps;
        outcome.steps = steps;
        stage.ln_activities(all_columns, x);
        let found = stage.amounts(fixed, &minimiser.c);
        let sizes: Vec<f64> = stage.active.iter().map(|&(solid, _)| largest_amount(fixed, solid)).collect();
        if let Some(kept) = retreat(&mut amounts, &found, &sizes, &mut barred) {
            *stage = Stage::prepare(fixed, &kept, x);
            continue;
        }
        let Some((solid, excess)) = most_supersaturated(fixed, stage, &barred) else {
            return Ok((amounts, outcome));
        };
        let row = stage.reduced.solid_row(solid);
        if !stage.reduced.is_fixed(row) {
            amounts.push((solid, 0.0));
        } else {
            exchange(&mut amounts, &stage.combination(fixed, solid), solid).ok_or_else(|| {
                EquilibriumError::UnboundedSolid {
                    solid: fixed.solid_names[solid].to_owned(),
                    index: excess / super::LN_10,
                }
            })?;
        }
        let active: Vec<usize> = amounts.iter().map(|&(solid, _)| solid).collect();
        *stage = Stage::prepare(fixed, &active, x);
    }
    Err(EquilibriumError::NotConverged { residual: f64::NAN, iterations: steps })
}

/// What the scarcest component of a solid allows of it. Rounding of an amount is judged by this, not by the amounts
/// of other solids: 1e−14 mol/L of one is no rounding error because there are 5 mol/L of another.
fn largest_amount(fixed: &Fixed, solid: usize) -> f64 {
    let weighted =
        fixed.solid_rows[solid].iter().zip(fixed.column_weight).map(|(nu, weight)| nu.abs() * weight);
    1.0 / weighted.fold(1e-300, f64::max)
}

/// Moves the amounts towards those found. When one would turn negative the move stops where the first reaches
/// zero, that solid leaves, and the solids that stay are returned.
fn retreat(
    amounts: &mut Vec<(usize, f64)>,
    found: &[f64],
    sizes: &[f64],
    barred: &mut Vec<usize>,
) -> Option<Vec<usize>> {
    let negative = |n: f64, size: f64| n < -1e-13 * size || (n < 0.0 && n > -1e-300);
    if !found.iter().zip(sizes).any(|(&n, &size)| negative(n, size)) {
        for (amount, &n) in amounts.iter_mut().zip(found) {
            amount.1 = n.max(0.0);
        }
        barred.clear();
        return None;
    }
    let mut share: f64 = 1.0;
    for ((amount, &n), &size) in amounts.iter().zip(found).zip(sizes) {
        if negative(n, size) {
            share = share.min(amount.1 / (amount.1 - n));
        }
    }
    let mut kept = Vec::new();
    let before = amounts.len();
    let mut place = 0;
    amounts.retain_mut(|amount| {
        let (n, size) = (found[place], sizes[place]);
        place += 1;
        let leaves = negative(n, size) && amount.1 / (amount.1 - n) <= share * (1.0 + 1e-12);
        amount.1 += share * (n - amount.1);
        if leaves {
            // A solid that leaves as soon as it came must not come straight back (rounding at saturation one).
            if place == before && share == 0.0 {
                barred.push(amount.0);
            }
        } else {
            kept.push(amount.0);
        }
        !leaves
    });
    Some(kept)
}

fn most_supersaturated(fixed: &Fixed, stage: &Stage, barred: &[usize]) -> Option<(usize, f64)> {
    let absent = (0..fixed.ln_ks.len())
        .filter(|solid| !barred.contains(solid) && stage.active.iter().all(|(active, _)| active != solid));
    absent
        .map(|solid| {
            let row = stage.reduced.solid_row(solid);
            (solid, stage.reduced.value(row, &stage.y) - fixed.ln_ks[solid])
        })
        .filter(|&(_, excess)| excess > SUPERSATURATED)
        .max_by(|a, b| a.1.total_cmp(&b.1))
}

/// Lets a dependent solid in: it grows at the expense of the solids it is made of until the first of them is used up.
fn exchange(amounts: &mut Vec<(usize, f64)>, combination: &[f64], solid: usize) -> Option<()> {
    let consumed = amounts.iter().zip(combination).enumerate().filter(|(_, (_, alpha))| **alpha > 1e-9);
    let (leaving, growth) = consumed
        .map(|(place, (amount, alpha))| (place, amount.1 / alpha))
        .min_by(|a, b| a.1.total_cmp(&b.1))?;
    for (amount, alpha) in amounts.iter_mut().zip(combination) {
        amount.1 = (amount.1 - alpha * growth).max(0.0);
    }
    amounts.remove(leaving);
    amounts.push((solid, growth));
    Some(())
}
