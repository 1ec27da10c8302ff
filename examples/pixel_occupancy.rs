//! One layer, one exact answer: photoelectrons spread evenly over a camera's field, counted pixel
//! by pixel, must fill each hexagon with the share of its area, sqrt(3)/2 pitch^2.

use nightpool::numerics::{Stream, stream::Stage};
use nightpool::telescope::{Camera, PixelShape};

fn main() {
    let camera = Camera::new(PixelShape::Hexagonal, 0.2, 3.0).expect("a small camera");
    let mut stream = Stream::keyed(1, Stage::Image, &[]);
    let (thrown, side) = (1_000_000, 4.0);
    let seen = (0..thrown)
        .filter(|_| {
            let mut place = || (side * (stream.uniform() - 0.5)) as f32;
            let (x, y) = (place(), place());
            camera.pixel(x, y).is_some()
        })
        .count();
    let share = f64::from(seen as u32) / f64::from(thrown);
    let exact = camera.pixels.len() as f64 * 0.75_f64.sqrt() * 0.2 * 0.2 / (side * side);
    let error = (exact * (1.0 - exact) / f64::from(thrown)).sqrt();
    println!("share of light inside {} pixels: {share:.5} +- {error:.5}", camera.pixels.len());
    println!("exact:                           {exact:.5}");
    assert!((share - exact).abs() < 4.0 * error);
}
