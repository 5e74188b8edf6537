//! The balances in a changed set of unknowns.
//!
//! Three things take unknowns out or turn them, and all are the same elimination step: a held activity fixes its
//! column; a solid that is present fixes one combination of columns; and a species that holds nearly all of two
//! components is a better unknown than either (the difference of two nearly equal totals is then formed once,
//! exactly, instead of being lost in every sum).

use super::lanes::{Lane, WIDTH, ZERO_LANE, at, divide, eliminate, lanes_for, put};
use pulp::Simd;

/// Rows of species and solids, and the totals, over the present unknowns.
///
/// Row r stands for eᵣ = offsetᵣ + Σ rows[r][i]·yᵢ: ln c of a species without its activity coefficient, or the ln IAP of
/// a solid. The totals T transform like a row, because T·y is invariant. Stored by columns, each filled up to whole
/// lanes with zeros: first the species, then the solids.
#[derive(Clone, Debug, Default)]
pub(super) struct Balances {
    width: usize,
    species: usize,
    species_lanes: usize,
    stride: usize,
    columns: Vec<Lane>,
    /// Constant part of each row.
    offset: Vec<Lane>,
    /// Total over each column.
    pub totals: Vec<f64>,
    /// Columns that are still unknown.
    pub live: Vec<usize>,
    /// Which groups of lanes of each column have entries among the species, a bit each.
    occupied: Vec<u64>,
    /// Bound of Σ |ν| of any species over the live columns.
    order: f64,
    /// What was done to the totals and the constant parts, so that it can be done to others.
    record: Vec<Event>,
    pivot_rows: Vec<f64>,
}

/// A step of the elimination.
#[derive(Clone, Copy, Debug)]
enum Event {
    /// A column was replaced; its pivot row is the next of `pivot_rows`.
    Turned(usize),
    /// A column was given the value that saturates a solid.
    Saturated { column: usize, solid: usize },
}

/// Entries smaller than this are rounding left-overs of eliminated integers.
const ZERO: f64 = 1e-11;
/// Totals smaller than this are rounding left-overs. A total is a measured number, and the difference of two nearly
/// equal ones decides everything near an equivalence point, so only the rounding of the subtraction itself goes.
const ZERO_TOTAL: f64 = 4.0 * f64::EPSILON;

impl Balances {
    /// Balances over `width` components without entries.
    pub fn new(width: usize, species: usize, solids: usize) -> Self {
        let species_lanes = lanes_for(species);
        let stride = species_lanes + lanes_for(solids);
        let mut empty = Self {
            width,
            species,
            species_lanes,
            stride,
            columns: vec![ZERO_LANE; width * stride],
            offset: vec![ZERO_LANE; stride],
            totals: vec![0.0; width],
            live: (0..width).collect(),
            occupied: vec![0; width],
            order: 0.0,
            record: Vec::new(),
            pivot_rows: Vec::new(),
        };
        empty.clear_offset();
        empty
    }

    /// Becomes a copy of another without giving up its buffers.
    pub fn copy_from(&mut self, other: &Self) {
        (self.width, self.species) = (other.width, other.species);
        (self.species_lanes, self.stride, self.order) = (other.species_lanes, other.stride, other.order);
        self.columns.clone_from(&other.columns);
        self.offset.clone_from(&other.offset);
        self.totals.clone_from(&other.totals);
        self.live.clone_from(&other.live);
        self.occupied.clone_from(&other.occupied);
        self.record.clone_from(&other.record);
        self.pivot_rows.clone_from(&other.pivot_rows);
    }

    pub fn set(&mut self, row: usize, column: usize, value: f64) {
        put(&mut self.columns[column * self.stride..], row, value);
    }

    pub fn get(&self, row: usize, column: usize) -> f64 {
        at(&self.columns[column * self.stride..], row)
    }

    pub fn offset(&self, row: usize) -> f64 {
        at(&self.offset, row)
    }

    pub fn set_offset(&mut self, row: usize, value: f64) {
        put(&mut self.offset, row, value);
    }

    /// Row index of solid `k`.
    pub fn solid_row(&self, k: usize) -> usize {
        self.species_lanes * WIDTH + k
    }

    pub fn species_count(&self) -> usize {
        self.species
    }

    /// Lanes that the species fill in each column.
    pub fn species_lanes(&self) -> usize {
        self.species_lanes
    }

    /// The species of a column.
    #[inline(always)]
    pub fn column(&self, column: usize) -> &[Lane] {
        &self.columns[column * self.stride..column * self.stride + self.species_lanes]
    }

    /// Looks anew where the columns have entries; to be called when they have changed.
    pub fn survey(&mut self) {
        let group = self.lanes_per_group();
        self.order = 0.0;
        for &column in &self.live {
            let lanes = &self.columns[column * self.stride..column * self.stride + self.species_lanes];
            let largest = lanes.as_flattened().iter().fold(0.0f64, |max, entry| max.max(entry.abs()));
            self.order += largest;
        }
        for (column, occupied) in self.occupied.iter_mut().enumerate() {
            let lanes = &self.columns[column * self.stride..column * self.stride + self.species_lanes];
            *occupied = lanes
                .iter()
                .enumerate()
                .fold(0, |bits, (q, lane)| if *lane == ZERO_LANE { bits } else { bits | 1 << (q / group) });
        }
    }

    /// Bound of Σ |ν| over the live columns of any species, as of the last survey.
    pub fn order(&self) -> f64 {
        self.order
    }

    fn lanes_per_group(&self) -> usize {
        self.species_lanes.div_ceil(64).max(1)
    }

    /// The lanes in which a column has entries, as a set to walk.
    #[inline(always)]
    pub fn lanes_of(&self, column: usize) -> Occupied {
        let (bits, group) = (self.occupied[column], self.lanes_per_group());
        Occupied { bits, group, lanes: self.species_lanes, next: 0, end: 0 }
    }

    /// Constant parts of the species.
    pub fn species_offset(&self) -> &[Lane] {
        &self.offset[..self.species_lanes]
    }

    /// Replaces unknown `column` by the variable part of row `by`: y_column = (z − Σ others)/pivot.
    pub fn pivot(&mut self, column: usize, by: usize) {
        pulp::Arch::new().dispatch(Pivot { balances: self, column, by });
    }

    /// As [`Balances::pivot`] inside code that uses the widest instructions already.
    #[inline(always)]
    pub fn pivot_here<S: Simd>(&mut self, simd: S, column: usize, by: usize) {
        let (stride, start) = (self.stride, self.pivot_rows.len());
        for i in 0..self.width {
            let entry = self.get(by, i);
            self.pivot_rows.push(entry);
        }
        self.record.push(Event::Turned(column));
        let pivot = self.pivot_rows[start + column];
        let (before, rest) = self.columns.split_at_mut(column * stride);
        let (own, after) = rest.split_at_mut(stride);
        divide(simd, own, pivot);
        for &i in &self.live {
            let across = self.pivot_rows[start + i];
            if i == column || across == 0.0 {
                continue;
            }
            let other = if i < column {
                &mut before[i * stride..(i + 1) * stride]
            } else {
                &mut after[(i - column - 1) * stride..(i - column) * stride]
            };
            eliminate(simd, other, across, own, ZERO);
        }
        turn_totals(&mut self.totals, &self.live, column, &self.pivot_rows[start..]);
    }

    /// Gives the unknown `column`, turned into the row of a solid, the value that saturates it, and takes it out.
    pub fn saturate(&mut self, column: usize, solid: usize, ln_ks: f64) {
        let value = ln_ks - self.offset(self.solid_row(solid));
        self.shift_by(column, value);
        self.live.retain(|&live| live != column);
        self.record.push(Event::Saturated { column, solid });
    }

    /// Takes over the totals and the constant parts of the balances that these were turned from.
    pub fn reload(&mut self, from: &Self, ln_ks: &[f64]) {
        self.offset.copy_from_slice(&from.offset);
        self.totals.copy_from_slice(&from.totals);
        let mut rows = self.pivot_rows.chunks_exact(self.width.max(1));
        let mut totals = std::mem::take(&mut self.totals);
        for (done, event) in self.record.iter().enumerate() {
            match *event {
                Event::Turned(column) => {
                    let Some(row) = rows.next() else { continue };
                    let factor = totals[column] / row[column];
                    for i in self.live_at(done).filter(|&i| i != column) {
                        turn_total(&mut totals[i], factor, row[i]);
                    }
                    totals[column] = factor;
                }
                Event::Saturated { column, solid } => {
                    let value = ln_ks[solid] - at(&self.offset, self.solid_row(solid));
                    let entries = &self.columns[column * self.stride..(column + 1) * self.stride];
                    shift(&mut self.offset, value, entries);
                }
            }
        }
        self.totals = totals;
    }

    /// The columns that were live before a step of the elimination: those that are, and those that went out since.
    fn live_at(&self, step: usize) -> impl Iterator<Item = usize> + '_ {
        let later = self.record[step..].iter().filter_map(|event| match event {
            Event::Saturated { column, .. } => Some(*column),
            Event::Turned(_) => None,
        });
        self.live.iter().copied().chain(later)
    }

    /// Forgets how these balances came about: they are the beginning of what follows.
    pub fn forget_record(&mut self) {
        self.record.clear();
        self.pivot_rows.clear();
    }

    /// Takes a column out whose value stands in the constant parts already.
    pub fn hold(&mut self, column: usize) {
        self.live.retain(|&live| live != column);
    }

    /// Sets the constant parts of the rows to zero; the places that fill up the last lane hold nothing, ever.
    pub fn clear_offset(&mut self) {
        self.offset.fill(ZERO_LANE);
        for place in self.species..self.species_lanes * WIDTH {
            put(&mut self.offset, place, f64::NEG_INFINITY);
        }
    }

    /// Adds a column times a value to the constant parts.
    pub fn shift_by(&mut self, column: usize, value: f64) {
        let entries = &self.columns[column * self.stride..(column + 1) * self.stride];
        shift(&mut self.offset, value, entries);
    }

    /// The live column with the largest weighted entry of a row, `None` when the row is fixed already.
    pub fn largest(&self, row: usize, weight: impl Fn(usize) -> f64) -> Option<usize> {
        let mut best = (0.0, None);
        for &column in &self.live {
            let entry = self.get(row, column).abs();
            let weighted = entry * weight(column);
            if entry > 1e-9 && weighted > 0.0 && weighted >= best.0 {
                best = (weighted, Some(column));
            }
        }
        best.1
    }

    /// Whether a row has no live entry: its value does not depend on the unknowns any more.
    pub fn is_fixed(&self, row: usize) -> bool {
        self.live.iter().all(|&column| self.get(row, column).abs() <= 1e-9)
    }

    /// Value of a row at the unknowns `y` (one for each live column).
    pub fn value(&self, row: usize, y: &[f64]) -> f64 {
        self.offset(row) + self.live.iter().zip(y).map(|(&column, y)| self.get(row, column) * y).sum::<f64>()
    }
}

/// A pivot with the widest instructions of the processor at hand.
struct Pivot<'a> {
    balances: &'a mut Balances,
    column: usize,
    by: usize,
}

impl pulp::WithSimd for Pivot<'_> {
    type Output = ();

    #[inline(always)]
    fn with_simd<S: Simd>(self, simd: S) {
        self.balances.pivot_here(simd, self.column, self.by);
    }
}

/// A set of lanes to walk.
#[derive(Clone, Copy, Debug)]
pub(super) struct Occupied {
    bits: u64,
    group: usize,
    lanes: usize,
    /// The rest of the group at hand.
    next: usize,
    end: usize,
}

impl Occupied {
    /// The lanes that are in both sets.
    #[inline(always)]
    pub fn and(self, other: Self) -> Self {
        Self { bits: self.bits & other.bits, ..self }
    }
}

impl Iterator for Occupied {
    type Item = usize;

    #[inline(always)]
    fn next(&mut self) -> Option<usize> {
        if self.next == self.end {
            if self.bits == 0 {
                return None;
            }
            self.next = self.bits.trailing_zeros() as usize * self.group;
            self.end = (self.next + self.group).min(self.lanes);
            self.bits &= self.bits - 1;
        }
        self.next += 1;
        Some(self.next - 1)
    }
}

/// `sum += factor · lanes`.
fn shift(sum: &mut [Lane], factor: f64, lanes: &[Lane]) {
    for (sum, lane) in sum.as_flattened_mut().iter_mut().zip(lanes.as_flattened()) {
        *sum += factor * lane;
    }
}

fn turn_totals(totals: &mut [f64], live: &[usize], column: usize, pivot_row: &[f64]) {
    let factor = totals[column] / pivot_row[column];
    for &i in live.iter().filter(|&&i| i != column) {
        turn_total(&mut totals[i], factor, pivot_row[i]);
    }
    totals[column] = factor;
}

fn turn_total(total: &mut f64, factor: f64, across: f64) {
    let value = *total - factor * across;
    *total = if value.abs() < ZERO_TOTAL * total.abs() { 0.0 } else { value };
}
