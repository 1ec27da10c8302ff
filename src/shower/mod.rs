//! Showers: primaries, first interaction, the fast profile engine and the reference cascade.

pub mod calibrate;
pub mod cascade;
pub mod hadronic;
pub mod primary;
pub mod profile;

pub use primary::{Direction, Primary, Species};
