//! Ozone of the US standard model, and its absorption.

use std::sync::LazyLock;

use super::standard;
use crate::consts::BOLTZMANN_J_K;
use crate::numerics::interpolation::linear_or_zero;

type Points = Vec<(f64, f64)>;

static CROSS_SECTION_CM2: LazyLock<Points> =
    LazyLock::new(|| rows(include_str!("data/ozone_cross_section.csv"), 1.0));
static STANDARD_PPMV: LazyLock<Points> =
    LazyLock::new(|| rows(include_str!("data/ozone_us_standard.csv"), 1e3));

fn rows(text: &str, scale: f64) -> Points {
    text.lines()
        .filter_map(|row| {
            let (x, y) = row.split_once(',')?;
            Some((scale * x.parse::<f64>().ok()?, y.parse().ok()?))
        })
        .collect()
}

/// Absorption cross-section of an ozone molecule, cm2; zero outside 250 to 900 nm.
///
/// Straight lines of its logarithm between the table's points: 5 %, as the table; measured at 295 K,
/// up to 30 % high beyond 320 nm for the cold ozone layer, where it hardly absorbs.
pub fn cross_section_cm2(wavelength_nm: f64) -> f64 {
    let points = CROSS_SECTION_CM2.as_slice();
    let upper = points.partition_point(|(x, _)| *x < wavelength_nm);
    if upper == 0 {
        return if points[0].0 == wavelength_nm { points[0].1 } else { 0.0 };
    }
    let Some(&(x1, y1)) = points.get(upper) else { return 0.0 };
    let (x0, y0) = points[upper - 1];
    y0 * (y1 / y0).powf((wavelength_nm - x0) / (x1 - x0))
}

/// Ozone of the US standard model, molecules per cm3: the mixing ratio of table 1f of Anderson et
/// al. 1986 in the air of the US Standard Atmosphere 1976.
pub fn standard_ozone_cm3(altitude_m: f64) -> f64 {
    let altitude = altitude_m.max(0.0);
    let ppmv = linear_or_zero(STANDARD_PPMV.as_slice(), altitude);
    let state = standard::state(altitude);
    1e-12 * ppmv * state.pressure_pa / (BOLTZMANN_J_K * state.temperature_k)
}
