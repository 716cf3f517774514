//! All files of a study.
//!
//! `report.html`, `study.json`, `complexity.csv`, `growth.csv`, `factor-graphs.csv`, `measures.csv`, `diagonals.csv`,
//! `words.txt` (L_N, one word a line), `factor-graph.graphml` and the pictures. The folder appears whole.

use super::latex::write_latex;
use super::pictures::{pictures, telling_beam};
use super::record::{Hashes, Options, decimal, record};
use super::report::report;
use super::results::Results;
use crate::complexity::diagonals::{self, Diagonal};
use crate::factor_graph::export::{spell, write_graphml};
use crate::figure::{FigureError, PictureSize, sized};
use crate::language::WordId;
use crate::language::beams::beams_of_length;
use crate::run::files::{OutputFault, ResultFolder};
use crate::run::{Control, Stopped};
use crate::table::file::{BaseFile, Parameter};
use crate::table::summary::{ExactVector, root_decimal};
use crate::table::{SideId, Table};
use crate::unfold::Mesh;
use crate::unfold::engine::{AnyEngine, Arithmetic};
use std::io::{self, Write};
use std::path::Path;
use thiserror::Error;

/// The file that marks a study's folder.
pub const MARK: &str = "study.json";

/// The longest corridor that is drawn.
const CORRIDOR_LENGTH: usize = 9;
/// Generalized diagonals that cross at most so many sides are listed.
const LISTED_CROSSINGS: usize = 8;
/// The exported factor graph is the largest with at most so many vertices.
const EXPORTED_VERTICES: u64 = 2000;

/// What the folder needs beside the results.
#[derive(Clone, Copy, Debug)]
pub struct Extras<'a> {
    /// The text of the table file.
    pub table_file: &'a str,
    /// Notices about the input.
    pub notices: &'a [String],
    /// The parameters of the table file, as set.
    pub parameters: &'a [Parameter],
    /// The table files that it stands on.
    pub bases: &'a [BaseFile],
    /// The command that reproduces the study.
    pub command: &'a str,
    /// Order of the exported factor graph; `None` for the largest with at most 2000 vertices.
    pub graph_order: Option<usize>,
    /// Which tiers may decide.
    pub arithmetic: Arithmetic,
    /// Size of the pictures in their own files.
    pub picture_size: PictureSize,
    /// Write the tables as LaTeX too.
    pub latex: bool,
    /// Why the study is not longer: `complete`, or `time`, `memory` or `signal` when it was stopped.
    pub stop: &'static str,
}

/// Why a study's folder was not written.
#[derive(Debug, Error)]
pub enum FolderFault {
    /// Asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// The system refused.
    #[error(transparent)]
    Output(#[from] OutputFault),
    /// A picture could not be drawn.
    #[error("cannot draw a picture: {0}")]
    Figure(#[from] FigureError),
}

/// The order of the factor graph that is exported when none is named.
pub fn default_graph_order(p: &[u64]) -> usize {
    (1..p.len() - 1)
        .rev()
        .find(|&n| p[n] <= EXPORTED_VERTICES)
        .unwrap_or(0)
}

/// Writes all files of a study.
///
/// # Errors
/// When the control asks to stop or the system refuses; then nothing is left behind.
pub fn write(
    results: &Results,
    extras: &Extras<'_>,
    target: &Path,
    control: &Control,
) -> Result<(), FolderFault> {
    let folder = ResultFolder::new(target, MARK)?;
    let table = &results.table;
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, results.length, extras.arithmetic);
    let cells = beams_of_length(&engine, &mesh, results.shown_length, control)?;
    let long = beams_of_length(&engine, &mesh, corridor_length(results), control)?;
    let corridor = telling_beam(&long).expect("a table has words of every length");
    let drawn = pictures(results, &cells, corridor)?;
    let most = LISTED_CROSSINGS.min(results.length.saturating_sub(2));
    let (listed, _) = diagonals::list(&engine, &mesh, most, control)?;
    let order = extras
        .graph_order
        .unwrap_or_else(|| default_graph_order(&results.counts.p));

    for picture in &drawn {
        let svg = sized(&picture.svg, extras.picture_size);
        folder.write(picture.file, |out| out.write_all(svg.as_bytes()))?;
    }
    write_tables(results, &folder, &listed)?;
    control.tick(0)?;
    let mut words = Vec::new();
    write_words(results, &mut words).expect("memory takes what it is given");
    let hashes = Hashes::of(extras.table_file, &words);
    folder.write("words.txt", |out| out.write_all(&words))?;
    drop(words);
    if extras.latex {
        folder.write("tables.tex", |out| write_latex(results, out))?;
    }
    folder.write("factor-graph.graphml", |out| {
        write_graphml(&results.language, order, table.letters(), out)
    })?;
    let options = Options {
        length: results.length,
        radii: results.graphs.first().map_or(0, |g| g.path_balls.len()),
        graph_order: order,
        exact_only: extras.arithmetic == Arithmetic::BigOnly,
        parameters: extras.parameters.to_vec(),
    };
    let record = record(results, extras, options, hashes);
    folder.write("report.html", |out| {
        let page = report(results, &record, &drawn, &listed, extras);
        out.write_all(page.as_bytes())
    })?;
    folder.write(MARK, |out| {
        serde_json::to_writer_pretty(&mut *out, &record)?;
        out.write_all(b"\n")
    })?;
    control.tick(0)?;
    folder.finish()?;
    Ok(())
}

/// Words whose corridor is drawn: not too long, and few enough to choose among.
fn corridor_length(results: &Results) -> usize {
    let p = &results.counts.p;
    (1..p.len().min(CORRIDOR_LENGTH + 1))
        .rev()
        .find(|&n| p[n] <= 100_000)
        .unwrap_or(1)
}

fn write_tables(
    results: &Results,
    folder: &ResultFolder,
    listed: &[Diagonal],
) -> Result<(), OutputFault> {
    folder.write("complexity.csv", |out| write_complexity(results, out))?;
    folder.write("factor-graphs.csv", |out| write_graphs(results, out))?;
    folder.write("growth.csv", |out| write_growth(results, out))?;
    folder.write("measures.csv", |out| write_measures(results, out))?;
    folder.write("diagonals.csv", |out| {
        write_diagonals(&results.table, listed, out)
    })
}

/// One row for each n; values that need longer words than the study has are empty.
fn write_complexity(results: &Results, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["n", "p", "s", "b", "diagonals", "p_by_diagonals"])?;
    let counts = &results.counts;
    for n in 0..counts.p.len() {
        let cell = |values: &[i64]| values.get(n).map_or(String::new(), i64::to_string);
        csv.write_record([
            n.to_string(),
            counts.p[n].to_string(),
            cell(&counts.first_difference),
            cell(&counts.second_difference),
            results
                .diagonals
                .get(n)
                .map_or(String::new(), u64::to_string),
            results
                .p_by_diagonals
                .as_ref()
                .map_or(String::new(), |p| p[n].to_string()),
        ])?;
    }
    csv.flush()
}

/// Names of the columns of the dyadic windows.
pub(super) const WINDOW_COLUMNS: [&str; 11] = [
    "from",
    "to",
    "smallest_quotient",
    "smallest_at",
    "largest_quotient",
    "largest_at",
    "exponent",
    "residual",
    "curvature",
    "smallest_diagonals",
    "largest_diagonals",
];

/// The dyadic windows of the growth, the last first, as cells.
pub(super) fn window_rows(results: &Results) -> impl Iterator<Item = Vec<String>> + '_ {
    results.growth.windows.iter().map(|w| {
        let q = &w.quotient;
        let (low, high) = match w.diagonals_over_square {
            Some((low, high)) => (format!("{low:.6}"), format!("{high:.6}")),
            None => Default::default(),
        };
        vec![
            q.from.to_string(),
            q.to.to_string(),
            format!("{:.6}", q.smallest),
            q.smallest_at.to_string(),
            format!("{:.6}", q.largest),
            q.largest_at.to_string(),
            format!("{:.4}", w.exponent),
            format!("{:.1e}", w.residual),
            w.curvature.map_or(String::new(), |c| format!("{c:.6}")),
            low,
            high,
        ]
    })
}

fn write_growth(results: &Results, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(WINDOW_COLUMNS)?;
    for row in window_rows(results) {
        csv.write_record(row)?;
    }
    csv.flush()
}

fn write_graphs(results: &Results, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    let radii = results.graphs.first().map_or(0, |g| g.path_balls.len());
    let mut header: Vec<String> = [
        "order",
        "vertices",
        "arcs",
        "left_special",
        "right_special",
        "bispecial",
        "unique_both",
    ]
    .map(String::from)
    .to_vec();
    header.extend((1..=radii).map(|r| format!("path_balls_{r}")));
    csv.write_record(&header)?;
    for graph in &results.graphs {
        let mut row = vec![
            graph.order as u64,
            graph.vertices,
            graph.arcs,
            graph.left_special,
            graph.right_special,
            graph.bispecial,
            graph.unique_both,
        ];
        row.extend(&graph.path_balls);
        csv.write_record(row.iter().map(u64::to_string))?;
    }
    csv.flush()
}

fn write_measures(results: &Results, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["word", "measure"])?;
    let n = results.shown_length;
    for (w, measure) in results.measures.kept.iter().enumerate() {
        let word = spell(&results.language, n, w as WordId, results.table.letters());
        csv.write_record([word, decimal(measure)])?;
    }
    csv.flush()
}

/// The columns of a list of generalized diagonals.
pub const DIAGONAL_COLUMNS: [&str; 9] = [
    "crossings",
    "start_corner",
    "end_corner",
    "code",
    "x",
    "y",
    "x_decimal",
    "y_decimal",
    "length",
];

/// Writes generalized diagonals as CSV: ends, code, exact displacement and length.
///
/// # Errors
/// Those of the writer.
pub fn write_diagonals(table: &Table, listed: &[Diagonal], out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(DIAGONAL_COLUMNS)?;
    for diagonal in listed {
        let vector = ExactVector::new(&diagonal.displacement);
        csv.write_record([
            diagonal.code.len().to_string(),
            diagonal.start.0.to_string(),
            diagonal.end.0.to_string(),
            spell_code(table, &diagonal.code),
            vector.x.exact,
            vector.y.exact,
            vector.x.decimal,
            vector.y.decimal,
            root_decimal(&diagonal.displacement.squared_length(table.form())),
        ])?;
    }
    csv.flush()
}

/// A sequence of sides in the letters of the table.
pub fn spell_code(table: &Table, code: &[SideId]) -> String {
    code.iter().map(|s| table.letter(*s)).collect()
}

/// L_N, one word a line, in the order of the letters.
fn write_words(results: &Results, out: &mut dyn Write) -> io::Result<()> {
    let n = results.length;
    for w in 0..results.language.count(n) as WordId {
        writeln!(
            out,
            "{}",
            spell(&results.language, n, w, results.table.letters())
        )?;
    }
    Ok(())
}
