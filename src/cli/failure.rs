//! How a command ends when it does not end well.

use std::process::ExitCode;

use crate::report::ReportError;
use crate::study::StudyError;

/// A message and the exit code that goes with it.
#[derive(Clone, Debug)]
pub enum Failure {
    /// Wrong arguments or input: exit code 2.
    Input(String),
    /// The run itself failed: exit code 1.
    Run(String),
    /// Interrupted, after what could be kept was written: exit code 130.
    Interrupted(String),
}

impl Failure {
    /// Writes the message to standard error and gives the exit code.
    pub fn report(&self) -> ExitCode {
        use std::io::Write;
        let (Self::Input(message) | Self::Run(message) | Self::Interrupted(message)) = self;
        // Nobody is left to tell if standard error is closed.
        let _ = writeln!(std::io::stderr(), "error: {message}");
        match self {
            Self::Input(_) => ExitCode::from(2),
            Self::Run(_) => ExitCode::from(1),
            Self::Interrupted(_) => ExitCode::from(super::interrupt::INTERRUPTED),
        }
    }
}

impl From<StudyError> for Failure {
    fn from(error: StudyError) -> Self {
        Self::Input(error.to_string())
    }
}

impl From<ReportError> for Failure {
    fn from(error: ReportError) -> Self {
        if error.is_input() { Self::Input(error.to_string()) } else { Self::Run(error.to_string()) }
    }
}
