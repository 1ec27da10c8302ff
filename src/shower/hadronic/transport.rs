//! Hadrons on their way down.

use crate::consts::{CHARGED_PION_CTAU_M, CHARGED_PION_MASS_GEV, NEUTRAL_PION_MASS_GEV};
use crate::numerics::Stream;
use crate::shower::Species;

use super::cross_section::{nucleon_length_g_cm2, pion_length_g_cm2};
use super::generator::{Pion, nucleon_interaction, pion_interaction};

/// The shower axis as a map between slant depth and distance from the observer.
pub struct Axis<'a> {
    /// Slant depth of the observer, g/cm2.
    pub ground_g_cm2: f64,
    /// Distance from the observer of a slant depth, m.
    pub distance_m: &'a dyn Fn(f64) -> f64,
}

/// A photon that starts an electromagnetic part.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EmParticle {
    /// Energy, GeV.
    pub energy_gev: f64,
    /// How many equal ones it stands for.
    pub weight: f64,
    /// Slant depth where it begins, g/cm2.
    pub depth_g_cm2: f64,
    /// Distance from the observer where it begins, m.
    pub distance_m: f64,
    /// Position across the axis there, m.
    pub transverse_m: [f64; 2],
    /// Slope of its flight against the axis, downward.
    pub slope: [f64; 2],
}

/// What became of a primary.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Core {
    /// Photons of neutral pions.
    pub photons: Vec<EmParticle>,
    /// Energy of decayed charged pions (muons and neutrinos), GeV.
    pub decayed_gev: f64,
    /// Energy of hadrons that reached the ground, GeV.
    pub ground_gev: f64,
    /// Energy of hadrons and photons dropped below the floors, GeV.
    pub dropped_gev: f64,
}

/// Hadrons below this cannot make a photon that emits light, GeV.
const HADRON_FLOOR_GEV: f64 = 1.0;
/// Photons below this are dropped: their few electrons end below the Cherenkov threshold, GeV.
const PHOTON_FLOOR_GEV: f64 = 0.2;
/// Photons below this fraction of the primary's energy are kept at random with a weight, so that
/// the mean is kept and the number of parts stays below a few thousand.
const THINNING: f64 = 5e-4;

#[derive(Clone, Copy)]
struct Hadron {
    pion: bool,
    energy_gev: f64,
    depth_g_cm2: f64,
    distance_m: f64,
    transverse_m: [f64; 2],
    slope: [f64; 2],
}

/// Follows a nucleon or nucleus along the axis.
///
/// Nuclei are superpositions of free nucleons, each with its own first interaction. Angles are
/// small: depths are counted along the main axis.
pub fn core(species: Species, energy_gev: f64, axis: &Axis<'_>, stream: &mut Stream) -> Core {
    let mut core = Core::default();
    let nucleons = species.mass_number().max(1);
    let each = energy_gev / f64::from(nucleons);
    let thinning_gev = THINNING * energy_gev;
    let top = (axis.distance_m)(1e-3);
    let mut stack: Vec<Hadron> = (0..nucleons)
        .map(|_| Hadron {
            pion: false,
            energy_gev: each,
            depth_g_cm2: 0.0,
            distance_m: top,
            transverse_m: [0.0; 2],
            slope: [0.0; 2],
        })
        .collect();
    let mut pions = Vec::new();
    while let Some(hadron) = stack.pop() {
        if hadron.energy_gev < HADRON_FLOOR_GEV {
            core.dropped_gev += hadron.energy_gev;
            continue;
        }
        let Some(at) = interaction_point(hadron, axis, stream, &mut core) else { continue };
        pions.clear();
        if hadron.pion {
            pion_interaction(hadron.energy_gev, stream, &mut pions);
        } else {
            let kept = nucleon_interaction(hadron.energy_gev, stream, &mut pions);
            stack.push(Hadron { energy_gev: kept, ..at });
        }
        let made: f64 = pions.iter().map(|pion| pion.energy_gev).sum();
        let spent = if hadron.pion {
            hadron.energy_gev
        } else {
            hadron.energy_gev - stack[stack.len() - 1].energy_gev
        };
        core.dropped_gev += (spent - made).max(0.0);
        for pion in &pions {
            let slope = turned(at.slope, pion);
            let child = Hadron { pion: true, energy_gev: pion.energy_gev, slope, ..at };
            if pion.neutral {
                neutral_decay(child, thinning_gev, stream, &mut core);
            } else {
                stack.push(child);
            }
        }
    }
    core
}

/// Moves a hadron to its interaction; `None` if it decays or reaches the ground first.
fn interaction_point(
    hadron: Hadron,
    axis: &Axis<'_>,
    stream: &mut Stream,
    core: &mut Core,
) -> Option<Hadron> {
    let length = if hadron.pion {
        pion_length_g_cm2(hadron.energy_gev)
    } else {
        nucleon_length_g_cm2(hadron.energy_gev)
    };
    let depth = hadron.depth_g_cm2 + length * stream.exponential();
    let reaches_ground = depth >= axis.ground_g_cm2;
    let distance = if reaches_ground { 0.0 } else { (axis.distance_m)(depth) };
    let path = hadron.distance_m - distance;
    if hadron.pion {
        let range = hadron.energy_gev / CHARGED_PION_MASS_GEV * CHARGED_PION_CTAU_M;
        if range * stream.exponential() < path {
            core.decayed_gev += hadron.energy_gev;
            return None;
        }
    }
    if reaches_ground {
        core.ground_gev += hadron.energy_gev;
        return None;
    }
    let transverse_m = [
        hadron.transverse_m[0] + hadron.slope[0] * path,
        hadron.transverse_m[1] + hadron.slope[1] * path,
    ];
    Some(Hadron { depth_g_cm2: depth, distance_m: distance, transverse_m, ..hadron })
}

fn turned(slope: [f64; 2], pion: &Pion) -> [f64; 2] {
    let momentum = (pion.energy_gev.powi(2) - CHARGED_PION_MASS_GEV.powi(2)).max(1e-6).sqrt();
    let along =
        (momentum.powi(2) - pion.transverse_gev[0].powi(2) - pion.transverse_gev[1].powi(2))
            .max(1e-4 * momentum * momentum)
            .sqrt();
    [slope[0] + pion.transverse_gev[0] / along, slope[1] + pion.transverse_gev[1] / along]
}

/// Two photons, isotropic in the pion's rest frame.
fn neutral_decay(pion: Hadron, thinning_gev: f64, stream: &mut Stream, core: &mut Core) {
    let energy = pion.energy_gev.max(1.000_01 * NEUTRAL_PION_MASS_GEV);
    let beta = (1.0 - (NEUTRAL_PION_MASS_GEV / energy).powi(2)).sqrt();
    let cosine = 2.0 * stream.uniform() - 1.0;
    let sine = (1.0 - cosine * cosine).sqrt();
    let (cos, sin) = stream.direction();
    for side in [1.0, -1.0] {
        let photon = 0.5 * energy * (1.0 + side * beta * cosine);
        if photon < PHOTON_FLOOR_GEV {
            core.dropped_gev += photon;
            continue;
        }
        let mut weight = 1.0;
        if photon < thinning_gev {
            let keep = photon / thinning_gev;
            if stream.uniform() >= keep {
                continue;
            }
            weight = 1.0 / keep;
        }
        let tilt = side * 0.5 * NEUTRAL_PION_MASS_GEV * sine / photon;
        let slope = [pion.slope[0] + tilt * cos, pion.slope[1] + tilt * sin];
        core.photons.push(EmParticle {
            energy_gev: photon,
            weight,
            depth_g_cm2: pion.depth_g_cm2,
            distance_m: pion.distance_m,
            transverse_m: pion.transverse_m,
            slope,
        });
    }
}
