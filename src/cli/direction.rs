//! `reboundary direction`.

use super::arguments::Format;
use super::fault::Fault;
use super::launch::{Launcher, fault, side_name, side_of};
use super::orbit_arguments::{DirectionOptions, DirectionRows};
use super::output::{emit, note, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::factor_graph::export::spell;
use crate::language::{Language, WordId};
use crate::orbit::direction::exchange::{ExchangeFault, Interval, Transversal, interval_exchange};
use crate::orbit::direction::language::{DirectionFault, direction_language};
use crate::orbit::direction::prefixes::{Prefixes, prefixes};
use crate::orbit::direction::saddles::{Saddles, saddles};
use crate::orbit::direction::strips::{DirectionStrip, strips};
use crate::orbit::direction::{Flow, FlowFault};
use crate::run::Control;
use crate::study::folder::spell_code;
use crate::table::summary::{Exact, ExactVector, root_decimal};
use crate::table::{LetterId, Table, Vector};
use serde::Serialize;

pub fn run(options: &DirectionOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let mut launcher = Launcher::new(&loaded.table);
    let aim = match (&options.aim, &options.heading) {
        (Some(aim), _) => launcher.aim(aim)?,
        (None, Some(heading)) => launcher.heading(heading)?,
        (None, None) => unreachable!("the parser asks for one of them"),
    };
    let (table, lifter) = launcher.finish();
    let aim = lifter.vector(&aim);
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("direction", None);
    let flow = match Flow::new(&table, &aim) {
        Ok(flow) => flow,
        Err(FlowFault::InfiniteGroup) => {
            let found = prefixes(&table, &aim, options.length, &control)?;
            drop(progress);
            return emit_prefixes(options, &table, &aim, lifter.generator(), &found);
        }
        Err(other) => return Err(Fault::BadInput(other.to_string())),
    };
    let results = Results::find(options, &flow, lifter.generator(), &control)?;
    drop(progress);
    let unknown = results.strips.is_none() && options.rows == DirectionRows::Strips;
    emit(options.out.as_deref(), |out| match options.format {
        Format::Json => write_json(out, &results.record(&flow)),
        Format::Text => {
            let (header, rows) = results.rows(options.rows, &flow);
            if options.rows == DirectionRows::Words {
                return rows.iter().try_for_each(|row| writeln!(out, "{}", row[0]));
            }
            write_columns(out, &header, &rows)
        }
        Format::Csv => {
            let (header, rows) = results.rows(options.rows, &flow);
            let mut csv = csv::Writer::from_writer(out);
            csv.write_record(&header)?;
            rows.iter().try_for_each(|row| csv.write_record(row))?;
            csv.flush()
        }
    })?;
    if unknown && !options.common.quiet {
        note(&format!(
            "{} lines from corners cross {} sides without meeting a corner, so it is not known whether the \
             direction is periodic; --reach follows them farther",
            results.saddles.open, options.reach
        ));
    }
    Ok(())
}

impl From<DirectionFault> for Fault {
    fn from(error: DirectionFault) -> Fault {
        match error {
            DirectionFault::Stopped(stopped) => stopped.into(),
            DirectionFault::TooLong { .. } => Fault::BadInput(error.to_string()),
            DirectionFault::Language(_) => Fault::Failed(error.to_string()),
        }
    }
}

fn parse_transversal(table: &Table, flow: &Flow, text: &str) -> Result<Transversal, Fault> {
    if text == "all" {
        return Ok(Transversal::AllSides);
    }
    let option = "--transversal";
    let Some(colon) = text.find(':') else {
        return Ok(Transversal::Side(side_of(
            table,
            option,
            text,
            0..text.len(),
        )?));
    };
    let side = side_of(table, option, text, 0..colon)?;
    let known = text[colon + 1..].parse().ok();
    let Some(copy) = known.filter(|copy| *copy < flow.copies()) else {
        let message = format!("`{}` is no copy of the table", &text[colon + 1..]);
        let help = format!("write a number from 0 to {}", flow.copies() - 1);
        return Err(fault(option, text, colon + 1..text.len(), message, &help));
    };
    Ok(Transversal::Cell { side, copy })
}

struct Results {
    /// The generator of the table's field, as it is written.
    generator: String,
    language: Language,
    length: usize,
    saddles: Saddles,
    strips: Option<Vec<DirectionStrip>>,
    transversal: String,
    exchange: Vec<Interval>,
}

impl Results {
    fn find(
        options: &DirectionOptions,
        flow: &Flow,
        generator: &str,
        control: &Control,
    ) -> Result<Results, Fault> {
        let table = flow.table();
        let transversal = parse_transversal(table, flow, &options.transversal)?;
        let exchange = match interval_exchange(flow, transversal, control) {
            Ok(exchange) => exchange,
            Err(ExchangeFault::Stopped(stopped)) => return Err(stopped.into()),
            Err(refused) => {
                let text = &options.transversal;
                let help = "choose another side or copy, or `all`";
                let message = refused.to_string();
                return Err(fault("--transversal", text, 0..text.len(), message, help));
            }
        };
        // One letter more, so that the special words of the greatest length are known.
        let language = direction_language(flow, options.length + 1, control)?;
        let saddles = saddles(flow, options.reach, control)?;
        let strips = strips(flow, &saddles);
        Ok(Results {
            generator: generator.into(),
            language,
            length: options.length,
            saddles,
            strips,
            transversal: options.transversal.clone(),
            exchange,
        })
    }

    fn spelled(&self, flow: &Flow, length: usize, word: WordId) -> String {
        spell(&self.language, length, word, flow.table().letters())
    }

    fn complexity(&self) -> Vec<LengthRecord> {
        (1..=self.length)
            .map(|n| {
                let left = self.language.left_extension_counts(n);
                let right = self.language.right_extension_counts(n);
                let both = left.iter().zip(&right).filter(|(l, r)| **l > 1 && **r > 1);
                LengthRecord {
                    length: n,
                    words: self.language.count(n),
                    left_special: left.iter().filter(|c| **c > 1).count(),
                    right_special: right.iter().filter(|c| **c > 1).count(),
                    bispecial: both.count(),
                }
            })
            .collect()
    }

    fn special(&self, flow: &Flow) -> Vec<SpecialRecord> {
        let n = self.length;
        let left = self.language.left_extension_counts(n);
        let right = self.language.right_extension_counts(n);
        (0..self.language.count(n))
            .filter(|w| left[*w] > 1 || right[*w] > 1)
            .map(|w| SpecialRecord {
                word: self.spelled(flow, n, w as WordId),
                left_extensions: left[w],
                right_extensions: right[w],
            })
            .collect()
    }

    fn saddle_rows(&self, flow: &Flow) -> Vec<SaddleRecord> {
        let table = flow.table();
        let row = |s: &crate::orbit::direction::saddles::Saddle| SaddleRecord {
            start_corner: s.start.0,
            end_corner: s.end.0,
            code: spell_code(table, &s.code),
            displacement: ExactVector::in_terms_of(&self.generator, &s.displacement),
            length: root_decimal(&s.displacement.squared_length(table.form())),
        };
        self.saddles.saddles.iter().map(row).collect()
    }

    fn strip_rows(&self, flow: &Flow) -> Option<Vec<StripRecord>> {
        let table = flow.table();
        let row = |s: &DirectionStrip| {
            let squared = s.displacement.squared_length(table.form());
            let squared_width = s.squared_width(flow);
            StripRecord {
                word: spell_code(table, &s.word),
                length: s.word.len(),
                parity: if s.word.len() % 2 == 1 { "odd" } else { "even" },
                orbit_length: root_decimal(&squared),
                squared_orbit_length: Exact::in_terms_of(&self.generator, &squared),
                width: root_decimal(&squared_width),
                squared_width: Exact::in_terms_of(&self.generator, &squared_width),
                start: {
                    let fraction = s.start.fraction.display_in(&self.generator);
                    format!("{}@{fraction}", side_name(table, s.start.side))
                },
                aim: ExactVector::in_terms_of(&self.generator, &s.start.aim),
                copies: s.copies,
            }
        };
        Some(self.strips.as_ref()?.iter().map(row).collect())
    }

    fn interval_rows(&self, flow: &Flow) -> Vec<IntervalRecord> {
        let row = |(i, interval): (usize, &Interval)| IntervalRecord {
            interval: i,
            copy: interval.copy,
            code: spell_code(flow.table(), &interval.code),
            left: Exact::in_terms_of(&self.generator, &interval.left),
            length: Exact::in_terms_of(&self.generator, &interval.length),
            image_left: Exact::in_terms_of(&self.generator, &interval.image_left),
            image_place: interval.image_place,
        };
        self.exchange.iter().enumerate().map(row).collect()
    }

    fn record(&self, flow: &Flow) -> DirectionRecord {
        let table = flow.table();
        DirectionRecord {
            schema: "reboundary-direction/1",
            title: table.title().into(),
            direction: ExactVector::in_terms_of(&self.generator, flow.direction()),
            form: Exact::in_terms_of(&self.generator, table.form()),
            copies: flow.copies(),
            length: self.length,
            by_length: self.complexity(),
            words: (0..self.language.count(self.length) as WordId)
                .map(|w| self.spelled(flow, self.length, w))
                .collect(),
            special_words: self.special(flow),
            reach: self.saddles.reach,
            open_lines: self.saddles.open,
            periodic: self.saddles.all_close().then_some(true),
            saddles: self.saddle_rows(flow),
            strips: self.strip_rows(flow),
            transversal: self.transversal.clone(),
            exchange: self.interval_rows(flow),
        }
    }

    fn rows(&self, wanted: DirectionRows, flow: &Flow) -> (Vec<&'static str>, Vec<Vec<String>>) {
        match wanted {
            DirectionRows::Complexity => (
                vec![
                    "length",
                    "words",
                    "left_special",
                    "right_special",
                    "bispecial",
                ],
                self.complexity().iter().map(LengthRecord::row).collect(),
            ),
            DirectionRows::Words => (
                vec!["word"],
                (0..self.language.count(self.length) as WordId)
                    .map(|w| vec![self.spelled(flow, self.length, w)])
                    .collect(),
            ),
            DirectionRows::Special => (
                vec!["word", "left_extensions", "right_extensions"],
                self.special(flow)
                    .into_iter()
                    .map(|s| {
                        let (left, right) = (s.left_extensions, s.right_extensions);
                        vec![s.word, left.to_string(), right.to_string()]
                    })
                    .collect(),
            ),
            DirectionRows::Saddles => (
                vec!["from", "to", "code", "x", "y", "length"],
                self.saddle_rows(flow)
                    .into_iter()
                    .map(SaddleRecord::row)
                    .collect(),
            ),
            DirectionRows::Strips => (
                vec![
                    "letters",
                    "word",
                    "parity",
                    "orbit_length",
                    "width",
                    "start",
                    "aim_x",
                    "aim_y",
                    "copies",
                ],
                self.strip_rows(flow)
                    .unwrap_or_default()
                    .into_iter()
                    .map(StripRecord::row)
                    .collect(),
            ),
            DirectionRows::Exchange => (
                vec![
                    "interval",
                    "copy",
                    "code",
                    "left",
                    "length",
                    "image_left",
                    "image_place",
                    "length_decimal",
                ],
                self.interval_rows(flow)
                    .into_iter()
                    .map(IntervalRecord::row)
                    .collect(),
            ),
        }
    }
}

#[derive(Serialize)]
struct LengthRecord {
    length: usize,
    words: usize,
    left_special: usize,
    right_special: usize,
    bispecial: usize,
}

impl LengthRecord {
    fn row(&self) -> Vec<String> {
        [
            self.length,
            self.words,
            self.left_special,
            self.right_special,
            self.bispecial,
        ]
        .map(|n| n.to_string())
        .to_vec()
    }
}

#[derive(Serialize)]
struct SpecialRecord {
    word: String,
    left_extensions: u32,
    right_extensions: u32,
}

#[derive(Serialize)]
struct SaddleRecord {
    start_corner: u8,
    end_corner: u8,
    code: String,
    displacement: ExactVector,
    length: String,
}

impl SaddleRecord {
    fn row(self) -> Vec<String> {
        vec![
            self.start_corner.to_string(),
            self.end_corner.to_string(),
            self.code,
            self.displacement.x.exact,
            self.displacement.y.exact,
            self.length,
        ]
    }
}

#[derive(Serialize)]
struct StripRecord {
    word: String,
    length: usize,
    parity: &'static str,
    squared_orbit_length: Exact,
    /// For one turn of the word.
    orbit_length: String,
    squared_width: Exact,
    width: String,
    /// The middle orbit, as `trace` takes it.
    start: String,
    aim: ExactVector,
    /// How many strips of the flow on all copies are this one, run through either way.
    copies: usize,
}

impl StripRecord {
    fn row(self) -> Vec<String> {
        vec![
            self.length.to_string(),
            self.word,
            self.parity.into(),
            self.orbit_length,
            self.width,
            self.start,
            self.aim.x.exact,
            self.aim.y.exact,
            self.copies.to_string(),
        ]
    }
}

#[derive(Serialize)]
struct IntervalRecord {
    interval: usize,
    copy: usize,
    /// Sides hit from the start to the return, both included.
    code: String,
    left: Exact,
    /// Differences of heights: true widths times the direction's length, divided by √g.
    length: Exact,
    image_left: Exact,
    /// The place of the image from the left, from 0.
    image_place: usize,
}

impl IntervalRecord {
    fn row(self) -> Vec<String> {
        vec![
            self.interval.to_string(),
            self.copy.to_string(),
            self.code,
            self.left.exact,
            self.length.exact,
            self.image_left.exact,
            self.image_place.to_string(),
            self.length.decimal,
        ]
    }
}

#[derive(Serialize)]
struct DirectionRecord {
    schema: &'static str,
    title: String,
    direction: ExactVector,
    form: Exact,
    /// Copies of the table that the flow runs in: the order of the reflection group.
    copies: usize,
    length: usize,
    by_length: Vec<LengthRecord>,
    words: Vec<String>,
    special_words: Vec<SpecialRecord>,
    reach: usize,
    /// Lines from corners that cross `reach` sides without meeting a corner.
    open_lines: usize,
    /// True when every line from a corner ends in one; null when that is not known.
    periodic: Option<bool>,
    saddles: Vec<SaddleRecord>,
    /// Null when it is not known whether the direction is periodic.
    strips: Option<Vec<StripRecord>>,
    transversal: String,
    exchange: Vec<IntervalRecord>,
}

#[derive(Serialize)]
struct PrefixRecord {
    schema: &'static str,
    title: String,
    direction: ExactVector,
    length: usize,
    /// Entry n: words of length n of orbits that start in the direction.
    p: Vec<u64>,
    words: Vec<String>,
}

/// What there is to say about one starting direction when the reflection group is infinite.
fn emit_prefixes(
    options: &DirectionOptions,
    table: &Table,
    aim: &Vector,
    generator: &str,
    found: &Prefixes,
) -> Result<(), Fault> {
    let spelled = |word: &Vec<LetterId>| -> String {
        word.iter().map(|l| table.letters()[l.0 as usize]).collect()
    };
    let words = || found.words.iter().map(spelled);
    let counts = || found.counts.iter().enumerate().skip(1);
    match options.rows {
        DirectionRows::Complexity | DirectionRows::Words => {}
        _ if options.format == Format::Json => {}
        _ => {
            return Err(Fault::BadInput(
                "an angle of this table is no rational multiple of π, so an orbit takes infinitely many \
                 directions; only --rows complexity and --rows words are defined, for orbits that start in this one"
                    .into(),
            ));
        }
    }
    emit(options.out.as_deref(), |out| {
        match (options.format, options.rows) {
            (Format::Json, _) => write_json(
                out,
                &PrefixRecord {
                    schema: "reboundary-direction-prefixes/1",
                    title: table.title().into(),
                    direction: ExactVector::in_terms_of(generator, aim),
                    length: options.length,
                    p: found.counts.clone(),
                    words: words().collect(),
                },
            ),
            (Format::Text, DirectionRows::Words) => words().try_for_each(|w| writeln!(out, "{w}")),
            (Format::Csv, DirectionRows::Words) => {
                writeln!(out, "word").and_then(|()| words().try_for_each(|w| writeln!(out, "{w}")))
            }
            (Format::Text, _) => {
                let rows: Vec<Vec<String>> = counts()
                    .map(|(n, p)| vec![n.to_string(), p.to_string()])
                    .collect();
                write_columns(out, &["length", "words"], &rows)
            }
            (Format::Csv, _) => {
                writeln!(out, "length,words")?;
                counts().try_for_each(|(n, p)| writeln!(out, "{n},{p}"))
            }
        }
    })?;
    if !options.common.quiet {
        note(
            "an angle of this table is no rational multiple of π: these are the words of orbits that start in \
             the direction, which is left after the first bounce",
        );
    }
    Ok(())
}
