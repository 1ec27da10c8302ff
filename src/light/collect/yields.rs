//! Counted quanta per metre of track by altitude.

use core::f64::consts::TAU;

use crate::atmosphere::Atmosphere;
use crate::consts::FINE_STRUCTURE;
use crate::light::column::{Detector, REFERENCE_NM, Transmission};
use crate::numerics::quadrature::integrate;

const STEP_M: f64 = 50.0;

/// Refractivity, delay and worth of light by altitude above the observer, for several detectors.
///
/// Quanta per metre of track and unit sin^2 of the emission angle at 400 nm:
/// 2 pi alpha integral of efficiency transmission (n - 1) / (n - 1)_400 d(lambda) / lambda^2.
///
/// # Validity
/// The emission angle is that of 400 nm for all wavelengths (1.5 % at 300 nm). Transmission is
/// along the zenith angle given, not that of each ray.
///
/// # Source
/// Frank & Tamm 1937, Dokl. Akad. Nauk SSSR 14, 107.
#[derive(Clone, Debug)]
pub struct Yields {
    observer_altitude_m: f64,
    detectors: usize,
    air: Vec<[f64; 2]>,
    worth_per_m: Vec<f64>,
}

impl Yields {
    /// Tables from the observer to the top of the atmosphere.
    pub fn new(
        atmosphere: &Atmosphere,
        transmission: &Transmission<'_>,
        observer_altitude_m: f64,
        zenith_rad: f64,
        detectors: &[Detector<'_>],
    ) -> Self {
        let count = ((atmosphere.top_m() - observer_altitude_m) / STEP_M) as usize;
        let altitude = |index: usize| observer_altitude_m + STEP_M * index as f64;
        let mut delay_m = 0.0;
        let mut air = Vec::with_capacity(count);
        for index in 0..count {
            if index > 0 {
                delay_m += integrate(altitude(index - 1), altitude(index), 1, |height| {
                    atmosphere.group_refractivity(height, REFERENCE_NM)
                });
            }
            air.push([atmosphere.refractivity(altitude(index), REFERENCE_NM), delay_m]);
        }
        let mut worth_per_m = Vec::with_capacity(count * detectors.len());
        for (index, row) in air.iter().enumerate() {
            for detector in detectors {
                let (low, high) = detector.band_nm;
                let panels = (((high - low) / 100.0).ceil() as usize).max(2);
                let height = altitude(index);
                worth_per_m.push(
                    TAU * FINE_STRUCTURE
                        * 1e9
                        * integrate(low, high, panels, |wavelength| {
                            let index = atmosphere.refractivity(height, wavelength) / row[0];
                            (detector.efficiency)(wavelength)
                                * transmission(height, zenith_rad, wavelength)
                                * index
                                / (wavelength * wavelength)
                        }),
                );
            }
        }
        Self { observer_altitude_m, detectors: detectors.len(), air, worth_per_m }
    }

    /// Number of detectors.
    pub fn detectors(&self) -> usize {
        self.detectors
    }

    #[inline]
    fn place(&self, altitude_m: f64) -> (usize, f64) {
        let place = ((altitude_m - self.observer_altitude_m) * (1.0 / STEP_M)).max(0.0);
        let low = (place as usize).min(self.air.len() - 2);
        (low, place - low as f64)
    }

    /// Refractivity at 400 nm, and the vertical integral of the group refractivity down to the
    /// observer, m.
    #[inline]
    pub fn air(&self, altitude_m: f64) -> [f64; 2] {
        let (low, share) = self.place(altitude_m);
        let (a, b) = (&self.air[low], &self.air[low + 1]);
        [a[0] + share * (b[0] - a[0]), a[1] + share * (b[1] - a[1])]
    }

    /// Counted quanta per metre and unit sin^2, by detector: the nearest altitude of the table.
    #[inline]
    pub fn worth_per_m(&self, altitude_m: f64) -> &[f64] {
        let (low, share) = self.place(altitude_m);
        let nearest = low + usize::from(share > 0.5);
        &self.worth_per_m[nearest * self.detectors..(nearest + 1) * self.detectors]
    }
}
