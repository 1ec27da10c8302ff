//! Provisional US Standard Atmosphere 1976; the air stage replaces the inside, not the signatures.

use crate::numerics::UniformTable;

/// An atmosphere as the later stages see it.
#[derive(Clone, Debug)]
pub struct Atmosphere {
    name: String,
    log_density: UniformTable,
    log_depth: UniformTable,
    temperature: UniformTable,
}

const TOP_M: f64 = 100_000.0;

impl Atmosphere {
    /// The US Standard Atmosphere 1976.
    pub fn us1976() -> Self {
        let count = 2001;
        let temperature = UniformTable::new(0.0, TOP_M, count, |h| state(h).0);
        let log_density = UniformTable::new(0.0, TOP_M, count, |h| {
            let (t, p) = state(h);
            (p * 28.9644e-3 / (8.31432 * t)).ln()
        });
        let step = TOP_M / (count - 1) as f64;
        let mut depth = vec![1e-4 * 0.1; count];
        for i in (0..count - 1).rev() {
            let h = i as f64 * step;
            let mean = (log_density.value(h).exp() + log_density.value(h + step).exp()) / 2.0;
            depth[i] = depth[i + 1] + mean * step * 0.1;
        }
        let log_depth =
            UniformTable::new(0.0, TOP_M, count, |h| depth[(h / step).round() as usize].ln());
        Self { name: "us1976".into(), log_density, log_depth, temperature }
    }

    /// The name it was asked for by.
    pub fn name(&self) -> &str {
        &self.name
    }

    /// Altitude above which there is no air in this model, m.
    pub fn top_m(&self) -> f64 {
        TOP_M
    }

    /// Temperature, K.
    pub fn temperature_k(&self, altitude_m: f64) -> f64 {
        self.temperature.value(altitude_m)
    }

    /// Mass density, kg/m3.
    #[inline]
    pub fn density_kg_m3(&self, altitude_m: f64) -> f64 {
        self.log_density.value(altitude_m).exp()
    }

    /// Vertical depth from the top of the atmosphere, g/cm2.
    #[inline]
    pub fn depth_g_cm2(&self, altitude_m: f64) -> f64 {
        self.log_depth.value(altitude_m).exp()
    }

    /// Altitude of a vertical depth, m.
    pub fn altitude_m(&self, depth_g_cm2: f64) -> f64 {
        let (mut low, mut high) = (0.0, TOP_M);
        for _ in 0..50 {
            let middle = 0.5 * (low + high);
            if self.depth_g_cm2(middle) > depth_g_cm2 { low = middle } else { high = middle }
        }
        0.5 * (low + high)
    }

    /// Phase refractivity n - 1.
    #[inline]
    pub fn refractivity(&self, altitude_m: f64, wavelength_nm: f64) -> f64 {
        let s = (1e3 / wavelength_nm).powi(2);
        let standard = 1e-8 * (5_792_105.0 / (238.0185 - s) + 167_917.0 / (57.362 - s));
        standard * self.density_kg_m3(altitude_m) / 1.225
    }

    /// Group refractivity n_g - 1.
    #[inline]
    pub fn group_refractivity(&self, altitude_m: f64, wavelength_nm: f64) -> f64 {
        1.04 * self.refractivity(altitude_m, wavelength_nm)
    }

    /// Transmission from an emission altitude to an observer along a straight ray at `zenith_rad`.
    pub fn transmission(
        &self,
        emission_m: f64,
        observer_m: f64,
        zenith_rad: f64,
        wavelength_nm: f64,
    ) -> f64 {
        let tau0 = 0.00864 * (wavelength_nm / 1e3).powf(-4.05);
        let slab = (self.depth_g_cm2(observer_m) - self.depth_g_cm2(emission_m)) / 1033.2;
        (-(tau0 * slab.max(0.0)) / zenith_rad.cos()).exp()
    }
}

/// Temperature (K) and pressure (Pa) at a geometric altitude below 86 km.
fn state(altitude_m: f64) -> (f64, f64) {
    const LAYERS: [(f64, f64); 7] = [
        (0.0, -6.5e-3),
        (11_000.0, 0.0),
        (20_000.0, 1e-3),
        (32_000.0, 2.8e-3),
        (47_000.0, 0.0),
        (51_000.0, -2.8e-3),
        (71_000.0, -2e-3),
    ];
    let height = 6_356_766.0 * altitude_m / (6_356_766.0 + altitude_m);
    let (mut temperature, mut pressure) = (288.15_f64, 101_325.0_f64);
    for (index, (base, lapse)) in LAYERS.iter().enumerate() {
        let top = LAYERS.get(index + 1).map_or(f64::INFINITY, |next| next.0).min(height);
        let thickness = top - base;
        let g_over_r = 9.80665 * 28.9644e-3 / 8.31432;
        if *lapse == 0.0 {
            pressure *= (-g_over_r * thickness / temperature).exp();
        } else {
            let next = temperature + lapse * thickness;
            pressure *= (temperature / next).powf(g_over_r / lapse);
            temperature = next;
        }
        if top >= height {
            break;
        }
    }
    (temperature, pressure)
}
