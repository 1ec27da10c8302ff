//! How often the night sky alone triggers.

use super::camera::Camera;
use super::kind::TelescopeKind;
use super::noise::Noise;
use super::trigger::{Topology, compact_groups};

/// Shaped sky noise of one pixel.
pub type PixelNoise = Noise;

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

/// Accidental trigger rate of one telescope from sky noise alone, Hz.
///
/// Groups: sliding window, groups x n R^n w^(n-1). Patch sums: patches x crossing rate of the
/// clipped sum. Both sum over groups that share pixels, so they are upper bounds, reached for rare
/// triggers.
///
/// # Source
/// Eckart & Shonka 1938, Phys. Rev. 53, 752; Rice 1945.
pub fn topology_rate_hz(
    kind: &TelescopeKind,
    topology: Topology,
    sky_per_ns: f64,
    threshold_pe: f64,
) -> f64 {
    let camera = &kind.camera;
    let (groups, pixels) = match topology {
        Topology::PatchSum(clip_pe) => {
            return patch_rate_hz(kind, sky_per_ns, clip_pe, threshold_pe);
        }
        Topology::Connected(n) => (connected_groups(camera, n), n),
        Topology::Compact(n) => (compact_groups(camera, n).len() as f64, n),
        Topology::Majority(n) => (combinations(camera.pixels.len(), n), n),
    };
    let pixel = Noise::of_pixel(kind, sky_per_ns).crossing_rate_hz(threshold_pe);
    telescope_rate_hz(groups, pixels, pixel, kind.coincidence_gate_ns)
}

fn patch_rate_hz(kind: &TelescopeKind, sky_per_ns: f64, clip_pe: f64, threshold_pe: f64) -> f64 {
    let mut patches = [0_u32; 8];
    for pixel in 0..kind.camera.pixels.len() {
        patches[kind.camera.neighbours(pixel).len() + 1] += 1;
    }
    let sizes = patches.iter().enumerate().filter(|(_, count)| **count > 0);
    sizes
        .map(|(members, &count)| {
            let noise = Noise::of_patch(kind, sky_per_ns, members, clip_pe);
            f64::from(count) * noise.crossing_rate_hz(threshold_pe)
        })
        .sum()
}

/// Binomial coefficient.
fn combinations(of: usize, choose: usize) -> f64 {
    (0..choose).map(|i| (of as f64 - i as f64) / (i + 1) as f64).product()
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

/// The same in fixed time slots as long as the window: C(n, k) R^k w^(k-1), a factor of the
/// multiplicity below [`array_rate_hz`].
pub fn array_slot_rate_hz(telescope_rates_hz: &[f64], multiplicity: usize, window_ns: f64) -> f64 {
    array_rate_hz(telescope_rates_hz, multiplicity, window_ns) / multiplicity as f64
}

/// The lowest pixel threshold at which one telescope's accidental rate stays below a limit.
pub fn quiet_threshold_pe(kind: &TelescopeKind, sky_per_ns: f64, most_hz: f64) -> f64 {
    let noise = PixelNoise::of_pixel(kind, sky_per_ns);
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
