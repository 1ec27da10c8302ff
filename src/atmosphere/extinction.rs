//! Extinction of light between its emission and the observer.

use crate::consts::{AVOGADRO_PER_MOL, EARTH_RADIUS_M};
use crate::numerics::interpolation::linear_or_zero;
use crate::numerics::quadrature::integrate;

use super::Atmosphere;

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

/// Molar mass of dry air, g/mol.
const MOLAR_MASS_G: f64 = 28.964_4;

impl Extinction {
    /// Transmission from an emission altitude down a straight ray to an observer who sees it at
    /// `zenith_rad`.
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
        let along = |weight: &dyn Fn(f64) -> f64| ray(emission_m, observer_m, zenith_rad, weight);
        let mut depths = OpticalDepths::default();
        if self.rayleigh {
            let column = along(&|altitude| 0.1 * air.density_kg_m3(altitude));
            depths.rayleigh = rayleigh_cross_section_cm2(wavelength_nm) * column * AVOGADRO_PER_MOL
                / MOLAR_MASS_G;
        }
        if self.aerosol {
            let ground = self.aerosol_depth_550nm / self.aerosol_scale_height_m;
            let column = along(&|altitude| {
                ground * (-(altitude - observer_m) / self.aerosol_scale_height_m).exp()
            });
            depths.aerosol = column * (wavelength_nm / 550.0).powf(-self.angstrom_exponent);
        }
        if self.ozone {
            let section = linear_or_zero(OZONE.0.as_slice(), wavelength_nm);
            let column = along(&|altitude| 100.0 * linear_or_zero(OZONE.1.as_slice(), altitude));
            depths.ozone = section * column;
        }
        depths
    }
}

/// Integral of a function of altitude along a straight ray, m, on a spherical Earth.
fn ray(emission_m: f64, observer_m: f64, zenith_rad: f64, weight: &dyn Fn(f64) -> f64) -> f64 {
    let radius = EARTH_RADIUS_M + observer_m;
    let sine = radius * zenith_rad.sin();
    let panels = ((emission_m - observer_m) / 4_000.0).ceil().max(1.0) as usize;
    integrate(observer_m, emission_m, panels, |altitude| {
        let far = EARTH_RADIUS_M + altitude;
        weight(altitude) / (1.0 - (sine / far).powi(2)).sqrt()
    })
}

/// Rayleigh scattering cross-section of a molecule of dry air with 360 ppm of carbon dioxide:
/// 1e-28 cm2 (1.0455996 - 341.29061 L^-2 - 0.90230850 L^2) /
/// (1 + 0.0027059889 L^-2 - 85.968563 L^2), L in um.
///
/// # Source
/// Bodhaine et al. 1999, J. Atmos. Oceanic Technol. 16, 1854, equation 29.
pub fn rayleigh_cross_section_cm2(wavelength_nm: f64) -> f64 {
    let l2 = (1e-3 * wavelength_nm).powi(2);
    1e-28 * (1.045_599_6 - 341.290_61 / l2 - 0.902_308_50 * l2)
        / (1.0 + 0.002_705_988_9 / l2 - 85.968_563 * l2)
}

type Points = Vec<(f64, f64)>;

/// Ozone: cross-section (nm, cm2) and number density (m, cm^-3) of the US standard model.
static OZONE: std::sync::LazyLock<(Points, Points)> = std::sync::LazyLock::new(|| {
    let rows = |text: &str, scale: f64| -> Points {
        text.lines()
            .filter_map(|row| {
                let (x, y) = row.split_once(',')?;
                Some((scale * x.parse::<f64>().ok()?, y.parse().ok()?))
            })
            .collect()
    };
    (
        rows(include_str!("data/ozone_cross_section.csv"), 1.0),
        rows(include_str!("data/ozone_us_standard.csv"), 1e3),
    )
});
