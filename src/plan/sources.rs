//! Every gamma-ray source of a study ranked by itself.

use crate::layout::{Comparison, Resampling};
use crate::rates::{self, Spectrum, threshold_gev};
use crate::report::SourceRow;

use super::{Planned, Scored};

/// Rate, threshold and place of every layout for every source, from the same events.
pub fn rows(planned: &Planned<'_>, scored: &[Scored], sources: &[Spectrum]) -> Vec<SourceRow> {
    let words = &planned.gamma.sample.words;
    let strata = || words.iter().map(|word| (word.ring, word.energy_gev));
    let (resamples, seed) = (planned.study.ranking.resamples, planned.study.seed);
    let of_source = |(source, spectrum): (&crate::study::Source, &Spectrum)| {
        let of_layout = |layout: &Scored| rates::word_rates(words, &layout.gamma_plane, spectrum);
        let word_rates: Vec<Vec<f64>> = scored.iter().map(of_layout).collect();
        let resampling = Resampling::of_strata(strata());
        let order = Comparison::of_rates(&word_rates, &resampling, resamples, seed).order();
        let row = |(place, found): (usize, crate::layout::Compared)| {
            let threshold = threshold_gev(words, &word_rates[found.layout]);
            SourceRow {
                source: source.name.clone(),
                layout: planned.study.layouts[found.layout].name.clone(),
                place: place + 1,
                tier: found.tier,
                gamma_rate_hz: found.score,
                gamma_rate_error_hz: found.error,
                threshold_gev: threshold.value,
                threshold_error_gev: threshold.error,
                order_probability: found.order_probability,
                showers_factor: found.showers_factor,
            }
        };
        order.into_iter().enumerate().map(row).collect::<Vec<_>>()
    };
    planned.study.sources.iter().zip(sources).flat_map(of_source).collect()
}
