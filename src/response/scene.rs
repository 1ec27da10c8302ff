//! What stands on the ground, and the images it sees of one word.

use nalgebra::Vector3;

use crate::light::{LightModel, ShowerLight, ShowerParts, View};
use crate::numerics::{Stage, Stream};
use crate::shower::{Direction, Primary};
use crate::telescope::{ImageRecord, Quantum, Readout, TelescopeKind};
use crate::units::degrees;

use super::cascade::{self, CascadeLight};
use super::image::CellImage;
use super::margin::{Code, code};
use super::pad::PadKey;
use super::sample::Word;
use super::throw::{Throw, species_key};
use super::{CORES_PER_SHOWER, EVENTS_PER_WORD};

/// A telescope kind on a pad.
#[derive(Clone, Debug, PartialEq)]
pub struct Column {
    /// Position in the ground frame, m.
    pub position_m: [f64; 3],
    /// Index of its kind.
    pub kind: usize,
}

/// Images with fewer expected photoelectrons than this are not made: they cannot trigger a group
/// of pixels at any threshold used.
pub const LEAST_PHOTOELECTRONS: f64 = 3.0;
/// Photoelectrons drawn one by one; brighter images use that many with a larger weight, which adds
/// 5 % to the noise of an image far above any threshold.
pub const MOST_PHOTOELECTRONS: f64 = 400.0;

/// Everything needed to make the images of a shower.
pub struct Scene<'a> {
    /// Seed of the study.
    pub seed: u64,
    /// Telescope kinds, in the order of the light model's detectors.
    pub kinds: &'a [TelescopeKind],
    /// Sky photoelectrons per ns and pixel of each kind.
    pub sky_per_ns: Vec<f64>,
    /// Light tables.
    pub light: &'a LightModel,
    /// Where the telescopes look.
    pub pointing: Direction,
    /// Magnetic field, east, north, up, uT.
    pub field_ut: Vector3<f64>,
    /// The telescopes.
    pub columns: Vec<Column>,
    /// Factor on all light: mirrors, air, sensors.
    pub light_scale: f64,
    /// Makes the electromagnetic parts of a shower.
    pub parts: &'a PartMaker<'a>,
    /// The reference engine, which then makes all light instead.
    pub cascade: Option<&'a CascadeLight<'a>>,
}

/// Makes what gives light in a shower along its axis.
pub type PartMaker<'a> = dyn Fn(&Primary, &LightModel, &mut Stream) -> ShowerParts + Sync + 'a;

/// What all columns saw of one word.
#[derive(Clone, Debug, PartialEq)]
pub struct WordCells {
    /// The word.
    pub word: Word,
    /// Margin codes, 64 for each column.
    pub codes: Vec<Code>,
    /// Images by column; `event` counts within the word.
    pub images: Vec<Vec<CellImage>>,
}

/// Working space of one thread.
pub struct Bench<'a> {
    readouts: Vec<Readout<'a>>,
    view: View,
    quanta: Vec<Quantum>,
    sums: Vec<f64>,
}

impl<'a> Scene<'a> {
    /// Working space for one thread.
    pub fn bench(&self) -> Bench<'a> {
        let readouts = self.kinds.iter().zip(&self.sky_per_ns);
        Bench {
            readouts: readouts.map(|(kind, &sky)| Readout::new(kind, sky)).collect(),
            view: View::default(),
            quanta: Vec::new(),
            sums: Vec::new(),
        }
    }

    /// The same scene with other telescopes.
    pub fn with_columns(&self, columns: Vec<Column>) -> Self {
        let sky_per_ns = self.sky_per_ns.clone();
        let Self { seed, kinds, light, pointing, field_ut, light_scale, parts, cascade, .. } =
            *self;
        Self {
            seed,
            kinds,
            sky_per_ns,
            light,
            pointing,
            field_ut,
            columns,
            light_scale,
            parts,
            cascade,
        }
    }

    /// The telescope that a key names, if its kind is here.
    pub fn column_of(&self, pad: &PadKey) -> Option<Column> {
        let kind = self.kinds.iter().position(|kind| kind.name == pad.kind)?;
        Some(Column { position_m: pad.position_m(), kind })
    }

    /// The keys of the columns.
    pub fn pads(&self) -> Vec<PadKey> {
        self.columns.iter().map(|column| PadKey::of(column, self.kinds)).collect()
    }

    /// Simulates one word.
    pub fn word(&self, throw: &Throw, number: usize, bench: &mut Bench<'_>) -> WordCells {
        let thrown = throw.word(number);
        let mut codes = vec![0; self.columns.len() * EVENTS_PER_WORD];
        let mut images = vec![Vec::new(); self.columns.len()];
        let mut angle_rad: f64 = 0.0;
        let towards = self.pointing.to_source();
        for (place, (primary, cores)) in thrown.showers.iter().enumerate() {
            let cosine = primary.direction.to_source().dot(&towards);
            angle_rad = angle_rad.max(cosine.clamp(-1.0, 1.0).acos());
            let key = [species_key(primary.species), number as u64, place as u64];
            let mut keep = |at: usize, index: usize, record: Option<ImageRecord>| {
                let Some(record) = record else { return };
                let event = place * CORES_PER_SHOWER + at;
                codes[index * EVENTS_PER_WORD + event] = code(f64::from(record.margin_pe));
                images[index].extend(CellImage::of(event as u32, &record));
            };
            if let Some(engine) = self.cascade {
                self.followed(engine, (primary, cores), &key, bench, &mut keep);
                continue;
            }
            let mut stream = Stream::keyed(self.seed, Stage::Shower, &key);
            let parts = (self.parts)(primary, self.light, &mut stream);
            if parts.is_empty() {
                continue;
            }
            let light = ShowerLight::new(self.light, primary.direction, self.field_ut, parts);
            for (at, core) in cores.iter().enumerate() {
                for (index, column) in self.columns.iter().enumerate() {
                    keep(at, index, self.image(&light, core, column, (&key, at), bench));
                }
            }
        }
        let (energy_gev, exposure, ring) = (thrown.energy_gev, thrown.exposure, thrown.ring);
        WordCells { word: Word { energy_gev, exposure, ring, angle_rad }, codes, images }
    }

    /// The images of a shower of the reference engine.
    fn followed(
        &self,
        engine: &CascadeLight<'_>,
        (primary, cores): (&Primary, &[Vector3<f64>]),
        key: &[u64; 3],
        bench: &mut Bench<'_>,
        keep: &mut impl FnMut(usize, usize, Option<ImageRecord>),
    ) {
        let discs = cascade::discs(&self.columns, self.kinds, self.light_scale);
        let seed = (self.seed, key.as_slice());
        let light = engine.collected(primary, self.pointing, &discs, cores, seed);
        for (at, core) in cores.iter().enumerate() {
            for (index, column) in self.columns.iter().enumerate() {
                if light.quanta(at, index).len() < LEAST_PHOTOELECTRONS as usize {
                    continue;
                }
                let pad = Vector3::from(column.position_m) - core;
                let axis = primary.direction;
                cascade::photoelectrons(&light, (at, index), &pad, axis, &mut bench.quanta);
                let mut stream = self.image_stream(key, at, column);
                let record = bench.readouts[column.kind].image(&bench.quanta, &mut stream);
                keep(at, index, record);
            }
        }
    }

    /// The stream of one image: its photoelectrons and its noise.
    fn image_stream(&self, shower: &[u64; 3], core: usize, column: &Column) -> Stream {
        let [x, y, z, kind] = PadKey::of(column, self.kinds).stream_words();
        let key = [shower[0], shower[1], shower[2], core as u64, x, y, z, kind];
        Stream::keyed(self.seed, Stage::Image, &key)
    }

    fn image(
        &self,
        light: &ShowerLight<'_>,
        core: &Vector3<f64>,
        column: &Column,
        (shower, core_number): (&[u64; 3], usize),
        bench: &mut Bench<'_>,
    ) -> Option<ImageRecord> {
        let pad = Vector3::from(column.position_m) - core;
        light.view(column.kind, &pad, &mut bench.view);
        let area = self.kinds[column.kind].collecting_area_m2() * self.light_scale;
        let expected = bench.view.density_m2 * area;
        if expected < LEAST_PHOTOELECTRONS {
            return None;
        }
        let weight = (expected / MOST_PHOTOELECTRONS).max(1.0);
        let mut stream = self.image_stream(shower, core_number, column);
        let (right, up) = self.pointing.transverse();
        let forward = self.pointing.to_source();
        let quanta = &mut bench.quanta;
        quanta.clear();
        let scale = area / weight;
        light.photoelectrons(
            column.kind,
            &bench.view,
            scale,
            &mut stream,
            &mut bench.sums,
            |photoelectron| {
                let from = photoelectron.to_source;
                let depth = from.dot(&forward);
                quanta.push(Quantum {
                    x_deg: degrees(from.dot(&right) / depth) as f32,
                    y_deg: degrees(from.dot(&up) / depth) as f32,
                    time_ns: photoelectron.time_ns as f32,
                    weight: weight as f32,
                });
            },
        );
        bench.readouts[column.kind].image(&bench.quanta, &mut stream)
    }
}
