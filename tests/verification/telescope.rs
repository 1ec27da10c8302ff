//! The telescope against mathematics and against waveforms of every pixel.

use nightpool::numerics::{Stream, stream::Stage};
use nightpool::telescope::accidental::{
    array_rate_hz, array_slot_rate_hz, connected_groups, topology_rate_hz,
};
use nightpool::telescope::trigger::compact_groups;
use nightpool::telescope::waveform::Waveforms;
use nightpool::telescope::{
    Camera, Curve, Noise, PixelShape, Quantum, Readout, TelescopeKind, Threshold, Topology,
};

fn kind(shape: PixelShape, pitch_deg: f64, field_of_view_deg: f64) -> TelescopeKind {
    TelescopeKind {
        name: "test".into(),
        mirror_area_m2: 110.0,
        obscuration: 0.0,
        reflectivity: Curve::constant(0.85, (200.0, 1_000.0)),
        point_spread_deg: 0.0,
        point_spread_growth: 0.0,
        camera: Camera::new(shape, pitch_deg, field_of_view_deg).unwrap(),
        light_guide_efficiency: 0.8,
        sensor: Curve::named("bialkali").unwrap(),
        collection_efficiency: 0.9,
        pulse_spread: 0.4,
        pulse_width_ns: 4.0,
        coincidence_gate_ns: 8.0,
        connected_pixels: 1,
        threshold: Threshold::FixedPe(5.0),
        cost: 1.0,
    }
}

/// Seven hexagons: one and its neighbours.
fn seven() -> TelescopeKind {
    kind(PixelShape::Hexagonal, 0.2, 0.62)
}

/// One long run of seven pixels serves all rates: pixel crossings over more than four decades and
/// the three topologies down to where 40 triggers remain.
#[test]
fn verify_accidental_rates_against_waveforms() {
    let kind = seven();
    assert_eq!(kind.camera.pixels.len(), 7);
    let (sky, block_ns, blocks) = (0.16, 100_000.0_f32, 300);
    let thresholds = [1.5_f32, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0];
    let sums = [4.0_f32, 6.0, 8.0, 10.0, 12.0, 13.0];
    let topologies =
        [Topology::Connected(2), Topology::Majority(3), Topology::Compact(3)];
    let mut pixel = [0_usize; 8];
    let mut groups = [[0_usize; 8]; 3];
    let mut patch = [0_usize; 6];
    let mut waves = Waveforms::new(&kind, block_ns);
    for block in 0..blocks {
        let mut stream = Stream::keyed(11, Stage::Noise, &[block]);
        waves.fill_with_noise(sky, &mut stream);
        for (level, &threshold) in thresholds.iter().enumerate() {
            pixel[level] += (0..7).map(|p| waves.crossings(p, threshold)).sum::<usize>();
            for (counts, &topology) in groups.iter_mut().zip(&topologies) {
                counts[level] += waves.triggers(topology, threshold);
            }
        }
        for (count, &threshold) in patch.iter_mut().zip(&sums) {
            *count += waves.triggers(Topology::PatchSum(3.0), threshold);
        }
    }
    let seconds = f64::from(block_ns) * 1e-9 * blocks as f64;
    let noise = Noise::of_pixel(&kind, sky);
    for (level, &threshold) in thresholds.iter().enumerate() {
        let measured = pixel[level] as f64 / (7.0 * seconds);
        let ratio = noise.crossing_rate_hz(f64::from(threshold)) / measured;
        println!("pixel {threshold} pe: {measured:.3e} Hz, ratio {ratio:.3} n {}", pixel[level]);
    }
    for (topology, counts) in topologies.iter().zip(&groups) {
        for (level, &threshold) in thresholds.iter().enumerate() {
            let measured = counts[level] as f64 / seconds;
            let expected = topology_rate_hz(&kind, *topology, sky, f64::from(threshold));
            println!("{topology:?} {threshold}: {measured:.3e} ratio {:.3} n {}", expected / measured, counts[level]);
        }
    }
    for (count, &threshold) in patch.iter().zip(&sums) {
        let measured = *count as f64 / seconds;
        let expected = topology_rate_hz(&kind, Topology::PatchSum(3.0), sky, f64::from(threshold));
        println!("patch {threshold}: {measured:.3e} ratio {:.3} n {count}", expected / measured);
    }
}

/// Trigger probability of a weak image against thresholds, fast readout against waveforms.
#[test]
fn verify_trigger_probability_against_waveforms() {
    let kind = kind(PixelShape::Hexagonal, 0.2, 1.1);
    let trials = 4_000;
    let sky = 0.16;
    for topology in
        [Topology::Connected(2), Topology::Connected(3), Topology::Compact(3), Topology::Majority(3), Topology::PatchSum(6.0)]
    {
        for light in [12_usize, 25, 60] {
            let base = if matches!(topology, Topology::PatchSum(_)) { 2.0 } else { 1.0 };
            let thresholds: Vec<f32> =
                [1.5_f32, 2.5, 3.5, 4.5, 6.0].iter().map(|t| t * base * (light as f32 / 25.0).sqrt()).collect();
            let (mut fast, mut slow, mut dark) = ([0_f64; 5], [0_f64; 5], [0_f64; 5]);
            let mut readout = Readout::with_topology(&kind, sky, topology);
            let mut waves = Waveforms::new(&kind, 60.0);
            let mut quanta = Vec::new();
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
                let margin = readout.image(&quanta, &mut stream).map_or(0.0, |i| i.margin_pe);
                waves.fill_with_noise(sky, &mut stream);
                for (level, &threshold) in thresholds.iter().enumerate() {
                    dark[level] += f64::from(waves.triggers(topology, threshold) > 0);
                }
                for quantum in &quanta {
                    if let Some(pixel) = kind.camera.pixel(quantum.x_deg, quantum.y_deg) {
                        let gain = (1.0 + kind.pulse_spread * stream.normal()).max(0.0);
                        waves.add_pulse(pixel, quantum.time_ns, gain as f32);
                    }
                }
                for (level, &threshold) in thresholds.iter().enumerate() {
                    fast[level] += f64::from(margin > threshold);
                    slow[level] += f64::from(waves.triggers(topology, threshold) > 0);
                }
            }
            for level in 0..5 {
                let n = trials as f64;
                println!(
                    "{topology:?} light {light} thr {:.2}: fast {:.4} slow {:.4} dark {:.4}",
                    thresholds[level], fast[level] / n, slow[level] / n, dark[level] / n
                );
            }
        }
    }
}
