//! The reference cascade against conservation laws, limits and itself.

use nalgebra::Vector3;

use nightpool::atmosphere::Atmosphere;
use nightpool::numerics::{Stage, Stream};
use nightpool::shower::cascade::{
    CascadeParticle, CascadeSpecies, Cuts, Environment, Ledger, TrackSink, TrackStep, transport,
};

struct Profile {
    tracks: Vec<f64>,
    total: f64,
    air: nightpool::shower::cascade::air::AirTable,
}

impl TrackSink for Profile {
    fn step(&mut self, step: &TrackStep) {
        self.total += step.thickness_g_cm2;
        let depth = self.air.depth_g_cm2(self.air.altitude_m(&(0.5 * (step.start + step.end))));
        let bin = (depth / 10.0) as usize;
        let cos = (step.start.z - step.end.z) / step.length_m;
        if bin < self.tracks.len() {
            self.tracks[bin] += step.thickness_g_cm2 * cos / 10.0;
        }
    }
}

fn gamma(energy_gev: f64, altitude: f64) -> CascadeParticle {
    CascadeParticle::new(
        CascadeSpecies::Gamma,
        energy_gev,
        Vector3::new(0.0, 0.0, altitude),
        Vector3::new(0.0, 0.0, -1.0),
        0.0,
    )
}

#[test]
fn explore() {
    use nightpool::shower::cascade::{compton, material, pair};
    println!("X0 {}", material::radiation_length_g_cm2());
    for (mev, nist) in [
        (1.5, 5.175e-2),
        (2.0, 4.447e-2),
        (3.0, 3.581e-2),
        (4.0, 3.079e-2),
        (5.0, 2.751e-2),
        (6.0, 2.522e-2),
        (8.0, 2.225e-2),
        (10.0, 2.045e-2),
        (15.0, 1.810e-2),
        (20.0, 1.705e-2),
        (100.0, 1.0),
        (1e4, 1.0),
        (1e6, 1.0),
    ] {
        let (p, c) = (pair::pair_cm2_g(mev * 1e-3), compton::compton_cm2_g(mev * 1e-3));
        println!("{mev} {p:.5} {c:.5} {:.5} {nist} {:.4}", p + c, (p + c) / nist);
    }
    println!(
        "limit {} 7/9X0 {}",
        pair::pair_limit_cm2_g(),
        7. / 9. / material::radiation_length_g_cm2()
    );
    let air = Atmosphere::us1976();
    for (cut, energy, n) in [(1.0, 100.0, 20), (20.0, 100.0, 100), (20.0, 1000.0, 10)] {
        let cuts = if cut < 5.0 { Cuts::low(1e-3) } else { Cuts::at_threshold(21.5e-3) };
        let start = std::time::Instant::now();
        let environment = Environment::new(&air, 0.0, Vector3::zeros(), cuts);
        println!("tables {:?}", start.elapsed());
        let mut sink = Profile { tracks: vec![0.0; 104], total: 0.0, air: environment.air.clone() };
        let mut sum = Ledger::default();
        let start = std::time::Instant::now();
        for shower in 0..n {
            let mut stream = Stream::keyed(1, Stage::Shower, &[shower]);
            let ledger =
                transport(vec![gamma(energy, 60_000.0)], &environment, &mut stream, &mut sink);
            assert!((ledger.total_gev() / energy - 1.0).abs() < 1e-3, "{ledger:?}");
            sum.steps += ledger.steps;
            sum.photons += ledger.photons;
            sum.ionisation_gev += ledger.ionisation_gev / n as f64;
            sum.soft_radiation_gev += ledger.soft_radiation_gev / n as f64;
            sum.dropped_gev += ledger.dropped_gev / n as f64;
            sum.escaped_gev += ledger.escaped_gev / n as f64;
        }
        let took = start.elapsed().as_secs_f64();
        println!("{sum:?}");
        let tev = energy * n as f64 * 1e-3;
        println!(
            "cut {cut} E {energy}: {:.2} TeV/s, {:.0} steps/TeV, {:.0} ns/step",
            tev / took,
            sum.steps as f64 / tev,
            took * 1e9 / sum.steps as f64
        );
        println!("track/(E X0/Ec) {}", sink.total / n as f64 / (energy / 0.08792 * 36.62));
        for bin in (0..100).step_by(5) {
            print!("{:.1} ", sink.tracks[bin] / n as f64);
        }
        println!();
    }
}
