//! The trigger threshold: the energy at which the differential trigger rate peaks.

use crate::response::Word;

use super::rate::Estimate;

/// Energies are grouped in bins of a twentieth of a decade for the fit.
const PER_DECADE: f64 = 12.0;

/// Peak of dR/dE, GeV, by a local fit: a parabola in ln(dR/dE) against ln E through the bins within
/// 0.35 decades of the highest, weighted by their errors. `rates` is what each word adds to the rate.
///
/// The peak of dR/dlnE lies 25 to 30 % higher for a Crab-like source. NaN if fewer than four bins
/// have triggers or the parabola opens upward. The error is a jackknife over eight interleaved
/// groups of words.
pub fn threshold_gev(words: &[Word], rates: &[f64]) -> Estimate {
    let value = peak(words, rates, |_| true);
    let groups = 8;
    let parts: Vec<f64> = (0..groups)
        .map(|group| peak(words, rates, |place| (place / 2) % groups != group))
        .collect();
    let mean = parts.iter().sum::<f64>() / groups as f64;
    let spread: f64 = parts.iter().map(|part| (part - mean).powi(2)).sum();
    Estimate { value, error: (spread * (groups - 1) as f64 / groups as f64).sqrt() }
}

fn peak(words: &[Word], rates: &[f64], keep: impl Fn(usize) -> bool) -> f64 {
    let index = |energy: f64| (energy.log10() * PER_DECADE).floor() as i64;
    let Some(first) = words.iter().map(|word| index(word.energy_gev)).min() else {
        return f64::NAN;
    };
    let last = words.iter().map(|word| index(word.energy_gev)).max().unwrap_or(first);
    let bins = (last - first + 1) as usize;
    let (mut sums, mut squares) = (vec![0.0; bins], vec![0.0; bins]);
    for (place, (word, rate)) in words.iter().zip(rates).enumerate() {
        if keep(place) {
            let bin = (index(word.energy_gev) - first) as usize;
            sums[bin] += rate;
            squares[bin] += rate * rate;
        }
    }
    let width = 10.0_f64.powf(1.0 / PER_DECADE) - 1.0;
    let points: Vec<(f64, f64, f64)> = (0..bins)
        .filter(|&bin| sums[bin] > 0.0)
        .map(|bin| {
            let low = (first + bin as i64) as f64 / PER_DECADE;
            let density = sums[bin] / (10.0_f64.powf(low) * width);
            let middle = (low + 0.5 / PER_DECADE) * core::f64::consts::LN_10;
            (middle, density.ln(), sums[bin] * sums[bin] / squares[bin])
        })
        .collect();
    let Some(top) = points.iter().max_by(|a, b| a.1.total_cmp(&b.1)).map(|point| point.0) else {
        return f64::NAN;
    };
    let near: Vec<_> = points.into_iter().filter(|p| (p.0 - top).abs() < 0.81).collect();
    parabola_peak(&near, top).map_or(f64::NAN, f64::exp)
}

/// Position of the maximum of a weighted least-squares parabola.
fn parabola_peak(points: &[(f64, f64, f64)], origin: f64) -> Option<f64> {
    if points.len() < 4 {
        return None;
    }
    let mut normal = nalgebra::Matrix3::<f64>::zeros();
    let mut right = nalgebra::Vector3::<f64>::zeros();
    for (x, y, weight) in points {
        let row = nalgebra::Vector3::new(1.0, x - origin, (x - origin).powi(2));
        normal += row * row.transpose() * *weight;
        right += row * (*y * *weight);
    }
    let solution = normal.lu().solve(&right)?;
    let (slope, bend) = (solution[1], solution[2]);
    let peak = -slope / (2.0 * bend);
    (bend < 0.0 && peak.abs() < 1.0).then_some(origin + peak)
}
