//! Curves by wavelength: efficiencies, reflectivities, radiances.

use std::path::Path;

use thiserror::Error;

use crate::numerics::interpolation::linear_or_zero;

/// A curve file that could not be read.
#[derive(Debug, Error)]
pub enum CurveError {
    /// Neither a built-in name nor a readable file.
    #[error(
        "`{name}` is neither one of the built-in curves ({known}) nor a readable file: {cause}"
    )]
    Unknown {
        /// What was asked for.
        name: String,
        /// The built-in names.
        known: &'static str,
        /// Why the file could not be read.
        cause: String,
    },
    /// A row that is wrong.
    #[error("{name}, line {line}: {problem}")]
    Row {
        /// The file.
        name: String,
        /// One-based line.
        line: usize,
        /// What is wrong with it.
        problem: String,
    },
}

/// Points of a curve by rising wavelength, joined by straight lines, zero outside.
#[derive(Clone, Debug, PartialEq)]
pub struct Curve {
    points: Vec<(f64, f64)>,
}

const KNOWN: &str = "bialkali, super-bialkali, silicon, aluminium-quartz, dark-sky";

impl Curve {
    /// A built-in curve, or a CSV file with columns `wavelength_nm,value`.
    ///
    /// # Errors
    /// [`CurveError`] if there is no such curve or a row is wrong.
    pub fn named(name: &str) -> Result<Self, CurveError> {
        let built_in = match name {
            "bialkali" => include_str!("data/bialkali.csv"),
            "super-bialkali" => include_str!("data/super_bialkali.csv"),
            "silicon" => include_str!("data/silicon.csv"),
            "aluminium-quartz" => include_str!("data/aluminium_quartz.csv"),
            "dark-sky" => include_str!("data/dark_sky.csv"),
            path => {
                let text = std::fs::read_to_string(Path::new(path)).map_err(|cause| {
                    CurveError::Unknown {
                        name: path.into(),
                        known: KNOWN,
                        cause: cause.to_string(),
                    }
                })?;
                return Self::parse(path, &text);
            }
        };
        Self::parse(name, built_in)
    }

    /// The same value at all wavelengths between two, nm.
    pub fn constant(value: f64, band_nm: (f64, f64)) -> Self {
        Self { points: vec![(band_nm.0, value), (band_nm.1, value)] }
    }

    fn parse(name: &str, text: &str) -> Result<Self, CurveError> {
        let wrong = |line: usize, problem: &str| CurveError::Row {
            name: name.into(),
            line: line + 1,
            problem: problem.into(),
        };
        let mut points: Vec<(f64, f64)> = Vec::new();
        for (line, row) in text.lines().enumerate() {
            let row = row.trim();
            if row.is_empty() || row.starts_with('#') || row == "wavelength_nm,value" {
                continue;
            }
            let pair = row.split_once(',').and_then(|(x, y)| {
                Some((x.trim().parse::<f64>().ok()?, y.trim().parse::<f64>().ok()?))
            });
            let (x, y) = pair.ok_or_else(|| wrong(line, "expected two numbers `nm,value`"))?;
            if !(x.is_finite() && y.is_finite() && x > 0.0 && y >= 0.0) {
                return Err(wrong(line, "wavelength must be positive and value not negative"));
            }
            if points.last().is_some_and(|(last, _)| *last >= x) {
                return Err(wrong(line, "wavelengths must rise"));
            }
            points.push((x, y));
        }
        if points.len() < 2 {
            return Err(wrong(0, "a curve needs two points"));
        }
        Ok(Self { points })
    }

    /// The value at a wavelength.
    pub fn value(&self, wavelength_nm: f64) -> f64 {
        linear_or_zero(&self.points, wavelength_nm)
    }

    /// First and last wavelength, nm.
    pub fn span_nm(&self) -> (f64, f64) {
        (self.points[0].0, self.points[self.points.len() - 1].0)
    }

    /// The largest value.
    pub fn peak(&self) -> f64 {
        self.points.iter().map(|(_, value)| *value).fold(0.0, f64::max)
    }
}
