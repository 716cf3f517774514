//! The labelled limit: which letters stand round a uniform vertex.
//!
//! **Definition.** The letter of a vertex w of Γ_n is its middle letter w_m, m = ⌊n/2⌋ (letters counted from 0). Going
//! r steps forward or backward from w along unique words moves the middle by as many letters, so the letters of
//! the 2r + 1 vertices round w are the block w_{m−r} … w_{m+r}. That block is defined for every w when
//! n ≥ 2r + 1; its law under the uniform law on L_n is a law on L_{2r+1}. When the labelled factor graphs converge
//! locally, these laws converge for every r, and the limit is an invariant measure of the shift.
//!
//! The choice of the middle does not matter in the limit when s(n)/p(n) → 0: deleting the first letter maps L_{n+1}
//! onto L_n, and a uniform word to one whose law is within s(n)/p(n + 1) of uniform in total variation, so moving the
//! block by one letter moves its law by at most 2·s(n)/p(n). [`Law::drift`] measures it.
//!
//! **Settling.** No finite data shows that a sequence of laws converges or that it does not. What is told: for N₀ = 1, 2,
//! 4, …, the greatest total variation between the laws of two orders ≥ N₀. When it goes to zero the laws are settling.
//! When it stays above [`APART`] for all N₀ up to a quarter of the orders, the orders near one of the two laws that are
//! farthest apart and those near the other are listed as two subsequences.
//!
//! Cost: the words of all lengths up to n, for each n.

use crate::language::{Language, WordId};
use rayon::prelude::*;
use serde::Serialize;

/// Laws this far apart are told as different.
pub const APART: f64 = 0.1;
/// The most orders whose laws are compared; more are thinned out.
pub const MOST_ORDERS: usize = 96;

/// The law of the middle block of one order.
#[derive(Clone, Debug, PartialEq)]
pub struct Law {
    /// The order n.
    pub order: usize,
    /// Words of length n with each block, by the blocks of length 2r + 1 in their order.
    pub counts: Vec<u64>,
    /// p(n).
    pub words: u64,
}

impl Law {
    /// The share of each block.
    pub fn shares(&self) -> Vec<f64> {
        let share = |c: &u64| *c as f64 / self.words as f64;
        self.counts.iter().map(share).collect()
    }

    /// How far the law moves when the block is read at the start and at the end of the words instead: the
    /// greater total variation.
    pub fn drift(&self, language: &Language, radius: usize) -> f64 {
        let block = 2 * radius + 1;
        let shares = self.shares();
        let at = |skipped: usize| block_counts(language, self.order, skipped, block);
        let other = |counts: Vec<u64>| {
            let law = Law {
                counts,
                ..self.clone()
            };
            total_variation(&shares, &law.shares())
        };
        f64::max(other(at(0)), other(at(self.order - block)))
    }
}

/// Words of length `order` by the block of a length that begins after `skipped` letters.
///
/// # Panics
/// If the block does not fit.
pub fn block_counts(language: &Language, order: usize, skipped: usize, block: usize) -> Vec<u64> {
    assert!(skipped + block <= order, "a block inside the words");
    let mut counts = vec![1u64; language.count(order)];
    // First the letters after the block go, then those before it.
    for n in (skipped + block + 1..=order).rev() {
        counts = pushed(&counts, language.prefixes(n), language.count(n - 1));
    }
    for n in (block + 1..=skipped + block).rev() {
        counts = pushed(&counts, language.suffixes(n), language.count(n - 1));
    }
    counts
}

fn pushed(counts: &[u64], to: &[WordId], size: usize) -> Vec<u64> {
    let mut below = vec![0; size];
    for (count, word) in counts.iter().zip(to) {
        below[*word as usize] += count;
    }
    below
}

/// The law of the 2r + 1 letters round a uniform vertex of Γ_order; nothing when the words are shorter than that.
pub fn middle_law(language: &Language, order: usize, radius: usize) -> Option<Law> {
    let block = 2 * radius + 1;
    (order >= block).then(|| Law {
        order,
        counts: block_counts(language, order, order / 2 - radius, block),
        words: language.count(order) as u64,
    })
}

/// Half the sum of the differences.
pub fn total_variation(a: &[f64], b: &[f64]) -> f64 {
    a.iter().zip(b).map(|(x, y)| (x - y).abs()).sum::<f64>() / 2.0
}

/// Orders up to one: all of them when they are few, else about equally spaced on a logarithmic scale.
pub fn spread_orders(first: usize, last: usize) -> Vec<usize> {
    if last < first + MOST_ORDERS {
        return (first..=last).collect();
    }
    let ratio = last as f64 / first.max(1) as f64;
    let mut orders: Vec<usize> = (0..MOST_ORDERS)
        .map(|i| {
            let share = i as f64 / (MOST_ORDERS - 1) as f64;
            ((first.max(1) as f64 * ratio.powf(share)).round() as usize).min(last)
        })
        .collect();
    orders.dedup();
    orders
}

/// The laws of many orders and how they settle.
#[derive(Clone, Debug)]
pub struct Settling {
    /// The radius r.
    pub radius: usize,
    /// The laws, by order.
    pub laws: Vec<Law>,
    /// (N₀, greatest total variation between the laws of two orders ≥ N₀).
    pub spread: Vec<(usize, f64)>,
    /// Two subsequences of orders at different laws; empty when the laws are not apart.
    pub subsequences: Vec<Subsequence>,
}

/// Orders whose laws are near one law.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Subsequence {
    /// The order whose law it is.
    pub at: usize,
    /// Orders whose laws are within a quarter of the distance between the two.
    pub orders: Vec<usize>,
    /// The shares of the blocks at that order.
    pub shares: Vec<f64>,
}

/// The laws of a language up to order `longest`, for one radius.
///
/// # Panics
/// Unless the language reaches `longest`.
pub fn settling(language: &Language, longest: usize, radius: usize) -> Settling {
    let orders = match 2 * radius < longest {
        true => spread_orders(2 * radius + 1, longest),
        false => Vec::new(),
    };
    let laws: Vec<Law> = orders
        .par_iter()
        .filter_map(|order| middle_law(language, *order, radius))
        .collect();
    let shares: Vec<Vec<f64>> = laws.iter().map(Law::shares).collect();
    // The farthest pair with the smaller order at each place.
    let farthest: Vec<(f64, usize)> = (0..laws.len())
        .into_par_iter()
        .map(|i| {
            let distances =
                (i + 1..laws.len()).map(|j| (total_variation(&shares[i], &shares[j]), j));
            distances
                .max_by(|a, b| a.0.total_cmp(&b.0))
                .unwrap_or((0.0, i))
        })
        .collect();
    let beyond = |least: usize| {
        let pairs = farthest
            .iter()
            .enumerate()
            .filter(|(i, _)| laws[*i].order >= least);
        let pair = pairs.max_by(|a, b| a.1.0.total_cmp(&b.1.0));
        pair.map(|(i, (distance, j))| (*distance, i, *j))
    };
    let starts = (0..).map(|k| 1usize << k).take_while(|n| *n < longest);
    let spread = starts.filter_map(|n| Some((n, beyond(n)?.0))).collect();
    let subsequences = match beyond(longest.div_ceil(4)) {
        Some((distance, i, j)) if distance > APART => [i, j]
            .map(|k| Subsequence {
                at: laws[k].order,
                orders: (0..laws.len())
                    .filter(|l| total_variation(&shares[k], &shares[*l]) <= distance / 4.0)
                    .map(|l| laws[l].order)
                    .collect(),
                shares: shares[k].clone(),
            })
            .to_vec(),
        _ => Vec::new(),
    };
    Settling {
        radius,
        laws,
        spread,
        subsequences,
    }
}

/// The shares of the blocks of a length in long words, by the words of the language; and the share of places whose
/// block is none of them.
pub fn block_frequencies(language: &Language, texts: &[Vec<u8>], block: usize) -> (Vec<f64>, f64) {
    let mut counts = vec![0u64; language.count(block)];
    let (mut places, mut strange) = (0u64, 0u64);
    for window in texts.iter().flat_map(|text| text.windows(block)) {
        places += 1;
        match language.find(window) {
            Some(word) => counts[word as usize] += 1,
            None => strange += 1,
        }
    }
    let share = |count: u64| count as f64 / places.max(1) as f64;
    (counts.into_iter().map(share).collect(), share(strange))
}
