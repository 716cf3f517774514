//! Polynomials over the field of p elements, p an odd prime below 2³¹, and their factoring.
//!
//! Coefficients from the constant term up, reduced, without leading zeros; the zero polynomial is
//! empty. Factoring goes by distinct degrees and then by equal degrees with pseudo-random splitting
//! (Cantor and Zassenhaus, Math. Comp. 36 (1981) 587–592; von zur Gathen and Gerhard, *Modern Computer
//! Algebra*, chapter 14, from memory). The splitting uses a fixed generator, so equal input gives equal
//! work; its result does not depend on the random choices. Cost: O(n³ + n² log p) products for degree n.

use super::effort::{charge, charge_with, weights};
use rug::Integer;

/// The cost of one product and sum modulo a prime, a division included.
pub(crate) const MODULAR_STEP: u64 = 8;

/// The cost of finding the next prime.
const PRIME_STEP: u64 = 8192;

/// A polynomial over the field of `prime` elements.
pub(crate) type ModularPoly = Vec<u64>;

/// The field of p elements.
#[derive(Clone, Copy, Debug)]
pub(crate) struct PrimeField {
    pub(crate) prime: u64,
}

impl PrimeField {
    pub(crate) fn add(self, a: u64, b: u64) -> u64 {
        let sum = a + b;
        if sum >= self.prime {
            sum - self.prime
        } else {
            sum
        }
    }

    pub(crate) fn sub(self, a: u64, b: u64) -> u64 {
        if a >= b { a - b } else { a + self.prime - b }
    }

    /// No overflow: both factors are below 2³¹.
    pub(crate) fn mul(self, a: u64, b: u64) -> u64 {
        a * b % self.prime
    }

    pub(crate) fn pow(self, base: u64, mut exponent: u64) -> u64 {
        let (mut result, mut square) = (1, base);
        while exponent > 0 {
            if exponent & 1 == 1 {
                result = self.mul(result, square);
            }
            square = self.mul(square, square);
            exponent >>= 1;
        }
        result
    }

    /// The inverse of a nonzero element, by Fermat's theorem.
    pub(crate) fn inverse(self, a: u64) -> u64 {
        debug_assert!(a != 0, "zero has no inverse");
        self.pow(a, self.prime - 2)
    }

    /// The residue of an integer.
    pub(crate) fn reduce(self, value: &Integer) -> u64 {
        u64::from(value.mod_u(self.prime as u32))
    }

    /// The residues of a polynomial's coefficients.
    pub(crate) fn reduce_poly(self, p: &[Integer]) -> ModularPoly {
        charge_with(|| 4 * weights(p));
        trimmed(p.iter().map(|c| self.reduce(c)).collect())
    }

    /// The value at a point.
    pub(crate) fn evaluate(self, p: &[Integer], point: u64) -> u64 {
        charge_with(|| 4 * weights(p));
        p.iter().rev().fold(0, |value, c| {
            self.add(self.mul(value, point), self.reduce(c))
        })
    }

    pub(crate) fn product(self, a: &[u64], b: &[u64]) -> ModularPoly {
        if a.is_empty() || b.is_empty() {
            return Vec::new();
        }
        charge(MODULAR_STEP * (a.len() * b.len()) as u64 + 64);
        let mut product = vec![0; a.len() + b.len() - 1];
        for (i, x) in a.iter().enumerate().filter(|(_, x)| **x != 0) {
            for (j, y) in b.iter().enumerate() {
                product[i + j] = (product[i + j] + x * y) % self.prime;
            }
        }
        trimmed(product)
    }

    pub(crate) fn difference(self, a: &[u64], b: &[u64]) -> ModularPoly {
        let at = |p: &[u64], i: usize| p.get(i).copied().unwrap_or(0);
        trimmed(
            (0..a.len().max(b.len()))
                .map(|i| self.sub(at(a, i), at(b, i)))
                .collect(),
        )
    }

    /// Quotient and remainder.
    pub(crate) fn divide(self, a: &[u64], b: &[u64]) -> (ModularPoly, ModularPoly) {
        let steps = (a.len() + 1).saturating_sub(b.len()) * b.len();
        charge(MODULAR_STEP * steps as u64 + 512);
        let lead = self.inverse(*b.last().expect("division by the zero polynomial"));
        let mut rest = a.to_vec();
        let mut quotient = vec![0; (a.len() + 1).saturating_sub(b.len())];
        while rest.len() >= b.len() {
            let shift = rest.len() - b.len();
            let factor = self.mul(*rest.last().expect("nonempty"), lead);
            quotient[shift] = factor;
            for (i, c) in b.iter().enumerate() {
                rest[shift + i] = self.sub(rest[shift + i], self.mul(factor, *c));
            }
            rest = trimmed(rest);
        }
        (trimmed(quotient), rest)
    }

    pub(crate) fn remainder(self, a: &[u64], b: &[u64]) -> ModularPoly {
        self.divide(a, b).1
    }

    pub(crate) fn monic(self, p: &[u64]) -> ModularPoly {
        let Some(lead) = p.last() else {
            return Vec::new();
        };
        let factor = self.inverse(*lead);
        p.iter().map(|c| self.mul(*c, factor)).collect()
    }

    /// The monic greatest common divisor.
    pub(crate) fn gcd(self, a: &[u64], b: &[u64]) -> ModularPoly {
        let (mut a, mut b) = (a.to_vec(), b.to_vec());
        while !b.is_empty() {
            let rest = self.remainder(&a, &b);
            a = std::mem::replace(&mut b, rest);
        }
        self.monic(&a)
    }

    /// `(s, t)` with `s·a + t·b = 1`, for coprime a and b.
    pub(crate) fn bezout(self, a: &[u64], b: &[u64]) -> (ModularPoly, ModularPoly) {
        let (mut r, mut next) = (a.to_vec(), b.to_vec());
        let (mut s, mut s_next): (ModularPoly, ModularPoly) = (vec![1], Vec::new());
        let (mut t, mut t_next): (ModularPoly, ModularPoly) = (Vec::new(), vec![1]);
        while !next.is_empty() {
            let (q, rest) = self.divide(&r, &next);
            r = std::mem::replace(&mut next, rest);
            let new_s = self.difference(&s, &self.product(&q, &s_next));
            s = std::mem::replace(&mut s_next, new_s);
            let new_t = self.difference(&t, &self.product(&q, &t_next));
            t = std::mem::replace(&mut t_next, new_t);
        }
        debug_assert_eq!(r.len(), 1, "coprime polynomials");
        let scale = self.inverse(r[0]);
        let scaled = |p: ModularPoly| p.iter().map(|c| self.mul(*c, scale)).collect();
        (scaled(s), scaled(t))
    }

    pub(crate) fn derivative(self, p: &[u64]) -> ModularPoly {
        let terms = p.iter().enumerate().skip(1);
        trimmed(
            terms
                .map(|(i, c)| self.mul(*c, i as u64 % self.prime))
                .collect(),
        )
    }

    /// True when p has no repeated factor.
    pub(crate) fn is_squarefree(self, p: &[u64]) -> bool {
        self.gcd(p, &self.derivative(p)).len() == 1
    }

    /// base^exponent modulo p.
    fn power_modulo(self, base: &[u64], exponent: &Integer, p: &[u64]) -> ModularPoly {
        let mut result: ModularPoly = self.remainder(&[1], p);
        for bit in (0..exponent.significant_bits()).rev() {
            result = self.remainder(&self.product(&result, &result), p);
            if exponent.get_bit(bit) {
                result = self.remainder(&self.product(&result, base), p);
            }
        }
        result
    }

    /// The products of all irreducible factors of one degree, with that degree, for a monic squarefree
    /// polynomial.
    pub(crate) fn distinct_degrees(self, p: &[u64]) -> Vec<(ModularPoly, usize)> {
        let exponent = Integer::from(self.prime);
        let mut rest = p.to_vec();
        let mut power: ModularPoly = self.remainder(&[0, 1], &rest);
        let mut found = Vec::new();
        let mut degree = 1;
        while rest.len() > 2 * degree {
            power = self.power_modulo(&power, &exponent, &rest);
            let common = self.gcd(&self.difference(&power, &[0, 1]), &rest);
            if common.len() > 1 {
                rest = self.divide(&rest, &common).0;
                power = self.remainder(&power, &rest);
                found.push((common, degree));
            }
            degree += 1;
        }
        if rest.len() > 1 {
            let degree = rest.len() - 1;
            found.push((rest, degree));
        }
        found
    }

    /// The monic irreducible factors of a monic squarefree polynomial.
    pub(crate) fn factor(self, p: &[u64]) -> Vec<ModularPoly> {
        let mut factors = Vec::new();
        let mut random = 0x9e37_79b9_7f4a_7c15_u64;
        for (product, degree) in self.distinct_degrees(p) {
            self.split_equal(product, degree, &mut random, &mut factors);
        }
        factors
    }

    /// One root of a monic squarefree polynomial, if it has any.
    pub(crate) fn some_root(self, p: &[u64]) -> Option<u64> {
        let power = self.power_modulo(&[0, 1], &Integer::from(self.prime), p);
        let mut linear = self.gcd(&self.difference(&power, &[0, 1]), p);
        let mut random = 0x9e37_79b9_7f4a_7c15_u64;
        while linear.len() > 2 {
            if let Some((a, b)) = self.try_split(&linear, 1, &mut random) {
                linear = if a.len() <= b.len() { a } else { b };
            }
        }
        (linear.len() == 2).then(|| self.sub(0, linear[0]))
    }

    fn split_equal(
        self,
        product: ModularPoly,
        degree: usize,
        random: &mut u64,
        factors: &mut Vec<ModularPoly>,
    ) {
        let mut open = vec![product];
        // Each attempt on a reducible product splits it with probability about 1/2 or more.
        while let Some(p) = open.pop() {
            if p.len() - 1 == degree {
                factors.push(p);
                continue;
            }
            match self.try_split(&p, degree, random) {
                Some((a, b)) => open.extend([a, b]),
                None => open.push(p),
            }
        }
    }

    /// One attempt at splitting a product of irreducibles of the given degree.
    fn try_split(
        self,
        p: &[u64],
        degree: usize,
        random: &mut u64,
    ) -> Option<(ModularPoly, ModularPoly)> {
        let sample = trimmed(
            (1..p.len())
                .map(|_| splitmix(random) % self.prime)
                .collect(),
        );
        // Half of the elements of each residue field are squares: a^((q−1)/2) is 1 or −1 there.
        let exponent =
            (Integer::from(Integer::u_pow_u(self.prime as u32, degree as u32)) - 1u32) / 2u32;
        let power = self.power_modulo(&sample, &exponent, p);
        let common = self.gcd(&self.difference(&power, &[1]), p);
        if common.len() <= 1 || common.len() == p.len() {
            return None;
        }
        let other = self.divide(p, &common).0;
        Some((common, other))
    }
}

/// A fixed sequence of well-mixed words (Steele, Lea and Flood 2014, from memory).
fn splitmix(state: &mut u64) -> u64 {
    *state = state.wrapping_add(0x9e37_79b9_7f4a_7c15);
    let mut z = *state;
    z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    z ^ (z >> 31)
}

fn trimmed(mut p: ModularPoly) -> ModularPoly {
    while p.last() == Some(&0) {
        p.pop();
    }
    p
}

/// The primes from `start` on, all below 2³¹.
pub(crate) fn primes_from(start: u32) -> impl Iterator<Item = PrimeField> {
    let mut current = Integer::from(start.max(3) - 1);
    std::iter::from_fn(move || {
        charge(PRIME_STEP);
        // Below 2⁶⁴ the test behind this is deterministic in effect: no composite passes it.
        current = Integer::from(current.next_prime_ref());
        let prime = current.to_u64().filter(|p| *p < 1 << 31)?;
        Some(PrimeField { prime })
    })
}

/// The degrees that a factor can have, given the degrees of the irreducible factors modulo a prime, as
/// a set of flags indexed by degree.
pub(crate) fn reachable_degrees(total: usize, parts: impl IntoIterator<Item = usize>) -> Vec<bool> {
    let mut reachable = vec![false; total + 1];
    reachable[0] = true;
    for part in parts {
        for sum in (part..=total).rev() {
            reachable[sum] |= reachable[sum - part];
        }
    }
    reachable
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn factors_multiply_back_and_are_irreducible() {
        for field in primes_from(101).take(10) {
            // x^12 - 1 splits by the order of p modulo the divisors of 12.
            let mut p = vec![0; 13];
            p[0] = field.prime - 1;
            p[12] = 1;
            let factors = field.factor(&p);
            let product = factors
                .iter()
                .fold(vec![1], |acc, f| field.product(&acc, f));
            assert_eq!(product, p);
            for factor in &factors {
                let degrees: Vec<usize> = field
                    .distinct_degrees(factor)
                    .into_iter()
                    .map(|(_, d)| d)
                    .collect();
                assert_eq!(degrees, [factor.len() - 1]);
            }
            let root = field.some_root(&p).expect("1 is a root");
            assert_eq!(field.pow(root, 12), 1);
        }
    }

    #[test]
    fn bezout_coefficients_give_one() {
        let field = PrimeField { prime: 1009 };
        let (a, b) = (vec![5, 3, 1], vec![7, 0, 2, 1]);
        let (s, t) = field.bezout(&a, &b);
        let left = field.product(&s, &a);
        let right = field.product(&t, &b);
        let negative = field.difference(&[], &right);
        assert_eq!(field.difference(&left, &negative), [1]);
    }
}
