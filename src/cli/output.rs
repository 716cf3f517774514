//! Where results are printed, and how tables are read.

use super::arguments::Settings;
use super::fault::Fault;
use crate::run::files::write_whole;
use crate::table::file::{LoadedTable, load_with, rehearse};
use std::io::{self, BufWriter, Write};
use std::path::Path;

/// Reads a table with its settings and tells its notices.
pub fn read_table(path: &Path, settings: &Settings, quiet: bool) -> Result<LoadedTable, Fault> {
    let loaded = load_with(path, &settings.set)?;
    rehearse(&loaded)?;
    if !quiet {
        for notice in &loaded.notices {
            note(notice);
        }
    }
    Ok(loaded)
}

/// Tells the user something beside the result.
pub fn note(text: &str) {
    // A closed standard error is no reason to fail.
    let _ = writeln!(io::stderr(), "note: {text}");
}

/// Writes a result to a file, whole or not at all, or to standard output.
pub fn emit(
    out: Option<&Path>,
    fill: impl FnOnce(&mut dyn Write) -> io::Result<()>,
) -> Result<(), Fault> {
    match out {
        Some(path) => Ok(write_whole(path, fill)?),
        None => {
            let mut buffered = BufWriter::new(io::stdout().lock());
            fill(&mut buffered)?;
            Ok(buffered.flush()?)
        }
    }
}

/// Writes rows of cells in columns, right-aligned.
pub fn write_columns(out: &mut dyn Write, header: &[&str], rows: &[Vec<String>]) -> io::Result<()> {
    let width = |c: usize| {
        let cells = rows.iter().map(|row| row[c].chars().count());
        cells.chain([header[c].chars().count()]).max().unwrap_or(0)
    };
    let widths: Vec<usize> = (0..header.len()).map(width).collect();
    let mut line = |cells: &mut dyn Iterator<Item = &str>| {
        let padded: Vec<String> = cells
            .zip(&widths)
            .map(|(cell, width)| format!("{}{cell}", " ".repeat(width - cell.chars().count())))
            .collect();
        writeln!(out, "{}", padded.join("  ").trim_end())
    };
    line(&mut header.iter().copied())?;
    for row in rows {
        line(&mut row.iter().map(String::as_str))?;
    }
    Ok(())
}

/// Writes a value as pretty JSON with a final newline.
pub fn write_json(out: &mut dyn Write, value: &impl serde::Serialize) -> io::Result<()> {
    serde_json::to_writer_pretty(&mut *out, value)?;
    out.write_all(b"\n")
}
