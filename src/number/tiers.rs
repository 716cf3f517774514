//! Signs, and the record of which tier of arithmetic decided them.

use serde::Serialize;
use std::cmp::Ordering;

/// The sign of an exactly known real number.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Sign {
    /// Below zero.
    Negative,
    /// Proved to be zero.
    Zero,
    /// Above zero.
    Positive,
}

impl Sign {
    /// The sign of the negated number.
    pub fn flip(self) -> Sign {
        match self {
            Sign::Negative => Sign::Positive,
            Sign::Zero => Sign::Zero,
            Sign::Positive => Sign::Negative,
        }
    }
}

impl From<Ordering> for Sign {
    fn from(order: Ordering) -> Sign {
        match order {
            Ordering::Less => Sign::Negative,
            Ordering::Equal => Sign::Zero,
            Ordering::Greater => Sign::Positive,
        }
    }
}

/// How often each tier of arithmetic decided an orientation.
///
/// Every tier is sound; they differ in cost. The last one always decides.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Serialize)]
pub struct Tiers {
    /// Floating point, with a proved error bound.
    pub float: u64,
    /// Machine integers (finite reflection group).
    pub integer: u64,
    /// A zero proved by a symmetry of the path.
    pub symmetry: u64,
    /// Enclosures of a few hundred bits.
    pub enclosure: u64,
    /// Integers of any size.
    pub big: u64,
}

impl Tiers {
    /// Adds the counts of a finished part of the work.
    pub fn absorb(&mut self, other: Tiers) {
        self.float += other.float;
        self.integer += other.integer;
        self.symmetry += other.symmetry;
        self.enclosure += other.enclosure;
        self.big += other.big;
    }

    /// The counts in a list, for keeping.
    pub fn to_counts(self) -> [u64; 5] {
        [
            self.float,
            self.integer,
            self.symmetry,
            self.enclosure,
            self.big,
        ]
    }

    /// From such a list.
    pub fn from_counts([float, integer, symmetry, enclosure, big]: [u64; 5]) -> Tiers {
        Tiers {
            float,
            integer,
            symmetry,
            enclosure,
            big,
        }
    }

    /// All decisions.
    pub fn total(&self) -> u64 {
        self.float + self.integer + self.symmetry + self.enclosure + self.big
    }
}
