//! Muons on their way down: ionisation, bending, scattering, decay.

use core::f64::consts::LN_10;

use crate::consts::{AIR_RADIATION_LENGTH_G_CM2, ELECTRON_MASS_GEV, MUON_CTAU_M, MUON_MASS_GEV};
use crate::numerics::Stream;
use crate::shower::cascade::material::{
    EXCITATION_GEV, NORMAL_DENSITY_KG_M3, density_effect, loss_constant_gev_cm2_g,
};

use super::particle::Kind;
use super::transport::{Axis, Flight};

/// Momentum change of a unit charge across a field, GeV/c per uT and metre.
pub const BEND_GEV_UT_M: f64 = 2.997_924_58e-7;

/// Radiative loss over energy, cm2/g: bremsstrahlung, pairs and photonuclear near 100 GeV; PDG tables
/// for air, from memory, +-30 %, which is 0.3 % of a muon's energy over the atmosphere.
const RADIATIVE_CM2_G: f64 = 3.0e-6;

/// Multiple scattering constant of one plane, GeV: Highland's 13.6 MeV with its logarithm at ten
/// radiation lengths, 1 + 0.038 ln 10.
///
/// # Source
/// Lynch & Dahl 1991, Nucl. Instrum. Meth. B 58, 6.
const SCATTERING_GEV: f64 = 0.0136 * (1.0 + 0.038 * LN_10);

/// A place on a muon's way.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct MuonNode {
    /// Slant depth along the main axis, g/cm2.
    pub depth_g_cm2: f64,
    /// Distance from the observer along the main axis, m.
    pub distance_m: f64,
    /// Total energy, GeV.
    pub energy_gev: f64,
    /// Position across the axis, m.
    pub transverse_m: [f64; 2],
    /// Slope against the axis, downward.
    pub slope: [f64; 2],
    /// Path by which it lags behind the front of the primary at the speed of light, m.
    pub lag_m: f64,
}

/// One muon from birth to decay, stop or ground.
#[derive(Clone, Debug, PartialEq)]
pub struct MuonTrack {
    /// Whether its charge is positive.
    pub positive: bool,
    /// From birth down; the last node is at the ground if `at_ground`.
    pub nodes: Vec<MuonNode>,
    /// Whether it reaches the ground.
    pub at_ground: bool,
}

/// Mean energy loss of a muon in air, GeV per g/cm2.
///
/// Bethe's formula with the density effect shifted to the density, and a radiative term.
///
/// # Source
/// Review of Particle Physics, "Passage of particles through matter".
/// Validity: above 20 MeV kinetic energy, below 1 TeV (test `validate_muon_loss_pdg`).
pub fn loss_gev_cm2_g(energy_gev: f64, density_kg_m3: f64) -> f64 {
    let gamma = energy_gev / MUON_MASS_GEV;
    let beta_gamma2 = (gamma * gamma - 1.0).max(1e-3);
    let beta2 = beta_gamma2 / (gamma * gamma);
    let ratio = ELECTRON_MASS_GEV / MUON_MASS_GEV;
    let most = 2.0 * ELECTRON_MASS_GEV * beta_gamma2 / (1.0 + 2.0 * gamma * ratio + ratio * ratio);
    let argument = 2.0 * ELECTRON_MASS_GEV * beta_gamma2 * most / EXCITATION_GEV.powi(2);
    let shift = 0.5 * (density_kg_m3 / NORMAL_DENSITY_KG_M3).log10();
    let delta = density_effect(0.5 * beta_gamma2.log10() + shift);
    let bracket = 0.5 * argument.ln() - beta2 - 0.5 * delta;
    2.0 * loss_constant_gev_cm2_g() / beta2 * bracket + RADIATIVE_CM2_G * energy_gev
}

/// What the end of a muon leaves.
pub struct MuonEnd {
    /// Its way.
    pub track: MuonTrack,
    /// Energy given to the air, GeV.
    pub lost_gev: f64,
    /// Where and how it flew when it decayed.
    pub decayed: Option<Flight>,
}

/// Follows a muon until it decays, falls below `floor_gev` or reaches the ground.
///
/// Steps are 40 g/cm2, or 15 % of the depth high up; slopes change at the middle of a step.
pub fn follow(start: Flight, axis: &Axis<'_>, floor_gev: f64, stream: &mut Stream) -> MuonEnd {
    let positive = start.kind == Kind::MuonPlus;
    let mut at = start;
    let mut nodes = vec![node(&at)];
    let mut lives = stream.exponential();
    let mut lost_gev = 0.0;
    let end = |nodes, at_ground, lost_gev, decayed| MuonEnd {
        track: MuonTrack { positive, nodes, at_ground },
        lost_gev,
        decayed,
    };
    loop {
        if at.energy_gev < floor_gev.max(1.2 * MUON_MASS_GEV) {
            return end(nodes, false, lost_gev, None);
        }
        let thickness = (0.15 * at.depth_g_cm2).clamp(1.0, 40.0);
        let depth = (at.depth_g_cm2 + thickness).min(axis.ground_g_cm2);
        let grounded = depth >= axis.ground_g_cm2;
        let distance = if grounded { 0.0 } else { (axis.distance_m)(depth) };
        let along = (at.distance_m - distance).max(1e-6);
        let tilt = 1.0 + at.slope[0].powi(2) + at.slope[1].powi(2);
        let path = along * tilt.sqrt();
        let grammage = (depth - at.depth_g_cm2) * tilt.sqrt();
        let density = 10.0 * grammage / path;
        let half = 0.5 * grammage * loss_gev_cm2_g(at.energy_gev, density.max(1e-6));
        let middle = (at.energy_gev - half).max(1.01 * MUON_MASS_GEV);
        let momentum = (middle * middle - MUON_MASS_GEV * MUON_MASS_GEV).sqrt();
        let range = momentum / MUON_MASS_GEV * MUON_CTAU_M;
        lives -= path / range;
        if lives < 0.0 {
            // Decays inside this step: the remaining lives say where.
            let share = (1.0 + lives * range / path).clamp(0.0, 1.0);
            let at_decay = Flight {
                depth_g_cm2: at.depth_g_cm2 + share * (depth - at.depth_g_cm2),
                distance_m: at.distance_m - share * along,
                energy_gev: at.energy_gev - 2.0 * share * (at.energy_gev - middle),
                transverse_m: [0, 1].map(|i| at.transverse_m[i] + share * along * at.slope[i]),
                lag_m: at.lag_m,
                ..at
            };
            lost_gev += at.energy_gev - at_decay.energy_gev;
            nodes.push(node(&at_decay));
            return end(nodes, false, lost_gev, Some(at_decay));
        }
        let charge = f64::from(at.kind.charge());
        let scatter = SCATTERING_GEV * middle / (momentum * momentum)
            * (grammage / AIR_RADIATION_LENGTH_G_CM2).sqrt();
        for i in 0..2 {
            let bend = charge * BEND_GEV_UT_M * axis.bend_ut[i] * path / momentum;
            let slope = at.slope[i] + bend + scatter * stream.normal();
            at.transverse_m[i] += 0.5 * (at.slope[i] + slope) * along;
            at.slope[i] = slope;
        }
        let tilt = at.slope[0].powi(2) + at.slope[1].powi(2);
        at.lag_m += 0.5 * along * (tilt + (MUON_MASS_GEV / momentum).powi(2));
        let energy = at.energy_gev - 2.0 * (at.energy_gev - middle);
        lost_gev += at.energy_gev - energy;
        (at.energy_gev, at.depth_g_cm2, at.distance_m) = (energy, depth, distance);
        nodes.push(node(&at));
        if grounded {
            return end(nodes, true, lost_gev, None);
        }
    }
}

fn node(at: &Flight) -> MuonNode {
    let Flight { depth_g_cm2, distance_m, energy_gev, transverse_m, slope, lag_m, .. } = *at;
    MuonNode { depth_g_cm2, distance_m, energy_gev, transverse_m, slope, lag_m }
}
