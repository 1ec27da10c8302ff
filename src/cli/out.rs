//! Standard output that may be closed at any time.

use std::io::{self, ErrorKind, Write};

use super::Failure;

/// Writes a text to standard output; a reader that has gone away is no error.
///
/// # Errors
/// [`Failure::Run`] if standard output cannot be written for another reason.
pub fn print(text: &str) -> Result<(), Failure> {
    let mut out = io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() != ErrorKind::BrokenPipe => {
            Err(Failure::Run(format!("standard output cannot be written: {error}")))
        }
        _ => Ok(()),
    }
}
