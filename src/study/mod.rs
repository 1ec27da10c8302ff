//! The study file: read as TOML with the place of every key, then resolved and validated.
//!
//! [`Study::read`] either gives a study whose every number is finite and in range, or one
//! [`StudyError`] that names file, line, key, value and what is allowed.

mod candidates;
mod costs;
mod error;
mod file;
mod ground;
mod instruments;
mod reader;
mod resolved;
mod sky;
mod suggestion;

pub use error::StudyError;
pub use file::MOST_BYTES;
pub use resolved::{
    Air, ArrayTrigger, Background, Budget, Engine, Exclusion, Layout, Moonlight, Placed, Pointing,
    Ranking, Recording, Robustness, Scan, Site, Source, Spectrum, Study,
};
