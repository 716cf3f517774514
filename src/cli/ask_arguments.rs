//! Options of `ask`.

use super::arguments::{Format, parse_length};
use crate::language::store::Side;
use clap::{ArgGroup, Args, ValueEnum};
use std::path::PathBuf;

/// `ask`.
#[derive(Debug, Args)]
#[command(group = ArgGroup::new("about_words").args(["contains", "after", "count", "place"]))]
#[command(group = ArgGroup::new("about_length").args(["nth", "random", "pattern", "special", "list"]))]
#[command(group = ArgGroup::new("question").args(
    ["contains", "after", "count", "place", "nth", "random", "pattern", "special", "list"]
))]
pub struct AskOptions {
    /// The stored language: a file that `words --format stored` wrote
    pub file: PathBuf,
    /// The words that --contains, --after, --count or --place asks about; "" is the empty word
    #[arg(
        value_name = "WORD",
        requires = "about_words",
        conflicts_with = "about_length"
    )]
    pub word: Vec<String>,
    /// Read words from a file, one a line, or from standard input (-)
    #[arg(
        long,
        value_name = "FILE",
        requires = "about_words",
        conflicts_with_all = ["about_length", "word"]
    )]
    pub words: Option<PathBuf>,
    /// Is each word in the language? Where not, which prefix is?
    #[arg(long)]
    pub contains: bool,
    /// The letters that can follow each word
    #[arg(long)]
    pub after: bool,
    /// How many words of the length begin with each word
    #[arg(long)]
    pub count: bool,
    /// The number of each word among the words of its length, from 0
    #[arg(long)]
    pub place: bool,
    /// The word of the length with this number, from 0; may be repeated
    #[arg(long, value_name = "I", value_parser = parse_index)]
    pub nth: Vec<u64>,
    /// So many words of the length, each drawn uniformly
    #[arg(long, value_name = "K", value_parser = parse_index)]
    pub random: Option<u64>,
    /// Seed of the random words [default: 0]
    #[arg(long, value_name = "S", requires = "random", value_parser = parse_index)]
    pub seed: Option<u64>,
    /// The words of the length that fit: `.` is any letter, `*` any run of letters, `\` makes the next one a letter
    #[arg(long = "match", id = "pattern", value_name = "PATTERN")]
    pub pattern: Option<String>,
    /// The words of the length with several extensions on this side, and the extensions
    #[arg(long, value_enum, value_name = "SIDE")]
    pub special: Option<SpecialSide>,
    /// All words of the length, in the order of the letters
    #[arg(long)]
    pub list: bool,
    /// Length of the words [default: the greatest; one less for --special]
    #[arg(
        long,
        value_name = "N",
        value_parser = parse_length,
        conflicts_with_all = ["contains", "after", "place"],
        requires = "question"
    )]
    pub length: Option<usize>,
    /// Text, CSV with a header, or one JSON object a line
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// No notices
    #[arg(long)]
    pub quiet: bool,
}

/// Which special words.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum SpecialSide {
    /// Several letters can stand before it
    Left,
    /// Several letters can follow it
    Right,
    /// Bispecial: both
    Both,
}

impl From<SpecialSide> for Side {
    fn from(side: SpecialSide) -> Side {
        match side {
            SpecialSide::Left => Side::Left,
            SpecialSide::Right => Side::Right,
            SpecialSide::Both => Side::Both,
        }
    }
}

fn parse_index(text: &str) -> Result<u64, String> {
    text.parse()
        .map_err(|_| format!("write a whole number from 0 to {}", u64::MAX))
}
