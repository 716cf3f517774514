//! A language in one file that answers questions without being loaded.
//!
//! **What is kept.** L_N alone: the language is prolongable, so its shorter words are the prefixes of L_N. An automaton
//! of the words themselves would spell out the letters that follow of necessity, and these are nearly all: a
//! prefix of length n has more than one continuation only with probability s(n)/p(n), about 3/n for cubic growth.
//! So the file has two parts:
//!
//! - the *factor graph* of a small order M, as a table: from each word of length at most M and each letter to the last M letters of the
//!   longer word. It says which continuations M letters of memory leave open;
//! - an automaton (crate `fst`) of *keys*. The key of a word has its first M letters where they are not forced, and
//!   then each letter that is read where the graph leaves a choice. It maps the keys to the places 0 … p(N) − 1 of the words in order.
//!
//! Two words first differ where both letters are possible, hence at a letter of their keys, so keys have the order of their words and
//! none is the beginning of another. With M = 0 the keys are the words.
//!
//! **Cursors.** A prefix is a vertex of the graph, a state of the automaton, its length, and the range of places of the words that begin
//! with it. A letter is one table look-up, and a transition where there is a choice: membership, continuations, counts of words of length
//! N behind a prefix and the i-th word all take O(N) look-ups. Words of length n < N are counted by paths, see [`shorter`].
//!
//! **The file.** Mark and version; graph; automaton; a description in JSON ([`Description`]); a footer with the sizes and a CRC-32 of
//! everything before it. Opening reads the file once to check the sum, so damage is refused, never answered from. The sum guards against
//! accidents, not against forgery. The file is then read through a memory map; it must not be altered while it is open.

mod cursor;
mod file;
mod graph;
mod pattern;
mod search;
pub mod shorter;
mod special;
mod writer;

pub use cursor::Cursor;
pub use file::open;
pub use pattern::{Pattern, PatternFault};
pub use search::{Everything, Guide};
pub use shorter::WordsOfLength;
pub use special::{Side, Special};
pub use writer::{choose_order, store_language, store_table};

use super::tree::LanguageFault;
use super::walk::GrowthFault;
use crate::run::Stopped;
use crate::run::files::OutputFault;
use serde::{Deserialize, Serialize};
use std::io;
use std::path::PathBuf;
use thiserror::Error;

/// Where the words of a stored language come from.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Origin {
    /// Title of the table.
    pub title: String,
    /// The letters, by index; at most 255.
    pub letters: Vec<char>,
    /// The text of the table file and of the files it stands on; empty when the words come from elsewhere.
    pub table: String,
    /// The settings of parameters, each `name=value`.
    pub settings: Vec<String>,
}

/// What a file says about its language.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Description {
    /// The version of the program that wrote the file.
    pub program: String,
    /// Title of the table.
    pub title: String,
    /// The letters, by index.
    pub letters: Vec<char>,
    /// N: the language is complete up to this length.
    pub length: usize,
    /// M: the order of the factor graph that says where a letter is open.
    pub order: usize,
    /// p(0), …, p(N).
    pub complexity: Vec<u64>,
    /// The text of the table file and of the files it stands on.
    pub table: String,
    /// The settings of parameters, each `name=value`.
    pub settings: Vec<String>,
}

/// Why a language was not stored or not opened.
#[derive(Debug, Error)]
pub enum StoreFault {
    /// The system refused to read.
    #[error("cannot read {}: {source}", path.display())]
    System {
        /// The file.
        path: PathBuf,
        /// The reason.
        source: io::Error,
    },
    /// The file is something else.
    #[error("{} is no stored language; `words TABLE --length N --format stored --out FILE` makes one", path.display())]
    NotStored {
        /// The file.
        path: PathBuf,
    },
    /// Written in another layout.
    #[error("{} has layout {found} of stored languages, and this program reads layout {}; store it again", path.display(), file::VERSION)]
    Version {
        /// The file.
        path: PathBuf,
        /// The layout it has.
        found: u32,
    },
    /// Torn or altered.
    #[error("{} is damaged: {what}; store it again", path.display())]
    Damaged {
        /// The file.
        path: PathBuf,
        /// What is wrong.
        what: &'static str,
    },
    /// The file could not be written.
    #[error(transparent)]
    Output(#[from] OutputFault),
    /// Asked to stop, or the short words are no language.
    #[error(transparent)]
    Growth(#[from] GrowthFault),
    /// A word without continuation below the greatest length: shorter words would be lost.
    #[error(
        "a word of length {length} has no continuation, so the longest words do not hold the language"
    )]
    NotProlongable {
        /// Its length.
        length: usize,
    },
    /// The words are not those of a factorial language in order; for a billiard that would be a mistake in the walk.
    #[error("word {number} does not follow the words before it")]
    OutOfOrder {
        /// The number of the word.
        number: u64,
    },
}

impl From<Stopped> for StoreFault {
    fn from(stopped: Stopped) -> StoreFault {
        StoreFault::Growth(GrowthFault::Stopped(stopped))
    }
}

impl From<LanguageFault> for StoreFault {
    fn from(fault: LanguageFault) -> StoreFault {
        StoreFault::Growth(GrowthFault::Language(fault))
    }
}

/// Why a question has no answer.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum QueryFault {
    /// A character that is no letter.
    #[error("`{letter}` is no letter of this language; its letters are {}", letters.iter().collect::<String>())]
    NotALetter {
        /// The character.
        letter: char,
        /// The letters.
        letters: Vec<char>,
    },
    /// Longer than the stored words: nothing is known.
    #[error("length {length} is too long: the file holds the words up to length {longest}")]
    TooLong {
        /// The length asked for.
        length: usize,
        /// The longest that can be asked for.
        longest: usize,
    },
    /// The answer needs words that are longer than the stored ones.
    #[error(
        "length {length} is too long for this question, which needs longer words than it asks about: at most {longest}"
    )]
    NeedsLonger {
        /// The length asked for.
        length: usize,
        /// The longest that can be asked for.
        longest: usize,
    },
    /// Fewer words than the number asked for.
    #[error("there is no word {index}: the {count} words of length {length} are numbered from 0")]
    NoSuchWord {
        /// The number asked for, from 0.
        index: u64,
        /// How many words there are.
        count: u64,
        /// Their length.
        length: usize,
    },
    /// The words are no factorial language, or too many for a tree in memory.
    #[error(transparent)]
    Language(#[from] LanguageFault),
}

/// A stored language, open for questions. It can be shared between threads.
#[derive(Debug)]
pub struct StoredLanguage {
    file: file::Mapped,
    description: Description,
}

impl StoredLanguage {
    /// What the file says about its language.
    pub fn description(&self) -> &Description {
        &self.description
    }

    /// N: the length of the longest words.
    pub fn longest(&self) -> usize {
        self.description.length
    }

    /// The number of words of a length.
    ///
    /// # Errors
    /// For lengths above N.
    pub fn count(&self, length: usize) -> Result<u64, QueryFault> {
        self.check_length(length)?;
        Ok(self.description.complexity[length])
    }

    /// The size of the file, in bytes.
    pub fn bytes(&self) -> u64 {
        self.file.bytes()
    }

    /// The letter indices of a word.
    ///
    /// # Errors
    /// When a character is no letter.
    pub fn parse(&self, word: &str) -> Result<Vec<u8>, QueryFault> {
        let letters = &self.description.letters;
        word.chars()
            .map(|c| match letters.iter().position(|letter| *letter == c) {
                Some(index) => Ok(index as u8),
                None => Err(QueryFault::NotALetter {
                    letter: c,
                    letters: letters.clone(),
                }),
            })
            .collect()
    }

    /// A word in its letters.
    pub fn spell(&self, word: &[u8]) -> String {
        let letters = &self.description.letters;
        word.iter().map(|l| letters[*l as usize]).collect()
    }

    fn check_length(&self, length: usize) -> Result<(), QueryFault> {
        if length > self.longest() {
            return Err(QueryFault::TooLong {
                length,
                longest: self.longest(),
            });
        }
        Ok(())
    }
}
