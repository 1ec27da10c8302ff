//! The fast engine's showers: longitudinal development, and the states of the light emitters.
//!
//! A shower is a line in depth, `longitudinal`, drawn from a `library` of showers, times the distribution of the charged particles
//! that emit light at each age, `emitters`, which is universal to a few percent.

pub mod emitters;
pub mod hillas;
pub mod library;
pub mod longitudinal;
pub mod shipped;

pub use emitters::{Emitter, EmitterNode, EmitterTable};
pub use longitudinal::{Development, GaisserHillas};
pub use shipped::DevelopmentTable;
