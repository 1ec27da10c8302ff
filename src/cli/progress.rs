//! A progress bar on standard error.

use std::io::IsTerminal;

use indicatif::{ProgressBar, ProgressStyle};

use crate::plan::Progress;

/// A bar on standard error; nothing if that is no terminal or the user wants quiet.
pub struct Bar(ProgressBar);

impl Bar {
    /// A bar, shown or not.
    pub fn new(quiet: bool) -> Self {
        if quiet || !std::io::stderr().is_terminal() {
            return Self(ProgressBar::hidden());
        }
        let style = ProgressStyle::with_template("{msg:24} {bar:32} {pos}/{len}  {eta} left")
            .unwrap_or_else(|_| ProgressStyle::default_bar());
        Self(ProgressBar::new(0).with_style(style))
    }

    /// Removes the bar.
    pub fn clear(&self) {
        self.0.finish_and_clear();
    }
}

impl Progress for Bar {
    fn stage(&self, name: &str, total: u64) {
        self.0.reset();
        self.0.set_length(total);
        self.0.set_message(name.to_owned());
    }

    fn advance(&self, steps: u64) {
        self.0.inc(steps);
    }
}
