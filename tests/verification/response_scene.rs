//! The response table of real showers on real telescopes: identity, threads, reuse.

use std::sync::atomic::{AtomicUsize, Ordering};

use nalgebra::Vector3;
use nightpool::atmosphere::Atmosphere;
use nightpool::light::{Detector, LightModel, LightSettings, parts};
use nightpool::response::{Column, Sample, Scene, TableBuilder, Throw, reuse};
use nightpool::shower::profile::DevelopmentTable;
use nightpool::shower::profile::hillas::{self, Spread};
use nightpool::shower::{Direction, Species};
use nightpool::telescope::{Camera, Curve, PixelShape, TelescopeKind, Threshold, Topology};

use crate::response::{Folder, stamp, throw};

fn kind(name: &str, mirror_area_m2: f64) -> TelescopeKind {
    TelescopeKind {
        name: name.into(),
        mirror_area_m2,
        obscuration: 0.1,
        reflectivity: Curve::constant(0.8, (300.0, 600.0)),
        point_spread_deg: 0.04,
        mirror_delay_ns: 0.0,
        point_spread_growth: 0.0,
        camera: Camera::new(PixelShape::Hexagonal, 0.2, 4.0).unwrap(),
        light_guide_efficiency: 0.9,
        sensor: Curve::constant(0.25, (300.0, 600.0)),
        collection_efficiency: 0.9,
        pulse_spread: 0.4,
        pulse_width_ns: 5.0,
        coincidence_gate_ns: 10.0,
        electronic_noise_pe: 0.0,
        crosstalk: 0.0,
        afterpulsing: 0.0,
        afterpulse_pe: 1.0,
        topology: Topology::Connected(3),
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
        cascade: None,
        parts: &|primary, light, stream| {
            parts(primary, Vector3::zeros(), light, &developments, stream)
        },
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
            reuse::samples(&folder.0, &stamp(), scene, throws, false, &tick).unwrap()
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
