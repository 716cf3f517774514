//! Spectral laws beside that of the line, and bounds of the diameter.
//!
//! The adjacency matrix without directions is A + Aᵀ, so a loop counts twice and row sums are degrees. Its spectral law puts
//! mass 1/p(n) on each eigenvalue. That of the line is the arcsine law on [−2, 2], with distribution
//! function 1/2 + asin(x/2)/π and even moments C(2k, k) (Kesten 1959, from memory). When graphs converge locally to
//! the line their spectral laws converge to it; the reduced graph, which has only the branching, stays away from it and
//! is given for comparison.
//!
//! **Moments.** The k-th moment is the mean number of closed walks of k steps. Closed walks of k ≤ 2r steps stay
//! within distance r of their start; so a word whose r-ball is a path has C(k, k/2) of them, and only the others are
//! walked. That is exact for graphs of any size; eigenvalues are computed (in floating point, symmetric QR) only
//! up to [`MOST_EIGENVALUES`] vertices.

use super::reduced::Reduced;
use super::view::GraphView;
use crate::language::WordId;
use nalgebra::{DMatrix, SymmetricEigen};
use rayon::prelude::*;
use serde::Serialize;
use std::collections::{HashMap, VecDeque};

/// The most vertices of a graph whose eigenvalues are computed.
pub const MOST_EIGENVALUES: usize = 1000;
/// The moments that are given: 0 … this.
pub const MOMENTS: usize = 8;
/// The most vertices of a graph whose diameter is computed exactly.
pub const MOST_FOR_DIAMETER: usize = 2000;

/// A spectral law beside the arcsine law.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Spectrum {
    /// Moments 0 … 8 of the factor graph: closed walks of k steps, all words together, exact.
    pub closed_walks: Vec<u64>,
    /// The same divided by p(n).
    pub moments: Vec<f64>,
    /// Those of the arcsine law: 1, 0, 2, 0, 6, 0, 20, 0, 70.
    pub line_moments: Vec<u64>,
    /// Greatest distance between the distribution functions; null when the graph is too large.
    pub distance: Option<f64>,
    /// The same for the reduced graph.
    pub reduced_distance: Option<f64>,
    /// The least and the greatest eigenvalue of the factor graph.
    pub extremes: Option<(f64, f64)>,
}

/// The spectral law of one factor graph.
pub fn spectrum(graph: &GraphView<'_>, reduced: &Reduced) -> Spectrum {
    let walks = closed_walks(graph);
    let n = graph.vertices();
    let full = (n <= MOST_EIGENVALUES).then(|| {
        let arcs = (0..graph.arcs() as WordId)
            .map(|a| (graph.source(a) as usize, graph.target(a) as usize));
        eigenvalues(n, arcs)
    });
    let small = reduced.special.len();
    let of_reduced = (1..=MOST_EIGENVALUES).contains(&small).then(|| {
        let ends = reduced.branches.iter().map(|b| (b.from, b.to));
        distance_to_arcsine(&eigenvalues(small, ends))
    });
    Spectrum {
        moments: walks.iter().map(|w| *w as f64 / n as f64).collect(),
        closed_walks: walks,
        line_moments: (0..=MOMENTS).map(line_walks).collect(),
        distance: full.as_deref().map(distance_to_arcsine),
        reduced_distance: of_reduced,
        extremes: full
            .as_deref()
            .and_then(|e| Some((*e.first()?, *e.last()?))),
    }
}

/// Closed walks of k steps on the line: C(k, k/2) for even k.
fn line_walks(k: usize) -> u64 {
    if k % 2 == 1 {
        return 0;
    }
    (1..=k / 2).fold(1u64, |c, i| c * (k / 2 + i) as u64 / i as u64)
}

/// Closed walks of 0 … [`MOMENTS`] steps. Words farther than the reach from special words, and not on short bare
/// cycles, have balls of that radius that are paths.
fn closed_walks(graph: &GraphView<'_>) -> Vec<u64> {
    let reach = MOMENTS / 2;
    let vertices = graph.vertices() as WordId;
    let near = |v: WordId| {
        let (mut forward, mut backward) = (v, v);
        for _ in 0..=reach {
            if graph.is_special(forward) || graph.is_special(backward) {
                return true;
            }
            let last_backward = backward;
            forward = graph.target(graph.out_of(forward).start);
            backward = graph.source(graph.into(backward)[0]);
            // A cycle of even or of odd length that closes.
            if forward == backward || forward == last_backward {
                return true;
            }
        }
        false
    };
    let add = |mut a: Vec<u64>, b: Vec<u64>| {
        a.iter_mut().zip(b).for_each(|(x, y)| *x += y);
        a
    };
    (0..vertices)
        .into_par_iter()
        .map(|v| match near(v) {
            true => walks_from(graph, v),
            false => (0..=MOMENTS).map(line_walks).collect(),
        })
        .reduce(|| vec![0; MOMENTS + 1], add)
}

/// Closed walks from one word: the square of the numbers of walks, since the matrix is symmetric.
fn walks_from(graph: &GraphView<'_>, start: WordId) -> Vec<u64> {
    let mut steps: Vec<HashMap<WordId, u64>> = vec![HashMap::from([(start, 1)])];
    for k in 0..MOMENTS / 2 {
        let mut next: HashMap<WordId, u64> = HashMap::new();
        for (v, count) in &steps[k] {
            for w in graph.neighbours(*v) {
                *next.entry(w).or_default() += count;
            }
        }
        steps.push(next);
    }
    let closed = |k: usize| {
        let (a, b) = (&steps[k / 2], &steps[k.div_ceil(2)]);
        a.iter().map(|(v, x)| x * b.get(v).unwrap_or(&0)).sum()
    };
    (0..=MOMENTS).map(closed).collect()
}

/// The eigenvalues of A + Aᵀ, increasing.
fn eigenvalues(vertices: usize, arcs: impl Iterator<Item = (usize, usize)>) -> Vec<f64> {
    let mut matrix = DMatrix::<f64>::zeros(vertices, vertices);
    for (from, to) in arcs {
        matrix[(from, to)] += 1.0;
        matrix[(to, from)] += 1.0;
    }
    let mut values: Vec<f64> = SymmetricEigen::new(matrix)
        .eigenvalues
        .iter()
        .copied()
        .collect();
    values.sort_by(f64::total_cmp);
    values
}

/// The greatest distance between the distribution function of equal masses on these values and the arcsine law's.
pub fn distance_to_arcsine(increasing: &[f64]) -> f64 {
    let n = increasing.len() as f64;
    let arcsine = |x: f64| 0.5 + (x / 2.0).clamp(-1.0, 1.0).asin() / std::f64::consts::PI;
    let gaps = increasing.iter().enumerate().map(|(i, x)| {
        let (below, at) = (i as f64 / n, (i + 1) as f64 / n);
        f64::max((arcsine(*x) - below).abs(), (arcsine(*x) - at).abs())
    });
    gaps.fold(0.0, f64::max)
}

/// Bounds of the greatest distance between two words of one component, directions ignored; and with directions
/// when the graph is strongly connected.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Diameter {
    /// Some two words are at this distance.
    pub lower: usize,
    /// No two words of a component are farther apart.
    pub upper: usize,
    /// The same with directions; null unless the graph is strongly connected.
    pub directed: Option<(usize, usize)>,
}

/// Diameters: exact for at most `exact_up_to` words, else bounds from searches from a few words (the farthest word
/// of the farthest word, and a middle word, of each component: d ≤ 2·eccentricity).
pub fn diameter(graph: &GraphView<'_>, strongly_connected: bool, exact_up_to: usize) -> Diameter {
    let n = graph.vertices();
    let both = |v: WordId| graph.neighbours(v).collect::<Vec<_>>();
    let forward = |v: WordId| graph.out_of(v).map(|a| graph.target(a)).collect::<Vec<_>>();
    let backward = |v: WordId| {
        graph
            .into(v)
            .iter()
            .map(|a| graph.source(*a))
            .collect::<Vec<_>>()
    };
    if n <= exact_up_to {
        let greatest = |next: &(dyn Fn(WordId) -> Vec<WordId> + Sync)| {
            let all = (0..n as WordId).into_par_iter();
            all.map(|v| search(n, v, next).1).max().unwrap_or(0)
        };
        let exact = greatest(&both);
        let directed = strongly_connected.then(|| greatest(&forward));
        return Diameter {
            lower: exact,
            upper: exact,
            directed: directed.map(|d| (d, d)),
        };
    }
    let (mut lower, mut upper) = (0, 0);
    let mut reached = vec![false; n];
    for start in 0..n as WordId {
        if reached[start as usize] {
            continue;
        }
        let (distance, _, far) = search(n, start, &both);
        for (v, d) in distance.iter().enumerate() {
            reached[v] |= *d != usize::MAX;
        }
        let (from_far, width, other) = search(n, far, &both);
        // A word half-way between the two.
        let (mut middle, mut left) = (other, width / 2);
        while left > 0 {
            let nearer = both(middle);
            let step = nearer
                .into_iter()
                .find(|w| from_far[*w as usize] < from_far[middle as usize]);
            middle = step.unwrap_or(middle);
            left -= 1;
        }
        let radius = search(n, middle, &both).1;
        lower = lower.max(width).max(radius);
        upper = upper.max((2 * radius).min(2 * width));
    }
    let directed = strongly_connected.then(|| {
        let (_, out, far) = search(n, 0, &forward);
        let into = search(n, 0, &backward).1;
        let again = search(n, far, &forward).1.max(search(n, far, &backward).1);
        (out.max(into).max(again), out + into)
    });
    Diameter {
        lower,
        upper,
        directed,
    }
}

/// Distances from a word (the greatest number for words out of reach), the greatest one, and a word that has it.
fn search(
    n: usize,
    start: WordId,
    next: &(dyn Fn(WordId) -> Vec<WordId> + Sync),
) -> (Vec<usize>, usize, WordId) {
    let mut distance = vec![usize::MAX; n];
    distance[start as usize] = 0;
    let mut queue = VecDeque::from([start]);
    let mut last = start;
    while let Some(v) = queue.pop_front() {
        last = v;
        for w in next(v) {
            if distance[w as usize] == usize::MAX {
                distance[w as usize] = distance[v as usize] + 1;
                queue.push_back(w);
            }
        }
    }
    let far = distance[last as usize];
    (distance, far, last)
}
