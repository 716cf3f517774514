//! `study.json`: everything that a study found, for scripts.
//!
//! The record has no times and no paths, so the same input gives the same bytes.

use super::claims::ClaimRecord;
use super::folder::Extras;
use super::growth::GrowthFigures;
use super::results::{Results, StageTiers};
use super::statement::Statement;
use crate::complexity::growth::CubicRange;
use crate::factor_graph::census::GraphCounts;
use crate::factor_graph::criterion::LineFigures;
use crate::factor_graph::export::spell;
use crate::language::WordId;
use crate::number::Enclosure;
use crate::table::file::Parameter;
use crate::table::summary::{TableSummary, summary};
use serde::Serialize;
use sha2::{Digest, Sha256};

/// The version of this record's layout. It changes whenever a field changes its meaning or goes away.
pub const SCHEMA: &str = "reboundary-study/1";

/// The whole record.
#[derive(Debug, Serialize)]
pub struct Record<'a> {
    /// [`SCHEMA`].
    pub schema: &'static str,
    /// Name and version of the program.
    pub program: Program,
    /// What was asked.
    pub options: Options,
    /// The text of the table file.
    pub table_file: &'a str,
    /// The texts of the files that it stands on, the nearest first.
    pub base_files: Vec<&'a str>,
    /// What the files were, for comparison.
    pub hashes: Hashes,
    /// The table and its facts.
    pub table: TableSummary,
    /// Why the study ended: always `complete` in a finished folder.
    pub stop: &'static str,
    /// Counts.
    pub complexity: Complexity<'a>,
    /// Exponents, limits and windows, with their uncertainty.
    pub growth: &'a GrowthFigures,
    /// Stated bounds.
    pub claims: &'a [ClaimRecord],
    /// The measure check.
    pub measure: MeasureRecord,
    /// Words of the shown length with their measures.
    pub cylinders: Cylinders,
    /// Special words and ball census, by order.
    pub factor_graphs: &'a [GraphCounts],
    /// s(n)/p(n) and the bound, by order.
    pub line: &'a [LineFigures],
    /// Statements with their standings.
    pub verdict: &'a [Statement],
    /// How signs were decided.
    pub arithmetic: ArithmeticRecord,
}

/// Name and version.
#[derive(Debug, Serialize)]
pub struct Program {
    /// The name.
    pub name: &'static str,
    /// The version.
    pub version: &'static str,
}

impl Program {
    /// This program.
    pub fn this() -> Program {
        Program {
            name: env!("CARGO_PKG_NAME"),
            version: env!("CARGO_PKG_VERSION"),
        }
    }
}

/// What was asked.
#[derive(Debug, Serialize)]
pub struct Options {
    /// Longest words.
    pub length: usize,
    /// Largest radius of the ball census.
    pub radii: usize,
    /// Order of the exported factor graph.
    pub graph_order: usize,
    /// True when only big integers may decide.
    pub exact_only: bool,
    /// The parameters of the table file, as set.
    pub parameters: Vec<Parameter>,
}

/// SHA-256 sums (FIPS 180-4), in hexadecimal digits.
#[derive(Clone, Debug, Serialize)]
pub struct Hashes {
    /// Of the table file.
    pub table_file: String,
    /// Of `words.txt`.
    pub words: String,
}

impl Hashes {
    /// Those of the text of the table file and the bytes of the list of words.
    pub fn of(table_file: &str, words: &[u8]) -> Hashes {
        Hashes {
            table_file: sha256(table_file.as_bytes()),
            words: sha256(words),
        }
    }
}

fn sha256(bytes: &[u8]) -> String {
    let sum = Sha256::digest(bytes);
    sum.iter().map(|byte| format!("{byte:02x}")).collect()
}

/// Counts.
#[derive(Debug, Serialize)]
pub struct Complexity<'a> {
    /// p(0), p(1), …
    pub p: &'a [u64],
    /// s(n).
    pub first_difference: &'a [i64],
    /// b(n).
    pub second_difference: &'a [i64],
    /// N(0), N(1), …
    pub diagonals: &'a [u64],
    /// p by generalized diagonals; null when they do not lead to it.
    pub p_by_diagonals: Option<&'a [u64]>,
    /// True when both routes give the same p; null when only one leads to it.
    pub routes_agree: Option<bool>,
    /// Extremes of p(n)/n³.
    pub cubic_range: Option<CubicRange>,
}

/// The measure check.
#[derive(Debug, Serialize)]
pub struct MeasureRecord {
    /// 2·perimeter.
    pub whole: String,
    /// Places after the point that are certified to one unit.
    pub places: usize,
    /// The sums by length.
    pub levels: Vec<LevelRecord>,
}

/// The sum of one level.
#[derive(Debug, Serialize)]
pub struct LevelRecord {
    /// Length of the words.
    pub length: usize,
    /// Sum of their measures.
    pub sum: String,
    /// Upper bound of the enclosure's width.
    pub width: String,
    /// True when the sum agrees with 2·perimeter.
    pub holds: bool,
}

/// Words with their measures.
#[derive(Debug, Serialize)]
pub struct Cylinders {
    /// Their length.
    pub length: usize,
    /// In the order of the letters.
    pub words: Vec<Cylinder>,
}

/// One word.
#[derive(Debug, Serialize)]
pub struct Cylinder {
    /// Its letters.
    pub word: String,
    /// Its measure.
    pub measure: String,
}

/// How signs were decided.
#[derive(Debug, Serialize)]
pub struct ArithmeticRecord {
    /// In words.
    pub engine: &'static str,
    /// Decisions by tier.
    pub decisions: StageTiers,
}

/// Places after the point in measures.
pub const MEASURE_PLACES: usize = 30;

/// A certified decimal; bounds are far narrower than a unit in the last place, so it always settles.
pub fn decimal(value: &Enclosure) -> String {
    value
        .decimal(MEASURE_PLACES)
        .unwrap_or_else(|| format!("{:.20}", value.to_f64()))
}

/// An upper bound of a width, as text.
pub fn width(value: &Enclosure) -> String {
    format!("{:.1e}", value.width().to_f64_round(rug::float::Round::Up))
}

/// Gathers the record of a study.
pub fn record<'a>(
    results: &'a Results,
    extras: &Extras<'a>,
    options: Options,
    hashes: Hashes,
) -> Record<'a> {
    let n = results.shown_length;
    Record {
        schema: SCHEMA,
        program: Program::this(),
        options,
        table_file: extras.table_file,
        base_files: (extras.bases.iter())
            .map(|base| base.text.as_str())
            .collect(),
        hashes,
        table: summary(&results.table, &results.facts),
        stop: extras.stop,
        complexity: Complexity {
            p: &results.counts.p,
            first_difference: &results.counts.first_difference,
            second_difference: &results.counts.second_difference,
            diagonals: &results.diagonals,
            p_by_diagonals: results.p_by_diagonals.as_deref(),
            routes_agree: results
                .p_by_diagonals
                .as_ref()
                .map(|_| results.disagreement.is_none()),
            cubic_range: crate::complexity::growth::cubic_range(
                &results.counts.p,
                super::verdict::CUBIC_FROM,
                results.length,
            ),
        },
        growth: &results.growth,
        claims: &results.claims,
        measure: MeasureRecord {
            whole: decimal(&results.measures.whole),
            places: MEASURE_PLACES,
            levels: results
                .measures
                .levels
                .iter()
                .map(|level| LevelRecord {
                    length: level.length,
                    sum: decimal(&level.sum),
                    width: width(&level.sum),
                    holds: level.holds,
                })
                .collect(),
        },
        cylinders: Cylinders {
            length: n,
            words: results
                .measures
                .kept
                .iter()
                .enumerate()
                .map(|(w, measure)| Cylinder {
                    word: spell(&results.language, n, w as WordId, results.table.letters()),
                    measure: decimal(measure),
                })
                .collect(),
        },
        factor_graphs: &results.graphs,
        line: &results.line,
        verdict: &results.statements,
        arithmetic: ArithmeticRecord {
            engine: results.engine,
            decisions: results.tiers,
        },
    }
}

#[cfg(test)]
mod tests {
    use super::sha256;

    /// FIPS 180-2, appendix B.1.
    #[test]
    fn sha256_of_abc_fips_180() {
        assert_eq!(
            sha256(b"abc"),
            "ba7816bf8f01cfea414140de5dae2223b00361a396177a9cb410ff61f20015ad"
        );
    }
}
