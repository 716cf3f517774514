//! Census of balls: how many words have which ball.
//!
//! The ball of radius r round a word is the subgraph that the words at distance at most r span, directions ignored for
//! distances. Words are counted by the isomorphism type of their rooted ball, of the [`Kind`] asked for.
//!
//! **Path balls in bulk.** Call a word special unless it has exactly one extension on each side. Let a word be farther
//! than r + 1 from every special word, and not on a cycle without special words. Going r steps forward and
//! backward it meets unique words only, all different (a repetition would close such a cycle), and the two ends,
//! whose neighbours are unique as well, are not joined: an arc between them would close such a cycle, too. So its
//! ball is a path. Only words within r + 1 of a special word (at most (6r + 8)·s(n) of them), and those on short
//! cycles, are looked at. In labelled graphs the bulk is told apart by its labels, read off along the branches.
//!
//! **Other balls** are written down as a breadth-first search finds them, arcs in the order of letters and words. Equal
//! records are counted first; the canonical form is computed once for each different record.
//!
//! Cost: O(p(n)) for degrees and branches, O(ball) for each word within r + 1 of a special word, one canonical form
//! for each different record. Memory beside the language: 9 bytes a word for the graph and the marks, and the
//! different records.

use super::canonical::{Arc, Form, Kind, canonical};
use super::view::GraphView;
use crate::language::WordId;
use rayon::prelude::*;
use std::collections::{BTreeMap, HashMap};

/// A type of ball with the number of words that have it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BallType {
    /// Its canonical form.
    pub form: Form,
    /// Words with this ball.
    pub count: u64,
    /// True when it is a path with the word in its middle.
    pub is_path: bool,
}

/// The types of balls of one graph, one radius and one kind, the commonest first.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Census {
    /// The order n.
    pub order: usize,
    /// The radius r.
    pub radius: usize,
    /// What isomorphisms keep.
    pub kind: Kind,
    /// p(n).
    pub words: u64,
    /// Words whose balls were looked at one by one.
    pub visited: u64,
    /// The types.
    pub types: Vec<BallType>,
}

impl Census {
    /// Total variation between the census and the line, whose balls are all paths: the share of balls that are none.
    /// (For labelled balls: of the census with labels forgotten.)
    pub fn distance_to_line(&self) -> f64 {
        let paths = self.types.iter().filter(|t| t.is_path);
        let paths: u64 = paths.map(|t| t.count).sum();
        (self.words - paths) as f64 / self.words as f64
    }
}

/// A ball as it was found: number of vertices, then arcs.
type Record = Vec<u16>;

/// No distance: farther than asked for.
const FAR: u8 = u8::MAX;
/// The largest radius.
pub const LARGEST_RADIUS: usize = 64;

/// The ball round a word, its vertices numbered as they are found, the word 0.
///
/// # Panics
/// If the ball has more than 65 535 vertices.
pub fn ball(graph: &GraphView<'_>, centre: WordId, radius: usize) -> (u16, Vec<Arc>) {
    let mut found = Found::new(centre);
    let mut at = 0;
    let mut ring_end = 1;
    for _ in 0..radius {
        while at < ring_end {
            let v = found.words[at];
            graph.neighbours(v).for_each(|w| found.insert(w));
            at += 1;
        }
        ring_end = found.words.len();
    }
    let mut arcs = Vec::new();
    for (number, v) in (0..).zip(&found.words) {
        for arc in graph.out_of(*v) {
            if let Some(target) = found.number(graph.target(arc)) {
                arcs.push((number, target, graph.letter(arc)));
            }
        }
    }
    (found.words.len() as u16, arcs)
}

/// Words numbered as they are found; few of them are searched in a row.
struct Found {
    words: Vec<WordId>,
    numbers: HashMap<WordId, u16>,
}

/// From this many words on they are hashed.
const MANY: usize = 48;

impl Found {
    fn new(centre: WordId) -> Found {
        Found {
            words: vec![centre],
            numbers: HashMap::new(),
        }
    }

    fn number(&self, word: WordId) -> Option<u16> {
        if self.words.len() < MANY {
            let place = self.words.iter().position(|w| *w == word);
            return place.map(|p| p as u16);
        }
        self.numbers.get(&word).copied()
    }

    fn insert(&mut self, word: WordId) {
        if self.number(word).is_some() {
            return;
        }
        assert!(self.words.len() < u16::MAX as usize, "too large a ball");
        self.words.push(word);
        match self.words.len() {
            MANY => self.numbers = self.words.iter().copied().zip(0..).collect(),
            n if n > MANY => {
                self.numbers.insert(word, n as u16 - 1);
            }
            _ => {}
        }
    }
}

/// The type of the ball round one word.
pub fn ball_form(graph: &GraphView<'_>, centre: WordId, radius: usize, kind: Kind) -> Form {
    let (vertices, arcs) = ball(graph, centre, radius);
    canonical(kind, vertices, &arcs)
}

/// Words near special ones, and the rest.
struct Surroundings {
    /// Distance to the nearest special word, up to a reach; `FAR` beyond.
    distance: Vec<u8>,
    /// Words at distance 0, 1, … up to the reach.
    near: Vec<Vec<WordId>>,
    /// Words on cycles without special words, cycle by cycle in order.
    cycles: Vec<Vec<WordId>>,
}

fn surroundings(graph: &GraphView<'_>, reach: usize) -> Surroundings {
    let vertices = graph.vertices() as WordId;
    let mut distance = vec![FAR; vertices as usize];
    let special: Vec<WordId> = (0..vertices).filter(|v| graph.is_special(*v)).collect();
    special.iter().for_each(|v| distance[*v as usize] = 0);
    let mut near = vec![special];
    for d in 1..=reach {
        let mut ring = Vec::new();
        for v in &near[d - 1] {
            for w in graph.neighbours(*v) {
                if distance[w as usize] == FAR {
                    distance[w as usize] = d as u8;
                    ring.push(w);
                }
            }
        }
        near.push(ring);
    }
    let cycles = bare_cycles(graph, &near[0]);
    Surroundings {
        distance,
        near,
        cycles,
    }
}

/// The cycles of words that are all unique. Every other unique word is on a branch out of a special word, or into
/// one without an arc into its first word, which is special itself.
fn bare_cycles(graph: &GraphView<'_>, special: &[WordId]) -> Vec<Vec<WordId>> {
    let mut covered = vec![false; graph.vertices()];
    for s in special {
        covered[*s as usize] = true;
        for arc in graph.out_of(*s) {
            let mut v = graph.target(arc);
            while !covered[v as usize] && !graph.is_special(v) {
                covered[v as usize] = true;
                v = graph.target(graph.out_of(v).start);
            }
        }
    }
    let mut cycles = Vec::new();
    for start in 0..graph.vertices() as WordId {
        let mut cycle = Vec::new();
        let mut v = start;
        while !covered[v as usize] {
            covered[v as usize] = true;
            cycle.push(v);
            v = graph.target(graph.out_of(v).start);
        }
        if !cycle.is_empty() {
            cycles.push(cycle);
        }
    }
    cycles
}

/// The census of one graph for radii 1 … `radii` and the kinds asked for, radius by radius.
///
/// # Panics
/// If the radius is above [`LARGEST_RADIUS`].
pub fn census(graph: &GraphView<'_>, radii: usize, kinds: &[Kind]) -> Vec<Census> {
    assert!(radii <= LARGEST_RADIUS, "a radius within bounds");
    let around = surroundings(graph, radii + 1);
    let mut all = Vec::new();
    for radius in 1..=radii {
        let mut looked_at: Vec<WordId> = around.near[..=radius + 1]
            .iter()
            .flatten()
            .copied()
            .collect();
        let short = around.cycles.iter().filter(|c| c.len() < 2 * radius + 2);
        looked_at.extend(short.flatten());
        for &kind in kinds {
            let mut counts = records(graph, &looked_at, radius, kind);
            if kind == Kind::Labelled {
                for (record, count) in labelled_paths(graph, &around, radius) {
                    *counts.entry(record).or_default() += count;
                }
            } else {
                let bulk = (graph.vertices() - looked_at.len()) as u64;
                if bulk > 0 {
                    *counts.entry(path_record(&vec![0; 2 * radius])).or_default() += bulk;
                }
            }
            all.push(Census {
                order: graph.order(),
                radius,
                kind,
                words: graph.vertices() as u64,
                visited: looked_at.len() as u64,
                types: types(counts, radius, kind),
            });
        }
    }
    all
}

/// The balls round words, equal ones counted together.
fn records(
    graph: &GraphView<'_>,
    words: &[WordId],
    radius: usize,
    kind: Kind,
) -> HashMap<Record, u64> {
    let count = |mut counts: HashMap<Record, u64>, v: &WordId| {
        let (vertices, arcs) = ball(graph, *v, radius);
        let mut record = Vec::with_capacity(1 + 3 * arcs.len());
        record.push(vertices);
        for (from, to, label) in arcs {
            let label = if kind == Kind::Labelled { label } else { 0 };
            record.extend([from, to, u16::from(label)]);
        }
        *counts.entry(record).or_default() += 1;
        counts
    };
    let merge = |mut a: HashMap<Record, u64>, b: HashMap<Record, u64>| {
        for (record, count) in b {
            *a.entry(record).or_default() += count;
        }
        a
    };
    words
        .par_chunks(1 << 14)
        .map(|chunk| chunk.iter().fold(HashMap::new(), count))
        .reduce(HashMap::new, merge)
}

/// A path of 2r arcs with these labels, the root in the middle.
fn path_record(labels: &[u8]) -> Record {
    let r = labels.len() / 2;
    // Places −r … r; numbers 0, then 2i − 1 for i > 0 and 2|i| for i < 0.
    let number = |place: usize| {
        let i = place as i64 - r as i64;
        if i > 0 { 2 * i - 1 } else { -2 * i }
    };
    let mut record = vec![labels.len() as u16 + 1];
    for (place, label) in labels.iter().enumerate() {
        record.extend([
            number(place) as u16,
            number(place + 1) as u16,
            u16::from(*label),
        ]);
    }
    record
}

/// The path balls that are not looked at one by one, with their labels, read off along branches and long cycles.
fn labelled_paths(
    graph: &GraphView<'_>,
    around: &Surroundings,
    radius: usize,
) -> Vec<(Record, u64)> {
    let mut counts: HashMap<Vec<u8>, u64> = HashMap::new();
    let mut window: Vec<u8> = Vec::new();
    // A branch begins at the words at distance exactly r + 1 … and runs through far ones; its labels are taken from
    // the special word at its start on. Each arc out of a special word begins one branch.
    for s in &around.near[0] {
        for arc in graph.out_of(*s) {
            window.clear();
            let mut labels = vec![graph.letter(arc)];
            let mut words = vec![graph.target(arc)];
            while let Some(&v) = words.last().filter(|v| !graph.is_special(**v)) {
                let next = graph.out_of(v).start;
                labels.push(graph.letter(next));
                words.push(graph.target(next));
            }
            for (i, v) in words.iter().enumerate() {
                if (around.distance[*v as usize] as usize) < radius + 2 {
                    continue;
                }
                // Arc i leads into word i; the r arcs before the word are i − r + 1 … i.
                let span = &labels[i + 1 - radius..i + 1 + radius];
                *counts.entry(span.to_vec()).or_default() += 1;
            }
        }
    }
    for cycle in around.cycles.iter().filter(|c| c.len() >= 2 * radius + 2) {
        let letters: Vec<u8> = cycle
            .iter()
            .map(|v| graph.letter(graph.into(*v)[0]))
            .collect();
        let n = cycle.len();
        for i in 0..n {
            let span = (0..2 * radius).map(|k| letters[(i + n + 1 + k - radius) % n]);
            *counts.entry(span.collect()).or_default() += 1;
        }
    }
    let records = counts.into_iter();
    records
        .map(|(labels, count)| (path_record(&labels), count))
        .collect()
}

/// Canonical forms of records, with the words that have them, the commonest first; equal counts in the order of
/// forms.
fn types(counts: HashMap<Record, u64>, radius: usize, kind: Kind) -> Vec<BallType> {
    let records: Vec<(Record, u64)> = counts.into_iter().collect();
    let forms: Vec<(Form, u64)> = records
        .par_iter()
        .map(|(record, count)| {
            let arcs: Vec<Arc> = record[1..]
                .chunks_exact(3)
                .map(|arc| (arc[0], arc[1], arc[2] as u8))
                .collect();
            (canonical(kind, record[0], &arcs), *count)
        })
        .collect();
    let mut by_form: BTreeMap<Form, u64> = BTreeMap::new();
    for (form, count) in forms {
        *by_form.entry(form).or_default() += count;
    }
    let mut types: Vec<BallType> = by_form
        .into_iter()
        .map(|(form, count)| BallType {
            is_path: form.is_path(radius),
            form,
            count,
        })
        .collect();
    types.sort_by(|a, b| b.count.cmp(&a.count).then_with(|| a.form.cmp(&b.form)));
    types
}
