//! Options of the commands about single directions and periodic orbits.

use super::arguments::{Common, Exactness, Format, parse_positive_length};
use clap::Args;
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
