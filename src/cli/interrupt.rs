//! What happens at Ctrl-C: nothing half-written is left behind, and a search keeps its best so far.

use std::sync::atomic::{AtomicBool, Ordering};

use super::Failure;
use crate::staging;

/// Exit code of an interrupted run, as shells count it: 128 + 2.
pub const INTERRUPTED: u8 = 130;

/// Whether a search is on that ends by itself soon after it is asked to stop.
static WAITS: AtomicBool = AtomicBool::new(false);
/// Set by the first interrupt of a search.
pub static STOP: AtomicBool = AtomicBool::new(false);

/// Ends the process at an interrupt, a hang-up or a request to terminate, with exit code 130 and
/// without hidden folders; during a search only the second time.
///
/// # Errors
/// [`Failure::Run`] if the system refuses.
pub fn watch() -> Result<(), Failure> {
    let handler = || {
        if WAITS.load(Ordering::SeqCst) && !STOP.swap(true, Ordering::SeqCst) {
            return;
        }
        staging::abandon();
        std::process::exit(INTERRUPTED.into());
    };
    ctrlc::set_handler(handler)
        .map_err(|error| Failure::Run(format!("interrupts cannot be caught: {error}")))
}

/// Says whether the first interrupt is to set [`STOP`] instead of ending the process.
pub fn wait(waits: bool) {
    WAITS.store(waits, Ordering::SeqCst);
}
