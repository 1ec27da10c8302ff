//! Accidental triggers against waveforms of every pixel and against their algebra.

use nightpool::numerics::{Stream, stream::Stage};
use nightpool::telescope::accidental::{
    array_rate_hz, array_slot_rate_hz, connected_groups, topology_rate_hz,
};
use nightpool::telescope::trigger::compact_groups;
use nightpool::telescope::waveform::{Waveforms, coincidences};
use nightpool::telescope::{Accidental, Camera, Noise, PixelShape, Topology};

use crate::telescope::{kind, seven};

/// One long run of seven pixels serves all rates: pixel crossings, connected pairs, majorities and
/// patch sums over more than four decades each, compact triples over three.
#[test]
fn verify_accidental_rates_against_waveforms() {
    let kind = seven();
    assert_eq!(kind.camera.pixels.len(), 7);
    let (sky, block_ns, blocks) = (0.16, 100_000.0_f32, 200);
    let thresholds = [1.5_f32, 2.0, 3.0, 4.0, 5.0, 6.0, 7.0, 8.0];
    let sums = [4.0_f32, 6.0, 8.0, 10.0, 12.0, 13.0];
    let topologies = [Topology::Connected(2), Topology::Majority(3), Topology::Compact(3)];
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
    let enough = |count: usize| count >= 40;
    for (&count, &threshold) in pixel.iter().zip(&thresholds).filter(|(c, _)| enough(**c)) {
        let measured = count as f64 / (7.0 * seconds);
        let ratio = noise.crossing_rate_hz(f64::from(threshold)) / measured;
        let allowed = 0.03 + 3.0 / (count as f64).sqrt();
        assert!((ratio - 1.0).abs() < allowed, "pixel at {threshold}: {ratio} of {measured} Hz");
    }
    assert!(pixel[0] > 10_000 * pixel[6] && enough(pixel[6]), "four decades: {pixel:?}");
    // Down to three triggers, within three standard errors: over four decades each.
    let some = |count: usize| count >= 3;
    for counts in [groups[0].as_slice(), &groups[1], &patch] {
        let least = counts.iter().copied().filter(|count| some(*count)).min().unwrap_or(0);
        assert!(counts[0] > 10_000 * least, "four decades: {counts:?}");
    }
    for (topology, counts) in topologies.iter().zip(&groups) {
        for (&count, &threshold) in counts.iter().zip(&thresholds).filter(|(c, _)| some(**c)) {
            let threshold = f64::from(threshold);
            let expected = topology_rate_hz(&kind, *topology, sky, threshold);
            let ratio = expected * seconds / count as f64;
            let error = 3.0 / (count as f64).sqrt();
            // The sum over groups counts overlaps twice and ignores the rest after a trigger: an
            // upper bound, off by the occupancy of the gate times the pixels that may join.
            let busy = noise.crossing_rate_hz(threshold) * kind.coincidence_gate_ns * 1e-9;
            let most = 1.0 + 7.0 * busy + error;
            assert!(ratio > 0.98 - error, "{topology:?} at {threshold}: {ratio}");
            assert!(ratio < most || busy > 0.05, "{topology:?} at {threshold}: {ratio} > {most}");
        }
    }
    for (&count, &threshold) in patch.iter().zip(&sums).filter(|(c, _)| some(**c)) {
        let topology = Topology::PatchSum(3.0);
        let expected = topology_rate_hz(&kind, topology, sky, f64::from(threshold));
        let ratio = expected * seconds / count as f64;
        let allowed = 0.03 + 3.0 / (count as f64).sqrt();
        assert!((ratio - 1.0).abs() < allowed, "patch at {threshold}: {ratio}");
    }
}

/// Electronic noise, crosstalk and afterpulses in the noise law, against waveforms that hold them
/// pulse by pulse; each alone and all at once.
#[test]
fn verify_noise_of_electronics_crosstalk_and_afterpulses_against_waveforms() {
    let (sky, block_ns, blocks) = (0.16, 100_000.0_f32, 30);
    for (electronics, crosstalk, afterpulsing) in
        [(0.6, 0.0, 0.0), (0.0, 0.2, 0.0), (0.0, 0.0, 0.02), (0.4, 0.1, 0.02)]
    {
        let mut kind = seven();
        kind.electronic_noise_pe = electronics;
        kind.crosstalk = crosstalk;
        kind.afterpulsing = afterpulsing;
        kind.afterpulse_pe = 3.0;
        let thresholds = [1.5_f32, 2.5, 3.5, 4.5, 6.0, 8.0, 10.0];
        let (mut pixel, mut pairs, mut waves) = ([0; 7], [0; 7], Waveforms::new(&kind, block_ns));
        let (mut sum, mut square, mut count) = (0.0, 0.0, 0.0);
        for block in 0..blocks {
            let mut stream = Stream::keyed(12, Stage::Noise, &[block, (10.0 * crosstalk) as u64]);
            waves.fill_with_noise(sky, &mut stream);
            for (level, &threshold) in thresholds.iter().enumerate() {
                pixel[level] += (0..7).map(|p| waves.crossings(p, threshold)).sum::<usize>();
                pairs[level] += waves.triggers(Topology::Connected(2), threshold);
            }
            for height in (0..7).flat_map(|p| waves.pixel(p).iter().step_by(40)) {
                let height = f64::from(*height);
                (sum, square, count) = (sum + height, square + height * height, count + 1.0);
            }
        }
        // AC coupling: the mean is zero; Campbell's RMS with the factors of each source.
        let (mean, rms) = (sum / count, (square / count).sqrt());
        let expected = nightpool::telescope::noise::noise_rms_pe(&kind, sky);
        assert!(mean.abs() < 0.02 * rms, "{mean}");
        assert!((rms / expected - 1.0).abs() < 0.02, "{rms} {expected}");
        let seconds = f64::from(block_ns) * 1e-9 * blocks as f64;
        let law = Accidental::with_topology(&kind, Topology::Connected(2), sky);
        for (level, &threshold) in thresholds.iter().enumerate() {
            let threshold = f64::from(threshold);
            for (seen, rate) in [
                (pixel[level], 7.0 * law.pixel_rate_hz(threshold)),
                (pairs[level], law.rate_hz(threshold)),
            ] {
                let busy = law.pixel_rate_hz(threshold) * kind.coincidence_gate_ns * 1e-9;
                if seen < 60 || (seen == pairs[level] && busy > 0.02) {
                    continue;
                }
                let ratio = rate * seconds / seen as f64;
                let error = 4.0 / (seen as f64).sqrt();
                let name = (electronics, crosstalk, afterpulsing, threshold);
                if seen == pixel[level] {
                    // The slope at a height is taken as gaussian; afterpulses make it a mixture,
                    // which measured +6 to -5 % here.
                    let allowed = if afterpulsing > 0.0 { 0.07 } else { 0.03 };
                    assert!((ratio - 1.0).abs() < allowed + error, "{name:?}: {ratio}");
                } else {
                    // The square of the pixel's, and the sum over pairs, an upper bound that is
                    // 10 % high at these rates.
                    assert!(ratio > 0.86 - error && ratio < 1.26 + error, "{name:?}: {ratio}");
                }
            }
        }
    }
}

/// Logic pulses at random against groups x n R^n w^(n-1), over four decades of trigger rate.
#[test]
fn verify_coincidence_algebra_over_four_decades() {
    let kind = seven();
    for (topology, groups, n) in [
        (Topology::Connected(2), 12.0, 2_i32),
        (Topology::Connected(3), 21.0, 3),
        (Topology::Compact(3), 6.0, 3),
        (Topology::Majority(3), 35.0, 3),
        (Topology::Majority(4), 35.0, 4),
    ] {
        let gate = kind.coincidence_gate_ns * 1e-9;
        for decade in 0..5 {
            let wanted = 10.0_f64.powi(decade + 1);
            let rate =
                (wanted / (groups * f64::from(n) * gate.powi(n - 1))).powf(1.0 / f64::from(n));
            let mut stream =
                Stream::keyed(3, Stage::Noise, &[decade as u64, n as u64, groups as u64]);
            let (mut time, mut count, target) = (0.0, 0, 400.0);
            let end = 1e9 * target / wanted;
            let mut rises = Vec::new();
            while time < end {
                time += 1e9 * stream.exponential() / (7.0 * rate);
                rises.push((time, (stream.uniform() * 7.0) as usize));
            }
            count += coincidences(&kind, topology, &rises);
            let ratio = count as f64 / target;
            // Four standard errors, and the overlaps between groups: see the waveform test.
            let low = 1.0 - 0.2 - 7.0 * rate * gate;
            assert!(ratio > low && ratio < 1.2, "{topology:?}, {wanted} Hz: {ratio}");
        }
    }
}

/// Fixed numbers of connected hexagons per cell of a large lattice: 1, 3, 11, 44 (fixed
/// polyhexes), and of squares 1, 2, 6, 19 (fixed polyominoes).
#[test]
fn verify_group_counts_against_lattice_animals() {
    let counts = [
        (PixelShape::Hexagonal, [1.0, 3.0, 11.0, 44.0]),
        (PixelShape::Square, [1.0, 2.0, 6.0, 19.0]),
    ];
    for (shape, animals) in counts {
        let (small, large) = (kind(shape, 0.1, 4.0).camera, kind(shape, 0.1, 5.0).camera);
        for (size, animal) in (1..=4).zip(animals) {
            // Groups = animals x pixels - edge loss; the loss grows with the circumference only.
            let loss = |c: &Camera| animal * c.pixels.len() as f64 - connected_groups(c, size);
            let ratio = if size == 1 { 1.25 } else { loss(&large) / loss(&small) };
            assert!((ratio - 1.25).abs() < 0.08, "{shape:?} {size}: {ratio}");
        }
        let triples = compact_groups(&large, 3).len() as f64 / large.pixels.len() as f64;
        let per_pixel = if shape == PixelShape::Hexagonal { 2.0 } else { 4.0 };
        assert!((triples / per_pixel - 1.0).abs() < 0.1, "{shape:?}: {triples}");
    }
}

#[test]
fn verify_array_rate_is_the_symmetric_polynomial() {
    let rates = [100.0, 200.0, 300.0, 400.0];
    let tau: f64 = 40e-9;
    let threefold = 100.0 * 200.0 * (300.0 + 400.0) + 300.0 * 400.0 * (100.0 + 200.0);
    let window = array_rate_hz(&rates, 3, 40.0);
    assert!((window / (3.0 * threefold * tau * tau) - 1.0).abs() < 1e-12);
    assert!((array_slot_rate_hz(&rates, 3, 40.0) * 3.0 / window - 1.0).abs() < 1e-12);
}
