//! Languages of Toeplitz words.
//!
//! A pattern of p places, q of them holes, the first a letter, is repeated for ever, and its holes are filled,
//! from left to right, with the word that arises: x_{kp+φ} is the letter at place φ of the pattern, or
//! x_{kq+h(φ)} when that is a hole, with h(φ) holes before it. (Jacobs and Keane 1969, Cassaigne and Karhumäki
//! 1997, both from memory.) As the first place is a letter, h(φ) < φ at a hole, so x is determined from left to
//! right, and the number of steps from a place to a letter of the pattern is finite.
//!
//! **Recurrence.** Every window of x recurs at all places i + p^k·t, t ≥ 0, for some k: after k fillings, for k
//! large enough, all its places have letters, and what is filled by then has period p^k. So if m = m₁·m₂
//! with m₂ prime to p, a word that occurs at a place ≡ c modulo m₁ occurs in every class modulo m within that one
//! (take k with m₁ | p^k).
//!
//! **Completeness.** Let g be the part of q made of the primes of p, and let g divide p. F_c(n) is the set of words of
//! length n that occur at places ≡ c modulo g. A window at kp + φ is the pattern from φ on with its holes, say
//! j, filled by the window of length j at kq + h(φ). Its class is φ modulo g; the other window's is h(φ)
//! modulo g, and by recurrence each word of F_{h(φ)}(j) occurs at a place kq + h(φ). So
//! F_c(n) = ∪ { φ's pattern filled with u : φ ≡ c, u ∈ F_{h(φ)}(j) }, and because filling indices decrease,
//! every word is reached in finitely many steps: the smallest solution is F. It is found for the few lengths j
//! that n needs, by repeating until nothing is added. Patterns whose g does not divide p are refused.

use super::ReferenceFault;
use crate::language::Language;
use crate::language::suffixes::factors_of_words;
use std::collections::{BTreeMap, BTreeSet};

/// A pattern: letters and holes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pattern {
    places: Vec<Option<u8>>,
    alphabet: usize,
    /// g: classes of places that are told apart.
    classes: usize,
}

/// Why a pattern is refused.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum PatternFault {
    /// The first place is a hole, or there is no place.
    #[error("the pattern does not begin with a letter")]
    BeginsWithHole,
    /// g does not divide p.
    #[error(
        "the pattern has {places} places and {holes} holes, and {classes}, the part of {holes} made of the primes of {places}, does not divide {places}"
    )]
    Classes {
        /// p.
        places: usize,
        /// q.
        holes: usize,
        /// g.
        classes: usize,
    },
}

type Words = BTreeSet<Vec<u8>>;

impl Pattern {
    /// A pattern from its places; `None` is a hole.
    ///
    /// # Errors
    /// As [`PatternFault`] says.
    ///
    /// # Panics
    /// If a letter is not below `alphabet`.
    pub fn new(alphabet: usize, places: Vec<Option<u8>>) -> Result<Pattern, PatternFault> {
        let letters = places.iter().flatten();
        assert!(letters.copied().all(|a| (a as usize) < alphabet));
        if !matches!(places.first(), Some(Some(_))) {
            return Err(PatternFault::BeginsWithHole);
        }
        let (p, q) = (places.len(), places.iter().filter(|c| c.is_none()).count());
        let mut rest = q.max(1);
        loop {
            let common = num_gcd(rest, p);
            if common == 1 {
                break;
            }
            rest /= common;
        }
        let classes = q.max(1) / rest;
        if !p.is_multiple_of(classes) {
            return Err(PatternFault::Classes {
                places: p,
                holes: q,
                classes,
            });
        }
        Ok(Pattern {
            places,
            alphabet,
            classes,
        })
    }

    /// The number of letters.
    pub fn alphabet(&self) -> usize {
        self.alphabet
    }

    /// The places of a window of length n from φ on.
    fn window(&self, phase: usize, n: usize) -> impl Iterator<Item = Option<u8>> {
        let p = self.places.len();
        (phase..phase + n).map(move |i| self.places[i % p])
    }

    fn holes_before(&self, phase: usize) -> usize {
        self.places[..phase].iter().filter(|c| c.is_none()).count()
    }

    /// Puts F_0(n), …, F_{g−1}(n) into `known`, and those of the lengths that they need. The recursion is
    /// shallow: a window of at least p places has fewer holes than places by a factor 1 − 1/p.
    fn find(&self, n: usize, known: &mut BTreeMap<usize, Vec<Words>>) {
        if known.contains_key(&n) {
            return;
        }
        if n == 0 {
            known.insert(0, vec![BTreeSet::from([Vec::new()]); self.classes]);
            return;
        }
        let holes = |phase: usize| self.window(phase, n).filter(Option::is_none).count();
        for phase in 0..self.places.len() {
            let count = holes(phase);
            if count < n {
                self.find(count, known);
            }
        }
        let mut sets = vec![Words::new(); self.classes];
        loop {
            let before: usize = sets.iter().map(Words::len).sum();
            for phase in 0..self.places.len() {
                let count = holes(phase);
                let class = self.holes_before(phase) % self.classes;
                let fillings = if count == n {
                    &sets[class]
                } else {
                    &known[&count][class]
                };
                let filled: Vec<Vec<u8>> = fillings
                    .iter()
                    .map(|u| {
                        let mut next = u.iter().copied();
                        let letters = self.window(phase, n);
                        letters
                            .map(|c| c.unwrap_or_else(|| next.next().expect("a letter a hole")))
                            .collect()
                    })
                    .collect();
                sets[phase % self.classes].extend(filled);
            }
            if sets.iter().map(Words::len).sum::<usize>() == before {
                break;
            }
        }
        known.insert(n, sets);
    }

    /// All words up to a length.
    ///
    /// # Errors
    /// When there are more than `allowed`.
    pub fn language(&self, longest: usize, allowed: u64) -> Result<Language, ReferenceFault> {
        let mut known = BTreeMap::new();
        self.find(longest, &mut known);
        let words: Words = known
            .remove(&longest)
            .into_iter()
            .flatten()
            .flatten()
            .collect();
        let texts = words.iter().map(Vec::as_slice);
        Ok(factors_of_words(self.alphabet, texts, longest, allowed)?.language)
    }
}

fn num_gcd(a: usize, b: usize) -> usize {
    if b == 0 { a } else { num_gcd(b, a % b) }
}
