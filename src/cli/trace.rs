//! `reboundary trace`.

use super::arguments::{Format, TraceOptions};
use super::fault::Fault;
use super::output::{emit, note, read_table, write_json};
use crate::number::Real;
use crate::orbit::trace::{State, Step};
use crate::orbit::{Start, TraceTables, Tracer};
use crate::study::folder::spell_code;
use crate::table::diagnostic::Diagnostic;
use crate::table::expression::Evaluator;
use crate::table::summary::{Exact, ExactVector};
use crate::table::{SideId, Table, Vector};
use serde::Serialize;
use std::io::{self, Write};
use std::ops::Range;

pub fn run(options: &TraceOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.quiet)?;
    let (table, start) = parse_launch(&loaded.table, &options.start, &options.aim)?;
    let table = &table;
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
            let before = SideId(table.before(corner.0 as usize) as u8);
            format!(
                "the orbit runs into corner {} (between sides {} and {}) after {letters} {}, the start included, and ends there",
                corner.0,
                table.letter(before),
                table.letter(SideId(corner.0)),
                if letters == 1 { "hit" } else { "hits" },
            )
        }
        Step::Period(period) => format!(
            "the orbit is periodic: after {period} hits it is exactly at its start again, in the same direction"
        ),
        Step::Hit(_) => String::new(),
    }
}

/// A fault at a place of an option's text.
fn fault(option: &str, text: &str, span: Range<usize>, message: String, help: &str) -> Fault {
    Fault::BadText(Box::new(Diagnostic {
        file: option.into(),
        source: text.into(),
        span,
        label: String::new(),
        context: Vec::new(),
        message,
        help: help.into(),
    }))
}

/// Reads the start and the aim. Their numbers may need a larger field than the table's; the table comes back
/// written in that field.
fn parse_launch(table: &Table, start: &str, aim: &str) -> Result<(Table, Start), Fault> {
    let mut evaluator = Evaluator::new(table.field().clone());
    let (side, fraction) = parse_start(table, &mut evaluator, start)?;
    let aim = parse_aim(&mut evaluator, aim)?;
    let field = evaluator.field().clone();
    let lifted = |number: &Real| evaluator.lift(number).lifted_to(&field);
    let start = Start {
        side,
        fraction: lifted(&fraction),
        aim: Vector::new(lifted(&aim.x), lifted(&aim.y)),
    };
    Ok((table.in_field(&field, lifted), start))
}

fn parse_start(
    table: &Table,
    evaluator: &mut Evaluator,
    text: &str,
) -> Result<(SideId, Real), Fault> {
    let help = "write LETTER@FRACTION, such as a@1/3: a third of the way along side a";
    let Some(at) = text.find('@') else {
        let message = "the start has no `@` between its side and its fraction".into();
        return Err(fault("--start", text, 0..text.len(), message, help));
    };
    let side = parse_side(table, text, at)?;
    let fraction = evaluate(evaluator, "--start", text, at + 1..text.len())?;
    if fraction <= Real::from(0) || fraction >= Real::from(1) {
        let message = format!(
            "the start must lie inside its side: {} is not strictly between 0 and 1",
            text[at + 1..].trim()
        );
        return Err(fault("--start", text, at + 1..text.len(), message, help));
    }
    Ok((side, fraction))
}

/// The side named before the `@`: its letter, and when sides share it which of them, counted from 1.
fn parse_side(table: &Table, text: &str, at: usize) -> Result<SideId, Fault> {
    let named = &text[..at];
    let sides = match named.chars().next() {
        Some(letter) => table.sides_of_letter(letter),
        None => Vec::new(),
    };
    let rest = named.get(named.chars().next().map_or(0, char::len_utf8)..);
    let which = rest.filter(|rest| !rest.is_empty());
    let count = sides.len();
    match (which, &sides[..]) {
        (None, [side]) => return Ok(*side),
        (None, [_, _, ..]) => {
            let message = format!("{count} sides have the letter `{named}`");
            let help = format!(
                "write which: `{named}1@...` to `{named}{count}@...`, in the order of the sides in `reboundary table`"
            );
            return Err(fault("--start", text, 0..at, message, &help));
        }
        (Some(which), [_, ..]) => {
            let index = which.parse::<usize>().ok().and_then(|w| w.checked_sub(1));
            if let Some(side) = index.and_then(|index| sides.get(index)) {
                return Ok(*side);
            }
        }
        (_, []) => {}
    }
    let known: Vec<String> = table.letters().iter().map(char::to_string).collect();
    let message = format!("`{named}` is not a side of this table");
    let help = format!("its sides are {}", known.join(", "));
    Err(fault("--start", text, 0..at, message, &help))
}

fn parse_aim(evaluator: &mut Evaluator, text: &str) -> Result<Vector, Fault> {
    let help = "write a vector X,Y in the table's coordinates, such as 2,5 or sqrt(2),1";
    let commas = top_level_commas(text);
    let [comma] = commas[..] else {
        let message = format!(
            "the aim needs two coordinates, this has {}",
            commas.len() + 1
        );
        return Err(fault("--aim", text, 0..text.len(), message, help));
    };
    let x = evaluate(evaluator, "--aim", text, 0..comma)?;
    let y = evaluate(evaluator, "--aim", text, comma + 1..text.len())?;
    // The second number may have made the field larger.
    let aim = Vector::new(evaluator.lift(&x), y);
    if aim.is_zero() {
        let message = "the aim is the zero vector, which has no direction".into();
        return Err(fault("--aim", text, 0..text.len(), message, help));
    }
    Ok(aim)
}

/// Commas outside parentheses.
fn top_level_commas(text: &str) -> Vec<usize> {
    let mut depth = 0i32;
    let mut found = Vec::new();
    for (at, c) in text.char_indices() {
        match c {
            '(' => depth += 1,
            ')' => depth -= 1,
            ',' if depth == 0 => found.push(at),
            _ => {}
        }
    }
    found
}

/// Evaluates a part of an option's text.
fn evaluate(
    evaluator: &mut Evaluator,
    option: &str,
    text: &str,
    part: Range<usize>,
) -> Result<Real, Fault> {
    evaluator.evaluate(&text[part.clone()]).map_err(|e| {
        let span = part.start + e.span.start..part.start + e.span.end;
        fault(option, text, span, e.message, &e.help)
    })
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
                side: table.letter(state.side).to_string(),
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
            table.letter(state.side).to_string(),
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
