//! Inclined straight rays on a spherical Earth: range, altitude, depth.
//!
//! A ray is named by the zenith angle at which the observer sees it; beyond the observer it meets the
//! vertical at an angle that shrinks with altitude.
//!
//! # Why rays are straight here
//!
//! Air bends light. A ray traced by Snell's law on a sphere, n r sin z = constant, from where the
//! light is emitted to a telescope at 2,200 m (US Standard Atmosphere, 400 nm), against the straight
//! line between the same two points:
//!
//! | zenith deg | emitted at km | arrives higher by deg | earlier by ns | lands aside by m |
//! |--:|--:|--:|--:|--:|
//! | 0 | any | 0 | 0 | 0 |
//! | 30 | 5 / 10 / 15 | 0.0010 / 0.0024 / 0.0035 | < 0.0001 | 0.05 / 0.3 / 0.6 |
//! | 60 | 5 / 10 / 15 | 0.0030 / 0.0073 / 0.0106 | < 0.0005 | 0.3 / 1.6 / 3.3 |
//! | 80 | 5 / 10 / 15 | 0.0097 / 0.0235 / 0.0340 | 0.0003 / 0.004 / 0.012 | 2.5 / 15 / 30 |
//!
//! (test `verify_straight_rays_against_traced_rays`, which prints and bounds them). A pixel measures
//! 0.1 deg or more, a pulse 2 ns and a pool a hundred metres across at least: to 60 degrees bending is
//! a tenth of a pixel and nearly common to the whole shower, so that it shifts image and pool by less
//! than any other approximation here; at 80 degrees it is a third of a small pixel.

use crate::consts::EARTH_RADIUS_M;
use crate::numerics::quadrature::integrate;

use super::Atmosphere;

/// Distance of rows in finely tabulated profiles, m.
const ROWS_M: f64 = 500.0;
/// Longest panel of the correction of slant depth, m.
const PANEL_M: f64 = 2_000.0;

/// Distance from an observer to the point of a ray at an altitude, m; negative below the observer.
///
/// (r^2 - r0^2 sin^2)^1/2 - r0 cos with r0 and r the distances from the Earth's centre, written
/// without cancellation.
#[inline]
pub fn range_m(altitude_m: f64, observer_m: f64, zenith_rad: f64) -> f64 {
    let (sin, cos) = zenith_rad.sin_cos();
    let near = EARTH_RADIUS_M + observer_m;
    let far = EARTH_RADIUS_M + altitude_m;
    let root = (far * far - (near * sin).powi(2)).sqrt();
    (altitude_m - observer_m) * (far + near) / (root + near * cos)
}

/// Altitude of the point of a ray at a distance from the observer, m.
#[inline]
pub fn altitude_at_range_m(range_m: f64, observer_m: f64, zenith_rad: f64) -> f64 {
    let near = EARTH_RADIUS_M + observer_m;
    let square = range_m * (range_m + 2.0 * near * zenith_rad.cos());
    observer_m + square / ((near * near + square).sqrt() + near)
}

/// Length of a ray in a thin layer at an altitude over the layer's thickness.
#[inline]
pub fn secant(altitude_m: f64, observer_m: f64, zenith_rad: f64) -> f64 {
    let sine = (EARTH_RADIUS_M + observer_m) * zenith_rad.sin() / (EARTH_RADIUS_M + altitude_m);
    1.0 / (1.0 - sine * sine).sqrt()
}

/// Integral along a ray, per metre, of a function of altitude between two altitudes: panels end at
/// multiples of 500 m, where tables have their rows.
pub(super) fn along(
    low_m: f64,
    high_m: f64,
    (observer_m, zenith_rad): (f64, f64),
    weight: &dyn Fn(f64) -> f64,
) -> f64 {
    let mut sum = 0.0;
    let mut from = low_m;
    while from < high_m {
        let to = (((from / ROWS_M + 1e-9).floor() + 1.0) * ROWS_M).min(high_m);
        sum += integrate(from, to, 1, |altitude| {
            weight(altitude) * secant(altitude, observer_m, zenith_rad)
        });
        from = to;
    }
    sum
}

impl Atmosphere {
    /// Depth of the air along a ray above its point at an altitude, g/cm2.
    ///
    /// The integral of density times secant by parts, with X the vertical depth, r the distance from
    /// the Earth's centre and u the sine of the ray's local angle:
    /// X sec - integral of X u^2 sec^3 / r dr.
    ///
    /// # Validity
    /// Zenith angles to 80 degrees, 1e-5 of the integral of the density; tests
    /// `verify_slant_depth_against_the_integral`, `verify_slant_depth_against_chapman`.
    pub fn slant_depth_g_cm2(&self, altitude_m: f64, observer_m: f64, zenith_rad: f64) -> f64 {
        let top = self.top_m();
        let panels = ((top - altitude_m) / PANEL_M).ceil().max(1.0) as usize;
        let sine = (EARTH_RADIUS_M + observer_m) * zenith_rad.sin();
        let shortened = integrate(altitude_m, top, panels, |altitude| {
            let r = EARTH_RADIUS_M + altitude;
            let u2 = (sine / r).powi(2);
            self.depth_g_cm2(altitude) * u2 / ((1.0 - u2).powf(1.5) * r)
        });
        self.depth_g_cm2(altitude_m) * secant(altitude_m, observer_m, zenith_rad) - shortened
    }

    /// Distance from an observer, m, up a ray to where the depth along it is `depth_g_cm2`: the
    /// inverse of [`Atmosphere::slant_depth_g_cm2`], to 1 mm; 0 if the observer is less deep.
    pub fn slant_range_m(&self, depth_g_cm2: f64, observer_m: f64, zenith_rad: f64) -> f64 {
        let slant = |altitude: f64| self.slant_depth_g_cm2(altitude, observer_m, zenith_rad);
        if depth_g_cm2 >= slant(observer_m) {
            return 0.0;
        }
        let (mut low, mut high) = (observer_m, self.top_m());
        let guess = self.altitude_m(depth_g_cm2 * zenith_rad.cos());
        let mut altitude = guess.clamp(low, high);
        while high - low > 1e-4 {
            let found = slant(altitude);
            if found > depth_g_cm2 {
                low = altitude
            } else {
                high = altitude
            }
            let per_m =
                0.1 * self.density_kg_m3(altitude) * secant(altitude, observer_m, zenith_rad);
            // Newton in the logarithm of depth, which is nearly a straight line.
            let step = (found / depth_g_cm2).ln() * found / per_m;
            if step.abs() < 1e-4 {
                break;
            }
            let next = altitude + step;
            altitude = if next > low && next < high { next } else { 0.5 * (low + high) };
        }
        range_m(altitude, observer_m, zenith_rad)
    }
}
