//! The command line: parsing, printing, exit codes. The rooms below compute.
//!
//! - [`analysis_arguments`]: options of the commands that analyse languages.
//! - [`arguments`]: commands and options.
//! - [`ask_arguments`]: options of the questions to a stored language.
//! - [`fault`]: what can go wrong, and the exit code of each.
//! - [`language_source`]: tables, files of words, reference files.
//! - [`launch`]: starts and aims.
//! - [`orbit_arguments`]: options of the commands about directions and periodic orbits.
//! - [`output`]: where results are printed.
//! - [`progress`]: the bar on a terminal, and Ctrl-C.
//! - [`word_arguments`]: options of the commands about single words and certificates.
//! - `stats`: what a run took.
//! - `work`: limits, stages and checkpoints of long commands.
//! - one module for each command.

pub mod analysis_arguments;
pub mod arguments;
mod ask;
mod ask_answers;
pub mod ask_arguments;
mod certify;
mod compare;
mod complexity;
mod diagonals;
mod direction;
pub mod fault;
mod graph;
mod graph_census;
mod graph_law;
mod graph_structure;
mod grown;
pub mod language_source;
pub mod launch;
mod locate;
mod measures;
pub mod orbit_arguments;
#[cfg(feature = "parquet")]
mod orbit_parquet;
mod orbit_picture;
mod orbit_rows;
mod orbits;
pub mod output;
mod periodic;
pub mod progress;
mod special;
mod stats;
mod store;
mod studies;
mod study;
mod sweep;
mod table;
mod trace;
mod trace_record;
pub mod word_arguments;
mod word_picture;
mod word_record;
mod words;
mod work;

use arguments::{Arguments, Command, Common};
use clap::Parser;
use fault::Fault;
use std::io::Write;
use std::process::ExitCode;

/// Runs the program on the arguments of the process.
pub fn main() -> ExitCode {
    let arguments = match Arguments::try_parse() {
        Ok(arguments) => arguments,
        Err(error) => {
            // Clap prints help to standard output and usage faults to standard error; a closed pipe is no
            // fault of ours.
            let _ = error.print();
            return ExitCode::from(if error.use_stderr() {
                fault::BAD_INPUT
            } else {
                0
            });
        }
    };
    match run(arguments) {
        Ok(()) => ExitCode::SUCCESS,
        Err(fault) => {
            let message = fault.to_string();
            if !message.is_empty() {
                let _ = writeln!(std::io::stderr(), "{message}");
            }
            ExitCode::from(fault.exit_code())
        }
    }
}

fn run(arguments: Arguments) -> Result<(), Fault> {
    if let Some(path) = arguments.command.output_file() {
        // Before the work, not after it.
        crate::run::files::check_place(path)?;
    }
    match &arguments.command {
        Command::Study(options) => with_threads(&options.common, || study::run(options)),
        Command::Table(options) => table::run(options),
        Command::Words(options) => with_threads(&options.common, || words::run(options)),
        Command::Ask(options) => ask::run(options),
        Command::Complexity(options) => with_threads(&options.common, || complexity::run(options)),
        Command::Diagonals(options) => with_threads(&options.common, || diagonals::run(options)),
        Command::Graph(options) => with_threads(&options.common, || graph::run(options)),
        Command::Compare(options) => with_threads(&options.common, || compare::run(options)),
        Command::Measures(options) => with_threads(&options.common, || measures::run(options)),
        Command::Special(options) => with_threads(&options.common, || special::run(options)),
        Command::Direction(options) => with_threads(&options.common, || direction::run(options)),
        Command::Periodic(options) => with_threads(&options.common, || periodic::run(options)),
        Command::Sweep(options) => with_threads(&options.common, || sweep::run(options)),
        Command::Locate(options) => with_threads(&options.common, || locate::run(options)),
        Command::Certify(options) => {
            with_threads(&options.common, || certify::run_certify(options))
        }
        Command::Verify(options) => certify::run_verify(options),
        Command::Trace(options) => trace::run(options),
        Command::Orbits(options) => with_threads(&options.common, || orbits::run(options)),
    }
}

/// Runs a command on its own pool of threads.
fn with_threads(
    common: &Common,
    work: impl FnOnce() -> Result<(), Fault> + Send,
) -> Result<(), Fault> {
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(common.threads.unwrap_or(0))
        .build()
        .map_err(|e| Fault::Failed(format!("cannot start the threads: {e}")))?;
    pool.install(work)
}
