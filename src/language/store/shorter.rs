//! Counts, places and random words of any stored length.
//!
//! The places of words of length N stand in the file. The words of length n < N that begin with a given one are counted by paths:
//! from a vertex of the factor graph, a state of the automaton and a length, the number of ways to go on to length n. Counts are
//! remembered where a word has several continuations. A word that only one word of length N begins with has one way to go on.
//!
//! **Cost.** The first questions about a length n < N count everything below the words that they touch: at most a look-up for each word of
//! length at most n, and about 40 bytes for each word that has several continuations, at most p(n). Later questions take O(n) look-ups. Questions about length N need
//! no counting.

use super::cursor::View;
use super::{Cursor, QueryFault, StoredLanguage};
use fst::raw::CompiledAddr;
use rand::{Rng, RngExt};
use std::collections::HashMap;

/// The words of one length, in order, numbered from 0.
#[derive(Debug)]
pub struct WordsOfLength<'a> {
    language: &'a StoredLanguage,
    length: usize,
    /// By automaton state, graph vertex and length: the number of words of the length that begin so.
    known: HashMap<(CompiledAddr, u32, u32), u64>,
}

impl StoredLanguage {
    /// The words of a length, to be counted and picked.
    ///
    /// # Errors
    /// For lengths above N.
    pub fn words_of_length(&self, length: usize) -> Result<WordsOfLength<'_>, QueryFault> {
        self.check_length(length)?;
        Ok(WordsOfLength {
            language: self,
            length,
            known: HashMap::new(),
        })
    }
}

impl WordsOfLength<'_> {
    /// The length.
    pub fn length(&self) -> usize {
        self.length
    }

    /// How many words of the length there are.
    pub fn total(&self) -> u64 {
        self.language.description().complexity[self.length]
    }

    /// How many words of the length begin with a word; none when that is longer.
    pub fn count(&mut self, prefix: &Cursor) -> u64 {
        if prefix.length() > self.length {
            return 0;
        }
        let view = self.language.view();
        ways(&view, self.length as u32, &mut self.known, *prefix)
    }

    /// The number of a word among those of its length: how many come before it. `None` when it is not one of them.
    pub fn place(&mut self, word: &[u8]) -> Option<u64> {
        if word.len() != self.length {
            return None;
        }
        let view = self.language.view();
        let mut cursor = view.root();
        let mut before = 0;
        for letter in word {
            let mut smaller = Vec::new();
            let mut next = None;
            view.longer(&cursor, |other, longer| {
                if other < *letter {
                    smaller.push(longer);
                } else if other == *letter {
                    next = Some(longer);
                }
            });
            cursor = next?;
            for sibling in smaller {
                before += ways(&view, self.length as u32, &mut self.known, sibling);
            }
        }
        Some(before)
    }

    /// The word with a number.
    ///
    /// # Errors
    /// When there are not so many.
    pub fn nth(&mut self, index: u64) -> Result<Vec<u8>, QueryFault> {
        if index >= self.total() {
            return Err(QueryFault::NoSuchWord {
                index,
                count: self.total(),
                length: self.length,
            });
        }
        let view = self.language.view();
        let mut cursor = view.root();
        let mut word = Vec::with_capacity(self.length);
        let mut before = index;
        let mut longer = Vec::new();
        while word.len() < self.length {
            longer.clear();
            view.longer(&cursor, |letter, next| longer.push((letter, next)));
            let last = longer.len() - 1;
            for (i, (letter, next)) in longer.iter().enumerate() {
                // The last continuation has the rest.
                let here = match i == last {
                    true => u64::MAX,
                    false => ways(&view, self.length as u32, &mut self.known, *next),
                };
                if before < here {
                    word.push(*letter);
                    cursor = *next;
                    break;
                }
                before -= here;
            }
        }
        Ok(word)
    }

    /// A word drawn uniformly.
    ///
    /// # Panics
    /// If there is none; a language always has the empty word and, when it is prolongable, longer ones.
    pub fn random(&mut self, random: &mut impl Rng) -> Vec<u8> {
        let index = random.random_range(0..self.total());
        self.nth(index).expect("the number is below the total")
    }
}

/// How many words of a length begin with a word that is not longer.
fn ways(
    view: &View<'_>,
    length: u32,
    known: &mut HashMap<(CompiledAddr, u32, u32), u64>,
    cursor: Cursor,
) -> u64 {
    if length == view.length {
        let places = cursor.places();
        return places.end - places.start;
    }
    let mut at = cursor;
    let mut longer = Vec::new();
    loop {
        if at.length == length || at.is_single() {
            return 1;
        }
        longer.clear();
        view.longer(&at, |_, next| longer.push(next));
        match longer[..] {
            [only] => at = only,
            _ => break,
        }
    }
    let key = (at.address, at.state, at.length);
    if let Some(count) = known.get(&key) {
        return *count;
    }
    let count = longer
        .into_iter()
        .map(|next| ways(view, length, known, next))
        .sum();
    known.insert(key, count);
    count
}
