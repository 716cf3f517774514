//! Options of the commands about single words and certificates.

use super::arguments::{Common, Exactness, Format, Settings, parse_positive_length};
use clap::Args;
use std::path::PathBuf;

/// `locate`.
#[derive(Debug, Args)]
pub struct LocateOptions {
    /// The table file
    pub table: PathBuf,
    /// The words
    #[arg(value_name = "WORD", required_unless_present = "words")]
    pub word: Vec<String>,
    /// Read words from a file, one a line, or from standard input (-)
    #[arg(long, value_name = "FILE", conflicts_with = "word")]
    pub words: Option<PathBuf>,
    /// Everything about each word that is read from a file, not only membership and measure
    #[arg(long)]
    pub full: bool,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Text; CSV, one row a word; or JSON: one object for a single word, else one a line
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// File for the output [default: standard output]
    #[arg(long, value_name = "PATH")]
    pub out: Option<PathBuf>,
    /// Draw the word's corridor with its beam, or what closes it (one word only)
    #[arg(long, value_name = "FILE.svg")]
    pub picture: Option<PathBuf>,
    /// Write the answers as a certificate that `verify` checks
    #[arg(long, value_name = "FILE")]
    pub certificate: Option<PathBuf>,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// `certify`.
#[derive(Debug, Args)]
pub struct CertifyOptions {
    /// The table file
    pub table: PathBuf,
    /// The certificate file
    pub file: PathBuf,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Length of the words
    #[arg(long, value_name = "N", default_value_t = 10, value_parser = parse_positive_length)]
    pub length: usize,
    /// Common options.
    #[command(flatten)]
    pub common: Common,
    /// Arithmetic.
    #[command(flatten)]
    pub exactness: Exactness,
}

/// `verify`.
#[derive(Debug, Args)]
pub struct VerifyOptions {
    /// The certificate file
    pub file: PathBuf,
    /// Check also that the certificate is about this table
    #[arg(long, value_name = "TABLE")]
    pub table: Option<PathBuf>,
    /// Parameters.
    #[command(flatten)]
    pub settings: Settings,
    /// Output format
    #[arg(long, value_enum, default_value_t)]
    pub format: Format,
    /// No notices
    #[arg(long)]
    pub quiet: bool,
}
