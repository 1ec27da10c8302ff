//! What a plan found, and small writers around it: one file per output.
//!
//! [`PlanResult`] is plain data. Every writer takes it and gives the bytes of one file; only
//! [`write_all`] touches the disk, all files at once.

pub mod charts;
mod checks;
pub mod figures;
mod found;
mod geography;
mod hazards;
mod page;
mod provenance;
mod result;
mod stage;
mod tables;
mod thresholds;

pub use checks::{direction_table, finalist_table, order_table, scan_table, source_table};
pub use found::{build_up_table, found_files, front_table};
pub use geography::layouts_geojson;
pub use hazards::HAZARDS;
pub use page::page;
pub use provenance::{ranking_json, run_json};
pub use result::{
    Approximation, AreaRow, Counter, DirectionRow, FinalistRow, FoundRow, KindRow, LayoutMap,
    LayoutRow, Model, OrderChange, OrderRow, PlacedTelescope, PlanResult, PoolReach, PoolRow,
    PrimaryRow, Provenance, RateRow, ScanRow, SiteSummary, SourceRow, StageRow,
};
pub use stage::{ReportError, check_destination, files, write_all, write_files};
pub use tables::{Table, effective_area_table, light_pool_table, ranking_table, rate_table};
pub use thresholds::{SkyLevelRow, ThresholdRow, ThresholdScan, sky_level_table};
