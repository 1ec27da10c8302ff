//! Rates layer: a detector of one area above one energy, against the integral of a power law.
//!
//! `cargo run --release --example step_area`

use nightpool::rates::{Spectrum, rate};
use nightpool::response::Word;

fn main() {
    // Words even in the logarithm of energy; exposure = area x energy range of a word / 64 events.
    let (words, low, high, area_m2) = (20_000, 10.0_f64, 1e5_f64, 1e5);
    let step = (high / low).ln() / f64::from(words);
    let sample: Vec<Word> = (0..words)
        .map(|number| {
            let energy_gev = low * ((f64::from(number) + 0.5) * step).exp();
            let exposure = area_m2 * energy_gev * 2.0 * (0.5 * step).sinh() / 64.0;
            Word { energy_gev, exposure, ring: 0, angle_rad: 0.0 }
        })
        .collect();
    let threshold_gev = 1_000.0;
    let fires = |word: &Word| if word.energy_gev > threshold_gev { u64::MAX } else { 0 };
    let plane: Vec<u64> = sample.iter().map(fires).collect();
    let spectrum = Spectrum::power_law(3e-7, 1.0, 2.5, None);
    let found = rate(&sample, &plane, &spectrum);
    // 3e-7 per m2 s TeV at 1 TeV: integral from 1 to 100 TeV of E^-2.5 is (1 - 100^-1.5) / 1.5.
    let exact = area_m2 * 3e-7 * (1.0 - 100.0_f64.powf(-1.5)) / 1.5;
    println!("rate: {:.9} Hz, exact {exact:.9} Hz", found.value);
    assert!((found.value / exact - 1.0).abs() < 1e-5);
}
