//! From triggered events to effective areas, rates and thresholds, each with its error.
//!
//! Errors come from words, groups of 64 events that share showers, never from single events.

pub mod area;
pub mod rate;
pub mod spectrum;
pub mod threshold;

pub use area::{EnergyBin, effective_areas};
pub use rate::{Estimate, rate_hz, word_rates};
pub use spectrum::{Spectrum, SpectrumError};
pub use threshold::threshold_gev;
