//! Makes the fast engine's tables from the reference cascade.
//!
//! `recorder` samples the states of charged particles along their tracks; `shape` fits one shower's
//! longitudinal profile; `maker` runs showers and gathers both;
//! `showers` records the library of profiles; `files` writes what ships.

pub mod files;
pub mod maker;
pub mod recorder;
pub mod shape;
pub mod showers;

pub use maker::{Calibration, CalibrationSettings, DevelopmentRow};
pub use showers::LibraryShower;
