//! What happens at a collision of a charged particle.

use core::f64::consts::TAU;

use nalgebra::Vector3;

use crate::consts::ELECTRON_MASS_GEV;

use super::collisions;
use super::particle::{CascadeParticle, CascadeSpecies};
use super::scattering;
use super::transport::{Shower, basis};

/// The kind of collision.
#[derive(Clone, Copy, Debug)]
pub(super) enum Vertex {
    /// Radiation of a hard photon.
    Radiation,
    /// A knock-on electron above the cut.
    KnockOn,
    /// Annihilation of a positron in flight.
    Annihilation,
    /// A large-angle scattering.
    Scattering {
        /// Square of the smallest angle.
        edge_rad2: f64,
    },
}

/// A direction turned by an angle of given cosine at the azimuth (cos, sin).
#[inline]
pub(super) fn turned(
    direction: &Vector3<f64>,
    cosine: f64,
    (cos, sin): (f64, f64),
) -> Vector3<f64> {
    let sine = (1.0 - cosine * cosine).max(0.0).sqrt();
    let (across, up) = basis(direction);
    let result = direction * cosine + (across * cos + up * sin) * sine;
    result / result.norm()
}

/// Cosine of an emission angle: theta = u m / E with u^2 / (1 + u^2) uniform, the leading form
/// (1 + u^2)^-2 of radiation and pair production, cut at theta = pi / 2.
///
/// # Source
/// Koch & Motz 1959, Rev. Mod. Phys. 31, 920 (small angles; from memory).
#[inline]
pub(super) fn emission_cosine(u: f64, energy_gev: f64) -> f64 {
    (u * ELECTRON_MASS_GEV / energy_gev).min(core::f64::consts::FRAC_PI_2).cos()
}

impl Shower<'_> {
    /// Draws u of [`emission_cosine`].
    #[inline]
    pub(super) fn emission_u(&mut self) -> f64 {
        let share = self.stream.uniform();
        (share / (1.0 - share)).sqrt()
    }

    /// A random azimuth, as (cos, sin).
    #[inline]
    pub(super) fn azimuth(&mut self) -> (f64, f64) {
        let (sin, cos) = (TAU * self.stream.uniform()).sin_cos();
        (cos, sin)
    }

    /// Carries a collision out; false if the particle is gone.
    pub(super) fn collide(&mut self, particle: &mut CascadeParticle, vertex: Vertex) -> bool {
        match vertex {
            Vertex::Radiation => self.radiate(particle),
            Vertex::KnockOn => self.knock_on(particle),
            Vertex::Annihilation => {
                self.annihilate(particle);
                return false;
            }
            Vertex::Scattering { edge_rad2 } => {
                let cosine = scattering::hard_cosine(edge_rad2, self.stream);
                if cosine < 1.0 {
                    let azimuth = self.azimuth();
                    particle.direction = turned(&particle.direction, cosine, azimuth);
                }
            }
        }
        true
    }

    fn radiate(&mut self, particle: &mut CascadeParticle) {
        let least = self.environment.cuts.soft_photon_gev;
        let energy = particle.energy_gev;
        let photon_gev = self.environment.radiation.energy_gev(energy, least, self.stream);
        particle.energy_gev -= photon_gev;
        if photon_gev <= self.environment.cuts.photon_gev {
            self.ledger.dropped_gev += photon_gev;
            return;
        }
        let cosine = emission_cosine(self.emission_u(), energy);
        let azimuth = self.azimuth();
        let direction = turned(&particle.direction, cosine, azimuth);
        self.push(CascadeParticle {
            species: CascadeSpecies::Gamma,
            energy_gev: photon_gev,
            direction,
            ..*particle
        });
    }

    fn knock_on(&mut self, particle: &mut CascadeParticle) {
        let energy = particle.energy_gev;
        let kinetic = energy - ELECTRON_MASS_GEV;
        let positron = particle.species == CascadeSpecies::Positron;
        let least = self.environment.cuts.electron_gev - ELECTRON_MASS_GEV;
        let share = collisions::knock_on_share(energy, least, positron, self.stream);
        let given = share * kinetic;
        let (cos, sin) = self.azimuth();
        let direction = particle.direction;
        particle.direction =
            turned(&direction, collisions::cosine(kinetic, kinetic - given), (-cos, -sin));
        particle.energy_gev -= given;
        self.ledger.borrowed_gev += ELECTRON_MASS_GEV;
        self.push(CascadeParticle {
            species: CascadeSpecies::Electron,
            energy_gev: given + ELECTRON_MASS_GEV,
            direction: turned(&direction, collisions::cosine(kinetic, given), (cos, sin)),
            ..*particle
        });
    }

    fn annihilate(&mut self, particle: &CascadeParticle) {
        let (share, first, second) = collisions::annihilation(particle.energy_gev, self.stream);
        let total = particle.energy_gev + ELECTRON_MASS_GEV;
        self.ledger.borrowed_gev += ELECTRON_MASS_GEV;
        let (cos, sin) = self.azimuth();
        for (energy_gev, cosine, azimuth) in
            [(share * total, first, (cos, sin)), ((1.0 - share) * total, second, (-cos, -sin))]
        {
            self.push(CascadeParticle {
                species: CascadeSpecies::Gamma,
                energy_gev,
                direction: turned(&particle.direction, cosine, azimuth),
                ..*particle
            });
        }
    }
}
