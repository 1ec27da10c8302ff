//! Density and depth by altitude, in tables fast enough for every step.

use nalgebra::Vector3;

use crate::atmosphere::Atmosphere;
use crate::consts::EARTH_RADIUS_M;

use super::material::NORMAL_DENSITY_KG_M3;

const STEP_M: f64 = 25.0;

/// Density and vertical depth on a 25 m grid: linear in density (error 2e-6), and the altitude of
/// a depth by the grid of depths.
#[derive(Clone, Debug)]
pub struct AirTable {
    observer_altitude_m: f64,
    curvature_per_m: f64,
    base_m: f64,
    density: Vec<(f64, f64)>,
    depth_g_cm2: Vec<f64>,
}

impl AirTable {
    /// Tables from 500 m below the observer (or sea level) to the top of the atmosphere.
    pub fn new(atmosphere: &Atmosphere, observer_altitude_m: f64) -> Self {
        let base_m = (observer_altitude_m - 500.0).max(0.0);
        let count = ((atmosphere.top_m() - base_m) / STEP_M) as usize;
        let altitude = |index: usize| base_m + STEP_M * index as f64;
        // kg/m3 to g/cm2 per metre: 1 kg/m2 is 0.1 g/cm2.
        let density = |index| {
            let density = atmosphere.density_kg_m3(altitude(index));
            (0.1 * density, 0.5 * (density / NORMAL_DENSITY_KG_M3).log10())
        };
        let depth = |index| atmosphere.depth_g_cm2(altitude(index));
        Self {
            observer_altitude_m,
            curvature_per_m: 0.5 / (EARTH_RADIUS_M + observer_altitude_m),
            base_m,
            density: (0..count).map(density).collect(),
            depth_g_cm2: (0..count).map(depth).collect(),
        }
    }

    /// Altitude above sea level of a point of the ground frame, m.
    #[inline]
    pub fn altitude_m(&self, position: &Vector3<f64>) -> f64 {
        let (x, y) = (position.x, position.y);
        self.observer_altitude_m + position.z + (x * x + y * y) * self.curvature_per_m
    }

    /// Altitude of the plane z = 0, m.
    #[inline]
    pub fn observer_altitude_m(&self) -> f64 {
        self.observer_altitude_m
    }

    /// Altitude of the last entry, m.
    #[inline]
    pub fn top_m(&self) -> f64 {
        self.base_m + STEP_M * (self.density.len() - 2) as f64
    }

    /// Mass per area and metre, g/cm2 per m (a tenth of the density in kg/m3), and half the
    /// common logarithm of the density over the normal one.
    #[inline]
    pub fn density(&self, altitude_m: f64) -> (f64, f64) {
        let (low, share) = self.place(altitude_m);
        let (a, b) = (self.density[low], self.density[low + 1]);
        (a.0 + share * (b.0 - a.0), a.1 + share * (b.1 - a.1))
    }

    /// Vertical depth, g/cm2.
    #[inline]
    pub fn depth_g_cm2(&self, altitude_m: f64) -> f64 {
        let (low, share) = self.place(altitude_m);
        self.depth_g_cm2[low] + share * (self.depth_g_cm2[low + 1] - self.depth_g_cm2[low])
    }

    #[inline]
    fn place(&self, altitude_m: f64) -> (usize, f64) {
        let place = ((altitude_m - self.base_m) * (1.0 / STEP_M)).max(0.0);
        let low = (place as usize).min(self.density.len() - 2);
        (low, (place - low as f64).min(1.0))
    }

    /// Altitude of a vertical depth, m, looked for downward from `from_m`.
    #[inline]
    pub fn altitude_of_depth_m(&self, depth_g_cm2: f64) -> f64 {
        // Depths fall with the index.
        let above = self.depth_g_cm2.partition_point(|depth| *depth > depth_g_cm2);
        if above == 0 {
            // Below the table: continue with the lowest density.
            let excess = depth_g_cm2 - self.depth_g_cm2[0];
            return self.base_m - excess / self.density[0].0;
        }
        let high = above.min(self.depth_g_cm2.len() - 1);
        let (lower, upper) = (self.depth_g_cm2[high - 1], self.depth_g_cm2[high]);
        let share = (lower - depth_g_cm2) / (lower - upper);
        self.base_m + STEP_M * ((high - 1) as f64 + share)
    }

    /// Cosine between a direction and the local downward vertical.
    #[inline]
    pub fn descent(&self, position: &Vector3<f64>, direction: &Vector3<f64>) -> f64 {
        let tilt = 2.0 * self.curvature_per_m;
        -(direction.z + tilt * (position.x * direction.x + position.y * direction.y))
    }
}
