//! Polynomials with integer coefficients: Sturm sequences and the isolation of real roots.
//!
//! A polynomial is a slice of coefficients from the constant term up, without leading zeros; the zero
//! polynomial is empty.

use super::effort::{charge_with, division_cost, gcd_cost, product_cost, weight, weights};
use super::tiers::Sign;
use rug::ops::Pow;
use rug::{Integer, Rational};

/// Removes zeros at the top.
pub fn trim(p: &mut Vec<Integer>) {
    while p.last().is_some_and(|c| *c == 0) {
        p.pop();
    }
}

/// Degree; `None` for the zero polynomial.
pub fn degree(p: &[Integer]) -> Option<usize> {
    p.len().checked_sub(1)
}

/// The derivative.
pub fn derivative(p: &[Integer]) -> Vec<Integer> {
    p.iter()
        .enumerate()
        .skip(1)
        .map(|(i, c)| Integer::from(c * i as u64))
        .collect()
}

/// The product.
pub fn multiply(a: &[Integer], b: &[Integer]) -> Vec<Integer> {
    if a.is_empty() || b.is_empty() {
        return Vec::new();
    }
    charge_with(|| polynomial_product_cost(a, b));
    let mut product = vec![Integer::new(); a.len() + b.len() - 1];
    for (i, x) in a.iter().enumerate().filter(|(_, x)| **x != 0) {
        for (j, y) in b.iter().enumerate() {
            product[i + j] += x * y;
        }
    }
    product
}

/// The cost of multiplying the coefficients of a with those of b.
pub(crate) fn polynomial_product_cost(a: &[Integer], b: &[Integer]) -> u64 {
    let longest = |p: &[Integer]| p.iter().map(weight).max().unwrap_or(0);
    // By hand, the sum of all products of weights; scaled down where long products are cheaper than by hand.
    let (long_a, long_b) = (longest(a), longest(b));
    let by_hand = weights(a).saturating_mul(weights(b)) / long_a.saturating_mul(long_b).max(1);
    by_hand
        .saturating_add(1)
        .saturating_mul(product_cost(long_a, long_b))
}

/// The quotient a/b when b divides a over the integers.
///
/// # Panics
/// If b is zero.
pub fn exact_quotient(a: &[Integer], b: &[Integer]) -> Option<Vec<Integer>> {
    let lead = b.last().expect("division by the zero polynomial");
    let mut rest = a.to_vec();
    let mut quotient = vec![Integer::new(); (a.len() + 1).saturating_sub(b.len())];
    while rest.len() >= b.len() {
        let shift = rest.len() - b.len();
        let top = rest.pop().expect("nonempty");
        if !top.is_divisible(lead) {
            return None;
        }
        let factor = top.div_exact(lead);
        charge_with(|| {
            division_cost(weight(&factor), weight(lead))
                .saturating_add(polynomial_product_cost(std::slice::from_ref(&factor), b))
        });
        if factor != 0 {
            for (i, c) in b[..b.len() - 1].iter().enumerate() {
                rest[shift + i] -= c * &factor;
            }
        }
        quotient[shift] = factor;
    }
    rest.iter().all(|c| *c == 0).then_some(quotient)
}

/// The greatest common divisor over ℚ, primitive with a positive leading coefficient; by the primitive
/// remainder sequence.
pub fn gcd(a: &[Integer], b: &[Integer]) -> Vec<Integer> {
    let (mut a, mut b) = (primitive(a), primitive(b));
    while !b.is_empty() {
        if a.len() < b.len() {
            std::mem::swap(&mut a, &mut b);
            continue;
        }
        let rest = positive_remainder(&a, &b);
        a = std::mem::replace(&mut b, rest);
    }
    if a.last().is_some_and(|c| *c < 0) {
        a.iter_mut().for_each(|c| *c = Integer::from(-&*c));
    }
    a
}

/// The interval (lo, hi] around one root of a squarefree polynomial, narrowed to a width of at most
/// 2^−bits. Ends because each pass halves it.
pub fn narrow_root(p: &[Integer], interval: &mut (Rational, Rational), bits: u32) {
    let target = Rational::from((Integer::from(1), Integer::from(1) << bits));
    while Rational::from(&interval.1 - &interval.0) > target {
        let at_hi = sign_at(p, &interval.1);
        if at_hi == Sign::Zero {
            interval.0 = Rational::from(&interval.1 - &target);
            return;
        }
        charge_with(|| {
            let size = weight(interval.0.numer()) + weight(interval.1.numer());
            gcd_cost(size, size)
        });
        let middle = Rational::from(&interval.0 + &interval.1) / 2;
        match sign_at(p, &middle) {
            Sign::Zero => {
                let below = Rational::from(&middle - &target);
                *interval = (below.max(interval.0.clone()), middle);
            }
            sign if sign == at_hi => interval.1 = middle,
            _ => interval.0 = middle,
        }
    }
}

/// Divides by the greatest common divisor of the coefficients, keeping the sign.
pub fn primitive(p: &[Integer]) -> Vec<Integer> {
    let mut content = Integer::new();
    for c in p {
        charge_with(|| gcd_cost(weight(c), weight(&content)));
        content.gcd_mut(c);
    }
    if content == 0 || content == 1 {
        return p.to_vec();
    }
    charge_with(|| division_cost(weights(p), weight(&content)));
    p.iter().map(|c| c.clone().div_exact(&content)).collect()
}

/// The sign of p at a rational point.
pub fn sign_at(p: &[Integer], point: &Rational) -> Sign {
    let (num, den) = (point.numer(), point.denom());
    let mut value = Integer::new();
    let mut scale = Integer::from(1);
    for c in p.iter().rev() {
        charge_with(|| {
            let power = weight(&scale);
            product_cost(weight(&value), weight(num))
                .saturating_add(product_cost(power, weight(c)))
                .saturating_add(product_cost(power, weight(den)))
        });
        value *= num;
        value += Integer::from(c * &scale);
        scale *= den;
    }
    value.cmp0().into()
}

/// The exact value of p at a rational point.
pub fn value_at(p: &[Integer], point: &Rational) -> Rational {
    let mut value = Rational::new();
    for c in p.iter().rev() {
        charge_with(|| {
            let size = weight(value.numer()) + weight(value.denom());
            gcd_cost(size, weight(point.numer()) + weight(point.denom()))
                .saturating_add(gcd_cost(size, weight(c)))
        });
        value *= point;
        value += c;
    }
    value
}

/// `scale·a = quotient·b + remainder` with a positive `scale`; returns the remainder, made primitive.
///
/// # Panics
/// If b is zero.
pub fn positive_remainder(a: &[Integer], b: &[Integer]) -> Vec<Integer> {
    let lead = b.last().expect("division by the zero polynomial");
    let mut rest = a.to_vec();
    while rest.len() >= b.len() {
        let shift = rest.len() - b.len();
        let top = rest.last().expect("nonempty").clone();
        // Multiply by |lead| so that the division is exact and the sign is kept.
        let factor = if *lead < 0 { -top } else { top };
        let scale = lead.clone().abs();
        charge_with(|| {
            let once = product_cost(weights(&rest), weight(&scale));
            once.saturating_add(product_cost(weights(b), weight(&factor)))
        });
        for c in &mut rest {
            *c *= &scale;
        }
        for (i, c) in b.iter().enumerate() {
            rest[shift + i] -= Integer::from(c * &factor);
        }
        trim(&mut rest);
        rest = primitive(&rest);
    }
    rest
}

/// The Sturm sequence of a squarefree polynomial: p, p′, then negated remainders.
pub fn sturm_sequence(p: &[Integer]) -> Vec<Vec<Integer>> {
    let mut chain = vec![primitive(p), primitive(&derivative(p))];
    loop {
        let n = chain.len();
        if chain[n - 1].len() <= 1 {
            break;
        }
        let rest = positive_remainder(&chain[n - 2], &chain[n - 1]);
        if rest.is_empty() {
            break;
        }
        chain.push(rest.iter().map(|c| Integer::from(-c)).collect());
    }
    chain
}

fn variations(signs: impl Iterator<Item = Sign>) -> usize {
    let mut last = Sign::Zero;
    let mut count = 0;
    for sign in signs.filter(|s| *s != Sign::Zero) {
        if last != Sign::Zero && sign != last {
            count += 1;
        }
        last = sign;
    }
    count
}

/// The number of real roots in the half-open interval (lo, hi], by Sturm's theorem.
pub fn roots_between(chain: &[Vec<Integer>], lo: &Rational, hi: &Rational) -> usize {
    let at = |x: &Rational| variations(chain.iter().map(|p| sign_at(p, x)));
    at(lo) - at(hi)
}

/// A power of two larger than the absolute value of every root (Cauchy's bound).
///
/// # Panics
/// If p is zero.
pub fn root_bound(p: &[Integer]) -> Rational {
    let lead = p.last().expect("the zero polynomial").clone().abs();
    let largest = p.iter().map(|c| c.clone().abs()).max().expect("nonempty");
    let bound = largest / lead + 2u32;
    Rational::from(Integer::from(2).pow(bound.significant_bits()))
}

/// The real roots of a squarefree polynomial, in order, each as (lo, hi] with lo < root ≤ hi. A
/// rational root may come out as its own upper end.
///
/// Terminates because distinct roots have a positive distance, so bisection separates them.
pub fn isolate_roots(p: &[Integer]) -> Vec<(Rational, Rational)> {
    if p.len() <= 1 {
        return Vec::new();
    }
    let chain = sturm_sequence(p);
    let bound = root_bound(p);
    let mut open = vec![(Rational::from(-&bound), bound)];
    let mut found = Vec::new();
    while let Some((lo, hi)) = open.pop() {
        match roots_between(&chain, &lo, &hi) {
            0 => {}
            1 => found.push((lo, hi)),
            _ => {
                let middle: Rational = Rational::from(&lo + &hi) / 2;
                open.push((middle.clone(), hi));
                open.push((lo, middle));
            }
        }
    }
    found
}

/// Writes a polynomial in the given variable, highest power first.
pub fn display(p: &[Integer], variable: &str) -> String {
    let mut text = String::new();
    for (i, c) in p.iter().enumerate().rev().filter(|(_, c)| **c != 0) {
        let negative = *c < 0;
        if text.is_empty() {
            text.push_str(if negative { "-" } else { "" });
        } else {
            text.push_str(if negative { " - " } else { " + " });
        }
        let magnitude = c.clone().abs();
        let power = match i {
            0 => String::new(),
            1 => variable.to_string(),
            _ => format!("{variable}^{i}"),
        };
        if power.is_empty() {
            text.push_str(&magnitude.to_string());
        } else if magnitude == 1 {
            text.push_str(&power);
        } else {
            text.push_str(&format!("{magnitude}*{power}"));
        }
    }
    if text.is_empty() { "0".into() } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn poly(coefficients: &[i64]) -> Vec<Integer> {
        coefficients.iter().map(|c| Integer::from(*c)).collect()
    }

    #[test]
    fn sturm_counts_the_roots_of_a_product_of_known_factors() {
        // (x+3)(x-1)(x-2)(x^2+1)
        let p = poly(&[6, -7, 6, -6, 0, 1]);
        let chain = sturm_sequence(&p);
        let count = |lo: i64, hi: i64| roots_between(&chain, &lo.into(), &hi.into());
        assert_eq!(count(-10, 10), 3);
        assert_eq!(
            count(-3, 2),
            2,
            "the interval is open below and closed above"
        );
        assert_eq!(count(1, 2), 1);
        assert_eq!(isolate_roots(&p).len(), 3);
    }

    #[test]
    fn sturm_separates_roots_that_are_close() {
        // (1000x-1)(1001x-1)(x-5)
        let q: Vec<Integer> = {
            let (a, b, c) = (poly(&[-1, 1000]), poly(&[-1, 1001]), poly(&[-5, 1]));
            multiply(&multiply(&a, &b), &c)
        };
        let roots = isolate_roots(&q);
        assert_eq!(roots.len(), 3);
        assert!(roots[0].0 < Rational::from((1, 1001)) && Rational::from((1, 1001)) <= roots[0].1);
        assert!(roots[0].1 <= roots[1].0);
    }

    #[test]
    fn polynomials_are_written_the_usual_way() {
        assert_eq!(display(&poly(&[-1, 0, -3, 1]), "x"), "x^3 - 3*x^2 - 1");
        assert_eq!(display(&poly(&[]), "x"), "0");
    }
}
