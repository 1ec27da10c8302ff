//! Photons: free flight, pair production, Compton scattering.

use nalgebra::Vector3;

use crate::consts::{EARTH_RADIUS_M, ELECTRON_MASS_GEV, SPEED_OF_LIGHT_M_NS};

use super::compton;
use super::particle::{CascadeParticle, CascadeSpecies};
use super::transport::Shower;
use super::vertex::{emission_cosine, turned};

/// Flights flatter than this are marched in short steps.
const FLAT_DESCENT: f64 = 0.15;
/// Length of such a step, m.
const MARCH_M: f64 = 250.0;

/// Follows a photon to its end; `first` is told where it interacts first.
pub(super) fn follow(
    shower: &mut Shower<'_>,
    mut photon: CascadeParticle,
    mut first: impl FnMut(&Vector3<f64>),
) {
    loop {
        if photon.energy_gev <= shower.environment.cuts.photon_gev {
            shower.ledger.dropped_gev += photon.energy_gev;
            return;
        }
        shower.ledger.photons += 1;
        let rates = shower.environment.rates.photon(photon.energy_gev);
        let thickness = shower.stream.exponential() / f64::from(rates.total);
        let Some(length) = flight_m(shower, &photon, thickness) else {
            shower.ledger.escaped_gev += photon.energy_gev;
            return;
        };
        photon.position += photon.direction * length;
        photon.time_ns += length / SPEED_OF_LIGHT_M_NS;
        photon.offset_lever += photon.angle_lever * length;
        first(&photon.position);
        if shower.stream.uniform() * f64::from(rates.total) < f64::from(rates.pair) {
            make_pair(shower, &photon);
            return;
        }
        scatter(shower, &mut photon);
    }
}

/// Path to a given mass per area, m; `None` if the ground or the top comes first.
///
/// Downward flights are inverted through the depth table with the mean cosine to the vertical over
/// the flight, cos(s) = cos(0) - s sin^2 / R; flat and upward ones are marched.
fn flight_m(shower: &Shower<'_>, photon: &CascadeParticle, thickness: f64) -> Option<f64> {
    let air = &shower.environment.air;
    let floor = shower.environment.observer_altitude_m;
    let altitude = air.altitude_m(&photon.position);
    let descent = air.descent(&photon.position, &photon.direction);
    if descent < FLAT_DESCENT {
        return march_m(shower, photon, thickness);
    }
    let depth = air.depth_g_cm2(altitude);
    let sink = 0.5 * (1.0 - descent * descent) / EARTH_RADIUS_M;
    let mut mean = descent;
    let mut length = 0.0;
    for _ in 0..3 {
        let end = air.altitude_of_depth_m(depth + thickness * mean);
        if end < floor && mean == descent && sink * (altitude - floor) < 1e-3 * descent * descent {
            return None;
        }
        length = (altitude - end) / mean;
        let next = descent - sink * length;
        if (next - mean).abs() < 1e-6 {
            break;
        }
        mean = next.max(0.5 * descent);
    }
    let end = altitude - mean * length;
    (end > floor).then_some(length)
}

fn march_m(shower: &Shower<'_>, photon: &CascadeParticle, thickness: f64) -> Option<f64> {
    let air = &shower.environment.air;
    let mut left = thickness;
    let mut length = 0.0;
    loop {
        let middle = photon.position + photon.direction * (length + 0.5 * MARCH_M);
        let altitude = air.altitude_m(&middle);
        if altitude < shower.environment.observer_altitude_m || altitude > air.top_m() {
            return None;
        }
        let here = air.density(altitude).0 * MARCH_M;
        if here >= left {
            return Some(length + MARCH_M * left / here);
        }
        left -= here;
        length += MARCH_M;
    }
}

fn make_pair(shower: &mut Shower<'_>, photon: &CascadeParticle) {
    let share = shower.environment.pair.share(photon.energy_gev, shower.stream);
    let small = share * photon.energy_gev;
    let large = photon.energy_gev - small;
    let u = shower.emission_u();
    let (cos, sin) = shower.azimuth();
    let electron_first = shower.stream.uniform() < 0.5;
    let (light, heavy) = if electron_first {
        (CascadeSpecies::Electron, CascadeSpecies::Positron)
    } else {
        (CascadeSpecies::Positron, CascadeSpecies::Electron)
    };
    for (species, energy_gev, azimuth) in [(heavy, large, (cos, sin)), (light, small, (-cos, -sin))]
    {
        let cut = shower.environment.cuts.electron_gev;
        if energy_gev <= cut {
            shower.ledger.dropped_gev += energy_gev;
            continue;
        }
        let direction = turned(&photon.direction, emission_cosine(u, energy_gev), azimuth);
        shower.push(CascadeParticle { species, energy_gev, direction, ..*photon });
    }
}

fn scatter(shower: &mut Shower<'_>, photon: &mut CascadeParticle) {
    let (kept, cosine) = compton::scattering(photon.energy_gev, shower.stream);
    let (cos, sin) = shower.azimuth();
    let energy = photon.energy_gev;
    let kinetic = energy * (1.0 - kept);
    shower.ledger.borrowed_gev += ELECTRON_MASS_GEV;
    let direction = photon.direction;
    let electron_gev = kinetic + ELECTRON_MASS_GEV;
    if electron_gev > shower.environment.cuts.electron_gev {
        let momentum = (kinetic * (kinetic + 2.0 * ELECTRON_MASS_GEV)).sqrt();
        let recoil = ((energy - kept * energy * cosine) / momentum).min(1.0);
        shower.push(CascadeParticle {
            species: CascadeSpecies::Electron,
            energy_gev: electron_gev,
            direction: turned(&direction, recoil, (-cos, -sin)),
            ..*photon
        });
    } else {
        shower.ledger.dropped_gev += electron_gev;
    }
    photon.energy_gev = kept * energy;
    photon.direction = turned(&direction, cosine, (cos, sin));
}
