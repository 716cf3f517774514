//! Visiting the words of a stored language in order, depth first, leaving out what is not looked for.

use super::{Cursor, QueryFault, StoredLanguage};
use crate::language::tree::LanguageFault;
use crate::language::{Language, WordId};
use std::ops::ControlFlow;

/// Says which words to go on with.
pub trait Guide {
    /// What the guide remembers of a word.
    type State;
    /// Of the empty word.
    fn begin(&self) -> Self::State;
    /// Of a word with one more letter, given the state of the shorter word; `None` when neither the longer word nor any
    /// that begins with it is looked for.
    fn enter(&self, shorter: &Self::State, letter: u8, longer: &Cursor) -> Option<Self::State>;
}

/// Leaves out nothing.
#[derive(Clone, Copy, Debug)]
pub struct Everything;

impl Guide for Everything {
    type State = ();
    fn begin(&self) {}
    fn enter(&self, (): &(), _: u8, _: &Cursor) -> Option<()> {
        Some(())
    }
}

impl StoredLanguage {
    /// Shows the words of length 0 … `length` that a guide goes on with, each before the words that begin with it,
    /// in the order of the letters, until `see` breaks.
    ///
    /// Cost: a look-up for each word shown; memory O(length · letters).
    ///
    /// # Errors
    /// For lengths above N.
    pub fn visit<G: Guide>(
        &self,
        length: usize,
        guide: &G,
        mut see: impl FnMut(&[u8], &Cursor, &G::State) -> ControlFlow<()>,
    ) -> Result<(), QueryFault> {
        self.check_length(length)?;
        let view = self.view();
        let mut word: Vec<u8> = Vec::with_capacity(length);
        let mut stack = vec![(0, view.root(), guide.begin())];
        while let Some((letter, cursor, state)) = stack.pop() {
            if cursor.length > 0 {
                word.truncate(cursor.length() - 1);
                word.push(letter);
            }
            if see(&word, &cursor, &state).is_break() {
                break;
            }
            if cursor.length() < length {
                let siblings = stack.len();
                view.longer(&cursor, |letter, longer| {
                    if let Some(entered) = guide.enter(&state, letter, &longer) {
                        stack.push((letter, longer, entered));
                    }
                });
                stack[siblings..].reverse();
            }
        }
        Ok(())
    }

    /// The same for the words of length `length` alone.
    ///
    /// # Errors
    /// For lengths above N.
    pub fn visit_length<G: Guide>(
        &self,
        length: usize,
        guide: &G,
        mut see: impl FnMut(&[u8], &Cursor, &G::State) -> ControlFlow<()>,
    ) -> Result<(), QueryFault> {
        self.visit(length, guide, |word, cursor, state| {
            if word.len() < length {
                return ControlFlow::Continue(());
            }
            see(word, cursor, state)
        })
    }

    /// The words up to a length as a tree in memory.
    ///
    /// Cost: Σ p(n) look-ups; memory [`BYTES_PER_WORD`](crate::language::tree::BYTES_PER_WORD) a word.
    ///
    /// # Errors
    /// For lengths above N, and more words than a tree can number.
    pub fn to_language(&self, length: usize) -> Result<Language, QueryFault> {
        self.check_length(length)?;
        let mut levels: Vec<(Vec<u8>, Vec<WordId>)> = vec![Default::default(); length];
        let mut seen = vec![0u64; length + 1];
        if let Some(length) =
            (0..=length).find(|n| self.description().complexity[*n] >= u64::from(WordId::MAX))
        {
            return Err(LanguageFault::TooManyWords { length }.into());
        }
        self.visit(length, &Everything, |word, _, ()| {
            let n = word.len();
            if let Some(letter) = word.last() {
                levels[n - 1].0.push(*letter);
                levels[n - 1].1.push((seen[n - 1] - 1) as WordId);
            }
            seen[n] += 1;
            ControlFlow::Continue(())
        })?;
        let alphabet = self.description().letters.len();
        Ok(Language::from_levels(alphabet, levels)?)
    }
}
