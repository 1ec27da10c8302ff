//! The two engines side by side: mean light density by distance, and its shower-to-shower RMS.

use nalgebra::Vector3;
use nightpool::atmosphere::Atmosphere;
use nightpool::light::collect::{PoolRequest, pool_density};
use nightpool::light::{Detector, LightModel, LightSettings, Pad};
use nightpool::numerics::{Stage, Stream};
use nightpool::shower::cascade::CascadeSpecies;
use nightpool::shower::profile::{DevelopmentTable, EmitterTable};
use nightpool::shower::{Direction, Primary, Species};

const DISTANCES_M: [f64; 8] = [15.0, 45.0, 85.0, 110.0, 130.0, 175.0, 255.0, 400.0];

fn band() -> Detector<'static> {
    Detector { name: "band", band_nm: (300.0, 600.0), efficiency: &|_| 1.0 }
}

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let air = Atmosphere::us1976();
    let table = EmitterTable::shipped()?;
    let development = DevelopmentTable::shipped()?;
    println!(
        "energy_gev,observer_m,zenith_deg,field_ut,distance_m,cascade_m2,error_m2,profile_m2,ratio,cascade_rms,profile_rms"
    );
    for (energy, observer, zenith_deg, field, showers) in [
        (100.0, 2200.0, 0.0_f64, 0.0, 300),
        (100.0, 2200.0, 0.0, 40.0, 300),
        (1000.0, 2200.0, 0.0, 0.0, 60),
        (100.0, 5000.0, 0.0, 0.0, 200),
        (300.0, 2200.0, 45.0, 0.0, 120),
        (20.0, 2200.0, 0.0, 0.0, 800),
    ] {
        let direction = Direction { zenith_rad: zenith_deg.to_radians(), azimuth_rad: 0.0 };
        let pool = pool_density(&PoolRequest {
            primary: Primary { species: Species::Gamma, energy_gev: energy, direction },
            atmosphere: &air,
            transmission: &|_, _, _| 1.0,
            observer_altitude_m: observer,
            field_ut: Vector3::new(field, 0.0, 0.0),
            detector: band(),
            distances_m: &DISTANCES_M,
            bearing_rad: None,
            showers,
            seed: 3,
        });
        let model = LightModel::new(
            &LightSettings {
                atmosphere: &air,
                transmission: &|_, _, _| 1.0,
                observer_altitude_m: observer,
                zenith_rad: direction.zenith_rad,
                transverse_field_ut: field,
                emitters: &table,
                slabs: 40,
            },
            &[band()],
        );
        let axis = model.column.axis(direction.zenith_rad);
        let count = 1500;
        let prints: Vec<_> = (0..count)
            .map(|shower| {
                let mut stream = Stream::keyed(1, Stage::Shower, &[shower]);
                let start = development.photon_start_g_cm2(energy, &mut stream);
                let drawn = development.draw(CascadeSpecies::Gamma, energy, start, &mut stream);
                model.footprint(&axis, &drawn)
            })
            .collect();
        for (distance_m, cascade) in DISTANCES_M.into_iter().zip(pool.summary()) {
            let turns = if field > 0.0 { 16 } else { 1 };
            let density = |print| {
                (0..turns)
                    .map(|turn| {
                        let azimuth_rad =
                            core::f64::consts::TAU * (f64::from(turn) + 0.5) / f64::from(turns);
                        let pad = Pad { distance_m, azimuth_rad, rise_m: 0.0 };
                        model.density_m2(print, 0, &pad)
                    })
                    .sum::<f64>()
                    / f64::from(turns)
            };
            let values: Vec<f64> = prints.iter().map(density).collect();
            let mean = values.iter().sum::<f64>() / count as f64;
            let square = values.iter().map(|value| (value - mean).powi(2)).sum::<f64>();
            println!(
                "{energy},{observer},{zenith_deg},{field},{distance_m},{:.3},{:.3},{mean:.3},{:.3},{:.3},{:.3}",
                cascade[0],
                cascade[1],
                mean / cascade[0],
                cascade[2],
                (square / count as f64).sqrt(),
            );
        }
    }
    Ok(())
}
