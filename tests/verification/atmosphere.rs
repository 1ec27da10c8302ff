//! The air against brute force.

use std::fmt::Write;

use nightpool::atmosphere::{
    Atmosphere, Extinction, TransmissionTable, extinction::rayleigh_cross_section_cm2,
    ozone::cross_section_cm2, refraction::refractivity, slant, standard,
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

/// What interpolation between the altitudes of the tables costs, half-way between them, to 80 km:
/// prints the largest relative differences from the definition. The temperature's slope jumps at six
/// altitudes of the standard; the 25 m around those are counted by themselves.
#[test]
fn verify_interpolation_error_of_the_tables() {
    let air = Atmosphere::us1976();
    let mut worst = [0.0_f64; 3];
    let (mut at_bends, mut bends) = (0.0_f64, 0);
    for index in 0..3_200 {
        let altitude = 25.0 * f64::from(index) + 12.5;
        let state = standard::state(altitude);
        let (kelvin, pascal) = (state.temperature_k, state.pressure_pa);
        let offs = [
            air.density_kg_m3(altitude) / state.density_kg_m3 - 1.0,
            air.pressure_pa(altitude) / pascal - 1.0,
            air.refractivity(altitude, 350.0) / refractivity(350.0, kelvin, pascal, 0.0, 450.0)
                - 1.0,
        ];
        let slope =
            |z: f64| standard::state(z + 1.0).temperature_k - standard::state(z).temperature_k;
        if (slope(altitude - 12.5) - slope(altitude + 11.5)).abs() > 1e-4 {
            bends += 1;
            at_bends = offs.iter().fold(at_bends, |most, off| most.max(off.abs()));
        } else {
            for (most, off) in worst.iter_mut().zip(offs) {
                *most = most.max(off.abs());
            }
        }
    }
    // Depth: the definition's density in 2.5 m steps from 80 km down.
    let (mut depth, mut depth_off) = (air.depth_g_cm2(80_000.0), 0.0_f64);
    for index in (0..32_000).rev() {
        let altitude = 2.5 * f64::from(index);
        depth += 0.25 * standard::state(altitude + 1.25).density_kg_m3;
        depth_off = depth_off.max((air.depth_g_cm2(altitude) / depth - 1.0).abs());
    }
    println!("density, pressure, refractivity {worst:?}; at {bends} bends {at_bends:e}");
    println!("depth {depth_off:e}");
    assert!((4..=7).contains(&bends) && at_bends < 1e-4, "{bends}: {at_bends:e}");
    assert!(worst.iter().all(|off| *off < 2e-6) && depth_off < 2e-6, "{worst:?} {depth_off:e}");
}
