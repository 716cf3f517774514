//! `reboundary orbits`.

use super::arguments::{Format, OrbitsOptions};
use super::fault::Fault;
use super::output::{emit, read_table};
use super::progress::{Progress, interruptible_control};
use crate::orbit::TraceTables;
use crate::orbit::ensemble::{Sample, StartLaw, sample};
use crate::run::Control;
use crate::study::folder::spell_code;
use crate::table::Table;
use rayon::prelude::*;
use std::io::{self, Write};

/// Orbits that are traced before they are written: bounds the memory.
const BATCH: u64 = 4096;

pub fn run(options: &OrbitsOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let tables = TraceTables::new(table);
    let law = StartLaw::new(table);
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("orbits", Some(options.count));
    let done = emit(options.out.as_deref(), |out| {
        write_all(options, table, &tables, &law, &control, out)
    });
    drop(progress);
    if control.is_stopped() {
        let what = match options.out {
            Some(_) => "nothing was written",
            None => "the orbits printed so far are complete",
        };
        return Err(Fault::Stopped(format!(
            "a signal came before all orbits were traced; {what}"
        )));
    }
    done
}

fn write_all(
    options: &OrbitsOptions,
    table: &Table,
    tables: &TraceTables,
    law: &StartLaw,
    control: &Control,
    out: &mut dyn Write,
) -> io::Result<()> {
    if options.format == Format::Csv {
        writeln!(out, "orbit,side,fraction,aim_x,aim_y,word")?;
    }
    let mut first = 0;
    while first < options.count {
        let batch = BATCH.min(options.count - first);
        let rows: Vec<String> = (first..first + batch)
            .into_par_iter()
            .map(|index| {
                let sample = sample(tables, law, options.seed, index, options.hits);
                row(table, index, &sample, options.format)
            })
            .collect();
        for row in rows {
            writeln!(out, "{row}")?;
        }
        first += batch;
        if control.tick(batch).is_err() {
            return Err(io::Error::other("stopped"));
        }
    }
    Ok(())
}

fn row(table: &Table, index: u64, sample: &Sample, format: Format) -> String {
    let word = spell_code(table, &sample.word);
    let side = table.letter(sample.start.side);
    let (fraction, aim) = (&sample.start.fraction, &sample.start.aim);
    match format {
        Format::Text => word,
        Format::Csv => format!("{index},{side},{fraction},{},{},{word}", aim.x, aim.y),
        Format::Json => serde_json::json!({
            "orbit": index,
            "side": side.to_string(),
            "fraction": fraction.to_string(),
            "aim": [aim.x.to_string(), aim.y.to_string()],
            "word": word,
        })
        .to_string(),
    }
}
