//! The light pool table of the report.

use rayon::prelude::*;

use crate::light::{LightModel, Pad, parts};
use crate::report::PoolRow;
use crate::shower::{Primary, Species};
use crate::study::Study;

use super::setup;

/// Showers behind each row.
const SHOWERS: u64 = 400;
const PRIMARIES: [(Species, f64); 4] = [
    (Species::Gamma, 100.0),
    (Species::Gamma, 1_000.0),
    (Species::Proton, 300.0),
    (Species::Proton, 1_000.0),
];

/// Mean photons across the axis by distance, for a few primaries, along the pointing.
///
/// Parts of a proton's core count at their distance from the main axis, averaged over azimuth.
pub fn rows(study: &Study, light: &LightModel) -> Vec<PoolRow> {
    let distances: Vec<f64> = (0..40).map(|step| 5.0 + 10.0 * f64::from(step)).collect();
    let photons = light.detectors() - 1;
    let developments = setup::developments();
    let mut rows = Vec::new();
    for (index, (species, energy_gev)) in PRIMARIES.into_iter().enumerate() {
        let primary = Primary { species, energy_gev, direction: setup::pointing(study) };
        let showers: Vec<Vec<f64>> = (0..SHOWERS)
            .into_par_iter()
            .map(|shower| {
                let mut stream = setup::table_stream(study, index as u64, shower);
                let axis = light.column.axis(primary.direction.zenith_rad);
                let mut sums = vec![0.0; distances.len()];
                for part in parts(&primary, light, &developments, &mut stream) {
                    let footprint = light.footprint(&axis, &part.development);
                    for (sum, distance) in sums.iter_mut().zip(&distances) {
                        *sum += azimuth_mean(light, &footprint, photons, *distance, part.offset_m);
                    }
                }
                sums
            })
            .collect();
        for (place, &distance_m) in distances.iter().enumerate() {
            let values = showers.iter().map(|sums| sums[place]);
            let mean = values.clone().sum::<f64>() / SHOWERS as f64;
            let variance =
                values.map(|value| (value - mean).powi(2)).sum::<f64>() / (SHOWERS - 1) as f64;
            rows.push(PoolRow {
                primary: species.to_string(),
                energy_gev,
                distance_m,
                photons_m2: mean,
                error_m2: (variance / SHOWERS as f64).sqrt(),
                spread_m2: variance.sqrt(),
                kind: String::new(),
                photoelectrons: f64::NAN,
            });
        }
    }
    rows
}

/// The mean over eight azimuths about the main axis of the light of a part that lands off it.
fn azimuth_mean(
    light: &LightModel,
    footprint: &crate::light::Footprint,
    detector: usize,
    distance_m: f64,
    offset_m: [f64; 2],
) -> f64 {
    let turns = if offset_m == [0.0; 2] && !light.has_field() { 1 } else { 8 };
    let sum: f64 = (0..turns)
        .map(|turn| {
            let azimuth = core::f64::consts::TAU * f64::from(turn) / f64::from(turns);
            let x = distance_m * azimuth.cos() - offset_m[0];
            let y = distance_m * azimuth.sin() - offset_m[1];
            let pad = Pad { distance_m: x.hypot(y), azimuth_rad: y.atan2(x), rise_m: 0.0 };
            light.density_m2(footprint, detector, &pad)
        })
        .sum();
    sum / f64::from(turns)
}
