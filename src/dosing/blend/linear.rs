//! Linear programmes in so few variables that looking at every corner is the surest way.

/// Σ `slopes` · x ≤ `most`.
#[derive(Clone, Debug)]
pub(super) struct Row {
    pub slopes: Vec<f64>,
    pub most: f64,
}

/// Share by which a corner may violate a row: rounding.
const SLACK: f64 = 1e-9;

/// The corner of the rows at which `cost` · x is least; `None` when no corner keeps all rows. The rows have to bound x.
pub(super) fn lowest_corner(cost: &[f64], rows: &[Row]) -> Option<Vec<f64>> {
    let n = cost.len();
    let mut best: Option<(f64, Vec<f64>)> = None;
    let mut chosen: Vec<usize> = (0..n).collect();
    if rows.len() < n {
        return None;
    }
    loop {
        if let Some(x) = corner(&chosen, rows, n) {
            let value: f64 = cost.iter().zip(&x).map(|(c, x)| c * x).sum();
            let better = best.as_ref().is_none_or(|(lowest, _)| value < *lowest);
            if better && rows.iter().all(|row| keeps(row, &x)) {
                best = Some((value, x));
            }
        }
        // The next choice of n rows in lexical order.
        let Some(place) = (0..n).rev().find(|&i| chosen[i] < rows.len() - n + i) else { break };
        chosen[place] += 1;
        for i in place + 1..n {
            chosen[i] = chosen[i - 1] + 1;
        }
    }
    best.map(|(_, x)| x)
}

fn keeps(row: &Row, x: &[f64]) -> bool {
    let (mut sum, mut size) = (0.0, row.most.abs());
    for (slope, x) in row.slopes.iter().zip(x) {
        sum += slope * x;
        size += (slope * x).abs();
    }
    sum <= row.most + SLACK * size
}

/// Where the chosen rows are all met exactly, by elimination with the largest pivot of each column.
fn corner(chosen: &[usize], rows: &[Row], n: usize) -> Option<Vec<f64>> {
    let mut matrix: Vec<Vec<f64>> = chosen
        .iter()
        .map(|&row| rows[row].slopes.iter().copied().chain([rows[row].most]).collect())
        .collect();
    for column in 0..n {
        let pivot =
            (column..n).max_by(|&a, &b| matrix[a][column].abs().total_cmp(&matrix[b][column].abs()))?;
        if matrix[pivot][column].abs() < f64::MIN_POSITIVE {
            return None;
        }
        matrix.swap(column, pivot);
        let (above, below) = matrix.split_at_mut(column + 1);
        let pivot = &above[column];
        for row in below {
            let factor = row[column] / pivot[column];
            row.iter_mut().zip(pivot).skip(column).for_each(|(value, known)| *value -= factor * known);
        }
    }
    let mut x = vec![0.0; n];
    for row in (0..n).rev() {
        let known: f64 = (row + 1..n).map(|k| matrix[row][k] * x[k]).sum();
        x[row] = (matrix[row][n] - known) / matrix[row][row];
    }
    x.iter().all(|x| x.is_finite()).then_some(x)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn row(slopes: &[f64], most: f64) -> Row {
        Row { slopes: slopes.to_vec(), most }
    }

    /// Two products at 3 and 5 per unit: at least 4 of the first, 12 of twice the second, 18 of three firsts and two
    /// seconds, none beyond 10; by hand the cheapest is 4 and 6.
    #[test]
    fn the_cheapest_corner_of_a_small_diet_is_found() {
        let rows = [
            row(&[-1.0, 0.0], -4.0),
            row(&[0.0, -2.0], -12.0),
            row(&[-3.0, -2.0], -18.0),
            row(&[1.0, 0.0], 10.0),
            row(&[0.0, 1.0], 10.0),
        ];
        let x = lowest_corner(&[3.0, 5.0], &rows).unwrap();
        assert!((x[0] - 4.0).abs() < 1e-12 && (x[1] - 6.0).abs() < 1e-12, "{x:?}");
    }

    #[test]
    fn rows_that_no_corner_keeps_have_no_answer() {
        let rows = [row(&[1.0], 1.0), row(&[-1.0], -2.0)];
        assert_eq!(lowest_corner(&[1.0], &rows), None);
    }
}
