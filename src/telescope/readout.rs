//! From photoelectrons to the trigger margin of one image.

use crate::numerics::Stream;

use super::kind::TelescopeKind;
use super::noise::{HeightLaw, Noise};
use super::summary::ImageSummary;
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
            let spread = kind.pulse_spread / f64::from(quantum.weight).sqrt();
            let gain = (1.0 + spread * stream.normal()).max(0.0) as f32;
            self.per_pixel[pixel].push((quantum.time_ns, quantum.weight * gain));
            sum += quantum.weight;
            time += quantum.weight * quantum.time_ns;
        }
        (sum, time)
    }

    /// Sorts the touched pixels by height, falling.
    fn ordered(&mut self) -> Vec<u16> {
        let mut order = core::mem::take(&mut self.touched);
        let height = &self.height;
        order.sort_unstable_by(|a, b| {
            height[usize::from(*b)].total_cmp(&height[usize::from(*a)]).then(a.cmp(b))
        });
        order
    }

    /// Raises pixels from the highest down and joins neighbours that peak together, until a group
    /// has enough.
    fn connected_margin(&mut self, need: usize) -> f32 {
        let order = self.ordered();
        let kind = self.kind;
        let mut margin = 0.0;
        for &pixel in &order {
            let here = usize::from(pixel);
            self.mark[here] = RAISED;
            self.parent[here] = pixel;
            self.members[here] = 1;
            let mut largest = 1;
            for &neighbour in kind.camera.neighbours(here) {
                let other = usize::from(neighbour);
                if self.mark[other] == RAISED && self.together(here, other) {
                    largest = largest.max(self.join(pixel, neighbour));
                }
            }
            if usize::from(largest) >= need {
                margin = self.height[here].max(0.0);
                break;
            }
        }
        self.touched = order;
        margin
    }

    /// The best of all compact groups whose pixels peak together.
    fn compact_margin(&self) -> f32 {
        let mut margin = 0.0_f32;
        for &pixel in &self.touched {
            for &index in &self.groups_of[usize::from(pixel)] {
                let group = &self.groups[index as usize];
                if group[0] != pixel {
                    continue; // Counted from its first pixel.
                }
                let whole = group.iter().all(|&p| self.mark[usize::from(p)] != EMPTY);
                let pairs = || group.iter().flat_map(|a| group.iter().map(move |b| (*a, *b)));
                if whole && pairs().all(|(a, b)| self.together(a.into(), b.into())) {
                    let least = group.iter().map(|&p| self.height[usize::from(p)]);
                    margin = margin.max(least.fold(f32::INFINITY, f32::min));
                }
            }
        }
        margin
    }

    /// The n-th largest of pixels that all peak within one gate, unlit pixels included.
    fn majority_margin(&mut self, need: usize, time_ns: f32, stream: &mut Stream) -> f32 {
        self.raised.clear();
        for &pixel in &self.touched {
            let pixel = usize::from(pixel);
            self.raised.push((self.height[pixel], self.peak_ns[pixel]));
        }
        // The highest of m equal laws, then the next below it: share u^(1/m), then u^(1/(m-1)) of
        // that, and so on.
        let mut others = self.kind.camera.pixels.len() - self.touched.len();
        let mut share = 1.0_f64;
        let most = 2 * need;
        for _ in 0..most.min(others) {
            share *= stream.uniform_positive().powf(1.0 / others as f64);
            let height = self.maxima.quantile(share);
            let time = self.noise_time(time_ns, stream);
            self.raised.push((height, time));
            others -= 1;
        }
        self.raised.sort_unstable_by(|a, b| b.0.total_cmp(&a.0).then(a.1.total_cmp(&b.1)));
        let gate = self.kind.coincidence_gate_ns as f32;
        for place in 0..self.raised.len() {
            let (height, last) = self.raised[place];
            let seen = &self.raised[..=place];
            // Every window that holds the new time begins at the time of one of its pixels.
            let full = seen.iter().any(|&(_, start)| {
                let inside = |time: f32| (start..=start + gate).contains(&time);
                inside(last) && seen.iter().filter(|(_, time)| inside(*time)).count() >= need
            });
            if full {
                return height.max(0.0);
            }
        }
        0.0
    }

    /// The largest sum of clipped heights over a pixel and its neighbours, at the peak time of one
    /// of its lit pixels.
    fn patch_margin(&self, clip_pe: f32, stream: &mut Stream) -> f32 {
        let kind = self.kind;
        let mut margin = 0.0_f32;
        for &centre in &self.touched {
            let near = kind.camera.neighbours(usize::from(centre));
            let all = || near.iter().copied().chain([centre]).map(usize::from);
            if all().any(|p| self.mark[p] == EMPTY) {
                continue;
            }
            let mut best = f32::NEG_INFINITY;
            for moment in all().filter(|&p| self.mark[p] == LIT).map(|p| self.peak_ns[p]) {
                let height = |p: usize| {
                    let light = self.per_pixel[p].as_slice();
                    self.noise[p] + pulse_sum(light, moment, self.sigma_ns)
                };
                best = best.max(all().map(|p| height(p).min(clip_pe)).sum());
            }
            if best > 0.0 {
                let free = all().filter(|&p| self.height[p] < clip_pe).count();
                margin = margin.max(best + self.slope_gain(best, free as f32, stream));
            }
        }
        margin
    }

    /// What a peak of `height` gains by noise that slopes under it: for a gaussian top of curvature
    /// height / sigma^2 and a noise slope of variance n rms^2 / (2 sigma^2), n rms^2 z^2 / (4 height).
    fn slope_gain(&self, height: f32, pixels: f32, stream: &mut Stream) -> f32 {
        let variance = pixels * self.noise_rms * self.noise_rms;
        if height * height <= variance {
            return 0.0;
        }
        variance * (stream.normal() as f32).powi(2) / (4.0 * height)
    }

    /// Whether two pixels peak within the gate.
    fn together(&self, a: usize, b: usize) -> bool {
        let apart = (self.peak_ns[a] - self.peak_ns[b]).abs();
        f64::from(apart) <= self.kind.coincidence_gate_ns
    }

    fn root(&mut self, mut pixel: u16) -> u16 {
        while self.parent[usize::from(pixel)] != pixel {
            let up = self.parent[usize::from(self.parent[usize::from(pixel)])];
            self.parent[usize::from(pixel)] = up;
            pixel = up;
        }
        pixel
    }

    fn join(&mut self, a: u16, b: u16) -> u16 {
        let (a, b) = (self.root(a), self.root(b));
        if a != b {
            self.parent[usize::from(b)] = a;
            self.members[usize::from(a)] += self.members[usize::from(b)];
        }
        self.members[usize::from(a)]
    }

    fn summary(&self) -> ImageSummary {
        let level = 2.0 + CLEANING_SIGMA * self.noise_rms;
        let camera = &self.kind.camera;
        ImageSummary::of(self.touched.iter().map(|&pixel| usize::from(pixel)).filter_map(|pixel| {
            let height = self.height[pixel];
            let [x, y] = camera.pixels[pixel];
            (height > level)
                .then(|| (f64::from(x), f64::from(y), f64::from(height), camera.at_edge(pixel)))
        }))
    }
}

/// RMS of the shaped sky noise, photoelectrons: Campbell's theorem, rate x integral of the pulse
/// squared x (1 + spread^2) = rate sigma sqrt(pi) (1 + spread^2).
///
/// # Source
/// Campbell 1909, Proc. Camb. Phil. Soc. 15, 117.
pub fn noise_rms_pe(kind: &TelescopeKind, sky_per_ns: f64) -> f64 {
    let square = kind.pulse_sigma_ns() * core::f64::consts::PI.sqrt();
    (sky_per_ns * square * (1.0 + kind.pulse_spread.powi(2))).sqrt()
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
