//! The light pool table of the report.

use core::f64::consts::TAU;

use rayon::prelude::*;

use crate::light::{LightModel, ShowerLight, View, parts};
use crate::report::{PoolReach, PoolRow};
use crate::shower::{Primary, Species};
use crate::study::Study;

use super::setup;

/// Showers behind each row.
const SHOWERS: u64 = 400;
/// Azimuths about the axis.
const TURNS: u32 = 8;
const PRIMARIES: [(Species, f64); 4] = [
    (Species::Gamma, 100.0),
    (Species::Gamma, 1_000.0),
    (Species::Proton, 300.0),
    (Species::Proton, 1_000.0),
];

/// How far the light of a gamma ray of some energy reaches on the ground.
pub fn reach(study: &Study, light: &LightModel, energy_gev: f64) -> PoolReach {
    let rows = of_primaries(study, light, &[(Species::Gamma, energy_gev)]);
    let within = rows.iter().filter(|row| row.distance_m < 100.0);
    let (sum, count) = within.fold((0.0, 0), |(sum, n), row| (sum + row.photons_m2, n + 1));
    let inner = sum / f64::from(count.max(1));
    // Where the density falls below a share of that inside 100 m for the last time.
    let radius = |share: f64| {
        let place = rows.windows(2).rposition(|pair| pair[0].photons_m2 >= share * inner);
        place.map_or(f64::NAN, |place| {
            let (a, b) = (&rows[place], &rows[place + 1]);
            let fraction = (a.photons_m2 - share * inner) / (a.photons_m2 - b.photons_m2);
            a.distance_m + fraction.clamp(0.0, 1.0) * (b.distance_m - a.distance_m)
        })
    };
    PoolReach { energy_gev, inner_photons_m2: inner, half_m: radius(0.5), tenth_m: radius(0.1) }
}

/// Mean photons across the axis by distance, for a few primaries, along the pointing.
pub fn rows(study: &Study, light: &LightModel) -> Vec<PoolRow> {
    of_primaries(study, light, &PRIMARIES)
}

/// Averaged over eight azimuths about the axis.
fn of_primaries(study: &Study, light: &LightModel, primaries: &[(Species, f64)]) -> Vec<PoolRow> {
    let distances: Vec<f64> = (0..40).map(|step| 5.0 + 10.0 * f64::from(step)).collect();
    let photons = light.detectors() - 1;
    let developments = setup::developments();
    let (field_ut, pointing) = (setup::field_ut(study), setup::pointing(study));
    let (across, along) = pointing.transverse();
    let mut rows = Vec::new();
    for (index, &(species, energy_gev)) in primaries.iter().enumerate() {
        let primary = Primary { species, energy_gev, direction: pointing };
        let showers: Vec<Vec<f64>> = (0..SHOWERS)
            .into_par_iter()
            .map(|shower| {
                let mut stream = setup::table_stream(study, index as u64, shower);
                let made = parts(&primary, field_ut, light, &developments, &mut stream);
                let shower = ShowerLight::new(light, primary.direction, field_ut, made);
                let mut view = View::default();
                let mean = |distance_m: &f64| {
                    let density = |turn: u32| {
                        let (sin, cos) = (TAU * f64::from(turn) / f64::from(TURNS)).sin_cos();
                        shower.view(
                            photons,
                            &((across * cos + along * sin) * *distance_m),
                            &mut view,
                        );
                        view.density_m2
                    };
                    (0..TURNS).map(density).sum::<f64>() / f64::from(TURNS)
                };
                distances.iter().map(mean).collect()
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
