//! Charts, as SVG for paper width (178 mm): Okabe-Ito colours, and dashes and markers beside them,
//! so that every curve can be told in grey.
//!
//! plotters' SVG backend rounds to whole pixels; everything is drawn at four times its size and
//! scaled by the view box.

mod air;
mod axes;
mod canvas;
mod curves;
mod map;
mod order;
mod pool;
mod scan;
mod site;
mod style;
mod thresholds;

pub use air::{AirCurve, air_chart};
pub use curves::{differential_rate_chart, effective_area_chart};
pub use map::layout_map_chart;
pub use order::ranking_chart;
pub use pool::{PoolPoint, footprint_chart, light_pool_chart, pool_chart};
pub use scan::scan_chart;
pub use site::site_map_chart;
pub use thresholds::threshold_chart;

/// Layouts that charts show in colour; the others are drawn pale, without a legend.
pub(crate) const SHOWN: usize = 6;
