//! The hadronic core of a shower: nucleons, pions, kaons and muons followed one by one, photons and
//! electrons handed on.
//!
//! `particle` lists the kinds; `cross_section` says how far they fly; `generator` draws one
//! interaction, its energies from `sharing`; `decay` and `muon` do what their names say;
//! `transport` joins them. A planner's generator, held to published moments, multiplicities,
//! attenuation lengths and muon spectra (`tests/validation/hadronic.rs`).

pub mod cross_section;
pub mod decay;
pub mod generator;
pub mod muon;
pub mod particle;
pub mod sharing;
pub mod transport;

pub use generator::Interaction;
pub use muon::{MuonNode, MuonTrack};
pub use particle::{Kind, Secondary};
pub use transport::{Axis, Core, EmParticle, Flight, Floors, core, core_of};
