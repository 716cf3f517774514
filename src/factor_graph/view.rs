//! One factor graph with its arcs in both directions.
//!
//! Arcs are numbered as the words of length n + 1, so the arcs out of a vertex are a range, in letter order; the arcs into
//! a vertex are listed in the order of their numbers. Memory: 4 bytes a vertex and 4 bytes an arc beside the
//! language.

use crate::language::{Language, WordId};

/// Γ_n of a language.
pub struct GraphView<'a> {
    language: &'a Language,
    order: usize,
    into_first: Vec<u32>,
    into: Vec<WordId>,
}

impl<'a> GraphView<'a> {
    /// The factor graph of an order.
    ///
    /// # Panics
    /// Unless the language reaches length `order + 1`.
    pub fn new(language: &'a Language, order: usize) -> GraphView<'a> {
        let suffixes = language.suffixes(order + 1);
        let mut into_first = vec![0u32; language.count(order) + 1];
        for to in suffixes {
            into_first[*to as usize + 1] += 1;
        }
        for v in 1..into_first.len() {
            into_first[v] += into_first[v - 1];
        }
        // Filled from the end of each range, arcs from the last to the first: the ranges end up in order.
        let mut end: Vec<u32> = into_first[1..].to_vec();
        let mut into = vec![0; suffixes.len()];
        for (arc, to) in suffixes.iter().enumerate().rev() {
            end[*to as usize] -= 1;
            into[end[*to as usize] as usize] = arc as WordId;
        }
        GraphView {
            language,
            order,
            into_first,
            into,
        }
    }

    /// The language.
    pub fn language(&self) -> &'a Language {
        self.language
    }

    /// The order n.
    pub fn order(&self) -> usize {
        self.order
    }

    /// p(n).
    pub fn vertices(&self) -> usize {
        self.into_first.len() - 1
    }

    /// p(n+1).
    pub fn arcs(&self) -> usize {
        self.into.len()
    }

    /// The arcs out of a vertex, in letter order.
    pub fn out_of(&self, v: WordId) -> std::ops::Range<WordId> {
        self.language.extensions(self.order, v)
    }

    /// The arcs into a vertex.
    pub fn into(&self, v: WordId) -> &[WordId] {
        let v = v as usize;
        &self.into[self.into_first[v] as usize..self.into_first[v + 1] as usize]
    }

    /// The vertex that an arc comes from.
    pub fn source(&self, arc: WordId) -> WordId {
        self.language.prefix(self.order + 1, arc)
    }

    /// The vertex that an arc leads to.
    pub fn target(&self, arc: WordId) -> WordId {
        self.language.suffix(self.order + 1, arc)
    }

    /// The label of an arc: its last letter.
    pub fn letter(&self, arc: WordId) -> u8 {
        self.language.last_letter(self.order + 1, arc)
    }

    /// True unless exactly one arc leads in and exactly one out.
    pub fn is_special(&self, v: WordId) -> bool {
        self.out_of(v).len() != 1 || self.into(v).len() != 1
    }

    /// The neighbours of a vertex without directions; one that arcs join twice comes twice.
    pub fn neighbours(&self, v: WordId) -> impl Iterator<Item = WordId> {
        let out = self.out_of(v).map(|arc| self.target(arc));
        out.chain(self.into(v).iter().map(|arc| self.source(*arc)))
    }
}
