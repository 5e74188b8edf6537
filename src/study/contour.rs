//! Lines of equal value on a rectangular grid, by straight interpolation along its edges (marching squares).

use std::collections::HashMap;

/// Values at the crossings of x and y, one row for each y; NaN where there is none.
#[derive(Clone, Copy, Debug)]
pub struct Grid<'a> {
    pub x: &'a [f64],
    pub y: &'a [f64],
    pub values: &'a [f64],
}

/// An edge of the grid: column, row, and whether it runs upwards.
type Edge = (usize, usize, bool);

impl Grid<'_> {
    fn at(&self, column: usize, row: usize) -> f64 {
        self.values[row * self.x.len() + column]
    }

    /// Where an edge has the level, when its ends lie on both sides.
    fn crossing(&self, (column, row, upwards): Edge, level: f64) -> Option<(f64, f64)> {
        let (end_column, end_row) = if upwards { (column, row + 1) } else { (column + 1, row) };
        let (a, b) = (self.at(column, row) - level, self.at(end_column, end_row) - level);
        if !(a.is_finite() && b.is_finite()) || (a < 0.0) == (b < 0.0) {
            return None;
        }
        let share = a / (a - b);
        let between = |from: f64, to: f64| from + share * (to - from);
        Some((between(self.x[column], self.x[end_column]), between(self.y[row], self.y[end_row])))
    }

    /// Pairs of edges that a line of the level joins inside a cell.
    fn joints(&self, column: usize, row: usize, level: f64) -> Vec<(Edge, Edge)> {
        let edges: [Edge; 4] =
            [(column, row, false), (column + 1, row, true), (column, row + 1, false), (column, row, true)];
        let crossed: Vec<Edge> =
            edges.into_iter().filter(|edge| self.crossing(*edge, level).is_some()).collect();
        match crossed[..] {
            [a, b] => vec![(a, b)],
            [bottom, right, top, left] => {
                // A saddle: the middle decides which corners belong together.
                let corners = [(0, 0), (1, 0), (0, 1), (1, 1)].map(|(i, j)| self.at(column + i, row + j));
                let middle = corners.iter().sum::<f64>() / 4.0;
                if (middle < level) == (corners[0] < level) {
                    vec![(bottom, right), (top, left)]
                } else {
                    vec![(bottom, left), (right, top)]
                }
            }
            _ => Vec::new(),
        }
    }
}

/// All lines of a level, each as long as it is unbroken; a closed one ends where it began.
pub fn contour(grid: Grid, level: f64) -> Vec<Vec<(f64, f64)>> {
    let mut neighbours: HashMap<Edge, Vec<Edge>> = HashMap::new();
    let mut order: Vec<Edge> = Vec::new();
    for row in 0..grid.y.len().saturating_sub(1) {
        for column in 0..grid.x.len().saturating_sub(1) {
            for (a, b) in grid.joints(column, row, level) {
                for (from, to) in [(a, b), (b, a)] {
                    let known = neighbours.entry(from).or_default();
                    if known.is_empty() {
                        order.push(from);
                    }
                    known.push(to);
                }
            }
        }
    }
    // Lines with ends first, from an end; what is left over is closed.
    order.sort_by_key(|edge| neighbours.get(edge).map_or(0, Vec::len));
    let mut lines = Vec::new();
    for start in order {
        while let Some(mut next) = neighbours.get_mut(&start).and_then(Vec::pop) {
            let mut line = vec![start];
            let mut last = start;
            loop {
                line.push(next);
                let Some(from) = neighbours.get_mut(&next) else { break };
                if let Some(back) = from.iter().position(|edge| *edge == last) {
                    from.swap_remove(back);
                }
                last = next;
                match from.pop() {
                    Some(onward) => next = onward,
                    None => break,
                }
            }
            lines.push(line.into_iter().filter_map(|edge| grid.crossing(edge, level)).collect());
        }
    }
    lines
}

#[cfg(test)]
mod tests {
    use super::*;

    fn grid_of(n: usize, f: impl Fn(f64, f64) -> f64) -> (Vec<f64>, Vec<f64>) {
        let x: Vec<f64> = (0..n).map(|i| -1.0 + 2.0 * i as f64 / (n - 1) as f64).collect();
        let values = x.iter().flat_map(|y| x.iter().map(|x| f(*x, *y)).collect::<Vec<_>>()).collect();
        (x, values)
    }

    #[test]
    fn a_circle_is_one_closed_line() {
        let (x, values) = grid_of(60, |x, y| x * x + y * y);
        let lines = contour(Grid { x: &x, y: &x, values: &values }, 0.5);
        assert_eq!(lines.len(), 1);
        let line = &lines[0];
        assert!(line.len() > 100 && line.first() == line.last());
        assert!(line.iter().all(|(x, y)| (x * x + y * y - 0.5).abs() < 2e-3));
    }

    #[test]
    fn two_branches_are_two_lines_and_a_gap_breaks_one() {
        let (x, mut values) = grid_of(41, |x, y| x * y);
        assert_eq!(contour(Grid { x: &x, y: &x, values: &values }, 0.1).len(), 2);
        let whole = contour(Grid { x: &x, y: &x, values: &values }, 0.1)[0].len();
        // A missing value on the line x = y = 0.3162 takes its cells out.
        let column = x.iter().position(|x| *x > 0.3).unwrap();
        values[column * 41 + column] = f64::NAN;
        let lines = contour(Grid { x: &x, y: &x, values: &values }, 0.1);
        assert_eq!(lines.len(), 3);
        assert!(lines.iter().map(Vec::len).max().unwrap() <= whole);
    }

    #[test]
    fn a_level_out_of_reach_has_no_line() {
        let (x, values) = grid_of(5, |x, _| x);
        assert!(contour(Grid { x: &x, y: &x, values: &values }, 2.0).is_empty());
    }
}
