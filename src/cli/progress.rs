//! A progress bar with the time left, on a terminal only.

use std::io::IsTerminal;

use indicatif::{ProgressBar, ProgressStyle};

/// The bar of one run; shows nothing in a pipe or where quiet was asked for.
pub(super) struct Bar(ProgressBar);

impl Bar {
    pub(super) fn new(quiet: bool) -> Self {
        if quiet || !std::io::stderr().is_terminal() {
            return Self(ProgressBar::hidden());
        }
        let bar = ProgressBar::new(0);
        let style = ProgressStyle::with_template("{wide_bar} {pos} of {len} replicates, {eta} left")
            .expect("the template is well formed");
        bar.set_style(style);
        Self(bar)
    }

    /// Shows `done` of `planned` replicates; where no number is planned, only how many are done.
    pub(super) fn show(&self, done: u32, planned: Option<u32>) {
        match planned {
            Some(planned) => self.0.set_length(u64::from(planned)),
            None if self.0.length() != Some(u64::MAX) => {
                let style = ProgressStyle::with_template("{spinner} {pos} replicates, until precise enough");
                self.0.set_style(style.expect("the template is well formed"));
                self.0.set_length(u64::MAX);
            }
            None => {}
        }
        self.0.set_position(u64::from(done));
    }

    pub(super) fn clear(&self) {
        self.0.finish_and_clear();
    }
}
