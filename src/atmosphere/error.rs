//! What can be wrong with an atmosphere.

use std::path::PathBuf;

use thiserror::Error;

/// An atmosphere that cannot be had.
#[derive(Clone, Debug, Error, PartialEq)]
pub enum AtmosphereError {
    /// No profile of that name.
    #[error("unknown atmosphere `{name}`; known: {known}")]
    Unknown {
        /// What was asked for.
        name: String,
        /// The names there are.
        known: String,
    },
    /// A row of a table that is wrong.
    #[error("{name}, line {line}: {problem}")]
    Row {
        /// The table.
        name: String,
        /// Its line, from 1.
        line: usize,
        /// What is wrong.
        problem: String,
    },
    /// A seasonal model whose place or month is wrong.
    #[error("atmosphere `{name}`: {problem}; write {form}", form = super::seasonal::FORM)]
    Model {
        /// What was asked for.
        name: String,
        /// What is wrong.
        problem: String,
    },
    /// A file that cannot be read.
    #[error("{path}: {problem}")]
    File {
        /// The file.
        path: PathBuf,
        /// Why not.
        problem: String,
    },
}
