//! The fields of cosines of rational multiples of π.
//!
//! 2cos(2π/q) is an algebraic integer of degree φ(q)/2 for q ≥ 3. Its minimal polynomial Ψ comes from
//! the cyclotomic polynomial: Φ_q(x) = x^(φ/2)·Ψ(x + 1/x), irreducible because Φ_q is (Lehmer, Amer. Math.
//! Monthly 40 (1933) 165–166, from memory). All 2cos(2πp/q) are integer polynomials in it:
//! 2cos(jt) = V_j(2cos t) with V₀ = 2, V₁ = x, V_{j+1} = x·V_j − V_{j−1}.

use super::adjoin::AdjoinFault;
use super::effort::{charge_with, product_cost, weight_of_bits};
use super::enclosure::Enclosure;
use super::field::{Field, LARGEST_DEGREE};
use super::poly;
use super::real::Real;
use rug::float::Round;
use rug::{Float, Integer, Rational};

/// Above this φ(q)/2 is past [`LARGEST_DEGREE`]: φ(q) ≥ √(q/2) for every q.
const LARGEST_ORDER: u32 = 2 * (2 * LARGEST_DEGREE as u32 + 2) * (2 * LARGEST_DEGREE as u32 + 2);

/// Euler's φ.
pub fn totient(q: u32) -> u32 {
    let (mut rest, mut result, mut d) = (q, q, 2);
    while d * d <= rest {
        if rest.is_multiple_of(d) {
            result -= result / d;
            while rest.is_multiple_of(d) {
                rest /= d;
            }
        }
        d += 1;
    }
    if rest > 1 {
        result - result / rest
    } else {
        result
    }
}

/// The degree of 2cos(2π/q).
pub fn cosine_degree(q: u32) -> usize {
    if q <= 2 { 1 } else { totient(q) as usize / 2 }
}

/// The angle 2π·turns brought to the form ±cos(2πp/q) with q not 2 modulo 4 and 0 ≤ p/q ≤ 1/2:
/// (negative, p, q).
///
/// # Errors
/// [`AdjoinFault::DegreeTooLarge`] when the cosine's degree is past [`LARGEST_DEGREE`].
pub fn reduced_angle(turns: &Rational) -> Result<(bool, u32, u32), AdjoinFault> {
    let mut part = turns - turns.clone().floor();
    let mut negative = false;
    if part.denom().mod_u(4) == 2 {
        // cos(t) = −cos(t − π), and the numerator becomes even.
        negative = true;
        part += Rational::from((1, 2));
        if part >= 1 {
            part -= 1;
        }
    }
    if part > Rational::from((1, 2)) {
        part = 1 - part;
    }
    let too_large = |degree| AdjoinFault::DegreeTooLarge { degree };
    let q = part
        .denom()
        .to_u32()
        .filter(|q| *q <= LARGEST_ORDER)
        .ok_or_else(|| {
            let half = Integer::from(part.denom().sqrt_ref()) / 4u32;
            too_large(half.to_usize().unwrap_or(usize::MAX))
        })?;
    if cosine_degree(q) > LARGEST_DEGREE {
        return Err(too_large(cosine_degree(q)));
    }
    Ok((
        negative,
        part.numer().to_u32().expect("at most the denominator"),
        q,
    ))
}

/// The minimal polynomial of 2cos(2π/q), monic over ℤ.
///
/// # Panics
/// If q is zero.
pub fn minimal_polynomial(q: u32) -> Vec<Integer> {
    assert!(q > 0, "an angle of 2π/0");
    match q {
        1 => return vec![Integer::from(-2), Integer::from(1)],
        2 => return vec![Integer::from(2), Integer::from(1)],
        _ => {}
    }
    let cyclotomic = cyclotomic(q as usize);
    let middle = (cyclotomic.len() - 1) / 2;
    let mut result = vec![Integer::new(); middle + 1];
    let mut chain = [
        vec![Integer::from(2)],
        vec![Integer::new(), Integer::from(1)],
    ];
    result[0] += &cyclotomic[middle];
    for j in 1..=middle {
        for (c, v) in result.iter_mut().zip(&chain[1]) {
            *c += Integer::from(v * &cyclotomic[middle + j]);
        }
        let mut next = vec![Integer::new()];
        next.extend_from_slice(&chain[1]);
        for (c, v) in next.iter_mut().zip(&chain[0]) {
            *c -= v;
        }
        chain.swap(0, 1);
        chain[1] = next;
    }
    result
}

/// Φ_q, by dividing xⁿ − 1 for the proper divisors.
fn cyclotomic(q: usize) -> Vec<Integer> {
    let divisors: Vec<usize> = (1..=q).filter(|d| q.is_multiple_of(*d)).collect();
    let mut known: Vec<Vec<Integer>> = Vec::new();
    for &n in &divisors {
        let mut p = vec![Integer::new(); n + 1];
        p[0] = Integer::from(-1);
        p[n] = Integer::from(1);
        for (d, phi) in divisors.iter().zip(&known) {
            if n.is_multiple_of(*d) {
                p = poly::exact_quotient(&p, phi).expect("a divisor's polynomial divides");
            }
        }
        known.push(p);
    }
    known.pop().expect("q divides itself")
}

/// ℚ(cos(2π/q)) with the generator 2cos(2π/q); the rationals when that is rational.
///
/// # Errors
/// [`AdjoinFault::DegreeTooLarge`] past [`LARGEST_DEGREE`].
pub fn cosine_field(q: u32) -> Result<Field, AdjoinFault> {
    let degree = cosine_degree(q);
    if degree > LARGEST_DEGREE {
        return Err(AdjoinFault::DegreeTooLarge { degree });
    }
    if degree == 1 {
        return Ok(Field::rationals());
    }
    // The conjugates are 2cos(2πj/q); the generator is the largest, and 3π/q separates it from the next.
    // The gap is about 1/q², far above the error of a floating-point cosine; the constructor proves it.
    let below = 2.0 * (1.5 * std::f64::consts::TAU / f64::from(q)).cos();
    let lo = Rational::from_f64(below).expect("a finite number");
    Ok(Field::from_isolated_root(
        minimal_polynomial(q),
        lo,
        Rational::from(2),
    ))
}

/// 2cos(2π/q) in the field of [`cosine_field`]`(q)`.
pub fn generator_of(field: &Field, q: u32) -> Real {
    match q {
        1 => Real::from(2),
        2 => Real::from(-2),
        3 => Real::from(-1),
        4 => Real::from(0),
        6 => Real::from(1),
        _ => field.generator(),
    }
}

/// 2cos(j·t) from 2cos(t).
pub fn multiple_angle(twice_cosine: &Real, j: u32) -> Real {
    let (mut before, mut current) = (Real::from(2), twice_cosine.clone());
    if j == 0 {
        return before;
    }
    for _ in 1..j {
        let next = twice_cosine * &current - before;
        before = std::mem::replace(&mut current, next);
    }
    current
}

/// V_j as a polynomial, constant term first.
pub fn multiple_angle_polynomial(j: u32) -> Vec<Real> {
    let (mut before, mut current) = (vec![Real::from(2)], vec![Real::from(0), Real::from(1)]);
    if j == 0 {
        return before;
    }
    for _ in 1..j {
        let mut next = vec![Real::from(0)];
        next.extend_from_slice(&current);
        for (c, b) in next.iter_mut().zip(&before) {
            *c -= b.clone();
        }
        before = std::mem::replace(&mut current, next);
    }
    current
}

/// An enclosure of 2cos(2πp/q) for 0 ≤ p/q ≤ 1/2, of width at most about 2^−bits.
///
/// The cosine falls on \[0, π\], so the ends of an enclosure of the angle give those of the cosine; each is
/// rounded outwards by MPFR.
pub fn twice_cosine_enclosure(p: u32, q: u32, bits: u32) -> Enclosure {
    let precision = bits + 16;
    // π and a cosine: some products for each doubling of the precision, and more for the series.
    charge_with(|| {
        let size = weight_of_bits(precision.into());
        product_cost(size, size).saturating_mul(200)
    });
    let angle = Enclosure::pi(precision)
        .mul_integer(&Integer::from(2 * u64::from(p)))
        .div_integer(&Integer::from(q));
    let mut lo = angle.hi().clone();
    lo.cos_round(Round::Down);
    let mut hi = angle.lo().clone();
    hi.cos_round(Round::Up);
    // An upper end of the angle past π would turn the cosine back; below −1 nothing is lost.
    if p * 2 == q {
        lo = Float::with_val(precision, -1);
    }
    Enclosure::between(lo, hi).mul_integer(&Integer::from(2))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn minimal_polynomials_vanish_at_the_cosine() {
        for q in (3..=127).filter(|q| cosine_degree(*q) <= 24) {
            let p = minimal_polynomial(q);
            assert_eq!(p.len() - 1, cosine_degree(q));
            assert_eq!(*p.last().unwrap(), 1);
            let x = 2.0 * (std::f64::consts::TAU / f64::from(q)).cos();
            // The cosine is the last root: no root above it, the sign changes across it.
            let (below, above) = (x - 1e-9, (x + 1e-9).min(2.0));
            let at = |x: f64| poly::sign_at(&p, &Rational::from_f64(x).unwrap());
            assert_ne!(at(below), at(above), "q = {q}");
        }
        // x³ + x² − 2x − 1 for q = 7: Watkins and Zeitlin, Amer. Math. Monthly 100 (1993), from memory.
        assert_eq!(minimal_polynomial(7), [-1, -2, 1, 1].map(Integer::from));
    }

    #[test]
    fn cosine_polynomials_are_irreducible_by_factoring_too() {
        for q in [7, 15, 16, 21, 24, 31, 40, 60] {
            let found = crate::number::factor::factor(&minimal_polynomial(q)).unwrap();
            assert_eq!(found.factors.len(), 1, "q = {q}");
        }
    }

    #[test]
    fn angles_reduce_to_the_same_cosine() {
        for (p, q) in [
            (1, 10),
            (3, 10),
            (7, 10),
            (-5, 14),
            (22, 7),
            (1, 2),
            (0, 1),
            (5, 12),
            (11, 6),
        ] {
            let turns = Rational::from((p, q));
            let (negative, rp, rq) = reduced_angle(&turns).unwrap();
            assert_ne!(rq % 4, 2);
            let exact =
                twice_cosine_enclosure(rp, rq, 60).to_f64() * if negative { -1.0 } else { 1.0 };
            let expected = 2.0 * (std::f64::consts::TAU * turns.to_f64()).cos();
            assert!(
                (exact - expected).abs() < 1e-12,
                "{p}/{q}: {exact} {expected}"
            );
            let field = cosine_field(rq).unwrap();
            let value = multiple_angle(&generator_of(&field, rq), rp);
            let value = if negative { -value } else { value };
            assert!((value.to_f64() - expected).abs() < 1e-12, "{p}/{q}");
        }
    }

    #[test]
    fn angles_of_large_order_are_refused() {
        for q in [1021_u64, 99_991, 1_000_000_007, 1_000_000_000_000_000_003] {
            let turns = Rational::from((1, q));
            assert!(matches!(
                reduced_angle(&turns),
                Err(AdjoinFault::DegreeTooLarge { .. })
            ));
        }
    }
}
