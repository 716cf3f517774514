//! Elements of a real number field, with total comparison.
//!
//! An element is `(c₀ + c₁θ + … + c_{d−1}θ^{d−1}) / den` with integers in lowest terms and `den > 0`,
//! which makes the representation unique: equality is equality of coordinates, and a number is zero
//! exactly when its coordinates are (the minimal polynomial is irreducible).
//!
//! Cost, with d the degree and b the bits of a coordinate: a sum takes O(d) and a product O(d²)
//! operations on integers of b bits, and the lowest-terms step d greatest common divisors. A sign takes
//! a fixed-precision evaluation, repeated at twice the precision until it settles; for a nonzero number
//! it must, and zero never gets there.

use super::effort::{
    charge_with, division_cost, gcd_cost, product_cost, weight, weight_of_bits, weights,
};
use super::enclosure::Enclosure;
use super::field::Field;
use super::poly::polynomial_product_cost;
use super::tiers::Sign;
use rug::{Integer, Rational};
use std::cmp::Ordering;

/// An exactly known real number.
///
/// Rational numbers combine with elements of every field. Combining elements of two different fields of
/// degree 2 or more is a mistake of the caller and panics.
#[derive(Clone)]
pub struct Real {
    field: Field,
    /// Length = degree of `field`.
    coordinates: Vec<Integer>,
    /// Positive; no common divisor with all the coordinates.
    den: Integer,
}

impl Real {
    /// `Σ coordinates[i]·θ^i / den`.
    ///
    /// # Panics
    /// If there are not as many coordinates as the field's degree, or `den` is zero.
    pub fn from_coordinates(field: &Field, coordinates: Vec<Integer>, den: Integer) -> Real {
        assert_eq!(
            coordinates.len(),
            field.degree(),
            "one coordinate for each power"
        );
        assert!(den != 0, "zero denominator");
        let mut real = Real {
            field: field.clone(),
            coordinates,
            den,
        };
        real.reduce();
        real
    }

    /// `Σ coordinates[i]·θ^i` with rational coordinates; any number of them, powers past the degree are
    /// reduced.
    pub fn from_rational_coordinates(field: &Field, coordinates: &[Rational]) -> Real {
        let mut den = Integer::from(1);
        for c in coordinates {
            den.lcm_mut(c.denom());
        }
        let scaled = coordinates
            .iter()
            .map(|c| Integer::from(&den / c.denom()) * c.numer())
            .collect();
        let reduced = reduce_powers(field, scaled);
        Real::from_coordinates(field, reduced, den)
    }

    /// The field that the number is written in.
    pub fn field(&self) -> &Field {
        &self.field
    }

    /// Integer coordinates over the powers of the generator.
    pub fn coordinates(&self) -> &[Integer] {
        &self.coordinates
    }

    /// The common denominator of the coordinates.
    pub fn denominator(&self) -> &Integer {
        &self.den
    }

    /// The same number written in `field`, when it is rational or already there.
    ///
    /// # Panics
    /// If it is neither.
    pub fn lifted_to(&self, field: &Field) -> Real {
        if self.field.same(field) {
            return self.clone();
        }
        let value = self
            .to_rational()
            .expect("only rationals move from one field to another");
        let mut coordinates = vec![Integer::new(); field.degree()];
        coordinates[0] = value.numer().clone();
        Real::from_coordinates(field, coordinates, value.denom().clone())
    }

    /// The value, when it is rational.
    pub fn to_rational(&self) -> Option<Rational> {
        self.coordinates[1..].iter().all(|c| *c == 0).then(|| {
            charge_with(|| gcd_cost(weight(&self.coordinates[0]), weight(&self.den)));
            Rational::from((&self.coordinates[0], &self.den))
        })
    }

    /// True exactly when the number is zero.
    pub fn is_zero(&self) -> bool {
        self.coordinates.iter().all(|c| *c == 0)
    }

    /// The sign; always decided.
    pub fn sign(&self) -> Sign {
        sign_of_coordinates(&self.field, &self.coordinates)
    }

    /// An interval that holds the number, with bounds of `precision` bits. The width is relative to the
    /// largest term c_i·θ^i, so cancellation makes it wider; see [`Real::enclosure_within`].
    pub fn enclosure(&self, precision: u32) -> Enclosure {
        enclose_coordinates(&self.field, &self.coordinates, precision).div_integer(&self.den)
    }

    /// An interval of width at most 2^−bits that holds the number.
    pub fn enclosure_within(&self, bits: u32) -> Enclosure {
        let mut precision = bits.max(32) + 32;
        // Each doubling at least squares the relative width, so this ends.
        loop {
            let found = self.enclosure(precision);
            let width = found.width();
            if width == 0 || width.get_exp().is_some_and(|e| e <= -(bits as i32)) {
                return found;
            }
            precision *= 2;
        }
    }

    /// The number to `digits` places after the point, less than one unit off in the last place.
    pub fn decimal(&self, digits: usize) -> String {
        let mut bits = (digits as u32) * 4 + 8;
        // An enclosure narrower than the last place settles the rounding to one unit, at the latest when
        // it is too narrow to hold two rounding points.
        loop {
            if let Some(text) = self.enclosure_within(bits).decimal(digits) {
                return text;
            }
            bits *= 2;
        }
    }

    /// The nearest floating-point number or a neighbour of it.
    pub fn to_f64(&self) -> f64 {
        if let Some(value) = self.to_rational() {
            return value.to_f64();
        }
        // Relative precision: grow until the enclosure is narrow against the value.
        let mut precision = 96;
        loop {
            let found = self.enclosure(precision);
            let (lo, hi) = (found.lo().to_f64(), found.hi().to_f64());
            // Beyond the range of floating point the bounds end up equal (perhaps infinite), since an
            // irrational number is no midpoint between neighbours.
            if lo == hi || (hi - lo).abs() <= 4.0 * f64::EPSILON * lo.abs().max(hi.abs()) {
                return found.to_f64();
            }
            precision *= 2;
        }
    }

    /// The reciprocal; `None` for zero.
    ///
    /// Solved from the multiplication matrix: d³ integer operations by fraction-free elimination.
    pub fn inverse(&self) -> Option<Real> {
        if self.is_zero() {
            return None;
        }
        let d = self.coordinates.len();
        if d == 1 {
            return Some(Real::from_coordinates(
                &self.field,
                vec![self.den.clone()],
                self.coordinates[0].clone(),
            ));
        }
        // Columns: self·θ^j. Solve M x = e₀.
        let mut matrix = vec![vec![Integer::new(); d + 1]; d];
        let mut column = self.coordinates.clone();
        for j in 0..d {
            for (row, entry) in matrix.iter_mut().zip(&column) {
                row[j] = entry.clone();
            }
            column.insert(0, Integer::new());
            column = reduce_powers(&self.field, column);
        }
        matrix[0][d] = Integer::from(1);
        let (solution, determinant) = solve_fraction_free(matrix);
        let scaled = solution.into_iter().map(|x| x * &self.den).collect();
        Some(Real::from_coordinates(&self.field, scaled, determinant))
    }

    /// The quotient; `None` when the divisor is zero.
    pub fn checked_div(&self, divisor: &Real) -> Option<Real> {
        Some(self * &divisor.inverse()?)
    }

    /// An integer power.
    pub fn pow(&self, exponent: u32) -> Real {
        let mut result = Real::from(1);
        let mut square = self.clone();
        let mut rest = exponent;
        while rest > 0 {
            if rest & 1 == 1 {
                result = &result * &square;
            }
            rest >>= 1;
            if rest > 0 {
                square = &square * &square;
            }
        }
        result
    }

    /// The absolute value.
    pub fn abs(&self) -> Real {
        if self.sign() == Sign::Negative {
            -self
        } else {
            self.clone()
        }
    }

    /// The largest integer that is not greater.
    pub fn floor(&self) -> Integer {
        if let Some(value) = self.to_rational() {
            return value.floor().numer().clone();
        }
        // Irrational, so no integer is hit and some precision separates the value from all of them.
        let mut bits = 32;
        loop {
            let found = self.enclosure_within(bits);
            let lo = found.lo().to_integer_round(rug::float::Round::Down);
            let hi = found.hi().to_integer_round(rug::float::Round::Down);
            if let (Some((lo, _)), Some((hi, _))) = (lo, hi)
                && lo == hi
            {
                return lo;
            }
            bits *= 2;
        }
    }

    /// The exact value in the powers of the generator, under the given name: `1/2 + 3/2*t`.
    pub fn display_in(&self, name: &str) -> String {
        let mut text = String::new();
        for (i, c) in self
            .coordinates
            .iter()
            .enumerate()
            .filter(|(_, c)| **c != 0)
        {
            let value = Rational::from((c, &self.den));
            let negative = value < 0;
            let magnitude = value.abs();
            if text.is_empty() {
                text.push_str(if negative { "-" } else { "" });
            } else {
                text.push_str(if negative { " - " } else { " + " });
            }
            let power = match i {
                0 => String::new(),
                1 => name.to_string(),
                _ => format!("{name}^{i}"),
            };
            if i == 0 {
                text.push_str(&magnitude.to_string());
            } else if magnitude == 1 {
                text.push_str(&power);
            } else {
                text.push_str(&format!("{magnitude}*{power}"));
            }
        }
        if text.is_empty() { "0".into() } else { text }
    }

    fn reduce(&mut self) {
        let mut common = self.den.clone();
        for c in &self.coordinates {
            if common == 1 {
                break;
            }
            charge_with(|| gcd_cost(weight(&common), weight(c)));
            common.gcd_mut(c);
        }
        common.abs_mut();
        if self.den < 0 {
            common = -common;
        }
        if common != 1 {
            charge_with(|| {
                division_cost(
                    weights(&self.coordinates) + weight(&self.den),
                    weight(&common),
                )
            });
            self.den.div_exact_mut(&common);
            for c in &mut self.coordinates {
                c.div_exact_mut(&common);
            }
        }
    }

    /// Both numbers written in the larger of their fields.
    fn aligned(&self, other: &Real) -> (Real, Real) {
        if self.field.is_rational() {
            (self.lifted_to(&other.field), other.clone())
        } else {
            (self.clone(), other.lifted_to(&self.field))
        }
    }

    pub(super) fn combine(&self, other: &Real, subtract: bool) -> Real {
        if self.coordinates.len() != other.coordinates.len() || !self.field.same(&other.field) {
            let (a, b) = self.aligned(other);
            return a.combine(&b, subtract);
        }
        charge_with(|| {
            product_cost(weights(&self.coordinates), weight(&other.den))
                .saturating_add(product_cost(weights(&other.coordinates), weight(&self.den)))
        });
        let coordinates = self
            .coordinates
            .iter()
            .zip(&other.coordinates)
            .map(|(a, b)| {
                let (left, right) = (Integer::from(a * &other.den), Integer::from(b * &self.den));
                if subtract { left - right } else { left + right }
            })
            .collect();
        Real::from_coordinates(
            &self.field,
            coordinates,
            Integer::from(&self.den * &other.den),
        )
    }

    pub(super) fn negated(&self) -> Real {
        Real {
            field: self.field.clone(),
            coordinates: self.coordinates.iter().map(|c| Integer::from(-c)).collect(),
            den: self.den.clone(),
        }
    }

    pub(super) fn product(&self, other: &Real) -> Real {
        if self.coordinates.len() != other.coordinates.len() || !self.field.same(&other.field) {
            let (a, b) = self.aligned(other);
            return a.product(&b);
        }
        let raw = multiply(&self.coordinates, &other.coordinates);
        Real::from_coordinates(
            &self.field,
            reduce_powers(&self.field, raw),
            Integer::from(&self.den * &other.den),
        )
    }
}

/// The sign of Σ coordinates[i]·θ^i; always decided.
pub(crate) fn sign_of_coordinates(field: &Field, coordinates: &[Integer]) -> Sign {
    if coordinates.len() == 1 {
        return coordinates[0].cmp0().into();
    }
    if coordinates.iter().all(|c| *c == 0) {
        return Sign::Zero;
    }
    // A nonzero number is at a positive distance from zero, so doubling the precision ends.
    let mut precision = 64;
    loop {
        if let Some(sign) = enclose_coordinates(field, coordinates, precision).sign() {
            return sign;
        }
        precision *= 2;
    }
}

fn enclose_coordinates(field: &Field, coordinates: &[Integer], precision: u32) -> Enclosure {
    let powers = field.powers(precision);
    charge_with(|| product_cost(weights(coordinates), 4 * weight_of_bits(precision.into())));
    let mut sum = Enclosure::zero(precision);
    for (c, power) in coordinates.iter().zip(powers.iter()) {
        if *c != 0 {
            sum.add_assign(&power.mul_integer(c));
        }
    }
    sum
}

/// Product of two coordinate vectors as polynomials in θ, not yet reduced.
fn multiply(a: &[Integer], b: &[Integer]) -> Vec<Integer> {
    charge_with(|| polynomial_product_cost(a, b));
    let mut product = vec![Integer::new(); a.len() + b.len() - 1];
    for (i, x) in a.iter().enumerate().filter(|(_, x)| **x != 0) {
        for (j, y) in b.iter().enumerate() {
            product[i + j] += x * y;
        }
    }
    product
}

/// Replaces θ^d and higher by lower powers; pads with zeros up to the degree.
pub(crate) fn reduce_powers(field: &Field, mut coordinates: Vec<Integer>) -> Vec<Integer> {
    let d = field.degree();
    let minimal = field.minimal_polynomial();
    while coordinates.len() > d {
        let top = coordinates.pop().expect("longer than the degree");
        if top == 0 {
            continue;
        }
        let shift = coordinates.len() - d;
        charge_with(|| polynomial_product_cost(std::slice::from_ref(&top), minimal));
        for (i, m) in minimal[..d].iter().enumerate() {
            coordinates[shift + i] -= m * &top;
        }
    }
    coordinates.resize(d, Integer::new());
    coordinates
}

/// Solves a regular integer system by Bareiss elimination; returns the numerators and the common
/// denominator (the determinant up to sign).
///
/// # Panics
/// If the matrix is singular.
pub(crate) fn solve_fraction_free(mut m: Vec<Vec<Integer>>) -> (Vec<Integer>, Integer) {
    let n = m.len();
    let mut previous = Integer::from(1);
    for k in 0..n {
        let pivot = (k..n).find(|&i| m[i][k] != 0).expect("a regular matrix");
        m.swap(k, pivot);
        for i in (0..n).filter(|&i| i != k) {
            charge_with(|| {
                let [left, right] = [&m[i][k + 1..], &m[k][k + 1..]].map(weights);
                let (pivot, factor) = (weight(&m[k][k]), weight(&m[i][k]));
                product_cost(left, 2 * pivot)
                    .saturating_add(product_cost(right, factor))
                    .saturating_add(product_cost(left.max(right), 2 * weight(&previous)))
            });
            for j in (k + 1)..=n {
                let kept = Integer::from(&m[i][j] * &m[k][k]);
                let gone = Integer::from(&m[i][k] * &m[k][j]);
                m[i][j] = (kept - gone).div_exact(&previous);
            }
            m[i][k] = Integer::new();
        }
        previous = m[k][k].clone();
        // Jordan step: rows above keep the same pivot value on their diagonal.
        for (i, row) in m.iter_mut().enumerate().take(k) {
            row[i] = previous.clone();
        }
    }
    (
        m.into_iter().map(|mut row| row.swap_remove(n)).collect(),
        previous,
    )
}

impl PartialEq for Real {
    fn eq(&self, other: &Real) -> bool {
        if self.coordinates.len() == other.coordinates.len() && self.field.same(&other.field) {
            return self.den == other.den && self.coordinates == other.coordinates;
        }
        match (self.to_rational(), other.to_rational()) {
            (Some(a), Some(b)) => a == b,
            (None, None) => panic!("comparing elements of different fields"),
            _ => false,
        }
    }
}

impl Eq for Real {}

impl Ord for Real {
    fn cmp(&self, other: &Real) -> Ordering {
        match (self - other).sign() {
            Sign::Negative => Ordering::Less,
            Sign::Zero => Ordering::Equal,
            Sign::Positive => Ordering::Greater,
        }
    }
}

impl PartialOrd for Real {
    fn partial_cmp(&self, other: &Real) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl std::hash::Hash for Real {
    /// Equal numbers hash alike also across the rationals and a larger field, because trailing zero
    /// coordinates are left out.
    fn hash<H: std::hash::Hasher>(&self, state: &mut H) {
        let used = self
            .coordinates
            .iter()
            .rposition(|c| *c != 0)
            .map_or(0, |i| i + 1);
        self.coordinates[..used].hash(state);
        self.den.hash(state);
    }
}

impl std::fmt::Debug for Real {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(&self.display_in("t"))
    }
}

impl std::fmt::Display for Real {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.write_str(&self.display_in("t"))
    }
}

impl From<i64> for Real {
    fn from(value: i64) -> Real {
        Real::from(Integer::from(value))
    }
}

impl From<Integer> for Real {
    fn from(value: Integer) -> Real {
        Real {
            field: Field::rationals(),
            coordinates: vec![value],
            den: Integer::from(1),
        }
    }
}

impl From<Rational> for Real {
    fn from(value: Rational) -> Real {
        let (num, den) = value.into_numer_denom();
        Real {
            field: Field::rationals(),
            coordinates: vec![num],
            den,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    /// ℚ(2cos(2π/7)), minimal polynomial x³ + x² − 2x − 1 (Watkins and Zeitlin, Amer. Math. Monthly
    /// 100 (1993), from memory; the test below checks that it vanishes at the right place).
    fn cubic() -> Field {
        let p = [-1, -2, 1, 1].map(Integer::from).to_vec();
        Field::from_isolated_root(p, Rational::from(1), Rational::from(2))
    }

    #[test]
    fn the_cubic_generator_is_twice_the_cosine() {
        let difference = cubic().generator().to_f64() - 2.0 * (std::f64::consts::TAU / 7.0).cos();
        assert!(difference.abs() < 1e-15);
    }

    #[test]
    fn inverses_multiply_to_one() {
        let t = cubic().generator();
        let numbers = [
            t.clone(),
            &t * &t - Real::from(3),
            Real::from(Rational::from((5, 7))) + &t * Real::from(-2),
            &t * &t * Real::from(Rational::from((1, 9))) + &t,
        ];
        for x in &numbers {
            assert_eq!(x * &x.inverse().unwrap(), Real::from(1));
        }
        assert!(Real::from(0).inverse().is_none());
        assert!((&t - &t).inverse().is_none());
    }

    #[test]
    fn tiny_differences_get_their_sign() {
        // A convergent of the generator: the difference is about 10⁻⁴⁰ and not zero.
        let t = cubic().generator();
        let scale = Integer::from(Integer::u_pow_u(10, 40));
        let floor = (&t * &Real::from(scale.clone())).floor();
        let below = Real::from(Rational::from((floor, scale)));
        assert_eq!((&t - &below).sign(), Sign::Positive);
        assert!((&t - &below).to_f64() < 1e-40);
    }

    #[test]
    fn zero_in_disguise_is_zero() {
        let t = cubic().generator();
        let p = t.pow(3) + t.pow(2) - Real::from(2) * &t - Real::from(1);
        assert!(p.is_zero());
        assert_eq!(p.sign(), Sign::Zero);
    }

    #[test]
    fn exact_text_and_decimals() {
        let t = cubic().generator();
        let x = Real::from(Rational::from((1, 2))) - &t * Real::from(Rational::from((3, 2)));
        assert_eq!(x.to_string(), "1/2 - 3/2*t");
        assert_eq!(Real::from(0).to_string(), "0");
        assert_eq!(Real::from(Rational::from((-7, 4))).decimal(3), "-1.750");
        // 2cos(2π/7) = 1.2469796037…: OEIS A160389 gives 1.8019…= 2cos(π/7); this is its square minus 2.
        assert_eq!(t.decimal(10), "1.2469796037");
    }

    #[test]
    fn nalgebra_products_work_on_exact_numbers() {
        let t = cubic().generator();
        let m = nalgebra::Matrix2::new(t.clone(), Real::from(1), Real::from(0), t.clone());
        let square = &m * &m;
        assert_eq!(square[(0, 1)], Real::from(2) * &t);
        assert_eq!(square[(0, 0)], &t * &t);
    }
}
