//! `nightpool` plans arrays of imaging air-shower telescopes.
//!
//! One direction of flow, a module a stage:
//!
//! ```text
//! study -> atmosphere -> shower -> light -> telescope -> response -> rates -> layout -> scan -> report
//! ```

pub mod atmosphere;
pub mod cli;
pub mod consts;
pub mod layout;
pub mod light;
pub mod numerics;
pub mod plan;
pub mod rates;
pub mod report;
pub mod response;
pub mod scan;
pub mod shower;
pub mod site;
pub mod staging;
pub mod study;
pub mod telescope;
pub mod units;
