//! `reboundary study`.

use super::arguments::{Pictures, SHORTEST_STUDY, StudyFormat, StudyOptions};
use super::fault::Fault;
use super::output::{emit, read_table};
use super::progress::{Progress, interruptible_control};
use super::studies;
use crate::complexity::claim::Claim;
use crate::run::Control;
use crate::run::files::ResultFolder;
use crate::study::folder::{Extras, MARK, write};
use crate::study::results::{Request, Results, Stage, compute};
use std::io::{self, Write};
use std::path::{Path, PathBuf};

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
    let table = match &options.tables[..] {
        [table] if !table.is_dir() => table,
        _ => return studies::run(options, &studies::files(options)?, &claims),
    };
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    let out = options.out.clone().unwrap_or_else(|| {
        let stem = table.file_stem().unwrap_or_default().to_string_lossy();
        PathBuf::from(format!("{stem}-study"))
    });
    let work = Work {
        options,
        claims: &claims,
        memory: options.budget_memory,
        control: &control,
    };
    let results = study(&work, table, &out, |stage| {
        let (name, steps) = match stage {
            Some(Stage::Fans) => ("generalized diagonals", None),
            Some(Stage::Beams { words }) => ("language", Some(words)),
            Some(Stage::Measures { words }) => ("measures", Some(words)),
            Some(Stage::Graphs) => ("factor graphs", None),
            None => ("writing", None),
        };
        progress.begin(name, steps);
    })?;
    drop(progress);
    emit(None, |to| summary(&results, &out, to))
}

/// What the studies of one command share.
pub struct Work<'a> {
    pub options: &'a StudyOptions,
    pub claims: &'a [Claim],
    /// Bytes that one study may take; `None` for what the system has free.
    pub memory: Option<u64>,
    pub control: &'a Control,
}

/// Studies one table into a folder. `begin` hears of each stage, and of writing as `None`.
pub fn study(
    work: &Work<'_>,
    table: &Path,
    out: &Path,
    begin: impl Fn(Option<Stage>),
) -> Result<Results, Fault> {
    let options = work.options;
    let loaded = read_table(table, &options.settings, options.common.quiet)?;
    // A place that cannot be used is refused before the work, not after it.
    drop(ResultFolder::new(out, MARK)?);
    let request = Request {
        length: options.length.or(options
            .graph_order
            .map(|order| (order + 1).max(SHORTEST_STUDY))),
        radii: options.radii,
        arithmetic: options.exactness.arithmetic(),
        memory: work.memory,
    };
    let mut results = compute(&loaded.table, &request, work.control, |stage| {
        begin(Some(stage));
    })?;
    results.judge_claims(work.claims);
    begin(None);
    let command = command(options, table, &results);
    let extras = Extras {
        table_file: &loaded.text,
        notices: &loaded.notices,
        parameters: &loaded.parameters,
        bases: &loaded.bases,
        command: &command,
        graph_order: options.graph_order,
        arithmetic: request.arithmetic,
        picture_size: options.pictures.size(),
        latex: options.format == StudyFormat::Latex,
    };
    write(&results, &extras, out, work.control)?;
    Ok(results)
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
