//! From a study to its result: simulate once, score every layout on the same events.

mod agree;
mod finalists;
mod levels;
mod models;
mod pool;
mod reach;
mod robust;
mod rows;
mod scan;
mod search;
mod setup;
mod sources;
mod tables;

pub use agree::{AgreeRow, agree};
pub use scan::{ScanError, ScanRequest, scan};
pub use search::{Best, SearchError, Wanted, best_files, search_ground};
pub use tables::Tables;

use std::collections::BTreeMap;

use thiserror::Error;

use crate::layout::{Comparison, Resampling, at_least};
use crate::light::LightModel;
use crate::rates::{self, Estimate, Spectrum, SpectrumError};
use crate::report::PlanResult;
use crate::response::{CascadeLight, Column, Sample, Scene, TableError, Throw};
use crate::scan::{Array, ArrayEvents, NotQuiet};
use crate::study::{Engine, Study};
use crate::telescope::{Accidental, QuietError};

/// A study that cannot be planned.
#[derive(Debug, Error)]
pub enum PlanError {
    /// A spectrum that is not known.
    #[error(transparent)]
    Spectrum(#[from] SpectrumError),
    /// A stored response table that cannot be used.
    #[error("{0}; write --rebuild to simulate it again, or another --table")]
    Table(#[from] TableError),
    /// A telescope kind has no quiet threshold.
    #[error(transparent)]
    Quiet(#[from] QuietError),
    /// A layout has no quiet threshold.
    #[error("layout {layout}: {reason}")]
    Loud {
        /// The layout.
        layout: String,
        /// Why.
        reason: NotQuiet,
    },
    /// Nothing triggered.
    #[error("no layout has a single gamma trigger; raise gamma_showers or lower the thresholds")]
    Empty,
}

/// How far a long computation has come.
pub trait Progress: Sync {
    /// A new stage of `total` steps begins.
    fn stage(&self, name: &str, total: u64);
    /// Some steps are done.
    fn advance(&self, steps: u64);
}

/// No display.
impl Progress for () {
    fn stage(&self, _: &str, _: u64) {}
    fn advance(&self, _: u64) {}
}

/// A simulated primary with the spectra it is weighted by.
struct Weighted {
    sample: Sample,
    spectrum: Spectrum,
}

/// One layout's votes and rates.
struct Scored {
    gamma_plane: Vec<u64>,
    gamma_words: Vec<f64>,
    gamma: Estimate,
    backgrounds: Vec<(Vec<u64>, Vec<f64>, Estimate)>,
}

impl Scored {
    fn background(&self) -> Estimate {
        let value = self.backgrounds.iter().map(|(_, _, rate)| rate.value).sum();
        let square: f64 = self.backgrounds.iter().map(|(_, _, rate)| rate.error.powi(2)).sum();
        Estimate { value, error: square.sqrt() }
    }
}

/// Everything the result is made from.
struct Planned<'a> {
    study: &'a Study,
    /// Pixel thresholds by layout and kind; NaN for a kind that the layout lacks and that has none
    /// of its own.
    thresholds_pe: Vec<Vec<f64>>,
    accidental: Vec<Accidental>,
    sky_per_ns: Vec<f64>,
    columns: Vec<Column>,
    members: Vec<Vec<usize>>,
    gamma: Weighted,
    backgrounds: Vec<Weighted>,
}

/// Simulates a study, or reads its stored tables, scores its layouts and ranks them.
///
/// # Errors
/// [`PlanError`] if the study names a spectrum that is not there, or a stored table
/// cannot be used.
pub fn plan(
    study: &Study,
    tables: Option<&Tables>,
    progress: &dyn Progress,
) -> Result<PlanResult, PlanError> {
    let spectra = setup::spectra(study)?;
    progress.stage("light tables", 1);
    let light = setup::light_model(study);
    progress.advance(1);
    let planned = simulate(study, &light, spectra, tables, progress)?;
    progress.stage("light pool", 1);
    let pool = pool::rows(study, &light);
    progress.advance(1);
    let scored: Vec<Scored> =
        (0..study.layouts.len()).map(|layout| planned.score(layout)).collect();
    if scored.iter().all(|layout| layout.gamma.value <= 0.0) {
        return Err(PlanError::Empty);
    }
    let ranked = planned.compared(&scored).order();
    let order: Vec<usize> = ranked.iter().map(|row| row.layout).collect();
    let (orders, order_changes) = robust::orders(&planned, &order, tables, progress)?;
    let mut result = rows::result(&planned, &light, &scored, &ranked, pool);
    if let Some(threshold) = result.ranking.first().map(|row| row.threshold_gev)
        && threshold.is_finite()
    {
        result.reach = Some(pool::reach(study, &light, threshold));
    }
    result.scans = rows::scans(&planned, &planned.compared(&scored), &ranked);
    result.sources = sources::rows(&planned, &scored, &setup::sources(study)?);
    result.finalists = finalists::rows(&planned, &scored, &order);
    result.directions = finalists::directions(&planned, &scored, &order);
    (result.orders, result.order_changes) = (orders, order_changes);
    result.sky_levels = levels::rows(&planned, &scored, &order, &light, tables, progress)?;
    Ok(result)
}

fn simulate<'a>(
    study: &'a Study,
    light: &LightModel,
    (gamma_spectrum, background_spectra): (Spectrum, Vec<Spectrum>),
    tables: Option<&Tables>,
    progress: &dyn Progress,
) -> Result<Planned<'a>, PlanError> {
    let sky_per_ns: Vec<f64> =
        study.kinds.iter().map(|kind| kind.sky_photoelectrons_per_ns(&study.night_sky)).collect();
    let accidental = setup::accidentals(study, &sky_per_ns);
    let (columns, members) = columns(study);
    let gamma = [setup::gamma_throw(study, &columns)].into_iter();
    let backgrounds = study.backgrounds.iter();
    let backgrounds =
        backgrounds.map(|known| setup::background_throw(study, known.species, &columns));
    let mut throws: Vec<_> = gamma.chain(backgrounds).collect();
    let spectra: Vec<Spectrum> =
        core::iter::once(gamma_spectrum).chain(background_spectra).collect();
    let planned = |throws: &[(Throw, usize)], stage: &str| {
        let words = throws.iter().map(|(throw, repetitions)| throw.word_count() * repetitions);
        progress.stage(stage, words.sum::<usize>() as u64);
        let under = (light, sky_per_ns.clone());
        let samples = samples(study, under, &columns, throws, tables, progress)?;
        let mut weighted = samples
            .into_iter()
            .zip(spectra.iter().cloned())
            .map(|(sample, spectrum)| Weighted { sample, spectrum });
        let planned = Planned {
            study,
            thresholds_pe: Vec::new(),
            accidental: accidental.clone(),
            sky_per_ns: sky_per_ns.clone(),
            columns: columns.clone(),
            members: members.clone(),
            gamma: weighted.next().expect("a throw gives a sample"),
            backgrounds: weighted.collect(),
        };
        planned.with_thresholds()
    };
    let mut found = planned(&throws, "showers")?;
    for _ in 0..reach::ENLARGEMENTS {
        let beyond: Vec<f64> = found.primaries().map(|weighted| found.beyond(weighted)).collect();
        let stated = study.budget.impact_radius_m.is_some();
        if stated || !beyond.iter().any(|share| *share > reach::BEYOND) {
            break;
        }
        for ((throw, _), _) in throws.iter_mut().zip(beyond).filter(|(_, s)| *s > reach::BEYOND) {
            throw.rings_m.iter_mut().for_each(|radius| *radius *= reach::GROWTH);
        }
        found = planned(&throws, "showers over a wider area")?;
    }
    Ok(found)
}

/// Simulates a study's backgrounds, and as few gammas as can be: for rates of showers only.
fn simulate_backgrounds<'a>(
    study: &'a Study,
    tables: Option<&Tables>,
    progress: &dyn Progress,
) -> Result<Planned<'a>, PlanError> {
    let light = scan::light(study, progress);
    simulate(study, &light, setup::spectra(study)?, tables, progress)
}

/// What columns see of some throws under some air and sky; from a stored table as far as it goes.
fn samples(
    study: &Study,
    (light, sky_per_ns): (&LightModel, Vec<f64>),
    columns: &[Column],
    throws: &[(Throw, usize)],
    tables: Option<&Tables>,
    progress: &dyn Progress,
) -> Result<Vec<Sample>, TableError> {
    let (developments, field_ut) = (setup::developments(), setup::field_ut(study));
    let through = setup::transmission(study);
    let through = |emission_m: f64, zenith_rad: f64, wavelength_nm: f64| {
        through.transmission(emission_m, zenith_rad, wavelength_nm)
    };
    let efficiencies = setup::efficiencies(study);
    let detectors = setup::detectors(study, &efficiencies);
    let followed = (study.engine == Engine::Cascade).then(|| {
        let air = (&study.air.atmosphere, study.site.altitude_m);
        CascadeLight::new(air, &through, field_ut, &study.kinds, &detectors)
    });
    let scene = Scene {
        cascade: followed.as_ref(),
        seed: study.seed,
        kinds: &study.kinds,
        sky_per_ns,
        light,
        pointing: setup::pointing(study),
        field_ut,
        columns: columns.to_vec(),
        light_scale: 1.0,
        parts: &|primary, light, stream| {
            crate::light::parts(primary, field_ut, light, &developments, stream)
        },
    };
    tables::samples(study, &scene, throws, tables, &|| progress.advance(1))
}

/// The union of all telescopes of all layouts, and which of them each layout has.
fn columns(study: &Study) -> (Vec<Column>, Vec<Vec<usize>>) {
    let mut known: BTreeMap<([i64; 3], usize), usize> = BTreeMap::new();
    let mut columns = Vec::new();
    let members = study
        .layouts
        .iter()
        .map(|layout| {
            let places = layout.telescopes.iter().map(|placed| {
                let key = (placed.enu_m.map(|metres| (metres * 1e3).round() as i64), placed.kind);
                *known.entry(key).or_insert_with(|| {
                    columns.push(Column { position_m: placed.enu_m, kind: placed.kind });
                    columns.len() - 1
                })
            });
            places.collect()
        })
        .collect();
    (columns, members)
}

impl Planned<'_> {
    /// The same with the thresholds of every layout found.
    fn with_thresholds(mut self) -> Result<Self, PlanError> {
        let given_pe = setup::thresholds_pe(self.study, &self.accidental)?;
        let layouts = 0..self.study.layouts.len();
        let found = layouts.map(|layout| self.quiet_pe(layout, &given_pe));
        self.thresholds_pe = found.collect::<Result<_, _>>()?;
        Ok(self)
    }

    /// The thresholds of a layout: those given, and the lowest quiet ones of the other kinds.
    fn quiet_pe(&self, layout: usize, given_pe: &[Option<f64>]) -> Result<Vec<f64>, PlanError> {
        let kinds = self.members[layout].iter().map(|&column| self.columns[column].kind);
        if kinds.into_iter().all(|kind| given_pe[kind].is_some()) {
            return Ok(given_pe.iter().map(|pe| pe.unwrap_or(f64::NAN)).collect());
        }
        let quiet = self.array(layout).quiet_thresholds_pe(given_pe, &self.study.trigger.quiet);
        let name = || self.study.layouts[layout].name.clone();
        quiet.map_err(|reason| PlanError::Loud { layout: name(), reason })
    }

    /// A layout with its backgrounds and its sky, for rates at any threshold.
    fn array(&self, layout: usize) -> Array {
        let members = self.members[layout].as_slice();
        let columns = || members.iter().map(|&column| &self.columns[column]);
        let front_ns = setup::front_ns(self.study, columns());
        let mut events = ArrayEvents::default();
        for weighted in &self.backgrounds {
            events.insert(&weighted.sample, &weighted.spectrum, members, &front_ns);
        }
        Array {
            events,
            kinds: columns().map(|column| column.kind).collect(),
            accidental: self.accidental.clone(),
            least: self.study.layouts[layout].condition,
            window_ns: self.study.layouts[layout].window_ns,
        }
    }

    /// Events of a sample that a layout keeps with some pixel thresholds, by kind. Light scaled by
    /// a factor is thresholds divided by it.
    fn vote(&self, sample: &Sample, layout: usize, thresholds_pe: &[f64]) -> Vec<u64> {
        let planes: Vec<Vec<u64>> = self.members[layout]
            .iter()
            .map(|&column| sample.plane(column, thresholds_pe[self.columns[column].kind]))
            .collect();
        let slices: Vec<&[u64]> = planes.iter().map(Vec::as_slice).collect();
        at_least(&slices, self.study.layouts[layout].condition)
    }

    /// Votes and rates of one layout.
    fn score(&self, layout: usize) -> Scored {
        let vote = |weighted: &Weighted| {
            let plane = self.vote(&weighted.sample, layout, &self.thresholds_pe[layout]);
            let words = rates::word_rates(&weighted.sample.words, &plane, &weighted.spectrum);
            let rate = rates::rate_hz(&weighted.sample.words, &words);
            (plane, words, rate)
        };
        let (gamma_plane, gamma_words, gamma) = vote(&self.gamma);
        let backgrounds = self.backgrounds.iter().map(vote).collect();
        Scored { gamma_plane, gamma_words, gamma, backgrounds }
    }

    /// The layouts' scores on common resamples.
    fn compared(&self, scored: &[Scored]) -> Comparison {
        let gamma = self.resampled(&self.gamma, scored.iter().map(|s| &s.gamma_words), 0);
        match self.study.ranking.score.as_str() {
            "gamma_rate_per_cost" => {
                let costs = (0..scored.len()).map(|layout| self.cost(layout)).collect();
                gamma.combined(&gamma.constant(costs), |rate, cost| rate / cost)
            }
            "gamma_rate_per_root_background" => {
                let sets = self.backgrounds.iter().enumerate().map(|(index, weighted)| {
                    let words = scored.iter().map(|s| &s.backgrounds[index].1);
                    self.resampled(weighted, words, 1 + index as u64)
                });
                let sum = sets.reduce(|a, b| a.combined(&b, |a, b| a + b));
                let sum = sum.unwrap_or_else(|| gamma.constant(vec![f64::NAN; scored.len()]));
                gamma.combined(&sum, |gamma, background| gamma / background.sqrt())
            }
            _ => gamma,
        }
    }

    /// Rates of all layouts for one primary on common resamples; `number` sets the primaries'
    /// resamples apart.
    fn resampled<'a>(
        &self,
        weighted: &Weighted,
        word_rates: impl Iterator<Item = &'a Vec<f64>>,
        number: u64,
    ) -> Comparison {
        let words = weighted.sample.words.iter().map(|word| (word.ring, word.energy_gev));
        let rates: Vec<Vec<f64>> = word_rates.cloned().collect();
        let seed = self.study.seed.wrapping_add(number << 32);
        let resamples = self.study.ranking.resamples;
        Comparison::of_rates(&rates, &Resampling::of_strata(words), resamples, seed)
    }

    fn cost(&self, layout: usize) -> f64 {
        let telescopes = self.study.layouts[layout].telescopes.iter();
        let placed: Vec<_> = telescopes.map(|placed| (placed.enu_m, placed.kind)).collect();
        self.study.tariff.cost(&placed)
    }
}
