//! The computation of a study.
//!
//! Stages, each on the room that owns it: facts; generalized diagonals and p by fans (cheap, and it tells how
//! much memory the rest needs); the language by beams; measures; factor graphs; the verdict.

use super::claims::{ClaimRecord, judge};
use super::growth::GrowthFigures;
use super::statement::Statement;
use super::verdict::{Coding, Evidence, verdict};
use crate::complexity::claim::Claim;
use crate::complexity::constant::known_constant;
use crate::complexity::counts::{Counts, first_disagreement, p_from_diagonals};
use crate::complexity::diagonals;
use crate::factor_graph::census::{GraphCounts, count_graphs};
use crate::factor_graph::criterion::{LineFigures, line_figures};
use crate::language::Language;
use crate::language::measure::{self, Measures};
use crate::language::tree::BYTES_PER_WORD;
use crate::language::walk::{self, GrowthFault};
use crate::number::Tiers;
use crate::run::checkpoint::{Checkpoint, ledger};
use crate::run::{Control, Stopped, memory};
use crate::table::Table;
use crate::table::facts::{Facts, facts};
use crate::unfold::Mesh;
use crate::unfold::engine::{AnyEngine, Arithmetic};
use thiserror::Error;

/// What a study is asked to do.
#[derive(Clone, Copy, Debug)]
pub struct Request {
    /// Longest words; `None` for as far as [`DEFAULT_WORDS`] words in all, at most [`DEFAULT_LENGTH`].
    pub length: Option<usize>,
    /// Largest radius of the ball census.
    pub radii: usize,
    /// Which tiers may decide.
    pub arithmetic: Arithmetic,
    /// Bytes that the study may take; `None` for what the system has free.
    pub memory: Option<u64>,
}

/// The longest words of a study that names no length.
pub const DEFAULT_LENGTH: usize = 60;
/// The most words, of all lengths together, of a study that names no length.
pub const DEFAULT_WORDS: u64 = 1_000_000;
/// The largest radius of the ball census when none is named.
pub const DEFAULT_RADII: usize = 4;
/// The longest words that any command accepts: an engine's tables grow with the length.
pub const LONGEST: usize = 100_000;

/// Everything that a study computed.
#[derive(Debug)]
pub struct Results {
    /// The table.
    pub table: Table,
    /// Its proved facts.
    pub facts: Facts,
    /// How signs were decided.
    pub engine: &'static str,
    /// The longest words.
    pub length: usize,
    /// All words.
    pub language: Language,
    /// p and its differences, by beams.
    pub counts: Counts,
    /// N(0), …, N(length − 2).
    pub diagonals: Vec<u64>,
    /// p by fans, when each word is one beam.
    pub p_by_diagonals: Option<Vec<u64>>,
    /// The first n where the routes differ, when both lead to p.
    pub disagreement: Option<usize>,
    /// Cylinder measures; those of [`Results::shown_length`] are kept.
    pub measures: Measures,
    /// The length of the words that are listed with their measures and drawn as cells.
    pub shown_length: usize,
    /// Factor graphs of the orders 1 … length − 1.
    pub graphs: Vec<GraphCounts>,
    /// Line figures of the same orders.
    pub line: Vec<LineFigures>,
    /// Estimates of the growth.
    pub growth: GrowthFigures,
    /// Stated bounds, as far as [`Results::judge_claims`] was asked.
    pub claims: Vec<ClaimRecord>,
    /// What follows.
    pub statements: Vec<Statement>,
    /// Decisions by tier: fans, beams.
    pub tiers: StageTiers,
}

/// Decisions by tier, for each walk.
#[derive(Clone, Copy, Debug, Default, serde::Serialize)]
pub struct StageTiers {
    /// Walking fans.
    pub fans: Tiers,
    /// Walking beams.
    pub beams: Tiers,
}

/// Why a study was not completed.
#[derive(Debug, Error)]
pub enum StudyFault {
    /// Asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// A level is too large, or an inconsistency that would be a mistake in the program.
    #[error(transparent)]
    Growth(#[from] GrowthFault),
    /// It would not fit.
    #[error("{words} words to length {length} need about {}, but only {} may be used; choose a smaller --length or a larger --budget-memory", memory::display(*needed), memory::display(*allowed))]
    Memory {
        /// Words of all lengths.
        words: u64,
        /// Longest length.
        length: usize,
        /// Estimated bytes.
        needed: u64,
        /// Bytes allowed.
        allowed: u64,
    },
}

/// The stages of a study, told to the caller as they begin.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Stage {
    /// Counting generalized diagonals; about so many steps.
    Fans,
    /// Growing the language: so many words.
    Beams {
        /// Words of all lengths.
        words: u64,
    },
    /// Measuring the cylinders: so many words.
    Measures {
        /// Words of all lengths.
        words: u64,
    },
    /// Counting factor graphs.
    Graphs,
}

/// Peak bytes for each word of a study: the language twice while subtrees are joined, and the neighbours of
/// the graphs being counted.
pub const STUDY_BYTES_PER_WORD: u64 = 2 * BYTES_PER_WORD + 32;

/// Runs the computation of a study.
///
/// # Errors
/// When it would not fit in memory, or the control asks to stop.
pub fn compute(
    table: &Table,
    request: &Request,
    control: &Control,
    begin: impl FnMut(Stage),
) -> Result<Results, StudyFault> {
    compute_kept(table, request, control, None, begin)
}

/// The longest words of a study that names no length.
///
/// # Errors
/// When the control asks to stop.
pub fn default_length(
    table: &Table,
    arithmetic: Arithmetic,
    control: &Control,
) -> Result<usize, Stopped> {
    let engine = AnyEngine::new(table, DEFAULT_LENGTH, arithmetic);
    let (mesh, most) = (Mesh::new(table), DEFAULT_LENGTH - 2);
    let (diagonals, _) = diagonals::count(&engine, &mesh, most, control)?;
    let p = p_from_diagonals(table.sides() as u64, &diagonals, DEFAULT_LENGTH);
    Ok(affordable(&p, DEFAULT_WORDS))
}

/// The same, with the parts of its walks in a checkpoint.
///
/// # Errors
/// As [`compute`].
pub fn compute_kept(
    table: &Table,
    request: &Request,
    control: &Control,
    checkpoint: Option<&Checkpoint>,
    mut begin: impl FnMut(Stage),
) -> Result<Results, StudyFault> {
    let facts = facts(table);
    let mesh = Mesh::new(table);
    let horizon = request.length.unwrap_or(DEFAULT_LENGTH);
    let engine = AnyEngine::new(table, horizon, request.arithmetic);

    begin(Stage::Fans);
    let fans = ledger(checkpoint, "diagonals", horizon);
    let most = horizon.saturating_sub(2);
    let (mut diagonals, fan_tiers) = diagonals::count_kept(&engine, &mesh, most, control, &*fans)?;
    // Generalized diagonals count beams. They count words when each word is one beam, and bound them otherwise.
    let mut beams = p_from_diagonals(table.sides() as u64, &diagonals, horizon);
    let length = request
        .length
        .unwrap_or_else(|| affordable(&beams, DEFAULT_WORDS));
    beams.truncate(length + 1);
    diagonals.truncate(length.saturating_sub(2) + 1);
    let words: u64 = beams.iter().sum();
    let p_by_diagonals = table.has_one_beam_a_word().then_some(beams);
    check_memory(words, length, request.memory)?;

    begin(Stage::Beams { words });
    let grown = ledger(checkpoint, "language", length);
    let (language, beam_tiers) = walk::grow_kept(&engine, &mesh, length, control, &*grown)?;
    let counts = Counts::from_p(language.complexity());
    let shown_length = shown_length(&counts.p);

    begin(Stage::Measures { words });
    let measured = ledger(checkpoint, "measures", length);
    let lengths = (length, shown_length);
    let measures = measure::measure_kept(table, &engine, &mesh, lengths, control, &*measured)?;

    begin(Stage::Graphs);
    let graphs = count_graphs(&language, 1, request.radii);
    control.tick(0)?;
    let line: Vec<LineFigures> = graphs.iter().map(line_figures).collect();
    let disagreement = p_by_diagonals
        .as_ref()
        .and_then(|other| first_disagreement(&counts.p, other));
    let growth = GrowthFigures::new(&counts.p, Some(&diagonals), known_constant(table, &facts));
    let statements = verdict(&Evidence {
        facts: &facts,
        coding: Coding::of(table),
        p: &counts.p,
        disagreement,
        measure_fault: measures.levels.iter().find(|l| !l.holds).map(|l| l.length),
        bi_extendable: language.is_bi_extendable(),
        reversal_fault: language.first_without_reversal().map(|(n, _)| n),
        line: &line,
        growth: &growth,
    });
    Ok(Results {
        table: table.clone(),
        engine: engine.describe(),
        length,
        disagreement,
        measures,
        shown_length,
        graphs,
        line,
        growth,
        claims: Vec::new(),
        statements,
        tiers: StageTiers {
            fans: fan_tiers,
            beams: beam_tiers,
        },
        facts,
        language,
        counts,
        diagonals,
        p_by_diagonals,
    })
}

impl Results {
    /// Checks stated bounds and adds them to the verdict.
    pub fn judge_claims(&mut self, claims: &[Claim]) {
        for claim in claims {
            let record = judge(claim, &self.counts, Some(&self.diagonals));
            self.statements.push(record.statement());
            self.claims.push(record);
        }
    }
}

/// The longest length whose words, with all shorter ones, number at most `most`; at least 2.
fn affordable(p: &[u64], most: u64) -> usize {
    let mut sum = 0;
    let fits = p.iter().take_while(|count| {
        sum += *count;
        sum <= most
    });
    (fits.count().max(3) - 1).min(p.len() - 1)
}

/// Words of this length are listed with their measures and drawn as cells: the longest, from 2 to 12, with at
/// most 150 of them; 2 when even those are more.
fn shown_length(p: &[u64]) -> usize {
    let last = p.len() - 1;
    let few = (2..=last.min(12)).rev().find(|&n| p[n] <= 150);
    few.unwrap_or(2).min(last)
}

/// Refuses work on so many words, of all lengths up to one, that would not fit in memory.
///
/// # Errors
/// With the estimate, when it exceeds what is allowed.
pub fn check_memory(words: u64, length: usize, allowed: Option<u64>) -> Result<(), StudyFault> {
    let needed = words.saturating_mul(STUDY_BYTES_PER_WORD);
    check_bytes(words, length, needed, allowed)
}

/// The same for work that needs so many bytes.
///
/// # Errors
/// With the estimate, when it exceeds what is allowed.
pub fn check_bytes(
    words: u64,
    length: usize,
    needed: u64,
    allowed: Option<u64>,
) -> Result<(), StudyFault> {
    let allowed = allowed.or_else(|| memory::available().map(|free| free / 10 * 9));
    match allowed {
        Some(allowed) if needed > allowed => Err(StudyFault::Memory {
            words,
            length,
            needed,
            allowed,
        }),
        _ => Ok(()),
    }
}
