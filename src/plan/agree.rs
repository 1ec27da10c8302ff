//! The two light engines side by side on one study.
//!
//! Both see the same thrown events: primaries, energies, directions and cores are the same, showers and
//! photoelectrons are each engine's own.

use crate::rates::{self, Estimate};
use crate::response::CellImage;
use crate::study::{Engine, Study};

use super::{PlanError, Planned, Progress, Weighted, setup, simulate};

/// One quantity by both engines.
#[derive(Clone, Debug, PartialEq)]
pub struct AgreeRow {
    /// What is compared.
    pub quantity: String,
    /// Of what: a telescope kind, a layout.
    pub of: String,
    /// By the fast engine.
    pub profile: Estimate,
    /// By the reference engine.
    pub cascade: Estimate,
}

impl AgreeRow {
    /// Fast over reference.
    pub fn ratio(&self) -> Estimate {
        let value = self.profile.value / self.cascade.value;
        let relative = |e: &Estimate| e.error / e.value;
        Estimate { value, error: value * relative(&self.profile).hypot(relative(&self.cascade)) }
    }
}

/// Simulates a study with both engines.
///
/// # Errors
/// [`PlanError`], as in a plan.
pub fn agree(study: &Study, progress: &dyn Progress) -> Result<Vec<AgreeRow>, PlanError> {
    let light = setup::light_model(study);
    let mut fixed = study.clone();
    // One throw for both: the reach is not enlarged by either.
    if fixed.budget.impact_radius_m.is_none() {
        let (columns, _) = super::columns(study);
        let (throw, _) = setup::gamma_throw(study, &columns);
        fixed.budget.impact_radius_m = throw.rings_m.last().copied();
    }
    let studies = [Engine::Profile, Engine::Cascade].map(|engine| {
        let mut study = fixed.clone();
        study.engine = engine;
        study
    });
    let run = |study| simulate(study, &light, setup::spectra(study)?, None, progress);
    let (profile, cascade) = (run(&studies[0])?, run(&studies[1])?);
    let mut rows = Vec::new();
    for (number, kind) in study.kinds.iter().enumerate() {
        for (quantity, value) in IMAGES {
            let of = |planned: &Planned<'_>| image_mean(planned, number, value);
            let (profile, cascade) = (of(&profile), of(&cascade));
            rows.push(AgreeRow {
                quantity: quantity.into(),
                of: kind.name.clone(),
                profile,
                cascade,
            });
        }
    }
    for (number, layout) in study.layouts.iter().enumerate() {
        let scored = [&profile, &cascade].map(|planned| (planned, planned.score(number)));
        let mut row = |quantity: String, values: [Estimate; 2]| {
            let [profile, cascade] = values;
            rows.push(AgreeRow { quantity, of: layout.name.clone(), profile, cascade });
        };
        row("gamma rate (Hz)".into(), [0, 1].map(|i| scored[i].1.gamma));
        let threshold = |i: usize| {
            rates::threshold_gev(&scored[i].0.gamma.sample.words, &scored[i].1.gamma_words)
        };
        row("gamma threshold (GeV)".into(), [0, 1].map(threshold));
        for (place, weighted) in profile.backgrounds.iter().enumerate() {
            let name = format!("{} rate (Hz)", weighted.sample.species);
            row(name, [0, 1].map(|i| scored[i].1.backgrounds[place].2));
        }
    }
    Ok(rows)
}

type Value = fn(&CellImage) -> f64;

/// Quantities of gamma-ray images.
const IMAGES: [(&str, Value); 5] = [
    ("image size (p.e.)", |image| f64::from(image.summary.size_pe)),
    ("image length (deg)", |image| f64::from(image.summary.length_deg)),
    ("image width (deg)", |image| f64::from(image.summary.width_deg)),
    ("centroid from the source (deg)", |image| {
        f64::from(image.summary.centroid_deg[0]).hypot(f64::from(image.summary.centroid_deg[1]))
    }),
    ("time slope (ns/deg)", |image| f64::from(image.summary.time_slope_ns_deg).abs()),
];

/// Images fainter than this have no shape worth comparing, photoelectrons.
const LEAST_SIZE_PE: f32 = 50.0;

/// Mean over gamma images of one kind, each with the rate its event stands for; the error from the
/// scatter of words.
fn image_mean(planned: &Planned<'_>, kind: usize, value: Value) -> Estimate {
    let Weighted { sample, spectrum } = &planned.gamma;
    let weights = rates::event_rates(&sample.words, spectrum);
    let mut sums = vec![[0.0; 2]; sample.words.len()];
    for (column, images) in planned.columns.iter().zip(&sample.images) {
        if column.kind != kind {
            continue;
        }
        for image in images.iter().filter(|image| image.summary.size_pe > LEAST_SIZE_PE) {
            let word = image.event as usize / crate::response::EVENTS_PER_WORD;
            sums[word][0] += weights[word] * value(image);
            sums[word][1] += weights[word];
        }
    }
    let total = |i: usize| sums.iter().map(|sum| sum[i]).sum::<f64>();
    let mean = total(0) / total(1);
    let scatter: f64 = sums.iter().map(|sum| (sum[0] - mean * sum[1]).powi(2)).sum();
    Estimate { value: mean, error: scatter.sqrt() / total(1) }
}
