//! The arithmetic operators of [`Real`], and the traits that make it a scalar for exact matrices.

use super::real::Real;
use std::ops::{Add, AddAssign, Div, Mul, MulAssign, Neg, Sub, SubAssign};

macro_rules! operators {
    ($trait:ident, $method:ident, |$a:ident, $b:ident| $body:expr) => {
        impl $trait<&Real> for &Real {
            type Output = Real;
            fn $method(self, other: &Real) -> Real {
                let ($a, $b) = (self, other);
                $body
            }
        }
        impl $trait<Real> for Real {
            type Output = Real;
            fn $method(self, other: Real) -> Real {
                (&self).$method(&other)
            }
        }
        impl $trait<&Real> for Real {
            type Output = Real;
            fn $method(self, other: &Real) -> Real {
                (&self).$method(other)
            }
        }
        impl $trait<Real> for &Real {
            type Output = Real;
            fn $method(self, other: Real) -> Real {
                self.$method(&other)
            }
        }
    };
}

operators!(Add, add, |a, b| a.combine(b, false));
operators!(Sub, sub, |a, b| a.combine(b, true));
operators!(Mul, mul, |a, b| a.product(b));
// Division by zero is a mistake of the caller, as for the machine's own integers.
operators!(Div, div, |a, b| a.checked_div(b).expect("division by zero"));

impl Neg for &Real {
    type Output = Real;
    fn neg(self) -> Real {
        self.negated()
    }
}

impl Neg for Real {
    type Output = Real;
    fn neg(self) -> Real {
        -&self
    }
}

impl AddAssign for Real {
    fn add_assign(&mut self, other: Real) {
        *self = &*self + &other;
    }
}

impl SubAssign for Real {
    fn sub_assign(&mut self, other: Real) {
        *self = &*self - &other;
    }
}

impl MulAssign for Real {
    fn mul_assign(&mut self, other: Real) {
        *self = &*self * &other;
    }
}

impl num_traits::Zero for Real {
    fn zero() -> Real {
        Real::from(0)
    }
    fn is_zero(&self) -> bool {
        Real::is_zero(self)
    }
}

impl num_traits::One for Real {
    fn one() -> Real {
        Real::from(1)
    }
}
