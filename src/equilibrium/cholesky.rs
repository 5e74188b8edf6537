//! In-place factor L D Lᵀ of a small symmetric matrix: Cholesky's without its square roots.

/// Lower triangle of a matrix, then of its factor.
#[derive(Clone, Debug, Default)]
pub(super) struct Cholesky {
    size: usize,
    entries: Vec<f64>,
    /// Reciprocals of the diagonal D.
    reciprocal: Vec<f64>,
    row: Vec<f64>,
}

/// Pivots that rounding has eaten are lifted to this share of their diagonal entry, which only shortens the step.
const LEAST_PIVOT: f64 = 1e-15;

impl Cholesky {
    /// Makes room for a matrix.
    pub fn resize(&mut self, size: usize) {
        self.size = size;
        self.entries.resize(size * size, 0.0);
        self.reciprocal.resize(size, 0.0);
        self.row.resize(size, 0.0);
    }

    /// Sets an entry with `column` ≤ `row`.
    #[inline(always)]
    pub fn set(&mut self, row: usize, column: usize, value: f64) {
        self.entries[row * self.size + column] = value;
    }

    /// Factorises; returns the smallest pivot as a share of its diagonal entry.
    #[inline(always)]
    pub fn factorise(&mut self) -> f64 {
        let m = self.size;
        let mut smallest: f64 = 1.0;
        for i in 0..m {
            let (done, rest) = self.entries.split_at_mut(i * m);
            let (factor, scaled) = (&mut rest[..=i], &mut self.row[..i]);
            let diagonal = factor[i];
            let mut pivot = diagonal;
            for j in 0..i {
                let mut value = factor[j];
                for (a, b) in scaled[..j].iter().zip(&done[j * m..j * m + j]) {
                    value -= a * b;
                }
                scaled[j] = value;
                let share = value * self.reciprocal[j];
                factor[j] = share;
                pivot -= value * share;
            }
            // A row of zeros is an unknown that nothing depends on: it stays where it is.
            self.reciprocal[i] = if diagonal > 0.0 {
                smallest = smallest.min(pivot / diagonal);
                1.0 / pivot.max(LEAST_PIVOT * diagonal)
            } else {
                smallest = smallest.min(diagonal);
                0.0
            };
        }
        smallest
    }

    /// Solves A x = b with the factor at hand; `b` becomes x.
    #[inline(always)]
    pub fn solve(&self, b: &mut [f64]) {
        let m = self.size;
        for i in 0..m {
            let mut value = b[i];
            for (factor, known) in self.entries[i * m..i * m + i].iter().zip(&b[..i]) {
                value -= factor * known;
            }
            b[i] = value;
        }
        for (b, reciprocal) in b.iter_mut().zip(&self.reciprocal) {
            *b *= reciprocal;
        }
        for i in (0..m).rev() {
            let value = b[i];
            for (earlier, factor) in b[..i].iter_mut().zip(&self.entries[i * m..i * m + i]) {
                *earlier -= factor * value;
            }
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_badly_scaled_matrix_is_solved() {
        let matrix = [[4e12, 2e3, 0.0], [2e3, 5.0, 1e-6], [0.0, 1e-6, 3e-9]];
        let mut factor = Cholesky::default();
        factor.resize(3);
        for (i, row) in matrix.iter().enumerate() {
            for (j, &value) in row[..=i].iter().enumerate() {
                factor.set(i, j, value);
            }
        }
        assert!(factor.factorise() > 0.5);
        let x = [1e-12, 2.0, -3e4];
        let mut b: Vec<f64> = matrix.iter().map(|row| row.iter().zip(&x).map(|(a, x)| a * x).sum()).collect();
        factor.solve(&mut b);
        for (found, x) in b.iter().zip(x) {
            assert!((found - x).abs() <= 1e-9 * x.abs(), "{b:?}");
        }
    }
}
