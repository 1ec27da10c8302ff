//! Emitters drawn from published distributions of energy, angle and lateral distance.

use crate::consts::AIR_RADIATION_LENGTH_G_CM2;
use crate::numerics::{Stage, Stream, UniformTable};

use super::emitters::{Emitter, EmitterNode, EmitterTable};

/// How far the emitters spread; 1 is the published width. Tests set one of them to zero.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Spread {
    /// Factor on the angles.
    pub angle: f64,
    /// Factor on the lateral offsets.
    pub offset: f64,
}

impl Spread {
    /// As published.
    pub const FULL: Self = Self { angle: 1.0, offset: 1.0 };
}

const FLOOR_MEV: f64 = 20.0;
const SCATTERING_ENERGY_MEV: f64 = 21.0;

/// Fraction of the charged track length above an energy:
/// T = [(0.89 E0 - 1.2) / (E0 + E)]^s (1 + 1e-4 s E)^-2, E0 = 44 - 17 (s - 1.46)^2 MeV for s >= 0.4,
/// 26 MeV below; E in MeV.
///
/// # Source
/// Hillas 1982, J. Phys. G 8, 1461 (from memory).
pub fn track_fraction(energy_mev: f64, age: f64) -> f64 {
    let scale = if age < 0.4 { 26.0 } else { 44.0 - 17.0 * (age - 1.46).powi(2) };
    let base = (0.89 * scale - 1.2) / (scale + energy_mev);
    base.powf(age) * (1.0 + 1e-4 * age * energy_mev).powi(-2)
}

/// Mean of w = 2 (1 - cos theta) (E / 21 MeV)^2 over particles of one energy:
/// 0.0054 E (1 + v) / (1 + 13 v + 8.3 v^2), v = E / (1150 + 454 ln s); E in MeV.
///
/// # Source
/// Hillas 1982, J. Phys. G 8, 1461 (from memory).
pub fn mean_scaled_angle(energy_mev: f64, age: f64) -> f64 {
    let v = energy_mev / (1150.0 + 454.0 * age.ln()).max(200.0);
    0.0054 * energy_mev * (1.0 + v) / (1.0 + 13.0 * v + 8.3 * v * v)
}

/// Draws u = w / mean(w): z = sqrt(u) falls as exp(-(z - 0.59) / lambda), lambda 0.478 below and
/// 0.380 above z = 0.59 (0.413 and 0.380 above 350 MeV). As published, the mean of u is 0.91 (0.89).
///
/// # Source
/// Hillas 1982, J. Phys. G 8, 1461 (from memory).
fn scaled_angle(energy_mev: f64, stream: &mut Stream) -> f64 {
    const BREAK: f64 = 0.59;
    let (below, above) = if energy_mev < 350.0 { (0.478, 0.380) } else { (0.413, 0.380) };
    // Density in z is 2 z exp(...): draw z by rejection from the envelope z_max = 4.
    loop {
        let z = 4.0 * stream.uniform();
        let scale = if z < BREAK { below } else { above };
        let height = z * (-(z - BREAK) / scale).exp();
        // The largest value of the bracket is 0.59 at the break.
        if stream.uniform() * 0.60 < height {
            return z * z;
        }
    }
}

/// Emitters of the published distributions.
///
/// Lateral offsets follow from the angles by small-angle diffusion: a track scattered uniformly
/// over its last path l has offset l theta / 2 along its angle and a further scatter of
/// l theta_rms / sqrt(12) in both directions; l = 1.95 radiation lengths reproduces the ratio of
/// mean square offset to mean square angle at maximum, 0.723 / 0.571.
///
/// # Source
/// Hillas 1982 (energies, angles); Roberg & Nordheim 1949, Phys. Rev. 75, 444 (moments; both from
/// memory); Fermi-Eyges diffusion as in Rossi 1952.
pub fn table(spread: Spread, samples: usize, seed: u64) -> EmitterTable {
    let ages = [0.2, 0.3, 0.4, 0.5, 0.6, 0.7, 0.8, 0.9, 1.0, 1.1, 1.2, 1.4, 1.6, 1.8];
    let nodes = ages.iter().enumerate().map(|(index, &age)| {
        let mut stream = Stream::keyed(seed, Stage::Table, &[index as u64]);
        let energies = energy_table(age);
        let emitters = (0..samples)
            .map(|place| draw(age, &energies, place, samples, spread, &mut stream))
            .collect();
        EmitterNode { age, fraction: track_fraction(FLOOR_MEV, age), emitters }
    });
    EmitterTable {
        floor_gev: FLOOR_MEV * 1e-3,
        source: "Hillas 1982, J. Phys. G 8, 1461".into(),
        energies_gev: vec![100.0],
        nodes: nodes.collect(),
    }
}

fn draw(
    age: f64,
    energies: &UniformTable,
    place: usize,
    samples: usize,
    spread: Spread,
    stream: &mut Stream,
) -> Emitter {
    let rank = (place as f64 + stream.uniform()) / samples as f64;
    let energy_mev = energies.value(-(1.0 - rank).ln()).exp();
    let mean_w = mean_scaled_angle(energy_mev, age);
    let lever = SCATTERING_ENERGY_MEV / energy_mev;
    let draw_angle = |stream: &mut Stream| {
        let w = mean_w * scaled_angle(energy_mev, stream);
        2.0 * (0.5 * w.sqrt() * lever).min(1.0).asin()
    };
    let theta = draw_angle(stream);
    let path = 1.95 * AIR_RADIATION_LENGTH_G_CM2;
    let rms_plane = (0.5 * mean_w).sqrt() * lever;
    let scatter = path * rms_plane / 12.0_f64.sqrt();
    let (cos, sin) = stream.direction();
    let offset = |direction: f64, stream: &mut Stream| {
        spread.offset * (0.5 * path * theta * direction + scatter * stream.normal())
    };
    let offset_g_cm2 = [offset(cos, stream) as f32, offset(sin, stream) as f32];
    let angle = spread.angle * theta;
    Emitter {
        energy_gev: (1e-3 * energy_mev) as f32,
        angle_rad: [(angle * cos) as f32, (angle * sin) as f32],
        offset_g_cm2,
        lag_g_cm2: (path * angle * angle / 6.0) as f32,
        angle_lever: 0.0,
        offset_lever: 0.0,
    }
}

/// Logarithm of the energy (MeV) above which a fraction q of the emitters lies, by -ln q.
fn energy_table(age: f64) -> UniformTable {
    UniformTable::new(0.0, 16.0, 1_601, |log_share| {
        let target = (-log_share).exp() * track_fraction(FLOOR_MEV, age);
        let (mut low, mut high) = (FLOOR_MEV.ln(), 1e8_f64.ln());
        for _ in 0..50 {
            let middle = 0.5 * (low + high);
            if track_fraction(middle.exp(), age) > target { low = middle } else { high = middle }
        }
        0.5 * (low + high)
    })
}
