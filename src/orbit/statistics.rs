//! Block frequencies and chord lengths of an ensemble, beside their exact values.
//!
//! Under the invariant measure every place of every orbit follows the same law: the chance of a block is its cylinder
//! measure divided by 2·perimeter, and the mean chord is π·area/perimeter. Places of one orbit depend on each
//! other, orbits do not. So one number is taken from each orbit (the share of its places that show the block, or its mean
//! chord), and the standard error of their mean is that of independent numbers.

use crate::table::{LetterId, SideId, Table};
use std::collections::BTreeMap;

/// Sums over orbits of a number per orbit.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
struct Sums {
    first: f64,
    second: f64,
}

impl Sums {
    fn add(&mut self, value: f64) {
        self.first += value;
        self.second += value * value;
    }

    fn estimate(&self, count: u64) -> Estimate {
        let n = count as f64;
        let mean = self.first / n;
        let variance = (self.second / n - mean * mean).max(0.0) * n / (n - 1.0);
        Estimate {
            mean,
            standard_error: (variance / n).sqrt(),
        }
    }
}

/// A mean over orbits.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Estimate {
    /// The mean.
    pub mean: f64,
    /// Its standard error.
    pub standard_error: f64,
}

impl Estimate {
    /// How many standard errors the mean is above a value.
    pub fn z(&self, exact: f64) -> f64 {
        let difference = self.mean - exact;
        if difference == 0.0 {
            0.0
        } else {
            difference / self.standard_error
        }
    }
}

/// What one orbit contributes.
#[derive(Clone, Debug, PartialEq)]
pub struct OrbitShares {
    /// For each block met: the share of places that show it.
    blocks: Vec<(Vec<LetterId>, f64)>,
    mean_chord: f64,
}

/// Shares of blocks of length 1 … `longest` in a word, and the mean of its chords.
///
/// # Panics
/// If the word has fewer than two letters or than `longest`.
pub fn orbit_shares(word: &[LetterId], longest: usize, path_length: f64) -> OrbitShares {
    assert!(word.len() >= longest.max(2), "a word has each block length");
    let mut counts: BTreeMap<&[LetterId], u64> = BTreeMap::new();
    for length in 1..=longest {
        for block in word.windows(length) {
            *counts.entry(block).or_default() += 1;
        }
    }
    let share = |(block, count): (&[LetterId], u64)| {
        let places = word.len() - block.len() + 1;
        (block.to_vec(), count as f64 / places as f64)
    };
    OrbitShares {
        blocks: counts.into_iter().map(share).collect(),
        mean_chord: path_length / (word.len() - 1) as f64,
    }
}

/// Sums over an ensemble.
#[derive(Clone, Debug, Default, PartialEq)]
pub struct Statistics {
    orbits: u64,
    blocks: BTreeMap<Vec<LetterId>, Sums>,
    chord: Sums,
}

impl Statistics {
    /// Adds an orbit. The sums depend on the order, so orbits are added in theirs.
    pub fn add(&mut self, shares: OrbitShares) {
        self.orbits += 1;
        for (block, share) in shares.blocks {
            self.blocks.entry(block).or_default().add(share);
        }
        self.chord.add(shares.mean_chord);
    }

    /// Orbits added.
    pub fn orbits(&self) -> u64 {
        self.orbits
    }

    /// The mean chord; `None` before two orbits.
    pub fn chord(&self) -> Option<Estimate> {
        (self.orbits >= 2).then(|| self.chord.estimate(self.orbits))
    }

    /// The frequency of a block; `None` before two orbits.
    pub fn block(&self, block: &[LetterId]) -> Option<Estimate> {
        let sums = self.blocks.get(block).copied().unwrap_or_default();
        (self.orbits >= 2).then(|| sums.estimate(self.orbits))
    }

    /// The blocks met.
    pub fn blocks(&self) -> impl Iterator<Item = &[LetterId]> {
        self.blocks.keys().map(Vec::as_slice)
    }
}

/// A table in floating point, for measuring paths whose sides are known.
#[derive(Debug)]
pub struct PathMeter {
    corners: Vec<[f64; 2]>,
    /// Where each side ends.
    ends: Vec<usize>,
    root_form: f64,
}

impl PathMeter {
    /// Prepares a table.
    pub fn new(table: &Table) -> PathMeter {
        let root_form = table.form().to_f64().sqrt();
        PathMeter {
            corners: table
                .corners()
                .iter()
                .map(|c| [c.x.to_f64(), c.y.to_f64() * root_form])
                .collect(),
            ends: (0..table.sides()).map(|side| table.after(side)).collect(),
            root_form,
        }
    }

    /// The length of the path through the sides of a word from a start, in floating point: errors grow linearly with
    /// the hits, far below any sampling error.
    pub fn path_length(&self, start: &super::Start, word: &[SideId]) -> f64 {
        let ends = |side: SideId| {
            let a = self.corners[side.0 as usize];
            (a, self.corners[self.ends[side.0 as usize]])
        };
        let (a, b) = ends(start.side);
        let t = start.fraction.to_f64();
        let mut p = [a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])];
        let aim = [start.aim.x.to_f64(), start.aim.y.to_f64() * self.root_form];
        let size = aim[0].hypot(aim[1]);
        let mut d = [aim[0] / size, aim[1] / size];
        let mut length = 0.0;
        for side in word.iter().skip(1) {
            let (a, b) = ends(*side);
            let u = [b[0] - a[0], b[1] - a[1]];
            let way = ((a[0] - p[0]) * u[1] - (a[1] - p[1]) * u[0]) / (d[0] * u[1] - d[1] * u[0]);
            length += way;
            p = [p[0] + way * d[0], p[1] + way * d[1]];
            let along = 2.0 * (d[0] * u[0] + d[1] * u[1]) / (u[0] * u[0] + u[1] * u[1]);
            d = [along * u[0] - d[0], along * u[1] - d[1]];
            let size = d[0].hypot(d[1]);
            d = [d[0] / size, d[1] / size];
        }
        length
    }
}
