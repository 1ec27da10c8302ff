//! The response table against itself: codes, words, parts, files.

use std::path::PathBuf;

use nightpool::numerics::{Stage, Stream};
use nightpool::response::margin::{code, margin_pe, threshold_code};
use nightpool::response::store::{self, MANIFEST};
use nightpool::response::{
    CellImage, EVENTS_PER_WORD, IMAGE_FLOOR_PE, PadKey, ResponseTable, Sample, TableBuilder,
    TableError, TableStamp, Throw, Word, WordCells,
};
use nightpool::shower::{Direction, Species};
use nightpool::telescope::{ImageRecord, ImageSummary};

pub fn throw(species: Species, words: usize) -> Throw {
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
                        time_slope_ns_deg: 1.5,
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

pub fn stamp() -> TableStamp {
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
pub struct Folder(pub PathBuf);

impl Folder {
    pub fn new(name: &str) -> Self {
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
    let older = swap("\"format_version\": 2", "\"format_version\": 0");
    assert!(matches!(older, TableError::Outdated { .. }), "{older}");
    let stranger = swap("nightpool response table", "a table of somebody else");
    assert!(matches!(stranger, TableError::Foreign { .. }), "{stranger}");
    let tampered = swap("\"seed\": 11", "\"seed\": 12");
    assert!(matches!(tampered, TableError::Corrupted { .. }), "{tampered}");
}
