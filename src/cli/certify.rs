//! `reboundary certify` and `reboundary verify`.

use super::arguments::Format;
use super::fault::Fault;
use super::output::{note, read_table, write_json};
use super::progress::{Progress, interruptible_control};
use super::word_arguments::{CertifyOptions, VerifyOptions};
use crate::certificate::format::Kind;
use crate::certificate::make::{MakingFault, certify_language, write_table};
use crate::certificate::verify::{Rejection, Verdict, verify};
use crate::run::files::write_whole;
use crate::study::results::check_memory;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::fs::File;
use std::io::{self, BufReader, Write};

impl From<MakingFault> for Fault {
    fn from(error: MakingFault) -> Fault {
        match error {
            MakingFault::Stopped(stopped) => stopped.into(),
            MakingFault::Writing(error) => error.into(),
        }
    }
}

/// Keeps what went wrong while a file was being filled.
pub fn write_file(
    path: &std::path::Path,
    fill: impl FnOnce(&mut dyn Write) -> Result<u64, Fault>,
) -> Result<u64, Fault> {
    let mut result = Ok(0);
    let written = write_whole(path, |out| {
        result = fill(out);
        match &result {
            Ok(_) => Ok(()),
            // Whatever it was, nothing of the file is kept.
            Err(_) => Err(io::Error::other("not finished")),
        }
    });
    let count = result?;
    written?;
    Ok(count)
}

pub fn run_certify(options: &CertifyOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let (mesh, length) = (Mesh::new(table), options.length);
    let engine = AnyEngine::new(table, length, options.exactness.arithmetic());
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("counting", None);
    let words = super::words::total_words(table, &engine, &mesh, length, &control)?;
    check_memory(words, length, None)?;
    progress.begin("certificate", None);
    let count = write_file(&options.file, |out| {
        Ok(certify_language(
            table, &engine, &mesh, length, &control, out,
        )?)
    })?;
    drop(progress);
    if !options.common.quiet {
        note(&format!(
            "{count} words of length {length}; check them with `reboundary verify {}`",
            options.file.display()
        ));
    }
    Ok(())
}

#[derive(Serialize)]
struct VerdictRecord<'a> {
    schema: &'static str,
    accepted: bool,
    kind: Kind,
    title: &'a str,
    length: Option<usize>,
    /// p(1), p(2), …, proved complete.
    p: &'a [u64],
    inside: u64,
    outside: u64,
}

pub fn run_verify(options: &VerifyOptions) -> Result<(), Fault> {
    let place = options.file.display();
    let file = File::open(&options.file)
        .map_err(|e| Fault::BadInput(format!("cannot read {place}: {e}")))?;
    let expected = match &options.table {
        Some(path) => Some(read_table(path, &options.settings, options.quiet)?),
        None => None,
    };
    let verdict = verify(BufReader::new(file)).map_err(|rejection| match rejection {
        Rejection::Reading(error) => Fault::BadInput(format!("cannot read {place}: {error}")),
        other => Fault::BadInput(format!("{place} is rejected: {other}")),
    })?;
    if let Some(expected) = expected
        && write_table(&expected.table) != verdict.header.table
    {
        let text = format!(
            "{place} is rejected: it is about another table, titled “{}”",
            verdict.header.table.title
        );
        return Err(Fault::BadInput(text));
    }
    let mut out = io::stdout().lock();
    let title = &verdict.header.table.title;
    match options.format {
        Format::Text => write_text(&verdict, &mut out)?,
        Format::Csv => {
            let mut csv = csv::Writer::from_writer(out);
            csv.write_record(["n", "p"]).map_err(io::Error::from)?;
            for (n, p) in (1..).zip(&verdict.complexity) {
                csv.serialize((n, p)).map_err(io::Error::from)?;
            }
            csv.flush()?;
        }
        Format::Json => write_json(
            &mut out,
            &VerdictRecord {
                schema: "reboundary-verdict/1",
                accepted: true,
                kind: verdict.header.kind,
                title,
                length: verdict.header.length,
                p: &verdict.complexity,
                inside: verdict.inside,
                outside: verdict.outside,
            },
        )?,
    }
    Ok(())
}

fn write_text(verdict: &Verdict, out: &mut dyn Write) -> io::Result<()> {
    let title = &verdict.header.table.title;
    match verdict.header.length {
        Some(length) => {
            writeln!(
                out,
                "accepted: the language of “{title}” has exactly these {} words of length {length}",
                verdict.inside
            )?;
            let p: Vec<String> = verdict.complexity.iter().map(u64::to_string).collect();
            writeln!(out, "p(1), p(2), … = {}", p.join(", "))
        }
        None => writeln!(
            out,
            "accepted: of the words, {} are in the language of “{title}” and {} are not",
            verdict.inside, verdict.outside
        ),
    }
}
