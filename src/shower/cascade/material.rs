//! Dry air: composition, radiation length, ionisation loss.

use crate::consts::{
    AVOGADRO_PER_MOL, CLASSICAL_ELECTRON_RADIUS_M, ELECTRON_MASS_GEV, FINE_STRUCTURE,
};

/// One element of the air.
#[derive(Clone, Copy, Debug)]
pub struct Element {
    /// Atomic number.
    pub charge: f64,
    /// Molar mass, g/mol.
    pub molar_mass: f64,
    /// Share of the mass.
    pub mass_share: f64,
}

/// Dry air near sea level.
///
/// # Source
/// NIST, composition of "air, dry (near sea level)" (from memory).
pub const AIR: [Element; 4] = [
    Element { charge: 6.0, molar_mass: 12.011, mass_share: 0.000_124 },
    Element { charge: 7.0, molar_mass: 14.007, mass_share: 0.755_268 },
    Element { charge: 8.0, molar_mass: 15.999, mass_share: 0.231_781 },
    Element { charge: 18.0, molar_mass: 39.948, mass_share: 0.012_827 },
];

/// Mean excitation energy of dry air, GeV.
///
/// # Source
/// ICRU report 37 (1984): 85.7 eV (from memory).
pub const EXCITATION_GEV: f64 = 85.7e-9;

/// Air density the density-effect parameters belong to, kg/m3 (20 C, 1 atm).
pub const NORMAL_DENSITY_KG_M3: f64 = 1.20479;

/// Square of the classical electron radius times Avogadro's number, cm2/mol.
pub fn radius2_per_mol_cm2() -> f64 {
    CLASSICAL_ELECTRON_RADIUS_M * CLASSICAL_ELECTRON_RADIUS_M * 1e4 * AVOGADRO_PER_MOL
}

/// Mean of Z/A, mol/g.
pub fn electrons_mol_g() -> f64 {
    AIR.iter().map(|element| element.mass_share * element.charge / element.molar_mass).sum()
}

/// Coulomb correction f(Z) = a^2 [1/(1+a^2) + 0.20206 - 0.0369 a^2 + 0.0083 a^4 - 0.002 a^6],
/// a = Z / 137.
///
/// # Source
/// Davies, Bethe & Maximon 1954, Phys. Rev. 93, 788; the fit as in the Review of Particle Physics.
pub fn coulomb_correction(charge: f64) -> f64 {
    let a2 = (FINE_STRUCTURE * charge).powi(2);
    a2 * (1.0 / (1.0 + a2) + 0.20206 - 0.0369 * a2 + 0.0083 * a2 * a2 - 0.002 * a2.powi(3))
}

/// ln(184.15 Z^(-1/3)): screening of the nucleus.
///
/// # Source
/// Tsai 1974, Rev. Mod. Phys. 46, 815.
pub fn radiation_logarithm(charge: f64) -> f64 {
    (184.15 / charge.cbrt()).ln()
}

/// Weight of the atomic electrons against one proton of the nucleus at complete screening:
/// ln(1194 Z^(-2/3)) / (ln(184.15 Z^(-1/3)) - f).
///
/// # Source
/// Tsai 1974, Rev. Mod. Phys. 46, 815.
pub fn electron_weight(charge: f64) -> f64 {
    let electrons = (1194.0 / charge.powf(2.0 / 3.0)).ln();
    electrons / (radiation_logarithm(charge) - coulomb_correction(charge))
}

/// Radiation length of air from its elements, g/cm2: 1/X0 = 4 alpha r_e^2 N_A sum of
/// w/A Z (Z + electron weight) (L - f).
///
/// # Source
/// Tsai 1974, Rev. Mod. Phys. 46, 815. Test `validate_radiation_length_tsai1974`.
pub fn radiation_length_g_cm2() -> f64 {
    let sum: f64 = AIR
        .iter()
        .map(|element| {
            let z = element.charge;
            element.mass_share / element.molar_mass
                * z
                * (z + electron_weight(z))
                * (radiation_logarithm(z) - coulomb_correction(z))
        })
        .sum();
    1.0 / (4.0 * FINE_STRUCTURE * radius2_per_mol_cm2() * sum)
}

/// Restricted ionisation loss without the density effect, GeV per g/cm2, for transfers below
/// `transfer_gev`.
///
/// Units: `kinetic_gev` is the kinetic energy.
///
/// # Source
/// Berger & Seltzer 1964, NASA SP-3012; Rohrlich & Carlson 1954, Phys. Rev. 93, 38 (from memory).
pub fn bare_ionisation_gev_cm2_g(kinetic_gev: f64, transfer_gev: f64, positron: bool) -> f64 {
    let tau = kinetic_gev / ELECTRON_MASS_GEV;
    let gamma = tau + 1.0;
    let beta2 = 1.0 - 1.0 / (gamma * gamma);
    let largest = if positron { tau } else { 0.5 * tau };
    let d = (transfer_gev / ELECTRON_MASS_GEV).min(largest);
    let f = if positron {
        let y = 1.0 / (tau + 2.0);
        let cubic = d * d / 2.0 - tau * d.powi(3) / 3.0 + d.powi(4) / 4.0;
        let bracket =
            tau + 2.0 * d - 1.5 * d * d * y - (d - d.powi(3) / 3.0) * y * y - cubic * y.powi(3);
        (tau * d).ln() - beta2 / tau * bracket
    } else {
        let quadratic = d * d / 2.0 + (2.0 * tau + 1.0) * (1.0 - d / tau).ln();
        -1.0 - beta2 + ((tau - d) * d).ln() + tau / (tau - d) + quadratic / (gamma * gamma)
    };
    let excitation = EXCITATION_GEV / ELECTRON_MASS_GEV;
    let logarithm = (2.0 * (tau + 2.0) / (excitation * excitation)).ln();
    loss_constant_gev_cm2_g() / beta2 * (logarithm + f)
}

/// 2 pi r_e^2 m c^2 N_A Z/A, GeV per g/cm2.
pub fn loss_constant_gev_cm2_g() -> f64 {
    core::f64::consts::TAU * radius2_per_mol_cm2() * ELECTRON_MASS_GEV * electrons_mol_g()
}

/// Density-effect correction delta at the normal density; `log_momentum` is log10(beta gamma).
///
/// At another density rho it is delta(x + 0.5 log10(rho / rho_normal)).
///
/// # Source
/// Sternheimer, Berger & Seltzer 1984, At. Data Nucl. Data Tables 30, 261, dry air (from memory):
/// C = 10.5961, x0 = 1.7418, x1 = 4.2759, a = 0.10914, m = 3.3994.
pub fn density_effect(log_momentum: f64) -> f64 {
    const C: f64 = 10.5961;
    const X0: f64 = 1.7418;
    const X1: f64 = 4.2759;
    let asymptote = 2.0 * core::f64::consts::LN_10 * log_momentum - C;
    if log_momentum < X0 {
        0.0
    } else if log_momentum < X1 {
        asymptote + 0.10914 * (X1 - log_momentum).powf(3.3994)
    } else {
        asymptote
    }
}
