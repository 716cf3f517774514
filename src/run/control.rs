//! Asking long work to stop, and hearing how far it is.
//!
//! Workers call [`Control::tick`] every few thousand steps. It costs one relaxed atomic addition and one
//! load, and is the only contact between the mathematics and the world outside.

use std::sync::atomic::{AtomicBool, AtomicU64, Ordering};

/// Why work ended before it was complete.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("stopped by a signal before the work was complete")]
pub struct Stopped;

/// Shared between the thread that listens for signals, the progress display and the workers.
#[derive(Debug, Default)]
pub struct Control {
    stop: AtomicBool,
    done: AtomicU64,
}

/// How many steps a worker takes between two calls of [`Control::tick`].
pub const STEPS_PER_TICK: u64 = 1 << 14;

impl Control {
    /// A control that nobody has asked to stop.
    pub fn new() -> Control {
        Control::default()
    }

    /// Asks all workers to stop soon.
    pub fn stop(&self) {
        self.stop.store(true, Ordering::Relaxed);
    }

    /// True after [`Control::stop`].
    pub fn is_stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed)
    }

    /// Reports finished steps and asks whether to go on.
    ///
    /// # Errors
    /// [`Stopped`] when the work is to end.
    pub fn tick(&self, steps: u64) -> Result<(), Stopped> {
        self.done.fetch_add(steps, Ordering::Relaxed);
        if self.is_stopped() {
            Err(Stopped)
        } else {
            Ok(())
        }
    }

    /// Steps reported so far.
    pub fn done(&self) -> u64 {
        self.done.load(Ordering::Relaxed)
    }
}
