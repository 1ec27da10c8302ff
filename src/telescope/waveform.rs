//! The slow reference: full waveforms of every pixel, discriminators and their overlaps.
//!
//! It shares the camera and the pulse shape with the fast readout and nothing else, and exists to
//! measure that one's bias.

use crate::numerics::Stream;

use super::camera::Camera;
use super::kind::TelescopeKind;
use super::trigger::{Topology, compact_groups};

/// Time between samples, ns.
pub const SAMPLE_NS: f32 = 0.25;

/// Sampled waveforms of all pixels of a camera, AC-coupled.
#[derive(Clone, Debug)]
pub struct Waveforms<'a> {
    kind: &'a TelescopeKind,
    samples: usize,
    heights: Vec<f32>,
    last_on: Vec<f32>,
    compact: Vec<Vec<u16>>,
}

impl<'a> Waveforms<'a> {
    /// Empty waveforms of a duration.
    pub fn new(kind: &'a TelescopeKind, duration_ns: f32) -> Self {
        let samples = (duration_ns / SAMPLE_NS) as usize;
        let pixels = kind.camera.pixels.len();
        let (heights, last_on) = (vec![0.0; samples * pixels], vec![f32::NEG_INFINITY; pixels]);
        Self { kind, samples, heights, last_on, compact: Vec::new() }
    }

    /// Fills every pixel with sky noise of a rate and removes its mean.
    pub fn fill_with_noise(&mut self, sky_per_ns: f64, stream: &mut Stream) {
        let sigma = self.kind.pulse_sigma_ns();
        let mean = sky_per_ns * sigma * core::f64::consts::TAU.sqrt();
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
                let gain = (1.0 + self.kind.pulse_spread * stream.normal()).max(0.0);
                self.add_pulse(pixel, time as f32, gain as f32);
            }
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
    pub fn triggers(&mut self, topology: Topology, threshold_pe: f32) -> usize {
        if let Topology::PatchSum(clip_pe) = topology {
            return self.patch_triggers(clip_pe as f32, threshold_pe);
        }
        if let (Topology::Compact(size), true) = (topology, self.compact.is_empty()) {
            self.compact = compact_groups(&self.kind.camera, size);
        }
        let gate = self.kind.coincidence_gate_ns as f32;
        let mut rises: Vec<(usize, usize)> = Vec::new();
        for pixel in 0..self.kind.camera.pixels.len() {
            let wave = self.pixel(pixel);
            for sample in 1..wave.len() {
                if wave[sample] > threshold_pe && wave[sample - 1] <= threshold_pe {
                    rises.push((sample, pixel));
                }
            }
        }
        rises.sort_unstable();
        self.last_on.fill(f32::NEG_INFINITY);
        let (mut count, mut fired_until) = (0, f32::NEG_INFINITY);
        for (sample, pixel) in rises {
            let now = sample as f32 * SAMPLE_NS;
            self.last_on[pixel] = now;
            let on = |other: usize| now - self.last_on[other] < gate;
            if now >= fired_until && fires(&self.kind.camera, topology, &self.compact, pixel, on) {
                count += 1;
                fired_until = now + gate;
            }
        }
        count
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
