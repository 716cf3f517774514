//! Real number fields ℚ(θ).
//!
//! θ is an algebraic *integer*: its minimal polynomial is monic over ℤ, so that products of integer
//! combinations of 1, θ, …, θ^(d−1) stay integer combinations. The polynomial is irreducible, so an
//! element is zero exactly when all its coordinates are zero; that is the whole zero test.
//!
//! θ itself is known as a root of the polynomial in a dyadic interval that holds no other root. The
//! interval is halved on demand. Cost of one more bit: one evaluation of the polynomial at a dyadic
//! point, O(d) products of integers as long as the precision; enclosures are cached per precision.

use super::effort::{charge, gcd_cost, product_cost, weight, weight_of_bits};
use super::enclosure::Enclosure;
use super::poly;
use super::real::Real;
use super::tiers::Sign;
use rug::float::Round;
use rug::{Float, Integer, Rational};
use std::collections::BTreeMap;
use std::sync::{Arc, Mutex, PoisonError};

/// The degree above which a field is refused: past it nothing would finish in useful time.
pub const LARGEST_DEGREE: usize = 64;

/// A real number field with a fixed generator. Cloning is cheap.
#[derive(Clone)]
pub struct Field(Arc<FieldData>);

struct FieldData {
    /// Monic, irreducible, constant term first; length = degree + 1.
    minimal: Vec<Integer>,
    /// Isolating interval (lo, hi] of θ as first given: decides which root is meant.
    isolating: (Rational, Rational),
    /// Current interval, refined in place.
    interval: Mutex<(Rational, Rational)>,
    /// Enclosures of 1, θ, …, θ^(d−1), by precision.
    powers: Mutex<BTreeMap<u32, Arc<Vec<Enclosure>>>>,
}

impl std::fmt::Debug for Field {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "Field({})", self.describe("t"))
    }
}

impl Field {
    /// The rationals.
    pub fn rationals() -> Field {
        static RATIONALS: std::sync::OnceLock<Field> = std::sync::OnceLock::new();
        RATIONALS
            .get_or_init(|| {
                Field::from_isolated_root(
                    vec![Integer::from(-1), Integer::from(1)],
                    Rational::from(0),
                    Rational::from(1),
                )
            })
            .clone()
    }

    /// ℚ(θ) for the one root θ of `minimal` in (lo, hi].
    ///
    /// The caller has proved that the polynomial is irreducible over ℚ
    /// ([`factor`](super::factor) does).
    ///
    /// # Panics
    /// If the polynomial is not monic of degree at least 1, or the interval does not hold exactly one
    /// root.
    pub fn from_isolated_root(minimal: Vec<Integer>, lo: Rational, hi: Rational) -> Field {
        assert!(
            minimal.len() >= 2,
            "a minimal polynomial has degree at least 1"
        );
        assert_eq!(
            *minimal.last().expect("nonempty"),
            1,
            "the minimal polynomial must be monic"
        );
        assert_eq!(
            poly::roots_between(&poly::sturm_sequence(&minimal), &lo, &hi),
            1,
            "the interval must isolate one root"
        );
        Field(Arc::new(FieldData {
            minimal,
            isolating: (lo.clone(), hi.clone()),
            interval: Mutex::new((lo, hi)),
            powers: Mutex::new(BTreeMap::new()),
        }))
    }

    /// The degree over ℚ.
    pub fn degree(&self) -> usize {
        self.0.minimal.len() - 1
    }

    /// True for ℚ itself.
    pub fn is_rational(&self) -> bool {
        self.degree() == 1
    }

    /// The minimal polynomial of θ, constant term first.
    pub fn minimal_polynomial(&self) -> &[Integer] {
        &self.0.minimal
    }

    /// θ as an element.
    pub fn generator(&self) -> Real {
        if self.is_rational() {
            return Real::from(Integer::from(-&self.0.minimal[0]));
        }
        let mut coordinates = vec![Integer::new(); self.degree()];
        coordinates[1] = Integer::from(1);
        Real::from_coordinates(self, coordinates, Integer::from(1))
    }

    /// True when both are the same field with the same generator.
    pub fn same(&self, other: &Field) -> bool {
        if Arc::ptr_eq(&self.0, &other.0) {
            return true;
        }
        if self.0.minimal != other.0.minimal {
            return false;
        }
        // The same polynomial: equal roots exactly when some root lies in both isolating intervals.
        let lo = (&self.0.isolating.0).max(&other.0.isolating.0);
        let hi = (&self.0.isolating.1).min(&other.0.isolating.1);
        lo < hi && poly::roots_between(&poly::sturm_sequence(&self.0.minimal), lo, hi) == 1
    }

    /// The interval (lo, hi] that the field was given, which holds θ and no other root. It never changes.
    pub fn isolating_interval(&self) -> (&Rational, &Rational) {
        (&self.0.isolating.0, &self.0.isolating.1)
    }

    /// An interval (lo, hi] of width at most 2^−bits that holds θ.
    pub fn root_interval(&self, bits: u32) -> (Rational, Rational) {
        // Work that is ended while it refines leaves a valid interval behind.
        let mut interval = self
            .0
            .interval
            .lock()
            .unwrap_or_else(PoisonError::into_inner);
        let target = Rational::from((Integer::from(1), Integer::from(1) << bits));
        // Each pass halves the interval, so this ends.
        while Rational::from(&interval.1 - &interval.0) > target {
            let size = weight(interval.0.numer()) + weight(interval.1.numer());
            charge(gcd_cost(size, size));
            let middle = Rational::from(&interval.0 + &interval.1) / 2;
            let p = &self.0.minimal;
            let at_middle = poly::sign_at(p, &middle);
            if at_middle == Sign::Zero {
                // Only in degree 1, where the root is rational.
                interval.0 = Rational::from(&middle - &target);
                interval.1 = middle;
                break;
            }
            // Squarefree with one root inside: the sign just above lo is the opposite of that at hi,
            // unless hi is the root itself.
            let at_hi = poly::sign_at(p, &interval.1);
            let root_above = if at_hi == Sign::Zero {
                true
            } else {
                at_middle != at_hi
            };
            if root_above {
                interval.0 = middle;
            } else {
                interval.1 = middle;
            }
        }
        interval.clone()
    }

    /// Enclosures of 1, θ, …, θ^(d−1) whose bounds have `precision` bits.
    pub fn powers(&self, precision: u32) -> Arc<Vec<Enclosure>> {
        // Work that is ended here has cached nothing yet.
        let mut cache = self.0.powers.lock().unwrap_or_else(PoisonError::into_inner);
        if let Some(found) = cache.get(&precision) {
            return found.clone();
        }
        let (lo, hi) = self.root_interval(precision + 8);
        let theta = Enclosure::between(
            Float::with_val_round(precision, &lo, Round::Down).0,
            Float::with_val_round(precision, &hi, Round::Up).0,
        );
        let size = weight_of_bits(precision.into());
        charge((4 * self.degree() as u64).saturating_mul(product_cost(size, size)));
        let mut powers = vec![Enclosure::from_integer(&Integer::from(1), precision)];
        for i in 1..self.degree() {
            powers.push(powers[i - 1].mul(&theta));
        }
        let powers = Arc::new(powers);
        cache.insert(precision, powers.clone());
        powers
    }

    /// One line: the name of the generator, its polynomial and its decimal value.
    pub fn describe(&self, name: &str) -> String {
        if self.is_rational() {
            return "the rationals".into();
        }
        let value = self.generator().decimal(12);
        format!(
            "{name} = {value}…, root of {}",
            poly::display(&self.0.minimal, name)
        )
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sqrt2() -> Field {
        let p = vec![Integer::from(-2), Integer::from(0), Integer::from(1)];
        Field::from_isolated_root(p, Rational::from(1), Rational::from(2))
    }

    #[test]
    fn the_interval_shrinks_round_the_right_root() {
        let field = sqrt2();
        let (lo, hi) = field.root_interval(200);
        assert!(Rational::from(&hi - &lo) <= Rational::from((1, 1)) >> 200u32);
        assert!(Rational::from(lo.square_ref()) < 2 && Rational::from(hi.square_ref()) >= 2);
    }

    #[test]
    fn two_roots_of_one_polynomial_are_two_fields() {
        let p = vec![Integer::from(-2), Integer::from(0), Integer::from(1)];
        let negative = Field::from_isolated_root(p, Rational::from(-2), Rational::from(-1));
        assert!(!sqrt2().same(&negative));
        assert!(sqrt2().same(&sqrt2()));
        assert!(negative.generator() < Real::from(0));
    }

    #[test]
    #[should_panic(expected = "isolate one root")]
    fn an_interval_with_two_roots_is_refused() {
        let p = vec![Integer::from(-2), Integer::from(0), Integer::from(1)];
        Field::from_isolated_root(p, Rational::from(-2), Rational::from(2));
    }
}
