//! A seasonal atmosphere for a place and a month, from an empirical model.

use nrlmsise00::{Input, MagneticActivity, Model};

use super::columns::Row;
use super::error::AtmosphereError;
use super::profile::TOP_M;
use super::table::Profile;
use crate::consts::BOLTZMANN_J_K;

/// How a seasonal atmosphere is asked for.
pub const FORM: &str = "model:LATITUDE,LONGITUDE,MONTH in degrees north and east and 1 to 12, \
                        such as model:-23.3,16.5,7";

/// Day of the year of the middle of each month.
const MIDDLE: [i32; 12] = [15, 46, 74, 105, 135, 166, 196, 227, 258, 288, 319, 349];
/// Solar flux at 10.7 cm and magnetic index: middling; without effect below 80 km.
const SOLAR_FLUX: f64 = 150.0;
const MAGNETIC_AP: f64 = 4.0;
const SECONDS_PER_DEGREE: f64 = 240.0;

/// The mean air of a month at local midnight: a dry profile every 500 m to 30 km, every 1 km above.
///
/// Temperature and number density by NRLMSISE-00; pressure of an ideal gas. A climatology: single
/// nights differ by several percent, the model from monthly means by 1 to 3 % below 30 km. It has no
/// water vapour and no ozone (the US standard's is used).
///
/// # Source
/// Picone, Hedin, Drob & Aikin 2002, J. Geophys. Res. 107(A12), 1468; test
/// `validate_seasonal_air_reference_library`.
pub(super) fn profile(name: &str, latitude_deg: f64, longitude_deg: f64, month: u8) -> Profile {
    let model = Model::new();
    let day = MIDDLE[usize::from(month) - 1];
    let midnight_s = (-longitude_deg * SECONDS_PER_DEGREE).rem_euclid(86_400.0);
    let row = |altitude_m: f64| {
        let magnetic = MagneticActivity::Daily { ap: MAGNETIC_AP };
        let air = model.gtd7::<f64>(&Input {
            day_of_year: day,
            seconds_of_day: midnight_s,
            altitude_km: 1e-3 * altitude_m,
            latitude_deg,
            longitude_deg,
            local_solar_time_h: 0.0,
            f107_average: SOLAR_FLUX,
            f107: SOLAR_FLUX,
            magnetic,
        });
        let molecules = air.helium
            + air.atomic_oxygen
            + air.molecular_nitrogen
            + air.molecular_oxygen
            + air.argon
            + air.hydrogen
            + air.atomic_nitrogen;
        Row {
            line: 0,
            altitude_m,
            log_pressure: (molecules * BOLTZMANN_J_K * air.temperature).ln(),
            temperature_k: air.temperature,
            vapour: None,
            ozone: None,
        }
    };
    let low = (0..60).map(|index| 500.0 * f64::from(index));
    let high = (30..=(1e-3 * TOP_M) as i32).map(|km| 1e3 * f64::from(km));
    let rows = low.chain(high).map(row).collect();
    Profile::new(rows).unwrap_or_else(|(_, problem)| unreachable!("{name}: {problem}"))
}

/// Reads `LATITUDE,LONGITUDE,MONTH`.
pub(super) fn parse(name: &str, text: &str) -> Result<(f64, f64, u8), AtmosphereError> {
    let wrong = |problem: String| AtmosphereError::Model { name: name.to_owned(), problem };
    let parts: Vec<&str> = text.split(',').map(str::trim).collect();
    let [latitude, longitude, month] = parts[..] else {
        return Err(wrong(format!("{} numbers instead of three", parts.len())));
    };
    let number = |what: &str, text: &str, low: f64, high: f64| {
        let value: Option<f64> = text.parse().ok();
        let fits = value.filter(|value| (low..=high).contains(value));
        fits.ok_or_else(|| wrong(format!("{what} `{text}` is not a number from {low} to {high}")))
    };
    let latitude = number("latitude", latitude, -90.0, 90.0)?;
    let longitude = number("longitude", longitude, -180.0, 360.0)?;
    let whole: Option<u8> = month.parse().ok().filter(|month| (1..=12).contains(month));
    let month = whole.ok_or_else(|| wrong(format!("month `{month}` is not from 1 to 12")))?;
    Ok((latitude, longitude, month))
}
