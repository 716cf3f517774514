//! p(1000) of the four tables that tile the plane by reflections, from counts of visible lattice points.
//!
//! The images of such a table are the cells of a pattern of mirror lines, and its corner images are the points where
//! lines meet. A generalized diagonal from a corner is a segment from it into its angle to a corner image with none
//! before; it crosses as many sides as lines, because two lines meet in corner images only. So N(n) is a count of lattice
//! points, done here without beams, fans, unfolding or any code of the library. The square and the equilateral triangle
//! have closed forms: N(n) = 4·φ(n+2), OEIS A005598 and Lipatov 1982 (from memory); N(2m − 3) = 3·φ(m).

mod support;

use reboundary::complexity::counts::p_from_diagonals;
use reboundary::table::Table;
use std::collections::HashMap;
use support::{
    coprime_below, equilateral, gcd, half_equilateral, p_by_fans, right_isosceles, unit_square,
};

const FAR: usize = 1000;

/// A pattern of mirror lines f(p) ∈ `unit`·Z for linear forms f and points p with whole coordinates.
struct Pattern {
    unit: i64,
    forms: &'static [[i64; 2]],
    /// The corners of one cell, counterclockwise or clockwise.
    cell: [[i64; 2]; 3],
}

fn value(form: &[i64; 2], p: [i64; 2]) -> i64 {
    form[0] * p[0] + form[1] * p[1]
}

fn cross(a: [i64; 2], b: [i64; 2]) -> i64 {
    a[0] * b[1] - a[1] * b[0]
}

impl Pattern {
    fn is_corner(&self, p: [i64; 2]) -> bool {
        let through = |form: &&[i64; 2]| value(form, p).rem_euclid(self.unit) == 0;
        self.forms.iter().filter(through).count() >= 2
    }

    /// Lines that a segment crosses between its ends.
    fn crossed(&self, from: [i64; 2], to: [i64; 2]) -> i64 {
        let strictly_between = |form: &[i64; 2]| {
            let (a, b) = (value(form, from), value(form, to));
            let (low, high) = (a.min(b), a.max(b));
            // Multiples of the unit in the open interval.
            ((high - 1).div_euclid(self.unit) - low.div_euclid(self.unit)).max(0)
        };
        self.forms.iter().map(strictly_between).sum()
    }

    /// N(0), …, N(most): diagonals from the three corners of the cell, within a box that certainly holds them.
    fn diagonals(&self, most: usize, reach: [i64; 2]) -> Vec<u64> {
        let mut n = vec![0; most + 1];
        for i in 0..3 {
            let [from, a, b] = [0, 1, 2].map(|j| self.cell[(i + j) % 3]);
            let ray = |p: [i64; 2]| [p[0] - from[0], p[1] - from[1]];
            let turn = cross(ray(a), ray(b)).signum();
            // The nearest corner image in each direction.
            let mut nearest: HashMap<[i64; 2], (i64, [i64; 2])> = HashMap::new();
            for x in -reach[0]..=reach[0] {
                for y in -reach[1]..=reach[1] {
                    let step = [x, y];
                    let inside = turn * cross(ray(a), step) > 0 && turn * cross(step, ray(b)) > 0;
                    let to = [from[0] + x, from[1] + y];
                    if !inside || !self.is_corner(to) {
                        continue;
                    }
                    let times = gcd(x.unsigned_abs(), y.unsigned_abs()) as i64;
                    let way = [x / times, y / times];
                    let found = nearest.entry(way).or_insert((times, to));
                    if times < found.0 {
                        *found = (times, to);
                    }
                }
            }
            for (_, to) in nearest.into_values() {
                let crossed = self.crossed(from, to) as usize;
                if crossed <= most {
                    n[crossed] += 1;
                }
            }
        }
        n
    }
}

/// Legs on x = 0 and y = 0, hypotenuse on x + y = 1: the mirror lines are x ∈ Z, y ∈ Z, x + y and x − y odd. Seen from the
/// acute corner (1, 0), X = x − 1, these are X ∈ Z, Y ∈ Z, (X + Y)/2 ∈ Z, (X − Y)/2 ∈ Z, and points are whole. A step
/// (X, Y) crosses at least |X| + |Y| + max(|X|, |Y|) − 4 lines, so neither is more than (most + 4)/2.
fn right_isosceles_diagonals(most: usize) -> Vec<u64> {
    Pattern {
        unit: 2,
        forms: &[[2, 0], [0, 2], [1, 1], [1, -1]],
        cell: [[0, 0], [-1, 0], [-1, 1]],
    }
    .diagonals(most, [most as i64 / 2 + 2; 2])
}

/// The six positive roots of G2 in the values (u, v) of its simple roots: the cell u, v ≥ 0, 3u + 2v ≤ 1 has the corners
/// (0, 0), (1/3, 0), (0, 1/2) with angles 30°, 60°, 90°. For a step (u, v) the forms' absolute values sum to at least
/// 5|u| and 3|v|, and a segment crosses at least that sum less 6 lines.
fn half_equilateral_diagonals(most: usize) -> Vec<u64> {
    let room = |share: i64| 6 * ((most as i64 + 6) / share + 1);
    Pattern {
        unit: 6,
        forms: &[[1, 0], [0, 1], [1, 1], [2, 1], [3, 1], [3, 2]],
        cell: [[0, 0], [2, 0], [0, 3]],
    }
    .diagonals(most, [room(5), room(3)])
}

fn agrees(table: &Table, sides: u64, diagonals: &[u64], limit: f64) {
    let p = p_from_diagonals(sides, diagonals, FAR);
    // Leading coefficients of the lattice counts: `limit`·n³.
    let ratio = p[FAR] as f64 / (FAR as f64).powi(3) / limit;
    assert!((ratio - 1.0).abs() < 0.01, "{}: {ratio}", table.title());
    assert_eq!(p_by_fans(table, FAR), p, "{}", table.title());
}

const PI_SQUARED: f64 = std::f64::consts::PI * std::f64::consts::PI;

#[test]
fn square_to_1000_oeis_a005598() {
    let n: Vec<u64> = (0..FAR as u64).map(|n| 4 * coprime_below(n + 2)).collect();
    agrees(&unit_square(), 4, &n, 4.0 / PI_SQUARED);
}

#[test]
fn equilateral_to_1000_lattice_count() {
    let n: Vec<u64> = (0..FAR as u64)
        .map(|n| match n % 2 {
            1 => 3 * coprime_below(n.div_ceil(2) + 1),
            _ => 0,
        })
        .collect();
    agrees(&equilateral(), 3, &n, 3.0 / (4.0 * PI_SQUARED));
}

#[test]
fn right_isosceles_to_1000_lattice_count() {
    let n = right_isosceles_diagonals(FAR - 2);
    agrees(&right_isosceles(), 3, &n, 2.0 / (3.0 * PI_SQUARED));
}

#[test]
fn half_equilateral_to_1000_lattice_count() {
    let n = half_equilateral_diagonals(FAR - 2);
    agrees(&half_equilateral(), 3, &n, 19.0 / (30.0 * PI_SQUARED));
}
