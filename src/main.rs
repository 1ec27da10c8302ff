//! The `nightpool` command.

fn main() {}
