//! The moments of an image.

/// What is kept of an image: moments of the pixels above the cleaning level.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct ImageSummary {
    /// Sum of cleaned pixels, photoelectrons.
    pub size_pe: f32,
    /// Centroid, deg.
    pub centroid_deg: [f32; 2],
    /// RMS along the major axis, deg.
    pub length_deg: f32,
    /// RMS along the minor axis, deg.
    pub width_deg: f32,
    /// Angle of the major axis from x, rad in (-pi/2, pi/2].
    pub orientation_rad: f32,
    /// Fraction of the size in pixels at the camera's edge.
    pub edge_fraction: f32,
    /// Change of arrival time along the major axis, towards its angle, ns/deg.
    pub time_slope_ns_deg: f32,
}

/// A pixel of a cleaned image.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ImagePoint {
    /// Centre along x, deg.
    pub x_deg: f64,
    /// Centre along y, deg.
    pub y_deg: f64,
    /// Height, photoelectrons.
    pub weight: f64,
    /// Arrival time, ns.
    pub time_ns: f64,
    /// Whether it lies at the camera's edge.
    pub at_edge: bool,
}

impl ImageSummary {
    /// Moments of weighted points: centroid, principal axes of the second moments, and the weighted
    /// least-squares slope of time along the major axis, cov(s, t) / var(s).
    ///
    /// # Source
    /// Second moments and principal axes of a plane mass distribution: textbook mechanics.
    pub fn of(points: impl Iterator<Item = ImagePoint>) -> Self {
        let mut sums = [0.0; 10];
        for ImagePoint { x_deg: x, y_deg: y, weight, time_ns: t, at_edge } in points {
            let edge = if at_edge { 1.0 } else { 0.0 };
            for (sum, term) in
                sums.iter_mut().zip([1.0, x, y, x * x, y * y, x * y, edge, t, x * t, y * t])
            {
                *sum += weight * term;
            }
        }
        let sum = sums[0];
        if sum <= 0.0 {
            return Self::default();
        }
        let [_, mx, my, xx, yy, xy, edge, mt, xt, yt] = sums.map(|total| total / sum);
        let (vx, vy, cov) = (xx - mx * mx, yy - my * my, xy - mx * my);
        let root = ((vx - vy).powi(2) + 4.0 * cov * cov).sqrt();
        let orientation = 0.5 * (2.0 * cov).atan2(vx - vy);
        let length2 = (0.5 * (vx + vy + root)).max(0.0);
        let along = (xt - mx * mt) * orientation.cos() + (yt - my * mt) * orientation.sin();
        Self {
            size_pe: sum as f32,
            centroid_deg: [mx as f32, my as f32],
            length_deg: length2.sqrt() as f32,
            width_deg: (0.5 * (vx + vy - root)).max(0.0).sqrt() as f32,
            orientation_rad: orientation as f32,
            edge_fraction: edge as f32,
            // A single pixel has no slope.
            time_slope_ns_deg: if length2 > 1e-9 { (along / length2) as f32 } else { 0.0 },
        }
    }
}

#[cfg(test)]
mod tests {
    use super::{ImagePoint, ImageSummary};

    #[test]
    fn a_tilted_rod_has_its_length_and_tilt() {
        let tilt = 0.4_f64;
        let points = (0..1001).map(|i| {
            let along = 0.002 * (f64::from(i) - 500.0);
            ImagePoint {
                x_deg: 0.3 + along * tilt.cos(),
                y_deg: -0.1 + along * tilt.sin(),
                weight: 2.0,
                time_ns: 40.0 - 7.0 * along,
                at_edge: false,
            }
        });
        let summary = ImageSummary::of(points);
        assert!((f64::from(summary.length_deg) - 2.002 / 12.0_f64.sqrt()).abs() < 1e-5);
        assert!(summary.width_deg < 1e-4);
        assert!((f64::from(summary.orientation_rad) - tilt).abs() < 1e-6);
        assert!((summary.centroid_deg[0] - 0.3).abs() < 1e-6);
        assert!((summary.time_slope_ns_deg + 7.0).abs() < 1e-3);
    }
}
