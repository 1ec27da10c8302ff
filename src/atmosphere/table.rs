//! Tabulated profiles: the CSV form of `atmospheres/*.csv` and of a user's own sounding.
//!
//! A header names the columns with their units; rows may come in any order. Needed: altitude
//! (`altitude_m`, `altitude_km`), pressure (`pressure_pa`, `pressure_hpa`) and temperature
//! (`temperature_k`, `temperature_c`). Water vapour (`water_vapour_ppmv`) may be missing. Other
//! columns, such as ozone, are read past.

use super::profile::{AtmosphereError, Level};
use super::refraction::{STANDARD_CO2_PPM, refractivity, standard_refractivity};
use crate::consts::GAS_CONSTANT_J_MOL_K;

/// Fewest and most rows of a profile.
const ROWS: (usize, usize) = (5, 100_000);
/// Largest gap between rows below 25 km, m.
const WIDEST_GAP_M: f64 = 6_000.0;
/// Highest altitude of the lowest row and lowest altitude of the highest row, m.
const ENDS_M: (f64, f64) = (6_000.0, 20_000.0);
const DRY_G_MOL: f64 = 28.964_4;
const WATER_G_MOL: f64 = 18.015;
const GRAVITY_M_S2: f64 = 9.806_65;

/// One row.
#[derive(Clone, Copy, Debug)]
struct Row {
    line: usize,
    altitude_m: f64,
    log_pressure: f64,
    temperature_k: f64,
    vapour_fraction: f64,
}

/// A profile as a function of altitude.
///
/// The logarithm of pressure, the temperature and the vapour fraction are straight lines between
/// rows; above the last row the air is isothermal and dry, below the first the lines go on.
#[derive(Clone, Debug)]
pub(super) struct Profile {
    rows: Vec<Row>,
}

impl Profile {
    /// Reads a profile; `name` is for messages.
    pub fn parse(name: &str, text: &str) -> Result<Self, AtmosphereError> {
        let wrong = |line: usize, problem: String| AtmosphereError::Row {
            name: name.to_owned(),
            line,
            problem,
        };
        let lines = text.lines().enumerate().map(|(index, line)| (index + 1, line.trim()));
        let mut content = lines.filter(|(_, line)| !line.is_empty() && !line.starts_with('#'));
        let (head, header) =
            content.next().ok_or_else(|| wrong(1, "the file has no header".into()))?;
        let columns = Columns::of(header).map_err(|problem| wrong(head, problem))?;
        let mut rows = Vec::new();
        for (line, text) in content {
            rows.push(columns.row(line, text).map_err(|problem| wrong(line, problem))?);
            if rows.len() > ROWS.1 {
                return Err(wrong(line, format!("more than {} rows", ROWS.1)));
            }
        }
        if rows.len() < ROWS.0 {
            return Err(wrong(
                head,
                format!("{} rows; at least {} are needed", rows.len(), ROWS.0),
            ));
        }
        rows.sort_by(|a, b| a.altitude_m.total_cmp(&b.altitude_m));
        check(&rows).map_err(|(line, problem)| wrong(line, problem))?;
        Ok(Self { rows })
    }

    /// The air at an altitude.
    pub fn level(&self, altitude_m: f64) -> Level {
        let last = self.rows.len() - 1;
        let top = self.rows[last];
        if altitude_m >= top.altitude_m {
            let weight = 1e-3 * DRY_G_MOL * GRAVITY_M_S2;
            let scale_m = GAS_CONSTANT_J_MOL_K * top.temperature_k / weight;
            let pressure = (top.log_pressure - (altitude_m - top.altitude_m) / scale_m).exp();
            return level(pressure, top.temperature_k, 0.0);
        }
        let upper = self.rows.partition_point(|row| row.altitude_m <= altitude_m).clamp(1, last);
        let (a, b) = (self.rows[upper - 1], self.rows[upper]);
        let share = (altitude_m - a.altitude_m) / (b.altitude_m - a.altitude_m);
        let mix = |x: f64, y: f64| x + share * (y - x);
        let vapour = mix(a.vapour_fraction, b.vapour_fraction).max(0.0);
        let temperature_k = mix(a.temperature_k, b.temperature_k);
        level(mix(a.log_pressure, b.log_pressure).exp(), temperature_k, vapour)
    }
}

/// The air of one pressure, temperature and molar fraction of water: an ideal gas of dry air and
/// water; the index as that of moist air at 400 nm over standard dry air.
fn level(pressure_pa: f64, temperature_k: f64, vapour: f64) -> Level {
    let molar = 1e-3 * ((1.0 - vapour) * DRY_G_MOL + vapour * WATER_G_MOL);
    let vapour_pa = vapour * pressure_pa;
    let index = refractivity(400.0, temperature_k, pressure_pa, vapour_pa, STANDARD_CO2_PPM);
    Level {
        temperature_k,
        pressure_pa,
        density_kg_m3: pressure_pa * molar / (GAS_CONSTANT_J_MOL_K * temperature_k),
        index_density: index / standard_refractivity(400.0, STANDARD_CO2_PPM),
    }
}

/// Where each quantity stands in a row, and what turns it into its unit.
struct Columns {
    altitude: (usize, f64),
    pressure: (usize, f64),
    temperature: (usize, f64),
    vapour: Option<usize>,
}

impl Columns {
    fn of(header: &str) -> Result<Self, String> {
        let names: Vec<&str> = header.split(',').map(str::trim).collect();
        let find = |known: &[(&str, f64)]| {
            let place = |(name, unit): &(&str, f64)| {
                names.iter().position(|found| found == name).map(|at| (at, *unit))
            };
            known.iter().find_map(place).ok_or_else(|| {
                let list: Vec<&str> = known.iter().map(|(name, _)| *name).collect();
                format!("the header has none of the columns {}", list.join(", "))
            })
        };
        Ok(Self {
            altitude: find(&[("altitude_m", 1.0), ("altitude_km", 1e3)])?,
            pressure: find(&[("pressure_pa", 1.0), ("pressure_hpa", 1e2)])?,
            temperature: find(&[("temperature_k", 0.0), ("temperature_c", 273.15)])?,
            vapour: names.iter().position(|name| *name == "water_vapour_ppmv"),
        })
    }

    fn row(&self, line: usize, text: &str) -> Result<Row, String> {
        let cells: Vec<&str> = text.split(',').map(str::trim).collect();
        let number = |at: usize| -> Result<f64, String> {
            let cell = cells.get(at).copied().unwrap_or("");
            let shown: String = cell.chars().take(24).collect();
            let parsed = cell.parse::<f64>().ok().filter(|value| value.is_finite());
            parsed.ok_or_else(|| format!("`{shown}` in column {} is no number", at + 1))
        };
        let within = |what: &str, value: f64, low: f64, high: f64| {
            if (low..=high).contains(&value) {
                Ok(value)
            } else {
                Err(format!("{what} is {value}; allowed: {low} to {high}"))
            }
        };
        let blank = |at: usize| cells.get(at).is_none_or(|cell| cell.is_empty());
        let vapour = self.vapour.filter(|at| !blank(*at)).map(number).transpose()?.unwrap_or(0.0);
        let altitude = number(self.altitude.0)? * self.altitude.1;
        let pressure = number(self.pressure.0)? * self.pressure.1;
        let temperature = number(self.temperature.0)? + self.temperature.1;
        Ok(Row {
            line,
            altitude_m: within("altitude in m", altitude, -500.0, 2e5)?,
            log_pressure: within("pressure in Pa", pressure, 1e-9, 1.2e5)?.ln(),
            temperature_k: within("temperature in K", temperature, 100.0, 1_200.0)?,
            vapour_fraction: 1e-6 * within("water vapour in ppmv", vapour, 0.0, 1e5)?,
        })
    }
}

/// Checks sorted rows against each other; an error carries its line.
fn check(rows: &[Row]) -> Result<(), (usize, String)> {
    for pair in rows.windows(2) {
        let (low, high) = (pair[0], pair[1]);
        let line = low.line.max(high.line);
        if high.altitude_m - low.altitude_m < 0.1 {
            return Err((line, format!("altitude {} m stands twice", high.altitude_m)));
        }
        if high.log_pressure >= low.log_pressure {
            return Err((line, format!("pressure does not fall up to {} m", high.altitude_m)));
        }
        if high.altitude_m - low.altitude_m > WIDEST_GAP_M && low.altitude_m < 25_000.0 {
            let (from, to) = (low.altitude_m, high.altitude_m);
            let problem =
                format!("gap from {from} to {to} m; at most {WIDEST_GAP_M} m below 25 km");
            return Err((line, problem));
        }
    }
    let (first, last) = (rows[0], rows[rows.len() - 1]);
    if first.altitude_m > ENDS_M.0 {
        return Err((first.line, format!("the profile starts above {} m", ENDS_M.0)));
    }
    if last.altitude_m < ENDS_M.1 {
        return Err((last.line, format!("the profile ends below {} m", ENDS_M.1)));
    }
    Ok(())
}
