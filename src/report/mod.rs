//! What a plan found, and small writers around it: one file per output.

mod result;

pub use result::{
    Approximation, AreaRow, Counter, KindRow, LayoutMap, LayoutRow, Model, PlacedTelescope,
    PlanResult, PoolRow, Provenance, RateRow, SiteSummary,
};
