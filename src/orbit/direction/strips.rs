//! The strips of periodic orbits of a completely periodic direction.
//!
//! When every line from a corner ends in a corner, these segments cut each cell into finitely many intervals,
//! and the flow takes each interval onto another: a cycle of intervals is a strip. The strips fill all copies of the
//! table, which is an exact check.

use super::flow::{Flow, Height};
use super::saddles::{Saddles, table_vector};
use crate::number::Real;
use crate::orbit::trace::Start;
use crate::table::{CornerId, SideId, Vector};
use rug::Rational;
use std::cmp::Ordering;
use std::collections::BTreeMap;

/// A strip of parallel periodic orbits of the table.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct DirectionStrip {
    /// The word of the middle orbit until it closes: its least cyclic shift. It is primitive, except round a hole, where an
    /// odd word may have orbits that close after two turns and none that closes after one; then it is that word twice.
    pub word: Vec<SideId>,
    /// From the start to where the word ends in the unfolded plane. For an odd word the middle orbit closes after
    /// one turn, the others after two.
    pub displacement: Vector,
    /// Difference of heights across the strip: its width is this times √g, divided by the length of the
    /// direction.
    pub breadth: Real,
    /// The start of the middle orbit.
    pub start: Start,
    /// How many strips on the surface of the copies are this one, run through either way.
    pub copies: usize,
}

impl DirectionStrip {
    /// The square of the strip's width.
    pub fn squared_width(&self, flow: &Flow) -> Real {
        let form = flow.table().form();
        &self.breadth * &self.breadth * form / flow.direction().squared_length(form)
    }
}

/// The strips of a completely periodic direction, each once whichever way it is run through, by length of the word, then in
/// the order of the words. Without holes there is one for each class of words under cyclic shift and reversal; orbits that
/// pass a hole on different sides may share a word, and then come in the order of the points where the middle orbits hit
/// the sides.
///
/// `None` when some line from a corner is not known to close.
pub fn strips(flow: &Flow, saddles: &Saddles) -> Option<Vec<DirectionStrip>> {
    if !saddles.all_close() {
        return None;
    }
    let boundaries = boundaries(flow, saddles);
    let mut seen: Vec<Vec<bool>> = boundaries
        .iter()
        .map(|b| vec![false; b.len() - 1])
        .collect();
    #[expect(
        clippy::mutable_key_type,
        reason = "the caches inside a field take no part in order or equality"
    )]
    let mut classes: BTreeMap<(usize, Vec<SideId>, Hits), DirectionStrip> = BTreeMap::new();
    for cell in 0..boundaries.len() {
        for interval in 0..boundaries[cell].len() - 1 {
            if seen[cell][interval] {
                continue;
            }
            let cycle = cycle(flow, &boundaries, (cell, interval), &mut seen);
            let strip = strip(flow, &boundaries, &cycle);
            let mut reversed = strip.word.clone();
            reversed.reverse();
            let class = rotated(&reversed, least_rotation(&reversed)).min(strip.word.clone());
            let hits = match flow.table().holes() {
                0 => Hits::new(),
                _ => hits(flow, &boundaries, &cycle),
            };
            let known = classes.entry((class.len(), class, hits));
            let known = known.or_insert_with(|| DirectionStrip {
                copies: 0,
                ..strip.clone()
            });
            let copies = known.copies + 1;
            if strip.word < known.word {
                *known = strip;
            }
            known.copies = copies;
        }
    }
    Some(classes.into_values().collect())
}

/// The ends of the intervals of each cell.
fn boundaries(flow: &Flow, saddles: &Saddles) -> Vec<Vec<Height>> {
    let mut all: Vec<Vec<Height>> = flow
        .cells()
        .iter()
        .map(|c| vec![c.low.clone(), c.high.clone()])
        .collect();
    for (cell, height) in &saddles.cuts {
        all[*cell].push(height.clone());
    }
    for ends in &mut all {
        ends.sort_by(|a, b| flow.order(a, b));
        ends.dedup_by(|a, b| flow.order(a, b) == Ordering::Equal);
    }
    all
}

/// An interval of a cycle, and what the way grows by on the crossing into it.
struct Stage {
    cell: usize,
    interval: usize,
    way_shift: Real,
}

fn cycle(
    flow: &Flow,
    boundaries: &[Vec<Height>],
    first: (usize, usize),
    seen: &mut [Vec<bool>],
) -> Vec<Stage> {
    let mut stages = Vec::new();
    let (mut cell, mut interval) = first;
    loop {
        seen[cell][interval] = true;
        let low = &boundaries[cell][interval];
        let branch = flow.branches()[flow.cells()[cell].branches.clone()]
            .iter()
            .find(|b| flow.order(low, &b.high) == Ordering::Less)
            .expect("the branches fill their cell");
        let image = low.plus(&branch.shift);
        cell = branch.target;
        interval = boundaries[cell]
            .binary_search_by(|b| flow.order(b, &image))
            .expect("the cuts are carried onto cuts");
        stages.push(Stage {
            cell,
            interval,
            way_shift: branch.way_shift.clone(),
        });
        if (cell, interval) == first {
            return stages;
        }
    }
}

/// Where an orbit hits the sides, in order of the sides, then of the fractions: the same for both ways round.
type Hits = Vec<(SideId, Real)>;

fn hits(flow: &Flow, boundaries: &[Vec<Height>], cycle: &[Stage]) -> Hits {
    let hit = |stage: &Stage| {
        let side = flow.cells()[stage.cell].side;
        (side, middle_fraction(flow, boundaries, stage))
    };
    let mut hits: Hits = cycle.iter().map(hit).collect();
    hits.sort();
    hits.dedup();
    hits
}

/// Where the middle of an interval lies on its side, as a fraction of the way from the side's first corner.
fn middle_fraction(flow: &Flow, boundaries: &[Vec<Height>], stage: &Stage) -> Real {
    let (low, high) = (
        &boundaries[stage.cell][stage.interval].exact,
        &boundaries[stage.cell][stage.interval + 1].exact,
    );
    let middle = (low + high) * Real::from(Rational::from((1, 2)));
    let cell = &flow.cells()[stage.cell];
    let corner = |i: usize| &flow.height(cell.copy, CornerId(i as u8)).exact;
    let side = cell.side.0 as usize;
    let (first, second) = (corner(side), corner(flow.table().after(side)));
    &(first - &middle) / &(first - second)
}

fn strip(flow: &Flow, boundaries: &[Vec<Height>], cycle: &[Stage]) -> DirectionStrip {
    let code: Vec<SideId> = cycle.iter().map(|s| flow.cells()[s.cell].side).collect();
    let root = root_length(&code);
    // The middle orbit has closed when it is back at its point on the side; then it runs in the same direction too, since
    // the word is back where it began.
    let fraction = |stage: &Stage| middle_fraction(flow, boundaries, stage);
    let period = match root < code.len() && fraction(&cycle[0]) != fraction(&cycle[root]) {
        true => code.len(),
        false => root,
    };
    let turns = code.len() / period;
    let word = &code[..period];
    let at = least_rotation(word);
    let stage = &cycle[at];
    let cell = &flow.cells()[stage.cell];
    let (low, high) = (
        &boundaries[stage.cell][stage.interval].exact,
        &boundaries[stage.cell][stage.interval + 1].exact,
    );
    // What the crossings take from the way, the flow has added.
    let way = cycle
        .iter()
        .fold(Real::from(0), |sum, stage| sum - &stage.way_shift)
        * Real::from(Rational::from((1, turns as u64)));
    DirectionStrip {
        word: rotated(word, at),
        displacement: table_vector(flow, cell.copy, &way),
        breadth: high - low,
        start: Start {
            side: cell.side,
            fraction: fraction(stage),
            aim: flow.table_direction(cell.copy),
        },
        copies: 1,
    }
}

/// The length of the shortest word of which the given one is a power.
fn root_length(word: &[SideId]) -> usize {
    let n = word.len();
    (1..=n)
        .find(|p| n.is_multiple_of(*p) && (*p..n).all(|i| word[i] == word[i - p]))
        .unwrap_or(n)
}

fn rotated(word: &[SideId], by: usize) -> Vec<SideId> {
    [&word[by..], &word[..by]].concat()
}

/// Where the least cyclic shift begins.
///
/// Two candidates are compared letter by letter; the one that loses after l equal letters takes the l shifts
/// that follow it out too, so the cost is linear.
fn least_rotation(word: &[SideId]) -> usize {
    let n = word.len();
    let (mut i, mut j, mut l) = (0, 1, 0);
    while i < n && j < n && l < n {
        match word[(i + l) % n].cmp(&word[(j + l) % n]) {
            Ordering::Equal => {
                l += 1;
                continue;
            }
            Ordering::Greater => i += l + 1,
            Ordering::Less => j += l + 1,
        }
        if i == j {
            j += 1;
        }
        l = 0;
    }
    i.min(j)
}
