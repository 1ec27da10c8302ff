//! Layouts scored a second, and the time of a search.

use std::hint::black_box;
use std::sync::atomic::AtomicBool;

use criterion::{Criterion, criterion_group, criterion_main};
use nightpool::layout::cost::{KindPrice, Tariff};
use nightpool::layout::score::rate_hz;
use nightpool::layout::{Condition, Objective, Planes, Problem, Settings, search};
use nightpool::numerics::{Stage, Stream};

/// 100,032 events on 400 pads 30 m apart, seen within reach of a core.
fn problem() -> Problem {
    let (side, words) = (20, 1_563);
    let place = |i: usize| [30.0 * (i % side) as f64, 30.0 * (i / side) as f64, 0.0];
    let positions_m: Vec<[f64; 3]> = (0..side * side).map(place).collect();
    let mut columns = vec![vec![0_u64; words]; side * side];
    let mut stream = Stream::keyed(1, Stage::Search, &[0]);
    for word in 0..words {
        let reach = 60.0 + 60.0 * stream.exponential();
        for event in 0..64 {
            let core = [0, 1].map(|_| 1_000.0 * stream.uniform() - 200.0);
            for (column, p) in columns.iter_mut().zip(&positions_m) {
                if (p[0] - core[0]).hypot(p[1] - core[1]) < reach {
                    column[word] |= 1 << event;
                }
            }
        }
    }
    let weights = vec![(0..words).map(|_| stream.uniform()).collect()];
    Problem {
        kinds: vec![0; side * side],
        positions_m,
        gamma: Planes { columns, weights, showers: (0..words as u32).collect() },
        backgrounds: Vec::new(),
        condition: Condition::any(2),
        objective: Objective::GammaRate { spectrum: 0 },
        tariff: Tariff { kinds: vec![KindPrice { telescope: 1.0, pad: 0.0 }], ..Tariff::default() },
        least_distance_m: 20.0,
        budget: None,
    }
}

fn scoring(criterion: &mut Criterion) {
    let problem = problem();
    let mut stream = Stream::keyed(2, Stage::Search, &[1]);
    let layouts: Vec<Vec<usize>> =
        (0..512).map(|_| (0..8).map(|_| (400.0 * stream.uniform()) as usize).collect()).collect();
    let mut next = layouts.iter().cycle();
    criterion.bench_function("score a layout of 8 on 100,000 events", |bencher| {
        bencher.iter(|| {
            let members = next.next().map_or(&[][..], Vec::as_slice);
            rate_hz(&problem.gamma, 0, black_box(members), &problem.kinds, &problem.condition)
        });
    });
    // The limit: reading eight planes at the rate of a plain sum over them.
    let mut next = layouts.iter().cycle();
    criterion.bench_function("read the planes of 8 on 100,000 events", |bencher| {
        bencher.iter(|| {
            let members = next.next().map_or(&[][..], Vec::as_slice);
            let sum = |&m: &usize| problem.gamma.columns[m].iter().fold(0, |a, b| a ^ b);
            black_box(members).iter().map(sum).fold(0_u64, |a, b| a ^ b)
        });
    });
}

fn searching(criterion: &mut Criterion) {
    let problem = problem();
    let settings =
        Settings { telescopes: 8, fixed: Vec::new(), restarts: 8, steps: 30_000, seed: 1 };
    let mut group = criterion.benchmark_group("search");
    group.sample_size(10);
    group.bench_function("C(400, 8), 100,000 events", |bencher| {
        bencher.iter(|| search(&problem, &settings, &AtomicBool::new(false)));
    });
    group.finish();
}

criterion_group!(benches, scoring, searching);
criterion_main!(benches);
