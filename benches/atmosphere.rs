//! The air: building it, and what one look-up costs.

use std::hint::black_box;

use criterion::{Criterion, criterion_group, criterion_main};
use nightpool::atmosphere::{Atmosphere, Extinction, TransmissionTable};

/// Altitudes, zenith angles and wavelengths in no order, so that a cache cannot learn them.
fn places() -> Vec<(f64, f64, f64)> {
    let part = |i: u64, step: u64| (i * step % 4_096) as f64 / 4_096.0;
    (0..4_096)
        .map(|i| {
            let altitude_m = 2_201.0 + 20_000.0 * part(i, 1_237);
            (altitude_m, 1.2 * part(i, 2_731), 280.0 + 400.0 * part(i, 3_301))
        })
        .collect()
}

fn building(criterion: &mut Criterion) {
    for name in ["us1976", "tropical", "model:-23.3,16.5,7"] {
        criterion.bench_function(&format!("build {name}"), |bencher| {
            bencher.iter(|| Atmosphere::named(black_box(name)));
        });
    }
    let air = Atmosphere::us1976();
    criterion.bench_function("tabulate transmission", |bencher| {
        bencher.iter(|| TransmissionTable::new(&Extinction::default(), &air, black_box(2_200.0)));
    });
}

fn looking_up(criterion: &mut Criterion) {
    let air = Atmosphere::named("tropical").expect("it ships");
    let extinction = Extinction::default();
    let table = TransmissionTable::new(&extinction, &air, 2_200.0);
    let places = places();
    let mut bench = |name: &str, look_up: &dyn Fn(f64, f64, f64) -> f64| {
        let mut next = places.iter().cycle();
        criterion.bench_function(name, |bencher| {
            bencher.iter(|| {
                let &(h, z, nm) = next.next().expect("endless");
                look_up(h, z, nm)
            });
        });
    };
    bench("nothing", &|h, z, nm| h + z + nm);
    bench("density", &|h, _, _| air.density_kg_m3(h));
    bench("depth", &|h, _, _| air.depth_g_cm2(h));
    bench("altitude of a depth", &|h, _, _| air.altitude_m(0.03 * h));
    bench("refractivity", &|h, _, nm| air.refractivity(h, nm));
    bench("group refractivity", &|h, _, nm| air.group_refractivity(h, nm));
    bench("transmission from the table", &|h, z, nm| table.transmission(h, z, nm));
    bench("transmission by integration", &|h, z, nm| {
        extinction.transmission(&air, h, 2_200.0, z, nm)
    });
    bench("slant depth", &|h, z, _| air.slant_depth_g_cm2(h, 2_200.0, z));
}

criterion_group!(benches, building, looking_up);
criterion_main!(benches);
