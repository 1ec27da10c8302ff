//! Why a table cannot be used.

use std::path::PathBuf;

use thiserror::Error;

/// A response table that cannot be put together, written or read.
#[derive(Debug, Error)]
pub enum TableError {
    /// There is no table.
    #[error("{}: no response table here", path.display())]
    Missing {
        /// The folder.
        path: PathBuf,
    },
    /// A file could not be opened, read, written or renamed.
    #[error("{}: {source}", path.display())]
    Io {
        /// The file.
        path: PathBuf,
        /// What the system said.
        source: std::io::Error,
    },
    /// A file is shorter or longer than what was written.
    #[error("{}: truncated: {found} bytes instead of {expected}", path.display())]
    Truncated {
        /// The file.
        path: PathBuf,
        /// Bytes there are.
        found: u64,
        /// Bytes there were.
        expected: u64,
    },
    /// A file's bytes are not those that were written.
    #[error("{}: corrupted: {what}", path.display())]
    Corrupted {
        /// The file.
        path: PathBuf,
        /// What is wrong.
        what: String,
    },
    /// The table belongs to something else.
    #[error("{}: foreign: {what} is {found}, this study's is {expected}", path.display())]
    Foreign {
        /// The file.
        path: PathBuf,
        /// What differs.
        what: &'static str,
        /// In the file.
        found: String,
        /// In this study.
        expected: String,
    },
    /// The table was made by another version.
    #[error("{}: outdated: {what} {found}, this program writes {expected}", path.display())]
    Outdated {
        /// The file.
        path: PathBuf,
        /// Which version.
        what: &'static str,
        /// In the file.
        found: String,
        /// Of this program.
        expected: String,
    },
    /// The table holds events that this program would simulate otherwise.
    #[error("{}: outdated: this program simulates other {species} events", path.display())]
    Unlike {
        /// The folder.
        path: PathBuf,
        /// The primary.
        species: String,
    },
    /// Parts that do not make a whole.
    #[error("parts of the {species} sample do not fit together: {what}")]
    Parts {
        /// The primary.
        species: String,
        /// What is wrong.
        what: String,
    },
    /// The table library refused.
    #[error("{}: {source}", path.display())]
    Parquet {
        /// The file.
        path: PathBuf,
        /// What it said.
        source: polars::error::PolarsError,
    },
}
