//! The trigger threshold: the energy at which the differential trigger rate peaks.

use core::f64::consts::LN_10;

use nalgebra::{DMatrix, DVector};

use crate::response::Word;

use super::rate::{Estimate, by_ring};

/// Bins for the fit, per decade of energy.
const PER_DECADE: f64 = 16.0;
/// Half-width of the fit, in ln E; the window spans 0.87 decades.
const REACH: f64 = 1.0;
/// Groups of words left out in turn for the error.
const GROUPS: usize = 20;
/// Bins on either side that steady the search for the highest.
const SMOOTH: usize = 3;

/// Peak of dR/dE, GeV. `rates` is what each word adds to the rate.
///
/// A local fit: a cubic in ln E to ln(dR/dE) in bins of a sixteenth of a decade within 1.0 in ln E of
/// the highest, each weighted by its number of effective words, then the maximum of the cubic. The
/// peak of dR/dlnE lies 25 to 30 % higher for a Crab-like source.
///
/// # Validity
/// NaN if fewer than six bins have triggers or the cubic has no maximum near them, for example
/// because the thrown energies begin above the threshold. On areas that rise as a logistic in ln E
/// the bias is below 2 % (`verify_threshold_of_an_area_with_a_known_peak`). The error is a jackknife
/// over 20 groups of words interleaved in energy.
pub fn threshold_gev(words: &[Word], rates: &[f64]) -> Estimate {
    let rings = by_ring(words);
    let mut group = vec![0; words.len()];
    for mut ring in rings.iter().cloned() {
        ring.sort_by(|&a, &b| words[a].energy_gev.total_cmp(&words[b].energy_gev));
        for (rank, place) in ring.into_iter().enumerate() {
            group[place] = rank % GROUPS;
        }
    }
    let all = densities(words, rates, &rings, |_| true);
    let Some(top) = top(&all) else { return Estimate { value: f64::NAN, error: f64::NAN } };
    let value = cubic_peak(&all, top);
    // The window stays where the whole sample put it, or its jumps would be taken for errors.
    let parts: Vec<f64> = (0..GROUPS)
        .map(|out| cubic_peak(&densities(words, rates, &rings, |at| group[at] != out), top))
        .collect();
    let mean = parts.iter().sum::<f64>() / GROUPS as f64;
    let spread: f64 = parts.iter().map(|part| (part - mean).powi(2)).sum();
    Estimate { value, error: (spread * (GROUPS - 1) as f64 / GROUPS as f64).sqrt() }
}

/// ln E in the middle of a bin, ln of its rate density, and its weight.
type Point = (f64, f64, f64);

/// Density of the rate of the words kept in bins of ln E. Each ring of a bin is scaled by the
/// exposure of all its words over that of those kept, so that the number left out does not matter.
fn densities(
    words: &[Word],
    rates: &[f64],
    rings: &[Vec<usize>],
    keep: impl Fn(usize) -> bool,
) -> Vec<Point> {
    let index = |energy: f64| (energy.log10() * PER_DECADE).floor() as i64;
    let Some(first) = words.iter().map(|word| index(word.energy_gev)).min() else {
        return Vec::new();
    };
    let last = words.iter().map(|word| index(word.energy_gev)).max().unwrap_or(first);
    let bins = (last - first + 1) as usize;
    let (mut sums, mut squares) = (vec![0.0; bins], vec![0.0; bins]);
    for ring in rings {
        // Exposure of all, of those kept, rate and squared rates of those kept.
        let mut of_ring = vec![[0.0; 4]; bins];
        for &place in ring {
            let sums = &mut of_ring[(index(words[place].energy_gev) - first) as usize];
            sums[0] += words[place].exposure;
            if keep(place) {
                sums[1] += words[place].exposure;
                sums[2] += rates[place];
                sums[3] += rates[place] * rates[place];
            }
        }
        for (bin, [all, kept, sum, square]) in of_ring.into_iter().enumerate() {
            if kept > 0.0 {
                sums[bin] += sum * all / kept;
                squares[bin] += square * (all / kept).powi(2);
            }
        }
    }
    let width = 10.0_f64.powf(1.0 / PER_DECADE) - 1.0;
    (0..bins)
        .filter(|&bin| sums[bin] > 0.0)
        .map(|bin| {
            let low = (first + bin as i64) as f64 / PER_DECADE;
            let density = sums[bin] / (10.0_f64.powf(low) * width);
            let middle = (low + 0.5 / PER_DECADE) * LN_10;
            (middle, density.ln(), sums[bin] * sums[bin] / squares[bin])
        })
        .collect()
}

/// Where the density is highest, each bin averaged with its neighbours against noise.
/// The window of the fit is put there.
fn top(points: &[Point]) -> Option<f64> {
    let smooth = |at: usize| {
        let near = &points[at.saturating_sub(SMOOTH)..(at + SMOOTH + 1).min(points.len())];
        let weight: f64 = near.iter().map(|point| point.2).sum();
        near.iter().map(|point| point.1 * point.2).sum::<f64>() / weight
    };
    (0..points.len()).max_by(|&a, &b| smooth(a).total_cmp(&smooth(b))).map(|at| points[at].0)
}

/// Energy, GeV, at the maximum of a weighted least-squares cubic through the points near `origin`;
/// NaN if there is none among them.
fn cubic_peak(points: &[Point], origin: f64) -> f64 {
    let near: Vec<&Point> = points.iter().filter(|p| (p.0 - origin).abs() < REACH).collect();
    let (Some(first), Some(last)) = (near.first(), near.last()) else { return f64::NAN };
    if near.len() < 6 {
        return f64::NAN;
    }
    let root = |row: usize| near[row].2.sqrt();
    let matrix = DMatrix::from_fn(near.len(), 4, |row, power| {
        root(row) * (near[row].0 - origin).powi(power as i32)
    });
    let right = DVector::from_fn(near.len(), |row, _| root(row) * near[row].1);
    let Some(fit) = (matrix.transpose() * &matrix).lu().solve(&(matrix.transpose() * right)) else {
        return f64::NAN;
    };
    // Zero of slope + 2 bend u + 3 skew u^2 at which the curve bends down.
    let (slope, bend, skew) = (fit[1], fit[2], fit[3]);
    let discriminant = bend * bend - 3.0 * skew * slope;
    // The second derivative there is 2 bend + 6 skew u = -2 sqrt(discriminant): a maximum.
    let peak = origin + slope / (discriminant.sqrt() - bend);
    if (first.0..=last.0).contains(&peak) { peak.exp() } else { f64::NAN }
}
