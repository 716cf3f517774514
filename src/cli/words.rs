//! `reboundary words`.

use super::arguments::{WordsFormat, WordsOptions};
use super::fault::Fault;
use super::output::{emit, read_table};
use super::work::{Work, options_line, time_only};
use crate::complexity::counts::p_from_diagonals;
use crate::complexity::diagonals;
use crate::factor_graph::export::spell;
use crate::language::tree::BYTES_PER_WORD;
use crate::language::walk::GrowthFault;
use crate::language::{Language, WordId, measure, walk};
use crate::number::Enclosure;
use crate::run::Control;
use crate::run::checkpoint::ledger;
use crate::study::record::decimal;
use crate::study::results::check_memory;
use crate::table::Table;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use std::io::{self, Write};

pub fn run(options: &WordsOptions) -> Result<(), Fault> {
    if options.format == WordsFormat::Stored {
        return super::store::run(options);
    }
    let quiet = options.common.quiet;
    let mut work = Work::begin(time_only(options.budget_time), quiet)?;
    let loaded = read_table(&options.table, &options.settings, quiet)?;
    let table = &loaded.table;
    let mesh = Mesh::new(table);
    let measured = options.format != WordsFormat::Text;
    let asked = format!("words --length {}", options.length);
    let line = options_line(&asked, &options.settings.set, options.exactness.exact_only);
    work.open(&options.keeping, &loaded, &line, quiet)?;
    let engine = AnyEngine::new(table, options.length, options.exactness.arithmetic());
    let mut done = None;
    let mut stopped = false;
    for length in work.lengths(options.length) {
        match stage(
            &mut work,
            table,
            (&engine, &mesh),
            length,
            measured,
            options.budget_memory,
        ) {
            Ok(stage) => done = Some(stage),
            Err(Fault::Stopped(_)) => {
                stopped = true;
                break;
            }
            Err(fault) => return Err(fault),
        }
    }
    work.stats.bytes_per_word = Some(BYTES_PER_WORD);
    work.end(&engine);
    if options.stats {
        work.stats.tell();
    }
    if let Some((language, measures)) = &done {
        emit(options.out.as_deref(), |out| match options.format {
            WordsFormat::Text | WordsFormat::Stored => write_text(table, language, out),
            WordsFormat::Csv => write_csv(table, language, measures, out),
            WordsFormat::Json => write_json_lines(table, language, measures, out),
        })?;
    }
    let what = |(language, _): (Language, _)| {
        format!(
            "the words of length {} are complete, not those of {}",
            language.longest(),
            options.length
        )
    };
    match stopped {
        true => Err(work.stopped(done.map(what))),
        false => Ok(()),
    }
}

/// Words of all lengths up to one, counted by fans. When a word is a bundle of beams this is the number of
/// beams: enough for the memory, and for the progress.
pub(super) fn total_words(
    table: &Table,
    engine: &AnyEngine,
    mesh: &Mesh,
    length: usize,
    control: &Control,
) -> Result<u64, Fault> {
    let most = length.saturating_sub(2);
    let (diagonals, _) = diagonals::count(engine, mesh, most, control)?;
    Ok(sum_of_words(table, &diagonals, length))
}

fn sum_of_words(table: &Table, diagonals: &[u64], length: usize) -> u64 {
    let p = p_from_diagonals(table.sides() as u64, diagonals, length);
    p.iter().sum()
}

/// All words of a length, with their measures when these are wanted.
fn stage(
    work: &mut Work,
    table: &Table,
    (engine, mesh): (&AnyEngine, &Mesh),
    length: usize,
    measured: bool,
    memory: Option<u64>,
) -> Result<(Language, Vec<Enclosure>), Fault> {
    let most = length.saturating_sub(2);
    let diagonals = work.walk("diagonals", length, None, |control, checkpoint| {
        let ledger = ledger(checkpoint, "diagonals", length);
        diagonals::count_kept(engine, mesh, most, control, &*ledger)
    })?;
    let words = sum_of_words(table, &diagonals, length);
    check_memory(words, length, memory)?;
    let language = work.walk("language", length, Some(words), |control, checkpoint| {
        let ledger = ledger(checkpoint, "language", length);
        walk::grow_kept(engine, mesh, length, control, &*ledger)
    })?;
    if !measured {
        return Ok((language, Vec::new()));
    }
    let measures = work.walk("measures", length, Some(words), |control, checkpoint| {
        let ledger = ledger(checkpoint, "measures", length);
        let lengths = (length, length);
        let measures = measure::measure_kept(table, engine, mesh, lengths, control, &*ledger)?;
        Ok::<_, GrowthFault>((measures.kept, measures.tiers))
    })?;
    Ok((language, measures))
}

fn spelled<'a>(table: &'a Table, language: &'a Language) -> impl Iterator<Item = String> + 'a {
    let n = language.longest();
    (0..language.count(n) as WordId).map(move |w| spell(language, n, w, table.letters()))
}

fn write_text(table: &Table, language: &Language, out: &mut dyn Write) -> io::Result<()> {
    for word in spelled(table, language) {
        writeln!(out, "{word}")?;
    }
    Ok(())
}

fn write_csv(
    table: &Table,
    language: &Language,
    measures: &[Enclosure],
    out: &mut dyn Write,
) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["word", "measure"])?;
    for (word, measure) in spelled(table, language).zip(measures) {
        csv.write_record([word, decimal(measure)])?;
    }
    csv.flush()
}

fn write_json_lines(
    table: &Table,
    language: &Language,
    measures: &[Enclosure],
    out: &mut dyn Write,
) -> io::Result<()> {
    for (word, measure) in spelled(table, language).zip(measures) {
        let row = serde_json::json!({ "word": word, "measure": decimal(measure) });
        writeln!(out, "{row}")?;
    }
    Ok(())
}
