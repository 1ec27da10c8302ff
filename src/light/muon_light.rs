//! The light of single muon tracks: rings and arcs.
//!
//! A muon is a chain of straight segments. Light from a distance D falls on a ring of radius
//! D tan(theta) around the point the segment aims at; the share of the ring that falls on a
//! collecting disc is an arc cosine, so that near impacts, the bright ring at the largest radius and
//! a hit on the mirror itself need no special case.

use core::f64::consts::PI;

use crate::consts::{MUON_MASS_GEV, SPEED_OF_LIGHT_M_NS};
use crate::numerics::Stream;
use crate::shower::hadronic::{MuonNode, MuonTrack};

use super::cherenkov::sin2_emission_angle;
use super::column::AxisPath;
use super::footprint::LightModel;

/// One muon's light.
#[derive(Clone, Debug)]
pub struct MuonLight {
    segments: Vec<Segment>,
    aim_m: [f64; 2],
    reach_m: f64,
}

#[derive(Clone, Debug)]
struct Segment {
    /// Where it aims in the plane through the core, m.
    foot_m: [f64; 2],
    slope: [f64; 2],
    /// Upper and lower end: distance, tangent of the emission angle, path behind the front, m.
    ends: [End; 2],
    /// Counted quanta emitted, by detector.
    quanta: Vec<f64>,
    /// Extra optical path from its middle because of the index, over the distance.
    delay: f64,
}

#[derive(Clone, Copy, Debug)]
struct End {
    distance_m: f64,
    tangent: f64,
    lag_m: f64,
}

/// A collecting disc across the axis.
#[derive(Clone, Copy, Debug)]
pub struct Disc {
    /// Position across the axis, m.
    pub centre_m: [f64; 2],
    /// Height along the axis above the plane through the core, m.
    pub rise_m: f64,
    /// Radius, m.
    pub radius_m: f64,
}

/// A photon of a muon on a disc.
#[derive(Clone, Copy, Debug)]
pub struct MuonArrival {
    /// Slope against the axis of the direction it comes from, upward.
    pub tilt: [f64; 2],
    /// Arrival after the primary's plane front would reach the core plane, were there no rise, ns.
    pub time_ns: f64,
}

impl MuonLight {
    /// The light of a track; `None` if it is nowhere above the Cherenkov threshold.
    pub fn new(track: &MuonTrack, model: &LightModel, axis: &AxisPath) -> Option<Self> {
        let pairs = track.nodes.windows(2);
        let segments: Vec<Segment> =
            pairs.filter_map(|pair| segment(&pair[0], &pair[1], model, axis)).collect();
        let aim_m = segments.last()?.foot_m;
        let reach_m = segments.iter().fold(0.0_f64, |reach, segment| {
            let away = (segment.foot_m[0] - aim_m[0]).hypot(segment.foot_m[1] - aim_m[1]);
            let radius = segment.ends.map(|end| end.distance_m * end.tangent);
            reach.max(away + radius[0].max(radius[1]))
        });
        Some(Self { segments, aim_m, reach_m })
    }

    /// Expected quanta on a disc.
    pub fn quanta(&self, detector: usize, disc: &Disc) -> f64 {
        let mut sum = 0.0;
        self.visit(detector, disc, |quanta, _, _| sum += quanta);
        sum
    }

    /// Draws the quanta on a disc; `scale` multiplies every mean.
    pub fn draw(
        &self,
        detector: usize,
        disc: &Disc,
        scale: f64,
        stream: &mut Stream,
        mut take: impl FnMut(MuonArrival),
    ) {
        self.visit(detector, disc, |quanta, segment, (share, half_arc)| {
            for _ in 0..stream.poisson(quanta * scale) {
                take(segment.arrival(disc, share, half_arc, stream));
            }
        });
    }

    fn visit(&self, detector: usize, disc: &Disc, mut take: impl FnMut(f64, &Segment, (f64, f64))) {
        // Slopes are below 0.3: a pad 100 m up moves the aim by less than 30 m.
        let far = (disc.centre_m[0] - self.aim_m[0]).hypot(disc.centre_m[1] - self.aim_m[1]);
        if far > self.reach_m + disc.radius_m + 0.3 * disc.rise_m.abs() {
            return;
        }
        for segment in &self.segments {
            segment.visit(detector, disc, &mut take);
        }
    }
}

impl Segment {
    fn away(&self, disc: &Disc) -> [f64; 2] {
        [0, 1].map(|i| disc.centre_m[i] - self.foot_m[i] + self.slope[i] * disc.rise_m)
    }

    fn at(&self, share: f64) -> End {
        let [upper, lower] = self.ends;
        let mix = |a: f64, b: f64| a + share * (b - a);
        End {
            distance_m: mix(upper.distance_m, lower.distance_m),
            tangent: mix(upper.tangent, lower.tangent),
            lag_m: mix(upper.lag_m, lower.lag_m),
        }
    }

    /// Calls `take` with the expected quanta of each piece, the place along the segment and half
    /// the arc of the ring that falls on the disc.
    fn visit(&self, detector: usize, disc: &Disc, take: &mut impl FnMut(f64, &Self, (f64, f64))) {
        let [x, y] = self.away(disc);
        let away = x.hypot(y);
        let radius = |end: End| end.tangent * (end.distance_m - disc.rise_m);
        let (first, last) = (radius(self.ends[0]), radius(self.ends[1]));
        let (low, high) = (first.min(last).max(0.0), first.max(last));
        if high < away - disc.radius_m || low > away + disc.radius_m {
            return;
        }
        // Pieces over which the ring grows by less than a tenth of the disc.
        let pieces = ((high - low) / (0.1 * disc.radius_m)).ceil().clamp(1.0, 400.0);
        for piece in 0..pieces as usize {
            let share = (piece as f64 + 0.5) / pieces;
            let ring = radius(self.at(share));
            if ring <= 0.0 {
                continue;
            }
            let half_arc = half_arc(ring, away, disc.radius_m);
            if half_arc > 0.0 {
                take(self.quanta[detector] * half_arc / (PI * pieces), self, (share, half_arc));
            }
        }
    }

    fn arrival(&self, disc: &Disc, share: f64, half_arc: f64, stream: &mut Stream) -> MuonArrival {
        let end = self.at(share);
        let [x, y] = self.away(disc);
        let angle = y.atan2(x) + half_arc * (2.0 * stream.uniform() - 1.0);
        let (sin, cos) = angle.sin_cos();
        let distance = end.distance_m - disc.rise_m;
        let tilt = [-self.slope[0] - end.tangent * cos, -self.slope[1] - end.tangent * sin];
        let detour = 0.5 * distance * (tilt[0] * tilt[0] + tilt[1] * tilt[1]);
        let time_ns = (end.lag_m + detour + self.delay * distance) / SPEED_OF_LIGHT_M_NS;
        MuonArrival { tilt, time_ns }
    }
}

/// Half the arc of a ring inside a disc whose centre is `away` from the ring's.
fn half_arc(ring: f64, away: f64, disc: f64) -> f64 {
    if ring + away <= disc {
        return PI;
    }
    let cosine = (ring * ring + away * away - disc * disc) / (2.0 * ring * away);
    cosine.clamp(-1.0, 1.0).acos()
}

fn segment(
    upper: &MuonNode,
    lower: &MuonNode,
    model: &LightModel,
    axis: &AxisPath,
) -> Option<Segment> {
    let drop = upper.distance_m - lower.distance_m;
    if !(drop > 0.0) {
        return None;
    }
    let gamma = 0.5 * (upper.energy_gev + lower.energy_gev) / MUON_MASS_GEV;
    let end = |node: &MuonNode| {
        let sin2 = sin2_emission_angle(model.column.refractivity_at(axis, node.distance_m), gamma);
        let tangent = (sin2 / (1.0 - sin2)).sqrt();
        End { distance_m: node.distance_m, tangent, lag_m: node.lag_m }
    };
    let ends = [end(upper), end(lower)];
    if ends[0].tangent <= 0.0 && ends[1].tangent <= 0.0 {
        return None;
    }
    let slope = [0, 1].map(|i| (lower.transverse_m[i] - upper.transverse_m[i]) / drop);
    let foot_m = [0, 1].map(|i| lower.transverse_m[i] + slope[i] * lower.distance_m);
    let path = drop * (1.0 + slope[0].powi(2) + slope[1].powi(2)).sqrt();
    let middle = 0.5 * (upper.distance_m + lower.distance_m);
    let slab = axis.slab_at(middle);
    let sin2 =
        0.5 * ends.iter().map(|e| e.tangent.powi(2) / (1.0 + e.tangent.powi(2))).sum::<f64>();
    let detectors = 0..model.detectors();
    let quanta =
        detectors.map(|detector| path * sin2 * model.worth(detector, slab, axis)).collect();
    let step = &axis.steps[slab];
    Some(Segment { foot_m, slope, ends, quanta, delay: step.delay_m / step.distance_m })
}
