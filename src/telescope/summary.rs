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
}

impl ImageSummary {
    /// Moments of weighted points (x, y, weight, whether at the edge).
    ///
    /// # Source
    /// Second moments and principal axes of a plane mass distribution: textbook mechanics.
    pub fn of(points: impl Iterator<Item = (f64, f64, f64, bool)>) -> Self {
        let (mut sum, mut x1, mut y1, mut xx, mut yy, mut xy, mut edge) =
            (0.0, 0.0, 0.0, 0.0, 0.0, 0.0, 0.0);
        for (x, y, weight, at_edge) in points {
            sum += weight;
            x1 += weight * x;
            y1 += weight * y;
            xx += weight * x * x;
            yy += weight * y * y;
            xy += weight * x * y;
            if at_edge {
                edge += weight;
            }
        }
        if sum <= 0.0 {
            return Self::default();
        }
        let (mx, my) = (x1 / sum, y1 / sum);
        let (vx, vy, cov) = (xx / sum - mx * mx, yy / sum - my * my, xy / sum - mx * my);
        let root = ((vx - vy).powi(2) + 4.0 * cov * cov).sqrt();
        Self {
            size_pe: sum as f32,
            centroid_deg: [mx as f32, my as f32],
            length_deg: (0.5 * (vx + vy + root)).max(0.0).sqrt() as f32,
            width_deg: (0.5 * (vx + vy - root)).max(0.0).sqrt() as f32,
            orientation_rad: (0.5 * (2.0 * cov).atan2(vx - vy)) as f32,
            edge_fraction: (edge / sum) as f32,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::ImageSummary;

    #[test]
    fn a_tilted_rod_has_its_length_and_tilt() {
        let tilt = 0.4_f64;
        let points = (0..1001).map(|i| {
            let along = 0.002 * (f64::from(i) - 500.0);
            (0.3 + along * tilt.cos(), -0.1 + along * tilt.sin(), 2.0, false)
        });
        let summary = ImageSummary::of(points);
        assert!((f64::from(summary.length_deg) - 2.002 / 12.0_f64.sqrt()).abs() < 1e-5);
        assert!(summary.width_deg < 1e-4);
        assert!((f64::from(summary.orientation_rad) - tilt).abs() < 1e-6);
        assert!((summary.centroid_deg[0] - 0.3).abs() < 1e-6);
    }
}
