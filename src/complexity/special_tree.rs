//! How the special words grow, and which generalized diagonals make them.
//!
//! A word is *right special* when more than one letter can follow it. A suffix of a right special word is right special, so
//! right special words form a tree: the parent of a word is the word without its first letter, its children put
//! letters in front. Left special words form the mirror image: parents lose the last letter. By levels,
//! s(n) = Σ (followers − 1) over the right special words of length n, and the same over the left special ones.
//!
//! A word that is both is *bispecial*; its multiplicity m(w) = |awb| − |aw| − |wb| + 1, over letters a and b, is how
//! much its children in the tree add beyond one branch going on: negative for a *weak* word, 0 for a *neutral* one,
//! positive for a *strong* one. b(n) = Σ m(w) over the bispecial words of length n (Cassaigne, Bull. Belg. Math. Soc. 4
//! (1997) 67–88); all other words have multiplicity 0 when every word goes on both ways.
//!
//! When every word is one beam, m(w) is the number of oriented generalized diagonals with code w, for each nonempty
//! word: lines of the beam of w that meet the corner at their beginning separate the letters before it, those that meet the
//! corner at their end separate the letters after it, and each crossing of the two families is a line through
//! both corners (for convex tables Cassaigne, Hubert, Troubetzkoy, Ann. Inst. Fourier 52 (2002) 835–847). For the
//! empty word m is one more than N(0), as p(2) = 2k + N(0). So such a table has no weak words. When a word is a bundle of
//! beams, diagonals in different beams of w can separate the same letters, and letters can be joined again: m(w)
//! is then no count of diagonals, and may be negative.

use super::diagonals::Diagonal;
use crate::language::{Language, WordId};
use crate::table::{LetterId, SideId};
use serde::Serialize;
use std::collections::BTreeMap;

/// Which end of a word has the choice.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum End {
    /// Letters that can stand before a word.
    Left,
    /// Letters that can follow a word.
    Right,
}

/// A special word in its tree.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SpecialWord {
    /// Its number in its level.
    pub word: WordId,
    /// Its parent, by position among the special words one shorter; the empty word has none.
    pub parent: Option<usize>,
    /// How many letters it can be extended by.
    pub extensions: u32,
}

/// Special words with their parents: entry n holds those of length n.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct SpecialTree {
    /// Which end.
    pub end: End,
    /// By length, from the empty word; words of a level in its order.
    pub levels: Vec<Vec<SpecialWord>>,
}

/// Whether a bispecial word adds branches to the tree.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Strength {
    /// Negative multiplicity.
    Weak,
    /// Multiplicity 0.
    Neutral,
    /// Positive multiplicity.
    Strong,
}

/// A bispecial word.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Bispecial {
    /// Its number in its level.
    pub word: WordId,
    /// Letters that can stand before it.
    pub left: u32,
    /// Letters that can follow it.
    pub right: u32,
    /// m(w).
    pub multiplicity: i64,
    /// The generalized diagonals whose code spells it, by position in the list that was given.
    pub diagonals: Vec<usize>,
}

impl Bispecial {
    /// By the sign of the multiplicity.
    pub fn strength(&self) -> Strength {
        match self.multiplicity {
            ..0 => Strength::Weak,
            0 => Strength::Neutral,
            _ => Strength::Strong,
        }
    }
}

/// The tree of special words of length at most `longest`.
///
/// Cost: O(1) a word of the language to length `longest + 1`.
///
/// # Panics
/// Unless the language reaches length `longest + 1`.
pub fn special_tree(language: &Language, end: End, longest: usize) -> SpecialTree {
    let mut levels: Vec<Vec<SpecialWord>> = Vec::new();
    // By word of the level above: its position among the special ones.
    let mut above: Vec<Option<usize>> = Vec::new();
    for n in 0..=longest {
        let counts = match end {
            End::Left => language.left_extension_counts(n),
            End::Right => language.right_extension_counts(n),
        };
        let mut level = Vec::new();
        let mut positions = vec![None; counts.len()];
        for (word, extensions) in (0..).zip(counts) {
            if extensions < 2 {
                continue;
            }
            let parent = match (n, end) {
                (0, _) => None,
                (_, End::Left) => above[language.prefix(n, word) as usize],
                (_, End::Right) => above[language.suffix(n, word) as usize],
            };
            positions[word as usize] = Some(level.len());
            level.push(SpecialWord {
                word,
                parent,
                extensions,
            });
        }
        levels.push(level);
        above = positions;
    }
    SpecialTree { end, levels }
}

/// The bispecial words of length 0 … `longest`, each with the generalized diagonals whose code spells it.
///
/// `diagonals` are those that cross at most `longest` sides, in any order; `letter` spells a side.
///
/// # Panics
/// Unless the language reaches length `longest + 2`.
pub fn bispecial_words(
    language: &Language,
    longest: usize,
    diagonals: &[Diagonal],
    letter: impl Fn(SideId) -> LetterId,
) -> Vec<Vec<Bispecial>> {
    let mut by_code: BTreeMap<Vec<u8>, Vec<usize>> = BTreeMap::new();
    for (index, diagonal) in diagonals.iter().enumerate() {
        let code = diagonal.code.iter().map(|side| letter(*side).0).collect();
        by_code.entry(code).or_default().push(index);
    }
    (0..=longest)
        .map(|n| {
            let left = language.left_extension_counts(n);
            let right = language.right_extension_counts(n);
            let multiplicities = language.bilateral_multiplicities(n);
            (0..language.count(n))
                .filter(|w| left[*w] > 1 && right[*w] > 1)
                .map(|w| Bispecial {
                    word: w as WordId,
                    left: left[w],
                    right: right[w],
                    multiplicity: multiplicities[w],
                    diagonals: by_code
                        .get(&language.word(n, w as WordId))
                        .cloned()
                        .unwrap_or_default(),
                })
                .collect()
        })
        .collect()
}
