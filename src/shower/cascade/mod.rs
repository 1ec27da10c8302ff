//! The reference engine: electromagnetic cascades in the layered atmosphere, particle by particle.
//!
//! `particle` says what goes in and comes out; `material` is dry air; `pair`, `bremsstrahlung`,
//! `compton`, `collisions` and `scattering` are the interactions; `rates` tabulates their totals;
//! `transport` moves particles. Units inside are GeV, m, g/cm2 and ns.

pub mod air;
pub mod bremsstrahlung;
pub mod collisions;
pub mod compton;
pub mod material;
pub mod pair;
pub mod particle;
mod photon;
pub mod rates;
pub mod scattering;
pub mod transport;
mod vertex;

pub use particle::{CascadeParticle, CascadeSpecies, Cuts, Ledger, NoSink, TrackSink, TrackStep};
pub use transport::{Environment, transport};
