//! Rates, areas and thresholds against cases with an exact answer.

use core::f64::consts::PI;

use nightpool::numerics::quadrature::integrate;
use nightpool::numerics::{Stage, Stream};
use nightpool::rates::{
    EnergyBin, Spectrum, angle_rates_hz, beyond_fraction, differential_rates, effective_areas,
    event_rates, median_energy_gev, rate, rate_hz, rate_sum_hz, recorded_rate_hz, ring_rates_hz,
    threshold_gev, word_rates,
};
use nightpool::response::{Sample, Throw, Word};
use nightpool::shower::{Direction, Species};

fn throw(seed: u64, words: usize) -> Throw {
    Throw {
        species: Species::Gamma,
        seed,
        energy_gev: (10.0, 10_000.0),
        index: 1.6,
        pointing: Direction::ZENITH,
        cone_rad: 0.0,
        centre_m: [0.0; 2],
        rings_m: vec![120.0, 300.0, 700.0],
        words,
    }
}

/// Words and plane of a trigger that fires where `fires` says, by energy (GeV), distance of the core
/// from the centre (m), the shower's own normal deviate and a uniform deviate of the event.
fn events(throw: &Throw, fires: impl Fn(f64, f64, f64, f64) -> bool) -> (Vec<Word>, Vec<u64>) {
    let word = |number: usize| {
        let thrown = throw.word(number);
        let mut stream = Stream::keyed(throw.seed, Stage::Shower, &[number as u64]);
        let (mut bits, mut event) = (0_u64, 0);
        for (_, cores) in &thrown.showers {
            let own = stream.normal();
            for core in cores {
                let fired = fires(thrown.energy_gev, core.norm(), own, stream.uniform());
                bits |= u64::from(fired) << event;
                event += 1;
            }
        }
        let (energy_gev, exposure, ring) = (thrown.energy_gev, thrown.exposure, thrown.ring);
        (Word { energy_gev, exposure, ring, angle_rad: 0.0 }, bits)
    };
    (0..throw.word_count()).map(word).unzip()
}

/// Share of `pulls` within one standard error; the binomial error of 300 trials is 2.7 %.
fn covered(pulls: &[f64]) -> f64 {
    pulls.iter().filter(|pull| pull.abs() <= 1.0).count() as f64 / pulls.len() as f64
}

const PASS: core::ops::RangeInclusive<f64> = 0.62..=0.74;

#[test]
fn verify_area_of_a_disc_and_its_errors() {
    // A disc of 250 m: its edge lies in the second ring, whose cores alone are uncertain.
    let bins = EnergyBin::cover(100.0, 1_000.0, 4);
    let exact = PI * 250.0_f64.powi(2);
    let mut pulls = Vec::new();
    for seed in 0..300 {
        let throw = throw(seed, 240);
        let (words, plane) = events(&throw, |_, distance, _, _| distance < 250.0);
        for area in effective_areas(&words, &plane, &throw.ring_areas_m2(), &bins) {
            assert!((area.value / exact - 1.0).abs() < 0.15, "{area:?}");
            pulls.push((area.value - exact) / area.error);
        }
    }
    assert!(PASS.contains(&covered(&pulls)), "{}", covered(&pulls));
    let mean = pulls.iter().sum::<f64>() / pulls.len() as f64;
    assert!(mean.abs() < 4.0 / (pulls.len() as f64).sqrt(), "bias {mean}");
}

/// A pool that grows with energy and differs from shower to shower:
/// radius 90 m (E / 100 GeV)^0.35 exp(0.25 g).
fn radius_m(energy_gev: f64, own: f64) -> f64 {
    90.0 * (energy_gev / 100.0).powf(0.35) * (0.25 * own).exp()
}

#[test]
fn verify_rate_errors_cover_the_truth() {
    let spectrum = Spectrum::named("crab-magic-2015").unwrap();
    // Mean area pi r^2 exp(2 x 0.25^2); the pool leaves the outermost ring in 1 of 1e4 showers.
    let exact = integrate(10.0_f64.ln(), 10_000.0_f64.ln(), 200, |log| {
        let energy = log.exp();
        let area = PI * radius_m(energy, 0.0).powi(2) * 0.125_f64.exp();
        energy * spectrum.flux_m2_s_gev(energy) * area
    });
    let mut pulls = Vec::new();
    let (mut values, mut errors) = (Vec::new(), Vec::new());
    for seed in 0..300 {
        let throw = throw(1_000 + seed, 100);
        let (words, plane) = events(&throw, |e, distance, own, _| distance < radius_m(e, own));
        let found = rate(&words, &plane, &spectrum);
        pulls.push((found.value - exact) / found.error);
        values.push(found.value);
        errors.push(found.error);
    }
    assert!(PASS.contains(&covered(&pulls)), "{}", covered(&pulls));
    let mean = values.iter().sum::<f64>() / 300.0;
    let spread = (values.iter().map(|v| (v - mean).powi(2)).sum::<f64>() / 299.0).sqrt();
    assert!((mean - exact).abs() < 4.0 * spread / 300.0_f64.sqrt(), "{mean} {exact}");
    // The stated error is the true spread; 300 trials know it to 4 %.
    let stated = (errors.iter().map(|e| e * e).sum::<f64>() / 300.0).sqrt();
    assert!((stated / spread - 1.0).abs() < 0.16, "{stated} {spread}");
}

#[test]
fn verify_events_taken_as_independent_would_understate_the_error() {
    // All events of a shower fire or none: the error from events would be 1/sqrt(8) of the true one.
    let throw = throw(5, 400);
    let spectrum = Spectrum::power_law(1e-7, 1.0, 2.5, None);
    let (words, plane) = events(&throw, |_, _, own, _| own > 0.5);
    let each = event_rates(&words, &spectrum);
    let binomial: f64 = each.iter().map(|one| 64.0 * one * one * 0.3085 * 0.6915).sum();
    let found = rate(&words, &plane, &spectrum);
    let ratio = found.error / binomial.sqrt();
    assert!((ratio / 8.0_f64.sqrt() - 1.0).abs() < 0.12, "{ratio}");
}

#[test]
fn verify_sums_of_a_rate_agree() {
    let throw = throw(9, 401);
    let spectrum = Spectrum::named("crab-hess-2006").unwrap();
    let (words, plane) = events(&throw, |e, distance, own, _| distance < radius_m(e, own));
    let rates = word_rates(&words, &plane, &spectrum);
    let total = rate_hz(&words, &rates);
    let fast = rate_sum_hz(&plane, &event_rates(&words, &spectrum));
    assert!((fast / total.value - 1.0).abs() < 1e-12);
    let rings: f64 = ring_rates_hz(&words, &rates, 3).iter().sum();
    assert!((rings / total.value - 1.0).abs() < 1e-12);
    let bins = EnergyBin::cover(10.0, 10_000.0, 4);
    let areas = throw.ring_areas_m2();
    let steps = differential_rates(&words, &plane, (&areas, 1.0), &spectrum, &bins);
    let sum: f64 = steps.iter().zip(&bins).map(|(step, bin)| step.value * bin.width_gev()).sum();
    assert!((sum - total.value).abs() < 2.0 * total.error, "{sum} {total:?}");
    // Half of the rate lies below the median.
    let median = median_energy_gev(&words, &rates);
    let below: f64 =
        words.iter().zip(&rates).filter(|(w, _)| w.energy_gev <= median).map(|(_, r)| r).sum();
    assert!((below / total.value - 0.5).abs() < 0.02);
}

#[test]
fn verify_a_dark_bin_has_an_error_and_an_empty_one_is_not_a_number() {
    let throw = throw(2, 100);
    let (words, plane) = events(&throw, |energy, _, _, _| energy > 200.0);
    let bins = EnergyBin::cover(10.0, 1e5, 3);
    let areas = effective_areas(&words, &plane, &throw.ring_areas_m2(), &bins);
    assert_eq!(areas[0].value, 0.0);
    assert!(areas[0].error > 0.0);
    assert!((areas[6].value / (PI * 700.0_f64.powi(2)) - 1.0).abs() < 1e-12);
    assert!(areas[11].value.is_nan());
}

#[test]
fn verify_threshold_of_an_area_with_a_known_peak() {
    // A(E) of the form 1 / (1 + (E0/E)^k), flux E^-g: dR/dE peaks at E0 (k/g - 1)^(1/k).
    for (rise, index, middle) in [(4.0, 2.6, 120.0), (6.0, 2.6, 80.0), (3.5, 2.2, 300.0)] {
        let exact: f64 = middle * (rise / index - 1.0_f64).powf(1.0 / rise);
        let spectrum = Spectrum::power_law(1e-7, 1.0, index, None);
        let (mut pulls, mut values) = (Vec::new(), Vec::new());
        for seed in 0..100 {
            let throw = throw(seed + 77 * rise as u64, 400);
            let (words, plane) = events(&throw, |energy, distance, _, luck| {
                distance < 200.0 && luck < 1.0 / (1.0 + (middle / energy).powf(rise))
            });
            let found = threshold_gev(&words, &word_rates(&words, &plane, &spectrum));
            pulls.push((found.value - exact) / found.error);
            values.push(found.value);
        }
        let mean = values.iter().sum::<f64>() / 100.0;
        assert!((mean / exact - 1.0).abs() < 0.02, "{rise} {index}: {mean} for {exact}");
        // 100 trials: 68 % is known to 4.7 %.
        let share = covered(&pulls);
        assert!((0.55..=0.82).contains(&share), "{rise} {index}: {share}, {mean} for {exact}");
    }
}

#[test]
fn verify_no_threshold_where_there_is_no_peak() {
    // Everything fires: dR/dE falls from the lowest energy on.
    let (words, plane) = events(&throw(3, 200), |_, distance, _, _| distance < 300.0);
    let spectrum = Spectrum::power_law(1e-7, 1.0, 2.5, None);
    let found = threshold_gev(&words, &word_rates(&words, &plane, &spectrum));
    assert!(found.value.is_nan(), "{found:?}");
}

#[test]
fn verify_loss_beyond_an_exponential_edge() {
    // Density exp(-r / l): inside R the integral is 2 pi l^2 (1 - (1 + R/l) exp(-R/l)).
    let (length, edge) = (80.0, 600.0_f64);
    let inside =
        |r: f64| 2.0 * PI * length * length * (1.0 - (1.0 + r / length) * (-r / length).exp());
    let radii: Vec<f64> = (1..=30).map(|ring| edge * f64::from(ring) / 30.0).collect();
    let rates: Vec<f64> = radii.iter().map(|&r| inside(r) - inside(r - edge / 30.0)).collect();
    let exact = (inside(1e5) - inside(edge)) / inside(edge);
    let found = beyond_fraction(&radii, &rates);
    assert!((found / exact - 1.0).abs() < 0.02, "{found} {exact}");
    // A flat density goes on for ever; an empty last ring ends the matter.
    assert!(beyond_fraction(&[1.0, 2.0], &[1.0, 3.0]).is_infinite());
    assert_eq!(beyond_fraction(&[1.0, 2.0], &[1.0, 0.0]), 0.0);
    assert!(beyond_fraction(&[1.0], &[1.0]).is_nan());
}

#[test]
fn verify_rates_by_angle_are_those_of_a_trigger_cut_in_angle() {
    let cone = Throw {
        species: Species::Proton,
        pointing: Direction { zenith_rad: 0.4, azimuth_rad: 1.0 },
        cone_rad: 0.1,
        ..throw(4, 300)
    };
    let towards = cone.pointing.to_source();
    let mut plane = Vec::new();
    let mut words = Vec::new();
    for number in 0..cone.word_count() {
        let thrown = cone.word(number);
        let near = thrown.showers.iter().enumerate().fold(0_u64, |bits, (place, (primary, _))| {
            let angle = primary.direction.to_source().dot(&towards).min(1.0).acos();
            bits | if angle < 0.05 { 0xFF << (8 * place) } else { 0 }
        });
        plane.push(near);
        let (energy_gev, exposure, ring) = (thrown.energy_gev, thrown.exposure, thrown.ring);
        words.push(Word { energy_gev, exposure, ring, angle_rad: 0.1 });
    }
    let spectrum = Spectrum::named("proton").unwrap();
    let each = event_rates(&words, &spectrum);
    let (species, pads) = (cone.species, Vec::new());
    let (margins, images) = (Vec::new(), Vec::new());
    let sample = Sample { species, throw: cone, first_word: 0, words, pads, margins, images };
    let rates = angle_rates_hz(&sample, &plane, &each, 4);
    assert!(rates[0] > 0.0 && rates[1] > 0.0);
    assert_eq!(&rates[2..], &[0.0, 0.0]);
    let total = rate_sum_hz(&plane, &each);
    assert!(((rates[0] + rates[1]) / total - 1.0).abs() < 1e-12);
    // A uniform sky: solid angles of the rings as 1 : 3.
    assert!((rates[1] / rates[0] - 3.0).abs() < 0.5, "{rates:?}");
}

#[test]
fn verify_recorded_rate_against_a_counter_event_by_event() {
    let mut stream = Stream::keyed(1, Stage::Table, &[3]);
    let (rate, dead) = (400.0, 1.5e-3);
    let (mut now, mut free, mut recorded) = (0.0, 0.0, 0_u32);
    for _ in 0..400_000 {
        now += stream.exponential() / rate;
        if now >= free {
            recorded += 1;
            free = now + dead;
        }
    }
    let found = f64::from(recorded) / now;
    // 250,000 recorded events: 0.2 % at most.
    assert!((found / recorded_rate_hz(rate, dead) - 1.0).abs() < 0.006, "{found}");
}
