//! Rates of one layout against the pixel threshold of one of its telescope kinds.

use thiserror::Error;

use crate::report::{ThresholdRow, ThresholdScan};
use crate::scan::{Array, ArrayRates};
use crate::study::Study;
use crate::telescope::Threshold;

use super::{PlanError, Progress, Tables, setup, simulate_backgrounds};

/// What to scan.
#[derive(Clone, Debug, PartialEq)]
pub struct ScanRequest {
    /// Name of the telescope kind whose threshold is scanned.
    pub telescope: String,
    /// Name of the layout it stands in; the first that has the kind if absent.
    pub layout: Option<String>,
    /// Lowest threshold, photoelectrons; from the accidental rate if absent.
    pub from_pe: Option<f64>,
    /// Highest threshold, photoelectrons; three times the quiet one if absent.
    pub to_pe: Option<f64>,
    /// Number of thresholds.
    pub points: usize,
}

/// A scan that cannot be done.
#[derive(Debug, Error)]
pub enum ScanError {
    /// The study cannot be simulated.
    #[error(transparent)]
    Plan(#[from] PlanError),
    /// No such telescope kind.
    #[error("the study has no telescope kind `{name}`; it has: {known}")]
    Telescope {
        /// What was asked for.
        name: String,
        /// The kinds.
        known: String,
    },
    /// No such layout.
    #[error(
        "the study has no layout `{name}` with a telescope `{telescope}`; with one it has: {known}"
    )]
    Layout {
        /// What was asked for.
        name: String,
        /// The telescope kind.
        telescope: String,
        /// Layouts that have it.
        known: String,
    },
    /// Thresholds the wrong way round.
    #[error("thresholds from {from_pe} to {to_pe} photoelectrons; the first must be lower")]
    Range {
        /// The lowest.
        from_pe: f64,
        /// The highest.
        to_pe: f64,
    },
}

/// A scan begins where a telescope's accidental rate times the array's window is this, above which
/// the formula for rare coincidences fails.
const BUSY: f64 = 0.1;

/// Simulates the backgrounds of a study, on one of its layouts, and reads their rates at many
/// thresholds of one kind; the other kinds keep theirs. The lowest quiet threshold is that of the
/// scanned kind alone.
///
/// # Errors
/// [`ScanError`].
pub fn scan(
    study: &Study,
    request: &ScanRequest,
    tables: Option<&Tables>,
    progress: &dyn Progress,
) -> Result<ThresholdScan, ScanError> {
    let (kind, layout) = chosen(study, request)?;
    let mut alone = study.clone();
    alone.layouts = vec![study.layouts[layout].clone()];
    // Gammas of a source add nothing to the rate of showers: as few as can be.
    alone.budget.gamma_showers = 1;
    // The scanned kind has no threshold of its own, so that none can be wanting.
    alone.kinds[kind].threshold = Threshold::FixedPe(f64::NAN);
    let planned = simulate_backgrounds(&alone, tables, progress)?;
    let array = planned.array(0);
    let mut given_pe: Vec<Option<f64>> =
        planned.thresholds_pe[0].iter().map(|pe| Some(*pe)).collect();
    given_pe[kind] = None;
    let rule = &study.trigger.quiet;
    let quiet = array.quiet_thresholds_pe(&given_pe, rule);
    let at = |threshold: f64| {
        let mut thresholds = planned.thresholds_pe[0].clone();
        thresholds[kind] = threshold;
        row(threshold, kind, &array.rates(&thresholds))
    };
    let quiet = quiet.map(|thresholds| at(thresholds[kind]));
    let (from, to) = range(&array, kind, request, quiet.as_ref().ok());
    if !(from < to) {
        return Err(ScanError::Range { from_pe: from, to_pe: to });
    }
    let steps = request.points.max(2) - 1;
    let thresholds = (0..=steps).map(|step| from + (to - from) * step as f64 / steps as f64);
    Ok(ThresholdScan {
        telescope: study.kinds[kind].name.clone(),
        topology: study.kinds[kind].topology.to_string(),
        layout: study.layouts[layout].name.clone(),
        condition: format!(
            "{} of {} within {} ns",
            array.least,
            array.kinds.len(),
            array.window_ns
        ),
        sky_pe_per_ns: planned.sky_per_ns[kind],
        accidental_share: rule.accidental_share,
        readout_limit_hz: rule.readout_limit_hz,
        rows: thresholds.map(at).collect(),
        quiet: quiet.map_err(|reason| reason.to_string()),
    })
}

/// The kind and the layout asked for.
fn chosen(study: &Study, request: &ScanRequest) -> Result<(usize, usize), ScanError> {
    let names = study.kinds.iter().map(|kind| kind.name.as_str());
    let kind = names.clone().position(|name| name == request.telescope).ok_or_else(|| {
        let known = names.collect::<Vec<_>>().join(", ");
        ScanError::Telescope { name: request.telescope.clone(), known }
    })?;
    let having =
        || {
            study.layouts.iter().enumerate().filter(move |(_, layout)| {
                layout.telescopes.iter().any(|placed| placed.kind == kind)
            })
        };
    let wanted = request.layout.as_deref();
    let mut fitting = having().filter(|(_, layout)| wanted.is_none_or(|name| layout.name == name));
    let found = fitting.next().map(|(index, _)| index).ok_or_else(|| {
        let known: Vec<&str> = having().map(|(_, layout)| layout.name.as_str()).collect();
        ScanError::Layout {
            name: wanted.unwrap_or_default().to_owned(),
            telescope: request.telescope.clone(),
            known: known.join(", "),
        }
    })?;
    Ok((kind, found))
}

/// Lowest and highest threshold of a scan, photoelectrons.
fn range(
    array: &Array,
    kind: usize,
    request: &ScanRequest,
    quiet: Option<&ThresholdRow>,
) -> (f64, f64) {
    let law = &array.accidental[kind];
    let busiest_hz = BUSY / (array.window_ns * 1e-9);
    let first = law.quiet_threshold_pe("", busiest_hz).unwrap_or(1.0);
    let from = request.from_pe.unwrap_or((10.0 * first).floor() / 10.0);
    let to = quiet.map_or(4.0 * from, |row| (3.0 * row.threshold_pe).ceil());
    (from, request.to_pe.unwrap_or(to.min(law.largest_margin_pe())))
}

fn row(threshold_pe: f64, kind: usize, rates: &ArrayRates) -> ThresholdRow {
    let (accidental, shower) = (rates.accidental_hz[kind], rates.shower_hz[kind]);
    ThresholdRow {
        threshold_pe,
        pixel_rate_hz: rates.pixel_hz[kind],
        accidental_rate_hz: accidental,
        shower_rate_hz: shower.value,
        total_rate_hz: accidental + shower.value,
        array_accidental_rate_hz: rates.array_accidental_hz,
        array_shower_rate_hz: rates.array_shower_hz.value,
        shower_rate_error_hz: shower.error,
        array_shower_rate_error_hz: rates.array_shower_hz.error,
    }
}

/// Light of the study's kinds, for a scan.
pub(super) fn light(study: &Study, progress: &dyn Progress) -> crate::light::LightModel {
    progress.stage("light tables", 1);
    let light = setup::light_model(study);
    progress.advance(1);
    light
}
