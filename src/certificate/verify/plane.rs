//! The table of a certificate, read and checked.

use super::super::format::{FieldText, Header, TableText};
use super::Rejection;
use crate::number::{Field, Real, Sign, factor, poly};
use rug::{Integer, Rational};

/// A point or vector; second coordinates are in units of √g.
pub type Point = [Real; 2];

pub fn minus(a: &Point, b: &Point) -> Point {
    [&a[0] - &b[0], &a[1] - &b[1]]
}

pub fn cross(a: &Point, b: &Point) -> Real {
    &a[0] * &b[1] - &a[1] * &b[0]
}

/// The orientation of three points: positive when `c` is on the left of the line from `a` to `b`.
pub fn turn(a: &Point, b: &Point, c: &Point) -> Sign {
    cross(&minus(b, a), &minus(c, a)).sign()
}

/// What lies beyond an edge of a triangle.
#[derive(Clone, Copy, Debug)]
pub enum Beyond {
    /// A side of the table, by its first corner.
    Side(usize),
    /// Another triangle, and its edge.
    Triangle(usize, usize),
}

/// A checked table: a simple polygon, perhaps with holes, with a triangulation.
pub struct Plane {
    pub field: Field,
    pub form: Real,
    pub corners: Vec<Point>,
    /// Where the side from each corner ends.
    pub next: Vec<usize>,
    pub letters: Vec<char>,
    /// The letter of each side, as its place among the letters.
    pub letter: Vec<usize>,
    pub triangles: Vec<[usize; 3]>,
    /// What lies beyond edge j of each triangle, from its corner j to its corner j + 1.
    pub beyond: Vec<[Beyond; 3]>,
    /// The triangle and edge inside each side.
    pub inside: Vec<(usize, usize)>,
}

fn reject<T>(reason: impl Into<String>) -> Result<T, Rejection> {
    Err(Rejection::Table(reason.into()))
}

/// Parses a rational number.
pub fn rational(text: &str) -> Option<Rational> {
    let plain = |part: &str| {
        let digits = part.strip_prefix('-').unwrap_or(part);
        !digits.is_empty() && digits.bytes().all(|b| b.is_ascii_digit())
    };
    let (num, den) = text.split_once('/').unwrap_or((text, "1"));
    if !plain(num) || !plain(den) {
        return None;
    }
    let (num, den): (Integer, Integer) = (num.parse().ok()?, den.parse().ok()?);
    (den > 0).then(|| Rational::from((num, den)))
}

/// Parses an element of a field.
pub fn number(field: &Field, text: &str) -> Option<Real> {
    let coordinates: Vec<Rational> = text.split(' ').map(rational).collect::<Option<_>>()?;
    if coordinates.len() > field.degree() {
        return None;
    }
    Some(Real::from_rational_coordinates(field, &coordinates).lifted_to(field))
}

fn read_field(text: &FieldText) -> Result<Field, Rejection> {
    let coefficients: Option<Vec<Integer>> = text
        .polynomial
        .iter()
        .map(|c| {
            rational(c)
                .filter(|c| *c.denom() == 1)
                .map(|c| c.into_numer_denom().0)
        })
        .collect();
    let bounds = [rational(&text.root[0]), rational(&text.root[1])];
    let (Some(polynomial), [Some(lo), Some(hi)]) = (coefficients, bounds) else {
        return reject("the numbers of the field cannot be read");
    };
    if polynomial.len() < 2 || *polynomial.last().expect("long enough") != 1 {
        return reject("the polynomial of the field is not monic");
    }
    let irreducible = factor::factor(&polynomial)
        .is_ok_and(|found| found.factors.len() == 1 && found.factors[0].1 == 1);
    if !irreducible {
        return reject("the polynomial of the field is not proved irreducible");
    }
    if lo >= hi || poly::roots_between(&poly::sturm_sequence(&polynomial), &lo, &hi) != 1 {
        return reject("the bounds of the generator do not hold exactly one root");
    }
    Ok(Field::from_isolated_root(polynomial, lo, hi))
}

impl Plane {
    /// Reads a table and checks that it is one.
    pub fn read(header: &Header) -> Result<Plane, Rejection> {
        let text = &header.table;
        let field = read_field(&text.field)?;
        let form = number(&field, &text.form).filter(|form| form.sign() == Sign::Positive);
        let Some(form) = form else {
            return reject("the plane form is not a positive number");
        };
        let mut corners = Vec::new();
        let mut next = Vec::new();
        for ring in &text.rings {
            if ring.len() < 3 {
                return reject("a ring has fewer than three corners");
            }
            let first = corners.len();
            for [x, y] in ring {
                let (Some(x), Some(y)) = (number(&field, x), number(&field, y)) else {
                    return reject("a corner cannot be read");
                };
                next.push(corners.len() + 1);
                corners.push([x, y]);
            }
            next[corners.len() - 1] = first;
        }
        let letter = letters(text, corners.len())?;
        let mut plane = Plane {
            field,
            form,
            corners,
            next,
            letters: text.letters.clone(),
            letter,
            triangles: header.triangles.clone(),
            beyond: Vec::new(),
            inside: Vec::new(),
        };
        plane.check_sides()?;
        plane.join_triangles()?;
        Ok(plane)
    }

    /// Sides meet only where one ends and the next begins.
    fn check_sides(&self) -> Result<(), Rejection> {
        let k = self.corners.len();
        for i in 0..k {
            for j in i + 1..k {
                let (a, b) = (&self.corners[i], &self.corners[self.next[i]]);
                let (c, d) = (&self.corners[j], &self.corners[self.next[j]]);
                let touching = match (self.next[i] == j, self.next[j] == i) {
                    // Neighbours share one corner; the far end of each must not lie on the other.
                    (true, false) => on_segment(a, b, d) || on_segment(c, d, a),
                    (false, true) => on_segment(c, d, b) || on_segment(a, b, c),
                    _ => segments_meet(a, b, c, d),
                };
                if touching || a == b || c == d {
                    return reject(format!("sides {i} and {j} meet where they should not"));
                }
            }
        }
        Ok(())
    }

    /// The triangles run counterclockwise, and along each edge that is no side lies another triangle. Then the boundary
    /// curves wind round every point as often as there are triangles over it; since they are disjoint simple curves and
    /// only the first is counterclockwise, that is once inside the table and never outside, so the triangles tile it.
    fn join_triangles(&mut self) -> Result<(), Rejection> {
        let k = self.corners.len();
        for [a, b, c] in &self.triangles {
            if [a, b, c].iter().any(|corner| **corner >= k)
                || turn(&self.corners[*a], &self.corners[*b], &self.corners[*c]) != Sign::Positive
            {
                return reject("a triangle does not run counterclockwise");
            }
        }
        let mut edges = std::collections::HashMap::new();
        for (t, triangle) in self.triangles.iter().enumerate() {
            for j in 0..3 {
                let edge = (triangle[j], triangle[(j + 1) % 3]);
                if edges.insert(edge, (t, j)).is_some() {
                    return reject("two triangles lie on the same side of an edge");
                }
            }
        }
        let mut inside = vec![None; k];
        for t in 0..self.triangles.len() {
            let mut beyond = [Beyond::Side(0); 3];
            for (j, place) in beyond.iter_mut().enumerate() {
                let (from, to) = (self.triangles[t][j], self.triangles[t][(j + 1) % 3]);
                *place = match edges.get(&(to, from)) {
                    Some(&(other, edge)) => Beyond::Triangle(other, edge),
                    None if self.next[from] == to => {
                        inside[from] = Some((t, j));
                        Beyond::Side(from)
                    }
                    None => return reject("an edge of a triangle is neither a side nor shared"),
                };
            }
            self.beyond.push(beyond);
        }
        let Some(inside) = inside.into_iter().collect() else {
            return reject("a side has no triangle");
        };
        self.inside = inside;
        // Twice the area of each ring.
        let mut first = 0;
        while first < k {
            let mut area = Real::from(0);
            let mut at = first;
            loop {
                area += cross(&self.corners[at], &self.corners[self.next[at]]);
                at = self.next[at];
                if at == first {
                    break;
                }
            }
            let wanted = if first == 0 {
                Sign::Positive
            } else {
                Sign::Negative
            };
            if area.sign() != wanted {
                return reject("a ring runs the wrong way round");
            }
            first = self.next[first..]
                .iter()
                .position(|n| *n == first)
                .expect("a ring closes")
                + first
                + 1;
        }
        Ok(())
    }

    /// Reads a word.
    pub fn word(&self, text: &str) -> Option<Vec<usize>> {
        text.chars()
            .map(|c| self.letters.iter().position(|known| *known == c))
            .collect()
    }

    /// The squared length of a vector.
    pub fn square(&self, v: &Point) -> Real {
        &v[0] * &v[0] + &self.form * &(&v[1] * &v[1])
    }

    /// The scalar product of two vectors.
    pub fn dot(&self, a: &Point, b: &Point) -> Real {
        &a[0] * &b[0] + &self.form * &(&a[1] * &b[1])
    }

    /// The vector reflected in the direction of a side.
    pub fn reflect(&self, v: &Point, side: usize) -> Point {
        let e = minus(&self.corners[self.next[side]], &self.corners[side]);
        let factor = Real::from(2) * self.dot(v, &e);
        let factor = factor
            .checked_div(&self.square(&e))
            .expect("sides have a length");
        [&e[0] * &factor - &v[0], &e[1] * &factor - &v[1]]
    }
}

fn letters(text: &TableText, sides: usize) -> Result<Vec<usize>, Rejection> {
    let mut sorted = text.letters.clone();
    sorted.sort_unstable();
    sorted.dedup();
    if sorted.len() != text.letters.len() || text.sides.len() != sides {
        return reject("each side needs a letter, and each letter one place");
    }
    let found: Option<Vec<usize>> = text
        .sides
        .iter()
        .map(|letter| text.letters.iter().position(|known| known == letter))
        .collect();
    found.map_or_else(|| reject("a side has an unknown letter"), Ok)
}

fn on_segment(a: &Point, b: &Point, p: &Point) -> bool {
    if turn(a, b, p) != Sign::Zero {
        return false;
    }
    let between =
        |low: &Real, high: &Real, x: &Real| (low <= x && x <= high) || (high <= x && x <= low);
    between(&a[0], &b[0], &p[0]) && between(&a[1], &b[1], &p[1])
}

fn segments_meet(a: &Point, b: &Point, c: &Point, d: &Point) -> bool {
    let (ac, ad) = (turn(a, b, c), turn(a, b, d));
    let (ca, cb) = (turn(c, d, a), turn(c, d, b));
    if ac != Sign::Zero && ad != Sign::Zero && ca != Sign::Zero && cb != Sign::Zero {
        return ac != ad && ca != cb;
    }
    on_segment(a, b, c) || on_segment(a, b, d) || on_segment(c, d, a) || on_segment(c, d, b)
}
