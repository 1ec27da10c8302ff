//! Effective area and differential rate by true energy.

use crate::response::{EVENTS_PER_WORD, Word};

use super::rate::{Estimate, by_ring};
use super::spectrum::Spectrum;

/// A bin of true energy.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EnergyBin {
    /// Lower edge, GeV.
    pub low_gev: f64,
    /// Upper edge, GeV.
    pub high_gev: f64,
}

impl EnergyBin {
    /// Bins of equal width in log10 E, edges at whole fractions of a decade, that cover a range.
    pub fn cover(low_gev: f64, high_gev: f64, per_decade: usize) -> Vec<Self> {
        let n = per_decade as f64;
        let first = (low_gev.log10() * n + 1e-9).floor() as i64;
        let last = (high_gev.log10() * n - 1e-9).ceil() as i64;
        let edge = |index: i64| 10.0_f64.powf(index as f64 / n);
        (first..last).map(|i| Self { low_gev: edge(i), high_gev: edge(i + 1) }).collect()
    }

    /// Geometric middle, GeV.
    pub fn middle_gev(self) -> f64 {
        (self.low_gev * self.high_gev).sqrt()
    }

    /// Width, GeV.
    pub fn width_gev(self) -> f64 {
        self.high_gev - self.low_gev
    }

    fn holds(self, word: &Word) -> bool {
        word.energy_gev >= self.low_gev && word.energy_gev < self.high_gev
    }
}

/// Effective area in each bin, m2: for a diffuse throw the acceptance divided by the cone's solid
/// angle.
///
/// A = sum over rings of ring area x (sum of exposure x triggered share) / (sum of exposure): the
/// mean over the bin in energy. The ratio keeps the number of words that fell into the bin out of
/// the scatter. `ring_areas_m2` is that of [`Throw`](crate::response::Throw). Bins in which a
/// ring has no word are NaN.
///
/// # Validity
/// The error is the scatter of words within each ring; a ring with one word in the bin counts with
/// its full square. A bin in which nothing triggered has the error of one event in its least
/// weighted ring, so that it is never 0 +- 0. Coverage: `verify_area_of_a_disc_and_its_errors`.
pub fn effective_areas(
    words: &[Word],
    plane: &[u64],
    ring_areas_m2: &[f64],
    bins: &[EnergyBin],
) -> Vec<Estimate> {
    ring_means(words, plane, ring_areas_m2, bins, |_| 1.0)
}

/// Differential trigger rate in each bin, Hz/GeV: the mean over the bin of flux x effective area x
/// `solid_angle_sr` (1 for a point source). Errors as for [`effective_areas`].
pub fn differential_rates(
    words: &[Word],
    plane: &[u64],
    (ring_areas_m2, solid_angle_sr): (&[f64], f64),
    spectrum: &Spectrum,
    bins: &[EnergyBin],
) -> Vec<Estimate> {
    let factor = |energy: f64| solid_angle_sr * spectrum.flux_m2_s_gev(energy);
    ring_means(words, plane, ring_areas_m2, bins, factor)
}

/// Sum over rings of area x exposure-weighted mean of factor(E) x triggered share.
fn ring_means(
    words: &[Word],
    plane: &[u64],
    ring_areas_m2: &[f64],
    bins: &[EnergyBin],
    factor: impl Fn(f64) -> f64,
) -> Vec<Estimate> {
    let rings = by_ring(words);
    let of_bin = |bin: &EnergyBin| {
        let (mut value, mut variance, mut one_event) = (0.0, 0.0, f64::INFINITY);
        for (ring, &area) in rings.iter().zip(ring_areas_m2) {
            let inside: Vec<usize> =
                ring.iter().copied().filter(|&place| bin.holds(&words[place])).collect();
            let total: f64 = inside.iter().map(|&place| words[place].exposure).sum();
            if inside.is_empty() {
                return Estimate { value: f64::NAN, error: f64::NAN };
            }
            let term = |&place: &usize| {
                let share = f64::from(plane[place].count_ones()) / EVENTS_PER_WORD as f64;
                (words[place].exposure / total, share * factor(words[place].energy_gev))
            };
            let terms: Vec<(f64, f64)> = inside.iter().map(term).collect();
            let mean: f64 = terms.iter().map(|(weight, share)| weight * share).sum();
            value += area * mean;
            variance += area * area * variance_of_mean(&terms, mean);
            let event = area * factor(words[inside[0]].energy_gev)
                / (inside.len() * EVENTS_PER_WORD) as f64;
            one_event = one_event.min(event);
        }
        Estimate { value, error: if value > 0.0 { variance.sqrt() } else { one_event } }
    };
    bins.iter().map(of_bin).collect()
}

/// Variance of a weighted mean, from the scatter about it.
fn variance_of_mean(terms: &[(f64, f64)], mean: f64) -> f64 {
    match terms {
        [(_, only)] => only * only,
        _ => {
            let count = terms.len() as f64;
            let squares = terms.iter().map(|(weight, term)| (weight * (term - mean)).powi(2));
            squares.sum::<f64>() * count / (count - 1.0)
        }
    }
}
