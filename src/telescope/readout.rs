//! From photoelectrons to the trigger margin of one image.

mod margins;

use crate::numerics::Stream;

use super::kind::TelescopeKind;
use super::noise::{HeightLaw, Noise, discharges, noise_rms_pe};
use super::summary::{ImagePoint, ImageSummary};
use super::trigger::{Topology, compact_groups};

/// One detected photoelectron, as the direction it came from relative to the pointing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Quantum {
    /// Offset along x, deg.
    pub x_deg: f32,
    /// Offset along y, deg.
    pub y_deg: f32,
    /// Arrival time, ns.
    pub time_ns: f32,
    /// Photoelectrons it stands for.
    pub weight: f32,
}

/// What one telescope saw of one event.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ImageRecord {
    /// Highest pixel threshold at which the topology still fires, noise included.
    pub margin_pe: f32,
    /// Photoelectrons inside the camera.
    pub photoelectrons: f32,
    /// Mean arrival time, ns.
    pub time_ns: f32,
    /// Moments of the cleaned image.
    pub summary: ImageSummary,
}

/// Pixels below this height take no part in the moments, in units of the noise RMS added to 2 pe.
const CLEANING_SIGMA: f32 = 3.0;

/// Turns photoelectrons into trigger margins; holds the working space, so that an image allocates
/// nothing once the space has grown to the largest image.
///
/// A pixel's height is the largest over its photoelectrons' times of the sum of gaussian pulses of
/// unit mean peak, plus shaped sky noise at that time, less its mean; or the largest peak of the
/// noise alone within one gate of the image's mean time, if that is higher. Pixels join if they peak
/// within a gate of each other. Connected and compact patterns draw noise in the pixels with light
/// and their neighbours only: groups of pure noise further off are the accidental rate's. Majority
/// draws the highest of the other pixels by order statistics, so it leaves nothing out. Patch sums
/// take the best of the peak times of the patch's pixels. At most eight of a pixel's photoelectrons
/// are tried as its peak. Peaks gain by the slope of the noise under them to second order.
///
/// # Validity
/// Against waveforms of every pixel with discriminators, 12 to 60 photoelectrons, 0.16 sky
/// photoelectrons per ns: the threshold of equal trigger probability is lower here by 0.2 to 2.4 %,
/// for all topologies (`verify_trigger_probability_against_waveforms`, which allows 3 %). Light
/// spread over many pulse widths in one pixel is not measured.
pub struct Readout<'a> {
    kind: &'a TelescopeKind,
    topology: Topology,
    sigma_ns: f32,
    noise_rms: f32,
    /// Mean number of further discharges that one sets off directly.
    discharges: f64,
    moment: HeightLaw,
    peaks: HeightLaw,
    maxima: HeightLaw,
    per_pixel: Vec<Vec<(f32, f32)>>,
    height: Vec<f32>,
    noise: Vec<f32>,
    peak_ns: Vec<f32>,
    touched: Vec<u16>,
    mark: Vec<u8>,
    parent: Vec<u16>,
    members: Vec<u16>,
    groups: Vec<Vec<u16>>,
    groups_of: Vec<Vec<u32>>,
    /// Heights and times raised so far (majority).
    raised: Vec<(f32, f32)>,
}

const EMPTY: u8 = 0;
const NOISY: u8 = 1;
const LIT: u8 = 2;
const RAISED: u8 = 3;

impl<'a> Readout<'a> {
    /// A readout for one kind under a sky of a given photoelectron rate per pixel, with the kind's
    /// own trigger pattern.
    pub fn new(kind: &'a TelescopeKind, sky_per_ns: f64) -> Self {
        Self::with_topology(kind, sky_per_ns, kind.topology)
    }

    /// A readout with another trigger pattern.
    pub fn with_topology(kind: &'a TelescopeKind, sky_per_ns: f64, topology: Topology) -> Self {
        let pixels = kind.camera.pixels.len();
        let noise = Noise::of_pixel(kind, sky_per_ns);
        let groups = match topology {
            Topology::Compact(size) => compact_groups(&kind.camera, size),
            _ => Vec::new(),
        };
        let mut groups_of = vec![Vec::new(); pixels];
        for (index, group) in groups.iter().enumerate() {
            for &pixel in group {
                groups_of[usize::from(pixel)].push(index as u32);
            }
        }
        Self {
            kind,
            topology,
            sigma_ns: kind.pulse_sigma_ns() as f32,
            noise_rms: noise_rms_pe(kind, sky_per_ns) as f32,
            discharges: kind.further_discharges(),
            moment: noise.moment(),
            peaks: noise.peaks(2.0 * kind.coincidence_gate_ns),
            maxima: noise.maxima(2.0 * kind.coincidence_gate_ns),
            per_pixel: vec![Vec::new(); pixels],
            height: vec![0.0; pixels],
            noise: vec![0.0; pixels],
            peak_ns: vec![0.0; pixels],
            touched: Vec::with_capacity(pixels),
            mark: vec![EMPTY; pixels],
            parent: vec![0; pixels],
            members: vec![0; pixels],
            groups,
            groups_of,
            raised: Vec::with_capacity(pixels + 64),
        }
    }

    /// The image of some photoelectrons; `None` if none falls into the camera.
    pub fn image(&mut self, quanta: &[Quantum], stream: &mut Stream) -> Option<ImageRecord> {
        self.clear();
        let (sum, time) = self.collect(quanta, stream);
        if sum <= 0.0 {
            return None;
        }
        let time_ns = time / sum;
        let lit = self.touched.len();
        for place in 0..lit {
            let pixel = usize::from(self.touched[place]);
            let (height, peak) = pulse_peak(&self.per_pixel[pixel], self.sigma_ns);
            (self.height[pixel], self.peak_ns[pixel]) =
                self.with_noise(Some((height, peak)), time_ns, stream);
            self.noise[pixel] = self.height[pixel] - height;
        }
        let rings = match self.topology {
            Topology::Connected(1) | Topology::Compact(1) | Topology::Majority(_) => 0,
            Topology::Connected(_) | Topology::Compact(_) => 1,
            Topology::PatchSum(_) => 2,
        };
        let mut from = 0;
        for _ in 0..rings {
            let to = self.touched.len();
            self.surround(from, to, time_ns, stream);
            from = to;
        }
        let summary = self.summary();
        let margin_pe = match self.topology {
            Topology::Connected(need) => self.connected_margin(need),
            Topology::Compact(_) => self.compact_margin(),
            Topology::Majority(need) => self.majority_margin(need, time_ns, stream),
            Topology::PatchSum(clip_pe) => self.patch_margin(clip_pe as f32, stream),
        };
        Some(ImageRecord { margin_pe, photoelectrons: sum, time_ns, summary })
    }

    /// Draws noise in the neighbours of some touched pixels.
    fn surround(&mut self, from: usize, to: usize, time_ns: f32, stream: &mut Stream) {
        let kind = self.kind;
        for place in from..to {
            for &neighbour in kind.camera.neighbours(usize::from(self.touched[place])) {
                let pixel = usize::from(neighbour);
                if self.mark[pixel] == EMPTY {
                    self.mark[pixel] = NOISY;
                    (self.height[pixel], self.peak_ns[pixel]) =
                        self.with_noise(None, time_ns, stream);
                    self.noise[pixel] = self.height[pixel];
                    self.touched.push(neighbour);
                }
            }
        }
    }

    /// Height and time of the peak of a pixel with light (its own peak and time) or without.
    fn with_noise(
        &self,
        light: Option<(f32, f32)>,
        time_ns: f32,
        stream: &mut Stream,
    ) -> (f32, f32) {
        let patch = matches!(self.topology, Topology::PatchSum(_));
        let Some((signal, at)) = light else {
            let law = if patch { &self.moment } else { &self.maxima };
            return (law.draw(stream), self.noise_time(time_ns, stream));
        };
        let here = signal + self.moment.draw(stream);
        if patch {
            return (here, at);
        }
        let elsewhere = self.peaks.draw(stream);
        if elsewhere > here {
            return (elsewhere, self.noise_time(time_ns, stream));
        }
        (here + self.slope_gain(here, 1.0, stream), at)
    }

    /// A time within a gate of the image.
    fn noise_time(&self, time_ns: f32, stream: &mut Stream) -> f32 {
        time_ns + self.kind.coincidence_gate_ns as f32 * (2.0 * stream.uniform() - 1.0) as f32
    }

    fn clear(&mut self) {
        for &pixel in &self.touched {
            self.mark[usize::from(pixel)] = EMPTY;
            self.per_pixel[usize::from(pixel)].clear();
        }
        self.touched.clear();
    }

    /// Pulse height of a quantum over its weight: spread of one pulse and crosstalk. A quantum of one
    /// photoelectron runs through its discharges; a heavier one has their mean and variance.
    fn gain(&self, weight: f32, stream: &mut Stream) -> f32 {
        let spread = self.kind.pulse_spread;
        if self.discharges == 0.0 {
            let spread = spread / f64::from(weight).sqrt();
            return (1.0 + spread * stream.normal()).max(0.0) as f32;
        }
        if weight == 1.0 {
            let count = discharges(self.discharges, stream);
            return (count + spread * count.sqrt() * stream.normal()).max(0.0) as f32;
        }
        let mean = 1.0 / (1.0 - self.discharges);
        let variance = spread.powi(2) * mean + self.discharges * mean.powi(3);
        (mean + (variance / f64::from(weight)).sqrt() * stream.normal()).max(0.0) as f32
    }

    /// Sorts the photoelectrons into pixels; returns their number and summed time.
    fn collect(&mut self, quanta: &[Quantum], stream: &mut Stream) -> (f32, f32) {
        let (mut sum, mut time) = (0.0, 0.0);
        let kind = self.kind;
        for quantum in quanta {
            let off_axis2 = f64::from(quantum.x_deg).powi(2) + f64::from(quantum.y_deg).powi(2);
            let spread =
                kind.point_spread_deg.powi(2) + kind.point_spread_growth.powi(2) * off_axis2;
            let spread = spread.sqrt() as f32;
            let x = quantum.x_deg + spread * stream.normal() as f32;
            let y = quantum.y_deg + spread * stream.normal() as f32;
            let Some(pixel) = kind.camera.pixel(x, y) else { continue };
            if self.mark[pixel] == EMPTY {
                self.mark[pixel] = LIT;
                self.touched.push(pixel as u16);
            }
            let gain = self.gain(quantum.weight, stream);
            let delay = kind.mirror_delay_ns;
            let delay = if delay > 0.0 { delay * (stream.uniform() - 0.5) } else { 0.0 };
            let time_ns = quantum.time_ns + delay as f32;
            self.per_pixel[pixel].push((time_ns, quantum.weight * gain));
            sum += quantum.weight;
            time += quantum.weight * time_ns;
        }
        (sum, time)
    }

    fn summary(&self) -> ImageSummary {
        let level = 2.0 + CLEANING_SIGMA * self.noise_rms;
        let camera = &self.kind.camera;
        ImageSummary::of(self.touched.iter().map(|&pixel| usize::from(pixel)).filter_map(|pixel| {
            let height = self.height[pixel];
            let [x, y] = camera.pixels[pixel];
            let time_ns = f64::from(self.peak_ns[pixel]);
            (height > level).then(|| ImagePoint {
                x_deg: x.into(),
                y_deg: y.into(),
                weight: height.into(),
                time_ns,
                at_edge: camera.at_edge(pixel),
            })
        }))
    }
}

/// The highest sum of pulses at one of (at most eight of) their own times, and that time.
fn pulse_peak(pulses: &[(f32, f32)], sigma_ns: f32) -> (f32, f32) {
    let stride = pulses.len().div_ceil(8).max(1);
    let mut best = (0.0, pulses.first().map_or(0.0, |pulse| pulse.0));
    for candidate in pulses.iter().step_by(stride) {
        let height = pulse_sum(pulses, candidate.0, sigma_ns);
        if height > best.0 {
            best = (height, candidate.0);
        }
    }
    best
}

/// Sum of pulses (time, peak) at a moment.
#[inline]
fn pulse_sum(pulses: &[(f32, f32)], moment_ns: f32, sigma_ns: f32) -> f32 {
    let scale = -0.5 / (sigma_ns * sigma_ns);
    pulses.iter().map(|(time, peak)| peak * (scale * (time - moment_ns).powi(2)).exp()).sum()
}
