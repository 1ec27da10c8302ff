//! Where the light of one slab lands, and where it came from.
//!
//! A node of the kernel is one slab and one age. Every emitter throws a ring: its centre is the
//! place its flight direction points to, its radius the distance times the emission angle. The
//! share of a ring between two distances from the axis is known in closed form, so a node has no
//! sampling noise around the ring.

use core::f64::consts::{FRAC_PI_2, PI, TAU};

use crate::consts::ELECTRON_MASS_GEV;
use crate::numerics::{Stage, Stream};
use crate::shower::profile::{Emitter, EmitterNode};

use super::cherenkov::sin2_emission_angle;
use super::grid;

/// Origins kept per bin of distance: what images are made of.
pub const ORIGINS: usize = 16;
/// Sectors of azimuth from the direction of magnetic deflection, folded to a quarter turn.
pub const FIELD_SECTORS: usize = 4;
/// Emitters used for one node.
const EMITTERS_PER_NODE: usize = 4_000;
/// Emitters that fly more than this from the axis are left out: their light is spread over
/// kilometres and the small-angle ring no longer holds, rad.
const WIDEST_RAD: f64 = 1.2;

/// Where a slab is seen from and what bends its emitters.
#[derive(Clone, Copy, Debug)]
pub struct Geometry {
    /// Distance from the observer along the axis, m.
    pub distance_m: f64,
    /// Air density of the slab, kg/m3.
    pub density_kg_m3: f64,
    /// Refractivity of the slab.
    pub refractivity: f64,
    /// Field across the axis, uT.
    pub field_ut: f64,
}

/// Where a landing photon was emitted, relative to the axis, seen along the line from the axis to
/// the landing point.
#[derive(Clone, Copy, Debug, Default)]
pub struct Origin {
    /// Towards the landing point, m.
    pub radial_m: f32,
    /// Across, m.
    pub lateral_m: f32,
    /// Path by which the emitter lags behind the front, m.
    pub lag_m: f32,
}

/// Light of one slab at one age.
#[derive(Clone, Debug)]
pub struct Node {
    /// Landing density per emitter, weighted by sin^2 of its emission angle, m^-2: by sector, bin.
    pub density_m2: Vec<f32>,
    /// Origins: by sector, bin, rank.
    pub origins: Vec<Origin>,
}

struct Arc {
    weight: f64,
    share: (f64, f64),
    ring: Ring,
    side: usize,
}

#[derive(Clone, Copy)]
struct Ring {
    centre: [f64; 2],
    radius: f64,
    offset: [f64; 2],
    lag_m: f64,
}

impl Ring {
    fn centre_distance(&self) -> f64 {
        (self.centre[0] * self.centre[0] + self.centre[1] * self.centre[1]).sqrt()
    }

    /// Share of the ring within `distance` of the axis: acos((c^2 + R^2 - d^2) / (2 c R)) / pi.
    fn share_within(&self, distance: f64) -> f64 {
        let (c, r) = (self.centre_distance(), self.radius);
        let cosine = (c * c + r * r - distance * distance) / (2.0 * c * r);
        cosine.clamp(-1.0, 1.0).acos() / PI
    }

    /// Unit vector towards the centre.
    fn towards_centre(&self) -> [f64; 2] {
        let distance = self.centre_distance();
        if distance > 0.0 { self.centre.map(|x| x / distance) } else { [1.0, 0.0] }
    }

    /// The landing points on the two sides of the ring where the share within is `share`.
    fn landings(&self, unit: [f64; 2], share: f64) -> [[f64; 2]; 2] {
        let (sin, cos) = (PI * (1.0 - share)).sin_cos();
        let (along, across) = (self.radius * cos, self.radius * sin);
        let point = |side: f64| {
            [
                self.centre[0] + along * unit[0] - side * across * unit[1],
                self.centre[1] + along * unit[1] + side * across * unit[0],
            ]
        };
        [point(-1.0), point(1.0)]
    }
}

/// Folds an azimuth to a quarter turn; the second value is -1 where left and right are swapped.
pub fn fold(azimuth_rad: f64) -> (f64, f64) {
    let half = azimuth_rad.rem_euclid(PI);
    if half <= FRAC_PI_2 { (half, 1.0) } else { (PI - half, -1.0) }
}

impl Node {
    /// The node of one slab and one age.
    pub fn new(age: &EmitterNode, geometry: Geometry, key: &[u64]) -> Self {
        let sectors = if geometry.field_ut > 0.0 { FIELD_SECTORS } else { 1 };
        let mut stream = Stream::keyed(0, Stage::Table, key);
        let turns = if sectors > 1 { 2 } else { 1 };
        let mut arcs: Vec<Vec<Arc>> = (0..sectors * grid::BINS).map(|_| Vec::new()).collect();
        // Every slab uses its own share of the emitters, so that their sampling noise averages out
        // along a shower.
        let shares = (age.emitters.len() / EMITTERS_PER_NODE).max(1);
        let first = key.first().map_or(0, |slab| *slab as usize % shares);
        let mut emitters = 0.0;
        for emitter in age.emitters.iter().skip(first).step_by(shares) {
            emitters += 1.0;
            for _ in 0..turns {
                if let Some((ring, weight)) = ring(emitter, geometry, &mut stream) {
                    scatter(ring, weight / f64::from(turns), sectors, &mut arcs);
                }
            }
        }
        let mut density_m2 = vec![0.0; sectors * grid::BINS];
        let mut origins = vec![Origin::default(); sectors * grid::BINS * ORIGINS];
        for (cell, arcs) in arcs.iter().enumerate() {
            let bin = cell % grid::BINS;
            let (inner, outer) = (grid::edge_m(bin), grid::edge_m(bin + 1));
            let area = PI * (outer * outer - inner * inner) / sectors as f64;
            let total: f64 = arcs.iter().map(|arc| arc.weight).sum();
            density_m2[cell] = (total / (emitters * area)) as f32;
            let kept = &mut origins[cell * ORIGINS..(cell + 1) * ORIGINS];
            resample(arcs, total, kept, &mut stream);
        }
        Self { density_m2, origins }
    }
}

/// The ring of one emitter and its weight, sin^2 of the emission angle.
fn ring(emitter: &Emitter, geometry: Geometry, stream: &mut Stream) -> Option<(Ring, f64)> {
    let gamma = f64::from(emitter.energy_gev) / ELECTRON_MASS_GEV;
    let weight = sin2_emission_angle(geometry.refractivity, gamma);
    if weight <= 0.0 {
        return None;
    }
    let (cos, sin) = stream.direction();
    let turned = |v: [f32; 2]| {
        let (x, y) = (f64::from(v[0]), f64::from(v[1]));
        [x * cos - y * sin, x * sin + y * cos]
    };
    let mut angle = turned(emitter.angle_rad);
    let metres = 10.0 / geometry.density_kg_m3;
    let mut offset = turned(emitter.offset_g_cm2).map(|x| x * metres);
    angle[0] += geometry.field_ut * f64::from(emitter.angle_lever) / geometry.density_kg_m3;
    offset[0] +=
        geometry.field_ut * f64::from(emitter.offset_lever) / geometry.density_kg_m3.powi(2);
    let size = angle[0].hypot(angle[1]);
    if size > WIDEST_RAD {
        return None;
    }
    let stretch = if size > 1e-9 { size.tan() / size } else { 1.0 } * geometry.distance_m;
    let centre = [offset[0] + stretch * angle[0], offset[1] + stretch * angle[1]];
    let radius = geometry.distance_m * weight.sqrt().asin().tan();
    let lag_m = f64::from(emitter.lag_g_cm2) * metres;
    Some((Ring { centre, radius, offset, lag_m }, weight))
}

/// Deals the ring's light out to the bins it crosses.
fn scatter(ring: Ring, weight: f64, sectors: usize, arcs: &mut [Vec<Arc>]) {
    let c = ring.centre_distance();
    let (nearest, farthest) = ((c - ring.radius).abs(), c + ring.radius);
    let first = grid::place(nearest) as usize;
    let unit = ring.towards_centre();
    let mut inner = 0.0;
    for bin in first..grid::BINS {
        let edge = grid::edge_m(bin + 1);
        let outer = if edge >= farthest { 1.0 } else { ring.share_within(edge) };
        let (share, weight) = ((inner, outer), weight * (outer - inner));
        if sectors == 1 {
            arcs[bin].push(Arc { weight, share, ring, side: 1 });
        } else {
            for (side, landing) in ring.landings(unit, 0.5 * (inner + outer)).iter().enumerate() {
                let cell = sector_of(*landing) * grid::BINS + bin;
                arcs[cell].push(Arc { weight: 0.5 * weight, share, ring, side });
            }
        }
        if outer >= 1.0 {
            break;
        }
        inner = outer;
    }
}

/// The sector of a landing point, folded to a quarter turn.
fn sector_of([x, y]: [f64; 2]) -> usize {
    // Tangents of 22.5, 45 and 67.5 degrees.
    const TANGENTS: [f64; FIELD_SECTORS - 1] =
        [core::f64::consts::SQRT_2 - 1.0, 1.0, core::f64::consts::SQRT_2 + 1.0];
    TANGENTS.iter().filter(|tangent| y.abs() > *tangent * x.abs()).count()
}

/// Keeps equal-weight origins by systematic resampling.
fn resample(arcs: &[Arc], total: f64, kept: &mut [Origin], stream: &mut Stream) {
    if total <= 0.0 {
        return;
    }
    let step = total / kept.len() as f64;
    let mut next = step * stream.uniform();
    let mut sum = 0.0;
    let mut slots = kept.iter_mut();
    for arc in arcs {
        sum += arc.weight;
        while next < sum {
            let Some(slot) = slots.next() else { return };
            let share = arc.share.0 + (arc.share.1 - arc.share.0) * stream.uniform();
            *slot =
                origin(&arc.ring, arc.ring.landings(arc.ring.towards_centre(), share)[arc.side]);
            next += step;
        }
    }
    // Rounding may leave the last slot: give it the last arc.
    if let (Some(slot), Some(arc)) = (slots.next(), arcs.last()) {
        *slot =
            origin(&arc.ring, arc.ring.landings(arc.ring.towards_centre(), arc.share.1)[arc.side]);
    }
}

fn origin(ring: &Ring, landing: [f64; 2]) -> Origin {
    let azimuth = landing[1].atan2(landing[0]).rem_euclid(TAU);
    let (_, handed) = fold(azimuth);
    let (sin, cos) = azimuth.sin_cos();
    let radial = ring.offset[0] * cos + ring.offset[1] * sin;
    let lateral = ring.offset[1] * cos - ring.offset[0] * sin;
    Origin {
        radial_m: radial as f32,
        lateral_m: (handed * lateral) as f32,
        lag_m: ring.lag_m as f32,
    }
}
