//! Options of the commands about single directions and periodic orbits.

use super::arguments::{Common, Exactness, Format, parse_positive_length};
use clap::{Args, ValueEnum};
use std::path::PathBuf;

/// `periodic`.
#[derive(Debug, Args)]
pub struct PeriodicOptions {
    /// The table file
    pub table: PathBuf,
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
