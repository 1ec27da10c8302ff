//! What a search found, as tables.

use super::result::{FoundRow, Provenance, StageRow};
use super::stage::{ReportError, table_files};
use super::tables::Table;

/// The best layout of each number of telescopes: `front`.
pub fn front_table(rows: &[FoundRow]) -> Table {
    let number = |pick: fn(&FoundRow) -> f64| rows.iter().map(pick);
    Table::new("front")
        .whole("telescopes", rows.iter().map(|row| row.telescopes))
        .number("cost", "study's unit", number(|row| row.cost))
        .number("searched_rate_hz", "Hz", number(|row| row.searched_rate_hz))
        .number("gamma_rate_hz", "Hz", number(|row| row.gamma_rate_hz))
        .text("on_front", rows.iter().map(|row| row.on_front.to_string()).collect())
}

/// In what order to build each of them, and what the loss of a telescope costs: `build_up`.
pub fn build_up_table(rows: &[StageRow]) -> Table {
    let number = |pick: fn(&StageRow) -> f64| rows.iter().map(pick);
    Table::new("build_up")
        .whole("telescopes", rows.iter().map(|row| row.telescopes))
        .whole("stage", rows.iter().map(|row| row.stage))
        .text("kind", rows.iter().map(|row| row.kind.clone()).collect())
        .number("east_m", "m", number(|row| row.position_m[0]))
        .number("north_m", "m", number(|row| row.position_m[1]))
        .number("up_m", "m", number(|row| row.position_m[2]))
        .number("gamma_rate_hz", "Hz", number(|row| row.gamma_rate_hz))
        .number("loss_if_out", "1", number(|row| row.loss_if_out))
}

/// The files of a search: name and bytes.
///
/// # Errors
/// [`ReportError::Table`].
pub fn found_files(
    found: &[FoundRow],
    stages: &[StageRow],
    from: &Provenance,
) -> Result<Vec<(String, Vec<u8>)>, ReportError> {
    table_files([front_table(found), build_up_table(stages)], from)
}
