//! The light of a whole shower: electromagnetic parts and muons about a main axis.

use core::f64::consts::PI;

use nalgebra::Vector3;

use crate::consts::SPEED_OF_LIGHT_M_NS;
use crate::numerics::Stream;
use crate::shower::Direction;
use crate::shower::hadronic::MuonTrack;
use crate::shower::profile::GaisserHillas;

use super::column::AxisPath;
use super::footprint::{Footprint, LightModel, Pad, Request};
use super::muon_light::{Disc, MuonLight};

/// An electromagnetic part of a shower: a development along a line near the main axis.
#[derive(Clone, Copy, Debug)]
pub struct Part {
    /// Where its line crosses the plane through the core across the main axis, m.
    pub offset_m: [f64; 2],
    /// Slope of its line, upward, against the main axis.
    pub tilt: [f64; 2],
    /// Arrival after the plane front of the primary, ns.
    pub lag_ns: f64,
    /// Its development.
    pub development: GaisserHillas,
}

/// What gives light in a shower.
#[derive(Clone, Debug, Default)]
pub struct ShowerParts {
    /// Electromagnetic parts.
    pub parts: Vec<Part>,
    /// Muons.
    pub muons: Vec<MuonTrack>,
}

impl ShowerParts {
    /// Whether there is nothing that gives light.
    pub fn is_empty(&self) -> bool {
        self.parts.is_empty() && self.muons.is_empty()
    }
}

impl From<Vec<Part>> for ShowerParts {
    fn from(parts: Vec<Part>) -> Self {
        Self { parts, muons: Vec::new() }
    }
}

/// A part with its light pool.
struct LitPart {
    part: Part,
    footprint: Footprint,
}

/// The light of one shower, ready to be seen from any core position and pad.
pub struct ShowerLight<'a> {
    model: &'a LightModel,
    axis: AxisPath,
    to_source: Vector3<f64>,
    across: Vector3<f64>,
    along: Vector3<f64>,
    bend_azimuth_rad: f64,
    parts: Vec<LitPart>,
    muons: Vec<MuonLight>,
}

/// Direction and time of one photoelectron at a pad.
#[derive(Clone, Copy, Debug)]
pub struct Photoelectron {
    /// Vector towards where it came from, ground frame, not normalised.
    pub to_source: Vector3<f64>,
    /// Arrival after the primary's plane front would reach the core, ns.
    pub time_ns: f64,
}

/// A pad relative to the shower, prepared by [`ShowerLight::view`].
#[derive(Clone, Debug, Default)]
pub struct View {
    transverse_m: [f64; 2],
    rise_m: f64,
    part_means: Vec<f64>,
    muon_means: Vec<f64>,
    /// Expected quanta per m2 at the pad.
    pub density_m2: f64,
}

impl<'a> ShowerLight<'a> {
    /// The light of `parts` of a shower from `direction` in a magnetic field (east, north, up, uT).
    pub fn new(
        model: &'a LightModel,
        direction: Direction,
        field_ut: Vector3<f64>,
        lit: impl Into<ShowerParts>,
    ) -> Self {
        let ShowerParts { parts, muons } = lit.into();
        let axis = model.column.axis(direction.zenith_rad);
        let to_source = direction.to_source();
        let (across, along) = direction.transverse();
        // Positive particles fly along -to_source and are pushed along velocity x field.
        let bend = field_ut.cross(&to_source);
        let bend_azimuth_rad = bend.dot(&along).atan2(bend.dot(&across));
        let parts = parts
            .into_iter()
            .map(|part| LitPart { part, footprint: model.footprint(&axis, &part.development) })
            .collect();
        let muons = muons.iter().filter_map(|track| MuonLight::new(track, model, &axis)).collect();
        Self { model, axis, to_source, across, along, bend_azimuth_rad, parts, muons }
    }

    /// Prepares the view of one detector at `pad` (relative to the core, ground frame, m).
    pub fn view(&self, detector: usize, pad: &Vector3<f64>, view: &mut View) {
        view.transverse_m = [pad.dot(&self.across), pad.dot(&self.along)];
        view.rise_m = pad.dot(&self.to_source);
        view.part_means.clear();
        let mut sum = 0.0;
        for lit in &self.parts {
            let (pad, _) = self.relative(&lit.part, view);
            let mean = self.model.density_m2(&lit.footprint, detector, &pad);
            view.part_means.push(mean);
            sum += mean;
        }
        view.muon_means.clear();
        let disc = self.disc(detector, view);
        for muon in &self.muons {
            let mean = muon.quanta(detector, &disc) / (PI * disc.radius_m * disc.radius_m);
            view.muon_means.push(mean);
            sum += mean;
        }
        view.density_m2 = sum;
    }

    /// Draws the photoelectrons of a collecting area; `scale` multiplies every mean.
    pub fn photoelectrons(
        &self,
        detector: usize,
        view: &View,
        scale: f64,
        stream: &mut Stream,
        scratch: &mut Vec<f64>,
        mut take: impl FnMut(Photoelectron),
    ) {
        for (lit, mean) in self.parts.iter().zip(&view.part_means) {
            let count = stream.poisson(mean * scale);
            if count == 0 {
                continue;
            }
            let (pad, unit) = self.relative(&lit.part, view);
            let request =
                Request { footprint: &lit.footprint, axis: &self.axis, detector, pad: &pad };
            self.model.arrivals(&request, count, stream, scratch, |arrival| {
                let x = arrival.radial_rad * unit[0] - arrival.lateral_rad * unit[1];
                let y = arrival.radial_rad * unit[1] + arrival.lateral_rad * unit[0];
                let (x, y) = (x + lit.part.tilt[0], y + lit.part.tilt[1]);
                // The front of a tilted part comes earlier on the side it is tilted to.
                let ahead = pad.distance_m
                    * (unit[0] * lit.part.tilt[0] + unit[1] * lit.part.tilt[1])
                    / SPEED_OF_LIGHT_M_NS;
                let time_ns = arrival.time_ns + lit.part.lag_ns - ahead;
                take(self.photoelectron([x, y], time_ns, view));
            });
        }
        let disc = self.disc(detector, view);
        let scale = scale / (PI * disc.radius_m * disc.radius_m);
        for (muon, mean) in self.muons.iter().zip(&view.muon_means) {
            if *mean > 0.0 {
                muon.draw(detector, &disc, scale, stream, |arrival| {
                    take(self.photoelectron(arrival.tilt, arrival.time_ns, view));
                });
            }
        }
    }

    fn photoelectron(&self, [x, y]: [f64; 2], time_ns: f64, view: &View) -> Photoelectron {
        Photoelectron {
            to_source: self.to_source + self.across * x + self.along * y,
            time_ns: time_ns - view.rise_m / SPEED_OF_LIGHT_M_NS,
        }
    }

    fn disc(&self, detector: usize, view: &View) -> Disc {
        let (centre_m, rise_m) = (view.transverse_m, view.rise_m);
        Disc { centre_m, rise_m, radius_m: self.model.disc_radius_m(detector) }
    }

    /// A pad relative to the line of one part, and the unit vector from the line to it.
    fn relative(&self, part: &Part, view: &View) -> (Pad, [f64; 2]) {
        let x = view.transverse_m[0] - part.offset_m[0] - part.tilt[0] * view.rise_m;
        let y = view.transverse_m[1] - part.offset_m[1] - part.tilt[1] * view.rise_m;
        let distance_m = (x * x + y * y).sqrt();
        let unit = if distance_m > 0.0 { [x / distance_m, y / distance_m] } else { [1.0, 0.0] };
        let azimuth_rad =
            if self.model.has_field() { y.atan2(x) - self.bend_azimuth_rad } else { 0.0 };
        (Pad { distance_m, azimuth_rad, rise_m: view.rise_m }, unit)
    }
}
