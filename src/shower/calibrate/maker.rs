//! Runs showers and gathers emitters by age and the statistics of longitudinal development.

use nalgebra::Vector3;
use rayon::prelude::*;

use crate::atmosphere::Atmosphere;
use crate::consts::AIR_RADIATION_LENGTH_G_CM2;
use crate::numerics::{Stage, Stream};
use crate::shower::cascade::{
    CascadeParticle, CascadeSpecies, Cuts, Environment, compton, pair, transport,
};
use crate::shower::profile::{Emitter, EmitterNode, EmitterTable, GaisserHillas};

use super::recorder::{BIN_G_CM2, Recorder, Sample};
use super::shape::moments_fit;
use super::showers::{LibraryShower, library};

/// What a calibration runs.
#[derive(Clone, Debug)]
pub struct CalibrationSettings {
    /// Seed.
    pub seed: u64,
    /// Energy above which particles are counted and sampled, GeV.
    pub floor_gev: f64,
    /// Shower ages of the nodes.
    pub ages: Vec<f64>,
    /// Half width in age of the window around a node.
    pub window: f64,
    /// Samples kept per node.
    pub samples: usize,
    /// Energies (GeV) and numbers of showers that fill the nodes, one energy after another.
    pub emitter_runs: Vec<(f64, u64)>,
    /// Energies (GeV) and numbers of showers of the development statistics, per primary.
    pub development_runs: Vec<(f64, u64)>,
    /// Energies (GeV) and numbers of photon showers of the library, rising in energy.
    pub gamma_library: Vec<(f64, u64)>,
    /// The same of electron showers.
    pub electron_library: Vec<(f64, u64)>,
}

impl CalibrationSettings {
    /// What the shipped tables were made with; `scale` multiplies the numbers of showers.
    pub fn shipped(seed: u64, scale: f64) -> Self {
        let runs = |list: &[(f64, f64)]| {
            list.iter().map(|&(e, n)| (e, (n * scale).ceil().max(4.0) as u64)).collect()
        };
        Self {
            seed,
            floor_gev: 0.020,
            ages: vec![0.1, 0.25, 0.4, 0.55, 0.7, 0.85, 1.0, 1.15, 1.3, 1.45, 1.65, 1.9],
            window: 0.03,
            samples: 2500,
            emitter_runs: runs(&[(8.0, 12000.0), (40.0, 4000.0), (250.0, 1200.0), (2000.0, 150.0)]),
            development_runs: runs(&[
                (5.0, 8000.0),
                (10.0, 8000.0),
                (30.0, 4000.0),
                (100.0, 2000.0),
                (300.0, 1000.0),
                (1e3, 500.0),
                (3e3, 200.0),
            ]),
            gamma_library: runs(&[
                (0.3, 300.0),
                (0.6, 300.0),
                (1.2, 300.0),
                (2.5, 400.0),
                (5.0, 800.0),
                (8.0, 1000.0),
                (15.0, 900.0),
                (40.0, 700.0),
                (80.0, 600.0),
                (250.0, 300.0),
                (800.0, 200.0),
                (2.5e3, 120.0),
                (8e3, 60.0),
            ]),
            electron_library: runs(&[
                (0.3, 150.0),
                (1.2, 200.0),
                (5.0, 300.0),
                (15.0, 350.0),
                (40.0, 300.0),
                (80.0, 250.0),
                (250.0, 150.0),
                (800.0, 100.0),
                (2.5e3, 60.0),
                (8e3, 30.0),
            ]),
        }
    }
}

/// Development statistics of one primary and energy.
///
/// The three variables are ln(depth of maximum after the first interaction / g cm-2),
/// ln(scale length / g cm-2) and ln(track length / (g cm-2 GeV) per energy).
#[derive(Clone, Copy, Debug)]
pub struct DevelopmentRow {
    /// The primary.
    pub species: CascadeSpecies,
    /// Its energy, GeV.
    pub energy_gev: f64,
    /// Number of showers that could be fitted; zero for rows reached by theory.
    pub showers: u64,
    /// Mean depth of the first interaction, g/cm2; zero for charged primaries.
    pub mean_start_g_cm2: f64,
    /// Means of the three variables.
    pub mean: [f64; 3],
    /// Covariances 00, 01, 02, 11, 12, 22.
    pub covariance: [f64; 6],
}

/// Everything the fast engine needs.
#[derive(Clone, Debug)]
pub struct Calibration {
    /// The emitters.
    pub emitters: EmitterTable,
    /// The development, by primary then energy.
    pub development: Vec<DevelopmentRow>,
    /// The library of profiles, by primary then energy.
    pub library: Vec<LibraryShower>,
}

/// One recorded shower.
pub struct RecordedShower {
    /// Its samples.
    pub samples: Vec<Sample>,
    /// Particles above the floor by depth bin.
    pub profile: Vec<f64>,
    /// Depth of the first interaction, g/cm2.
    pub start_g_cm2: f64,
}

/// Altitude where vertical primaries are let in, m.
const TOP_M: f64 = 90_000.0;

/// Runs one vertical shower without field.
pub fn recorded_shower(
    environment: &Environment,
    species: CascadeSpecies,
    energy_gev: f64,
    floor_gev: f64,
    spacing_g_cm2: f64,
    key: (u64, u64),
) -> RecordedShower {
    let identity = [species as u64, energy_gev.to_bits(), key.1];
    let mut stream = Stream::keyed(key.0, Stage::Shower, &identity);
    let samples = Stream::keyed(key.0, Stage::Table, &identity);
    let start = TOP_M - environment.observer_altitude_m;
    let mut recorder = Recorder::new(&environment.air, floor_gev, spacing_g_cm2, start, samples);
    let primary = CascadeParticle::new(
        species,
        energy_gev,
        Vector3::new(0.0, 0.0, start),
        Vector3::new(0.0, 0.0, -1.0),
        0.0,
    );
    transport(vec![primary], environment, &mut stream, &mut recorder);
    let start_g_cm2 = recorder.first_depth_g_cm2.unwrap_or(0.0);
    RecordedShower { samples: recorder.samples, profile: recorder.profile, start_g_cm2 }
}

impl Calibration {
    /// Runs everything; deterministic for any number of threads.
    pub fn new(atmosphere: &Atmosphere, settings: &CalibrationSettings) -> Self {
        let cuts = Cuts::at_threshold(settings.floor_gev);
        let environment = Environment::new(atmosphere, 0.0, Vector3::zeros(), cuts);
        let emitters = emitters(&environment, settings);
        let development = [CascadeSpecies::Gamma, CascadeSpecies::Electron]
            .into_iter()
            .flat_map(|species| {
                let runs = settings.development_runs.iter();
                let mut rows: Vec<_> =
                    runs.map(|&run| development(&environment, settings, species, run)).collect();
                if let Some(last) = rows.last().copied() {
                    rows.extend(EXTRAPOLATED_GEV.map(|energy| extrapolated(&last, energy)));
                }
                rows
            })
            .collect();
        let library = library(&environment, settings);
        Self { emitters, development, library }
    }
}

/// Energies reached by theory from the last energy that is run, GeV.
const EXTRAPOLATED_GEV: [f64; 3] = [1e4, 3e4, 1e5];

/// The development at a higher energy: the maximum goes deeper by one radiation length per factor
/// e, its spread in g/cm2, the scale length and the track length per energy stay as they are.
///
/// # Validity
/// From 3 TeV; runs of 48, 16 and 5 photons at 10, 30 and 100 TeV gave maxima of 353 +- 4, 409 +- 6
/// and 453 +- 14 g/cm2 after the first interaction where this gives 357, 397 and 441.
///
/// # Source
/// Rossi 1952, approximation B: t_max = ln(E / E_c) + constant.
fn extrapolated(last: &DevelopmentRow, energy_gev: f64) -> DevelopmentRow {
    let depth = last.mean[0].exp();
    let deeper = depth + AIR_RADIATION_LENGTH_G_CM2 * (energy_gev / last.energy_gev).ln();
    let ratio = depth / deeper;
    let [uu, uv, uw, vv, vw, ww] = last.covariance;
    DevelopmentRow {
        energy_gev,
        showers: 0,
        mean_start_g_cm2: mean_start_g_cm2(last.species, energy_gev),
        mean: [deeper.ln(), last.mean[1], last.mean[2]],
        covariance: [uu * ratio * ratio, uv * ratio, uw * ratio, vv, vw, ww],
        ..*last
    }
}

/// Mean depth of a photon's first interaction, g/cm2; zero for charged primaries.
fn mean_start_g_cm2(species: CascadeSpecies, energy_gev: f64) -> f64 {
    if species == CascadeSpecies::Gamma {
        1.0 / (pair::pair_cm2_g(energy_gev) + compton::compton_cm2_g(energy_gev))
    } else {
        0.0
    }
}

struct Gathering {
    candidates: Vec<Vec<(u64, Emitter)>>,
    track: Vec<f64>,
    fitted: Vec<f64>,
}

/// Candidates kept per sample that ships: they are thinned evenly in energy at the end.
const CANDIDATES: usize = 16;

fn emitters(environment: &Environment, settings: &CalibrationSettings) -> EmitterTable {
    let runs = settings.emitter_runs.iter();
    EmitterTable {
        floor_gev: settings.floor_gev,
        source: format!("reference cascade, seed {}", settings.seed),
        energies_gev: runs.clone().map(|run| run.0).collect(),
        nodes: runs.flat_map(|&run| emitters_of(environment, settings, run)).collect(),
    }
}

fn emitters_of(
    environment: &Environment,
    settings: &CalibrationSettings,
    (energy_gev, showers): (f64, u64),
) -> Vec<EmitterNode> {
    let nodes = settings.ages.len();
    let mut all = Gathering {
        candidates: vec![Vec::new(); nodes],
        track: vec![0.0; nodes],
        fitted: vec![0.0; nodes],
    };
    for first in (0..showers).step_by(16) {
        let batch: Vec<_> = (first..(first + 16).min(showers))
            .into_par_iter()
            .filter_map(|shower| gather(environment, settings, energy_gev, shower))
            .collect();
        for part in batch {
            merge(&mut all, part, settings.samples * CANDIDATES);
        }
    }
    let nodes = settings.ages.iter().zip(all.candidates).enumerate();
    let nodes = nodes.map(|(place, (&age, mut candidates))| {
        candidates
            .sort_by(|a, b| a.1.energy_gev.total_cmp(&b.1.energy_gev).then_with(|| a.0.cmp(&b.0)));
        let kept = settings.samples.min(candidates.len());
        let emitters = (0..kept)
            .map(|rank| candidates[(2 * rank + 1) * candidates.len() / (2 * kept)].1)
            .collect();
        EmitterNode { age, fraction: all.track[place] / all.fitted[place], emitters }
    });
    nodes.collect()
}

fn gather(
    environment: &Environment,
    settings: &CalibrationSettings,
    energy_gev: f64,
    shower: u64,
) -> Option<Gathering> {
    let species = CascadeSpecies::Gamma;
    let key = (settings.seed, shower);
    // One sample per g/cm2 up to 50 GeV, rarer above.
    let spacing = (energy_gev / 50.0).clamp(1.0, 8.0);
    let recorded =
        recorded_shower(environment, species, energy_gev, settings.floor_gev, spacing, key);
    let fit = moments_fit(&recorded.profile, recorded.start_g_cm2)?;
    let identity = [99, energy_gev.to_bits(), shower];
    let mut stream = Stream::keyed(settings.seed, Stage::Table, &identity);
    let nodes = settings.ages.len();
    let mut candidates = vec![Vec::new(); nodes];
    let node_of = |depth: f64| {
        let age = fit.age(depth);
        settings.ages.iter().position(|node| (node - age).abs() < settings.window)
    };
    for sample in &recorded.samples {
        if let Some(node) = node_of(sample.depth_g_cm2) {
            candidates[node].push((stream.bits(), sample.emitter));
        }
    }
    let (mut track, mut fitted) = (vec![0.0; nodes], vec![0.0; nodes]);
    for (bin, size) in recorded.profile.iter().enumerate() {
        let depth = (bin as f64 + 0.5) * BIN_G_CM2;
        if let Some(node) = node_of(depth) {
            track[node] += size / energy_gev;
            fitted[node] += fit.size(depth) / energy_gev;
        }
    }
    Some(Gathering { candidates, track, fitted })
}

fn merge(all: &mut Gathering, part: Gathering, limit: usize) {
    for (kept, mut new) in all.candidates.iter_mut().zip(part.candidates) {
        kept.append(&mut new);
        if kept.len() > 2 * limit {
            thin(kept, limit);
        }
    }
    for (sum, value) in all.track.iter_mut().zip(&part.track) {
        *sum += value;
    }
    for (sum, value) in all.fitted.iter_mut().zip(&part.fitted) {
        *sum += value;
    }
}

/// Keeps the candidates with the smallest random keys: an unbiased sample of all seen so far.
fn thin(candidates: &mut Vec<(u64, Emitter)>, limit: usize) {
    candidates.select_nth_unstable_by_key(limit, |candidate| candidate.0);
    candidates.truncate(limit);
}

fn development(
    environment: &Environment,
    settings: &CalibrationSettings,
    species: CascadeSpecies,
    (energy_gev, showers): (f64, u64),
) -> DevelopmentRow {
    let fits: Vec<(f64, GaisserHillas)> = (0..showers)
        .into_par_iter()
        .filter_map(|shower| {
            let key = (settings.seed ^ 0xD5, shower);
            let recorded = recorded_shower(
                environment,
                species,
                energy_gev,
                settings.floor_gev,
                f64::INFINITY,
                key,
            );
            let fit = moments_fit(&recorded.profile, recorded.start_g_cm2)?;
            Some((recorded.start_g_cm2, fit))
        })
        .collect();
    let count = fits.len() as f64;
    let variables: Vec<[f64; 3]> = fits
        .iter()
        .map(|(start, fit)| {
            [
                (fit.max_g_cm2 - start).ln(),
                fit.length_g_cm2.ln(),
                (fit.track_g_cm2 / energy_gev).ln(),
            ]
        })
        .collect();
    let mean = [0, 1, 2].map(|i| variables.iter().map(|v| v[i]).sum::<f64>() / count);
    let covariance = [(0, 0), (0, 1), (0, 2), (1, 1), (1, 2), (2, 2)].map(|(i, j)| {
        let sum: f64 = variables.iter().map(|v| (v[i] - mean[i]) * (v[j] - mean[j])).sum();
        sum / (count - 1.0)
    });
    DevelopmentRow {
        species,
        energy_gev,
        showers: fits.len() as u64,
        mean_start_g_cm2: mean_start_g_cm2(species, energy_gev),
        mean,
        covariance,
    }
}
