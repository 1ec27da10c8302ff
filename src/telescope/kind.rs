//! A kind of telescope: everything that is the same at each pad it stands on.

use thiserror::Error;

use super::camera::Camera;
use super::curve::Curve;
use super::sky::NightSky;
use super::trigger::Topology;

/// A number of a telescope kind that is out of range.
#[derive(Clone, Debug, Error, PartialEq)]
#[error("{field} is {value}; allowed: {allowed}")]
pub struct KindError {
    /// Name of the number.
    pub field: &'static str,
    /// Its value.
    pub value: f64,
    /// What is allowed.
    pub allowed: &'static str,
}

/// How the pixel threshold is set.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Threshold {
    /// A fixed height in photoelectrons.
    FixedPe(f64),
    /// The lowest at which accidental triggers of one telescope stay below a rate, Hz.
    QuietHz(f64),
    /// The lowest quiet one of the array it stands in: it depends on the other telescopes, on how
    /// many must fire, and on the sky.
    Quiet,
}

/// A kind of telescope.
#[derive(Clone, Debug)]
pub struct TelescopeKind {
    /// Its name.
    pub name: String,
    /// Area of the reflector as seen from the sky, before obscuration, m2.
    pub mirror_area_m2: f64,
    /// Fraction lost to gaps between facets and to the shadow of the camera and its masts.
    pub obscuration: f64,
    /// Reflectivity by wavelength.
    pub reflectivity: Curve,
    /// Width of the point spread on axis, gaussian sigma per axis, deg.
    pub point_spread_deg: f64,
    /// Growth of that width per degree off axis, added in quadrature, deg/deg.
    pub point_spread_growth: f64,
    /// Full width of the arrival times that the mirror adds, flat, ns: zero for a paraboloid,
    /// R^2 / (2 f c) for facets on a sphere of radius f, aperture radius R and focal length f (light
    /// at r comes early by r^2 / (2 f c), and area grows as r^2; Davies & Cotton 1957, Sol. Energy 1, 16).
    pub mirror_delay_ns: f64,
    /// The camera.
    pub camera: Camera,
    /// Fraction of light on the camera that light guides bring to the sensors.
    pub light_guide_efficiency: f64,
    /// Detection efficiency of the sensor by wavelength.
    pub sensor: Curve,
    /// Collection efficiency from photocathode to pulse.
    pub collection_efficiency: f64,
    /// Relative spread (RMS) of the pulse height of one photoelectron.
    pub pulse_spread: f64,
    /// Full width at half maximum of the shaped pulse, ns.
    pub pulse_width_ns: f64,
    /// Pixels of a group must peak within this time of a neighbour, ns.
    pub coincidence_gate_ns: f64,
    /// RMS of the electronic noise of a pixel after shaping, photoelectrons.
    pub electronic_noise_pe: f64,
    /// Probability that a discharge sets off at least one more at the same time (optical crosstalk
    /// of silicon sensors).
    pub crosstalk: f64,
    /// Probability that a photoelectron is followed by an afterpulse, long after it: afterpulses of
    /// sky photoelectrons are noise, those of a shower come too late for its trigger.
    pub afterpulsing: f64,
    /// Mean height of an afterpulse, photoelectrons; heights fall exponentially.
    pub afterpulse_pe: f64,
    /// Pattern of pixels that makes a trigger.
    pub topology: Topology,
    /// Pixel threshold.
    pub threshold: Threshold,
    /// Cost of one telescope, any currency unit.
    pub cost: f64,
}

impl TelescopeKind {
    /// Checks every number against its range.
    ///
    /// # Errors
    /// The first [`KindError`].
    pub fn validated(self) -> Result<Self, KindError> {
        let positive = |field, value: f64, most: f64, allowed| {
            if value > 0.0 && value <= most {
                Ok(())
            } else {
                Err(KindError { field, value, allowed })
            }
        };
        let share = |field, value: f64| {
            if (0.0..=1.0).contains(&value) {
                Ok(())
            } else {
                Err(KindError { field, value, allowed: "0 to 1" })
            }
        };
        positive("mirror_area_m2", self.mirror_area_m2, 5_000.0, "above 0, at most 5000")?;
        share("obscuration", self.obscuration)?;
        share("light_guide_efficiency", self.light_guide_efficiency)?;
        share("collection_efficiency", self.collection_efficiency)?;
        if !(0.0..=2.0).contains(&self.point_spread_deg) {
            let (field, value) = ("point_spread_deg", self.point_spread_deg);
            return Err(KindError { field, value, allowed: "0 to 2" });
        }
        if !(0.0..=100.0).contains(&self.mirror_delay_ns) {
            let (field, value) = ("mirror_delay_ns", self.mirror_delay_ns);
            return Err(KindError { field, value, allowed: "0 to 100" });
        }
        if !(0.0..=2.0).contains(&self.pulse_spread) {
            let (field, value) = ("pulse_spread", self.pulse_spread);
            return Err(KindError { field, value, allowed: "0 to 2" });
        }
        positive("pulse_width_ns", self.pulse_width_ns, 200.0, "above 0, at most 200")?;
        positive("coincidence_gate_ns", self.coincidence_gate_ns, 1e3, "above 0, at most 1000")?;
        self.topology.check(self.camera.pixels.len())?;
        let most = |field, value: f64, most: f64, allowed| {
            let fits = (0.0..=most).contains(&value);
            if fits { Ok(()) } else { Err(KindError { field, value, allowed }) }
        };
        most("electronic_noise_pe", self.electronic_noise_pe, 100.0, "0 to 100")?;
        most("crosstalk", self.crosstalk, 0.4, "0 to 0.4")?;
        most("afterpulsing", self.afterpulsing, 0.5, "0 to 0.5")?;
        positive("afterpulse_pe", self.afterpulse_pe, 20.0, "above 0, at most 20")?;
        let (field, value) = match self.threshold {
            Threshold::FixedPe(pe) => ("threshold_pe", pe),
            Threshold::QuietHz(rate) => ("quiet_rate_hz", rate),
            Threshold::Quiet => ("threshold", 1.0),
        };
        positive(field, value, 1e6, "above 0, at most 1e6")?;
        if !(self.cost >= 0.0 && self.cost.is_finite()) {
            return Err(KindError { field: "cost", value: self.cost, allowed: "0 or more" });
        }
        Ok(self)
    }

    /// Mean number lambda of further discharges that one sets off directly: crosstalk is the
    /// probability of at least one, 1 - exp(-lambda).
    ///
    /// Each of them may set off more, so that the total of one photoelectron follows Borel's law, of
    /// mean 1 / (1 - lambda) and variance lambda / (1 - lambda)^3; that of a Poisson number of
    /// photoelectrons is the generalised Poisson law.
    ///
    /// # Source
    /// Vinogradov 2012, Nucl. Instrum. Methods A 695, 247 (from memory).
    pub fn further_discharges(&self) -> f64 {
        -(1.0 - self.crosstalk).ln()
    }

    /// Net collecting area, m2.
    pub fn collecting_area_m2(&self) -> f64 {
        self.mirror_area_m2 * (1.0 - self.obscuration)
    }

    /// Probability that a photon on the collecting area becomes a photoelectron.
    pub fn efficiency(&self, wavelength_nm: f64) -> f64 {
        self.reflectivity.value(wavelength_nm)
            * self.light_guide_efficiency
            * self.sensor.value(wavelength_nm)
            * self.collection_efficiency
    }

    /// Wavelengths between which it sees anything, nm.
    pub fn band_nm(&self) -> (f64, f64) {
        let (mirror, sensor) = (self.reflectivity.span_nm(), self.sensor.span_nm());
        (mirror.0.max(sensor.0).max(250.0), mirror.1.min(sensor.1).min(900.0))
    }

    /// Photoelectrons per nanosecond and pixel from a night sky:
    /// area x pixel solid angle x integral of radiance x efficiency.
    pub fn sky_photoelectrons_per_ns(&self, sky: &NightSky) -> f64 {
        let rate = sky.radiance_m2_s_sr(self.sensor.span_nm(), |nm| self.efficiency(nm));
        1e-9 * rate * self.collecting_area_m2() * self.camera.pixel_solid_angle_sr()
    }

    /// Standard deviation of the shaped pulse, taken as a gaussian of unit peak, ns.
    pub fn pulse_sigma_ns(&self) -> f64 {
        self.pulse_width_ns / (8.0 * core::f64::consts::LN_2).sqrt()
    }
}
