//! `reboundary diagonals`.

use super::arguments::{DiagonalsOptions, Format};
use super::fault::Fault;
use super::launch::Launcher;
use super::output::{emit, read_table, write_columns, write_json};
use super::stats::Stats;
use super::work::Work;
use crate::complexity::by_distance::{DistanceFault, list_within};
use crate::complexity::diagonals::{Diagonal, list};
use crate::number::Real;
use crate::run::{Control, Stopped};
use crate::study::folder::{spell_code, write_diagonals};
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
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    if let Some(distance) = &options.distance {
        return within(options, &loaded.table, distance);
    }
    let mut work = Work::begin(options.limits.budget(), options.common.quiet)?;
    let table = &loaded.table;
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, options.length, options.exactness.arithmetic());
    let mut done = None;
    let mut stopped = false;
    for length in work.lengths(options.length) {
        let walk = |control: &Control, _: Option<&_>| list(&engine, &mesh, length, control);
        match work.walk("diagonals", length, None, walk) {
            Ok(found) => done = Some((length, found)),
            Err(Stopped) => {
                stopped = true;
                break;
            }
        }
    }
    work.end(&engine);
    let in_json = options.format == Format::Json;
    if options.stats && (done.is_none() || !in_json) {
        work.stats.tell();
    }
    let complete_to = done.as_ref().map(|(length, _)| *length);
    if let Some((complete_to, found)) = done {
        emit(options.out.as_deref(), |out| match options.format {
            Format::Text => write_text(table, &found, out),
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
    }
    let what = |n| {
        format!(
            "all that cross at most {n} sides are there, not those with {}",
            options.length
        )
    };
    match stopped {
        true => Err(work.stopped(complete_to.map(what))),
        false => Ok(()),
    }
}

fn within(options: &DiagonalsOptions, table: &Table, text: &str) -> Result<(), Fault> {
    let mut launcher = Launcher::new(table);
    let distance = launcher.positive("--distance", text)?;
    let (table, lifter) = launcher.finish();
    let distance = lifter.number(&distance);
    if options.stats {
        return Err(Fault::BadInput(
            "--stats does not go with --distance: leave one of them out".into(),
        ));
    }
    let work = Work::begin(options.limits.budget(), options.common.quiet)?;
    work.progress.begin("diagonals", None);
    let found = list_within(
        &table,
        &Mesh::new(&table),
        &(&distance * &distance),
        options.exactness.arithmetic(),
        &work.control,
    );
    let found = found.map_err(|fault| match fault {
        DistanceFault::Stopped(_) => work.stopped(None),
        DistanceFault::TooFar => Fault::BadInput(fault.to_string()),
    })?;
    drop(work);
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_text(&table, &found, out),
        Format::Csv => write_diagonals(&table, &found, out),
        Format::Json => write_json(out, &distance_record(&table, &found, &distance)),
    })
}

/// A diagonal with its letters, exact displacement and length.
pub(super) fn listed(table: &Table, diagonal: &Diagonal) -> Listed {
    Listed {
        crossings: diagonal.code.len(),
        start_corner: diagonal.start.0,
        end_corner: diagonal.end.0,
        code: spell_code(table, &diagonal.code),
        displacement: ExactVector::new(&diagonal.displacement),
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
        diagonals: found.iter().map(|d| listed(table, d)).collect(),
        stats: None,
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

fn distance_record(table: &Table, found: &[Diagonal], distance: &Real) -> DistanceRecord {
    let most = found.iter().map(|d| d.code.len()).max().unwrap_or(0);
    let mut by_crossings = vec![0; most + 1];
    found.iter().for_each(|d| by_crossings[d.code.len()] += 1);
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
        distance: Exact::new(distance),
        count: found.len(),
        count_over_squared_distance: found.len() as f64 / distance.to_f64().powi(2),
        by_crossings,
        by_distance,
        pairs: pairs(table, found, distance),
        diagonals: found.iter().map(|d| listed(table, d)).collect(),
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
