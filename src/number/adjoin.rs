//! Growing a field by a real root of a polynomial with coefficients in it.
//!
//! Let K = ℚ(θ) have degree d and let α be a real root of f over K. Stages:
//!
//! 1. *Scale*: a rational s with f's root β = s·α integral over ℤ[θ], and no prime too many in it.
//! 2. *The irreducible factor* g of f with g(β) = 0. Often f itself is proved irreducible by its degrees
//!    modulo primes of degree one of K. Otherwise Trager's route: the characteristic polynomial of
//!    β + kθ on K\[x\]/f is the norm of f(x − kθ); when it is squarefree its factors h over ℚ belong to the
//!    factors of f over K, each g = gcd(f, h(x + kθ)) (Trager, SYMSAC 1976, from memory). If g has degree
//!    1, α was in K already and nothing grows.
//! 3. *A generator* γ = jθ + kβ with small j, k whose characteristic polynomial on K\[x\]/g is squarefree.
//!    K\[x\]/g is a field, where a characteristic polynomial is a power of the minimal one, so a
//!    squarefree one *is* minimal and monic over ℤ: γ is an algebraic integer and generates.
//! 4. *The old generator* as a polynomial in γ, by solving a linear system of n = d·deg g unknowns.
//!
//! Cost: stage 4 dominates, n³ operations on integers of about n times the bits of γ's coefficients;
//! stage 2 can need factoring a polynomial of degree d·deg f (see [`factor`](super::factor)).

use super::algebra::Algebra;
use super::enclosure::Enclosure;
use super::factor::{FactorFault, factor, is_squarefree};
use super::field::{Field, LARGEST_DEGREE};
use super::modular::{PrimeField, primes_from, reachable_degrees};
use super::poly;
use super::real::Real;
use super::tiers::Sign;
use rug::ops::Pow;
use rug::{Integer, Rational};
use thiserror::Error;

/// The largest degree of a norm that is factored: beyond it the result would be refused or take long.
const LARGEST_NORM: usize = 4 * LARGEST_DEGREE;

/// A field with a root adjoined.
#[derive(Clone, Debug)]
pub struct Adjoined {
    /// The field that holds the old one and the root; the old one itself if that held the root already.
    pub field: Field,
    /// The generator of the old field, written in the new one.
    pub old_generator: Real,
    /// The root, written in the new field.
    pub root: Real,
}

/// Why a root was not adjoined.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum AdjoinFault {
    /// The field would be too large.
    #[error(
        "the numbers need a field of degree {degree} or more over the rationals, and at most {LARGEST_DEGREE} is supported"
    )]
    DegreeTooLarge {
        /// A degree that would be needed at least.
        degree: usize,
    },
    /// A polynomial would have to be factored that is too large.
    #[error(
        "whether these numbers need a larger field is decided by factoring a polynomial of degree {degree}, and at most {LARGEST_NORM} is supported"
    )]
    NormTooLarge {
        /// The degree of the polynomial.
        degree: usize,
    },
    /// Factoring gave up.
    #[error("the field of these numbers is too complicated: {0}")]
    Factoring(#[from] FactorFault),
}

/// Grows `field` by the real root of `polynomial` that `approximate` converges to.
///
/// `approximate(bits)` is an interval that holds the root, of a width that goes to zero as the bits
/// grow. The caller answers for it holding a root; which factor of the polynomial the root belongs to is
/// found here.
///
/// # Errors
/// [`AdjoinFault::DegreeTooLarge`] past [`LARGEST_DEGREE`]; [`AdjoinFault::Factoring`] when recombination
/// would take too long.
///
/// # Panics
/// If the polynomial is constant, or its coefficients lie in another field of degree 2 or more.
pub fn adjoin_root(
    field: &Field,
    polynomial: &[Real],
    approximate: &dyn Fn(u32) -> Enclosure,
) -> Result<Adjoined, AdjoinFault> {
    let f = squarefree(
        field,
        monic(polynomial.iter().map(|c| c.lifted_to(field)).collect()),
    );
    assert!(f.len() >= 2, "a polynomial with a root is not constant");
    let first_scale = integral_scale(&f);
    let near_first = |bits: u32| enlarged(approximate, &first_scale, bits);
    let g = irreducible_factor(field, scaled(&f, &first_scale), &near_first)?;
    if g.len() == 2 {
        return Ok(Adjoined {
            field: field.clone(),
            old_generator: field.generator(),
            root: -&g[0] * Real::from(first_scale.recip()),
        });
    }
    // ℤ[θ] need not hold all integers of K, so a factor can have denominators again.
    let second_scale = integral_scale(&g);
    let g = scaled(&g, &second_scale);
    let scale = first_scale * second_scale;
    let beta = |bits: u32| enlarged(approximate, &scale, bits);
    let unscale = Real::from(Rational::from(scale.recip_ref()));
    let degree = field.degree() * (g.len() - 1);
    if degree > LARGEST_DEGREE {
        return Err(AdjoinFault::DegreeTooLarge { degree });
    }
    let algebra = Algebra::new(field, &g);
    let Generator {
        j,
        k,
        shrink,
        minimal,
    } = choose_generator(field, &algebra, scale.numer());
    let theta = field.generator();
    let gamma = |bits: u32| enlarged(&|bits| combined(&theta, &j, &k, &beta, bits), &shrink, bits);
    let (lo, hi) = isolating_interval(&minimal, &gamma);
    let new_field = Field::from_isolated_root(minimal, lo, hi);
    let generator = new_field.generator() * Real::from(Rational::from(shrink.recip_ref()));
    let (old_generator, root) = if field.is_rational() {
        (field.generator(), generator)
    } else {
        let mut coordinates = algebra.theta_in_powers(&j, &k);
        let mut power = Rational::from(1);
        for c in &mut coordinates {
            *c /= &power;
            power *= &shrink;
        }
        let old_generator = Real::from_rational_coordinates(&new_field, &coordinates);
        let rest = generator - Real::from(j) * &old_generator;
        (
            old_generator,
            rest * Real::from(Rational::from((Integer::from(1), k))),
        )
    };
    Ok(Adjoined {
        field: new_field,
        old_generator,
        root: root * unscale,
    })
}

/// γ = shrink·(jθ + kβ) and its minimal polynomial.
struct Generator {
    j: Integer,
    k: Integer,
    shrink: Rational,
    minimal: Vec<Integer>,
}

/// A generator with the smallest coefficients among the first few choices that generate. The choices never
/// run out: the ones that fail lie on finitely many lines through the origin.
///
/// β is α times an integer that was only needed because ℤ\[θ\] may lack integers of K; so θ is tried with
/// that factor too, and what all of γ's conjugates have in common is taken out again.
fn choose_generator(field: &Field, algebra: &Algebra, factor: &Integer) -> Generator {
    let tried = |(j, k): (Integer, Integer)| {
        let minimal = algebra.characteristic(&j, &k);
        if !is_squarefree(&minimal) {
            return None;
        }
        let lifted: Vec<Real> = minimal.into_iter().map(Real::from).collect();
        let shrink = integral_scale(&lifted);
        let minimal = scaled(&lifted, &shrink)
            .iter()
            .map(|c| c.coordinates()[0].clone())
            .collect();
        Some(Generator {
            j,
            k,
            shrink,
            minimal,
        })
    };
    let pair = |j: i64, k: i64| (Integer::from(factor * j), Integer::from(k));
    if field.is_rational() {
        return tried(pair(0, 1)).expect("the root of an irreducible polynomial");
    }
    let largest = |g: &Generator| g.minimal.iter().map(|c| c.clone().abs()).max();
    let more = (2..).flat_map(|k| [(1, k), (1, -k), (k, 1), (k, -1)]);
    [(0, 1), (1, 1), (1, -1)]
        .into_iter()
        .filter_map(|(j, k)| tried(pair(j, k)))
        .min_by_key(largest)
        .or_else(|| more.map(|(j, k)| pair(j, k)).find_map(tried))
        .expect("almost every choice generates")
}

/// The image of an element under the embedding that takes its field's generator to `image`.
pub fn embed(element: &Real, image: &Real) -> Real {
    if let Some(value) = element.to_rational() {
        return Real::from(value);
    }
    let numerator = element
        .coordinates()
        .iter()
        .rev()
        .fold(Real::from(0), |sum, c| sum * image + Real::from(c.clone()));
    numerator
        * Real::from(Rational::from((
            Integer::from(1),
            element.denominator().clone(),
        )))
}

/// An enclosure of s times the number that is approximated.
fn enlarged(approximate: &dyn Fn(u32) -> Enclosure, s: &Rational, bits: u32) -> Enclosure {
    let extra = s.numer().significant_bits();
    approximate(bits + extra)
        .mul_integer(s.numer())
        .div_integer(s.denom())
}

/// An enclosure of jθ + kβ.
fn combined(
    theta: &Real,
    j: &Integer,
    k: &Integer,
    beta: &dyn Fn(u32) -> Enclosure,
    bits: u32,
) -> Enclosure {
    let extra = 8 + j.significant_bits() + k.significant_bits();
    let part = beta(bits + extra).mul_integer(k);
    if *j == 0 {
        return part;
    }
    let theta = theta
        .enclosure_within(bits + 8)
        .mul_integer(&Integer::from(j));
    // The wider precision first, so that nothing is lost in the sum.
    if theta.precision() >= part.precision() {
        theta.add(&part)
    } else {
        part.add(&theta)
    }
}

// Polynomials over K, monic unless said otherwise, constant term first.

fn trim(mut f: Vec<Real>) -> Vec<Real> {
    while f.last().is_some_and(Real::is_zero) {
        f.pop();
    }
    f
}

fn monic(f: Vec<Real>) -> Vec<Real> {
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

fn common_divisor(a: &[Real], b: &[Real]) -> Vec<Real> {
    let (mut a, mut b) = (monic(a.to_vec()), monic(b.to_vec()));
    while !b.is_empty() {
        let rest = monic(divide(&a, &b).1);
        a = std::mem::replace(&mut b, rest);
    }
    a
}

/// The product of the distinct irreducible factors of a monic polynomial.
fn squarefree(field: &Field, f: Vec<Real>) -> Vec<Real> {
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
fn images<'a>(
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
    let count = |n: &Integer| i64::from(n.clone().remove_factor(q).1);
    let numerators = c.coordinates().iter().filter(|n| **n != 0).map(count).min();
    numerators.expect("nonzero") - count(c.denominator())
}

/// s with all coefficients of s^m·f(x/s) in ℤ[θ], as small as the primes found allow.
fn integral_scale(f: &[Real]) -> Rational {
    let m = f.len() - 1;
    let mut den = Integer::from(1);
    let mut content = Integer::new();
    for c in f[..m].iter().filter(|c| !c.is_zero()) {
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
fn scaled(f: &[Real], s: &Rational) -> Vec<Real> {
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

/// The irreducible factor over K of the squarefree integral f that vanishes at β.
fn irreducible_factor(
    field: &Field,
    f: Vec<Real>,
    beta: &dyn Fn(u32) -> Enclosure,
) -> Result<Vec<Real>, AdjoinFault> {
    if f.len() == 2 || certainly_irreducible(field, &f) {
        return Ok(f);
    }
    let degree = field.degree() * (f.len() - 1);
    if degree > LARGEST_NORM {
        return Err(AdjoinFault::NormTooLarge { degree });
    }
    let algebra = Algebra::new(field, &f);
    let theta = field.generator();
    // All but finitely many k give a squarefree norm (Trager), so this ends.
    let start = if field.is_rational() { 0 } else { 1 };
    let one = Integer::from(1);
    let (k, norm) = (start..)
        .map(Integer::from)
        .map(|k| (algebra.characteristic(&k, &one), k))
        .find(|(norm, _)| is_squarefree(norm))
        .map(|(norm, k)| (k, norm))
        .expect("almost every k");
    let factors = factor(&norm)?.factors;
    let gamma = |bits: u32| combined(&theta, &k, &one, beta, bits);
    let h = vanishing_factor(factors.into_iter().map(|(h, _)| h).collect(), &gamma);
    let at_gamma = algebra.evaluate(&h, &k);
    Ok(common_divisor(&f, &at_gamma))
}

/// The one of several coprime polynomials that vanishes at the number. Ends because the others do not
/// vanish there, so a narrow enough interval excludes them.
fn vanishing_factor(
    mut factors: Vec<Vec<Integer>>,
    number: &dyn Fn(u32) -> Enclosure,
) -> Vec<Integer> {
    let mut bits = 64;
    while factors.len() > 1 {
        let at = number(bits);
        factors.retain(|h| evaluate_enclosed(h, &at).contains_zero());
        bits *= 2;
    }
    factors
        .pop()
        .expect("one of the factors vanishes at the root")
}

fn evaluate_enclosed(p: &[Integer], at: &Enclosure) -> Enclosure {
    let precision = at.precision();
    p.iter().rev().fold(Enclosure::zero(precision), |sum, c| {
        sum.mul(at).add(&Enclosure::from_integer(c, precision))
    })
}

/// An interval with exactly one root of an irreducible polynomial: the number that `gamma` converges
/// to. On an interval where the derivative has no zero there is at most one; ends because roots of an
/// irreducible polynomial are simple.
fn isolating_interval(
    minimal: &[Integer],
    gamma: &dyn Fn(u32) -> Enclosure,
) -> (Rational, Rational) {
    let slope = poly::derivative(minimal);
    let mut bits = 64;
    loop {
        let at = gamma(bits);
        if !evaluate_enclosed(&slope, &at).contains_zero() {
            let bound = |x: &rug::Float| x.to_rational().expect("a finite bound");
            let (lo, hi) = (bound(at.lo()), bound(at.hi()));
            if poly::sign_at(minimal, &lo) != Sign::Zero {
                return (lo, hi);
            }
            // The root itself is the lower end, which the interval (lo, hi] leaves out.
            return (
                lo - Rational::from((Integer::from(1), Integer::from(1) << bits)),
                hi,
            );
        }
        bits *= 2;
    }
}

/// True when the degrees of the factors of f modulo primes of degree one of K leave no room for a
/// factor over K: the degree of a monic factor of f is a sum of degrees of factors of each image. False
/// means nothing.
fn certainly_irreducible(field: &Field, f: &[Real]) -> bool {
    const PRIMES_USED: usize = 32;
    let m = f.len() - 1;
    let mut allowed = vec![true; m + 1];
    let good = images(field, f).filter(|(prime, image)| prime.is_squarefree(image));
    for (prime, image) in good.take(PRIMES_USED) {
        let degrees = prime
            .distinct_degrees(&image)
            .into_iter()
            .flat_map(|(product, d)| std::iter::repeat_n(d, (product.len() - 1) / d));
        for (kept, reached) in allowed.iter_mut().zip(reachable_degrees(m, degrees)) {
            *kept &= reached;
        }
        if !allowed[1..m].contains(&true) {
            return true;
        }
    }
    false
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::number::cosine;

    /// Adjoins the positive square root of an element.
    fn with_sqrt(field: &Field, a: &Real) -> Adjoined {
        let f = [-a, Real::from(0), Real::from(1)];
        adjoin_root(field, &f, &|bits| a.enclosure_within(2 * bits + 4).sqrt()).unwrap()
    }

    fn sqrt_tower(numbers: &[i64]) -> (Field, Vec<Real>) {
        let mut field = Field::rationals();
        let mut roots: Vec<Real> = Vec::new();
        for &n in numbers {
            let grown = with_sqrt(&field, &Real::from(n));
            roots = roots
                .iter()
                .map(|r| embed(r, &grown.old_generator))
                .collect();
            roots.push(grown.root);
            field = grown.field;
        }
        (field, roots)
    }

    #[test]
    fn one_square_root_is_generated_by_the_squarefree_one() {
        for (num, den, kernel) in [(8, 1, 2), (1, 2, 2), (12, 1, 3), (5, 27, 15), (4, 9, 1)] {
            let a = Real::from(Rational::from((num, den)));
            let grown = with_sqrt(&Field::rationals(), &a);
            assert_eq!(&grown.root * &grown.root, a);
            assert!(grown.root > Real::from(0));
            if kernel == 1 {
                assert!(grown.field.is_rational());
            } else {
                let expected = [-kernel, 0, 1].map(Integer::from);
                assert_eq!(grown.field.minimal_polynomial(), expected);
            }
        }
    }

    #[test]
    fn towers_of_square_roots_have_the_right_degree() {
        let (field, roots) = sqrt_tower(&[2, 3, 6, 5, 30, 7]);
        assert_eq!(field.degree(), 16);
        assert_eq!(&roots[0] * &roots[1], roots[2]);
        assert_eq!(&roots[3] * &roots[2], roots[4]);
        for (root, n) in roots.iter().zip([2.0_f64, 3.0, 6.0, 5.0, 30.0, 7.0]) {
            assert!((root.to_f64() - n.sqrt()).abs() < 1e-12);
        }
    }

    #[test]
    fn a_nested_root_that_was_there_already_grows_nothing() {
        // √(3 + 2√2) = 1 + √2
        let (field, roots) = sqrt_tower(&[2]);
        let a = Real::from(3) + Real::from(2) * &roots[0];
        let grown = with_sqrt(&field, &a);
        assert!(grown.field.same(&field));
        assert_eq!(grown.root, Real::from(1) + &roots[0]);
        // √(2 + √2) is new, and √(2 − √2) = √2 / √(2 + √2) lies in the same field.
        let first = with_sqrt(&field, &(Real::from(2) + &roots[0]));
        assert_eq!(first.field.degree(), 4);
        let sqrt2 = embed(&roots[0], &first.old_generator);
        let second = with_sqrt(&first.field, &(Real::from(2) - &sqrt2));
        assert!(second.field.same(&first.field));
        assert_eq!(&second.root * &first.root, sqrt2);
    }

    #[test]
    fn a_cosine_joins_a_square_root() {
        let (field, roots) = sqrt_tower(&[5]);
        let adjoin = |field: &Field, q: u32| {
            let f: Vec<Real> = cosine::minimal_polynomial(q)
                .into_iter()
                .map(Real::from)
                .collect();
            adjoin_root(field, &f, &|bits| {
                cosine::twice_cosine_enclosure(1, q, bits)
            })
            .unwrap()
        };
        let seven = adjoin(&field, 7);
        assert_eq!(seven.field.degree(), 6);
        assert_eq!(embed(&roots[0], &seven.old_generator).pow(2), Real::from(5));
        // 2cos(2π/5) = (√5 − 1)/2 is there already; 2cos(2π/20) only doubles the degree.
        let five = adjoin(&field, 5);
        assert!(five.field.same(&field));
        assert_eq!(
            five.root,
            (&roots[0] - Real::from(1)) * Real::from(Rational::from((1, 2)))
        );
        let twenty = adjoin(&field, 20);
        assert_eq!(twenty.field.degree(), 4);
        let expected = 2.0 * (std::f64::consts::TAU / 20.0).cos();
        assert!((twenty.root.to_f64() - expected).abs() < 1e-12);
    }

    #[test]
    fn a_root_of_a_reducible_polynomial_takes_its_factor() {
        // (x² − 2)(x³ − 2): which factor is decided by the approximation.
        let f = [4, 0, -2, -2, 0, 1].map(Real::from);
        for (square, degree) in [(true, 2), (false, 3)] {
            let near = move |bits: u32| {
                let two = Enclosure::from_integer(&Integer::from(2), bits + 8);
                if square {
                    return two.sqrt();
                }
                let mut lo = two.lo().clone();
                lo.cbrt_round(rug::float::Round::Down);
                let mut hi = two.hi().clone();
                hi.cbrt_round(rug::float::Round::Up);
                Enclosure::between(lo, hi)
            };
            let grown = adjoin_root(&Field::rationals(), &f, &near).unwrap();
            assert_eq!(grown.field.degree(), degree);
            assert_eq!(grown.root.pow(degree as u32), Real::from(2));
        }
    }

    #[test]
    fn six_square_roots_make_a_field_of_the_largest_degree() {
        let (field, roots) = sqrt_tower(&[2, 3, 5, 7, 11, 13]);
        assert_eq!(field.degree(), LARGEST_DEGREE);
        for (root, n) in roots.iter().zip([2, 3, 5, 7, 11, 13]) {
            assert_eq!(root * root, Real::from(n));
        }
    }

    #[test]
    fn degrees_past_the_limit_are_refused() {
        let grown = with_sqrt(&Field::rationals(), &Real::from(2));
        let mut f = vec![Real::from(0); 34];
        (f[0], f[33]) = (Real::from(-3), Real::from(1));
        let near = |bits: u32| Enclosure::from_integer(&Integer::from(1), bits);
        let refused = adjoin_root(&grown.field, &f, &near);
        assert!(
            matches!(refused, Err(AdjoinFault::DegreeTooLarge { degree: 66 })),
            "{refused:?}"
        );
    }
}
