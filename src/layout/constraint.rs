//! Where telescopes may stand.

use super::candidate::Candidate;
use super::cost::Tariff;
use super::error::LayoutError;

/// Two telescopes nearer than this are on one spot, m.
pub const ONE_SPOT_M: f64 = 1e-3;

/// What a layout must respect.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Constraints {
    /// Least distance of two telescopes on the ground, m.
    pub least_distance_m: f64,
    /// Telescopes stand inside one of these polygons; none means anywhere.
    pub allowed_m: Vec<Vec<[f64; 2]>>,
    /// And outside all of these, with their names.
    pub forbidden_m: Vec<(String, Vec<[f64; 2]>)>,
    /// Most that a layout may cost.
    pub budget: Option<f64>,
}

impl Constraints {
    /// Whether a telescope may stand at a point, and if not why.
    pub fn ground(&self, point_m: [f64; 2]) -> Result<(), String> {
        if !self.allowed_m.is_empty() && !self.allowed_m.iter().any(|p| holds(p, point_m)) {
            return Err("outside the site's boundary".into());
        }
        match self.forbidden_m.iter().find(|(_, outline)| holds(outline, point_m)) {
            Some((name, _)) => Err(format!("in excluded ground: {name}")),
            None => Ok(()),
        }
    }

    /// Checks a candidate.
    ///
    /// # Errors
    /// The first [`LayoutError`] found: distance, ground, budget, condition.
    pub fn check(&self, candidate: &Candidate, tariff: &Tariff) -> Result<(), LayoutError> {
        let members = &candidate.members;
        for (second, b) in members.iter().enumerate() {
            for (first, a) in members[..second].iter().enumerate() {
                let (a, b) = (a.position_m, b.position_m);
                let distance_m = (a[0] - b[0]).hypot(a[1] - b[1]);
                let least_m = self.least_distance_m.max(ONE_SPOT_M);
                if distance_m < least_m {
                    return Err(LayoutError::TooClose { first, second, distance_m, least_m });
                }
            }
            let [x_m, y_m, _] = b.position_m;
            self.ground([x_m, y_m]).map_err(|place| LayoutError::Ground {
                index: second,
                x_m,
                y_m,
                place,
            })?;
        }
        if let Some(budget) = self.budget {
            let placed: Vec<_> = members.iter().map(|m| (m.position_m, m.kind)).collect();
            let cost = tariff.cost(&placed);
            if cost > budget {
                return Err(LayoutError::Budget { cost, budget });
            }
        }
        candidate.condition.check(&members.iter().map(|member| member.kind).collect::<Vec<_>>())
    }
}

/// Whether a point lies in a polygon, by the parity of crossings to the east.
fn holds(outline: &[[f64; 2]], point: [f64; 2]) -> bool {
    let mut inside = false;
    for (index, a) in outline.iter().enumerate() {
        let b = outline[(index + 1) % outline.len()];
        if (a[1] > point[1]) != (b[1] > point[1]) {
            let crossing = a[0] + (point[1] - a[1]) / (b[1] - a[1]) * (b[0] - a[0]);
            inside ^= point[0] < crossing;
        }
    }
    inside
}
