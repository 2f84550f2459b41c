//! How far a long computation has come, and whether it is to stop.

use std::sync::atomic::{AtomicBool, Ordering};

/// The computation was asked to stop.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("interrupted")]
pub struct Interrupted;

/// Told of every step, and asked whether to go on.
pub struct Progress<'a> {
    told: &'a (dyn Fn() + Sync),
    stop: &'a AtomicBool,
}

impl std::fmt::Debug for Progress<'_> {
    fn fmt(&self, formatter: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        formatter
            .debug_struct("Progress")
            .field("stop", self.stop)
            .finish_non_exhaustive()
    }
}

impl<'a> Progress<'a> {
    /// Progress that calls `told` after every structure computed, from any thread, until `stop` is
    /// set.
    #[must_use]
    pub fn new(told: &'a (dyn Fn() + Sync), stop: &'a AtomicBool) -> Self {
        Self { told, stop }
    }

    /// Nobody looks on and nothing stops it.
    #[must_use]
    pub fn silent() -> Progress<'static> {
        static NEVER: AtomicBool = AtomicBool::new(false);
        Progress {
            told: &|| {},
            stop: &NEVER,
        }
    }

    pub(super) fn step(&self) {
        (self.told)();
    }

    pub(super) fn is_stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    pub(super) fn check(&self) -> Result<(), Interrupted> {
        if self.is_stopped() {
            Err(Interrupted)
        } else {
            Ok(())
        }
    }
}
