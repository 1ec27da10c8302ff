//! Images of showers of the reference engine: particle by particle, photon by photon.
//!
//! Each shower is followed once and its light collected on every telescope for all core positions
//! together. A collected quantum is a photoelectron: the efficiency is applied when it is drawn.

use nalgebra::Vector3;

use crate::atmosphere::Atmosphere;
use crate::consts::SPEED_OF_LIGHT_M_NS;
use crate::light::collect::pool::light_cuts;
use crate::light::collect::shower::Descent;
use crate::light::collect::{Basket, CollectSettings, Collected, Collector, PadDisc};
use crate::light::column::{Detector, Transmission};
use crate::numerics::{Stage, Stream};
use crate::shower::cascade::Environment;
use crate::shower::{Direction, Primary};
use crate::telescope::{Quantum, TelescopeKind};

use super::scene::Column;

/// Rays this much outside the widest camera are still kept, rad: the point spread moves them in.
const RIM_RAD: f64 = 0.01;

/// What the reference engine needs besides a scene.
pub struct CascadeLight<'a> {
    environment: Environment,
    atmosphere: &'a Atmosphere,
    transmission: &'a Transmission<'a>,
    detectors: &'a [Detector<'a>],
    reach_rad: f64,
}

impl<'a> CascadeLight<'a> {
    /// Prepares the air; `detectors` are the kinds in their order.
    pub fn new(
        (atmosphere, observer_altitude_m): (&'a Atmosphere, f64),
        transmission: &'a Transmission<'a>,
        field_ut: Vector3<f64>,
        kinds: &[TelescopeKind],
        detectors: &'a [Detector<'a>],
    ) -> Self {
        let cuts = light_cuts(atmosphere, observer_altitude_m);
        let environment = Environment::new(atmosphere, observer_altitude_m, field_ut, cuts);
        let widest =
            kinds.iter().map(|kind| 0.5 * kind.camera.field_of_view_deg).fold(0.0, f64::max);
        let reach_rad = widest.to_radians() + RIM_RAD;
        Self { environment, atmosphere, transmission, detectors, reach_rad }
    }

    /// Follows one shower and collects its light on all columns for all cores.
    pub(super) fn collected(
        &self,
        primary: &Primary,
        pointing: Direction,
        discs: &[PadDisc],
        cores: &[Vector3<f64>],
        (seed, key): (u64, &[u64]),
    ) -> Collected {
        let descent = Descent::new(self.atmosphere, &self.environment, primary.direction);
        let collector = Collector::new(&CollectSettings {
            atmosphere: self.atmosphere,
            transmission: self.transmission,
            observer_altitude_m: self.environment.observer_altitude_m,
            axis: primary.direction,
            pointing,
            reach_rad: self.reach_rad,
            detectors: self.detectors,
        });
        let cores: Vec<[f64; 2]> = cores.iter().map(|core| [core.x, core.y]).collect();
        let target = collector.target(discs, &cores);
        let mut stream = Stream::keyed(seed, Stage::Shower, key);
        let light = Stream::keyed(seed, Stage::Core, key);
        let air = &self.environment.air;
        let mut basket = Basket::new(&collector, &target, air, light, descent.arrival_ns());
        descent.shower(primary, &mut stream, &mut basket);
        basket.collected()
    }
}

/// The collecting discs of columns.
pub(super) fn discs(columns: &[Column], kinds: &[TelescopeKind], light_scale: f64) -> Vec<PadDisc> {
    let disc = |column: &Column| PadDisc {
        position: Vector3::from(column.position_m),
        kind: column.kind,
        area_m2: kinds[column.kind].collecting_area_m2() * light_scale,
    };
    columns.iter().map(disc).collect()
}

/// The quanta of one telescope as photoelectrons. Arrival times are those of the plane front at
/// the core, as in the fast engine: collected times have the front's own delay taken off.
pub(super) fn photoelectrons(
    collected: &Collected,
    (core, column): (usize, usize),
    pad: &Vector3<f64>,
    axis: Direction,
    quanta: &mut Vec<Quantum>,
) {
    let front_ns = -pad.dot(&axis.to_source()) / SPEED_OF_LIGHT_M_NS;
    quanta.clear();
    quanta.extend(collected.quanta(core, column).iter().map(|quantum| Quantum {
        x_deg: quantum.x_deg,
        y_deg: quantum.y_deg,
        time_ns: quantum.time_ns + front_ns as f32,
        weight: 1.0,
    }));
}
