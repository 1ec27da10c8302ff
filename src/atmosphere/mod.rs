//! The air: profiles, depth, refractive index, extinction, slant geometry.

mod standard;

pub use standard::Atmosphere;
