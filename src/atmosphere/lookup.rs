//! Transmission from a table: a look-up instead of an integral.

use crate::consts::EARTH_RADIUS_M;

use super::extinction::Part;
use super::{Atmosphere, Extinction};

/// Step in the square root of the height above the observer, m^1/2: 11 m at 1 km, 34 m at 10 km.
const STEP: f64 = 0.17;
/// Step in wavelength, nm.
const STEP_NM: f64 = 0.25;
/// Wavelengths of the table, nm; beyond, the values at the ends.
pub const BAND_NM: (f64, f64) = (250.0, 900.0);

const PARTS: [Part; 3] = [Part::Rayleigh, Part::Aerosol, Part::Ozone];
const MOMENTS: usize = 4;

/// Transmission to one observer from any altitude, zenith angle and wavelength.
///
/// With q = 1 - (r0 / r)^2, a layer at distance r from the Earth's centre is crossed over
/// (cos^2 z + q sin^2 z)^-1/2 of its thickness. For each absorber the table holds the moments of q
/// over the column between observer and altitude, M_k = integral of density q^k; at a wavelength they
/// add with the cross-sections as weights, and with the mean m of q, its central moments c2 and c3,
/// s = (cos^2 z + m sin^2 z)^-1/2 and u = s^2 sin^2 z,
///
/// tau = M_0 s [1 + 3/8 c2 u^2 - 5/16 c3 u^3].
///
/// # Validity
/// Zenith angles to 80 degrees, emission between the observer and the top of the atmosphere, 250 to
/// 900 nm: within 1e-4 of [`Extinction::transmission`] for aerosol scale heights above 300 m; test
/// `verify_transmission_table_against_the_integral` prints the largest difference.
///
/// # Source
/// Derived here; the moments' expansion is that of the mean of a function about the mean.
#[derive(Clone, Debug)]
pub struct TransmissionTable {
    observer_m: f64,
    columns: Vec<[[f64; MOMENTS]; 3]>,
    sections: Vec<[f64; 3]>,
}

impl TransmissionTable {
    /// Tabulates the air above an observer: 3 ms.
    pub fn new(extinction: &Extinction, air: &Atmosphere, observer_m: f64) -> Self {
        let on = [extinction.rayleigh, extinction.aerosol, extinction.ozone];
        let near = EARTH_RADIUS_M + observer_m;
        let weights = |altitude: f64| {
            let q = 1.0 - (near / (EARTH_RADIUS_M + altitude)).powi(2);
            let powers = [1.0, q, q * q, q * q * q];
            PARTS.map(|part| {
                let density = extinction.density(part, air, observer_m, altitude);
                powers.map(|power| 100.0 * density * power)
            })
        };
        let height = |cell: usize| (STEP * cell as f64).powi(2);
        let cells = ((air.top_m() - observer_m).max(1.0).sqrt() / STEP).ceil() as usize;
        let mut columns = vec![[[0.0; MOMENTS]; 3]; cells + 1];
        let mut below = weights(observer_m);
        for cell in 0..cells {
            let (from, to) = (height(cell), height(cell + 1));
            let middle = weights(observer_m + 0.5 * (from + to));
            let above = weights(observer_m + to);
            for part in 0..3 {
                for k in 0..MOMENTS {
                    let sum = below[part][k] + 4.0 * middle[part][k] + above[part][k];
                    columns[cell + 1][part][k] = columns[cell][part][k] + (to - from) / 6.0 * sum;
                }
            }
            below = above;
        }
        let count = ((BAND_NM.1 - BAND_NM.0) / STEP_NM) as usize + 1;
        let section =
            |index: usize| {
                let nm = BAND_NM.0 + STEP_NM * index as f64;
                [0, 1, 2].map(|part| {
                    if on[part] { extinction.cross_section(PARTS[part], nm) } else { 0.0 }
                })
            };
        Self { observer_m, columns, sections: (0..count).map(section).collect() }
    }

    /// Transmission of light emitted at an altitude and seen at a zenith angle; 1 from below the
    /// observer.
    #[inline]
    pub fn transmission(&self, emission_m: f64, zenith_rad: f64, wavelength_nm: f64) -> f64 {
        (-self.optical_depth(emission_m, zenith_rad, wavelength_nm)).exp()
    }

    /// Optical depth of the same path.
    #[inline]
    pub fn optical_depth(&self, emission_m: f64, zenith_rad: f64, wavelength_nm: f64) -> f64 {
        let (section, at) =
            place((wavelength_nm - BAND_NM.0) * (1.0 / STEP_NM), self.sections.len());
        let (s, s1) = (&self.sections[section], &self.sections[section + 1]);
        let root = (emission_m - self.observer_m).max(0.0).sqrt();
        let (cell, share) = place(root * (1.0 / STEP), self.columns.len());
        let (low, high) = (&self.columns[cell], &self.columns[cell + 1]);
        let mut moments = [0.0; MOMENTS];
        for part in 0..3 {
            let section = s[part] + at * (s1[part] - s[part]);
            for (k, moment) in moments.iter_mut().enumerate() {
                let (a, b) = (low[part][k], high[part][k]);
                *moment += section * (a + share * (b - a));
            }
        }
        if moments[0] <= 0.0 {
            return 0.0;
        }
        let inverse = 1.0 / moments[0];
        let (m1, m2, m3) = (moments[1] * inverse, moments[2] * inverse, moments[3] * inverse);
        let c2 = m2 - m1 * m1;
        let c3 = m3 - m1 * (3.0 * m2 - 2.0 * m1 * m1);
        let cosine2 = zenith_rad.cos().powi(2);
        let sine2 = 1.0 - cosine2;
        let secant = 1.0 / (cosine2 + m1 * sine2).sqrt();
        let u = sine2 * secant * secant;
        moments[0] * secant * (1.0 + u * u * (0.375 * c2 - 0.3125 * c3 * u))
    }
}

/// Cell of a place on a grid and the share of the way through it, held at the ends.
#[inline]
fn place(position: f64, count: usize) -> (usize, f64) {
    let position = position.max(0.0);
    let cell = (position as i32 as usize).min(count - 2);
    (cell, (position - cell as f64).min(1.0))
}
