//! Options of the commands that analyse languages.

use super::arguments::{
    Common, Exactness, Format, Settings, parse_bytes, parse_length, parse_positive_length,
};
use crate::study::results::LONGEST;
use clap::{Args, ValueEnum};
use std::path::PathBuf;

/// `compare`.
#[derive(Debug, Args)]
pub struct CompareOptions {
    /// Table files, or folders whose table files (*.toml) are all compared
    #[arg(required = true, value_name = "TABLE")]
    pub tables: Vec<PathBuf>,
    /// Longest words
    #[arg(long, value_name = "N", default_value_t = 12, value_parser = parse_positive_length)]
    pub length: usize,
    /// Letters of the first of two tables with the letters of the second that they become, such as a=x,b=y;
    /// other letters stay as they are [default: any renaming]
    #[arg(long, value_name = "A=X,B=Y", conflicts_with = "as_written")]
    pub rename: Option<String>,
    /// Compare letters as they are written
    #[arg(long)]
    pub as_written: bool,
    /// How many words of one table and not the other are listed, heaviest first
    #[arg(long, value_name = "M", default_value_t = 10)]
    pub most: usize,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Refuse to start when one table would need more memory: bytes, or with K, M, G [default: 90% of what is free]
    #[arg(long, value_name = "BYTES", value_parser = parse_bytes)]
    pub budget_memory: Option<u64>,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// `measures`.
#[derive(Debug, Args)]
pub struct MeasuresOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Longest words
    #[arg(long, value_name = "N", value_parser = parse_positive_length)]
    pub length: usize,
    /// How many of the heaviest and of the lightest words text and JSON name
    #[arg(long, value_name = "M", default_value_t = 5)]
    pub most: usize,
    /// Longest blocks whose frequencies are compared with their measures
    #[arg(long, value_name = "M", default_value_t = 4, value_parser = parse_length)]
    pub blocks: usize,
    /// Which rows CSV shows; text tells lengths and blocks, JSON has everything
    #[arg(long, value_enum, default_value_t)]
    pub rows: MeasureRows,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Folder for two pictures (SVG): the distribution, and the distances of the blocks
    #[arg(long, value_name = "DIR")]
    pub pictures: Option<PathBuf>,
    /// Refuse to start when more memory would be needed: bytes, or with K, M, G [default: 90% of what is free]
    #[arg(long, value_name = "BYTES", value_parser = parse_bytes)]
    pub budget_memory: Option<u64>,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// Rows of `measures`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum MeasureRows {
    /// The words of length N with bounds of measure and probability
    #[default]
    Words,
    /// Entropy and distance from the uniform law, by length
    Lengths,
    /// Distance of block frequencies from block measures, by length of block and word
    Blocks,
}

/// Special words of length n need words of length n + 2.
fn parse_special_length(text: &str) -> Result<usize, String> {
    match parse_positive_length(text)? {
        length if length + 2 <= LONGEST => Ok(length),
        _ => Err(format!("write a whole number from 1 to {}", LONGEST - 2)),
    }
}

/// `special`.
#[derive(Debug, Args)]
pub struct SpecialOptions {
    /// The table file
    pub table: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Longest special words
    #[arg(long, value_name = "N", default_value_t = 8, value_parser = parse_special_length)]
    pub length: usize,
    /// Which rows text and CSV show; JSON has everything
    #[arg(long, value_enum, default_value_t)]
    pub rows: SpecialRows,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// File for a picture (SVG) of the tree of right special words, or of left special ones with --rows left
    #[arg(long, value_name = "PATH")]
    pub picture: Option<PathBuf>,
    /// Refuse to start when more memory would be needed: bytes, or with K, M, G [default: 90% of what is free]
    #[arg(long, value_name = "BYTES", value_parser = parse_bytes)]
    pub budget_memory: Option<u64>,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// Rows of `special`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum)]
pub enum SpecialRows {
    /// How many there are, by length
    #[default]
    Growth,
    /// The tree of right special words
    Right,
    /// The tree of left special words
    Left,
    /// Bispecial words with the generalized diagonals that make them
    Bispecial,
}
