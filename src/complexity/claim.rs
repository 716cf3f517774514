//! A stated bound, such as `p(n) <= 0.07*n^3 for n >= 10`, checked in rational arithmetic.
//!
//! ```text
//! claim      = sum comparison sum { comparison sum } [ "for" range ]
//! range      = bound { bound-sign bound }        one of them n: n >= 10, 4 <= n <= 60, n = 12
//! sum        = product { ("+" | "-") product }
//! product    = factor { ("*" | "/") factor }
//! factor     = [ "-" ] power
//! power      = atom [ "^" factor ]
//! atom       = number | "n" | ("p" | "s" | "b" | "N") "(" sum ")" | "(" sum ")"
//! comparison = "<=" | "<" | ">=" | ">" | "=" | "!="      also ≤ ≥ ≠ and ==
//! ```
//!
//! Numbers are integers and exact decimals: 0.07 is 7/100. The argument of a sequence and an exponent are built of integers and n by
//! `+ - *` alone, so they are integers at every n; roots are written by raising both sides to a power. Without a range a claim is about n ≥ 1.
//! Comparisons may be chained: `0.06*n^3 <= p(n) <= 0.07*n^3`.
//!
//! - [`parse`](parse()): the text, with faults that point into it.
//! - [`check`]: the verdict on given counts.

mod check;
mod parse;

pub use check::{Checked, Sequences, Violation, check};
pub use parse::parse;

use rug::Rational;
use std::ops::Range;

/// One of the sequences that a claim may speak of.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Sequence {
    /// p(n), the number of words.
    Words,
    /// s(n) = p(n+1) − p(n).
    First,
    /// b(n) = s(n+1) − s(n).
    Second,
    /// N(n), the number of oriented generalized diagonals that cross n sides.
    Diagonals,
}

impl Sequence {
    /// Its letter in a claim.
    pub fn letter(self) -> char {
        match self {
            Sequence::Words => 'p',
            Sequence::First => 's',
            Sequence::Second => 'b',
            Sequence::Diagonals => 'N',
        }
    }
}

/// An expression in n.
#[derive(Clone, Debug, PartialEq)]
pub enum Expression {
    /// A number.
    Number(Rational),
    /// n.
    Variable,
    /// A value of a sequence.
    Value(Sequence, Box<Expression>),
    /// The negative.
    Negative(Box<Expression>),
    /// Two expressions joined by `+ - * / ^`.
    Joined(char, Box<Expression>, Box<Expression>),
}

/// How two sides compare.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Comparison {
    /// ≤
    AtMost,
    /// <
    Below,
    /// ≥
    AtLeast,
    /// >
    Above,
    /// =
    Equal,
    /// ≠
    Different,
}

impl Comparison {
    /// True when the left side compares so with the right.
    pub fn holds(self, left: &Rational, right: &Rational) -> bool {
        match self {
            Comparison::AtMost => left <= right,
            Comparison::Below => left < right,
            Comparison::AtLeast => left >= right,
            Comparison::Above => left > right,
            Comparison::Equal => left == right,
            Comparison::Different => left != right,
        }
    }
}

/// A claim as it was understood.
#[derive(Clone, Debug, PartialEq)]
pub struct Claim {
    /// The text.
    pub text: String,
    /// The sides, from left to right: one more than comparisons.
    pub sides: Vec<Expression>,
    /// Their places in the text.
    pub places: Vec<Range<usize>>,
    /// The comparisons between neighbours.
    pub comparisons: Vec<Comparison>,
    /// The first n.
    pub from: u64,
    /// The last n; `None` for all from the first on.
    pub to: Option<u64>,
}

impl Claim {
    /// True when the claim speaks of a sequence.
    pub fn mentions(&self, sequence: Sequence) -> bool {
        self.sides.iter().any(|side| side.mentions(sequence))
    }
}

impl Expression {
    fn mentions(&self, sequence: Sequence) -> bool {
        match self {
            Expression::Number(_) | Expression::Variable => false,
            Expression::Value(s, at) => *s == sequence || at.mentions(sequence),
            Expression::Negative(inner) => inner.mentions(sequence),
            Expression::Joined(_, a, b) => a.mentions(sequence) || b.mentions(sequence),
        }
    }

    /// True when it is built of integers and n by `+ - *` alone.
    fn is_whole(&self) -> bool {
        match self {
            Expression::Number(q) => q.is_integer(),
            Expression::Variable => true,
            Expression::Value(..) => false,
            Expression::Negative(inner) => inner.is_whole(),
            Expression::Joined(sign, a, b) => "+-*".contains(*sign) && a.is_whole() && b.is_whole(),
        }
    }
}
