//! The air: profile, depth, refractive index, extinction, slant geometry.
//!
//! | file | what |
//! |---|---|
//! | `standard`, `thermosphere` | the US Standard Atmosphere 1976 below and above 86 km |
//! | `table`, `columns` | profiles in files |
//! | `seasonal` | profiles by latitude, longitude and month |
//! | `profile` | [`Atmosphere`]: any of them as functions of altitude |
//! | `refraction` | index by wavelength, humidity, carbon dioxide |
//! | `slant` | inclined paths on a spherical Earth; why rays are straight here |
//! | `extinction`, `ozone`, `lookup` | transmission, and a table of it |

mod columns;
mod error;
pub mod extinction;
mod lookup;
pub mod ozone;
mod profile;
pub mod refraction;
pub mod seasonal;
pub mod slant;
pub mod standard;
mod table;
pub mod thermosphere;

pub use error::AtmosphereError;
pub use extinction::{Extinction, OpticalDepths};
pub use lookup::TransmissionTable;
pub use profile::Atmosphere;
