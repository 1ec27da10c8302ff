//! Longitudinal profiles of single showers of the reference cascade, to be drawn from.

use crate::consts::AIR_RADIATION_LENGTH_G_CM2;

/// Number of bins of depth after the first interaction: 10 g/cm2 wide to 100, 20 to 500, 40 to
/// 1,100.
pub const BINS: usize = 45;

/// Lower edge of a bin, g/cm2; `index` may be [`BINS`].
pub fn edge_g_cm2(index: usize) -> f64 {
    let index = index as f64;
    if index <= 10.0 {
        10.0 * index
    } else if index <= 30.0 {
        100.0 + 20.0 * (index - 10.0)
    } else {
        500.0 + 40.0 * (index - 30.0)
    }
}

#[inline]
fn place(depth_g_cm2: f64) -> f64 {
    if depth_g_cm2 < 100.0 {
        depth_g_cm2 / 10.0
    } else if depth_g_cm2 < 500.0 {
        10.0 + (depth_g_cm2 - 100.0) / 20.0
    } else {
        30.0 + (depth_g_cm2 - 500.0) / 40.0
    }
}

/// The profile of one shower of the library, carried to another energy.
///
/// Numbers of particles at the same depth t after the start stand in the ratio of two Greisen
/// profiles, [(t + 2 b') / (t + 2 b)]^(1.5 t), t in radiation lengths, b the shower's own depth of
/// maximum and b' = b + ln(E' / E): one at the start, where a photon is two particles at any
/// energy, and E'/E about the maximum. The total track length then stands in the ratio of the
/// energies.
///
/// # Source
/// Greisen 1956, Prog. Cosmic Ray Phys. 3, 1: d ln N / d ln E at fixed depth is the age.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Shape {
    sizes: &'static [f32],
    depth: f64,
    deeper: f64,
    norm: f64,
}

impl Shape {
    /// The profile `sizes` with its maximum `max_g_cm2` after the start, at `ratio` times its
    /// energy.
    pub fn new(sizes: &'static [f32], max_g_cm2: f64, ratio: f64) -> Self {
        let depth = max_g_cm2 / AIR_RADIATION_LENGTH_G_CM2;
        // Small showers that die at once have no Greisen profile: they keep a maximum.
        let deeper = (depth + ratio.ln()).max(0.5 * depth);
        let mut shape = Self { sizes, depth, deeper, norm: 1.0 };
        let own = Self { deeper: depth, ..shape }.track_g_cm2();
        let carried = shape.track_g_cm2();
        if carried > 0.0 {
            shape.norm = ratio * own / carried;
        }
        shape
    }

    /// Depth of the maximum after the start, g/cm2.
    pub fn max_g_cm2(&self) -> f64 {
        self.deeper * AIR_RADIATION_LENGTH_G_CM2
    }

    /// The same shape with all numbers times a weight.
    pub fn weighted(self, weight: f64) -> Self {
        Self { norm: self.norm * weight, ..self }
    }

    /// Integral over depth, g/cm2.
    pub fn track_g_cm2(&self) -> f64 {
        let bin = |(index, size): (usize, &f32)| {
            let (low, high) = (edge_g_cm2(index), edge_g_cm2(index + 1));
            f64::from(*size) * self.growth(0.5 * (low + high)) * (high - low)
        };
        self.norm * self.sizes.iter().enumerate().map(bin).sum::<f64>()
    }

    #[inline]
    fn growth(&self, depth_g_cm2: f64) -> f64 {
        if self.deeper == self.depth {
            return 1.0;
        }
        let t = depth_g_cm2 / AIR_RADIATION_LENGTH_G_CM2;
        (1.5 * t * ((t + 2.0 * self.deeper) / (t + 2.0 * self.depth)).ln()).exp()
    }

    /// Number of particles above the floor at a depth after the start: linear between the middles
    /// of bins, zero beyond the last.
    #[inline]
    pub fn size(&self, depth_g_cm2: f64) -> f64 {
        if depth_g_cm2 <= 0.0 {
            return 0.0;
        }
        let place = (place(depth_g_cm2) - 0.5).max(0.0);
        let low = place as usize;
        let share = place - low as f64;
        let at = |index: usize| self.sizes.get(index).map_or(0.0, |size| f64::from(*size));
        let size = at(low) + share * (at(low + 1) - at(low));
        if size == 0.0 { 0.0 } else { self.norm * size * self.growth(depth_g_cm2) }
    }
}
