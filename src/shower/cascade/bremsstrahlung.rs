//! Electrons and positrons radiating photons.

use super::material::{AIR, coulomb_correction, electron_weight, radius2_per_mol_cm2};
use super::pair::{SHAPE_CHARGE, screening};
use crate::consts::{ELECTRON_MASS_GEV, FINE_STRUCTURE};
use crate::numerics::Stream;
use crate::numerics::quadrature::integrate;

/// k dsigma/dk of air, cm2/g, at y = k/E:
/// alpha r_e^2 N_A sum w/A Z (Z + electron weight)
/// {[1 + (1-y)^2] (phi1 - F) - 2/3 (1-y) (phi2 - F)}, F = 4/3 ln Z + 4 f(Z),
/// delta = 136 m y / (Z^(1/3) E (1-y)).
///
/// # Validity
/// Born approximation, exact in the limits; above about 10 MeV.
///
/// # Source
/// Bethe & Heitler 1934; Koch & Motz 1959, Rev. Mod. Phys. 31, 920; Tsai 1974.
pub fn spectrum_cm2_g(energy_gev: f64, y: f64) -> f64 {
    let sum: f64 = AIR
        .iter()
        .map(|element| {
            let z = element.charge;
            let shift = 4.0 / 3.0 * z.ln() + 4.0 * coulomb_correction(z);
            let scale = 136.0 * ELECTRON_MASS_GEV / z.cbrt();
            let phi = screening(scale * y / (energy_gev * (1.0 - y)));
            element.mass_share / element.molar_mass
                * z
                * (z + electron_weight(z))
                * shape(y, phi, shift)
        })
        .sum();
    FINE_STRUCTURE * radius2_per_mol_cm2() * sum
}

#[inline]
fn shape(y: f64, phi: (f64, f64), shift: f64) -> f64 {
    let rest = 1.0 - y;
    ((1.0 + rest * rest) * (phi.0 - shift) - 2.0 / 3.0 * rest * (phi.1 - shift)).max(0.0)
}

/// Probability per g/cm2 of radiating a photon above `least_gev`.
pub fn hard_cm2_g(energy_gev: f64, least_gev: f64) -> f64 {
    let most = energy_gev - ELECTRON_MASS_GEV;
    if most <= least_gev {
        return 0.0;
    }
    integrate(least_gev.ln(), most.ln(), 12, |log| {
        spectrum_cm2_g(energy_gev, log.exp() / energy_gev)
    })
}

/// Energy radiated per g/cm2 in photons below `most_gev`, GeV.
pub fn soft_loss_gev_cm2_g(energy_gev: f64, most_gev: f64) -> f64 {
    let most = most_gev.min(energy_gev - ELECTRON_MASS_GEV);
    if most <= 0.0 {
        return 0.0;
    }
    integrate(0.0, most, 8, |k| spectrum_cm2_g(energy_gev, k / energy_gev))
}

/// Draws photon energies above a fixed least energy.
#[derive(Clone, Copy, Debug)]
pub struct PhotonSpectrum {
    shift: f64,
    scale: f64,
    top: f64,
}

impl Default for PhotonSpectrum {
    fn default() -> Self {
        let z = SHAPE_CHARGE;
        let shift = 4.0 / 3.0 * z.ln() + 4.0 * coulomb_correction(z);
        let scale = 136.0 * ELECTRON_MASS_GEV / z.cbrt();
        Self { shift, scale, top: shape(0.0, screening(0.0), shift) }
    }
}

impl PhotonSpectrum {
    /// Energy of the photon, GeV: 1/k times the bounded shape, by rejection.
    #[inline]
    pub fn energy_gev(&self, energy_gev: f64, least_gev: f64, stream: &mut Stream) -> f64 {
        let log_range = ((energy_gev - ELECTRON_MASS_GEV) / least_gev).ln();
        loop {
            let k = least_gev * (log_range * stream.uniform()).exp();
            let y = k / energy_gev;
            let phi = screening(self.scale * y / (energy_gev * (1.0 - y)));
            if stream.uniform() * self.top < shape(y, phi, self.shift) {
                return k;
            }
        }
    }
}
