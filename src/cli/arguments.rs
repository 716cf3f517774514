//! Commands and options.

use super::analysis_arguments::{CompareOptions, MeasuresOptions, SpecialOptions};
use super::ask_arguments::AskOptions;
use super::language_source::LanguageSource;
use super::orbit_arguments::{DirectionOptions, OrbitsOptions, PeriodicOptions, TraceOptions};
use super::word_arguments::{CertifyOptions, LocateOptions, VerifyOptions};
use crate::complexity::claim::{self, Claim};
use crate::figure::PictureSize;
use crate::run::budget::{self, Budget};
use crate::study::results::{DEFAULT_LENGTH, DEFAULT_RADII, LONGEST};
use crate::table::diagnostic::Diagnostic;
use crate::unfold::engine::Arithmetic;
use clap::{Args, Parser, Subcommand, ValueEnum};
use std::path::{Path, PathBuf};
use std::time::Duration;

/// Complete, certified coding languages of polygonal billiards.
///
/// A table is a polygon in a TOML file with exact corners. Exit codes: 0 done; 1 the tool failed; 2 bad input
/// or usage; 3 stopped by a budget or a signal.
#[derive(Debug, Parser)]
#[command(version, max_term_width = 100)]
pub struct Arguments {
    /// What to do.
    #[command(subcommand)]
    pub command: Command,
}

/// The commands.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// The main job: language, complexity, factor graphs, verdict and pictures in one folder
    Study(StudyOptions),
    /// Facts about a table: exact corners, angles, reflection group, area
    Table(TableOptions),
    /// All words of one length, one a line
    Words(WordsOptions),
    /// Questions to a stored language: words, continuations, counts, patterns, special words
    Ask(AskOptions),
    /// The complexity p(n) and its differences, by one route or by both
    Complexity(ComplexityOptions),
    /// Generalized diagonals with ends, code and exact displacement
    Diagonals(DiagonalsOptions),
    /// Special words and path balls of the factor graphs, or one graph as GraphML
    Graph(GraphOptions),
    /// How far the languages of tables agree, letters as they are or up to a renaming
    Compare(CompareOptions),
    /// Cylinder measures with certified bounds, entropy, and the distance from counting words
    Measures(MeasuresOptions),
    /// Trees of special words, and the generalized diagonals that make bispecial ones
    Special(SpecialOptions),
    /// All orbits in one direction: words, corner-to-corner segments, strips, interval exchange
    Direction(DirectionOptions),
    /// All periodic words up to a length, one for each class under cyclic shift and reversal
    Periodic(PeriodicOptions),
    /// The complexity of every member of a family of tables, into a folder; continues where it was stopped
    Sweep(SweepOptions),
    /// Where a word lies: beam, exact measure, an orbit, its diagonals; or why it is no word of the table
    Locate(LocateOptions),
    /// A certificate for all words of one length
    Certify(CertifyOptions),
    /// Check a certificate, by code that shares only exact numbers with what made it
    Verify(VerifyOptions),
    /// One orbit from an exact start
    Trace(TraceOptions),
    /// Many orbits from random exact starts, one word a line
    Orbits(OrbitsOptions),
}

impl Command {
    /// The file that the command is to write; folders are checked by the commands that fill them.
    pub fn output_file(&self) -> Option<&Path> {
        match self {
            Command::Study(_) | Command::Sweep(_) | Command::Verify(_) => None,
            Command::Locate(options) => options.out.as_deref(),
            Command::Certify(options) => Some(&options.file),
            Command::Table(options) => options.out.as_deref(),
            Command::Words(options) => options.out.as_deref(),
            Command::Ask(options) => options.out.as_deref(),
            Command::Complexity(options) => options.out.as_deref(),
            Command::Diagonals(options) => options.out.as_deref(),
            Command::Graph(options) => options.out.as_deref(),
            Command::Compare(options) => options.out.as_deref(),
            Command::Measures(options) => options.out.as_deref(),
            Command::Special(options) => options.out.as_deref(),
            Command::Direction(options) => options.out.as_deref(),
            Command::Periodic(options) => options.out.as_deref(),
            Command::Trace(options) => options.out.as_deref(),
            Command::Orbits(options) => options.out.as_deref(),
        }
    }
}

/// Options of every command that computes.
#[derive(Clone, Debug, Args)]
pub struct Common {
    /// Threads to use [default: all cores]
    #[arg(long, value_name = "N", value_parser = parse_threads)]
    pub threads: Option<usize>,
    /// No progress and no notices
    #[arg(long)]
    pub quiet: bool,
}

/// Settings of the table file's parameters.
#[derive(Clone, Debug, Args)]
pub struct Settings {
    /// Value of a parameter of the table file, an exact expression, such as t=2/5; may be repeated
    #[arg(long = "set", value_name = "NAME=VALUE", allow_hyphen_values = true)]
    pub set: Vec<String>,
}

/// Options about arithmetic.
#[derive(Clone, Copy, Debug, Args)]
pub struct Exactness {
    /// Decide every sign with big integers only, bypassing the fast tiers
    #[arg(long)]
    pub exact_only: bool,
}

impl Exactness {
    /// As the engine takes it.
    pub fn arithmetic(self) -> Arithmetic {
        if self.exact_only {
            Arithmetic::BigOnly
        } else {
            Arithmetic::Tiered
        }
    }
}

/// Stated bounds.
#[derive(Clone, Debug, Args)]
pub struct Claims {
    /// Check a stated bound exactly, such as "p(n) <= 0.07*n^3 for n >= 10"; of p, s, b, N and n; may be repeated
    #[arg(long = "claim", value_name = "CLAIM", allow_hyphen_values = true)]
    pub claim: Vec<String>,
}

impl Claims {
    /// The claims as they are understood.
    pub fn parse(&self) -> Result<Vec<Claim>, Box<Diagnostic>> {
        self.claim.iter().map(|text| claim::parse(text)).collect()
    }
}

/// Limits of a run that can give a part of its result.
#[derive(Clone, Copy, Debug, Args)]
pub struct Limits {
    /// Stop after this time and write what is complete: seconds, or with s, m, h, such as 30s, 5m or 2h
    #[arg(long, value_name = "TIME", value_parser = parse_time)]
    pub budget_time: Option<Duration>,
    /// Stop when more memory is used and write what is complete: bytes, or with K, M, G
    #[arg(long, value_name = "BYTES", value_parser = parse_bytes)]
    pub budget_memory: Option<u64>,
}

impl Limits {
    /// As the watch takes them.
    pub fn budget(self) -> Budget {
        Budget {
            time: self.budget_time,
            memory: self.budget_memory,
        }
    }
}

/// Options about keeping the results of finished parts.
#[derive(Clone, Debug, Args)]
pub struct Keeping {
    /// Keep the results of finished parts in this folder
    #[arg(long, value_name = "DIR")]
    pub checkpoint: Option<PathBuf>,
    /// Continue from the checkpoint, if it holds anything
    #[arg(long, requires = "checkpoint")]
    pub resume: bool,
}

fn parse_time(text: &str) -> Result<Duration, String> {
    budget::parse_time(text)
        .ok_or_else(|| "write a number of seconds, or a number with s, m or h, such as 5m".into())
}

/// Text for people, or a format for programs.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum Format {
    /// For people
    #[default]
    Text,
    /// One JSON object (JSON Lines where rows are many)
    Json,
    /// Comma-separated values with a header
    Csv,
}

/// The ways to p(n).
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum Route {
    /// Count words: walk all beams of lines
    Beams,
    /// Count generalized diagonals: walk all fans of rays
    Diagonals,
    /// Both, compared value by value
    Both,
}

/// The most threads that can be asked for: starting more only costs memory.
const MOST_THREADS: usize = 1024;

fn parse_threads(text: &str) -> Result<usize, String> {
    match text.parse::<usize>() {
        Ok(threads) if (1..=MOST_THREADS).contains(&threads) => Ok(threads),
        _ => Err(format!("write a whole number from 1 to {MOST_THREADS}")),
    }
}

/// The graph of order n needs words of length n + 1.
fn parse_graph_order(text: &str) -> Result<usize, String> {
    match text.parse::<usize>() {
        Ok(order) if order < LONGEST => Ok(order),
        _ => Err(format!("write a whole number from 0 to {}", LONGEST - 1)),
    }
}

pub(super) fn parse_length(text: &str) -> Result<usize, String> {
    match text.parse::<usize>() {
        Ok(length) if length <= LONGEST => Ok(length),
        Ok(length) => Err(format!(
            "{length} is too long; the longest words that can be asked for have {LONGEST} letters"
        )),
        Err(_) => Err(format!("write a whole number from 0 to {LONGEST}")),
    }
}

pub(super) fn parse_positive_length(text: &str) -> Result<usize, String> {
    match parse_length(text)? {
        0 => Err("write a length of at least 1".into()),
        length => Ok(length),
    }
}

/// The shortest study.
pub const SHORTEST_STUDY: usize = 3;

fn parse_study_length(text: &str) -> Result<usize, String> {
    match parse_length(text)? {
        length if length < SHORTEST_STUDY => Err(format!(
            "a study needs words of length at least {SHORTEST_STUDY}, not {length}"
        )),
        length => Ok(length),
    }
}

pub(super) fn parse_bytes(text: &str) -> Result<u64, String> {
    let (digits, factor) = match text.char_indices().last() {
        Some((at, 'K' | 'k')) => (&text[..at], 1u64 << 10),
        Some((at, 'M' | 'm')) => (&text[..at], 1 << 20),
        Some((at, 'G' | 'g')) => (&text[..at], 1 << 30),
        _ => (text, 1),
    };
    digits
        .parse::<u64>()
        .ok()
        .and_then(|n| n.checked_mul(factor))
        .ok_or_else(|| "write a number of bytes, or a number with K, M or G, such as 4G".into())
}

/// `study`.
#[derive(Debug, Args)]
pub struct StudyOptions {
    /// Table files, or folders of them; more than one table is studied in parallel, with an index that compares them
    #[arg(required = true, value_name = "TABLE")]
    pub tables: Vec<PathBuf>,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    #[doc = "Longest words [default: as far as a million words in all, at most 60]"]
    #[arg(long, value_name = "N", value_parser = parse_study_length)]
    pub length: Option<usize>,
    /// Folder for the results [default: NAME-study for a table file NAME.toml; studies for more than one]
    #[arg(long, value_name = "DIR")]
    pub out: Option<PathBuf>,
    /// Largest radius of the ball census
    #[arg(long, value_name = "R", default_value_t = DEFAULT_RADII, value_parser = parse_radii)]
    pub radii: usize,
    /// Claims.
    #[command(flatten)]
    pub claims: Claims,
    /// Write the tables as LaTeX with booktabs rules too (tables.tex)
    #[arg(long, value_enum, default_value_t)]
    pub format: StudyFormat,
    /// Printed size of the picture files: pixels, a column of 88 mm or a page of 180 mm
    #[arg(long, value_enum, default_value_t, value_name = "SIZE")]
    pub pictures: Pictures,
    /// Order of the factor graph written as GraphML [default: the largest with at most 2000 vertices]
    #[arg(long, value_name = "N", value_parser = parse_graph_order)]
    pub graph_order: Option<usize>,
    /// Stop after this time and write what is complete, of shorter words: seconds, or with s, m, h, such as 30s, 5m or 2h
    #[arg(long, value_name = "TIME", value_parser = parse_time)]
    pub budget_time: Option<Duration>,
    /// Refuse to start when more memory would be needed: bytes, or with K, M, G [default: 90% of what is free]
    #[arg(long, value_name = "BYTES", value_parser = parse_bytes)]
    pub budget_memory: Option<u64>,
    /// Checkpoint.
    #[command(flatten)]
    pub keeping: Keeping,
    /// Tell steps, decisions by tier, time and memory on standard error
    #[arg(long)]
    pub stats: bool,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// Formats of `study`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum StudyFormat {
    /// The page, JSON and CSV
    #[default]
    Html,
    /// The same, and the tables as LaTeX
    Latex,
}

/// Sizes of the pictures of `study`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum Pictures {
    /// In pixels
    #[default]
    Screen,
    /// For one of two columns
    Column,
    /// For the width of a page
    Page,
}

impl Pictures {
    /// As the figures take it.
    pub fn size(self) -> PictureSize {
        match self {
            Pictures::Screen => PictureSize::Screen,
            Pictures::Column => PictureSize::Column,
            Pictures::Page => PictureSize::Page,
        }
    }
}

fn parse_radii(text: &str) -> Result<usize, String> {
    match text.parse::<usize>() {
        Ok(radii @ 1..=64) => Ok(radii),
        _ => Err("write a whole number from 1 to 64".into()),
    }
}

/// `table`.
#[derive(Debug, Args)]
pub struct TableOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// No notices
    #[arg(long)]
    pub quiet: bool,
}

/// `words`.
#[derive(Debug, Args)]
pub struct WordsOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Length of the words
    #[arg(long, value_name = "N", value_parser = parse_length)]
    pub length: usize,
    /// How the words are written
    #[arg(long, value_enum, default_value_t)]
    pub format: WordsFormat,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Stop after this time and write what is complete, of shorter words: seconds, or with s, m, h, such as 30s, 5m or 2h
    #[arg(long, value_name = "TIME", value_parser = parse_time)]
    pub budget_time: Option<Duration>,
    /// Refuse to start when more memory would be needed: bytes, or with K, M, G [default: 90% of what is free]
    #[arg(long, value_name = "BYTES", value_parser = parse_bytes)]
    pub budget_memory: Option<u64>,
    /// Checkpoint.
    #[command(flatten)]
    pub keeping: Keeping,
    /// Tell steps, decisions by tier, time and memory on standard error
    #[arg(long)]
    pub stats: bool,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// Formats of `words`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum WordsFormat {
    /// One word a line
    #[default]
    Text,
    /// One JSON object a line: the word and its certified measure
    Json,
    /// The words with their certified measures
    Csv,
    /// All words up to this length in one file for `ask`; needs --out
    Stored,
}

/// `complexity`.
#[derive(Debug, Args)]
pub struct ComplexityOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Longest words
    #[arg(long, value_name = "N", default_value_t = DEFAULT_LENGTH, value_parser = parse_length)]
    pub length: usize,
    /// How to count [default: both; beams when sides share letters or the table has holes]
    #[arg(long, value_enum)]
    pub route: Option<Route>,
    /// Claims.
    #[command(flatten)]
    pub claims: Claims,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Budget.
    #[command(flatten)]
    pub limits: Limits,
    /// Checkpoint.
    #[command(flatten)]
    pub keeping: Keeping,
    /// Tell steps, decisions by tier, time and memory: on standard error, or as an object in JSON
    #[arg(long)]
    pub stats: bool,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// `diagonals`.
#[derive(Debug, Args)]
pub struct DiagonalsOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// The most sides that a listed diagonal crosses
    #[arg(long, value_name = "N", default_value_t = 8, value_parser = parse_length)]
    pub length: usize,
    /// List all up to this geometric length instead, an exact number
    #[arg(
        long,
        value_name = "L",
        allow_hyphen_values = true,
        conflicts_with = "length"
    )]
    pub distance: Option<String>,
    /// Which rows text and CSV show; JSON holds the list and the counts
    #[arg(long, value_enum, default_value_t)]
    pub rows: DiagonalRows,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Budget.
    #[command(flatten)]
    pub limits: Limits,
    /// Tell steps, decisions by tier, time and memory: on standard error, or as an object in JSON
    #[arg(long)]
    pub stats: bool,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// Rows that `diagonals` shows.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum DiagonalRows {
    /// The diagonals themselves
    #[default]
    List,
    /// How many cross 0, 1, 2, ... sides, and how many at most so many
    BySides,
    /// How many have each length, how many are at most so long, N(L), and N(L)/L^2; needs --distance
    ByLength,
}

/// `graph`.
#[derive(Debug, Args)]
pub struct GraphOptions {
    /// The language.
    #[command(flatten)]
    pub source: LanguageSource,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    #[doc = "Largest order n of the factor graphs [default: 30, or as far as the words of a file reach]"]
    #[arg(long, value_name = "N", value_parser = parse_positive_length)]
    pub length: Option<usize>,
    /// Largest radius of the ball census
    #[arg(long, value_name = "R", default_value_t = DEFAULT_RADII, value_parser = parse_radii)]
    pub radii: usize,
    /// Count the words of order N by the isomorphism type of their balls
    #[arg(long)]
    pub census: bool,
    /// What isomorphisms of balls keep; repeat for more [default: all three]
    #[arg(long, value_enum, requires = "census")]
    pub kind: Vec<BallKind>,
    /// The law of the letters round a uniform vertex, for radii 0 to R, and how it settles
    #[arg(long)]
    pub law: bool,
    /// Compare that law with the block frequencies of long words, one a line, such as orbits in one direction
    #[arg(long, value_name = "FILE", requires = "law")]
    pub frequencies: Option<PathBuf>,
    /// Branches between special words, components, cycles, diameter, spectrum
    #[arg(long)]
    pub structure: bool,
    /// Draw the commonest types of the census into this folder
    #[arg(long, value_name = "DIR", requires = "census")]
    pub drawings: Option<PathBuf>,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: GraphFormat,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Budget.
    #[command(flatten)]
    pub limits: Limits,
    /// Tell steps, decisions by tier, time and memory: on standard error, or as an object in JSON
    #[arg(long)]
    pub stats: bool,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// Formats of `graph`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum GraphFormat {
    /// For people
    #[default]
    Text,
    /// One JSON object
    Json,
    /// Comma-separated values with a header
    Csv,
    /// The factor graph of order N itself, for graph programs
    Graphml,
    /// The same for Graphviz
    Dot,
    /// Its arcs as CSV
    Edges,
    /// Its lists of successors as JSON
    Adjacency,
}

/// What an isomorphism of balls keeps.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum BallKind {
    /// Neither directions nor letters
    Plain,
    /// Directions
    Oriented,
    /// Directions and letters
    Labelled,
}

/// `sweep`.
#[derive(Debug, Args)]
pub struct SweepOptions {
    /// The table file; its `[parameters]` are what --set varies
    pub table: PathBuf,
    /// Values of a parameter: t=1/10..9/10/17 (start, end, count), t={1/3,2/5} or t=2/5; repeat for more parameters
    #[arg(long, value_name = "NAME=VALUES", required = true)]
    pub set: Vec<String>,
    /// Longest words
    #[arg(long, value_name = "N", default_value_t = 20, value_parser = parse_positive_length)]
    pub length: usize,
    /// How to count
    #[arg(long, value_enum, default_value = "diagonals")]
    pub route: Route,
    /// The N(n) in the picture; repeat for more [default: the largest n]
    #[arg(long, value_name = "N")]
    pub diagonals: Vec<usize>,
    /// Folder for the results; finished members in it are kept
    #[arg(long, value_name = "DIR")]
    pub out: PathBuf,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

pub(super) fn parse_hits(text: &str) -> Result<usize, String> {
    match text.parse::<usize>() {
        Ok(hits) if hits >= 1 => Ok(hits),
        _ => Err("write a whole number of at least 1".into()),
    }
}
