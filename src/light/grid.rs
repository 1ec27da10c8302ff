//! The grid of distances from the shower axis on which light densities are tabulated.

/// Number of bins: 5 m wide to 200 m, then growing by 5.9 % each to 2,000 m.
pub const BINS: usize = LINEAR_BINS + LOG_BINS;
/// Distance beyond which no density is tabulated, m.
pub const REACH_M: f64 = 2_000.0;

const LINEAR_BINS: usize = 40;
const LOG_BINS: usize = 40;
const LINEAR_END_M: f64 = 200.0;
const LINEAR_STEP_M: f64 = LINEAR_END_M / LINEAR_BINS as f64;

/// Lower edge of bin `index`, m; `index` may be [`BINS`] for the last upper edge.
pub fn edge_m(index: usize) -> f64 {
    if index <= LINEAR_BINS {
        LINEAR_STEP_M * index as f64
    } else {
        LINEAR_END_M * 10.0_f64.powf((index - LINEAR_BINS) as f64 / LOG_BINS as f64)
    }
}

/// Place of a distance on the grid in units of bins: the integer part is the bin.
#[inline]
pub fn place(distance_m: f64) -> f64 {
    if distance_m < LINEAR_END_M {
        distance_m / LINEAR_STEP_M
    } else {
        LINEAR_BINS as f64 + LOG_BINS as f64 * (distance_m / LINEAR_END_M).log10()
    }
}

/// The place of a distance times `1 + stretch`, from the place of the distance; exact below 200 m
/// and to first order in the stretch beyond.
#[inline]
pub fn shifted(place: f64, stretch: f64) -> f64 {
    if place < LINEAR_BINS as f64 {
        place * (1.0 + stretch)
    } else {
        place + LOG_BINS as f64 * core::f64::consts::LOG10_E * stretch
    }
}

/// The two bin centres around a distance and the weight of the second, for linear interpolation;
/// held at the first centre below 2.5 m, `None` beyond the reach.
#[inline]
pub fn bracket(distance_m: f64) -> Option<(usize, usize, f32)> {
    bracket_of(place(distance_m))
}

/// The same for a place on the grid.
#[inline]
pub fn bracket_of(place: f64) -> Option<(usize, usize, f32)> {
    let place = place - 0.5;
    if place >= (BINS - 1) as f64 {
        return None;
    }
    let place = place.max(0.0);
    let low = place as usize;
    Some((low, low + 1, (place - low as f64) as f32))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn places_and_edges_agree() {
        for index in 0..BINS {
            let middle = 0.5 * (edge_m(index) + edge_m(index + 1));
            assert_eq!(place(middle) as usize, index, "{middle}");
        }
        assert!((edge_m(BINS) / REACH_M - 1.0).abs() < 1e-12);
        assert_eq!(bracket(0.0), Some((0, 1, 0.0)));
        assert_eq!(bracket(3_000.0), None);
    }
}
