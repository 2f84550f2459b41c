//! A bar on standard error that shows how far a long computation is; on a terminal only.

use indicatif::{ProgressBar, ProgressDrawTarget, ProgressStyle};
use std::io::{self, IsTerminal as _};

/// The bar. It vanishes when it is dropped.
pub(super) struct Gauge {
    bar: ProgressBar,
}

impl Gauge {
    /// A bar for so many steps; silent where standard error is no terminal, or where `quiet`.
    pub(super) fn new(steps: usize, what: &str, quiet: bool) -> Self {
        let target = if quiet || !io::stderr().is_terminal() {
            ProgressDrawTarget::hidden()
        } else {
            ProgressDrawTarget::stderr()
        };
        let bar = ProgressBar::with_draw_target(Some(steps as u64), target);
        if let Ok(style) = ProgressStyle::with_template("{msg} {wide_bar} {percent} %, {eta} left")
        {
            bar.set_style(style);
        }
        bar.set_message(what.to_owned());
        Self { bar }
    }

    /// So many steps are done.
    pub(super) fn reached(&self, steps: usize) {
        self.bar.set_position(steps as u64);
    }
}

impl Drop for Gauge {
    fn drop(&mut self) {
        self.bar.finish_and_clear();
    }
}
