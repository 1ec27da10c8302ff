//! Quanta of one shower on collecting discs, for many core positions at once.

use nalgebra::Vector3;

use crate::atmosphere::Atmosphere;
use crate::consts::SPEED_OF_LIGHT_M_NS;
use crate::light::cherenkov::largest_emission_angle_rad;
use crate::light::column::{Detector, Transmission};
use crate::numerics::{Stage, Stream};
use crate::shower::Direction;
use crate::shower::cascade::air::AirTable;
use crate::shower::cascade::{
    CascadeParticle, Environment, Ledger, TrackSink, TrackStep, transport,
};

use super::rays::{Ray, Window, emit};
use super::yields::Yields;

/// A collecting disc: a pad and the kind of telescope on it.
#[derive(Clone, Copy, Debug)]
pub struct PadDisc {
    /// Its centre in the ground frame, m; z relative to the observer's level.
    pub position: Vector3<f64>,
    /// Index of the kind among the detectors.
    pub kind: usize,
    /// Collecting area, m2; the disc faces each ray.
    pub area_m2: f64,
}

/// One counted quantum on a disc.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct SkyQuantum {
    /// Direction it comes from, as offset from the pointing along the first vector of
    /// [`Direction::transverse`], deg (tangent plane).
    pub x_deg: f32,
    /// The same along the second vector, deg.
    pub y_deg: f32,
    /// Arrival after a plane front at the speed of light in vacuum along the axis, ns.
    pub time_ns: f32,
}

/// What a collector is made for.
pub struct CollectSettings<'a> {
    /// The air.
    pub atmosphere: &'a Atmosphere,
    /// Its transmission to the observer.
    pub transmission: &'a Transmission<'a>,
    /// Altitude of the plane z = 0, m.
    pub observer_altitude_m: f64,
    /// Where the showers come from (for the transmission and the grid of discs).
    pub axis: Direction,
    /// Where the telescopes point.
    pub pointing: Direction,
    /// Rays farther than this from the pointing are not kept, rad: a little more than the largest
    /// field of view.
    pub reach_rad: f64,
    /// Efficiency of every kind: photon on the disc to photoelectron.
    pub detectors: &'a [Detector<'a>],
}

/// Tables shared by all showers of one direction.
pub struct Collector {
    yields: Yields,
    axis: Direction,
    pointing: [Vector3<f64>; 3],
    cos_reach: f64,
    reach_rad: f64,
    largest_cone_rad: f64,
    window: Window,
}

/// Discs of all core positions in one grid on the plane z = 0.
pub struct Target {
    discs: Vec<Disc>,
    /// Number of pads.
    pub pads: usize,
    /// Number of core positions.
    pub cores: usize,
    low: [f64; 2],
    size: [usize; 2],
    first: Vec<u32>,
    entries: Vec<u32>,
}

#[derive(Clone, Copy, Debug)]
struct Disc {
    centre: Vector3<f64>,
    radius2_m2: f64,
    kind: usize,
}

const CELL_M: f64 = 12.0;

impl Collector {
    /// Builds the tables.
    pub fn new(settings: &CollectSettings<'_>) -> Self {
        let yields = Yields::new(
            settings.atmosphere,
            settings.transmission,
            settings.observer_altitude_m,
            settings.axis.zenith_rad,
            settings.detectors,
        );
        let (across, along) = settings.pointing.transverse();
        let [refractivity, _] = yields.air(settings.observer_altitude_m);
        let largest_cone_rad = largest_emission_angle_rad(refractivity);
        let window = Window {
            source: settings.pointing.to_source(),
            limit2: (settings.reach_rad + largest_cone_rad).powi(2),
        };
        Self {
            yields,
            largest_cone_rad,
            window,
            axis: settings.axis,
            pointing: [across, along, settings.pointing.to_source()],
            cos_reach: settings.reach_rad.cos(),
            reach_rad: settings.reach_rad,
        }
    }

    /// Lays the discs out for core positions (x, y on the plane z = 0, m).
    pub fn target(&self, pads: &[PadDisc], cores: &[[f64; 2]]) -> Target {
        let discs: Vec<Disc> = cores
            .iter()
            .flat_map(|core| {
                pads.iter().map(|pad| Disc {
                    centre: pad.position - Vector3::new(core[0], core[1], 0.0),
                    radius2_m2: pad.area_m2 / core::f64::consts::PI,
                    kind: pad.kind,
                })
            })
            .collect();
        let boxes: Vec<[f64; 4]> = discs.iter().map(|disc| self.shadow(disc)).collect();
        let least = |i: usize| boxes.iter().map(|b| b[i]).fold(f64::INFINITY, f64::min);
        let most = |i: usize| boxes.iter().map(|b| b[i]).fold(f64::NEG_INFINITY, f64::max);
        let low = [least(0), least(1)];
        let cells = |from: f64, to: f64| ((to - from) / CELL_M).max(0.0) as usize + 1;
        let size = [cells(low[0], most(2)), cells(low[1], most(3))];
        let mut lists = vec![Vec::new(); size[0] * size[1]];
        for (place, b) in boxes.iter().enumerate() {
            let cell = |value: f64, axis: usize| ((value - low[axis]) / CELL_M) as usize;
            for row in cell(b[1], 1)..=cell(b[3], 1) {
                for column in cell(b[0], 0)..=cell(b[2], 0) {
                    lists[row * size[0] + column].push(place as u32);
                }
            }
        }
        let mut first = vec![0];
        let mut entries = Vec::new();
        for list in lists {
            entries.extend(list);
            first.push(entries.len() as u32);
        }
        Target { discs, pads: pads.len(), cores: cores.len(), low, size, first, entries }
    }

    /// Box on z = 0 that all kept rays through a disc cross: the disc's shadow along the pointing,
    /// grown by the spread of directions over the height of the disc.
    fn shadow(&self, disc: &Disc) -> [f64; 4] {
        let source = self.pointing[2];
        let slope = 1.0 / source.z;
        let shift = -disc.centre.z * slope;
        let (x, y) = (disc.centre.x + source.x * shift, disc.centre.y + source.y * shift);
        // A ray at the edge of the reach has a cosine to the vertical no less than this.
        let steepest = (source.z.acos() + self.reach_rad).min(1.5).cos();
        let spread = disc.centre.z.abs() * self.reach_rad / (steepest * steepest);
        let half = disc.radius2_m2.sqrt() / steepest + spread;
        [x - half, y - half, x + half, y + half]
    }

    /// Whether light of a step can lie within the reach of the pointing: false only if the flight
    /// is farther from it than reach, cone and five deviations of the wandering inside the step.
    ///
    /// Chords between unit vectors stand for angles: they are shorter, so nothing is lost.
    #[inline]
    fn may_see(&self, step: &TrackStep) -> bool {
        let source = &self.pointing[2];
        let first = (step.start_direction + source).norm_squared();
        let last = (step.end_direction + source).norm_squared();
        let turn = (step.end_direction - step.start_direction).norm();
        let limit = self.reach_rad + self.largest_cone_rad + 2.5 * step.scatter_rad + 0.5 * turn;
        first.min(last) < limit * limit
    }

    /// Where the showers come from.
    pub fn axis(&self) -> Direction {
        self.axis
    }
}

/// Gathers one shower's quanta: a sink.
pub struct Basket<'a> {
    collector: &'a Collector,
    target: &'a Target,
    air: &'a AirTable,
    stream: Stream,
    core_time_ns: f64,
    hits: Vec<(u32, SkyQuantum)>,
    /// Quanta drawn, whether they hit or not; tracks that cannot be seen draw none.
    pub drawn: u64,
}

impl<'a> Basket<'a> {
    /// An empty basket; `core_time_ns` is when a plane front along the axis reaches the core.
    pub fn new(
        collector: &'a Collector,
        target: &'a Target,
        air: &'a AirTable,
        stream: Stream,
        core_time_ns: f64,
    ) -> Self {
        Self { collector, target, air, stream, core_time_ns, hits: Vec::new(), drawn: 0 }
    }

    /// Sorts the hits by core and pad.
    pub fn collected(self) -> Collected {
        // Sorting by counting: quanta of one disc stay in the order they were made.
        let discs = self.target.discs.len();
        let mut first = vec![0_u32; discs + 1];
        for hit in &self.hits {
            first[hit.0 as usize + 1] += 1;
        }
        for disc in 0..discs {
            first[disc + 1] += first[disc];
        }
        let mut next = first.clone();
        let empty = SkyQuantum { x_deg: 0.0, y_deg: 0.0, time_ns: 0.0 };
        let mut quanta = vec![empty; self.hits.len()];
        for (disc, quantum) in self.hits {
            let place = &mut next[disc as usize];
            quanta[*place as usize] = quantum;
            *place += 1;
        }
        Collected { pads: self.target.pads, first, quanta, drawn: self.drawn }
    }
}

/// Quanta of one shower by core and pad.
#[derive(Clone, Debug)]
pub struct Collected {
    pads: usize,
    first: Vec<u32>,
    quanta: Vec<SkyQuantum>,
    /// Quanta drawn in all, for the arithmetic of speed.
    pub drawn: u64,
}

impl Collected {
    /// The quanta of one pad for one core position.
    pub fn quanta(&self, core: usize, pad: usize) -> &[SkyQuantum] {
        let disc = core * self.pads + pad;
        &self.quanta[self.first[disc] as usize..self.first[disc + 1] as usize]
    }

    /// All of them.
    pub fn len(&self) -> usize {
        self.quanta.len()
    }

    /// Whether no disc was hit.
    pub fn is_empty(&self) -> bool {
        self.quanta.is_empty()
    }
}

/// Looks a ray up in the target.
#[inline]
fn catch(
    ray: &Ray,
    collector: &Collector,
    target: &Target,
    core_time_ns: f64,
    hits: &mut Vec<(u32, SkyQuantum)>,
) {
    let [across, along, source] = &collector.pointing;
    let cosine = -ray.direction.dot(source);
    if cosine < collector.cos_reach {
        return;
    }
    let path = -ray.position.z / ray.direction.z;
    let x = ray.position.x + ray.direction.x * path - target.low[0];
    let y = ray.position.y + ray.direction.y * path - target.low[1];
    if x < 0.0 || y < 0.0 {
        return;
    }
    let (column, row) = ((x * (1.0 / CELL_M)) as usize, (y * (1.0 / CELL_M)) as usize);
    if column >= target.size[0] || row >= target.size[1] {
        return;
    }
    let cell = row * target.size[0] + column;
    let range = target.first[cell] as usize..target.first[cell + 1] as usize;
    for &place in &target.entries[range] {
        let disc = &target.discs[place as usize];
        if disc.kind != ray.detector {
            continue;
        }
        let to_disc = disc.centre - ray.position;
        let along_ray = to_disc.dot(&ray.direction);
        if to_disc.norm_squared() - along_ray * along_ray > disc.radius2_m2 || along_ray < 0.0 {
            continue;
        }
        let degrees = (-1.0 / cosine).to_degrees();
        // Group delay in proportion to the part of the air the ray has passed.
        let fall = -ray.direction.z * along_ray;
        let delay = ray.delay_m * along_ray / ray.height_m.max(fall).max(1.0);
        let front = -disc.centre.dot(&collector.axis.to_source()) / SPEED_OF_LIGHT_M_NS;
        let flight = (along_ray + delay) / SPEED_OF_LIGHT_M_NS;
        hits.push((
            place,
            SkyQuantum {
                x_deg: (ray.direction.dot(across) * degrees) as f32,
                y_deg: (ray.direction.dot(along) * degrees) as f32,
                time_ns: (ray.time_ns + flight - core_time_ns - front) as f32,
            },
        ));
    }
}

impl TrackSink for Basket<'_> {
    fn step(&mut self, step: &TrackStep) {
        if !self.collector.may_see(step) {
            return;
        }
        let Self { collector, target, air, stream, core_time_ns, hits, drawn } = self;
        emit(step, air, &collector.yields, 1.0, &collector.window, stream, |ray| {
            *drawn += 1;
            catch(ray, collector, target, *core_time_ns, hits);
        });
    }
}

/// Runs one electromagnetic shower and collects its light.
///
/// `key` is the shower's identity; the shower and its light have streams of their own.
pub fn collected(
    primary: CascadeParticle,
    core_time_ns: f64,
    environment: &Environment,
    collector: &Collector,
    target: &Target,
    seed: u64,
    key: &[u64],
) -> (Collected, Ledger) {
    let mut stream = Stream::keyed(seed, Stage::Shower, key);
    let light = Stream::keyed(seed, Stage::Image, key);
    let mut basket = Basket::new(collector, target, &environment.air, light, core_time_ns);
    let ledger = transport(vec![primary], environment, &mut stream, &mut basket);
    (basket.collected(), ledger)
}
