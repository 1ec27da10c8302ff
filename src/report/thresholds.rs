//! A threshold scan, and the table of sky levels.

use maud::{Markup, html};

use super::figures;
use super::result::PlanResult;
use super::tables::Table;

/// Rates at one pixel threshold.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct ThresholdRow {
    /// Pixel threshold, photoelectrons.
    pub threshold_pe: f64,
    /// Upward crossings by one pixel, Hz.
    pub pixel_rate_hz: f64,
    /// Accidental triggers of one telescope, Hz.
    pub accidental_rate_hz: f64,
    /// Shower triggers of one telescope, Hz.
    pub shower_rate_hz: f64,
    /// Both together, Hz.
    pub total_rate_hz: f64,
    /// Accidental coincidences of the array, Hz.
    pub array_accidental_rate_hz: f64,
    /// Shower triggers of the array, Hz.
    pub array_shower_rate_hz: f64,
    /// Standard error of the telescope's shower triggers, Hz.
    pub shower_rate_error_hz: f64,
    /// Standard error of the array's shower triggers, Hz.
    pub array_shower_rate_error_hz: f64,
}

/// A scan: rates against the threshold of one kind, and the lowest quiet one.
#[derive(Clone, Debug, PartialEq)]
pub struct ThresholdScan {
    /// The kind that is scanned.
    pub telescope: String,
    /// Its trigger pattern, in words.
    pub topology: String,
    /// The layout.
    pub layout: String,
    /// Its condition, in words.
    pub condition: String,
    /// Sky photoelectrons per ns and pixel.
    pub sky_pe_per_ns: f64,
    /// Rule: array accidentals over array shower triggers, at most.
    pub accidental_share: f64,
    /// Rule: triggers of one telescope, at most, Hz.
    pub readout_limit_hz: f64,
    /// By rising threshold.
    pub rows: Vec<ThresholdRow>,
    /// The lowest quiet threshold, or why there is none.
    pub quiet: Result<ThresholdRow, String>,
}

impl ThresholdScan {
    /// The lowest quiet threshold and its rule, in one line.
    pub fn quiet_line(&self) -> String {
        let rule = format!(
            "array accidentals at most {} of its shower triggers, one telescope below {} Hz",
            self.accidental_share, self.readout_limit_hz
        );
        let place = format!("{} in {} ({})", self.telescope, self.layout, self.condition);
        match &self.quiet {
            Ok(row) => format!(
                "lowest quiet threshold of {place}: {:.2} photoelectrons ({rule})",
                row.threshold_pe
            ),
            Err(reason) => format!("no quiet threshold of {place} ({rule}): {reason}"),
        }
    }
}

/// One layout under one sky.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct SkyLevelRow {
    /// Sky light over that of the study.
    pub sky_factor: f64,
    /// Layout.
    pub layout: String,
    /// Sky photoelectrons per ns and pixel, by kind.
    pub sky_pe_per_ns: String,
    /// Pixel thresholds, photoelectrons, by kind.
    pub threshold_pe: String,
    /// Rate of the reference source, Hz.
    pub gamma_rate_hz: f64,
    /// Its standard error, Hz.
    pub gamma_rate_error_hz: f64,
    /// Rate of all backgrounds, Hz.
    pub background_rate_hz: f64,
    /// Its standard error, Hz.
    pub background_rate_error_hz: f64,
    /// Accidental coincidences of the array, Hz.
    pub accidental_rate_hz: f64,
}

/// Thresholds and rates by sky level and layout: `sky_levels`.
pub fn sky_level_table(result: &PlanResult) -> Table {
    let rows = &result.sky_levels;
    let number = |pick: fn(&SkyLevelRow) -> f64| rows.iter().map(pick);
    Table::new("sky_levels")
        .number("sky_factor", "1", number(|row| row.sky_factor))
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .text("sky_pe_per_ns", rows.iter().map(|row| row.sky_pe_per_ns.clone()).collect())
        .text("threshold_pe", rows.iter().map(|row| row.threshold_pe.clone()).collect())
        .number("gamma_rate_hz", "Hz", number(|row| row.gamma_rate_hz))
        .number("gamma_rate_error_hz", "Hz", number(|row| row.gamma_rate_error_hz))
        .number("background_rate_hz", "Hz", number(|row| row.background_rate_hz))
        .number("background_rate_error_hz", "Hz", number(|row| row.background_rate_error_hz))
        .number("accidental_rate_hz", "Hz", number(|row| row.accidental_rate_hz))
}

/// The table as a section; nothing without moonlight levels.
pub(super) fn section(result: &PlanResult) -> Markup {
    if result.sky_levels.iter().all(|row| row.sky_factor == 1.0) {
        return html! {};
    }
    html! {
        section {
            h2 { "Under moonlight" }
            p { "Sky light as a multiple of the study's. Fixed thresholds stay, quiet ones follow the sky." }
            div.wide { table {
                thead { tr {
                    th { "Sky" } th.text { "Layout" } th.text { "Sky pe/ns" } th.text { "Threshold pe" }
                    th { "Gamma Hz" } th { "Background Hz" } th { "Accidental Hz" }
                } }
                tbody { @for row in &result.sky_levels { tr {
                    td { (figures::short(row.sky_factor)) } td.text { (row.layout) }
                    td.text { (row.sky_pe_per_ns) } td.text { (row.threshold_pe) }
                    td { (figures::with_error(row.gamma_rate_hz, row.gamma_rate_error_hz)) }
                    td { (figures::with_error(row.background_rate_hz, row.background_rate_error_hz)) }
                    td { (figures::short(row.accidental_rate_hz)) }
                } } }
            } }
        }
    }
}
