//! The light stage against limits, conservation and itself.

use core::f64::consts::PI;

use nalgebra::Vector3;
use nightpool::atmosphere::Atmosphere;
use nightpool::light::cherenkov::{photons_per_m, sin2_emission_angle};
use nightpool::light::{Column, Detector, LightModel, LightSettings, Pad, Part, ShowerLight, View};
use nightpool::numerics::{Stage, Stream};
use nightpool::shower::Direction;
use nightpool::shower::profile::hillas::{self, Spread};
use nightpool::shower::profile::longitudinal::{Development, GaisserHillas, track_length_g_cm2};
use nightpool::shower::profile::{Emitter, EmitterNode, EmitterTable};

const OBSERVER_M: f64 = 2_200.0;
const BAND_NM: (f64, f64) = (300.0, 600.0);

fn model(emitters: &EmitterTable, zenith_rad: f64, slabs: usize) -> LightModel {
    let air = Atmosphere::us1976();
    let settings = LightSettings {
        atmosphere: &air,
        transmission: &|_, _, _| 1.0,
        observer_altitude_m: OBSERVER_M,
        zenith_rad,
        transverse_field_ut: 0.0,
        emitters,
        slabs,
    };
    let detector = Detector { name: "photons", band_nm: BAND_NM, efficiency: &|_| 1.0 };
    LightModel::new(&settings, &[detector])
}

fn mean_shower(energy_gev: f64) -> GaisserHillas {
    let max = 36.62 * ((energy_gev / 0.08792).ln() + 0.5);
    GaisserHillas::new(47.0, max, 40.0, track_length_g_cm2(energy_gev))
}

fn pad(distance_m: f64) -> Pad {
    Pad { distance_m, azimuth_rad: 0.0, rise_m: 0.0 }
}

fn density(model: &LightModel, energy_gev: f64, zenith_rad: f64, distance_m: f64) -> f64 {
    let axis = model.column.axis(zenith_rad);
    let footprint = model.footprint(&axis, &mean_shower(energy_gev));
    model.density_m2(&footprint, 0, &pad(distance_m))
}

/// Emitters that all fly along the axis on the axis.
fn straight() -> EmitterTable {
    let emitter = Emitter {
        energy_gev: 100.0,
        angle_rad: [0.0; 2],
        offset_g_cm2: [0.0; 2],
        lag_g_cm2: 0.0,
        angle_lever: 0.0,
        offset_lever: 0.0,
    };
    let node = |age| EmitterNode { age, fraction: 1.0, emitters: vec![emitter; 10] };
    EmitterTable {
        floor_gev: 0.02,
        source: "test".into(),
        energies_gev: vec![100.0],
        nodes: vec![node(0.1), node(2.5)],
    }
}

/// Without any spread all light lies inside the largest ring of a straight track, and the total
/// over the plane is the Frank-Tamm yield of the track.
#[test]
fn verify_straight_track_conserves_photons_and_ends_at_the_ring() {
    let model = model(&straight(), 0.0, 60);
    let shower = mean_shower(1_000.0);
    let axis = model.column.axis(0.0);
    let footprint = model.footprint(&axis, &shower);
    let sum: f64 = (0..3_000)
        .map(|step| 0.1 * f64::from(step) + 0.05)
        .map(|r| 2.0 * PI * r * 0.1 * model.density_m2(&footprint, 0, &pad(r)))
        .sum();
    let emitted: f64 = axis
        .steps
        .iter()
        .zip(&model.column.slabs)
        .map(|(step, slab)| {
            let sin2 = sin2_emission_angle(slab.refractivity, 100.0 / 0.000_510_999);
            let metres = step.thickness_g_cm2 * 10.0 / slab.density_kg_m3;
            shower.size(step.depth_g_cm2) * metres * photons_per_m(sin2, BAND_NM)
        })
        .sum();
    // 0.6 % from the dispersion of the index across the band; the rest is slab integration.
    assert!((sum / emitted - 1.0).abs() < 0.012, "{sum} of {emitted}");
    let outside = model.density_m2(&footprint, 0, &pad(135.0));
    assert!(outside == 0.0, "{outside} photons/m2 outside the largest ring, 121 m");
}

/// With the published spreads there is light outside the ring and less at the shoulder; taking away
/// either spread changes the pool far beyond its errors.
#[test]
fn verify_both_spreads_shape_the_pool() {
    let at = |angle, offset, r| {
        let table = hillas::table(Spread { angle, offset }, 2_000, 1);
        density(&model(&table, 0.0, 40), 100.0, 0.0, r)
    };
    let full = at(1.0, 1.0, 500.0);
    let no_angle = at(0.0, 1.0, 500.0);
    assert!(full > 3.0 * no_angle, "500 m: {full} with and {no_angle} without angular spread");
    // Without lateral spread every photon comes from the axis: an image has no width.
    let (with, without) = (image_width(1.0), image_width(0.0));
    assert!(
        with > 1e-3 && without == 0.0,
        "width {with} with and {without} without lateral spread"
    );
}

/// RMS of the light's direction across the line from the axis to a pad at 100 m, rad.
fn image_width(offset: f64) -> f64 {
    let model = model(&hillas::table(Spread { angle: 1.0, offset }, 2_000, 1), 0.0, 36);
    let (tilt, lag_ns, development) = ([0.0; 2], 0.0, mean_shower(1_000.0));
    let part = Part { offset_m: [0.0; 2], tilt, lag_ns, development };
    let light = ShowerLight::new(&model, Direction::ZENITH, Vector3::zeros(), vec![part]);
    let mut view = View::default();
    light.view(0, &Vector3::new(100.0, 0.0, 0.0), &mut view);
    let mut stream = Stream::keyed(1, Stage::Image, &[2]);
    let (mut square, mut count) = (0.0, 0.0);
    light.photoelectrons(0, &view, 50.0, &mut stream, &mut Vec::new(), |photon| {
        square += photon.to_source.y * photon.to_source.y;
        count += 1.0;
    });
    f64::sqrt(square / count)
}

/// 36 slabs against 90 with the same emitters at every slab: 1 %. Two independent sets of 40,000
/// emitters, of which every slab uses a share of its own: 2 %, the sampling noise of a light table.
#[test]
fn verify_pool_converges_in_slabs_and_samples() {
    let zenith = 0.7;
    let of =
        |samples, seed, slabs| model(&hillas::table(Spread::FULL, samples, seed), zenith, slabs);
    let (used, fine) = (of(4_000, 1, 36), of(4_000, 1, 90));
    let (one, other) = (of(40_000, 2, 36), of(40_000, 3, 36));
    for energy in [30.0, 1_000.0] {
        for r in [20.0, 80.0, 115.0, 150.0, 250.0] {
            let at = |model| density(model, energy, zenith, r);
            let (slabs, samples) = (at(&fine) / at(&used), at(&other) / at(&one));
            assert!((slabs - 1.0).abs() < 0.01, "{energy} GeV, {r} m: slabs {slabs}");
            assert!((samples - 1.0).abs() < 0.02, "{energy} GeV, {r} m: samples {samples}");
        }
    }
}

/// Photons drawn at a pad point back at the shower: their mean height follows from the slabs, and
/// the direction of a pad in the east points west.
#[test]
fn verify_photoelectrons_point_back_at_the_axis() {
    let table = hillas::table(Spread::FULL, 2_000, 1);
    let model = model(&table, 0.3, 40);
    let direction = Direction { zenith_rad: 0.3, azimuth_rad: 1.0 };
    let part =
        Part { offset_m: [0.0; 2], tilt: [0.0; 2], lag_ns: 0.0, development: mean_shower(1_000.0) };
    let light = ShowerLight::new(&model, direction, Vector3::zeros(), vec![part]);
    let (across, along) = direction.transverse();
    let mut stream = Stream::keyed(1, Stage::Image, &[1]);
    let mut view = View::default();
    light.view(0, &(across * 100.0), &mut view);
    let (mut count, mut x, mut y, mut early) = (0.0, 0.0, 0.0, f64::INFINITY);
    light.photoelectrons(0, &view, 100.0, &mut stream, &mut Vec::new(), |photon| {
        count += 1.0;
        x += photon.to_source.dot(&across);
        y += photon.to_source.dot(&along);
        early = early.min(photon.time_ns);
    });
    assert!((count / (view.density_m2 * 100.0) - 1.0_f64).abs() < 5.0 / count.sqrt());
    let (x, y) = (x / count, y / count);
    // Emission around 8 km slant above the observer: 100 m / 8 km = 12 mrad, the other way.
    assert!(x < -0.008 && x > -0.02, "{x}");
    assert!(y.abs() < 0.002, "{y}");
    assert!(
        early > 0.0,
        "light in air cannot beat a front at the speed of light in vacuum: {early}"
    );
}

/// Slant depth of the axis against secant for small angles, and against a brute-force ray integral
/// on a sphere at 60 degrees.
#[test]
fn verify_slant_axis_against_ray_integral() {
    let air = Atmosphere::us1976();
    let column = Column::new(&air, OBSERVER_M, 80);
    for zenith_deg in [0.0_f64, 30.0, 60.0] {
        let zenith = zenith_deg.to_radians();
        let axis = column.axis(zenith);
        let radius = 6_371_008.8 + OBSERVER_M;
        let step = 5.0;
        let brute: f64 = (0..60_000)
            .map(|index| step * (f64::from(index) + 0.5))
            .map(|l| {
                let far = (radius * radius + l * l + 2.0 * radius * l * zenith.cos()).sqrt();
                air.density_kg_m3((far - 6_371_008.8).min(1e5)) * step * 0.1
            })
            .sum();
        let ratio = axis.ground_depth_g_cm2 / brute;
        assert!((ratio - 1.0).abs() < 2e-3, "{zenith_deg} deg: {ratio}");
    }
}

/// The drawn showers keep their energy and, on average, the depth and size of the mean shower.
#[test]
fn verify_development_keeps_track_length() {
    let mut stream = Stream::keyed(3, Stage::Shower, &[1]);
    for energy in [10.0, 1_000.0, 100_000.0] {
        let shower = Development::draw(energy, 30.0, &mut stream);
        let sum: f64 = (0..20_000).map(|i| shower.size(f64::from(i) * 0.2) * 0.2).sum();
        assert!((sum / track_length_g_cm2(energy) - 1.0).abs() < 1e-3, "{energy} GeV: {sum}");
    }
}
