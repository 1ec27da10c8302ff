//! The light stage against limits and itself.

use nightpool::atmosphere::Atmosphere;
use nightpool::light::{Detector, LightModel, LightSettings, Pad};
use nightpool::numerics::{Stage, Stream};
use nightpool::shower::profile::hillas::{self, Spread};
use nightpool::shower::profile::longitudinal::Development;

#[test]
fn print_pool() {
    let air = Atmosphere::us1976();
    let start = std::time::Instant::now();
    let table = hillas::table(Spread::FULL, 4000, 1);
    println!("table {:?}", start.elapsed());
    let transmission = |h: f64, z: f64, w: f64| air.transmission(h, 2200.0, z, w);
    let start = std::time::Instant::now();
    let model = LightModel::new(
        &LightSettings {
            atmosphere: &air,
            transmission: &transmission,
            observer_altitude_m: 2200.0,
            zenith_rad: 0.0,
            transverse_field_ut: 0.0,
            emitters: &table,
            slabs: 40,
        },
        &[Detector { name: "band", band_nm: (300.0, 600.0), efficiency: &|_| 1.0 }],
    );
    println!("model {:?}", start.elapsed());
    let axis = model.column.axis(0.0);
    for energy in [30.0, 100.0, 1000.0, 10000.0] {
        let showers = 300;
        let start = std::time::Instant::now();
        let prints: Vec<_> = (0..showers)
            .map(|i| {
                let mut stream = Stream::keyed(1, Stage::Shower, &[i]);
                let first = Development::photon_start_g_cm2(&mut stream);
                model.footprint(&axis, &Development::draw(energy, first, &mut stream))
            })
            .collect();
        println!("{energy}: footprint {:?}", start.elapsed() / showers as u32);
        let mut disc = (0.0, 0.0);
        for r in [
            2.5, 7.5, 15., 25., 45., 65., 85., 95., 105., 110., 115., 120., 125., 135., 145., 165.,
            175., 205., 255., 295., 500., 800.,
        ] {
            let pad = Pad { distance_m: r, azimuth_rad: 0.0, rise_m: 0.0 };
            let values: Vec<f64> = prints.iter().map(|f| model.density_m2(f, 0, &pad)).collect();
            let mean = values.iter().sum::<f64>() / values.len() as f64;
            let rms = (values.iter().map(|v| (v - mean).powi(2)).sum::<f64>()
                / values.len() as f64)
                .sqrt();
            println!("{r:6.1} {mean:10.3} {rms:9.3}");
        }
        for k in 0..24 {
            let r = 5.0 * k as f64 + 2.5;
            let pad = Pad { distance_m: r, azimuth_rad: 0.0, rise_m: 0.0 };
            let mean = prints.iter().map(|f| model.density_m2(f, 0, &pad)).sum::<f64>()
                / prints.len() as f64;
            disc.0 += mean * r;
            disc.1 += r;
        }
        println!("disc mean {}", disc.0 / disc.1);
    }
}
