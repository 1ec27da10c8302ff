//! The light of a single muon against the geometry of its rings.

use core::f64::consts::{PI, TAU};

use nightpool::atmosphere::Atmosphere;
use nightpool::light::column::REFERENCE_NM;
use nightpool::light::muon_light::{Disc, MuonLight};
use nightpool::light::{Detector, LightModel, LightSettings};
use nightpool::numerics::quadrature::integrate;
use nightpool::numerics::{Stage, Stream};
use nightpool::shower::hadronic::{MuonNode, MuonTrack};
use nightpool::shower::profile::EmitterTable;

const OBSERVER_M: f64 = 2_200.0;
const START_M: f64 = 18_000.0;
/// Straight and so fast that its emission angle is the largest.
const ENERGY_GEV: f64 = 1e5;

fn with(check: impl FnOnce(&Atmosphere, &LightModel, &MuonLight)) {
    let atmosphere = Atmosphere::us1976();
    let emitters = EmitterTable::shipped().unwrap();
    let settings = LightSettings {
        atmosphere: &atmosphere,
        transmission: &|_, _, _| 1.0,
        observer_altitude_m: OBSERVER_M,
        zenith_rad: 0.0,
        transverse_field_ut: 0.0,
        emitters: &emitters,
        slabs: 72,
    };
    let narrow = (REFERENCE_NM - 5.0, REFERENCE_NM + 5.0);
    let detector = Detector { name: "narrow", band_nm: narrow, efficiency: &|_| 1.0 };
    let model = LightModel::new(&settings, &[detector]);
    let axis = model.column.axis(0.0);
    let nodes = (0..=300).map(|step| {
        let distance_m = START_M * (1.0 - f64::from(step) / 300.0);
        MuonNode {
            depth_g_cm2: axis.depth_at_g_cm2(distance_m),
            distance_m,
            energy_gev: ENERGY_GEV,
            transverse_m: [0.0; 2],
            slope: [0.0; 2],
            lag_m: 0.0,
        }
    });
    let track = MuonTrack { positive: true, nodes: nodes.collect(), at_ground: true };
    let light = MuonLight::new(&track, &model, &axis).unwrap();
    check(&atmosphere, &model, &light);
}

/// Photons per metre in the band, per unit of sin^2: 2 pi alpha (1/l1 - 1/l2).
fn per_m() -> f64 {
    TAU * 7.297_352_569_3e-3 * 1e9 * (1.0 / (REFERENCE_NM - 5.0) - 1.0 / (REFERENCE_NM + 5.0))
}

/// All photons of the track land somewhere: the integral over discs is Frank and Tamm's.
#[test]
fn verify_muon_light_is_conserved() {
    with(|atmosphere, _, light| {
        let emitted = integrate(0.0, START_M, 200, |distance| {
            let n = 1.0 + atmosphere.refractivity(OBSERVER_M + distance, REFERENCE_NM);
            per_m() * (1.0 - 1.0 / (n * n))
        });
        let radius_m = 2.0;
        let landed = integrate(0.0, 160.0, 1_600, |away| {
            let disc = Disc { centre_m: [away, 0.0], rise_m: 0.0, radius_m };
            TAU * away * light.quanta(0, &disc) / (PI * radius_m * radius_m)
        });
        // Slabs of air hold the index over 2 to 4 km high up: 1 %.
        assert!((landed / emitted - 1.0).abs() < 0.01, "{landed} {emitted}");
    });
}

/// Inside the ring the density at r is the emission per metre over 2 pi r dr/dD, at the distances D
/// with D tan(theta) = r: one near solution, and one beyond the maximum.
#[test]
fn verify_muon_density_inside_the_ring() {
    with(|atmosphere, _, light| {
        let angle = |distance: f64| {
            let n = 1.0 + atmosphere.refractivity(OBSERVER_M + distance, REFERENCE_NM);
            (1.0 / n).acos()
        };
        let ring = |distance: f64| distance * angle(distance).tan();
        for away in [20.0, 50.0, 90.0] {
            let (mut low, mut high) = (0.0, 6_000.0);
            for _ in 0..60 {
                let middle = 0.5 * (low + high);
                if ring(middle) < away { low = middle } else { high = middle }
            }
            let slope = (ring(low + 1.0) - ring(low - 1.0)) / 2.0;
            let exact = per_m() * angle(low).sin().powi(2) / (TAU * away * slope);
            // The far solution lies above the track's start for these distances.
            assert!(ring(START_M) > away);
            let radius_m = 1.0;
            let disc = Disc { centre_m: [0.0, away], rise_m: 0.0, radius_m };
            let ours = light.quanta(0, &disc) / (PI * radius_m * radius_m);
            assert!((ours / exact - 1.0).abs() < 0.02, "{away} m: {ours} {exact}");
        }
        // Nothing beyond the largest ring, a hit on the disc collects a full turn.
        let largest = (1..180).map(|step| ring(100.0 * f64::from(step))).fold(0.0, f64::max);
        let disc = |away| Disc { centre_m: [away, 0.0], rise_m: 0.0, radius_m: 1.0 };
        assert_eq!(light.quanta(0, &disc(1.02 * largest + 1.0)), 0.0);
        let hit = Disc { centre_m: [0.0; 2], rise_m: 0.0, radius_m: 6.0 };
        let reach = 6.0 / angle(200.0).tan();
        let exact = per_m() * angle(0.5 * reach).sin().powi(2) * reach;
        // A hit at the very centre is the worst case of the pieces: half of a tenth of the radius.
        let ratio = light.quanta(0, &hit) / exact;
        assert!((ratio - 1.0).abs() < 0.05, "{ratio}");
    });
}

/// Drawn quanta have the expected mean, come from the emission angle about the muon's direction,
/// and arrive together: the delay across the ring of a disc is below a nanosecond.
#[test]
fn verify_muon_photons_make_a_ring() {
    with(|atmosphere, _, light| {
        let disc = Disc { centre_m: [3.0, 2.0], rise_m: 0.0, radius_m: 6.0 };
        let expected = light.quanta(0, &disc);
        let mut stream = Stream::keyed(1, Stage::Image, &[1]);
        let (mut count, mut sum, mut times) = (0.0, 0.0, (f64::INFINITY, f64::NEG_INFINITY));
        light.draw(0, &disc, 50.0, &mut stream, |arrival| {
            count += 1.0;
            sum += arrival.tilt[0].hypot(arrival.tilt[1]);
            times = (times.0.min(arrival.time_ns), times.1.max(arrival.time_ns));
        });
        assert!((count / (50.0 * expected) - 1.0).abs() < 5.0 / (50.0 * expected).sqrt());
        let n = 1.0 + atmosphere.refractivity(OBSERVER_M + 200.0, REFERENCE_NM);
        let angle = (1.0_f64 / n).acos();
        assert!((sum / count / angle - 1.0).abs() < 0.01, "{} {angle}", sum / count);
        assert!(times.1 - times.0 < 1.0, "{times:?}");
    });
}
