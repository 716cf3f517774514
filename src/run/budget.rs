//! Limits of time and memory, and lengths in stages.
//!
//! A depth-first walk knows nothing complete before its end. So a walk with a limit goes in stages of growing
//! lengths; the work grows like the third or fourth power of the length, so the stages before the last cost a seventh of
//! it or less.

use super::control::{Control, StopReason};
use super::memory;
use std::sync::Arc;
use std::sync::mpsc::{RecvTimeoutError, Sender, channel};
use std::thread::JoinHandle;
use std::time::{Duration, Instant};

/// What a run may use. Nothing is limited by default.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub struct Budget {
    /// Time from now.
    pub time: Option<Duration>,
    /// Bytes of memory.
    pub memory: Option<u64>,
}

/// How often the memory is looked at.
const LOOK: Duration = Duration::from_millis(50);

impl Budget {
    /// Asks to stop as soon as a limit is passed, until the watch is dropped. Where the system does not tell
    /// how much memory is used, that limit never acts: see [`memory::resident`].
    pub fn watch(self, control: &Arc<Control>) -> Watch {
        if self == Budget::default() {
            return Watch { watcher: None };
        }
        let end = self.time.and_then(|time| Instant::now().checked_add(time));
        if self.time == Some(Duration::ZERO) {
            // Not left to the order in which threads start.
            control.stop_for(StopReason::Time);
        }
        let (ended, hears_end) = channel::<()>();
        let control = control.clone();
        let thread = std::thread::spawn(move || {
            loop {
                let left = end.map(|end| end.saturating_duration_since(Instant::now()));
                if left == Some(Duration::ZERO) {
                    return control.stop_for(StopReason::Time);
                }
                if let (Some(most), Some(used)) = (self.memory, memory::resident())
                    && used > most
                {
                    return control.stop_for(StopReason::Memory);
                }
                let pause = match self.memory {
                    Some(_) => left.unwrap_or(LOOK).min(LOOK),
                    None => left.unwrap_or(Duration::MAX),
                };
                if hears_end.recv_timeout(pause) != Err(RecvTimeoutError::Timeout) {
                    return;
                }
            }
        });
        Watch {
            watcher: Some((ended, thread)),
        }
    }
}

/// Watches a budget while it lives.
#[derive(Debug)]
pub struct Watch {
    watcher: Option<(Sender<()>, JoinHandle<()>)>,
}

impl Drop for Watch {
    fn drop(&mut self) {
        if let Some((ended, thread)) = self.watcher.take() {
            drop(ended);
            // The watcher only asks to stop; if it panicked there is nothing to save.
            let _ = thread.join();
        }
    }
}

/// The shortest stage before the last.
const SHORTEST_STAGE: usize = 8;

/// Lengths of the stages of a walk: about doubling, the longest last.
pub fn stages(longest: usize) -> Vec<usize> {
    let mut lengths = vec![longest];
    let mut length = longest;
    while length / 2 >= SHORTEST_STAGE {
        length /= 2;
        lengths.push(length);
    }
    lengths.reverse();
    lengths
}

/// A time such as `90`, `1.5h`, `30s`, `5m` or `2h`; seconds without a unit.
pub fn parse_time(text: &str) -> Option<Duration> {
    let (digits, seconds) = match text.char_indices().last()? {
        (at, 's') => (&text[..at], 1.0),
        (at, 'm') => (&text[..at], 60.0),
        (at, 'h') => (&text[..at], 3600.0),
        _ => (text, 1.0),
    };
    // The parser of floating point also takes signs, exponents and names.
    if !digits.chars().all(|c| c.is_ascii_digit() || c == '.') {
        return None;
    }
    Duration::try_from_secs_f64(digits.parse::<f64>().ok()? * seconds).ok()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn times_are_read_with_their_units() {
        let seconds = |text| parse_time(text).map(|time| time.as_secs_f64());
        assert_eq!(seconds("90"), Some(90.0));
        assert_eq!(seconds("30s"), Some(30.0));
        assert_eq!(seconds("5m"), Some(300.0));
        assert_eq!(seconds("1.5h"), Some(5400.0));
        for wrong in [
            "", "s", "-1", "+1", "1e3", "inf", "nan", "5 m", "5d", ".", "1.2.3",
        ] {
            assert_eq!(seconds(wrong), None, "{wrong:?}");
        }
        assert_eq!(seconds(&"9".repeat(40)), None);
    }

    #[test]
    fn stages_end_at_the_longest() {
        assert_eq!(stages(100), [12, 25, 50, 100]);
        assert_eq!(stages(15), [15]);
        assert_eq!(stages(16), [8, 16]);
        assert_eq!(stages(0), [0]);
    }

    #[test]
    fn a_watch_stops_for_time_and_for_memory_and_not_after_its_end() {
        let reason_after = |budget: Budget, wait: u64| {
            let control = Arc::new(Control::new());
            let watch = budget.watch(&control);
            let begun = Instant::now();
            while !control.is_stopped() && begun.elapsed() < Duration::from_millis(wait) {
                std::thread::sleep(Duration::from_millis(1));
            }
            drop(watch);
            control.reason()
        };
        let time = |milliseconds| Budget {
            time: Some(Duration::from_millis(milliseconds)),
            memory: None,
        };
        assert_eq!(reason_after(time(5), 10_000), Some(StopReason::Time));
        assert_eq!(reason_after(time(60_000), 20), None);
        assert_eq!(reason_after(Budget::default(), 5), None);
        let memory = |bytes| Budget {
            time: None,
            memory: Some(bytes),
        };
        if memory::resident().is_some() {
            assert_eq!(reason_after(memory(1), 10_000), Some(StopReason::Memory));
            assert_eq!(reason_after(memory(u64::MAX), 120), None);
        }
    }

    #[test]
    fn the_first_reason_stays() {
        let control = Control::new();
        assert_eq!(control.reason(), None);
        control.stop_for(StopReason::Time);
        control.stop();
        assert_eq!(control.reason(), Some(StopReason::Time));
    }
}
