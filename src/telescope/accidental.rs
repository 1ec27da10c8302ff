//! How often the night sky alone triggers.

use thiserror::Error;

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

/// Accidental trigger rate of one telescope from sky noise alone, Hz: [`Accidental::rate_hz`] of
/// another topology than the kind's.
pub fn topology_rate_hz(
    kind: &TelescopeKind,
    topology: Topology,
    sky_per_ns: f64,
    threshold_pe: f64,
) -> f64 {
    Accidental::with_topology(kind, topology, sky_per_ns).rate_hz(threshold_pe)
}

/// The law of one telescope's accidental triggers under one sky: made once, read at any threshold.
///
/// Groups: sliding window, groups x n R^n w^(n-1). Patch sums: patches x crossing rate of the
/// clipped sum. Both sum over groups that share pixels, so they are upper bounds, reached for rare
/// triggers; the rate can therefore exceed what a saturated trigger does.
///
/// # Source
/// Eckart & Shonka 1938, Phys. Rev. 53, 752; Rice 1945.
#[derive(Clone, Debug)]
pub struct Accidental {
    pixel: Noise,
    pattern: Pattern,
    largest_pe: f64,
}

#[derive(Clone, Debug)]
enum Pattern {
    Groups { groups: f64, pixels: usize, gate_ns: f64 },
    Patches(Vec<(f64, Noise)>),
}

/// No quiet threshold.
#[derive(Clone, Debug, Error, PartialEq)]
#[error(
    "{kind}: no pixel threshold up to {highest_pe} photoelectrons keeps accidental triggers of one \
     telescope below {most_hz} Hz (there they come at {there_hz:.3e} Hz)"
)]
pub struct QuietError {
    /// Name of the telescope kind.
    pub kind: String,
    /// Highest rate asked for, Hz.
    pub most_hz: f64,
    /// Highest threshold tried, photoelectrons.
    pub highest_pe: f64,
    /// Rate at that threshold, Hz.
    pub there_hz: f64,
}

/// Lowest and highest threshold that are tried, and the step between, photoelectrons.
pub const TRIED_PE: (f64, f64, f64) = (0.5, 1_000.0, 0.05);

impl Accidental {
    /// Of a kind with its own topology.
    pub fn of(kind: &TelescopeKind, sky_per_ns: f64) -> Self {
        Self::with_topology(kind, kind.topology, sky_per_ns)
    }

    /// Of a kind with another topology.
    pub fn with_topology(kind: &TelescopeKind, topology: Topology, sky_per_ns: f64) -> Self {
        let camera = &kind.camera;
        let groups = |groups: f64, pixels: usize| Pattern::Groups {
            groups,
            pixels,
            gate_ns: kind.coincidence_gate_ns,
        };
        let pattern = match topology {
            Topology::PatchSum(clip_pe) => Pattern::Patches(patches(kind, sky_per_ns, clip_pe)),
            Topology::Connected(n) => groups(connected_groups(camera, n), n),
            Topology::Compact(n) => groups(compact_groups(camera, n).len() as f64, n),
            Topology::Majority(n) => groups(combinations(camera.pixels.len(), n), n),
        };
        let largest_pe = topology.largest_margin_pe(camera);
        Self { pixel: Noise::of_pixel(kind, sky_per_ns), pattern, largest_pe }
    }

    /// The highest threshold that its pattern can reach, photoelectrons.
    pub fn largest_margin_pe(&self) -> f64 {
        self.largest_pe
    }

    /// Upward crossings of a threshold by one pixel, Hz.
    pub fn pixel_rate_hz(&self, threshold_pe: f64) -> f64 {
        self.pixel.crossing_rate_hz(threshold_pe)
    }

    /// Accidental triggers of one telescope, Hz.
    pub fn rate_hz(&self, threshold_pe: f64) -> f64 {
        match &self.pattern {
            Pattern::Groups { groups, pixels, gate_ns } => {
                telescope_rate_hz(*groups, *pixels, self.pixel_rate_hz(threshold_pe), *gate_ns)
            }
            Pattern::Patches(patches) => {
                let rates =
                    patches.iter().map(|(n, noise)| n * noise.crossing_rate_hz(threshold_pe));
                rates.sum()
            }
        }
    }

    /// The lowest pixel threshold, in steps of 0.05 photoelectrons from 0.5, at which one
    /// telescope's accidental rate stays below a limit.
    ///
    /// # Errors
    /// [`QuietError`] if there is none up to 1000 photoelectrons, or none that a clipped sum can
    /// reach.
    pub fn quiet_threshold_pe(&self, kind: &str, most_hz: f64) -> Result<f64, QuietError> {
        let (first, last, step) = TRIED_PE;
        let highest_pe = last.min(self.largest_pe);
        let steps = ((highest_pe - first) / step).floor().max(0.0) as usize;
        // Thresholds are multiples of the step, so that they do not depend on how they are reached.
        let tried = (0..=steps).map(|place| first + place as f64 * step);
        let mut quiet = tried.filter(|&threshold| self.rate_hz(threshold) <= most_hz);
        quiet.next().ok_or_else(|| {
            let there_hz = self.rate_hz(highest_pe);
            QuietError { kind: kind.to_owned(), most_hz, highest_pe, there_hz }
        })
    }
}

/// Number of patches of each size, and the noise of their clipped sum.
fn patches(kind: &TelescopeKind, sky_per_ns: f64, clip_pe: f64) -> Vec<(f64, Noise)> {
    let mut patches = [0_u32; 8];
    for pixel in 0..kind.camera.pixels.len() {
        patches[kind.camera.neighbours(pixel).len() + 1] += 1;
    }
    let sizes = patches.iter().enumerate().filter(|(_, count)| **count > 0);
    sizes
        .map(|(members, &count)| {
            (f64::from(count), Noise::of_patch(kind, sky_per_ns, members, clip_pe))
        })
        .collect()
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
