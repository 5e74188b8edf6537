//! A start from nothing: which species hold the matter, by a linear programme.
//!
//! Where every species either holds its components or is negligible, the minimum of Gibbs energy is that of the linear
//! programme min Σ cⱼ(ln capⱼ − kⱼ) under Σ νⱼᵢ cⱼ = Tᵢ, c ≥ 0, where capⱼ is the most that the totals allow of the
//! species (White, Johnson & Dantzig, J. Chem. Phys. 28 (1958) 751, start from the same programme without caps; they
//! stand for the entropy of dilution). The simplex method walks from the bare components to the species that hold
//! nearly all of each component, and Newton's method has only the rest to do.

use super::balances::Balances;
use super::lanes::{Lane, WIDTH, ZERO_LANE, at, eliminate, largest};
use pulp::Simd;

/// ln units by which a species may exceed its cap when the walk ends.
const CLOSE_ENOUGH: f64 = 1.5;
/// Least share of its cap that a holding species starts from.
const LEAST_SHARE: f64 = 1e-3;
/// Exchanges per component before the walk is given up: it then is a start like any other.
const PATIENCE: usize = 6;

/// The walk's buffers.
#[derive(Clone, Debug, Default)]
pub(super) struct Start {
    tableau: Balances,
    /// ln of the cap of each species.
    cap: Vec<Lane>,
    /// kⱼ + νⱼ·y − ln capⱼ: positive where a species should hold more.
    excess: Vec<Lane>,
    /// The species that holds each live column.
    pub holders: Vec<usize>,
}

impl Start {
    /// Finds the species that hold the matter. Afterwards `y` holds ln a of the live columns of `balances`.
    /// The bare component of a column is the species of the same number.
    pub fn find(&mut self, balances: &Balances, k: &[Lane], y: &mut [f64]) {
        pulp::Arch::new().dispatch(Walk { start: self, balances, k, y });
    }

    #[inline(always)]
    fn walk<S: Simd>(&mut self, simd: S, balances: &Balances, k: &[Lane], y: &mut [f64]) {
        let (lanes, bare) = (balances.species_lanes(), balances.live.as_slice());
        self.tableau.copy_from(balances);
        self.holders.clear();
        self.holders.extend_from_slice(bare);
        self.find_caps(balances);
        self.excess.resize(lanes, ZERO_LANE);
        for (q, excess) in self.excess.iter_mut().enumerate() {
            for l in 0..WIDTH {
                excess[l] = k[q][l] - self.cap[q][l];
            }
        }
        for &column in bare {
            // The bare component starts at its cap: its own excess is then nought.
            let own = at(&self.excess, column);
            eliminate(simd, &mut self.excess, own, self.tableau.column(column), 0.0);
        }
        for (place, &column) in bare.iter().enumerate() {
            if self.tableau.totals[column] < 0.0
                && let Some(species) = self.reversed(column)
            {
                self.exchange(simd, place, species);
            }
        }
        for _ in 0..PATIENCE * bare.len() {
            let Some(species) = self.most_excessive(simd) else { break };
            let Some(place) = self.first_used_up(species) else { break };
            self.exchange(simd, place, species);
        }
        self.unknowns(k, y);
    }

    /// What the programme gave a holder, mol/L.
    pub fn amount(&self, holder: usize) -> f64 {
        let place = self.holders.iter().position(|&known| known == holder);
        place.map_or(0.0, |place| self.tableau.totals[self.tableau.live[place]])
    }

    /// Caps from the totals of the components that nothing counts negatively; the others' species from all totals.
    #[inline(always)]
    fn find_caps(&mut self, balances: &Balances) {
        let all: f64 = balances.live.iter().map(|&column| balances.totals[column].abs()).sum();
        let all = all.max(1e-30).ln();
        self.cap.clear();
        self.cap.resize(balances.species_lanes(), [all; WIDTH]);
        for &column in &balances.live {
            let total = balances.totals[column];
            let entries = balances.column(column);
            if total <= 0.0 || entries.iter().flatten().any(|&entry| entry < 0.0) {
                continue;
            }
            let ln_total = total.ln();
            for (cap, entry) in self.cap.iter_mut().zip(entries) {
                for l in 0..WIDTH {
                    let bounded = if ln_total < cap[l] { ln_total } else { cap[l] };
                    cap[l] = if entry[l] > 0.0 { bounded } else { cap[l] };
                }
            }
        }
    }

    /// A species that gives a column a negative part and touches no other, as OH⁻ does for H⁺.
    fn reversed(&self, column: usize) -> Option<usize> {
        (0..self.tableau.species_count()).find(|&species| {
            self.tableau.live.iter().all(|&live| {
                let entry = self.tableau.get(species, live);
                if live == column { entry < 0.0 } else { entry == 0.0 }
            })
        })
    }

    #[inline(always)]
    fn most_excessive<S: Simd>(&self, simd: S) -> Option<usize> {
        let highest = largest(simd, &self.excess, CLOSE_ENOUGH);
        if highest <= CLOSE_ENOUGH {
            return None;
        }
        let lane = self.excess.iter().position(|lane| lane.contains(&highest))?;
        let place = self.excess[lane].iter().position(|&excess| excess == highest)?;
        Some(lane * WIDTH + place)
    }

    /// The holder that an entering species uses up first.
    #[inline(always)]
    fn first_used_up(&self, species: usize) -> Option<usize> {
        let mut first = (f64::INFINITY, None);
        for (place, &column) in self.tableau.live.iter().enumerate() {
            let entry = self.tableau.get(species, column);
            let ratio = self.tableau.totals[column].max(0.0) / entry;
            if entry > 1e-9 && ratio < first.0 {
                first = (ratio, Some(place));
            }
        }
        first.1
    }

    #[inline(always)]
    fn exchange<S: Simd>(&mut self, simd: S, place: usize, species: usize) {
        let column = self.tableau.live[place];
        let own = at(&self.excess, species);
        self.tableau.pivot_here(simd, column, species);
        eliminate(simd, &mut self.excess, own, self.tableau.column(column), 0.0);
        self.holders[place] = species;
    }

    /// ln a of the live columns when each holder holds what the programme gave it.
    #[inline(always)]
    fn unknowns(&self, k: &[Lane], y: &mut [f64]) {
        for (&bare, y) in self.tableau.live.iter().zip(y) {
            // The bare component's row tells its ln a in terms of the holders.
            let mut sum = 0.0;
            for (holder, &column) in self.holders.iter().zip(&self.tableau.live) {
                let entry = self.tableau.get(bare, column);
                if entry != 0.0 {
                    let cap = at(&self.cap, *holder);
                    let amount = self.tableau.totals[column].max(LEAST_SHARE * cap.exp());
                    sum += entry * (amount.ln() - at(k, *holder));
                }
            }
            *y = sum;
        }
    }
}

/// A walk with the widest instructions of the processor at hand.
struct Walk<'a> {
    start: &'a mut Start,
    balances: &'a Balances,
    k: &'a [Lane],
    y: &'a mut [f64],
}

impl pulp::WithSimd for Walk<'_> {
    type Output = ();

    #[inline(always)]
    fn with_simd<S: Simd>(self, simd: S) {
        self.start.walk(simd, self.balances, self.k, self.y);
    }
}
