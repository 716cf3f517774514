//! Special words: those with several extensions to the left, to the right, or both.
//!
//! A prefix of a left special word is left special, so these are found by reading a·w for every letter a beside w, and
//! going on only while two of them are in the language: O(letters) look-ups for each left special word of length at most n. A word
//! is right special only when several words of length N begin with it, so the search for these goes on only with such words.

use super::cursor::View;
use super::{Cursor, Guide, QueryFault, StoredLanguage};
use std::ops::ControlFlow;

/// Where a special word has several extensions.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Side {
    /// Several letters before it.
    Left,
    /// Several letters behind it.
    Right,
    /// Both: bispecial words.
    Both,
}

/// A special word with its extensions.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Special {
    /// The word.
    pub word: Vec<u8>,
    /// The letters that can stand before it.
    pub left: Vec<u8>,
    /// The letters that can follow it.
    pub right: Vec<u8>,
}

impl StoredLanguage {
    /// Shows the special words of a length, in order, until `see` breaks.
    ///
    /// Cost: as the module says; for right special words also a search for the left extensions of each, N look-ups a letter.
    ///
    /// # Errors
    /// For lengths above N − 1: extensions of words of length N are not known.
    pub fn special(
        &self,
        side: Side,
        length: usize,
        mut see: impl FnMut(Special) -> ControlFlow<()>,
    ) -> Result<(), QueryFault> {
        self.check_extendable(length)?;
        let view = self.view();
        let followers = |cursor: &Cursor| {
            let mut letters = Vec::new();
            view.longer(cursor, |letter, _| letters.push(letter));
            letters
        };
        if side == Side::Right {
            return self.visit_length(length, &Forking, |word, cursor, ()| {
                let right = followers(cursor);
                if right.len() < 2 {
                    return ControlFlow::Continue(());
                }
                let left = self.predecessors(word);
                see(Special {
                    word: word.to_vec(),
                    left,
                    right,
                })
            });
        }
        let guide = LeftSpecial { view: &view };
        self.visit_length(length, &guide, |word, cursor, before| {
            let right = followers(cursor);
            if side == Side::Both && right.len() < 2 {
                return ControlFlow::Continue(());
            }
            see(Special {
                word: word.to_vec(),
                left: before.iter().map(|(letter, _)| *letter).collect(),
                right,
            })
        })
    }

    /// The letters a with a·w in the language, for a word w shorter than N.
    fn predecessors(&self, word: &[u8]) -> Vec<u8> {
        let view = self.view();
        let mut letters = Vec::new();
        view.longer(&view.root(), |letter, cursor| {
            let read = word
                .iter()
                .try_fold(cursor, |cursor, next| view.advance(&cursor, *next));
            if read.is_some() {
                letters.push(letter);
            }
        });
        letters
    }
}

/// Goes on with words that several words of length N begin with.
struct Forking;

impl Guide for Forking {
    type State = ();
    fn begin(&self) {}
    fn enter(&self, (): &(), _: u8, longer: &Cursor) -> Option<()> {
        (!longer.is_single()).then_some(())
    }
}

/// Goes on with left special words.
struct LeftSpecial<'a, 'v> {
    view: &'a View<'v>,
}

impl Guide for LeftSpecial<'_, '_> {
    /// The letters that can stand before the word, and the longer words so made.
    type State = Vec<(u8, Cursor)>;

    fn begin(&self) -> Self::State {
        let mut before = Vec::new();
        let root = self.view.root();
        self.view
            .longer(&root, |letter, cursor| before.push((letter, cursor)));
        before
    }

    fn enter(&self, shorter: &Self::State, letter: u8, _: &Cursor) -> Option<Self::State> {
        let before: Vec<_> = shorter
            .iter()
            .filter_map(|(a, cursor)| Some((*a, self.view.advance(cursor, letter)?)))
            .collect();
        (before.len() > 1).then_some(before)
    }
}
