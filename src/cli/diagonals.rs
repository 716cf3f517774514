//! `reboundary diagonals`.

use super::arguments::{DiagonalsOptions, Format};
use super::fault::Fault;
use super::output::{emit, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::complexity::diagonals::{Diagonal, list};
use crate::study::folder::{spell_code, write_diagonals};
use crate::table::Table;
use crate::table::summary::{ExactVector, root_decimal};
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::io::{self, Write};

#[derive(Serialize)]
struct Listed {
    crossings: usize,
    start_corner: u8,
    end_corner: u8,
    code: String,
    displacement: ExactVector,
    length: String,
}

#[derive(Serialize)]
struct DiagonalsRecord {
    schema: &'static str,
    title: String,
    /// The most sides crossed.
    length: usize,
    /// N(0), N(1), …
    by_crossings: Vec<u64>,
    diagonals: Vec<Listed>,
}

pub fn run(options: &DiagonalsOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, options.length, options.exactness.arithmetic());
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("generalized diagonals", None);
    let (found, _) = list(&engine, &mesh, options.length, &control)?;
    drop(progress);
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_text(table, &found, out),
        Format::Csv => write_diagonals(table, &found, out),
        Format::Json => write_json(out, &record(table, &found, options.length)),
    })
}

fn listed(table: &Table, diagonal: &Diagonal) -> Listed {
    Listed {
        crossings: diagonal.code.len(),
        start_corner: diagonal.start.0,
        end_corner: diagonal.end.0,
        code: spell_code(table, &diagonal.code),
        displacement: ExactVector::new(&diagonal.displacement),
        length: root_decimal(&diagonal.displacement.squared_length(table.form())),
    }
}

fn record(table: &Table, found: &[Diagonal], length: usize) -> DiagonalsRecord {
    let mut by_crossings = vec![0; length + 1];
    for diagonal in found {
        by_crossings[diagonal.code.len()] += 1;
    }
    DiagonalsRecord {
        schema: "reboundary-diagonals/1",
        title: table.title().into(),
        length,
        by_crossings,
        diagonals: found.iter().map(|d| listed(table, d)).collect(),
    }
}

fn write_text(table: &Table, found: &[Diagonal], out: &mut dyn Write) -> io::Result<()> {
    let rows: Vec<Vec<String>> = found
        .iter()
        .map(|d| {
            let row = listed(table, d);
            vec![
                row.crossings.to_string(),
                row.start_corner.to_string(),
                row.end_corner.to_string(),
                row.code,
                row.displacement.x.exact,
                row.displacement.y.exact,
                row.length,
            ]
        })
        .collect();
    write_columns(
        out,
        &["sides", "from", "to", "code", "x", "y", "length"],
        &rows,
    )
}
