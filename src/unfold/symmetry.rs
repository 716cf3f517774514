//! Collinear corner images proved by the symmetry of a path, without numbers.
//!
//! In tables with an infinite reflection group, exact zeros are rare but each costs an evaluation with numbers as long as the
//! path. Nearly all of them have a reason that shows in the sequence of crossed sides. **What is decided**: whether the
//! images P, Q, V of a path are on one line, by one of three arguments.
//!
//! - *Half-turns* about corners of angle π/(2m): see [`half_turn`](super::half_turn).
//! - *Mirrors.* If the path between two images X, Y of one corner is a palindrome about a crossing of side s, then Y is the
//!   mirror image of X in that image of s, so XY is perpendicular to it. If two of the segments PQ, QV, PV are
//!   perpendicular to parallel side images, the three are collinear.
//! - *Translations.* If the path has period g from P to V, and the product of the reflections of one period is a translation
//!   τ, then images of one corner at indices that differ by multiples of g differ by multiples of one vector. If Q and P, and V and Q are so
//!   related, the three are collinear.
//!
//! **Directions.** Let θ_s be the angle of side s. After the crossings s₁, …, s_n the linear part of the pose turns by
//! 2(θ_{s₁} − θ_{s₂} + …) = 2·B_n·θ, after a mirror for odd n; so side s of the copy has the angle (2B_n + (−1)ⁿe_s)·θ modulo π. Two side images are
//! parallel if the difference of these integer vectors lies in the lattice of relations that the rational angles of the table give:
//! if sides s, t meet at an angle with denominator q in units of π, then q·(θ_s − θ_t) is a multiple of π. A word of even length is a
//! translation if its B lies in that lattice. (This is the condition for stable periodic words of Galperin, Stepin, Vorobets, Russian
//! Math. Surveys 47 (1992), when no angle is rational.)
//!
//! A positive answer is a proof. A negative one says nothing. Cost: a few passes over the path.

use super::exact_path::ImageName;
use super::half_turn::{HalfTurns, Path};
use crate::table::facts::{Angle, angle};
use crate::table::{CornerId, SideId, Table};

/// A table's symmetries, prepared.
#[derive(Debug)]
pub struct Symmetries {
    half_turns: HalfTurns,
    /// By corner: the denominator of its angle in units of π, when that is rational.
    denominators: Vec<Option<i64>>,
}

/// A crossing that two images are mirrored in, as its index on the path.
type Mirror = usize;

impl Symmetries {
    /// Looks at all angles of a table.
    pub fn new(table: &Table) -> Symmetries {
        let denominator = |corner| match angle(table, corner) {
            Angle::RationalMultipleOfPi(q) => q.denom().to_i64(),
            Angle::Irrational => None,
        };
        Symmetries {
            half_turns: HalfTurns::new(table),
            denominators: (0..table.sides()).map(denominator).collect(),
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
        let (p, q) = if a.crossings <= b.crossings { (a, b) } else { (b, a) };
        let symbols = self.half_turns.symbols(sides);
        let path = Path { sides, symbols: &symbols };
        self.half_turns.prove(path, [p, q], v)
            || self.prove_by_mirrors(path, p, q, v)
            || self.prove_by_translation(sides, p, q, v)
    }

    fn prove_by_mirrors(&self, path: Path<'_>, p: ImageName, q: ImageName, v: ImageName) -> bool {
        let mirrors = [(p, q), (q, v), (p, v)].map(|(x, y)| self.mirror(path, x, y));
        let parallel = |i: usize, j: usize| match (mirrors[i], mirrors[j]) {
            (Some(e), Some(f)) => self.are_parallel(path.sides, e.min(f), e.max(f)),
            _ => false,
        };
        parallel(0, 1) || parallel(1, 2) || parallel(0, 2)
    }

    /// The crossing in which the second image is the mirror image of the first.
    fn mirror(&self, path: Path<'_>, x: ImageName, y: ImageName) -> Option<Mirror> {
        if x.corner != y.corner {
            return None;
        }
        let starts = self.half_turns.run(path.sides, x);
        let ends = self.half_turns.run(path.sides, y);
        let sums = starts.0 + ends.0..=starts.1 + ends.1;
        sums.filter(|sum| sum % 2 == 1).map(|sum| sum / 2).find(|&e| {
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

    /// True when the sides crossed at two indices, e ≤ f, are proved parallel.
    fn are_parallel(&self, sides: &[SideId], e: usize, f: usize) -> bool {
        let mut difference = self.alternating(sides, e..f);
        for entry in &mut difference {
            *entry *= 2;
        }
        let sign = |at: usize| if at.is_multiple_of(2) { 1 } else { -1 };
        difference[sides[f].0 as usize] += sign(f);
        difference[sides[e].0 as usize] -= sign(e);
        self.is_relation(&difference)
    }

    /// Σ (−1)^i e_{sides[i]} over a range of indices.
    fn alternating(&self, sides: &[SideId], range: std::ops::Range<usize>) -> Vec<i64> {
        let mut sum = vec![0; self.denominators.len()];
        for i in range {
            sum[sides[i].0 as usize] += if i.is_multiple_of(2) { 1 } else { -1 };
        }
        sum
    }

    /// True when the vector is an integer combination of q·(e_s − e_t) over the corners with a rational angle, where sides
    /// s and t meet and q is the angle's denominator.
    ///
    /// These corners join the sides to paths (not all corners are rational). On each path the entries must sum to zero,
    /// and the sum up to each joint must be a multiple of its q.
    fn is_relation(&self, vector: &[i64]) -> bool {
        let k = vector.len();
        let Some(first) = self.denominators.iter().position(Option::is_none) else {
            return vector.iter().all(|x| *x == 0);
        };
        // Side `first` begins a path, because the corner before it is not a joint.
        let mut carried = 0;
        for step in 0..k {
            let side = (first + step) % k;
            match self.denominators[side] {
                None if carried != 0 => return false,
                Some(q) if carried % q != 0 => return false,
                _ => {}
            }
            carried += vector[side];
        }
        carried == 0
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
                        && self.is_relation(&self.alternating(sides, i..i + g))
                })
            })
        })
    }
}

fn gcd(a: usize, b: usize) -> usize {
    if b == 0 { a } else { gcd(b, a % b) }
}

/// The corner at which two neighbouring sides of a polygon with k sides meet.
pub(super) fn common_corner(k: usize, a: SideId, b: SideId) -> Option<CornerId> {
    let follows = |first: SideId, second: SideId| (first.0 as usize + 1) % k == second.0 as usize;
    if follows(a, b) {
        Some(CornerId(b.0))
    } else if follows(b, a) {
        Some(CornerId(a.0))
    } else {
        None
    }
}
