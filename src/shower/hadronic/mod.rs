//! The hadronic core of a shower: nucleons and pions followed one by one, neutral pions handed on.
//!
//! A planner's generator: scaling distributions held to published spectrum-weighted moments. The
//! first pass makes pions only (kaons, a tenth of the mesons, are counted as pions) and follows no
//! muons, whose light is missing from the background.

pub mod cross_section;
pub mod generator;
pub mod transport;

pub use transport::{Axis, Core, EmParticle, core};
