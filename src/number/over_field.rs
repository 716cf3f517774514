//! Polynomials over a number field K = ℚ(θ): division, common divisors, images modulo primes, and the
//! scaling that makes a root integral.
//!
//! Coefficients from the constant term up; monic unless said otherwise.

use super::effort::{charge_with, gcd_cost, weight, weights};
use super::field::Field;
use super::modular::{PrimeField, primes_from};
use super::real::Real;
use rug::ops::Pow;
use rug::{Integer, Rational};

pub(crate) fn trim(mut f: Vec<Real>) -> Vec<Real> {
    while f.last().is_some_and(Real::is_zero) {
        f.pop();
    }
    f
}

pub(crate) fn monic(f: Vec<Real>) -> Vec<Real> {
    let f = trim(f);
    let Some(lead) = f.last() else { return f };
    let inverse = match lead.to_rational() {
        Some(value) => Real::from(value.recip()),
        None => lead.inverse().expect("a leading coefficient is not zero"),
    };
    f.iter().map(|c| c * &inverse).collect()
}

fn divide(a: &[Real], divisor: &[Real]) -> (Vec<Real>, Vec<Real>) {
    let mut rest = a.to_vec();
    let mut quotient = vec![Real::from(0); (a.len() + 1).saturating_sub(divisor.len())];
    while rest.len() >= divisor.len() {
        let shift = rest.len() - divisor.len();
        let factor = rest.pop().expect("nonempty");
        for (i, c) in divisor[..divisor.len() - 1].iter().enumerate() {
            rest[shift + i] -= c * &factor;
        }
        quotient[shift] = factor;
    }
    (quotient, trim(rest))
}

pub(crate) fn common_divisor(a: &[Real], b: &[Real]) -> Vec<Real> {
    let (mut a, mut b) = (monic(a.to_vec()), monic(b.to_vec()));
    while !b.is_empty() {
        let rest = monic(divide(&a, &b).1);
        a = std::mem::replace(&mut b, rest);
    }
    a
}

/// The product of the distinct irreducible factors of a monic polynomial.
pub(crate) fn squarefree(field: &Field, f: Vec<Real>) -> Vec<Real> {
    // Squarefree modulo a prime where the leading coefficient stays 1 proves it; the common divisor over K
    // would need inverses of large elements.
    if f.len() <= 2
        || images(field, &f)
            .take(4)
            .any(|(p, image)| p.is_squarefree(&image))
    {
        return f;
    }
    let slope: Vec<Real> = f
        .iter()
        .enumerate()
        .skip(1)
        .map(|(i, c)| c * Real::from(i as i64))
        .collect();
    let common = common_divisor(&f, &slope);
    if common.len() <= 1 {
        f
    } else {
        divide(&f, &common).0
    }
}

/// Images of a monic f modulo primes of degree one of K: at a prime p where the minimal polynomial of θ is
/// squarefree modulo p and has a root r there, θ ↦ r extends to the elements that are integral at p (p does
/// not divide the index of ℤ[θ]). Only the first few thousand primes are looked at.
pub(crate) fn images<'a>(
    field: &'a Field,
    f: &'a [Real],
) -> impl Iterator<Item = (PrimeField, Vec<u64>)> + 'a {
    const PRIMES_SCANNED: usize = 3000;
    let minimal = field.minimal_polynomial();
    primes_from(211)
        .take(PRIMES_SCANNED)
        .filter_map(move |prime| {
            let image = prime.reduce_poly(minimal);
            if !prime.is_squarefree(&image) {
                return None;
            }
            let root = prime.some_root(&image)?;
            let at_root = |c: &Real| {
                let den = prime.reduce(c.denominator());
                (den != 0)
                    .then(|| prime.mul(prime.evaluate(c.coordinates(), root), prime.inverse(den)))
            };
            let image = f.iter().map(at_root).collect::<Option<Vec<u64>>>()?;
            Some((prime, image))
        })
}

/// The exponent of a prime in a nonzero element's coordinates: the largest e with all of them divisible
/// by q^e.
fn exponent(c: &Real, q: &Integer) -> i64 {
    charge_with(|| 64 * (weights(c.coordinates()) + weight(c.denominator())));
    let count = |n: &Integer| i64::from(n.clone().remove_factor(q).1);
    let numerators = c.coordinates().iter().filter(|n| **n != 0).map(count).min();
    numerators.expect("nonzero") - count(c.denominator())
}

/// s with all coefficients of s^m·f(x/s) in ℤ[θ], as small as the primes found allow.
pub(crate) fn integral_scale(f: &[Real]) -> Rational {
    let m = f.len() - 1;
    let mut den = Integer::from(1);
    let mut content = Integer::new();
    for c in f[..m].iter().filter(|c| !c.is_zero()) {
        charge_with(|| {
            let content = gcd_cost(weights(c.coordinates()), weight(&content));
            content.saturating_add(gcd_cost(weight(&den), weight(c.denominator())))
        });
        den.lcm_mut(c.denominator());
        c.coordinates().iter().for_each(|n| content.gcd_mut(n));
    }
    let mut scale = Rational::from(1);
    let mut apply = |q: &Integer| {
        // s^i·c_{m−i} must have exponent ≥ 0 at q for each i.
        let needed = (1..=m)
            .filter(|i| !f[m - i].is_zero())
            .map(|i| {
                (-exponent(&f[m - i], q)).div_euclid(i as i64)
                    + i64::from((-exponent(&f[m - i], q)).rem_euclid(i as i64) != 0)
            })
            .max()
            .unwrap_or(0);
        let power = Rational::from(Integer::from(q.pow(needed.unsigned_abs() as u32)));
        if needed >= 0 {
            scale *= power
        } else {
            scale /= power
        }
    };
    let (mut rest_den, mut rest_content) = (den.clone(), content.clone());
    for q in small_primes() {
        if rest_den == 1 && rest_content <= 1 {
            break;
        }
        let q = Integer::from(q);
        charge_with(|| 4 * (weight(&rest_den) + weight(&rest_content)));
        if rest_den.is_divisible(&q) || (rest_content != 0 && rest_content.is_divisible(&q)) {
            rest_den.remove_factor_mut(&q);
            if rest_content != 0 {
                rest_content.remove_factor_mut(&q);
            }
            apply(&q);
        }
    }
    // What is left has only large primes: a factor that a denominator has goes in once for each, a
    // square comes out of x² − n.
    if rest_den != 1 {
        scale *= rest_den;
    } else if m == 2 && f[1].is_zero() && rest_content > 1 && rest_content.is_perfect_square() {
        scale /= rest_content.sqrt();
    }
    scale
}

fn small_primes() -> impl Iterator<Item = u32> {
    std::iter::once(2)
        .chain(primes_from(3).map(|p| p.prime as u32))
        .take_while(|q| *q < 20_000)
}

/// The polynomial whose roots are s times those of f.
pub(crate) fn scaled(f: &[Real], s: &Rational) -> Vec<Real> {
    let s = Real::from(s.clone());
    let mut power = Real::from(1);
    let mut result = f.to_vec();
    for c in result.iter_mut().rev() {
        *c = &*c * &power;
        power = &power * &s;
    }
    debug_assert!(
        result.iter().all(|c| *c.denominator() == 1),
        "integral coefficients"
    );
    result
}
