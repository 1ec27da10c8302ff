//! Tables of results on standard output: CSV, JSON or aligned columns.

use std::fmt::Write;

use clap::ValueEnum;
use serde_json::{Map, Value};

/// How results are printed.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub(super) enum Format {
    /// Comma-separated values.
    Csv,
    /// An array of objects.
    Json,
    /// Aligned columns.
    Table,
}

/// One value of a row.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Cell {
    Text(String),
    Number(f64),
}

impl Cell {
    fn json(&self) -> Value {
        match self {
            Self::Text(text) => text.as_str().into(),
            Self::Number(value) => (*value).into(),
        }
    }

    /// All digits, quoted where a comma or a quote asks for it.
    fn csv(&self) -> String {
        match self {
            Self::Text(text) if text.contains([',', '"', '\n']) => {
                format!("\"{}\"", text.replace('"', "\"\""))
            }
            Self::Text(text) => text.clone(),
            Self::Number(value) => value.to_string(),
        }
    }

    fn short(&self) -> String {
        match self {
            Self::Text(text) => text.clone(),
            Self::Number(value) => short(*value),
        }
    }
}

/// Rows of numbers under their columns.
pub(super) fn written(format: Format, columns: &[&str], rows: &[Vec<f64>]) -> String {
    let cells = |row: &Vec<f64>| row.iter().copied().map(Cell::Number).collect();
    written_cells(format, columns, &rows.iter().map(cells).collect::<Vec<_>>())
}

/// Rows under their columns.
pub(super) fn written_cells(format: Format, columns: &[&str], rows: &[Vec<Cell>]) -> String {
    match format {
        Format::Json => json(columns, rows),
        Format::Csv => csv(columns, rows),
        Format::Table => aligned(columns, rows),
    }
}

fn json(columns: &[&str], rows: &[Vec<Cell>]) -> String {
    let object = |row: &Vec<Cell>| {
        let pairs = columns.iter().zip(row);
        let map: Map<String, Value> =
            pairs.map(|(name, cell)| ((*name).to_owned(), cell.json())).collect();
        Value::Object(map)
    };
    format!("{:#}\n", Value::Array(rows.iter().map(object).collect()))
}

fn csv(columns: &[&str], rows: &[Vec<Cell>]) -> String {
    let mut out = format!("{}\n", columns.join(","));
    for row in rows {
        let cells: Vec<String> = row.iter().map(Cell::csv).collect();
        let _ = writeln!(out, "{}", cells.join(","));
    }
    out
}

/// Numbers end, and texts begin, at the same place in every row.
fn aligned(columns: &[&str], rows: &[Vec<Cell>]) -> String {
    let shown: Vec<Vec<String>> =
        rows.iter().map(|row| row.iter().map(Cell::short).collect()).collect();
    let width = |place: usize| {
        let cells = shown.iter().map(|row| row[place].chars().count());
        cells.chain([columns[place].len(), 10]).max().unwrap_or(10)
    };
    let left = |place: usize| rows.iter().all(|row| matches!(row[place], Cell::Text(_)));
    let pad = |place: usize, cell: &str| {
        let gap = " ".repeat(width(place).saturating_sub(cell.chars().count()));
        if left(place) { format!("{cell}{gap}") } else { format!("{gap}{cell}") }
    };
    let mut out = String::new();
    let heads: Vec<String> = columns.iter().map(|name| (*name).to_owned()).collect();
    for row in std::iter::once(&heads).chain(&shown) {
        let cells: Vec<String> =
            row.iter().enumerate().map(|(place, cell)| pad(place, cell)).collect();
        let _ = writeln!(out, "{}", cells.join("  ").trim_end());
    }
    out
}

/// Six significant digits.
fn short(value: f64) -> String {
    let size = value.abs();
    if value == 0.0 {
        return "0".into();
    }
    if (1e-2..1e6).contains(&size) {
        let digits = (5 - size.max(1e-9).log10().floor() as i32).clamp(0, 8) as usize;
        format!("{value:.digits$}")
    } else {
        format!("{value:.5e}")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_with_commas_are_quoted_and_rows_line_up() {
        let rows = vec![vec![Cell::Text("model:1,2,3".into()), Cell::Number(0.5)]];
        let csv = written_cells(Format::Csv, &["atmosphere", "x"], &rows);
        assert_eq!(csv, "atmosphere,x\n\"model:1,2,3\",0.5\n");
        let table = written_cells(Format::Table, &["atmosphere", "x"], &rows);
        assert_eq!(table, "atmosphere            x\nmodel:1,2,3    0.500000\n");
        let json = written_cells(Format::Json, &["atmosphere"], &rows);
        assert!(json.contains("\"atmosphere\": \"model:1,2,3\""), "{json}");
    }
}
