//! Regular polygons, and triangles by their angles, in the smallest field.
//!
//! With the plane form x² + g·y² the sine that all heights have in common moves into g, and the
//! coordinates lie in the field of the cosines. For a regular k-gon that is ℚ(cos(2π/k)) with
//! g = sin²(2π/k); for a triangle with angles aπ/s, bπ/s, cπ/s (integers without common factor, sum s) it is
//! ℚ(cos(2π/s)) with g = (sin A·sin B/sin C)². The sine itself lies in that field exactly when 4 divides
//! k or s, and then g is 1. A rational g is brought to a squarefree integer.

use super::Vector;
use crate::number::adjoin::AdjoinFault;
use crate::number::cosine::{cosine_field, generator_of, multiple_angle, reduced_angle};
use crate::number::effort::{charge_with, weight};
use crate::number::{Field, Real};
use rug::{Integer, Rational};

/// Corners in counterclockwise order, and the g of their plane form.
#[derive(Clone, Debug)]
pub struct Shape {
    /// The corners; second coordinates in units of √g.
    pub corners: Vec<Vector>,
    /// g.
    pub form: Real,
}

/// The cosines of the multiples of 2π/q.
struct Cosines {
    q: u32,
    twice: Real,
}

impl Cosines {
    fn new(order: u32) -> Result<Cosines, AdjoinFault> {
        // The field of order q = 2·odd is that of q/2.
        let (_, _, q) = reduced_angle(&Rational::from((1, order)))?;
        let field: Field = cosine_field(q)?;
        Ok(Cosines {
            q,
            twice: generator_of(&field, q),
        })
    }

    /// cos(2π·turns), for turns with a denominator that divides the order.
    fn of(&self, turns: &Rational) -> Real {
        let (negative, p, q) = reduced_angle(turns).expect("a smaller order than the field's");
        debug_assert!(self.q.is_multiple_of(q), "the angle belongs to the field");
        let half = Rational::from((if negative { -1 } else { 1 }, 2));
        multiple_angle(&self.twice, p * (self.q / q)) * Real::from(half)
    }
}

/// The regular polygon with k corners on the unit circle, corner 0 at (1, 0).
///
/// # Errors
/// [`AdjoinFault::DegreeTooLarge`] when φ(k)/2 is past the largest degree.
///
/// # Panics
/// If k is less than 3.
pub fn regular(k: u32) -> Result<Shape, AdjoinFault> {
    assert!(k >= 3, "a polygon has at least three corners");
    let cosines = Cosines::new(k)?;
    let cosine = cosines.of(&Rational::from((1, k)));
    let twice = &cosine * Real::from(2);
    // cos(2πj/k), and sin(2πj/k)/sin(2π/k), both by a_{j+1} = 2c·a_j − a_{j−1}.
    let mut points = vec![
        (Real::from(1), Real::from(0)),
        (cosine.clone(), Real::from(1)),
    ];
    for j in 2..k as usize {
        let ((x, y), (x_before, y_before)) = (&points[j - 1], &points[j - 2]);
        points.push((&twice * x - x_before, &twice * y - y_before));
    }
    let (unit, form) = if k.is_multiple_of(4) {
        let quarter = Rational::from((1, 4));
        (
            cosines.of(&(quarter - Rational::from((1, k)))),
            Real::from(1),
        )
    } else {
        without_square(Real::from(1) - &cosine * &cosine)
    };
    let corners = points
        .into_iter()
        .map(|(x, y)| Vector::new(x, y * &unit))
        .collect();
    Ok(Shape { corners, form })
}

/// The triangle with corners (0, 0), (1, 0) and a third above, whose angles at corners 0, 1, 2 are in
/// proportion to three positive numbers.
///
/// # Errors
/// [`AdjoinFault::DegreeTooLarge`] when the field of the cosines is too large.
///
/// # Panics
/// If one of the numbers is not positive.
pub fn triangle(proportions: &[Rational; 3]) -> Result<Shape, AdjoinFault> {
    assert!(proportions.iter().all(|p| *p > 0), "angles are positive");
    let total: Rational = proportions.iter().sum();
    let shares: Vec<Rational> = proportions
        .iter()
        .map(|p| Rational::from(p / &total))
        .collect();
    let mut order = Integer::from(1);
    shares.iter().for_each(|share| order.lcm_mut(share.denom()));
    let s = match order.to_u32() {
        Some(s) => s,
        // Reducing the finest angle gives the refusal with its degree.
        None => {
            return Err(reduced_angle(&Rational::from((Integer::from(1), order)))
                .expect_err("an order past 32 bits"));
        }
    };
    let cosines = Cosines::new(s)?;
    let cos = |turns: Rational| cosines.of(&turns);
    let one = Real::from(1);
    // Cosines of the doubled angles: cos 2A = cos(2π·share).
    let [a, b, c]: [Real; 3] = std::array::from_fn(|i| cos(shares[i].clone()));
    let half = Real::from(Rational::from((1, 2)));
    // sin A·cos… : x = cos A·sin B / sin C = 1/2 + (cos 2A − cos 2B) / (2(1 − cos 2C)).
    let below = (&one - &c)
        .inverse()
        .expect("an angle strictly between 0 and π");
    let x = &half + &half * (&a - &b) * &below;
    let (y, form) = if s.is_multiple_of(4) {
        (height(&shares, s, &cos, &below), one)
    } else {
        // y² = sin²A·sin²B / sin²C with 2·sin²A = 1 − cos 2A.
        without_square((&one - &a) * (&one - &b) * &below * &half)
    };
    let zero = || Real::from(0);
    Ok(Shape {
        corners: vec![
            Vector::new(zero(), zero()),
            Vector::new(Real::from(1), zero()),
            Vector::new(x, y),
        ],
        form,
    })
}

/// sin A·sin B / sin C when 4 divides s. The three integers of the angles have an even sum and no common
/// factor, so exactly one is even: its sine is the cosine of a multiple of 2π/s, and the other two sines
/// have a product of that kind.
fn height(
    shares: &[Rational],
    s: u32,
    cos: &impl Fn(Rational) -> Real,
    inverse_double_square: &Real,
) -> Real {
    let even = shares
        .iter()
        .position(|share| Rational::from(share * s).numer().is_even())
        .expect("one of the three integers is even");
    // Turns are half of the share, because the angle is π·share.
    let half = |share: &Rational| Rational::from(share / 2u32);
    let alone = cos(Rational::from((1, 4)) - half(&shares[even]));
    let (p, q) = (half(&shares[(even + 1) % 3]), half(&shares[(even + 2) % 3]));
    let pair = cos(Rational::from(&p - &q)) - cos(p + q);
    // (alone · pair/2) / sin²C, and sin²C = (1 − cos 2C)/2.
    alone * pair * inverse_double_square
}

/// (u, g₀) with u²·g₀ = g: for a rational g a squarefree integer g₀ as far as trial division finds squares,
/// otherwise u = 1.
pub(super) fn without_square(g: Real) -> (Real, Real) {
    let Some(value) = g.to_rational() else {
        return (Real::from(1), g);
    };
    // n/d = n·d/d²
    let mut kernel = Integer::from(value.numer() * value.denom());
    let mut outside = Integer::from(1);
    let mut q = Integer::from(2);
    while Integer::from(q.square_ref()) <= kernel && q < 10_000 {
        let square = Integer::from(q.square_ref());
        charge_with(|| 16 * weight(&kernel));
        while kernel.is_divisible(&square) {
            kernel.div_exact_mut(&square);
            outside *= &q;
        }
        q += 1;
    }
    let unit = Rational::from((outside, value.denom().clone()));
    (Real::from(unit), Real::from(kernel))
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::f64::consts::{PI, TAU};

    fn plane(shape: &Shape) -> Vec<(f64, f64)> {
        let unit = shape.form.to_f64().sqrt();
        shape
            .corners
            .iter()
            .map(|c| (c.x.to_f64(), c.y.to_f64() * unit))
            .collect()
    }

    fn degree(shape: &Shape) -> usize {
        let numbers = shape
            .corners
            .iter()
            .flat_map(|c| [&c.x, &c.y])
            .chain([&shape.form]);
        numbers.map(|n| n.field().degree()).max().unwrap()
    }

    #[test]
    fn regular_polygons_lie_on_the_unit_circle_in_the_field_of_the_cosine() {
        for k in (3..=40).chain([51, 60, 64, 120, 255]) {
            if crate::number::cosine::cosine_degree(k) > 24 {
                continue;
            }
            let shape = regular(k).unwrap();
            assert_eq!(
                degree(&shape),
                crate::number::cosine::cosine_degree(k).max(1),
                "k = {k}"
            );
            for (j, (x, y)) in plane(&shape).into_iter().enumerate() {
                let angle = TAU * j as f64 / f64::from(k);
                assert!(
                    (x - angle.cos()).abs() + (y - angle.sin()).abs() < 1e-12,
                    "k = {k}"
                );
            }
            for corner in &shape.corners {
                let norm = &corner.x * &corner.x + &shape.form * &corner.y * &corner.y;
                assert_eq!(norm, Real::from(1));
            }
        }
        for (k, form) in [(3, 3), (4, 1), (6, 3), (8, 1), (12, 1)] {
            assert_eq!(regular(k).unwrap().form, Real::from(form), "k = {k}");
        }
    }

    #[test]
    fn triangles_have_their_angles() {
        for a in 1..=7_i64 {
            for b in 1..=7_i64 {
                for c in 1..=7_i64 {
                    let shape = triangle(&[a, b, c].map(Rational::from)).unwrap();
                    let p = plane(&shape);
                    let at = |i: usize| {
                        let (o, q, r) = (p[i], p[(i + 1) % 3], p[(i + 2) % 3]);
                        let direction = |t: (f64, f64)| (t.1 - o.1).atan2(t.0 - o.0);
                        (direction(r) - direction(q)).rem_euclid(TAU)
                    };
                    for (i, share) in [a, b, c].into_iter().enumerate() {
                        let expected = PI * share as f64 / (a + b + c) as f64;
                        assert!(
                            (at(i) - expected).abs() < 1e-9,
                            "{a} {b} {c} at {i}: {}",
                            at(i)
                        );
                    }
                }
            }
        }
    }

    #[test]
    fn familiar_triangles_are_rational() {
        for (proportions, form) in [
            ([1, 1, 1], 3),
            ([2, 1, 1], 1),
            ([1, 1, 2], 1),
            ([1, 2, 3], 3),
        ] {
            let shape = triangle(&proportions.map(Rational::from)).unwrap();
            assert_eq!(shape.form, Real::from(form), "{proportions:?}");
            assert_eq!(degree(&shape), 1);
        }
        let heptagonal = triangle(&[1, 2, 4].map(Rational::from)).unwrap();
        assert_eq!(degree(&heptagonal), 3);
    }

    #[test]
    fn fields_too_large_are_refused() {
        assert!(matches!(
            regular(251),
            Err(AdjoinFault::DegreeTooLarge { degree: 125 })
        ));
        let huge = Rational::from((1, 1_000_000_007_i64));
        let refused = triangle(&[huge, Rational::from(1), Rational::from(2)]);
        assert!(matches!(refused, Err(AdjoinFault::DegreeTooLarge { .. })));
    }
}
