//! The air: profile, depth, refractive index, extinction, slant geometry.

pub mod extinction;
pub mod profile;
pub mod refraction;
pub mod standard;
mod table;

pub use extinction::{Extinction, OpticalDepths};
pub use profile::{Atmosphere, AtmosphereError};
