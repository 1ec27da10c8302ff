//! The columns of a profile file: names with their units, and the numbers of a row.

use super::refraction::{saturation_vapour_pa, vapour_fraction};
use super::standard;

/// Molar masses of water and ozone over that of dry air.
const WATER: f64 = 18.015_28 / 28.964_4;
const OZONE: f64 = 47.998_2 / 28.964_4;
/// Zero of the Celsius scale, K.
const ICE_POINT_K: f64 = 273.15;
/// How far pressure may lie from the standard's at the same altitude, below this altitude.
const PRESSURE_FACTOR: f64 = 2.0;
const CHECKED_TO_M: f64 = 30_000.0;

/// One row, in SI units; altitude is geometric.
#[derive(Clone, Copy, Debug)]
pub(super) struct Row {
    /// Line of the file, from 1; 0 for a row that was added.
    pub line: usize,
    pub altitude_m: f64,
    pub log_pressure: f64,
    pub temperature_k: f64,
    /// Molar fraction of water, if the row gives it.
    pub vapour: Option<f64>,
    /// Molar fraction of ozone, if the row gives it.
    pub ozone: Option<f64>,
}

/// What a column's numbers mean.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Unit {
    /// SI is `factor * value + shift`.
    Linear(f64, f64),
    /// Geopotential altitude; metres are `factor * value`.
    Geopotential(f64),
    /// Relative humidity over liquid water; a fraction is `factor * value`.
    RelativeHumidity(f64),
    /// Dew point; kelvin is `value + shift`.
    DewPoint(f64),
    /// Partial pressure; pascal is `factor * value`.
    Partial(f64),
    /// Mass in a mass of moist air (`true`) or of dry air, of a gas of this relative molar mass.
    Mass { factor: f64, of_moist: bool, relative_molar_mass: f64 },
}

const fn plain(factor: f64) -> Unit {
    Unit::Linear(factor, 0.0)
}

const fn mass(factor: f64, of_moist: bool, relative_molar_mass: f64) -> Unit {
    Unit::Mass { factor, of_moist, relative_molar_mass }
}

const ALTITUDE: &[(&str, Unit)] = &[
    ("altitude_m", plain(1.0)),
    ("altitude_km", plain(1e3)),
    ("geopotential_height_m", Unit::Geopotential(1.0)),
    ("geopotential_height_km", Unit::Geopotential(1e3)),
    ("geopotential_m2_s2", Unit::Geopotential(1.0 / 9.806_65)),
];
const PRESSURE: &[(&str, Unit)] = &[("pressure_pa", plain(1.0)), ("pressure_hpa", plain(1e2))];
const TEMPERATURE: &[(&str, Unit)] =
    &[("temperature_k", plain(1.0)), ("temperature_c", Unit::Linear(1.0, ICE_POINT_K))];
const VAPOUR: &[(&str, Unit)] = &[
    ("water_vapour_ppmv", plain(1e-6)),
    ("relative_humidity_percent", Unit::RelativeHumidity(1e-2)),
    ("dew_point_k", Unit::DewPoint(0.0)),
    ("dew_point_c", Unit::DewPoint(ICE_POINT_K)),
    ("vapour_pressure_pa", Unit::Partial(1.0)),
    ("vapour_pressure_hpa", Unit::Partial(1e2)),
    ("specific_humidity_kg_kg", mass(1.0, true, WATER)),
    ("specific_humidity_g_kg", mass(1e-3, true, WATER)),
    ("mixing_ratio_g_kg", mass(1e-3, false, WATER)),
];
const OZONE_COLUMNS: &[(&str, Unit)] = &[
    ("ozone_ppmv", plain(1e-6)),
    ("ozone_kg_kg", mass(1.0, true, OZONE)),
    ("ozone_mpa", Unit::Partial(1e-3)),
];

/// Where each quantity stands in a row.
#[derive(Debug)]
pub(super) struct Columns {
    altitude: (usize, Unit),
    pressure: (usize, Unit),
    temperature: (usize, Unit),
    vapour: Option<(usize, Unit)>,
    ozone: Option<(usize, Unit)>,
}

impl Columns {
    /// Reads the header.
    pub fn of(header: &str) -> Result<Self, String> {
        let names: Vec<&str> = header.split(',').map(str::trim).collect();
        let find = |known: &[(&'static str, Unit)]| -> Result<Option<(usize, Unit)>, String> {
            let mut found = None::<(&str, (usize, Unit))>;
            for (at, name) in names.iter().enumerate() {
                let Some((known, unit)) = known.iter().find(|(known, _)| known == name) else {
                    continue;
                };
                if let Some((other, _)) = found {
                    return Err(format!("columns {other} and {known} say the same; keep one"));
                }
                found = Some((*known, (at, *unit)));
            }
            Ok(found.map(|(_, column)| column))
        };
        let needed = |known: &[(&'static str, Unit)]| {
            find(known)?.ok_or_else(|| {
                let list: Vec<&str> = known.iter().map(|(name, _)| *name).collect();
                format!("the header has none of the columns {}", list.join(", "))
            })
        };
        Ok(Self {
            altitude: needed(ALTITUDE)?,
            pressure: needed(PRESSURE)?,
            temperature: needed(TEMPERATURE)?,
            vapour: find(VAPOUR)?,
            ozone: find(OZONE_COLUMNS)?,
        })
    }

    /// Reads a row.
    pub fn row(&self, line: usize, text: &str) -> Result<Row, String> {
        let cells: Vec<&str> = text.split(',').map(str::trim).collect();
        let number = |at: usize| -> Result<f64, String> {
            let cell = cells.get(at).copied().unwrap_or("");
            let shown: String = cell.chars().take(24).flat_map(char::escape_debug).collect();
            let parsed = cell.parse::<f64>().ok().filter(|value| value.is_finite());
            parsed.ok_or_else(|| format!("`{shown}` in column {} is no number", at + 1))
        };
        let blank = |at: usize| cells.get(at).is_none_or(|cell| cell.is_empty());
        let wanted = |column: Option<(usize, Unit)>| {
            let column = column.filter(|(at, _)| !blank(*at));
            column.map(|(at, unit)| number(at).map(|value| (value, unit)))
        };
        let altitude = match (number(self.altitude.0)?, self.altitude.1) {
            (value, Unit::Geopotential(factor)) => standard::geometric_altitude_m(factor * value),
            (value, unit) => linear(value, unit),
        };
        let altitude_m = within("altitude in m", altitude, -500.0, 2e5, "")?;
        let pressure = linear(number(self.pressure.0)?, self.pressure.1);
        let pressure_pa = within("pressure in Pa", pressure, 1e-9, 1.2e5, "")?;
        near_standard(altitude_m, pressure_pa)?;
        let temperature = linear(number(self.temperature.0)?, self.temperature.1);
        let hint = "; is the column in the unit of its name (temperature_k, temperature_c)?";
        let (cold, hot) = if altitude_m < 60_000.0 { (150.0, 340.0) } else { (100.0, 1_200.0) };
        let temperature_k = within("temperature in K", temperature, cold, hot, hint)?;
        let fraction = |found: (f64, Unit)| fraction(found, temperature_k, pressure_pa);
        let vapour = wanted(self.vapour).transpose()?;
        if let Some((percent, Unit::RelativeHumidity(_))) = vapour {
            within("relative humidity in %", percent, 0.0, 120.0, "")?;
        }
        let vapour = vapour.map(fraction);
        let ozone = wanted(self.ozone).transpose()?.map(fraction);
        let vapour =
            vapour.map(|x| within("molar fraction of water", x, 0.0, 0.1, "")).transpose()?;
        let ozone =
            ozone.map(|x| within("molar fraction of ozone", x, 0.0, 1e-4, "")).transpose()?;
        let log_pressure = pressure_pa.ln();
        Ok(Row { line, altitude_m, log_pressure, temperature_k, vapour, ozone })
    }
}

fn linear(value: f64, unit: Unit) -> f64 {
    match unit {
        Unit::Linear(factor, shift) => factor * value + shift,
        _ => value,
    }
}

/// A molar fraction from what a column says.
fn fraction((value, unit): (f64, Unit), temperature_k: f64, pressure_pa: f64) -> f64 {
    match unit {
        Unit::Linear(..) => linear(value, unit),
        Unit::RelativeHumidity(factor) => {
            vapour_fraction(temperature_k, pressure_pa, factor * value)
        }
        Unit::DewPoint(shift) => saturation_vapour_pa(value + shift) / pressure_pa,
        Unit::Partial(factor) => factor * value / pressure_pa,
        Unit::Mass { factor, of_moist, relative_molar_mass: r } => {
            let q = factor * value;
            if of_moist { q / (r + q * (1.0 - r)) } else { q / (r + q) }
        }
        Unit::Geopotential(factor) => factor * value,
    }
}

fn within(what: &str, value: f64, low: f64, high: f64, hint: &str) -> Result<f64, String> {
    if (low..=high).contains(&value) {
        Ok(value)
    } else {
        Err(format!("{what} is {value}; allowed: {low} to {high}{hint}"))
    }
}

/// Refuses pressures that no weather gives: columns in another unit than their name says.
fn near_standard(altitude_m: f64, pressure_pa: f64) -> Result<(), String> {
    if altitude_m > CHECKED_TO_M {
        return Ok(());
    }
    let expected = standard::state(altitude_m).pressure_pa;
    if (expected / PRESSURE_FACTOR..=expected * PRESSURE_FACTOR).contains(&pressure_pa) {
        return Ok(());
    }
    Err(format!(
        "{pressure_pa:.1} Pa at {altitude_m:.1} m, where the standard has {expected:.0} Pa; more than a \
         factor {PRESSURE_FACTOR}: are altitude and pressure in the units of their columns' names?"
    ))
}
