//! Draws the quanta of a track step.

use nalgebra::Vector3;

use crate::numerics::Stream;
use crate::shower::cascade::TrackStep;
use crate::shower::cascade::air::AirTable;

use super::yields::Yields;

/// Longest piece of track emitted at one refractive index for its yield, m.
const PIECE_M: f64 = 100.0;

/// One quantum in flight.
#[derive(Clone, Copy, Debug)]
pub struct Ray {
    /// Where it was emitted, m.
    pub position: Vector3<f64>,
    /// Unit vector of its flight.
    pub direction: Vector3<f64>,
    /// When, ns.
    pub time_ns: f64,
    /// Height of emission above the observer's level, m.
    pub height_m: f64,
    /// Vertical integral of the group refractivity from there to the observer's level, m.
    pub delay_m: f64,
    /// The detector it counts for.
    pub detector: usize,
}

/// Which flight directions of the emitting particle are worth a quantum.
#[derive(Clone, Copy, Debug)]
pub struct Window {
    /// Unit vector towards the middle of the window, against the flight.
    pub source: Vector3<f64>,
    /// Square of the largest chord between the flight and the opposite of `source`.
    pub limit2: f64,
}

impl Window {
    /// All directions.
    pub fn open() -> Self {
        Self { source: Vector3::z(), limit2: 5.0 }
    }
}

/// Draws the quanta that a step emits, a share of them if `share` is below one; those of particles
/// that fly outside the window are drawn in number but not made.
///
/// The number is a Poisson deviate of the mean of every piece; places are uniform along the piece,
/// flight directions follow the track's wandering inside the step, and the quantum leaves on the
/// cone cos(theta) = 1 / (n beta) at a uniform azimuth.
#[inline]
pub fn emit(
    step: &TrackStep,
    air: &AirTable,
    yields: &Yields,
    share: f64,
    window: &Window,
    stream: &mut Stream,
    mut take: impl FnMut(&Ray),
) {
    let pieces = (step.length_m / PIECE_M).ceil().max(1.0);
    for piece in 0..pieces as usize {
        let (from, width) = (piece as f64 / pieces, 1.0 / pieces);
        let middle = from + 0.5 * width;
        let gamma = (step.start_energy_gev
            + (step.end_energy_gev - step.start_energy_gev) * middle)
            / step.mass_gev;
        let position = step.start + (step.end - step.start) * middle;
        let altitude = air.altitude_m(&position);
        let [refractivity, delay] = yields.air(altitude);
        // sin^2 = 1 - 1/(n beta)^2 = 2 (n-1) - 1/gamma^2 to first order; the exact form:
        let inverse2 = 1.0 / (gamma * gamma);
        let index2 = (1.0 + refractivity) * (1.0 + refractivity);
        let cos2 = 1.0 / (index2 * (1.0 - inverse2));
        if cos2 >= 1.0 {
            continue;
        }
        let worth = yields.worth_per_m(altitude);
        let total: f64 = worth.iter().sum();
        let mean = total * (1.0 - cos2) * step.length_m * width * share;
        let count = stream.poisson(mean);
        if count == 0 {
            continue;
        }
        let around = Around { middle: altitude, refractivity, delay, inverse2, worth, total };
        for _ in 0..count {
            let place = from + width * stream.uniform();
            let flight = flight(step, place, stream);
            if (flight + window.source).norm_squared() < window.limit2 {
                take(&ray(step, place, &flight, air, &around, stream));
            }
        }
    }
}

struct Around<'a> {
    middle: f64,
    refractivity: f64,
    delay: f64,
    inverse2: f64,
    worth: &'a [f64],
    total: f64,
}

/// Flight direction at a place inside a step.
#[inline]
fn flight(step: &TrackStep, place: f64, stream: &mut Stream) -> Vector3<f64> {
    let mean = step.start_direction + (step.end_direction - step.start_direction) * place;
    let mut flight = mean;
    if step.scatter_rad > 0.0 {
        let wander = step.scatter_rad * (place * (1.0 - place)).sqrt();
        let (a, b) = (stream.normal() * wander, stream.normal() * wander);
        let (across, up) = basis(&flight);
        flight += across * a + up * b;
    }
    flight * (1.0 / flight.norm())
}

#[inline]
fn ray(
    step: &TrackStep,
    place: f64,
    flight: &Vector3<f64>,
    air: &AirTable,
    around: &Around<'_>,
    stream: &mut Stream,
) -> Ray {
    let position = step.start + (step.end - step.start) * place;
    let height_m = air.altitude_m(&position) - air.observer_altitude_m();
    // Over at most 100 m the air is exponential with an 8 km scale to 1e-3 of the refractivity.
    let rise = (height_m + air.observer_altitude_m() - around.middle) * (1.0 / 8000.0);
    let refractivity = around.refractivity * (1.0 - rise);
    let delay_m = around.delay + around.refractivity * 8000.0 * rise;
    let index = 1.0 + refractivity;
    let cosine = (1.0 / (index * index * (1.0 - around.inverse2))).sqrt().min(1.0);
    let sine = (1.0 - cosine * cosine).sqrt();
    let (cos, sin) = circle(stream);
    let (across, up) = basis(flight);
    let direction = flight * cosine + (across * cos + up * sin) * sine;
    let detector = if around.worth.len() == 1 {
        0
    } else {
        let mut target = around.total * stream.uniform();
        let chosen = around.worth.iter().position(|worth| {
            target -= worth;
            target < 0.0
        });
        chosen.unwrap_or(around.worth.len() - 1)
    };
    let time_ns = step.start_time_ns + (step.end_time_ns - step.start_time_ns) * place;
    Ray { position, direction, time_ns, height_m, delay_m, detector }
}

/// A point on the unit circle without trigonometry.
///
/// # Source
/// von Neumann 1951, Natl. Bur. Stand. Appl. Math. Ser. 12, 36: double the angle of a point in the
/// disc.
#[inline]
fn circle(stream: &mut Stream) -> (f64, f64) {
    loop {
        let (a, b) = (2.0 * stream.uniform() - 1.0, 2.0 * stream.uniform() - 1.0);
        let (a2, b2) = (a * a, b * b);
        let sum = a2 + b2;
        if sum < 1.0 && sum > 1e-12 {
            let inverse = 1.0 / sum;
            return ((a2 - b2) * inverse, 2.0 * a * b * inverse);
        }
    }
}

/// Two unit vectors across a direction (Duff et al. 2017, J. Comput. Graph. Tech. 6, 1).
#[inline]
fn basis(n: &Vector3<f64>) -> (Vector3<f64>, Vector3<f64>) {
    let sign = 1.0_f64.copysign(n.z);
    let a = -1.0 / (sign + n.z);
    let b = n.x * n.y * a;
    (
        Vector3::new(1.0 + sign * n.x * n.x * a, sign * b, -sign * n.x),
        Vector3::new(b, sign + n.y * n.y * a, -n.y),
    )
}
