//! Exact expressions: the numbers of a table file and of the command line.
//!
//! ```text
//! sum      = product (("+" | "-") product)*
//! product  = signed (("*" | "/") signed)*
//! signed   = ("+" | "-") signed | power
//! power    = atom ("^" signed)?            an integer exponent, possibly negative; right to left
//! atom     = number | "pi" | name | "(" sum ")" | function "(" sum ("," sum)* ")"
//! number   = 12 | 0.125 | .5 | 1e-3        all exact
//! function = sqrt | cos | sin | tan | root
//! ```
//!
//! `cos`, `sin` and `tan` take rational multiples of `pi`; `root(polynomial in x, value)` is the real root
//! nearest to a rational value. A name stands for a value that was [defined](Evaluator::define) before: a number
//! or a rational multiple of `pi`. The result is an exact element of a real number field, which an
//! [`Evaluator`] grows as roots come up, so that all numbers of one file end in one field.
//!
//! Nothing here can run away: bounds on the length of the text, on nesting, on digits, on exponents, on the
//! size of intermediate numbers and on the field's degree are checked before the work they bound, and what they
//! leave open ends with a budget of [`MOST_WORK`] (see [`effort`]).

mod evaluate;
mod lexer;
mod parser;
mod root;

use evaluate::{FUNCTIONS, Value};
use lexer::Token;

use crate::number::adjoin::{Adjoined, embed};
use crate::number::effort::{self, Exhausted};
use crate::number::{Field, Real};
use rug::{Integer, Rational};
use std::collections::BTreeMap;
use std::ops::Range;
use thiserror::Error;

/// The most bytes of one expression.
pub const LONGEST_EXPRESSION: usize = 4096;
/// The most digits of one number.
pub const MOST_DIGITS: usize = 1000;
/// The deepest nesting of parentheses, signs and exponents: it bounds the recursion.
pub const DEEPEST_NESTING: usize = 64;
/// The largest absolute value of an exponent.
pub const LARGEST_EXPONENT: u32 = 1000;
/// The most bits of a number on the way: of a rational, or of all coordinates of a field element together.
pub const MOST_BITS: usize = 65_536;

/// The most work of one expression, or of one table file and the files that it stands on together, in units of
/// [`effort`]: about half a minute on an ordinary machine. The documents promise a minute.
pub const MOST_WORK: u64 = 26_000_000_000;

/// What is wrong with an expression.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
#[error("{message}")]
pub struct ExpressionFault {
    /// The bytes of the expression at fault.
    pub span: Range<usize>,
    /// One lower-case sentence.
    pub message: String,
    /// What to write instead.
    pub help: String,
}

impl ExpressionFault {
    /// What the user reads when the budget of work ends at this place.
    pub(super) fn too_much_work(span: &Range<usize>) -> ExpressionFault {
        let help = "use fewer roots, roots of lower degree, or shorter numbers; or a plane form (`form = ...`) \
                    that takes a root out of the coordinates";
        let message = "working this out exactly takes more work than one table file may cause";
        ExpressionFault::new(span, message, help)
    }

    fn new(span: &Range<usize>, message: impl Into<String>, help: impl Into<String>) -> Self {
        ExpressionFault {
            span: span.clone(),
            message: message.into(),
            help: help.into(),
        }
    }
}

/// Evaluates expressions in a field that grows.
///
/// Numbers that were returned before the field grew stay valid; [`Evaluator::lift`] brings them into the
/// current field.
#[derive(Clone, Debug)]
pub struct Evaluator {
    field: Field,
    /// Fields that were left behind, each with the image of its generator in the current one.
    earlier: Vec<(Field, Real)>,
    /// 2cos(2π/q) for the q met so far, in the current field.
    cosines: BTreeMap<u32, Real>,
    /// q, when the current field is ℚ(cos(2π/q)) by construction.
    pure_cosine: Option<u32>,
    /// Square roots taken so far: (argument, root), in the current field.
    square_roots: Vec<(Real, Real)>,
    /// Roots of polynomials chosen so far: (squarefree polynomial, value nearby, root in the current
    /// field).
    chosen_roots: Vec<(Vec<Integer>, Rational, Real)>,
    /// Values by name, in the fields that were current when they were defined.
    names: BTreeMap<String, Value>,
}

/// The names that an expression uses, with their places: neither functions nor `pi` nor `x`.
///
/// # Errors
/// When the text is no expression.
pub fn names_in(text: &str) -> Result<Vec<(String, Range<usize>)>, ExpressionFault> {
    parser::parse(text)?;
    let tokens = lexer::tokens(text)?;
    let names = tokens.into_iter().filter_map(|(token, span)| match token {
        Token::Name(name) => Some((name, span)),
        _ => None,
    });
    Ok(names
        .filter(|(name, _)| name_fault(name).is_none())
        .collect())
}

/// Why a word cannot be the name of a value: what is wrong, and what to write instead.
pub fn name_fault(name: &str) -> Option<(String, String)> {
    let taken = |what: &str| {
        let message = format!("`{name}` cannot be defined: it is {what}");
        Some((message, "choose another name".into()))
    };
    if FUNCTIONS.contains(&name) {
        return taken("a function");
    }
    match name {
        "pi" => return taken("a number that is known"),
        "x" => return taken("the variable of `root(polynomial, value)`"),
        _ => {}
    }
    let starts = name.starts_with(|c: char| c.is_ascii_alphabetic() || c == '_');
    if starts && name.chars().all(|c| c.is_ascii_alphanumeric() || c == '_') {
        return None;
    }
    Some((
        format!("`{}` cannot be a name", name.escape_debug()),
        "a name is made of the letters a to z and A to Z, digits and `_`, and does not begin with a digit"
            .into(),
    ))
}

impl Default for Evaluator {
    fn default() -> Self {
        Evaluator::new(Field::rationals())
    }
}

impl Evaluator {
    /// An evaluator that starts in a given field.
    pub fn new(field: Field) -> Evaluator {
        Evaluator {
            field,
            earlier: Vec::new(),
            cosines: BTreeMap::new(),
            pure_cosine: None,
            square_roots: Vec::new(),
            chosen_roots: Vec::new(),
            names: BTreeMap::new(),
        }
    }

    /// The field as grown so far.
    pub fn field(&self) -> &Field {
        &self.field
    }

    /// The exact value of an expression. Rational values come as elements of ℚ, others as elements of the
    /// current field.
    ///
    /// # Errors
    /// The first fault, with its place in the text and what to write instead. The evaluator stays usable.
    pub fn evaluate(&mut self, text: &str) -> Result<Real, ExpressionFault> {
        self.bounded(0..text.len(), |evaluator| {
            let tree = parser::parse(text)?;
            evaluate::number(evaluator, &tree)
        })
    }

    /// Does some work within the budget that runs, or within [`MOST_WORK`] when none does.
    fn bounded<T>(
        &mut self,
        span: Range<usize>,
        work: impl FnOnce(&mut Evaluator) -> Result<T, ExpressionFault>,
    ) -> Result<T, ExpressionFault> {
        // Growing moves what is known to the new field: a copy is kept, so that the evaluator stays usable.
        let before = self.clone();
        effort::within(MOST_WORK, || work(self)).unwrap_or_else(|Exhausted| {
            *self = before;
            Err(ExpressionFault::too_much_work(&span))
        })
    }

    /// Gives a name to the value of an expression: a number, or a rational multiple of `pi`. An older value
    /// of the name is forgotten.
    ///
    /// # Errors
    /// Those of [`Evaluator::evaluate`].
    ///
    /// # Panics
    /// If it cannot be a name: see [`name_fault`].
    pub fn define(&mut self, name: &str, text: &str) -> Result<(), ExpressionFault> {
        assert_eq!(name_fault(name), None);
        self.bounded(0..text.len(), |evaluator| {
            let tree = parser::parse(text)?;
            let value = evaluate::value(evaluator, &tree)?;
            evaluator.names.insert(name.to_string(), value);
            Ok(())
        })
    }

    /// The cosine of `turns` full turns, growing the field if need be.
    ///
    /// # Errors
    /// When the field would become too large.
    pub fn cosine(&mut self, turns: &Rational) -> Result<Real, ExpressionFault> {
        self.bounded(0..0, |evaluator| {
            let value = evaluate::cosine(evaluator, turns, &(0..0))?;
            Ok(evaluator.lift(&value))
        })
    }

    /// The square root of a number, growing the field if need be.
    ///
    /// # Errors
    /// When the number is negative, or the field would become too large.
    pub fn square_root(&mut self, number: &Real) -> Result<Real, ExpressionFault> {
        self.bounded(0..0, |evaluator| {
            let number = evaluator.lift(number);
            let value = evaluate::square_root(evaluator, &number, &(0..0))?;
            Ok(evaluator.lift(&value))
        })
    }

    /// A number that this evaluator returned earlier, in the current field. Rationals stay rationals.
    ///
    /// # Panics
    /// If the number is from none of this evaluator's fields.
    pub fn lift(&self, number: &Real) -> Real {
        if let Some(value) = number.to_rational() {
            return Real::from(value);
        }
        if number.field().same(&self.field) {
            return number.clone();
        }
        let (_, image) = self
            .earlier
            .iter()
            .find(|(field, _)| field.same(number.field()))
            .expect("a number of this evaluator");
        embed(number, image)
    }

    /// Brings all the numbers into one field and returns it: the current one, or ℚ when they are all
    /// rational.
    ///
    /// # Panics
    /// As [`Evaluator::lift`].
    pub fn finish(self, numbers: &mut [Real]) -> Field {
        for number in numbers.iter_mut() {
            *number = self.lift(number);
        }
        if numbers.iter().all(|n| n.field().is_rational()) {
            Field::rationals()
        } else {
            self.field
        }
    }

    /// Takes over a grown field and returns the root that was adjoined.
    fn grow(&mut self, adjoined: Adjoined) -> Real {
        let root = match adjoined.root.to_rational() {
            Some(value) => Real::from(value),
            None => adjoined.root,
        };
        if adjoined.field.same(&self.field) {
            return root;
        }
        let image = adjoined.old_generator;
        let moved = |number: &Real| embed(number, &image);
        for (_, known) in &mut self.earlier {
            *known = moved(known);
        }
        self.cosines.values_mut().for_each(|c| *c = moved(c));
        for (argument, root) in &mut self.square_roots {
            (*argument, *root) = (moved(argument), moved(root));
        }
        self.chosen_roots
            .iter_mut()
            .for_each(|(_, _, root)| *root = moved(root));
        if !self.field.is_rational() {
            self.earlier.push((self.field.clone(), image));
        }
        self.field = adjoined.field;
        self.pure_cosine = None;
        root
    }
}
