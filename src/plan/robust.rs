//! The order of layouts under other assumptions, on common events.

use crate::layout::comparison::{DECISIVE, robustness};
use crate::layout::{Comparison, Resampling};
use crate::rates;
use crate::report::{OrderChange, OrderRow};
use crate::response::Sample;
use crate::study::{Robustness, Study};

use super::tables::stored;
use super::{PlanError, Planned, Progress, Tables, samples, setup};

/// Factors on all light: mirrors, air, sensors together are known no better.
const LIGHT_SCALES: [f64; 2] = [0.85, 1.15];

/// Gamma rates of all layouts by word under an assumption, and as the study states it on the same
/// words.
struct Assumption {
    name: String,
    rates: Vec<Vec<f64>>,
    stated: Vec<Vec<f64>>,
}

/// The order by gamma rate with more and less light; with a `[robustness]` section also under a
/// brighter sky and another air, which are simulated again on a share of the showers.
pub fn orders(
    planned: &Planned<'_>,
    order: &[usize],
    tables: Option<&Tables>,
    progress: &dyn Progress,
) -> Result<(Vec<OrderRow>, Vec<OrderChange>), PlanError> {
    let stated = planned.word_rates(&planned.gamma.sample, &planned.thresholds_pe, order);
    let mut assumptions: Vec<Assumption> = LIGHT_SCALES
        .iter()
        .map(|scale| {
            let scaled = |all: &Vec<f64>| all.iter().map(|pe| pe / scale).collect();
            let thresholds: Vec<Vec<f64>> = planned.thresholds_pe.iter().map(scaled).collect();
            let rates = planned.word_rates(&planned.gamma.sample, &thresholds, order);
            Assumption { name: format!("all light x {scale}"), rates, stated: stated.clone() }
        })
        .collect();
    if let Some(wanted) = &planned.study.robustness {
        let bright: Vec<f64> =
            planned.sky_per_ns.iter().map(|sky| sky * wanted.sky_factor).collect();
        let name = format!("sky noise x {}", wanted.sky_factor);
        let same_air = planned.study.clone();
        assumptions.push(simulated(
            planned,
            (name, &same_air, bright),
            &stated,
            (order, wanted),
            tables,
            progress,
        )?);
        let mut other_air = planned.study.clone();
        other_air.air.atmosphere = wanted.atmosphere.clone();
        let name = format!("air {}", wanted.atmosphere.name());
        let sky = planned.sky_per_ns.clone();
        assumptions.push(simulated(
            planned,
            (name, &other_air, sky),
            &stated,
            (order, wanted),
            tables,
            progress,
        )?);
    }
    let found = assumptions.iter().map(|assumption| compared(planned, assumption, order));
    let (rows, changes): (Vec<Vec<OrderRow>>, Vec<OrderChange>) = found.unzip();
    Ok((rows.into_iter().flatten().collect(), changes))
}

/// Simulates a share of the gamma showers again: the same showers at the same cores.
fn simulated(
    planned: &Planned<'_>,
    (name, study, sky_per_ns): (String, &Study, Vec<f64>),
    stated: &[Vec<f64>],
    (order, wanted): (&[usize], &Robustness),
    tables: Option<&Tables>,
    progress: &dyn Progress,
) -> Result<Assumption, PlanError> {
    let (throw, repetitions) = setup::gamma_throw(study, &planned.columns);
    let share = (repetitions as f64 * wanted.showers_share).round().max(1.0) as usize;
    let words = throw.word_count() * share;
    let thresholds_pe = as_quiet(planned, study, &sky_per_ns)?;
    let columns = &planned.columns;
    let throws = [(throw, share)];
    progress.stage(&name, words as u64);
    let found = match stored(study, (columns, &sky_per_ns), &throws, tables)? {
        Some(found) => found,
        None => {
            let light = setup::light_model(study);
            samples(study, (&light, sky_per_ns), columns, &throws, tables, progress)?
        }
    };
    let rates = planned.word_rates(&found[0], &thresholds_pe, order);
    let scale = repetitions as f64 / share as f64;
    let same = stated.iter().map(|rates| rates[..words].iter().map(|rate| rate * scale).collect());
    Ok(Assumption { name, rates, stated: same.collect() })
}

/// Thresholds of all layouts under another sky: fixed ones stay, a quiet one is that at which the
/// telescope has no more accidental triggers than under the stated sky.
fn as_quiet(
    planned: &Planned<'_>,
    study: &Study,
    sky_per_ns: &[f64],
) -> Result<Vec<Vec<f64>>, PlanError> {
    let accidental = setup::accidentals(study, sky_per_ns);
    let given_pe = setup::thresholds_pe(study, &accidental)?;
    let of_layout = |stated: &Vec<f64>| {
        let kinds = given_pe.iter().zip(stated).enumerate();
        let of_kind = |(kind, (given, stated)): (usize, (&Option<f64>, &f64))| match given {
            Some(pe) => Ok(*pe),
            None if stated.is_nan() => Ok(f64::NAN),
            None => {
                let most_hz = planned.accidental[kind].rate_hz(*stated);
                accidental[kind].quiet_threshold_pe(&study.kinds[kind].name, most_hz)
            }
        };
        kinds.map(of_kind).collect::<Result<Vec<f64>, _>>()
    };
    Ok(planned.thresholds_pe.iter().map(of_layout).collect::<Result<_, _>>()?)
}

/// Rates of all layouts under an assumption beside those as stated, and what changes places.
fn compared(
    planned: &Planned<'_>,
    assumption: &Assumption,
    order: &[usize],
) -> (Vec<OrderRow>, OrderChange) {
    let count = order.len();
    let words = assumption.rates.first().map_or(0, Vec::len);
    let strata = planned.gamma.sample.words[..words].iter();
    let resampling = Resampling::of_strata(strata.map(|word| (word.ring, word.energy_gev)));
    let both: Vec<Vec<f64>> = assumption.rates.iter().chain(&assumption.stated).cloned().collect();
    let resamples = planned.study.ranking.resamples;
    let both = Comparison::of_rates(&both, &resampling, resamples, planned.study.seed);
    let (now, before) = both.scores.split_at(count);
    let name = |place: usize| planned.study.layouts[order[place]].name.clone();
    let rows = (0..count).map(|place| {
        let ratios = both.resampled[place].iter().zip(&both.resampled[count + place]);
        OrderRow {
            assumption: assumption.name.clone(),
            layout: name(place),
            place: 1 + now.iter().filter(|rate| **rate > now[place]).count(),
            gamma_rate_hz: now[place],
            gamma_rate_error_hz: both.error(place),
            ratio: now[place] / before[place],
            ratio_error: deviation(&ratios.map(|(a, b)| a / b).collect::<Vec<_>>()),
        }
    });
    let change = robustness(before, now);
    let decided = change.flipped.iter().filter(|&&(a, b)| {
        both.probability_ahead(count + a, count + b) > DECISIVE
            && both.probability_ahead(b, a) > DECISIVE
    });
    let flips = change.flipped.iter().map(|&(a, b)| format!("{} / {}", name(a), name(b)));
    let change = OrderChange {
        assumption: assumption.name.clone(),
        kendall_tau: change.kendall_tau,
        best_changes: change.best_changes,
        decided: decided.count(),
        flips: flips.collect(),
    };
    (rows.collect(), change)
}

fn deviation(values: &[f64]) -> f64 {
    let count = values.len() as f64;
    let mean = values.iter().sum::<f64>() / count;
    (values.iter().map(|value| (value - mean).powi(2)).sum::<f64>() / (count - 1.0)).sqrt()
}

impl Planned<'_> {
    /// Gamma rates by word of layouts in a sample of the same columns.
    fn word_rates(
        &self,
        sample: &Sample,
        thresholds_pe: &[Vec<f64>],
        layouts: &[usize],
    ) -> Vec<Vec<f64>> {
        let of = |&layout: &usize| {
            let plane = self.vote(sample, layout, &thresholds_pe[layout]);
            rates::word_rates(&sample.words, &plane, &self.gamma.spectrum)
        };
        layouts.iter().map(of).collect()
    }
}
