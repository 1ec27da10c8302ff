//! What stands behind the ranking: other sources, other assumptions, single events, directions.

use maud::{Markup, html};

use super::figures;
use super::result::{DirectionRow, FinalistRow, OrderRow, PlanResult, ScanRow, SourceRow};
use super::tables::Table;

/// Every source's own order: `sources`.
pub fn source_table(result: &PlanResult) -> Table {
    let rows = &result.sources;
    let number = |pick: fn(&SourceRow) -> f64| rows.iter().map(pick);
    Table::new("sources")
        .text("source", rows.iter().map(|row| row.source.clone()).collect())
        .whole("place", rows.iter().map(|row| row.place))
        .whole("tier", rows.iter().map(|row| row.tier))
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .number("gamma_rate_hz", "Hz", number(|row| row.gamma_rate_hz))
        .number("gamma_rate_error_hz", "Hz", number(|row| row.gamma_rate_error_hz))
        .number("threshold_gev", "GeV", number(|row| row.threshold_gev))
        .number("threshold_error_gev", "GeV", number(|row| row.threshold_error_gev))
        .number("order_probability", "1", number(|row| row.order_probability))
        .number("showers_factor", "1", number(|row| row.showers_factor))
}

/// Gamma rates under other assumptions: `orders`.
pub fn order_table(result: &PlanResult) -> Table {
    let rows = &result.orders;
    let number = |pick: fn(&OrderRow) -> f64| rows.iter().map(pick);
    Table::new("orders")
        .text("assumption", rows.iter().map(|row| row.assumption.clone()).collect())
        .whole("place", rows.iter().map(|row| row.place))
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .number("gamma_rate_hz", "Hz", number(|row| row.gamma_rate_hz))
        .number("gamma_rate_error_hz", "Hz", number(|row| row.gamma_rate_error_hz))
        .number("ratio_to_stated", "1", number(|row| row.ratio))
        .number("ratio_error", "1", number(|row| row.ratio_error))
}

/// Scans of mirror area and spacing: `scans`.
pub fn scan_table(result: &PlanResult) -> Table {
    let rows = &result.scans;
    let number = |pick: fn(&ScanRow) -> f64| rows.iter().map(pick);
    Table::new("scans")
        .text("family", rows.iter().map(|row| row.family.clone()).collect())
        .number("mirror_area_m2", "m2", number(|row| row.mirror_area_m2))
        .number("spacing_m", "m", number(|row| row.spacing_m))
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .number("score", "study's choice", number(|row| row.score))
        .number("score_error", "study's choice", number(|row| row.score_error))
        .number("behind_best_probability", "1", number(|row| row.behind_best))
}

/// Leading layouts event by event: `finalists`.
pub fn finalist_table(result: &PlanResult) -> Table {
    let rows = &result.finalists;
    let number = |pick: fn(&FinalistRow) -> f64| rows.iter().map(pick);
    Table::new("finalists")
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .number("window_ns", "ns", number(|row| row.window_ns))
        .number("gamma_vote_hz", "Hz", number(|row| row.gamma_vote_hz))
        .number("gamma_window_hz", "Hz", number(|row| row.gamma_window_hz))
        .number("gamma_with_noise_hz", "Hz", number(|row| row.gamma_with_noise_hz))
        .number("background_vote_hz", "Hz", number(|row| row.background_vote_hz))
        .number("background_window_hz", "Hz", number(|row| row.background_window_hz))
        .number("background_with_noise_hz", "Hz", number(|row| row.background_with_noise_hz))
        .number("up_probability", "1", number(|row| row.up_probability))
        .number("gamma_expected_hz", "Hz", number(|row| row.gamma_expected_hz))
}

/// Direction resolution by layout and energy: `directions`.
pub fn direction_table(result: &PlanResult) -> Table {
    let rows = &result.directions;
    let number = |pick: fn(&DirectionRow) -> f64| rows.iter().map(pick);
    Table::new("directions")
        .text("layout", rows.iter().map(|row| row.layout.clone()).collect())
        .number("energy_low_gev", "GeV", number(|row| row.energy_low_gev))
        .number("energy_high_gev", "GeV", number(|row| row.energy_high_gev))
        .number("containment_68_deg", "deg", number(|row| row.containment_68_deg))
        .number("containment_error_deg", "deg", number(|row| row.error_deg))
        .whole("events", rows.iter().map(|row| row.events))
        .whole("triggered", rows.iter().map(|row| row.triggered))
}

/// The sections of the page.
pub(super) fn sections(result: &PlanResult) -> Markup {
    html! {
        (orders(result))
        (sources(result))
        (finalists(result))
        (directions(result))
    }
}

fn link(name: &str) -> Markup {
    html! { p { "Data: " a href=(name) { (name) } "." } }
}

fn orders(result: &PlanResult) -> Markup {
    html! {
        @if !result.order_changes.is_empty() {
            section {
                h2 { "Does the order hold?" }
                p {
                    "The layouts once more by gamma rate, on the same showers, under other assumptions. A pair that changes places "
                    "counts as decided if the errors put both orders above 95 %."
                }
                div.wide { table {
                    thead { tr {
                        th.text { "Assumption" } th.text { "Best layout" } th { "Rank correlation" } th { "Pairs that flip" } th { "Decided" } th.text { "Which" }
                    } }
                    tbody { @for change in &result.order_changes { tr {
                        td.text { (change.assumption) }
                        td.text { @if change.best_changes { "another one" } @else { "the same" } }
                        td { (format!("{:.2}", change.kendall_tau)) }
                        td { (change.flips.len()) } td { (change.decided) }
                        td.text {
                            (change.flips.iter().take(4).cloned().collect::<Vec<_>>().join("; "))
                            @if change.flips.len() > 4 { "; ..." }
                        }
                    } } }
                } }
                (link("orders.csv"))
            }
        }
    }
}

/// Rows of the leading layouts of each source.
const SHOWN: usize = 5;

fn sources(result: &PlanResult) -> Markup {
    let mut names: Vec<&str> = result.sources.iter().map(|row| row.source.as_str()).collect();
    names.dedup();
    let of = |name: &str, layout: &str| {
        result.sources.iter().find(|row| row.source == name && row.layout == layout)
    };
    html! {
        @if names.len() > 1 {
            section {
                h2 { "Source by source" }
                p { "Gamma rate in Hz, with the place in the order of that source in brackets." }
                div.wide { table {
                    thead { tr { th.text { "Layout" } @for name in &names { th { (name) } } } }
                    tbody { @for row in &result.ranking { tr {
                        td.text { (row.layout) }
                        @for name in &names {
                            td { @if let Some(found) = of(name, &row.layout) {
                                (figures::with_error(found.gamma_rate_hz, found.gamma_rate_error_hz))
                                " (" (found.place) ")"
                            } }
                        }
                    } } }
                } }
                (link("sources.csv"))
            }
        }
    }
}

fn change(before: f64, after: f64) -> String {
    if before > 0.0 {
        format!("{:+.2} %", 100.0 * (after / before - 1.0))
    } else {
        "\u{2013}".into()
    }
}

fn finalists(result: &PlanResult) -> Markup {
    html! {
        @if let Some(first) = result.finalists.first() {
            section {
                h2 { "Leading layouts, event by event" }
                p {
                    "The ranking counts telescopes without asking when they fire. Here the coincidence window slides over the arrival "
                    "times of each event, and an accidental trigger of one telescope may complete a shower's. Changes are against the "
                    "ranking's rates. Expected: each telescope is up with probability " (figures::short(first.up_probability)) "."
                }
                div.wide { table {
                    thead { tr {
                        th.text { "Layout" } th { "Window (ns)" } th { "Gamma, window" } th { "and noise" }
                        th { "Background, window" } th { "and noise" } th { "Gamma expected (Hz)" } th { "of full" }
                        th { "Per cost (Hz)" } th { "Data (GB/night)" }
                    } }
                    tbody { @for row in &result.finalists {
                        @let rank = result.ranking.iter().find(|place| place.layout == row.layout);
                        tr {
                            td.text { (row.layout) } td { (figures::short(row.window_ns)) }
                            td { (change(row.gamma_vote_hz, row.gamma_window_hz)) }
                            td { (change(row.gamma_vote_hz, row.gamma_with_noise_hz)) }
                            td { (change(row.background_vote_hz, row.background_window_hz)) }
                            td { (change(row.background_vote_hz, row.background_with_noise_hz)) }
                            td { (figures::short(row.gamma_expected_hz)) }
                            td { (figures::percent(row.gamma_expected_hz / row.gamma_vote_hz)) }
                            td { (figures::short(rank.map_or(f64::NAN, |place| place.rate_per_cost_hz))) }
                            td { (figures::short(rank.map_or(f64::NAN, |place| place.data_gb_per_night))) }
                        }
                    } }
                } }
                (link("finalists.csv"))
            }
        }
    }
}

fn directions(result: &PlanResult) -> Markup {
    let mut names: Vec<&str> = result.directions.iter().map(|row| row.layout.as_str()).collect();
    names.dedup();
    names.truncate(SHOWN);
    let first = names.first().copied().unwrap_or_default();
    let bins: Vec<&DirectionRow> =
        result.directions.iter().filter(|row| row.layout == first).collect();
    let of = |name: &str, low: f64| {
        let same = |row: &&DirectionRow| row.layout == name && row.energy_low_gev == low;
        result.directions.iter().find(same)
    };
    html! {
        @if !names.is_empty() {
            section {
                h2 { "Direction resolution" }
                p {
                    "Angle within which 68 % of gamma-ray directions lie, in degrees, from crossing the image axes of the telescopes that "
                    "fired; no selection of events beyond the trigger. Trigger rate alone favours tight spacing: directions favour wide."
                }
                div.wide { table {
                    thead { tr { th.text { "Energy (GeV)" } @for name in &names { th { (name) } } } }
                    tbody { @for bin in &bins { tr {
                        td.text { (figures::short(bin.energy_low_gev)) " to " (figures::short(bin.energy_high_gev)) }
                        @for name in &names {
                            td { @if let Some(row) = of(name, bin.energy_low_gev) {
                                (figures::with_error(row.containment_68_deg, row.error_deg))
                            } }
                        }
                    } } }
                } }
                (link("directions.csv"))
            }
        }
    }
}
