//! What arrives at the top of the atmosphere.

use core::fmt;
use core::str::FromStr;

use nalgebra::Vector3;

use crate::consts::{ELECTRON_MASS_GEV, MUON_MASS_GEV, NEUTRON_MASS_GEV, PROTON_MASS_GEV};

/// A kind of primary particle.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Species {
    /// A gamma ray.
    Gamma,
    /// An electron.
    Electron,
    /// A positron.
    Positron,
    /// A negative muon.
    MuonMinus,
    /// A positive muon.
    MuonPlus,
    /// A proton.
    Proton,
    /// A neutron.
    Neutron,
    /// A nucleus of `mass_number` nucleons, of which `charge` are protons.
    Nucleus {
        /// Number of nucleons.
        mass_number: u8,
        /// Number of protons.
        charge: u8,
    },
}

impl Species {
    /// Helium-4.
    pub const HELIUM: Self = Self::Nucleus { mass_number: 4, charge: 2 };

    /// Rest mass, GeV; nuclei as the sum of their nucleons (binding below 1 % is left out).
    pub fn mass_gev(self) -> f64 {
        match self {
            Self::Gamma => 0.0,
            Self::Electron | Self::Positron => ELECTRON_MASS_GEV,
            Self::MuonMinus | Self::MuonPlus => MUON_MASS_GEV,
            Self::Proton => PROTON_MASS_GEV,
            Self::Neutron => NEUTRON_MASS_GEV,
            Self::Nucleus { mass_number, charge } => {
                f64::from(charge) * PROTON_MASS_GEV
                    + f64::from(mass_number - charge) * NEUTRON_MASS_GEV
            }
        }
    }

    /// Number of nucleons; zero for gammas and leptons.
    pub fn mass_number(self) -> u8 {
        match self {
            Self::Proton | Self::Neutron => 1,
            Self::Nucleus { mass_number, .. } => mass_number,
            _ => 0,
        }
    }

    /// Whether its shower is purely electromagnetic.
    pub fn is_electromagnetic(self) -> bool {
        matches!(self, Self::Gamma | Self::Electron | Self::Positron)
    }
}

const NAMES: [(&str, Species); 11] = [
    ("gamma", Species::Gamma),
    ("electron", Species::Electron),
    ("positron", Species::Positron),
    ("muon", Species::MuonMinus),
    ("antimuon", Species::MuonPlus),
    ("proton", Species::Proton),
    ("neutron", Species::Neutron),
    ("helium", Species::HELIUM),
    ("nitrogen", Species::Nucleus { mass_number: 14, charge: 7 }),
    ("silicon", Species::Nucleus { mass_number: 28, charge: 14 }),
    ("iron", Species::Nucleus { mass_number: 56, charge: 26 }),
];

impl FromStr for Species {
    type Err = String;

    fn from_str(text: &str) -> Result<Self, String> {
        let found = NAMES.iter().find(|(name, _)| *name == text);
        found.map(|(_, species)| *species).ok_or_else(|| {
            let names: Vec<_> = NAMES.iter().map(|(name, _)| *name).collect();
            format!("unknown primary `{text}`; write one of {}", names.join(", "))
        })
    }
}

impl fmt::Display for Species {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        match NAMES.iter().find(|(_, species)| species == self) {
            Some((name, _)) => formatter.write_str(name),
            None => write!(formatter, "nucleus of {} nucleons", self.mass_number()),
        }
    }
}

/// A direction a particle comes *from*: zenith angle, and azimuth from north through east.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Direction {
    /// Zenith angle, rad.
    pub zenith_rad: f64,
    /// Azimuth from north through east, rad.
    pub azimuth_rad: f64,
}

impl Direction {
    /// Straight overhead.
    pub const ZENITH: Self = Self { zenith_rad: 0.0, azimuth_rad: 0.0 };

    /// Unit vector towards the source, in the ground frame (x east, y north, z up).
    pub fn to_source(self) -> Vector3<f64> {
        let (sin_zenith, cos_zenith) = self.zenith_rad.sin_cos();
        let (sin_azimuth, cos_azimuth) = self.azimuth_rad.sin_cos();
        Vector3::new(sin_zenith * sin_azimuth, sin_zenith * cos_azimuth, cos_zenith)
    }

    /// The direction of a unit vector towards a source.
    pub fn of(to_source: &Vector3<f64>) -> Self {
        let horizontal = to_source.x.hypot(to_source.y);
        Self {
            zenith_rad: horizontal.atan2(to_source.z),
            azimuth_rad: to_source.x.atan2(to_source.y).rem_euclid(core::f64::consts::TAU),
        }
    }

    /// Two unit vectors that complete [`Direction::to_source`] to a right-handed frame
    /// (`across`, `along`, to source). `across` is horizontal (west for a source in the north),
    /// `along` points upward. Camera offsets x and y are measured along them, as seen on the sky
    /// looking towards the source.
    pub fn transverse(self) -> (Vector3<f64>, Vector3<f64>) {
        let (sin_zenith, cos_zenith) = self.zenith_rad.sin_cos();
        let (sin_azimuth, cos_azimuth) = self.azimuth_rad.sin_cos();
        let along = Vector3::new(-cos_zenith * sin_azimuth, -cos_zenith * cos_azimuth, sin_zenith);
        let across = along.cross(&self.to_source());
        (across, along)
    }
}

/// One primary particle.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Primary {
    /// Its kind.
    pub species: Species,
    /// Total energy, GeV.
    pub energy_gev: f64,
    /// Where it comes from.
    pub direction: Direction,
}
