//! Light of the night sky.

use crate::numerics::quadrature::integrate;

use super::curve::Curve;

/// How bright the sky is.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Brightness {
    /// Zenith V brightness, mag/arcsec2.
    VMagArcsec2(f64),
    /// Photons m^-2 s^-1 sr^-1 between 300 and 650 nm.
    PhotonsM2SSr(f64),
}

/// A night sky: the dark-sky spectrum scaled to a brightness, times a factor.
#[derive(Clone, Debug)]
pub struct NightSky {
    spectrum: Curve,
    scale: f64,
}

/// V brightness of the built-in spectrum, mag/arcsec2.
///
/// # Source
/// Benn & Ellison 1998, La Palma Technical Note 115.
const DARK_V_MAG: f64 = 21.9;

impl NightSky {
    /// A sky of a zenith brightness, times `factor` (galactic plane, moonlight).
    pub fn new(brightness: Brightness, factor: f64) -> Self {
        let spectrum = Curve::named("dark-sky").expect("the built-in sky is well-formed");
        let scale = match brightness {
            Brightness::VMagArcsec2(mag) => 10.0_f64.powf(0.4 * (DARK_V_MAG - mag)),
            Brightness::PhotonsM2SSr(photons) => {
                photons / integrate(300.0, 650.0, 35, |wavelength| spectrum.value(wavelength))
            }
        };
        Self { spectrum, scale: scale * factor }
    }

    /// The same sky with all its light times a factor: moonlight of the dark sky's colour.
    pub fn times(&self, factor: f64) -> Self {
        Self { spectrum: self.spectrum.clone(), scale: self.scale * factor }
    }

    /// Photons m^-2 s^-1 sr^-1 between two wavelengths, each counted with an efficiency.
    pub fn radiance_m2_s_sr(&self, band_nm: (f64, f64), efficiency: impl Fn(f64) -> f64) -> f64 {
        let panels = ((band_nm.1 - band_nm.0) / 10.0).ceil().max(4.0) as usize;
        self.scale
            * integrate(band_nm.0, band_nm.1, panels, |wavelength| {
                self.spectrum.value(wavelength) * efficiency(wavelength)
            })
    }
}
