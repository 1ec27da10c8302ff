//! The reference cascade against conservation laws, limits and itself.

use core::f64::consts::PI;

use nalgebra::Vector3;

use nightpool::atmosphere::Atmosphere;
use nightpool::consts::{ELECTRON_MASS_GEV, MUON_MASS_GEV};
use nightpool::light::Detector;
use nightpool::light::cherenkov::sin2_emission_angle;
use nightpool::light::collect::pool::{half_width_m, incoming, light_cuts};
use nightpool::light::collect::{
    CollectSettings, Collector, PadDisc, PoolRequest, Yields, collected, pool_density,
};
use nightpool::numerics::{Stage, Stream};
use nightpool::shower::cascade::{
    CascadeParticle, CascadeSpecies, Cuts, Environment, NoSink, TrackSink, TrackStep, transport,
};
use nightpool::shower::{Direction, Primary, Species};

fn vertical(species: CascadeSpecies, energy_gev: f64, height_m: f64) -> CascadeParticle {
    let position = Vector3::new(0.0, 0.0, height_m);
    CascadeParticle::new(species, energy_gev, position, Vector3::new(0.0, 0.0, -1.0), 0.0)
}

fn band() -> Detector<'static> {
    Detector { name: "band", band_nm: (300.0, 600.0), efficiency: &|_| 1.0 }
}

/// Every GeV is found again: deposited, dropped or escaped.
#[test]
fn verify_cascade_energy_is_conserved() {
    let air = Atmosphere::us1976();
    for (cuts, energy, showers) in
        [(Cuts::low(1e-3), 20.0, 2), (Cuts::at_threshold(0.024), 100.0, 10)]
    {
        let environment = Environment::new(&air, 0.0, Vector3::new(0.0, 30.0, 20.0), cuts);
        for species in [CascadeSpecies::Gamma, CascadeSpecies::Electron, CascadeSpecies::Positron] {
            for shower in 0..showers {
                let mut stream = Stream::keyed(3, Stage::Shower, &[species as u64, shower]);
                let primary = vertical(species, energy, 60_000.0);
                let ledger = transport(vec![primary], &environment, &mut stream, &mut NoSink);
                let ratio = ledger.total_gev() / energy;
                // Only rounding separates the two: far below the 0.1 % asked for.
                assert!((ratio - 1.0).abs() < 1e-9, "{species:?} {energy} GeV: {ratio}");
            }
        }
    }
}

/// In the same shower, position and direction along the force follow the levers: the slope of
/// x against lever is the field, because without field x has no preferred side.
#[test]
fn verify_levers_carry_the_field() {
    struct Slopes([f64; 4], f64);
    impl TrackSink for Slopes {
        fn step(&mut self, step: &TrackStep) {
            // Flight along -z, field along +y: the force on positive charge is along
            // (-z) x (+y) = +x.
            let middle = 0.5 * (step.start + step.end);
            let direction = 0.5 * (step.start_direction + step.end_direction);
            let angle = direction.x;
            // Energies and levers for which small angles hold; nothing is chosen by angle itself.
            if step.end_energy_gev < 0.2 || step.offset_lever.abs() > 3.0 {
                return;
            }
            self.1 += 1.0;
            self.0[0] += middle.x * step.offset_lever;
            self.0[1] += step.offset_lever * step.offset_lever;
            self.0[2] += angle * step.angle_lever;
            self.0[3] += step.angle_lever * step.angle_lever;
        }
    }
    let air = Atmosphere::us1976();
    let field = 30.0;
    let cuts = Cuts::at_threshold(0.05);
    let environment = Environment::new(&air, 0.0, Vector3::new(0.0, field, 0.0), cuts);
    let mut sink = Slopes([0.0; 4], 0.0);
    for shower in 0..300 {
        let mut stream = Stream::keyed(4, Stage::Shower, &[shower]);
        let primary = vertical(CascadeSpecies::Gamma, 50.0, 60_000.0);
        transport(vec![primary], &environment, &mut stream, &mut sink);
    }
    let position = sink.0[0] / sink.0[1] / field;
    let angle = sink.0[2] / sink.0[3] / field;
    println!("levers: position {position:.3}, angle {angle:.3} of the field");
    // Statistical error about 1 % each.
    assert!((position - 1.0).abs() < 0.06, "position slope {position}");
    assert!((angle - 1.0).abs() < 0.06, "angle slope {angle}");
}

/// Halving steps, loss limit and the soft-photon limit does not move the track length above
/// threshold nor the scatter of directions beyond their statistical error.
#[test]
fn verify_cascade_converges_in_steps_and_cuts() {
    #[derive(Default)]
    struct Moments {
        track: f64,
        angle: f64,
        offset: f64,
    }
    impl TrackSink for Moments {
        fn step(&mut self, step: &TrackStep) {
            // Compare the same particles: all above 24 MeV, the last step in part.
            let lost = step.start_energy_gev - step.end_energy_gev;
            let share = ((step.start_energy_gev - 0.024) / lost).clamp(0.0, 1.0);
            let track = share * step.thickness_g_cm2;
            let direction = (0.5 * (step.start_direction + step.end_direction)).normalize();
            let middle = 0.5 * (step.start + step.end);
            self.track += track;
            self.angle += track * (1.0 + direction.z);
            self.offset += track * middle.x.hypot(middle.y);
        }
    }
    let air = Atmosphere::us1976();
    let run = |cuts: Cuts| {
        let environment = Environment::new(&air, 0.0, Vector3::zeros(), cuts);
        let showers: Vec<[f64; 3]> = (0..150)
            .map(|shower| {
                let mut sink = Moments::default();
                let mut stream = Stream::keyed(5, Stage::Shower, &[shower]);
                let primary = vertical(CascadeSpecies::Gamma, 50.0, 60_000.0);
                transport(vec![primary], &environment, &mut stream, &mut sink);
                [sink.track, sink.angle / sink.track, sink.offset / sink.track]
            })
            .collect();
        let count = showers.len() as f64;
        [0, 1, 2].map(|i| {
            let mean = showers.iter().map(|s| s[i]).sum::<f64>() / count;
            let square = showers.iter().map(|s| (s[i] - mean).powi(2)).sum::<f64>();
            (mean, (square / count / count).sqrt())
        })
    };
    let base = Cuts::at_threshold(0.022);
    let reference = run(base);
    let fine = run(Cuts { step_loss: 0.05, step_g_cm2: 2.0, ..base });
    let soft = run(Cuts { soft_photon_gev: 0.003, ..base });
    let low = run(Cuts { electron_gev: 0.012, photon_gev: 0.012, ..base });
    for (name, other) in [("steps", fine), ("soft photons", soft), ("cut", low)] {
        for (quantity, (a, b)) in
            ["track", "angle", "offset"].iter().zip(reference.into_iter().zip(other))
        {
            let (ratio, error) = (b.0 / a.0, (a.1 / a.0).hypot(b.1 / b.0));
            println!("{name} {quantity}: ratio {ratio:.4} +- {error:.4}");
            assert!((ratio - 1.0).abs() < 0.01 + 3.0 * error, "{name} {quantity}: {ratio}");
        }
    }
}

/// A straight vertical muon far above threshold: quanta between two radii are those emitted between
/// two heights, by the cone's geometry alone.
#[test]
fn verify_muon_ring_is_frank_tamm_geometry() {
    use nightpool::light::collect::{Window, emit};
    let air = Atmosphere::us1976();
    let observer = 2200.0;
    let environment =
        Environment::new(&air, observer, Vector3::zeros(), light_cuts(&air, observer));
    let yields = Yields::new(&air, &|_, _, _| 1.0, observer, 0.0, &[band()]);
    let energy = 10_000.0;
    let top = 20_000.0 - observer;
    let start = Vector3::new(0.0, 0.0, top);
    let down = Vector3::new(0.0, 0.0, -1.0);
    let step = TrackStep::straight(start, down, top, energy, MUON_MASS_GEV, -1.0, 0.0);
    let mut counts = [0_u32; 14];
    let muons = 200;
    for muon in 0..muons {
        let mut stream = Stream::keyed(6, Stage::Image, &[muon]);
        emit(&step, &environment.air, &yields, 1.0, &Window::open(), &mut stream, |ray| {
            let landing = ray.position - ray.direction * (ray.position.z / ray.direction.z);
            let bin = (landing.x.hypot(landing.y) / 10.0) as usize;
            if bin < counts.len() {
                counts[bin] += 1;
            }
        });
    }
    // Independent sum over heights of 1 m.
    let mut expected = [0.0_f64; 14];
    for metre in 0..top as usize {
        let height = metre as f64 + 0.5;
        let refractivity = air.refractivity(observer + height, 400.0);
        let sin2 = sin2_emission_angle(refractivity, energy / MUON_MASS_GEV);
        let radius = height * (sin2 / (1.0 - sin2)).sqrt();
        let per_m = nightpool::light::cherenkov::photons_per_m(sin2, (300.0, 600.0));
        // The yield is integrated with the index at each wavelength: against the index at 400 nm
        // this adds a constant factor, taken from the same table.
        let factor = yields.worth_per_m(observer + height)[0]
            / nightpool::light::cherenkov::photons_per_m(1.0, (300.0, 600.0));
        assert!((factor - 1.0).abs() < 0.02, "dispersion changes the yield by {factor}");
        let bin = (radius / 10.0) as usize;
        if bin < expected.len() {
            expected[bin] += per_m * factor;
        }
    }
    for (bin, (count, mean)) in counts.iter().zip(expected).enumerate() {
        let mean = mean * muons as f64;
        // Five Poisson deviations and 0.5 % for the table of refractivity.
        let allowed = 5.0 * mean.sqrt() + 0.005 * mean + 1.0;
        let difference = (f64::from(*count) - mean).abs();
        assert!(difference < allowed, "bin {bin}: {count} against {mean:.0}");
    }
    assert!(f64::from(counts[12]) > 0.0 && counts[13] == 0, "the ring ends near 121 m");
}

/// Two ways to the same number: discs at one distance and the ring there.
#[test]
fn verify_discs_and_rings_agree() {
    let air = Atmosphere::us1976();
    let observer = 2200.0;
    let direction = Direction { zenith_rad: 0.35, azimuth_rad: 1.0 };
    let (energy, distance) = (50.0, 80.0);
    let primary = Primary { species: Species::Gamma, energy_gev: energy, direction };
    let field_ut = Vector3::zeros();
    let showers = 6;
    let pool = pool_density(&PoolRequest {
        primary,
        atmosphere: &air,
        transmission: &|_, _, _| 1.0,
        observer_altitude_m: observer,
        field_ut,
        detector: band(),
        distances_m: &[distance],
        bearing_rad: None,
        showers,
        seed: 7,
    });
    let environment = Environment::new(&air, observer, field_ut, light_cuts(&air, observer));
    let collector = Collector::new(&CollectSettings {
        atmosphere: &air,
        transmission: &|_, _, _| 1.0,
        observer_altitude_m: observer,
        axis: direction,
        pointing: direction,
        reach_rad: 0.3,
        detectors: &[band()],
    });
    // Discs on a circle in the plane across the axis, some above and some below the ground.
    let (across, along) = direction.transverse();
    let area = 60.0;
    let pads: Vec<PadDisc> = (0..36)
        .map(|place| {
            let (sin, cos) = (PI * f64::from(place) / 18.0).sin_cos();
            let position = (across * cos + along * sin) * distance;
            PadDisc { position, kind: 0, area_m2: area }
        })
        .collect();
    let cores = [[0.0, 0.0]];
    let target = collector.target(&pads, &cores);
    for (shower, ring) in pool.showers_m2.iter().enumerate() {
        let (particle, time) = incoming(CascadeSpecies::Gamma, energy, direction, observer, &air);
        let key = [energy.to_bits(), shower as u64];
        let (light, _) = collected(particle, time, &environment, &collector, &target, 7, &key);
        // The same stream: the same shower.
        let discs = light.len() as f64 / (area * pads.len() as f64);
        let drawn = ring[0] * 8.0 / energy * 4.0 * PI * distance * half_width_m(distance);
        let error = (1.0 / light.len() as f64 + 1.0 / drawn).sqrt();
        // Light misses the discs only beyond 0.3 rad from the axis.
        let ratio = discs / ring[0];
        assert!((ratio - 1.0).abs() < 0.02 + 4.0 * error, "shower {shower}: {ratio} +- {error}");
        let spread = (0..pads.len()).flat_map(|pad| light.quanta(0, pad));
        let early = spread.filter(|quantum| quantum.time_ns < -0.5).count();
        assert!(early * 200 < light.len(), "{early} quanta come before the front");
    }
}

/// The same bytes for one and for two threads.
#[test]
fn verify_pool_does_not_depend_on_threads() {
    let air = Atmosphere::us1976();
    let run = |threads: usize| {
        let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build().expect("threads");
        pool.install(|| {
            pool_density(&PoolRequest {
                primary: Primary {
                    species: Species::Electron,
                    energy_gev: 20.0,
                    direction: Direction::ZENITH,
                },
                atmosphere: &air,
                transmission: &|_, _, _| 1.0,
                observer_altitude_m: 2200.0,
                field_ut: Vector3::new(0.0, 20.0, 10.0),
                detector: band(),
                distances_m: &[20.0, 110.0],
                bearing_rad: Some(0.5),
                showers: 5,
                seed: 8,
            })
            .showers_m2
        })
    };
    assert_eq!(run(1), run(2));
}

/// Electrons of one energy through one thin layer: the projected width grows as the square root
/// of the thickness apart from its logarithm, whether crossed in one step or many.
#[test]
fn verify_scattering_does_not_depend_on_steps() {
    let air = Atmosphere::us1976();
    let width = |step_g_cm2: f64| {
        let cuts = Cuts { step_g_cm2, ..Cuts::at_threshold(0.5) };
        let environment = Environment::new(&air, 0.0, Vector3::zeros(), cuts);
        struct Last(Vector3<f64>, f64);
        impl TrackSink for Last {
            fn step(&mut self, step: &TrackStep) {
                self.0 = step.end_direction;
                self.1 += step.length_m;
            }
        }
        let mut angles: Vec<f64> = (0..40_000)
            .map(|shower| {
                let mut stream = Stream::keyed(9, Stage::Shower, &[shower]);
                let mut sink = Last(Vector3::zeros(), 0.0);
                let electron = vertical(CascadeSpecies::Electron, 1.0, 75.0);
                transport(vec![electron], &environment, &mut stream, &mut sink);
                sink.0.x.abs()
            })
            .collect();
        angles.sort_by(f64::total_cmp);
        // The central 68 %.
        angles[(0.6827 * angles.len() as f64) as usize]
    };
    let (coarse, fine) = (width(20.0), width(1.5));
    println!("width {coarse:.5} in one step, {fine:.5} in six");
    // Statistical error 0.6 % each.
    assert!((coarse / fine - 1.0).abs() < 0.025, "{coarse} {fine}");
    assert!(ELECTRON_MASS_GEV < coarse, "beyond the emission angle");
}
