//! The camera: pixels on a hexagonal or square grid inside a round field of view.

/// Shape of the pixels.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PixelShape {
    /// Hexagons, flat sides facing along x.
    Hexagonal,
    /// Squares.
    Square,
}

/// Pixels, their neighbours and a look-up from direction to pixel.
///
/// # Units
/// Degrees on the sky. `pitch_deg` is the distance between centres of neighbours, flat to flat.
#[derive(Clone, Debug)]
pub struct Camera {
    /// Shape of the pixels.
    pub shape: PixelShape,
    /// Distance between centres of neighbouring pixels, deg.
    pub pitch_deg: f64,
    /// Diameter of the field of view, deg.
    pub field_of_view_deg: f64,
    /// Centres, deg.
    pub pixels: Vec<[f32; 2]>,
    neighbours: Vec<u16>,
    starts: Vec<u32>,
    grid: Vec<u16>,
    half: i32,
}

const NONE: u16 = u16::MAX;
/// Largest number of pixels.
pub const MOST_PIXELS: usize = 20_000;

impl Camera {
    /// Fills a round field of view with pixels whose centres lie inside it.
    ///
    /// Returns `None` if that gives more than [`MOST_PIXELS`] pixels.
    pub fn new(shape: PixelShape, pitch_deg: f64, field_of_view_deg: f64) -> Option<Self> {
        let half = (0.5 * field_of_view_deg / pitch_deg * 1.2).ceil() as i32 + 1;
        if half > 400 {
            return None;
        }
        let side = (2 * half + 1) as usize;
        let mut grid = vec![NONE; side * side];
        let mut pixels = Vec::new();
        let mut cells = Vec::new();
        for row in -half..=half {
            for column in -half..=half {
                let (x, y) = centre(shape, pitch_deg, column, row);
                if x.hypot(y) <= 0.5 * (field_of_view_deg - pitch_deg) + 1e-9 {
                    grid[cell(half, column, row)] = pixels.len() as u16;
                    pixels.push([x as f32, y as f32]);
                    cells.push((column, row));
                }
            }
        }
        if pixels.is_empty() {
            grid[cell(half, 0, 0)] = 0;
            pixels.push([0.0, 0.0]);
            cells.push((0, 0));
        }
        if pixels.len() > MOST_PIXELS {
            return None;
        }
        let steps: &[(i32, i32)] = match shape {
            PixelShape::Hexagonal => &[(1, 0), (-1, 0), (0, 1), (0, -1), (1, -1), (-1, 1)],
            PixelShape::Square => &[(1, 0), (-1, 0), (0, 1), (0, -1)],
        };
        let (mut neighbours, mut starts) = (Vec::new(), vec![0]);
        for (column, row) in cells {
            for (right, up) in steps {
                let (c, r) = (column + right, row + up);
                if c.abs() <= half && r.abs() <= half && grid[cell(half, c, r)] != NONE {
                    neighbours.push(grid[cell(half, c, r)]);
                }
            }
            starts.push(neighbours.len() as u32);
        }
        Some(Self { shape, pitch_deg, field_of_view_deg, pixels, neighbours, starts, grid, half })
    }

    /// Pixels that share an edge with `pixel`.
    pub fn neighbours(&self, pixel: usize) -> &[u16] {
        &self.neighbours[self.starts[pixel] as usize..self.starts[pixel + 1] as usize]
    }

    /// The pixel a direction falls into, if any.
    #[inline]
    pub fn pixel(&self, x_deg: f32, y_deg: f32) -> Option<usize> {
        let (x, y) = (f64::from(x_deg) / self.pitch_deg, f64::from(y_deg) / self.pitch_deg);
        if !(x.abs() < 1e4 && y.abs() < 1e4) {
            return None;
        }
        let (column, row) = match self.shape {
            PixelShape::Square => (nearest(x) as i32, nearest(y) as i32),
            PixelShape::Hexagonal => nearest_hexagon(x, y),
        };
        if column.abs() > self.half || row.abs() > self.half {
            return None;
        }
        let found = self.grid[cell(self.half, column, row)];
        (found != NONE).then_some(found as usize)
    }

    /// Solid angle of one pixel, sr.
    pub fn pixel_solid_angle_sr(&self) -> f64 {
        let pitch = self.pitch_deg.to_radians();
        match self.shape {
            PixelShape::Square => pitch * pitch,
            PixelShape::Hexagonal => 0.75_f64.sqrt() * pitch * pitch,
        }
    }

    /// Whether a pixel lies at the camera's edge.
    pub fn at_edge(&self, pixel: usize) -> bool {
        let full = if self.shape == PixelShape::Square { 4 } else { 6 };
        self.neighbours(pixel).len() < full
    }
}

fn cell(half: i32, column: i32, row: i32) -> usize {
    ((row + half) * (2 * half + 1) + column + half) as usize
}

fn centre(shape: PixelShape, pitch: f64, column: i32, row: i32) -> (f64, f64) {
    let (column, row) = (f64::from(column), f64::from(row));
    match shape {
        PixelShape::Square => (column * pitch, row * pitch),
        PixelShape::Hexagonal => ((column + 0.5 * row) * pitch, row * 0.75_f64.sqrt() * pitch),
    }
}

/// The nearest whole number of a value below 1e9: cheaper than a call of `round`.
#[inline]
fn nearest(value: f64) -> f64 {
    ((value + 1_073_741_824.5) as i64 - 1_073_741_824) as f64
}

/// The hexagon around a point in axial coordinates, by rounding in cube coordinates.
fn nearest_hexagon(x: f64, y: f64) -> (i32, i32) {
    let row = y / 0.75_f64.sqrt();
    let column = x - 0.5 * row;
    let third = -column - row;
    let (mut c, mut r, t) = (nearest(column), nearest(row), nearest(third));
    let errors = ((c - column).abs(), (r - row).abs(), (t - third).abs());
    if errors.0 > errors.1 && errors.0 > errors.2 {
        c = -r - t;
    } else if errors.1 > errors.2 {
        r = -c - t;
    }
    (c as i32, r as i32)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_centre_falls_into_its_own_pixel_and_the_nearest_centre_wins() {
        for shape in [PixelShape::Hexagonal, PixelShape::Square] {
            let camera = Camera::new(shape, 0.15, 4.0).unwrap();
            for (index, [x, y]) in camera.pixels.iter().enumerate() {
                assert_eq!(camera.pixel(*x, *y), Some(index));
                for &neighbour in camera.neighbours(index) {
                    let [u, v] = camera.pixels[neighbour as usize];
                    assert!(((u - x).hypot(v - y) - 0.15).abs() < 1e-5);
                }
            }
            for step in 0..2_000 {
                let (x, y) = ((step as f32 * 0.37).sin() * 1.7, (step as f32 * 0.61).cos() * 0.7);
                let nearest = (0..camera.pixels.len()).min_by(|&a, &b| {
                    let square = |i: usize| {
                        let [u, v] = camera.pixels[i];
                        (u - x).powi(2) + (v - y).powi(2)
                    };
                    square(a).total_cmp(&square(b))
                });
                assert_eq!(camera.pixel(x, y), nearest);
            }
        }
    }

    #[test]
    fn one_pixel_and_ten_thousand_pixels_are_cameras() {
        let one = Camera::new(PixelShape::Hexagonal, 1.0, 1.0).unwrap();
        assert_eq!((one.pixels.len(), one.neighbours(0).len()), (1, 0));
        let many = Camera::new(PixelShape::Hexagonal, 0.05, 5.3).unwrap();
        assert!((9_000..11_000).contains(&many.pixels.len()), "{}", many.pixels.len());
        assert!(Camera::new(PixelShape::Square, 0.001, 5.0).is_none());
    }
}
