//! Cherenkov light: yield, emission angle, ground density, arrival.

pub mod cherenkov;
