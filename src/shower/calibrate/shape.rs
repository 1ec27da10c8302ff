//! The longitudinal shape of one shower.

use crate::shower::profile::GaisserHillas;

use super::recorder::BIN_G_CM2;

/// The Gaisser-Hillas profile that starts at `start_g_cm2` and has the same track length, mean
/// depth and variance of depth as a profile in bins: mean = (m + 1) L, variance = (m + 1) L^2.
///
/// `None` where the profile is empty or narrower than its start allows (m below 0.2).
pub fn moments_fit(profile: &[f64], start_g_cm2: f64) -> Option<GaisserHillas> {
    let (mut sum, mut first, mut second) = (0.0, 0.0, 0.0);
    for (bin, size) in profile.iter().enumerate() {
        let depth = (bin as f64 + 0.5) * BIN_G_CM2 - start_g_cm2;
        sum += size;
        first += size * depth;
        second += size * depth * depth;
    }
    if sum <= 0.0 {
        return None;
    }
    let mean = first / sum;
    let variance = second / sum - mean * mean;
    let length = variance / mean;
    let power = mean / length - 1.0;
    if length <= 0.0 || power <= 0.2 || power.is_nan() {
        return None;
    }
    let max = start_g_cm2 + power * length;
    Some(GaisserHillas::new(start_g_cm2, max, length, sum * BIN_G_CM2))
}

/// Mean depth of a profile in bins after its start, g/cm2; zero where it is empty.
pub fn mean_depth_g_cm2(profile: &[f64], start_g_cm2: f64) -> f64 {
    let (mut sum, mut first) = (0.0, 0.0);
    for (bin, size) in profile.iter().enumerate() {
        sum += size;
        first += size * ((bin as f64 + 0.5) * BIN_G_CM2 - start_g_cm2);
    }
    if sum > 0.0 { first / sum } else { 0.0 }
}
