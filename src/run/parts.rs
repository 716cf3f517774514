//! Results of parts as lists of numbers, for a ledger.
//!
//! A list holds the tiers first, then what the part found. A list that does not read back is as good as none: its part
//! is computed again.

use super::checkpoint::Ledger;
use crate::number::{Enclosure, Tiers};
use rug::{Float, Integer};

/// What a part of a walk found, as a ledger keeps it.
pub trait Kept: Sized {
    /// Appends the numbers; false when they cannot hold it, and then nothing is kept.
    fn write(&self, out: &mut Vec<u64>) -> bool;
    /// Reads what was written.
    fn read(numbers: &mut &[u64]) -> Option<Self>;
}

/// What the ledger knows of a part.
pub fn recall<K: Kept>(ledger: &dyn Ledger, part: usize) -> Option<(K, Tiers)> {
    let numbers = ledger.recall(part)?;
    let (tiers, mut rest) = numbers.split_first_chunk()?;
    let found = K::read(&mut rest)?;
    rest.is_empty().then(|| (found, Tiers::from_counts(*tiers)))
}

/// Lets the ledger keep a part.
pub fn keep<K: Kept>(ledger: &dyn Ledger, part: usize, found: &K, tiers: Tiers) {
    if !ledger.keeps() {
        return;
    }
    let mut numbers = tiers.to_counts().to_vec();
    if found.write(&mut numbers) {
        ledger.keep(part, &numbers);
    }
}

/// The next number.
pub fn take(numbers: &mut &[u64]) -> Option<u64> {
    let (first, rest) = numbers.split_first()?;
    *numbers = rest;
    Some(*first)
}

/// Appends the bounds of an enclosure, bit for bit: for each its sign, exponent and mantissa.
pub fn write_enclosure(enclosure: &Enclosure, out: &mut Vec<u64>) -> bool {
    out.push(enclosure.precision().into());
    for bound in [enclosure.lo(), enclosure.hi()] {
        let Some((mantissa, exponent)) = bound.to_integer_exp() else {
            return false;
        };
        let digits = mantissa.to_digits::<u64>(rug::integer::Order::Lsf);
        out.push(u64::from(mantissa < 0));
        out.push(i64::from(exponent) as u64);
        out.push(digits.len() as u64);
        out.extend(digits);
    }
    true
}

/// Reads an enclosure.
pub fn read_enclosure(numbers: &mut &[u64]) -> Option<Enclosure> {
    let precision = u32::try_from(take(numbers)?).ok()?;
    if !(rug::float::prec_min()..=1 << 20).contains(&precision) {
        return None;
    }
    let mut bound = || {
        let negative = take(numbers)? == 1;
        let exponent = i32::try_from(take(numbers)? as i64).ok()?;
        let length = usize::try_from(take(numbers)?).ok()?;
        let (digits, rest) = numbers.split_at_checked(length)?;
        *numbers = rest;
        let mut mantissa = Integer::from_digits(digits, rug::integer::Order::Lsf);
        if negative {
            mantissa = -mantissa;
        }
        // The mantissa came from so many bits, so nothing is rounded.
        Some(Float::with_val(precision, mantissa) << exponent)
    };
    let (lo, hi) = (bound()?, bound()?);
    (lo <= hi).then(|| Enclosure::between(lo, hi))
}

#[cfg(test)]
mod tests {
    use super::*;
    use rug::Rational;

    #[test]
    fn enclosures_come_back_bit_for_bit() {
        for value in [(0, 1), (1, 3), (-22, 7), (1 << 20, 1), (1, 1 << 20)] {
            let exact = Rational::from(value);
            let enclosure = Enclosure::from_rational(&exact, 192);
            let mut numbers = Vec::new();
            assert!(write_enclosure(&enclosure, &mut numbers));
            let mut rest = &numbers[..];
            let back = read_enclosure(&mut rest).expect("it reads back");
            assert!(rest.is_empty());
            assert_eq!((back.lo(), back.hi()), (enclosure.lo(), enclosure.hi()));
            assert_eq!(back.precision(), 192);
            for length in 0..numbers.len() {
                assert!(read_enclosure(&mut &numbers[..length]).is_none());
            }
        }
    }
}
