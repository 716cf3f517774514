//! The progress bar on a terminal, and Ctrl-C.

use crate::run::Control;
use indicatif::{ProgressBar, ProgressStyle};
use std::io::IsTerminal;
use std::sync::{Arc, OnceLock};
use std::thread::JoinHandle;
use std::time::Duration;

/// The control that Ctrl-C stops. A second Ctrl-C ends the process at once.
pub fn interruptible_control() -> Arc<Control> {
    static CONTROL: OnceLock<Arc<Control>> = OnceLock::new();
    CONTROL
        .get_or_init(|| {
            let control = Arc::new(Control::new());
            let listening = control.clone();
            // Without a handler the default action still ends the process; results appear whole anyway.
            let _ = ctrlc::set_handler(move || {
                if listening.is_stopped() {
                    std::process::exit(super::fault::STOPPED.into());
                }
                listening.stop();
            });
            control
        })
        .clone()
}

/// Shows one stage after another while it lives; silent unless standard error is a terminal.
pub struct Progress {
    control: Arc<Control>,
    bar: Option<ProgressBar>,
    watcher: Option<JoinHandle<()>>,
}

impl Progress {
    /// A display of the steps that the control hears of.
    pub fn new(control: &Arc<Control>, quiet: bool) -> Progress {
        let visible = !quiet && std::io::stderr().is_terminal();
        let mut progress = Progress {
            control: control.clone(),
            bar: visible.then(ProgressBar::new_spinner),
            watcher: None,
        };
        if let Some(bar) = &progress.bar {
            let (bar, control) = (bar.clone(), control.clone());
            progress.watcher = Some(std::thread::spawn(move || {
                while !bar.is_finished() {
                    let begun = bar.prefix().parse().unwrap_or(0);
                    bar.set_position(control.done().saturating_sub(begun));
                    bar.tick();
                    std::thread::sleep(Duration::from_millis(100));
                }
            }));
        }
        progress
    }

    /// Begins a stage of so many steps, when that is known.
    pub fn begin(&self, stage: &str, steps: Option<u64>) {
        let Some(bar) = &self.bar else {
            return;
        };
        let template = match steps {
            Some(steps) => {
                bar.set_length(steps.max(1));
                "{msg} [{bar:30}] {percent}% {eta}"
            }
            None => "{msg} {spinner} {human_pos} steps",
        };
        // The prefix remembers where the stage began; it is not shown.
        bar.set_prefix(self.control.done().to_string());
        bar.set_style(ProgressStyle::with_template(template).expect("a valid template"));
        bar.set_message(stage.to_string());
    }
}

impl Progress {
    /// Ends the display.
    pub fn hide(&mut self) {
        if let Some(bar) = &self.bar {
            bar.finish_and_clear();
        }
        if let Some(watcher) = self.watcher.take() {
            // The watcher only draws; if it panicked there is nothing to save.
            let _ = watcher.join();
        }
    }
}

impl Drop for Progress {
    fn drop(&mut self) {
        self.hide();
    }
}
