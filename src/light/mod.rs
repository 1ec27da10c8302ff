//! Cherenkov light: yield, emission angle, ground density, arrival.
//!
//! `cherenkov` is the Frank-Tamm law; `column` cuts the air above the observer into slabs and
//! says what each slab's light is worth to a detector; `kernel` says where light of a slab lands
//! and where it came from; `footprint` adds the slabs of one shower and hands out photoelectrons.

pub mod cherenkov;
pub mod collect;
pub mod column;
pub mod footprint;
pub mod grid;
pub mod kernel;
pub mod muon_light;
pub mod parts;
pub mod shower_light;

pub use column::{AxisPath, Column, Detector};
pub use footprint::{Footprint, LightModel, LightSettings, Pad};
pub use parts::parts;
pub use shower_light::{Part, Photoelectron, ShowerLight, ShowerParts, View};
