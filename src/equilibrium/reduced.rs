//! The balances in a changed set of unknowns.
//!
//! Three things take unknowns out or turn them, and all are the same elimination step: a held activity fixes its
//! column; a solid that is present fixes one combination of columns; and a species that holds nearly all of two
//! components is a better unknown than either (the difference of two nearly equal totals is then formed once,
//! exactly, instead of being lost in every sum).

/// Rows of species, solids and the totals over the present unknowns.
///
/// Row r stands for eᵣ = offsetᵣ + Σ rows[r][i]·yᵢ: ln c of a species without its activity coefficient, or the ln
/// IAP of a solid. The last row holds the totals T, which transform alike because T·x is invariant.
#[derive(Clone, Debug, Default)]
pub(super) struct Reduced {
    width: usize,
    species: usize,
    solids: usize,
    rows: Vec<f64>,
    /// Constant part of each row; that of the totals is meaningless.
    pub offset: Vec<f64>,
    /// Columns that are still unknown.
    pub live: Vec<usize>,
}

/// Entries smaller than this are rounding left-overs of eliminated integers.
const ZERO: f64 = 1e-11;
/// Totals smaller than this are rounding left-overs. A total is a measured number, and the difference of two nearly
/// equal ones decides everything near an equivalence point, so only the rounding of the subtraction itself goes.
const ZERO_TOTAL: f64 = 4.0 * f64::EPSILON;

impl Reduced {
    /// An empty problem over `width` components.
    pub fn new(width: usize, species: usize, solids: usize) -> Self {
        let count = species + solids + 1;
        Self {
            width,
            species,
            solids,
            rows: vec![0.0; count * width],
            offset: vec![0.0; count],
            live: (0..width).collect(),
        }
    }

    pub fn set(&mut self, row: usize, column: usize, value: f64) {
        self.rows[row * self.width + column] = value;
    }

    pub fn get(&self, row: usize, column: usize) -> f64 {
        self.rows[row * self.width + column]
    }

    /// Row index of solid `k`.
    pub fn solid_row(&self, k: usize) -> usize {
        self.species + k
    }

    pub fn totals_row(&self) -> usize {
        self.species + self.solids
    }

    pub fn species_count(&self) -> usize {
        self.species
    }

    /// Replaces unknown `column` by the variable part of row `by`: y_column = (z − Σ others)/pivot.
    pub fn pivot(&mut self, column: usize, by: usize) {
        let pivot_row: Vec<f64> = self.rows[by * self.width..(by + 1) * self.width].to_vec();
        let pivot = pivot_row[column];
        let totals_row = self.totals_row();
        for (place, row) in self.rows.chunks_exact_mut(self.width).enumerate() {
            let zero = if place == totals_row { ZERO_TOTAL } else { ZERO };
            let factor = row[column] / pivot;
            if factor == 0.0 {
                continue;
            }
            for &i in &self.live {
                if i == column {
                    row[i] = factor;
                } else {
                    let value = row[i] - factor * pivot_row[i];
                    row[i] = if value.abs() < zero * row[i].abs() { 0.0 } else { value };
                }
            }
        }
    }

    /// Gives unknown `column` a fixed value and takes it out.
    pub fn fix(&mut self, column: usize, value: f64) {
        for (row, offset) in self.rows.chunks_exact(self.width).zip(&mut self.offset) {
            if row[column] != 0.0 {
                *offset += row[column] * value;
            }
        }
        self.live.retain(|&live| live != column);
    }

    /// The live column with the largest weighted entry of a row, `None` when the row is fixed already.
    pub fn largest(&self, row: usize, weight: impl Fn(usize) -> f64) -> Option<usize> {
        let entry = |&column: &usize| self.get(row, column).abs() * weight(column);
        self.live
            .iter()
            .copied()
            .filter(|&column| self.get(row, column).abs() > 1e-9 && weight(column) > 0.0)
            .max_by(|a, b| entry(a).total_cmp(&entry(b)))
    }

    /// Whether a row has no live entry: its value does not depend on the unknowns any more.
    pub fn is_fixed(&self, row: usize) -> bool {
        self.live.iter().all(|&column| self.get(row, column).abs() <= 1e-9)
    }

    /// Value of a row at the unknowns `y` (one for each live column).
    pub fn value(&self, row: usize, y: &[f64]) -> f64 {
        self.offset[row] + self.live.iter().zip(y).map(|(&column, y)| self.get(row, column) * y).sum::<f64>()
    }

    /// The sparse form that the minimisation walks.
    pub fn sparse(&self) -> Sparse {
        let mut sparse = Sparse { columns: self.live.len(), start: vec![0], ..Sparse::default() };
        for row in 0..self.species {
            for (place, &column) in self.live.iter().enumerate() {
                let value = self.get(row, column);
                if value != 0.0 {
                    sparse.column.push(place as u32);
                    sparse.value.push(value);
                }
            }
            sparse.start.push(sparse.column.len() as u32);
        }
        sparse.totals = self.live.iter().map(|&column| self.get(self.totals_row(), column)).collect();
        sparse
    }
}

/// Compressed rows of the species over the live unknowns, and the totals.
#[derive(Clone, Debug, Default)]
pub(super) struct Sparse {
    pub columns: usize,
    pub start: Vec<u32>,
    pub column: Vec<u32>,
    pub value: Vec<f64>,
    pub totals: Vec<f64>,
}

impl Sparse {
    pub fn rows(&self) -> usize {
        self.start.len() - 1
    }

    /// (column, coefficient) pairs of a row.
    #[inline]
    pub fn row(&self, row: usize) -> (&[u32], &[f64]) {
        let range = self.start[row] as usize..self.start[row + 1] as usize;
        (&self.column[range.clone()], &self.value[range])
    }

    /// Row times vector.
    #[inline]
    pub fn dot(&self, row: usize, y: &[f64]) -> f64 {
        let (columns, values) = self.row(row);
        columns.iter().zip(values).map(|(&column, value)| value * y[column as usize]).sum()
    }
}
