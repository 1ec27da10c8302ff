//! Patterns of positions.

use core::f64::consts::TAU;

/// A pattern of telescopes on flat ground, centred on the origin.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Pattern {
    /// Square grid.
    Square,
    /// Triangular grid: every inner telescope has six neighbours.
    Triangular,
    /// On a circle, neighbours one spacing apart along the chord.
    Ring,
    /// Along east.
    Line,
    /// One in the middle and four arms.
    Cross,
    /// Triangular cells of `members` telescopes, the cells' centres on a triangular grid of
    /// `separation` spacings.
    Clusters {
        /// Telescopes of a cell.
        members: usize,
        /// Distance of cells in units of the spacing.
        separation: f64,
    },
    /// Triangular grid that widens outward: a telescope at r spacings is moved to r^power.
    Graded {
        /// Power; above 1 is denser inside.
        power: f64,
    },
}

impl Pattern {
    /// `count` positions, east and north, m.
    pub fn positions_m(self, count: usize, spacing_m: f64) -> Vec<[f64; 2]> {
        let unit = match self {
            Self::Square => {
                let even = ((count as f64).sqrt().round() as usize).is_multiple_of(2);
                let shift = if even { 0.5 } else { 0.0 };
                nearest(count, move |c, r| [f64::from(c) + shift, f64::from(r) + shift])
            }
            Self::Triangular => nearest(count, triangular),
            Self::Ring => ring(count),
            Self::Line => (0..count).map(|index| [index as f64, 0.0]).collect(),
            Self::Cross => cross(count),
            Self::Clusters { members, separation } => clusters(count, members.max(1), separation),
            Self::Graded { power } => {
                let grid = nearest(count, triangular);
                grid.into_iter().map(|p| graded(p, power)).collect()
            }
        };
        centred(unit).into_iter().map(|p| p.map(|axis| axis * spacing_m)).collect()
    }

    /// The pattern at every spacing of a scan.
    pub fn scan_m(self, count: usize, spacings_m: &[f64]) -> Vec<(f64, Vec<[f64; 2]>)> {
        spacings_m.iter().map(|&spacing| (spacing, self.positions_m(count, spacing))).collect()
    }
}

fn triangular(column: i32, row: i32) -> [f64; 2] {
    [f64::from(column) + 0.5 * f64::from(row), f64::from(row) * 0.75_f64.sqrt()]
}

fn graded(p: [f64; 2], power: f64) -> [f64; 2] {
    let radius = p[0].hypot(p[1]);
    let stretch = if radius > 0.0 { radius.powf(power - 1.0) } else { 0.0 };
    p.map(|axis| axis * stretch)
}

fn ring(count: usize) -> Vec<[f64; 2]> {
    if count < 2 {
        return vec![[0.0, 0.0]; count];
    }
    let radius = 0.5 / (0.5 * TAU / count as f64).sin();
    let place = |index: usize| (TAU * (index as f64 + 0.5) / count as f64).sin_cos();
    (0..count).map(place).map(|(sin, cos)| [radius * sin, radius * cos]).collect()
}

fn cross(count: usize) -> Vec<[f64; 2]> {
    const ARMS: [[f64; 2]; 4] = [[1.0, 0.0], [-1.0, 0.0], [0.0, 1.0], [0.0, -1.0]];
    let arm = |index: usize| ARMS[index % 4].map(|axis| axis * (index / 4 + 1) as f64);
    (0..count).map(|index| if index == 0 { [0.0, 0.0] } else { arm(index - 1) }).collect()
}

fn clusters(count: usize, members: usize, separation: f64) -> Vec<[f64; 2]> {
    let cell = centred(nearest(members, triangular));
    let centres = nearest(count.div_ceil(members), triangular);
    let places = centres.iter().flat_map(|centre| {
        cell.iter().map(|p| [centre[0] * separation + p[0], centre[1] * separation + p[1]])
    });
    places.take(count).collect()
}

fn centred(mut points: Vec<[f64; 2]>) -> Vec<[f64; 2]> {
    let count = points.len().max(1) as f64;
    let mean = |axis: usize| points.iter().map(|p| p[axis]).sum::<f64>() / count;
    let centre = [mean(0), mean(1)];
    points.iter_mut().for_each(|p| *p = [p[0] - centre[0], p[1] - centre[1]]);
    points
}

/// The grid points nearest the origin; ties by angle, so that the order is fixed.
fn nearest(count: usize, place: impl Fn(i32, i32) -> [f64; 2]) -> Vec<[f64; 2]> {
    let reach = 2 * (count as f64).sqrt() as i32 + 2;
    let mut points: Vec<[f64; 2]> = (-reach..=reach)
        .flat_map(|row| (-reach..=reach).map(move |column| (column, row)))
        .map(|(column, row)| place(column, row))
        .collect();
    let key = |p: &[f64; 2]| {
        let angle = p[1].atan2(p[0]).rem_euclid(TAU);
        ((p[0].hypot(p[1]) * 1e6).round() as i64, (angle * 1e6).round() as i64)
    };
    points.sort_by_key(key);
    points.truncate(count);
    points
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn plain_patterns_have_neighbours_one_spacing_apart() {
        use Pattern::{Clusters, Cross, Line, Ring, Square, Triangular};
        let cells = Clusters { members: 3, separation: 4.0 };
        for pattern in [Square, Triangular, Ring, Line, Cross, cells] {
            let points = pattern.positions_m(12, 80.0);
            assert_eq!(points.len(), 12);
            for p in &points {
                let others = points.iter().filter(|q| *q != p);
                let least =
                    others.map(|q| (p[0] - q[0]).hypot(p[1] - q[1])).fold(f64::INFINITY, f64::min);
                assert!((least - 80.0).abs() < 1e-6, "{pattern:?}: {least}");
            }
        }
    }
}
