//! Languages of interval exchanges and interval translation maps.
//!
//! The interval [0, λ) is cut into half-open pieces, one for each letter, from left to right; each is translated
//! into [0, λ). In an interval exchange the images tile the interval; in an interval translation map (Boshernitzan
//! and Kornfeld, 1995, from memory) they may overlap. A point is coded by the pieces that it and its images lie
//! in.
//!
//! **Attractor.** X₀ = [0, λ), X_{k+1} = T(X_k) is a decreasing sequence of finite unions of intervals. When
//! X_{k+1} = X_k the map is of finite type and X_k is its attractor; the language is that of the points of the
//! attractor, all of whose words have extensions on both sides. For an exchange that is so at k = 0. Maps of
//! infinite type never get there and are refused.
//!
//! **Completeness.** T^{n−1} maps the points of the attractor that are coded by w, |w| = n, to a set J_w by translation.
//! J_a is the attractor within the piece of a, and J_{wb} is T(J_w) within the piece of b: finite unions of
//! half-open intervals with exact ends. A word is in the language exactly when its J is not empty. (In an
//! exchange J_w is a single interval.)
//!
//! Cost: a few comparisons in the number field for each word and letter.

use super::ReferenceFault;
use crate::language::Language;
use crate::language::WordId;
use crate::number::Real;

/// The most steps that are tried to reach the attractor.
pub const MOST_STEPS: usize = 500;

/// A half-open interval.
type Interval = (Real, Real);

/// A piecewise translation of an interval.
#[derive(Clone, Debug)]
pub struct Translations {
    pieces: Vec<Interval>,
    shifts: Vec<Real>,
    exchange: bool,
}

/// Why numbers are no piecewise translation.
#[derive(Clone, Debug, PartialEq, Eq, thiserror::Error)]
pub enum TranslationFault {
    /// A length that is not positive.
    #[error("length {piece} is not positive")]
    NotPositive {
        /// Which, from 0.
        piece: usize,
    },
    /// An image that leaves the interval.
    #[error("piece {piece} is moved out of the interval")]
    LeavesInterval {
        /// Which, from 0.
        piece: usize,
    },
}

impl Translations {
    /// An interval translation map, from the lengths of the pieces and their shifts.
    ///
    /// # Errors
    /// When a length is not positive or a piece is moved out of the interval.
    ///
    /// # Panics
    /// If there are not as many shifts as lengths, or no lengths.
    pub fn map(lengths: &[Real], shifts: Vec<Real>) -> Result<Translations, TranslationFault> {
        assert_eq!(lengths.len(), shifts.len(), "one shift a piece");
        assert!(!lengths.is_empty(), "at least one piece");
        let zero = Real::from(0);
        let mut pieces = Vec::new();
        let mut end = zero.clone();
        for (piece, length) in lengths.iter().enumerate() {
            if *length <= zero {
                return Err(TranslationFault::NotPositive { piece });
            }
            let start = end;
            end = &start + length;
            pieces.push((start, end.clone()));
        }
        for (piece, ((lo, hi), shift)) in pieces.iter().zip(&shifts).enumerate() {
            if lo + shift < zero || hi + shift > end {
                return Err(TranslationFault::LeavesInterval { piece });
            }
        }
        Ok(Translations {
            pieces,
            shifts,
            exchange: false,
        })
    }

    /// An interval exchange, from the lengths of the pieces and their order after it.
    ///
    /// # Errors
    /// When a length is not positive.
    ///
    /// # Panics
    /// If `order` is no permutation of the pieces.
    pub fn exchange(lengths: &[Real], order: &[usize]) -> Result<Translations, TranslationFault> {
        let mut seen: Vec<usize> = order.to_vec();
        seen.sort_unstable();
        assert!(seen.iter().copied().eq(0..lengths.len()), "a permutation");
        let mut shifts = vec![Real::from(0); lengths.len()];
        let mut start = Real::from(0);
        for piece in order {
            let before = lengths[..*piece].iter();
            let old = before.fold(Real::from(0), |sum, length| &sum + length);
            shifts[*piece] = &start - &old;
            start = &start + &lengths[*piece];
        }
        let mut map = Translations::map(lengths, shifts)?;
        map.exchange = true;
        Ok(map)
    }

    /// The number of letters.
    pub fn alphabet(&self) -> usize {
        self.pieces.len()
    }

    /// True for an interval exchange.
    pub fn is_exchange(&self) -> bool {
        self.exchange
    }

    /// What a union of intervals has in common with the piece of a letter.
    fn within(&self, union: &[Interval], letter: usize) -> Vec<Interval> {
        let (lo, hi) = &self.pieces[letter];
        let cut = |(a, b): &Interval| (a.max(lo).clone(), b.min(hi).clone());
        union.iter().map(cut).filter(|(a, b)| a < b).collect()
    }

    fn shifted(&self, union: &[Interval], letter: usize) -> Vec<Interval> {
        let shift = &self.shifts[letter];
        union.iter().map(|(a, b)| (a + shift, b + shift)).collect()
    }

    /// The attractor, as disjoint intervals from left to right.
    ///
    /// # Errors
    /// When it is not reached after [`MOST_STEPS`] steps.
    pub fn attractor(&self) -> Result<Vec<Interval>, ReferenceFault> {
        let letters = 0..self.alphabet();
        let end = self.pieces[self.alphabet() - 1].1.clone();
        let mut now = vec![(Real::from(0), end)];
        for _ in 0..MOST_STEPS {
            let images = letters
                .clone()
                .flat_map(|a| self.shifted(&self.within(&now, a), a));
            let next = merged(images.collect());
            if next == now {
                return Ok(now);
            }
            now = next;
        }
        Err(ReferenceFault::StillShrinking { steps: MOST_STEPS })
    }

    /// All words up to a length.
    ///
    /// # Errors
    /// When there are more than `allowed`, or the map is not seen to be of finite type.
    pub fn language(&self, longest: usize, allowed: u64) -> Result<Language, ReferenceFault> {
        let mut levels: Vec<(Vec<u8>, Vec<WordId>)> = Vec::new();
        // Where the points of each word arrive after it.
        let mut arrived: Vec<Vec<Interval>> = vec![self.attractor()?];
        let mut total = 0u64;
        for _ in 0..longest {
            let (mut letters, mut parents, mut next) = (Vec::new(), Vec::new(), Vec::new());
            for (parent, union) in arrived.iter().enumerate() {
                for letter in 0..self.alphabet() {
                    let inside = self.within(union, letter);
                    if !inside.is_empty() {
                        letters.push(letter as u8);
                        parents.push(parent as WordId);
                        next.push(merged(self.shifted(&inside, letter)));
                    }
                }
            }
            total += letters.len() as u64;
            if total > allowed {
                return Err(ReferenceFault::TooManyWords { longest, allowed });
            }
            levels.push((letters, parents));
            arrived = next;
        }
        Ok(Language::from_levels(self.alphabet(), levels)?)
    }
}

/// The same union as disjoint intervals that do not touch, from left to right.
fn merged(mut union: Vec<Interval>) -> Vec<Interval> {
    union.sort();
    let mut result: Vec<Interval> = Vec::new();
    for (lo, hi) in union {
        match result.last_mut() {
            Some(last) if lo <= last.1 => {
                if hi > last.1 {
                    last.1 = hi;
                }
            }
            _ => result.push((lo, hi)),
        }
    }
    result
}
