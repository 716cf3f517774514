//! Which polygons are tables.
//!
//! A table is a simple polygon: sides meet only at common corners, no corner repeats, none is straight.
//! All tests are exact orientations and comparisons in the table's field; a floating-point filter with a
//! proved bound decides most of them. Cost: k²/2 pairs of sides.

use super::{MOST_SIDES, Vector, orientation};
use crate::number::{Real, Sign};
use thiserror::Error;

/// Why a polygon is not a table. Corners and sides are numbered from 0 in the order given.
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
    /// Two sides with the same letter.
    #[error("sides {first} and {second} have the same letter `{letter}`")]
    RepeatedLetter {
        /// The earlier side.
        first: usize,
        /// The later side.
        second: usize,
        /// Their letter.
        letter: char,
    },
    /// The plane form is not positive.
    #[error("the plane form must be positive, it is {value}")]
    FormNotPositive {
        /// Its value as a decimal.
        value: String,
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

/// Checks everything that [`super::Table::new`] promises.
pub fn check(corners: &[Vector], letters: &[char], form: &Real) -> Result<Turn, TableFault> {
    let k = corners.len();
    if form.sign() != Sign::Positive {
        return Err(TableFault::FormNotPositive {
            value: form.decimal(6),
        });
    }
    if k < 3 {
        return Err(TableFault::TooFewCorners { count: k });
    }
    if k > MOST_SIDES {
        return Err(TableFault::TooManyCorners { count: k });
    }
    if letters.len() != k {
        return Err(TableFault::LetterCount {
            letters: letters.len(),
            sides: k,
        });
    }
    for (second, letter) in letters.iter().enumerate() {
        if let Some(first) = letters[..second].iter().position(|l| l == letter) {
            return Err(TableFault::RepeatedLetter {
                first,
                second,
                letter: *letter,
            });
        }
    }
    check_distinct(corners)?;
    let flat = (2..k).all(|i| orientation(&corners[0], &corners[1], &corners[i]) == Sign::Zero);
    if flat {
        return Err(TableFault::ZeroArea);
    }
    check_corners(corners)?;
    check_sides(corners)?;
    Ok(turn(corners))
}

fn check_distinct(corners: &[Vector]) -> Result<(), TableFault> {
    #[expect(
        clippy::mutable_key_type,
        reason = "the caches inside a field take no part in equality or hash"
    )]
    let mut seen = std::collections::HashMap::new();
    for (second, corner) in corners.iter().enumerate() {
        if let Some(first) = seen.insert(corner, second) {
            return Err(TableFault::RepeatedCorner { first, second });
        }
    }
    Ok(())
}

/// Corners where the two sides lie on one line.
fn check_corners(corners: &[Vector]) -> Result<(), TableFault> {
    let k = corners.len();
    for corner in 0..k {
        let before = &corners[(corner + k - 1) % k];
        let (here, after) = (&corners[corner], &corners[(corner + 1) % k]);
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

/// The corners with floating-point copies of them.
struct Outline<'a> {
    corners: &'a [Vector],
    copies: Vec<(f64, f64)>,
    /// A determinant of the copies beyond this has the right sign.
    error: f64,
}

impl<'a> Outline<'a> {
    /// The bound: let M be the largest absolute value of a copy. [`Real::to_f64`] is the nearest number or
    /// a neighbour, so a copy is off by at most 2⁻⁵¹·M, a difference of two by 5·2⁻⁵²·M (its own rounding
    /// included), a product of two differences by 22·2⁻⁵²·M², and the difference of two products, itself
    /// rounded, by 48·2⁻⁵²·M² < 2⁻⁴⁶·M².
    fn new(corners: &'a [Vector]) -> Outline<'a> {
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
        Outline {
            corners,
            copies,
            error,
        }
    }

    fn orientation(&self, a: usize, b: usize, c: usize) -> Sign {
        let [(ax, ay), (bx, by), (cx, cy)] = [a, b, c].map(|i| self.copies[i]);
        let determinant = (bx - ax) * (cy - ay) - (by - ay) * (cx - ax);
        if determinant > self.error {
            Sign::Positive
        } else if determinant < -self.error {
            Sign::Negative
        } else {
            orientation(&self.corners[a], &self.corners[b], &self.corners[c])
        }
    }

    /// True when corner c lies strictly inside the segment from corner a to corner b.
    fn on_segment(&self, a: usize, b: usize, c: usize) -> bool {
        self.orientation(a, b, c) == Sign::Zero
            && strictly_between(&self.corners[a], &self.corners[b], &self.corners[c])
    }

    /// True when the segments ab and cd cross at a point inside both.
    fn cross_properly(&self, [a, b]: [usize; 2], [c, d]: [usize; 2]) -> bool {
        let opposite = |s: Sign, t: Sign| s != Sign::Zero && s == t.flip();
        opposite(self.orientation(a, b, c), self.orientation(a, b, d))
            && opposite(self.orientation(c, d, a), self.orientation(c, d, b))
    }
}

fn check_sides(corners: &[Vector]) -> Result<(), TableFault> {
    let k = corners.len();
    let outline = Outline::new(corners);
    let ends = |side: usize| [side, (side + 1) % k];
    for first in 0..k {
        for second in first + 1..k {
            for (side, other) in [(first, second), (second, first)] {
                let [a, b] = ends(side);
                for corner in ends(other) {
                    if corner != a && corner != b && outline.on_segment(a, b, corner) {
                        return Err(TableFault::CornerOnSide { corner, side });
                    }
                }
            }
            if outline.cross_properly(ends(first), ends(second)) {
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
    use crate::table::{Table, default_letters};

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
        assert_eq!(table.letters(), ['s', 'r', 'q', 'p']);
    }

    #[test]
    fn a_repeated_letter_is_refused() {
        let square = points(&[(0, 0), (1, 0), (1, 1), (0, 1)]);
        let fault = Table::new("", square, 1.into(), vec!['a', 'b', 'a', 'c']).unwrap_err();
        assert!(matches!(
            fault,
            TableFault::RepeatedLetter {
                first: 0,
                second: 2,
                ..
            }
        ));
    }
}
