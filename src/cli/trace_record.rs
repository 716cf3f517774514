//! What `trace` writes beside the word.

use super::launch::side_name;
use super::trace::Traced;
use crate::orbit::path::PathEnd;
use crate::orbit::trace::State;
use crate::table::Table;
use crate::table::summary::{Exact, ExactVector};
use serde::Serialize;
use std::io::{self, Write};

#[derive(Serialize)]
#[serde(tag = "kind", rename_all = "snake_case")]
enum End {
    Hits,
    Distance {
        hits: usize,
    },
    Corner {
        corner: u8,
        after_hits: usize,
    },
    Period {
        hits: usize,
    },
    /// A signal came.
    Stopped {
        hits: usize,
    },
}

#[derive(Serialize)]
struct Hit {
    hit: usize,
    side: String,
    fraction: Exact,
    point: ExactVector,
    direction: ExactVector,
}

/// The JSON of a trace.
#[derive(Serialize)]
pub struct TraceRecord {
    schema: &'static str,
    title: String,
    word: String,
    backward: bool,
    /// The point inside the table that the orbit started from; null when it started on a side.
    from: Option<ExactVector>,
    end: End,
    /// Hits after which the orbit closed exactly, when it did.
    period: Option<usize>,
    /// What exact numbers are written in powers of: `t`, the generator of the table's field, or a root.
    generator: String,
    /// g of the plane form: second coordinates are in units of √g.
    form: Exact,
    hits: Vec<Hit>,
}

fn hit(table: &Table, generator: &str, number: usize, state: &State) -> Hit {
    Hit {
        hit: number,
        side: side_name(table, state.side),
        fraction: Exact::in_terms_of(generator, &state.fraction),
        point: ExactVector::in_terms_of(generator, &state.point),
        direction: ExactVector::in_terms_of(generator, &state.direction),
    }
}

fn states(traced: &Traced) -> &[State] {
    traced.path.as_ref().map_or(&[], |p| &p.states)
}

fn hits(traced: &Traced) -> impl Iterator<Item = Hit> + '_ {
    (1..)
        .zip(states(traced))
        .map(|(number, state)| hit(&traced.table, &traced.generator, number, state))
}

/// Gathers the JSON of a trace.
pub fn record(traced: &Traced) -> TraceRecord {
    let path = traced.path.as_ref();
    let letters = path.map_or(0, |p| p.word.len());
    let period = path.and_then(|p| p.period);
    TraceRecord {
        schema: "reboundary-trace/1",
        title: traced.table.title().into(),
        word: traced.word(),
        backward: traced.backward,
        from: (traced.from.as_ref())
            .map(|point| ExactVector::in_terms_of(&traced.generator, point)),
        end: match (traced.end, period) {
            (PathEnd::Corner(corner), _) => End::Corner {
                corner: corner.0,
                after_hits: letters,
            },
            (PathEnd::Stopped, _) => End::Stopped { hits: letters },
            (PathEnd::Distance, _) => End::Distance { hits: letters },
            (PathEnd::Letters, Some(hits)) => End::Period { hits },
            (PathEnd::Letters, None) => End::Hits,
        },
        period,
        generator: traced.generator.clone(),
        form: Exact::in_terms_of(&traced.generator, traced.table.form()),
        hits: hits(traced).collect(),
    }
}

/// One object a hit.
pub fn write_lines(traced: &Traced, out: &mut dyn Write) -> io::Result<()> {
    for hit in hits(traced) {
        serde_json::to_writer(&mut *out, &hit)?;
        out.write_all(b"\n")?;
    }
    Ok(())
}

/// One row a hit.
pub fn write_csv(traced: &Traced, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record([
        "hit",
        "side",
        "fraction",
        "x",
        "y",
        "fraction_decimal",
        "x_decimal",
        "y_decimal",
        "direction_x",
        "direction_y",
    ])?;
    for hit in hits(traced) {
        csv.write_record([
            hit.hit.to_string(),
            hit.side,
            hit.fraction.exact,
            hit.point.x.exact,
            hit.point.y.exact,
            hit.fraction.decimal,
            hit.point.x.decimal,
            hit.point.y.decimal,
            hit.direction.x.exact,
            hit.direction.y.exact,
        ])?;
    }
    csv.flush()
}
