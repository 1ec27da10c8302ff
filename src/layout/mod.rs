//! Layouts: candidates, what they cost, how they score, an honest order, and the search.
//!
//! Everything here reads bits and columns; nothing is simulated. A telescope is a column: a kind
//! on a pad with one bit an event. A layout is a set of columns and a [`Condition`].

pub mod axes;
pub mod candidate;
pub mod coincidence;
pub mod comparison;
pub mod condition;
pub mod constraint;
pub mod cost;
pub mod error;
pub mod events;
pub mod generator;
pub mod geodetic;
pub mod geography;
mod lanes;
pub mod score;
pub mod search;
pub mod stages;

pub use candidate::{Candidate, Member};
pub use comparison::{Compared, Comparison, Resampling};
pub use condition::{Clause, Condition};
pub use constraint::Constraints;
pub use cost::Tariff;
pub use error::LayoutError;
pub use events::Planes;
pub use score::{Objective, Problem, at_least};
pub use search::{Found, Settings, search};
