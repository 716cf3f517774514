//! Proved factoring of integer polynomials over the rationals.
//!
//! The route is Zassenhaus's (J. Number Theory 1 (1969) 291–311; von zur Gathen and Gerhard, *Modern
//! Computer Algebra*, chapters 14–16, from memory): squarefree parts, factoring modulo a small prime,
//! Hensel lifting past a proved bound on the coefficients of every factor, and trying the products of
//! lifted factors. A product that divides is a factor; when none of the remaining ones does, the rest is
//! irreducible. So the answer is proved, not probable.
//!
//! *Bound.* A factor of degree m of an f of degree n has coefficients of absolute value at most
//! 2^m·‖f‖₂ (Mignotte, Math. Comp. 28 (1974) 1153–1157). Lifting past 2·|lc(f)|·2^n·‖f‖₂ therefore
//! determines it.
//!
//! *Early end.* The degrees of the factors modulo several primes restrict the degrees of a true factor;
//! when only 0 and n are left, f is irreducible without lifting.
//!
//! *Cost.* With r factors modulo the best prime at most 2^(r−1) products come up; each is first tested on
//! two sums over its roots, in machine additions. A budget on the products makes the worst case
//! (fields with few automorphism orders, such as those of many square roots) an error and not a hang.

use super::effort::{charge, charge_with, weight};
use super::hensel;
use super::modular::{ModularPoly, PrimeField, primes_from, reachable_degrees};
use super::poly::{degree, derivative, exact_quotient, gcd, multiply, primitive, trim};
use rug::Integer;
use thiserror::Error;

/// The most products of lifted factors that are tried: a few seconds of work.
const MOST_PRODUCTS: u64 = 1 << 25;

/// What forming one product counts for in that budget.
const PRODUCT_COST: u64 = 1 << 14;

/// How many primes are looked at for the degree test and the choice of the best.
const PRIMES_TRIED: usize = 24;

/// Why a polynomial was not factored.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum FactorFault {
    /// The zero polynomial has no factorisation.
    #[error("the zero polynomial has no factors")]
    Zero,
    /// Too many products of factors modulo a prime.
    #[error(
        "a polynomial of degree {degree} splits into {parts} parts modulo every prime tried: too many to recombine"
    )]
    TooManyProducts {
        /// Degree of the polynomial.
        degree: usize,
        /// Number of factors modulo the best prime.
        parts: usize,
    },
}

/// A complete factorisation: `content · ∏ factorᵢ^multiplicityᵢ`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Factorisation {
    /// The constant factor, with the sign.
    pub content: Integer,
    /// Irreducible primitive polynomials with positive leading coefficients, and their multiplicities; by
    /// degree, then by coefficients.
    pub factors: Vec<(Vec<Integer>, usize)>,
}

/// Factors a polynomial over ℚ.
///
/// # Errors
/// [`FactorFault::Zero`], or [`FactorFault::TooManyProducts`] when recombination would take too long.
pub fn factor(p: &[Integer]) -> Result<Factorisation, FactorFault> {
    let mut p = p.to_vec();
    trim(&mut p);
    let lead = p.last().ok_or(FactorFault::Zero)?.clone();
    let mut whole = primitive(&p);
    if lead < 0 {
        whole.iter_mut().for_each(|c| *c = Integer::from(-&*c));
    }
    let content = lead.div_exact(whole.last().expect("nonzero"));
    let mut factors = Vec::new();
    for (part, multiplicity) in squarefree_parts(&whole) {
        for factor in factor_squarefree(&part)? {
            factors.push((factor, multiplicity));
        }
    }
    factors.sort_by(|a, b| (a.0.len(), &a.0, a.1).cmp(&(b.0.len(), &b.0, b.1)));
    Ok(Factorisation { content, factors })
}

/// True when p has no repeated factor over ℚ.
///
/// # Panics
/// If p is zero.
pub fn is_squarefree(p: &[Integer]) -> bool {
    assert!(!p.is_empty(), "the zero polynomial");
    surely_squarefree(p) || gcd(p, &derivative(p)).len() == 1
}

/// True when p is squarefree modulo one of a few primes that keep its degree, which proves that it is
/// squarefree. False means nothing, and for a squarefree p it is rare.
///
/// # Panics
/// If p is zero.
pub fn surely_squarefree(p: &[Integer]) -> bool {
    assert!(!p.is_empty(), "the zero polynomial");
    primes_from(1_000_003).take(4).any(|field| {
        let image = field.reduce_poly(p);
        image.len() == p.len() && field.is_squarefree(&image)
    })
}

/// The squarefree part: the product of the distinct irreducible factors.
pub fn squarefree_part(p: &[Integer]) -> Vec<Integer> {
    if p.len() <= 1 || is_squarefree(p) {
        return primitive(p);
    }
    exact_quotient(&primitive(p), &gcd(p, &derivative(p))).expect("a divisor, both primitive")
}

/// Products of the irreducible factors of equal multiplicity (Yun 1976, from memory).
fn squarefree_parts(p: &[Integer]) -> Vec<(Vec<Integer>, usize)> {
    if p.len() <= 1 {
        return Vec::new();
    }
    if is_squarefree(p) {
        return vec![(p.to_vec(), 1)];
    }
    let quotient = |a: &[Integer], b: &[Integer]| {
        exact_quotient(a, b).expect("a primitive divisor divides over the integers")
    };
    let slope = derivative(p);
    let common = gcd(p, &slope);
    let mut rest = quotient(p, &common);
    let mut other = difference(&quotient(&slope, &common), &derivative(&rest));
    let mut parts = Vec::new();
    let mut multiplicity = 1;
    while rest.len() > 1 {
        let part = gcd(&rest, &other);
        rest = quotient(&rest, &part);
        other = difference(&quotient(&other, &part), &derivative(&rest));
        if part.len() > 1 {
            parts.push((part, multiplicity));
        }
        multiplicity += 1;
    }
    parts
}

fn difference(a: &[Integer], b: &[Integer]) -> Vec<Integer> {
    let mut result = a.to_vec();
    result.resize(a.len().max(b.len()), Integer::new());
    for (c, d) in result.iter_mut().zip(b) {
        *c -= d;
    }
    trim(&mut result);
    result
}

/// Irreducible factors of a primitive squarefree polynomial with positive leading coefficient.
fn factor_squarefree(f: &[Integer]) -> Result<Vec<Vec<Integer>>, FactorFault> {
    let n = degree(f).expect("nonzero");
    if n <= 1 {
        return Ok(vec![f.to_vec()]);
    }
    let mut allowed = vec![true; n + 1];
    let mut best: Option<(PrimeField, usize)> = None;
    let lead = f.last().expect("nonzero");
    let good = primes_from(1009)
        .filter(|field| field.reduce(lead) != 0)
        .map(|field| {
            let image = field.monic(&field.reduce_poly(f));
            (field, image)
        });
    for (field, image) in good
        .filter(|(field, image)| field.is_squarefree(image))
        .take(PRIMES_TRIED)
    {
        let degrees: Vec<usize> = field
            .distinct_degrees(&image)
            .into_iter()
            .flat_map(|(product, d)| std::iter::repeat_n(d, (product.len() - 1) / d))
            .collect();
        let reachable = reachable_degrees(n, degrees.iter().copied());
        for (kept, reached) in allowed.iter_mut().zip(reachable) {
            *kept &= reached;
        }
        if !allowed[1..n].contains(&true) {
            return Ok(vec![f.to_vec()]);
        }
        if best.is_none_or(|(_, fewest)| degrees.len() < fewest) {
            best = Some((field, degrees.len()));
        }
    }
    let (field, _) =
        best.expect("a squarefree polynomial stays squarefree modulo almost all primes");
    let parts = field.factor(&field.monic(&field.reduce_poly(f)));
    Recombination::new(f, field, parts, allowed).run()
}

/// A true factor and the lifted parts that it is made of.
type Found = (Vec<Integer>, Vec<usize>);

/// Looks for the true factors among the products of the lifted ones.
struct Recombination {
    rest: Vec<Integer>,
    modulus: Integer,
    lifted: Vec<Vec<Integer>>,
    /// Degrees that a true factor of the original polynomial can have.
    allowed: Vec<bool>,
    /// Products still allowed.
    budget: u64,
    original_degree: usize,
    original_parts: usize,
}

impl Recombination {
    fn new(f: &[Integer], field: PrimeField, parts: Vec<ModularPoly>, allowed: Vec<bool>) -> Self {
        let n = f.len() - 1;
        let lead = f.last().expect("nonzero");
        let norm = f
            .iter()
            .map(|c| Integer::from(c.square_ref()))
            .sum::<Integer>()
            .sqrt()
            + 1u32;
        // Past twice |lc|·2^n·‖f‖₂; and past 2⁶⁴ times the bound on the sum of squares of roots (see
        // `slack`), which makes the one-word tests selective.
        let largest = f.iter().map(|c| c.clone().abs()).max().expect("nonzero");
        let squares = (largest + lead).square() * (n as u64 + 1);
        let bound = ((norm * lead) << (n as u32 + 1)).max(squares << 64u32);
        let mut modulus = Integer::from(field.prime);
        while modulus <= bound {
            charge_with(|| weight(&modulus));
            modulus *= field.prime;
        }
        let inverse = lead
            .clone()
            .invert(&modulus)
            .expect("the prime does not divide lc");
        let monic: Vec<Integer> = f
            .iter()
            .map(|c| Integer::from(c * &inverse).modulo(&modulus))
            .collect();
        let original_parts = parts.len();
        Recombination {
            rest: f.to_vec(),
            lifted: hensel::lift(&monic, &parts, field, &modulus),
            modulus,
            allowed,
            budget: MOST_PRODUCTS,
            original_degree: n,
            original_parts,
        }
    }

    fn run(mut self) -> Result<Vec<Vec<Integer>>, FactorFault> {
        let mut found = Vec::new();
        let mut size = 1;
        while 2 * size <= self.lifted.len() {
            match self.factor_of(size)? {
                Some((factor, chosen)) => {
                    self.rest = exact_quotient(&self.rest, &factor).expect("it divides");
                    found.push(factor);
                    let mut index = 0;
                    self.lifted.retain(|_| {
                        index += 1;
                        !chosen.contains(&(index - 1))
                    });
                }
                None => size += 1,
            }
        }
        if self.rest.len() > 1 {
            found.push(self.rest);
        }
        Ok(found)
    }

    /// The first true factor that is a product of `size` lifted ones.
    ///
    /// The sums of the roots and of their squares are additive over the chosen parts. Times lc and lc²
    /// they are integers for a true factor, small against the modulus; as fractions of the modulus in one
    /// word each they must be near zero. Only then is the product formed and divided.
    fn factor_of(&mut self, size: usize) -> Result<Option<Found>, FactorFault> {
        let lead = self.rest.last().expect("nonzero");
        let fractions: Vec<[u64; 2]> = self.lifted.iter().map(|p| self.sums(p, lead)).collect();
        let slack = self.slack();
        let near_zero = |sum: u64, slack: u64| sum.wrapping_add(slack) <= slack.saturating_mul(2);

        let r = self.lifted.len();
        // A split in two halves of equal size shows up from either half: keep part 0 in the first.
        let pinned = 2 * size == r;
        let mut chosen: Vec<usize> = (0..size).collect();
        loop {
            if self.budget == 0 {
                return Err(FactorFault::TooManyProducts {
                    degree: self.original_degree,
                    parts: self.original_parts,
                });
            }
            self.budget -= 1;
            charge(16 + 2 * size as u64);
            let sum = |j: usize| {
                chosen
                    .iter()
                    .fold(0u64, |sum, &i| sum.wrapping_add(fractions[i][j]))
            };
            if near_zero(sum(0), slack[0]) && near_zero(sum(1), slack[1]) {
                self.budget = self.budget.saturating_sub(PRODUCT_COST);
                if let Some(factor) = self.try_product(&chosen) {
                    return Ok(Some((factor, chosen)));
                }
            }
            if !next_choice(&mut chosen, r) || (pinned && chosen[0] != 0) {
                return Ok(None);
            }
        }
    }

    /// lc·Σ roots and lc²·Σ roots² of one lifted part, as fractions of the modulus, cut off to a word.
    fn sums(&self, p: &[Integer], lead: &Integer) -> [u64; 2] {
        let zero = Integer::new();
        let back = |i: usize| p.len().checked_sub(1 + i).map_or(&zero, |at| &p[at]);
        let first = Integer::from(-back(1));
        // Newton: Σ r² = e₁² − 2e₂.
        let squares = Integer::from(first.square_ref()) - Integer::from(back(2) * 2u32);
        let scaled = [first * lead, squares * lead * lead];
        scaled.map(|value| {
            let fraction = (value.modulo(&self.modulus) << 64u32) / &self.modulus;
            fraction.to_u64().expect("below one")
        })
    }

    /// How far from zero the two sums of a true factor can be, in the same units.
    ///
    /// Every root is below R = 1 + max|c|/|lc| (Cauchy), so |lc|·Σ|r| ≤ n·(|lc| + max|c|) and
    /// lc²·Σ|r|² ≤ n·(|lc| + max|c|)². Each cut-off loses less than one unit.
    fn slack(&self) -> [u64; 2] {
        let lead = self.rest.last().expect("nonzero").clone().abs();
        let largest = self
            .rest
            .iter()
            .map(|c| c.clone().abs())
            .max()
            .expect("nonzero");
        let radius = largest + lead;
        let first = Integer::from(&radius * self.rest.len() as u64);
        let second = Integer::from(&first * &radius);
        [first, second].map(|bound| {
            let units = (bound << 64u32) / &self.modulus + 1u32 + self.lifted.len() as u64;
            units.to_u64().unwrap_or(u64::MAX).min(u64::MAX / 4)
        })
    }

    fn try_product(&self, chosen: &[usize]) -> Option<Vec<Integer>> {
        let total: usize = chosen.iter().map(|&i| self.lifted[i].len() - 1).sum();
        if !self.allowed[total] {
            return None;
        }
        let lead = self.rest.last().expect("nonzero").clone();
        let mut candidate = vec![lead];
        for &i in chosen {
            candidate = hensel::product(&candidate, &self.lifted[i], &self.modulus);
        }
        let half = Integer::from(&self.modulus >> 1);
        for c in &mut candidate {
            if *c > half {
                *c -= &self.modulus;
            }
        }
        let mut candidate = primitive(&candidate);
        if candidate.last().is_some_and(|c| *c < 0) {
            candidate.iter_mut().for_each(|c| *c = Integer::from(-&*c));
        }
        exact_quotient(&self.rest, &candidate).map(|_| candidate)
    }
}

/// The next subset of 0 … n−1 of the same size in lexicographic order; false after the last.
fn next_choice(chosen: &mut [usize], n: usize) -> bool {
    let size = chosen.len();
    let Some(i) = (0..size).rev().find(|&i| chosen[i] < n - size + i) else {
        return false;
    };
    chosen[i] += 1;
    for j in i + 1..size {
        chosen[j] = chosen[j - 1] + 1;
    }
    true
}

/// The product of a factorisation, multiplied out.
pub fn expand(factorisation: &Factorisation) -> Vec<Integer> {
    let mut product = vec![factorisation.content.clone()];
    for (factor, multiplicity) in &factorisation.factors {
        for _ in 0..*multiplicity {
            product = multiply(&product, factor);
        }
    }
    product
}

#[cfg(test)]
mod tests {
    use super::*;

    fn poly(coefficients: &[i64]) -> Vec<Integer> {
        coefficients.iter().map(|c| Integer::from(*c)).collect()
    }

    fn power_minus_one(n: usize) -> Vec<Integer> {
        let mut p = vec![Integer::new(); n + 1];
        p[0] = Integer::from(-1);
        p[n] = Integer::from(1);
        p
    }

    #[test]
    fn known_irreducibles_come_back_with_their_multiplicities() {
        // Each is irreducible by Eisenstein's criterion or has no rational root in degree at most 3.
        let parts = [
            (poly(&[-2, 0, 0, 1]), 2),
            (poly(&[3, 6, 0, 0, 0, 2]), 1),
            (poly(&[1, 1, 1]), 3),
            (poly(&[-5, 7]), 1),
        ];
        let mut whole = poly(&[-6]);
        for (part, multiplicity) in &parts {
            for _ in 0..*multiplicity {
                whole = multiply(&whole, part);
            }
        }
        let found = factor(&whole).unwrap();
        assert_eq!(found.content, -6);
        assert_eq!(expand(&found), whole);
        let mut expected = parts.to_vec();
        expected.sort_by(|a, b| (a.0.len(), &a.0).cmp(&(b.0.len(), &b.0)));
        assert_eq!(found.factors, expected);
    }

    #[test]
    fn x_to_the_n_minus_one_has_a_factor_for_each_divisor() {
        for n in 1..=64 {
            let found = factor(&power_minus_one(n)).unwrap();
            let divisors = (1..=n).filter(|d| n % d == 0).count();
            assert_eq!(found.factors.len(), divisors, "n = {n}");
            assert_eq!(expand(&found), power_minus_one(n));
        }
    }

    #[test]
    fn x_to_the_fourth_plus_one_splits_modulo_every_prime_but_not_over_the_rationals() {
        assert_eq!(factor(&poly(&[1, 0, 0, 0, 1])).unwrap().factors.len(), 1);
    }

    /// ∏ (x ± √a₁ ± … ± √a_m): from q(x) to q(x+√a)·q(x−√a).
    fn swinnerton_dyer(squares: &[i64]) -> Vec<Integer> {
        let mut p = poly(&[0, 1]);
        for &a in squares {
            // p(x + s) = even + s·odd with s² = a; the product is even² − a·odd².
            let mut even = vec![Integer::new(); p.len()];
            let mut odd = vec![Integer::new(); p.len()];
            for (n, c) in p.iter().enumerate() {
                for j in 0..=n {
                    let binomial = Integer::from(n).binomial(j as u32);
                    let half = Integer::from(Integer::u_pow_u(a as u32, (j / 2) as u32));
                    let term = binomial * half * c;
                    if j % 2 == 0 {
                        even[n - j] += term;
                    } else {
                        odd[n - j] += term;
                    }
                }
            }
            trim(&mut odd);
            let odd_square: Vec<Integer> =
                multiply(&odd, &odd).into_iter().map(|c| c * a).collect();
            p = difference(&multiply(&even, &even), &odd_square);
        }
        p
    }

    #[test]
    fn swinnerton_dyer_polynomials_are_irreducible() {
        // Square roots of distinct primes: irreducible of degree 2^m, yet modulo every prime all factors
        // have degree at most 2.
        assert_eq!(swinnerton_dyer(&[2, 3]), poly(&[1, 0, -10, 0, 1]));
        for squares in [&[2, 3, 5][..], &[2, 3, 5, 7], &[2, 3, 5, 7, 11]] {
            let p = swinnerton_dyer(squares);
            assert_eq!(p.len(), (1 << squares.len()) + 1);
            assert_eq!(factor(&p).unwrap().factors.len(), 1);
        }
        // √2 + √8 = 3√2 and √8 − √2 = √2: the polynomial of {2, 8} splits.
        let split = factor(&swinnerton_dyer(&[2, 8])).unwrap();
        assert_eq!(split.factors.len(), 2);
        // Six square roots: 32 parts modulo the best prime, past the budget.
        let refused = factor(&multiply(
            &swinnerton_dyer(&[2, 3, 5, 7, 11, 13]),
            &poly(&[-2, 0, 0, 1]),
        ));
        assert!(matches!(refused, Err(FactorFault::TooManyProducts { .. })));
    }

    #[test]
    fn products_of_close_polynomials_are_told_apart() {
        let a = poly(&[1_000_003, -17, 0, 5, 0, 0, 1]);
        let b = poly(&[1_000_003, -17, 0, 5, 0, 1, 1]);
        let whole = multiply(&a, &b);
        let found = factor(&whole).unwrap();
        assert_eq!(expand(&found), whole);
        assert!(found.factors.len() >= 2);
    }
}
