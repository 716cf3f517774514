//! The factors of long words, by sorted suffixes.
//!
//! All words stand behind one another, each followed by a mark smaller than every letter. Their suffixes are
//! sorted as far as the first `longest` letters by doubling: ranks by 2h letters follow from ranks by h
//! letters, with one pass of counting sort. A suffix contributes the words of the lengths above its common
//! prefix with the suffix before it, in lexicographic order, each once: exactly the levels of
//! [`Language::from_levels`].
//!
//! Cost: O(T·log longest) for the order, O(1) for each factor afterwards. Memory: 22 bytes a letter beside the
//! language. Rejected: an automaton, which needs 8 bytes a letter and alphabet for its arcs and does not give
//! lexicographic order; and sets of words, whose cost grows with `longest` twice.
//!
//! **Trust.** Factors of a finite text are a lower bound of the language that it comes from. Two things are
//! told for each length n. *Seen once*: the share of places whose word occurs only there, which estimates
//! the chance that the next place shows a new word (Good, Biometrika 40 (1953), from memory). *Both halves*:
//! whether every word of length n starts in the first half of the places and in the second half as well. When
//! that holds up to n, the second half has shown nothing new; it is evidence, never a proof.

use super::tree::{Language, LanguageFault, WordId};
use thiserror::Error;

/// Letters, marks included, that one text can have.
pub const LONGEST_TEXT: usize = (u32::MAX - 1) as usize;

/// What the places of a text say about one length.
#[derive(Clone, Copy, Debug, PartialEq, Eq, serde::Serialize)]
pub struct Evidence {
    /// The length n.
    pub length: usize,
    /// Places where a word of that length starts.
    pub places: u64,
    /// Words of that length that start at one place only.
    pub once: u64,
    /// Words of that length that do not start in both halves of the text.
    pub one_half: u64,
}

/// The factors of a text, with the evidence that they are all.
#[derive(Clone, Debug)]
pub struct TextFactors {
    /// All factors.
    pub language: Language,
    /// Entry n − 1 is that of length n.
    pub evidence: Vec<Evidence>,
    /// The largest n such that every word of every length up to n starts in both halves of the text.
    pub trusted: usize,
}

/// Why a text has no factors.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum TextFault {
    /// Too many letters.
    #[error("{letters} letters are too many; the most that can be searched is {LONGEST_TEXT}")]
    TooLong {
        /// How many, with a mark for each word.
        letters: usize,
    },
    /// More factors than are allowed.
    #[error("the words have {found} factors up to length {longest}; {allowed} fit")]
    TooMany {
        /// How many.
        found: u64,
        /// The length.
        longest: usize,
        /// How many are allowed.
        allowed: u64,
    },
    /// A level is too large.
    #[error(transparent)]
    Language(#[from] LanguageFault),
}

/// Sorted suffixes of words behind one another.
struct Suffixes {
    /// The text: letters from 1, and 0 after each word.
    text: Vec<u16>,
    /// Starts of the suffixes, in the order of their first letters.
    order: Vec<u32>,
    /// Entry i: the letters that suffix i has in common with the one before it, up to `longest`.
    common: Vec<u32>,
    /// Letters from each place to the end of its word.
    rest: Vec<u32>,
}

/// All factors of the words, up to the given length.
///
/// # Errors
/// When the text is too long, or has more than `allowed` factors.
///
/// # Panics
/// If a letter is not below `alphabet`.
pub fn factors_of_words<'a>(
    alphabet: usize,
    words: impl IntoIterator<Item = &'a [u8]>,
    longest: usize,
    allowed: u64,
) -> Result<TextFactors, TextFault> {
    let suffixes = Suffixes::sort(words, longest, alphabet)?;
    let found = suffixes.count(longest);
    if found > allowed {
        return Err(TextFault::TooMany {
            found,
            longest,
            allowed,
        });
    }
    let evidence = suffixes.evidence(longest);
    let doubtful = |e: &Evidence| e.places == 0 || e.one_half > 0;
    let trusted = evidence.iter().take_while(|e| !doubtful(e)).count();
    Ok(TextFactors {
        language: Language::from_levels(alphabet, suffixes.levels(longest))?,
        evidence,
        trusted,
    })
}

impl Suffixes {
    fn sort<'a>(
        words: impl IntoIterator<Item = &'a [u8]>,
        longest: usize,
        alphabet: usize,
    ) -> Result<Suffixes, TextFault> {
        let mut text: Vec<u16> = Vec::new();
        for word in words {
            text.extend(word.iter().map(|letter| {
                assert!((*letter as usize) < alphabet, "a letter of the alphabet");
                u16::from(*letter) + 1
            }));
            text.push(0);
        }
        if text.len() > LONGEST_TEXT {
            return Err(TextFault::TooLong {
                letters: text.len(),
            });
        }
        let mut rest = vec![0u32; text.len()];
        for i in (0..text.len()).rev() {
            rest[i] = if text[i] == 0 { 0 } else { rest[i + 1] + 1 };
        }
        let (order, rank) = sorted(&text, longest, alphabet);
        let common = common_prefixes(&text, &rest, &order, &rank, longest);
        Ok(Suffixes {
            text,
            order,
            common,
            rest,
        })
    }

    /// Factors of all lengths up to one.
    fn count(&self, longest: usize) -> u64 {
        let new = self.order.iter().zip(&self.common).map(|(start, common)| {
            let reach = self.rest[*start as usize].min(longest as u32);
            u64::from(reach.saturating_sub(*common))
        });
        new.sum()
    }

    fn levels(&self, longest: usize) -> Vec<(Vec<u8>, Vec<WordId>)> {
        let mut levels: Vec<(Vec<u8>, Vec<WordId>)> = vec![Default::default(); longest];
        for (start, common) in self.order.iter().zip(&self.common) {
            let start = *start as usize;
            let reach = (self.rest[start] as usize).min(longest);
            for n in *common as usize..reach {
                let parent = if n == 0 { 1 } else { levels[n - 1].0.len() } - 1;
                levels[n].0.push((self.text[start + n] - 1) as u8);
                levels[n].1.push(parent as WordId);
            }
        }
        levels
    }

    /// Merges the places of equal words from long words to short ones: a stack of words, each a prefix of
    /// the next, with the places seen so far.
    fn evidence(&self, longest: usize) -> Vec<Evidence> {
        let mut places = vec![0u64; longest + 2];
        for rest in &self.rest {
            places[(*rest as usize).min(longest)] += 1;
        }
        for n in (1..=longest).rev() {
            places[n] += places[n + 1];
        }
        // Changes from one length to the next, to be summed.
        let (mut once, mut one_half) = (vec![0i64; longest + 2], vec![0i64; longest + 2]);
        let middle = self.text.len() as u32 / 2;
        let mut stack: Vec<Seen> = Vec::new();
        let mut close = |seen: &Seen, above: u32| {
            // Words of lengths above + 1 … depth share their places.
            let (from, to) = (above as usize + 1, seen.depth as usize + 1);
            if seen.count == 1 {
                once[from] += 1;
                once[to] -= 1;
            }
            if seen.first >= middle || seen.last < middle {
                one_half[from] += 1;
                one_half[to] -= 1;
            }
        };
        let ends = [(0u32, 0u32)];
        let entries = self.order.iter().copied().zip(self.common.iter().copied());
        for (i, (start, common)) in entries.chain(ends).enumerate() {
            while let Some(top) = stack.last().copied().filter(|top| top.depth > common) {
                stack.pop();
                let above = stack.last().map_or(0, |s| s.depth).max(common);
                close(&top, above);
                match stack.last_mut() {
                    Some(under) if under.depth == above => under.join(&top),
                    _ if above > 0 => stack.push(Seen {
                        depth: above,
                        ..top
                    }),
                    _ => {}
                }
            }
            if i < self.order.len() {
                let depth = self.rest[start as usize].min(longest as u32);
                let seen = Seen {
                    depth,
                    count: 1,
                    first: start,
                    last: start,
                };
                match stack.last_mut() {
                    Some(under) if under.depth == depth => under.join(&seen),
                    _ if depth > 0 => stack.push(seen),
                    _ => {}
                }
            }
        }
        let mut sums = (0i64, 0i64);
        (1..=longest)
            .map(|n| {
                sums = (sums.0 + once[n], sums.1 + one_half[n]);
                Evidence {
                    length: n,
                    places: places[n],
                    once: sums.0 as u64,
                    one_half: sums.1 as u64,
                }
            })
            .collect()
    }
}

/// The places of one word.
#[derive(Clone, Copy)]
struct Seen {
    depth: u32,
    count: u64,
    first: u32,
    last: u32,
}

impl Seen {
    fn join(&mut self, other: &Seen) {
        self.count += other.count;
        self.first = self.first.min(other.first);
        self.last = self.last.max(other.last);
    }
}

/// The suffixes in the order of their first letters, at least `longest` of them, and the class of each: suffixes
/// of one class agree in these letters, and stand in any order.
fn sorted(text: &[u16], longest: usize, alphabet: usize) -> (Vec<u32>, Vec<u32>) {
    let n = text.len();
    let mut rank: Vec<u32> = text.iter().map(|letter| u32::from(*letter)).collect();
    let mut order: Vec<u32> = (0..n as u32).collect();
    let mut spare: Vec<u32> = vec![0; n];
    counting_sort(&order.clone(), &rank, alphabet + 1, &mut order);
    let mut classes = 1;
    let mut sorted_letters = 1;
    while sorted_letters < longest && classes < n {
        let h = sorted_letters as u32;
        // By the second half: those that have none come first, in any order; the others as `order` says.
        let mut at = 0;
        for i in n.saturating_sub(sorted_letters)..n {
            spare[at] = i as u32;
            at += 1;
        }
        for &i in order.iter().filter(|i| **i >= h) {
            spare[at] = i - h;
            at += 1;
        }
        counting_sort(&spare, &rank, classes.max(alphabet + 1), &mut order);
        let second = |i: u32| rank.get(i as usize + sorted_letters).map_or(0, |r| r + 1);
        let mut next: u32 = 0;
        for w in 0..n {
            if w > 0 {
                let (a, b) = (order[w - 1], order[w]);
                let differ = rank[a as usize] != rank[b as usize] || second(a) != second(b);
                next += u32::from(differ);
            }
            spare[order[w] as usize] = next;
        }
        std::mem::swap(&mut rank, &mut spare);
        classes = next as usize + 1;
        sorted_letters *= 2;
    }
    (order, rank)
}

/// Sorts places by rank, keeping the order of equal ones.
fn counting_sort(places: &[u32], rank: &[u32], ranks: usize, sorted: &mut [u32]) {
    let mut first = vec![0u32; ranks + 1];
    for r in rank {
        first[*r as usize + 1] += 1;
    }
    for r in 0..ranks {
        first[r + 1] += first[r];
    }
    for place in places {
        let slot = &mut first[rank[*place as usize] as usize];
        sorted[*slot as usize] = *place;
        *slot += 1;
    }
}

/// Common prefixes of neighbours, within their words and up to `longest` letters. Neighbours of one class agree
/// in all of these letters; there are about as many others as factors of the greatest length, and they are
/// compared letter by letter.
fn common_prefixes(
    text: &[u16],
    rest: &[u32],
    order: &[u32],
    class: &[u32],
    longest: usize,
) -> Vec<u32> {
    let mut common = vec![0u32; text.len()];
    for place in 1..text.len() {
        let (i, j) = (order[place] as usize, order[place - 1] as usize);
        let most = (rest[i].min(rest[j]) as usize).min(longest);
        let pairs = text[i..i + most].iter().zip(&text[j..j + most]);
        common[place] = if class[i] == class[j] {
            most as u32
        } else {
            pairs.take_while(|(a, b)| a == b).count() as u32
        };
    }
    common
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;
    use std::collections::BTreeMap;

    /// Places of every word of one length, by looking at every window.
    fn slow_evidence(words: &[Vec<u8>], length: usize) -> Evidence {
        let total: usize = words.iter().map(|w| w.len() + 1).sum();
        let mut places: BTreeMap<Vec<u8>, Vec<usize>> = BTreeMap::new();
        let mut start = 0;
        for word in words {
            for (at, window) in word.windows(length).enumerate() {
                places.entry(window.to_vec()).or_default().push(start + at);
            }
            start += word.len() + 1;
        }
        let both = |p: &&Vec<usize>| p[0] < total / 2 && p[p.len() - 1] >= total / 2;
        Evidence {
            length,
            places: places.values().map(|p| p.len() as u64).sum(),
            once: places.values().filter(|p| p.len() == 1).count() as u64,
            one_half: (places.len() - places.values().filter(both).count()) as u64,
        }
    }

    proptest! {
        #[test]
        fn factors_and_evidence_agree_with_every_window(
            words in prop::collection::vec(prop::collection::vec(0u8..3, 0..40), 1..5),
            longest in 1usize..12,
        ) {
            let texts = || words.iter().map(Vec::as_slice);
            let found = factors_of_words(3, texts(), longest, u64::MAX).expect("factors");
            let slow = Language::from_factors(3, texts(), longest).expect("factors");
            prop_assert_eq!(&found.language, &slow);
            for n in 1..=longest {
                prop_assert_eq!(found.evidence[n - 1], slow_evidence(&words, n));
            }
        }

        #[test]
        fn periodic_words_agree_too(word in prop::collection::vec(0u8..2, 1..6), longest in 1usize..40) {
            let long: Vec<u8> = word.iter().copied().cycle().take(100).collect();
            let found = factors_of_words(2, [&long[..]], longest, u64::MAX).expect("factors");
            let slow = Language::from_factors(2, [&long[..]], longest).expect("factors");
            prop_assert_eq!(&found.language, &slow);
            prop_assert_eq!(found.evidence[longest - 1], slow_evidence(&[long], longest));
        }
    }

    #[test]
    fn a_word_that_only_the_second_half_shows_ends_the_trust() {
        let mut text: Vec<u8> = [0, 1].into_iter().cycle().take(40).collect();
        let trusted = |text: &[u8]| factors_of_words(2, [text], 6, 100).unwrap().trusted;
        assert_eq!(trusted(&text), 6);
        text.extend([1, 0]);
        assert_eq!(trusted(&text), 1);
    }

    #[test]
    fn too_many_factors_are_refused_before_they_are_stored() {
        let fault = factors_of_words(2, [&[0u8, 1, 1, 0][..]], 4, 7).unwrap_err();
        let expected = TextFault::TooMany {
            found: 8,
            longest: 4,
            allowed: 7,
        };
        assert_eq!(fault, expected);
    }
}
