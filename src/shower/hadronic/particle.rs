//! Particles of the hadronic core.

use crate::consts::{
    CHARGED_KAON_CTAU_M, CHARGED_KAON_MASS_GEV, CHARGED_PION_CTAU_M, CHARGED_PION_MASS_GEV,
    ELECTRON_MASS_GEV, MUON_CTAU_M, MUON_MASS_GEV, NEUTRAL_PION_MASS_GEV, NEUTRON_MASS_GEV,
    PROTON_MASS_GEV,
};

/// Eta mass, GeV. PDG (from memory).
const ETA_MASS_GEV: f64 = 0.547_862;
/// Neutral kaon mass, GeV. PDG (from memory).
const NEUTRAL_KAON_MASS_GEV: f64 = 0.497_611;
/// Long-lived neutral kaon c tau, m. PDG (from memory).
const LONG_KAON_CTAU_M: f64 = 15.34;
/// Short-lived neutral kaon c tau, m. PDG (from memory).
const SHORT_KAON_CTAU_M: f64 = 0.026_84;

/// A kind of particle.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[expect(missing_docs, reason = "the names are the particles")]
pub enum Kind {
    Photon,
    Electron,
    Positron,
    Neutrino,
    MuonMinus,
    MuonPlus,
    PionPlus,
    PionMinus,
    PionZero,
    KaonPlus,
    KaonMinus,
    KaonLong,
    KaonShort,
    Eta,
    Proton,
    Neutron,
}

impl Kind {
    /// Rest mass, GeV.
    pub fn mass_gev(self) -> f64 {
        match self {
            Self::Photon | Self::Neutrino => 0.0,
            Self::Electron | Self::Positron => ELECTRON_MASS_GEV,
            Self::MuonMinus | Self::MuonPlus => MUON_MASS_GEV,
            Self::PionPlus | Self::PionMinus => CHARGED_PION_MASS_GEV,
            Self::PionZero => NEUTRAL_PION_MASS_GEV,
            Self::KaonPlus | Self::KaonMinus => CHARGED_KAON_MASS_GEV,
            Self::KaonLong | Self::KaonShort => NEUTRAL_KAON_MASS_GEV,
            Self::Eta => ETA_MASS_GEV,
            Self::Proton => PROTON_MASS_GEV,
            Self::Neutron => NEUTRON_MASS_GEV,
        }
    }

    /// Charge in units of the positron's.
    pub fn charge(self) -> i32 {
        match self {
            Self::Positron | Self::MuonPlus | Self::PionPlus | Self::KaonPlus | Self::Proton => 1,
            Self::Electron | Self::MuonMinus | Self::PionMinus | Self::KaonMinus => -1,
            _ => 0,
        }
    }

    /// Mean life times the speed of light, m; zero decays at once, infinite never (neutrons,
    /// whose decay length is beyond any atmosphere, included).
    pub fn ctau_m(self) -> f64 {
        match self {
            Self::MuonMinus | Self::MuonPlus => MUON_CTAU_M,
            Self::PionPlus | Self::PionMinus => CHARGED_PION_CTAU_M,
            Self::KaonPlus | Self::KaonMinus => CHARGED_KAON_CTAU_M,
            Self::KaonLong => LONG_KAON_CTAU_M,
            Self::KaonShort => SHORT_KAON_CTAU_M,
            Self::PionZero | Self::Eta => 0.0,
            _ => f64::INFINITY,
        }
    }

    /// The charge conjugate.
    pub fn conjugate(self) -> Self {
        match self {
            Self::Electron => Self::Positron,
            Self::Positron => Self::Electron,
            Self::MuonMinus => Self::MuonPlus,
            Self::MuonPlus => Self::MuonMinus,
            Self::PionPlus => Self::PionMinus,
            Self::PionMinus => Self::PionPlus,
            Self::KaonPlus => Self::KaonMinus,
            Self::KaonMinus => Self::KaonPlus,
            same => same,
        }
    }

    /// Whether it is a proton or neutron.
    pub fn is_nucleon(self) -> bool {
        matches!(self, Self::Proton | Self::Neutron)
    }

    /// Whether it is a kaon.
    pub fn is_kaon(self) -> bool {
        matches!(self, Self::KaonPlus | Self::KaonMinus | Self::KaonLong | Self::KaonShort)
    }

    /// Whether it is a muon.
    pub fn is_muon(self) -> bool {
        matches!(self, Self::MuonMinus | Self::MuonPlus)
    }
}

/// A particle out of an interaction or a decay, relative to its parent's direction.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Secondary {
    /// What it is.
    pub kind: Kind,
    /// Total energy, GeV.
    pub energy_gev: f64,
    /// Momentum across the parent's direction, GeV/c.
    pub transverse_gev: [f64; 2],
    /// Momentum along it, GeV/c; may be negative.
    pub along_gev: f64,
}
