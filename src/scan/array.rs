//! One array: showers and sky together.

use crate::layout::coincidence::Window;
use crate::rates::Estimate;
use crate::response::margin::threshold_code;
use crate::telescope::Accidental;
use crate::telescope::accidental::array_rate_hz;

use super::events::ArrayEvents;

/// An array of telescopes under one sky.
#[derive(Clone, Debug)]
pub struct Array {
    /// What showers do to it.
    pub events: ArrayEvents,
    /// Kind of each member.
    pub kinds: Vec<usize>,
    /// Accidental triggers by kind.
    pub accidental: Vec<Accidental>,
    /// Telescopes that must fire.
    pub least: usize,
    /// Within this time of each other, ns.
    pub window_ns: f64,
}

/// Rates of an array at some thresholds.
#[derive(Clone, Debug, PartialEq)]
pub struct ArrayRates {
    /// Upward crossings of one pixel by kind, Hz.
    pub pixel_hz: Vec<f64>,
    /// Accidental triggers of one telescope by kind, Hz.
    pub accidental_hz: Vec<f64>,
    /// Shower triggers of one telescope by kind, the mean of the array's telescopes of that kind.
    pub shower_hz: Vec<Estimate>,
    /// Accidental coincidences of the array, Hz.
    pub array_accidental_hz: f64,
    /// Shower triggers of the array within its window, those included that an accidental trigger
    /// completes.
    pub array_shower_hz: Estimate,
}

impl Array {
    /// Rates with a pixel threshold by kind, photoelectrons.
    ///
    /// # Validity
    /// Accidental rates are those of rare triggers (see [`Accidental`] and [`array_rate_hz`]):
    /// upper bounds that run away where a telescope's rate times the window nears one.
    pub fn rates(&self, thresholds_pe: &[f64]) -> ArrayRates {
        let each = |of: fn(&Accidental, f64) -> f64| -> Vec<f64> {
            self.accidental.iter().zip(thresholds_pe).map(|(law, pe)| of(law, *pe)).collect()
        };
        let accidental_hz = each(Accidental::rate_hz);
        let noise_hz: Vec<f64> = self.kinds.iter().map(|&kind| accidental_hz[kind]).collect();
        let array_accidental_hz = array_rate_hz(&noise_hz, self.least, self.window_ns);
        let window = Window { least: self.least, length_ns: self.window_ns, noise_hz };
        let least: Vec<_> =
            self.kinds.iter().map(|&kind| threshold_code(thresholds_pe[kind])).collect();
        let showers = self.events.rates(&least, &self.kinds, thresholds_pe.len(), &window);
        ArrayRates {
            pixel_hz: each(Accidental::pixel_rate_hz),
            accidental_hz,
            shower_hz: showers.telescope,
            array_accidental_hz,
            array_shower_hz: showers.array,
        }
    }
}
