//! The study file: read as TOML with the place of every key, then resolved and validated.
//!
//! [`Study::read`] either gives a study whose every number is finite and in range, or one
//! [`StudyError`] that names file, line, key, value and what is allowed.

mod resolved;

pub use resolved::{
    Air, AirProfile, Background, Budget, Engine, Exclusion, Kind, Layout, NightSky, PixelShape,
    Placed, Pointing, Ranking, Sensor, Site, SkyBrightness, Source, Spectrum, Study, Threshold,
    Topology,
};
