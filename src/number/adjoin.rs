//! Growing a field by a real root of a polynomial with coefficients in it.
//!
//! Let K = ℚ(θ) have degree d and let α be a real root of f over K. Stages:
//!
//! 1. *Scale*: a rational s with f's root β = s·α integral over ℤ\[θ\], and no prime too many in it.
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
use super::effort::{charge_with, product_cost, weight_of_bits, weights};
use super::enclosure::Enclosure;
use super::factor::{FactorFault, factor, surely_squarefree};
use super::field::{Field, LARGEST_DEGREE};
use super::modular::reachable_degrees;
use super::over_field::{common_divisor, images, integral_scale, monic, scaled, squarefree};
use super::poly;
use super::real::Real;
use super::tiers::Sign;
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
    let old_generator = if field.is_rational() {
        field.generator()
    } else {
        let mut coordinates = algebra.theta_in_powers(&j, &k);
        let mut power = Rational::from(1);
        for c in &mut coordinates {
            *c /= &power;
            power *= &shrink;
        }
        Real::from_rational_coordinates(&new_field, &coordinates)
    };
    let root = (generator - Real::from(j) * &old_generator)
        * Real::from(Rational::from((Integer::from(1), k)));
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
        if !surely_squarefree(&minimal) {
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
    let largest = |g: &Generator| g.minimal.iter().map(|c| c.clone().abs()).max();
    let more = (2..).flat_map(|k| [(1, k), (1, -k), (k, 1), (k, -1)]);
    // Over ℚ the first choice generates; nothing is gained from the others.
    let first = [(0, 1), (1, 1), (1, -1)];
    let first = if field.is_rational() {
        &first[..1]
    } else {
        &first[..]
    };
    first
        .iter()
        .filter_map(|&(j, k)| tried(pair(j, k)))
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
        .find(|(norm, _)| surely_squarefree(norm))
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
    charge_with(|| {
        let size = weight_of_bits(precision.into());
        product_cost(weights(p), 1)
            .saturating_add((4 * p.len() as u64).saturating_mul(product_cost(size, size)))
    });
    p.iter().rev().fold(Enclosure::zero(precision), |sum, c| {
        sum.mul(at).add(&Enclosure::from_integer(c, precision))
    })
}

/// An interval with exactly one root of an irreducible polynomial: the number that `gamma` converges
/// to. On an interval where the derivative has no zero there is at most one; ends because roots of an
/// irreducible polynomial are simple.
pub(crate) fn isolating_interval(
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
