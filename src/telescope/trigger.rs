//! Which pixels must fire together.

use super::camera::{Camera, PixelShape};

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
