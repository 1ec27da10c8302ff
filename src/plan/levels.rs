//! The layouts under the stated sky and under moonlight.

use crate::light::LightModel;
use crate::report::SkyLevelRow;

use super::{PlanError, Planned, Progress, Scored, Tables, setup, simulate};

/// Thresholds and rates of all layouts, in their order, under the stated sky and each moonlight
/// level, which is simulated again with its own noise on a share of the showers. Fixed thresholds
/// stay, quiet ones follow the sky.
pub fn rows(
    planned: &Planned<'_>,
    scored: &[Scored],
    order: &[usize],
    light: &LightModel,
    tables: Option<&Tables>,
    progress: &dyn Progress,
) -> Result<Vec<SkyLevelRow>, PlanError> {
    let stated = order.iter().map(|&layout| row(planned, &scored[layout], layout, 1.0));
    let mut rows: Vec<SkyLevelRow> = stated.collect();
    let moonlight = &planned.study.moonlight;
    for &factor in &moonlight.levels {
        let mut study = planned.study.clone();
        study.night_sky = study.night_sky.times(factor);
        let share = |showers: u64| (showers as f64 * moonlight.showers_share).ceil() as u64;
        study.budget.gamma_showers = share(study.budget.gamma_showers);
        study.budget.background_showers = share(study.budget.background_showers);
        let brighter = simulate(&study, light, setup::spectra(&study)?, tables, progress)?;
        for &layout in order {
            rows.push(row(&brighter, &brighter.score(layout), layout, factor));
        }
    }
    Ok(rows)
}

fn row(planned: &Planned<'_>, scored: &Scored, layout: usize, sky_factor: f64) -> SkyLevelRow {
    let kinds = &planned.study.kinds;
    let stands = |kind: usize| {
        planned.study.layouts[layout].telescopes.iter().any(|placed| placed.kind == kind)
    };
    let of_kind = |of: &dyn Fn(usize) -> f64| {
        let present = (0..kinds.len()).filter(|&kind| stands(kind));
        let texts = present.map(|kind| format!("{} {:.3}", kinds[kind].name, of(kind)));
        texts.collect::<Vec<_>>().join(", ")
    };
    let background = scored.background();
    SkyLevelRow {
        sky_factor,
        layout: planned.study.layouts[layout].name.clone(),
        sky_pe_per_ns: of_kind(&|kind| planned.sky_per_ns[kind]),
        threshold_pe: of_kind(&|kind| planned.thresholds_pe[layout][kind]),
        gamma_rate_hz: scored.gamma.value,
        gamma_rate_error_hz: scored.gamma.error,
        background_rate_hz: background.value,
        background_rate_error_hz: background.error,
        accidental_rate_hz: planned.array_accidental_hz(layout),
    }
}
