//! Which pixels must fire together.

use core::fmt;

use super::camera::{Camera, PixelShape};
use super::kind::KindError;

/// The pattern of pixels that triggers a telescope.
///
/// "Connected" pixels share edges. A trigger margin is the highest pixel threshold at which the
/// pattern still fires: the best group's smallest pixel (connected, compact), the n-th largest
/// pixel (majority), the largest clipped sum (patch sum).
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Topology {
    /// This many pixels in any connected shape.
    Connected(usize),
    /// A compact group: 3 hexagons or 3 of a 2 x 2 block of squares around one corner, else 4 as a
    /// rhombus or block; 2 are any neighbours. Other sizes do not exist.
    Compact(usize),
    /// This many pixels anywhere.
    Majority(usize),
    /// The sum over a pixel and its neighbours, each clipped at this height, photoelectrons.
    PatchSum(f64),
}

impl Topology {
    /// Checks its number against a camera of some pixels.
    ///
    /// # Errors
    /// [`KindError`] with the allowed range.
    pub fn check(self, pixels: usize) -> Result<(), KindError> {
        let (field, value, most, allowed) = match self {
            Self::Connected(n) => {
                ("connected_pixels", n, 32, "1 to 32, and not more than there are pixels")
            }
            Self::Compact(n) => {
                ("compact_pixels", n, 4, "1 to 4, and not more than there are pixels")
            }
            Self::Majority(n) => {
                ("majority_pixels", n, 32, "1 to 32, and not more than there are pixels")
            }
            Self::PatchSum(clip_pe) => {
                let allowed = "above 0, at most 1000";
                let fits = clip_pe > 0.0 && clip_pe <= 1_000.0;
                let error = KindError { field: "patch_clip_pe", value: clip_pe, allowed };
                return if fits { Ok(()) } else { Err(error) };
            }
        };
        if (1..=pixels.min(most)).contains(&value) {
            return Ok(());
        }
        Err(KindError { field, value: value as f64, allowed })
    }

    /// The largest margin it can give in a camera, photoelectrons: a clipped sum has an end.
    pub fn largest_margin_pe(self, camera: &Camera) -> f64 {
        let Self::PatchSum(clip_pe) = self else { return f64::INFINITY };
        let members = (0..camera.pixels.len()).map(|pixel| camera.neighbours(pixel).len() + 1);
        clip_pe * members.max().unwrap_or(1) as f64
    }
}

impl fmt::Display for Topology {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Connected(n) => write!(f, "{n} connected pixels, any shape"),
            Self::Compact(n) => write!(f, "{n} pixels in a compact group"),
            Self::Majority(n) => write!(f, "{n} pixels anywhere"),
            Self::PatchSum(clip) => {
                write!(f, "sum of a pixel and its neighbours, each up to {clip} pe")
            }
        }
    }
}

/// All compact groups of a size, each sorted; empty if the size does not exist.
pub fn compact_groups(camera: &Camera, size: usize) -> Vec<Vec<u16>> {
    let mut groups = Vec::new();
    for pixel in 0..camera.pixels.len() as u16 {
        let near = camera.neighbours(usize::from(pixel));
        match size {
            1 => groups.push(vec![pixel]),
            2 => groups.extend(near.iter().map(|&other| vec![pixel, other])),
            3 | 4 => blocks(camera, pixel, near, size, &mut groups),
            _ => {}
        }
    }
    for group in &mut groups {
        group.sort_unstable();
    }
    groups.sort_unstable();
    groups.dedup();
    groups
}

/// Groups of 3 or 4 with `pixel` and two of its neighbours that belong together.
fn blocks(camera: &Camera, pixel: u16, near: &[u16], size: usize, groups: &mut Vec<Vec<u16>>) {
    let touch = |a: u16, b: u16| camera.neighbours(usize::from(a)).contains(&b);
    for (place, &a) in near.iter().enumerate() {
        for &b in &near[place + 1..] {
            let common = camera.neighbours(usize::from(a)).iter().copied();
            let fourth = common.filter(|&c| c != pixel && touch(b, c));
            match (camera.shape, size) {
                (PixelShape::Hexagonal, 3) if touch(a, b) => groups.push(vec![pixel, a, b]),
                (PixelShape::Hexagonal, 4) if touch(a, b) => {
                    groups.extend(fourth.map(|c| vec![pixel, a, b, c]));
                }
                (PixelShape::Square, 3) if fourth.clone().next().is_some() => {
                    groups.push(vec![pixel, a, b]);
                }
                (PixelShape::Square, 4) => {
                    groups.extend(fourth.map(|c| vec![pixel, a, b, c]));
                }
                _ => {}
            }
        }
    }
}
