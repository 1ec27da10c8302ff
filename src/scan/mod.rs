//! Rates of one array against its pixel thresholds, and the lowest quiet one.
//!
//! Margins are kept in photoelectrons, so that any threshold is a look-up: nothing here simulates.
//! An [`Array`] joins what showers do to its telescopes ([`ArrayEvents`]) with what the sky does to
//! them (accidental rates), in the array's coincidence window.

mod array;
mod events;
mod quiet;

pub use array::{Array, ArrayRates};
pub use events::ArrayEvents;
pub use quiet::{NotQuiet, QuietRule};
