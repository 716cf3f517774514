//! The table file.
//!
//! TOML in UTF-8, at most [`LARGEST_FILE`] bytes. Keys:
//!
//! | key        | value |
//! |------------|-------|
//! | `title`    | text; optional, the file's name without it |
//! | `corners`  | array of pairs of numbers, at most 255 |
//! | `triangle` | three positive rational numbers: angles in proportion to them |
//! | `regular`  | an integer from 3 to 255: a regular polygon on the unit circle |
//! | `outline`  | array of pairs, one for each side: its length, and its heading in units of π, rational |
//! | `base`     | the path, relative to this file, of a table file of which this is an affine image |
//! | `mirror`   | with `base`: true to change the sign of second coordinates |
//! | `stretch`  | with `base`: two positive numbers, by which coordinates are multiplied after mirroring |
//! | `turn`     | with `base`: a rational angle in units of π, by which the rest is turned about the origin |
//! | `form`     | with `corners`: the g of the plane form x² + g·y²; second coordinates are in units of √g |
//! | `sides`    | optional letters, one character for each side; side i joins corner i to the next; letters may repeat |
//! | `holes`    | array of tables, each with `corners` and optional `sides` |
//! | `define`   | table of names and their expressions |
//! | `parameters` | the same; a setting `name=expression` overrides the file's |
//! | `about`    | free text, ignored |
//!
//! Exactly one of `corners`, `triangle`, `regular`, `outline` and `base` is there. An outline starts at the origin and must
//! lead back there exactly. A base keeps its letters and its holes, unless the file names other `sides` for the
//! outline; its parameters have the values that its own file gives them, unless a setting reaches them: a setting `name=expression`
//! is for the first file on the way to the last base that gives the name a meaning. A number is a string that holds an exact
//! [expression](super::expression), or a plain integer. Floating-point numbers are refused, because what
//! is written is not what would be read.
//!
//! Names can be used in all expressions of the file, those of other names included, in any order. A name may
//! stand for a rational multiple of `pi`. Functions, `pi` and `x` cannot be names.
//!
//! Corners run either way round. Holes lie inside the table and touch neither its outline nor each other. Their
//! coordinates are those of the outline, for `triangle` and `regular` too (`reboundary table` shows them). Where
//! the program counts through, it counts the corners of the outline counterclockwise, then those of each hole
//! clockwise; the first corner of each ring stays the first. Sides without a letter get the first letters of the
//! alphabet that the file does not name.
//!
//! **Bounds.** What a file may cost is bounded for any input:
//!
//! | what | at most |
//! |------|---------|
//! | bytes of a file | 1 MiB ([`LARGEST_FILE`]) |
//! | files that stand on each other | 16 |
//! | names in `define` and `parameters` | 64 ([`MOST_NAMES`]) |
//! | corners, those of holes included | 255 ([`MOST_SIDES`](super::MOST_SIDES)) |
//! | bytes of an expression | 4096 ([`LONGEST_EXPRESSION`](super::expression::LONGEST_EXPRESSION)) |
//! | nesting of an expression | 64 ([`DEEPEST_NESTING`](super::expression::DEEPEST_NESTING)) |
//! | digits of a number | 1000 ([`MOST_DIGITS`](super::expression::MOST_DIGITS)) |
//! | exponents | 1000 up or down ([`LARGEST_EXPONENT`](super::expression::LARGEST_EXPONENT)) |
//! | bits of an exact number | 65536 ([`MOST_BITS`](super::expression::MOST_BITS)) |
//! | degree of the field | 64 ([`LARGEST_DEGREE`](crate::number::field::LARGEST_DEGREE)) |
//! | work, its bases included | [`MOST_WORK`] units |
//!
//! The last one bounds the time: see [`effort`]. It covers reading the numbers, growing and factoring for their field, and
//! checking the corners. [`rehearse`] bounds what every command does first in the same way: cutting into triangles,
//! the smaller field of walks, the facts. On an ordinary machine each is over in a minute; being a count and no clock, it
//! refuses the same files everywhere. A refusal points at the part that was too much.
//!
//! Every fault is a [`Diagnostic`] that points at its place. Corners and sides are counted from 0.

mod affine;
mod faults;
mod names;
mod outline;
mod read;
mod rings;
mod source;

use super::Table;
use super::diagnostic::Diagnostic;
use super::expression::MOST_WORK;
use crate::number::effort::{self, Exhausted};
pub use names::{MOST_NAMES, Parameter};
use read::{Chain, Link};
use std::io::Read;
use std::path::Path;
use thiserror::Error;

/// The most bytes of a table file: 1 MiB.
pub const LARGEST_FILE: usize = 1 << 20;

/// A table with what its file says beside it.
#[derive(Clone, Debug)]
pub struct LoadedTable {
    /// The checked table.
    pub table: Table,
    /// Sentences that the user should see: what was understood in a way that may surprise.
    pub notices: Vec<String>,
    /// The text of the file, without a byte order mark.
    pub text: String,
    /// The name of the file without folder and extension.
    pub stem: String,
    /// The name of the file as given.
    pub file_name: String,
    /// Its parameters, as set, and after them those of the files that it stands on which a setting can reach.
    pub parameters: Vec<Parameter>,
    /// The files that it stands on, the nearest first.
    pub bases: Vec<BaseFile>,
}

/// A table file that another one names as its base.
#[derive(Clone, Debug, PartialEq, Eq, serde::Serialize)]
pub struct BaseFile {
    /// Its path, from the place where the first file was named.
    pub name: String,
    /// Its text.
    pub text: String,
}

/// Why a file gave no table.
#[derive(Debug, Error)]
pub enum TableFileError {
    /// The file cannot be read.
    #[error("{file}: cannot read this file: {reason}")]
    Unreadable {
        /// The name as given.
        file: String,
        /// What the operating system says.
        reason: std::io::Error,
    },
    /// The file is too large.
    #[error(
        "{file}: this file is larger than {LARGEST_FILE} bytes, the most that a table file can have"
    )]
    TooLarge {
        /// The name as given.
        file: String,
    },
    /// The file is no text.
    #[error(
        "{file}: this is not a text file in UTF-8: byte {offset} fits no character; write the table in a plain text editor"
    )]
    NotText {
        /// The name as given.
        file: String,
        /// The first byte at fault, from 0.
        offset: usize,
    },
    /// Reading the file takes too much work.
    #[error(
        "{file}: reading this file takes more work than one table file may cause; use shorter numbers, roots of lower degree, or fewer corners"
    )]
    TooMuchWork {
        /// The name as given.
        file: String,
    },
    /// The text is no table.
    #[error("{0}")]
    Fault(Box<Diagnostic>),
}

/// Reads a table from a file.
///
/// # Errors
/// As [`TableFileError`] says.
pub fn load(path: &Path) -> Result<LoadedTable, TableFileError> {
    load_with(path, &[])
}

/// Reads a table from a file, with settings `name=expression` for its parameters.
///
/// # Errors
/// As [`TableFileError`] says; a fault in a setting points into its text.
pub fn load_with(path: &Path, settings: &[String]) -> Result<LoadedTable, TableFileError> {
    bounded(&path.display().to_string(), || {
        load_in(path, settings, &Vec::new())
    })
}

/// Reads within the budget of one file. A part that is too much says so itself, at its place; what is left over for here
/// is the little in between.
fn bounded(
    file: &str,
    read: impl FnOnce() -> Result<LoadedTable, TableFileError>,
) -> Result<LoadedTable, TableFileError> {
    effort::within(MOST_WORK, read)
        .unwrap_or_else(|Exhausted| Err(TableFileError::TooMuchWork { file: file.into() }))
}

/// Does what every command does with a table before its own work, within another budget of [`MOST_WORK`], and forgets
/// the results: after it a table is known to be ready for use in bounded time.
///
/// # Errors
/// A diagnostic when that is too much.
pub fn rehearse(loaded: &LoadedTable) -> Result<(), TableFileError> {
    read::rehearse(&loaded.file_name, &loaded.text, &loaded.table).map_err(TableFileError::Fault)
}

/// The text of a file, checked for size and encoding.
fn read_text(path: &Path) -> Result<String, TableFileError> {
    let file = path.display().to_string();
    let unreadable = |reason| TableFileError::Unreadable {
        file: file.clone(),
        reason,
    };
    let handle = std::fs::File::open(path).map_err(unreadable)?;
    let mut bytes = Vec::new();
    handle
        .take(LARGEST_FILE as u64 + 1)
        .read_to_end(&mut bytes)
        .map_err(unreadable)?;
    if bytes.len() > LARGEST_FILE {
        return Err(TableFileError::TooLarge { file });
    }
    String::from_utf8(bytes).map_err(|e| TableFileError::NotText {
        file: file.clone(),
        offset: e.utf8_error().valid_up_to(),
    })
}

/// The files that a table file stands on, the nearest first, as far as its chain of `base` can be followed. No number
/// is read, so this says nothing about whether they give a table.
pub fn bases(file_name: &str, text: &str) -> Vec<BaseFile> {
    affine::named_bases(file_name, text)
}

/// Reads a table that other files, which are being read, stand on.
fn load_in(path: &Path, settings: &[String], chain: &Chain) -> Result<LoadedTable, TableFileError> {
    let file = path.display().to_string();
    let text = read_text(path)?;
    parse_in(&file, &text, settings, chain)
}

/// Reads a table from a text; `file_name` is used in messages and for the stem.
///
/// # Errors
/// As [`TableFileError`] says, except for reading.
pub fn parse(file_name: &str, text: &str) -> Result<LoadedTable, TableFileError> {
    parse_with(file_name, text, &[])
}

/// Reads a table from a text, with settings `name=expression` for its parameters.
///
/// # Errors
/// As [`TableFileError`] says, except for reading.
pub fn parse_with(
    file_name: &str,
    text: &str,
    settings: &[String],
) -> Result<LoadedTable, TableFileError> {
    bounded(file_name, || {
        parse_in(file_name, text, settings, &Vec::new())
    })
}

fn parse_in(
    file_name: &str,
    text: &str,
    settings: &[String],
    chain: &Chain,
) -> Result<LoadedTable, TableFileError> {
    if text.len() > LARGEST_FILE {
        return Err(TableFileError::TooLarge {
            file: file_name.into(),
        });
    }
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    if let Some(offset) = text.find('\0') {
        return Err(TableFileError::NotText {
            file: file_name.into(),
            offset,
        });
    }
    let stem = Path::new(file_name).file_stem().map_or_else(
        || file_name.to_string(),
        |s| s.to_string_lossy().into_owned(),
    );
    let mut chain = chain.clone();
    let place = Path::new(file_name).canonicalize();
    chain.push(Link {
        place: place.unwrap_or_default(),
        name: file_name.to_string(),
        parameters: Vec::new(),
    });
    let read::Reading {
        table,
        parameters,
        bases,
    } = read::table(file_name, text, &stem, settings, &chain).map_err(TableFileError::Fault)?;
    let mut notices = Vec::new();
    if table.turned_round() {
        notices.push(format!(
            "{file_name}: the corners run clockwise; the table was turned round: corner 0 stays, the \
             others are counted in the opposite order, and every letter stays on its side"
        ));
    }
    Ok(LoadedTable {
        table,
        notices,
        text: text.to_string(),
        stem,
        parameters,
        bases,
        file_name: file_name.to_string(),
    })
}
