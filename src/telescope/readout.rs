//! From photoelectrons to the trigger margin of one image.

use crate::numerics::Stream;

use super::kind::TelescopeKind;
use super::summary::ImageSummary;

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
/// Sky photoelectrons that can reach a sample: pulses within this many sigma.
const NOISE_REACH_SIGMA: f64 = 3.0;
/// Mean number of pulses above which shaped noise is drawn as a gaussian.
const GAUSSIAN_PULSES: f64 = 30.0;

/// Turns photoelectrons into trigger margins; holds the working space, so that an image allocates
/// nothing.
///
/// A pixel's height is the largest over its photoelectrons' times of the sum of gaussian pulses of
/// unit mean peak, plus shaped sky noise at that time, less its mean. Noise is drawn in the pixels
/// with light and in their neighbours only: groups of pure noise elsewhere are counted by the
/// accidental rate instead. The peak search tries at most eight of a pixel's photoelectrons, which
/// loses under 2 % of the height (test `verify_pixel_height_against_waveform`).
pub struct Readout<'a> {
    kind: &'a TelescopeKind,
    sky_per_ns: f64,
    sigma_ns: f32,
    noise_rms: f32,
    per_pixel: Vec<Vec<(f32, f32)>>,
    height: Vec<f32>,
    peak_ns: Vec<f32>,
    touched: Vec<u16>,
    mark: Vec<u8>,
    parent: Vec<u16>,
    members: Vec<u16>,
}

const EMPTY: u8 = 0;
const NOISY: u8 = 1;
const LIT: u8 = 2;
const RAISED: u8 = 3;

impl<'a> Readout<'a> {
    /// A readout for one kind under a sky of a given photoelectron rate per pixel.
    pub fn new(kind: &'a TelescopeKind, sky_per_ns: f64) -> Self {
        let pixels = kind.camera.pixels.len();
        Self {
            kind,
            sky_per_ns,
            sigma_ns: kind.pulse_sigma_ns() as f32,
            noise_rms: noise_rms_pe(kind, sky_per_ns) as f32,
            per_pixel: vec![Vec::new(); pixels],
            height: vec![0.0; pixels],
            peak_ns: vec![0.0; pixels],
            touched: Vec::new(),
            mark: vec![EMPTY; pixels],
            parent: vec![0; pixels],
            members: vec![0; pixels],
        }
    }

    /// The image of some photoelectrons; `None` if none falls into the camera.
    pub fn image(&mut self, quanta: &[Quantum], stream: &mut Stream) -> Option<ImageRecord> {
        self.clear();
        let (sum, time) = self.collect(quanta, stream);
        if sum <= 0.0 {
            return None;
        }
        let mean_time = time / sum;
        let lit = self.touched.len();
        for place in 0..lit {
            let pixel = usize::from(self.touched[place]);
            let (height, peak) = pulse_peak(&self.per_pixel[pixel], self.sigma_ns);
            self.height[pixel] = height + self.noise(stream);
            self.peak_ns[pixel] = peak;
        }
        for place in 0..lit {
            let kind = self.kind;
            for &neighbour in kind.camera.neighbours(usize::from(self.touched[place])) {
                let pixel = usize::from(neighbour);
                if self.mark[pixel] == EMPTY {
                    self.mark[pixel] = NOISY;
                    self.height[pixel] = self.noise(stream);
                    self.peak_ns[pixel] = f32::NAN;
                    self.touched.push(neighbour);
                }
            }
        }
        let summary = self.summary();
        let margin_pe = self.margin();
        Some(ImageRecord { margin_pe, photoelectrons: sum, time_ns: mean_time, summary })
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
            let off_axis = f64::from(quantum.x_deg.hypot(quantum.y_deg));
            let spread = kind.point_spread_deg.hypot(kind.point_spread_growth * off_axis) as f32;
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

    /// Shaped sky noise at one moment, mean removed.
    fn noise(&self, stream: &mut Stream) -> f32 {
        let sigma = f64::from(self.sigma_ns);
        let window = 2.0 * NOISE_REACH_SIGMA * sigma;
        let mean = self.sky_per_ns * window;
        if mean > GAUSSIAN_PULSES {
            return self.noise_rms * stream.normal() as f32;
        }
        let mut height = -self.sky_per_ns * sigma * core::f64::consts::TAU.sqrt();
        for _ in 0..stream.poisson(mean) {
            let shift = NOISE_REACH_SIGMA * (2.0 * stream.uniform() - 1.0);
            let gain = (1.0 + self.kind.pulse_spread * stream.normal()).max(0.0);
            height += gain * (-0.5 * shift * shift).exp();
        }
        height as f32
    }

    /// The margin: raise pixels from the highest down and join neighbours that peak together, until
    /// a group has enough.
    fn margin(&mut self) -> f32 {
        let mut order = core::mem::take(&mut self.touched);
        order.sort_unstable_by(|a, b| {
            let (a, b) = (usize::from(*a), usize::from(*b));
            self.height[b].total_cmp(&self.height[a]).then(a.cmp(&b))
        });
        let need = self.kind.connected_pixels as u16;
        let mut margin = 0.0;
        for &pixel in &order {
            let pixel_index = usize::from(pixel);
            self.mark[pixel_index] = RAISED;
            self.parent[pixel_index] = pixel;
            self.members[pixel_index] = 1;
            let mut largest = 1;
            let kind = self.kind;
            for &neighbour in kind.camera.neighbours(pixel_index) {
                let other = usize::from(neighbour);
                if self.mark[other] == RAISED && self.together(pixel_index, other) {
                    largest = largest.max(self.join(pixel, neighbour));
                }
            }
            if largest >= need {
                margin = self.height[pixel_index].max(0.0);
                break;
            }
        }
        self.touched = order;
        margin
    }

    /// Whether two pixels peak within the gate; pure noise may peak at any time.
    fn together(&self, a: usize, b: usize) -> bool {
        let apart = (self.peak_ns[a] - self.peak_ns[b]).abs();
        apart.is_nan() || f64::from(apart) <= self.kind.coincidence_gate_ns
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
    let scale = -0.5 / (sigma_ns * sigma_ns);
    let mut best = (0.0, pulses.first().map_or(0.0, |pulse| pulse.0));
    for candidate in pulses.iter().step_by(stride) {
        let height: f32 = pulses
            .iter()
            .map(|(time, weight)| weight * (scale * (time - candidate.0).powi(2)).exp())
            .sum();
        if height > best.0 {
            best = (height, candidate.0);
        }
    }
    best
}
