//! Quantities written with their unit on the command line: `1TeV`, `20deg`, `2200m`, `300nm`.

use thiserror::Error;

/// A quantity that could not be read.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum QuantityError {
    /// The text does not begin with a finite number.
    #[error("`{0}` is not a number followed by a unit, such as {1}")]
    NotANumber(String, &'static str),
    /// The number has no unit, or one of another dimension.
    #[error("`{text}`: unit `{unit}` does not fit {quantity}; write one of {allowed}")]
    WrongUnit {
        /// What was written.
        text: String,
        /// The unit found, empty if none.
        unit: String,
        /// What was asked for.
        quantity: &'static str,
        /// The units that fit.
        allowed: String,
    },
}

/// One dimension: its name, an example, and the units that fit with their factors.
struct Dimension {
    quantity: &'static str,
    example: &'static str,
    units: &'static [(&'static str, f64)],
}

impl Dimension {
    fn parse(&self, text: &str) -> Result<f64, QuantityError> {
        let trimmed = text.trim();
        let split = unit_start(trimmed);
        let (number, unit) = (trimmed[..split].trim(), trimmed[split..].trim());
        let value: f64 = number
            .parse()
            .ok()
            .filter(|value: &f64| value.is_finite())
            .ok_or_else(|| QuantityError::NotANumber(text.to_owned(), self.example))?;
        let factor = self.units.iter().find(|(name, _)| *name == unit).map(|(_, factor)| factor);
        factor.map(|factor| value * factor).ok_or_else(|| QuantityError::WrongUnit {
            text: text.to_owned(),
            unit: unit.to_owned(),
            quantity: self.quantity,
            allowed: self.units.iter().map(|(name, _)| *name).collect::<Vec<_>>().join(", "),
        })
    }
}

/// Where the unit begins: after the longest prefix that reads as a number.
fn unit_start(text: &str) -> usize {
    let mut ends = text.char_indices().map(|(index, _)| index).chain([text.len()]).rev();
    ends.find(|&end| text[..end].trim().parse::<f64>().is_ok()).unwrap_or(0)
}

macro_rules! quantity {
    ($(#[$doc:meta])* $name:ident, $quantity:literal, $example:literal, $units:expr) => {
        $(#[$doc])*
        ///
        /// # Errors
        /// [`QuantityError`] if the text is no finite number followed by a unit that fits.
        pub fn $name(text: &str) -> Result<f64, QuantityError> {
            Dimension { quantity: $quantity, example: $example, units: &$units }.parse(text)
        }
    };
}

quantity!(
    /// Reads a length or altitude, in metres.
    length_m, "a length", "2200m", [("m", 1.0), ("km", 1e3)]
);
quantity!(
    /// Reads a wavelength, in nanometres.
    wavelength_nm, "a wavelength", "400nm", [("nm", 1.0), ("um", 1e3)]
);
quantity!(
    /// Reads an energy, in GeV.
    energy_gev, "an energy", "1TeV", [("MeV", 1e-3), ("GeV", 1.0), ("TeV", 1e3), ("PeV", 1e6)]
);
quantity!(
    /// Reads an angle, in radians.
    angle_rad, "an angle", "20deg", [("deg", core::f64::consts::PI / 180.0), ("rad", 1.0), ("mrad", 1e-3)]
);
quantity!(
    /// Reads a magnetic field component, in microtesla.
    field_ut, "a magnetic field", "20uT", [("uT", 1.0), ("nT", 1e-3), ("G", 100.0)]
);

/// Reads a wavelength band `300nm..600nm`, in nanometres.
///
/// # Errors
/// [`QuantityError`] if it is not two rising wavelengths joined by `..`.
pub fn band_nm(text: &str) -> Result<(f64, f64), QuantityError> {
    let wrong = || QuantityError::NotANumber(text.to_owned(), "300nm..600nm");
    let (low, high) = text.split_once("..").ok_or_else(wrong)?;
    let (low, high) = (wavelength_nm(low)?, wavelength_nm(high)?);
    if low > 0.0 && high > low { Ok((low, high)) } else { Err(wrong()) }
}

/// Degrees to radians.
#[inline]
pub const fn radians(degrees: f64) -> f64 {
    degrees * (core::f64::consts::PI / 180.0)
}

/// Radians to degrees.
#[inline]
pub const fn degrees(radians: f64) -> f64 {
    radians * (180.0 / core::f64::consts::PI)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn quantities_carry_their_unit() {
        assert_eq!(length_m("11km"), Ok(11_000.0));
        assert_eq!(energy_gev(" 1.5 TeV"), Ok(1_500.0));
        assert_eq!(energy_gev("1e3GeV"), Ok(1_000.0));
        assert_eq!(band_nm("300nm..0.6um"), Ok((300.0, 600.0)));
        assert!((angle_rad("180deg").unwrap() - core::f64::consts::PI).abs() < 1e-15);
    }

    #[test]
    fn wrong_or_missing_units_and_numbers_are_refused() {
        for text in ["12", "12deg", "km", "NaNm", "infm", "1e400m", "", "é12m"] {
            assert!(length_m(text).is_err(), "{text}");
        }
        assert!(band_nm("600nm..300nm").is_err());
    }
}
