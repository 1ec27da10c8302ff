//! What a study asks for, in the terms of the stages.

use core::f64::consts::PI;

use nalgebra::Vector3;

use crate::atmosphere::{Extinction, TransmissionTable};
use crate::consts::SPEED_OF_LIGHT_M_NS;
use crate::light::{Detector, LightModel, LightSettings};
use crate::numerics::{Stage, Stream};
use crate::rates::{Spectrum, SpectrumError, dipole_latitude_rad, vertical_cutoff_gv};
use crate::response::{Column, SHOWERS_PER_WORD, Throw};
use crate::shower::profile::EmitterTable;
use crate::shower::profile::shipped::DevelopmentTable;
use crate::shower::{Direction, Species};
use crate::study::{self, Study};
use crate::telescope::{Accidental, QuietError, TelescopeKind, Threshold};
use crate::units::radians;

use super::reach;

/// Slabs of air: converged to 1 % (test `verify_pool_converges_in_slabs_and_samples`).
const SLABS: usize = 36;
/// Gamma energies are thrown as E to this negative power: flatter than a source, so that areas at
/// high energies are known too.
const GAMMA_INDEX: f64 = 1.5;
/// The same for backgrounds: near the flux times the root of the trigger probability, which makes
/// the error of the rate smallest.
const BACKGROUND_INDEX: f64 = 2.0;

/// Centre and extent of the telescopes are rounded to this, m, so that a pad more or less does not
/// move the throw and a stored table can be extended.
const ROUNDED_M: f64 = 50.0;
/// Words of a ring in one repetition of a throw: more showers are more repetitions, which extend a
/// stored table.
const REPEATED_WORDS: usize = 64;

/// The band in which the light pool is reported, nm.
pub const POOL_BAND_NM: (f64, f64) = (300.0, 600.0);
/// Radius of the disc on which the light of single muons is averaged for the pool, m.
const POOL_DISC_M: f64 = 5.0;

pub fn pointing(study: &Study) -> Direction {
    Direction {
        zenith_rad: radians(study.pointing.zenith_deg),
        azimuth_rad: radians(study.pointing.azimuth_deg),
    }
}

pub fn field_ut(study: &Study) -> Vector3<f64> {
    study.site.field_ut.map_or_else(Vector3::zeros, Vector3::from)
}

/// The reference source's spectrum, and one for each background.
pub fn spectra(study: &Study) -> Result<(Spectrum, Vec<Spectrum>), SpectrumError> {
    let gamma = resolve(&study.sources[0].spectrum)?;
    let backgrounds = study.backgrounds.iter().map(|background| resolve(&background.spectrum));
    Ok((gamma, backgrounds.collect::<Result<_, _>>()?))
}

/// The spectra of all gamma-ray sources.
pub fn sources(study: &Study) -> Result<Vec<Spectrum>, SpectrumError> {
    study.sources.iter().map(|source| resolve(&source.spectrum)).collect()
}

fn resolve(spectrum: &study::Spectrum) -> Result<Spectrum, SpectrumError> {
    match spectrum {
        study::Spectrum::Named(name) => Spectrum::named(name),
        study::Spectrum::PowerLaw { flux_m2_s_tev, pivot_tev, index, cutoff_tev } => {
            Ok(Spectrum::power_law(*flux_m2_s_tev, *pivot_tev, *index, *cutoff_tev))
        }
    }
}

/// The extinction a study asks for.
pub fn extinction(study: &Study) -> Extinction {
    Extinction {
        rayleigh: study.air.molecular,
        aerosol: study.air.aerosol,
        ozone: study.air.ozone,
        aerosol_depth_550nm: study.air.aerosol_depth_550nm,
        angstrom_exponent: study.air.angstrom_exponent,
        aerosol_scale_height_m: study.air.aerosol_scale_height_m,
    }
}

/// Transmission from anywhere to the site.
pub fn transmission(study: &Study) -> TransmissionTable {
    TransmissionTable::new(&extinction(study), &study.air.atmosphere, study.site.altitude_m)
}

/// Detection efficiency of each kind by wavelength.
pub fn efficiencies(study: &Study) -> Vec<impl Fn(f64) -> f64 + Sync + '_> {
    study.kinds.iter().map(|kind| move |nm: f64| kind.efficiency(nm)).collect()
}

/// The kinds as detectors of light.
pub fn detectors<'a>(
    study: &'a Study,
    efficiencies: &'a [impl Fn(f64) -> f64 + Sync],
) -> Vec<Detector<'a>> {
    let mut detectors = Vec::with_capacity(study.kinds.len());
    for (kind, efficiency) in study.kinds.iter().zip(efficiencies) {
        detectors.push(Detector { name: &kind.name, band_nm: kind.band_nm(), efficiency });
    }
    detectors
}

/// How electromagnetic showers develop: the table that ships.
pub fn developments() -> DevelopmentTable {
    DevelopmentTable::shipped().expect("the table that ships is whole")
}

/// Light tables for the study's kinds, in their order, and last for plain photons.
pub fn light_model(study: &Study) -> LightModel {
    let table = EmitterTable::shipped().expect("the table that ships is whole");
    let (air, altitude_m) = (&study.air.atmosphere, study.site.altitude_m);
    let through = transmission(study);
    let settings = LightSettings {
        atmosphere: air,
        transmission: &|emission_m, zenith_rad, wavelength_nm| {
            through.transmission(emission_m, zenith_rad, wavelength_nm)
        },
        observer_altitude_m: altitude_m,
        zenith_rad: radians(study.pointing.zenith_deg),
        transverse_field_ut: field_ut(study).cross(&pointing(study).to_source()).norm(),
        emitters: &table,
        slabs: SLABS,
    };
    let efficiencies = efficiencies(study);
    let mut detectors = detectors(study, &efficiencies);
    detectors.push(Detector { name: "photons", band_nm: POOL_BAND_NM, efficiency: &|_| 1.0 });
    let radius = |kind: &TelescopeKind| (kind.collecting_area_m2() / PI).sqrt();
    let radii = study.kinds.iter().map(radius).chain([POOL_DISC_M]).collect();
    LightModel::new(&settings, &detectors).with_disc_radii_m(radii)
}

/// Accidental triggers of each kind under a sky.
pub fn accidentals(study: &Study, sky_per_ns: &[f64]) -> Vec<Accidental> {
    let kinds = study.kinds.iter().zip(sky_per_ns);
    kinds.map(|(kind, &sky)| Accidental::of(kind, sky)).collect()
}

/// The pixel threshold of each kind; `None` for those that depend on the layout.
pub fn thresholds_pe(
    study: &Study,
    accidental: &[Accidental],
) -> Result<Vec<Option<f64>>, QuietError> {
    let kinds = study.kinds.iter().zip(accidental);
    kinds
        .map(|(kind, accidental)| match kind.threshold {
            Threshold::FixedPe(pe) => Ok(Some(pe)),
            Threshold::QuietHz(rate) => accidental.quiet_threshold_pe(&kind.name, rate).map(Some),
            Threshold::Quiet => Ok(None),
        })
        .collect()
}

/// What is taken off the time of each column: the way of a plane front from the pointing, ns.
pub fn front_ns<'a>(study: &Study, columns: impl Iterator<Item = &'a Column>) -> Vec<f64> {
    let towards = pointing(study).to_source();
    let front = |column: &Column| match study.trigger.delays_compensated {
        true => -Vector3::from(column.position_m).dot(&towards) / SPEED_OF_LIGHT_M_NS,
        false => 0.0,
    };
    columns.map(front).collect()
}

/// How gammas are thrown, and how often the throw is repeated.
pub fn gamma_throw(study: &Study, columns: &[Column]) -> (Throw, usize) {
    let energy_gev = study.budget.gamma_energy_gev;
    let (throw, repetitions) =
        throw(study, Species::Gamma, energy_gev, 0.0, study.budget.gamma_showers, columns);
    (Throw { pointing: source(study), ..throw }, repetitions)
}

/// Where gamma rays come from: the pointing, or a place beside it in the camera.
fn source(study: &Study) -> Direction {
    let centre = pointing(study);
    let offset = radians(study.pointing.source_offset_deg);
    if offset == 0.0 {
        return centre;
    }
    let (right, up) = centre.transverse();
    let (sin, cos) = radians(study.pointing.source_bearing_deg).sin_cos();
    let aside = right * sin + up * cos;
    Direction::of(&(centre.to_source() * offset.cos() + aside * offset.sin()))
}

/// Vertical geomagnetic cutoff of the site, GV; zero if the study states no field.
pub fn cutoff_gv(study: &Study) -> f64 {
    study.site.field_ut.map_or(0.0, |[east, north, up]| {
        vertical_cutoff_gv(dipole_latitude_rad(up.atan2(east.hypot(north))))
    })
}

/// How a background is thrown, and how often the throw is repeated.
pub fn background_throw(study: &Study, species: Species, columns: &[Column]) -> (Throw, usize) {
    let cone = radians(study.pointing.cone_half_angle_deg);
    let mut energy_gev = study.budget.background_energy_gev;
    if matches!(species, Species::Electron | Species::Positron) {
        // A rigidity in GV is an energy in GeV for them.
        energy_gev[0] = energy_gev[0].max(cutoff_gv(study)).min(0.5 * energy_gev[1]);
    }
    throw(study, species, energy_gev, cone, study.budget.background_showers, columns)
}

fn throw(
    study: &Study,
    species: Species,
    energy_gev: [f64; 2],
    cone_rad: f64,
    showers: u64,
    columns: &[Column],
) -> (Throw, usize) {
    let (centre_m, extent) = centre_and_extent_m(columns);
    let zenith_rad = radians(study.pointing.zenith_deg);
    let rings_m = match study.budget.impact_radius_m {
        Some(outer) => vec![0.3 * outer, 0.6 * outer, outer],
        None => reach::rings_m(extent, zenith_rad, cone_rad > 0.0),
    };
    let words = (showers as usize).div_ceil(SHOWERS_PER_WORD * rings_m.len()).max(8);
    let repetitions = words.div_ceil(REPEATED_WORDS);
    let words = words.min(REPEATED_WORDS);
    let throw = Throw {
        species,
        seed: study.seed,
        energy_gev: (energy_gev[0], energy_gev[1]),
        index: if cone_rad > 0.0 { BACKGROUND_INDEX } else { GAMMA_INDEX },
        pointing: pointing(study),
        cone_rad,
        centre_m,
        rings_m,
        words,
    };
    (throw, repetitions)
}

/// A stream for tables of the report, by purpose and number.
pub fn table_stream(study: &Study, purpose: u64, number: u64) -> Stream {
    Stream::keyed(study.seed, Stage::Table, &[purpose, number])
}

/// Middle of the telescopes and distance of the outermost from it, m, both rounded outward to
/// [`ROUNDED_M`].
fn centre_and_extent_m(columns: &[Column]) -> ([f64; 2], f64) {
    let middle = |axis: usize| {
        let places = || columns.iter().map(|column| column.position_m[axis]);
        let (low, high) =
            (places().fold(f64::INFINITY, f64::min), places().fold(f64::NEG_INFINITY, f64::max));
        (0.5 * (low + high) / ROUNDED_M).round() * ROUNDED_M
    };
    let centre_m = [middle(0), middle(1)];
    let extent = columns
        .iter()
        .map(|c| (c.position_m[0] - centre_m[0]).hypot(c.position_m[1] - centre_m[1]))
        .fold(0.0, f64::max);
    (centre_m, (extent / ROUNDED_M).ceil() * ROUNDED_M)
}
