//! Regular patterns of positions around the origin.

use core::f64::consts::TAU;

/// Names of the patterns in a study file.
pub(super) const PATTERNS: [&str; 5] = ["square", "hexagon", "ring", "line", "cross"];

/// `count` points whose nearest neighbours are `spacing_m` apart, centred on the origin; the
/// points of `square` and `hexagon` are the grid points nearest the centre.
pub(super) fn pattern(name: &str, count: usize, spacing_m: f64) -> Vec<[f64; 2]> {
    let mut points = match name {
        "line" => (0..count).map(|index| [index as f64, 0.0]).collect(),
        "ring" => ring(count),
        "cross" => cross(count),
        "hexagon" => nearest(count, |column, row| {
            [f64::from(column) + 0.5 * f64::from(row), f64::from(row) * 0.75_f64.sqrt()]
        }),
        _ => {
            // An even side centres the grid on a cell, an odd one on a point.
            let side = (count as f64).sqrt().round() as usize;
            let shift = if side.is_multiple_of(2) { 0.5 } else { 0.0 };
            nearest(count, |column, row| [f64::from(column) + shift, f64::from(row) + shift])
        }
    };
    let mean =
        |axis: usize| points.iter().map(|p: &[f64; 2]| p[axis]).sum::<f64>() / count.max(1) as f64;
    let centre = [mean(0), mean(1)];
    for point in &mut points {
        for axis in 0..2 {
            point[axis] = (point[axis] - centre[axis]) * spacing_m;
        }
    }
    points
}

fn ring(count: usize) -> Vec<[f64; 2]> {
    if count < 2 {
        return vec![[0.0, 0.0]; count];
    }
    let radius = 0.5 / (0.5 * TAU / count as f64).sin();
    let angle = |index: usize| TAU * (index as f64 + 0.5) / count as f64;
    (0..count).map(|index| [radius * angle(index).sin(), radius * angle(index).cos()]).collect()
}

fn cross(count: usize) -> Vec<[f64; 2]> {
    const ARMS: [[f64; 2]; 4] = [[1.0, 0.0], [-1.0, 0.0], [0.0, 1.0], [0.0, -1.0]];
    let arm = |index: usize| {
        let step = (index / 4 + 1) as f64;
        ARMS[index % 4].map(|axis| axis * step)
    };
    (0..count).map(|index| if index == 0 { [0.0, 0.0] } else { arm(index - 1) }).collect()
}

fn nearest(count: usize, place: impl Fn(i32, i32) -> [f64; 2]) -> Vec<[f64; 2]> {
    let reach = (count as f64).sqrt() as i32 + 2;
    let mut points: Vec<[f64; 2]> = (-reach..=reach)
        .flat_map(|row| (-reach..=reach).map(move |column| (column, row)))
        .map(|(column, row)| place(column, row))
        .collect();
    // Ties by angle, so that growing patterns stay compact and the order is fixed.
    let key = |p: &[f64; 2]| ((p[0].hypot(p[1]) * 1e6).round(), p[0].atan2(p[1]).rem_euclid(TAU));
    points.sort_by(|a, b| {
        let (a, b) = (key(a), key(b));
        a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1))
    });
    points.truncate(count);
    points
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nearest_neighbours_are_one_spacing_apart() {
        for name in PATTERNS {
            for count in 2..=12 {
                let points = pattern(name, count, 80.0);
                assert_eq!(points.len(), count);
                for (index, p) in points.iter().enumerate() {
                    let others = points.iter().enumerate().filter(|(other, _)| *other != index);
                    let least = others
                        .map(|(_, q)| (p[0] - q[0]).hypot(p[1] - q[1]))
                        .fold(f64::INFINITY, f64::min);
                    assert!((least - 80.0).abs() < 1e-6, "{name} {count}: {least}");
                }
            }
        }
    }
}
