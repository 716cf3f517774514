//! `reboundary diagonals`.

use super::arguments::{DiagonalRows, DiagonalsOptions, Format};
use super::fault::Fault;
use super::launch::Launcher;
use super::output::{emit, read_table, write_columns, write_json};
use super::stats::Stats;
use super::work::{Work, time_only};
use crate::complexity::by_distance::{DistanceFault, list_within};
use crate::complexity::diagonals::{Diagonal, count, list};
use crate::number::Real;
use crate::run::budget::Budget;
use crate::run::control::StopReason;
use crate::run::{Control, memory};
use crate::study::folder::{DIAGONAL_COLUMNS, spell_code, write_diagonals};
use crate::table::Table;
use crate::table::facts::{Angle, facts, squared_area};
use crate::table::summary::{Exact, ExactVector, root_decimal};
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use rug::Rational;
use serde::Serialize;
use std::f64::consts::PI;
use std::io::{self, Write};

#[derive(Serialize)]
pub(super) struct Listed {
    crossings: usize,
    start_corner: u8,
    end_corner: u8,
    code: String,
    displacement: ExactVector,
    length: String,
}

#[derive(Serialize)]
struct DiagonalsRecord<'a> {
    schema: &'static str,
    title: String,
    /// The most sides crossed.
    length: usize,
    complete: bool,
    complete_to: usize,
    /// N(0), N(1), …
    by_crossings: Vec<u64>,
    diagonals: Vec<Listed>,
    #[serde(skip_serializing_if = "Option::is_none")]
    stats: Option<&'a Stats>,
}

pub fn run(options: &DiagonalsOptions) -> Result<(), Fault> {
    if options.rows == DiagonalRows::ByLength && options.distance.is_none() {
        return Err(Fault::BadInput(
            "--rows by-length needs --distance L: only then are all diagonals up to a length known"
                .into(),
        ));
    }
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    if let Some(distance) = &options.distance {
        return within(options, &loaded.table, distance);
    }
    let mut work = Work::begin(time_only(options.limits.budget_time), options.common.quiet)?;
    let table = &loaded.table;
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, options.length, options.exactness.arithmetic());
    let listing = options.rows == DiagonalRows::List || options.format == Format::Json;
    let mut done = None;
    let mut stop = None;
    for length in work.lengths(options.length) {
        match stage(&mut work, (&engine, &mesh), length, listing, options) {
            Ok(found) => done = Some((length, found)),
            Err(fault) => {
                stop = Some(fault);
                break;
            }
        }
    }
    work.end(Some(engine.describe()));
    let in_json = options.format == Format::Json;
    if options.stats && (done.is_none() || !in_json) {
        work.stats.tell();
    }
    let complete_to = done.as_ref().map(|(length, _)| *length);
    if let Some((complete_to, (counts, found))) = done {
        if listing {
            emit(options.out.as_deref(), |out| match options.format {
                Format::Text => write_text(table, "t", &found, out),
                Format::Csv => write_diagonals(table, &found, out),
                Format::Json => {
                    let told = options.stats.then_some(&work.stats);
                    let record = record(table, &found, options.length, complete_to);
                    write_json(
                        out,
                        &DiagonalsRecord {
                            stats: told,
                            ..record
                        },
                    )
                }
            })?;
        } else {
            emit_rows(options, &sides_header(), &by_sides(&counts))?;
        }
    }
    let what = |n| {
        format!(
            "all that cross at most {n} sides are there, not those with {}",
            options.length
        )
    };
    match stop {
        Some(Fault::Stopped(_)) => Err(work.stopped(complete_to.map(what))),
        Some(fault) => Err(fault),
        None => Ok(()),
    }
}

/// How many diagonals cross 0, 1, … sides, up to a length, and, for a listing, all of them.
fn stage(
    work: &mut Work,
    (engine, mesh): (&AnyEngine, &Mesh),
    length: usize,
    listing: bool,
    options: &DiagonalsOptions,
) -> Result<(Vec<u64>, Vec<Diagonal>), Fault> {
    let counts = work.walk("counting", length, None, |control, _| {
        count(engine, mesh, length, control)
    })?;
    if !listing {
        return Ok((counts, Vec::new()));
    }
    check_memory(&counts, options.limits.budget_memory)?;
    let found = work.walk("diagonals", length, None, |control: &Control, _| {
        list(engine, mesh, length, control)
    })?;
    Ok((counts, found))
}

/// Bytes that a listed diagonal takes beside its code: an estimate on the large side, with its text for the output.
const BYTES_PER_DIAGONAL: u64 = 700;

/// Refuses a list that would not fit in memory.
fn check_memory(counts: &[u64], allowed: Option<u64>) -> Result<(), Fault> {
    let each = (0..).zip(counts);
    let needed = each.fold(0u64, |sum, (crossings, count): (u64, &u64)| {
        sum.saturating_add(count.saturating_mul(BYTES_PER_DIAGONAL + 3 * crossings))
    });
    let allowed = allowed.or_else(|| memory::available().map(|free| free / 10 * 9));
    match allowed {
        Some(allowed) if needed > allowed => Err(Fault::BadInput(format!(
            "{} generalized diagonals need about {}, but only {} may be used; choose a smaller --length or a larger \
             --budget-memory, or only count them with --rows by-sides",
            counts.iter().sum::<u64>(),
            memory::display(needed),
            memory::display(allowed)
        ))),
        _ => Ok(()),
    }
}

fn sides_header() -> [&'static str; 3] {
    ["sides", "diagonals", "up_to"]
}

/// How many cross each number of sides, and at most that.
fn by_sides(counts: &[u64]) -> Vec<Vec<String>> {
    let mut total = 0;
    let row = |(sides, count): (usize, &u64)| {
        total += count;
        [sides as u64, *count, total]
            .map(|n| n.to_string())
            .to_vec()
    };
    counts.iter().enumerate().map(row).collect()
}

/// How many have each length L, N(L) and N(L)/L². The list is sorted by length.
fn by_length(table: &Table, generator: &str, found: &[Diagonal]) -> Vec<Vec<String>> {
    let square = |d: &Diagonal| d.displacement.squared_length(table.form());
    let squares: Vec<Real> = found.iter().map(square).collect();
    let mut rows = Vec::new();
    let mut total = 0;
    for same in squares.chunk_by(|a, b| a == b) {
        total += same.len();
        let squared = &same[0];
        let growth = Real::from(total as i64) / squared;
        rows.push(vec![
            root_decimal(squared),
            squared.display_in(generator),
            same.len().to_string(),
            total.to_string(),
            growth.decimal(6),
        ]);
    }
    rows
}

fn emit_rows(
    options: &DiagonalsOptions,
    header: &[&str],
    rows: &[Vec<String>],
) -> Result<(), Fault> {
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_columns(out, header, rows),
        _ => {
            let mut csv = csv::Writer::from_writer(out);
            csv.write_record(header)?;
            rows.iter().try_for_each(|row| csv.write_record(row))?;
            csv.flush()
        }
    })
}

fn within(options: &DiagonalsOptions, table: &Table, text: &str) -> Result<(), Fault> {
    let mut launcher = Launcher::new(table);
    let distance = launcher.positive("--distance", text)?;
    let (table, lifter) = launcher.finish();
    let (distance, generator) = (lifter.number(&distance), lifter.generator());
    if options.stats {
        return Err(Fault::BadInput(
            "--stats does not go with --distance: leave one of them out".into(),
        ));
    }
    // How many there are shows only while they are found.
    let most = options
        .limits
        .budget_memory
        .or_else(|| Some(memory::available()? / 10 * 9 + memory::resident()?));
    let budget = Budget {
        time: options.limits.budget_time,
        memory: most,
    };
    let work = Work::begin(budget, options.common.quiet)?;
    work.progress.begin("generalized diagonals", None);
    let found = list_within(
        &table,
        &Mesh::new(&table),
        &(&distance * &distance),
        options.exactness.arithmetic(),
        &work.control,
    );
    let found = found.map_err(|fault| match fault {
        DistanceFault::Stopped(_) if work.control.reason() == Some(StopReason::Memory) => {
            Fault::Stopped(
                "more memory was used than allowed before the list was complete; nothing was written: choose a smaller \
                 --distance or a larger --budget-memory"
                    .into(),
            )
        }
        DistanceFault::Stopped(_) => work.stopped(None),
        DistanceFault::TooFar => Fault::BadInput(fault.to_string()),
    })?;
    drop(work);
    match (options.rows, options.format) {
        (DiagonalRows::BySides, Format::Text | Format::Csv) => {
            return emit_rows(
                options,
                &sides_header(),
                &by_sides(&crossing_counts(&found)),
            );
        }
        (DiagonalRows::ByLength, Format::Text | Format::Csv) => {
            let header = [
                "length",
                "squared_length",
                "diagonals",
                "up_to",
                "up_to_over_squared_length",
            ];
            return emit_rows(options, &header, &by_length(&table, generator, &found));
        }
        _ => {}
    }
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_text(&table, generator, &found, out),
        Format::Csv => write_csv(&table, generator, &found, out),
        Format::Json => write_json(out, &distance_record(&table, generator, &found, &distance)),
    })
}

/// How many cross 0, 1, 2, … sides.
fn crossing_counts(found: &[Diagonal]) -> Vec<u64> {
    let most = found.iter().map(|d| d.code.len()).max().unwrap_or(0);
    let mut counts = vec![0; most + 1];
    found.iter().for_each(|d| counts[d.code.len()] += 1);
    counts
}

/// A diagonal with its letters, exact displacement and length.
pub(super) fn listed(table: &Table, generator: &str, diagonal: &Diagonal) -> Listed {
    Listed {
        crossings: diagonal.code.len(),
        start_corner: diagonal.start.0,
        end_corner: diagonal.end.0,
        code: spell_code(table, &diagonal.code),
        displacement: ExactVector::in_terms_of(generator, &diagonal.displacement),
        length: root_decimal(&diagonal.displacement.squared_length(table.form())),
    }
}

fn record(
    table: &Table,
    found: &[Diagonal],
    length: usize,
    complete_to: usize,
) -> DiagonalsRecord<'static> {
    let mut by_crossings = vec![0; complete_to + 1];
    for diagonal in found {
        by_crossings[diagonal.code.len()] += 1;
    }
    DiagonalsRecord {
        schema: "reboundary-diagonals/1",
        title: table.title().into(),
        length,
        complete: complete_to == length,
        complete_to,
        by_crossings,
        diagonals: found.iter().map(|d| listed(table, "t", d)).collect(),
        stats: None,
    }
}

fn write_text(
    table: &Table,
    generator: &str,
    found: &[Diagonal],
    out: &mut dyn Write,
) -> io::Result<()> {
    let rows: Vec<Vec<String>> = found
        .iter()
        .map(|d| {
            let row = listed(table, generator, d);
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

/// The columns of the list by sides crossed; displacements may need a larger field than the table's.
fn write_csv(
    table: &Table,
    generator: &str,
    found: &[Diagonal],
    out: &mut dyn Write,
) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(DIAGONAL_COLUMNS)?;
    for diagonal in found {
        let row = listed(table, generator, diagonal);
        csv.write_record([
            row.crossings.to_string(),
            row.start_corner.to_string(),
            row.end_corner.to_string(),
            row.code,
            row.displacement.x.exact,
            row.displacement.y.exact,
            row.displacement.x.decimal,
            row.displacement.y.decimal,
            row.length,
        ])?;
    }
    csv.flush()
}

/// Segments between two corners, in both directions.
#[derive(Serialize)]
struct Pair {
    corners: [u8; 2],
    /// Not oriented.
    count: usize,
    /// L²/(2π·area) between two right angles, four times that between a right angle and one of 270°: the
    /// leading term for almost every right-angled table of a family (Athreya, Eskin, Zorich, arXiv 1212.1660).
    /// Null for other pairs.
    published: Option<f64>,
}

#[derive(Serialize)]
struct DistanceRecord {
    schema: &'static str,
    title: String,
    distance: Exact,
    /// N(L), oriented.
    count: usize,
    /// N(L)/L²: between two positive bounds for large L on every table with rational angles (Masur 1988, 1990).
    count_over_squared_distance: f64,
    /// How many of them cross 0, 1, 2, … sides.
    by_crossings: Vec<u64>,
    /// How many are no longer than L/16, 2L/16, …, L.
    by_distance: Vec<usize>,
    /// For right-angled tables: each pair of different corners.
    pairs: Option<Vec<Pair>>,
    diagonals: Vec<Listed>,
}

fn distance_record(
    table: &Table,
    generator: &str,
    found: &[Diagonal],
    distance: &Real,
) -> DistanceRecord {
    let squares: Vec<Real> = found
        .iter()
        .map(|d| d.displacement.squared_length(table.form()))
        .collect();
    let by_distance = (1..=16)
        .map(|i| {
            let part = distance * &Real::from(Rational::from((i, 16)));
            let square = &part * &part;
            // Sorted by length.
            squares.partition_point(|s| *s <= square)
        })
        .collect();
    DistanceRecord {
        schema: "reboundary-diagonals-within/1",
        title: table.title().into(),
        distance: Exact::in_terms_of(generator, distance),
        count: found.len(),
        count_over_squared_distance: found.len() as f64 / distance.to_f64().powi(2),
        by_crossings: crossing_counts(found),
        by_distance,
        pairs: pairs(table, found, distance),
        diagonals: found.iter().map(|d| listed(table, generator, d)).collect(),
    }
}

fn pairs(table: &Table, found: &[Diagonal], distance: &Real) -> Option<Vec<Pair>> {
    let facts = facts(table);
    if !facts.right_angled {
        return None;
    }
    let right = Angle::RationalMultipleOfPi(Rational::from((1, 2)));
    let area = squared_area(table, &facts).to_f64().sqrt();
    let unit = distance.to_f64().powi(2) / (2.0 * PI * area);
    let k = table.sides();
    let mut all = Vec::new();
    for (a, b) in (0..k).flat_map(|a| (a + 1..k).map(move |b| (a, b))) {
        let joins = |d: &&Diagonal| (d.start.0 as usize, d.end.0 as usize) == (a, b);
        let rights = [a, b].iter().filter(|c| facts.angles[**c] == right).count();
        all.push(Pair {
            corners: [a as u8, b as u8],
            count: found.iter().filter(joins).count(),
            published: match rights {
                2 => Some(unit),
                1 => Some(4.0 * unit),
                _ => None,
            },
        });
    }
    Some(all)
}
