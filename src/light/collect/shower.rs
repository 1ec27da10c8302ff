//! A shower of any primary in the reference engine: electromagnetic ones as they are, hadrons by
//! their core, whose photons and electrons start cascades and whose muons give light of their own.
//!
//! Light of charged hadrons themselves is left out: a few tracks above threshold against hundreds.

use nalgebra::Vector3;

use crate::atmosphere::Atmosphere;
use crate::consts::{MUON_MASS_GEV, SPEED_OF_LIGHT_M_NS};
use crate::light::column::{AxisPath, Column};
use crate::numerics::Stream;
use crate::shower::cascade::{
    CascadeParticle, CascadeSpecies, Environment, TrackSink, TrackStep, transport,
};
use crate::shower::hadronic::{Axis, Floors, Kind, MuonNode, MuonTrack, core};
use crate::shower::{Direction, Primary, Species};

use super::pool::incoming;

/// Slabs between which depth and distance along the axis are interpolated.
const SLABS: usize = 60;

/// What all showers of one direction share.
pub struct Descent<'a> {
    atmosphere: &'a Atmosphere,
    environment: &'a Environment,
    direction: Direction,
    path: AxisPath,
    frame: [Vector3<f64>; 3],
    bend_ut: [f64; 2],
    floors: Floors,
}

impl<'a> Descent<'a> {
    /// Prepares an axis.
    pub fn new(
        atmosphere: &'a Atmosphere,
        environment: &'a Environment,
        direction: Direction,
    ) -> Self {
        let column = Column::new(atmosphere, environment.observer_altitude_m, SLABS);
        let (across, along) = direction.transverse();
        let to_source = direction.to_source();
        let bend = environment.field_ut.cross(&to_source);
        Self {
            atmosphere,
            environment,
            direction,
            path: column.axis(direction.zenith_rad),
            frame: [across, along, to_source],
            bend_ut: [bend.dot(&across), bend.dot(&along)],
            // Every photon that can make light is followed, each as one.
            floors: Floors {
                photon_gev: environment.cuts.photon_gev,
                thinning: 0.0,
                ..Floors::default()
            },
        }
    }

    /// Time when a plane front at the speed of light reaches the core, ns, if the primary enters
    /// the air at time zero.
    pub fn arrival_ns(&self) -> f64 {
        self.entry(CascadeSpecies::Gamma, 1.0).1
    }

    fn entry(&self, species: CascadeSpecies, energy_gev: f64) -> (CascadeParticle, f64) {
        let altitude = self.environment.observer_altitude_m;
        incoming(species, energy_gev, self.direction, altitude, self.atmosphere)
    }

    /// Follows a primary down; every charged track goes to `sink`.
    pub fn shower(&self, primary: &Primary, stream: &mut Stream, sink: &mut impl TrackSink) {
        let energy_gev = primary.energy_gev;
        let electromagnetic = match primary.species {
            Species::Gamma => Some(CascadeSpecies::Gamma),
            Species::Electron => Some(CascadeSpecies::Electron),
            Species::Positron => Some(CascadeSpecies::Positron),
            _ => None,
        };
        if let Some(species) = electromagnetic {
            let (particle, _) = self.entry(species, energy_gev);
            transport(vec![particle], self.environment, stream, sink);
            return;
        }
        let axis = Axis {
            ground_g_cm2: self.path.ground_depth_g_cm2,
            distance_m: &|depth| self.path.distance_at_m(depth),
            depth_g_cm2: &|distance| self.path.depth_at_g_cm2(distance),
            bend_ut: self.bend_ut,
        };
        let core = core(primary.species, energy_gev, &axis, self.floors, stream);
        let arrival_ns = self.arrival_ns();
        for photon in &core.photons {
            let species = match photon.kind {
                Kind::Electron => CascadeSpecies::Electron,
                Kind::Positron => CascadeSpecies::Positron,
                _ => CascadeSpecies::Gamma,
            };
            let position = self.point(photon.transverse_m, photon.distance_m);
            if position.z <= 0.0 {
                continue;
            }
            let time = arrival_ns + (photon.lag_m - photon.distance_m) / SPEED_OF_LIGHT_M_NS;
            let flight = self.flight(photon.slope);
            let particle = CascadeParticle::new(species, photon.energy_gev, position, flight, time);
            transport(vec![particle], self.environment, stream, sink);
        }
        for muon in &core.muons {
            self.muon(muon, arrival_ns, sink);
        }
    }

    fn muon(&self, muon: &MuonTrack, arrival_ns: f64, sink: &mut impl TrackSink) {
        let time =
            |node: &MuonNode| arrival_ns + (node.lag_m - node.distance_m) / SPEED_OF_LIGHT_M_NS;
        for pair in muon.nodes.windows(2) {
            let (from, to) = (&pair[0], &pair[1]);
            let start = self.point(from.transverse_m, from.distance_m);
            let end = self.point(to.transverse_m, to.distance_m);
            let length_m = (end - start).norm();
            if !(length_m > 0.0) {
                continue;
            }
            let direction = (end - start) / length_m;
            let charge = if muon.positive { 1.0 } else { -1.0 };
            let energy = from.energy_gev;
            let straight = TrackStep::straight(
                start,
                direction,
                length_m,
                energy,
                MUON_MASS_GEV,
                charge,
                time(from),
            );
            sink.step(&TrackStep {
                end_energy_gev: to.energy_gev,
                end_time_ns: time(to),
                ..straight
            });
        }
    }

    fn point(&self, transverse_m: [f64; 2], distance_m: f64) -> Vector3<f64> {
        let [across, along, to_source] = self.frame;
        to_source * distance_m + across * transverse_m[0] + along * transverse_m[1]
    }

    fn flight(&self, slope: [f64; 2]) -> Vector3<f64> {
        let [across, along, to_source] = self.frame;
        (across * slope[0] + along * slope[1] - to_source).normalize()
    }
}
