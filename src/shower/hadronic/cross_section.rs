//! Inelastic cross-sections of hadrons on air.

use super::particle::Kind;

/// Proton-air production cross-section, mb, at 10, 100, ... GeV; straight lines in the logarithm of
/// the energy between, the last slope beyond, constant below.
///
/// # Source
/// Working table +-5 %: accelerator p-C and air-shower results (EAS-TOP, Aglietta et al. 2009, Phys.
/// Rev. D 79, 032004; 7 to 9 % per decade, Nesterova 2015, arXiv:1506.04291), read back to 10 GeV
/// from memory.
const PROTON_AIR_MB: [f64; 5] = [250.0, 268.0, 285.0, 307.0, 332.0];

/// Pion-air and kaon-air over proton-air, fixed target, from memory, +-5 %.
const PION_RATIO: f64 = 0.78;
const KAON_RATIO: f64 = 0.70;

/// Mean mass of an air nucleus over Avogadro's number, g/cm2 mb: 14.5 u.
const G_CM2_MB: f64 = 2.41e4;

/// Mean free path of a hadron against inelastic interaction, g/cm2; infinite for other kinds.
pub fn interaction_length_g_cm2(kind: Kind, energy_gev: f64) -> f64 {
    let ratio = match kind {
        Kind::Proton | Kind::Neutron => 1.0,
        Kind::PionPlus | Kind::PionMinus => PION_RATIO,
        kaon if kaon.is_kaon() => KAON_RATIO,
        _ => return f64::INFINITY,
    };
    G_CM2_MB / (ratio * proton_air_mb(energy_gev))
}

/// Proton-air production cross-section, mb.
pub fn proton_air_mb(energy_gev: f64) -> f64 {
    let decade = energy_gev.max(10.0).log10() - 1.0;
    let low = (decade as usize).min(PROTON_AIR_MB.len() - 2);
    let (first, second) = (PROTON_AIR_MB[low], PROTON_AIR_MB[low + 1]);
    first + (decade - low as f64) * (second - first)
}
