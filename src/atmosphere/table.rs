//! Tabulated profiles: the CSV form of `atmospheres/*.csv` and of a user's own sounding.
//!
//! A header names the columns with their units; rows may come in any order; lines that start with
//! `#` are comments. Needed: altitude (`altitude_m`, `altitude_km`, `geopotential_height_m`,
//! `geopotential_m2_s2`), pressure (`pressure_pa`, `pressure_hpa`) and temperature (`temperature_k`,
//! `temperature_c`). Water vapour (`water_vapour_ppmv`, `relative_humidity_percent`, `dew_point_c`,
//! `vapour_pressure_hpa`, `specific_humidity_kg_kg`, `mixing_ratio_g_kg`, ...) and ozone
//! (`ozone_ppmv`, `ozone_kg_kg`, `ozone_mpa`) may be missing, as columns or in single rows. Other
//! columns are read past.

use super::columns::{Columns, Row};
use super::error::AtmosphereError;
use super::ozone::standard_ozone_cm3;
use super::profile::{Level, TOP_M};
use super::refraction::density_ratios;
use super::standard::{self, gravity_m_s2};
use crate::consts::{BOLTZMANN_J_K, GAS_CONSTANT_J_MOL_K};

/// Fewest and most rows of a profile.
const ROWS: (usize, usize) = (5, 100_000);
/// Largest gap between rows below 25 km, m.
const WIDEST_GAP_M: f64 = 6_000.0;
/// Highest altitude of the lowest row and lowest altitude of the highest row, m.
const ENDS_M: (f64, f64) = (6_000.0, 20_000.0);
/// Molar masses, kg/mol.
const DRY_KG_MOL: f64 = 28.964_4e-3;
const WATER_KG_MOL: f64 = 18.015_28e-3;
/// Above the last row temperature and ozone approach the standard's with this scale, m, and vapour
/// vanishes with the scale of the lower air (common practice, no source).
const RETURN_M: f64 = 10_000.0;
const VAPOUR_SCALE_M: f64 = 2_000.0;
/// Lapse rate below the first row, K/m: that of the standard.
const LAPSE_K_M: f64 = 6.5e-3;
/// Step of the continuation above the last row, m.
const STEP_M: f64 = 1_000.0;

/// A profile as a function of altitude.
///
/// Between rows temperature is a straight line and pressure its hydrostatic power law, so that each
/// pair of rows is a layer of constant lapse rate; fractions of vapour and ozone are straight lines.
/// Above the last row temperature returns to the US standard's with a scale of 10 km and pressure
/// follows hydrostatically, so that density has no step; below the first, the standard lapse rate.
#[derive(Clone, Debug)]
pub(super) struct Profile {
    rows: Vec<Row>,
    has_ozone: bool,
}

impl Profile {
    /// Reads a profile; `name` is for messages.
    pub fn parse(name: &str, text: &str) -> Result<Self, AtmosphereError> {
        let wrong = |line: usize, problem: String| AtmosphereError::Row {
            name: name.to_owned(),
            line,
            problem,
        };
        let text = text.strip_prefix('\u{feff}').unwrap_or(text);
        let lines = text.lines().enumerate().map(|(index, line)| (index + 1, line.trim()));
        let mut content = lines.filter(|(_, line)| !line.is_empty() && !line.starts_with('#'));
        let (head, header) =
            content.next().ok_or_else(|| wrong(1, "the file has no header".into()))?;
        let columns = Columns::of(header).map_err(|problem| wrong(head, problem))?;
        let mut rows = Vec::new();
        for (line, text) in content {
            if rows.len() == ROWS.1 {
                return Err(wrong(line, format!("more than {} rows; thin the profile", ROWS.1)));
            }
            rows.push(columns.row(line, text).map_err(|problem| wrong(line, problem))?);
        }
        if rows.len() < ROWS.0 {
            return Err(wrong(
                head,
                format!("{} rows; at least {} are needed", rows.len(), ROWS.0),
            ));
        }
        Self::new(rows).map_err(|(line, problem)| wrong(line, problem))
    }

    /// A profile of rows in any order; an error carries its line.
    pub fn new(mut rows: Vec<Row>) -> Result<Self, (usize, String)> {
        rows.sort_by(|a, b| a.altitude_m.total_cmp(&b.altitude_m));
        check(&rows)?;
        let has_ozone = rows.iter().any(|row| row.ozone.is_some());
        fill(&mut rows, |row| &mut row.vapour);
        fill(&mut rows, |row| &mut row.ozone);
        extend_down(&mut rows);
        extend_up(&mut rows);
        Ok(Self { rows, has_ozone })
    }

    /// The air at an altitude.
    pub fn level(&self, altitude_m: f64) -> Level {
        let last = self.rows.len() - 1;
        let upper = self.rows.partition_point(|row| row.altitude_m <= altitude_m).clamp(1, last);
        let (a, b) = (self.rows[upper - 1], self.rows[upper]);
        let share = (altitude_m - a.altitude_m) / (b.altitude_m - a.altitude_m);
        let mix = |x: f64, y: f64| x + share * (y - x);
        let temperature_k = mix(a.temperature_k, b.temperature_k);
        // The hydrostatic power law; its limit for a small lapse is the straight line.
        let rise = b.temperature_k / a.temperature_k - 1.0;
        let way = if rise.abs() < 1e-9 { share } else { (share * rise).ln_1p() / rise.ln_1p() };
        let pressure_pa = (a.log_pressure + way * (b.log_pressure - a.log_pressure)).exp();
        let molecules_cm3 = 1e-6 * pressure_pa / (BOLTZMANN_J_K * temperature_k);
        let part =
            |a: Option<f64>, b: Option<f64>| mix(a.unwrap_or(0.0), b.unwrap_or(0.0)).max(0.0);
        let ozone_cm3 = if self.has_ozone {
            part(a.ozone, b.ozone) * molecules_cm3
        } else {
            standard_ozone_cm3(altitude_m)
        };
        level(pressure_pa, temperature_k, part(a.vapour, b.vapour), ozone_cm3)
    }
}

/// The air of one pressure, temperature, molar fraction of water and ozone: an ideal gas.
fn level(pressure_pa: f64, temperature_k: f64, vapour: f64, ozone_cm3: f64) -> Level {
    let molar = (1.0 - vapour) * DRY_KG_MOL + vapour * WATER_KG_MOL;
    let (dry_index, vapour_index) = density_ratios(temperature_k, pressure_pa, vapour);
    Level {
        temperature_k,
        pressure_pa,
        density_kg_m3: pressure_pa * molar / (GAS_CONSTANT_J_MOL_K * temperature_k),
        dry_index,
        vapour_index,
        ozone_cm3,
    }
}

/// Fills in what single rows leave out: a straight line between the rows that have it, constant
/// below the first of them; above the last it is left out.
fn fill(rows: &mut [Row], place: impl Fn(&mut Row) -> &mut Option<f64>) {
    let mut known: Vec<(usize, f64)> = Vec::new();
    for (index, row) in rows.iter_mut().enumerate() {
        if let Some(value) = *place(row) {
            known.push((index, value));
        }
    }
    let Some(&(first, value)) = known.first() else { return };
    for row in &mut rows[..first] {
        *place(row) = Some(value);
    }
    for pair in known.windows(2) {
        let ((low, a), (high, b)) = (pair[0], pair[1]);
        let (from, to) = (rows[low].altitude_m, rows[high].altitude_m);
        for row in &mut rows[low + 1..high] {
            let share = (row.altitude_m - from) / (to - from);
            *place(row) = Some(a + share * (b - a));
        }
    }
}

/// Logarithm of the fall of pressure between two altitudes with temperatures along a straight line,
/// in air of one vapour fraction.
fn fall(from: (f64, f64), to: (f64, f64), vapour: f64) -> f64 {
    let molar = (1.0 - vapour) * DRY_KG_MOL + vapour * WATER_KG_MOL;
    let gravity = gravity_m_s2(0.5 * (from.0 + to.0));
    let rise = to.1 / from.1 - 1.0;
    let mean = if rise.abs() < 1e-9 { from.1 } else { from.1 * rise / rise.ln_1p() };
    molar * gravity * (to.0 - from.0) / (GAS_CONSTANT_J_MOL_K * mean)
}

/// Adds a row a kilometre above the last one up to the top of the tables.
fn extend_up(rows: &mut Vec<Row>) {
    let last = rows[rows.len() - 1];
    let above = |fraction: &dyn Fn(&Row) -> Option<f64>| {
        let row = rows.iter().rev().find(|row| fraction(row).is_some())?;
        Some((row.altitude_m, fraction(row)?))
    };
    let (vapour, ozone) = (above(&|row| row.vapour), above(&|row| row.ozone));
    let standard_ozone = |z: f64| {
        let state = standard::state(z.max(0.0));
        1e6 * standard_ozone_cm3(z) * BOLTZMANN_J_K * state.temperature_k / state.pressure_pa
    };
    let vapour_at =
        |z: f64| vapour.map(|(from, x)| x * (-(z - from).max(0.0) / VAPOUR_SCALE_M).exp());
    let ozone_at = |z: f64| {
        let (from, x) = ozone?;
        let away = (x - standard_ozone(from)) * (-(z - from).max(0.0) / RETURN_M).exp();
        Some((standard_ozone(z) + away).max(0.0))
    };
    for row in rows.iter_mut() {
        row.vapour = row.vapour.or_else(|| vapour_at(row.altitude_m));
        row.ozone = row.ozone.or_else(|| ozone_at(row.altitude_m));
    }
    let away_k = last.temperature_k - standard::state(last.altitude_m.max(0.0)).temperature_k;
    let mut below = last;
    while below.altitude_m < TOP_M {
        let altitude_m = below.altitude_m + STEP_M;
        let faded = (-(altitude_m - last.altitude_m) / RETURN_M).exp();
        let temperature_k = standard::state(altitude_m).temperature_k + away_k * faded;
        let (from, to) = ((below.altitude_m, below.temperature_k), (altitude_m, temperature_k));
        let vapour = vapour_at(altitude_m);
        below = Row {
            line: 0,
            altitude_m,
            log_pressure: below.log_pressure - fall(from, to, vapour.unwrap_or(0.0)),
            temperature_k,
            vapour,
            ozone: ozone_at(altitude_m),
        };
        rows.push(below);
    }
}

/// Adds one row at 500 m below the sea.
fn extend_down(rows: &mut Vec<Row>) {
    let first = rows[0];
    let altitude_m = super::profile::BOTTOM_M - 1.0;
    let temperature_k = first.temperature_k + LAPSE_K_M * (first.altitude_m - altitude_m);
    let (from, to) = ((altitude_m, temperature_k), (first.altitude_m, first.temperature_k));
    let fall = fall(from, to, first.vapour.unwrap_or(0.0));
    rows.insert(
        0,
        Row {
            line: 0,
            altitude_m,
            log_pressure: first.log_pressure + fall,
            temperature_k,
            ..first
        },
    );
}

/// Checks sorted rows against each other; an error carries its line.
fn check(rows: &[Row]) -> Result<(), (usize, String)> {
    for pair in rows.windows(2) {
        let (low, high) = (pair[0], pair[1]);
        let (line, other) = (low.line.max(high.line), low.line.min(high.line));
        let (from, to) = (low.altitude_m, high.altitude_m);
        if to - from < 0.1 {
            return Err((line, format!("altitude {to} m stands twice, also in line {other}")));
        }
        if high.log_pressure >= low.log_pressure {
            let problem =
                format!("pressure does not fall from {from} to {to} m (see line {other})");
            return Err((line, problem));
        }
        if to - from > WIDEST_GAP_M && from < 25_000.0 {
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
