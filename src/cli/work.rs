//! What long commands share: limits, stages, a checkpoint, and what is said when the work is stopped.

use super::arguments::{Keeping, Limits};
use super::fault::Fault;
use super::output::note;
use super::progress::{Progress, interruptible_control};
use super::stats::Stats;
use crate::number::Tiers;
use crate::run::budget::{Budget, Watch, stages};
use crate::run::checkpoint::{Checkpoint, Identity};
use crate::run::{Control, StopReason, memory};
use crate::table::file::LoadedTable;
use crate::unfold::engine::AnyEngine;
use std::sync::Arc;

/// A command at work.
pub struct Work {
    pub control: Arc<Control>,
    pub progress: Progress,
    pub stats: Stats,
    pub checkpoint: Option<Checkpoint>,
    budget: Budget,
    watch: Option<Watch>,
}

impl Work {
    /// Begins to watch the limits.
    ///
    /// # Errors
    /// When memory is limited and the system does not tell how much is used.
    pub fn begin(limits: Budget, quiet: bool) -> Result<Work, Fault> {
        let control = interruptible_control();
        if limits.memory.is_some() && memory::resident().is_none() {
            return Err(Fault::BadInput(
                "this system does not tell how much memory is used: leave out --budget-memory"
                    .into(),
            ));
        }
        Ok(Work {
            watch: Some(limits.watch(&control)),
            progress: Progress::new(&control, quiet),
            stats: Stats::new(),
            checkpoint: None,
            budget: limits,
            control,
        })
    }

    /// True when nothing is limited.
    pub fn is_unlimited(&self) -> bool {
        self.budget == Budget::default()
    }

    /// The lengths to work through: the whole at once without limits, else growing ones, so that there is something
    /// complete when a limit is reached.
    pub fn lengths(&self, longest: usize) -> Vec<usize> {
        match self.is_unlimited() {
            true => vec![longest],
            false => stages(longest),
        }
    }

    /// Opens the checkpoint asked for. `options` are those that the results depend on, as the user would write them;
    /// threads, budgets and formats do not change what the parts are.
    ///
    /// # Errors
    /// When it cannot be used.
    pub fn open(
        &mut self,
        keeping: &Keeping,
        loaded: &LoadedTable,
        options: &str,
        quiet: bool,
    ) -> Result<(), Fault> {
        let Some(folder) = &keeping.checkpoint else {
            return Ok(());
        };
        let mut table = loaded.text.clone();
        for base in &loaded.bases {
            table += &format!("\n[base {}]\n{}", base.name, base.text);
        }
        let identity = Identity {
            version: env!("CARGO_PKG_VERSION").into(),
            table,
            options: options.into(),
        };
        let checkpoint = Checkpoint::open(folder, &identity, keeping.resume)?;
        if checkpoint.rejected() > 0 && !quiet {
            note(&format!(
                "{} lines of the checkpoint are torn or altered; their parts are computed again",
                checkpoint.rejected()
            ));
        }
        self.checkpoint = Some(checkpoint);
        Ok(())
    }

    /// One walk, told to the progress and to the stats.
    pub fn walk<T, F>(
        &mut self,
        name: &'static str,
        length: usize,
        steps: Option<u64>,
        work: impl FnOnce(&Control, Option<&Checkpoint>) -> Result<(T, Tiers), F>,
    ) -> Result<T, F> {
        self.progress.begin(name, steps);
        let timer = self.stats.begin(name, length, self.control.done());
        let done = work(&self.control, self.checkpoint.as_ref());
        let tiers = done.as_ref().ok().map(|(_, tiers)| *tiers);
        self.stats.end(timer, self.control.done(), tiers);
        Ok(done?.0)
    }

    /// Limits end here: what is complete is still to be written.
    pub fn unwatch(&mut self) {
        self.watch = None;
    }

    /// The work ends: the progress goes, nobody watches any more, and the stats are complete.
    pub fn end(&mut self, engine: &AnyEngine) {
        self.unwatch();
        self.progress.hide();
        if let Some(failure) = self.checkpoint.as_ref().and_then(Checkpoint::failure) {
            note(&format!("the checkpoint is not up to date: {failure}"));
        }
        self.stats.finish(engine, self.checkpoint.as_ref());
    }

    /// Says why the work was stopped and what there is of it, for example `the result is complete to n = 20 of 50`.
    pub fn stopped(&self, what: Option<String>) -> Fault {
        let why = match self.control.reason() {
            Some(StopReason::Time) => "the time allowed was over",
            Some(StopReason::Memory) => "more memory was used than allowed",
            Some(StopReason::Signal) | None => "a signal came",
        };
        let what = what.unwrap_or("nothing was written".into());
        let next = match self.checkpoint {
            Some(_) => "; finished parts are kept, and --resume continues",
            None => "",
        };
        Fault::Stopped(format!("{why} before the work was complete; {what}{next}"))
    }
}

/// Limits of commands that refuse to start when the memory would not suffice.
pub fn time_only(time: Option<std::time::Duration>) -> Budget {
    Limits {
        budget_time: time,
        budget_memory: None,
    }
    .budget()
}

/// The line of options of a checkpoint.
pub fn options_line(length: &str, set: &[String], exact_only: bool) -> String {
    let mut line = length.to_string();
    for setting in set {
        line += &format!(" --set {setting}");
    }
    if exact_only {
        line += " --exact-only";
    }
    line
}
