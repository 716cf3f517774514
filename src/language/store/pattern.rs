//! Patterns of words.
//!
//! A letter stands for itself, `.` for any one letter, `*` for any run of letters, the empty one included; `\` makes the next character a
//! letter. A pattern fits a whole word.
//!
//! A word is read with the set of places of the pattern that fit so far. Places that need more letters than the word
//! will have, or another number of letters when no run follows, are dropped; with none left nothing longer is looked for.

use super::{Cursor, Guide, QueryFault, StoredLanguage};
use std::ops::ControlFlow;
use thiserror::Error;

#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Item {
    Letter(u8),
    Any,
    Run,
}

/// A pattern over the letters of one language.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pattern {
    items: Vec<Item>,
}

/// Why a text is no pattern.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum PatternFault {
    /// A character that is no letter.
    #[error(transparent)]
    Letter(#[from] QueryFault),
    /// Nothing behind the last `\`.
    #[error("a pattern cannot end with a single `\\`: write the letter that it stands before")]
    OpenEnd,
}

impl StoredLanguage {
    /// Reads a pattern: letters, `.` for any letter, `*` for any run of letters, `\` before a letter that is one of the three.
    ///
    /// # Errors
    /// When a character is no letter, or nothing follows the last `\`.
    pub fn pattern(&self, text: &str) -> Result<Pattern, PatternFault> {
        let mut items = Vec::new();
        let mut characters = text.chars();
        while let Some(character) = characters.next() {
            let letter = match character {
                '.' => {
                    items.push(Item::Any);
                    continue;
                }
                '*' => {
                    // Two runs are one.
                    if items.last() != Some(&Item::Run) {
                        items.push(Item::Run);
                    }
                    continue;
                }
                '\\' => characters.next().ok_or(PatternFault::OpenEnd)?,
                letter => letter,
            };
            let index = self.parse(letter.encode_utf8(&mut [0; 4]))?[0];
            items.push(Item::Letter(index));
        }
        Ok(Pattern { items })
    }

    /// Shows the words of a length that fit a pattern, in order, until `see` breaks.
    ///
    /// Cost: a look-up, and a step of each place of the pattern, for each prefix that may still fit.
    ///
    /// # Errors
    /// For lengths above N.
    pub fn matches(
        &self,
        pattern: &Pattern,
        length: usize,
        mut see: impl FnMut(&[u8]) -> ControlFlow<()>,
    ) -> Result<(), QueryFault> {
        self.visit_length(
            length,
            &Fitting::new(pattern, length),
            |word, _, places| match places.contains(&pattern.items.len()) {
                true => see(word),
                false => ControlFlow::Continue(()),
            },
        )
    }
}

/// Goes on with the words that may still fit.
struct Fitting<'a> {
    pattern: &'a Pattern,
    length: usize,
    /// For each place: the letters that the rest of the pattern needs, and whether it can take more.
    rest: Vec<(usize, bool)>,
}

impl<'a> Fitting<'a> {
    fn new(pattern: &'a Pattern, length: usize) -> Fitting<'a> {
        let mut rest = vec![(0, false)];
        for item in pattern.items.iter().rev() {
            let (needed, elastic) = rest[rest.len() - 1];
            rest.push(match item {
                Item::Run => (needed, true),
                _ => (needed + 1, elastic),
            });
        }
        rest.reverse();
        Fitting {
            pattern,
            length,
            rest,
        }
    }

    /// Adds a place and those that it leads to without a letter.
    fn add(&self, places: &mut Vec<usize>, mut place: usize, left: usize) {
        loop {
            let (needed, elastic) = self.rest[place];
            let possible = needed == left || (elastic && needed < left);
            if !possible || places.contains(&place) {
                return;
            }
            places.push(place);
            if self.pattern.items.get(place) != Some(&Item::Run) {
                return;
            }
            place += 1;
        }
    }
}

impl Guide for Fitting<'_> {
    /// Places of the pattern that the word may have reached.
    type State = Vec<usize>;

    fn begin(&self) -> Vec<usize> {
        let mut places = Vec::new();
        self.add(&mut places, 0, self.length);
        places
    }

    fn enter(&self, shorter: &Vec<usize>, letter: u8, longer: &Cursor) -> Option<Vec<usize>> {
        let mut places = Vec::new();
        let left = self.length - longer.length();
        for place in shorter {
            let next = match self.pattern.items.get(*place) {
                Some(Item::Letter(wanted)) if *wanted == letter => place + 1,
                Some(Item::Any) => place + 1,
                Some(Item::Run) => *place,
                _ => continue,
            };
            self.add(&mut places, next, left);
        }
        (!places.is_empty()).then_some(places)
    }
}
