//! Photons making electron-positron pairs.

use core::f64::consts::PI;

use super::material::{
    AIR, coulomb_correction, electron_weight, radiation_logarithm, radius2_per_mol_cm2,
};
use crate::consts::{ELECTRON_MASS_GEV, FINE_STRUCTURE};
use crate::numerics::Stream;
use crate::numerics::quadrature::integrate;

/// Screening functions of the Thomas-Fermi atom, phi1 and phi2, of
/// delta = 136 m / (Z^(1/3) k e (1 - e)).
///
/// # Source
/// Butcher & Messel 1960, Nucl. Phys. 20, 15 (from memory); Tsai 1974 at delta = 0.
#[inline]
pub fn screening(delta: f64) -> (f64, f64) {
    if delta <= 1.0 {
        (20.867 + delta * (-3.242 + 0.625 * delta), 20.209 + delta * (-1.930 - 0.086 * delta))
    } else {
        let phi = 21.12 - 4.184 * (delta + 0.952).ln();
        (phi, phi)
    }
}

/// Total cross-section without screening in the Born approximation, in units of
/// alpha r_e^2 Z^2; `k` is the photon energy over the electron rest energy.
///
/// # Validity
/// 1e-4 above threshold to all energies.
///
/// # Source
/// Maximon 1968, J. Res. Natl. Bur. Stand. 72B, 79: expansions below and above k = 4 (from
/// memory; the two meet to 1e-3 at k = 4).
pub fn unscreened_total(k: f64) -> f64 {
    if k <= 2.0 {
        return 0.0;
    }
    if k < 4.0 {
        let eta = (2.0 * k - 4.0) / (k + 2.0 + 2.0 * (2.0 * k).sqrt());
        let series =
            1.0 + eta * (0.5 + eta * (23.0 / 40.0 + eta * (11.0 / 60.0 + eta * 29.0 / 960.0)));
        return 2.0 * PI / 3.0 * ((k - 2.0) / k).powi(3) * series;
    }
    const ZETA_3: f64 = 1.202_056_903_159_594;
    let l = (2.0 * k).ln();
    let x = (2.0 / k).powi(2);
    let second = 6.0 * l - 3.5 + 2.0 / 3.0 * l.powi(3) - l * l - PI * PI / 3.0 * l
        + 2.0 * ZETA_3
        + PI * PI / 6.0;
    28.0 / 9.0 * l - 218.0 / 27.0 + x * second
        - x * x * (3.0 / 16.0 * l + 0.125)
        - x.powi(3) * (29.0 / 2304.0 * l - 77.0 / 13824.0)
}

/// Pair production in the field of one free electron, in units of alpha r_e^2:
/// 28/9 L - 218/27 - (4/3 L^3 - 3 L^2 + 6.84 L - 21.51) / k, L = ln 2k.
///
/// # Validity
/// k above 8; below it falls to zero at the threshold k = 4 linearly.
///
/// # Source
/// Borsellino 1947, Nuovo Cimento 4, 112, expansion of Ghizzetti (from memory).
pub fn triplet_total(k: f64) -> f64 {
    let expansion = |k: f64| {
        let l = (2.0 * k).ln();
        28.0 / 9.0 * l - 218.0 / 27.0 - (4.0 / 3.0 * l.powi(3) - 3.0 * l * l + 6.84 * l - 21.51) / k
    };
    if k >= 8.0 { expansion(k) } else { expansion(8.0) * ((k - 4.0) / 4.0).max(0.0) }
}

/// Reduction by screening: integral of the screened spectrum over that of the unscreened one.
fn screening_reduction(k: f64, charge: f64) -> f64 {
    if k < 10.0 {
        return 1.0;
    }
    let shift = 4.0 / 3.0 * charge.ln();
    let coulomb = 4.0 * coulomb_correction(charge);
    let spectrum = |e: f64, phi: (f64, f64)| {
        let (a, b) = ((phi.0 - shift - coulomb).max(0.0), (phi.1 - shift - coulomb).max(0.0));
        (e * e + (1.0 - e) * (1.0 - e)) * a + 2.0 / 3.0 * e * (1.0 - e) * b
    };
    let screened = integrate(1.0 / k, 0.5, 16, |e| {
        spectrum(e, screening(136.0 / (charge.cbrt() * k * e * (1.0 - e))))
    });
    let bare = integrate(1.0 / k, 0.5, 16, |e| {
        let phi = 4.0 * (2.0 * k * e * (1.0 - e)).ln() - 2.0 + shift;
        spectrum(e, (phi, phi))
    });
    (screened / bare).min(1.0)
}

/// Total pair-production coefficient of air, cm2/g.
///
/// Unscreened exact Born total, times the reduction by screening; the electrons' share by their
/// own threshold law, with a weight that goes from 1 (no screening) to Tsai's value (complete
/// screening) as k / (k + 100).
///
/// # Validity
/// Threshold to all energies; agrees with published attenuation to 1 % (test
/// `validate_attenuation_hubbell_seltzer1995`).
///
/// # Source
/// Maximon 1968; Tsai 1974. The join of the electrons' weight is this program's own.
pub fn pair_cm2_g(photon_gev: f64) -> f64 {
    let k = photon_gev / ELECTRON_MASS_GEV;
    if k <= 2.0 {
        return 0.0;
    }
    let sum: f64 = AIR
        .iter()
        .map(|element| {
            let z = element.charge;
            let weight = 1.0 + (electron_weight(z) - 1.0) * k / (k + 100.0);
            let bare = z * z * unscreened_total(k) + z * weight * triplet_total(k);
            element.mass_share / element.molar_mass * bare * screening_reduction(k, z)
        })
        .sum();
    FINE_STRUCTURE * radius2_per_mol_cm2() * sum
}

/// Complete-screening limit of [`pair_cm2_g`]: 28/9 (L - f) - 2/27 per nucleus and electron weight,
/// the integral of the spectrum (Tsai 1974).
pub fn pair_limit_cm2_g() -> f64 {
    let sum: f64 = AIR
        .iter()
        .map(|element| {
            let z = element.charge;
            let l = radiation_logarithm(z) - coulomb_correction(z);
            element.mass_share / element.molar_mass
                * z
                * (z + electron_weight(z))
                * (28.0 / 9.0 * l - 2.0 / 27.0)
        })
        .sum();
    FINE_STRUCTURE * radius2_per_mol_cm2() * sum
}

/// Charge number that stands for air in the shape of spectra: exp of the mean of ln Z.
pub const SHAPE_CHARGE: f64 = 7.37;

/// Draws the smaller of the two energy shares of a pair.
#[derive(Clone, Copy, Debug)]
pub struct PairSpectrum {
    shift: f64,
    scale: f64,
}

impl Default for PairSpectrum {
    fn default() -> Self {
        let z = SHAPE_CHARGE;
        let shift = 4.0 / 3.0 * z.ln() + 4.0 * coulomb_correction(z);
        Self { shift, scale: 136.0 * ELECTRON_MASS_GEV / z.cbrt() }
    }
}

impl PairSpectrum {
    /// Share of the energy that one of the two takes, between m/k and 1/2.
    #[inline]
    pub fn share(&self, photon_gev: f64, stream: &mut Stream) -> f64 {
        let least = ELECTRON_MASS_GEV / photon_gev;
        if photon_gev < 2.1 * ELECTRON_MASS_GEV {
            return 0.5;
        }
        let top = {
            let (a, b) = screening(4.0 * self.scale / photon_gev);
            (a.max(b) - self.shift).max(1e-6)
        };
        for _ in 0..1000 {
            let e = least + (0.5 - least) * stream.uniform();
            let product = e * (1.0 - e);
            let (a, b) = screening(self.scale / (photon_gev * product));
            let value =
                (1.0 - 2.0 * product) * (a - self.shift) + 2.0 / 3.0 * product * (b - self.shift);
            if stream.uniform() * top < value {
                return e;
            }
        }
        0.5
    }
}
