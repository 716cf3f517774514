//! Block frequencies and chord lengths of an ensemble, beside their exact values.
//!
//! Under the invariant measure every place of every orbit follows the same law: the chance of a block is its cylinder
//! measure divided by 2·perimeter, and the mean chord is π·area/perimeter. Places of one orbit depend on each
//! other, orbits do not. So one number is taken from each orbit (the share of its places that show the block, or its mean
//! chord), and the standard error of their mean is that of independent numbers.

use crate::number::{Real, Sign};
use crate::table::facts::{facts, squared_area};
use crate::table::{LetterId, SideId, Table, Vector};
use rug::{Integer, Rational};
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
///
/// Lengths are in units of a power of ten near area over longest side, the size of most chords. It divides coordinates exactly
/// before they are rounded, and the two axes are rounded apart, so a table may be of any size, and much longer one way than
/// the other: see [`PathMeter::fits`].
#[derive(Debug)]
pub struct PathMeter {
    /// Where each side begins.
    corners: Vec<[f64; 2]>,
    /// Unit vectors along the sides.
    along: Vec<[f64; 2]>,
    lengths: Vec<f64>,
    form: Real,
    order: i32,
}

impl PathMeter {
    /// Prepares a table.
    pub fn new(table: &Table) -> PathMeter {
        let (form, origin) = (table.form(), table.corner(0));
        let from_origin: Vec<Vector> = (0..table.sides())
            .map(|i| table.corner(i).minus(origin))
            .collect();
        let sides = (0..table.sides()).map(|i| table.side_vector(i).squared_length(form));
        let longest = sides.max().expect("a table has sides");
        let order = decimal_order(&(squared_area(table, &facts(table)) / longest));
        let place = |v: &Vector| {
            [
                signed_root(&v.x.pow(2), v.x.sign(), order),
                signed_root(&(v.y.pow(2) * form), v.y.sign(), order),
            ]
        };
        let vectors: Vec<[f64; 2]> = (0..table.sides())
            .map(|side| place(&table.side_vector(side)))
            .collect();
        PathMeter {
            corners: from_origin.iter().map(place).collect(),
            along: vectors.iter().map(|v| unit(*v)).collect(),
            lengths: vectors.iter().map(|v| v[0].hypot(v[1])).collect(),
            form: form.clone(),
            order,
        }
    }

    /// The unit of lengths is ten to this power.
    pub fn order(&self) -> i32 {
        self.order
    }

    /// True when floating point holds the table: it is less than 10^300 times as long as wide.
    pub fn fits(&self) -> bool {
        self.corners.iter().flatten().all(|c| c.abs() < 1e300)
    }

    /// The length of the path through the sides of a word from a start, in this meter's unit, in floating point: errors grow
    /// linearly with the hits, far below any sampling error.
    pub fn path_length(&self, start: &super::Start, word: &[SideId]) -> f64 {
        let first = start.side.0 as usize;
        let ([x, y], [u, v]) = (self.corners[first], self.along[first]);
        let way = start.fraction.to_f64() * self.lengths[first];
        let mut p = [x + way * u, y + way * v];
        let (x, y) = (&start.aim.x, &start.aim.y);
        let whole = start.aim.squared_length(&self.form);
        let share = |square: Real, sign: Sign| signed_root(&(&square / &whole), sign, 0);
        let mut d = unit([
            share(x.pow(2), x.sign()),
            share(y.pow(2) * &self.form, y.sign()),
        ]);
        let mut length = 0.0;
        for side in word.iter().skip(1) {
            let side = side.0 as usize;
            let (a, u) = (self.corners[side], self.along[side]);
            let way = ((a[0] - p[0]) * u[1] - (a[1] - p[1]) * u[0]) / (d[0] * u[1] - d[1] * u[0]);
            length += way;
            p = [p[0] + way * d[0], p[1] + way * d[1]];
            let along = 2.0 * (d[0] * u[0] + d[1] * u[1]);
            d = unit([along * u[0] - d[0], along * u[1] - d[1]]);
        }
        length
    }
}

fn unit(v: [f64; 2]) -> [f64; 2] {
    let size = v[0].hypot(v[1]);
    [v[0] / size, v[1] / size]
}

/// The root of a square, with a sign, in units of ten to the power `order`. No square is rounded outside of the range of
/// floating point.
fn signed_root(square: &Real, sign: Sign, order: i32) -> f64 {
    if sign == Sign::Zero {
        return 0.0;
    }
    let own = decimal_order(square);
    let root = (square / &power_of_ten(2 * own)).to_f64().sqrt() * 10f64.powi(own - order);
    match sign {
        Sign::Negative => -root,
        _ => root,
    }
}

/// Ten to a power.
pub fn power_of_ten(exponent: i32) -> Real {
    let power = Integer::from(Integer::u_pow_u(10, exponent.unsigned_abs()));
    Real::from(match exponent {
        0.. => Rational::from(power),
        _ => Rational::from((Integer::from(1), power)),
    })
}

/// The k with 10^k ≤ √square < 10^(k+1), for a positive number.
///
/// # Panics
/// If the number is not positive.
pub fn decimal_order(square: &Real) -> i32 {
    assert_eq!(square.sign(), Sign::Positive, "a square of a length");
    let reaches = |k: i32| *square >= power_of_ten(2 * k);
    // Doubled until k lies between the two ends, then halved.
    let (mut low, mut high) = (-1, 1);
    while !reaches(low) {
        (low, high) = (2 * low, low);
    }
    while reaches(high) {
        (low, high) = (high, 2 * high);
    }
    while high - low > 1 {
        let middle = low + (high - low) / 2;
        if reaches(middle) {
            low = middle;
        } else {
            high = middle;
        }
    }
    low
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Shares 1 and 1/3: mean 2/3, sample variance 2/9, so the standard error of the mean is 1/3.
    #[test]
    fn the_standard_error_is_that_of_a_sample() {
        let mut statistics = Statistics::default();
        for word in [[0, 0, 0], [0, 1, 1]] {
            statistics.add(orbit_shares(&word.map(LetterId), 1, 1.0));
        }
        let found = statistics.block(&[LetterId(0)]).expect("two orbits");
        assert!((found.mean - 2.0 / 3.0).abs() < 1e-15);
        assert!((found.standard_error - 1.0 / 3.0).abs() < 1e-15);
    }

    #[test]
    fn orders_are_those_of_the_decimals() {
        for k in [-400, -77, -2, -1, 0, 1, 2, 3, 150, 1000] {
            let square = power_of_ten(2 * k);
            let less = &square * &Real::from(Rational::from((999_999, 1_000_000)));
            assert_eq!(decimal_order(&square), k);
            assert_eq!(decimal_order(&(&square * &Real::from(99))), k);
            assert_eq!(decimal_order(&less), k - 1);
            assert!((signed_root(&square, Sign::Negative, k) + 1.0).abs() < 1e-15);
        }
    }
}
