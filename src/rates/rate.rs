//! Rates and their errors.

use crate::response::{EVENTS_PER_WORD, Word};

use super::spectrum::Spectrum;

/// A number and its standard error.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Estimate {
    /// The number.
    pub value: f64,
    /// Its standard error.
    pub error: f64,
}

/// What one triggered event of each word adds to the rate of a spectrum, Hz: flux x exposure.
///
/// Worth keeping when many planes are scored with one spectrum.
pub fn event_rates(words: &[Word], spectrum: &Spectrum) -> Vec<f64> {
    let rates = words.iter().map(|word| word.exposure * spectrum.flux_m2_s_gev(word.energy_gev));
    rates.collect()
}

/// What each word adds to the trigger rate of a spectrum, Hz: flux x exposure x triggered events.
///
/// # Shape
/// One entry a word; `plane` holds one u64 a word.
pub fn word_rates(words: &[Word], plane: &[u64], spectrum: &Spectrum) -> Vec<f64> {
    let rates = words.iter().zip(plane).map(|(word, bits)| {
        f64::from(bits.count_ones()) * word.exposure * spectrum.flux_m2_s_gev(word.energy_gev)
    });
    rates.collect()
}

/// Sum over words of popcount x rate of one event, Hz, in eight interleaved partial sums of fixed
/// order, which the compiler can keep in vector registers.
pub fn rate_sum_hz(plane: &[u64], event_rates: &[f64]) -> f64 {
    let mut sums = [0.0; 8];
    let (bits, rates) = (plane.chunks_exact(8), event_rates.chunks_exact(8));
    let rest = bits.remainder().iter().zip(rates.remainder());
    let tail: f64 = rest.map(|(bits, rate)| f64::from(bits.count_ones()) * rate).sum();
    for (bits, rates) in bits.zip(rates) {
        for lane in 0..8 {
            sums[lane] += f64::from(bits[lane].count_ones()) * rates[lane];
        }
    }
    sums.iter().sum::<f64>() + tail
}

/// The trigger rate of a spectrum, Hz: [`word_rates`] summed by [`rate_hz`].
pub fn rate(words: &[Word], plane: &[u64], spectrum: &Spectrum) -> Estimate {
    rate_hz(words, &word_rates(words, plane, spectrum))
}

/// The sum of what words add to a rate, with its standard error, Hz.
///
/// Words are independent, events of a word are not: the error comes from words. They are stratified
/// by ring and by energy, so within a ring the terms x_i are not of one mean; the variance is taken
/// from successive differences in order of energy, var = n / (2 (n - 1)) sum (x_i+1 - x_i)^2, which
/// removes the slow change with energy. A ring with a single word counts with its full square.
///
/// # Source
/// Successive-difference estimator for systematic samples: Wolter 2007, Introduction to Variance
/// Estimation, ch. 8. Coverage: `verify_rate_errors_cover_the_truth`.
pub fn rate_hz(words: &[Word], rates: &[f64]) -> Estimate {
    let value = rates.iter().sum();
    let variance: f64 = by_ring(words)
        .into_iter()
        .map(|mut ring| {
            ring.sort_by(|&a, &b| words[a].energy_gev.total_cmp(&words[b].energy_gev));
            let count = ring.len() as f64;
            match ring.as_slice() {
                [] => 0.0,
                [only] => rates[*only].powi(2),
                _ => {
                    let steps = ring.windows(2).map(|two| (rates[two[1]] - rates[two[0]]).powi(2));
                    steps.sum::<f64>() * count / (2.0 * (count - 1.0))
                }
            }
        })
        .sum();
    Estimate { value, error: variance.sqrt() }
}

/// Words of each ring, in order of their number.
pub(super) fn by_ring(words: &[Word]) -> Vec<Vec<usize>> {
    let mut rings = Vec::new();
    for (place, word) in words.iter().enumerate() {
        if rings.len() <= word.ring {
            rings.resize(word.ring + 1, Vec::new());
        }
        rings[word.ring].push(place);
    }
    rings
}

/// Triggered events of a plane.
pub fn triggered(plane: &[u64]) -> u64 {
    plane.iter().map(|bits| u64::from(bits.count_ones())).sum()
}

/// Events of a plane.
pub fn events(plane: &[u64]) -> u64 {
    (plane.len() * EVENTS_PER_WORD) as u64
}

/// Energy below which half of a rate lies, GeV; NaN if there is no rate.
pub fn median_energy_gev(words: &[Word], rates: &[f64]) -> f64 {
    let mut order: Vec<usize> = (0..words.len()).collect();
    order.sort_by(|&a, &b| words[a].energy_gev.total_cmp(&words[b].energy_gev));
    let half = 0.5 * rates.iter().sum::<f64>();
    let mut sum = 0.0;
    for place in order {
        sum += rates[place];
        if sum >= half && sum > 0.0 {
            return words[place].energy_gev;
        }
    }
    f64::NAN
}
