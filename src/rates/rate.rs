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

/// The trigger rate of a spectrum, Hz.
///
/// The sum of n terms x_i that are independent but, being stratified in energy, not of one mean: the
/// variance is taken from successive differences of words of one ring,
/// var = sum over pairs (x_2i - x_2i+1)^2, which removes the slow change with energy.
///
/// # Source
/// Successive-difference estimator for systematic samples: Wolter 2007, Introduction to Variance
/// Estimation, ch. 8.
pub fn rate_hz(words: &[Word], rates: &[f64]) -> Estimate {
    let value = rates.iter().sum();
    let rings = words.iter().map(|word| word.ring).max().map_or(0, |most| most + 1);
    let mut variance = 0.0;
    for ring in 0..rings {
        let of_ring: Vec<f64> = words
            .iter()
            .zip(rates)
            .filter(|(word, _)| word.ring == ring)
            .map(|(_, rate)| *rate)
            .collect();
        let pairs = of_ring.chunks_exact(2);
        variance += pairs.map(|pair| (pair[0] - pair[1]).powi(2)).sum::<f64>();
    }
    Estimate { value, error: variance.sqrt() }
}

/// Triggered events of a plane.
pub fn triggered(plane: &[u64]) -> u64 {
    plane.iter().map(|bits| u64::from(bits.count_ones())).sum()
}

/// Events of a plane.
pub fn events(plane: &[u64]) -> u64 {
    (plane.len() * EVENTS_PER_WORD) as u64
}

/// Fraction of a rate that comes from the outermost ring of impact distance.
pub fn edge_fraction(words: &[Word], rates: &[f64]) -> f64 {
    let outermost = words.iter().map(|word| word.ring).max().unwrap_or(0);
    let edge: f64 =
        words.iter().zip(rates).filter(|(word, _)| word.ring == outermost).map(|(_, r)| r).sum();
    let total: f64 = rates.iter().sum();
    if total > 0.0 { edge / total } else { 0.0 }
}
