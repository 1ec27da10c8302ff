//! One inelastic interaction on air.
//!
//! A nucleon keeps a fraction x of its energy drawn from (1 + a)(1 - x)^a, a = 0.3; the rest goes to
//! pions. Pions share an energy one after another, each taking a fraction z of what is left, drawn
//! from b (1 - z)^(b - 1); the inclusive spectrum is then exactly dn/dx = b (1 - x)^(b - 1) / x. With
//! b = 4 behind a leading nucleon and b = 2.5 for a pion's interaction the spectrum-weighted moments
//! (index 1.7) are those of Gaisser's table within 15 % (tests `validate_z_factors_gaisser1990`).
//! A third of the pions is neutral. Energy is conserved event by event: the last pion takes what is
//! left below the floor.

use crate::consts::CHARGED_PION_MASS_GEV;
use crate::numerics::Stream;

/// Power of the leading nucleon's (1 - x).
const LEADING_POWER: f64 = 0.3;
/// Plateau height of pions made by a nucleon.
const NUCLEON_PLATEAU: f64 = 4.0;
/// Plateau height of pions made by a pion.
const PION_PLATEAU: f64 = 2.5;
/// Mean transverse momentum of pions, GeV/c (fixed-target and ISR data, from memory: 0.33 to 0.36).
const MEAN_TRANSVERSE_GEV: f64 = 0.34;
/// Energy below which what is left becomes one last pion, GeV.
const LAST_GEV: f64 = 0.5;

/// A pion that comes out of an interaction.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Pion {
    /// Total energy, GeV.
    pub energy_gev: f64,
    /// Transverse momentum, GeV/c.
    pub transverse_gev: [f64; 2],
    /// Whether it is neutral.
    pub neutral: bool,
}

/// A nucleon's interaction: the leading nucleon's energy; pions are appended.
pub fn nucleon_interaction(energy_gev: f64, stream: &mut Stream, pions: &mut Vec<Pion>) -> f64 {
    let kept = 1.0 - stream.uniform_positive().powf(1.0 / (1.0 + LEADING_POWER));
    share_out((1.0 - kept) * energy_gev, NUCLEON_PLATEAU, stream, pions);
    kept * energy_gev
}

/// A charged pion's interaction; pions are appended.
pub fn pion_interaction(energy_gev: f64, stream: &mut Stream, pions: &mut Vec<Pion>) {
    share_out(energy_gev, PION_PLATEAU, stream, pions);
}

fn share_out(mut left_gev: f64, plateau: f64, stream: &mut Stream, pions: &mut Vec<Pion>) {
    while left_gev > LAST_GEV {
        let taken = left_gev * (1.0 - stream.uniform_positive().powf(1.0 / plateau));
        left_gev -= taken;
        if taken > CHARGED_PION_MASS_GEV {
            pions.push(pion(taken, stream));
        } else {
            left_gev += taken;
            // Too soft to be a pion: try again with the same energy.
        }
    }
    if left_gev > CHARGED_PION_MASS_GEV {
        pions.push(pion(left_gev, stream));
    }
}

fn pion(energy_gev: f64, stream: &mut Stream) -> Pion {
    let momentum =
        (energy_gev * energy_gev - CHARGED_PION_MASS_GEV * CHARGED_PION_MASS_GEV).max(0.0).sqrt();
    // Density pT exp(-2 pT / mean): the sum of two exponentials.
    let size = 0.5 * MEAN_TRANSVERSE_GEV * (stream.exponential() + stream.exponential());
    let size = size.min(0.99 * momentum);
    let (cos, sin) = stream.direction();
    Pion {
        energy_gev,
        transverse_gev: [size * cos, size * sin],
        neutral: stream.uniform() < 1.0 / 3.0,
    }
}
