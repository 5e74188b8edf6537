//! The unknowns at hand: the balances with present solids taken out, turned into species that suit the solution.

use super::balances::Balances;
use super::convex::{Minimiser, Outcome};
use super::lanes::{Lane, WIDTH, at};
use super::start::Start;
use nalgebra::{DMatrix, DVector};

/// Smallest pivot of the scaled Hessian below which the unknowns are changed to dominant species.
const ILL_CONDITIONED: f64 = 1e-4;
/// Times that the unknowns may be changed on the way to one solution.
const MAX_TURNS: usize = 25;

/// The problem at fixed activity coefficients.
#[derive(Clone, Copy)]
pub(super) struct Fixed<'a> {
    /// Balances with held activities taken out.
    pub base: &'a Balances,
    /// ln Ks of each solid.
    pub ln_ks: &'a [f64],
    /// Reciprocal size of the balance of each column.
    pub column_weight: &'a [f64],
    /// −ln γ of each species.
    pub minus_ln_gamma: &'a [Lane],
}

impl Fixed<'_> {
    /// Coefficient of a solid in a column of the base.
    pub fn solid_entry(&self, solid: usize, column: usize) -> f64 {
        self.base.get(self.base.solid_row(solid), column)
    }
}

/// The current set of present solids with the unknowns that remain.
#[derive(Clone, Debug, Default)]
pub(super) struct Stage {
    /// Present solids and the column each one took out.
    pub active: Vec<(usize, usize)>,
    /// The balances over the unknowns.
    pub balances: Balances,
    /// One value for each live column.
    pub y: Vec<f64>,
    /// ln c of each species at y = 0.
    k: Vec<Lane>,
    /// The balances before their unknowns were turned into species.
    origin: Balances,
    /// The species that stands for each live column: the bare component (of the same number) where it wasn't turned.
    holders: Vec<usize>,
    /// Reciprocal size of the balance of each column, as far as it is known.
    weight: Vec<f64>,
    turn: Turn,
}

/// Buffers of a turn.
#[derive(Clone, Debug, Default)]
struct Turn {
    balances: Balances,
    order: Vec<usize>,
    y: Vec<f64>,
    holders: Vec<usize>,
}

const NOT_YET: usize = usize::MAX;

impl Stage {
    /// Takes the given solids out of the base; `x` is a guess of ln a over all columns.
    pub fn prepare(&mut self, fixed: &Fixed, solids: &[usize], x: &[f64]) {
        self.origin.copy_from(fixed.base);
        self.origin.forget_record();
        self.active.clear();
        if self.weight.len() != fixed.column_weight.len() {
            self.weight.clear();
            self.weight.extend_from_slice(fixed.column_weight);
        }
        // The scarcest component of a solid tells its amount most exactly. All solids are looked at before each
        // elimination, so that the order in which they formed doesn't decide which balances are mixed.
        while let Some((solid, column)) = self.scarcest(solids) {
            let row = self.origin.solid_row(solid);
            self.origin.pivot(column, row);
            self.origin.saturate(column, solid, fixed.ln_ks[solid]);
            self.active.push((solid, column));
        }
        let order = |(solid, _): &(usize, usize)| solids.iter().position(|known| known == solid);
        self.active.sort_by_key(order);
        if !self.active.is_empty() {
            self.origin.survey();
        }
        self.balances.copy_from(&self.origin);
        self.holders.clone_from(&self.balances.live);
        self.y.clear();
        self.y.extend(self.balances.live.iter().map(|&column| x[column]));
    }

    /// The solid and the column of the next elimination: the largest entry in units of the totals.
    fn scarcest(&self, solids: &[usize]) -> Option<(usize, usize)> {
        let mut best = (0.0, None);
        for &solid in solids.iter().filter(|&&solid| self.active.iter().all(|&(known, _)| known != solid)) {
            let row = self.origin.solid_row(solid);
            if let Some(column) = self.origin.largest(row, |column| self.weight[column]) {
                let entry = self.origin.get(row, column).abs() * self.weight[column];
                if entry >= best.0 {
                    best = (entry, Some((solid, column)));
                }
            }
        }
        best.1
    }

    /// Takes over new totals, constants and held activities for the same unknowns, with the holders' concentrations
    /// as they were.
    pub fn reload(&mut self, fixed: &Fixed, exponent: &[Lane]) {
        self.origin.reload(fixed.base, fixed.ln_ks);
        self.balances.reload(fixed.base, fixed.ln_ks);
        self.refresh(fixed);
        for (y, &holder) in self.y.iter_mut().zip(&self.holders) {
            *y = at(exponent, holder) - at(&self.k, holder);
        }
    }

    /// Weighs the balances by what they really sum up, which tells their rounding better than a total that may be a
    /// difference, as that of H⁺ is.
    pub fn weigh(&mut self, fixed: &Fixed, c: &[Lane]) {
        self.weight.clear();
        self.weight.extend(fixed.base.totals.iter().enumerate().map(|(column, total)| {
            let entries = fixed.base.column(column).as_flattened().iter().zip(c.as_flattened());
            1.0 / (total.abs() + entries.map(|(entry, c)| (entry * c).abs()).sum::<f64>()).max(1e-300)
        }));
    }

    /// Forgets what is known of the sizes of the balances.
    pub fn forget(&mut self) {
        self.weight.clear();
    }

    /// A start from nothing: the unknowns become the species that hold the matter.
    pub fn start(&mut self, fixed: &Fixed, start: &mut Start) {
        self.refresh(fixed);
        start.find(&self.balances, &self.k, &mut self.y);
        if start.holders != self.holders {
            self.turn.order.clear();
            self.turn.order.extend_from_slice(&start.holders);
            self.turn.order.sort_by(|&a, &b| start.amount(b).total_cmp(&start.amount(a)));
            self.turn_to_order();
        }
    }

    fn refresh(&mut self, fixed: &Fixed) {
        self.k.clear();
        self.k.extend_from_slice(self.balances.species_offset());
        for (k, minus) in self.k.iter_mut().zip(fixed.minus_ln_gamma) {
            for l in 0..WIDTH {
                k[l] += minus[l];
            }
        }
    }

    /// Minimises over the live unknowns, changing to better ones when two of them have grown together.
    pub fn minimise(&mut self, fixed: &Fixed, minimiser: &mut Minimiser) -> Outcome {
        self.refresh(fixed);
        let mut outcome = self.descend(minimiser, false);
        let turned = |stage: &Self| stage.holders != stage.balances.live;
        for turn in 0..=MAX_TURNS {
            // Unknowns that were chosen far from the solution are chosen again until they suit it.
            let well_posed = outcome.converged && outcome.smallest_pivot > ILL_CONDITIONED;
            if well_posed && (turn == 0 || !turned(self)) {
                break;
            }
            let better = turn < MAX_TURNS && self.turn(fixed, &minimiser.c);
            if !better && outcome.converged {
                break;
            }
            let steps = outcome.steps;
            outcome = self.descend(minimiser, !better);
            outcome.steps += steps;
            if !better {
                break;
            }
        }
        outcome
    }

    fn descend(&mut self, minimiser: &mut Minimiser, patience: bool) -> Outcome {
        minimiser.minimise(&self.balances, &self.k, &mut self.y, patience)
    }

    /// Makes the most concentrated independent species the unknowns. Returns false when they are already.
    fn turn(&mut self, fixed: &Fixed, c: &[Lane]) -> bool {
        let order = &mut self.turn.order;
        order.clear();
        order.extend(0..self.balances.species_count());
        order.sort_unstable_by(|&a, &b| at(c, b).total_cmp(&at(c, a)).then(a.cmp(&b)));
        self.weigh(fixed, c);
        self.turn_to_order()
    }

    /// Makes the first independent species of the order the unknowns. Returns false when they are already.
    ///
    /// Always from the components anew: totals that were turned twice would carry the rounding of both turns.
    fn turn_to_order(&mut self) -> bool {
        let (Turn { balances, order, y, holders }, weight) = (&mut self.turn, &self.weight);
        balances.copy_from(&self.origin);
        y.clear();
        // ln a of the live components: their rows are those of the bare species.
        y.extend(balances.live.iter().map(|&column| self.balances.value(column, &self.y)));
        holders.clear();
        holders.resize(y.len(), NOT_YET);
        let mut missing = y.len();
        for &species in &*order {
            if missing == 0 {
                break;
            }
            // It stands for its scarcest component, whose balance would drown in that of a plentiful one.
            let mut best = (0.0, None);
            for (place, &column) in balances.live.iter().enumerate() {
                let entry = balances.get(species, column).abs();
                let weighted = entry * weight[column];
                if holders[place] == NOT_YET && entry > 1e-9 && weighted > 0.0 && weighted >= best.0 {
                    best = (weighted, Some((place, column)));
                }
            }
            let Some((place, column)) = best.1 else { continue };
            holders[place] = species;
            missing -= 1;
            y[place] = balances.value(species, y) - balances.offset(species);
            balances.pivot(column, species);
        }
        if *holders == self.holders {
            return false;
        }
        for (holder, &column) in holders.iter_mut().zip(&balances.live) {
            if *holder == NOT_YET {
                *holder = column;
            }
        }
        balances.survey();
        std::mem::swap(&mut self.balances, balances);
        std::mem::swap(&mut self.y, y);
        std::mem::swap(&mut self.holders, holders);
        true
    }

    /// ln a over all columns of the base problem; bare components are the first species rows.
    pub fn ln_activities(&self, x: &mut [f64]) {
        for (column, x) in x.iter_mut().enumerate() {
            *x = self.balances.value(column, &self.y);
        }
    }

    /// Amounts of the present solids from the balances of the columns that they took out.
    pub fn amounts(&self, fixed: &Fixed, c: &[Lane]) -> Vec<f64> {
        let size = self.active.len();
        if size == 0 {
            return Vec::new();
        }
        // Each balance in units of its own size, so that no pivot mixes a scarce component with a plentiful one.
        let weight = |r: usize| self.weight[self.active[r].1];
        let matrix = DMatrix::from_fn(size, size, |r, s| {
            weight(r) * fixed.solid_entry(self.active[s].0, self.active[r].1)
        });
        let missing = DVector::from_fn(size, |r, _| {
            let column = self.active[r].1;
            let bound: f64 =
                (0..fixed.base.species_count()).map(|j| fixed.base.get(j, column) * at(c, j)).sum();
            weight(r) * (fixed.base.totals[column] - bound)
        });
        matrix.lu().solve(&missing).map_or_else(|| vec![0.0; size], |n| n.iter().copied().collect())
    }

    /// How a solid whose row is fixed already is made of the present ones.
    pub fn combination(&self, fixed: &Fixed, solid: usize) -> Vec<f64> {
        let size = self.active.len();
        let matrix =
            DMatrix::from_fn(size, size, |r, s| fixed.solid_entry(self.active[s].0, self.active[r].1));
        let target = DVector::from_fn(size, |r, _| fixed.solid_entry(solid, self.active[r].1));
        matrix.lu().solve(&target).map_or_else(|| vec![0.0; size], |alpha| alpha.iter().copied().collect())
    }

    /// ln(IAP/Ks) of a solid at the current unknowns.
    pub fn ln_saturation(&self, fixed: &Fixed, solid: usize) -> f64 {
        self.balances.value(self.balances.solid_row(solid), &self.y) - fixed.ln_ks[solid]
    }
}
