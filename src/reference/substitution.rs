//! Languages of substitutions and of directive sequences.
//!
//! A directive sequence σ₀, σ₁, … of substitutions on one alphabet, none of which erases a letter, is eventually
//! the repetition of one substitution τ (a product). Its language holds the words that occur in
//! σ₀…σ_{m−1}(a) for infinitely many m, for some letter a. With σ₀ = σ₁ = … = τ it is the language of τ.
//!
//! **Windows.** Let |σ(v)| ≥ f(ℓ) for all words v of length ℓ of the language one level deeper. A window of N letters in
//! σ(x) that touches M + 1 blocks σ(x_i) holds M − 1 of them whole and at least a letter on each side, so
//! N ≥ f(M − 1) + 2. So with the least M for which f(M − 1) + 2 > N, every word of length ≤ N of σ(x) lies in
//! σ(u) for a word u of length ≤ M of x. Letters alone give f(ℓ) = ℓ·min|σ(a)|; the words of length K of the
//! language of τ, found first, give f(ℓ) = ⌊ℓ/K⌋·min|τ(v)| + (ℓ mod K), which helps when τ keeps a
//! letter (Chacon's does).
//!
//! **Completeness.** Going deeper, needed lengths shrink: N = N₀, N₁, …, until they stay at some M inside the
//! repetition, at level k. L_M there is found as follows. S_m, the words of length ≤ M of all τ^m(a), is determined
//! by S_{m−1}, because such a word lies in τ(u) with |u| ≤ M (τ does not shorten, so M blocks are enough). As
//! there are finitely many sets of such words, S_m is eventually periodic, and the words that occur
//! for infinitely many m are the union over a period. The words of length ≤ N of the language are then exactly the
//! factors of σ₀…σ_{k−1}(u), u in L_M: that a word occurs in infinitely many deep images goes
//! through each level, because a word has finitely many u that can hold it.
//!
//! At any level only the words of the length that is needed there matter, so images may be cut to windows of it on the
//! way up; they are where windows are short, or images too long.
//!
//! Cost: the letters of the images, which are about |L_M|·N·(longest image/shortest image).

use super::ReferenceFault;
use crate::language::Language;
use crate::language::suffixes::factors_of_words;
use std::collections::BTreeSet;

/// The most letters of all images together.
pub const LONGEST_IMAGES: usize = 1 << 29;
/// Windows up to this length are told apart at once, so that repeated ones are not carried further up.
const SHORT_WINDOW: usize = 64;
/// Longer ones, when the images have more letters than this.
const MANY_LETTERS: usize = 1 << 22;
/// The longest words whose images are searched for growth.
const LONGEST_BLOCK: usize = 16;

/// An image for each letter; none is empty.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Substitution(Vec<Vec<u8>>);

impl Substitution {
    /// A substitution from the images of its letters.
    ///
    /// # Panics
    /// If an image is empty or holds a letter that has no image.
    pub fn new(images: Vec<Vec<u8>>) -> Substitution {
        for image in &images {
            assert!(!image.is_empty(), "no letter is erased");
            assert!(image.iter().all(|a| (*a as usize) < images.len()));
        }
        Substitution(images)
    }

    /// The image of a word.
    pub fn apply(&self, word: &[u8]) -> Vec<u8> {
        let images = word.iter().flat_map(|a| &self.0[*a as usize]);
        images.copied().collect()
    }

    /// The substitution that applies `inner` first.
    pub fn after(&self, inner: &Substitution) -> Substitution {
        Substitution(inner.0.iter().map(|image| self.apply(image)).collect())
    }

    fn image_length(&self, word: &[u8]) -> usize {
        word.iter().map(|a| self.0[*a as usize].len()).sum()
    }

    fn shortest_image(&self) -> usize {
        self.0.iter().map(Vec::len).min().unwrap_or(1)
    }
}

/// A directive sequence: some substitutions, then one for ever.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Directive {
    first: Vec<Substitution>,
    repeated: Substitution,
}

/// A lower bound of image lengths: every word of length `block` has an image of at least `image` letters.
#[derive(Clone, Copy, Debug)]
struct Growth {
    block: usize,
    image: usize,
}

impl Growth {
    /// The least M such that a window of `length` letters touches at most M blocks.
    fn blocks(self, length: usize) -> usize {
        let shortest = |words: usize| words / self.block * self.image + words % self.block;
        // The bound grows with M at least as fast as M itself, so M = length is always enough.
        (1..=length)
            .find(|m| shortest(m - 1) + 2 > length)
            .unwrap_or(length)
    }
}

impl Directive {
    /// A directive sequence that begins with `first` and goes on with `repeated` for ever.
    ///
    /// # Panics
    /// If the alphabets differ.
    pub fn new(first: Vec<Substitution>, repeated: Substitution) -> Directive {
        let size = repeated.0.len();
        assert!(first.iter().all(|s| s.0.len() == size), "one alphabet");
        Directive { first, repeated }
    }

    /// The number of letters.
    pub fn alphabet(&self) -> usize {
        self.repeated.0.len()
    }

    /// True for a single substitution.
    pub fn is_one_substitution(&self) -> bool {
        self.first.is_empty()
    }

    /// All words up to a length.
    ///
    /// # Errors
    /// When there are more than `allowed`, or the images are too long.
    pub fn language(&self, longest: usize, allowed: u64) -> Result<Language, ReferenceFault> {
        let tau = &self.repeated;
        let too_long = || ReferenceFault::ImagesTooLong { longest };
        let growth = growth(tau, longest).ok_or_else(too_long)?;
        // The length that is needed at each level, and the substitution that leads up from it.
        let mut levels: Vec<(usize, &Substitution)> = Vec::new();
        let mut needed = longest.max(1);
        for sigma in &self.first {
            levels.push((needed, sigma));
            let image = sigma.shortest_image();
            needed = Growth { block: 1, image }.blocks(needed);
        }
        loop {
            let deeper = growth.blocks(needed);
            if deeper >= needed {
                break;
            }
            levels.push((needed, tau));
            needed = deeper;
        }
        let mut words = recurring_words(tau, needed, LONGEST_IMAGES).ok_or_else(too_long)?;
        for (needed, sigma) in levels.into_iter().rev() {
            let letters: usize = words.iter().map(|w| sigma.image_length(w)).sum();
            if letters > LONGEST_IMAGES {
                return Err(too_long());
            }
            words = if needed <= SHORT_WINDOW || letters > MANY_LETTERS {
                windows_of_images(sigma, &words, needed)
            } else {
                words.iter().map(|w| sigma.apply(w)).collect()
            };
        }
        let texts = words.iter().map(Vec::as_slice);
        Ok(factors_of_words(self.alphabet(), texts, longest, allowed)?.language)
    }
}

/// The best lower bound that short words give: the first block length whose images are all longer than the block.
fn growth(tau: &Substitution, longest: usize) -> Option<Growth> {
    let image = tau.shortest_image();
    if image > 1 {
        return Some(Growth { block: 1, image });
    }
    let mut block = 2;
    while block <= LONGEST_BLOCK.min(longest) {
        let words = recurring_words(tau, block, LONGEST_IMAGES)?;
        let full = words.iter().filter(|w| w.len() == block);
        match full.map(|w| tau.image_length(w)).min() {
            Some(image) if image > block => return Some(Growth { block, image }),
            // No word is that long: then no bound is needed, and this one holds.
            None => break,
            _ => block += 1,
        }
    }
    Some(Growth { block: 1, image: 1 })
}

/// Words whose factors are the words of length ≤ `longest` that occur in τ^m(a) for infinitely many m: those of
/// that length, and shorter ones that are whole images. Nothing, when they have more than `most` letters.
fn recurring_words(tau: &Substitution, longest: usize, most: usize) -> Option<BTreeSet<Vec<u8>>> {
    let mut now: BTreeSet<Vec<u8>> = (0..tau.0.len() as u8).map(|a| vec![a]).collect();
    let mut earlier: Vec<BTreeSet<Vec<u8>>> = Vec::new();
    loop {
        if let Some(start) = earlier.iter().position(|set| *set == now) {
            return Some(earlier.drain(start..).flatten().collect());
        }
        let next = windows_of_images(tau, &now, longest);
        earlier.push(std::mem::replace(&mut now, next));
        let held: usize = earlier.iter().map(|set| set.len() * longest).sum();
        if held > most {
            return None;
        }
    }
}

/// The words of a length in the images of words; images that are shorter stay whole.
fn windows_of_images(
    sigma: &Substitution,
    words: &BTreeSet<Vec<u8>>,
    length: usize,
) -> BTreeSet<Vec<u8>> {
    let mut found = BTreeSet::new();
    for word in words {
        let image = sigma.apply(word);
        if image.len() <= length {
            found.insert(image);
            continue;
        }
        for window in image.windows(length) {
            if !found.contains(window) {
                found.insert(window.to_vec());
            }
        }
    }
    found
}
