//! Telescope layer: accidental coincidences of four equal telescopes against the published algebra
//! C(4,3) R^3 tau^2 (fixed slots) and 3 times that (sliding window).
//!
//! `cargo run --release --example coincidences`

use nightpool::telescope::accidental::{array_rate_hz, array_slot_rate_hz};

fn main() {
    let (rate_hz, window_ns) = (1.056e4_f64, 40.0);
    let exact = 4.0 * rate_hz.powi(3) * (window_ns * 1e-9_f64).powi(2);
    let slots = array_slot_rate_hz(&[rate_hz; 4], 3, window_ns);
    let sliding = array_rate_hz(&[rate_hz; 4], 3, window_ns);
    println!("slots:   {slots:.9e} Hz, exact {exact:.9e} Hz");
    println!("sliding: {sliding:.9e} Hz, exact {:.9e} Hz", 3.0 * exact);
    assert!((slots / exact - 1.0).abs() < 1e-12);
    assert!((sliding / (3.0 * exact) - 1.0).abs() < 1e-12);
}
