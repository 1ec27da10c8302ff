//! The telescope: mirror, camera, sensor, night-sky noise and trigger.
//!
//! A threshold in photoelectrons is in units of the mean pulse height of one photoelectron after
//! shaping, above the mean (AC-coupled) baseline of the sky noise. Pixels are connected if they
//! share an edge; [`Topology`] says whether any connected shape counts or only compact groups.

pub mod accidental;
pub mod camera;
pub mod curve;
pub mod kind;
pub mod muon;
pub mod noise;
pub mod readout;
pub mod sky;
pub mod summary;
pub mod trigger;
pub mod waveform;

pub use accidental::{Accidental, QuietError};
pub use camera::{Camera, PixelShape};
pub use curve::{Curve, CurveError};
pub use kind::{KindError, TelescopeKind, Threshold};
pub use noise::Noise;
pub use readout::{ImageRecord, Quantum, Readout};
pub use sky::{Brightness, NightSky};
pub use summary::{ImagePoint, ImageSummary};
pub use trigger::Topology;
