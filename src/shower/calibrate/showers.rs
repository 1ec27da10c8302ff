//! Records the library of longitudinal profiles.

use rayon::prelude::*;

use crate::shower::cascade::{CascadeSpecies, Environment};
use crate::shower::profile::library::{BINS, edge_g_cm2};

use super::maker::{CalibrationSettings, recorded_shower};
use super::recorder::BIN_G_CM2;
use super::shape::{mean_depth_g_cm2, moments_fit};

/// One shower of the library.
#[derive(Clone, Debug)]
pub struct LibraryShower {
    /// The primary.
    pub species: CascadeSpecies,
    /// Its energy, GeV.
    pub energy_gev: f64,
    /// Depth of the maximum of the fitted curve after the start, g/cm2.
    pub max_g_cm2: f64,
    /// Scale length of the fitted curve, g/cm2.
    pub length_g_cm2: f64,
    /// Particles above the floor by bin of [`edge_g_cm2`]; empty bins at the end are left out.
    pub particles: Vec<f32>,
}

/// Depth of the maximum given to showers whose profile cannot be fitted, as a share of their mean
/// depth: that of a curve of power one. They are small showers that die near their start; all
/// of their light is that of one or two particles, so that their age hardly matters.
const UNFITTED_MAX: f64 = 0.5;

/// Runs the showers of the library.
pub fn library(environment: &Environment, settings: &CalibrationSettings) -> Vec<LibraryShower> {
    let mut all = Vec::new();
    for (species, runs) in [
        (CascadeSpecies::Gamma, &settings.gamma_library),
        (CascadeSpecies::Electron, &settings.electron_library),
    ] {
        for &(energy_gev, showers) in runs {
            let made: Vec<_> = (0..showers)
                .into_par_iter()
                .map(|shower| one(environment, settings, species, energy_gev, shower))
                .collect();
            all.extend(made);
        }
    }
    all
}

fn one(
    environment: &Environment,
    settings: &CalibrationSettings,
    species: CascadeSpecies,
    energy_gev: f64,
    shower: u64,
) -> LibraryShower {
    let key = (settings.seed ^ 0x11B, shower);
    let floor = settings.floor_gev;
    let recorded = recorded_shower(environment, species, energy_gev, floor, f64::INFINITY, key);
    let start = recorded.start_g_cm2;
    let fit = moments_fit(&recorded.profile, start);
    let (max_g_cm2, length_g_cm2) = match &fit {
        Some(fit) => (fit.max_g_cm2 - start, fit.length_g_cm2),
        None => {
            let max = UNFITTED_MAX * mean_depth_g_cm2(&recorded.profile, start).max(2.0);
            (max, max)
        }
    };
    let ground = environment.air.depth_g_cm2(0.0) - start;
    let mut particles: Vec<f32> =
        (0..BINS).map(|bin| rebinned(&recorded.profile, start, bin) as f32).collect();
    if let Some(fit) = &fit {
        // Below sea level the fitted curve goes on from the last whole bin.
        let whole = (0..BINS).take_while(|bin| edge_g_cm2(bin + 1) <= ground).count();
        let middle = |bin: usize| start + 0.5 * (edge_g_cm2(bin) + edge_g_cm2(bin + 1));
        if let Some(last) = whole.checked_sub(1) {
            let scale = f64::from(particles[last]) / fit.size(middle(last));
            for (bin, size) in particles.iter_mut().enumerate().skip(whole) {
                let size_there = scale * fit.size(middle(bin));
                *size = if size_there.is_finite() { size_there as f32 } else { 0.0 };
            }
        }
    }
    let filled = particles.iter().rposition(|size| *size > 1e-4).map_or(0, |last| last + 1);
    particles.truncate(filled);
    LibraryShower { species, energy_gev, max_g_cm2, length_g_cm2, particles }
}

/// Mean number of particles in a bin of the library, from the bins of the recorder. In the
/// recorder's bin where the shower begins all particles are below the start.
fn rebinned(profile: &[f64], start: f64, bin: usize) -> f64 {
    let (low, high) = (start + edge_g_cm2(bin), start + edge_g_cm2(bin + 1));
    let (first, last) = ((low / BIN_G_CM2) as usize, (high / BIN_G_CM2) as usize);
    let mut track = 0.0;
    for (index, size) in profile.iter().enumerate().take(last + 1).skip(first) {
        let top = (index as f64 * BIN_G_CM2).max(start);
        let bottom = (index + 1) as f64 * BIN_G_CM2;
        let inside = high.min(bottom) - low.max(top);
        if inside > 0.0 && bottom > top {
            track += size * BIN_G_CM2 * inside / (bottom - top);
        }
    }
    track / (high - low)
}
