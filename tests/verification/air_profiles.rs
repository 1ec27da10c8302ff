//! Profiles of files and of the seasonal model: read, refused, continued, and printed by the command.

use nightpool::atmosphere::Atmosphere;
use proptest::prelude::{ProptestConfig, proptest};

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
        (&["us1976", "--altitude", "1km", "--observer", "2km"], "is below"),
        (&["us1976", "nosuch.csv"], "nosuch.csv: "),
        (&["us1976", "--wavelength", "200nm"], "allowed: 250 to 900"),
    ] {
        let (code, out, err) = run(wrong);
        assert!(code == Some(2) && out.is_empty() && err.contains(expected), "{wrong:?}: {err}");
    }
    // Along a vertical ray range is height and depth is vertical; at 60 degrees nearly twice both.
    let slant = |zenith: &str| {
        let arguments = ["us1976", "--altitude", "12km", "--observer", "2km", "--format", "csv"];
        let out = run(&[&arguments[..], &["--zenith", zenith]].concat()).1;
        let row = out.lines().nth(1).unwrap().split(',').map(|cell| cell.parse().unwrap());
        row.collect::<Vec<f64>>()
    };
    let (upright, inclined) = (slant("0deg"), slant("60deg"));
    assert!((upright[11] - 1e4).abs() < 1e-6 && (upright[12] / upright[4] - 1.0).abs() < 1e-9);
    assert!((inclined[11] / 2e4 - 0.9977).abs() < 1e-3, "{inclined:?}");
    assert!((inclined[12] / upright[12] - 1.99).abs() < 0.01, "{inclined:?}");
    assert!(run(&["us1976", "--zenith", "75deg"]).2.starts_with("warning: "));
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 200, ..ProptestConfig::default() })]

    /// No text makes the reader panic, and what it accepts is air: a sounding with random
    /// temperatures and one row that may be spoilt.
    #[test]
    fn verify_any_text_is_read_or_refused(
        celsius in proptest::collection::vec(-60.0..40.0_f64, 20..60),
        (spoilt, kind, hpa) in (0..60_usize, 0..6_u8, -10.0..1_100.0_f64),
        junk in "[ -~\\n]{0,60}",
    ) {
        let row = |(index, celsius): (usize, &f64)| {
            let km = index as f64;
            let fitting = 1013.0 * (-km / 7.5).exp();
            match (index == spoilt, kind) {
                (true, 0) => format!("{km},{hpa},{celsius}"),
                (true, 1) => format!("{km},,{celsius}"),
                (true, 2) => junk.clone(),
                _ => format!("{km},{fitting},{celsius}"),
            }
        };
        let body: Vec<String> = celsius.iter().enumerate().map(row).collect();
        let text = format!("altitude_km,pressure_hpa,temperature_c\n{}", body.join("\n"));
        let read = Atmosphere::from_text("random", &text);
        if kind > 2 && celsius.len() > 20 {
            assert!(read.is_ok(), "{read:?}");
        }
        if let Ok(air) = read {
            for altitude in [-500.0, 0.0, 2_200.0, 33_333.0, 119_999.0] {
                let (density, index) = (air.density_kg_m3(altitude), air.refractivity(altitude, 300.0));
                assert!(density > 0.0 && index > 0.0, "{altitude} m: {density} {index}");
                let back = air.altitude_m(air.depth_g_cm2(altitude));
                assert!((back - altitude).abs() < 1e-4, "{altitude} m: {back}");
            }
        }
        let _ = Atmosphere::from_text("junk", &junk);
        let _ = Atmosphere::named(&junk);
        let _ = Atmosphere::named(&format!("model:{junk}"));
    }
}
