//! The light pool of one electromagnetic shower, and photoelectrons drawn from it.

use core::f64::consts::FRAC_PI_2;
use std::sync::OnceLock;

use crate::atmosphere::Atmosphere;
use crate::consts::SPEED_OF_LIGHT_M_NS;
use crate::numerics::Stream;
use crate::shower::profile::{EmitterTable, GaisserHillas};

use super::column::{AxisPath, Column, Detector, SlabWorth, Transmission, quanta_per_m};
use super::grid;
use super::kernel::{FIELD_SECTORS, Geometry, Node, ORIGINS, fold};

/// What a light model is made for.
pub struct LightSettings<'a> {
    /// The air.
    pub atmosphere: &'a Atmosphere,
    /// Its transmission to the observer.
    pub transmission: &'a Transmission<'a>,
    /// Altitude of the observer, m.
    pub observer_altitude_m: f64,
    /// Zenith angle the tables are made at, rad; showers within about 10 deg of it may use them.
    pub zenith_rad: f64,
    /// Magnetic field across the axis, uT.
    pub transverse_field_ut: f64,
    /// The emitters.
    pub emitters: &'a EmitterTable,
    /// Number of slabs; 36 is converged to 1 % (test `verify_pool_converges_in_slabs_and_samples`).
    pub slabs: usize,
}

/// Light kernels of every slab and age, and the worth of each slab to each detector.
pub struct LightModel {
    /// The slabs.
    pub column: Column,
    reference: AxisPath,
    field_ut: f64,
    sectors: usize,
    emitters: EmitterTable,
    ages: Vec<f64>,
    /// Made when first used, each from its own random stream: by energy, slab, age.
    nodes: Vec<OnceLock<Node>>,
    worth: Vec<Vec<SlabWorth>>,
    disc_radii_m: Vec<f64>,
}

/// A collecting disc relative to the axis: in the plane through the core across the axis.
#[derive(Clone, Copy, Debug)]
pub struct Pad {
    /// Distance from the axis, m.
    pub distance_m: f64,
    /// Azimuth about the axis from the direction in which the field bends positive particles, rad.
    pub azimuth_rad: f64,
    /// Height along the axis, towards the source, m.
    pub rise_m: f64,
}

/// A photon that counts, relative to the axis.
#[derive(Clone, Copy, Debug)]
pub struct Arrival {
    /// Direction it comes from, relative to the axis, along the line from the axis to the pad, rad.
    pub radial_rad: f64,
    /// The same, across, rad.
    pub lateral_rad: f64,
    /// Arrival after a plane front at the speed of light in vacuum along the axis, ns.
    pub time_ns: f64,
}

impl LightModel {
    /// Prepares the tables; their parts are made when showers first need them, one to two seconds
    /// of processor time in all.
    pub fn new(settings: &LightSettings<'_>, detectors: &[Detector<'_>]) -> Self {
        let column = Column::new(settings.atmosphere, settings.observer_altitude_m, settings.slabs);
        let reference = column.axis(settings.zenith_rad);
        let table = settings.emitters;
        let ages = table.ages();
        let nodes = (0..table.nodes.len() * column.slabs.len()).map(|_| OnceLock::new()).collect();
        let worth = detectors
            .iter()
            .map(|detector| {
                let (air, through) = (settings.atmosphere, settings.transmission);
                quanta_per_m(&column, air, detector, through, settings.zenith_rad)
            })
            .collect();
        let sectors = if settings.transverse_field_ut > 0.0 { FIELD_SECTORS } else { 1 };
        let (emitters, field_ut) = (table.clone(), settings.transverse_field_ut);
        let disc_radii_m = vec![1.0; detectors.len()];
        Self { column, reference, field_ut, sectors, emitters, ages, nodes, worth, disc_radii_m }
    }

    /// The same with the radii of the collecting discs, by detector: what a muon close by sees.
    /// One metre unless stated.
    pub fn with_disc_radii_m(self, disc_radii_m: Vec<f64>) -> Self {
        assert_eq!(disc_radii_m.len(), self.worth.len(), "one radius a detector");
        Self { disc_radii_m, ..self }
    }

    /// Radius of the collecting disc of a detector, m.
    pub fn disc_radius_m(&self, detector: usize) -> f64 {
        self.disc_radii_m[detector]
    }

    /// Counted quanta per metre of track and unit sin^2 of the emission angle, for a slab seen
    /// along an axis.
    pub fn worth(&self, detector: usize, slab: usize, axis: &AxisPath) -> f64 {
        self.worth[detector][slab].at(self.secant_ratio(axis))
    }

    /// Whether the tables depend on the azimuth about the axis.
    pub fn has_field(&self) -> bool {
        self.sectors > 1
    }

    /// Number of detectors.
    pub fn detectors(&self) -> usize {
        self.worth.len()
    }

    /// The light pool of one shower along `axis`.
    pub fn footprint(&self, axis: &AxisPath, shower: &GaisserHillas) -> Footprint {
        let energy = self.energy_of(shower);
        let slices = self.slices(axis, shower, energy);
        let cells = self.sectors * grid::BINS;
        let mut density = vec![0.0_f32; self.worth.len() * cells];
        let mut moment = vec![0.0_f32; cells];
        let secant_ratio = self.secant_ratio(axis);
        let mut quanta = vec![[0.0_f32; 2]; self.worth.len() * slices.len()];
        for (place, slice) in slices.iter().enumerate() {
            let nodes = [0, 1].map(|next| self.node(energy, slice.slab, slice.age + next));
            for (detector, worth) in self.worth.iter().enumerate() {
                let value = worth[slice.slab].at(secant_ratio) as f32;
                let weights = slice.tracks_m.map(|track| track * value);
                quanta[detector * slices.len() + place] = weights;
                let table = &mut density[detector * cells..(detector + 1) * cells];
                for (node, weight) in nodes.into_iter().zip(weights) {
                    add(table, &node.density_m2, weight);
                }
            }
            let reach = axis.steps[slice.slab].distance_m as f32;
            for (node, weight) in nodes.into_iter().zip(slice.tracks_m) {
                add(&mut moment, &node.density_m2, weight / reach);
            }
        }
        // Light-weighted mean of 1/distance, for pads above or below the core plane.
        let mut tracks = vec![0.0_f32; cells];
        for slice in &slices {
            for (offset, weight) in slice.tracks_m.into_iter().enumerate() {
                let node = self.node(energy, slice.slab, slice.age + offset);
                add(&mut tracks, &node.density_m2, weight);
            }
        }
        for (value, total) in moment.iter_mut().zip(&tracks) {
            *value = if *total > 0.0 { *value / *total } else { 0.0 };
        }
        let stretch = self.stretch(axis);
        Footprint { energy, slices, quanta, density, inverse_distance: moment, stretch }
    }

    /// Counted quanta per m2 across the axis at a pad.
    #[inline]
    pub fn density_m2(&self, footprint: &Footprint, detector: usize, pad: &Pad) -> f64 {
        let cells = self.sectors * grid::BINS;
        let distance = pad.distance_m * footprint.stretch;
        let Some(place) = grid::bracket(distance) else { return 0.0 };
        let sector = self.sector(pad.azimuth_rad);
        let table = &footprint.density[detector * cells..(detector + 1) * cells];
        let scale = footprint.stretch * footprint.stretch;
        if pad.rise_m == 0.0 {
            return scale * self.read(table, sector, place);
        }
        let inverse = self.read(&footprint.inverse_distance, sector, place);
        let nearer = 1.0 / (1.0 - pad.rise_m * inverse).max(0.05);
        let Some(place) = grid::bracket(distance * nearer) else { return 0.0 };
        scale * nearer * nearer * self.read(table, sector, place)
    }

    /// Draws `count` photoelectrons of a detector at a pad.
    ///
    /// Each comes from a slab in proportion to its light at the pad, from a depth uniform in the
    /// slab, and from a stored origin of the emitters, so that its direction is exact for the pad.
    pub fn arrivals(
        &self,
        request: &Request<'_>,
        count: u64,
        stream: &mut Stream,
        scratch: &mut Vec<f64>,
        mut take: impl FnMut(Arrival),
    ) {
        let Request { footprint, axis, detector, pad } = *request;
        let sector = self.sector(pad.azimuth_rad);
        let place = grid::place(pad.distance_m * footprint.stretch);
        let slices = footprint.slices.len();
        let quanta = &footprint.quanta[detector * slices..(detector + 1) * slices];
        scratch.clear();
        let mut total = 0.0;
        for (slice, weights) in footprint.slices.iter().zip(quanta) {
            let bracket = place_in(place, axis.steps[slice.slab].distance_m, pad);
            for (offset, weight) in weights.iter().enumerate() {
                let node = self.node(footprint.energy, slice.slab, slice.age + offset);
                let density = bracket.map_or(0.0, |at| self.read(&node.density_m2, sector, at));
                total += f64::from(*weight) * density;
                scratch.push(total);
            }
        }
        if total <= 0.0 {
            return;
        }
        let (_, handed) = fold(pad.azimuth_rad);
        for _ in 0..count {
            let target = total * stream.uniform();
            let chosen = scratch.partition_point(|sum| *sum <= target).min(scratch.len() - 1);
            let slice = &footprint.slices[chosen / 2];
            let node = self.node(footprint.energy, slice.slab, slice.age + chosen % 2);
            let bracket = place_in(place, axis.steps[slice.slab].distance_m, pad);
            let Some(at) = bracket else { continue };
            take(self.arrival(node, slice.slab, at, (sector, handed), axis, pad, stream));
        }
    }

    #[expect(clippy::too_many_arguments, reason = "one photon: what, where from, where to")]
    fn arrival(
        &self,
        node: &Node,
        slab: usize,
        place: (usize, usize, f32),
        (sector, handed): (Sector, f64),
        axis: &AxisPath,
        pad: &Pad,
        stream: &mut Stream,
    ) -> Arrival {
        let bits = stream.bits();
        let fraction = ((bits >> 40) as f32) / 16_777_216.0;
        let bin = if fraction < place.2 { place.1 } else { place.0 };
        let nearest = if sector.2 > 0.5 { sector.1 } else { sector.0 };
        let origin =
            node.origins[(nearest * grid::BINS + bin) * ORIGINS + (bits as usize % ORIGINS)];
        let step = &axis.steps[slab];
        let within = 2.0 * stream.uniform() - 1.0;
        let distance = (step.distance_m + within * step.half_length_m - pad.rise_m).max(1.0);
        let radial = f64::from(origin.radial_m) - pad.distance_m;
        let lateral = handed * f64::from(origin.lateral_m);
        let detour = 0.5 * (radial * radial + lateral * lateral) / distance;
        let delay = step.delay_m * (distance / step.distance_m) + f64::from(origin.lag_m);
        Arrival {
            radial_rad: radial / distance,
            lateral_rad: lateral / distance,
            time_ns: (detour + delay) / SPEED_OF_LIGHT_M_NS,
        }
    }

    fn slices(&self, axis: &AxisPath, shower: &GaisserHillas, energy: usize) -> Vec<Slice> {
        let mut slices = Vec::with_capacity(axis.steps.len());
        let largest = shower.size(shower.max_g_cm2);
        for (slab, step) in axis.steps.iter().enumerate() {
            let size = mean_size(shower, step.depth_g_cm2, step.thickness_g_cm2);
            if size <= 1e-5 * largest {
                continue;
            }
            let (age, share) = self.age_bracket(shower.age(step.depth_g_cm2));
            let track_m =
                size * step.thickness_g_cm2 * 10.0 / self.column.slabs[slab].density_kg_m3;
            let emitters = &self.emitters.nodes[energy * self.ages.len()..];
            let fraction =
                |age: usize| if shower.is_shape() { 1.0 } else { emitters[age].fraction };
            let tracks_m = [
                (track_m * (1.0 - share) * fraction(age)) as f32,
                (track_m * share * fraction(age + 1)) as f32,
            ];
            slices.push(Slice { slab, age, tracks_m });
        }
        slices
    }

    /// The node below an age and the weight of the next; held at the ends.
    fn age_bracket(&self, age: f64) -> (usize, f64) {
        let last = self.ages.len() - 2;
        let upper = self.ages.partition_point(|node| *node < age);
        let low = upper.saturating_sub(1).min(last);
        let share = (age - self.ages[low]) / (self.ages[low + 1] - self.ages[low]);
        (low, share.clamp(0.0, 1.0))
    }

    /// The node of an energy, a slab and an age.
    fn node(&self, energy: usize, slab: usize, age: usize) -> &Node {
        let place = (energy * self.column.slabs.len() + slab) * self.ages.len() + age;
        self.nodes[place].get_or_init(|| {
            let geometry = Geometry {
                distance_m: self.reference.steps[slab].distance_m,
                density_kg_m3: self.column.slabs[slab].density_kg_m3,
                refractivity: self.column.slabs[slab].refractivity,
                field_ut: self.field_ut,
            };
            let emitters = &self.emitters.nodes[energy * self.ages.len() + age];
            Node::new(emitters, geometry, &[slab as u64, age as u64])
        })
    }

    /// Which of the tabulated energies gives a shower its emitters: one of the two around, in
    /// proportion to nearness in ln E.
    fn energy_of(&self, shower: &GaisserHillas) -> usize {
        let energies = &self.emitters.energies_gev;
        let upper = energies.partition_point(|energy| *energy < shower.energy_gev);
        if upper == 0 || upper == energies.len() {
            return upper.saturating_sub(1);
        }
        let (low, high) = (energies[upper - 1], energies[upper]);
        let share = (shower.energy_gev / low).ln() / (high / low).ln();
        if shower.lot < share { upper } else { upper - 1 }
    }

    fn sector(&self, azimuth_rad: f64) -> Sector {
        if self.sectors == 1 {
            return (0, 0, 0.0);
        }
        let place = (fold(azimuth_rad).0 / FRAC_PI_2 * self.sectors as f64 - 0.5)
            .clamp(0.0, (self.sectors - 1) as f64);
        let low = (place as usize).min(self.sectors - 2);
        (low, low + 1, place - low as f64)
    }

    fn read(&self, table: &[f32], sector: Sector, (low, high, share): (usize, usize, f32)) -> f64 {
        let row = |sector: usize| {
            let (a, b) = (table[sector * grid::BINS + low], table[sector * grid::BINS + high]);
            f64::from(a + share * (b - a))
        };
        let first = row(sector.0);
        if sector.2 == 0.0 { first } else { first + sector.2 * (row(sector.1) - first) }
    }

    fn secant_ratio(&self, axis: &AxisPath) -> f64 {
        self.reference.zenith_rad.cos() / axis.zenith_rad.cos()
    }

    /// Factor that carries a distance from the axis to the grid: the reference axis is longer or
    /// shorter than this one, and light spreads by angle.
    fn stretch(&self, axis: &AxisPath) -> f64 {
        let middle = axis.steps.len() / 2;
        self.reference.steps[middle].distance_m / axis.steps[middle].distance_m
    }
}

/// Where a pad above or below the core plane lies on the grid of a slab at a distance: light of the
/// slab spreads in proportion to the distance.
#[inline]
fn place_in(place: f64, distance_m: f64, pad: &Pad) -> Option<(usize, usize, f32)> {
    let stretch = pad.rise_m / (distance_m - pad.rise_m).max(0.05 * distance_m);
    grid::bracket_of(grid::shifted(place, stretch))
}

type Sector = (usize, usize, f64);

/// The mean of the size over a slab, by Simpson's rule over the part below the shower's start.
fn mean_size(shower: &GaisserHillas, depth: f64, thickness: f64) -> f64 {
    let (top, bottom) = (depth - 0.5 * thickness, depth + 0.5 * thickness);
    let lit = bottom - top.max(shower.start_g_cm2);
    if lit <= 0.0 {
        return 0.0;
    }
    let at = |share: f64| shower.size(bottom - share * lit);
    // Just inside the start: the size jumps there from zero to that of the first pair.
    (at(0.999) + 4.0 * at(0.5) + at(0.0)) / 6.0 * (lit / thickness)
}

#[inline]
fn add(table: &mut [f32], values: &[f32], weight: f32) {
    for (sum, value) in table.iter_mut().zip(values) {
        *sum += weight * value;
    }
}

/// What one slab adds: emitter track length at the two ages around its own.
#[derive(Clone, Copy, Debug)]
struct Slice {
    slab: usize,
    age: usize,
    tracks_m: [f32; 2],
}

/// The light pool of one shower.
#[derive(Clone, Debug)]
pub struct Footprint {
    energy: usize,
    slices: Vec<Slice>,
    /// Emitted quanta by detector and slice, at the two ages.
    quanta: Vec<[f32; 2]>,
    density: Vec<f32>,
    inverse_distance: Vec<f32>,
    stretch: f64,
}

/// Which photoelectrons are asked for.
#[derive(Clone, Copy)]
pub struct Request<'a> {
    /// The shower's light pool.
    pub footprint: &'a Footprint,
    /// Its axis.
    pub axis: &'a AxisPath,
    /// The detector.
    pub detector: usize,
    /// The pad.
    pub pad: &'a Pad,
}
