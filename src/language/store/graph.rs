//! The factor graph of a stored language, as bytes that are read in place.
//!
//! States are the words of length 0 … M, level after level, each level in order. An arc of a state reads a letter. From a
//! word shorter than M it leads to the longer word; these arcs, in order, lead to the states 1, 2, …, so their targets are not written. From
//! a word of length M it leads to the last M letters of the longer word.
//!
//! Layout, all numbers little endian with 32 bits: M, states, arcs; the first arc of each state, and the number of arcs; the letter of
//! each arc, a byte each; the target of each arc from words of length M.

use crate::language::Language;
use std::ops::Range;

/// A view of the bytes.
#[derive(Clone, Copy, Debug)]
pub(super) struct Graph<'a> {
    /// The number of arcs whose targets are not written: all states but the root.
    tree_arcs: usize,
    first: &'a [u8],
    letters: &'a [u8],
    targets: &'a [u8],
}

fn number(bytes: &[u8], index: usize) -> u32 {
    let at = 4 * index;
    u32::from_le_bytes([bytes[at], bytes[at + 1], bytes[at + 2], bytes[at + 3]])
}

impl<'a> Graph<'a> {
    /// The bytes of the graph of order `order` of a language that is longer than that, or has only the empty word.
    pub(super) fn encode(language: &Language, order: usize) -> Vec<u8> {
        let states: usize = (0..=order).map(|n| language.count(n)).sum();
        let mut first = Vec::with_capacity(4 * states + 4);
        let mut letters: Vec<u8> = Vec::new();
        let mut targets = Vec::new();
        let shorter: usize = (0..order).map(|n| language.count(n)).sum();
        for n in 0..=order {
            for word in 0..language.count(n) as u32 {
                first.extend((letters.len() as u32).to_le_bytes());
                if n == language.longest() {
                    continue;
                }
                for longer in language.extensions(n, word) {
                    letters.push(language.last_letter(n + 1, longer));
                    if n == order {
                        let target = shorter as u32 + language.suffix(n + 1, longer);
                        targets.extend(target.to_le_bytes());
                    }
                }
            }
        }
        first.extend((letters.len() as u32).to_le_bytes());
        let sizes = [order as u32, states as u32, letters.len() as u32];
        let sizes = sizes.iter().flat_map(|size| size.to_le_bytes());
        sizes.chain(first).chain(letters).chain(targets).collect()
    }

    /// The graph in bytes of exactly its size.
    pub(super) fn view(bytes: &'a [u8]) -> Option<Graph<'a>> {
        let (sizes, rest) = bytes.split_at_checked(12)?;
        let (states, arcs) = (number(sizes, 1) as usize, number(sizes, 2) as usize);
        let tree_arcs = states.checked_sub(1)?;
        let (first, rest) = rest.split_at_checked(4 * states + 4)?;
        let (letters, targets) = rest.split_at_checked(arcs)?;
        let open_arcs = arcs.checked_sub(tree_arcs)?;
        (targets.len() == 4 * open_arcs).then_some(Graph {
            tree_arcs,
            first,
            letters,
            targets,
        })
    }

    /// True when every arc is one of an alphabet and leads to a state. Cost: one pass.
    pub(super) fn is_sound(&self, alphabet: usize) -> bool {
        let states = self.tree_arcs + 1;
        let firsts = || (0..=states).map(|s| number(self.first, s) as usize);
        number(self.first, 0) == 0
            && firsts().is_sorted()
            && firsts().next_back() == Some(self.letters.len())
            && self.letters.iter().all(|l| (*l as usize) < alphabet)
            && (0..self.targets.len() / 4).all(|arc| (number(self.targets, arc) as usize) < states)
    }

    /// The arcs of a state.
    #[inline]
    pub(super) fn arcs(&self, state: u32) -> Range<usize> {
        let state = state as usize;
        number(self.first, state) as usize..number(self.first, state + 1) as usize
    }

    /// The letter of an arc.
    #[inline]
    pub(super) fn letter(&self, arc: usize) -> u8 {
        self.letters[arc]
    }

    /// The state that an arc leads to.
    #[inline]
    pub(super) fn target(&self, arc: usize) -> u32 {
        match arc.checked_sub(self.tree_arcs) {
            None => arc as u32 + 1,
            Some(open) => number(self.targets, open),
        }
    }

    /// The arc of a state with a letter.
    #[inline]
    pub(super) fn arc(&self, arcs: Range<usize>, letter: u8) -> Option<usize> {
        arcs.into_iter().find(|arc| self.letters[*arc] == letter)
    }
}
