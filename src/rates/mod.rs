//! From triggered events to effective areas, rates and thresholds, each with its error.
//!
//! Everything is computed from words and a plane, one u64 of trigger bits a word. Errors come from
//! words, groups of 64 events that share showers, never from single events.

pub mod area;
pub mod dead_time;
pub mod edge;
pub mod geomagnetic;
pub mod rate;
pub mod spectrum;
pub mod threshold;

pub use area::{EnergyBin, differential_rates, effective_areas};
pub use dead_time::{dead_fraction, recorded_rate_hz};
pub use edge::{angle_rates_hz, beyond_fraction, edge_fraction, ring_rates_hz};
pub use geomagnetic::{dipole_latitude_rad, vertical_cutoff_gv};
pub use rate::{Estimate, event_rates, median_energy_gev, rate, rate_hz, rate_sum_hz, word_rates};
pub use spectrum::{Spectrum, SpectrumError, Term};
pub use threshold::threshold_gev;
