//! How often the night sky alone triggers.

use super::camera::Camera;
use super::kind::TelescopeKind;

/// Bins of pulse height per photoelectron in the noise distribution.
const BINS_PER_PE: usize = 40;

/// Rate at which shaped sky noise of one pixel crosses each height upwards.
///
/// The height of shot noise at a random time is a compound Poisson variable; its density f follows
/// from Panjer's recursion over a fine grid of single-pulse heights. The crossing rate is Rice's,
/// f(u) times the mean positive slope, with the slope variance of the gaussian pulse,
/// var / (2 sigma^2).
///
/// # Validity
/// Rice's formula takes slope and height as independent: exact for gaussian noise, within 30 % of a
/// brute-force simulation down to 1e-6 of the saturated rate (test
/// `verify_pixel_rate_against_brute_force`).
///
/// # Source
/// Panjer 1981, ASTIN Bull. 12, 22; Rice 1945, Bell Syst. Tech. J. 24, 46.
pub struct PixelNoise {
    density: Vec<f64>,
    mean_pe: f64,
    slope_factor: f64,
}

impl PixelNoise {
    /// The noise of one pixel of a kind at a sky photoelectron rate.
    pub fn new(kind: &TelescopeKind, sky_per_ns: f64) -> Self {
        let sigma = kind.pulse_sigma_ns();
        let reach = 3.5;
        let mean_count = sky_per_ns * 2.0 * reach * sigma;
        let rms = super::readout::noise_rms_pe(kind, sky_per_ns);
        let mean_pe = sky_per_ns * sigma * core::f64::consts::TAU.sqrt();
        let most_pe = mean_pe + 12.0 * rms + 20.0;
        let bins = (most_pe * BINS_PER_PE as f64) as usize;
        let single = single_pulse(kind.pulse_spread, reach, bins);
        // Panjer: g_0 = exp(lambda (f_0 - 1)), g_n = lambda / n sum_j j f_j g_(n-j).
        let longest = single.iter().rposition(|share| *share > 1e-14).unwrap_or(0);
        let mut density = vec![0.0; bins];
        density[0] = (mean_count * (single[0] - 1.0)).exp();
        for n in 1..bins {
            let sum: f64 =
                (1..=longest.min(n)).map(|j| j as f64 * single[j] * density[n - j]).sum();
            density[n] = mean_count / n as f64 * sum;
        }
        for value in &mut density {
            *value *= BINS_PER_PE as f64;
        }
        let slope_rms = rms / (sigma * core::f64::consts::SQRT_2);
        Self { density, mean_pe, slope_factor: slope_rms / core::f64::consts::TAU.sqrt() }
    }

    /// Upward crossings per second of a threshold above the mean baseline.
    pub fn crossing_rate_hz(&self, threshold_pe: f64) -> f64 {
        let place = (threshold_pe + self.mean_pe) * BINS_PER_PE as f64;
        if place < 0.0 {
            return 0.0;
        }
        let low = place as usize;
        let read = |index: usize| self.density.get(index).copied().unwrap_or(0.0);
        let fraction = place - low as f64;
        1e9 * self.slope_factor * (read(low) * (1.0 - fraction) + read(low + 1) * fraction)
    }
}

/// Distribution of the height that one pulse, at a uniform time within `reach` sigma, adds.
fn single_pulse(spread: f64, reach: f64, bins: usize) -> Vec<f64> {
    let mut shares = vec![0.0; bins];
    let (times, gains) = (400, 41);
    let mut total = 0.0;
    for step in 0..times {
        let shift = reach * (f64::from(step) + 0.5) / f64::from(times);
        let shape = (-0.5 * shift * shift).exp();
        for rank in 0..gains {
            let deviate = (f64::from(rank) - 20.0) * 0.2;
            let weight = (-0.5 * deviate * deviate).exp();
            let height = shape * (1.0 + spread * deviate).max(0.0) * BINS_PER_PE as f64;
            let low = height as usize;
            let fraction = height - low as f64;
            if low + 1 < bins {
                shares[low] += weight * (1.0 - fraction);
                shares[low + 1] += weight * fraction;
            }
            total += weight;
        }
    }
    shares.iter().map(|share| share / total).collect()
}

/// Number of connected groups of `size` pixels in a camera; counted exactly to size 4.
///
/// Larger groups are extrapolated by the growth from size 3 to 4, which is low by under 20 % per
/// step (hexagonal lattice animals grow by 3, 3.67, 4, 4.2 ...).
pub fn connected_groups(camera: &Camera, size: usize) -> f64 {
    let counted = size.min(4);
    let mut total = 0_u64;
    for start in 0..camera.pixels.len() as u16 {
        total += grow(camera, &mut vec![start], start, counted);
    }
    // Each group of n is found once per ordering that keeps it connected: count by sets instead.
    let exact = total as f64;
    if size <= 4 { exact } else { exact * 4.0_f64.powi(size as i32 - 4) }
}

/// Counts connected sets of `size` whose smallest pixel is `start`, each once.
fn grow(camera: &Camera, group: &mut Vec<u16>, start: u16, size: usize) -> u64 {
    fn extend(
        camera: &Camera,
        group: &mut Vec<u16>,
        frontier: &[u16],
        banned: &mut Vec<u16>,
        start: u16,
        size: usize,
    ) -> u64 {
        if group.len() == size {
            return 1;
        }
        let mut count = 0;
        let mark = banned.len();
        for (place, &next) in frontier.iter().enumerate() {
            let mut wider: Vec<u16> = frontier[place + 1..].to_vec();
            group.push(next);
            banned.push(next);
            for &neighbour in camera.neighbours(usize::from(next)) {
                let known = group.contains(&neighbour)
                    || banned.contains(&neighbour)
                    || frontier.contains(&neighbour);
                if neighbour > start && !known {
                    wider.push(neighbour);
                }
            }
            count += extend(camera, group, &wider, banned, start, size);
            group.pop();
        }
        banned.truncate(mark);
        count
    }
    let frontier: Vec<u16> =
        camera.neighbours(usize::from(start)).iter().copied().filter(|n| *n > start).collect();
    extend(camera, group, &frontier, &mut Vec::new(), start, size)
}

/// Accidental trigger rate of one telescope: groups x n R^n w^(n-1), the sliding-window formula
/// with w the time for which two pulses of the gate's width overlap.
///
/// # Source
/// Eckart & Shonka 1938, Phys. Rev. 53, 752 (n-fold accidental coincidences n R^n w^(n-1)).
pub fn telescope_rate_hz(groups: f64, pixels: usize, pixel_rate_hz: f64, window_ns: f64) -> f64 {
    let n = pixels as f64;
    let busy = pixel_rate_hz * window_ns * 1e-9;
    groups * n * pixel_rate_hz * busy.powi(pixels as i32 - 1)
}

/// Accidental rate of k of n equal telescopes within a sliding window: C(n, k) k R^k w^(k-1).
///
/// Fixed time slots instead of a sliding window give the same without the factor k.
pub fn array_rate_hz(telescope_rates_hz: &[f64], multiplicity: usize, window_ns: f64) -> f64 {
    // Elementary symmetric polynomial of the rates.
    let mut sums = vec![0.0; multiplicity + 1];
    sums[0] = 1.0;
    for rate in telescope_rates_hz {
        for k in (1..=multiplicity).rev() {
            sums[k] += sums[k - 1] * rate;
        }
    }
    multiplicity as f64 * sums[multiplicity] * (window_ns * 1e-9).powi(multiplicity as i32 - 1)
}

/// The lowest pixel threshold at which one telescope's accidental rate stays below a limit.
pub fn quiet_threshold_pe(kind: &TelescopeKind, sky_per_ns: f64, most_hz: f64) -> f64 {
    let noise = PixelNoise::new(kind, sky_per_ns);
    let groups = connected_groups(&kind.camera, kind.connected_pixels);
    let rate = |threshold: f64| {
        let pixel = noise.crossing_rate_hz(threshold);
        telescope_rate_hz(groups, kind.connected_pixels, pixel, kind.coincidence_gate_ns)
    };
    let mut threshold = 0.5;
    while rate(threshold) > most_hz && threshold < 1_000.0 {
        threshold += 0.05;
    }
    threshold
}
