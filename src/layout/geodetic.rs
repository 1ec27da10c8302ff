//! Between WGS84 latitude, longitude, height and east, north, up of a reference point.

use nalgebra::{Matrix3, Vector3};

/// Semi-major axis of WGS84, m. Defining constant.
pub const WGS84_SEMI_MAJOR_M: f64 = 6_378_137.0;
/// Flattening of WGS84. Defining constant (its inverse).
pub const WGS84_FLATTENING: f64 = 1.0 / 298.257_223_563;

const ECCENTRICITY_SQUARED: f64 = WGS84_FLATTENING * (2.0 - WGS84_FLATTENING);

/// A point on or above the WGS84 ellipsoid.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Geodetic {
    /// Latitude, degrees north.
    pub latitude_deg: f64,
    /// Longitude, degrees east.
    pub longitude_deg: f64,
    /// Height above the ellipsoid, m.
    pub height_m: f64,
}

impl Geodetic {
    /// Earth-centred, Earth-fixed coordinates, m.
    ///
    /// X = (N + h) cos(lat) cos(lon), Z = (N (1 - e^2) + h) sin(lat), N = a / sqrt(1 - e^2 sin^2).
    ///
    /// # Source
    /// NGA.STND.0036 (WGS84), sec. 4.
    pub fn centred_m(self) -> Vector3<f64> {
        let (sin_lat, cos_lat) = self.latitude_deg.to_radians().sin_cos();
        let (sin_lon, cos_lon) = self.longitude_deg.to_radians().sin_cos();
        let normal = WGS84_SEMI_MAJOR_M / (1.0 - ECCENTRICITY_SQUARED * sin_lat * sin_lat).sqrt();
        let across = (normal + self.height_m) * cos_lat;
        let along = (normal * (1.0 - ECCENTRICITY_SQUARED) + self.height_m) * sin_lat;
        Vector3::new(across * cos_lon, across * sin_lon, along)
    }

    /// The point at Earth-centred coordinates in metres.
    ///
    /// Fixed-point iteration of tan(lat) = (Z + e^2 N sin(lat)) / p, which converges by a factor
    /// e^2 = 0.0067 a step near the ground: eight steps reach rounding.
    pub fn of_centred_m(centred: Vector3<f64>) -> Self {
        let across = centred.x.hypot(centred.y);
        let mut latitude = centred.z.atan2(across * (1.0 - ECCENTRICITY_SQUARED));
        let normal =
            |sin: f64| WGS84_SEMI_MAJOR_M / (1.0 - ECCENTRICITY_SQUARED * sin * sin).sqrt();
        for _ in 0..8 {
            let sin = latitude.sin();
            latitude = (centred.z + ECCENTRICITY_SQUARED * normal(sin) * sin).atan2(across);
        }
        let (sin, cos) = latitude.sin_cos();
        let height_m = across * cos + centred.z * sin
            - WGS84_SEMI_MAJOR_M * (1.0 - ECCENTRICITY_SQUARED * sin * sin).sqrt();
        Self {
            latitude_deg: latitude.to_degrees(),
            longitude_deg: centred.y.atan2(centred.x).to_degrees(),
            height_m,
        }
    }

    /// Rows east, north, up of this point in Earth-centred axes.
    fn axes(self) -> Matrix3<f64> {
        let (sin_lat, cos_lat) = self.latitude_deg.to_radians().sin_cos();
        let (sin_lon, cos_lon) = self.longitude_deg.to_radians().sin_cos();
        Matrix3::new(
            -sin_lon,
            cos_lon,
            0.0,
            -sin_lat * cos_lon,
            -sin_lat * sin_lon,
            cos_lat,
            cos_lat * cos_lon,
            cos_lat * sin_lon,
            sin_lat,
        )
    }

    /// East, north and up of a point seen from this one, m.
    pub fn local_m(self, point: Self) -> [f64; 3] {
        (self.axes() * (point.centred_m() - self.centred_m())).into()
    }

    /// The point at an east, north and up from this one, m.
    pub fn at_local_m(self, local_m: [f64; 3]) -> Self {
        let offset = self.axes().transpose() * Vector3::from(local_m);
        Self::of_centred_m(self.centred_m() + offset)
    }
}
