//! The ranking as a table for the terminal.

use crate::report::PlanResult;
use crate::report::figures::{percent, short, with_error};

/// The ranking, one layout a line, columns aligned.
pub fn ranking_text(result: &PlanResult) -> String {
    let heads = [
        "rank",
        "tier",
        "layout",
        "telescopes",
        "gamma rate Hz",
        "background Hz",
        "threshold GeV",
        "cost",
        "ahead of next",
    ];
    let mut rows = vec![heads.map(str::to_owned)];
    for row in &result.ranking {
        rows.push([
            row.rank.to_string(),
            row.tier.to_string(),
            row.layout.clone(),
            row.kinds.clone(),
            with_error(row.gamma_rate_hz, row.gamma_rate_error_hz),
            with_error(row.background_rate_hz, row.background_rate_error_hz),
            with_error(row.threshold_gev, row.threshold_error_gev),
            short(row.cost),
            percent(row.order_probability),
        ]);
    }
    let width = |column: usize| rows.iter().map(|row| row[column].chars().count()).max();
    let widths: Vec<usize> = (0..heads.len()).map(|column| width(column).unwrap_or(0)).collect();
    let mut text = String::new();
    for row in &rows {
        let mut line = String::new();
        for (column, cell) in row.iter().enumerate() {
            let gap = " ".repeat(widths[column] - cell.chars().count());
            let left = column == 2 || column == 3;
            line += &if left { format!("{cell}{gap}  ") } else { format!("{gap}{cell}  ") };
        }
        text += line.trim_end();
        text.push('\n');
    }
    text
}
