//! One orbit, followed inside the table: at each hit the velocity is reflected across the side.
//!
//! Nothing is unfolded. The next hit is found by looking at every side and every corner, and is the one
//! with the least travelling time; all numbers are exact rationals, so that a corner is hit or not, never
//! nearly. Cost: k cross products for each hit; the numbers grow linearly in the count of hits.

use super::{Domain, Point, along, between, cross, dot, mirrored};
use rug::{Integer, Rational};

/// What [`trace`] saw.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Trace {
    /// The sides hit, the starting side first.
    pub sides: Vec<usize>,
    /// The exact points of the hits: `points[i]` lies strictly inside side `sides[i]`.
    pub points: Vec<Point>,
    /// The corner that ended the orbit, when one did before the asked number of hits.
    pub corner: Option<usize>,
}

/// What a ball meets next.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Meeting {
    /// A side, strictly between its ends.
    Side(usize),
    /// A corner; the orbit ends there.
    Corner(usize),
}

/// A moving point of the closed table whose velocity points into the table.
#[derive(Clone, Debug)]
pub struct Ball<'a> {
    domain: &'a Domain,
    point: Point,
    velocity: Point,
}

impl<'a> Ball<'a> {
    /// A ball on `side`, at `fraction` of the way from its first corner to its second.
    ///
    /// # Panics
    /// When the fraction isn't strictly between 0 and 1, or the velocity doesn't point inwards.
    pub fn on_side(
        domain: &'a Domain,
        side: usize,
        fraction: &Rational,
        velocity: Point,
    ) -> Ball<'a> {
        assert!(*fraction > 0 && *fraction < 1, "fraction {fraction}");
        let direction = domain.side_vector(side);
        assert!(cross(&direction, &velocity) > 0, "aim leaves the table");
        Ball {
            domain,
            point: along(&domain.corners[side], fraction, &direction),
            velocity: primitive(&velocity),
        }
    }

    /// A ball that leaves `corner` strictly between its two sides, or nothing when the velocity points
    /// outwards or runs along a side.
    pub fn at_corner(domain: &'a Domain, corner: usize, velocity: Point) -> Option<Ball<'a>> {
        let corners = &domain.corners;
        let next = domain.side_vector(corner);
        let previous = between(&corners[corner], &corners[domain.previous(corner)]);
        let inside = if cross(&next, &previous) > 0 {
            cross(&next, &velocity) > 0 && cross(&velocity, &previous) > 0
        } else {
            // Beyond a half turn: everything but the closed wedge from `previous` round to `next`.
            !(cross(&previous, &velocity) >= 0 && cross(&velocity, &next) >= 0)
        };
        inside.then(|| Ball {
            domain,
            point: corners[corner].clone(),
            velocity: primitive(&velocity),
        })
    }

    /// Moves to the next side and reflects, or tells the corner that is hit first.
    ///
    /// The side or corner that the ball is on is met at time 0 exactly, which doesn't count.
    pub fn advance(&mut self) -> Meeting {
        let k = self.domain.corners.len();
        let offsets: Vec<Point> = self
            .domain
            .corners
            .iter()
            .map(|c| between(&self.point, c))
            .collect();
        let heights: Vec<Rational> = offsets.iter().map(|o| cross(&self.velocity, o)).collect();
        let mut first: Option<(Rational, Meeting)> = None;
        let mut offer = |time: Rational, meeting: Meeting| {
            if time > 0 && first.as_ref().is_none_or(|(best, _)| time < *best) {
                first = Some((time, meeting));
            }
        };
        for i in 0..k {
            let j = self.domain.next[i];
            if heights[i].is_zero() {
                let time = dot(&self.velocity, &offsets[i]) / dot(&self.velocity, &self.velocity);
                offer(time, Meeting::Corner(i));
            }
            let straddles =
                heights[i].cmp0() == heights[j].cmp0().reverse() && !heights[i].is_zero();
            if straddles {
                let direction = self.domain.side_vector(i);
                let time = cross(&offsets[i], &direction) / cross(&self.velocity, &direction);
                offer(time, Meeting::Side(i));
            }
        }
        let (time, meeting) = first.expect("a ball inside a bounded table meets its boundary");
        if let Meeting::Side(side) = meeting {
            self.point = along(&self.point, &time, &self.velocity);
            let axis = self.domain.side_vector(side);
            self.velocity = primitive(&mirrored(&self.velocity, &axis));
        }
        meeting
    }

    /// True when the ball's next meetings are the given ones, in order. Stops at the first difference.
    pub fn meets(mut self, expected: impl IntoIterator<Item = Meeting>) -> bool {
        expected
            .into_iter()
            .all(|meeting| self.advance() == meeting)
    }
}

/// Follows the orbit that leaves `side`, at `fraction` of the way along it, in the direction `aim`, until it
/// has hit `hits` sides (the starting side counted) or a corner.
///
/// # Panics
/// When the fraction isn't strictly between 0 and 1, or the aim doesn't point into the table.
pub fn trace(
    corners: &[Point],
    side: usize,
    fraction: &Rational,
    aim: (&Rational, &Rational),
    hits: usize,
) -> Trace {
    trace_in(&Domain::polygon(corners), side, fraction, aim, hits)
}

/// [`trace`] in a table that may have holes.
pub fn trace_in(
    domain: &Domain,
    side: usize,
    fraction: &Rational,
    aim: (&Rational, &Rational),
    hits: usize,
) -> Trace {
    let mut ball = Ball::on_side(domain, side, fraction, (aim.0.clone(), aim.1.clone()));
    let mut seen = Trace {
        sides: vec![side],
        points: vec![ball.point.clone()],
        corner: None,
    };
    while seen.sides.len() < hits {
        match ball.advance() {
            Meeting::Side(next) => {
                seen.sides.push(next);
                seen.points.push(ball.point.clone());
            }
            Meeting::Corner(corner) => {
                seen.corner = Some(corner);
                break;
            }
        }
    }
    seen.sides.truncate(hits);
    seen.points.truncate(hits);
    seen
}

/// The same direction with coprime integer coordinates; keeps the numbers short.
fn primitive(v: &Point) -> Point {
    let scale = Integer::from(v.0.denom().lcm_ref(v.1.denom()));
    let x = Rational::from(&v.0 * &scale).into_numer_denom().0;
    let y = Rational::from(&v.1 * &scale).into_numer_denom().0;
    let common = Integer::from(x.gcd_ref(&y));
    (Rational::from(x / &common), Rational::from(y / &common))
}
