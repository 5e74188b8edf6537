//! In-place Cholesky factor of a small symmetric matrix, scaled to a unit diagonal.

/// Lower triangle of a matrix, then of its factor.
#[derive(Clone, Debug, Default)]
pub(super) struct Cholesky {
    size: usize,
    entries: Vec<f64>,
    scale: Vec<f64>,
    /// Reciprocals of the factor's diagonal.
    reciprocal: Vec<f64>,
}

/// Pivots that rounding has eaten are lifted to this, which only shortens the step.
const LEAST_PIVOT: f64 = 1e-15;

impl Cholesky {
    /// Makes room for a matrix.
    pub fn resize(&mut self, size: usize) {
        self.size = size;
        self.entries.resize(size * size, 0.0);
        self.scale.resize(size, 0.0);
        self.reciprocal.resize(size, 0.0);
    }

    /// Sets an entry with `column` ≤ `row`.
    #[inline(always)]
    pub fn set(&mut self, row: usize, column: usize, value: f64) {
        self.entries[row * self.size + column] = value;
    }

    /// Factorises; returns the smallest pivot met.
    #[inline(always)]
    pub fn factorise(&mut self) -> f64 {
        let m = self.size;
        for i in 0..m {
            let diagonal = self.entries[i * m + i];
            self.scale[i] = if diagonal > 0.0 { 1.0 / diagonal.sqrt() } else { 0.0 };
        }
        let mut smallest: f64 = 1.0;
        for i in 0..m {
            let (done, rest) = self.entries.split_at_mut(i * m);
            let row = &mut rest[..=i];
            let mut squares = 0.0;
            for j in 0..i {
                let other = &done[j * m..j * m + j];
                let mut value = row[j] * self.scale[i] * self.scale[j];
                for (a, b) in row[..j].iter().zip(other) {
                    value -= a * b;
                }
                let value = value * self.reciprocal[j];
                row[j] = value;
                squares += value * value;
            }
            let pivot = row[i] * self.scale[i] * self.scale[i] - squares;
            smallest = smallest.min(pivot);
            let root = pivot.max(LEAST_PIVOT).sqrt();
            row[i] = root;
            self.reciprocal[i] = 1.0 / root;
        }
        smallest
    }

    /// Solves A x = b with the factor at hand; `b` becomes x.
    #[inline(always)]
    pub fn solve(&self, b: &mut [f64]) {
        let m = self.size;
        for i in 0..m {
            let mut value = b[i] * self.scale[i];
            for (factor, known) in self.entries[i * m..i * m + i].iter().zip(&b[..i]) {
                value -= factor * known;
            }
            b[i] = value * self.reciprocal[i];
        }
        for i in (0..m).rev() {
            let value = b[i] * self.reciprocal[i];
            b[i] = value;
            for (earlier, factor) in b[..i].iter_mut().zip(&self.entries[i * m..i * m + i]) {
                *earlier -= factor * value;
            }
        }
        for (b, scale) in b.iter_mut().zip(&self.scale) {
            *b *= scale;
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
