//! Long computations watched: a bar on a terminal, and Ctrl-C.

use super::Ending;
use super::complaint::Complaint;
use crate::design::Progress;
use indicatif::{ProgressBar, ProgressStyle};
use std::io::{self, IsTerminal as _};
use std::sync::atomic::{AtomicBool, Ordering};
use std::time::Duration;

/// Set by the first Ctrl-C.
static STOP: AtomicBool = AtomicBool::new(false);

/// Does something long. The first Ctrl-C asks it to stop where nothing is half done; the second
/// ends the program at once.
///
/// # Arguments
///
/// * `steps` – how many structures there are to compute and how many of them are done, if that is
///   known
pub(super) fn watched<T>(
    quiet: bool,
    steps: Option<(usize, usize)>,
    act: impl FnOnce(&Progress<'_>) -> T,
) -> T {
    // Where no handler can be set, Ctrl-C ends the program: nothing written is ever half a file.
    let _ = ctrlc::set_handler(|| {
        if STOP.swap(true, Ordering::Relaxed) {
            std::process::exit(Ending::Interrupted as i32);
        }
    });
    let bar = (!quiet && io::stderr().is_terminal()).then(|| bar(steps));
    let told = || {
        if let Some(bar) = &bar {
            bar.inc(1);
        }
    };
    let result = act(&Progress::new(&told, &STOP));
    if let Some(bar) = bar {
        bar.finish_and_clear();
    }
    result
}

fn bar(steps: Option<(usize, usize)>) -> ProgressBar {
    let (bar, template) = match steps {
        Some((all, done)) => {
            let bar = ProgressBar::new(all as u64).with_position(done as u64);
            bar.reset_eta();
            (bar, "  {wide_bar} {pos} of {len}, {eta} left")
        }
        None => (ProgressBar::new_spinner(), "  {spinner} {pos} structures"),
    };
    if let Ok(style) = ProgressStyle::with_template(template) {
        bar.set_style(style);
    }
    bar.enable_steady_tick(Duration::from_millis(200));
    bar
}

/// What is said when it stopped.
pub(super) fn interrupted(what_is_kept: &str) -> Complaint {
    Complaint::new(Ending::Interrupted, format!("interrupted: {what_is_kept}"))
}
