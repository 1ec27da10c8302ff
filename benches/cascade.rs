//! Speed of the reference cascade: transport alone, and with light on 100 discs of 100 m2 at 16
//! core positions at a detection efficiency of 10 %.
//!
//! One thread. Throughput is in units of 1 GeV of primary energy: 1e3 elements are 1 TeV.

use std::hint::black_box;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use nalgebra::Vector3;

use nightpool::atmosphere::Atmosphere;
use nightpool::light::Detector;
use nightpool::light::collect::pool::{incoming, light_cuts};
use nightpool::light::collect::shower::Descent;
use nightpool::light::collect::{Basket, CollectSettings, Collector, PadDisc, collected};
use nightpool::numerics::{Stage, Stream};
use nightpool::shower::cascade::{CascadeSpecies, Environment, NoSink, transport};
use nightpool::shower::{Direction, Primary, Species};

const OBSERVER_M: f64 = 2200.0;

fn cascade(criterion: &mut Criterion) {
    let air = Atmosphere::us1976();
    let field = Vector3::new(0.0, 20.0, -30.0);
    let environment = Environment::new(&air, OBSERVER_M, field, light_cuts(&air, OBSERVER_M));
    let detector = Detector { name: "tenth", band_nm: (300.0, 600.0), efficiency: &|_| 0.1 };
    let collector = Collector::new(&CollectSettings {
        atmosphere: &air,
        transmission: &|h, z, w| {
            nightpool::atmosphere::Extinction::default().transmission(&air, h, OBSERVER_M, z, w)
        },
        observer_altitude_m: OBSERVER_M,
        axis: Direction::ZENITH,
        pointing: Direction::ZENITH,
        reach_rad: 0.05,
        detectors: &[detector],
    });
    let pads: Vec<PadDisc> = (0..100)
        .map(|place| {
            let (x, y) = (f64::from(place % 10) - 4.5, f64::from(place / 10) - 4.5);
            PadDisc { position: Vector3::new(80.0 * x, 80.0 * y, 0.0), kind: 0, area_m2: 100.0 }
        })
        .collect();
    let mut stream = Stream::keyed(1, Stage::Core, &[]);
    let cores: Vec<[f64; 2]> = (0..16)
        .map(|_| [600.0 * (stream.uniform() - 0.5), 600.0 * (stream.uniform() - 0.5)])
        .collect();
    let target = collector.target(&pads, &cores);
    let mut group = criterion.benchmark_group("cascade");
    group.sample_size(10);
    for energy in [100.0, 1000.0] {
        group.throughput(Throughput::Elements(energy as u64));
        let (primary, time) =
            incoming(CascadeSpecies::Gamma, energy, Direction::ZENITH, OBSERVER_M, &air);
        let mut shower = 0;
        group.bench_function(format!("transport {energy} GeV"), |bencher| {
            bencher.iter(|| {
                shower += 1;
                let mut stream = Stream::keyed(1, Stage::Shower, &[shower]);
                transport(vec![primary], &environment, &mut stream, &mut NoSink)
            });
        });
        group.bench_function(format!("light {energy} GeV"), |bencher| {
            bencher.iter(|| {
                shower += 1;
                let key = [shower];
                black_box(collected(primary, time, &environment, &collector, &target, 1, &key))
            });
        });
    }
    // Protons, with their hadronic core and muons, at 20 core positions.
    let cores: Vec<[f64; 2]> = (0..20)
        .map(|_| [600.0 * (stream.uniform() - 0.5), 600.0 * (stream.uniform() - 0.5)])
        .collect();
    let wider = collector.target(&pads, &cores);
    let descent = Descent::new(&air, &environment, Direction::ZENITH);
    let (species, energy_gev) = (Species::Proton, 1_000.0);
    let proton = Primary { species, energy_gev, direction: Direction::ZENITH };
    group.throughput(Throughput::Elements(1_000));
    let mut shower = 0;
    group.bench_function("light of a proton 1000 GeV", |bencher| {
        bencher.iter(|| {
            shower += 1;
            let mut stream = Stream::keyed(1, Stage::Shower, &[shower]);
            let light = Stream::keyed(1, Stage::Image, &[shower]);
            let arrival = descent.arrival_ns();
            let mut basket = Basket::new(&collector, &wider, &environment.air, light, arrival);
            descent.shower(&proton, &mut stream, &mut basket);
            black_box(basket.collected())
        });
    });
    group.finish();
    let (light, ledger) = {
        let (primary, time) =
            incoming(CascadeSpecies::Gamma, 1000.0, Direction::ZENITH, OBSERVER_M, &air);
        collected(primary, time, &environment, &collector, &target, 1, &[0])
    };
    println!(
        "1 TeV: {} steps, {} photons, {} quanta drawn, {} on discs",
        ledger.steps,
        ledger.photons,
        light.drawn,
        light.len()
    );
}

criterion_group!(benches, cascade);
criterion_main!(benches);
