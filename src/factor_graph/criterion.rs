//! The line-limit criterion, and the elementary bound beside it.
//!
//! For a factorial, almost prolongable language of subexponential complexity, the factor graphs converge
//! to the line in the sense of Benjamini and Schramm (for every r the share of words whose r-ball is a path
//! tends to 1) exactly when p(n+1)/p(n) → 1 (arXiv 2402.15877).
//!
//! **Bound.** Let every word have a left and a right extension. The share of words that have a special word
//! nearer than r is at most (6r − 4)·s(n)/p(n). Proof: Σ (right extensions − 1) = s(n), so there are at
//! most s(n) right special words, with at most 2s(n) arcs out of them; likewise at most s(n) left special
//! words with at most 2s(n) arcs into them. So there are at most 2s(n) special words, and at most
//! 2s + 2s + s + s = 6s(n) arc ends at them (a word that is special on one side only has one arc on the
//! other). Leaving a special word by one arc end, there is at most one word at each distance 1 … r − 1
//! that is reached through words that are not special. Together 2s + 6s·(r − 1).
//!
//! A word without a special word nearer than r has an r-ball that is a path, unless the two ends of the
//! ball meet or are joined by an arc. If no component of the graph is a bare cycle, such a word has a
//! special word at distance exactly r, so the share of balls that are no paths is at most
//! (6r + 2)·s(n)/p(n). The smaller number is not enough for that: in the language of all sequences over
//! the blocks ab and ac, p(1) = 3 and s(1) = 1, and no ball of radius 1 is a path.

use super::census::GraphCounts;
use serde::Serialize;

/// p(n+1)/p(n) − 1 beside the bound on the share of balls that are no paths.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct LineFigures {
    /// The order n.
    pub order: usize,
    /// p(n+1)/p(n) − 1 = s(n)/p(n).
    pub growth: f64,
    /// Entry r − 1: share of words whose r-ball is a path.
    pub path_share: Vec<f64>,
    /// Entry r − 1: share of words without a special word nearer than r.
    pub branch_free_share: Vec<f64>,
    /// Entry r − 1: (6r − 4)·s(n)/p(n), which 1 − `branch_free_share` cannot exceed.
    pub bound: Vec<f64>,
    /// True when that holds for every r, compared in integers.
    pub within_bound: bool,
}

/// The figures of one factor graph of a bi-extendable language.
pub fn line_figures(counts: &GraphCounts) -> LineFigures {
    let (vertices, arcs) = (counts.vertices, counts.arcs);
    let growth = arcs as f64 / vertices as f64 - 1.0;
    let share = |words: &u64| *words as f64 / vertices as f64;
    let slopes = (1..).map(|r: u64| 6 * r - 4);
    LineFigures {
        order: counts.order,
        growth,
        path_share: counts.path_balls.iter().map(share).collect(),
        branch_free_share: counts.branch_free.iter().map(share).collect(),
        bound: slopes
            .clone()
            .take(counts.path_balls.len())
            .map(|slope| slope as f64 * growth)
            .collect(),
        within_bound: slopes
            .zip(&counts.branch_free)
            .all(|(slope, free)| vertices - free <= slope * arcs.saturating_sub(vertices)),
    }
}
