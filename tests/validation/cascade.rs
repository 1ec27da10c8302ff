//! The reference cascade against tables, handbooks and cascade theory.

use nalgebra::Vector3;

use nightpool::atmosphere::Atmosphere;
use nightpool::consts::{AIR_CRITICAL_ENERGY_GEV, AIR_RADIATION_LENGTH_G_CM2};
use nightpool::light::Detector;
use nightpool::light::collect::{PoolRequest, pool_density};
use nightpool::numerics::{Stage, Stream};
use nightpool::shower::calibrate::maker::recorded_shower;
use nightpool::shower::calibrate::recorder::BIN_G_CM2;
use nightpool::shower::cascade::{
    CascadeParticle, CascadeSpecies, Cuts, Environment, TrackSink, TrackStep, compton, material,
    pair, transport,
};
use nightpool::shower::profile::longitudinal::greisen;
use nightpool::shower::{Direction, Primary, Species};

/// Review of Particle Physics, Atomic and Nuclear Properties: dry air 36.62 g/cm2.
#[test]
fn validate_radiation_length_tsai1974() {
    let ours = material::radiation_length_g_cm2();
    // The same formula: digits of the composition only.
    assert!((ours / AIR_RADIATION_LENGTH_G_CM2 - 1.0).abs() < 5e-4, "{ours}");
}

#[test]
fn validate_attenuation_hubbell_seltzer1995() {
    let table = include_str!("../data/hubbell_seltzer1995_air.csv");
    for line in table.lines().filter(|line| !line.starts_with('#')).skip(1) {
        let (energy, expected) = line.split_once(',').expect("two columns");
        let energy: f64 = energy.parse().expect("a number");
        let expected: f64 = expected.parse().expect("a number");
        let ours = pair::pair_cm2_g(1e-3 * energy) + compton::compton_cm2_g(1e-3 * energy);
        // The table has radiative corrections (up to 1 %), coherent scattering and the
        // photoelectric effect (0.2 %), which are left out here.
        assert!((ours / expected - 1.0).abs() < 0.011, "{energy} MeV: {ours} against {expected}");
    }
}

/// Complete screening: 7/9 of an interaction per radiation length (Tsai 1974: 7/9 - 1/54L...).
#[test]
fn validate_first_pair_depth_tsai1974() {
    let limit = 9.0 / 7.0 * AIR_RADIATION_LENGTH_G_CM2;
    struct First(Vec<f64>, nightpool::shower::cascade::air::AirTable);
    impl TrackSink for First {
        fn step(&mut self, _: &TrackStep) {}
        fn first_interaction(&mut self, position: &Vector3<f64>) {
            self.0.push(self.1.depth_g_cm2(self.1.altitude_m(position)));
        }
    }
    let air = Atmosphere::us1976();
    // Cuts above half the energy end each shower at its first vertex.
    let environment = Environment::new(&air, 0.0, Vector3::zeros(), Cuts::at_threshold(9e3));
    let mut first = First(Vec::new(), environment.air.clone());
    for shower in 0..40_000 {
        let mut stream = Stream::keyed(1, Stage::Shower, &[shower]);
        let (down, top) = (Vector3::new(0.0, 0.0, -1.0), Vector3::new(0.0, 0.0, 90_000.0));
        let photon = CascadeParticle::new(CascadeSpecies::Gamma, 1e4, top, down, 0.0);
        transport(vec![photon], &environment, &mut stream, &mut first);
    }
    let mean = first.0.iter().sum::<f64>() / first.0.len() as f64;
    println!("first pair {mean:.2} g/cm2, limit {limit:.2}");
    // Statistical error 0.5 %; the exact limit is 0.5 % longer than 9/7 because of the small terms.
    assert!((mean / limit - 1.0).abs() < 0.02, "{mean} against {limit}");
}

struct Mean {
    profile: Vec<f64>,
    max_g_cm2: f64,
    track_g_cm2: f64,
}

fn mean_shower(floor_gev: f64, cuts: Cuts, energy_gev: f64, showers: u64) -> Mean {
    let air = Atmosphere::us1976();
    let environment = Environment::new(&air, 0.0, Vector3::zeros(), cuts);
    let mut profile = Vec::new();
    let (mut track, mut max) = (0.0, 0.0);
    for shower in 0..showers {
        let one = recorded_shower(
            &environment,
            CascadeSpecies::Gamma,
            energy_gev,
            floor_gev,
            f64::INFINITY,
            (2, shower),
        );
        profile.resize(one.profile.len(), 0.0);
        for (sum, value) in profile.iter_mut().zip(&one.profile) {
            *sum += value / showers as f64;
        }
        track += one.profile.iter().sum::<f64>() * BIN_G_CM2 / showers as f64;
        let fit = nightpool::shower::calibrate::shape::moments_fit(&one.profile, one.start_g_cm2);
        max += fit.expect("a whole shower").max_g_cm2 / showers as f64;
    }
    Mean { profile, max_g_cm2: max, track_g_cm2: track }
}

/// Rossi's approximation B: total track E X0 / E_c. Above 1 MeV somewhat less of the track is
/// counted but it is lost at the restricted rate; the review's critical energy is for dE/dx of all
/// transfers.
#[test]
fn validate_track_length_rossi1952() {
    let energy = 30.0;
    let mean = mean_shower(0.001_511, Cuts::low(1e-3), energy, 20);
    let theory = energy / AIR_CRITICAL_ENERGY_GEV * AIR_RADIATION_LENGTH_G_CM2;
    let ratio = mean.track_g_cm2 / theory;
    println!("track over E X0 / Ec: {ratio:.4}");
    // Critical energies in use for air run from 80 to 88 MeV (Rossi 81): the ratio from 1 to 1.1.
    assert!(ratio > 0.97 && ratio < 1.11, "{ratio}");
}

/// Shape against Greisen's formula: size and place of the maximum of the mean 100 GeV shower.
#[test]
fn validate_profile_greisen1956() {
    let energy = 100.0;
    let mean = mean_shower(0.001_511, Cuts::low(1e-3), energy, 40);
    let formula = |depth: f64| greisen(energy, 0.085, depth / AIR_RADIATION_LENGTH_G_CM2);
    let peak = |size: &dyn Fn(usize) -> f64| (0..200).map(size).fold(0.0_f64, f64::max);
    let ours = peak(&|bin| mean.profile[bin]);
    let theirs = peak(&|bin| formula((bin as f64 + 0.5) * BIN_G_CM2));
    let centre = |size: &dyn Fn(usize) -> f64| {
        let sum: f64 = (0..200).map(size).sum();
        (0..200).map(|bin| size(bin) * (bin as f64 + 0.5) * BIN_G_CM2).sum::<f64>() / sum
    };
    let (a, b) =
        (centre(&|bin| mean.profile[bin]), centre(&|bin| formula((bin as f64 + 0.5) * BIN_G_CM2)));
    println!("maximum {ours:.1} against {theirs:.1}; centre {a:.1} against {b:.1} g/cm2");
    // Greisen's curve counts particles of all energies crossing a level; here track above 1 MeV.
    // The two differ by the obliquity (+10 %) and the cut (-10 %); 40 showers give 3 %.
    assert!((ours / theirs - 1.0).abs() < 0.12, "{ours} {theirs}");
    assert!((a - b).abs() < 15.0, "{a} {b}");
}

/// The maximum moves by X0 ln 10 = 84.3 g/cm2 per decade.
#[test]
fn validate_elongation_rate_rossi1952() {
    let cuts = Cuts::at_threshold(0.021);
    let low = mean_shower(0.021, cuts, 30.0, 400).max_g_cm2;
    let high = mean_shower(0.021, cuts, 300.0, 150).max_g_cm2;
    let rate = high - low;
    println!("maximum {low:.1}, {high:.1}: {rate:.1} g/cm2 per decade");
    // RMS of the maximum 70 and 60 g/cm2: 6 g/cm2 on the difference.
    assert!((rate - 84.3).abs() < 15.0, "{rate}");
}

/// Energy spectrum around the maximum: shares above some energies of all above 5 MeV.
///
/// The published form is a fit to showers of 1e17 to 1e18 eV, where age runs over three times the
/// depth it does at 100 GeV: at the maximum and after it the two agree to 7 % up to 100 MeV, before
/// it (age 0.8) the young 100 GeV shower is harder, by 6 % above 20 MeV and 17 % above 100 MeV;
/// above a tenth of a percent of the primary energy it must run out of particles. The comparison
/// is made at ages 1 and 1.2, up to 100 MeV.
///
/// Nerling et al. 2006, Astropart. Phys. 24, 421 (from memory): f dlnE with
/// f = E / ((E + a1) (E + a2)^s), a1 = 6.42522 - 1.53183 s, a2 = 168.168 - 42.1368 s MeV.
#[test]
fn validate_electron_spectrum_nerling2006() {
    let air = Atmosphere::us1976();
    let environment = Environment::new(&air, 0.0, Vector3::zeros(), Cuts::low(3e-3));
    let edges = [5.0, 20.0, 50.0, 100.0, 300.0, 1000.0];
    for age in [1.0, 1.2] {
        let mut above = [0.0; 6];
        for shower in 0..25 {
            let one = recorded_shower(
                &environment,
                CascadeSpecies::Gamma,
                100.0,
                0.005,
                1.0,
                (3, shower),
            );
            let fit =
                nightpool::shower::calibrate::shape::moments_fit(&one.profile, one.start_g_cm2)
                    .expect("a whole shower");
            for sample in &one.samples {
                // Published ages are counted from the top.
                let depth = sample.depth_g_cm2;
                let own = 3.0 * depth / (depth + 2.0 * fit.max_g_cm2);
                if (own - age).abs() > 0.05 {
                    continue;
                }
                let angle =
                    f64::from(sample.emitter.angle_rad[0].hypot(sample.emitter.angle_rad[1]));
                // Published for particles that cross a level.
                let weight = angle.cos().max(0.0);
                for (sum, edge) in above.iter_mut().zip(edges) {
                    *sum += weight * f64::from(f64::from(sample.emitter.energy_gev) > 1e-3 * edge);
                }
            }
        }
        let (a1, a2) = (6.42522 - 1.53183 * age, 168.168 - 42.1368 * age);
        let integral = |from: f64| {
            nightpool::numerics::quadrature::integrate(from.ln(), 1e5_f64.ln(), 60, |log| {
                let e = log.exp();
                e / ((e + a1) * (e + a2).powf(age))
            })
        };
        for (place, edge) in edges.iter().enumerate().skip(1) {
            let (ours, theirs) = (above[place] / above[0], integral(*edge) / integral(edges[0]));
            println!("s {age}, above {edge} MeV: {ours:.4} against {theirs:.4}");
            let close = (ours / theirs - 1.0).abs() < 0.075;
            assert!(close || *edge > 200.0, "s {age} {edge}: {ours} {theirs}");
        }
    }
}

/// Central width of the projected angle behind a thin layer: 13.6 MeV / p sqrt(t) (1 + 0.038 ln t).
///
/// Highland 1975, Nucl. Instrum. Methods 129, 497, in the form of Lynch & Dahl 1991, ibid. B 58, 6:
/// good to 11 % from 1e-3 to 100 radiation lengths.
#[test]
fn validate_scattered_width_highland1975() {
    /// The track of the first particle only: steps that continue each other.
    struct First(Option<TrackStep>);
    impl TrackSink for First {
        fn step(&mut self, step: &TrackStep) {
            let follows = self.0.is_none_or(|last| (step.start - last.end).norm() < 1e-9);
            if follows {
                self.0 = Some(*step);
            }
        }
    }
    let air = Atmosphere::us1976();
    let environment = Environment::new(&air, 0.0, Vector3::zeros(), Cuts::at_threshold(0.5));
    for height in [75.0, 300.0] {
        let mut angles = Vec::new();
        let mut thickness = 0.0;
        for shower in 0..20_000 {
            let mut stream = Stream::keyed(4, Stage::Shower, &[shower]);
            let (down, top) = (Vector3::new(0.0, 0.0, -1.0), Vector3::new(0.0, 0.0, height));
            let electron = CascadeParticle::new(CascadeSpecies::Electron, 10.0, top, down, 0.0);
            let mut sink = First(None);
            transport(vec![electron], &environment, &mut stream, &mut sink);
            let last = sink.0.expect("at least one step");
            // Those that did not radiate much.
            if last.end_energy_gev > 9.0 && last.end.z < 0.1 {
                angles.push(last.end_direction.x.abs());
            }
            thickness = 0.1 * air.density_kg_m3(0.5 * height) * height;
        }
        angles.sort_by(f64::total_cmp);
        let width = angles[(0.6827 * angles.len() as f64) as usize];
        let t = thickness / AIR_RADIATION_LENGTH_G_CM2;
        let theory = 0.0136 / 10.0 * t.sqrt() * (1.0 + 0.038 * t.ln());
        println!("{t:.3} X0: {width:.3e} against {theory:.3e}");
        assert!(width / theory > 0.89 && width / theory < 1.11, "{width} {theory}");
    }
}

fn density(energy_gev: f64, showers: u64, east_ut: f64, distances_m: &[f64]) -> Vec<[f64; 3]> {
    let air = Atmosphere::us1976();
    pool_density(&PoolRequest {
        primary: Primary { species: Species::Gamma, energy_gev, direction: Direction::ZENITH },
        atmosphere: &air,
        transmission: &|_, _, _| 1.0,
        observer_altitude_m: 2200.0,
        field_ut: Vector3::new(east_ut, 0.0, 0.0),
        detector: Detector { name: "band", band_nm: (300.0, 600.0), efficiency: &|_| 1.0 },
        distances_m,
        bearing_rad: None,
        showers,
        seed: 5,
    })
    .summary()
}

/// The pool of 100 GeV photons at 2.2 km: flat inside, shoulder at 105-125 m, half at 165 m; and a
/// field of 40 uT across the axis takes a quarter at the shoulder (published values, section C;
/// Szanecki et al. 2013 for the size of the effect).
#[test]
fn validate_pool_shoulder_and_field() {
    let distances = [30.0, 60.0, 90.0, 105.0, 115.0, 125.0, 140.0, 165.0];
    let free = density(100.0, 80, 0.0, &distances);
    let bent = density(100.0, 80, 40.0, &distances);
    let best = (0..distances.len()).max_by(|&a, &b| free[a][0].total_cmp(&free[b][0]));
    let shoulder = distances[best.expect("not empty")];
    assert!((105.0..=125.0).contains(&shoulder), "shoulder at {shoulder} m");
    // Flat: the inside is within a third of the shoulder.
    assert!(free[0][0] / free[4][0] > 0.67, "{:?}", free[0]);
    let half = free[7][0] / free[4][0];
    assert!((half - 0.5).abs() < 0.1, "at 165 m {half} of the shoulder");
    let loss = 1.0 - bent[4][0] / free[4][0];
    println!("shoulder {shoulder} m, {:.2} per m2; 40 uT take {loss:.3}", free[4][0]);
    assert!((0.17..0.33).contains(&loss), "{loss}");
}
