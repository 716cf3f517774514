//! `reboundary complexity`.

use super::arguments::{ComplexityOptions, Format, Route};
use super::fault::Fault;
use super::output::{emit, note, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use super::stats::Stats;
use crate::complexity::claim::Claim;
use crate::complexity::counts::{Counts, first_disagreement, p_from_diagonals};
use crate::complexity::diagonals;
use crate::language::walk;
use crate::number::Tiers;
use crate::run::budget::{Budget, stages};
use crate::run::checkpoint::{Checkpoint, Identity, Ledger, Unkept};
use crate::run::{Control, StopReason, Stopped, memory};
use crate::study::claims::{ClaimRecord, judge};
use crate::table::Table;
use crate::table::file::LoadedTable;
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
    /// Stated bounds, checked.
    claims: Vec<ClaimRecord>,
    complete: bool,
    complete_to: usize,
    #[serde(skip_serializing_if = "Option::is_none")]
    stats: Option<Stats>,
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
    let control = interruptible_control();
    let budget = options.limits.budget();
    let watch = budget.watch(&control);
    if budget.memory.is_some() && memory::resident().is_none() {
        return Err(Fault::BadInput(
            "this system does not tell how much memory is used: leave out --budget-memory".into(),
        ));
    }
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let route = route(table, options.route)?;
    let checkpoint = open_checkpoint(options, &loaded, route)?;
    let mut stats = Stats::new();
    let progress = Progress::new(&control, options.common.quiet);
    let lengths = match budget == Budget::default() {
        true => vec![options.length],
        false => stages(options.length),
    };
    let engine = AnyEngine::new(table, options.length, options.exactness.arithmetic());
    let walks = Walks {
        engine: &engine,
        mesh: &Mesh::new(table),
        sides: table.sides() as u64,
        route,
        control: &control,
        progress: &progress,
        checkpoint: checkpoint.as_ref(),
    };
    let mut done = None;
    let mut stopped = false;
    for length in lengths {
        match walks.stage(length, &mut stats) {
            Ok(stage) => done = Some(stage),
            Err(Stopped) => {
                stopped = true;
                break;
            }
        }
    }
    drop((progress, watch));
    if let Some(failure) = checkpoint.as_ref().and_then(Checkpoint::failure) {
        note(&format!("the checkpoint is not up to date: {failure}"));
    }
    stats.finish(&engine, checkpoint.as_ref());
    if options.stats && (done.is_none() || options.format != Format::Json) {
        stats.tell();
    }
    let disagreement = match done {
        Some(ref stage) => stage.disagreement.flatten(),
        None => None,
    };
    let complete_to = done.as_ref().map(|stage| stage.length);
    if let Some(stage) = done {
        let told = (options.stats && options.format == Format::Json).then_some(stats);
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
    match stopped {
        true => Err(stop(&control, complete_to, options)),
        false => Ok(()),
    }
}

/// What the stages share.
struct Walks<'a> {
    engine: &'a AnyEngine,
    mesh: &'a Mesh,
    sides: u64,
    route: Route,
    control: &'a Control,
    progress: &'a Progress,
    checkpoint: Option<&'a Checkpoint>,
}

impl Walks<'_> {
    /// Counts up to a length by the routes asked for.
    fn stage(&self, length: usize, stats: &mut Stats) -> Result<Stage, Stopped> {
        let (engine, mesh, control) = (self.engine, self.mesh, self.control);
        let mut found = None;
        if self.route != Route::Beams {
            self.progress.begin("generalized diagonals", None);
            let most = length.saturating_sub(2);
            let count =
                |ledger: &dyn Ledger| diagonals::count_kept(engine, mesh, most, control, ledger);
            found = Some(self.walk("diagonals", length, stats, count)?);
        }
        let by_diagonals = found
            .as_ref()
            .map(|n| p_from_diagonals(self.sides, n, length));
        let mut by_beams = None;
        if self.route != Route::Diagonals {
            let words = by_diagonals.as_ref().map(|p| p.iter().sum());
            self.progress.begin("beams", words);
            let count =
                |ledger: &dyn Ledger| walk::count_kept(engine, mesh, length, control, ledger);
            by_beams = Some(self.walk("beams", length, stats, count)?);
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

    /// One walk, with its parts kept when there is a checkpoint.
    fn walk(
        &self,
        name: &'static str,
        length: usize,
        stats: &mut Stats,
        count: impl FnOnce(&dyn Ledger) -> Result<(Vec<u64>, Tiers), Stopped>,
    ) -> Result<Vec<u64>, Stopped> {
        let timer = stats.begin(name, length, self.control.done());
        let counted = match self.checkpoint {
            Some(checkpoint) => count(&checkpoint.walk(name, length)),
            None => count(&Unkept),
        };
        let tiers = counted.as_ref().ok().map(|(_, tiers)| *tiers);
        stats.end(timer, self.control.done(), tiers);
        Ok(counted?.0)
    }
}

/// The checkpoint asked for. Threads, budgets and formats do not change what the parts are.
fn open_checkpoint(
    options: &ComplexityOptions,
    loaded: &LoadedTable,
    route: Route,
) -> Result<Option<Checkpoint>, Fault> {
    let Some(folder) = &options.checkpoint else {
        return Ok(None);
    };
    let mut table = loaded.text.clone();
    for base in &loaded.bases {
        table += &format!("\n[base {}]\n{}", base.name, base.text);
    }
    let mut line = format!("--length {} --route {}", options.length, name(route));
    for setting in &options.settings.set {
        line += &format!(" --set {setting}");
    }
    if options.exactness.exact_only {
        line += " --exact-only";
    }
    let identity = Identity {
        version: env!("CARGO_PKG_VERSION").into(),
        table,
        options: line,
    };
    let checkpoint = Checkpoint::open(folder, &identity, options.resume)?;
    if checkpoint.rejected() > 0 && !options.common.quiet {
        note(&format!(
            "{} lines of the checkpoint are torn or altered; their parts are computed again",
            checkpoint.rejected()
        ));
    }
    Ok(Some(checkpoint))
}

/// Says why the work was stopped and what there is of it.
fn stop(control: &Control, complete_to: Option<usize>, options: &ComplexityOptions) -> Fault {
    let why = match control.reason() {
        Some(StopReason::Time) => "the time allowed was over",
        Some(StopReason::Memory) => "more memory was used than allowed",
        Some(StopReason::Signal) | None => "a signal came",
    };
    let what = match complete_to {
        Some(n) => format!("the result is complete to n = {n} of {}", options.length),
        None => "nothing was written".into(),
    };
    let next = match options.checkpoint {
        Some(_) => "; finished parts are kept, and --resume continues",
        None => "",
    };
    Fault::Stopped(format!("{why} before the work was complete; {what}{next}"))
}

fn record(
    table: &Table,
    length: usize,
    route: Route,
    stage: Stage,
    claims: &[Claim],
    stats: Option<Stats>,
) -> ComplexityRecord {
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
fn write_claims(record: &ComplexityRecord, out: &mut dyn Write) -> io::Result<()> {
    for claim in &record.claims {
        let label = claim.standing.label();
        writeln!(out, "{label}: {} ({})", claim.claim, claim.grounds)?;
    }
    Ok(())
}

fn write_csv(record: &ComplexityRecord, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["n", "p", "s", "b", "diagonals"])?;
    for row in rows(record) {
        csv.write_record(row)?;
    }
    csv.flush()
}
