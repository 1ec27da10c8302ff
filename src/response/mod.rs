//! The response table: simulated once, read again for every layout.
//!
//! Rows are events, one shower seen from one core position; columns are telescopes, a kind on a
//! pad. A cell is the trigger margin. Sixty-four events of one weight make a word: one primary
//! energy and one ring of impact distance, [`SHOWERS_PER_WORD`] independent showers at
//! [`CORES_PER_SHOWER`] cores each.

pub mod margin;
pub mod sample;
pub mod scene;
pub mod throw;

pub use sample::{Sample, Word};
pub use scene::{Column, Scene};
pub use throw::Throw;

/// Events in a word.
pub const EVENTS_PER_WORD: usize = 64;
/// Independent showers in a word.
pub const SHOWERS_PER_WORD: usize = 8;
/// Core positions of each of them.
pub const CORES_PER_SHOWER: usize = EVENTS_PER_WORD / SHOWERS_PER_WORD;
