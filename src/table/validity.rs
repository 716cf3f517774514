//! Which polygons are tables.
//!
//! A table is a simple polygon: sides meet only at common corners, no corner repeats, none is straight. Holes
//! are simple polygons too, disjoint from the outline and from each other, inside the outline and outside the
//! other holes.
//! All tests are exact orientations and comparisons in the table's field; a floating-point filter with a
//! proved bound decides most of them. Cost: k²/2 pairs of sides.

use super::{MOST_SIDES, Ring, Vector, orientation};
use crate::number::{Real, Sign};
use thiserror::Error;

/// Why a polygon is not a table. Corners and sides are numbered from 0 in the order given: those of the
/// outline, then those of each hole. Holes are numbered from 0.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum TableFault {
    /// Fewer than three corners.
    #[error("a table needs at least 3 corners, this one has {count}")]
    TooFewCorners {
        /// How many there are.
        count: usize,
    },
    /// More sides than the program can index.
    #[error("a table can have at most {MOST_SIDES} corners, this one has {count}")]
    TooManyCorners {
        /// How many there are.
        count: usize,
    },
    /// Two corners at the same point.
    #[error("corners {first} and {second} are the same point")]
    RepeatedCorner {
        /// The earlier corner.
        first: usize,
        /// The later corner.
        second: usize,
    },
    /// A corner lies on a side that does not end there.
    #[error("corner {corner} lies on side {side}")]
    CornerOnSide {
        /// The corner.
        corner: usize,
        /// The side that passes through it.
        side: usize,
    },
    /// Two sides cross.
    #[error("sides {first} and {second} cross")]
    SidesCross {
        /// The earlier side.
        first: usize,
        /// The later side.
        second: usize,
    },
    /// All corners on one line.
    #[error("the table has zero area: all its corners lie on one line")]
    ZeroArea,
    /// A corner with an angle of 180 degrees.
    #[error("corner {corner} is straight: it lies on the segment between its neighbours")]
    StraightCorner {
        /// The corner.
        corner: usize,
    },
    /// The side turns back on itself at a corner.
    #[error("at corner {corner} the boundary turns back along the side it came from")]
    FoldedCorner {
        /// The corner.
        corner: usize,
    },
    /// Not one letter for each side.
    #[error("{letters} letters for {sides} sides")]
    LetterCount {
        /// Letters given.
        letters: usize,
        /// Sides of the polygon.
        sides: usize,
    },
    /// The plane form is not positive.
    #[error("the plane form must be positive, it is {value}")]
    FormNotPositive {
        /// Its value as a decimal.
        value: String,
    },
    /// Fewer than three corners in a hole.
    #[error("a hole needs at least 3 corners, hole {hole} has {count}")]
    HoleTooFewCorners {
        /// The hole.
        hole: usize,
        /// How many there are.
        count: usize,
    },
    /// All corners of a hole on one line.
    #[error("hole {hole} has zero area: all its corners lie on one line")]
    HoleZeroArea {
        /// The hole.
        hole: usize,
    },
    /// A hole that lies outside the outline.
    #[error("hole {hole} lies outside the outline of the table")]
    HoleOutside {
        /// The hole.
        hole: usize,
    },
    /// A hole that lies inside another hole.
    #[error("hole {inner} lies inside hole {outer}")]
    HoleInHole {
        /// The hole inside.
        inner: usize,
        /// The hole around it.
        outer: usize,
    },
}

/// The direction in which the corners run round the table.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Turn {
    /// The usual order.
    Counterclockwise,
    /// To be turned round.
    Clockwise,
}

/// Checks everything that [`super::Table::with_holes`] promises; the first ring is the outline. Returns the
/// direction of each ring.
pub fn check(rings: &[Ring], form: &Real) -> Result<Vec<Turn>, TableFault> {
    check_counts(rings, form)?;
    let all = Boundary::new(rings);
    check_distinct(&all.corners)?;
    for (r, ring) in rings.iter().enumerate() {
        let corners = &ring.corners;
        let on_line = |c: &Vector| orientation(&corners[0], &corners[1], c) == Sign::Zero;
        if corners.iter().all(on_line) {
            return Err(match r.checked_sub(1) {
                None => TableFault::ZeroArea,
                Some(hole) => TableFault::HoleZeroArea { hole },
            });
        }
    }
    check_corners(&all)?;
    check_sides(&all)?;
    check_places(rings)?;
    Ok(rings.iter().map(|ring| turn(&ring.corners)).collect())
}

fn check_counts(rings: &[Ring], form: &Real) -> Result<(), TableFault> {
    if form.sign() != Sign::Positive {
        return Err(TableFault::FormNotPositive {
            value: form.decimal(6),
        });
    }
    for (r, ring) in rings.iter().enumerate() {
        let count = ring.corners.len();
        if count < 3 {
            return Err(match r.checked_sub(1) {
                None => TableFault::TooFewCorners { count },
                Some(hole) => TableFault::HoleTooFewCorners { hole, count },
            });
        }
        if ring.letters.len() != count {
            return Err(TableFault::LetterCount {
                letters: ring.letters.len(),
                sides: count,
            });
        }
    }
    let count = rings.iter().map(|ring| ring.corners.len()).sum();
    if count > MOST_SIDES {
        return Err(TableFault::TooManyCorners { count });
    }
    Ok(())
}

fn check_distinct(corners: &[&Vector]) -> Result<(), TableFault> {
    #[expect(
        clippy::mutable_key_type,
        reason = "the caches inside a field take no part in equality or hash"
    )]
    let mut seen = std::collections::HashMap::new();
    for (second, corner) in corners.iter().enumerate() {
        if let Some(first) = seen.insert(*corner, second) {
            return Err(TableFault::RepeatedCorner { first, second });
        }
    }
    Ok(())
}

/// Corners where the two sides lie on one line.
fn check_corners(all: &Boundary<'_>) -> Result<(), TableFault> {
    for corner in 0..all.corners.len() {
        let before = all.corners[all.before[corner]];
        let (here, after) = (all.corners[corner], all.corners[all.after[corner]]);
        if orientation(before, here, after) != Sign::Zero {
            continue;
        }
        return Err(if strictly_between(before, after, here) {
            TableFault::StraightCorner { corner }
        } else {
            TableFault::FoldedCorner { corner }
        });
    }
    Ok(())
}

/// That each hole lies inside the outline and outside the other holes. Since the rings do not touch, one
/// corner tells for the whole hole.
fn check_places(rings: &[Ring]) -> Result<(), TableFault> {
    let holes = &rings[1..];
    for (hole, ring) in holes.iter().enumerate() {
        if !surrounds(&rings[0].corners, &ring.corners[0]) {
            return Err(TableFault::HoleOutside { hole });
        }
    }
    for (hole, ring) in holes.iter().enumerate() {
        for (outer, other) in holes.iter().enumerate() {
            if outer != hole && surrounds(&other.corners, &ring.corners[0]) {
                return Err(TableFault::HoleInHole { inner: hole, outer });
            }
        }
    }
    Ok(())
}

/// True when a point that is not on a simple polygon lies inside it: the ray in the direction (1, 0) meets an
/// odd number of its sides, a side counting with its lower end and without its upper one.
fn surrounds(polygon: &[Vector], point: &Vector) -> bool {
    let mut inside = false;
    for (i, from) in polygon.iter().enumerate() {
        let to = &polygon[(i + 1) % polygon.len()];
        let upward = from.y <= point.y && point.y < to.y;
        let downward = to.y <= point.y && point.y < from.y;
        let side = || orientation(from, to, point);
        if upward && side() == Sign::Positive || downward && side() == Sign::Negative {
            inside = !inside;
        }
    }
    inside
}

/// The corners of all rings with floating-point copies of them.
pub(super) struct Boundary<'a> {
    corners: Vec<&'a Vector>,
    /// The corner before and after each on its ring.
    before: Vec<usize>,
    after: Vec<usize>,
    copies: Vec<(f64, f64)>,
    /// A determinant of the copies beyond this has the right sign.
    error: f64,
}

impl<'a> Boundary<'a> {
    fn new(rings: &'a [Ring]) -> Boundary<'a> {
        let mut sizes = Vec::new();
        let mut corners = Vec::new();
        for ring in rings {
            sizes.push(ring.corners.len());
            corners.extend(&ring.corners);
        }
        Boundary::of(corners, &sizes)
    }

    /// From the corners of all rings, and the number of corners of each.
    ///
    /// The bound: let M be the largest absolute value of a copy. [`Real::to_f64`] is the nearest number or
    /// a neighbour, so a copy is off by at most 2⁻⁵¹·M, a difference of two by 5·2⁻⁵²·M (its own rounding
    /// included), a product of two differences by 22·2⁻⁵²·M², and the difference of two products, itself
    /// rounded, by 48·2⁻⁵²·M² < 2⁻⁴⁶·M².
    pub(super) fn of(corners: Vec<&'a Vector>, sizes: &[usize]) -> Boundary<'a> {
        let (mut before, mut after) = (Vec::new(), Vec::new());
        for &size in sizes {
            let start = before.len();
            before.extend((0..size).map(|i| start + (i + size - 1) % size));
            after.extend((0..size).map(|i| start + (i + 1) % size));
        }
        let copies: Vec<(f64, f64)> = corners
            .iter()
            .map(|c| (c.x.to_f64(), c.y.to_f64()))
            .collect();
        let largest = copies
            .iter()
            .fold(0.0_f64, |m, (x, y)| m.max(x.abs()).max(y.abs()));
        let bound = largest * largest * (-46_f64).exp2();
        // Out of the range of normal numbers the bound does not hold: always take the exact route.
        let error = if bound.is_normal() {
            bound
        } else {
            f64::INFINITY
        };
        Boundary {
            corners,
            before,
            after,
            copies,
            error,
        }
    }

    /// The orientation of three corners.
    pub(super) fn orientation(&self, a: usize, b: usize, c: usize) -> Sign {
        let [(ax, ay), (bx, by), (cx, cy)] = [a, b, c].map(|i| self.copies[i]);
        let determinant = (bx - ax) * (cy - ay) - (by - ay) * (cx - ax);
        if determinant > self.error {
            Sign::Positive
        } else if determinant < -self.error {
            Sign::Negative
        } else {
            orientation(self.corners[a], self.corners[b], self.corners[c])
        }
    }

    /// True when corner c lies strictly inside the segment from corner a to corner b.
    pub(super) fn on_segment(&self, a: usize, b: usize, c: usize) -> bool {
        self.orientation(a, b, c) == Sign::Zero
            && strictly_between(self.corners[a], self.corners[b], self.corners[c])
    }

    /// True when the segments ab and cd cross at a point inside both.
    pub(super) fn cross_properly(&self, [a, b]: [usize; 2], [c, d]: [usize; 2]) -> bool {
        let opposite = |s: Sign, t: Sign| s != Sign::Zero && s == t.flip();
        opposite(self.orientation(a, b, c), self.orientation(a, b, d))
            && opposite(self.orientation(c, d, a), self.orientation(c, d, b))
    }
}

fn check_sides(all: &Boundary<'_>) -> Result<(), TableFault> {
    let k = all.corners.len();
    let ends = |side: usize| [side, all.after[side]];
    for first in 0..k {
        for second in first + 1..k {
            for (side, other) in [(first, second), (second, first)] {
                let [a, b] = ends(side);
                for corner in ends(other) {
                    if corner != a && corner != b && all.on_segment(a, b, corner) {
                        return Err(TableFault::CornerOnSide { corner, side });
                    }
                }
            }
            if all.cross_properly(ends(first), ends(second)) {
                return Err(TableFault::SidesCross { first, second });
            }
        }
    }
    Ok(())
}

/// True when c, known to be collinear with a and b, lies strictly between them.
fn strictly_between(a: &Vector, b: &Vector, c: &Vector) -> bool {
    let inside = |p: &Real, q: &Real, r: &Real| (p < r && r < q) || (q < r && r < p);
    inside(&a.x, &b.x, &c.x) || inside(&a.y, &b.y, &c.y)
}

/// The corner that is least in (x, y) order is convex; the turn there is the turn of the polygon.
fn turn(corners: &[Vector]) -> Turn {
    let k = corners.len();
    let least = (0..k)
        .min_by(|&i, &j| (&corners[i].x, &corners[i].y).cmp(&(&corners[j].x, &corners[j].y)))
        .expect("at least three corners");
    let (before, after) = (&corners[(least + k - 1) % k], &corners[(least + 1) % k]);
    match orientation(before, &corners[least], after) {
        Sign::Negative => Turn::Clockwise,
        _ => Turn::Counterclockwise,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::{SideId, Table, default_letters};

    fn points(coordinates: &[(i64, i64)]) -> Vec<Vector> {
        coordinates
            .iter()
            .map(|&(x, y)| Vector::new(x.into(), y.into()))
            .collect()
    }

    fn fault(coordinates: &[(i64, i64)]) -> TableFault {
        let letters = default_letters(coordinates.len());
        Table::new("", points(coordinates), 1.into(), letters).expect_err("a fault")
    }

    #[test]
    fn each_fault_names_its_place() {
        assert_eq!(
            fault(&[(0, 0), (1, 0)]),
            TableFault::TooFewCorners { count: 2 }
        );
        let repeated = fault(&[(0, 0), (2, 0), (1, 1), (0, 2), (2, 0)]);
        assert_eq!(
            repeated,
            TableFault::RepeatedCorner {
                first: 1,
                second: 4
            }
        );
        let touching = fault(&[(0, 0), (4, 0), (4, 4), (2, 0), (0, 4)]);
        assert_eq!(touching, TableFault::CornerOnSide { corner: 3, side: 0 });
        let bow = fault(&[(0, 0), (2, 2), (2, 0), (0, 2)]);
        assert_eq!(
            bow,
            TableFault::SidesCross {
                first: 0,
                second: 2
            }
        );
        assert_eq!(fault(&[(0, 0), (1, 1), (2, 2)]), TableFault::ZeroArea);
        let straight = fault(&[(0, 0), (1, 0), (2, 0), (0, 2)]);
        assert_eq!(straight, TableFault::StraightCorner { corner: 1 });
        let folded = fault(&[(0, 0), (3, 0), (2, 0), (2, 2)]);
        assert_eq!(folded, TableFault::FoldedCorner { corner: 1 });
    }

    #[test]
    fn clockwise_corners_are_turned_round_with_their_letters() {
        let letters = vec!['p', 'q', 'r', 's'];
        let square = points(&[(0, 0), (0, 1), (1, 1), (1, 0)]);
        let table = Table::new("", square, 1.into(), letters).unwrap();
        assert!(table.turned_round());
        assert_eq!(table.corners()[0], points(&[(0, 0)])[0]);
        assert_eq!(table.corners()[1], points(&[(1, 0)])[0]);
        // The side from (0,0) to (1,0) was the last one, s; the next was r.
        let letters: Vec<char> = (0..4).map(|s| table.letter(SideId(s))).collect();
        assert_eq!(letters, ['s', 'r', 'q', 'p']);
        // The letters keep the order of the file.
        assert_eq!(table.letters(), ['p', 'q', 'r', 's']);
    }

    fn ring(coordinates: &[(i64, i64)]) -> Ring {
        Ring {
            corners: points(coordinates),
            letters: default_letters(coordinates.len()),
        }
    }

    fn with_holes(holes: &[&[(i64, i64)]]) -> Result<Table, TableFault> {
        let outline = ring(&[(0, 0), (12, 0), (12, 12), (0, 12)]);
        Table::with_holes(
            "",
            outline,
            holes.iter().map(|h| ring(h)).collect(),
            1.into(),
        )
    }

    #[test]
    fn faults_of_holes_name_the_hole_and_the_places() {
        let good: &[(i64, i64)] = &[(1, 1), (3, 1), (3, 3), (1, 3)];
        let cases: [(&[(i64, i64)], TableFault); 11] = [
            (
                &[(5, 5), (6, 6)],
                TableFault::HoleTooFewCorners { hole: 1, count: 2 },
            ),
            (
                &[(5, 5), (6, 6), (7, 7)],
                TableFault::HoleZeroArea { hole: 1 },
            ),
            (
                &[(13, 5), (14, 5), (14, 6)],
                TableFault::HoleOutside { hole: 1 },
            ),
            // The outline inside the hole.
            (
                &[(-1, -1), (13, -1), (13, 13), (-1, 13)],
                TableFault::HoleOutside { hole: 1 },
            ),
            // A hole inside the first, and around it.
            (
                &[(2, 2), (2, 1), (1, 2)],
                TableFault::CornerOnSide { corner: 9, side: 4 },
            ),
            (
                &[(2, 7), (0, 6), (2, 5)],
                TableFault::CornerOnSide { corner: 9, side: 3 },
            ),
            // A corner on the outline; a corner of the outline's.
            (
                &[(12, 5), (11, 6), (11, 4)],
                TableFault::CornerOnSide { corner: 8, side: 1 },
            ),
            (
                &[(12, 12), (11, 10), (10, 11)],
                TableFault::RepeatedCorner {
                    first: 2,
                    second: 8,
                },
            ),
            (
                &[(11, 5), (13, 6), (11, 7)],
                TableFault::SidesCross {
                    first: 1,
                    second: 8,
                },
            ),
            (
                &[(5, 5), (6, 5), (7, 5), (6, 6)],
                TableFault::StraightCorner { corner: 9 },
            ),
            (
                &[(2, 2), (5, 2), (5, 4)],
                TableFault::SidesCross {
                    first: 5,
                    second: 8,
                },
            ),
        ];
        for (hole, fault) in cases {
            assert_eq!(with_holes(&[good, hole]).unwrap_err(), fault);
        }
        let small: &[(i64, i64)] = &[(5, 5), (6, 5), (6, 6)];
        let large: &[(i64, i64)] = &[(4, 4), (8, 4), (8, 8), (4, 8)];
        assert_eq!(
            with_holes(&[small, large]).unwrap_err(),
            TableFault::HoleInHole { inner: 0, outer: 1 }
        );
        assert_eq!(
            with_holes(&[large, small]).unwrap_err(),
            TableFault::HoleInHole { inner: 1, outer: 0 }
        );
    }

    #[test]
    fn holes_are_turned_clockwise_with_their_letters() {
        let counterclockwise = Ring {
            corners: points(&[(1, 1), (3, 1), (2, 3)]),
            letters: vec!['p', 'q', 'a'],
        };
        let outline = ring(&[(0, 0), (12, 0), (12, 12), (0, 12)]);
        let table = Table::with_holes("", outline, vec![counterclockwise], 1.into()).unwrap();
        assert_eq!(table.holes(), 1);
        assert_eq!(table.corners()[4..], points(&[(1, 1), (2, 3), (3, 1)]));
        assert_eq!(table.letters(), ['a', 'b', 'c', 'd', 'p', 'q']);
        let letters: Vec<char> = (4..7).map(|s| table.letter(SideId(s))).collect();
        assert_eq!(letters, ['a', 'q', 'p']);
        assert_eq!((table.after(6), table.before(4)), (4, 6));
        assert_eq!((table.after(3), table.before(0)), (0, 3));
        assert!(!table.has_one_beam_a_word());
    }
}
