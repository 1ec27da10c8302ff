//! What can be wrong with a layout.

use thiserror::Error;

/// A layout, a file of layouts or a search that cannot be used.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum LayoutError {
    /// Two telescopes too close.
    #[error("telescopes {first} and {second} stand {distance_m:.2} m apart; at least {least_m} m")]
    TooClose {
        /// One of them.
        first: usize,
        /// The other.
        second: usize,
        /// Distance on the ground, m.
        distance_m: f64,
        /// Least distance, m.
        least_m: f64,
    },
    /// A telescope where none may stand.
    #[error("telescope {index} at {x_m:.1} m east, {y_m:.1} m north stands {place}")]
    Ground {
        /// Which telescope.
        index: usize,
        /// East, m.
        x_m: f64,
        /// North, m.
        y_m: f64,
        /// Outside the boundary or inside which exclusion.
        place: String,
    },
    /// More than the budget.
    #[error("cost {cost} is over the budget {budget}")]
    Budget {
        /// Its cost.
        cost: f64,
        /// The budget.
        budget: f64,
    },
    /// A condition no event can meet, or that every event meets.
    #[error("condition asks for {least} of {telescopes} telescopes; write 1 to {telescopes}")]
    Condition {
        /// Telescopes asked for.
        least: usize,
        /// Telescopes there are.
        telescopes: usize,
    },
    /// A file of layouts that cannot be read.
    #[error("GeoJSON: {0}")]
    Geography(String),
    /// No layout satisfies the constraints of a search.
    #[error("no layout of {telescopes} telescopes fits the constraints of the search")]
    Impossible {
        /// Telescopes asked for.
        telescopes: usize,
    },
}
