//! Effective area by true energy.

use crate::response::{EVENTS_PER_WORD, Word};

use super::rate::Estimate;

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
}

/// Effective area in each bin, m2: for a diffuse throw the acceptance divided by the cone's solid
/// angle, of which the exposures are made.
///
/// A = sum over words of exposure x triggered / (solid angle x energy width); the error is from the
/// scatter of words. Bins without words are NaN.
pub fn effective_areas(
    words: &[Word],
    plane: &[u64],
    solid_angle_sr: f64,
    bins: &[EnergyBin],
) -> Vec<Estimate> {
    let of_bin = |bin: &EnergyBin| {
        let (mut hit, mut square, mut count) = (0.0, 0.0, 0.0);
        for (word, bits) in words.iter().zip(plane) {
            if word.energy_gev < bin.low_gev || word.energy_gev >= bin.high_gev {
                continue;
            }
            let share = f64::from(bits.count_ones()) / EVENTS_PER_WORD as f64;
            hit += word.exposure * share;
            square += (word.exposure * share).powi(2);
            count += 1.0;
        }
        if count < 2.0 {
            return Estimate { value: f64::NAN, error: f64::NAN };
        }
        let width = (bin.high_gev - bin.low_gev) * solid_angle_sr / EVENTS_PER_WORD as f64;
        let mean = hit / count;
        let variance = (square / count - mean * mean).max(0.0) * count / (count - 1.0);
        Estimate { value: hit / width, error: (variance * count).sqrt() / width }
    };
    bins.iter().map(of_bin).collect()
}
