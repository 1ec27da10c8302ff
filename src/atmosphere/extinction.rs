//! Extinction of light between its emission and the observer.

use super::Atmosphere;
use super::ozone::cross_section_cm2;
use super::slant::along;

/// What dims the light, each of which can be switched off.
#[derive(Clone, Debug, PartialEq)]
pub struct Extinction {
    /// Whether molecules scatter.
    pub rayleigh: bool,
    /// Whether aerosol attenuates.
    pub aerosol: bool,
    /// Whether ozone absorbs.
    pub ozone: bool,
    /// Vertical aerosol optical depth at 550 nm above the observer.
    pub aerosol_depth_550nm: f64,
    /// Angstrom exponent.
    pub angstrom_exponent: f64,
    /// Scale height of the aerosol above the observer, m.
    pub aerosol_scale_height_m: f64,
}

impl Default for Extinction {
    /// A clear night at a dry mountain site; common practice, no source.
    fn default() -> Self {
        Self {
            rayleigh: true,
            aerosol: true,
            ozone: true,
            aerosol_depth_550nm: 0.04,
            angstrom_exponent: 1.3,
            aerosol_scale_height_m: 1_200.0,
        }
    }
}

/// Optical depths along one path.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct OpticalDepths {
    /// Molecular scattering.
    pub rayleigh: f64,
    /// Aerosol.
    pub aerosol: f64,
    /// Ozone.
    pub ozone: f64,
}

impl Extinction {
    /// Transmission from an emission altitude down a straight ray to an observer who sees it at
    /// `zenith_rad`, by integration along the ray; [`super::TransmissionTable`] is the fast way.
    ///
    /// # Validity
    /// Zenith angles to 80 degrees; 1e-4 against a ray integral in 1 m steps, test
    /// `verify_slant_transmission_against_ray_integral`.
    pub fn transmission(
        &self,
        air: &Atmosphere,
        emission_m: f64,
        observer_m: f64,
        zenith_rad: f64,
        wavelength_nm: f64,
    ) -> f64 {
        let depths = self.optical_depths(air, emission_m, observer_m, zenith_rad, wavelength_nm);
        (-depths.rayleigh - depths.aerosol - depths.ozone).exp()
    }

    /// Optical depths along the ray; zero for what is switched off or if the light starts below the
    /// observer.
    pub fn optical_depths(
        &self,
        air: &Atmosphere,
        emission_m: f64,
        observer_m: f64,
        zenith_rad: f64,
        wavelength_nm: f64,
    ) -> OpticalDepths {
        if emission_m <= observer_m {
            return OpticalDepths::default();
        }
        let column = |part: Part| {
            100.0
                * along(observer_m, emission_m, (observer_m, zenith_rad), &|altitude| {
                    self.density(part, air, observer_m, altitude)
                })
        };
        let depth = |part: Part, on: bool| {
            if on { column(part) * self.cross_section(part, wavelength_nm) } else { 0.0 }
        };
        OpticalDepths {
            rayleigh: depth(Part::Rayleigh, self.rayleigh),
            aerosol: depth(Part::Aerosol, self.aerosol),
            ozone: depth(Part::Ozone, self.ozone),
        }
    }

    /// Density of what dims the light: molecules per cm3; for aerosol the share of its vertical
    /// column per cm.
    pub(super) fn density(
        &self,
        part: Part,
        air: &Atmosphere,
        observer_m: f64,
        altitude_m: f64,
    ) -> f64 {
        match part {
            Part::Rayleigh => air.molecules_cm3(altitude_m),
            Part::Aerosol => {
                let scale = self.aerosol_scale_height_m;
                0.01 / scale * (-(altitude_m - observer_m) / scale).exp()
            }
            Part::Ozone => air.ozone_cm3(altitude_m),
        }
    }

    /// Cross-section of a molecule, cm2; for aerosol the vertical optical depth.
    pub(super) fn cross_section(&self, part: Part, wavelength_nm: f64) -> f64 {
        match part {
            Part::Rayleigh => rayleigh_cross_section_cm2(wavelength_nm),
            Part::Aerosol => {
                self.aerosol_depth_550nm * (wavelength_nm / 550.0).powf(-self.angstrom_exponent)
            }
            Part::Ozone => cross_section_cm2(wavelength_nm),
        }
    }
}

/// What dims the light.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Part {
    Rayleigh,
    Aerosol,
    Ozone,
}

/// Rayleigh scattering cross-section of a molecule of dry air with 360 ppm of carbon dioxide:
/// 1e-28 cm2 (1.0455996 - 341.29061 L^-2 - 0.90230850 L^2) /
/// (1 + 0.0027059889 L^-2 - 85.968563 L^2), L in um.
///
/// Used for every molecule of the profile: water vapour scatters about a quarter less, which makes
/// moist tropical air at the ground 0.6 % too dim.
///
/// # Source
/// Bodhaine et al. 1999, J. Atmos. Oceanic Technol. 16, 1854, equation 29.
pub fn rayleigh_cross_section_cm2(wavelength_nm: f64) -> f64 {
    let l2 = (1e-3 * wavelength_nm).powi(2);
    1e-28 * (1.045_599_6 - 341.290_61 / l2 - 0.902_308_50 * l2)
        / (1.0 + 0.002_705_988_9 / l2 - 85.968_563 * l2)
}
