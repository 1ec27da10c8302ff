//! Inelastic cross-sections of hadrons on air.

/// Proton-air production cross-section, mb: (ln of energy in GeV, mb), straight lines between.
///
/// # Source
/// Working table +-5 %: accelerator p-C and air-shower results (EAS-TOP, Aglietta et al. 2009, Phys.
/// Rev. D 79, 032004; 7 to 9 % per decade, Nesterova 2015, arXiv:1506.04291), read back to 10 GeV
/// from memory.
const PROTON_AIR_MB: [(f64, f64); 5] =
    [(10.0, 250.0), (100.0, 268.0), (1e3, 285.0), (1e4, 307.0), (1e5, 332.0)];

/// Pion-air over proton-air, fixed target, from memory, +-5 %.
const PION_RATIO: f64 = 0.78;

/// Mean mass of an air nucleus over Avogadro's number, g/cm2 mb: 14.5 u.
const G_CM2_MB: f64 = 2.41e4;

/// Mean free path of a nucleon, g/cm2; constant below 10 GeV, the last slope beyond 100 TeV.
pub fn nucleon_length_g_cm2(energy_gev: f64) -> f64 {
    G_CM2_MB / proton_air_mb(energy_gev)
}

/// Mean free path of a charged pion, g/cm2.
pub fn pion_length_g_cm2(energy_gev: f64) -> f64 {
    G_CM2_MB / (PION_RATIO * proton_air_mb(energy_gev))
}

fn proton_air_mb(energy_gev: f64) -> f64 {
    let decade = energy_gev.max(10.0).log10() - 1.0;
    let low = (decade as usize).min(PROTON_AIR_MB.len() - 2);
    let (first, second) = (PROTON_AIR_MB[low].1, PROTON_AIR_MB[low + 1].1);
    first + (decade - low as f64) * (second - first)
}
