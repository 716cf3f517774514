//! Intervals of arbitrary-precision floating-point numbers with outward rounding.
//!
//! An [`Enclosure`] is a pair `lo ≤ hi` that certainly contains the exact value it stands for. Every
//! operation rounds `lo` down and `hi` up (MPFR's directed rounding is exact in this sense), so
//! containment survives any sequence of operations.

use super::tiers::Sign;
use rug::float::Round;
use rug::ops::{AddAssignRound, DivAssignRound, MulAssignRound, SubAssignRound};
use rug::{Float, Integer, Rational};

/// A closed interval that contains an exactly defined real number.
#[derive(Clone, Debug)]
pub struct Enclosure {
    lo: Float,
    hi: Float,
}

impl Enclosure {
    /// The point interval 0.
    pub fn zero(precision: u32) -> Enclosure {
        Enclosure {
            lo: Float::new(precision),
            hi: Float::new(precision),
        }
    }

    /// The tightest enclosure of a rational with bounds of `precision` bits.
    pub fn from_rational(value: &Rational, precision: u32) -> Enclosure {
        Enclosure {
            lo: Float::with_val_round(precision, value, Round::Down).0,
            hi: Float::with_val_round(precision, value, Round::Up).0,
        }
    }

    /// The tightest enclosure of an integer with bounds of `precision` bits.
    pub fn from_integer(value: &Integer, precision: u32) -> Enclosure {
        Enclosure {
            lo: Float::with_val_round(precision, value, Round::Down).0,
            hi: Float::with_val_round(precision, value, Round::Up).0,
        }
    }

    /// The interval between two given bounds.
    ///
    /// # Panics
    /// If `lo > hi` or a bound is not a number.
    pub fn between(lo: Float, hi: Float) -> Enclosure {
        assert!(lo <= hi, "an enclosure needs ordered bounds");
        Enclosure { lo, hi }
    }

    /// π.
    pub fn pi(precision: u32) -> Enclosure {
        use rug::float::Constant;
        Enclosure {
            lo: Float::with_val_round(precision, Constant::Pi, Round::Down).0,
            hi: Float::with_val_round(precision, Constant::Pi, Round::Up).0,
        }
    }

    /// Lower bound.
    pub fn lo(&self) -> &Float {
        &self.lo
    }

    /// Upper bound.
    pub fn hi(&self) -> &Float {
        &self.hi
    }

    /// Bits of precision of the bounds.
    pub fn precision(&self) -> u32 {
        self.lo.prec()
    }

    /// An upper bound of `hi − lo`.
    pub fn width(&self) -> Float {
        let mut width = self.hi.clone();
        width.sub_assign_round(&self.lo, Round::Up);
        width
    }

    /// True when the exact number may be zero as far as this interval knows.
    pub fn contains_zero(&self) -> bool {
        self.lo <= 0 && self.hi >= 0
    }

    /// True when the rational lies in the interval.
    pub fn contains(&self, value: &Rational) -> bool {
        self.lo <= *value && self.hi >= *value
    }

    /// True when the two intervals share a point.
    pub fn meets(&self, other: &Enclosure) -> bool {
        self.lo <= other.hi && other.lo <= self.hi
    }

    /// The sign, when the interval settles it.
    pub fn sign(&self) -> Option<Sign> {
        if self.lo > 0 {
            Some(Sign::Positive)
        } else if self.hi < 0 {
            Some(Sign::Negative)
        } else if self.lo.is_zero() && self.hi.is_zero() {
            Some(Sign::Zero)
        } else {
            None
        }
    }

    /// A floating-point number in or next to the interval, for display and drawing.
    pub fn to_f64(&self) -> f64 {
        let mut middle = Float::with_val(self.precision() + 1, &self.lo);
        middle += &self.hi;
        middle /= 2;
        middle.to_f64()
    }

    /// Adds in place.
    pub fn add_assign(&mut self, other: &Enclosure) {
        self.lo.add_assign_round(&other.lo, Round::Down);
        self.hi.add_assign_round(&other.hi, Round::Up);
    }

    /// Subtracts in place.
    pub fn sub_assign(&mut self, other: &Enclosure) {
        self.lo.sub_assign_round(&other.hi, Round::Down);
        self.hi.sub_assign_round(&other.lo, Round::Up);
    }

    /// The sum.
    pub fn add(&self, other: &Enclosure) -> Enclosure {
        let mut sum = self.clone();
        sum.add_assign(other);
        sum
    }

    /// The difference.
    pub fn sub(&self, other: &Enclosure) -> Enclosure {
        let mut difference = self.clone();
        difference.sub_assign(other);
        difference
    }

    /// The negated interval.
    pub fn neg(&self) -> Enclosure {
        Enclosure {
            lo: Float::with_val(self.precision(), -&self.hi),
            hi: Float::with_val(self.precision(), -&self.lo),
        }
    }

    /// The product.
    ///
    /// Intervals that do not straddle zero, the usual case, take two products; otherwise all four pairs of
    /// bounds are tried.
    pub fn mul(&self, other: &Enclosure) -> Enclosure {
        let definite = |e: &Enclosure| (e.lo >= 0).then_some(true).or((e.hi <= 0).then_some(false));
        let (lo, hi) = match (definite(self), definite(other)) {
            (Some(true), Some(true)) => ((&self.lo, &other.lo), (&self.hi, &other.hi)),
            (Some(true), Some(false)) => ((&self.hi, &other.lo), (&self.lo, &other.hi)),
            (Some(false), Some(true)) => ((&self.lo, &other.hi), (&self.hi, &other.lo)),
            (Some(false), Some(false)) => ((&self.hi, &other.hi), (&self.lo, &other.lo)),
            _ => return self.mul_straddling(other),
        };
        let product = |(a, b): (&Float, &Float), round| {
            Float::with_val_round(self.precision(), a * b, round).0
        };
        Enclosure {
            lo: product(lo, Round::Down),
            hi: product(hi, Round::Up),
        }
    }

    fn mul_straddling(&self, other: &Enclosure) -> Enclosure {
        let products = |round| {
            [&self.lo, &self.hi].into_iter().flat_map(move |a| {
                [&other.lo, &other.hi]
                    .map(|b| Float::with_val_round(self.precision(), a * b, round).0)
            })
        };
        let ordered = |a: &Float, b: &Float| a.total_cmp(b);
        Enclosure {
            lo: products(Round::Down)
                .min_by(ordered)
                .expect("four products"),
            hi: products(Round::Up).max_by(ordered).expect("four products"),
        }
    }

    /// The square, never below zero.
    pub fn square(&self) -> Enclosure {
        let product = self.mul(self);
        if self.contains_zero() {
            return Enclosure {
                lo: Float::new(self.precision()),
                hi: product.hi,
            };
        }
        product
    }

    /// The product with an exact integer.
    pub fn mul_integer(&self, factor: &Integer) -> Enclosure {
        let precision = self.precision();
        let (small, large) = if *factor < 0 {
            (&self.hi, &self.lo)
        } else {
            (&self.lo, &self.hi)
        };
        let mut lo = Float::with_val(precision, small);
        lo.mul_assign_round(factor, Round::Down);
        let mut hi = Float::with_val(precision, large);
        hi.mul_assign_round(factor, Round::Up);
        Enclosure { lo, hi }
    }

    /// The quotient by a positive integer.
    ///
    /// # Panics
    /// If the divisor is not positive.
    pub fn div_integer(&self, divisor: &Integer) -> Enclosure {
        assert!(*divisor > 0, "the divisor of an enclosure must be positive");
        let mut quotient = self.clone();
        quotient.lo.div_assign_round(divisor, Round::Down);
        quotient.hi.div_assign_round(divisor, Round::Up);
        quotient
    }

    /// The quotient, or `None` when the divisor's interval contains zero.
    pub fn div(&self, divisor: &Enclosure) -> Option<Enclosure> {
        if divisor.contains_zero() {
            return None;
        }
        let one = Float::with_val(self.precision(), 1);
        let mut lo = one.clone();
        lo.div_assign_round(&divisor.hi, Round::Down);
        let mut hi = one;
        hi.div_assign_round(&divisor.lo, Round::Up);
        Some(self.mul(&Enclosure { lo, hi }))
    }

    /// The square root of a nonnegative number. A lower bound below zero is taken as zero, which is
    /// right because the exact number is known to be at least zero.
    ///
    /// # Panics
    /// If the whole interval lies below zero.
    pub fn sqrt(&self) -> Enclosure {
        assert!(self.hi >= 0, "square root of a negative number");
        let mut lo = if self.lo < 0 {
            Float::new(self.precision())
        } else {
            self.lo.clone()
        };
        lo.sqrt_round(Round::Down);
        let mut hi = self.hi.clone();
        hi.sqrt_round(Round::Up);
        Enclosure { lo, hi }
    }

    /// The natural logarithm of a positive number; `None` when the lower bound is not positive.
    pub fn ln(&self) -> Option<Enclosure> {
        if self.lo <= 0 {
            return None;
        }
        let (mut lo, mut hi) = (self.lo.clone(), self.hi.clone());
        lo.ln_round(Round::Down);
        hi.ln_round(Round::Up);
        Some(Enclosure { lo, hi })
    }

    /// The absolute value.
    pub fn abs(&self) -> Enclosure {
        if self.lo >= 0 {
            return self.clone();
        }
        let turned = self.neg();
        if self.hi <= 0 {
            return turned;
        }
        Enclosure {
            lo: Float::new(self.precision()),
            hi: if turned.hi > self.hi {
                turned.hi
            } else {
                self.hi.clone()
            },
        }
    }

    /// A lower and an upper bound with `digits` places after the point, rounded outwards: both texts, read as exact
    /// decimals, enclose the number.
    ///
    /// # Panics
    /// If a bound is infinite.
    pub fn decimal_bounds(&self, digits: usize) -> (String, String) {
        let scale = Integer::from(Integer::u_pow_u(10, digits as u32));
        let scaled = |bound: &Float| bound.to_rational().expect("finite bounds") * &scale;
        let low = Integer::from(scaled(&self.lo).floor_ref());
        let high = Integer::from(scaled(&self.hi).ceil_ref());
        (fixed_point(&low, digits), fixed_point(&high, digits))
    }

    /// The enclosed number rounded to `digits` places after the point, when the interval is narrow
    /// enough to settle every digit up to one unit in the last place; `None` otherwise.
    ///
    /// The text differs from the exact number by less than one unit in the last place.
    pub fn decimal(&self, digits: usize) -> Option<String> {
        let scale = Integer::from(Integer::u_pow_u(10, digits as u32));
        let nearest = |bound: &Float| -> Option<Integer> {
            let exact = bound.to_rational()? * &scale;
            Some(Integer::from(exact.round_ref()))
        };
        let (low, high) = (nearest(&self.lo)?, nearest(&self.hi)?);
        if Integer::from(&high - &low) > 1 {
            return None;
        }
        Some(fixed_point(&low, digits))
    }
}

/// Values from here on are written with a power of ten.
const LONG: f64 = 1e15;
/// Nonzero values below are written with a power of ten.
const SHORT: f64 = 1e-3;

impl Enclosure {
    /// The enclosed number for readers: to `places` places after the point when it is zero or of ordinary size (from
    /// 0.001 to 10¹⁵), otherwise with `places + 1` digits and a power of ten, such as `1.4142e-300`. `None` when the
    /// interval is too wide for that.
    ///
    /// The text differs from the exact number by less than one unit in the last digit.
    pub fn readable(&self, places: usize) -> Option<String> {
        let [lo, hi] = [&self.lo, &self.hi].map(|bound| bound.clone().abs());
        let (least, most) = if lo <= hi { (lo, hi) } else { (hi, lo) };
        if most == 0 || (most >= SHORT && least < LONG) {
            return self.decimal(places);
        }
        if self.contains_zero() {
            return None;
        }
        // A width of at most a tenth of a unit in the last digit, and rounding by half of one.
        let mut needed = least.clone();
        needed >>= 4 * (places as u32 + 2);
        if self.width() > needed {
            return None;
        }
        let (negative, digits, exponent) = self.lo.to_sign_string_exp(10, Some(places + 1));
        let sign = if negative { "-" } else { "" };
        let (first, rest) = digits.split_at(1);
        let point = if rest.is_empty() { "" } else { "." };
        Some(format!("{sign}{first}{point}{rest}e{}", exponent? - 1))
    }
}

/// `value / 10^digits` written out.
fn fixed_point(value: &Integer, digits: usize) -> String {
    let magnitude = value.clone().abs().to_string();
    let padded = format!("{magnitude:0>width$}", width = digits + 1);
    let (whole, fraction) = padded.split_at(padded.len() - digits);
    let sign = if *value < 0 { "-" } else { "" };
    if digits == 0 {
        format!("{sign}{whole}")
    } else {
        format!("{sign}{whole}.{fraction}")
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn ratio(n: i64, d: i64) -> Rational {
        Rational::from((n, d))
    }

    #[test]
    fn operations_keep_the_exact_value_inside() {
        let (a, b) = (ratio(-7, 3), ratio(22, 9));
        let (x, y) = (
            Enclosure::from_rational(&a, 40),
            Enclosure::from_rational(&b, 40),
        );
        assert!(x.add(&y).contains(&Rational::from(&a + &b)));
        assert!(x.sub(&y).contains(&Rational::from(&a - &b)));
        assert!(x.mul(&y).contains(&Rational::from(&a * &b)));
        assert!(x.div(&y).unwrap().contains(&Rational::from(&a / &b)));
        assert!(x.neg().contains(&Rational::from(-&a)));
        assert!(
            x.mul_integer(&Integer::from(-5))
                .contains(&Rational::from(&a * -5))
        );
        assert!(x.width() > 0);
    }

    #[test]
    fn products_of_all_sign_patterns_hold_every_product() {
        let bounds = [(-5, -2), (-3, 0), (-2, 7), (0, 0), (0, 4), (1, 6)];
        let make = |(lo, hi): (i32, i32)| {
            Enclosure::between(Float::with_val(53, lo), Float::with_val(53, hi))
        };
        for x in bounds {
            for y in bounds {
                let product = make(x).mul(&make(y));
                let corners = [x.0 * y.0, x.0 * y.1, x.1 * y.0, x.1 * y.1];
                assert_eq!(*product.lo(), *corners.iter().min().unwrap());
                assert_eq!(*product.hi(), *corners.iter().max().unwrap());
            }
        }
    }

    #[test]
    fn square_root_of_two_to_fifty_places() {
        // 50 places of the square root of 2: OEIS A002193.
        let two = Enclosure::from_rational(&ratio(2, 1), 200);
        assert_eq!(
            two.sqrt().decimal(50).unwrap(),
            "1.41421356237309504880168872420969807856967187537695"
        );
    }

    #[test]
    fn decimals_of_small_negative_numbers_keep_their_zeros() {
        assert_eq!(
            Enclosure::from_rational(&ratio(-1, 1000), 80)
                .decimal(5)
                .unwrap(),
            "-0.00100"
        );
        assert_eq!(
            Enclosure::from_rational(&ratio(5, 1), 80)
                .decimal(0)
                .unwrap(),
            "5"
        );
    }

    #[test]
    fn natural_logarithm_of_two_to_fifty_places() {
        // 50 places of the natural logarithm of 2: OEIS A002162.
        let two = Enclosure::from_rational(&ratio(2, 1), 200);
        assert_eq!(
            two.ln().unwrap().decimal(50).unwrap(),
            "0.69314718055994530941723212145817656807550013436026"
        );
        assert!(Enclosure::zero(53).ln().is_none());
        // Of a point: still an interval, and the 50 places lie within it.
        let few_bits = Enclosure::from_rational(&ratio(2, 1), 60).ln().unwrap();
        let (lower, upper) = few_bits.decimal_bounds(50);
        let places = "0.69314718055994530941723212145817656807550013436026";
        assert!(*lower < *places && *upper > *places, "{lower} {upper}");
    }

    #[test]
    fn absolute_values_of_all_sign_patterns() {
        let make = |(lo, hi): (i32, i32)| {
            Enclosure::between(Float::with_val(53, lo), Float::with_val(53, hi))
        };
        for (given, expected) in [
            ((2, 3), (2, 3)),
            ((-3, -2), (2, 3)),
            ((-3, 2), (0, 3)),
            ((-2, 3), (0, 3)),
            ((-2, 0), (0, 2)),
        ] {
            let found = make(given).abs();
            assert_eq!(
                (found.lo(), found.hi()),
                (make(expected).lo(), make(expected).hi())
            );
        }
    }

    #[test]
    fn decimal_bounds_round_outwards() {
        let third = Enclosure::from_rational(&ratio(1, 3), 80);
        let negative = third.neg();
        let pair = |a: &str, b: &str| (a.to_string(), b.to_string());
        assert_eq!(third.decimal_bounds(4), pair("0.3333", "0.3334"));
        assert_eq!(negative.decimal_bounds(4), pair("-0.3334", "-0.3333"));
        let half = Enclosure::from_rational(&ratio(1, 2), 80);
        assert_eq!(half.decimal_bounds(3), pair("0.500", "0.500"));
    }

    #[test]
    fn a_wide_interval_gives_no_decimal() {
        let wide = Enclosure::between(Float::with_val(53, 1), Float::with_val(53, 2));
        assert_eq!(wide.decimal(3), None);
        assert!(wide.meets(&wide));
    }
}
