//! The air between the observer and the top, cut into slabs, and the worth of light from each.

use core::f64::consts::TAU;

use crate::atmosphere::Atmosphere;
use crate::consts::{EARTH_RADIUS_M, FINE_STRUCTURE};
use crate::numerics::quadrature::integrate;

/// The wavelength at which emission angles are taken, nm: the middle of the Cherenkov light that
/// reaches the ground. The yield itself is integrated with the index at each wavelength.
pub const REFERENCE_NM: f64 = 400.0;

/// Slabs between the top of the atmosphere and the observer.
///
/// Boundaries lie at vertical depths X_obs (i / n)^1.5, so that slabs are thin where inclined
/// showers develop.
#[derive(Clone, Debug)]
pub struct Column {
    /// Altitude of the observer, m.
    pub observer_altitude_m: f64,
    /// From the top down.
    pub slabs: Vec<Slab>,
}

/// One slab, seen at its middle depth.
#[derive(Clone, Copy, Debug)]
pub struct Slab {
    /// Altitude of the middle depth, m.
    pub altitude_m: f64,
    /// Altitudes of the upper and lower boundary, m.
    pub span_m: (f64, f64),
    /// Vertical depth of the middle, g/cm2.
    pub depth_g_cm2: f64,
    /// Vertical thickness, g/cm2.
    pub thickness_g_cm2: f64,
    /// Mass density at the middle, kg/m3.
    pub density_kg_m3: f64,
    /// Refractivity at [`REFERENCE_NM`].
    pub refractivity: f64,
    /// Vertical integral of the group refractivity from the middle to the observer, m.
    pub delay_m: f64,
}

impl Column {
    /// Cuts the air above `observer_altitude_m` into `count` slabs.
    pub fn new(atmosphere: &Atmosphere, observer_altitude_m: f64, count: usize) -> Self {
        let total = atmosphere.depth_g_cm2(observer_altitude_m);
        let boundary = |index: usize| total * (index as f64 / count as f64).powf(1.5);
        let altitude = |depth: f64| {
            atmosphere.altitude_m(depth).clamp(observer_altitude_m, atmosphere.top_m())
        };
        let slabs = (0..count).map(|index| {
            let (above, below) = (boundary(index), boundary(index + 1));
            let depth = 0.5 * (above + below);
            let middle = altitude(depth);
            let bottom = altitude(below);
            // The top slab has no upper end: it is given the length below its middle once more.
            let top = if index == 0 { 2.0 * middle - bottom } else { altitude(above) };
            Slab {
                altitude_m: middle,
                span_m: (top, bottom),
                depth_g_cm2: depth,
                thickness_g_cm2: below - above,
                density_kg_m3: atmosphere.density_kg_m3(middle),
                refractivity: atmosphere.refractivity(middle, REFERENCE_NM),
                delay_m: integrate(observer_altitude_m, middle, 16, |altitude| {
                    atmosphere.group_refractivity(altitude, REFERENCE_NM)
                }),
            }
        });
        Self { observer_altitude_m, slabs: slabs.collect() }
    }

    /// Refractivity at a distance from the observer along an axis, at [`REFERENCE_NM`]: logarithmic
    /// between the middles of slabs.
    pub fn refractivity_at(&self, axis: &AxisPath, distance_m: f64) -> f64 {
        let below = axis.steps.partition_point(|step| step.distance_m > distance_m);
        let upper = below.clamp(1, axis.steps.len() - 1);
        let (high, low) = (axis.steps[upper - 1].distance_m, axis.steps[upper].distance_m);
        let share = (distance_m - high) / (low - high);
        let (above, under) = (self.slabs[upper - 1].refractivity, self.slabs[upper].refractivity);
        above * (under / above).powf(share)
    }

    /// The path of a shower axis of one zenith angle through the slabs, on a spherical Earth.
    pub fn axis(&self, zenith_rad: f64) -> AxisPath {
        let radius = EARTH_RADIUS_M + self.observer_altitude_m;
        let (sin, cos) = zenith_rad.sin_cos();
        let distance = |altitude: f64| {
            let rise = altitude - self.observer_altitude_m;
            let far = radius + rise;
            // (far^2 - radius^2 sin^2)^1/2 - radius cos, written without cancellation.
            let root = (far * far - (radius * sin).powi(2)).sqrt();
            rise * (far + radius) / (root + radius * cos)
        };
        let mut depth = 0.0;
        let steps = self.slabs.iter().map(|slab| {
            let far = EARTH_RADIUS_M + slab.altitude_m;
            let secant = 1.0 / (1.0 - (radius * sin / far).powi(2)).sqrt();
            let thickness = slab.thickness_g_cm2 * secant;
            let middle = depth + 0.5 * thickness;
            depth += thickness;
            AxisStep {
                distance_m: distance(slab.altitude_m),
                half_length_m: 0.5 * (distance(slab.span_m.0) - distance(slab.span_m.1)),
                depth_g_cm2: middle,
                thickness_g_cm2: thickness,
                delay_m: slab.delay_m * secant,
            }
        });
        let steps = steps.collect();
        AxisPath { zenith_rad, ground_depth_g_cm2: depth, steps }
    }
}

/// One shower axis through the slabs of a [`Column`].
#[derive(Clone, Debug)]
pub struct AxisPath {
    /// Zenith angle at the observer, rad.
    pub zenith_rad: f64,
    /// Slant depth of the observer, g/cm2.
    pub ground_depth_g_cm2: f64,
    /// A step a slab, from the top down.
    pub steps: Vec<AxisStep>,
}

impl AxisPath {
    /// Distance from the observer of a slant depth, by interpolation between the middles of slabs.
    pub fn distance_at_m(&self, depth_g_cm2: f64) -> f64 {
        let below = self.steps.partition_point(|step| step.depth_g_cm2 < depth_g_cm2);
        let upper = below.clamp(1, self.steps.len() - 1);
        let (high, low) = (&self.steps[upper - 1], &self.steps[upper]);
        let share = (depth_g_cm2.max(1e-3) / high.depth_g_cm2).ln()
            / (low.depth_g_cm2 / high.depth_g_cm2).ln();
        (high.distance_m + share * (low.distance_m - high.distance_m)).max(0.0)
    }

    /// The slab that holds a distance from the observer.
    pub fn slab_at(&self, distance_m: f64) -> usize {
        let inside = |step: &AxisStep| step.distance_m - step.half_length_m > distance_m;
        self.steps.partition_point(inside).min(self.steps.len() - 1)
    }

    /// Slant depth at a distance from the observer: the inverse of [`AxisPath::distance_at_m`].
    pub fn depth_at_g_cm2(&self, distance_m: f64) -> f64 {
        let below = self.steps.partition_point(|step| step.distance_m > distance_m);
        let upper = below.clamp(1, self.steps.len() - 1);
        let (high, low) = (&self.steps[upper - 1], &self.steps[upper]);
        let share = (distance_m - high.distance_m) / (low.distance_m - high.distance_m);
        let depth = high.depth_g_cm2 * (low.depth_g_cm2 / high.depth_g_cm2).powf(share);
        depth.min(self.ground_depth_g_cm2)
    }
}

/// The part of an axis inside one slab.
#[derive(Clone, Copy, Debug)]
pub struct AxisStep {
    /// Distance from the observer to the middle, m.
    pub distance_m: f64,
    /// Half the length inside the slab, m.
    pub half_length_m: f64,
    /// Slant depth of the middle, g/cm2.
    pub depth_g_cm2: f64,
    /// Slant thickness, g/cm2.
    pub thickness_g_cm2: f64,
    /// Extra optical path of light to the observer because of the index, m.
    pub delay_m: f64,
}

/// What receives the light: an efficiency by wavelength.
pub struct Detector<'a> {
    /// Its name.
    pub name: &'a str,
    /// Band outside which it is blind, nm.
    pub band_nm: (f64, f64),
    /// Probability that a photon on the collecting area counts, by wavelength in nm.
    pub efficiency: &'a (dyn Fn(f64) -> f64 + Sync),
}

/// Extinction as the light stage needs it: transmission by emission altitude (m), zenith (rad)
/// and wavelength (nm), to the observer.
pub type Transmission<'a> = dyn Fn(f64, f64, f64) -> f64 + Sync + 'a;

/// Counted quanta per metre of track and per unit sin^2 of the reference emission angle:
/// 2 pi alpha integral of efficiency transmission (n - 1) / (n - 1)_ref d(lambda) / lambda^2.
///
/// Returned for a transparent atmosphere and for the given one, from the middle of each slab.
///
/// # Source
/// Frank & Tamm 1937; for (n - 1) much less than 1 and particles far above threshold
/// sin^2(theta) is proportional to n - 1 (error below 0.1 % in air; at threshold the whole yield
/// vanishes).
pub fn quanta_per_m(
    column: &Column,
    atmosphere: &Atmosphere,
    detector: &Detector<'_>,
    transmission: &Transmission<'_>,
    zenith_rad: f64,
) -> Vec<SlabWorth> {
    let (low, high) = detector.band_nm;
    let panels = (((high - low) / 20.0).ceil() as usize).max(4);
    let worth = |slab: &Slab| {
        let integral = |through: &dyn Fn(f64) -> f64| {
            integrate(low, high, panels, |wavelength| {
                let index = atmosphere.refractivity(slab.altitude_m, wavelength);
                (detector.efficiency)(wavelength) * through(wavelength) * index / slab.refractivity
                    * 1e9
                    / (wavelength * wavelength)
            }) * TAU
                * FINE_STRUCTURE
        };
        SlabWorth {
            transparent: integral(&|_| 1.0),
            attenuated: integral(&|wavelength| {
                transmission(slab.altitude_m, zenith_rad, wavelength)
            }),
        }
    };
    column.slabs.iter().map(worth).collect()
}

/// Counted quanta per metre of track and unit sin^2, for one slab and detector.
#[derive(Clone, Copy, Debug)]
pub struct SlabWorth {
    /// Without extinction.
    pub transparent: f64,
    /// With extinction along the reference zenith angle.
    pub attenuated: f64,
}

impl SlabWorth {
    /// The worth at another zenith angle: the effective optical depth scales with the slant path.
    pub fn at(&self, secant_ratio: f64) -> f64 {
        if self.attenuated <= 0.0 {
            return 0.0;
        }
        self.transparent * (self.attenuated / self.transparent).powf(secant_ratio)
    }
}
