//! The factor graph reduced to its special words: branches, components, cycles.
//!
//! A word is special unless it has exactly one extension on each side. A *branch* leads from a special word through
//! unique words to the next special word; its length is its number of arcs. Words on no branch are on cycles of unique
//! words. So branches and these cycles hold every arc, and questions about Γ_n become questions about a graph
//! with at most 2s(n) vertices and 4s(n) branches.
//!
//! - Strong components: special words fall into those of the reduced graph; an inner word of a branch is in that of both
//!   ends when they agree, else alone; a bare cycle is one.
//! - Weak components: those of the reduced graph, and the bare cycles.
//! - Independent cycles: arcs − vertices + weak components.
//! - The shortest directed cycle: the least of the bare cycles and of the closed walks of the reduced graph, lengths
//!   counted, by a search from each special word.
//!
//! Cost: O(p(n)) for the branches; O(s²·log s) for the shortest cycle, which is left out when there are more
//! than [`MOST_FOR_CYCLES`] special words.

use super::view::GraphView;
use crate::language::WordId;
use serde::Serialize;
use std::cmp::Reverse;
use std::collections::BinaryHeap;

/// The most special words for which the shortest cycle is searched.
pub const MOST_FOR_CYCLES: usize = 4000;

/// A way from a special word to the next.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Branch {
    /// Where it starts, as a number of a special word.
    pub from: usize,
    /// Where it ends.
    pub to: usize,
    /// Its number of arcs.
    pub length: usize,
}

/// Special words and branches.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Reduced {
    /// The special words in order.
    pub special: Vec<WordId>,
    /// The branches, in the order of the arcs that they begin with.
    pub branches: Vec<Branch>,
    /// Lengths of the cycles without a special word.
    pub bare_cycles: Vec<usize>,
}

/// Figures of one graph.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Structure {
    /// The order n.
    pub order: usize,
    /// Special words: vertices of the reduced graph.
    pub special: usize,
    /// Branches between them.
    pub branches: usize,
    /// Arcs of the shortest branch; null without branches.
    pub shortest_branch: Option<usize>,
    /// Arcs of the longest branch.
    pub longest_branch: Option<usize>,
    /// Mean number of arcs of a branch.
    pub mean_branch: Option<f64>,
    /// Cycles without a special word.
    pub bare_cycles: usize,
    /// Components without directions.
    pub components: usize,
    /// Strong components.
    pub strong_components: usize,
    /// Words in the largest strong component.
    pub largest_strong: usize,
    /// Arcs − vertices + components.
    pub independent_cycles: usize,
    /// Arcs of the shortest directed cycle; null when there is none, or too many special words.
    pub shortest_cycle: Option<usize>,
}

/// Reduces a factor graph.
pub fn reduce(graph: &GraphView<'_>) -> Reduced {
    let vertices = graph.vertices() as WordId;
    let special: Vec<WordId> = (0..vertices).filter(|v| graph.is_special(*v)).collect();
    let number = |v: WordId| special.binary_search(&v).expect("a special word");
    let mut covered = vec![false; vertices as usize];
    let mut branches = Vec::new();
    for (from, s) in special.iter().enumerate() {
        covered[*s as usize] = true;
        for arc in graph.out_of(*s) {
            let mut v = graph.target(arc);
            let mut length = 1;
            while !graph.is_special(v) {
                covered[v as usize] = true;
                v = graph.target(graph.out_of(v).start);
                length += 1;
            }
            let to = number(v);
            branches.push(Branch { from, to, length });
        }
    }
    let mut bare_cycles = Vec::new();
    for start in 0..vertices {
        let (mut v, mut length) = (start, 0);
        while !covered[v as usize] {
            covered[v as usize] = true;
            length += 1;
            v = graph.target(graph.out_of(v).start);
        }
        if length > 0 {
            bare_cycles.push(length);
        }
    }
    Reduced {
        special,
        branches,
        bare_cycles,
    }
}

impl Reduced {
    /// The figures of the graph that this is the reduction of.
    pub fn structure(&self, graph: &GraphView<'_>) -> Structure {
        let lengths = || self.branches.iter().map(|b| b.length);
        let arcs: usize = lengths().sum();
        let strong = self.strong_numbers();
        let strong_count = strong.iter().max().map_or(0, |m| m + 1);
        let mut sizes = vec![0usize; strong_count];
        strong.iter().for_each(|c| sizes[*c] += 1);
        let mut lone = 0;
        for b in &self.branches {
            if strong[b.from] == strong[b.to] {
                sizes[strong[b.from]] += b.length - 1;
            } else {
                lone += b.length - 1;
            }
        }
        let components = self.weak_components() + self.bare_cycles.len();
        let largest = sizes.iter().chain(&self.bare_cycles).max().copied();
        Structure {
            order: graph.order(),
            special: self.special.len(),
            branches: self.branches.len(),
            shortest_branch: lengths().min(),
            longest_branch: lengths().max(),
            mean_branch: (arcs > 0).then(|| arcs as f64 / self.branches.len() as f64),
            bare_cycles: self.bare_cycles.len(),
            components,
            strong_components: strong_count + lone + self.bare_cycles.len(),
            largest_strong: largest.unwrap_or(0).max(usize::from(lone > 0)),
            independent_cycles: graph.arcs() + components - graph.vertices(),
            shortest_cycle: self.shortest_cycle(),
        }
    }

    /// Branches out of each special word, as ranges: they are in the order of their starts.
    fn out_of(&self, v: usize) -> &[Branch] {
        let start = self.branches.partition_point(|b| b.from < v);
        let end = self.branches.partition_point(|b| b.from <= v);
        &self.branches[start..end]
    }

    fn weak_components(&self) -> usize {
        let mut parent: Vec<usize> = (0..self.special.len()).collect();
        let mut count = parent.len();
        for b in &self.branches {
            let (x, y) = (root(&mut parent, b.from), root(&mut parent, b.to));
            if x != y {
                parent[x] = y;
                count -= 1;
            }
        }
        count
    }

    /// The strong component of each special word, by Tarjan's search (1972, from memory) without recursion.
    fn strong_numbers(&self) -> Vec<usize> {
        const NEW: usize = usize::MAX;
        let n = self.special.len();
        let (mut index, mut low, mut component) = (vec![NEW; n], vec![0; n], vec![NEW; n]);
        let (mut stack, mut next, mut found) = (Vec::new(), 0, 0);
        for start in 0..n {
            if index[start] != NEW {
                continue;
            }
            let mut way = vec![(start, 0usize)];
            while let Some((v, done)) = way.pop() {
                if done == 0 {
                    (index[v], low[v]) = (next, next);
                    next += 1;
                    stack.push(v);
                } else {
                    // The branch before led to a vertex that is finished or on the stack.
                    let w = self.out_of(v)[done - 1].to;
                    if component[w] == NEW {
                        low[v] = low[v].min(low[w]);
                    }
                }
                let mut at = done;
                let mut deeper = None;
                while let Some(branch) = self.out_of(v).get(at) {
                    at += 1;
                    if index[branch.to] == NEW {
                        deeper = Some(branch.to);
                        break;
                    }
                    if component[branch.to] == NEW {
                        low[v] = low[v].min(index[branch.to]);
                    }
                }
                if let Some(w) = deeper {
                    way.push((v, at));
                    way.push((w, 0));
                } else if low[v] == index[v] {
                    while let Some(w) = stack.pop() {
                        component[w] = found;
                        if w == v {
                            break;
                        }
                    }
                    found += 1;
                }
            }
        }
        component
    }

    fn shortest_cycle(&self) -> Option<usize> {
        if self.special.len() > MOST_FOR_CYCLES {
            return None;
        }
        let mut best = self.bare_cycles.iter().min().copied();
        let mut distance = vec![usize::MAX; self.special.len()];
        for start in 0..self.special.len() {
            distance.fill(usize::MAX);
            let mut queue = BinaryHeap::from([Reverse((0usize, start))]);
            while let Some(Reverse((d, v))) = queue.pop() {
                if best.is_some_and(|b| d >= b) {
                    break;
                }
                if v == start && d > 0 {
                    best = Some(d);
                    break;
                }
                if d > distance[v] {
                    continue;
                }
                for b in self.out_of(v) {
                    let reach = d + b.length;
                    if b.to == start || reach < distance[b.to] {
                        distance[b.to] = reach;
                        queue.push(Reverse((reach, b.to)));
                    }
                }
            }
        }
        best
    }
}

fn root(parent: &mut [usize], mut v: usize) -> usize {
    while parent[v] != v {
        parent[v] = parent[parent[v]];
        v = parent[v];
    }
    v
}

/// How special words go on from one order to the next.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize)]
pub struct Evolution {
    /// The order n that it starts from.
    pub order: usize,
    /// Right special words w for which no aw is right special.
    pub right_ends: u64,
    /// … exactly one.
    pub right_goes_on: u64,
    /// … more than one.
    pub right_splits: u64,
    /// Left special words w for which no wa is left special.
    pub left_ends: u64,
    /// … exactly one.
    pub left_goes_on: u64,
    /// … more than one.
    pub left_splits: u64,
    /// Bispecial words with positive bilateral multiplicity.
    pub strong: u64,
    /// … with multiplicity 0.
    pub neutral: u64,
    /// … with negative multiplicity.
    pub weak: u64,
    /// b(n), the sum of the multiplicities.
    pub second_difference: i64,
}

/// The evolution from Γ_n to Γ_{n+1}. Every right special word of length n + 1 ends with one of length n, every
/// left special one begins with one; only at bispecial words can their number change.
///
/// # Panics
/// Unless the language reaches length `order + 2`.
pub fn evolution(language: &crate::language::Language, order: usize) -> Evolution {
    let mut found = Evolution {
        order,
        ..Default::default()
    };
    let (left, right) = (
        language.left_extension_counts(order),
        language.right_extension_counts(order),
    );
    let mut heirs = vec![(0u32, 0u32); left.len()];
    let longer = language.left_extension_counts(order + 1);
    for (word, count) in (0..).zip(language.right_extension_counts(order + 1)) {
        if count > 1 {
            heirs[language.suffix(order + 1, word) as usize].0 += 1;
        }
        if longer[word as usize] > 1 {
            heirs[language.prefix(order + 1, word) as usize].1 += 1;
        }
    }
    let multiplicities = language.bilateral_multiplicities(order);
    for w in 0..left.len() {
        if right[w] > 1 {
            match heirs[w].0 {
                0 => found.right_ends += 1,
                1 => found.right_goes_on += 1,
                _ => found.right_splits += 1,
            }
        }
        if left[w] > 1 {
            match heirs[w].1 {
                0 => found.left_ends += 1,
                1 => found.left_goes_on += 1,
                _ => found.left_splits += 1,
            }
        }
        if left[w] > 1 && right[w] > 1 {
            match multiplicities[w] {
                1.. => found.strong += 1,
                0 => found.neutral += 1,
                _ => found.weak += 1,
            }
        }
        found.second_difference += multiplicities[w];
    }
    found
}
