//! How the number of charged particles of an electromagnetic shower grows and dies with depth.

use crate::consts::{AIR_CRITICAL_ENERGY_GEV, AIR_RADIATION_LENGTH_G_CM2};
use crate::numerics::Stream;

use super::library::Shape;

/// Number of charged particles of the mean photon shower after `depth_x0` radiation lengths:
/// N = 0.31 / sqrt(b) exp[t (1 - 1.5 ln s)], b = ln(E / E_c), s = 3 t / (t + 2 b).
///
/// # Validity
/// The mean shower, first interaction included; 10 GeV to 1 PeV.
///
/// # Source
/// Greisen 1956, Prog. Cosmic Ray Phys. 3, 1. Test `validate_shower_size_greisen1956`.
pub fn greisen(energy_gev: f64, critical_energy_gev: f64, depth_x0: f64) -> f64 {
    if depth_x0 <= 0.0 {
        return 0.0;
    }
    let b = (energy_gev / critical_energy_gev).ln();
    let age = 3.0 * depth_x0 / (depth_x0 + 2.0 * b);
    0.31 / b.sqrt() * (depth_x0 * (1.0 - 1.5 * age.ln())).exp()
}

/// A Gaisser-Hillas profile whose integral over depth is the charged track length:
/// N(X) proportional to u^(m) exp(-u), u = (X - start) / length, m = (max - start) / length;
/// or, where it was drawn from the library of showers, that shower's own profile.
///
/// # Source
/// Gaisser & Hillas 1977, Proc. 15th ICRC 8, 353; the same curve as the gamma distribution of
/// Longo & Sestili 1975, Nucl. Instrum. Methods 128, 283.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct GaisserHillas {
    /// Depth of the first interaction, g/cm2 along the axis.
    pub start_g_cm2: f64,
    /// Depth of the maximum, g/cm2 along the axis.
    pub max_g_cm2: f64,
    /// Scale length, g/cm2.
    pub length_g_cm2: f64,
    /// Integral of N over depth: total charged track length, g/cm2.
    pub track_g_cm2: f64,
    /// Energy of the primary, GeV: which emitters it has.
    pub energy_gev: f64,
    /// A number between 0 and 1 that decides between the emitters of the two energies around.
    pub lot: f64,
    log_norm: f64,
    shape: Option<Shape>,
}

impl GaisserHillas {
    /// A profile from its start, maximum, scale length and total track length.
    pub fn new(start_g_cm2: f64, max_g_cm2: f64, length_g_cm2: f64, track_g_cm2: f64) -> Self {
        let power = (max_g_cm2 - start_g_cm2) / length_g_cm2;
        let log_norm = (track_g_cm2 / length_g_cm2).ln() - libm::lgamma(power + 1.0);
        let energy_gev = track_g_cm2 * AIR_CRITICAL_ENERGY_GEV / AIR_RADIATION_LENGTH_G_CM2;
        let (lot, shape) = (0.5, None);
        Self { start_g_cm2, max_g_cm2, length_g_cm2, track_g_cm2, energy_gev, lot, log_norm, shape }
    }

    /// A profile drawn from the library; `length_g_cm2` is that of the curve fitted to it.
    pub fn of_shape(
        start_g_cm2: f64,
        length_g_cm2: f64,
        shape: Shape,
        energy_gev: f64,
        lot: f64,
    ) -> Self {
        let max_g_cm2 = start_g_cm2 + shape.max_g_cm2();
        let track_g_cm2 = shape.track_g_cm2();
        let log_norm = 0.0;
        let shape = Some(shape);
        Self { start_g_cm2, max_g_cm2, length_g_cm2, track_g_cm2, energy_gev, lot, log_norm, shape }
    }

    /// Whether it is a shower of the library: then its numbers are of particles above the floor of
    /// the emitters, and need no correction.
    pub fn is_shape(&self) -> bool {
        self.shape.is_some()
    }

    /// The same profile with all numbers times a weight.
    pub fn weighted(self, weight: f64) -> Self {
        Self {
            track_g_cm2: self.track_g_cm2 * weight,
            log_norm: self.log_norm + weight.ln(),
            shape: self.shape.map(|shape| shape.weighted(weight)),
            ..self
        }
    }

    /// Number of charged particles at a depth along the axis.
    #[inline]
    pub fn size(&self, depth_g_cm2: f64) -> f64 {
        if let Some(shape) = &self.shape {
            return shape.size(depth_g_cm2 - self.start_g_cm2);
        }
        let scaled = (depth_g_cm2 - self.start_g_cm2) / self.length_g_cm2;
        if scaled <= 0.0 {
            return 0.0;
        }
        let power = (self.max_g_cm2 - self.start_g_cm2) / self.length_g_cm2;
        (self.log_norm + power * scaled.ln() - scaled).exp()
    }

    /// Age at a depth: s = 3 t / (t + 2 t_max) with t from the first interaction.
    #[inline]
    pub fn age(&self, depth_g_cm2: f64) -> f64 {
        let t = (depth_g_cm2 - self.start_g_cm2).max(0.0);
        3.0 * t / (t + 2.0 * (self.max_g_cm2 - self.start_g_cm2))
    }
}

/// Draws showers: the depth of the maximum and the shape fluctuate together.
///
/// With y = E / E_c, counted from the first interaction and in radiation lengths:
/// mean ln T = ln(ln y - 0.858), sigma = 1 / (1.26 ln y - 1.4);
/// mean ln alpha = ln(0.21 + (0.492 + 2.38 / Z) ln y), sigma = 1 / (0.86 ln y - 0.58);
/// correlation 0.705 - 0.023 ln y; profile t^(alpha - 1) exp(-(alpha - 1) t / T).
/// The total track length is E / (2.40 MeV per g/cm2), the critical energy over the radiation
/// length, so each shower keeps its energy.
///
/// # Validity
/// Published for homogeneous calorimeters, 400 MeV to 300 GeV; used outside as it extrapolates.
/// Below y = 20 (1.8 GeV) the logarithms are held at y = 20.
///
/// # Source
/// Grindhammer & Peters 2000, arXiv:hep-ex/0001020, section 2 (coefficients from memory).
#[derive(Clone, Copy, Debug)]
pub struct Development;

/// Effective atomic number of air: the mean of Z of nitrogen and oxygen by number.
const AIR_CHARGE: f64 = 7.26;

impl Development {
    /// Draws the development of a cascade of `energy_gev` that begins at `start_g_cm2`.
    pub fn draw(energy_gev: f64, start_g_cm2: f64, stream: &mut Stream) -> GaisserHillas {
        let log_y = (energy_gev / AIR_CRITICAL_ENERGY_GEV).max(20.0).ln();
        let log_max = (log_y - 0.858).ln();
        let log_alpha = (0.21 + (0.492 + 2.38 / AIR_CHARGE) * log_y).ln();
        let spread_max = 1.0 / (1.26 * log_y - 1.4);
        let spread_alpha = 1.0 / (0.86 * log_y - 0.58);
        let correlation = (0.705 - 0.023 * log_y).max(0.0);
        let (first, second) = (stream.normal(), stream.normal());
        let (sum, difference) =
            ((0.5 * (1.0 + correlation)).sqrt(), (0.5 * (1.0 - correlation)).sqrt());
        let max_x0 = (log_max + spread_max * (sum * first + difference * second)).exp();
        let alpha =
            (log_alpha + spread_alpha * (sum * first - difference * second)).exp().max(1.05);
        let max_g_cm2 = max_x0 * AIR_RADIATION_LENGTH_G_CM2;
        GaisserHillas::new(
            start_g_cm2,
            start_g_cm2 + max_g_cm2,
            max_g_cm2 / (alpha - 1.0),
            track_length_g_cm2(energy_gev),
        )
    }

    /// Draws the depth at which a photon makes its first pair: mean 9/7 of a radiation length.
    ///
    /// # Source
    /// Complete-screening limit of the pair cross-section, Tsai 1974, Rev. Mod. Phys. 46, 815;
    /// 2 % long at 10 GeV, exact above 100 GeV.
    pub fn photon_start_g_cm2(stream: &mut Stream) -> f64 {
        9.0 / 7.0 * AIR_RADIATION_LENGTH_G_CM2 * stream.exponential()
    }
}

/// Total charged track length of a shower, g/cm2: E X0 / E_c.
///
/// # Source
/// Rossi 1952, High-Energy Particles, approximation B: all energy ends as ionisation.
pub fn track_length_g_cm2(energy_gev: f64) -> f64 {
    energy_gev / AIR_CRITICAL_ENERGY_GEV * AIR_RADIATION_LENGTH_G_CM2
}
