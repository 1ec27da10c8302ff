//! Mathematics without physics: keyed random streams, interpolation, quadrature, roots.

pub mod interpolation;
pub mod quadrature;
pub mod stream;

pub use interpolation::{FallingInverse, UniformTable};
pub use stream::{Stage, Stream};
