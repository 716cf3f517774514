//! The verdict on a claim: every n of its range that the counts reach, in rational arithmetic.

use super::{Claim, Expression, Sequence};
use rug::ops::Pow;
use rug::{Integer, Rational};

/// What a claim may speak of. Entry n is the value at n; what is missing was not computed.
#[derive(Clone, Copy, Debug)]
pub struct Sequences<'a> {
    /// p.
    pub words: &'a [u64],
    /// s.
    pub first: &'a [i64],
    /// b.
    pub second: &'a [i64],
    /// N, if it was counted.
    pub diagonals: Option<&'a [u64]>,
}

/// Where a claim fails first.
#[derive(Clone, Debug, PartialEq)]
pub struct Violation {
    /// The n.
    pub n: u64,
    /// Index of the comparison that fails.
    pub comparison: usize,
    /// Its left side, exact.
    pub left: Rational,
    /// Its right side, exact.
    pub right: Rational,
}

/// What the counts say about a claim.
#[derive(Clone, Debug, PartialEq)]
pub enum Checked {
    /// True for every n from the first of the range to this one.
    HoldsTo {
        /// The last n checked.
        last: u64,
        /// True when that is the whole range.
        whole: bool,
    },
    /// False at some n.
    Fails(Violation),
    /// The counts do not reach the range, or the claim is not defined on it.
    Undecided(String),
}

/// Why an expression has no value at some n.
enum Gap {
    /// The counts end before.
    Beyond,
    /// It is not defined there.
    Undefined(String),
}

/// Values and powers are refused above this many bits, so that a claim cannot fill the memory.
const MOST_BITS: u64 = 1 << 22;

/// Checks a claim at each n of its range, up to where the counts end. Exact: no rounding anywhere.
///
/// A range without end is checked to `last` at most (the longest words that were counted), so that claims about
/// n alone come to an end too. Time: one evaluation for each n.
pub fn check(claim: &Claim, sequences: &Sequences<'_>) -> Checked {
    let longest = sequences.words.len() as u64 - 1;
    let end = claim.to.unwrap_or(longest).min(longest);
    let mut last = None;
    for n in claim.from..=end {
        match at(claim, sequences, n) {
            Ok(None) => last = Some(n),
            Ok(Some(violation)) => return Checked::Fails(violation),
            Err(Gap::Beyond) => break,
            Err(Gap::Undefined(why)) => {
                return Checked::Undecided(format!(
                    "it is not defined at n = {n}: {why}; {}",
                    "choose a range without this n"
                ));
            }
        }
    }
    match last {
        Some(last) => Checked::HoldsTo {
            last,
            whole: claim.to == Some(last),
        },
        None if claim.mentions(Sequence::Diagonals) && sequences.diagonals.is_none() => {
            Checked::Undecided("generalized diagonals were not counted".into())
        }
        None => Checked::Undecided(format!(
            "the counts end at n = {longest} and do not reach n = {}",
            claim.from
        )),
    }
}

/// The violation at n, if there is one.
fn at(claim: &Claim, sequences: &Sequences<'_>, n: u64) -> Result<Option<Violation>, Gap> {
    let values: Vec<Rational> = claim
        .sides
        .iter()
        .map(|side| value(side, sequences, n))
        .collect::<Result<_, _>>()?;
    let pairs = values.windows(2).zip(&claim.comparisons).enumerate();
    for (comparison, (pair, how)) in pairs {
        if !how.holds(&pair[0], &pair[1]) {
            let (left, right) = (pair[0].clone(), pair[1].clone());
            return Ok(Some(Violation {
                n,
                comparison,
                left,
                right,
            }));
        }
    }
    Ok(None)
}

fn value(expression: &Expression, sequences: &Sequences<'_>, n: u64) -> Result<Rational, Gap> {
    Ok(match expression {
        Expression::Number(q) => q.clone(),
        Expression::Variable => Rational::from(n),
        Expression::Negative(inner) => -value(inner, sequences, n)?,
        Expression::Value(sequence, place) => {
            let place = value(place, sequences, n)?;
            look_up(*sequence, &place, sequences)?
        }
        Expression::Joined('^', base, exponent) => {
            let base = value(base, sequences, n)?;
            power(base, &value(exponent, sequences, n)?)?
        }
        Expression::Joined(sign, a, b) => {
            let (a, b) = (value(a, sequences, n)?, value(b, sequences, n)?);
            match sign {
                '+' => a + b,
                '-' => a - b,
                '*' => a * b,
                '/' if b == 0 => return Err(Gap::Undefined("division by zero".into())),
                '/' => a / b,
                _ => unreachable!("the parser joins by + - * / ^ alone"),
            }
        }
    })
}

fn look_up(
    sequence: Sequence,
    place: &Rational,
    sequences: &Sequences<'_>,
) -> Result<Rational, Gap> {
    if *place < 0 {
        let letter = sequence.letter();
        return Err(Gap::Undefined(format!("{letter}({place}) does not exist")));
    }
    let place = place.numer().to_usize().ok_or(Gap::Beyond)?;
    let found = match sequence {
        Sequence::Words => sequences.words.get(place).map(|v| Integer::from(*v)),
        Sequence::First => sequences.first.get(place).map(|v| Integer::from(*v)),
        Sequence::Second => sequences.second.get(place).map(|v| Integer::from(*v)),
        Sequence::Diagonals => {
            let counts = sequences.diagonals.unwrap_or_default();
            counts.get(place).map(|v| Integer::from(*v))
        }
    };
    found.map(Rational::from).ok_or(Gap::Beyond)
}

fn power(base: Rational, exponent: &Rational) -> Result<Rational, Gap> {
    let large = || Gap::Undefined("a power is too large to be compared".into());
    let bits = u64::from(
        base.numer()
            .significant_bits()
            .max(base.denom().significant_bits()),
    );
    let exponent = exponent.numer().to_i32().ok_or_else(large)?;
    if base == 0 && exponent < 0 {
        return Err(Gap::Undefined("division by zero".into()));
    }
    // 0 and ±1 stay small, but their powers are refused alike: 2^32 steps of nothing help nobody.
    if bits * u64::from(exponent.unsigned_abs()) > MOST_BITS {
        return Err(large());
    }
    Ok(base.pow(exponent))
}
