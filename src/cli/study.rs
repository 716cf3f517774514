//! `reboundary study`.

use super::arguments::{Pictures, SHORTEST_STUDY, StudyFormat, StudyOptions};
use super::fault::Fault;
use super::output::{emit, read_table};
use super::studies;
use super::work::{Work, options_line, time_only};
use crate::complexity::claim::Claim;
use crate::language::tree::BYTES_PER_WORD;
use crate::language::walk::GrowthFault;
use crate::run::files::ResultFolder;
use crate::run::{Control, StopReason, Stopped};
use crate::study::folder::{Extras, MARK, write};
use crate::study::results::{
    DEFAULT_LENGTH, Request, Results, Stage, StudyFault, compute_kept, default_length,
};
use crate::table::Table;
use crate::table::file::LoadedTable;
use crate::unfold::engine::AnyEngine;
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::time::Instant;

pub fn run(options: &StudyOptions) -> Result<(), Fault> {
    let claims = options.claims.parse()?;
    if let (Some(order), Some(length)) = (options.graph_order, options.length)
        && order >= length
    {
        return Err(Fault::BadInput(format!(
            "--graph-order {order} needs words of length {}; give a --length above {order}, or a smaller order",
            order + 1
        )));
    }
    match &options.tables[..] {
        [table] if !table.is_dir() => one(options, table, &claims),
        _ => studies::run(options, &claims),
    }
}

fn one(options: &StudyOptions, table: &Path, claims: &[Claim]) -> Result<(), Fault> {
    let loaded = read_table(table, &options.settings, options.common.quiet)?;
    let out = options
        .out
        .clone()
        .unwrap_or_else(|| PathBuf::from(format!("{}-study", loaded.stem)));
    // A place that cannot be used is refused before the work, not after it.
    drop(ResultFolder::new(&out, MARK)?);
    let quiet = options.common.quiet;
    let mut work = Work::begin(time_only(options.budget_time), quiet)?;
    work.open(&options.keeping, &loaded, &checkpoint_line(options), quiet)?;
    let request = request(options, options.budget_memory);
    let mut done = None;
    let mut stopped = false;
    for request in requests(&request, &work, &loaded.table)? {
        match stage(&mut work, &loaded.table, &request) {
            Ok(results) => done = Some(results),
            Err(StudyFault::Stopped(_) | StudyFault::Growth(GrowthFault::Stopped(_))) => {
                stopped = true;
                break;
            }
            Err(fault) => return Err(fault.into()),
        }
    }
    let Some(mut results) = done else {
        return Err(work.stopped(None));
    };
    results.judge_claims(claims);
    work.progress.begin("writing", None);
    let mut notices = loaded.notices.clone();
    if stopped {
        notices.push(format!(
            "the work was stopped before it was complete: this is the study of the words up to length {}",
            results.length
        ));
    }
    let stop = match work.control.reason() {
        _ if !stopped => "complete",
        Some(StopReason::Time) => "time",
        Some(StopReason::Memory) => "memory",
        Some(StopReason::Signal) | None => "signal",
    };
    work.unwatch();
    // A limit that was reached does not keep what is complete from being written; a signal while it is written does.
    let fresh = Control::new();
    let writing = match work.control.reason() {
        Some(reason) if stopped || reason == StopReason::Time => &fresh,
        _ => &*work.control,
    };
    let input = Input {
        options,
        table,
        loaded: &loaded,
        notices: &notices,
        stop,
    };
    input.write(&results, &out, writing)?;
    work.stats.bytes_per_word = Some(BYTES_PER_WORD);
    let engine = AnyEngine::new(&loaded.table, 1, request.arithmetic);
    work.end(Some(engine.describe()));
    if options.stats {
        work.stats.tell();
    }
    emit(None, |to| summary(&results, &out, to))?;
    let what = match request.length {
        Some(length) => format!(" of {length}"),
        None => String::new(),
    };
    match stopped {
        true => Err(work.stopped(Some(format!(
            "the study is complete to n = {}{what}",
            results.length
        )))),
        false => Ok(()),
    }
}

/// What is asked of each table.
pub fn request(options: &StudyOptions, memory: Option<u64>) -> Request {
    Request {
        length: options.length.or(options
            .graph_order
            .map(|order| (order + 1).max(SHORTEST_STUDY))),
        radii: options.radii,
        arithmetic: options.exactness.arithmetic(),
        memory,
    }
}

/// What a study's folder says of its input.
pub struct Input<'a> {
    pub options: &'a StudyOptions,
    pub table: &'a Path,
    pub loaded: &'a LoadedTable,
    pub notices: &'a [String],
    /// `complete`, or why the study is not longer.
    pub stop: &'static str,
}

impl Input<'_> {
    /// Writes the folder.
    pub fn write(&self, results: &Results, out: &Path, control: &Control) -> Result<(), Fault> {
        let (options, loaded) = (self.options, self.loaded);
        let extras = Extras {
            table_file: &loaded.text,
            notices: self.notices,
            parameters: &loaded.parameters,
            bases: &loaded.bases,
            command: &command(options, self.table, results),
            // The order asked for may be beyond a shorter study.
            graph_order: options.graph_order.filter(|order| *order < results.length),
            arithmetic: options.exactness.arithmetic(),
            picture_size: options.pictures.size(),
            latex: options.format == StudyFormat::Latex,
            stop: self.stop,
        };
        Ok(write(results, &extras, out, control)?)
    }
}

/// The studies to make one after another; only the last of them is written. Without a limit of time there is one.
fn requests(last: &Request, work: &Work, table: &Table) -> Result<Vec<Request>, Fault> {
    if work.is_unlimited() {
        return Ok(vec![*last]);
    }
    let longest = match last.length {
        Some(length) => length,
        None => match default_length(table, last.arithmetic, &work.control) {
            Ok(length) => length,
            Err(Stopped) => return Err(work.stopped(None)),
        },
    };
    let mut lengths = work.lengths(longest);
    lengths.pop();
    let mut requests: Vec<Request> = lengths
        .into_iter()
        .map(|length| Request {
            length: Some(length),
            ..*last
        })
        .collect();
    requests.push(*last);
    Ok(requests)
}

/// One study, its walks told to the progress and to the stats.
fn stage(work: &mut Work, table: &Table, request: &Request) -> Result<Results, StudyFault> {
    let Work {
        control,
        progress,
        stats,
        checkpoint,
        ..
    } = work;
    let mut walks = Vec::new();
    let results = compute_kept(table, request, control, checkpoint.as_ref(), |stage| {
        let (name, steps) = match stage {
            Stage::Fans => ("diagonals", None),
            Stage::Beams { words } => ("language", Some(words)),
            Stage::Measures { words } => ("measures", Some(words)),
            Stage::Graphs => ("factor graphs", None),
        };
        progress.begin(name, steps);
        walks.push((Instant::now(), control.done(), name));
    });
    let done = results.as_ref().ok();
    let mut until = (Instant::now(), control.done());
    let mut told = Vec::new();
    for (at, steps, name) in walks.into_iter().rev() {
        let tiers = done.and_then(|results| match name {
            "diagonals" => Some(results.tiers.fans),
            "language" => Some(results.tiers.beams),
            "measures" => Some(results.measures.tiers),
            _ => None,
        });
        told.push((name, until.0 - at, until.1 - steps, tiers));
        until = (at, steps);
    }
    let length = done.map(|results| results.length).or(request.length);
    for (name, time, steps, tiers) in told.into_iter().rev() {
        stats.add(name, length.unwrap_or(DEFAULT_LENGTH), time, steps, tiers);
    }
    results
}

/// The options that the parts depend on.
fn checkpoint_line(options: &StudyOptions) -> String {
    let mut asked = "study".to_string();
    if let Some(length) = options.length {
        asked += &format!(" --length {length}");
    }
    if let Some(order) = options.graph_order {
        asked += &format!(" --graph-order {order}");
    }
    options_line(&asked, &options.settings.set, options.exactness.exact_only)
}

/// The command that reproduces the study, without folders and threads.
fn command(options: &StudyOptions, table: &Path, results: &Results) -> String {
    let name = table.file_name().unwrap_or_default().to_string_lossy();
    let mut command = format!(
        "reboundary study {name} --length {} --radii {}",
        results.length, options.radii
    );
    if let Some(order) = options.graph_order {
        command.push_str(&format!(" --graph-order {order}"));
    }
    for claim in &options.claims.claim {
        command.push_str(&format!(" --claim '{claim}'"));
    }
    for setting in &options.settings.set {
        let plain = |c: char| c.is_ascii_alphanumeric() || "=/.+-_".contains(c);
        if setting.chars().all(plain) {
            command.push_str(&format!(" --set {setting}"));
        } else {
            // An expression holds no quotes.
            command.push_str(&format!(" --set '{setting}'"));
        }
    }
    if options.exactness.exact_only {
        command.push_str(" --exact-only");
    }
    match options.pictures {
        Pictures::Screen => {}
        Pictures::Column => command.push_str(" --pictures column"),
        Pictures::Page => command.push_str(" --pictures page"),
    }
    if options.format == StudyFormat::Latex {
        command.push_str(" --format latex");
    }
    command
}

fn summary(results: &Results, out: &Path, to: &mut dyn Write) -> io::Result<()> {
    let n = results.length;
    writeln!(
        to,
        "{}: {} words of length {n}",
        results.table.title(),
        results.counts.p[n]
    )?;
    for statement in &results.statements {
        writeln!(
            to,
            "  {:<19} {}",
            format!("{}{}", statement.standing.label(), statement.reach()),
            statement.sentence()
        )?;
    }
    writeln!(to, "Open {}", out.join("report.html").display())
}
