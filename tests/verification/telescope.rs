//! Images and their triggers against mathematics and against waveforms of every pixel.

use nightpool::numerics::{Stream, stream::Stage};
use nightpool::telescope::waveform::{Waveforms, coincidences};
use nightpool::telescope::{
    Camera, Curve, PixelShape, Quantum, Readout, TelescopeKind, Threshold, Topology,
};

pub fn kind(shape: PixelShape, pitch_deg: f64, field_of_view_deg: f64) -> TelescopeKind {
    TelescopeKind {
        name: "test".into(),
        mirror_area_m2: 110.0,
        obscuration: 0.0,
        reflectivity: Curve::constant(0.85, (200.0, 1_000.0)),
        point_spread_deg: 0.0,
        mirror_delay_ns: 0.0,
        point_spread_growth: 0.0,
        camera: Camera::new(shape, pitch_deg, field_of_view_deg).unwrap(),
        light_guide_efficiency: 0.8,
        sensor: Curve::named("bialkali").unwrap(),
        collection_efficiency: 0.9,
        pulse_spread: 0.4,
        pulse_width_ns: 4.0,
        coincidence_gate_ns: 8.0,
        electronic_noise_pe: 0.0,
        crosstalk: 0.0,
        afterpulsing: 0.0,
        afterpulse_pe: 1.0,
        topology: Topology::Connected(1),
        threshold: Threshold::FixedPe(5.0),
        cost: 1.0,
    }
}

/// Seven hexagons: one and its neighbours.
pub fn seven() -> TelescopeKind {
    kind(PixelShape::Hexagonal, 0.2, 0.62)
}

/// The pulse of one photoelectron with crosstalk has the mean and variance of Borel's law, and a
/// heavy quantum the same per photoelectron.
#[test]
fn verify_crosstalk_of_an_image_is_borels_law() {
    let mut kind = kind(PixelShape::Square, 1.0, 1.0);
    (kind.crosstalk, kind.pulse_spread) = (0.25, 0.3);
    let lambda = -(0.75_f64).ln();
    let mean = 1.0 / (1.0 - lambda);
    let variance = 0.09 * mean + lambda * mean.powi(3);
    let mut readout = Readout::with_topology(&kind, 1e-9, Topology::Connected(1));
    for (quanta, weight) in [(25, 1.0_f32), (1, 25.0)] {
        let quantum = Quantum { x_deg: 0.0, y_deg: 0.0, time_ns: 0.0, weight };
        let (mut sum, mut square, trials) = (0.0, 0.0, 40_000);
        for trial in 0..trials {
            let mut stream = Stream::keyed(6, Stage::Image, &[trial, quanta as u64]);
            let image = readout.image(&vec![quantum; quanta], &mut stream).unwrap();
            assert_eq!(image.photoelectrons, 25.0);
            let height = f64::from(image.margin_pe);
            (sum, square) = (sum + height, square + height * height);
        }
        let found = sum / trials as f64;
        let spread = square / trials as f64 - found * found;
        assert!((found / (25.0 * mean) - 1.0).abs() < 0.005, "{found}");
        assert!((spread / (25.0 * variance) - 1.0).abs() < 0.05, "{spread}");
    }
}

/// The cleaning step (pixels above 2 photoelectrons and three times the noise RMS) against images
/// of known shape: centroid, axis, length, width and arrival slope of a gaussian ellipse.
#[test]
fn verify_cleaned_moments_against_the_true_image() {
    let kind = kind(PixelShape::Hexagonal, 0.1, 5.0);
    let (length, width, tilt, slope) = (0.35_f64, 0.12_f64, 0.6_f64, 8.0_f64);
    // Size in photoelectrons; allowed mean shift of length and width (relative): faint tails fall
    // below the level, so both come out small, less so for brighter images.
    for (light, short) in [(300_u32, 0.35), (3_000, 0.12)] {
        let mut readout = Readout::with_topology(&kind, 0.16, Topology::Connected(3));
        let (images, mut sums, mut turns) = (300, [0.0_f64; 6], 0.0);
        for image in 0..images {
            let mut stream = Stream::keyed(7, Stage::Image, &[image, light.into()]);
            let quanta: Vec<Quantum> = (0..light)
                .map(|_| {
                    let (along, across) = (length * stream.normal(), width * stream.normal());
                    Quantum {
                        x_deg: (0.4 + along * tilt.cos() - across * tilt.sin()) as f32,
                        y_deg: (-0.2 + along * tilt.sin() + across * tilt.cos()) as f32,
                        time_ns: (slope * along + 0.5 * stream.normal()) as f32,
                        weight: 1.0,
                    }
                })
                .collect();
            let summary = readout.image(&quanta, &mut stream).unwrap().summary;
            let terms = [
                summary.centroid_deg[0] - 0.4,
                summary.centroid_deg[1] + 0.2,
                summary.length_deg,
                summary.width_deg,
                summary.time_slope_ns_deg,
                summary.size_pe,
            ];
            terms.iter().zip(&mut sums).for_each(|(term, sum)| *sum += f64::from(*term));
            turns += (f64::from(summary.orientation_rad) - tilt).powi(2);
        }
        let [x, y, long, wide, ns_deg, size] = sums.map(|sum| sum / images as f64);
        assert!(x.hypot(y) < 0.01, "{x} {y}");
        assert!((turns / images as f64).sqrt() < 6.0_f64.to_radians(), "{turns}");
        assert!((1.0 - short..1.03).contains(&(long / length)), "{light}: {long}");
        assert!((1.0 - short..1.05).contains(&(wide / width)), "{light}: {wide}");
        assert!((ns_deg / slope - 1.0).abs() < 0.1, "{light}: {ns_deg}");
        assert!((0.6..1.05).contains(&(size / f64::from(light))), "{light}: {size}");
    }
}

/// A point off axis spreads by the root of the square of the width on axis and of growth x angle:
/// the linear growth of third-order coma.
#[test]
fn verify_point_spread_grows_linearly_off_axis() {
    let mut kind = kind(PixelShape::Square, 0.05, 5.0);
    kind.pulse_spread = 0.0;
    (kind.point_spread_deg, kind.point_spread_growth) = (0.03, 0.04);
    let mut readout = Readout::with_topology(&kind, 1e-9, Topology::Connected(1));
    for angle in [0.0_f32, 1.0, 2.0] {
        let mut stream = Stream::keyed(8, Stage::Image, &[angle as u64]);
        let quantum = Quantum { x_deg: angle, y_deg: 0.0, time_ns: 0.0, weight: 1.0 };
        let summary = readout.image(&vec![quantum; 400_000], &mut stream).unwrap().summary;
        // Square pixels add pitch^2 / 12.
        let law = 0.03_f64.powi(2) + (0.04 * f64::from(angle)).powi(2) + 0.05_f64.powi(2) / 12.0;
        for found in [summary.length_deg, summary.width_deg] {
            let ratio = f64::from(found) / law.sqrt();
            assert!((ratio - 1.0).abs() < 0.01, "{angle}: {ratio}");
        }
    }
}

/// Trigger probability of a weak image against thresholds, fast readout against waveforms.
#[test]
fn verify_trigger_probability_against_waveforms() {
    let kind = kind(PixelShape::Hexagonal, 0.2, 1.1);
    let mut compared = 0;
    for topology in [
        Topology::Connected(2),
        Topology::Connected(3),
        Topology::Compact(3),
        Topology::Majority(3),
        Topology::PatchSum(6.0),
    ] {
        for light in [12_usize, 25, 60] {
            let base = if matches!(topology, Topology::PatchSum(_)) { 3.0 } else { 1.0 };
            let thresholds =
                [1.5_f32, 2.5, 3.5, 4.5, 6.0].map(|t| t * base * (light as f32 / 25.0).sqrt());
            for (threshold, shift) in shifts(&kind, topology, light, &thresholds, 3_000) {
                assert!(shift.abs() < 0.03, "{topology:?}, {light} pe, {threshold}: {shift}");
                compared += 1;
            }
        }
    }
    assert!(compared >= 20, "{compared}");
}

/// The same in a camera of a thousand pixels near threshold, where the fast readout leaves most
/// pixels without noise (connected, compact) or draws the highest few only (majority).
#[test]
fn verify_shortcuts_in_a_thousand_pixels_against_waveforms() {
    let kind = kind(PixelShape::Hexagonal, 0.15, 5.2);
    assert!((900..1_200).contains(&kind.camera.pixels.len()));
    let mut compared = 0;
    for topology in [Topology::Connected(3), Topology::Compact(3), Topology::Majority(4)] {
        for (threshold, shift) in shifts(&kind, topology, 40, &[3.5, 4.5, 5.5], 800) {
            // 3 %, as above, and two standard errors of 800 trials: 0.018 in probability, of which
            // a threshold 1 % higher takes 0.02 to 0.03.
            assert!(shift.abs() < 0.03 + 0.018, "{topology:?}, {threshold}: {shift}");
            compared += 1;
        }
    }
    assert!(compared >= 4, "{compared}");
}

/// By how much the fast readout's threshold that fires as often as a threshold on waveforms is off,
/// where the image decides: noise alone makes under 1 % and the probability is 0.03 to 0.97.
fn shifts(
    kind: &TelescopeKind,
    topology: Topology,
    light: usize,
    thresholds: &[f32],
    trials: u64,
) -> Vec<(f32, f32)> {
    let sky = 0.16;
    let (mut slow, mut dark) = (vec![0_f64; thresholds.len()], vec![0_f64; thresholds.len()]);
    let (mut margins, mut quanta) = (Vec::new(), Vec::new());
    let mut readout = Readout::with_topology(kind, sky, topology);
    let mut waves = Waveforms::new(kind, 60.0);
    for trial in 0..trials {
        let mut stream = Stream::keyed(5, Stage::Image, &[trial, light as u64]);
        quanta.clear();
        for _ in 0..light {
            quanta.push(Quantum {
                x_deg: (0.05 + 0.17 * stream.normal()) as f32,
                y_deg: (0.03 + 0.08 * stream.normal()) as f32,
                time_ns: (30.0 + 1.5 * stream.normal()) as f32,
                weight: 1.0,
            });
        }
        margins.push(readout.image(&quanta, &mut stream).map_or(0.0, |i| i.margin_pe));
        waves.fill_with_noise(sky, &mut stream);
        let count = |waves: &Waveforms<'_>, sums: &mut [f64]| {
            for (sum, &threshold) in sums.iter_mut().zip(thresholds) {
                *sum += f64::from(waves.triggers(topology, threshold) > 0);
            }
        };
        count(&waves, &mut dark);
        for quantum in &quanta {
            if let Some(pixel) = kind.camera.pixel(quantum.x_deg, quantum.y_deg) {
                let gain = (1.0 + kind.pulse_spread * stream.normal()).max(0.0);
                waves.add_pulse(pixel, quantum.time_ns, gain as f32);
            }
        }
        count(&waves, &mut slow);
    }
    margins.sort_unstable_by(|a, b| b.total_cmp(a));
    let levels = (0..thresholds.len()).filter(|&level| {
        let share = slow[level] / trials as f64;
        dark[level] <= 0.01 * slow[level] && (0.03..0.97).contains(&share)
    });
    // The fast threshold that triggers as often.
    let equal = |level: usize| margins[slow[level] as usize] / thresholds[level] - 1.0;
    levels.map(|level| (thresholds[level], equal(level))).collect()
}

/// The margin is the highest threshold at which the pattern fires: without noise and with all light
/// at one time it must equal a scan over thresholds of the pixels lit above each.
#[test]
fn verify_margin_against_threshold_scan() {
    for shape in [PixelShape::Hexagonal, PixelShape::Square] {
        let mut kind = kind(shape, 0.2, 2.0);
        kind.pulse_spread = 0.0;
        let topologies = [
            Topology::Connected(1),
            Topology::Connected(3),
            Topology::Connected(5),
            Topology::Compact(2),
            Topology::Compact(3),
            Topology::Compact(4),
            Topology::Majority(2),
            Topology::Majority(6),
            Topology::PatchSum(4.0),
        ];
        for topology in topologies {
            let mut readout = Readout::with_topology(&kind, 1e-9, topology);
            for image in 0..100 {
                let mut stream = Stream::keyed(2, Stage::Image, &[image]);
                let mut content = vec![0.0_f32; kind.camera.pixels.len()];
                let mut quanta = Vec::new();
                for _ in 0..60 {
                    let (x, y) = (0.3 * stream.normal() as f32, 0.2 * stream.normal() as f32);
                    if let Some(pixel) = kind.camera.pixel(x, y) {
                        content[pixel] += 1.0;
                        quanta.push(Quantum { x_deg: x, y_deg: y, time_ns: 10.0, weight: 1.0 });
                    }
                }
                let margin = readout.image(&quanta, &mut stream).unwrap().margin_pe;
                let scan = scanned_margin(&kind, topology, &content);
                assert!((margin - scan).abs() < 0.06, "{shape:?} {topology:?}: {margin} {scan}");
            }
        }
    }
}

/// The highest threshold, from the top down, at which pulses at one time make the pattern.
fn scanned_margin(kind: &TelescopeKind, topology: Topology, content: &[f32]) -> f32 {
    if let Topology::PatchSum(clip) = topology {
        let sum = |centre: usize| {
            let near = kind.camera.neighbours(centre).iter().map(|&p| usize::from(p));
            near.chain([centre]).map(|p| content[p].min(clip as f32)).sum::<f32>()
        };
        return (0..content.len()).map(sum).fold(0.0, f32::max);
    }
    let fires = |threshold: f32| {
        let lit = content.iter().enumerate().filter(|(_, height)| **height > threshold);
        let rises: Vec<(f64, usize)> = lit.map(|(pixel, _)| (0.0, pixel)).collect();
        coincidences(kind, topology, &rises) > 0
    };
    let highest = (0..600).rev().map(|step| step as f32 * 0.1 + 0.05).find(|&level| fires(level));
    highest.map_or(0.0, |level| level + 0.05)
}

/// A point off axis falls into its pixel; a disc centred on the edge is half lost; one pixel works.
#[test]
fn verify_point_source_half_image_and_one_pixel() {
    let camera = kind(PixelShape::Hexagonal, 0.05, 5.3);
    assert!(camera.camera.pixels.len() > 9_500, "{}", camera.camera.pixels.len());
    let mut readout = Readout::new(&camera, 1e-6);
    let mut stream = Stream::keyed(1, Stage::Image, &[1]);
    let quantum = |x_deg: f32, y_deg: f32| Quantum { x_deg, y_deg, time_ns: 0.0, weight: 1.0 };
    let point = vec![quantum(1.3, -0.9); 100];
    let record = readout.image(&point, &mut stream).unwrap();
    let [x, y] = record.summary.centroid_deg;
    assert!((x - 1.3).hypot(y + 0.9) < 0.05 / 3.0_f32.sqrt(), "{x} {y}");
    assert_eq!(record.photoelectrons, 100.0);
    assert!((record.margin_pe / 100.0 - 1.0).abs() < 0.2, "{}", record.margin_pe);
    // A disc centred on the edge of the circle that has the camera's area, averaged over azimuth so
    // that the ragged edge of the pixels cancels; expected: the part inside that circle.
    let area = camera.camera.pixels.len() as f64 * 0.75_f64.sqrt() * 0.05 * 0.05;
    let edge = (area / core::f64::consts::PI).sqrt();
    let (mut seen, mut inside, mut thrown) = (0.0, 0.0, 0.0);
    for step in 0..36 {
        let (sin, cos) = (10.0 * f64::from(step)).to_radians().sin_cos();
        let mut disc = Vec::new();
        for _ in 0..2_000 {
            let (c, s) = stream.direction();
            let radius = 0.3 * stream.uniform().sqrt();
            let (x, y) = (edge * cos + radius * c, edge * sin + radius * s);
            inside += f64::from(x.hypot(y) < edge);
            disc.push(quantum(x as f32, y as f32));
            thrown += 1.0;
        }
        seen += f64::from(readout.image(&disc, &mut stream).unwrap().photoelectrons);
    }
    assert!((0.45..0.5).contains(&(inside / thrown)));
    assert!((seen - inside).abs() / thrown < 0.01, "{seen} {inside} of {thrown}");
    assert!(readout.image(&[quantum(9.0, 0.0)], &mut stream).is_none());
    let one = kind(PixelShape::Square, 1.0, 1.0);
    let mut readout = Readout::new(&one, 1e-6);
    let record = readout.image(&vec![quantum(0.1, 0.1); 50], &mut stream).unwrap();
    assert!((record.margin_pe / 50.0 - 1.0).abs() < 0.3, "{}", record.margin_pe);
    assert_eq!(record.summary.edge_fraction, 1.0);
}

/// A muon's photons traced to a mirror and into the camera, against the ring formula: on axis and
/// with the ring cut by the mirror's rim.
#[test]
fn verify_muon_ring_against_traced_photons() {
    use nightpool::telescope::muon::{chord_m, ring_photoelectrons_per_rad};
    let kind = kind(PixelShape::Hexagonal, 0.1, 4.0);
    let (theta, radius) = (1.2_f64.to_radians(), 6.0);
    // Efficiency 0.1 between 300 and 600 nm.
    let inverse_band = 0.1 * (1.0 / 300e-9 - 1.0 / 600e-9);
    for impact in [0.0, 3.0, 8.0] {
        let mut stream = Stream::keyed(4, Stage::Image, &[impact as u64]);
        let height = 2.0 * 1.2 * radius / theta.tan() + 8.0 / theta.tan();
        let per_m = core::f64::consts::TAU
            * nightpool::consts::FINE_STRUCTURE
            * theta.sin().powi(2)
            * inverse_band;
        let muons = 400;
        let mut quanta = Vec::new();
        for _ in 0..muons {
            for _ in 0..stream.poisson(per_m * height) {
                let above = height * stream.uniform();
                let (cos, sin) = stream.direction();
                let reach = above * theta.tan();
                // The muon falls vertically at x = -impact; phi = 0 looks at the mirror's centre.
                let (x, y) = (-impact + reach * cos, reach * sin);
                if x.hypot(y) < radius {
                    let ring = theta.to_degrees();
                    quanta.push(Quantum {
                        x_deg: (ring * cos) as f32,
                        y_deg: (ring * sin) as f32,
                        time_ns: 0.0,
                        weight: 1.0,
                    });
                }
            }
        }
        for sector in 0..6 {
            let (from, to) = (f64::from(sector) * 60.0 - 30.0, f64::from(sector) * 60.0 + 30.0);
            let expected = nightpool::numerics::quadrature::integrate(from, to, 40, |phi| {
                let chord = chord_m(radius, impact, phi.to_radians());
                ring_photoelectrons_per_rad(theta, chord, inverse_band)
            })
            .to_radians()
                * f64::from(muons);
            let seen = quanta
                .iter()
                .filter(|q| {
                    let phi = f64::from(q.y_deg.atan2(q.x_deg)).to_degrees().rem_euclid(360.0);
                    phi >= from && phi < to || phi - 360.0 >= from && phi - 360.0 < to
                })
                .count() as f64;
            let error = 4.0 * expected.sqrt() + 0.005 * expected + 1e-9;
            assert!((seen - expected).abs() < error, "{impact} m, {sector}: {seen} {expected}");
        }
        let record = Readout::new(&kind, 1e-6).image(&quanta, &mut stream).unwrap();
        // Light and centroid of the ring as the camera sees it, from the formula's chords.
        let moment = |weight: &dyn Fn(f64) -> f64| {
            nightpool::numerics::quadrature::integrate(-180.0, 180.0, 720, |phi| {
                let phi = phi.to_radians();
                let chord = chord_m(radius, impact, phi);
                weight(phi) * ring_photoelectrons_per_rad(theta, chord, inverse_band)
            })
            .to_radians()
        };
        let (all, along) = (moment(&|_| 1.0), moment(&f64::cos));
        let light = f64::from(record.photoelectrons) / (f64::from(muons) * all);
        assert!((light - 1.0).abs() < 0.01 + 4.0 / quanta.len() as f64, "{impact} m: {light}");
        let [x, y] = record.summary.centroid_deg.map(f64::from);
        let expected = 1.2 * along / all;
        assert!((x - expected).abs() < 0.02 && y.abs() < 0.02, "{impact} m: {x} {y} {expected}");
        if impact == 0.0 {
            // Of a thin ring each RMS is radius / sqrt(2); pixels add pitch^2 5/72 in square.
            let ring = (1.44_f64 / 2.0 + 0.01 * 5.0 / 72.0).sqrt();
            let length = f64::from(record.summary.length_deg);
            assert!((length / ring - 1.0).abs() < 0.02, "{length} {ring}");
        }
    }
}
