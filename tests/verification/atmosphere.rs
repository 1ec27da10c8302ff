//! The air against brute force.

use nightpool::atmosphere::{Atmosphere, Extinction, extinction::rayleigh_cross_section_cm2};

/// Slant transmission against a ray integral in 5 m steps, to 1e-4, at 0, 30, 60 and 75 degrees.
#[test]
fn verify_slant_transmission_against_ray_integral() {
    let air = Atmosphere::us1976();
    let extinction = Extinction { ozone: false, ..Extinction::default() };
    let (observer, emission) = (2_200.0, 12_000.0);
    for zenith_deg in [0.0_f64, 30.0, 60.0, 75.0] {
        let zenith = zenith_deg.to_radians();
        let radius = 6_371_008.8 + observer;
        for nm in [300.0, 400.0, 600.0] {
            let (mut column, mut haze, mut length, step) = (0.0, 0.0, 0.0, 1.0);
            loop {
                let l: f64 = length + 0.5 * step;
                let far = (radius * radius + l * l + 2.0 * radius * l * zenith.cos()).sqrt();
                let altitude = far - 6_371_008.8;
                if altitude > emission {
                    break;
                }
                column += 0.1 * air.density_kg_m3(altitude) * step;
                haze += 0.04 / 1_200.0 * (-(altitude - observer) / 1_200.0).exp() * step;
                length += step;
            }
            let depth = column * rayleigh_cross_section_cm2(nm) * 6.022_140_76e23 / 28.964_4
                + haze * (nm / 550.0_f64).powf(-1.3);
            let ours = extinction.transmission(&air, emission, observer, zenith, nm);
            assert!((ours - (-depth).exp()).abs() < 1e-4, "{zenith_deg} deg, {nm} nm: {ours}");
        }
    }
}

#[test]
fn verify_each_extinction_can_be_switched_off_and_depth_inverts() {
    let air = Atmosphere::us1976();
    let off = Extinction { rayleigh: false, aerosol: false, ozone: false, ..Extinction::default() };
    assert_eq!(off.transmission(&air, 2e4, 0.0, 0.5, 310.0), 1.0);
    let ozone = Extinction { ozone: true, ..off };
    assert!(ozone.transmission(&air, 4e4, 0.0, 0.0, 300.0) < 0.1);
    assert!(ozone.transmission(&air, 4e4, 0.0, 0.0, 400.0) > 0.995);
    for altitude in [0.0, 1_234.5, 8_000.0, 25_000.0, 60_000.0] {
        let back = air.altitude_m(air.depth_g_cm2(altitude));
        assert!((back - altitude).abs() < 0.01, "{altitude}: {back}");
    }
}

/// Every broken profile is refused with the line that is wrong; order, units and missing vapour do
/// not matter.
#[test]
fn verify_profiles_are_read_or_refused_with_their_line() {
    let row = |km: f64| (km, 1013.0 * (-km / 8.0_f64).exp(), 288.0 - 3.0 * km.min(20.0));
    let good: Vec<String> = (0..=30)
        .rev()
        .map(|km| row(f64::from(km)))
        .map(|(km, hpa, kelvin)| format!("{km},{hpa},{}", kelvin - 273.15))
        .collect();
    let head = "# sounding\naltitude_km,pressure_hpa,temperature_c\n";
    let text = |rows: &[String]| format!("{head}{}\n", rows.join("\n"));
    let air = Atmosphere::from_text("night.csv", &text(&good)).unwrap();
    assert!((air.temperature_k(10_500.0) - (288.0 - 31.5)).abs() < 1e-9);
    assert!(air.density_kg_m3(60_000.0) > 0.0 && air.depth_g_cm2(60_000.0) < 1.0);

    let with = |index: usize, row: &str| {
        let mut rows = good.clone();
        rows[index] = row.to_owned();
        text(&rows)
    };
    let cases = [
        (with(3, "27,-5,-40"), "line 6: pressure"),
        (with(4, "27,30,-40"), "stands twice"),
        (with(5, "25,nan,-40"), "line 8: `nan`"),
        (with(5, "25,20"), "line 8: `` in column 3"),
        (with(20, "10,900,-40"), "pressure does not fall"),
        (text(&good[..2]), "2 rows"),
        (text(&good[14..]), "ends below"),
        (text(&[&good[..12], &good[20..]].concat()), "gap from"),
        ("altitude_ft,pressure_hpa,temperature_c\n".to_owned(), "altitude_m, altitude_km"),
        (String::from("\u{1}\u{2}\u{3}"), "line 1"),
        (String::new(), "no header"),
    ];
    for (text, expected) in cases {
        let error = Atmosphere::from_text("night.csv", &text).unwrap_err().to_string();
        assert!(error.starts_with("night.csv") && error.contains(expected), "{error} / {expected}");
    }
    let long = (0..200_000).map(|i| format!("{},{},10", 1e-4 * f64::from(i), 900.0));
    let error = Atmosphere::from_text("long.csv", &text(&long.collect::<Vec<_>>())).unwrap_err();
    assert!(error.to_string().contains("more than 100000 rows"), "{error}");
}
