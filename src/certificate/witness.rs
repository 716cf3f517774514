//! A simple orbit with a given word.
//!
//! The lines of a beam start from an interval of its first side. The orbit starts at the simplest fraction in the middle
//! half of it; from there the lines of the beam fill an open angle, and the aim is the shortest integer vector in it that
//! the Stern–Brocot tree gives. All in the table's coordinates, and exact.

use crate::language::beams::WordBeam;
use crate::number::{Real, Sign};
use crate::orbit::trace::Start;
use crate::table::{SideId, Table, Vector};
use rug::{Integer, Rational};

/// An orbit with small numbers.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Witness {
    /// The starting side.
    pub side: SideId,
    /// The fraction of the way along it, strictly between 0 and 1.
    pub fraction: Rational,
    /// The direction in table coordinates.
    pub aim: [Integer; 2],
}

impl Witness {
    /// As the tracer takes it.
    pub fn start(&self) -> Start {
        Start {
            side: self.side,
            fraction: Real::from(self.fraction.clone()),
            aim: Vector::new(
                Real::from(self.aim[0].clone()),
                Real::from(self.aim[1].clone()),
            ),
        }
    }
}

/// An orbit of a beam.
///
/// Cost: a few exact operations for each face of the beam's cell.
pub fn witness(table: &Table, beam: &WordBeam) -> Witness {
    let side = beam.word[0];
    let origin = table.corner(0);
    let start = table.corner(side.0 as usize).minus(origin);
    let along = table.side_vector(side.0 as usize);
    let (low, high) = fractions(beam, &start, &along);
    let fraction = simplest_inside(&low, &high, 4);
    let point = start.plus(&along.times(&Real::from(fraction.clone())));
    let (right, left) = angle(beam, &point, &along);
    Witness {
        side,
        fraction,
        aim: shortest_between(&right, &left),
    }
}

/// Between which fractions of the first side the lines of a beam start.
fn fractions(beam: &WordBeam, start: &Vector, along: &Vector) -> (Real, Real) {
    let m = beam.images.len();
    let mut least = Real::from(1);
    let mut most = Real::from(0);
    for i in 0..m {
        let (a, b) = (&beam.images[i], &beam.images[(i + 1) % m]);
        let line = b.minus(a);
        match a.minus(start).cross(&line).checked_div(&along.cross(&line)) {
            Some(fraction) => {
                if fraction < least {
                    least = fraction.clone();
                }
                if fraction > most {
                    most = fraction;
                }
            }
            // A line along the side: the lines near it start anywhere.
            None => return (Real::from(0), Real::from(1)),
        }
    }
    (least, most)
}

/// The open angle of the directions of a beam's lines through a point of its first side, from its right leg to its left.
fn angle(beam: &WordBeam, point: &Vector, along: &Vector) -> (Vector, Vector) {
    let mut right = along.clone();
    let mut left = along.times(&Real::from(-1));
    for (i, image) in beam.images.iter().enumerate() {
        let towards = image.minus(point);
        let away = towards.times(&Real::from(-1));
        // Lines have a left image on their left: they run clockwise of the direction towards it.
        let (clips_left, clips_right) = if i < beam.lefts {
            (towards, away)
        } else {
            (away, towards)
        };
        if is_between(&right, &clips_left, &left) {
            left = clips_left;
        }
        if is_between(&right, &clips_right, &left) {
            right = clips_right;
        }
    }
    (right, left)
}

/// True when a direction lies strictly inside an angle of at most half a turn.
fn is_between(right: &Vector, direction: &Vector, left: &Vector) -> bool {
    right.cross(direction).sign() == Sign::Positive
        && direction.cross(left).sign() == Sign::Positive
}

/// A short integer vector strictly inside an angle of at most half a turn.
fn shortest_between(right: &Vector, left: &Vector) -> [Integer; 2] {
    let quarter = |v: &Vector| Vector::new(v.y.clone(), -&v.x);
    let (mut right, mut left) = (right.clone(), left.clone());
    let axis = Vector::new(Real::from(1), Real::from(0));
    for turns in 0..4 {
        // The angle is seen after `turns` quarter turns clockwise.
        let found = if is_between(&right, &axis, &left) {
            Some((Integer::from(1), Integer::from(0)))
        } else if right.y.sign() != Sign::Negative
            && right.x.sign() == Sign::Positive
            && left.x.sign() != Sign::Negative
        {
            let low = right.y.checked_div(&right.x).expect("not zero");
            let slope = match left.y.checked_div(&left.x) {
                Some(high) => simplest_inside(&low, &high, 64),
                None => Rational::from(low.floor() + 1u32),
            };
            let (y, x) = slope.into_numer_denom();
            Some((x, y))
        } else {
            None
        };
        if let Some((mut x, mut y)) = found {
            for _ in 0..turns {
                (x, y) = (-y, x);
            }
            return [x, y];
        }
        (right, left) = (quarter(&right), quarter(&left));
    }
    unreachable!("an angle without an axis inside lies in one quarter")
}

/// The simplest rational strictly between two numbers ≥ 0 that keeps a `share`-th of their distance from both, nearly.
fn simplest_inside(low: &Real, high: &Real, share: i64) -> Rational {
    let margin = (high - low) * Real::from(Rational::from((1, share)));
    let (inner_low, inner_high) = (low + &margin, high - &margin);
    let mut bits = 64;
    loop {
        let nearest = |value: &Real| match value.to_rational() {
            Some(value) => value,
            None => value
                .enclosure_within(bits)
                .lo()
                .to_rational()
                .expect("finite"),
        };
        let (a, b) = (nearest(&inner_low), nearest(&inner_high));
        if a < b && *low < Real::from(a.clone()) && Real::from(b.clone()) < *high {
            return simplest(&a, &b);
        }
        bits *= 2;
    }
}

/// The rational with the least denominator, then numerator, strictly between two with 0 ≤ low < high: the first node of
/// the Stern–Brocot tree inside (Graham, Knuth, Patashnik, *Concrete Mathematics*, §4.5).
fn simplest(low: &Rational, high: &Rational) -> Rational {
    let floor = Integer::from(low.floor_ref());
    let next = Integer::from(&floor + 1u32);
    if next < *high {
        return Rational::from(next);
    }
    let above = Rational::from(high - &floor).recip();
    let rest = Rational::from(low - &floor);
    let inverse = if rest == 0 {
        Rational::from(Integer::from(above.floor_ref()) + 1u32)
    } else {
        simplest(&above, &rest.recip())
    };
    inverse.recip() + floor
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn simplest_rationals() {
        let of = |a: (i32, i32), b: (i32, i32)| simplest(&Rational::from(a), &Rational::from(b));
        assert_eq!(of((0, 1), (1, 1)), Rational::from((1, 2)));
        assert_eq!(of((3, 10), (4, 10)), Rational::from((1, 3)));
        assert_eq!(of((314, 100), (315, 100)), Rational::from((22, 7)));
        assert_eq!(of((1, 1), (3, 1)), Rational::from(2));
        // Slow twin: the first denominator that has a numerator.
        for (a, b) in [(17, 19), (1, 57), (33, 34), (55, 58)] {
            let (low, high) = (Rational::from((a, 59)), Rational::from((b, 59)));
            let slow = (1u32..)
                .find_map(|q| {
                    let p = Integer::from((low.clone() * q).floor_ref()) + 1u32;
                    let found = Rational::from((p, q));
                    (found < high).then_some(found)
                })
                .unwrap();
            assert_eq!(simplest(&low, &high), slow);
        }
    }

    #[test]
    fn aims_lie_inside_their_angle() {
        let v = |x: i64, y: i64| Vector::new(x.into(), y.into());
        for (right, left) in [
            (v(1, 0), v(-1, 0)),
            (v(3, 1), v(2, 1)),
            (v(0, 1), v(-1, 100)),
            (v(-7, 2), v(-8, 2)),
            (v(-1, -1), v(1, -1)),
            (v(5, -7), v(6, -7)),
            (v(1, 5), v(0, 1)),
        ] {
            let [x, y] = shortest_between(&right, &left);
            let aim = Vector::new(x.into(), y.into());
            assert!(
                is_between(&right, &aim, &left),
                "{right:?} {aim:?} {left:?}"
            );
        }
    }
}
