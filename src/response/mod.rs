//! The response table: simulated once, read again for every layout.
//!
//! Rows are events, one shower seen from one core position; columns are telescopes, a kind on a
//! pad. A cell is the trigger margin and, above a floor, the image's summary. Sixty-four events of
//! one weight make a word: one primary energy and one ring of impact distance,
//! [`SHOWERS_PER_WORD`] independent showers at [`CORES_PER_SHOWER`] cores each.

pub mod cascade;
pub mod error;
pub mod image;
pub mod margin;
pub mod pad;
pub mod reuse;
pub mod sample;
pub mod scene;
pub mod store;
pub mod table;
pub mod throw;

pub use cascade::CascadeLight;
pub use error::TableError;
pub use image::{CellImage, IMAGE_FLOOR_PE};
pub use pad::PadKey;
pub use sample::{Sample, Word};
pub use scene::{Column, Scene, WordCells};
pub use table::{ResponseTable, TableBuilder, TableStamp};
pub use throw::{Throw, Thrown};

/// Events in a word.
pub const EVENTS_PER_WORD: usize = 64;
/// Independent showers in a word.
pub const SHOWERS_PER_WORD: usize = 8;
/// Core positions of each of them.
pub const CORES_PER_SHOWER: usize = EVENTS_PER_WORD / SHOWERS_PER_WORD;
