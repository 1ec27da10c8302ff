//! Samples charged particles uniformly in track length while a vertical shower develops.

use nalgebra::Vector3;

use crate::consts::SPEED_OF_LIGHT_M_NS;
use crate::numerics::Stream;
use crate::shower::cascade::air::AirTable;
use crate::shower::cascade::{TrackSink, TrackStep};
use crate::shower::profile::Emitter;

/// Width of the bins of the longitudinal profile, g/cm2.
pub const BIN_G_CM2: f64 = 5.0;

/// A sampled particle and the vertical depth where it was.
#[derive(Clone, Copy, Debug)]
pub struct Sample {
    /// Vertical depth, g/cm2.
    pub depth_g_cm2: f64,
    /// The particle.
    pub emitter: Emitter,
}

/// A sink for one vertical shower on the z axis, without field.
pub struct Recorder<'a> {
    air: &'a AirTable,
    floor_gev: f64,
    spacing_g_cm2: f64,
    to_next: f64,
    stream: Stream,
    start_z_m: f64,
    /// The samples.
    pub samples: Vec<Sample>,
    /// Track length above the floor per depth bin, divided by the width of the bin: the number of
    /// particles if all flew along the axis.
    pub profile: Vec<f64>,
    /// Depth of the first interaction of a photon, g/cm2.
    pub first_depth_g_cm2: Option<f64>,
}

impl<'a> Recorder<'a> {
    /// A recorder of particles above `floor_gev`, one sample every `spacing_g_cm2` of track.
    pub fn new(
        air: &'a AirTable,
        floor_gev: f64,
        spacing_g_cm2: f64,
        start_z_m: f64,
        mut stream: Stream,
    ) -> Self {
        let bins = (air.depth_g_cm2(0.0).max(1100.0) / BIN_G_CM2) as usize + 1;
        let to_next = spacing_g_cm2 * stream.uniform();
        Self {
            air,
            floor_gev,
            spacing_g_cm2,
            to_next,
            stream,
            start_z_m,
            samples: Vec::new(),
            profile: vec![0.0; bins],
            first_depth_g_cm2: None,
        }
    }

    fn add_profile(&mut self, from: f64, to: f64, track: f64) {
        let (low, high) = if from < to { (from, to) } else { (to, from) };
        let (first, last) = ((low / BIN_G_CM2) as usize, (high / BIN_G_CM2) as usize);
        if first == last || high - low < 1e-9 {
            self.profile[first] += track / BIN_G_CM2;
            return;
        }
        for bin in first..=last {
            let inside = (high.min((bin + 1) as f64 * BIN_G_CM2) - low.max(bin as f64 * BIN_G_CM2))
                / (high - low);
            self.profile[bin] += track * inside / BIN_G_CM2;
        }
    }

    fn sample(&mut self, step: &TrackStep, share: f64, energy_gev: f64) {
        let position = step.start + (step.end - step.start) * share;
        let wander = step.scatter_rad * (share * (1.0 - share)).sqrt();
        let kick = Vector3::new(self.stream.normal() * wander, self.stream.normal() * wander, 0.0);
        let mean = step.start_direction + (step.end_direction - step.start_direction) * share;
        // Across the flight direction; near the vertical its z component is second order.
        let along = mean * (kick.dot(&mean) / mean.norm_squared());
        let direction = (mean + kick - along).normalize();
        let altitude = self.air.altitude_m(&Vector3::new(0.0, 0.0, position.z));
        let density = 10.0 * self.air.density(altitude).0;
        let sine = direction.x.hypot(direction.y);
        let stretch = if sine > 1e-9 { sine.atan2(-direction.z) / sine } else { 1.0 };
        let time = step.start_time_ns + (step.end_time_ns - step.start_time_ns) * share;
        let lag_m = time * SPEED_OF_LIGHT_M_NS - (self.start_z_m - position.z);
        let to_mass = 0.1 * density;
        self.samples.push(Sample {
            depth_g_cm2: self.air.depth_g_cm2(altitude),
            emitter: Emitter {
                energy_gev: energy_gev as f32,
                angle_rad: [(direction.x * stretch) as f32, (direction.y * stretch) as f32],
                offset_g_cm2: [(position.x * to_mass) as f32, (position.y * to_mass) as f32],
                lag_g_cm2: (lag_m * to_mass) as f32,
                angle_lever: (step.angle_lever * density) as f32,
                offset_lever: (step.offset_lever * density * density) as f32,
            },
        });
    }
}

impl TrackSink for Recorder<'_> {
    fn step(&mut self, step: &TrackStep) {
        let lost = step.start_energy_gev - step.end_energy_gev;
        let above = step.start_energy_gev - self.floor_gev;
        if above <= 0.0 {
            return;
        }
        let used = if lost > above { above / lost } else { 1.0 };
        let track = used * step.thickness_g_cm2;
        let depth = |position: &Vector3<f64>| {
            self.air.depth_g_cm2(self.air.altitude_m(&Vector3::new(0.0, 0.0, position.z)))
        };
        let from = depth(&step.start);
        let to = depth(&(step.start + (step.end - step.start) * used));
        self.add_profile(from, to, track);
        let mut place = self.to_next;
        while place < track {
            let share = place / step.thickness_g_cm2;
            self.sample(step, share, step.start_energy_gev - lost * share);
            place += self.spacing_g_cm2;
        }
        self.to_next = place - track;
    }

    fn first_interaction(&mut self, position: &Vector3<f64>) {
        let altitude = self.air.altitude_m(position);
        self.first_depth_g_cm2.get_or_insert(self.air.depth_g_cm2(altitude));
    }
}
