//! `reboundary complexity`.

use super::arguments::{ComplexityOptions, Format, Route};
use super::fault::Fault;
use super::output::{emit, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::complexity::counts::{Counts, first_disagreement, p_from_diagonals};
use crate::complexity::diagonals;
use crate::language::walk;
use crate::table::Table;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::io::{self, Write};

/// The JSON object of the command.
#[derive(Debug, Serialize)]
struct ComplexityRecord {
    schema: &'static str,
    title: String,
    length: usize,
    route: &'static str,
    p: Vec<u64>,
    first_difference: Vec<i64>,
    second_difference: Vec<i64>,
    /// N(0), N(1), …; null when the route did not run.
    diagonals: Option<Vec<u64>>,
    /// Null unless both routes ran.
    routes_agree: Option<bool>,
    complete: bool,
    complete_to: usize,
}

pub fn run(options: &ComplexityOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let route = route(table, options.route)?;
    let (mesh, length) = (Mesh::new(table), options.length);
    let engine = AnyEngine::new(table, length, options.exactness.arithmetic());
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    let mut found = None;
    if route != Route::Beams {
        progress.begin("generalized diagonals", None);
        found = Some(diagonals::count(&engine, &mesh, length.saturating_sub(2), &control)?.0);
    }
    let by_diagonals = found
        .as_ref()
        .map(|n| p_from_diagonals(table.sides() as u64, n, length));
    let by_beams = if route == Route::Diagonals {
        None
    } else {
        progress.begin("beams", by_diagonals.as_ref().map(|p| p.iter().sum()));
        Some(walk::count(&engine, &mesh, length, &control)?.0)
    };
    drop(progress);
    let disagreement = match (&by_beams, &by_diagonals) {
        (Some(a), Some(b)) => Some(first_disagreement(a, b)),
        _ => None,
    };
    let p = by_beams.or(by_diagonals).expect("at least one route ran");
    let counts = Counts::from_p(p);
    let record = ComplexityRecord {
        schema: "reboundary-complexity/1",
        title: table.title().into(),
        length,
        route: match route {
            Route::Beams => "beams",
            Route::Diagonals => "diagonals",
            Route::Both => "both",
        },
        p: counts.p,
        first_difference: counts.first_difference,
        second_difference: counts.second_difference,
        diagonals: found,
        routes_agree: disagreement.map(|d| d.is_none()),
        complete: true,
        complete_to: length,
    };
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_text(&record, out),
        Format::Json => write_json(out, &record),
        Format::Csv => write_csv(&record, out),
    })?;
    match disagreement {
        Some(Some(n)) => Err(Fault::Failed(format!(
            "the two routes to p(n) differ, first at n = {n}; please report this table as a fault of the program"
        ))),
        _ => Ok(()),
    }
}

/// The route asked for, when it leads to p(n) for this table.
fn route(table: &Table, asked: Option<Route>) -> Result<Route, Fault> {
    match asked {
        None if table.has_one_beam_a_word() => Ok(Route::Both),
        None | Some(Route::Beams) => Ok(Route::Beams),
        Some(route) if table.has_one_beam_a_word() => Ok(route),
        Some(_) => {
            let why = if table.holes() > 0 {
                "the table has holes"
            } else {
                "sides share letters"
            };
            Err(Fault::BadInput(format!(
                "p(n) does not follow from generalized diagonals here, because {why}: a word is a bundle of beams; write --route beams"
            )))
        }
    }
}

fn rows(record: &ComplexityRecord) -> Vec<Vec<String>> {
    (0..record.p.len())
        .map(|n| {
            let cell = |values: &[i64]| values.get(n).map_or(String::new(), i64::to_string);
            let diagonals = record.diagonals.as_ref().and_then(|d| d.get(n));
            vec![
                n.to_string(),
                record.p[n].to_string(),
                cell(&record.first_difference),
                cell(&record.second_difference),
                diagonals.map_or(String::new(), u64::to_string),
            ]
        })
        .collect()
}

fn write_text(record: &ComplexityRecord, out: &mut dyn Write) -> io::Result<()> {
    writeln!(out, "{}", record.title)?;
    write_columns(out, &["n", "p(n)", "s(n)", "b(n)", "N(n)"], &rows(record))?;
    match record.routes_agree {
        Some(true) => writeln!(out, "both routes agree for every n up to {}", record.length),
        Some(false) => writeln!(out, "the routes DISAGREE"),
        None => Ok(()),
    }
}

fn write_csv(record: &ComplexityRecord, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["n", "p", "s", "b", "diagonals"])?;
    for row in rows(record) {
        csv.write_record(row)?;
    }
    csv.flush()
}
