//! Physical constants, each written once, with uncertainty and source.
//!
//! CODATA = CODATA 2018 recommended values (Tiesinga et al. 2021, Rev. Mod. Phys. 93, 025010).
//! PDG = Review of Particle Physics (Workman et al. 2022, PTEP 2022, 083C01).
//! Digits typed from memory of those sources.

/// Speed of light in vacuum, m/s. Exact (SI).
pub const SPEED_OF_LIGHT_M_S: f64 = 299_792_458.0;
/// Speed of light in vacuum, m/ns. Exact (SI).
pub const SPEED_OF_LIGHT_M_NS: f64 = 0.299_792_458;
/// Fine-structure constant. CODATA, relative uncertainty 1.5e-10.
pub const FINE_STRUCTURE: f64 = 7.297_352_569_3e-3;
/// Boltzmann constant, J/K. Exact (SI).
pub const BOLTZMANN_J_K: f64 = 1.380_649e-23;
/// Avogadro constant, 1/mol. Exact (SI).
pub const AVOGADRO_PER_MOL: f64 = 6.022_140_76e23;
/// Molar gas constant, J/(mol K). Exact (SI).
pub const GAS_CONSTANT_J_MOL_K: f64 = 8.314_462_618;
/// Planck constant times speed of light, eV nm. Exact (SI), rounded.
pub const HC_EV_NM: f64 = 1_239.841_984;
/// Classical electron radius, m. CODATA, relative uncertainty 4.5e-10.
pub const CLASSICAL_ELECTRON_RADIUS_M: f64 = 2.817_940_326_2e-15;

/// Electron mass, GeV. CODATA, relative uncertainty 3e-10.
pub const ELECTRON_MASS_GEV: f64 = 0.510_998_950e-3;
/// Muon mass, GeV. PDG, relative uncertainty 2.2e-8.
pub const MUON_MASS_GEV: f64 = 0.105_658_375_5;
/// Charged pion mass, GeV. PDG, +-0.18 keV.
pub const CHARGED_PION_MASS_GEV: f64 = 0.139_570_39;
/// Neutral pion mass, GeV. PDG, +-0.5 keV.
pub const NEUTRAL_PION_MASS_GEV: f64 = 0.134_976_8;
/// Charged kaon mass, GeV. PDG, +-16 keV.
pub const CHARGED_KAON_MASS_GEV: f64 = 0.493_677;
/// Proton mass, GeV. CODATA, relative uncertainty 3e-10.
pub const PROTON_MASS_GEV: f64 = 0.938_272_088;
/// Neutron mass, GeV. CODATA.
pub const NEUTRON_MASS_GEV: f64 = 0.939_565_420;

/// Muon c tau, m. PDG.
pub const MUON_CTAU_M: f64 = 658.638;
/// Charged pion c tau, m. PDG.
pub const CHARGED_PION_CTAU_M: f64 = 7.804_5;
/// Charged kaon c tau, m. PDG.
pub const CHARGED_KAON_CTAU_M: f64 = 3.711;

/// Radiation length of dry air, g/cm2. PDG, Atomic and Nuclear Properties.
pub const AIR_RADIATION_LENGTH_G_CM2: f64 = 36.62;
/// Critical energy of electrons in dry air, GeV (PDG definition, gas).
pub const AIR_CRITICAL_ENERGY_GEV: f64 = 0.087_92;

/// Mean Earth radius, m (IUGG mean radius R1).
pub const EARTH_RADIUS_M: f64 = 6_371_008.8;
