//! Photon density about the axis of cascades.

use core::f64::consts::PI;

use nalgebra::Vector3;
use rayon::prelude::*;

use crate::atmosphere::Atmosphere;
use crate::consts::{EARTH_RADIUS_M, ELECTRON_MASS_GEV};
use crate::light::cherenkov::threshold_energy_gev;
use crate::light::column::{Detector, REFERENCE_NM, Transmission};
use crate::numerics::{Stage, Stream};
use crate::shower::cascade::air::AirTable;
use crate::shower::cascade::{
    CascadeParticle, CascadeSpecies, Cuts, Environment, TrackSink, TrackStep,
};
use crate::shower::{Direction, Primary, Species};

use super::rays::{Ray, Window, emit};
use super::shower::Descent;
use super::yields::Yields;

/// What is asked for.
pub struct PoolRequest<'a> {
    /// The primary.
    pub primary: Primary,
    /// The air.
    pub atmosphere: &'a Atmosphere,
    /// Its transmission to the observer (the constant 1 for none).
    pub transmission: &'a Transmission<'a>,
    /// Altitude of the core, m.
    pub observer_altitude_m: f64,
    /// Magnetic field (east, north, up), uT.
    pub field_ut: Vector3<f64>,
    /// Band and efficiency.
    pub detector: Detector<'a>,
    /// Distances from the axis, m.
    pub distances_m: &'a [f64],
    /// One direction on the ground from the core (from north through east, rad) instead of the
    /// mean over all.
    pub bearing_rad: Option<f64>,
    /// Number of showers.
    pub showers: u64,
    /// Seed.
    pub seed: u64,
}

/// Densities of every shower.
#[derive(Clone, Debug)]
pub struct PoolDensity {
    /// Distances from the axis, m.
    pub distances_m: Vec<f64>,
    /// By shower, then distance: quanta per m2 of a plane across the axis.
    pub showers_m2: Vec<Vec<f64>>,
    /// Quanta drawn per unit of density in each ring, m2: the ring's area times the share drawn.
    pub drawn_m2: Vec<f64>,
}

impl PoolDensity {
    /// Mean, error of the mean and shower-to-shower RMS at each distance, per m2.
    ///
    /// The Poisson variance of the drawn quanta, mean / drawn area, is part of the error but not of
    /// the RMS.
    pub fn summary(&self) -> Vec<[f64; 3]> {
        let count = self.showers_m2.len() as f64;
        (0..self.distances_m.len())
            .map(|place| {
                let values = self.showers_m2.iter().map(|shower| shower[place]);
                let mean = values.clone().sum::<f64>() / count;
                let square = values.map(|value| (value - mean).powi(2)).sum::<f64>();
                let variance = square / (count - 1.0).max(1.0);
                let rms = (variance - mean / self.drawn_m2[place]).max(0.0).sqrt();
                [mean, (variance / count).sqrt(), rms]
            })
            .collect()
    }
}

/// Half the width of the ring around a distance, m: 4 % of the distance, at least 2.5 m.
///
/// The mean over such a ring differs from the density at its middle by w^2/6 times its curvature:
/// below 0.5 % for the light pool outside 10 m.
pub fn half_width_m(distance_m: f64) -> f64 {
    (0.04 * distance_m).max(2.5)
}

/// Half the opening of the two sectors that stand for one bearing, rad.
const HALF_SECTOR_RAD: f64 = 0.2;

/// Share of the quanta drawn: all up to 8 GeV, then in proportion to 1/E. A ring beyond 50 m then
/// holds thousands of drawn quanta; their own noise is taken off the RMS in
/// [`PoolDensity::summary`].
fn drawn_share(energy_gev: f64) -> f64 {
    (8.0 / energy_gev).min(1.0)
}

/// Cuts that lose no light above an observer: the threshold in the air at the observer.
pub fn light_cuts(atmosphere: &Atmosphere, observer_altitude_m: f64) -> Cuts {
    let refractivity = atmosphere.refractivity(observer_altitude_m, REFERENCE_NM);
    Cuts::at_threshold(threshold_energy_gev(refractivity, ELECTRON_MASS_GEV))
}

/// Distance along an axis from the core to an altitude, m, on a spherical Earth.
pub fn axis_distance_m(direction: Direction, observer_altitude_m: f64, altitude_m: f64) -> f64 {
    let radius = EARTH_RADIUS_M + observer_altitude_m;
    let rise = altitude_m - observer_altitude_m;
    let far = radius + rise;
    let (sin, cos) = direction.zenith_rad.sin_cos();
    let root = (far * far - (radius * sin).powi(2)).sqrt();
    rise * (far + radius) / (root + radius * cos)
}

/// The cascade's name of an electromagnetic primary.
pub fn cascade_species(species: Species) -> Option<CascadeSpecies> {
    match species {
        Species::Gamma => Some(CascadeSpecies::Gamma),
        Species::Electron => Some(CascadeSpecies::Electron),
        Species::Positron => Some(CascadeSpecies::Positron),
        _ => None,
    }
}

/// A primary at the top of the air, on an axis through the origin, at time zero, and the time when
/// a plane front at the speed of light reaches the origin, ns.
pub fn incoming(
    species: CascadeSpecies,
    energy_gev: f64,
    direction: Direction,
    observer_altitude_m: f64,
    atmosphere: &Atmosphere,
) -> (CascadeParticle, f64) {
    let top = atmosphere.top_m() - 100.0;
    let distance = axis_distance_m(direction, observer_altitude_m, top);
    let to_source = direction.to_source();
    let particle = CascadeParticle::new(species, energy_gev, to_source * distance, -to_source, 0.0);
    (particle, distance / crate::consts::SPEED_OF_LIGHT_M_NS)
}

/// Densities of showers about their axis.
///
/// Every shower has its own random stream: the result does not depend on the number of threads.
pub fn pool_density(request: &PoolRequest<'_>) -> PoolDensity {
    let cuts = light_cuts(request.atmosphere, request.observer_altitude_m);
    let environment =
        Environment::new(request.atmosphere, request.observer_altitude_m, request.field_ut, cuts);
    let yields = Yields::new(
        request.atmosphere,
        request.transmission,
        request.observer_altitude_m,
        request.primary.direction.zenith_rad,
        core::slice::from_ref(&request.detector),
    );
    let descent = Descent::new(request.atmosphere, &environment, request.primary.direction);
    let energy_gev = request.primary.energy_gev;
    let showers_m2 = (0..request.showers)
        .into_par_iter()
        .map(|shower| {
            let key = [energy_gev.to_bits(), shower];
            let mut stream = Stream::keyed(request.seed, Stage::Shower, &key);
            let light = Stream::keyed(request.seed, Stage::Image, &key);
            let mut rings = Rings::new(request, &environment.air, &yields, light);
            descent.shower(&request.primary, &mut stream, &mut rings);
            rings.densities_m2()
        })
        .collect();
    let sector = if request.bearing_rad.is_some() { HALF_SECTOR_RAD } else { PI };
    let drawn = |&distance: &f64| {
        let half = half_width_m(distance);
        let (inner, outer) = ((distance - half).max(0.0), distance + half);
        drawn_share(energy_gev) * sector * (outer * outer - inner * inner)
    };
    let drawn_m2 = request.distances_m.iter().map(drawn).collect();
    PoolDensity { distances_m: request.distances_m.to_vec(), showers_m2, drawn_m2 }
}

/// A sink that counts quanta in rings of the plane through the core across the axis.
pub struct Rings<'a> {
    air: &'a AirTable,
    yields: &'a Yields,
    stream: Stream,
    to_source: Vector3<f64>,
    /// Share of the quanta drawn.
    pub share: f64,
    bearing: Option<(f64, f64)>,
    /// Ring bounds squared, m2, sorted as the distances were given.
    bounds_m2: Vec<(f64, f64)>,
    counts: Vec<u64>,
}

impl<'a> Rings<'a> {
    /// Rings for one shower of a request.
    pub fn new(
        request: &PoolRequest<'_>,
        air: &'a AirTable,
        yields: &'a Yields,
        stream: Stream,
    ) -> Self {
        let bound = |&distance: &f64| {
            let half = half_width_m(distance);
            ((distance - half).max(0.0).powi(2), (distance + half).powi(2))
        };
        Self {
            air,
            yields,
            stream,
            to_source: request.primary.direction.to_source(),
            share: drawn_share(request.primary.energy_gev),
            bearing: request.bearing_rad.map(f64::sin_cos),
            bounds_m2: request.distances_m.iter().map(bound).collect(),
            counts: vec![0; request.distances_m.len()],
        }
    }

    /// Quanta per m2 in each ring.
    pub fn densities_m2(&self) -> Vec<f64> {
        let sector = if self.bearing.is_some() { HALF_SECTOR_RAD } else { PI };
        let density = |(count, bounds): (&u64, &(f64, f64))| {
            *count as f64 / (self.share * sector * (bounds.1 - bounds.0))
        };
        self.counts.iter().zip(&self.bounds_m2).map(density).collect()
    }
}

/// Adds a ray to the rings it falls into.
fn count(
    ray: &Ray,
    to_source: &Vector3<f64>,
    bearing: Option<(f64, f64)>,
    bounds_m2: &[(f64, f64)],
    counts: &mut [u64],
) {
    let approach = ray.direction.dot(to_source);
    if approach >= 0.0 {
        return;
    }
    let path = -ray.position.dot(to_source) / approach;
    if path < 0.0 {
        return;
    }
    let landing = ray.position + ray.direction * path;
    let square = landing.norm_squared();
    if let Some((sin, cos)) = bearing {
        // Along the axis down to the ground.
        let ground = landing - to_source * (landing.z / to_source.z);
        let along = ground.x * sin + ground.y * cos;
        if along < ground.x.hypot(ground.y) * HALF_SECTOR_RAD.cos() {
            return;
        }
    }
    for (count, bounds) in counts.iter_mut().zip(bounds_m2) {
        *count += u64::from(square >= bounds.0 && square < bounds.1);
    }
}

impl TrackSink for Rings<'_> {
    fn step(&mut self, step: &TrackStep) {
        let Self { air, yields, stream, to_source, share, bearing, bounds_m2, counts } = self;
        emit(step, air, yields, *share, &Window::open(), stream, |ray| {
            count(ray, to_source, *bearing, bounds_m2, counts);
        });
    }
}
