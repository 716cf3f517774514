//! `reboundary trace`.

use super::arguments::{Format, TraceOptions};
use super::fault::Fault;
use super::launch::Launcher;
use super::output::{emit, note, read_table, write_json};
use crate::orbit::trace::{State, Step};
use crate::orbit::{Start, TraceTables, Tracer};
use crate::study::folder::spell_code;
use crate::table::summary::{Exact, ExactVector};
use crate::table::{SideId, Table};
use serde::Serialize;
use std::io::{self, Write};

pub fn run(options: &TraceOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, options.quiet)?;
    let mut launcher = Launcher::new(&loaded.table);
    let (side, fraction) = launcher.side_start(&options.start)?;
    let aim = launcher.aim(&options.aim)?;
    let (table, lifter) = launcher.finish();
    let table = &table;
    let start = Start {
        side,
        fraction: lifter.number(&fraction),
        aim: lifter.vector(&aim),
    };
    let tables = TraceTables::new(table);
    let mut tracer = Tracer::new(&tables, start).map_err(|f| Fault::BadInput(f.to_string()))?;
    let wants_states = options.format != Format::Text;
    let mut states = Vec::new();
    let mut end = None;
    loop {
        if wants_states {
            states.push(tracer.state());
        }
        if tracer.word().len() >= options.hits {
            break;
        }
        let step = tracer.advance();
        if !matches!(step, Step::Hit(_)) {
            end = Some(step);
            break;
        }
    }
    let mut word = tracer.word().to_vec();
    if let Some(Step::Period(period)) = end {
        while word.len() < options.hits {
            word.push(word[word.len() - period]);
            if wants_states {
                states.push(states[states.len() - period].clone());
            }
        }
    }
    let statement = end.map(|step| describe(table, step, tracer.word().len()));
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => writeln!(out, "{}", spell_code(table, &word)),
        Format::Csv => write_csv(table, &states, out),
        Format::Json => write_json(out, &record(table, &word, &states, end)),
    })?;
    if let Some(statement) = statement.filter(|_| !options.quiet) {
        note(&statement);
    }
    Ok(())
}

fn describe(table: &Table, step: Step, letters: usize) -> String {
    match step {
        Step::Corner(corner) => {
            let k = table.sides();
            let (before, after) = ((corner.0 as usize + k - 1) % k, corner.0 as usize);
            format!(
                "the orbit runs into corner {} (between sides {} and {}) after {letters} {}, the start included, and ends there",
                corner.0,
                table.letters()[before],
                table.letters()[after],
                if letters == 1 { "hit" } else { "hits" },
            )
        }
        Step::Period(period) => format!(
            "the orbit is periodic: after {period} hits it is exactly at its start again, in the same direction"
        ),
        Step::Hit(_) => String::new(),
    }
}

#[derive(Serialize)]
#[serde(tag = "kind", rename_all = "snake_case")]
enum End {
    Hits,
    Corner { corner: u8, after_hits: usize },
    Period { hits: usize },
}

#[derive(Serialize)]
struct Hit {
    hit: usize,
    side: String,
    fraction: Exact,
    point: ExactVector,
    direction: ExactVector,
}

#[derive(Serialize)]
struct TraceRecord {
    schema: &'static str,
    title: String,
    word: String,
    end: End,
    /// g of the plane form: second coordinates are in units of √g.
    form: Exact,
    hits: Vec<Hit>,
}

fn record(table: &Table, word: &[SideId], states: &[State], end: Option<Step>) -> TraceRecord {
    TraceRecord {
        schema: "reboundary-trace/1",
        title: table.title().into(),
        word: spell_code(table, word),
        end: match end {
            Some(Step::Corner(corner)) => End::Corner {
                corner: corner.0,
                after_hits: word.len(),
            },
            Some(Step::Period(hits)) => End::Period { hits },
            _ => End::Hits,
        },
        form: Exact::new(table.form()),
        hits: states
            .iter()
            .enumerate()
            .map(|(i, state)| Hit {
                hit: i + 1,
                side: table.letters()[state.side.0 as usize].to_string(),
                fraction: Exact::new(&state.fraction),
                point: ExactVector::new(&state.point),
                direction: ExactVector::new(&state.direction),
            })
            .collect(),
    }
}

fn write_csv(table: &Table, states: &[State], out: &mut dyn Write) -> io::Result<()> {
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
    for (i, state) in states.iter().enumerate() {
        let (fraction, point) = (Exact::new(&state.fraction), ExactVector::new(&state.point));
        csv.write_record([
            (i + 1).to_string(),
            table.letters()[state.side.0 as usize].to_string(),
            fraction.exact,
            point.x.exact,
            point.y.exact,
            fraction.decimal,
            point.x.decimal,
            point.y.decimal,
            state.direction.x.to_string(),
            state.direction.y.to_string(),
        ])?;
    }
    csv.flush()
}
