//! A slow oracle for the coding languages of polygonal billiards, written from the definition.
//!
//! It shares no code with the crate: exact rationals and integers are all it needs. A table is a simple
//! polygon with rational corners in counterclockwise order; side i joins corner i to corner i + 1. It may have
//! holes ([`Domain`]): their corners follow, clockwise, so the table is on the left of every side. The word
//! of an orbit piece is the list of sides that it hits, the side it starts on included; where sides share
//! letters, the list of their letters.
//!
//! - [`fold`]: one orbit, traced by reflecting the velocity inside the table.
//! - [`unfold`]: all words and all generalized diagonals, from the finitely many ways in which a line can
//!   separate the corners of an unfolding. The module has the proof that none is missed.
//! - [`shapes`]: random tables, degenerate ones included.

// Each test program that includes this module uses a part of it.
#![allow(dead_code, unused_imports)]

pub mod fold;
pub mod shapes;
pub mod unfold;

pub use fold::{Trace, trace, trace_in};
pub use shapes::{is_convex, is_table, random_polygon};
pub use unfold::{diagonals, diagonals_in, languages, languages_in};

use rug::Rational;

/// A point or vector of the plane.
pub type Point = (Rational, Rational);

/// A polygon with holes: all corners, and which corner follows each on its ring.
#[derive(Clone, Debug)]
pub struct Domain {
    pub corners: Vec<Point>,
    pub next: Vec<usize>,
}

impl Domain {
    pub fn polygon(corners: &[Point]) -> Domain {
        Domain::with_holes(corners, &[])
    }

    /// The outline counterclockwise, holes clockwise.
    pub fn with_holes(outline: &[Point], holes: &[Vec<Point>]) -> Domain {
        let mut corners = outline.to_vec();
        let mut next: Vec<usize> = (1..outline.len()).chain([0]).collect();
        for hole in holes {
            let first = corners.len();
            corners.extend(hole.iter().cloned());
            next.extend((first + 1..corners.len()).chain([first]));
        }
        Domain { corners, next }
    }

    pub fn previous(&self, corner: usize) -> usize {
        let found = self.next.iter().position(|&n| n == corner);
        found.expect("a ring is closed")
    }

    pub fn side_vector(&self, side: usize) -> Point {
        between(&self.corners[side], &self.corners[self.next[side]])
    }
}

/// A language with the letters of the sides: `letters[i]` is the letter of side i.
pub fn lettered(
    languages: &[std::collections::BTreeSet<Vec<u8>>],
    letters: &[u8],
) -> Vec<std::collections::BTreeSet<Vec<u8>>> {
    let spell = |word: &Vec<u8>| word.iter().map(|&s| letters[s as usize]).collect();
    languages
        .iter()
        .map(|words| words.iter().map(spell).collect())
        .collect()
}

/// The vector from `from` to `to`.
pub fn between(from: &Point, to: &Point) -> Point {
    (
        Rational::from(&to.0 - &from.0),
        Rational::from(&to.1 - &from.1),
    )
}

/// `u.x · v.y − u.y · v.x`: positive when `v` points to the left of `u`.
pub fn cross(u: &Point, v: &Point) -> Rational {
    Rational::from(&u.0 * &v.1) - Rational::from(&u.1 * &v.0)
}

/// `u.x · v.x + u.y · v.y`.
pub fn dot(u: &Point, v: &Point) -> Rational {
    Rational::from(&u.0 * &v.0) + Rational::from(&u.1 * &v.1)
}

/// `point + step · vector`.
pub fn along(point: &Point, step: &Rational, vector: &Point) -> Point {
    (
        Rational::from(step * &vector.0) + &point.0,
        Rational::from(step * &vector.1) + &point.1,
    )
}

/// The vector `v` reflected across the direction `axis`: `2 (v·axis)/(axis·axis) axis − v`.
pub fn mirrored(v: &Point, axis: &Point) -> Point {
    let twice = dot(v, axis) * 2u32 / dot(axis, axis);
    (
        Rational::from(&twice * &axis.0) - &v.0,
        Rational::from(&twice * &axis.1) - &v.1,
    )
}

/// A table from small integer corners.
pub fn lattice_table(corners: &[(i32, i32)]) -> Vec<Point> {
    corners
        .iter()
        .map(|&(x, y)| (Rational::from(x), Rational::from(y)))
        .collect()
}
