//! A candidate layout, and when two of them are the same.

use super::condition::Condition;

/// A telescope of a candidate.
#[derive(Clone, Debug, PartialEq)]
pub struct Member {
    /// East, north, up, m.
    pub position_m: [f64; 3],
    /// Index of its kind.
    pub kind: usize,
}

/// A set of telescopes with an array condition.
#[derive(Clone, Debug, PartialEq)]
pub struct Candidate {
    /// Its name.
    pub name: String,
    /// Its telescopes.
    pub members: Vec<Member>,
    /// When it triggers.
    pub condition: Condition,
}

/// Position to the centimetre and kind, ordered.
type Key = Vec<(usize, [i64; 3])>;

impl Candidate {
    /// The same for candidates with the same telescopes at the same places, to 1 cm.
    pub fn key(&self) -> Key {
        sorted(self.members.iter().map(|member| (member.kind, centimetres(member.position_m))))
    }

    /// The same for candidates that are moved, turned by quarter turns or sixths, or mirrored
    /// copies of each other on flat ground, to 1 cm.
    ///
    /// # Validity
    /// Only for vertical showers without a magnetic field: a tilted pointing tells east from
    /// north. Turns are about the centroid.
    pub fn symmetric_key(&self) -> Key {
        let count = self.members.len().max(1) as f64;
        let mean = |axis: usize| {
            self.members.iter().map(|member| member.position_m[axis]).sum::<f64>() / count
        };
        let centre = [mean(0), mean(1), mean(2)];
        let images = (0..24).map(|image| {
            let (sin, cos) = (core::f64::consts::TAU * f64::from(image % 12) / 12.0).sin_cos();
            let flip = if image < 12 { 1.0 } else { -1.0 };
            sorted(self.members.iter().map(|member| {
                let p = member.position_m;
                let (x, y) = (p[0] - centre[0], flip * (p[1] - centre[1]));
                let turned = [cos * x - sin * y, sin * x + cos * y, p[2] - centre[2]];
                (member.kind, centimetres(turned))
            }))
        });
        images.min().unwrap_or_default()
    }
}

fn centimetres(position_m: [f64; 3]) -> [i64; 3] {
    position_m.map(|metres| (metres * 100.0).round() as i64)
}

fn sorted(telescopes: impl Iterator<Item = (usize, [i64; 3])>) -> Key {
    let mut key: Key = telescopes.collect();
    key.sort_unstable();
    key
}

/// For each candidate the first earlier one that is the same (same condition, same key), if any.
pub fn repeated(candidates: &[Candidate], up_to_symmetry: bool) -> Vec<Option<usize>> {
    let mut seen = std::collections::HashMap::new();
    let found = candidates.iter().enumerate().map(|(index, candidate)| {
        let key = if up_to_symmetry { candidate.symmetric_key() } else { candidate.key() };
        let first = *seen.entry((key, candidate.condition.clone())).or_insert(index);
        (first != index).then_some(first)
    });
    found.collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_turned_and_mirrored_copy_is_the_same_layout() {
        let make = |points: &[[f64; 2]]| Candidate {
            name: String::new(),
            members: points
                .iter()
                .map(|p| Member { position_m: [p[0], p[1], 0.0], kind: 0 })
                .collect(),
            condition: Condition::any(2),
        };
        let original = make(&[[0.0, 0.0], [100.0, 0.0], [0.0, 40.0]]);
        let turned = make(&[[7.0, 5.0], [7.0, 105.0], [47.0, 5.0]]);
        let other = make(&[[0.0, 0.0], [100.0, 0.0], [0.0, 41.0]]);
        assert_eq!(original.symmetric_key(), turned.symmetric_key());
        assert_ne!(original.key(), turned.key());
        assert_eq!(repeated(&[original, turned, other], true), [None, Some(0), None]);
    }
}
