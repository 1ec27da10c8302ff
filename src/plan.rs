//! The plan: from a study to a ranked result.

use thiserror::Error;

use crate::report::PlanResult;
use crate::study::Study;

/// A plan that could not be made.
#[derive(Debug, Error)]
pub enum PlanError {
    /// The study asks for something that this version cannot do.
    #[error("{0}")]
    Unsupported(String),
    /// No layout had a single trigger: there is nothing to compare.
    #[error("{0}")]
    Empty(String),
}

/// How far a long computation has come.
pub trait Progress: Sync {
    /// A new stage of `total` steps begins.
    fn stage(&self, name: &str, total: u64);
    /// Some steps are done.
    fn advance(&self, steps: u64);
}

/// No display.
impl Progress for () {
    fn stage(&self, _: &str, _: u64) {}
    fn advance(&self, _: u64) {}
}

/// Simulates a study and ranks its layouts.
///
/// # Errors
/// [`PlanError`].
pub fn plan(study: &Study, progress: &dyn Progress) -> Result<PlanResult, PlanError> {
    let _ = (study, progress);
    Err(PlanError::Unsupported("the simulation is not joined to the plan yet".into()))
}
