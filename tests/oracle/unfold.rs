//! All words and all generalized diagonals of a table, by trying every way in which a line can separate the
//! corners of an unfolding.
//!
//! **Unfolding.** For a word w = w₁…wₙ let P₁ be the table and P_{i+1} the mirror image of P_i in its side
//! w_{i+1}. An orbit piece with word w·x that starts on side w₁ unfolds to an oriented line that enters P₁
//! through side w₁, next meets the boundary of P_i in side w_{i+1} for i < n, and that of P_n in side x.
//! Let S be the finite set of the corners of P₁ … P_n.
//!
//! **Finitely many candidates.** Give each point of S its sign, left or right of an oriented line that meets
//! no point of S and has points on both sides. The lines with given signs make a connected set (the
//! functions (x, y) ↦ ax + by + c with these signs on S are a convex cone, and none of them is constant).
//! Along a path in that set the crossings of the line with a polygon's sides keep their order, since two of
//! them could only change places at a common point, which would be a corner. Hence the signs decide whether
//! the line reads w·x, and it suffices to try one line for each sign pattern that a line can have.
//!
//! **None is missed.** Take a line ℓ with some pattern. Move it to its left until it meets a point of S for
//! the first time, then turn it about this point until it meets another. The outcome ℓ₀ goes through two
//! points of S, and the points that are off ℓ₀ have the same sign for both lines. The m ≥ 2 points on ℓ₀ got
//! their signs from ℓ, so in their order along ℓ₀ the sign changes at most once: there are 2m such patterns.
//! Conversely each of the 2m occurs for a line near ℓ₀: turn ℓ₀ slightly about the middle of two
//! consecutive points, or shift it slightly to a side. So all patterns are found from the pairs of points of
//! S, two orientations each, with 2m patterns for each oriented line. Most patterns turn up many times, once
//! for each vertex of the cell of lines; that is waste, not a need.
//!
//! **Fewer pairs.** If ℓ reads w·x then ℓ₀, a limit of lines with ℓ's signs, has the first corner of side w₁
//! on its left or on itself, the second on its right or on itself, and likewise for the other sides read.
//! This condition for w is implied by that for w·x. So the pairs for w·x are the pairs that are kept for w,
//! filtered, and those with a corner that is new in P_n.
//!
//! **Deciding.** A pattern that strictly crosses the sides read is made a line with rational coefficients
//! (the turn or shift is below an exact bound that keeps every sign off ℓ₀, and all signs are checked), and
//! that line is *traced* in the folded table, with `Ball`. Nothing enters the language but words of traced
//! orbits; the argument above shows that every word gets its orbit.
//!
//! **Cost** for k sides: for each word of length n about k·nk new pairs of 3n products of integers, and a
//! few traces for each pair kept.

use super::fold::{Ball, Meeting};
use super::{Domain, Point, along, between, cross, dot, mirrored};
use rug::{Integer, Rational};
use std::cmp::Ordering;
use std::collections::BTreeSet;
use std::rc::Rc;

/// The languages L₀ … L_longest of the table: `result[n]` has the words of length n of orbit pieces that
/// meet no corner. L₀ has the empty word.
pub fn languages(corners: &[Point], longest: usize) -> Vec<BTreeSet<Vec<u8>>> {
    languages_in(&Domain::polygon(corners), longest)
}

/// [`languages`] of a table that may have holes. The argument of the module does not ask for one ring: two
/// sides have no common point but a corner, whichever rings they belong to.
pub fn languages_in(domain: &Domain, longest: usize) -> Vec<BTreeSet<Vec<u8>>> {
    let corners = &domain.corners;
    assert!(corners.len() >= 3 && corners.len() <= 255);
    let mut found = vec![BTreeSet::new(); longest + 1];
    found[0].insert(Vec::new());
    if longest == 0 {
        return found;
    }
    for side in 0..corners.len() {
        // Every side starts an orbit piece of length 1: aim inwards from its middle.
        found[1].insert(vec![side as u8]);
        let mut search = Search::new(domain, side, longest);
        search.grow(&Vec::new(), 0, &mut found);
    }
    found
}

/// N(0) … N(longest): the number of oriented generalized diagonals that cross exactly n sides.
///
/// They are straight segments of the unfolding that join two corners, run through the interiors, meet no
/// corner strictly between and don't run along a side. Such a segment crosses its sides strictly inside, so
/// a small parallel shift of it shows that the word of these sides is in the language; every word of L_n is
/// tried with every pair of corners of the first and the last polygon, and the segment is traced in the
/// folded table. Two segments that differ have different words or different end corners, since word and
/// corners fix the segment in the unfolding.
pub fn diagonals(corners: &[Point], longest: usize) -> Vec<usize> {
    diagonals_in(&Domain::polygon(corners), longest)
}

/// [`diagonals`] in a table that may have holes.
pub fn diagonals_in(domain: &Domain, longest: usize) -> Vec<usize> {
    let words = languages_in(domain, longest);
    words
        .iter()
        .map(|level| level.iter().map(|w| diagonals_along(domain, w)).sum())
        .collect()
}

fn diagonals_along(domain: &Domain, word: &[u8]) -> usize {
    let mut unfolding = Unfolding::new(domain);
    for &side in word {
        unfolding.cross_side(side as usize);
    }
    let mut count = 0;
    for (start, &tail) in unfolding.copies[0].iter().enumerate() {
        for (end, &head) in unfolding.last().iter().enumerate() {
            let (tail, head) = (&unfolding.points[tail], &unfolding.points[head]);
            if tail.place == head.place {
                continue;
            }
            let line = Line::through(tail, head);
            let crosses = |gate: &Gate| {
                line.side_of(&unfolding.points[gate.left]) > 0
                    && line.side_of(&unfolding.points[gate.right]) < 0
            };
            if !unfolding.gates.iter().all(crosses) {
                continue;
            }
            let expected = word.iter().map(|&s| Meeting::Side(s as usize));
            let expected = expected.chain([Meeting::Corner(end)]);
            let velocity = between(&tail.place, &head.place);
            if Ball::at_corner(domain, start, velocity).is_some_and(|b| b.meets(expected)) {
                count += 1;
            }
        }
    }
    count
}

/// A corner of an unfolded polygon: its place, and the same as integers (x, y, w) with w > 0 that stand for
/// the point (x/w, y/w).
struct Corner {
    place: Point,
    scaled: [Integer; 3],
}

impl Corner {
    fn new(place: Point) -> Corner {
        let w = Integer::from(place.0.denom().lcm_ref(place.1.denom()));
        let x = Rational::from(&place.0 * &w).into_numer_denom().0;
        let y = Rational::from(&place.1 * &w).into_numer_denom().0;
        Corner {
            place,
            scaled: [x, y, w],
        }
    }
}

/// An oriented line as integers (a, b, c): the point (x/w, y/w) is on its left when ax + by + cw > 0.
struct Line([Integer; 3]);

impl Line {
    fn through(from: &Corner, to: &Corner) -> Line {
        let ([x, y, w], [u, v, t]) = (&from.scaled, &to.scaled);
        let a = Integer::from(y * t) - Integer::from(w * v);
        let b = Integer::from(w * u) - Integer::from(x * t);
        let c = Integer::from(x * v) - Integer::from(y * u);
        Line([a, b, c])
    }

    /// 1 for a point on the left, −1 on the right, 0 on the line.
    fn side_of(&self, point: &Corner) -> i8 {
        let mut sum = Integer::from(&self.0[0] * &point.scaled[0]);
        sum += &self.0[1] * &point.scaled[1];
        sum += &self.0[2] * &point.scaled[2];
        sum.cmp0() as i8
    }
}

/// A side that the line must cross, as indices into the points: one end must be left, the other right.
#[derive(Clone, Copy)]
struct Gate {
    left: usize,
    right: usize,
}

/// Polygons unfolded one after another, with their corners as indices into `points`.
/// Invariant: the points are distinct; copy i is counterclockwise for even i and clockwise for odd i.
struct Unfolding {
    points: Vec<Corner>,
    copies: Vec<Vec<usize>>,
    gates: Vec<Gate>,
    next: Vec<usize>,
}

impl Unfolding {
    fn new(domain: &Domain) -> Unfolding {
        let corners = &domain.corners;
        Unfolding {
            points: corners.iter().cloned().map(Corner::new).collect(),
            copies: vec![(0..corners.len()).collect()],
            gates: Vec::new(),
            next: domain.next.clone(),
        }
    }

    fn last(&self) -> &[usize] {
        self.copies.last().expect("never empty")
    }

    /// The gate of a line that leaves the last copy through `side`.
    fn exit(&self, side: usize) -> Gate {
        let last = self.last();
        let (first, second) = (last[side], last[self.next[side]]);
        // Whoever leaves a counterclockwise polygon has the side's second corner on the left.
        if self.copies.len() % 2 == 1 {
            Gate {
                left: second,
                right: first,
            }
        } else {
            Gate {
                left: first,
                right: second,
            }
        }
    }

    /// Adds the mirror image of the last copy in `side`, and the gate.
    fn cross_side(&mut self, side: usize) {
        self.gates.push(self.exit(side));
        let last = self.last().to_vec();
        let foot = self.points[last[side]].place.clone();
        let axis = between(&foot, &self.points[last[self.next[side]]].place);
        let one = Rational::from(1);
        let image = last
            .iter()
            .map(|&i| {
                let moved = mirrored(&between(&foot, &self.points[i].place), &axis);
                self.index_of(along(&foot, &one, &moved))
            })
            .collect();
        self.copies.push(image);
    }

    /// Takes back the last [`cross_side`](Self::cross_side), which added the points from `kept` on.
    fn uncross(&mut self, kept: usize) {
        self.points.truncate(kept);
        self.copies.pop();
        self.gates.pop();
    }

    fn index_of(&mut self, place: Point) -> usize {
        if let Some(i) = self.points.iter().position(|p| p.place == place) {
            return i;
        }
        self.points.push(Corner::new(place));
        self.points.len() - 1
    }
}

/// An oriented line through two points, `tail` before `head`, with the side of every point so far. It passes
/// the closed condition at all gates so far; no point of smaller index than `head` other than `tail` is on it.
#[derive(Clone)]
struct Candidate {
    line: Rc<Line>,
    /// 1, or −1 when `line` is oriented from head to tail.
    turn: i8,
    direction: Rc<Point>,
    signs: Vec<i8>,
}

impl Candidate {
    fn may_pass(&self, gate: &Gate) -> bool {
        self.signs[gate.left] >= 0 && self.signs[gate.right] <= 0
    }

    fn watch(&mut self, points: &[Corner]) {
        for point in &points[self.signs.len()..] {
            self.signs.push(self.turn * self.line.side_of(point));
        }
    }
}

/// Depth-first search over the words that start with one side.
struct Search<'a> {
    domain: &'a Domain,
    longest: usize,
    word: Vec<u8>,
    unfolding: Unfolding,
}

impl<'a> Search<'a> {
    fn new(domain: &'a Domain, side: usize, longest: usize) -> Search<'a> {
        let mut unfolding = Unfolding::new(domain);
        // The line enters the table through the starting side: left and right are those of an exit, swapped.
        let exit = unfolding.exit(side);
        unfolding.gates.push(Gate {
            left: exit.right,
            right: exit.left,
        });
        Search {
            domain,
            longest,
            word: vec![side as u8],
            unfolding,
        }
    }

    /// Finds the words that extend `self.word`. `kept` are the candidates whose pair of points is among the
    /// first `old` points.
    fn grow(&mut self, kept: &[Candidate], old: usize, found: &mut [BTreeSet<Vec<u8>>]) {
        if self.word.len() == self.longest {
            return;
        }
        let mut candidates = kept.to_vec();
        for candidate in &mut candidates {
            candidate.watch(&self.unfolding.points);
        }
        self.add_pairs(old, &mut candidates);
        for side in 0..self.domain.corners.len() {
            let gate = self.unfolding.exit(side);
            let passing: Vec<Candidate> = candidates
                .iter()
                .filter(|c| c.may_pass(&gate))
                .cloned()
                .collect();
            if !passing.iter().any(|c| self.some_neighbour_reads(c, side)) {
                continue;
            }
            self.word.push(side as u8);
            found[self.word.len()].insert(self.word.clone());
            if self.word.len() < self.longest {
                let points = self.unfolding.points.len();
                self.unfolding.cross_side(side);
                self.grow(&passing, points, found);
                self.unfolding.uncross(points);
            }
            self.word.pop();
        }
    }

    /// Adds the candidates whose second point has index `old` or more.
    fn add_pairs(&self, old: usize, candidates: &mut Vec<Candidate>) {
        let points = &self.unfolding.points;
        for head in old.max(1)..points.len() {
            for tail in 0..head {
                let line = Line::through(&points[tail], &points[head]);
                let turns = self.possible_turns(&line);
                if turns.is_empty() {
                    continue;
                }
                let signs: Vec<i8> = points.iter().map(|p| line.side_of(p)).collect();
                let on_line = |i: &usize| signs[*i] == 0;
                if (0..head).find(on_line) != Some(tail) || (tail + 1..head).any(|i| on_line(&i)) {
                    continue; // The same line comes from a pair with smaller indices.
                }
                let direction = Rc::new(between(&points[tail].place, &points[head].place));
                let line = Rc::new(line);
                for turn in turns {
                    candidates.push(Candidate {
                        line: line.clone(),
                        turn,
                        direction: direction.clone(),
                        signs: signs.iter().map(|s| turn * s).collect(),
                    });
                }
            }
        }
    }

    /// The orientations in which the line satisfies the closed condition at every gate.
    fn possible_turns(&self, line: &Line) -> Vec<i8> {
        let mut turns = vec![1, -1];
        for gate in &self.unfolding.gates {
            let left = line.side_of(&self.unfolding.points[gate.left]);
            let right = line.side_of(&self.unfolding.points[gate.right]);
            turns.retain(|turn| turn * left >= 0 && turn * right <= 0);
            if turns.is_empty() {
                break;
            }
        }
        turns
    }

    /// Tries the 2m sign patterns next to the candidate's line.
    fn some_neighbour_reads(&self, candidate: &Candidate, side: usize) -> bool {
        let points = &self.unfolding.points;
        let mut on_line: Vec<usize> = (0..points.len())
            .filter(|&i| candidate.signs[i] == 0)
            .collect();
        let position = |i: usize| dot(&candidate.direction, &points[i].place) * candidate.turn;
        on_line.sort_by_cached_key(|&i| position(i));
        let exit = self.unfolding.exit(side);
        for before in 0..on_line.len() {
            for sign in [1, -1] {
                let mut signs = candidate.signs.clone();
                for (rank, &i) in on_line.iter().enumerate() {
                    signs[i] = if rank < before { sign } else { -sign };
                }
                let crosses = |gate: &Gate| signs[gate.left] > 0 && signs[gate.right] < 0;
                let through = self.unfolding.gates.iter().chain([&exit]).all(crosses);
                if !through {
                    continue;
                }
                let (point, velocity) = self.neighbour(&on_line, before, sign, candidate);
                for (corner, sign) in points.iter().zip(&signs) {
                    let height = cross(&velocity, &between(&point, &corner.place));
                    assert_eq!(height.cmp0() as i8, *sign, "the line has the wanted signs");
                }
                if self.reads(&point, velocity, side) {
                    return true;
                }
            }
        }
        false
    }

    /// Traces the line through `point`, which enters the table through the starting side.
    fn reads(&self, point: &Point, velocity: Point, side: usize) -> bool {
        let start = self.word[0] as usize;
        let foot = &self.domain.corners[start];
        let axis = self.domain.side_vector(start);
        let fraction = cross(&between(foot, point), &velocity) / cross(&axis, &velocity);
        let sides = self.word[1..].iter().map(|&s| s as usize).chain([side]);
        Ball::on_side(self.domain, start, &fraction, velocity).meets(sides.map(Meeting::Side))
    }

    /// A point and the direction of a line with the wanted signs: `sign` for the first `before` points on the
    /// candidate's line, `−sign` for the others on it, unchanged for the rest.
    ///
    /// With d the direction and n = (−d.y, d.x): a turn about X to the direction d + εn changes d×(p−X) by
    /// −ε d·(p−X), so that a point p on the line gets the sign of −ε when it is ahead of X, that of ε behind.
    /// A shift by −εn gives all points on the line the sign of ε and changes d×(p−X) by ε d·d for the others.
    fn neighbour(
        &self,
        on_line: &[usize],
        before: usize,
        sign: i8,
        candidate: &Candidate,
    ) -> (Point, Point) {
        let points = &self.unfolding.points;
        let turn = Rational::from(candidate.turn);
        let zero = (Rational::new(), Rational::new());
        let d = along(&zero, &turn, &candidate.direction);
        let normal = (Rational::from(-&d.1), d.0.clone());
        let half = Rational::from((1, 2));
        let pivot = if before == 0 {
            points[on_line[0]].place.clone()
        } else {
            let (p, q) = (&points[on_line[before - 1]], &points[on_line[before]]);
            along(&p.place, &half, &between(&p.place, &q.place))
        };
        let square = dot(&d, &d);
        let mut epsilon = Rational::from(1);
        for (point, _) in points
            .iter()
            .zip(&candidate.signs)
            .filter(|(_, s)| **s != 0)
        {
            let offset = between(&pivot, &point.place);
            let room = cross(&d, &offset).abs();
            let change = if before == 0 {
                square.clone()
            } else {
                dot(&d, &offset).abs()
            };
            while Rational::from(&epsilon * &change).cmp(&room) != Ordering::Less {
                epsilon >>= 1;
            }
        }
        epsilon *= sign;
        if before == 0 {
            // `−sign` is wanted for all points on the line: shift by +ε·normal.
            (along(&pivot, &epsilon, &normal), d)
        } else {
            (pivot, along(&d, &epsilon, &normal))
        }
    }
}
