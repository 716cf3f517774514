//! A factorial language up to a length, as a tree with suffix links.
//!
//! Level n holds the words of length n in lexicographic order of letter indices. A word is a number in
//! its level. For each word the level keeps its last letter, its prefix (parent) in level n−1 and its
//! suffix (the word without its first letter) in level n−1; the children of a word are a contiguous
//! range of level n+1, in letter order.
//!
//! Suffix links come level by level: suffix(w·a) = suffix(w)·a, which exists because the language is
//! factorial. A tree that is not factorial is refused.
//!
//! Memory: 13 bytes a word (parent 4, suffix 4, first child 4, letter 1). Time: O(letters) a word.

use thiserror::Error;

/// A word, by its position in the lexicographic order of its level.
pub type WordId = u32;

/// Words of one length.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Level {
    letter: Vec<u8>,
    parent: Vec<WordId>,
    suffix: Vec<WordId>,
    /// One more entry than words; empty for the last level.
    first_child: Vec<WordId>,
}

/// A factorial language, complete up to [`Language::longest`].
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Language {
    levels: Vec<Level>,
    alphabet: usize,
}

/// Why levels of letters and parents are not a language.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum LanguageFault {
    /// A factor of a word is missing.
    #[error(
        "the words are not closed under factors: word {word} of length {length} has a suffix that is missing"
    )]
    NotFactorial {
        /// Length of the offending word.
        length: usize,
        /// Its number in its level.
        word: WordId,
    },
    /// More words of one length than can be numbered.
    #[error("more than {} words of length {length}", WordId::MAX)]
    TooManyWords {
        /// The length.
        length: usize,
    },
}

/// Bytes that a stored word takes.
pub const BYTES_PER_WORD: u64 = 13;

impl Language {
    /// Builds the tree from the letters and parents of levels 1, 2, …, each in lexicographic order.
    ///
    /// # Errors
    /// When a suffix of a word is missing, or a level is too large.
    ///
    /// # Panics
    /// If a level is not in the order of its parents.
    pub fn from_levels(
        alphabet: usize,
        grown: Vec<(Vec<u8>, Vec<WordId>)>,
    ) -> Result<Language, LanguageFault> {
        let root = Level {
            letter: vec![0],
            parent: vec![0],
            suffix: vec![0],
            first_child: Vec::new(),
        };
        let mut levels = vec![root];
        for (length, (letter, parent)) in (1..).zip(grown) {
            if letter.len() >= WordId::MAX as usize {
                return Err(LanguageFault::TooManyWords { length });
            }
            let above = levels.last_mut().expect("the root");
            above.first_child = child_ranges(&parent, above.letter.len());
            let level = Level {
                suffix: Vec::new(),
                letter,
                parent,
                first_child: Vec::new(),
            };
            levels.push(level);
            let suffix = suffix_links(&levels, length)?;
            levels[length].suffix = suffix;
        }
        Ok(Language { levels, alphabet })
    }

    /// The language of all factors of a set of words, up to the given length.
    ///
    /// Cost: sorting all factors.
    ///
    /// # Errors
    /// When a level is too large.
    pub fn from_factors<'a>(
        alphabet: usize,
        words: impl IntoIterator<Item = &'a [u8]>,
        longest: usize,
    ) -> Result<Language, LanguageFault> {
        let mut factors: Vec<std::collections::BTreeSet<Vec<u8>>> =
            vec![Default::default(); longest + 1];
        for word in words {
            for (length, level) in factors.iter_mut().enumerate().skip(1) {
                for factor in word.windows(length) {
                    if !level.contains(factor) {
                        level.insert(factor.to_vec());
                    }
                }
            }
        }
        let mut grown = Vec::new();
        let mut above: Vec<Vec<u8>> = vec![Vec::new()];
        for level in factors.into_iter().skip(1) {
            let level: Vec<Vec<u8>> = level.into_iter().collect();
            let parent = level
                .iter()
                .map(|w| {
                    let prefix = &w[..w.len() - 1];
                    let found = above.binary_search_by(|v| v.as_slice().cmp(prefix));
                    found.expect("a factor's prefix is a factor") as WordId
                })
                .collect();
            let letter = level.iter().map(|w| w[w.len() - 1]).collect();
            grown.push((letter, parent));
            above = level;
        }
        Language::from_levels(alphabet, grown)
    }

    /// Number of letters.
    pub fn alphabet(&self) -> usize {
        self.alphabet
    }

    /// The length up to which the language is complete.
    pub fn longest(&self) -> usize {
        self.levels.len() - 1
    }

    /// The number of words of a length.
    pub fn count(&self, length: usize) -> usize {
        self.levels[length].letter.len()
    }

    /// p(0), p(1), …
    pub fn complexity(&self) -> Vec<u64> {
        (0..=self.longest()).map(|n| self.count(n) as u64).collect()
    }

    /// The last letter of a word.
    pub fn last_letter(&self, length: usize, word: WordId) -> u8 {
        self.levels[length].letter[word as usize]
    }

    /// The word without its last letter, in the level below.
    pub fn prefix(&self, length: usize, word: WordId) -> WordId {
        self.levels[length].parent[word as usize]
    }

    /// The word without its first letter, in the level below.
    pub fn suffix(&self, length: usize, word: WordId) -> WordId {
        self.levels[length].suffix[word as usize]
    }

    /// All prefixes of a level, by word.
    pub fn prefixes(&self, length: usize) -> &[WordId] {
        &self.levels[length].parent
    }

    /// All suffixes of a level, by word.
    pub fn suffixes(&self, length: usize) -> &[WordId] {
        &self.levels[length].suffix
    }

    /// The last letters of a level, by word.
    pub fn last_letters(&self, length: usize) -> &[u8] {
        &self.levels[length].letter
    }

    /// The range of a word's right extensions in the next level.
    ///
    /// # Panics
    /// For words of the last level.
    pub fn extensions(&self, length: usize, word: WordId) -> std::ops::Range<WordId> {
        let first = &self.levels[length].first_child;
        first[word as usize]..first[word as usize + 1]
    }

    /// The letters of a word.
    pub fn word(&self, length: usize, word: WordId) -> Vec<u8> {
        let mut letters = vec![0; length];
        let mut at = word;
        for n in (1..=length).rev() {
            letters[n - 1] = self.last_letter(n, at);
            at = self.prefix(n, at);
        }
        letters
    }

    /// The number of a word, when it is in the language.
    pub fn find(&self, letters: &[u8]) -> Option<WordId> {
        if letters.len() > self.longest() {
            return None;
        }
        let mut at = 0;
        for (n, letter) in letters.iter().enumerate() {
            at = child(&self.levels, n, at, *letter)?;
        }
        Some(at)
    }

    /// For each word of a level the number of its left extensions.
    ///
    /// # Panics
    /// For the last level.
    pub fn left_extension_counts(&self, length: usize) -> Vec<u32> {
        let mut counts = vec![0; self.count(length)];
        for suffix in self.suffixes(length + 1) {
            counts[*suffix as usize] += 1;
        }
        counts
    }

    /// For each word of a level the number of its right extensions.
    ///
    /// # Panics
    /// For the last level.
    pub fn right_extension_counts(&self, length: usize) -> Vec<u32> {
        (0..self.count(length) as WordId)
            .map(|w| self.extensions(length, w).len() as u32)
            .collect()
    }

    /// For each word w of a level the bilateral multiplicity |awb| − |aw| − |wb| + 1 (Cassaigne, Bull.
    /// Belg. Math. Soc. 4 (1997) 67–88), whose sum over the level is b(n).
    ///
    /// # Panics
    /// Unless two more levels are there.
    pub fn bilateral_multiplicities(&self, length: usize) -> Vec<i64> {
        let left = self.left_extension_counts(length);
        let right = self.right_extension_counts(length);
        let mut both = vec![0i64; self.count(length)];
        for long in 0..self.count(length + 2) as WordId {
            let middle = self.prefix(length + 1, self.suffix(length + 2, long));
            both[middle as usize] += 1;
        }
        (0..both.len())
            .map(|w| both[w] - left[w] as i64 - right[w] as i64 + 1)
            .collect()
    }

    /// True when every word below the last level has a left and a right extension.
    pub fn is_bi_extendable(&self) -> bool {
        (0..self.longest()).all(|n| {
            self.left_extension_counts(n).iter().all(|c| *c > 0)
                && self.right_extension_counts(n).iter().all(|c| *c > 0)
        })
    }

    /// The first word whose reversal is not in the language, as (length, word).
    ///
    /// The reversal of w is that of its suffix, followed by the first letter of w; so the reversals of one
    /// level follow from those of the level below. Cost: O(letters) a word, and 5 bytes for each word of
    /// two levels.
    pub fn first_without_reversal(&self) -> Option<(usize, WordId)> {
        let mut reversal: Vec<WordId> = vec![0];
        let mut first_letter: Vec<u8> = Vec::new();
        for n in 1..=self.longest() {
            let level = &self.levels[n];
            let first: Vec<u8> = match n {
                1 => level.letter.clone(),
                _ => level
                    .parent
                    .iter()
                    .map(|p| first_letter[*p as usize])
                    .collect(),
            };
            let mut next = Vec::with_capacity(first.len());
            for (w, letter) in first.iter().enumerate() {
                let shorter = reversal[level.suffix[w] as usize];
                match child(&self.levels, n - 1, shorter, *letter) {
                    Some(found) => next.push(found),
                    None => return Some((n, w as WordId)),
                }
            }
            (reversal, first_letter) = (next, first);
        }
        None
    }
}

fn child_ranges(parent: &[WordId], parents: usize) -> Vec<WordId> {
    assert!(
        parent.is_sorted(),
        "a level must be in the order of its parents"
    );
    let mut first = vec![0; parents + 1];
    for p in parent {
        first[*p as usize + 1] += 1;
    }
    for i in 0..parents {
        first[i + 1] += first[i];
    }
    first
}

fn child(levels: &[Level], length: usize, word: WordId, letter: u8) -> Option<WordId> {
    let first = &levels[length].first_child;
    (first[word as usize]..first[word as usize + 1])
        .find(|c| levels[length + 1].letter[*c as usize] == letter)
}

fn suffix_links(levels: &[Level], length: usize) -> Result<Vec<WordId>, LanguageFault> {
    let level = &levels[length];
    if length == 1 {
        return Ok(vec![0; level.letter.len()]);
    }
    let above = &levels[length - 1];
    (0..level.letter.len())
        .map(|w| {
            let shorter = above.suffix[level.parent[w] as usize];
            child(levels, length - 2, shorter, level.letter[w]).ok_or(LanguageFault::NotFactorial {
                length,
                word: w as WordId,
            })
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn factors_of_one_word() {
        let language = Language::from_factors(2, [&[0u8, 1, 0, 0, 1][..]], 3).unwrap();
        assert_eq!(language.complexity(), [1, 2, 3, 3]);
        assert_eq!(language.word(3, 1), [0, 1, 0]);
        assert_eq!(language.find(&[0, 0, 1]), Some(0));
        assert_eq!(language.find(&[1, 1]), None);
        let w = language.find(&[1, 0, 0]).unwrap();
        assert_eq!(language.word(2, language.suffix(3, w)), [0, 0]);
        assert_eq!(language.word(2, language.prefix(3, w)), [1, 0]);
    }

    #[test]
    fn a_missing_suffix_is_refused() {
        // Words 0, 1 and 01 but then 010 without its suffix 10.
        let grown = vec![
            (vec![0, 1], vec![0, 0]),
            (vec![1], vec![0]),
            (vec![0], vec![0]),
        ];
        let fault = Language::from_levels(2, grown).unwrap_err();
        assert_eq!(fault, LanguageFault::NotFactorial { length: 3, word: 0 });
    }

    #[test]
    fn multiplicities_sum_to_the_second_difference() {
        let thue_morse: Vec<u8> = (0..4096u32).map(|i| (i.count_ones() % 2) as u8).collect();
        let language = Language::from_factors(2, [&thue_morse[..]], 14).unwrap();
        let p = language.complexity();
        for n in 0..=12 {
            let sum: i64 = language.bilateral_multiplicities(n).iter().sum();
            assert_eq!(sum, p[n + 2] as i64 - 2 * p[n + 1] as i64 + p[n] as i64);
        }
        assert!(language.is_bi_extendable());
        assert_eq!(language.first_without_reversal(), None);
    }
}
