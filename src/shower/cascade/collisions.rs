//! Collisions with electrons of the air: Moller, Bhabha, annihilation in flight.

use core::f64::consts::{PI, TAU};

use super::material::{electrons_mol_g, radius2_per_mol_cm2};
use crate::consts::ELECTRON_MASS_GEV;
use crate::numerics::Stream;
use crate::numerics::quadrature::integrate;

/// Spectrum of the share e of kinetic energy given to the other electron, e <= 1/2, times
/// e^2 beta^2: bounded by 9/4 + ... for all energies.
///
/// # Source
/// Moller 1932, Ann. Phys. 14, 531.
#[inline]
fn moller(e: f64, gamma: f64) -> f64 {
    let g2 = gamma * gamma;
    let cross = (2.0 * gamma - 1.0) / g2;
    let q = 1.0 - e;
    let ratio = e / q;
    1.0 + ((gamma - 1.0) * e / gamma).powi(2) - cross * e + ratio * ratio - cross * e * ratio
}

/// The same for positrons, e <= 1.
///
/// # Source
/// Bhabha 1936, Proc. R. Soc. A 154, 195.
#[inline]
fn bhabha(e: f64, gamma: f64) -> f64 {
    let beta2 = 1.0 - 1.0 / (gamma * gamma);
    let y = 1.0 / (gamma + 1.0);
    let q = 1.0 - 2.0 * y;
    let (b1, b2) = (2.0 - y * y, q * (3.0 + y * y));
    let (b3, b4) = (q * q + q.powi(3), q.powi(3));
    1.0 - beta2 * e * (b1 - e * (b2 - e * (b3 - e * b4)))
}

fn spectrum(e: f64, gamma: f64, positron: bool) -> f64 {
    if positron { bhabha(e, gamma) } else { moller(e, gamma) }
}

/// Probability per g/cm2 of a knock-on above `transfer_gev`.
pub fn knock_on_cm2_g(energy_gev: f64, transfer_gev: f64, positron: bool) -> f64 {
    let gamma = energy_gev / ELECTRON_MASS_GEV;
    let kinetic = energy_gev - ELECTRON_MASS_GEV;
    let (least, most) = (transfer_gev / kinetic, if positron { 1.0 } else { 0.5 });
    if least >= most {
        return 0.0;
    }
    let beta2 = 1.0 - 1.0 / (gamma * gamma);
    // Substitute u = 1/e: the 1/e^2 of the law becomes flat.
    let integral = integrate(1.0 / most, 1.0 / least, 12, |u| spectrum(1.0 / u, gamma, positron));
    TAU * radius2_per_mol_cm2() * electrons_mol_g() / (beta2 * (gamma - 1.0)) * integral
}

/// Draws the share of kinetic energy given away above `transfer_gev`.
pub fn knock_on_share(
    energy_gev: f64,
    transfer_gev: f64,
    positron: bool,
    stream: &mut Stream,
) -> f64 {
    let gamma = energy_gev / ELECTRON_MASS_GEV;
    let kinetic = energy_gev - ELECTRON_MASS_GEV;
    let (least, most) = (transfer_gev / kinetic, if positron { 1.0 } else { 0.5 });
    let (low, high) = (1.0 / most, 1.0 / least);
    // The Moller bracket is largest at e = 1/2, where it is below 2 + 1/4; Bhabha's is below 1.
    let top = if positron { 1.0 } else { 2.25 };
    loop {
        let e = 1.0 / (low + (high - low) * stream.uniform());
        if stream.uniform() * top < spectrum(e, gamma, positron) {
            return e;
        }
    }
}

/// Cosine of the angle of an electron of kinetic energy `out_gev` after a collision of one of
/// `in_gev` with an electron at rest (energy and momentum conserved).
#[inline]
pub fn cosine(in_gev: f64, out_gev: f64) -> f64 {
    let twice = 2.0 * ELECTRON_MASS_GEV;
    (out_gev * (in_gev + twice) / (in_gev * (out_gev + twice))).sqrt().min(1.0)
}

/// Probability per g/cm2 of annihilation in flight into two photons.
///
/// # Source
/// Heitler 1954, The Quantum Theory of Radiation, section 27.
pub fn annihilation_cm2_g(energy_gev: f64) -> f64 {
    let g = energy_gev / ELECTRON_MASS_GEV;
    let root = (g * g - 1.0).sqrt();
    let bracket = (g * g + 4.0 * g + 1.0) / (g * g - 1.0) * (g + root).ln() - (g + 3.0) / root;
    PI * radius2_per_mol_cm2() * electrons_mol_g() / (g + 1.0) * bracket
}

/// Draws the share of the total energy E + m that one photon takes, and the cosines of both.
///
/// # Source
/// Heitler 1954, section 27: dsigma/de = (1/e) [1 - e + (2 g e - 1) / (e (g + 1)^2)].
pub fn annihilation(energy_gev: f64, stream: &mut Stream) -> (f64, f64, f64) {
    let g = energy_gev / ELECTRON_MASS_GEV;
    let root = (g * g - 1.0).sqrt();
    let half = 0.5 * ((g - 1.0) / (g + 1.0)).sqrt();
    let (least, most) = (0.5 - half, 0.5 + half);
    let square = (g + 1.0) * (g + 1.0);
    let share = loop {
        let e = least * ((most / least).ln() * stream.uniform()).exp();
        // The bracket is 1 - e + 2 g / (g + 1)^2 - 1 / (e (g + 1)^2), at most 3/2.
        if stream.uniform() * 1.5 < 1.0 - e + (2.0 * g * e - 1.0) / (e * square) {
            break e;
        }
    };
    let cosine = |e: f64| ((e * (g + 1.0) - 1.0) / (e * root)).clamp(-1.0, 1.0);
    (share, cosine(share), cosine(1.0 - share))
}
