//! What lies beyond the thrown area and the thrown cone.

use core::f64::consts::{PI, TAU};

use crate::response::{CORES_PER_SHOWER, Sample, Word};

/// Fraction of a rate that comes from the outermost ring of impact distance.
pub fn edge_fraction(words: &[Word], rates: &[f64]) -> f64 {
    let outermost = words.iter().map(|word| word.ring).max().unwrap_or(0);
    let edge: f64 =
        words.iter().zip(rates).filter(|(word, _)| word.ring == outermost).map(|(_, r)| r).sum();
    let total: f64 = rates.iter().sum();
    if total > 0.0 { edge / total } else { 0.0 }
}

/// Rate in each ring of impact distance.
pub fn ring_rates_hz(words: &[Word], rates: &[f64], rings: usize) -> Vec<f64> {
    let mut sums = vec![0.0; rings];
    for (word, rate) in words.iter().zip(rates) {
        sums[word.ring] += rate;
    }
    sums
}

/// Rate by the angle between shower and pointing, in rings of equal width up to the edge of the
/// cone. `event_rates` is the rate of one triggered event of each word.
pub fn angle_rates_hz(
    sample: &Sample,
    plane: &[u64],
    event_rates: &[f64],
    rings: usize,
) -> Vec<f64> {
    let mut sums = vec![0.0; rings];
    let towards = sample.throw.pointing.to_source();
    let step = sample.throw.cone_rad / rings as f64;
    for (word, (&bits, rate)) in plane.iter().zip(event_rates).enumerate() {
        if bits == 0 || step <= 0.0 {
            continue;
        }
        for (place, (primary, _)) in sample.thrown(word).showers.iter().enumerate() {
            let lanes = bits >> (place * CORES_PER_SHOWER) & ((1 << CORES_PER_SHOWER) - 1);
            let cosine = primary.direction.to_source().dot(&towards);
            let angle = cosine.clamp(-1.0, 1.0).acos();
            let ring = ((angle / step) as usize).min(rings - 1);
            sums[ring] += f64::from(lanes.count_ones()) * rate;
        }
    }
    sums
}

/// Rate lost beyond the outermost ring, as a fraction of the rate inside.
///
/// The density (rate by area, or by solid angle) in the last two rings, taken at the radius that
/// halves each ring's area, is continued as an exponential, d(r) = d2 exp(-(r - r2) / l), and
/// integrated from the edge R outward: 2 pi d(R) l (R + l). With radii in radians the small-angle
/// area is meant. Infinite if the density does not fall, zero if the last ring is empty.
///
/// # Validity
/// A rule to warn by, not a correction: exact for an exponential in thin rings.
///
/// # Shape
/// `outer_radii` rising, one for each entry of `rates`; NaN for fewer than two rings.
pub fn beyond_fraction(outer_radii: &[f64], rates: &[f64]) -> f64 {
    let count = outer_radii.len();
    if count < 2 || rates.len() != count {
        return f64::NAN;
    }
    let inner = |ring: usize| if ring == 0 { 0.0 } else { outer_radii[ring - 1] };
    let squares = |ring: usize| (inner(ring).powi(2), outer_radii[ring].powi(2));
    let density = |ring: usize| {
        let (low, high) = squares(ring);
        rates[ring] / (PI * (high - low))
    };
    let middle = |ring: usize| {
        let (low, high) = squares(ring);
        (0.5 * (low + high)).sqrt()
    };
    let (last, before) = (count - 1, count - 2);
    let (d1, d2) = (density(before), density(last));
    if d2 <= 0.0 {
        return 0.0;
    }
    if d2 >= d1 {
        return f64::INFINITY;
    }
    let length = (middle(last) - middle(before)) / (d1 / d2).ln();
    let radius = outer_radii[last];
    let at_edge = d2 * (-(radius - middle(last)) / length).exp();
    let beyond = TAU * at_edge * length * (radius + length);
    beyond / rates.iter().sum::<f64>()
}
