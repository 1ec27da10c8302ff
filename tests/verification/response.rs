//! The response table against itself: codes, words, parts, files.

use std::path::PathBuf;
use std::sync::atomic::{AtomicUsize, Ordering};

use nalgebra::Vector3;
use nightpool::atmosphere::Atmosphere;
use nightpool::light::{Detector, LightModel, LightSettings, parts};
use nightpool::numerics::{Stage, Stream};
use nightpool::response::margin::{code, margin_pe, threshold_code};
use nightpool::response::store::{self, MANIFEST};
use nightpool::response::{
    CellImage, Column, EVENTS_PER_WORD, IMAGE_FLOOR_PE, PadKey, ResponseTable, Sample, Scene,
    TableBuilder, TableError, TableStamp, Throw, Word, WordCells, reuse,
};
use nightpool::shower::profile::DevelopmentTable;
use nightpool::shower::profile::hillas::{self, Spread};
use nightpool::shower::{Direction, Species};
use nightpool::telescope::{
    Camera, Curve, ImageRecord, ImageSummary, PixelShape, TelescopeKind, Threshold,
};

fn throw(species: Species, words: usize) -> Throw {
    Throw {
        species,
        seed: 11,
        energy_gev: (20.0, 20_000.0),
        index: 1.7,
        pointing: Direction { zenith_rad: 0.3, azimuth_rad: 2.0 },
        cone_rad: if species == Species::Gamma { 0.0 } else { 0.08 },
        centre_m: [3.0, -4.0],
        rings_m: vec![100.0, 250.0, 600.0],
        words,
    }
}

fn pads(count: usize) -> Vec<PadKey> {
    (0..count)
        .map(|pad| {
            let kind = if pad % 3 == 0 { "broad" } else { "narrow" };
            PadKey::new([70.0 * pad as f64 - 100.0, 31.0 * (pad % 4) as f64, 0.25], kind)
        })
        .collect()
}

/// Cells that depend on word, event and pad only, as simulated ones do: one in three is lit.
fn part(throw: &Throw, numbers: std::ops::Range<usize>, pads: &[PadKey]) -> Sample {
    let outcomes = numbers.clone().map(|number| {
        let thrown = throw.word(number);
        let mut codes = Vec::new();
        let mut images = vec![Vec::new(); pads.len()];
        for (pad, cells) in pads.iter().zip(&mut images) {
            for event in 0..EVENTS_PER_WORD {
                let [x, y, z, kind] = pad.stream_words();
                let key = [number as u64, event as u64, x, y, z, kind];
                let mut stream = Stream::keyed(5, Stage::Image, &key);
                let lit = stream.uniform() < 0.33;
                let margin = if lit { 0.4 * (4.0 * stream.uniform()).exp() } else { 0.0 };
                codes.push(code(margin));
                let record = ImageRecord {
                    margin_pe: margin as f32,
                    photoelectrons: (20.0 * margin) as f32,
                    time_ns: stream.normal() as f32,
                    summary: ImageSummary {
                        size_pe: (18.0 * margin) as f32,
                        centroid_deg: [stream.normal() as f32, stream.normal() as f32],
                        length_deg: 0.3,
                        width_deg: 0.1,
                        orientation_rad: stream.uniform() as f32,
                        edge_fraction: 0.0,
                    },
                };
                cells.extend(CellImage::of(event as u32, &record));
            }
        }
        let (energy_gev, exposure, ring) = (thrown.energy_gev, thrown.exposure, thrown.ring);
        let word = Word { energy_gev, exposure, ring, angle_rad: throw.cone_rad };
        WordCells { word, codes, images }
    });
    Sample::of_words(throw, numbers.start, pads.to_vec(), outcomes.collect())
}

fn stamp() -> TableStamp {
    TableStamp { study_checksum: "aa".into(), upstream_checksum: "bb".into(), seed: 11 }
}

fn built(parts: impl IntoIterator<Item = Sample>) -> Result<ResponseTable, TableError> {
    let mut builder = TableBuilder::new();
    parts.into_iter().for_each(|part| builder.insert(part));
    builder.finish(stamp())
}

fn table(words: usize) -> ResponseTable {
    let (gamma, proton) = (throw(Species::Gamma, words), throw(Species::Proton, words));
    let pads = pads(7);
    built([part(&proton, 0..3 * words, &pads), part(&gamma, 0..3 * words, &pads)]).unwrap()
}

/// A folder of its own for a test, removed when it goes.
struct Folder(PathBuf);

impl Folder {
    fn new(name: &str) -> Self {
        let path = std::env::temp_dir().join(format!("nightpool-{name}-{}", std::process::id()));
        let _ = std::fs::remove_dir_all(&path);
        Self(path)
    }

    /// Names and bytes of its files, by name.
    fn files(&self) -> Vec<(String, Vec<u8>)> {
        let mut files: Vec<_> = std::fs::read_dir(&self.0)
            .unwrap()
            .map(|entry| entry.unwrap())
            .map(|entry| {
                (entry.file_name().into_string().unwrap(), std::fs::read(entry.path()).unwrap())
            })
            .collect();
        files.sort();
        files
    }
}

impl Drop for Folder {
    fn drop(&mut self) {
        let _ = std::fs::remove_dir_all(&self.0);
    }
}

#[test]
fn verify_margin_codes_keep_order_and_value_to_two_per_mille() {
    let mut stream = Stream::keyed(1, Stage::Table, &[1]);
    for _ in 0..100_000 {
        let a = 0.3 * (14.0 * stream.uniform()).exp();
        let b = a * (1.0 + 0.01 * stream.uniform());
        assert!(code(a) <= code(b), "{a} {b}");
        let back = margin_pe(code(a));
        if a >= 0.5 {
            // Rounded down, by at most one step of 1/500 in the logarithm.
            assert!(back <= a * (1.0 + 1e-12) && back > a * (-1.000_001_f64 / 500.0).exp(), "{a}");
            assert!(code(a) >= threshold_code(a * 0.999_999));
            assert!(a < 0.502 || code(a * 0.997) < threshold_code(a));
        } else {
            assert_eq!(code(a), 0);
        }
    }
    assert_eq!(code(f64::NAN), 0);
    assert!(threshold_code(0.01) > code(0.0), "what did not fire must not pass any threshold");
}

#[test]
fn verify_planes_are_margins_against_thresholds_one_by_one() {
    let sample = &table(4).samples[0];
    for (column, threshold) in [(0, 1.0), (3, 4.2), (6, 0.1), (2, 1e6)] {
        let plane = sample.plane(column, threshold);
        assert_eq!(plane.len(), sample.words.len());
        for (event, &margin) in sample.margins[column].iter().enumerate() {
            let bit = plane[event / 64] >> (event % 64) & 1 == 1;
            assert_eq!(bit, margin > 0 && margin >= code(threshold), "{column} {event}");
        }
    }
}

#[test]
fn verify_images_are_found_by_event_and_only_above_the_floor() {
    let sample = &table(4).samples[1];
    for column in 0..sample.pads.len() {
        for (event, &margin) in sample.margins[column].iter().enumerate() {
            let kept = sample.image(column, event);
            assert!(kept.is_none_or(|image| image.event as usize == event));
            // The code is rounded down, so right at the floor both are possible.
            if margin_pe(margin) >= IMAGE_FLOOR_PE {
                assert!(kept.is_some());
            } else if margin_pe(margin) < IMAGE_FLOOR_PE * 0.99 {
                assert!(kept.is_none());
            }
        }
    }
}

#[test]
fn verify_a_table_in_one_go_or_in_four_parts_has_the_same_bytes() {
    let words = 8;
    let (gamma, pads) = (throw(Species::Gamma, words), pads(6));
    let whole = built([part(&gamma, 0..24, &pads)]).unwrap();
    let backward: Vec<PadKey> = pads.iter().rev().cloned().collect();
    let quarters = [
        part(&gamma, 17..24, &backward[..2]),
        part(&gamma, 0..17, &pads[..3]),
        part(&gamma, 0..17, &pads[3..]),
        part(&gamma, 17..24, &backward[2..]),
    ];
    let four = built(quarters.clone()).unwrap();
    assert_eq!(whole, four);
    let (one, other, extended) = (Folder::new("one"), Folder::new("four"), Folder::new("more"));
    store::write(&one.0, &whole).unwrap();
    store::write(&other.0, &four).unwrap();
    assert_eq!(one.files(), other.files());
    // The same parts added on disk one by one read the same, and written again are the same bytes.
    for quarter in &quarters {
        store::extend(&extended.0, &stamp(), core::slice::from_ref(quarter)).unwrap();
    }
    let read = store::read(&extended.0, Some(&stamp())).unwrap();
    assert_eq!(read, whole);
    store::write(&extended.0, &read).unwrap();
    assert_eq!(one.files(), extended.files());
}

#[test]
fn verify_extension_by_pads_and_by_showers_changes_nothing_that_was_there() {
    let (gamma, pads) = (throw(Species::Gamma, 6), pads(8));
    let folder = Folder::new("extension");
    store::extend(&folder.0, &stamp(), &[part(&gamma, 0..18, &pads[..5])]).unwrap();
    let before = folder.files();
    let first = store::read(&folder.0, None).unwrap();
    store::extend(&folder.0, &stamp(), &[part(&gamma, 0..18, &pads[5..])]).unwrap();
    store::extend(&folder.0, &stamp(), &[part(&gamma, 18..36, &pads)]).unwrap();
    let after = folder.files();
    for file in before.iter().filter(|(name, _)| name != MANIFEST) {
        assert!(after.contains(file), "{} changed", file.0);
    }
    let second = store::read(&folder.0, Some(&stamp())).unwrap();
    let (old, new) = (&first.samples[0], &second.samples[0]);
    assert_eq!((new.words.len(), new.pads.len(), new.repetitions()), (36, 8, 2));
    for pad in &old.pads {
        let (a, b) = (old.column(pad).unwrap(), new.column(pad).unwrap());
        assert_eq!(old.margins[a], new.margins[b][..old.events()]);
        assert_eq!(old.images[a], new.images[b][..old.images[a].len()]);
    }
    // Twice the showers, half the weight: the sum over the thrown spectrum, E^-index, stays.
    let weight = |word: &Word| word.exposure * word.energy_gev.powf(-gamma.index);
    let sum = |sample: &Sample| sample.words.iter().map(weight).sum::<f64>();
    for (a, b) in old.words.iter().zip(&new.words) {
        assert_eq!((a.energy_gev, a.exposure), (b.energy_gev, 2.0 * b.exposure));
    }
    assert!((sum(new) / sum(old) - 1.0).abs() < 1e-12);
}

#[test]
fn verify_parts_that_do_not_fit_are_refused() {
    let (gamma, pads) = (throw(Species::Gamma, 6), pads(4));
    let refused = |parts: Vec<Sample>| matches!(built(parts), Err(TableError::Parts { .. }));
    assert!(refused(vec![part(&gamma, 0..17, &pads)]), "not whole");
    assert!(refused(vec![part(&gamma, 1..18, &pads)]), "no beginning");
    assert!(refused(vec![part(&gamma, 0..8, &pads), part(&gamma, 9..18, &pads)]), "gap");
    assert!(refused(vec![part(&gamma, 0..9, &pads), part(&gamma, 8..18, &pads)]), "overlap");
    assert!(refused(vec![part(&gamma, 0..9, &pads), part(&gamma, 9..18, &pads[1..])]), "pads");
    assert!(refused(vec![part(&gamma, 0..18, &pads), part(&gamma, 0..18, &pads[..1])]), "twice");
    let other = Throw { index: 2.0, ..gamma.clone() };
    assert!(refused(vec![part(&gamma, 0..9, &pads), part(&other, 9..18, &pads)]), "other throw");
}

#[test]
fn verify_the_store_gives_back_what_it_was_given() {
    let folder = Folder::new("round");
    let table = table(5);
    store::write(&folder.0, &table).unwrap();
    assert_eq!(store::read(&folder.0, Some(&stamp())).unwrap(), table);
    let empty = Folder::new("empty");
    let dark = built([part(&throw(Species::HELIUM, 1), 0..3, &[])]).unwrap();
    store::write(&empty.0, &dark).unwrap();
    assert_eq!(store::read(&empty.0, None).unwrap(), dark);
    // Writing another table over it leaves nothing of the first.
    store::write(&folder.0, &dark).unwrap();
    assert_eq!(folder.files(), empty.files());
}

#[test]
fn verify_damaged_files_are_refused_with_the_reason() {
    let folder = Folder::new("damage");
    assert!(matches!(store::read(&folder.0, None), Err(TableError::Missing { .. })));
    store::write(&folder.0, &table(2)).unwrap();
    for (name, bytes) in folder.files() {
        let path = folder.0.join(&name);
        // A list is checked as text, a table by its length and checksum.
        for place in [0, bytes.len() / 3, bytes.len() / 2, bytes.len() - 2] {
            let mut damaged = bytes.clone();
            damaged[place] ^= 0x10;
            std::fs::write(&path, damaged).unwrap();
            let error = store::read(&folder.0, None).unwrap_err();
            let right = matches!(error, TableError::Corrupted { .. });
            assert!(right, "{name} at {place}: {error}");
        }
        std::fs::write(&path, &bytes[..bytes.len() / 2]).unwrap();
        let error = store::read(&folder.0, None).unwrap_err();
        let list = name == MANIFEST;
        let right = match error {
            TableError::Truncated { .. } => !list,
            TableError::Corrupted { .. } => list,
            _ => false,
        };
        assert!(right, "{name}: {error}");
        std::fs::remove_file(&path).unwrap();
        let error = store::read(&folder.0, None).unwrap_err();
        assert!(matches!(error, TableError::Missing { .. } | TableError::Io { .. }), "{error}");
        std::fs::write(&path, &bytes).unwrap();
    }
    assert!(store::read(&folder.0, None).is_ok());
}

#[test]
fn verify_foreign_and_outdated_tables_are_refused_with_the_reason() {
    let folder = Folder::new("foreign");
    let small = table(2);
    store::write(&folder.0, &small).unwrap();
    let other = TableStamp { upstream_checksum: "cc".into(), ..stamp() };
    let error = store::read(&folder.0, Some(&other)).unwrap_err();
    assert!(matches!(error, TableError::Foreign { .. }));
    assert!(error.to_string().contains("bb") && error.to_string().contains("cc"), "{error}");
    let seed = TableStamp { seed: 12, ..stamp() };
    assert!(matches!(store::read(&folder.0, Some(&seed)), Err(TableError::Foreign { .. })));
    assert!(matches!(
        store::extend(&folder.0, &other, &small.samples),
        Err(TableError::Foreign { .. })
    ));
    // Another study file with the same physics may use the table.
    let study = TableStamp { study_checksum: "dd".into(), ..stamp() };
    assert!(store::read(&folder.0, Some(&study)).is_ok());
    let list = std::fs::read_to_string(folder.0.join(MANIFEST)).unwrap();
    let swap = |from: &str, to: &str| {
        assert!(list.contains(from));
        std::fs::write(folder.0.join(MANIFEST), list.replacen(from, to, 1)).unwrap();
        store::read(&folder.0, None).unwrap_err()
    };
    let older = swap("\"format_version\": 1", "\"format_version\": 0");
    assert!(matches!(older, TableError::Outdated { .. }), "{older}");
    let stranger = swap("nightpool response table", "a table of somebody else");
    assert!(matches!(stranger, TableError::Foreign { .. }), "{stranger}");
    let tampered = swap("\"seed\": 11", "\"seed\": 12");
    assert!(matches!(tampered, TableError::Corrupted { .. }), "{tampered}");
}

fn kind(name: &str, mirror_area_m2: f64) -> TelescopeKind {
    TelescopeKind {
        name: name.into(),
        mirror_area_m2,
        obscuration: 0.1,
        reflectivity: Curve::constant(0.8, (300.0, 600.0)),
        point_spread_deg: 0.04,
        point_spread_growth: 0.0,
        camera: Camera::new(PixelShape::Hexagonal, 0.2, 4.0).unwrap(),
        light_guide_efficiency: 0.9,
        sensor: Curve::constant(0.25, (300.0, 600.0)),
        collection_efficiency: 0.9,
        pulse_spread: 0.4,
        pulse_width_ns: 5.0,
        coincidence_gate_ns: 10.0,
        connected_pixels: 3,
        threshold: Threshold::FixedPe(4.0),
        cost: 1.0,
    }
}

/// Runs `with` on a scene of real light and telescopes.
fn on_scene<T>(names: [&str; 2], spots: &[(f64, &str)], with: impl FnOnce(&Scene<'_>) -> T) -> T {
    let air = Atmosphere::us1976();
    let emitters = hillas::table(Spread::FULL, 500, 1);
    let settings = LightSettings {
        atmosphere: &air,
        transmission: &|_, _, _| 0.8,
        observer_altitude_m: 2_000.0,
        zenith_rad: 0.3,
        transverse_field_ut: 0.0,
        emitters: &emitters,
        slabs: 40,
    };
    let kinds = names.map(|name| kind(name, if name == "broad" { 80.0 } else { 25.0 }));
    let efficiency: Vec<_> =
        kinds.iter().map(|kind| move |wave: f64| kind.efficiency(wave)).collect();
    let detectors: Vec<_> = efficiency
        .iter()
        .zip(names)
        .map(|(efficiency, name)| Detector { name, band_nm: (300.0, 600.0), efficiency })
        .collect();
    let light = LightModel::new(&settings, &detectors);
    let developments = DevelopmentTable::shipped().unwrap();
    let columns = spots.iter().map(|&(x, name)| Column {
        position_m: [x, 20.0, 0.0],
        kind: names.iter().position(|known| *known == name).unwrap(),
    });
    with(&Scene {
        seed: 3,
        kinds: &kinds,
        sky_per_ns: vec![0.2, 0.2],
        light: &light,
        pointing: Direction { zenith_rad: 0.3, azimuth_rad: 2.0 },
        field_ut: Vector3::zeros(),
        columns: columns.collect(),
        light_scale: 1.0,
        parts: &|primary, light, stream| parts(primary, light, &developments, stream),
    })
}

fn bright(species: Species) -> Throw {
    Throw { energy_gev: (100.0, 3_000.0), ..throw(species, 3) }
}

const SPOTS: [(f64, &str); 3] = [(-60.0, "broad"), (60.0, "broad"), (0.0, "narrow")];

/// Real showers on real telescopes: the same for any number of threads, for any order of the pads
/// and of the kinds, for parts, and with a pad more.
#[test]
fn verify_simulated_cells_depend_on_identity_only() {
    let simulated = |names: [&str; 2], spots: &[(f64, &str)], threads: usize, cuts: &[usize]| {
        on_scene(names, spots, |scene| {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().unwrap();
            let mut builder = TableBuilder::new();
            for species in [Species::Gamma, Species::Proton] {
                for ends in cuts.windows(2) {
                    let (throw, numbers) = (bright(species), ends[0]..ends[1]);
                    let simulate = || Sample::simulate_words(scene, &throw, numbers, &|| ());
                    builder.insert(pool.install(simulate));
                }
            }
            builder.finish(stamp()).unwrap()
        })
    };
    let table = simulated(["broad", "narrow"], &SPOTS, 1, &[0, 9]);
    let lit: usize = table.samples.iter().flat_map(|sample| &sample.images).map(Vec::len).sum();
    assert!(lit > 100, "{lit} images are too few to tell");
    assert_eq!(table, simulated(["broad", "narrow"], &SPOTS, 8, &[0, 9]));
    let turned: Vec<_> = SPOTS.iter().rev().copied().collect();
    assert_eq!(table, simulated(["narrow", "broad"], &turned, 2, &[0, 2, 4, 9]));
    let more: Vec<_> = [(-120.0, "narrow")].into_iter().chain(SPOTS).collect();
    let more = simulated(["broad", "narrow"], &more, 2, &[0, 9]);
    for (sample, wider) in table.samples.iter().zip(&more.samples) {
        for (column, pad) in sample.pads.iter().enumerate() {
            let place = wider.column(pad).unwrap();
            assert_eq!(sample.margins[column], wider.margins[place]);
            assert_eq!(sample.images[column], wider.images[place]);
        }
    }
}

/// A table on disk saves work and never changes a result.
#[test]
fn verify_a_table_used_again_gives_the_same_samples() {
    let asked = |folder: &Folder, spots: &[(f64, &str)], throws: &[(Throw, usize)]| {
        let simulated = AtomicUsize::new(0);
        let tick = || {
            simulated.fetch_add(1, Ordering::Relaxed);
        };
        let samples = on_scene(["broad", "narrow"], spots, |scene| {
            reuse::samples(&folder.0, &stamp(), scene, throws, &tick).unwrap()
        });
        (samples, simulated.into_inner())
    };
    let (gamma, proton) = (bright(Species::Gamma), bright(Species::Proton));
    let (folder, once) = (Folder::new("reuse"), [(gamma.clone(), 1)]);
    let (first, made) = asked(&folder, &SPOTS[..2], &once);
    assert_eq!(made, 9);
    assert_eq!(asked(&folder, &SPOTS[..2], &once), (first.clone(), 0));
    // Another pad: nine words more; twice the showers and a new primary: nine words each.
    let (wider, made) = asked(&folder, &SPOTS, &once);
    assert_eq!((made, &wider[0].margins[..2]), (9, &first[0].margins[..]));
    let all = [(gamma.clone(), 2), (proton.clone(), 1)];
    let (both, made) = asked(&folder, &SPOTS, &all);
    assert_eq!(made, 18);
    assert_eq!(asked(&Folder::new("fresh"), &SPOTS, &all), (both.clone(), 27));
    // Fewer pads and showers than there are cost nothing; so does going back.
    assert_eq!(asked(&folder, &SPOTS[..2], &once), (first, 0));
    assert_eq!(asked(&folder, &SPOTS, &all), (both, 0));
    // Thrown otherwise: made again, and the other primary stays.
    let steeper = Throw { index: 2.0, ..gamma };
    let (_, made) = asked(&folder, &SPOTS, &[(steeper, 1)]);
    assert_eq!(made, 9);
    assert_eq!(asked(&folder, &SPOTS, &[(proton, 1)]).1, 0);
}
