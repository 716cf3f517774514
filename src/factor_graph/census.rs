//! Special words and path balls of factor graphs.
//!
//! Distances and balls are those of the graph without directions. The ball of radius r round a word is the
//! subgraph that the words at distance at most r span. It *is a path* when it is a path of 2r arcs with
//! the word in its middle: every word nearer than r has exactly one left and one right extension, the
//! 2r + 1 words differ, and no further arc joins its two ends.
//!
//! **Method.** Call a word *unique* when it has one left and one right extension. From a word v step forward
//! and backward together, from radius r − 1 to r, as long as both ends are unique. By induction the
//! 2r − 1 words so far differ. Those inside have both their arcs in use, so a new end can coincide only
//! with the other new end or with the last end on the other side (a cycle of unique words; for r = 1 a
//! loop at v), and the only further arcs are those among the two ends. Cost: O(R) a word.
//!
//! Memory: 16 bytes a word beside the language.

use crate::language::{Language, WordId};
use serde::Serialize;

/// Counts for one factor graph.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct GraphCounts {
    /// The order n.
    pub order: usize,
    /// p(n).
    pub vertices: u64,
    /// p(n+1).
    pub arcs: u64,
    /// Words with more than one left extension.
    pub left_special: u64,
    /// Words with more than one right extension.
    pub right_special: u64,
    /// Words that are both.
    pub bispecial: u64,
    /// Words with exactly one left and one right extension.
    pub unique_both: u64,
    /// Entry r − 1: words without a special word (or a word without extension) nearer than r.
    pub branch_free: Vec<u64>,
    /// Entry r − 1: words whose ball of radius r is a path.
    pub path_balls: Vec<u64>,
}

/// Marks the end of a chain, or a word without a unique neighbour.
const NONE: WordId = WordId::MAX;

/// The neighbours of a factor graph's vertices, where they are unique.
struct Neighbours {
    /// The only successor, or `NONE`.
    next: Vec<WordId>,
    /// The only predecessor, or `NONE`.
    previous: Vec<WordId>,
    left: Vec<u32>,
    right: Vec<u32>,
}

fn neighbours(language: &Language, order: usize) -> Neighbours {
    let vertices = language.count(order);
    let (prefixes, suffixes) = (language.prefixes(order + 1), language.suffixes(order + 1));
    let mut found = Neighbours {
        next: vec![NONE; vertices],
        previous: vec![NONE; vertices],
        left: vec![0; vertices],
        right: vec![0; vertices],
    };
    for (from, to) in prefixes.iter().zip(suffixes) {
        let (from, to) = (*from as usize, *to as usize);
        found.right[from] += 1;
        found.left[to] += 1;
        found.next[from] = to as WordId;
        found.previous[to] = from as WordId;
    }
    for v in 0..vertices {
        if found.right[v] != 1 {
            found.next[v] = NONE;
        }
        if found.left[v] != 1 {
            found.previous[v] = NONE;
        }
    }
    found
}

/// Counts one factor graph, with path balls for radii 1 … `radii`.
///
/// # Panics
/// Unless the language reaches length `order + 1`.
pub fn count_graph(language: &Language, order: usize, radii: usize) -> GraphCounts {
    let around = neighbours(language, order);
    let vertices = language.count(order);
    let count = |test: &dyn Fn(usize) -> bool| (0..vertices).filter(|&v| test(v)).count() as u64;
    let unique = |v: usize| around.left[v] == 1 && around.right[v] == 1;
    let (branch_free, path_balls) = balls(&around, language, order, radii);
    GraphCounts {
        order,
        vertices: vertices as u64,
        arcs: language.count(order + 1) as u64,
        left_special: count(&|v| around.left[v] > 1),
        right_special: count(&|v| around.right[v] > 1),
        bispecial: count(&|v| around.left[v] > 1 && around.right[v] > 1),
        unique_both: count(&unique),
        branch_free,
        path_balls,
    }
}

/// Counts words without a branch nearer than r, and words whose r-ball is a path, for r = 1 … `radii`.
fn balls(
    around: &Neighbours,
    language: &Language,
    order: usize,
    radii: usize,
) -> (Vec<u64>, Vec<u64>) {
    let vertices = around.next.len();
    let mut branch_free = vec![0; radii];
    let mut paths = vec![0; radii];
    for v in 0..vertices as WordId {
        let (mut forward, mut backward) = (v, v);
        let mut on_cycle = false;
        for r in 0..radii {
            if !is_unique(around, forward) || !is_unique(around, backward) {
                break;
            }
            branch_free[r] += 1;
            let last_backward = backward;
            forward = around.next[forward as usize];
            backward = around.previous[backward as usize];
            on_cycle |= forward == backward || forward == last_backward;
            let ends = [forward, backward];
            let further_arc = || {
                ends.iter()
                    .any(|from| ends.iter().any(|to| joined(language, order, *from, *to)))
            };
            if !on_cycle && !further_arc() {
                paths[r] += 1;
            }
        }
    }
    (branch_free, paths)
}

fn is_unique(around: &Neighbours, v: WordId) -> bool {
    around.next[v as usize] != NONE && around.previous[v as usize] != NONE
}

/// True when an arc leads from one vertex to the other.
fn joined(language: &Language, order: usize, from: WordId, to: WordId) -> bool {
    language
        .extensions(order, from)
        .any(|arc| language.suffix(order + 1, arc) == to)
}

/// Counts every factor graph of a language from order `first` up to one less than its longest length.
///
/// Cost: O(radii) a word, in parallel over the orders.
pub fn count_graphs(language: &Language, first: usize, radii: usize) -> Vec<GraphCounts> {
    use rayon::prelude::*;
    (first..language.longest())
        .into_par_iter()
        .map(|order| count_graph(language, order, radii))
        .collect()
}
