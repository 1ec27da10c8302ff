//! Light layer: the whole light of one muon that falls through the middle of a round mirror,
//! against 2 pi alpha sin^2(theta) per metre of track over the length R / tan(theta) it can be seen
//! from.
//!
//! `cargo run --release --example ring`

use core::f64::consts::{PI, TAU};

use nightpool::consts::FINE_STRUCTURE;
use nightpool::numerics::quadrature::integrate;
use nightpool::telescope::muon::{chord_m, ring_photoelectrons_per_rad};

fn main() {
    let (angle_rad, radius_m) = (1.2_f64.to_radians(), 6.0);
    // Efficiency one between 300 and 600 nm.
    let band_per_m = 1.0 / 300e-9 - 1.0 / 600e-9;
    let per_rad =
        |phi| ring_photoelectrons_per_rad(angle_rad, chord_m(radius_m, 0.0, phi), band_per_m);
    let ring = integrate(-PI, PI, 64, per_rad);
    let per_m = TAU * FINE_STRUCTURE * angle_rad.sin().powi(2) * band_per_m;
    let exact = per_m * radius_m / angle_rad.tan();
    println!("ring: {ring:.6} photons, exact {exact:.6}");
    assert!((ring / exact - 1.0).abs() < 1e-9);
    // Off the mirror by any distance less than its radius the ring keeps a mean chord of
    // 2/pi x R x E(rho/R), E the complete elliptic integral; at the rim E(1) = 1.
    let rim = integrate(-PI, PI, 20_000, |phi| chord_m(radius_m, radius_m, phi)) / TAU;
    let exact = 2.0 * radius_m / PI;
    println!("mean chord from the rim: {rim:.6} m, exact {exact:.6} m");
    assert!((rim / exact - 1.0).abs() < 1e-4);
}
