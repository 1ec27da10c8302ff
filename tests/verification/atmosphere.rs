//! The air against brute force.

use std::fmt::Write;

use nightpool::atmosphere::{
    Atmosphere, Extinction, TransmissionTable, extinction::rayleigh_cross_section_cm2,
    ozone::cross_section_cm2, slant,
};

const EARTH_M: f64 = 6_371_008.8;

/// Midpoint sums of functions of altitude along a straight ray in steps of `step` m, by its own
/// geometry: the law of cosines from the observer outward.
fn ray_sums<const N: usize>(
    (observer, zenith): (f64, f64),
    to: f64,
    step: f64,
    weights: impl Fn(f64) -> [f64; N],
) -> [f64; N] {
    let radius = EARTH_M + observer;
    let altitude = |length: f64| {
        (radius * radius + length * length + 2.0 * radius * length * zenith.cos()).sqrt() - EARTH_M
    };
    let mut sums = [0.0; N];
    let mut length = 0.0;
    loop {
        let (mut piece, mut middle) = (step, altitude(length + 0.5 * step));
        let end = altitude(length + step);
        let past = end > to;
        if past {
            // The last step is cut where the ray reaches the altitude.
            piece = step * (to - altitude(length)) / (end - altitude(length));
            middle = altitude(length + 0.5 * piece);
        }
        for (sum, weight) in sums.iter_mut().zip(weights(middle)) {
            *sum += weight * piece;
        }
        length += piece;
        if past {
            return sums;
        }
    }
}

/// Slant transmission against a ray integral in 1 m steps, to 1e-4, with molecules, aerosol and
/// ozone, at 0, 30, 60, 75 and 80 degrees.
#[test]
fn verify_slant_transmission_against_ray_integral() {
    let extinction = Extinction::default();
    let (observer, emission) = (2_200.0, 12_000.0);
    for name in ["us1976", "midlatitude_winter"] {
        let air = Atmosphere::named(name).unwrap();
        for zenith_deg in [0.0_f64, 30.0, 60.0, 75.0, 80.0] {
            let zenith = zenith_deg.to_radians();
            let [molecules, haze, ozone] =
                ray_sums((observer, zenith), emission, 1.0, |altitude| {
                    let aerosol = 0.04 / 1_200.0 * (-(altitude - observer) / 1_200.0).exp();
                    [100.0 * air.molecules_cm3(altitude), aerosol, 100.0 * air.ozone_cm3(altitude)]
                });
            for nm in [300.0, 310.0, 400.0, 600.0] {
                let depth = molecules * rayleigh_cross_section_cm2(nm)
                    + haze * (nm / 550.0_f64).powf(-1.3)
                    + ozone * cross_section_cm2(nm);
                let ours = extinction.transmission(&air, emission, observer, zenith, nm);
                let off = ours - (-depth).exp();
                assert!(off.abs() < 1e-4, "{name}, {zenith_deg} deg, {nm} nm: {ours}, off {off:e}");
            }
        }
    }
}

/// The table of transmissions against the integral, everywhere: prints and bounds the largest
/// difference.
#[test]
fn verify_transmission_table_against_the_integral() {
    let mut report = String::new();
    for (name, observer, haze) in [
        ("us1976", 2_200.0, Extinction::default()),
        ("tropical", 0.0, Extinction { aerosol_depth_550nm: 0.3, ..Extinction::default() }),
        ("subarctic_winter", 5_000.0, Extinction::default()),
        ("us1976", 1_800.0, Extinction { aerosol_scale_height_m: 300.0, ..Extinction::default() }),
        ("us1976", 1_800.0, Extinction { aerosol: false, ..Extinction::default() }),
    ] {
        let air = Atmosphere::named(name).unwrap();
        let table = TransmissionTable::new(&haze, &air, observer);
        let mut worst = (0.0_f64, String::new());
        for zenith_deg in [0.0_f64, 15.0, 30.0, 45.0, 60.0, 70.0, 75.0, 80.0] {
            for above in [1.0, 20.0, 33.0, 333.3, 1_777.0, 5_005.0, 9_999.0, 21_013.0, 60_000.0] {
                for nm in [250.1, 290.2, 300.25, 312.7, 333.3, 400.0, 555.2, 899.9] {
                    let (zenith, emission) = (zenith_deg.to_radians(), observer + above);
                    let exact = haze.transmission(&air, emission, observer, zenith, nm);
                    let off = table.transmission(emission, zenith, nm) - exact;
                    if off.abs() > worst.0.abs() {
                        worst = (off, format!("{zenith_deg} deg, +{above} m, {nm} nm: {exact:.4}"));
                    }
                }
            }
        }
        let _ = writeln!(report, "{name} at {observer} m: {:+.1e} at {}", worst.0, worst.1);
        assert!(worst.0.abs() < 1e-4, "{name}: {worst:?}");
        assert_eq!(table.transmission(observer - 10.0, 0.3, 400.0), 1.0);
    }
    println!("{report}");
}

/// Slant depth against a sum along the ray in 0.5 m steps, to 1e-5 (observer at 2,200 m, from the
/// ground and from 8 km), and slant range as its inverse.
#[test]
fn verify_slant_depth_against_the_integral() {
    for name in ["us1976", "tropical"] {
        let air = Atmosphere::named(name).unwrap();
        for zenith_deg in [0.0_f64, 30.0, 60.0, 75.0, 80.0] {
            let ray = (2_200.0, zenith_deg.to_radians());
            let density = |altitude: f64| [0.1 * air.density_kg_m3(altitude)];
            let rest = air.depth_g_cm2(119_000.0) * slant::secant(119_000.0, ray.0, ray.1);
            let [whole] = ray_sums(ray, 119_000.0, 0.5, density);
            let [below] = ray_sums(ray, 8_000.0, 0.5, density);
            for (altitude, expected) in [(2_200.0, whole + rest), (8_000.0, whole - below + rest)] {
                let ours = air.slant_depth_g_cm2(altitude, ray.0, ray.1);
                let off = ours / expected - 1.0;
                assert!(off.abs() < 1e-5, "{name}, {zenith_deg} deg, {altitude} m: {off:e}");
                let range = air.slant_range_m(ours, ray.0, ray.1);
                let back = slant::altitude_at_range_m(range, ray.0, ray.1);
                assert!((back - altitude).abs() < 2e-3, "{name}, {zenith_deg} deg: {back}");
            }
            let length = slant::range_m(8_000.0, ray.0, ray.1);
            let [sum] = ray_sums(ray, 8_000.0, 0.5, |_| [1.0]);
            assert!((length - sum).abs() < 0.01, "{length} {sum}");
        }
        let vertical = air.slant_depth_g_cm2(3_000.0, 3_000.0, 0.0);
        assert!((vertical / air.depth_g_cm2(3_000.0) - 1.0).abs() < 1e-6);
    }
}

/// In an exponential atmosphere the slant depth is the vertical one times Chapman's function
/// x sin z integral_0^z exp(x - x sin z / sin u) / sin^2 u du (Chapman 1931), x = radius over scale
/// height; 1e-5.
#[test]
fn verify_slant_depth_against_chapman() {
    let scale = 7_500.0;
    let rows: Vec<String> = (0..=120)
        .map(|km| format!("{km},{},250", 101_325.0 * (-1e3 * f64::from(km) / scale).exp()))
        .collect();
    let text = format!("altitude_km,pressure_pa,temperature_k\n{}\n", rows.join("\n"));
    let air = Atmosphere::from_text("exponential", &text).unwrap();
    let observer = 2_000.0;
    let x = (EARTH_M + observer) / scale;
    for zenith_deg in [10.0_f64, 30.0, 60.0, 75.0, 80.0] {
        let zenith = zenith_deg.to_radians();
        let steps = 400_000;
        let width = zenith / f64::from(steps);
        let chapman: f64 = (0..steps)
            .map(|step| {
                let sine = (width * (f64::from(step) + 0.5)).sin();
                (x - x * zenith.sin() / sine).exp() / (sine * sine) * width
            })
            .sum::<f64>()
            * x
            * zenith.sin();
        let vertical = 0.1 * air.density_kg_m3(observer) * scale;
        let ours = air.slant_depth_g_cm2(observer, observer, zenith) / vertical;
        let off = ours / chapman - 1.0;
        assert!(off.abs() < 1e-5, "{zenith_deg} deg: {ours} {chapman} {off:e}");
    }
}

/// What a straight line leaves out: a ray traced by Snell's law on a sphere, n r sin z constant, in
/// 0.5 m steps of altitude at 400 nm, against the line between its ends. The ray arrives higher and
/// earlier than the line, and light that starts along the line lands aside of its end; the documents
/// of `slant` state the numbers printed here.
#[test]
fn verify_straight_rays_against_traced_rays() {
    let air = Atmosphere::us1976();
    println!("zenith deg, emission km: arrives higher deg, earlier ns, lands aside m");
    for zenith_deg in [0.0_f64, 30.0, 60.0, 80.0] {
        for km in [5.0, 10.0, 15.0] {
            let [higher, earlier, aside] =
                bending(&air, (2_200.0, zenith_deg.to_radians()), 1e3 * km);
            println!("{zenith_deg}, {km}: {higher:.4}, {earlier:.4}, {aside:.2}");
            // A pixel is 0.1 deg or more, a pulse 2 ns, a pool 100 m and more.
            let bounds = match zenith_deg as u32 {
                0..=30 => [0.0036, 4e-5, 0.7],
                31..=60 => [0.0107, 5e-4, 3.4],
                _ => [0.0341, 0.012, 40.0],
            };
            for (found, bound) in [higher, earlier, aside].into_iter().zip(bounds) {
                let found = found + 1e-6;
                assert!((0.0..bound).contains(&found), "{zenith_deg} deg, {km} km: {found}");
            }
        }
    }
}

/// Arrival of a traced ray above the line to its emission, deg; its earlier arrival, ns; distance
/// from the observer, across the line, at which light would land that starts along the line, m.
fn bending(air: &Atmosphere, (observer, zenith): (f64, f64), emission: f64) -> [f64; 3] {
    let index = |altitude: f64| 1.0 + air.refractivity(altitude, 400.0);
    let invariant = index(observer) * (EARTH_M + observer) * zenith.sin();
    let sine = |altitude: f64| invariant / (index(altitude) * (EARTH_M + altitude));
    let step = 0.5;
    let (mut centre, mut bent_path) = (0.0_f64, 0.0);
    for count in 0..((emission - observer) / step) as usize {
        let altitude = observer + step * (count as f64 + 0.5);
        let (sine, r) = (sine(altitude), EARTH_M + altitude);
        let cosine = (1.0 - sine * sine).sqrt();
        centre += step * sine / (cosine * r);
        bent_path += step / cosine * (1.0 + air.group_refractivity(altitude, 400.0));
    }
    let (near, far) = (EARTH_M + observer, EARTH_M + emission);
    let (across, up) = (far * centre.sin(), far * centre.cos() - near);
    let (line_zenith, length) = (across.atan2(up), across.hypot(up));
    let steps = 40_000;
    let piece = length / f64::from(steps);
    let straight_path: f64 = (0..steps)
        .map(|count| {
            let range = piece * (f64::from(count) + 0.5);
            let altitude = slant::altitude_at_range_m(range, observer, line_zenith);
            piece * (1.0 + air.group_refractivity(altitude, 400.0))
        })
        .sum();
    let higher = line_zenith - zenith;
    let steeper_start = sine(emission).asin() + centre - line_zenith;
    [higher.to_degrees(), (straight_path - bent_path) / 0.299_792_458, length * steeper_start]
}

/// Temperature and pressure above the rows of a file go on without a step, and above 86 km the
/// gases still fall smoothly.
#[test]
fn verify_profiles_go_on_smoothly() {
    let standard = Atmosphere::us1976();
    let rows: Vec<String> = (0..=25)
        .map(|km| 1e3 * f64::from(km))
        .map(|z| format!("{z},{},{}", standard.pressure_pa(z), standard.temperature_k(z) + 8.0))
        .collect();
    let text = format!("altitude_m,pressure_pa,temperature_k\n{}\n", rows.join("\n"));
    let air = Atmosphere::from_text("sounding", &text).unwrap();
    for name in ["us1976", "tropical", "subarctic_winter", "model:60,10,1"] {
        smooth(&Atmosphere::named(name).unwrap());
    }
    smooth(&air);
    // Above its top the sounding returns to the standard: 8 K too warm at 25 km, 0.2 K at 60 km.
    assert!((air.temperature_k(25_000.0) - standard.temperature_k(25_000.0) - 8.0).abs() < 1e-6);
    assert!((air.temperature_k(60_000.0) - standard.temperature_k(60_000.0)).abs() < 0.3);
    // A continuation of a part of the standard gives the standard back.
    let rows: Vec<String> = (0..=30)
        .map(|km| 1e3 * f64::from(km))
        .map(|z| format!("{z},{},{}", standard.pressure_pa(z), standard.temperature_k(z)))
        .collect();
    let text = format!("altitude_m,pressure_pa,temperature_k\n{}\n", rows.join("\n"));
    let again = Atmosphere::from_text("again", &text).unwrap();
    for altitude in [500.0, 10_500.0, 11_500.0, 29_900.0, 33_000.0, 50_000.0, 70_000.0] {
        let off = again.density_kg_m3(altitude) / standard.density_kg_m3(altitude) - 1.0;
        assert!(off.abs() < 2e-3, "{altitude} m: {off:e}");
    }
}

/// The logarithms of density and pressure change their slope by at most a tenth a 100 m, except
/// where a table's temperature bends.
fn smooth(air: &Atmosphere) {
    for index in 0..1_190 {
        let z = 100.0 * f64::from(index) + 13.0;
        let slope = |of: &dyn Fn(f64) -> f64, z: f64| (of(z) / of(z + 100.0)).ln();
        for of in [&|z| air.density_kg_m3(z), &|z| air.pressure_pa(z)] as [&dyn Fn(f64) -> f64; 2] {
            let (here, next) = (slope(of, z), slope(of, z + 100.0));
            assert!(here > 0.0, "{}: {z} m", air.name());
            assert!((next - here).abs() < 0.35 * here, "{}: {z} m: {here} {next}", air.name());
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
    for name in Atmosphere::names() {
        let air = Atmosphere::named(name).unwrap();
        for altitude in [-400.0, 0.0, 1_234.5, 8_000.0, 25_000.0, 60_000.0, 119_990.0] {
            let back = air.altitude_m(air.depth_g_cm2(altitude));
            assert!((back - altitude).abs() < 1e-5, "{name}, {altitude}: {back}");
        }
        assert_eq!(air.altitude_m(1e5), -500.0);
        assert_eq!(air.altitude_m(1e-9), air.top_m());
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
    let marked =
        Atmosphere::from_text("mark", &format!("\u{feff}{}", text(&good).replace('\n', "\r\n")));
    assert_eq!(marked.unwrap().depth_g_cm2(3e3), air.depth_g_cm2(3e3));

    let with = |index: usize, row: &str| {
        let mut rows = good.clone();
        rows[index] = row.to_owned();
        text(&rows)
    };
    let cases = [
        (with(3, "27,-5,-40"), "line 6: pressure in Pa is -500; allowed"),
        (with(4, "27,30,-40"), "line 7: altitude 27000 m stands twice, also in line 6"),
        (with(5, "25,nan,-40"), "line 8: `nan`"),
        (with(5, "25,20"), "line 8: `` in column 3"),
        (
            with(20, "10,380,-15"),
            "line 24: pressure does not fall from 9000 to 10000 m (see line 23)",
        ),
        (text(&good[..2]), "2 rows"),
        (text(&good[14..]), "ends below"),
        (text(&[&good[..12], &good[20..]].concat()), "gap from"),
        (with(30, "0,101300,15"), "line 33: pressure in Pa"),
        (with(30, "0,10.13,15"), "line 33: 1013.0 Pa at 0.0 m, where the standard has 101325 Pa"),
        (with(30, "0,1013,288"), "temperature in K is 561"),
        ("altitude_ft,pressure_hpa,temperature_c\n".to_owned(), "altitude_m, altitude_km"),
        ("altitude_m,altitude_km,pressure_hpa,temperature_c\n".to_owned(), "keep one"),
        (String::from("\u{1}\u{2}\u{3}"), "line 1"),
        (String::new(), "no header"),
    ];
    for (text, expected) in cases {
        let error = Atmosphere::from_text("night.csv", &text).unwrap_err().to_string();
        assert!(error.starts_with("night.csv") && error.contains(expected), "{error} / {expected}");
    }
    let long: Vec<String> =
        (0..1_000_000).map(|i| format!("{},{},10", 1e-5 * f64::from(i), 900.0)).collect();
    let text = text(&long);
    let start = std::time::Instant::now();
    let error = Atmosphere::from_text("long.csv", &text).unwrap_err();
    assert!(error.to_string().contains("line 100003: more than 100000 rows"), "{error}");
    assert!(start.elapsed().as_secs_f64() < 2.0, "{:?}", start.elapsed());
}

/// A file that is no text is refused with its line.
#[test]
fn verify_binary_files_are_refused_with_their_line() {
    let folder = std::path::Path::new(env!("CARGO_TARGET_TMPDIR"));
    let path = folder.join("binary-profile.csv");
    std::fs::write(&path, b"altitude_m,pressure_pa,temperature_k\n0,101325,288\n\xff\xfe\x00")
        .unwrap();
    let error = Atmosphere::from_csv(&path).unwrap_err().to_string();
    assert!(error.contains("binary-profile.csv, line 3: byte 51 is no text"), "{error}");
    let missing = Atmosphere::from_csv(&folder.join("no-such.csv")).unwrap_err().to_string();
    assert!(missing.contains("no-such.csv: "), "{missing}");
}

/// The same air written in every unit that a header may name gives the same density and index.
#[test]
fn verify_units_of_humidity_altitude_and_ozone_agree() {
    use nightpool::atmosphere::refraction::{saturation_vapour_pa, vapour_fraction};
    use nightpool::atmosphere::standard::geometric_altitude_m;
    let air = Atmosphere::named("tropical").unwrap();
    let (ratio, ozone_ratio) = (18.015_28 / 28.964_4, 47.998_2 / 28.964_4);
    let table = |head: &str, row: &dyn Fn(f64, f64, f64, f64) -> String| {
        let rows: Vec<String> = (0..=30)
            .map(|km| {
                let z = 1e3 * f64::from(km);
                let (p, t) = (air.pressure_pa(z), air.temperature_k(z));
                row(z, p, t, 0.01 * (-z / 2e3).exp())
            })
            .collect();
        Atmosphere::from_text(head, &format!("{head}\n{}\n", rows.join("\n"))).unwrap()
    };
    let known = table(
        "altitude_m,pressure_pa,temperature_k,water_vapour_ppmv,ozone_ppmv",
        &|z, p, t, x| format!("{z},{p},{t},{},{}", 1e6 * x, 2.0),
    );
    let dry = table("altitude_m,pressure_pa,temperature_k", &|z, p, t, _| format!("{z},{p},{t}"));
    assert!(dry.density_kg_m3(0.0) / known.density_kg_m3(0.0) - 1.0 > 3e-3);
    let others = [
        table("altitude_km,pressure_hpa,temperature_c,relative_humidity_percent", &|z, p, t, x| {
            let humidity = 100.0 * x / vapour_fraction(t, p, 1.0);
            format!("{},{},{},{humidity}", 1e-3 * z, 1e-2 * p, t - 273.15)
        }),
        table(
            "altitude_m,pressure_pa,temperature_k,vapour_pressure_hpa,ozone_mpa",
            &|z, p, t, x| format!("{z},{p},{t},{},{}", 1e-2 * x * p, 2e-3 * p),
        ),
        table("altitude_m,pressure_pa,temperature_k,mixing_ratio_g_kg", &|z, p, t, x| {
            format!("{z},{p},{t},{}", 1e3 * ratio * x / (1.0 - x))
        }),
        table(
            "altitude_m,pressure_pa,temperature_k,specific_humidity_kg_kg,ozone_kg_kg",
            &|z, p, t, x| {
                let (q, o) = (ratio * x / (1.0 - x + ratio * x), 2e-6);
                format!("{z},{p},{t},{q},{}", ozone_ratio * o / (1.0 - o + ozone_ratio * o))
            },
        ),
        table("altitude_m,pressure_pa,temperature_k,dew_point_c", &|z, p, t, x| {
            let (mut low, mut high) = (150.0, 330.0);
            for _ in 0..60 {
                let middle = 0.5 * (low + high);
                if saturation_vapour_pa(middle) < x * p { low = middle } else { high = middle }
            }
            format!("{z},{p},{t},{}", low - 273.15)
        }),
        table("geopotential_m2_s2,pressure_pa,temperature_k,water_vapour_ppmv", &|z, p, t, x| {
            let (mut low, mut high) = (0.0, 40_000.0);
            for _ in 0..60 {
                let middle = 0.5 * (low + high);
                if geometric_altitude_m(middle) < z { low = middle } else { high = middle }
            }
            format!("{},{p},{t},{}", 9.806_65 * low, 1e6 * x)
        }),
    ];
    for other in &others {
        for z in [0.0, 1_500.0, 7_000.0, 20_000.0] {
            let off = other.density_kg_m3(z) / known.density_kg_m3(z) - 1.0;
            assert!(off.abs() < 1e-6, "{}: {z} m: {off:e}", other.name());
            let off = other.refractivity(z, 320.0) / known.refractivity(z, 320.0) - 1.0;
            assert!(off.abs() < 1e-6, "{}: {z} m: {off:e}", other.name());
            if other.name().contains("ozone") {
                let off = other.ozone_cm3(z) / known.ozone_cm3(z) - 1.0;
                assert!(off.abs() < 1e-4, "{}: {z} m: {off:e}", other.name());
            } else {
                assert!(
                    (other.ozone_cm3(z) / Atmosphere::us1976().ozone_cm3(z) - 1.0).abs() < 1e-9
                );
            }
        }
    }
    // Rows without humidity take it from their neighbours; a file without any is dry.
    let gaps = table("altitude_m,pressure_pa,temperature_k,water_vapour_ppmv", &|z, p, t, x| {
        let cell = if z == 3e3 || z > 9e3 { String::new() } else { (1e6 * x).to_string() };
        format!("{z},{p},{t},{cell}")
    });
    assert!((gaps.density_kg_m3(2_000.0) / known.density_kg_m3(2_000.0) - 1.0).abs() < 1e-9);
    assert!((gaps.density_kg_m3(3_000.0) / known.density_kg_m3(3_000.0) - 1.0).abs() < 3e-4);
    assert!((gaps.density_kg_m3(12_000.0) / known.density_kg_m3(12_000.0) - 1.0).abs() < 1e-6);
}

/// Wrong places and months of the seasonal model are named.
#[test]
fn verify_wrong_seasonal_models_are_refused() {
    for (name, expected) in [
        ("model:1,2", "2 numbers instead of three"),
        ("model:91,0,1", "latitude `91` is not a number from -90 to 90"),
        ("model:0,x,1", "longitude `x`"),
        ("model:0,nan,1", "longitude `nan`"),
        ("model:0,0,13", "month `13` is not from 1 to 12"),
        ("model:0,0,1.5", "month `1.5`"),
    ] {
        let error = Atmosphere::named(name).unwrap_err().to_string();
        assert!(error.contains(expected) && error.contains("model:LATITUDE"), "{error}");
    }
    assert!(Atmosphere::named("mars").unwrap_err().to_string().contains("tropical"));
}

/// The command with several atmospheres, switches and a chart: the rows carry names, every part of the
/// extinction is printed and can be switched off, the chart is written whole and names every curve.
#[test]
fn verify_air_command_compares_atmospheres() {
    let folder = std::path::Path::new(env!("CARGO_TARGET_TMPDIR")).join("air-command");
    let _ = std::fs::remove_dir_all(&folder);
    std::fs::create_dir_all(&folder).unwrap();
    let run = |arguments: &[&str]| {
        let mut command = std::process::Command::new(env!("CARGO_BIN_EXE_nightpool"));
        let out = command.current_dir(&folder).arg("air").args(arguments).output().unwrap();
        let text = |bytes: Vec<u8>| String::from_utf8(bytes).unwrap();
        (out.status.code(), text(out.stdout), text(out.stderr))
    };
    let names = ["tropical", "model:-23.3,16.5,7", "us1976"];
    let mut arguments = names.to_vec();
    arguments.extend(["--altitude", "2200m,10km", "--format", "csv", "--plot", "air.svg"]);
    let (code, out, err) = run(&arguments);
    assert_eq!((code, err.as_str()), (Some(0), "drew air.svg\n"));
    let lines: Vec<&str> = out.lines().collect();
    assert!(lines.len() == 7 && lines[0].starts_with("atmosphere,altitude_m,"), "{out}");
    assert!(lines[3].starts_with("\"model:-23.3,16.5,7\",2200,"), "{out}");
    let svg = std::fs::read_to_string(folder.join("air.svg")).unwrap();
    assert!(svg.starts_with("<svg") && svg.trim_end().ends_with("</svg>"));
    for part in names.into_iter().chain(["Density / density of US 1976", "400 nm"]) {
        assert!(svg.contains(part), "{part}");
    }
    let path = ["us1976", "--emission", "10km", "--observer", "2km", "--format", "csv"];
    let with = |more: &[&str]| {
        let (code, out, err) = run(&[&path, more].concat());
        assert_eq!(code, Some(0), "{err}");
        out.lines().nth(1).unwrap().to_owned()
    };
    let nm = ["--wavelength", "305nm"];
    let all: Vec<f64> = with(&nm).split(',').map(|cell| cell.parse().unwrap()).collect();
    assert!((all[1] * all[2] * all[3] / all[4] - 1.0).abs() < 1e-12);
    let none = ["--rayleigh", "off", "--aerosol", "off", "--ozone", "off"];
    assert_eq!(with(&[&nm[..], &none].concat()), "305,1,1,1,1");
    assert_eq!(with(&[&nm[..], &none[..4]].concat()), format!("305,1,1,{0},{0}", all[3]));
    for (wrong, expected) in [
        (&["us1976", "--zenith", "80.1deg"][..], "allowed: 0 to 80"),
        (&["us1976", "--emission", "1km", "--observer", "2km"], "is not above"),
        (&["us1976", "--plot", "."], "name a file"),
        (&["us1976", "nosuch.csv"], "nosuch.csv: "),
        (&["us1976", "--wavelength", "200nm"], "allowed: 250 to 900"),
    ] {
        let (code, out, err) = run(wrong);
        assert!(code == Some(2) && out.is_empty() && err.contains(expected), "{wrong:?}: {err}");
    }
    assert!(run(&["us1976", "--zenith", "75deg"]).2.starts_with("warning: "));
}
