//! Image-and-trigger decisions per second, 1,000 hexagonal pixels, images of 20 to 200
//! photoelectrons: `cargo bench --bench trigger`.

use std::hint::black_box;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use nightpool::numerics::{Stream, stream::Stage};
use nightpool::telescope::{
    Camera, Curve, PixelShape, Quantum, Readout, TelescopeKind, Threshold, Topology,
};

fn kind() -> TelescopeKind {
    TelescopeKind {
        name: "bench".into(),
        mirror_area_m2: 110.0,
        obscuration: 0.05,
        reflectivity: Curve::named("aluminium-quartz").expect("built in"),
        point_spread_deg: 0.03,
        mirror_delay_ns: 0.0,
        point_spread_growth: 0.02,
        camera: Camera::new(PixelShape::Hexagonal, 0.15, 5.2).expect("few pixels"),
        light_guide_efficiency: 0.85,
        sensor: Curve::named("bialkali").expect("built in"),
        collection_efficiency: 0.9,
        pulse_spread: 0.4,
        pulse_width_ns: 4.0,
        coincidence_gate_ns: 8.0,
        electronic_noise_pe: 0.0,
        crosstalk: 0.0,
        afterpulsing: 0.0,
        afterpulse_pe: 1.0,
        topology: Topology::Connected(3),
        threshold: Threshold::FixedPe(5.0),
        cost: 1.0,
    }
}

fn decisions(criterion: &mut Criterion) {
    let kind = kind();
    let topologies = [
        ("connected", Topology::Connected(3)),
        ("compact", Topology::Compact(3)),
        ("majority", Topology::Majority(3)),
        ("patch", Topology::PatchSum(6.0)),
    ];
    for (name, topology) in topologies {
        let mut group = criterion.benchmark_group(name);
        for light in [20, 60, 200] {
            let mut stream = Stream::keyed(1, Stage::Image, &[light]);
            let quanta: Vec<Quantum> = (0..light)
                .map(|_| Quantum {
                    x_deg: (0.5 + 0.2 * stream.normal()) as f32,
                    y_deg: (0.1 * stream.normal()) as f32,
                    time_ns: (2.0 * stream.normal()) as f32,
                    weight: 1.0,
                })
                .collect();
            let mut readout = Readout::with_topology(&kind, 0.2, topology);
            group.throughput(Throughput::Elements(1));
            group.bench_function(format!("{light} pe"), |bencher| {
                bencher.iter(|| black_box(readout.image(black_box(&quanta), &mut stream)));
            });
        }
        group.finish();
    }
}

criterion_group!(benches, decisions);
criterion_main!(benches);
