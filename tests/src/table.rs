use std::collections::BTreeMap;
use std::path::Path;

use nalgebra::{Matrix3, Vector3};

/// One row of a reference table, by the names of its columns.
#[derive(Debug, Clone)]
pub struct Row {
    table: String,
    cells: BTreeMap<String, String>,
}

/// The rows of a file in `tests/reference`, in order. Lines that start with `#` name its sources.
pub fn reference_rows(file: &str) -> Vec<Row> {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("reference").join(file);
    let mut reader = csv::ReaderBuilder::new().comment(Some(b'#')).from_path(&path).expect(file);
    let rows: Vec<Row> =
        reader.deserialize().map(|cells| Row { table: file.to_owned(), cells: cells.expect(file) }).collect();
    assert!(!rows.is_empty(), "{file} has no rows");
    rows
}

impl Row {
    /// The text in a column.
    pub fn text(&self, column: &str) -> &str {
        self.cells.get(column).unwrap_or_else(|| panic!("{} has no column {column}", self.table))
    }

    /// The number in a column.
    pub fn number(&self, column: &str) -> f64 {
        let text = self.text(column);
        text.parse().unwrap_or_else(|_| panic!("{}, column {column}: \"{text}\" is no number", self.table))
    }

    /// The number in a column, or nothing where the column is empty.
    pub fn number_if_any(&self, column: &str) -> Option<f64> {
        (!self.text(column).is_empty()).then(|| self.number(column))
    }

    /// Half a unit of the last decimal that is printed in a column, and a little for rounding.
    pub fn half_a_digit(&self, column: &str) -> f64 {
        let places = self.text(column).split_once('.').map_or(0, |(_, decimals)| decimals.len());
        0.51 * 10f64.powi(-(places as i32))
    }

    /// Numbers in several columns.
    pub fn numbers<const N: usize>(&self, columns: [&str; N]) -> [f64; N] {
        columns.map(|column| self.number(column))
    }

    /// A column vector from three columns.
    pub fn vector(&self, columns: [&str; 3]) -> Vector3<f64> {
        Vector3::from(self.numbers(columns))
    }

    /// A matrix from the columns `prefix11`, `prefix12`, … `prefix33`: row, then column.
    pub fn matrix(&self, prefix: &str) -> Matrix3<f64> {
        Matrix3::from_fn(|i, j| self.number(&format!("{prefix}{}{}", i + 1, j + 1)))
    }
}
