//! Asking long work to stop, and hearing how far it is.
//!
//! Workers call [`Control::tick`] every few thousand steps. It costs one relaxed atomic addition and one
//! load, and is the only contact between the mathematics and the world outside.

use std::sync::atomic::{AtomicU8, AtomicU64, Ordering};

/// Work ended before it was complete; [`Control::reason`] says why.
#[derive(Clone, Copy, Debug, PartialEq, Eq, thiserror::Error)]
#[error("stopped before the work was complete")]
pub struct Stopped;

/// Who asked to stop.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
#[repr(u8)]
pub enum StopReason {
    /// A signal, such as Ctrl-C.
    Signal = 1,
    /// The time allowed is over.
    Time,
    /// More memory is used than allowed.
    Memory,
}

/// Shared between the thread that listens for signals, the progress display and the workers.
#[derive(Debug, Default)]
pub struct Control {
    /// 0 while nobody asked to stop, else a [`StopReason`].
    stop: AtomicU8,
    done: AtomicU64,
}

/// How many steps a worker takes between two calls of [`Control::tick`].
pub const STEPS_PER_TICK: u64 = 1 << 14;

impl Control {
    /// A control that nobody has asked to stop.
    pub fn new() -> Control {
        Control::default()
    }

    /// Asks all workers to stop soon, because of a signal.
    pub fn stop(&self) {
        self.stop_for(StopReason::Signal);
    }

    /// Asks all workers to stop soon. Only the first reason is kept.
    pub fn stop_for(&self, reason: StopReason) {
        let (relaxed, first) = (Ordering::Relaxed, reason as u8);
        let _ = self.stop.compare_exchange(0, first, relaxed, relaxed);
    }

    /// True after [`Control::stop`].
    pub fn is_stopped(&self) -> bool {
        self.stop.load(Ordering::Relaxed) != 0
    }

    /// Who asked to stop, if anybody did.
    pub fn reason(&self) -> Option<StopReason> {
        match self.stop.load(Ordering::Relaxed) {
            0 => None,
            code if code == StopReason::Time as u8 => Some(StopReason::Time),
            code if code == StopReason::Memory as u8 => Some(StopReason::Memory),
            _ => Some(StopReason::Signal),
        }
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
