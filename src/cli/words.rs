//! `reboundary words`.

use super::arguments::{Format, WordsOptions};
use super::fault::Fault;
use super::output::{emit, read_table};
use super::progress::{Progress, interruptible_control};
use crate::factor_graph::export::spell;
use crate::language::{Language, WordId, measure, walk};
use crate::number::Enclosure;
use crate::run::Control;
use crate::study::record::decimal;
use crate::study::results::check_memory;
use crate::table::Table;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use std::io::{self, Write};

pub fn run(options: &WordsOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let (mesh, length) = (Mesh::new(table), options.length);
    let engine = AnyEngine::new(table, length, options.exactness.arithmetic());
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("counting", None);
    let words = total_words(table, &engine, &mesh, length, &control)?;
    check_memory(words, length, options.budget_memory)?;
    progress.begin("language", Some(words));
    let (language, _) = walk::grow(&engine, &mesh, length, &control)?;
    let measures = match options.format {
        Format::Text => Vec::new(),
        _ => {
            progress.begin("measures", Some(words));
            measure::measure(table, &engine, &mesh, length, length, &control)?.kept
        }
    };
    drop(progress);
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_text(table, &language, out),
        Format::Csv => write_csv(table, &language, &measures, out),
        Format::Json => write_json_lines(table, &language, &measures, out),
    })
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
    let (diagonals, _) = crate::complexity::diagonals::count(engine, mesh, most, control)?;
    let p = crate::complexity::counts::p_from_diagonals(table.sides() as u64, &diagonals, length);
    Ok(p.iter().sum())
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
