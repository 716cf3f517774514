//! Lifting a factorisation modulo p to one modulo a high power of p.
//!
//! Quadratic Hensel lifting of coprime pairs, applied down a binary tree of factors (von zur Gathen and
//! Gerhard, *Modern Computer Algebra*, algorithms 15.10 and 15.17, from memory). Invariant of a step:
//! f ≡ g·h and s·g + t·h ≡ 1 modulo m, g and h monic; afterwards the same modulo m². Cost for degree n
//! and r factors: O(log k · log r) products of polynomials of degree n with coefficients below p^k.

use super::effort::{charge_with, division_cost, product_cost, weight, weights};
use super::modular::{ModularPoly, PrimeField};
use super::poly::trim;
use rug::Integer;

type Poly = Vec<Integer>;

fn reduced(mut p: Poly, modulus: &Integer) -> Poly {
    charge_with(|| division_cost(weights(&p), weight(modulus)));
    for c in &mut p {
        *c = std::mem::take(c).modulo(modulus);
    }
    trim(&mut p);
    p
}

pub(crate) fn product(a: &[Integer], b: &[Integer], modulus: &Integer) -> Poly {
    reduced(super::poly::multiply(a, b), modulus)
}

fn sum(a: &[Integer], b: &[Integer], modulus: &Integer) -> Poly {
    let mut total = vec![Integer::new(); a.len().max(b.len())];
    for p in [a, b] {
        for (t, c) in total.iter_mut().zip(p) {
            *t += c;
        }
    }
    reduced(total, modulus)
}

fn difference(a: &[Integer], b: &[Integer], modulus: &Integer) -> Poly {
    let negated: Poly = b.iter().map(|c| Integer::from(-c)).collect();
    sum(a, &negated, modulus)
}

/// Quotient and remainder by a monic polynomial.
fn divide(a: &[Integer], monic: &[Integer], modulus: &Integer) -> (Poly, Poly) {
    let mut rest = a.to_vec();
    let mut quotient = vec![Integer::new(); (a.len() + 1).saturating_sub(monic.len())];
    while rest.len() >= monic.len() {
        let shift = rest.len() - monic.len();
        let factor = rest.last().expect("nonempty").clone().modulo(modulus);
        if factor != 0 {
            charge_with(|| product_cost(weights(monic), weight(&factor)));
            for (i, c) in monic.iter().enumerate() {
                rest[shift + i] -= Integer::from(c * &factor);
            }
        }
        rest.pop();
        quotient[shift] = factor;
    }
    (reduced(quotient, modulus), reduced(rest, modulus))
}

fn widened(p: &[u64]) -> Poly {
    p.iter().map(|c| Integer::from(*c)).collect()
}

/// Lifts the monic factors of the monic polynomial f from modulo p to modulo `modulus`, a power of p.
/// The result is in the order of the factors, with coefficients in 0 … modulus−1.
pub(crate) fn lift(
    f: &[Integer],
    factors: &[ModularPoly],
    field: PrimeField,
    modulus: &Integer,
) -> Vec<Poly> {
    if factors.len() == 1 {
        return vec![reduced(f.to_vec(), modulus)];
    }
    let (left, right) = factors.split_at(factors.len() / 2);
    let multiply =
        |part: &[ModularPoly]| part.iter().fold(vec![1], |acc, p| field.product(&acc, p));
    let (g, h) = (multiply(left), multiply(right));
    let (g, h) = lift_pair(f, &g, &h, field, modulus);
    let mut lifted = lift(&g, left, field, modulus);
    lifted.extend(lift(&h, right, field, modulus));
    lifted
}

fn lift_pair(
    f: &[Integer],
    g: &[u64],
    h: &[u64],
    field: PrimeField,
    modulus: &Integer,
) -> (Poly, Poly) {
    let (s, t) = field.bezout(g, h);
    let [mut g, mut h, mut s, mut t] = [g, h, &s, &t].map(widened);
    let mut m = Integer::from(field.prime);
    while m < *modulus {
        // The exponent doubles; the last step may overshoot and is cut back by the reduction.
        m.square_mut();
        if m > *modulus {
            m = modulus.clone();
        }
        let error = difference(f, &product(&g, &h, &m), &m);
        let (q, r) = divide(&product(&s, &error, &m), &h, &m);
        let correction = sum(&product(&t, &error, &m), &product(&q, &g, &m), &m);
        g = sum(&g, &correction, &m);
        h = sum(&h, &r, &m);
        let one = [Integer::from(1)];
        let b = sum(&product(&s, &g, &m), &product(&t, &h, &m), &m);
        let b = difference(&b, &one, &m);
        let (c, d) = divide(&product(&s, &b, &m), &h, &m);
        s = difference(&s, &d, &m);
        let correction = sum(&product(&t, &b, &m), &product(&c, &g, &m), &m);
        t = difference(&t, &correction, &m);
    }
    (g, h)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::number::modular::primes_from;

    #[test]
    fn lifted_factors_multiply_to_the_polynomial() {
        // x^6 + 3x^4 - 7x^2 + x + 10
        let f: Poly = [10, 1, -7, 0, 3, 0, 1].map(Integer::from).to_vec();
        let good = primes_from(103).filter(|field| field.is_squarefree(&field.reduce_poly(&f)));
        for field in good.take(6) {
            let reduced_f = field.reduce_poly(&f);
            let factors = field.factor(&reduced_f);
            let modulus = Integer::from(Integer::u_pow_u(field.prime as u32, 11));
            let lifted = lift(&f, &factors, field, &modulus);
            let all = lifted
                .iter()
                .fold(vec![Integer::from(1)], |a, p| product(&a, p, &modulus));
            assert_eq!(all, reduced(f.clone(), &modulus));
            for (high, low) in lifted.iter().zip(&factors) {
                assert_eq!(field.reduce_poly(high), *low);
            }
        }
    }
}
