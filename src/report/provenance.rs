//! `run.json`: what is needed to make the numbers again.

use serde_json::{Value, json};

use super::result::{LayoutRow, PlanResult};

/// A number, or null where it is not finite.
fn number(value: f64) -> Value {
    if value.is_finite() { json!(value) } else { Value::Null }
}

/// Provenance, counters, warnings, models and thresholds of a run.
pub fn run_json(result: &PlanResult) -> String {
    let from = &result.provenance;
    let value = json!({
        "program": "nightpool",
        "version": from.version,
        "study": from.study,
        "title": from.title,
        "study_checksum_sha256": from.study_checksum,
        "seed": from.seed,
        "engine": from.engine,
        "score": from.score,
        "resamples": from.resamples,
        "simulated": from.simulated.iter().map(|(primary, showers, events)| json!({
            "primary": primary, "showers": showers, "array_events": events,
        })).collect::<Vec<_>>(),
        "telescopes": result.kinds.iter().map(|kind| json!({
            "kind": kind.kind,
            "mirror_area_m2": number(kind.mirror_area_m2),
            "pixels": kind.pixels,
            "sky_pe_per_ns": number(kind.sky_pe_per_ns),
            "threshold_pe": number(kind.threshold_pe),
            "threshold_choice": kind.threshold_choice,
            "accidental_rate_hz": number(kind.accidental_rate_hz),
        })).collect::<Vec<_>>(),
        "counters": result.counters.iter().map(|counter| json!({
            "name": counter.name, "count": counter.count, "of": counter.of,
        })).collect::<Vec<_>>(),
        "warnings": result.warnings,
        "models": from.models.iter().map(|model| json!({
            "purpose": model.purpose, "citation": model.citation,
        })).collect::<Vec<_>>(),
    });
    format!("{value:#}\n")
}

/// The ranking as JSON, for standard output.
pub fn ranking_json(result: &PlanResult) -> String {
    let row = |row: &LayoutRow| {
        json!({
            "rank": row.rank,
            "tier": row.tier,
            "layout": row.layout,
            "telescopes": row.telescopes,
            "kinds": row.kinds,
            "telescopes_required": row.condition,
            "mirror_area_m2": number(row.mirror_area_m2),
            "gamma_rate_hz": number(row.gamma_rate_hz),
            "gamma_rate_error_hz": number(row.gamma_rate_error_hz),
            "background_rate_hz": number(row.background_rate_hz),
            "background_rate_error_hz": number(row.background_rate_error_hz),
            "threshold_gev": number(row.threshold_gev),
            "threshold_error_gev": number(row.threshold_error_gev),
            "accidental_rate_hz": number(row.accidental_rate_hz),
            "cost": number(row.cost),
            "order_probability": number(row.order_probability),
        })
    };
    let from = &result.provenance;
    let value = json!({
        "study": from.study,
        "study_checksum_sha256": from.study_checksum,
        "seed": from.seed,
        "version": from.version,
        "ranking": result.ranking.iter().map(row).collect::<Vec<_>>(),
        "warnings": result.warnings,
    });
    format!("{value:#}\n")
}
