//! The telescope against published numbers.

use nightpool::telescope::accidental::{array_slot_rate_hz, topology_rate_hz};
use nightpool::telescope::{
    Brightness, Camera, Curve, NightSky, Noise, PixelShape, TelescopeKind, Threshold, Topology,
};

/// Area of a round pixel over that of the hexagon around it, pi / (2 sqrt 3).
const ROUND_IN_HEXAGON: f64 = 0.906_9;

/// Mirror 110 m2, about 499 round pixels of 0.15 deg, 8 ns gate, flat efficiency 0.135 from 300 to
/// 650 nm (the efficiency that the published rates imply). Pulse: 4 ns, spread 0.4, assumed.
fn twelve_metre() -> TelescopeKind {
    TelescopeKind {
        name: "12 m".into(),
        mirror_area_m2: 110.0,
        obscuration: 0.0,
        reflectivity: Curve::constant(1.0, (300.0, 650.0)),
        point_spread_deg: 0.03,
        mirror_delay_ns: 0.0,
        point_spread_growth: 0.0,
        camera: Camera::new(PixelShape::Hexagonal, 0.15, 3.6).unwrap(),
        light_guide_efficiency: ROUND_IN_HEXAGON,
        sensor: Curve::constant(0.135, (300.0, 650.0)),
        collection_efficiency: 1.0,
        pulse_spread: 0.4,
        pulse_width_ns: 4.0,
        coincidence_gate_ns: 8.0,
        electronic_noise_pe: 0.0,
        crosstalk: 0.0,
        afterpulsing: 0.0,
        afterpulse_pe: 1.0,
        topology: Topology::Connected(3),
        threshold: Threshold::FixedPe(5.6),
        cost: 1.0,
    }
}

/// Fegan 2004 (University of Arizona): 0.16 and 0.32 photoelectrons per ns and pixel from a mirror
/// of 110 m2, pixels 0.15 deg across, 2e12 and 4e12 photons m-2 s-1 sr-1 and an efficiency of 0.135,
/// all taken as published. The pixels are round; in our hexagonal lattice that is a share of the
/// hexagon. The formula area x solid angle x radiance x efficiency is written out beside the code.
#[test]
fn validate_sky_photoelectrons_fegan2004() {
    for (photons, published) in [(2e12, 0.16), (4e12, 0.32)] {
        let disc_sr = core::f64::consts::PI * (0.075_f64.to_radians()).powi(2);
        let by_hand = 110.0 * disc_sr * photons * 0.135 * 1e-9;
        assert!((by_hand / published - 1.0_f64).abs() < 0.1, "{by_hand} against {published}");
        let sky = NightSky::new(Brightness::PhotonsM2SSr(photons), 1.0);
        let ours = twelve_metre().sky_photoelectrons_per_ns(&sky);
        assert!((ours / published - 1.0).abs() < 0.1, "{ours} against {published}");
        assert!((ours / by_hand - 1.0).abs() < 1e-3, "{ours} against {by_hand}");
    }
}

/// The same mirror and pixels with the curves that ship (aluminium under quartz, classical
/// photomultiplier, 0.9 collection): a smaller efficiency than the published 0.135, since the sky
/// between 300 and 650 nm is mostly green to red, where the photocathode is nearly blind. It is
/// 0.08 to 0.11 averaged over the dark sky's photons, 0.19 to 0.24 at 380 nm.
#[test]
fn validate_shipped_curves_are_dimmer_than_fegan2004() {
    let mut kind = twelve_metre();
    kind.reflectivity = Curve::named("aluminium-quartz").unwrap();
    kind.sensor = Curve::named("bialkali").unwrap();
    kind.collection_efficiency = 0.9;
    let sky = NightSky::new(Brightness::PhotonsM2SSr(2e12), 1.0);
    let ours = kind.sky_photoelectrons_per_ns(&sky);
    assert!((0.09..0.13).contains(&ours), "{ours}");
    let of_sky = |efficiency: &dyn Fn(f64) -> f64| sky.radiance_m2_s_sr((300.0, 650.0), efficiency);
    let bare = |nm: f64| kind.efficiency(nm) / kind.light_guide_efficiency;
    let mean = of_sky(&bare) / of_sky(&|_| 1.0);
    assert!((0.08..0.11).contains(&mean), "{mean}");
    assert!((0.19..0.24).contains(&bare(380.0)), "{}", bare(380.0));
}

/// The red sky to 1000 nm (Benn & Ellison 1998) and a silicon sensor: red light about doubles its
/// noise (common practice, no source), and gives a classical photomultiplier nearly none.
#[test]
fn validate_red_sky_doubles_the_noise_of_silicon() {
    let sky = NightSky::new(Brightness::VMagArcsec2(21.9), 1.0);
    let mirror = Curve::named("aluminium-quartz").unwrap();
    let rate = |sensor: &str, reddest: f64| {
        let sensor = Curve::named(sensor).unwrap();
        sky.radiance_m2_s_sr((290.0, reddest), |nm| mirror.value(nm) * sensor.value(nm))
    };
    let silicon = rate("silicon", 1_000.0) / rate("silicon", 600.0);
    assert!((1.6..2.6).contains(&silicon), "{silicon}");
    let classical = rate("bialkali", 1_000.0) / rate("bialkali", 600.0);
    assert!((1.0..1.05).contains(&classical), "{classical}");
    let noise = rate("silicon", 1_000.0) / rate("bialkali", 1_000.0);
    assert!((3.0..9.0).contains(&noise), "{noise}");
}

/// Dark sites: 1.7 +- 0.4 e12 in 300 to 600 nm (Mirzoyan & Lorenz 1994, from memory); 2.2 to 2.6e12
/// in 300 to 650 nm (Preuss et al. 2002, NIM A 481, 229), about 2e12 (Hampf et al. 2011).
#[test]
fn validate_dark_sky_mirzoyan1994_preuss2002() {
    let sky = NightSky::new(Brightness::VMagArcsec2(21.9), 1.0);
    let blue = sky.radiance_m2_s_sr((300.0, 600.0), |_| 1.0);
    assert!((1.3e12..2.1e12).contains(&blue), "{blue}");
    let wide = sky.radiance_m2_s_sr((300.0, 650.0), |_| 1.0);
    assert!((2.0e12..2.6e12).contains(&wide), "{wide}");
    let brighter = NightSky::new(Brightness::VMagArcsec2(20.9), 1.0);
    let ratio = brighter.radiance_m2_s_sr((300.0, 600.0), |_| 1.0) / blue;
    assert!((ratio / 10.0_f64.powf(0.4) - 1.0).abs() < 1e-12);
}

/// Fegan 2004, telescope and array noise of four 12 m telescopes, 3 of 4 in 40 ns: the array column
/// is the slot formula C(4,3) R^3 tau^2, whose values are copied as computed from the column R.
#[test]
fn validate_array_accidentals_fegan2004() {
    for (telescope_hz, array_hz) in [
        (1.488e7, 2.11e7),
        (2.894e6, 1.55e5),
        (4.872e5, 740.0),
        (7.392e4, 2.59),
        (1.056e4, 0.00754),
    ] {
        let ours = array_slot_rate_hz(&[telescope_hz; 4], 3, 40.0);
        assert!((ours / array_hz - 1.0).abs() < 0.005, "{ours} against {array_hz}");
    }
}

/// Fegan 2004, pixel and telescope noise against threshold at 0.16 photoelectrons per ns: a
/// calculation with unknown pulse and baseline, so a check of order and shape.
///
/// The pulse width was not known beforehand: 4 (0.4 spread), 6, 7, 8 (0.4) and 8 ns (0.5) were
/// tried against this table, and thresholds both above the mean sky and above zero. Above the mean
/// sky every width from 4 to 10 ns is low (by 3 to 200 in the pixel column). Above zero, 4 ns is low by
/// 2 to 40, 6 ns by 1.3 to 6, and 8 ns, as long as the table's slot, follows it to 40 %. With the
/// width thus fitted only the remaining shape, over 2.2 decades, is a test.
#[test]
fn validate_noise_against_threshold_fegan2004() {
    let published =
        [(3.0, 1.151e7), (4.0, 3.906e6), (5.0, 1.174e6), (6.0, 3.196e5), (7.0, 7.944e4)];
    let triples = [(4.5, 2.894e6), (5.0, 4.872e5), (5.5, 7.392e4), (6.0, 1.056e4), (6.5, 1662.0)];
    let mut kind = twelve_metre();
    kind.pulse_width_ns = 8.0;
    let noise = Noise::of_pixel(&kind, 0.16);
    let mean_pe = 0.16 * kind.pulse_sigma_ns() * core::f64::consts::TAU.sqrt();
    for (threshold, hz) in published {
        let ratio = noise.crossing_rate_hz(threshold - mean_pe) / hz;
        assert!((0.5..2.0).contains(&ratio), "pixel at {threshold}: {ratio}");
    }
    for (threshold, hz) in triples {
        let ours = topology_rate_hz(&kind, Topology::Connected(3), 0.16, threshold - mean_pe);
        assert!((0.2..5.0).contains(&(ours / hz)), "telescope at {threshold}: {}", ours / hz);
    }
}
