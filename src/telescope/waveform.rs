//! The slow reference: full waveforms of every pixel, discriminators and their overlaps.
//!
//! It shares the camera, the pulse shape and the law of discharges with the fast readout and nothing else, and exists to
//! measure that one's bias.

use crate::numerics::Stream;

use super::camera::Camera;
use super::kind::TelescopeKind;
use super::noise::discharges;
use super::trigger::{Topology, compact_groups};

/// Time between samples, ns.
pub const SAMPLE_NS: f32 = 0.25;

/// Sampled waveforms of all pixels of a camera, AC-coupled.
#[derive(Clone, Debug)]
pub struct Waveforms<'a> {
    kind: &'a TelescopeKind,
    samples: usize,
    heights: Vec<f32>,
}

impl<'a> Waveforms<'a> {
    /// Empty waveforms of a duration.
    pub fn new(kind: &'a TelescopeKind, duration_ns: f32) -> Self {
        let samples = (duration_ns / SAMPLE_NS) as usize;
        let pixels = kind.camera.pixels.len();
        Self { kind, samples, heights: vec![0.0; samples * pixels] }
    }

    /// Fills every pixel with sky noise of a rate and removes its mean.
    pub fn fill_with_noise(&mut self, sky_per_ns: f64, stream: &mut Stream) {
        let sigma = self.kind.pulse_sigma_ns();
        let (spread, further) = (self.kind.pulse_spread, self.kind.further_discharges());
        let (after, after_pe) = (self.kind.afterpulsing, self.kind.afterpulse_pe);
        let pulse = 1.0 / (1.0 - further) + after * after_pe;
        let mean = sky_per_ns * sigma * core::f64::consts::TAU.sqrt() * pulse;
        self.heights.fill(-mean as f32);
        let margin = 6.0 * sigma;
        let end = self.samples as f64 * f64::from(SAMPLE_NS) + margin;
        for pixel in 0..self.kind.camera.pixels.len() {
            let mut time = -margin;
            loop {
                time += stream.exponential() / sky_per_ns;
                if time > end {
                    break;
                }
                let count = if further > 0.0 { discharges(further, stream) } else { 1.0 };
                let gain = (count + spread * count.sqrt() * stream.normal()).max(0.0);
                self.add_pulse(pixel, time as f32, gain as f32);
                if after > 0.0 && stream.uniform() < after {
                    // Long after its photoelectron: anywhere.
                    let later = -margin + (end + margin) * stream.uniform();
                    self.add_pulse(pixel, later as f32, (after_pe * stream.exponential()) as f32);
                }
            }
            if self.kind.electronic_noise_pe > 0.0 {
                self.add_electronics(pixel, end, margin, stream);
            }
        }
    }

    /// White noise through the pulse's shape: gaussian charges every ns, denser than the pulse is
    /// long.
    fn add_electronics(&mut self, pixel: usize, end: f64, margin: f64, stream: &mut Stream) {
        let square = self.kind.pulse_sigma_ns() * core::f64::consts::PI.sqrt();
        let charge = self.kind.electronic_noise_pe / square.sqrt();
        let mut time = -margin;
        while time < end {
            self.add_pulse(pixel, time as f32, (charge * stream.normal()) as f32);
            time += 1.0;
        }
    }

    /// Adds one pulse of a peak height and time.
    pub fn add_pulse(&mut self, pixel: usize, time_ns: f32, peak_pe: f32) {
        let sigma = self.kind.pulse_sigma_ns() as f32;
        let first = ((time_ns - 5.0 * sigma) / SAMPLE_NS).ceil().max(0.0) as usize;
        let last = ((time_ns + 5.0 * sigma) / SAMPLE_NS).max(0.0) as usize;
        // A gaussian on a grid by its own recurrence: two products a sample.
        let scale = -0.5 / (sigma * sigma);
        let start = first as f32 * SAMPLE_NS - time_ns;
        let mut value = peak_pe * (scale * start * start).exp();
        let mut ratio = (scale * SAMPLE_NS * (2.0 * start + SAMPLE_NS)).exp();
        let bend = (2.0 * scale * SAMPLE_NS * SAMPLE_NS).exp();
        let row = pixel * self.samples;
        let last = (last + 1).min(self.samples);
        for sample in first.min(last)..last {
            self.heights[row + sample] += value;
            value *= ratio;
            ratio *= bend;
        }
    }

    /// The waveform of one pixel.
    pub fn pixel(&self, pixel: usize) -> &[f32] {
        &self.heights[pixel * self.samples..(pixel + 1) * self.samples]
    }

    /// Upward crossings of a threshold by one pixel.
    pub fn crossings(&self, pixel: usize, threshold_pe: f32) -> usize {
        rises(self.pixel(pixel), threshold_pe)
    }

    /// How often the topology begins to fire.
    ///
    /// Every upward crossing starts a logic pulse as long as the gate; the pattern fires while the
    /// logic pulses of its pixels overlap. A patch sum crosses the threshold itself.
    pub fn triggers(&self, topology: Topology, threshold_pe: f32) -> usize {
        if let Topology::PatchSum(clip_pe) = topology {
            return self.patch_triggers(clip_pe as f32, threshold_pe);
        }
        let mut rises: Vec<(f64, usize)> = Vec::new();
        for pixel in 0..self.kind.camera.pixels.len() {
            let wave = self.pixel(pixel);
            for sample in 1..wave.len() {
                if wave[sample] > threshold_pe && wave[sample - 1] <= threshold_pe {
                    rises.push((sample as f64 * f64::from(SAMPLE_NS), pixel));
                }
            }
        }
        rises.sort_unstable_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
        coincidences(self.kind, topology, &rises)
    }

    fn patch_triggers(&self, clip_pe: f32, threshold_pe: f32) -> usize {
        let camera = &self.kind.camera;
        let mut sum = vec![0.0; self.samples];
        let patches = (0..camera.pixels.len()).map(|centre| {
            for (total, height) in sum.iter_mut().zip(self.pixel(centre)) {
                *total = height.min(clip_pe);
            }
            for &other in camera.neighbours(centre) {
                for (total, height) in sum.iter_mut().zip(self.pixel(usize::from(other))) {
                    *total += height.min(clip_pe);
                }
            }
            rises(&sum, threshold_pe)
        });
        patches.sum()
    }
}

/// How often logic pulses that start at (time in ns, pixel), sorted by time, make the pattern.
///
/// After a trigger the pattern rests for one gate.
pub fn coincidences(kind: &TelescopeKind, topology: Topology, rises: &[(f64, usize)]) -> usize {
    let compact = match topology {
        Topology::Compact(size) => compact_groups(&kind.camera, size),
        _ => Vec::new(),
    };
    let gate = kind.coincidence_gate_ns;
    let mut last_on = vec![f64::NEG_INFINITY; kind.camera.pixels.len()];
    let (mut count, mut fired_until) = (0, f64::NEG_INFINITY);
    for &(now, pixel) in rises {
        last_on[pixel] = now;
        let on = |other: usize| now - last_on[other] < gate;
        if now >= fired_until && fires(&kind.camera, topology, &compact, pixel, on) {
            count += 1;
            fired_until = now + gate;
        }
    }
    count
}

fn rises(wave: &[f32], threshold: f32) -> usize {
    wave.windows(2).filter(|pair| pair[0] <= threshold && pair[1] > threshold).count()
}

/// Whether the pixels that are on hold the pattern, with `pixel` in it.
fn fires(
    camera: &Camera,
    topology: Topology,
    compact: &[Vec<u16>],
    pixel: usize,
    on: impl Fn(usize) -> bool,
) -> bool {
    match topology {
        Topology::Majority(need) => (0..camera.pixels.len()).filter(|&p| on(p)).count() >= need,
        Topology::Compact(_) => compact.iter().any(|group| {
            group.contains(&(pixel as u16)) && group.iter().all(|&p| on(usize::from(p)))
        }),
        Topology::Connected(need) => {
            let mut group = vec![pixel];
            let mut place = 0;
            while place < group.len() && group.len() < need {
                for &next in camera.neighbours(group[place]) {
                    let next = usize::from(next);
                    if on(next) && !group.contains(&next) {
                        group.push(next);
                    }
                }
                place += 1;
            }
            group.len() >= need
        }
        Topology::PatchSum(_) => false,
    }
}
