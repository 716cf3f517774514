//! Exact real numbers.
//!
//! Everything that the program decides, it decides about elements of one real number field
//! K = ℚ(θ), where θ is a real algebraic integer given by its minimal polynomial and an interval
//! that isolates it. The rationals are the case of degree 1.
//!
//! - [`poly`]: integer polynomials, Sturm sequences, isolation of real roots.
//! - [`factor`]: factoring over the rationals, which is what makes a minimal polynomial *proved*.
//! - [`field`]: the field and its enclosures of θ to any precision.
//! - [`real`]: elements of the field, with total comparison and a proved zero test.
//! - [`adjoin`]: growing the field by a root of a polynomial with coefficients in it.
//! - [`subfield`]: the field that some elements generate.
//! - [`discriminant`]: of the polynomial that defines a field.
//! - [`cosine`]: the fields of cosines of rational multiples of π.
//! - [`enclosure`]: intervals with outward rounding, certified decimals.
//! - [`effort`]: a bound on work that is the same on every machine.
//! - [`tiers`]: counts of how often each level of arithmetic decided a sign.

pub mod adjoin;
mod algebra;
mod characteristic;
pub mod cosine;
pub mod discriminant;
pub mod effort;
pub mod enclosure;
pub mod factor;
pub mod field;
mod hensel;
mod modular;
mod operators;
mod over_field;
pub mod poly;
pub mod real;
pub mod subfield;
pub mod tiers;

pub use enclosure::Enclosure;
pub use field::Field;
pub use real::Real;
pub use tiers::{Sign, Tiers};
