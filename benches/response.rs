//! Bit planes, rate sums and the store of the response table, 100,000 events.

use std::hint::black_box;
use std::path::Path;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use nalgebra::Vector3;
use nightpool::light::{Detector, LightModel, LightSettings, parts};
use nightpool::numerics::{Stage, Stream};
use nightpool::rates::{Spectrum, event_rates, rate, rate_sum_hz};
use nightpool::response::margin::{code, threshold_code};
use nightpool::response::sample::plane;
use nightpool::response::{
    CellImage, Column, PadKey, ResponseTable, Sample, Scene, TableBuilder, TableStamp, Throw, Word,
    WordCells, store,
};
use nightpool::shower::profile::{DevelopmentTable, EmitterTable};
use nightpool::shower::{Direction, Species};
use nightpool::study::Study;
use nightpool::telescope::{ImageRecord, ImageSummary};

/// 1,564 words, one event in five lit.
fn sample(pads: usize) -> Sample {
    let throw = Throw {
        species: Species::Gamma,
        seed: 1,
        energy_gev: (20.0, 20_000.0),
        index: 1.6,
        pointing: Direction::ZENITH,
        cone_rad: 0.0,
        centre_m: [0.0; 2],
        rings_m: vec![100.0, 200.0, 400.0, 800.0],
        words: 391,
    };
    let keys: Vec<_> = (0..pads).map(|pad| PadKey::new([pad as f64, 0.0, 0.0], "broad")).collect();
    let words = (0..throw.word_count()).map(|number| {
        let thrown = throw.word(number);
        let mut stream = Stream::keyed(1, Stage::Image, &[number as u64]);
        let mut codes = Vec::new();
        let mut images = vec![Vec::new(); pads];
        for cells in &mut images {
            for event in 0..64 {
                let lit = stream.uniform() < 0.2;
                let margin = if lit { 0.8 * stream.exponential().exp() } else { 0.0 };
                codes.push(code(margin));
                let record = ImageRecord {
                    margin_pe: margin as f32,
                    photoelectrons: (30.0 * margin * stream.uniform()) as f32,
                    time_ns: stream.normal() as f32,
                    summary: ImageSummary {
                        size_pe: (30.0 * margin) as f32,
                        centroid_deg: [stream.normal() as f32, stream.normal() as f32],
                        length_deg: stream.uniform() as f32,
                        width_deg: stream.uniform() as f32,
                        orientation_rad: stream.uniform() as f32,
                        edge_fraction: 0.0,
                        time_slope_ns_deg: 1.5,
                    },
                };
                cells.extend(CellImage::of(event, &record));
            }
        }
        let (energy_gev, exposure, ring) = (thrown.energy_gev, thrown.exposure, thrown.ring);
        WordCells { word: Word { energy_gev, exposure, ring, angle_rad: 0.0 }, codes, images }
    });
    Sample::of_words(&throw, 0, keys, words.collect())
}

fn planes(criterion: &mut Criterion) {
    let sample = sample(1);
    let mut group = criterion.benchmark_group("100,000 events");
    group.throughput(Throughput::Elements(sample.events() as u64));
    let least = threshold_code(4.0);
    group.bench_function("plane", |b| b.iter(|| plane(black_box(&sample.margins[0]), least)));
    let bits = sample.plane(0, 4.0);
    let spectrum = Spectrum::named("crab-magic-2015").expect("built in");
    let each = event_rates(&sample.words, &spectrum);
    group.bench_function("rate sum", |b| b.iter(|| rate_sum_hz(black_box(&bits), &each)));
    group.bench_function("rate with error", |b| {
        b.iter(|| rate(&sample.words, black_box(&bits), &spectrum));
    });
    group.finish();
}

fn disk(criterion: &mut Criterion) {
    let mut builder = TableBuilder::new();
    builder.insert(sample(40));
    let stamp = TableStamp { study_checksum: "a".into(), upstream_checksum: "b".into(), seed: 1 };
    let table: ResponseTable = builder.finish(stamp).expect("whole");
    let folder = std::env::temp_dir().join(format!("nightpool-bench-{}", std::process::id()));
    let mut group = criterion.benchmark_group("100,000 events on 40 pads");
    group.sample_size(10);
    group.bench_function("write", |b| {
        b.iter(|| {
            let _ = std::fs::remove_dir_all(&folder);
            store::write(&folder, &table).expect("written");
        });
    });
    group.bench_function("read", |b| b.iter(|| store::read(&folder, None).expect("read")));
    group.finish();
    // Nothing there: this benchmark was not asked for.
    let Ok(entries) = std::fs::read_dir(&folder) else { return };
    let bytes: u64 =
        entries.map(|entry| entry.and_then(|entry| entry.metadata()).expect("a file").len()).sum();
    println!("store: {:.1} MB", bytes as f64 * 1e-6);
    if std::env::var_os("NIGHTPOOL_KEEP").is_none() {
        let _ = std::fs::remove_dir_all(&folder);
    } else {
        println!("kept in {}", folder.display());
    }
}

/// A square of 400 pads 31 m apart for one kind of 12 m class mirrors at 2.2 km, 20 degrees from
/// the zenith: what an event and pad takes, and what that makes of 100,000 events.
fn simulated(_: &mut Criterion) {
    let text = include_str!("../sites/amber_saddle.toml");
    let study = Study::parse(Path::new("bench.toml"), text).expect("the demo study");
    let kinds = [study.kinds[0].clone()];
    let efficiency = |nm: f64| kinds[0].efficiency(nm);
    let emitters = EmitterTable::shipped().expect("shipped");
    let developments = DevelopmentTable::shipped().expect("shipped");
    let pointing = Direction { zenith_rad: 0.349, azimuth_rad: 0.0 };
    let field_ut = Vector3::from(study.site.field_ut.unwrap_or_default());
    let settings = LightSettings {
        atmosphere: &study.air.atmosphere,
        transmission: &|_, _, _| 0.8,
        observer_altitude_m: study.site.altitude_m,
        zenith_rad: pointing.zenith_rad,
        transverse_field_ut: field_ut.cross(&pointing.to_source()).norm(),
        emitters: &emitters,
        slabs: 36,
    };
    let detector = Detector { name: "broad", band_nm: kinds[0].band_nm(), efficiency: &efficiency };
    let light = LightModel::new(&settings, &[detector]);
    let place = |i: usize| [31.0 * ((i % 20) as f64 - 9.5), 31.0 * ((i / 20) as f64 - 9.5), 0.0];
    let scene = Scene {
        seed: 1,
        kinds: &kinds,
        sky_per_ns: vec![kinds[0].sky_photoelectrons_per_ns(&study.night_sky)],
        light: &light,
        pointing,
        field_ut,
        columns: (0..400).map(|pad| Column { position_m: place(pad), kind: 0 }).collect(),
        light_scale: 1.0,
        cascade: None,
        parts: &|primary, light, stream| parts(primary, field_ut, light, &developments, stream),
    };
    let pool = rayon::ThreadPoolBuilder::new().num_threads(1).build().expect("one thread");
    for (species, energy_gev, cone_rad) in
        [(Species::Gamma, (10.0, 30_000.0), 0.0), (Species::Proton, (20.0, 60_000.0), 0.093)]
    {
        let rings_m = vec![260.0, 520.0, 870.0];
        let throw = Throw {
            species,
            energy_gev,
            cone_rad,
            index: 1.5,
            pointing,
            rings_m,
            words: 8,
            ..sample(1).throw
        };
        let start = std::time::Instant::now();
        let made = pool.install(|| Sample::simulate(&scene, &throw, &|| {}));
        let seconds = start.elapsed().as_secs_f64();
        let cells = (made.events() * 400) as f64;
        println!(
            "{species}: {:.2} us an event and pad, {:.0} % of them lit; 100,000 events on 400 pads: \
             {:.0} s of one core",
            1e6 * seconds / cells,
            100.0 * (1.0 - made.dark_cells() as f64 / cells),
            4e7 * seconds / cells
        );
    }
}

criterion_group!(benches, planes, disk, simulated);
criterion_main!(benches);
