//! Collinear corner images proved by the symmetry of a path, without numbers.
//!
//! In tables with an infinite reflection group, exact zeros are rare but each costs an evaluation with numbers as long as the
//! path. Nearly all of them have a reason that shows in the sequence of crossed sides. **What is decided**: whether the
//! images P, Q, V of a path are on one line, by one of three arguments.
//!
//! - *Half-turns* about corners of angle π/(2m): see [`half_turn`](super::half_turn).
//! - *Directions.* If the path between two images X, Y of one corner is a palindrome about a crossing of side s, then Y is the
//!   mirror image of X in that image of s, so XY is perpendicular to it. If X and Y are the ends of one image of side s, XY is
//!   parallel to it. If two of the segments PQ, QV, PV are so proved parallel to each other, the three are collinear.
//! - *Translations.* If the path has period g from P to V, and the product of the reflections of one period is a translation
//!   τ, then images of one corner at indices that differ by multiples of g differ by multiples of one vector. If Q and P, and V and Q are so
//!   related, the three are collinear.
//!
//! **Angles.** Let θ_s be the angle of side s. After the crossings s₁, …, s_n the linear part of the pose turns by
//! 2(θ_{s₁} − θ_{s₂} + …) = 2·B_n·θ, after a mirror for odd n; so side s of the copy has the angle (2B_n + (−1)ⁿe_s)·θ
//! modulo π. The angle of such an integer vector is known modulo π when it is a combination of differences e_s − e_t of
//! sides that meet at a rational angle. A word of even length is a translation if B·θ is known to be 0 modulo π. (Where no angle is
//! rational this is the condition for stable periodic words of Galperin, Stepin, Vorobets, Russian Math. Surveys 47
//! (1992).)
//!
//! A positive answer is a proof. A negative one says nothing. Cost: a few passes over the path.

use super::exact_path::ImageName;
use super::half_turn::{HalfTurns, Path};
use crate::table::facts::{Angle, angle};
use crate::table::{CornerId, SideId, Table};
use rug::Rational;

/// A table's symmetries, prepared.
#[derive(Debug)]
pub struct Symmetries {
    half_turns: HalfTurns,
    /// By corner: its angle in units of π, when that is rational.
    angles: Vec<Option<Rational>>,
    /// The side that ends at each corner.
    before: Vec<usize>,
    /// The sides of each ring of the table.
    rings: Vec<std::ops::Range<usize>>,
}

/// The proved direction of a segment between two images.
#[derive(Clone, Copy, Debug)]
enum Direction {
    /// Perpendicular to the side crossed at this index of the path.
    Perpendicular(usize),
    /// Along this side of the copy after so many crossings.
    Along(SideId, usize),
}

impl Symmetries {
    /// Looks at all angles of a table.
    pub fn new(table: &Table) -> Symmetries {
        let rational = |corner| match angle(table, corner) {
            Angle::RationalMultipleOfPi(q) => Some(q),
            Angle::Irrational => None,
        };
        Symmetries {
            half_turns: HalfTurns::new(table),
            angles: (0..table.sides()).map(rational).collect(),
            before: (0..table.sides())
                .map(|corner| table.before(corner))
                .collect(),
            rings: table.rings().collect(),
        }
    }

    /// True when `v`, the latest of three images, is proved to be on the line through the other two.
    pub fn prove_collinear(
        &self,
        sides: &[SideId],
        a: ImageName,
        b: ImageName,
        v: ImageName,
    ) -> bool {
        let (p, q) = if a.crossings <= b.crossings {
            (a, b)
        } else {
            (b, a)
        };
        let symbols = self.half_turns.symbols(sides);
        let path = Path {
            sides,
            symbols: &symbols,
        };
        self.half_turns.prove(path, [p, q], v)
            || self.prove_by_directions(path, p, q, v)
            || self.prove_by_translation(sides, p, q, v)
    }

    fn prove_by_directions(
        &self,
        path: Path<'_>,
        p: ImageName,
        q: ImageName,
        v: ImageName,
    ) -> bool {
        let directions = [(p, q), (q, v), (p, v)].map(|(x, y)| self.direction(path, x, y));
        let parallel = |i: usize, j: usize| match (directions[i], directions[j]) {
            (Some(d), Some(e)) => self.are_parallel(path.sides, d, e),
            _ => false,
        };
        parallel(0, 1) || parallel(1, 2) || parallel(0, 2)
    }

    fn direction(&self, path: Path<'_>, x: ImageName, y: ImageName) -> Option<Direction> {
        if x.corner == y.corner {
            return self.mirror(path, x, y).map(Direction::Perpendicular);
        }
        let before = |corner: CornerId| self.before[corner.0 as usize];
        let side = if before(y.corner) == x.corner.0 as usize {
            x.corner.0
        } else if before(x.corner) == y.corner.0 as usize {
            y.corner.0
        } else {
            return None;
        };
        // One copy in which both are where their names say.
        let (xs, ys) = (
            self.half_turns.run(path.sides, x),
            self.half_turns.run(path.sides, y),
        );
        let copy = xs.0.max(ys.0);
        (copy <= xs.1.min(ys.1)).then_some(Direction::Along(SideId(side), copy))
    }

    /// The crossing in which the second image is the mirror image of the first.
    fn mirror(&self, path: Path<'_>, x: ImageName, y: ImageName) -> Option<usize> {
        let starts = self.half_turns.run(path.sides, x);
        let ends = self.half_turns.run(path.sides, y);
        let sums = starts.0 + ends.0..=starts.1 + ends.1;
        sums.filter(|sum| sum % 2 == 1)
            .map(|sum| sum / 2)
            .find(|&e| {
                // The index nearest to the mirror that serves both images.
                let i = starts.1.min((2 * e + 1).saturating_sub(ends.0));
                let end = 2 * e + 1 - i;
                starts.0 <= i
                    && i <= e
                    && (ends.0..=ends.1).contains(&end)
                    && end <= path.sides.len()
                    && path.mirrors(i, e, e + 1)
            })
    }

    fn are_parallel(&self, sides: &[SideId], d: Direction, e: Direction) -> bool {
        let parts = |direction| match direction {
            Direction::Perpendicular(at) => (sides[at], at, true),
            Direction::Along(side, at) => (side, at, false),
        };
        let ((d_side, d_at, d_turned), (e_side, e_at, e_turned)) = (parts(d), parts(e));
        // Angle of the one side image minus that of the other.
        let (from, to) = (d_at.min(e_at), d_at.max(e_at));
        let mut difference = self.alternating(sides, from..to);
        let sign = |at: usize| if at.is_multiple_of(2) { 1 } else { -1 };
        for entry in &mut difference {
            *entry *= if e_at >= d_at { 2 } else { -2 };
        }
        difference[e_side.0 as usize] += sign(e_at);
        difference[d_side.0 as usize] -= sign(d_at);
        let quarter_turn = Rational::from((i32::from(d_turned != e_turned), 2));
        self.angle_of(&difference) == Some(quarter_turn)
    }

    /// Σ (−1)^i e_{sides[i]} over a range of indices.
    fn alternating(&self, sides: &[SideId], range: std::ops::Range<usize>) -> Vec<i64> {
        let mut sum = vec![0; self.angles.len()];
        for i in range {
            sum[sides[i].0 as usize] += if i.is_multiple_of(2) { 1 } else { -1 };
        }
        sum
    }

    /// The angle vector·θ modulo π, in units of π and in [0, 1), when the vector is a combination of differences of sides
    /// that meet at a rational angle.
    ///
    /// These corners join the sides of each ring to paths, on each of which the entries must sum to zero. At a corner with
    /// angle α, θ of the side before minus θ of the side after is α modulo π, and it counts as often as the entries before
    /// it on its path say. A ring with rational corners alone counts as one path, without the joint at its first side:
    /// that leaves angles unknown, and makes none wrong.
    fn angle_of(&self, vector: &[i64]) -> Option<Rational> {
        let mut angle = Rational::new();
        for ring in &self.rings {
            angle += self.angle_of_ring(vector, ring)?;
        }
        let whole = Rational::from(angle.floor_ref());
        Some(angle - whole)
    }

    /// The part of one ring, not reduced modulo π.
    fn angle_of_ring(&self, vector: &[i64], ring: &std::ops::Range<usize>) -> Option<Rational> {
        let joints = &self.angles[ring.clone()];
        let first = joints.iter().position(Option::is_none).unwrap_or(0);
        let mut angle = Rational::new();
        // Side `first` begins a path, because the corner before it joins nothing.
        let mut carried = 0;
        for step in 0..ring.len() {
            let side = ring.start + (first + step) % ring.len();
            match &self.angles[side] {
                None if carried != 0 => return None,
                Some(alpha) if carried != 0 => angle += Rational::from(alpha * carried),
                _ => {}
            }
            carried += vector[side];
        }
        (carried == 0).then_some(angle)
    }

    fn prove_by_translation(
        &self,
        sides: &[SideId],
        p: ImageName,
        q: ImageName,
        v: ImageName,
    ) -> bool {
        if p.corner != q.corner || q.corner != v.corner {
            return false;
        }
        let run = |image| self.half_turns.run(sides, image);
        let ((_, i), (q_first, q_last), (v_first, v_last)) = (run(p), run(q), run(v));
        // τ takes P at index i to Q at index j, and Q at index j2 to V at index l.
        (q_first.max(i + 1)..=q_last).any(|j| {
            let step = j - i;
            (q_first.max(i)..=q_last).any(|j2| {
                (v_first.max(j2 + 1)..=v_last.min(sides.len())).any(|l| {
                    let g = gcd(step, l - j2);
                    g.is_multiple_of(2)
                        && i + g <= sides.len()
                        && (i..l.max(j).saturating_sub(g)).all(|n| sides[n] == sides[n + g])
                        && self
                            .angle_of(&self.alternating(sides, i..i + g))
                            .is_some_and(|angle| angle == 0)
                })
            })
        })
    }
}

fn gcd(a: usize, b: usize) -> usize {
    if b == 0 { a } else { gcd(b, a % b) }
}

/// The corner at which two neighbouring sides meet; `before` has the side that ends at each corner.
pub(super) fn common_corner(before: &[usize], a: SideId, b: SideId) -> Option<CornerId> {
    let follows = |first: SideId, second: SideId| before[second.0 as usize] == first.0 as usize;
    if follows(a, b) {
        Some(CornerId(b.0))
    } else if follows(b, a) {
        Some(CornerId(a.0))
    } else {
        None
    }
}
