//! Random tables: simple polygons with rational corners, counterclockwise, without straight corners.
//!
//! Nonconvex ones grow from a triangle: a random new corner is put between the ends of a random side when
//! the polygon stays simple. Right-angled ones grow from a rectangle by notches. Convex ones are corners of
//! the hull of random points. The places come from grids of several kinds, by chance: a tiny lattice (many
//! parallel sides and collinear corners), a moderate one, a flattened one (tiny angles), big fractions, and a
//! tiny lattice that is slightly disturbed.

use super::{Point, between, cross, dot};
use rug::Rational;
use std::cmp::Ordering;

/// A simple polygon with the given number of corners that depends on the arguments alone.
///
/// When `convex` is false and there are at least four corners, the polygon isn't convex.
///
/// # Panics
/// For fewer than three corners.
pub fn random_polygon(seed: u64, corners: usize, convex: bool) -> Vec<Point> {
    assert!(corners >= 3, "{corners} corners");
    let mut random = Random(seed ^ ((corners as u64) << 48) ^ ((convex as u64) << 40));
    let grid = Grid::pick(&mut random);
    let notched = !convex && corners >= 6 && corners.is_multiple_of(2) && random.below(4) == 0;
    // Every round has a positive chance once the grid is wide enough, and the grid widens.
    for round in 0.. {
        let extent = 3 + corners as u64 / 2 + round / 20;
        let mut place = |random: &mut Random| grid.place(random, extent);
        let attempt = if convex {
            hull_polygon(&mut random, corners, &mut place)
        } else if notched {
            notched_rectangle(&mut random, corners, extent)
        } else {
            grown_polygon(&mut random, corners, &mut place)
        };
        let Some(mut polygon) = attempt else { continue };
        if doubled_area(&polygon) < 0 {
            polygon.reverse();
        }
        if convex || corners == 3 || !is_convex(&polygon) {
            assert!(is_table(&polygon), "seed {seed}");
            return polygon;
        }
    }
    unreachable!("the loop has no end of its own")
}

/// Steele, Lea and Flood's SplitMix64 (OOPSLA 2014), constants from memory.
pub struct Random(pub u64);

impl Random {
    /// The next 64 bits.
    pub fn bits(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9E37_79B9_7F4A_7C15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
        z ^ (z >> 31)
    }

    /// A number below `bound`, nearly uniform.
    pub fn below(&mut self, bound: u64) -> u64 {
        self.bits() % bound
    }
}

#[derive(Clone, Copy)]
enum Grid {
    Lattice,
    Moderate,
    Flat,
    BigFractions,
    Disturbed,
}

impl Grid {
    fn pick(random: &mut Random) -> Grid {
        match random.below(6) {
            0 | 1 => Grid::Lattice,
            2 => Grid::Moderate,
            3 => Grid::Flat,
            4 => Grid::BigFractions,
            _ => Grid::Disturbed,
        }
    }

    /// A random place in the square of about the given extent (flattened for flat grids).
    fn place(self, random: &mut Random, extent: u64) -> Point {
        let mut number = |step: u64| {
            let whole = Rational::from(random.below(extent * step + 1));
            whole / step
        };
        match self {
            Grid::Lattice => (number(1), number(1)),
            Grid::Moderate => (number(6), number(4)),
            Grid::Flat => (number(5), number(5) / 61u32),
            Grid::BigFractions => (number(99_991), number(1_000_003)),
            Grid::Disturbed => {
                let (x, y) = (number(1), number(1));
                (x + number(1) / 10_007u32, y + number(1) / 10_007u32)
            }
        }
    }
}

/// Adds random corners to a random triangle; nothing when that fails many times over.
fn grown_polygon(
    random: &mut Random,
    corners: usize,
    place: &mut impl FnMut(&mut Random) -> Point,
) -> Option<Vec<Point>> {
    let mut polygon: Vec<Point> = (0..3).map(|_| place(random)).collect();
    for _ in 0..30 * corners {
        if polygon.len() == corners {
            break;
        }
        let mut larger = polygon.clone();
        let at = random.below(polygon.len() as u64 + 1) as usize;
        larger.insert(at, place(random));
        if is_simple(&larger) {
            polygon = larger;
        }
    }
    (polygon.len() == corners && is_simple(&polygon)).then_some(polygon)
}

/// Replaces corners of a rectangle by notches, each of which adds two corners.
fn notched_rectangle(random: &mut Random, corners: usize, extent: u64) -> Option<Vec<Point>> {
    let mut size = || Rational::from(2 + random.below(extent));
    let (width, height) = (size(), size());
    let zero = Rational::new();
    let mut polygon = vec![
        (zero.clone(), zero.clone()),
        (width.clone(), zero.clone()),
        (width, height.clone()),
        (zero, height),
    ];
    for _ in 0..30 * corners {
        if polygon.len() == corners {
            break;
        }
        let k = polygon.len();
        let at = random.below(k as u64) as usize;
        let corner = polygon[at].clone();
        let mut step_to = |other: &Point| {
            let fraction = Rational::from((1 + random.below(2), 2 + random.below(3)));
            super::along(&corner, &fraction, &between(&corner, other))
        };
        let back = step_to(&polygon[(at + k - 1) % k]);
        let ahead = step_to(&polygon[(at + 1) % k]);
        let inner = (
            Rational::from(&back.0 + &ahead.0) - &corner.0,
            Rational::from(&back.1 + &ahead.1) - &corner.1,
        );
        let mut larger = polygon.clone();
        larger.splice(at..=at, [back, inner, ahead]);
        if is_simple(&larger) {
            polygon = larger;
        }
    }
    (polygon.len() == corners).then_some(polygon)
}

/// Random corners of the hull of random points; nothing when the hull has too few.
fn hull_polygon(
    random: &mut Random,
    corners: usize,
    place: &mut impl FnMut(&mut Random) -> Point,
) -> Option<Vec<Point>> {
    let mut points: Vec<Point> = (0..3 * corners).map(|_| place(random)).collect();
    points.sort();
    points.dedup();
    let mut hull = half_hull(points.iter());
    hull.extend(half_hull(points.iter().rev()));
    while hull.len() > corners {
        hull.remove(random.below(hull.len() as u64) as usize);
    }
    (hull.len() == corners && is_simple(&hull)).then_some(hull)
}

/// The strict left turns from the first to the last of the sorted points; the last point is left out.
fn half_hull<'a>(points: impl Iterator<Item = &'a Point>) -> Vec<Point> {
    let mut chain: Vec<Point> = Vec::new();
    for point in points {
        while let [.., a, b] = chain.as_slice()
            && turn(a, b, point) != Ordering::Greater
        {
            chain.pop();
        }
        chain.push(point.clone());
    }
    chain.pop();
    chain
}

/// True for a simple counterclockwise polygon without straight corners.
pub fn is_table(polygon: &[Point]) -> bool {
    is_simple(polygon) && doubled_area(polygon) > 0
}

/// True when every corner of a counterclockwise polygon turns left.
pub fn is_convex(polygon: &[Point]) -> bool {
    let k = polygon.len();
    (0..k).all(|i| {
        turn(&polygon[i], &polygon[(i + 1) % k], &polygon[(i + 2) % k]) == Ordering::Greater
    })
}

/// No corner is straight or folded back, and sides without a common corner have no common point.
fn is_simple(polygon: &[Point]) -> bool {
    let k = polygon.len();
    let side = |i: usize| (&polygon[i], &polygon[(i + 1) % k]);
    let bent = (0..k).all(|i| turn(side(i).0, side(i).1, &polygon[(i + 2) % k]).is_ne());
    let apart = |i: usize| {
        (i + 2..k)
            .filter(|&j| (j + 1) % k != i)
            .all(|j| !meet(side(i), side(j)))
    };
    bent && (0..k).all(apart)
}

/// True when two closed segments have a common point.
fn meet((a, b): (&Point, &Point), (c, d): (&Point, &Point)) -> bool {
    let on_segment = |p: &Point, q: &Point, r: &Point| {
        turn(p, q, r).is_eq() && dot(&between(r, p), &between(r, q)) <= 0
    };
    let split = |p: &Point, q: &Point, r: &Point, s: &Point| {
        turn(p, q, r).is_ne() && turn(p, q, r) == turn(p, q, s).reverse()
    };
    split(a, b, c, d) && split(c, d, a, b)
        || on_segment(a, b, c)
        || on_segment(a, b, d)
        || on_segment(c, d, a)
        || on_segment(c, d, b)
}

/// `Greater` for a left turn from a over b to c, `Equal` when they are collinear.
fn turn(a: &Point, b: &Point, c: &Point) -> Ordering {
    cross(&between(a, b), &between(a, c)).cmp0()
}

fn doubled_area(polygon: &[Point]) -> Rational {
    let k = polygon.len();
    (0..k)
        .map(|i| cross(&polygon[i], &polygon[(i + 1) % k]))
        .sum()
}
