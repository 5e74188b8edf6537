//! Aligned columns of text.

/// A table whose columns are as wide as their longest cell.
#[derive(Debug, Default)]
pub struct Table {
    rows: Vec<Vec<String>>,
}

impl Table {
    /// A table with a header row.
    pub fn new(header: &[&str]) -> Self {
        Self { rows: vec![header.iter().map(|cell| (*cell).to_owned()).collect()] }
    }

    /// Adds a row.
    pub fn row<const N: usize>(&mut self, cells: [String; N]) {
        self.line(cells.to_vec());
    }

    /// Adds a row of as many cells as the header has.
    pub fn line(&mut self, cells: Vec<String>) {
        self.rows.push(cells);
    }

    /// The text: first column to the left, the others too, two spaces between.
    pub fn text(&self) -> String {
        let columns = self.rows.iter().map(Vec::len).max().unwrap_or(0);
        let width = |column: usize| {
            self.rows
                .iter()
                .filter_map(|row| row.get(column))
                .map(|cell| cell.chars().count())
                .max()
                .unwrap_or(0)
        };
        let widths: Vec<usize> = (0..columns).map(width).collect();
        let mut text = String::new();
        for row in &self.rows {
            let mut line = String::from(" ");
            for (cell, width) in row.iter().zip(&widths) {
                line.push(' ');
                line.push_str(cell);
                line.extend(std::iter::repeat_n(' ', width - cell.chars().count() + 1));
            }
            text.push_str(line.trim_end());
            text.push('\n');
        }
        text
    }
}
