//! Layouts: the array's vote over events, and an honest order between layouts.

pub mod ranking;
pub mod vote;

pub use ranking::{Ranked, rank};
pub use vote::at_least;
