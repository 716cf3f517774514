//! `reboundary measures`.

use super::analysis_arguments::{MeasureRows, MeasuresOptions};
use super::arguments::Format;
use super::fault::Fault;
use super::grown::{Needs, grow};
use super::output::{emit, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::factor_graph::export::spell;
use crate::figure::{Caption, Chart, FigureError, Mark, Scale, Series, draw_chart};
use crate::language::distribution::{
    BYTES_PER_MEASURE, Spread, block_distance, blocks, heaviest_first, level_measures,
    lightest_first, probabilities, spread, whole_measure,
};
use crate::language::{Language, WordId};
use crate::number::Enclosure;
use crate::run::files::ResultFolder;
use crate::table::Table;
use serde::Serialize;
use std::io::{self, Write};

/// The file that marks a folder of pictures as this command's.
const MARK: &str = "distribution.svg";

/// Places after the point in certified bounds.
const PLACES: usize = 40;
/// Places that people are shown.
const SHOWN_PLACES: usize = 12;

/// A certified lower and upper bound.
#[derive(Serialize)]
struct Bounds {
    lower: String,
    upper: String,
}

impl Bounds {
    fn new(value: &Enclosure) -> Bounds {
        let (lower, upper) = value.decimal_bounds(PLACES);
        Bounds { lower, upper }
    }
}

#[derive(Serialize)]
struct WordRow {
    word: String,
    measure: Bounds,
    probability: Bounds,
}

#[derive(Serialize)]
struct LengthRow {
    length: usize,
    words: usize,
    entropy: Bounds,
    /// log p(n).
    largest_entropy: Bounds,
    total_variation: Bounds,
    heaviest: String,
    lightest: String,
}

#[derive(Serialize)]
struct BlockRow {
    block_length: usize,
    word_length: usize,
    /// Over all places of all words.
    averaged: Bounds,
    /// At the beginning of the words.
    beginning: Bounds,
}

#[derive(Serialize)]
struct MeasuresRecord {
    schema: &'static str,
    title: String,
    length: usize,
    /// 2·perimeter.
    whole: Bounds,
    lengths: Vec<LengthRow>,
    /// Of length N, heaviest first.
    heaviest: Vec<WordRow>,
    /// Of length N, lightest first.
    lightest: Vec<WordRow>,
    blocks: Vec<BlockRow>,
    words: Vec<WordRow>,
}

/// Distances of block frequencies.
struct BlockDistances {
    block: usize,
    word: usize,
    averaged: Enclosure,
    beginning: Enclosure,
}

/// Everything that the command found; lists over lengths begin with length 1.
struct Found {
    table: Table,
    language: Language,
    length: usize,
    whole: Enclosure,
    /// Measures of the words of length N.
    measures: Vec<Enclosure>,
    laws: Vec<Vec<Enclosure>>,
    spreads: Vec<Spread>,
    /// Words of each length, heaviest first.
    orders: Vec<Vec<WordId>>,
    /// Words of each length, lightest first.
    lightest: Vec<Vec<WordId>>,
    blocks: Vec<BlockDistances>,
}

pub fn run(options: &MeasuresOptions) -> Result<(), Fault> {
    let folder = match &options.pictures {
        Some(path) => Some(ResultFolder::new(path, MARK)?),
        None => None,
    };
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    // Measures and probabilities of all words are in memory together.
    let needs = Needs {
        more_bytes_a_word: 2 * BYTES_PER_MEASURE,
        allowed: options.budget_memory,
    };
    let length = options.length;
    let arithmetic = options.exactness.arithmetic();
    let grown = grow(
        &loaded.table,
        length,
        arithmetic,
        needs,
        &control,
        &progress,
    )?;
    let words = grown.language.complexity().iter().sum();
    progress.begin("measures", Some(words));
    let (engine, mesh) = (&grown.engine, &grown.mesh);
    let mut measures = level_measures(&loaded.table, engine, mesh, length, &control)?;
    progress.begin("distributions", None);
    let whole = whole_measure(&loaded.table);
    let laws: Vec<Vec<Enclosure>> = measures.iter().map(|m| probabilities(m, &whole)).collect();
    let found = Found {
        length,
        spreads: laws.iter().map(|law| spread(law)).collect(),
        orders: laws.iter().map(|law| heaviest_first(law)).collect(),
        lightest: laws.iter().map(|law| lightest_first(law)).collect(),
        blocks: block_distances(&grown.language, &laws, options.blocks.min(length)),
        measures: measures.pop().expect("at least one length"),
        whole,
        laws,
        table: loaded.table,
        language: grown.language,
    };
    control.tick(0)?;
    drop(progress);
    if let Some(folder) = folder {
        let cannot = |e: FigureError| Fault::Failed(format!("cannot draw a picture: {e}"));
        let distribution = distribution_picture(&found).map_err(cannot)?;
        folder.write(MARK, |out| out.write_all(distribution.as_bytes()))?;
        let blocks = blocks_picture(&found).map_err(cannot)?;
        folder.write("blocks.svg", |out| out.write_all(blocks.as_bytes()))?;
        folder.finish()?;
    }
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => found.write_text(options.most, out),
        Format::Csv => found.write_csv(options.rows, out),
        Format::Json => write_json(out, &found.record(options.most)),
    })
}

/// For each m up to `longest` and each n ≥ m.
fn block_distances(
    language: &Language,
    laws: &[Vec<Enclosure>],
    longest: usize,
) -> Vec<BlockDistances> {
    let mut found = Vec::new();
    for n in 1..=laws.len() {
        for (m, blocks) in (1..=longest).zip(blocks(language, n)) {
            found.push(BlockDistances {
                block: m,
                word: n,
                averaged: block_distance(&blocks.places, &laws[m - 1]),
                beginning: block_distance(&blocks.beginnings, &laws[m - 1]),
            });
        }
    }
    found.sort_by_key(|row| (row.block, row.word));
    found
}

/// A decimal for people.
fn shown(value: &Enclosure) -> String {
    value
        .decimal(SHOWN_PLACES)
        .unwrap_or_else(|| format!("{:.6}", value.to_f64()))
}

impl Found {
    fn spelled(&self, length: usize, word: WordId) -> String {
        spell(&self.language, length, word, self.table.letters())
    }

    fn word_row(&self, word: WordId) -> WordRow {
        WordRow {
            word: self.spelled(self.length, word),
            measure: Bounds::new(&self.measures[word as usize]),
            probability: Bounds::new(&self.laws[self.length - 1][word as usize]),
        }
    }

    fn length_rows(&self) -> Vec<LengthRow> {
        (1..=self.length)
            .map(|n| {
                let spread = &self.spreads[n - 1];
                LengthRow {
                    length: n,
                    words: spread.words,
                    entropy: Bounds::new(&spread.entropy),
                    largest_entropy: Bounds::new(&spread.largest_entropy),
                    total_variation: Bounds::new(&spread.total_variation),
                    heaviest: self.spelled(n, self.orders[n - 1][0]),
                    lightest: self.spelled(n, self.lightest[n - 1][0]),
                }
            })
            .collect()
    }

    fn record(&self, most: usize) -> MeasuresRecord {
        let rows = |order: &[Vec<WordId>]| -> Vec<WordRow> {
            let words = order[self.length - 1].iter().take(most);
            words.map(|w| self.word_row(*w)).collect()
        };
        MeasuresRecord {
            schema: "reboundary-measures/1",
            title: self.table.title().into(),
            length: self.length,
            whole: Bounds::new(&self.whole),
            lengths: self.length_rows(),
            heaviest: rows(&self.orders),
            lightest: rows(&self.lightest),
            blocks: self
                .blocks
                .iter()
                .map(|row| BlockRow {
                    block_length: row.block,
                    word_length: row.word,
                    averaged: Bounds::new(&row.averaged),
                    beginning: Bounds::new(&row.beginning),
                })
                .collect(),
            words: (0..self.measures.len() as WordId)
                .map(|w| self.word_row(w))
                .collect(),
        }
    }

    fn write_csv(&self, rows: MeasureRows, out: &mut dyn Write) -> io::Result<()> {
        let mut csv = csv::Writer::from_writer(out);
        match rows {
            MeasureRows::Words => {
                csv.write_record([
                    "word",
                    "measure_lower",
                    "measure_upper",
                    "probability_lower",
                    "probability_upper",
                ])?;
                for w in 0..self.measures.len() as WordId {
                    let row = self.word_row(w);
                    let (m, q) = (row.measure, row.probability);
                    csv.write_record([row.word, m.lower, m.upper, q.lower, q.upper])?;
                }
            }
            MeasureRows::Lengths => {
                csv.write_record([
                    "length",
                    "words",
                    "entropy_lower",
                    "entropy_upper",
                    "largest_entropy_lower",
                    "largest_entropy_upper",
                    "total_variation_lower",
                    "total_variation_upper",
                    "heaviest",
                    "lightest",
                ])?;
                for row in self.length_rows() {
                    let (h, largest, d) = (row.entropy, row.largest_entropy, row.total_variation);
                    csv.write_record([
                        row.length.to_string(),
                        row.words.to_string(),
                        h.lower,
                        h.upper,
                        largest.lower,
                        largest.upper,
                        d.lower,
                        d.upper,
                        row.heaviest,
                        row.lightest,
                    ])?;
                }
            }
            MeasureRows::Blocks => {
                csv.write_record([
                    "block_length",
                    "word_length",
                    "averaged_lower",
                    "averaged_upper",
                    "beginning_lower",
                    "beginning_upper",
                ])?;
                for row in &self.blocks {
                    let (a, b) = (Bounds::new(&row.averaged), Bounds::new(&row.beginning));
                    csv.write_record([
                        row.block.to_string(),
                        row.word.to_string(),
                        a.lower,
                        a.upper,
                        b.lower,
                        b.upper,
                    ])?;
                }
            }
        }
        csv.flush()
    }

    fn write_text(&self, most: usize, out: &mut dyn Write) -> io::Result<()> {
        let n = self.length;
        writeln!(out, "{}", self.table.title())?;
        writeln!(
            out,
            "measure of all lines, 2·perimeter: {}\n",
            shown(&self.whole)
        )?;
        let lists = [("heaviest", &self.orders), ("lightest", &self.lightest)];
        for (name, order) in lists.into_iter().filter(|_| most > 0) {
            let words = order[n - 1].iter().take(most);
            let rows: Vec<Vec<String>> = words
                .map(|w| {
                    let q = &self.laws[n - 1][*w as usize];
                    let m = &self.measures[*w as usize];
                    vec![self.spelled(n, *w), shown(m), shown(q)]
                })
                .collect();
            writeln!(out, "{name} words of length {n}")?;
            write_columns(out, &["word", "measure", "probability"], &rows)?;
            writeln!(out)?;
        }
        writeln!(
            out,
            "entropy of the invariant law in nats, and its total variation from the uniform law"
        )?;
        let rows: Vec<Vec<String>> = self
            .length_rows()
            .into_iter()
            .zip(&self.spreads)
            .map(|(row, spread)| {
                vec![
                    row.length.to_string(),
                    row.words.to_string(),
                    shown(&spread.entropy),
                    shown(&spread.largest_entropy),
                    shown(&spread.total_variation),
                ]
            })
            .collect();
        write_columns(
            out,
            &["n", "p(n)", "entropy", "log p(n)", "distance"],
            &rows,
        )?;
        if self.blocks.is_empty() {
            return Ok(());
        }
        writeln!(
            out,
            "\nblocks of length m in the words of length n, counted: total variation from their measures"
        )?;
        let rows: Vec<Vec<String>> = self
            .blocks
            .iter()
            .map(|row| {
                vec![
                    row.block.to_string(),
                    row.word.to_string(),
                    shown(&row.averaged),
                    shown(&row.beginning),
                ]
            })
            .collect();
        write_columns(out, &["m", "n", "all places", "beginning"], &rows)
    }
}

/// Points of a curve at most.
const CURVE_POINTS: usize = 500;

/// Probabilities times p(n), by falling size, against the share of the words.
fn distribution_picture(found: &Found) -> Result<String, FigureError> {
    let n = found.length;
    let mut lengths = vec![n, n / 2, n / 4];
    lengths.retain(|m| *m >= 2 || *m == n);
    lengths.dedup();
    let mut series: Vec<Series> = lengths
        .into_iter()
        .map(|m| {
            let (law, order) = (&found.laws[m - 1], &found.orders[m - 1]);
            let count = order.len();
            let step = count.div_ceil(CURVE_POINTS);
            let value = |rank: usize| law[order[rank] as usize].to_f64() * count as f64;
            // A stair: each word takes 1/p(n) of the axis.
            let mut ranks: Vec<usize> = (0..count).step_by(step).collect();
            ranks.push(count - 1);
            let points = ranks
                .into_iter()
                .flat_map(|rank| {
                    let share = |r: usize| r as f64 / count as f64;
                    [
                        (share(rank), value(rank)),
                        (share((rank + step).min(count)), value(rank)),
                    ]
                })
                .collect();
            Series {
                name: format!("n = {m}"),
                points,
                mark: Mark::Line,
                ink: None,
            }
        })
        .collect();
    series.push(Series {
        name: "uniform law".into(),
        points: vec![(0.0, 1.0), (1.0, 1.0)],
        mark: Mark::Dashed,
        ink: None,
    });
    let chart = Chart {
        x_label: "share of the words, heaviest first".into(),
        y_label: "probability times p(n)".into(),
        y_scale: Scale::Log,
        series,
        note: Some(format!(
            "At n = {n}: total variation {:.4} from the uniform law, entropy {:.4} of at most {:.4} nats.",
            found.spreads[n - 1].total_variation.to_f64(),
            found.spreads[n - 1].entropy.to_f64(),
            found.spreads[n - 1].largest_entropy.to_f64()
        )),
        ..Chart::default()
    };
    let caption = Caption::new(
        format!("Spread of the measure in {}", found.table.title()),
        format!(
            "The invariant probabilities of the words of length {n} and of shorter ones, divided by those of the \
             uniform law, in falling order."
        ),
    );
    draw_chart(&chart, &caption)
}

/// The longest blocks in the picture: more curves are not told apart.
const MOST_CURVES: usize = 6;

/// Distances of block frequencies by length of the words, for blocks of each length.
fn blocks_picture(found: &Found) -> Result<String, FigureError> {
    let longest = found.blocks.iter().map(|row| row.block).max().unwrap_or(0);
    let longest = longest.min(MOST_CURVES);
    let mut series = Vec::new();
    for m in 1..=longest {
        let rows = || found.blocks.iter().filter(|row| row.block == m);
        // An enclosure that reaches zero has no place on a logarithmic axis.
        let curve = |value: &dyn Fn(&BlockDistances) -> Enclosure| -> Vec<(f64, f64)> {
            rows()
                .map(|row| (row.word as f64, value(row)))
                .filter(|(_, distance)| *distance.lo() > 1e-40)
                .map(|(n, distance)| (n, distance.to_f64()))
                .collect()
        };
        let ink = Some(m - 1);
        series.push(Series {
            name: format!("m = {m}, all places"),
            points: curve(&|row| row.averaged.clone()),
            mark: Mark::LineDots,
            ink,
        });
        series.push(Series {
            name: format!("m = {m}, beginning"),
            points: curve(&|row| row.beginning.clone()),
            mark: Mark::Dashed,
            ink,
        });
    }
    series.retain(|curve| !curve.points.is_empty());
    let chart = Chart {
        x_label: "n, length of the words counted".into(),
        y_label: "total variation".into(),
        y_scale: Scale::Log,
        series,
        note: Some(
            "Blocks of length m in the words of length n, each word counted once, beside their measures. \
             Distances of 0 have no place on this axis."
                .into(),
        ),
        ..Chart::default()
    };
    let caption = Caption::new(
        format!("Block frequencies in {}", found.table.title()),
        "How far the frequencies of blocks in a uniformly random word are from their invariant probabilities.",
    );
    draw_chart(&chart, &caption)
}
