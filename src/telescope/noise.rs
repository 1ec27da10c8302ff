//! Shaped night-sky noise of one pixel or of a patch: its heights, crossings and maxima.

use crate::numerics::Stream;

use super::kind::TelescopeKind;

/// Bins of pulse height per photoelectron.
const BINS_PER_PE: usize = 40;
/// Pulses further than this many sigma from a moment add nothing to it (below 0.3 % of a peak).
const REACH_SIGMA: f64 = 3.5;
/// Mean number of overlapping pulses above which the height is taken as gaussian; the skewness
/// is then below 0.06.
const GAUSSIAN_COUNT: f64 = 500.0;

/// The stationary law of shaped sky noise: density of the height at a random time and rate of
/// upward crossings of each height.
///
/// The height X is a compound Poisson variable; its density f follows from Panjer's recursion over a
/// fine grid. The mean squared slope at a height is that of the one pulse that carries it (Mecke's
/// equation; cross terms vanish because the pulse is even):
/// `E[X'^2 | X=u] f(u) = rate E_g int g^2 h'(s)^2 f(u - g h(s)) ds = q(u)`, and the crossing rate is
/// `f(u) E[X'+ | u] = sqrt(f(u) q(u) / (2 pi))`, with the slope at a given height taken as gaussian.
///
/// # Units
/// Photoelectrons above the mean baseline; Hz.
///
/// # Validity
/// Pixel rates at 0.16 photoelectrons per ns, 4 ns pulses: within 2 % of waveforms from 1.7e7 to
/// 4e3 Hz and within the statistics of 85 crossings (11 %) at 400 Hz
/// (`verify_accidental_rates_against_waveforms`). The gaussian slope is low by at most 20 % where
/// one pulse alone makes the crossing. Electronic noise (shaped white noise) of 0.6 photoelectrons: 1 %;
/// crosstalk of 0.2: 2 %; 2 % of afterpulses of 3 photoelectrons: -5 to +6 %, since they make the slope
/// at a height a mixture (`verify_noise_of_electronics_crosstalk_and_afterpulses_against_waveforms`).
///
/// # Source
/// Panjer 1981, ASTIN Bull. 12, 22; Rice 1945, Bell Syst. Tech. J. 24, 46; derived here.
#[derive(Clone, Debug)]
pub struct Noise {
    density: Vec<f64>,
    slope2: Vec<f64>,
    mean_pe: f64,
}

impl Noise {
    /// The noise of one pixel; the same as [`Self::of_pixel`].
    pub fn new(kind: &TelescopeKind, sky_per_ns: f64) -> Self {
        Self::of_pixel(kind, sky_per_ns)
    }

    /// The noise of one pixel of a kind at a sky photoelectron rate.
    pub fn of_pixel(kind: &TelescopeKind, sky_per_ns: f64) -> Self {
        let sigma = kind.pulse_sigma_ns();
        let amplitudes = amplitudes(kind);
        let pulses: f64 = 1.0 + kind.afterpulsing;
        let mean_count = sky_per_ns * pulses * 2.0 * REACH_SIGMA * sigma;
        let light_rms = light_rms_pe(kind, sky_per_ns);
        let mean_pe = sky_per_ns * sigma * core::f64::consts::TAU.sqrt() * mean_pulse_pe(kind);
        if mean_count > GAUSSIAN_COUNT {
            return Self::gaussian(noise_rms_pe(kind, sky_per_ns), sigma);
        }
        let bins = ((mean_pe + 12.0 * light_rms + tail_pe(kind)) * BINS_PER_PE as f64) as usize;
        let (single, steep) = single_pulse(&amplitudes, sigma, bins);
        let longest = single.iter().rposition(|share| *share > 1e-14).unwrap_or(0);
        // Panjer: g_0 = exp(lambda (f_0 - 1)), g_n = lambda / n sum_j j f_j g_(n-j).
        let mut density = vec![0.0; bins];
        density[0] = (mean_count * (single[0] - 1.0)).exp();
        for n in 1..bins {
            let sum: f64 =
                (1..=longest.min(n)).map(|j| j as f64 * single[j] * density[n - j]).sum();
            density[n] = mean_count / n as f64 * sum;
        }
        let slope2 = convolution(&steep, &density, bins)
            .into_iter()
            .map(|value| value * mean_count)
            .collect();
        Self { density, slope2, mean_pe }.with_electronics(kind.electronic_noise_pe, sigma)
    }

    /// The same with independent gaussian noise of an RMS, shaped like the pulses: densities fold
    /// with a gaussian, the slope variance grows by rms^2 / (2 sigma^2).
    fn with_electronics(self, rms: f64, sigma: f64) -> Self {
        let half = (8.0 * rms * BINS_PER_PE as f64).ceil() as usize;
        if half == 0 {
            return self;
        }
        let step = 1.0 / (rms * BINS_PER_PE as f64);
        let shape = |bin: usize| (-0.5 * ((bin as f64 - half as f64) * step).powi(2)).exp();
        let total: f64 = (0..=2 * half).map(shape).sum();
        let kernel: Vec<f64> = (0..=2 * half).map(|bin| shape(bin) / total).collect();
        let bins = self.density.len() + 2 * half;
        let density = convolution(&kernel, &self.density, bins);
        let own = 0.5 * (rms / sigma).powi(2);
        let slope2 = convolution(&kernel, &self.slope2, bins);
        let slope2 = slope2.iter().zip(&density).map(|(q, f)| q + own * f).collect();
        Self { density, slope2, mean_pe: self.mean_pe + half as f64 / BINS_PER_PE as f64 }
    }

    /// The noise of a patch of `members` pixels, each clipped at `clip_pe` above its baseline.
    ///
    /// Pixels are independent; a clipped pixel has no slope.
    pub fn of_patch(kind: &TelescopeKind, sky_per_ns: f64, members: usize, clip_pe: f64) -> Self {
        let pixel = Self::of_pixel(kind, sky_per_ns);
        let top = ((clip_pe + pixel.mean_pe) * BINS_PER_PE as f64).round().max(1.0) as usize;
        let (mut one, mut steep) = (pixel.density.clone(), pixel.slope2.clone());
        if top < one.len() {
            let above: f64 = one[top..].iter().sum();
            one.truncate(top + 1);
            steep.truncate(top + 1);
            (one[top], steep[top]) = (above, 0.0);
        }
        let mut others = vec![1.0];
        for _ in 1..members {
            others = convolution(&others, &one, others.len() + one.len() - 1);
        }
        let bins = others.len() + one.len() - 1;
        let slope2 = convolution(&others, &steep, bins).into_iter().map(|q| q * members as f64);
        Self {
            density: convolution(&others, &one, bins),
            slope2: slope2.collect(),
            mean_pe: pixel.mean_pe * members as f64,
        }
    }

    fn gaussian(rms: f64, sigma: f64) -> Self {
        let (reach, step) = (9.0 * rms, 1.0 / BINS_PER_PE as f64);
        let bins = (2.0 * reach / step) as usize;
        let norm = step / (rms * core::f64::consts::TAU.sqrt());
        let height = |bin: usize| (bin as f64 * step - reach) / rms;
        let density: Vec<f64> =
            (0..bins).map(|bin| norm * (-0.5 * height(bin).powi(2)).exp()).collect();
        let slope2 = density.iter().map(|f| f * 0.5 * (rms / sigma).powi(2)).collect();
        Self { density, slope2, mean_pe: reach }
    }

    /// Upward crossings per second of a threshold above the mean baseline.
    pub fn crossing_rate_hz(&self, threshold_pe: f64) -> f64 {
        let place = (threshold_pe + self.mean_pe) * BINS_PER_PE as f64;
        if place < 0.0 {
            return 0.0;
        }
        let (low, fraction) = (place as usize, place.fract());
        1e9 * (self.crossings(low) * (1.0 - fraction) + self.crossings(low + 1) * fraction)
    }

    /// Crossings per ns of the height of a bin.
    fn crossings(&self, bin: usize) -> f64 {
        match (self.density.get(bin), self.slope2.get(bin)) {
            (Some(f), Some(q)) => BINS_PER_PE as f64 * (f * q / core::f64::consts::TAU).sqrt(),
            _ => 0.0,
        }
    }

    /// The law of the height at a random moment.
    pub(super) fn moment(&self) -> HeightLaw {
        HeightLaw::new(self.cumulative(), self.mean_pe)
    }

    /// The law of the highest peak that begins within a time: exp(-crossings x time / F).
    ///
    /// Joined with [`Self::moment`] it is the law of the maximum, F exp(-crossings x time / F),
    /// exact for rare crossings.
    pub(super) fn peaks(&self, time_ns: f64) -> HeightLaw {
        let cumulative = self.cumulative();
        let mut least = 0.0_f64;
        let law = cumulative.iter().enumerate().map(|(bin, below)| {
            if *below <= 0.0 {
                return 0.0;
            }
            least = least.max((-self.crossings(bin) * time_ns / below).exp());
            least
        });
        HeightLaw::new(law.collect(), self.mean_pe)
    }

    /// The law of the maximum within a time.
    pub(super) fn maxima(&self, time_ns: f64) -> HeightLaw {
        let (moment, peaks) = (self.moment(), self.peaks(time_ns));
        let both = moment.below.iter().zip(&peaks.below).map(|(f, e)| f * e);
        HeightLaw::new(both.collect(), self.mean_pe)
    }

    fn cumulative(&self) -> Vec<f64> {
        let mut sum = 0.0;
        let steps = self.density.iter().map(|share| {
            sum += share;
            sum
        });
        let rising: Vec<f64> = steps.collect();
        rising.iter().map(|below| below / sum).collect()
    }
}

/// A law of heights, drawn by inversion.
#[derive(Clone, Debug)]
pub(super) struct HeightLaw {
    below: Vec<f64>,
    guide: Vec<u32>,
    mean_pe: f64,
}

const GUIDES: usize = 1024;

impl HeightLaw {
    fn new(below: Vec<f64>, mean_pe: f64) -> Self {
        let guide = (0..GUIDES)
            .map(|step| below.partition_point(|b| *b < step as f64 / GUIDES as f64) as u32)
            .collect();
        Self { below, guide, mean_pe }
    }

    /// The height below which a share of draws lies.
    #[inline]
    pub fn quantile(&self, share: f64) -> f32 {
        let mut bin = self.guide[((share * GUIDES as f64) as usize).min(GUIDES - 1)] as usize;
        while bin < self.below.len() - 1 && self.below[bin] < share {
            bin += 1;
        }
        let lower = if bin == 0 { 0.0 } else { self.below[bin - 1] };
        let width = self.below[bin] - lower;
        let fraction = if width > 0.0 { ((share - lower) / width).clamp(0.0, 1.0) } else { 0.5 };
        ((bin as f64 + fraction - 0.5) / BINS_PER_PE as f64 - self.mean_pe) as f32
    }

    /// One draw.
    #[inline]
    pub fn draw(&self, stream: &mut Stream) -> f32 {
        self.quantile(stream.uniform())
    }
}

/// RMS of the shaped noise of a pixel, photoelectrons: sky and electronics in quadrature.
pub fn noise_rms_pe(kind: &TelescopeKind, sky_per_ns: f64) -> f64 {
    light_rms_pe(kind, sky_per_ns).hypot(kind.electronic_noise_pe)
}

/// RMS of the shaped sky noise, photoelectrons: Campbell's theorem, rate x integral of the pulse
/// squared x mean squared pulse height = rate sigma sqrt(pi) E[a^2].
///
/// # Source
/// Campbell 1909, Proc. Camb. Phil. Soc. 15, 117.
fn light_rms_pe(kind: &TelescopeKind, sky_per_ns: f64) -> f64 {
    let square = kind.pulse_sigma_ns() * core::f64::consts::PI.sqrt();
    (sky_per_ns * square * mean_square_pulse_pe2(kind)).sqrt()
}

/// Mean summed pulse height of one photoelectron with its crosstalk and afterpulse.
fn mean_pulse_pe(kind: &TelescopeKind) -> f64 {
    1.0 / (1.0 - kind.further_discharges()) + kind.afterpulsing * kind.afterpulse_pe
}

/// Mean squared pulse height of one photoelectron and of its afterpulse.
fn mean_square_pulse_pe2(kind: &TelescopeKind) -> f64 {
    let lambda = kind.further_discharges();
    let count = 1.0 / (1.0 - lambda);
    let discharges = kind.pulse_spread.powi(2) * count + count.powi(2) + lambda * count.powi(3);
    discharges + 2.0 * kind.afterpulsing * kind.afterpulse_pe.powi(2)
}

/// How far above its bulk the law reaches, photoelectrons: until crosstalk and afterpulses have
/// fallen by e^30 and e^16.
fn tail_pe(kind: &TelescopeKind) -> f64 {
    let lambda = kind.further_discharges();
    let crosstalk = if lambda > 0.0 { 30.0 / (lambda - 1.0 - lambda.ln()) } else { 0.0 };
    let afterpulse = if kind.afterpulsing > 0.0 { 16.0 * kind.afterpulse_pe } else { 0.0 };
    20.0 + crosstalk + afterpulse
}

/// Discharges of one photoelectron with its crosstalk, generation by generation.
pub(super) fn discharges(further: f64, stream: &mut Stream) -> f64 {
    let (mut total, mut open) = (1_u64, 1_u64);
    while open > 0 {
        open = stream.poisson(open as f64 * further);
        total += open;
    }
    total as f64
}

/// Heights of the pulse of one photoelectron and of its afterpulse, with their mean numbers.
fn amplitudes(kind: &TelescopeKind) -> Vec<(f64, f64)> {
    let mut amplitudes = Vec::new();
    let lambda = kind.further_discharges();
    // Borel: P(n) = exp(-lambda n) (lambda n)^(n-1) / n!, by the ratio of successive terms.
    let mut probability = (-lambda).exp();
    let mut count = 1.0_f64;
    while probability > 1e-14 {
        let spread = kind.pulse_spread * count.sqrt();
        for rank in 0..41 {
            let deviate = (f64::from(rank) - 20.0) * 0.2;
            let weight = 0.2 * (-0.5 * deviate * deviate).exp() / core::f64::consts::TAU.sqrt();
            amplitudes.push(((count + spread * deviate).max(0.0), probability * weight));
        }
        let growth = (1.0 + 1.0 / count).powf(count - 1.0);
        probability *= lambda * (-lambda).exp() * growth;
        count += 1.0;
    }
    let step = 0.25;
    for rank in 0..64 {
        let height = step * (f64::from(rank) + 0.5);
        let weight = (-height).exp() * 2.0 * (0.5 * step).sinh();
        amplitudes.push((kind.afterpulse_pe * height, kind.afterpulsing * weight));
    }
    amplitudes.retain(|(_, weight)| *weight > 0.0);
    amplitudes
}

/// For one pulse at a uniform time within reach: the law of the height it adds, and the mean
/// squared slope it has at each height, per ns2.
fn single_pulse(amplitudes: &[(f64, f64)], sigma: f64, bins: usize) -> (Vec<f64>, Vec<f64>) {
    let (mut shares, mut steep) = (vec![0.0; bins], vec![0.0; bins]);
    let times = 400;
    let mut total = 0.0;
    for step in 0..times {
        let shift = REACH_SIGMA * (f64::from(step) + 0.5) / f64::from(times);
        let shape = (-0.5 * shift * shift).exp();
        for &(peak, weight) in amplitudes {
            let height = peak * shape * BINS_PER_PE as f64;
            let slope2 = (peak * shape * shift / sigma).powi(2);
            let (low, fraction) = (height as usize, height.fract());
            if low + 1 < bins {
                for (bin, part) in [(low, 1.0 - fraction), (low + 1, fraction)] {
                    shares[bin] += weight * part;
                    steep[bin] += weight * part * slope2;
                }
            }
            total += weight;
        }
    }
    for value in shares.iter_mut().chain(&mut steep) {
        *value /= total;
    }
    (shares, steep)
}

/// The first `bins` terms of a discrete convolution.
fn convolution(left: &[f64], right: &[f64], bins: usize) -> Vec<f64> {
    let mut product = vec![0.0; bins];
    for (i, a) in left.iter().enumerate().filter(|(_, a)| **a != 0.0) {
        for (sum, b) in product[i.min(bins)..].iter_mut().zip(right) {
            *sum += a * b;
        }
    }
    product
}
