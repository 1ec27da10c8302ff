//! How emitters of one age differ between primary energies: means by age, for the record.

use nalgebra::Vector3;
use nightpool::atmosphere::Atmosphere;
use nightpool::shower::calibrate::{maker::recorded_shower, shape::moments_fit};
use nightpool::shower::cascade::{CascadeSpecies, Cuts, Environment};

fn main() {
    let air = Atmosphere::us1976();
    let environment = Environment::new(&air, 0.0, Vector3::zeros(), Cuts::at_threshold(0.020));
    println!(
        "species,energy_gev,age,samples,mean_ln_energy,mean_angle_rad,median_offset_g_cm2,mean_lag_g_cm2,rms_angle_lever"
    );
    for species in [CascadeSpecies::Gamma, CascadeSpecies::Electron] {
        for (energy, showers) in [(10.0, 1500), (100.0, 300), (1000.0, 40), (10_000.0, 4)] {
            for age in [0.5, 0.8, 1.0, 1.2, 1.5] {
                let mut found = Vec::new();
                for shower in 0..showers {
                    let spacing = energy / 20.0;
                    let one =
                        recorded_shower(&environment, species, energy, 0.020, spacing, (9, shower));
                    let Some(fit) = moments_fit(&one.profile, one.start_g_cm2) else { continue };
                    let near = |depth: f64| (fit.age(depth) - age).abs() < 0.04;
                    found.extend(
                        one.samples.iter().filter(|s| near(s.depth_g_cm2)).map(|s| s.emitter),
                    );
                }
                let count = found.len() as f64;
                let mean = |f: &dyn Fn(usize) -> f64| (0..found.len()).map(f).sum::<f64>() / count;
                let mut offsets: Vec<f32> =
                    found.iter().map(|e| e.offset_g_cm2[0].hypot(e.offset_g_cm2[1])).collect();
                offsets.sort_by(f32::total_cmp);
                println!(
                    "{species:?},{energy},{age},{count},{:.3},{:.4},{:.3},{:.3},{:.5}",
                    mean(&|i| f64::from(found[i].energy_gev.ln())),
                    mean(&|i| f64::from(found[i].angle_rad[0].hypot(found[i].angle_rad[1]))),
                    offsets[offsets.len() / 2],
                    mean(&|i| f64::from(found[i].lag_g_cm2)),
                    mean(&|i| f64::from(found[i].angle_lever).powi(2)).sqrt(),
                );
            }
        }
    }
}
