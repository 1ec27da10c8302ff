//! The table on disk.
