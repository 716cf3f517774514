//! Languages of shifts of finite type: all two-sided sequences without forbidden words.
//!
//! **Completeness.** Let m + 1 be the length of the longest forbidden word (m ≥ 1). A sequence is allowed exactly when all
//! its windows of length m + 1 are, so two-sided sequences are two-sided walks in the graph whose vertices are the
//! allowed words of length m and whose arcs are those of length m + 1. Vertices without an arc in or
//! out are removed until none is left; then every walk that remains can be continued on both sides, so the words of
//! the language are exactly the labels of its walks.
//!
//! Cost: O(alphabet) a word.

use super::ReferenceFault;
use crate::language::{Language, WordId};
use std::collections::BTreeMap;

/// The most words of length m.
pub const MOST_STATES: usize = 1 << 20;

/// An alphabet and forbidden words.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct FiniteType {
    alphabet: usize,
    forbidden: Vec<Vec<u8>>,
}

/// The graph of allowed words: for each vertex, in lexicographic order, its word and its arcs by letter.
struct Walks {
    words: Vec<Vec<u8>>,
    arcs: Vec<Vec<(u8, usize)>>,
}

impl FiniteType {
    /// A shift of finite type.
    ///
    /// # Panics
    /// If a forbidden word is empty or holds a letter that is not below `alphabet`.
    pub fn new(alphabet: usize, forbidden: Vec<Vec<u8>>) -> FiniteType {
        for word in &forbidden {
            assert!(!word.is_empty() && word.iter().all(|a| (*a as usize) < alphabet));
        }
        FiniteType {
            alphabet,
            forbidden,
        }
    }

    /// The number of letters.
    pub fn alphabet(&self) -> usize {
        self.alphabet
    }

    /// True when no forbidden word ends the word.
    fn may_end(&self, word: &[u8]) -> bool {
        !self.forbidden.iter().any(|f| word.ends_with(f))
    }

    fn walks(&self) -> Result<Walks, ReferenceFault> {
        let longest = self.forbidden.iter().map(Vec::len).max().unwrap_or(1);
        let m = (longest - 1).max(1);
        let mut words: Vec<Vec<u8>> = vec![Vec::new()];
        for length in 1..=m {
            words = words
                .iter()
                .flat_map(|w| (0..self.alphabet as u8).map(move |a| [&w[..], &[a]].concat()))
                .filter(|w| self.may_end(w))
                .take(MOST_STATES + 1)
                .collect();
            if words.len() > MOST_STATES {
                return Err(ReferenceFault::TooManyStates { length });
            }
        }
        let mut walks = Walks {
            arcs: vec![Vec::new(); words.len()],
            words,
        };
        let number: BTreeMap<&[u8], usize> =
            walks.words.iter().map(Vec::as_slice).zip(0..).collect();
        for (v, word) in walks.words.iter().enumerate() {
            for a in 0..self.alphabet as u8 {
                let longer = [&word[..], &[a]].concat();
                if self.may_end(&longer)
                    && let Some(target) = number.get(&longer[1..])
                {
                    walks.arcs[v].push((a, *target));
                }
            }
        }
        walks.prune();
        if walks.words.is_empty() {
            return Err(ReferenceFault::Empty);
        }
        Ok(walks)
    }

    /// All words up to a length.
    ///
    /// # Errors
    /// When there are more than `allowed`, or no sequence avoids the forbidden words.
    pub fn language(&self, longest: usize, allowed: u64) -> Result<Language, ReferenceFault> {
        let walks = self.walks()?;
        let m = walks.words[0].len();
        let mut levels: Vec<(Vec<u8>, Vec<WordId>)> = Vec::new();
        let mut total = 0u64;
        let mut count = |more: usize| {
            total += more as u64;
            if total > allowed {
                return Err(ReferenceFault::TooManyWords { longest, allowed });
            }
            Ok(())
        };
        // Prefixes of the vertices, which all go on to the right.
        let mut above: Vec<&[u8]> = vec![&[]];
        for n in 1..=m.min(longest) {
            let mut level: Vec<&[u8]> = walks.words.iter().map(|w| &w[..n]).collect();
            level.dedup();
            count(level.len())?;
            let parent = |w: &&[u8]| above.binary_search(&&w[..n - 1]).expect("a prefix") as WordId;
            levels.push((
                level.iter().map(|w| w[n - 1]).collect(),
                level.iter().map(parent).collect(),
            ));
            above = level;
        }
        let mut states: Vec<usize> = (0..walks.words.len()).collect();
        for _ in m..longest {
            let (mut letters, mut parents, mut next) = (Vec::new(), Vec::new(), Vec::new());
            for (parent, state) in states.iter().enumerate() {
                for (letter, target) in &walks.arcs[*state] {
                    letters.push(*letter);
                    parents.push(parent as WordId);
                    next.push(*target);
                }
            }
            count(letters.len())?;
            levels.push((letters, parents));
            states = next;
        }
        Ok(Language::from_levels(self.alphabet, levels)?)
    }
}

impl Walks {
    /// Removes vertices without an arc in or out until there is none.
    fn prune(&mut self) {
        loop {
            let mut entered = vec![false; self.words.len()];
            for (_, target) in self.arcs.iter().flatten() {
                entered[*target] = true;
            }
            let keep = |v: usize| entered[v] && !self.arcs[v].is_empty();
            let mut new_number = vec![usize::MAX; self.words.len()];
            let kept: Vec<usize> = (0..self.words.len()).filter(|v| keep(*v)).collect();
            if kept.len() == self.words.len() {
                return;
            }
            for (new, old) in kept.iter().enumerate() {
                new_number[*old] = new;
            }
            self.words = kept.iter().map(|v| self.words[*v].clone()).collect();
            let renumbered = |v: &usize| {
                let arcs = self.arcs[*v].iter();
                arcs.map(|(a, t)| (*a, new_number[*t]))
                    .filter(|(_, t)| *t != usize::MAX)
                    .collect()
            };
            self.arcs = kept.iter().map(renumbered).collect();
        }
    }
}
