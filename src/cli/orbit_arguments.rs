//! Options of the commands about single directions and periodic orbits.

use super::arguments::{Common, Exactness, Format, Settings, parse_hits, parse_positive_length};
use crate::figure::png::WIDEST;
use clap::{Args, ValueEnum};
use std::path::PathBuf;

/// `periodic`.
#[derive(Debug, Args)]
pub struct PeriodicOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Longest words
    #[arg(long, value_name = "N", default_value_t = 12, value_parser = parse_positive_length)]
    pub length: usize,
    /// Only words that survive every small change of the table
    #[arg(long)]
    pub stable_only: bool,
    /// Text and CSV: one word a row; JSON: one object with the counts and the words
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Folder for one picture (SVG) of each periodic orbit
    #[arg(long, value_name = "DIR")]
    pub pictures: Option<PathBuf>,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// `direction`.
#[derive(Debug, Args)]
pub struct DirectionOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// The direction as a vector X,Y in the table's coordinates
    #[arg(
        long,
        value_name = "X,Y",
        allow_hyphen_values = true,
        required_unless_present = "heading"
    )]
    pub aim: Option<String>,
    /// The direction as its angle from the x axis in units of pi, such as 1/5
    #[arg(
        long,
        value_name = "Q",
        allow_hyphen_values = true,
        conflicts_with = "aim"
    )]
    pub heading: Option<String>,
    /// Longest words
    #[arg(long, value_name = "N", default_value_t = 20, value_parser = parse_positive_length)]
    pub length: usize,
    /// Sides over which each line from a corner is followed
    #[arg(long, value_name = "M", default_value_t = 2000, value_parser = parse_positive_length)]
    pub reach: usize,
    /// Where the interval exchange is taken: `all` sides, one side by its LETTER, or LETTER:COPY
    #[arg(long, value_name = "WHERE", default_value = "all")]
    pub transversal: String,
    /// Which rows text and CSV show; JSON holds everything
    #[arg(long, value_enum, default_value_t)]
    pub rows: DirectionRows,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
}

/// Rows that `direction` shows.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum DirectionRows {
    /// p(n) and special words by length
    #[default]
    Complexity,
    /// The words of the greatest length
    Words,
    /// The special words of the greatest length
    Special,
    /// Segments from corner to corner in the direction
    Saddles,
    /// Strips of periodic orbits, when the direction is periodic
    Strips,
    /// The interval exchange on the transversal
    Exchange,
}

/// `trace`.
#[derive(Debug, Args)]
pub struct TraceOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Where to start: LETTER@FRACTION, such as a@1/3, a third of the way along side a; a2@1/3 for the second of
    /// several sides with the letter a
    #[arg(
        long,
        value_name = "START",
        required_unless_present_any = ["from", "seed"],
        conflicts_with_all = ["from", "seed"]
    )]
    pub start: Option<String>,
    /// Start inside the table, at X,Y in its coordinates; the first letter is the first side hit
    #[arg(
        long,
        value_name = "X,Y",
        allow_hyphen_values = true,
        conflicts_with = "seed"
    )]
    pub from: Option<String>,
    /// Direction as a vector X,Y in the table's coordinates
    #[arg(
        long,
        value_name = "X,Y",
        allow_hyphen_values = true,
        required_unless_present_any = ["heading", "seed"],
        conflicts_with_all = ["heading", "seed"]
    )]
    pub aim: Option<String>,
    /// Direction as its angle from the x axis in units of pi, such as 1/5
    #[arg(
        long,
        value_name = "Q",
        allow_hyphen_values = true,
        conflicts_with = "seed"
    )]
    pub heading: Option<String>,
    /// A random start, which is told; the same as orbit 0 of `orbits` with this seed
    #[arg(long, value_name = "K")]
    pub seed: Option<u64>,
    /// Follow the orbit back in time; the word lists the sides in the order met on the way back
    #[arg(long)]
    pub backward: bool,
    /// Letters of the word; the starting side is the first [default: 100, or no limit with --distance]
    #[arg(long, value_name = "N", value_parser = parse_hits)]
    pub hits: Option<usize>,
    /// Stop before the path is longer than L, an exact number
    #[arg(long, value_name = "L", allow_hyphen_values = true)]
    pub distance: Option<String>,
    /// Text: the word; CSV, JSON and JSON Lines give each hit exactly and as decimals
    #[arg(long, value_enum, default_value_t)]
    pub format: TraceFormat,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// File for a picture of the orbit in the table: its name ends in .svg or .png
    #[arg(long, value_name = "PATH")]
    pub picture: Option<PathBuf>,
    /// File (.svg or .png) for a picture of the orbit as a straight line through at most 30 unfolded copies
    #[arg(long, value_name = "PATH")]
    pub unfolding: Option<PathBuf>,
    /// Width of PNG pictures in pixels
    #[arg(long, value_name = "PIXELS", default_value_t = 1200, value_parser = parse_pixels)]
    pub picture_width: u32,
    /// No notices
    #[arg(long)]
    pub quiet: bool,
}

/// Formats of `trace`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum TraceFormat {
    /// The word alone
    #[default]
    Text,
    /// One JSON object
    Json,
    /// JSON Lines: one object a hit
    Jsonl,
    /// Comma-separated values with a header
    Csv,
}

/// Formats of `orbits`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum OrbitsFormat {
    /// One word a line
    #[default]
    Text,
    /// JSON Lines: one object an orbit
    Json,
    /// Comma-separated values with a header
    Csv,
    /// Apache Parquet, in a file; only when the program was built with it
    Parquet,
}

/// `orbits`.
#[derive(Debug, Args)]
pub struct OrbitsOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Number of orbits [default: 1000, or all of --grid and --starts]
    #[arg(long, value_name = "M")]
    pub count: Option<u64>,
    /// Letters of each word; the starting side is the first
    #[arg(long, value_name = "N", default_value_t = 200, value_parser = parse_hits)]
    pub hits: usize,
    /// Seed of the random starts
    #[arg(long, value_name = "K", default_value_t = 0)]
    pub seed: u64,
    /// Law: one direction X,Y, uniform across the table [default law: the invariant measure]
    #[arg(long, value_name = "X,Y", allow_hyphen_values = true, group = "law")]
    pub aim: Option<String>,
    /// Law: one direction, by its angle from the x axis in units of pi
    #[arg(long, value_name = "Q", allow_hyphen_values = true, group = "law")]
    pub heading: Option<String>,
    /// Law: one point LETTER@FRACTION, directions as under the invariant measure
    #[arg(long, value_name = "START", group = "law")]
    pub start: Option<String>,
    /// Law: P points on each side and Q directions from each, evenly spaced in the invariant measure
    #[arg(long, value_name = "PxQ", value_parser = parse_grid, group = "law")]
    pub grid: Option<(u64, u64)>,
    /// Law: the starts of a CSV file with columns side, fraction, aim_x, aim_y, as --format csv writes them
    #[arg(long, value_name = "FILE", group = "law")]
    pub starts: Option<PathBuf>,
    /// File (CSV) for block frequencies and the mean chord beside their exact values, with z-scores
    #[arg(long, value_name = "PATH", conflicts_with = "law")]
    pub statistics: Option<PathBuf>,
    /// Longest blocks of --statistics
    #[arg(long, value_name = "B", default_value_t = 3, value_parser = parse_blocks)]
    pub blocks: usize,
    /// Text: one word a line; CSV, JSON Lines and Parquet add the exact start
    #[arg(long, value_enum, default_value_t)]
    pub format: OrbitsFormat,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
}

fn parse_pixels(text: &str) -> Result<u32, String> {
    match text.parse::<u32>() {
        Ok(width) if (1..=WIDEST).contains(&width) => Ok(width),
        _ => Err(format!("write a whole number from 1 to {WIDEST}")),
    }
}

fn parse_grid(text: &str) -> Result<(u64, u64), String> {
    let number = |part: &str| part.parse().ok().filter(|n| (1..=1u64 << 24).contains(n));
    text.split_once('x')
        .and_then(|(p, q)| Some((number(p)?, number(q)?)))
        .ok_or_else(|| "write two whole numbers from 1 to 16777216 as PxQ, such as 10x20".into())
}

fn parse_blocks(text: &str) -> Result<usize, String> {
    match text.parse::<usize>() {
        Ok(blocks @ 1..=12) => Ok(blocks),
        _ => Err("write a whole number from 1 to 12".into()),
    }
}
