//! The refractive index of air against published values and a reference library.

use nightpool::atmosphere::Atmosphere;
use nightpool::atmosphere::refraction::{group_refractivity, refractivity, vapour_fraction};

use crate::atmosphere::{near, rows};

/// Ciddor 1996: worked values, (n - 1) x 1e8 at 633 nm and 450 ppm, dry (C, Pa, value) and moist at
/// 632.991 nm (C, Pa, vapour Pa, ppm, value); reference sheet section A.3.
#[test]
fn validate_refractivity_ciddor1996() {
    let dry = [
        (20.0, 80_000.0, 21_458.0),
        (20.0, 100_000.0, 26_824.4),
        (20.0, 120_000.0, 32_191.6),
        (10.0, 100_000.0, 27_774.7),
        (30.0, 100_000.0, 25_937.2),
    ];
    for (celsius, pressure, value) in dry {
        let ours = 1e8 * refractivity(633.0, celsius + 273.15, pressure, 0.0, 450.0);
        assert!(
            (ours - value).abs() < 0.1,
            "{celsius} C, {pressure} Pa: {ours}, published {value}"
        );
    }
    let moist = [
        (19.526, 102_094.8, 1_065.0, 510.0, 27_392.95),
        (19.517, 102_096.8, 1_065.0, 510.0, 27_394.34),
        (19.173, 102_993.0, 641.0, 450.0, 27_682.47),
        (19.188, 102_918.8, 706.0, 450.0, 27_658.70),
        (19.532, 103_603.2, 986.0, 600.0, 27_802.03),
        (19.534, 103_599.2, 951.0, 610.0, 27_802.19),
    ];
    for (celsius, pressure, vapour, co2, value) in moist {
        let ours = 1e8 * refractivity(632.991, celsius + 273.15, pressure, vapour, co2);
        assert!((ours - value).abs() < 2.0, "{celsius} C: {ours}, published {value}");
    }
}

/// Ciddor's index as a general-purpose library computes it, dry and moist, 300 to 900 nm, -40 to
/// 30 C: 1e-9 dry, and 2e-10 of the moist convention with the enhancement factor.
#[test]
fn validate_refractivity_reference_library() {
    let rows = rows(include_str!("../data/ciddor_reference_library.csv"));
    assert!(rows.len() > 100);
    for row in rows {
        let [nm, celsius, pressure, humidity, co2, value] = row[..] else { unreachable!() };
        let kelvin = celsius + 273.15;
        let vapour = pressure * vapour_fraction(kelvin, pressure, 1e-2 * humidity);
        let ours = 1e8 * refractivity(nm, kelvin, pressure, vapour, co2);
        assert!((ours - value).abs() < 0.1, "{row:?}: {ours}");
    }
    // The library's own documentation, 633 nm, 20 C, 101,325 Pa, 450 ppm, humidity 20 and 80 %.
    for (humidity, value) in [(0.2, 27_162.853_405), (0.8, 27_111.834_726)] {
        let vapour = 101_325.0 * vapour_fraction(293.15, 101_325.0, humidity);
        let ours = 1e8 * refractivity(633.0, 293.15, 101_325.0, vapour, 450.0);
        assert!((ours - value).abs() < 0.1, "{humidity}: {ours}");
    }
}

/// n - 1 of dry air at 15 C, 101,325 Pa, 450 ppm (reference sheet, section A.3).
#[test]
fn validate_dispersion_ciddor1996() {
    for (nm, value) in [
        (300.0, 2.91569e-4),
        (400.0, 2.82762e-4),
        (500.0, 2.78974e-4),
        (600.0, 2.76983e-4),
        (700.0, 2.75804e-4),
    ] {
        let ours = refractivity(nm, 288.15, 101_325.0, 0.0, 450.0);
        assert!((ours - value).abs() < 1e-9, "{nm} nm: {ours}, published {value}");
    }
}

/// The group index is the phase index less wavelength times its slope, in dry and in moist air.
#[test]
fn validate_group_index_is_the_derivative() {
    let moist = Atmosphere::named("tropical").unwrap();
    let dry = Atmosphere::us1976();
    for nm in [250.0, 280.0, 350.0, 500.0, 800.0, 900.0] {
        for air in [&dry, &moist] {
            let slope = (air.refractivity(2e3, nm + 0.1) - air.refractivity(2e3, nm - 0.1)) / 0.2;
            let expected = air.refractivity(2e3, nm) - nm * slope;
            let ours = air.group_refractivity(2e3, nm);
            assert!((ours / expected - 1.0).abs() < 1e-6, "{nm} nm: {ours} {expected}");
        }
        let of = |nm: f64| refractivity(nm, 300.0, 1e5, 3_000.0, 420.0);
        let expected = of(nm) - nm * (of(nm + 0.1) - of(nm - 0.1)) / 0.2;
        let ours = group_refractivity(nm, 300.0, 1e5, 3_000.0, 420.0);
        assert!((ours / expected - 1.0).abs() < 1e-6, "{nm} nm: {ours} {expected}");
    }
}

/// An atmosphere's index is Ciddor's at its own temperature, pressure and humidity, at every
/// wavelength: table rows of the tropical model (299.7 K, 101,300 Pa, 25,900 ppmv).
#[test]
fn validate_refractivity_of_moist_profile_ciddor1996() {
    let air = Atmosphere::named("tropical").unwrap();
    for (km, kelvin, pascal, ppmv) in
        [(0.0, 299.7, 101_300.0, 25_900.0), (3.0, 283.7, 71_500.0, 8_600.0)]
    {
        for nm in [250.0, 300.0, 400.0, 600.0, 900.0] {
            let ours = air.refractivity(1e3 * km, nm);
            let expected = refractivity(nm, kelvin, pascal, 1e-6 * ppmv * pascal, 450.0);
            assert!((ours - expected).abs() < 1e-10, "{km} km, {nm} nm: {ours} {expected}");
        }
        let other = air.clone().with_co2_ppm(420.0).refractivity(1e3 * km, 400.0);
        let expected = refractivity(400.0, kelvin, pascal, 1e-6 * ppmv * pascal, 420.0);
        assert!((other - expected).abs() < 1e-10, "{km} km: {other} {expected}");
    }
}

/// Thresholds in the standard air at sea level: electron 21 MeV, muon 4.4 GeV, proton 39 GeV
/// (handbook values, from memory, 2 %), all in the ratio of the masses.
#[test]
fn validate_thresholds_at_sea_level() {
    let air = Atmosphere::us1976();
    let found = nightpool::light::cherenkov::Thresholds::new(air.refractivity(0.0, 400.0));
    near(found.electron_gev, 21.5e-3, 0.02, "electron");
    near(found.muon_gev, 4.44, 0.02, "muon");
    near(found.pion_gev, 5.87, 0.02, "pion");
    near(found.proton_gev, 39.5, 0.02, "proton");
    // gamma = 1 / (1 - 1/n^2)^1/2.
    let n = 1.0 + air.refractivity(0.0, 400.0);
    near(found.proton_gev, 0.938_272_088 / (1.0 - 1.0 / (n * n)).sqrt(), 1e-9, "proton");
}
