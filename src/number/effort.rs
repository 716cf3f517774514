//! A bound on work that is the same on every machine.
//!
//! Exact arithmetic has no natural end: a short text can ask for a field of degree 64, for numbers of a million bits,
//! or for the sign of a difference that only its ten thousandth digit shows. So the routines of this room *charge* what they
//! do, in units of about one product of two 64-bit words, and [`within`] ends the work that it is given when
//! more is charged than its budget. Charges depend on the sizes of the numbers alone: no clock is read, and the same
//! input is accepted or refused everywhere.
//!
//! *Invariant.* Every loop over integers of any size, over coefficients, primes or matrix entries in `number`, and
//! every loop of the expression parser, charges before or while it runs. A budget therefore bounds the time of
//! whatever is built from these routines, on any input; `benches/effort.rs` measures units against seconds.
//!
//! *How it ends.* Arithmetic stands in operators, which cannot return an error. A charge past the budget
//! unwinds to the [`within`] that gave it; nothing is printed (no panic hook runs) and nobody sees a panic. Work that is ended so
//! leaves no half-made value behind, because what it was making is dropped on the way; the caches of a
//! [`Field`](super::Field) are valid between any two charges.
//! Without a budget nothing is counted. Considered and rejected: a result from every sum and product, which would bury
//! the formulas, and a clock, which would make a slow machine refuse what a fast one reads.

use rug::Integer;
use std::cell::Cell;
use std::panic::{AssertUnwindSafe, catch_unwind, resume_unwind};
use thiserror::Error;

/// The work was ended: it would have cost more than its budget.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Error)]
#[error("this takes more work than is allowed")]
pub struct Exhausted;

thread_local! {
    /// Units left to the work that runs on this thread; `None` when nothing bounds it.
    static LEFT: Cell<Option<u64>> = const { Cell::new(None) };
}

/// Gives the thread back what bounded it before, also when the work panics.
struct Restore(Option<u64>);

impl Drop for Restore {
    fn drop(&mut self) {
        LEFT.set(self.0);
    }
}

/// Does work on this thread that charges at most `budget` units. Inside another `within` it is charged to that
/// one's budget and gets none of its own, so that a budget for a whole is shared by the parts, each of which can say what was
/// too much.
///
/// # Errors
/// [`Exhausted`] when the budget did not suffice. Whatever the work changed outside of itself is then in an
/// unfinished state, and should be dropped.
pub fn within<T>(budget: u64, work: impl FnOnce() -> T) -> Result<T, Exhausted> {
    let _restore = LEFT.get().is_none().then(|| {
        LEFT.set(Some(budget));
        Restore(None)
    });
    catch_unwind(AssertUnwindSafe(work)).map_err(|payload| {
        if payload.is::<Exhausted>() {
            Exhausted
        } else {
            // Somebody's mistake, not ours to hide.
            resume_unwind(payload)
        }
    })
}

/// Units charged by some work, with its result: for calibrating.
pub fn measured<T>(work: impl FnOnce() -> T) -> (T, u64) {
    let restore = Restore(LEFT.replace(Some(u64::MAX)));
    let result = work();
    let spent = u64::MAX - LEFT.get().unwrap_or(u64::MAX);
    drop(restore);
    (result, spent)
}

/// Counts some units of work.
#[inline]
pub(crate) fn charge(units: u64) {
    if let Some(left) = LEFT.get() {
        spend(left, units);
    }
}

/// Counts work whose amount takes time to find out.
#[inline]
pub(crate) fn charge_with(units: impl FnOnce() -> u64) {
    if let Some(left) = LEFT.get() {
        spend(left, units());
    }
}

fn spend(left: u64, units: u64) {
    match left.checked_sub(units) {
        Some(rest) => LEFT.set(Some(rest)),
        None => {
            LEFT.set(Some(0));
            resume_unwind(Box::new(Exhausted));
        }
    }
}

/// The size of an integer: its 64-bit words, and a few for calling and allocating.
pub(crate) fn weight(n: &Integer) -> u64 {
    weight_of_bits(n.significant_bits().into())
}

/// The weight of an integer with so many bits.
pub(crate) fn weight_of_bits(bits: u64) -> u64 {
    4 + bits / 64
}

/// The weights of several integers together.
pub(crate) fn weights(p: &[Integer]) -> u64 {
    p.iter().map(weight).sum()
}

/// The cost of the product of integers with these weights: the product of the weights when one of them is small, and
/// less than that for long integers, whose products take fewer steps than by hand.
pub(crate) fn product_cost(a: u64, b: u64) -> u64 {
    let (short, long) = (a.min(b), a.max(b));
    let rows = if short <= 64 {
        short
    } else {
        8 * short.isqrt()
    };
    long.saturating_mul(rows)
}

/// The cost of a quotient or a remainder of integers with these weights: some products.
pub(crate) fn division_cost(a: u64, b: u64) -> u64 {
    product_cost(a, b).saturating_mul(3)
}

/// The cost of a greatest common divisor of integers with these weights: for each word of the shorter one, Euclid's steps
/// on single words and a few passes over both.
pub(crate) fn gcd_cost(a: u64, b: u64) -> u64 {
    let words = a.min(b).saturating_sub(weight_of_bits(0));
    product_cost(a, b)
        .saturating_mul(4)
        .saturating_add(words.saturating_mul(1500))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn work_ends_with_its_budget() {
        assert_eq!(within(10, || charge(10)), Ok(()));
        assert_eq!(within(10, || (charge(6), charge(5))), Err(Exhausted));
        // Nothing bounds the work outside.
        charge(u64::MAX);
    }

    #[test]
    fn an_inner_budget_is_that_of_the_whole() {
        let outer = within(10, || {
            charge(5);
            let inner = within(100, || charge(6));
            (inner, within(100, || charge(1)))
        });
        assert_eq!(outer, Ok((Err(Exhausted), Err(Exhausted))));
    }

    #[test]
    fn other_panics_pass() {
        let seen = catch_unwind(|| within(10, || resume_unwind(Box::new("a mistake"))));
        assert!(seen.is_err());
        charge(u64::MAX);
    }

    #[test]
    fn measuring_counts() {
        assert_eq!(measured(|| charge(7)).1, 7);
        assert_eq!(within(3, || measured(|| charge(7)).1), Ok(7));
    }

    /// Long products cost less than by hand, and more than their length.
    #[test]
    fn costs_grow_with_both_sizes() {
        assert_eq!(product_cost(5, 7), 35);
        for (a, b) in [(64, 64), (100, 1000), (5000, 5000)] {
            assert!(product_cost(a, b) <= a * b && product_cost(a, b) >= a.max(b));
            assert_eq!(product_cost(a, b), product_cost(b, a));
        }
    }
}
