//! `reboundary periodic`.

use super::arguments::Format;
use super::fault::Fault;
use super::launch::side_name;
use super::orbit_arguments::PeriodicOptions;
use super::orbit_picture::draw_orbit;
use super::output::{emit, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::orbit::periodic::{PeriodicWord, Wanted, letter_class, periodic_words};
use crate::orbit::{Step, TraceTables, Tracer};
use crate::run::files::ResultFolder;
use crate::study::folder::spell_code;
use crate::table::summary::{Exact, ExactVector, root_decimal};
use crate::table::{LetterId, Table, Vector};
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::collections::BTreeSet;
use std::io::{self, Write};

/// The file that tells a folder of these pictures.
const MARK: &str = "periodic.csv";

pub fn run(options: &PeriodicOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let folder = match &options.pictures {
        Some(path) => Some(ResultFolder::new(path, MARK)?),
        None => None,
    };
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, options.length, options.exactness.arithmetic());
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("periodic words", None);
    let wanted = if options.stable_only {
        Wanted::Stable
    } else {
        Wanted::All
    };
    let found = periodic_words(table, &engine, &mesh, options.length, wanted, &control)?;
    drop(progress);
    if let Some(folder) = folder {
        draw_all(table, &found, &folder)?;
        folder.write(MARK, |out| write_csv(table, &found, out))?;
        folder.finish()?;
    }
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_text(table, &found, out),
        Format::Csv => write_csv(table, &found, out),
        Format::Json => write_json(out, &record(table, &found, options)),
    })
}

#[derive(Serialize)]
struct ByLength {
    length: usize,
    /// Null when only stable words were looked for.
    classes: Option<usize>,
    stable: usize,
}

#[derive(Serialize)]
struct Launch {
    side: String,
    fraction: Exact,
    aim: ExactVector,
}

#[derive(Serialize)]
struct StripRecord {
    squared_width: Exact,
    width: String,
    /// Over the time that all its orbits take to close, divided by √g.
    area_over_root_form: Exact,
}

#[derive(Serialize)]
struct Listed {
    word: String,
    /// Letters, which is hits in one turn.
    length: usize,
    parity: &'static str,
    stable: bool,
    /// Translation of an even word, glide of an odd one; also the direction of the orbit.
    displacement: ExactVector,
    squared_orbit_length: Exact,
    /// Length of the orbit from `start` until it closes.
    orbit_length: String,
    /// Hits until the orbit from `start` closes: the letters of the word, or twice as many for an odd word in a strip
    /// beside its axis, where a hole is in the way.
    hits: usize,
    /// The strip of parallel orbits; for an odd word that of the word doubled.
    strip: StripRecord,
    /// The middle of the strip; for an odd word that is the axis, unless a hole is in the way.
    start: Launch,
}

#[derive(Serialize)]
struct PeriodicRecord {
    schema: &'static str,
    title: String,
    length: usize,
    stable_only: bool,
    /// No word is missing up to the length.
    complete: bool,
    /// g of the plane form: second coordinates are in units of √g.
    form: Exact,
    by_length: Vec<ByLength>,
    words: Vec<Listed>,
}

fn listed(table: &Table, word: &PeriodicWord) -> Listed {
    let (start, squared) = (word.start(table), word.squared_orbit_length(table));
    let squared_width = word.squared_width(table);
    Listed {
        word: spell_code(table, &word.word),
        length: word.word.len(),
        parity: if word.is_odd() { "odd" } else { "even" },
        stable: word.stable,
        displacement: ExactVector::new(&word.closing.displacement),
        orbit_length: root_decimal(&squared),
        squared_orbit_length: Exact::new(&squared),
        hits: word.turns() * word.word.len(),
        strip: StripRecord {
            width: root_decimal(&squared_width),
            squared_width: Exact::new(&squared_width),
            area_over_root_form: Exact::new(&word.area_over_root_form()),
        },
        start: Launch {
            side: side_name(table, start.side),
            fraction: Exact::new(&start.fraction),
            aim: ExactVector::new(&start.aim),
        },
    }
}

fn record(table: &Table, found: &[PeriodicWord], options: &PeriodicOptions) -> PeriodicRecord {
    // One word of sides is one class, unless sides share letters.
    let classes = |stable_only: bool| -> BTreeSet<Vec<LetterId>> {
        let wanted = found.iter().filter(|w| w.stable || !stable_only);
        wanted.map(|w| letter_class(table, &w.word)).collect()
    };
    let (all, stable) = (classes(false), classes(true));
    let count = |set: &BTreeSet<Vec<LetterId>>, length: usize| {
        set.iter().filter(|class| class.len() == length).count()
    };
    let by_length = (1..=options.length)
        .map(|length| ByLength {
            length,
            classes: (!options.stable_only).then(|| count(&all, length)),
            stable: count(&stable, length),
        })
        .collect();
    PeriodicRecord {
        schema: "reboundary-periodic/1",
        title: table.title().into(),
        length: options.length,
        stable_only: options.stable_only,
        complete: true,
        form: Exact::new(table.form()),
        by_length,
        words: found.iter().map(|w| listed(table, w)).collect(),
    }
}

fn write_text(table: &Table, found: &[PeriodicWord], out: &mut dyn Write) -> io::Result<()> {
    let rows: Vec<Vec<String>> = found
        .iter()
        .map(|word| {
            let row = listed(table, word);
            vec![
                row.length.to_string(),
                row.word,
                row.parity.into(),
                if row.stable { "yes" } else { "no" }.into(),
                row.hits.to_string(),
                row.orbit_length,
                row.strip.width,
                format!("{}@{}", row.start.side, row.start.fraction.exact),
                format!("{},{}", row.start.aim.x.exact, row.start.aim.y.exact),
            ]
        })
        .collect();
    let header = [
        "letters", "word", "parity", "stable", "hits", "length", "width", "start", "aim",
    ];
    write_columns(out, &header, &rows)
}

fn write_csv(table: &Table, found: &[PeriodicWord], out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record([
        "letters",
        "word",
        "parity",
        "stable",
        "hits",
        "squared_orbit_length",
        "orbit_length",
        "squared_width",
        "width",
        "area_over_root_form",
        "start_side",
        "start_fraction",
        "aim_x",
        "aim_y",
    ])?;
    for word in found {
        let row = listed(table, word);
        csv.write_record([
            row.length.to_string(),
            row.word,
            row.parity.into(),
            row.stable.to_string(),
            row.hits.to_string(),
            row.squared_orbit_length.exact,
            row.orbit_length,
            row.strip.squared_width.exact,
            row.strip.width,
            row.strip.area_over_root_form.exact,
            row.start.side,
            row.start.fraction.exact,
            row.start.aim.x.exact,
            row.start.aim.y.exact,
        ])?;
    }
    csv.flush()
}

/// One picture for each word, named by its place in the list and the word.
fn draw_all(table: &Table, found: &[PeriodicWord], folder: &ResultFolder) -> Result<(), Fault> {
    let tables = TraceTables::new(table);
    for (i, word) in found.iter().enumerate() {
        let spelled = spell_code(table, &word.word);
        let title = format!("Periodic orbit {spelled}");
        let description = format!(
            "A periodic orbit with {} hits, length {:.6}.",
            word.turns() * word.word.len(),
            word.squared_orbit_length(table).to_f64().sqrt()
        );
        let svg = draw_orbit(table, &closed_orbit(&tables, word)?, &title, &description)?;
        // Long words would not fit in a file name.
        let short: String = spelled.chars().take(40).collect();
        let name = format!("{:04}-{short}.svg", i + 1);
        folder.write(&name, |out| out.write_all(svg.as_bytes()))?;
    }
    Ok(())
}

/// The points of the orbit, the first again at the end, found by following it; that also checks the word.
fn closed_orbit(tables: &TraceTables, word: &PeriodicWord) -> Result<Vec<Vector>, Fault> {
    let start = word.start(tables.table());
    let mut tracer =
        Tracer::new(tables, start).map_err(|f| Fault::Failed(format!("a periodic word: {f}")))?;
    let first = tracer.state().point;
    let mut points = vec![first.clone()];
    while let Step::Hit(_) = tracer.advance() {
        points.push(tracer.state().point);
    }
    if tracer.word() != word.word.repeat(word.turns()) {
        return Err(Fault::Failed(format!(
            "the orbit of the periodic word {} does not follow it",
            spell_code(tables.table(), &word.word)
        )));
    }
    points.push(first);
    Ok(points)
}
