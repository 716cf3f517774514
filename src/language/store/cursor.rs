//! Reading words letter by letter.

use super::graph::Graph;
use super::{QueryFault, StoredLanguage};
use fst::raw::{CompiledAddr, Fst};
use std::ops::Range;

/// A word that is in the language, as a place in the file.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Cursor {
    /// The vertex of the factor graph: the last letters.
    pub(super) state: u32,
    /// The state of the automaton.
    pub(super) address: CompiledAddr,
    pub(super) length: u32,
    /// The places of the words of length N that begin with the word.
    low: u64,
    high: u64,
}

impl Cursor {
    /// The length of the word.
    pub fn length(&self) -> usize {
        self.length as usize
    }

    /// The numbers, from 0, of the words of length N that begin with the word. It is never empty.
    pub fn places(&self) -> Range<u64> {
        self.low..self.high
    }

    /// True when a single word of length N begins with the word.
    #[inline]
    pub(super) fn is_single(&self) -> bool {
        self.high - self.low == 1
    }
}

/// The parts of an open file, to be read from.
pub(super) struct View<'a> {
    pub(super) graph: Graph<'a>,
    fst: Fst<&'a [u8]>,
    /// N.
    pub(super) length: u32,
    words: u64,
}

impl View<'_> {
    /// The empty word.
    pub(super) fn root(&self) -> Cursor {
        Cursor {
            state: 0,
            address: self.fst.root().addr(),
            length: 0,
            low: 0,
            high: self.words,
        }
    }

    /// The word with one more letter, when that is in the language.
    #[inline]
    pub(super) fn advance(&self, cursor: &Cursor, letter: u8) -> Option<Cursor> {
        if cursor.length == self.length {
            return None;
        }
        let arcs = self.graph.arcs(cursor.state);
        let open = arcs.len() > 1;
        let arc = self.graph.arc(arcs, letter)?;
        let mut next = Cursor {
            state: self.graph.target(arc),
            length: cursor.length + 1,
            ..*cursor
        };
        if open {
            let node = self.fst.node(cursor.address);
            let index = node.find_input(letter)?;
            let transition = node.transition(index);
            next.address = transition.addr;
            next.low = cursor.low + transition.out.value();
            if index + 1 < node.len() {
                next.high = cursor.low + node.transition(index + 1).out.value();
            }
        }
        Some(next)
    }

    /// Appends the words with one more letter, in order. Nothing is known, and nothing appended, at length N.
    pub(super) fn longer(&self, cursor: &Cursor, mut found: impl FnMut(u8, Cursor)) {
        if cursor.length == self.length {
            return;
        }
        let arcs = self.graph.arcs(cursor.state);
        let step = |arc: usize| Cursor {
            state: self.graph.target(arc),
            length: cursor.length + 1,
            ..*cursor
        };
        if arcs.len() == 1 {
            return found(self.graph.letter(arcs.start), step(arcs.start));
        }
        let node = self.fst.node(cursor.address);
        let mut transitions = node.transitions().peekable();
        while let Some(transition) = transitions.next() {
            let arc = self.graph.arc(arcs.clone(), transition.inp);
            let low = cursor.low + transition.out.value();
            let high = match transitions.peek() {
                Some(next) => cursor.low + next.out.value(),
                None => cursor.high,
            };
            // The writer follows the graph, so the arc is there.
            if let Some(arc) = arc {
                let next = Cursor {
                    address: transition.addr,
                    low,
                    high,
                    ..step(arc)
                };
                found(transition.inp, next);
            }
        }
    }
}

impl StoredLanguage {
    pub(super) fn view(&self) -> View<'_> {
        View {
            graph: self.file.graph(),
            fst: self.file.automaton(),
            length: self.longest() as u32,
            words: self.description.complexity[self.longest()],
        }
    }

    /// The empty word.
    pub fn root(&self) -> Cursor {
        self.view().root()
    }

    /// Finds a word: `None` when it is not in the language.
    ///
    /// Cost: a look-up a letter.
    ///
    /// # Errors
    /// When the word is longer than N: then nothing is known.
    pub fn find(&self, word: &[u8]) -> Result<Option<Cursor>, QueryFault> {
        self.check_length(word.len())?;
        let view = self.view();
        let mut cursor = view.root();
        for letter in word {
            match view.advance(&cursor, *letter) {
                Some(next) => cursor = next,
                None => return Ok(None),
            }
        }
        Ok(Some(cursor))
    }

    /// The longest prefix of a word that is in the language; prefixes longer than N are not looked for.
    ///
    /// Cost: a look-up a letter.
    pub fn longest_prefix(&self, word: &[u8]) -> Cursor {
        let view = self.view();
        let mut cursor = view.root();
        for letter in word {
            match view.advance(&cursor, *letter) {
                Some(next) => cursor = next,
                None => break,
            }
        }
        cursor
    }

    /// A word with one more letter: `None` when that is not in the language, or longer than N.
    pub fn advance(&self, cursor: &Cursor, letter: u8) -> Option<Cursor> {
        self.view().advance(cursor, letter)
    }

    /// The letters that can follow a word, in order.
    ///
    /// # Errors
    /// For words of length N: then nothing is known.
    pub fn continuations(&self, cursor: &Cursor) -> Result<Vec<u8>, QueryFault> {
        self.check_extendable(cursor.length())?;
        let mut letters = Vec::new();
        self.view().longer(cursor, |letter, _| letters.push(letter));
        Ok(letters)
    }

    pub(super) fn check_extendable(&self, length: usize) -> Result<(), QueryFault> {
        self.check_length(length)?;
        if length == self.longest() {
            return Err(QueryFault::NeedsLonger {
                length,
                longest: length.saturating_sub(1),
            });
        }
        Ok(())
    }
}
