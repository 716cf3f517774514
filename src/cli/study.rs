//! `reboundary study`.

use super::arguments::{SHORTEST_STUDY, StudyOptions};
use super::fault::Fault;
use super::output::{emit, read_table};
use super::progress::{Progress, interruptible_control};
use crate::run::files::ResultFolder;
use crate::study::folder::{Extras, MARK, write};
use crate::study::results::{Request, Results, Stage, compute};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

pub fn run(options: &StudyOptions) -> Result<(), Fault> {
    let claims = options.claims.parse()?;
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let out = options
        .out
        .clone()
        .unwrap_or_else(|| PathBuf::from(format!("{}-study", loaded.stem)));
    // A place that cannot be used is refused before the work, not after it.
    drop(ResultFolder::new(&out, MARK)?);
    if let (Some(order), Some(length)) = (options.graph_order, options.length)
        && order >= length
    {
        return Err(Fault::BadInput(format!(
            "--graph-order {order} needs words of length {}; give a --length above {order}, or a smaller order",
            order + 1
        )));
    }
    let request = Request {
        length: options.length.or(options
            .graph_order
            .map(|order| (order + 1).max(SHORTEST_STUDY))),
        radii: options.radii,
        arithmetic: options.exactness.arithmetic(),
        memory: options.budget_memory,
    };
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    let mut results = compute(&loaded.table, &request, &control, |stage| {
        let (name, steps) = match stage {
            Stage::Fans => ("generalized diagonals", None),
            Stage::Beams { words } => ("language", Some(words)),
            Stage::Measures { words } => ("measures", Some(words)),
            Stage::Graphs => ("factor graphs", None),
        };
        progress.begin(name, steps);
    })?;
    results.judge_claims(&claims);
    progress.begin("writing", None);
    let command = command(options, &results);
    let extras = Extras {
        table_file: &loaded.text,
        notices: &loaded.notices,
        parameters: &loaded.parameters,
        bases: &loaded.bases,
        command: &command,
        graph_order: options.graph_order,
        arithmetic: request.arithmetic,
    };
    write(&results, &extras, &out, &control)?;
    drop(progress);
    emit(None, |to| summary(&results, &out, to))
}

/// The command that reproduces the study, without folders and threads.
fn command(options: &StudyOptions, results: &Results) -> String {
    let name = options
        .table
        .file_name()
        .unwrap_or_default()
        .to_string_lossy();
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
