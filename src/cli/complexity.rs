//! `reboundary complexity`.

use super::arguments::{ComplexityOptions, Format, Route};
use super::fault::Fault;
use super::output::{emit, read_table, write_columns, write_json};
use super::stats::Stats;
use super::work::{Work, options_line};
use crate::complexity::claim::Claim;
use crate::complexity::counts::{Counts, first_disagreement, p_from_diagonals};
use crate::complexity::diagonals;
use crate::language::walk;
use crate::run::Stopped;
use crate::run::checkpoint::ledger;
use crate::study::claims::{ClaimRecord, judge};
use crate::table::Table;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::io::{self, Write};

/// The JSON object of the command.
#[derive(Debug, Serialize)]
struct ComplexityRecord<'a> {
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
    /// Stated bounds, checked.
    claims: Vec<ClaimRecord>,
    complete: bool,
    complete_to: usize,
    #[serde(skip_serializing_if = "Option::is_none")]
    stats: Option<&'a Stats>,
}

/// What one stage found.
struct Stage {
    length: usize,
    diagonals: Option<Vec<u64>>,
    p: Vec<u64>,
    /// Where the routes differ first, when both ran.
    disagreement: Option<Option<usize>>,
}

pub fn run(options: &ComplexityOptions) -> Result<(), Fault> {
    let claims = options.claims.parse()?;
    let quiet = options.common.quiet;
    let mut work = Work::begin(options.limits.budget(), quiet)?;
    let loaded = read_table(&options.table, &options.settings, quiet)?;
    let table = &loaded.table;
    let route = route(table, options.route)?;
    let asked = format!("--length {} --route {}", options.length, name(route));
    let line = options_line(&asked, &options.settings.set, options.exactness.exact_only);
    work.open(&options.keeping, &loaded, &line, quiet)?;
    let engine = AnyEngine::new(table, options.length, options.exactness.arithmetic());
    let walks = Walks {
        engine: &engine,
        mesh: &Mesh::new(table),
        sides: table.sides() as u64,
        route,
    };
    let mut done = None;
    let mut stopped = false;
    for length in work.lengths(options.length) {
        match walks.stage(length, &mut work) {
            Ok(stage) => done = Some(stage),
            Err(Stopped) => {
                stopped = true;
                break;
            }
        }
    }
    work.end(Some(engine.describe()));
    if options.stats && (done.is_none() || options.format != Format::Json) {
        work.stats.tell();
    }
    let disagreement = match done {
        Some(ref stage) => stage.disagreement.flatten(),
        None => None,
    };
    let complete_to = done.as_ref().map(|stage| stage.length);
    if let Some(stage) = done {
        let told = options.stats && options.format == Format::Json;
        let told = told.then_some(&work.stats);
        let record = record(table, options.length, route, stage, &claims, told);
        emit(options.out.as_deref(), |out| match options.format {
            Format::Text => write_text(&record, out),
            Format::Json => write_json(out, &record),
            Format::Csv => write_csv(&record, out),
        })?;
        if options.format == Format::Csv {
            // Rows of numbers have no place for them.
            write_claims(&record, &mut io::stderr())?;
        }
    }
    if let Some(n) = disagreement {
        return Err(Fault::Failed(format!(
            "the two routes to p(n) differ, first at n = {n}; please report this table as a fault of the program"
        )));
    }
    let what = |n| format!("the result is complete to n = {n} of {}", options.length);
    match stopped {
        true => Err(work.stopped(complete_to.map(what))),
        false => Ok(()),
    }
}

/// What the stages share.
struct Walks<'a> {
    engine: &'a AnyEngine,
    mesh: &'a Mesh,
    sides: u64,
    route: Route,
}

impl Walks<'_> {
    /// Counts up to a length by the routes asked for.
    fn stage(&self, length: usize, work: &mut Work) -> Result<Stage, Stopped> {
        let (engine, mesh) = (self.engine, self.mesh);
        let mut found = None;
        if self.route != Route::Beams {
            let most = length.saturating_sub(2);
            found = Some(work.walk("diagonals", length, None, |control, checkpoint| {
                let ledger = ledger(checkpoint, "diagonals", length);
                diagonals::count_kept(engine, mesh, most, control, &*ledger)
            })?);
        }
        let by_diagonals = found
            .as_ref()
            .map(|n| p_from_diagonals(self.sides, n, length));
        let mut by_beams = None;
        if self.route != Route::Diagonals {
            let words = by_diagonals.as_ref().map(|p| p.iter().sum());
            by_beams = Some(work.walk("beams", length, words, |control, checkpoint| {
                let ledger = ledger(checkpoint, "beams", length);
                walk::count_kept(engine, mesh, length, control, &*ledger)
            })?);
        }
        let disagreement = match (&by_beams, &by_diagonals) {
            (Some(a), Some(b)) => Some(first_disagreement(a, b)),
            _ => None,
        };
        Ok(Stage {
            length,
            diagonals: found,
            p: by_beams.or(by_diagonals).expect("at least one route ran"),
            disagreement,
        })
    }
}

fn record<'a>(
    table: &Table,
    length: usize,
    route: Route,
    stage: Stage,
    claims: &[Claim],
    stats: Option<&'a Stats>,
) -> ComplexityRecord<'a> {
    let counts = Counts::from_p(stage.p);
    let diagonals = stage.diagonals.as_deref();
    let claims = claims
        .iter()
        .map(|claim| judge(claim, &counts, diagonals))
        .collect();
    ComplexityRecord {
        schema: "reboundary-complexity/1",
        title: table.title().into(),
        length,
        route: name(route),
        p: counts.p,
        first_difference: counts.first_difference,
        second_difference: counts.second_difference,
        diagonals: stage.diagonals,
        routes_agree: stage.disagreement.map(|d| d.is_none()),
        claims,
        complete: stage.length == length,
        complete_to: stage.length,
        stats,
    }
}

fn name(route: Route) -> &'static str {
    match route {
        Route::Beams => "beams",
        Route::Diagonals => "diagonals",
        Route::Both => "both",
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

fn rows(record: &ComplexityRecord<'_>) -> Vec<Vec<String>> {
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

fn write_text(record: &ComplexityRecord<'_>, out: &mut dyn Write) -> io::Result<()> {
    writeln!(out, "{}", record.title)?;
    write_columns(out, &["n", "p(n)", "s(n)", "b(n)", "N(n)"], &rows(record))?;
    match record.routes_agree {
        Some(true) => writeln!(
            out,
            "both routes agree for every n up to {}",
            record.complete_to
        )?,
        Some(false) => writeln!(out, "the routes DISAGREE")?,
        None => {}
    }
    write_claims(record, out)?;
    if !record.complete {
        writeln!(
            out,
            "stopped: complete to n = {} of {}",
            record.complete_to, record.length
        )?;
    }
    Ok(())
}

/// One line for each claim: its standing, the claim, the grounds.
fn write_claims(record: &ComplexityRecord<'_>, out: &mut dyn Write) -> io::Result<()> {
    for claim in &record.claims {
        let label = claim.standing.label();
        writeln!(out, "{label}: {} ({})", claim.claim, claim.grounds)?;
    }
    Ok(())
}

fn write_csv(record: &ComplexityRecord<'_>, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["n", "p", "s", "b", "diagonals"])?;
    for row in rows(record) {
        csv.write_record(row)?;
    }
    csv.flush()
}
