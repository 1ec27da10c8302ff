//! The air against standards and published tables.

use nightpool::atmosphere::refraction::refractivity;
use nightpool::atmosphere::{Atmosphere, extinction::rayleigh_cross_section_cm2};

/// U.S. Standard Atmosphere 1976: (altitude km, K, Pa, kg/m3, depth g/cm2), reference sheet section
/// A.1, evaluated from the defining equations; the standard's printed layer bases are reproduced.
#[test]
fn validate_air_us1976_tables() {
    let air = Atmosphere::us1976();
    let rows = [
        (0.0, 288.150, 101_325.0, 1.22500, 1035.6),
        (1.0, 281.651, 89_876.0, 1.11166, 918.9),
        (2.0, 275.154, 79_501.0, 1.00655, 813.0),
        (2.2, 273.855, 77_548.0, 0.986482, 793.1),
        (3.0, 268.659, 70_121.0, 0.909254, 717.3),
        (4.0, 262.166, 61_660.0, 0.819346, 630.9),
        (5.0, 255.676, 54_048.0, 0.736428, 553.2),
        (10.0, 223.252, 26_500.0, 0.413510, 271.6),
        (11.0, 216.774, 22_700.0, 0.364802, 232.7),
        (15.0, 216.650, 12_112.0, 0.194755, 124.3),
        (20.0, 216.650, 5_529.3, 0.0889099, 56.86),
        (25.0, 221.552, 2_549.2, 0.0400839, 26.26),
        (30.0, 226.509, 1_197.0, 0.0184102, 12.35),
        (40.0, 250.350, 287.14, 3.99568e-3, 2.972),
        (47.0, 269.684, 115.85, 1.49652e-3, 1.202),
        (50.0, 270.650, 79.779, 1.02688e-3, 0.8283),
        (71.0, 216.846, 4.4796, 7.19652e-5, 0.0468),
        (80.0, 198.639, 1.0525, 1.84580e-5, 0.0110),
    ];
    for (km, temperature, pressure, density, depth) in rows {
        let near = |ours: f64, published: f64, relative: f64, what: &str| {
            let off = ours / published - 1.0;
            assert!(off.abs() < relative, "{km} km, {what}: {ours}, published {published}");
        };
        near(air.temperature_k(1e3 * km), temperature, 2e-4, "temperature");
        near(air.pressure_pa(1e3 * km), pressure, 2e-4, "pressure");
        near(air.density_kg_m3(1e3 * km), density, 2e-4, "density");
        // Rounded to three or four digits in the table.
        near(air.depth_g_cm2(1e3 * km), depth, if depth < 0.1 { 6e-3 } else { 5e-4 }, "depth");
    }
}

/// Depth is the integral of density; pressure over standard gravity is 0.2 % less (reference sheet,
/// section A.1: 1033.2 g/cm2 at sea level).
#[test]
fn validate_depth_is_more_than_pressure_over_gravity() {
    let air = Atmosphere::us1976();
    let by_pressure = air.pressure_pa(0.0) / 9.806_65 * 0.1;
    assert!((by_pressure - 1033.2).abs() < 0.05, "{by_pressure}");
    assert!((air.depth_g_cm2(0.0) - 1035.6).abs() < 0.5);
}

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
        (19.173, 102_993.0, 641.0, 450.0, 27_682.47),
        (19.532, 103_603.2, 986.0, 600.0, 27_802.03),
    ];
    for (celsius, pressure, vapour, co2, value) in moist {
        let ours = 1e8 * refractivity(632.991, celsius + 273.15, pressure, vapour, co2);
        assert!((ours - value).abs() < 2.0, "{celsius} C: {ours}, published {value}");
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

/// The group index is the phase index less wavelength times its slope.
#[test]
fn validate_group_index_is_the_derivative() {
    let air = Atmosphere::us1976();
    for nm in [280.0, 350.0, 500.0, 800.0] {
        let slope = (air.refractivity(2e3, nm + 0.1) - air.refractivity(2e3, nm - 0.1)) / 0.2;
        let expected = air.refractivity(2e3, nm) - nm * slope;
        let ours = air.group_refractivity(2e3, nm);
        assert!((ours / expected - 1.0).abs() < 1e-6, "{nm} nm: {ours} {expected}");
    }
}

/// Rayleigh optical depth of the whole air at sea level, Bodhaine et al. 1999 (reference sheet,
/// section A.4), within 1 %.
#[test]
fn validate_rayleigh_bodhaine1999() {
    let air = Atmosphere::us1976();
    for (nm, depth) in [
        (300.0, 1.2164),
        (320.0, 0.9220),
        (350.0, 0.6303),
        (400.0, 0.3602),
        (450.0, 0.2211),
        (500.0, 0.1434),
        (600.0, 0.0681),
        (700.0, 0.0364),
    ] {
        let ours =
            rayleigh_cross_section_cm2(nm) * air.depth_g_cm2(0.0) * 6.022_140_76e23 / 28.964_4;
        assert!((ours / depth - 1.0).abs() < 0.01, "{nm} nm: {ours}, published {depth}");
    }
}

/// Anderson et al. 1986, AFGL-TR-86-0110: (atmosphere, altitude km, hPa, K) at table nodes, and the
/// air above 2.2 km as pressure over standard gravity, g/cm2 (reference sheet, section A.2).
#[test]
fn validate_reference_atmospheres_anderson1986() {
    let rows = [
        ("tropical", 5.0, 559.0, 270.3, 802.2),
        ("midlatitude_summer", 8.0, 372.0, 248.2, 798.7),
        ("midlatitude_winter", 10.0, 256.8, 219.7, 785.2),
        ("subarctic_summer", 1.0, 896.0, 281.7, 789.2),
        ("subarctic_winter", 15.0, 110.3, 217.2, 772.4),
        ("us_standard_afgl", 20.0, 55.29, 216.7, 791.1),
    ];
    for (name, km, hpa, kelvin, above) in rows {
        let air = Atmosphere::named(name).unwrap();
        assert!((air.pressure_pa(1e3 * km) / (100.0 * hpa) - 1.0).abs() < 1e-6, "{name}");
        assert!((air.temperature_k(1e3 * km) - kelvin).abs() < 1e-6, "{name}");
        // The depth is the integral of density: 0.2 % more than pressure over standard gravity;
        // 0.3 % for straight lines of ln p between rows a kilometre apart.
        let depth = air.depth_g_cm2(2_200.0);
        assert!((depth / (1.002 * above) - 1.0).abs() < 4e-3, "{name}: {depth}, {above}");
    }
}
