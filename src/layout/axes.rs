//! Direction of a shower from the axes of its images.

/// The axis of one image.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct ImageAxis {
    /// Centroid, offset from the pointing, deg.
    pub centroid_deg: [f64; 2],
    /// Angle of the major axis from x, rad.
    pub orientation_rad: f64,
    /// Size, photoelectrons.
    pub size_pe: f64,
}

/// Least angle between two axes whose crossing counts, rad: 5 degrees. Common practice, no source.
const LEAST_ANGLE_RAD: f64 = 0.087;

/// The direction a shower comes from: the mean of the crossings of all pairs of image axes.
///
/// All cameras look in one direction, so the image of the direction is one point of the field of
/// view of them all and every image's major axis runs through it. Weights are
/// sin(angle between axes) x 1 / (1/s1 + 1/s2) with sizes s. None if no pair crosses.
///
/// # Units
/// Degrees, offset from the pointing.
///
/// # Source
/// Hofmann et al. 1999, Astropart. Phys. 12, 135, algorithm 1 (the mean of crossings; weights by
/// sine and reduced size are common practice). Test: `verify_axes_*`.
pub fn direction_deg(images: &[ImageAxis]) -> Option<[f64; 2]> {
    let (mut sum, mut total) = ([0.0; 2], 0.0);
    for (index, a) in images.iter().enumerate() {
        for b in &images[index + 1..] {
            let Some((crossing, sin)) = crossing(a, b) else { continue };
            let weight = sin / (1.0 / a.size_pe + 1.0 / b.size_pe);
            total += weight;
            sum[0] += weight * crossing[0];
            sum[1] += weight * crossing[1];
        }
    }
    (total > 0.0).then(|| sum.map(|axis| axis / total))
}

fn crossing(a: &ImageAxis, b: &ImageAxis) -> Option<([f64; 2], f64)> {
    let (sin_a, cos_a) = a.orientation_rad.sin_cos();
    let (sin_b, cos_b) = b.orientation_rad.sin_cos();
    let cross = cos_a * sin_b - sin_a * cos_b;
    if cross.abs() < LEAST_ANGLE_RAD.sin() {
        return None;
    }
    let apart = [b.centroid_deg[0] - a.centroid_deg[0], b.centroid_deg[1] - a.centroid_deg[1]];
    let along = (apart[0] * sin_b - apart[1] * cos_b) / cross;
    let point = [a.centroid_deg[0] + along * cos_a, a.centroid_deg[1] + along * sin_a];
    Some((point, cross.abs()))
}

/// The weighted containment radius: the distance within which `share` of the weight lies.
///
/// # Shape
/// Pairs of distance from the truth and weight.
pub fn containment(mut distances: Vec<(f64, f64)>, share: f64) -> Option<f64> {
    distances.sort_by(|a, b| a.0.total_cmp(&b.0));
    let total: f64 = distances.iter().map(|(_, weight)| weight).sum();
    let mut within = 0.0;
    distances.into_iter().find_map(|(distance, weight)| {
        within += weight;
        (within >= share * total).then_some(distance)
    })
}
