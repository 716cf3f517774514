//! The line-limit criterion, and the elementary bound beside it.
//!
//! For a factorial, almost prolongable language of subexponential complexity, the factor graphs converge
//! to the line in the sense of Benjamini and Schramm (for every r the share of words whose r-ball is a path
//! tends to 1) exactly when p(n+1)/p(n) → 1 (arXiv 2402.15877).
//!
//! **Bound.** In a bi-extendable language with s(n) > 0 the share of words whose r-ball is no path is at
//! most (6r − 4)·s(n)/p(n). Count: at most s(n) words are right special and at most s(n) left special. A word
//! fails at radius r only if a special word lies at distance below r, or if its two ends at distance r
//! spoil the path; each special word is near few words along unique chains.

use super::census::GraphCounts;
use serde::Serialize;

/// p(n+1)/p(n) − 1 beside the bound on the share of balls that are no paths.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct LineFigures {
    /// The order n.
    pub order: usize,
    /// p(n+1)/p(n) − 1 = s(n)/p(n).
    pub growth: f64,
    /// Entry r − 1: share of words whose r-ball is no path.
    pub not_path: Vec<f64>,
    /// Entry r − 1: (6r − 4)·s(n)/p(n).
    pub bound: Vec<f64>,
    /// True when every share is within its bound, compared in integers. A language without growth at this
    /// order (s(n) = 0) has no bound, and counts as within.
    pub within_bound: bool,
}

/// The figures of one factor graph.
pub fn line_figures(counts: &GraphCounts) -> LineFigures {
    let (vertices, arcs) = (counts.vertices, counts.arcs);
    let growth = arcs as f64 / vertices as f64 - 1.0;
    let slope = |r: u64| 6 * r - 4;
    let radii = (1..).zip(&counts.path_balls);
    LineFigures {
        order: counts.order,
        growth,
        not_path: counts
            .path_balls
            .iter()
            .map(|paths| (vertices - paths) as f64 / vertices as f64)
            .collect(),
        bound: radii.clone().map(|(r, _)| slope(r) as f64 * growth).collect(),
        within_bound: arcs <= vertices
            || radii.clone().all(|(r, paths)| vertices - paths <= slope(r) * (arcs - vertices)),
    }
}
