//! `root(polynomial, value)`: the real root of a rational polynomial nearest to a rational value.
//!
//! The two roots next to the value come from Sturm counts. Whether they are equally far is decided
//! exactly: λ < v < μ with v − λ = μ − v means that λ and μ are roots of both p(x) and p(2v − x); and when
//! they both are, no root lies between, so the distances are equal. Otherwise narrowing both intervals
//! settles which is nearer.

use super::evaluate::{adjoin_fault, integer_exponent, number};
use super::parser::{Kind, Node};
use super::{Evaluator, ExpressionFault, MOST_BITS};
use crate::number::adjoin::{AdjoinFault, adjoin_root};
use crate::number::effort::{charge_with, gcd_cost, weight};
use crate::number::factor::{factor, squarefree_part};
use crate::number::field::LARGEST_DEGREE;
use crate::number::{Enclosure, Real, poly};
use rug::float::Round;
use rug::{Float, Integer, Rational};
use std::ops::Range;

type Interval = (Rational, Rational);

/// The value of `root(polynomial, near)`.
pub(super) fn nearest(
    evaluator: &mut Evaluator,
    polynomial: &Node,
    near: &Node,
    span: &Range<usize>,
) -> Result<Real, ExpressionFault> {
    let coefficients = rational_polynomial(evaluator, polynomial)?;
    let value = number(evaluator, near)?.to_rational().ok_or_else(|| {
        ExpressionFault::new(
            &near.span,
            "the value near a root must be rational",
            "write an exact decimal, such as `1.26`",
        )
    })?;
    if coefficients.len() <= 1 {
        return Err(ExpressionFault::new(
            &polynomial.span,
            "a constant polynomial has no root to choose",
            "write a polynomial in x, such as `x^3 - 2`",
        ));
    }
    let p = squarefree_part(&cleared(&coefficients));
    let size: usize = p.iter().map(|c| c.significant_bits() as usize).sum();
    if size > MOST_BITS
        || value.numer().significant_bits() + value.denom().significant_bits() > 8192
    {
        return Err(ExpressionFault::new(
            &polynomial.span,
            "the numbers in this root are too long",
            "use shorter coefficients and a shorter value",
        ));
    }
    let known = evaluator
        .chosen_roots
        .iter()
        .find(|(q, near, _)| *q == p && *near == value);
    if let Some((_, _, root)) = known {
        return Ok(root.clone());
    }
    let interval = nearest_root(&p, &value).map_err(|fault| match fault {
        Choice::NoRoot => ExpressionFault::new(
            &polynomial.span,
            format!("the polynomial {} has no real root", poly::display(&p, "x")),
            "write a polynomial that has one",
        ),
        Choice::Tie => ExpressionFault::new(
            &near.span,
            "two roots are equally near to this value",
            "write a value that is nearer to one of them",
        ),
    })?;
    let fault = |fault: AdjoinFault| adjoin_fault(&fault, span);
    let factors = factor(&p).map_err(|e| fault(e.into()))?.factors;
    let (minimal, _) = factors
        .into_iter()
        .find(|(f, _)| poly::roots_between(&poly::sturm_sequence(f), &interval.0, &interval.1) == 1)
        .expect("the root belongs to one factor");
    if let [constant, slope] = &minimal[..] {
        return Ok(Real::from(-Rational::from((constant, slope))));
    }
    let approximate = |bits: u32| {
        let mut narrow = interval.clone();
        poly::narrow_root(&minimal, &mut narrow, bits + 4);
        let precision = bits + 64 + poly::root_bound(&minimal).numer().significant_bits();
        Enclosure::between(
            Float::with_val_round(precision, &narrow.0, Round::Down).0,
            Float::with_val_round(precision, &narrow.1, Round::Up).0,
        )
    };
    let lifted: Vec<Real> = minimal.iter().cloned().map(Real::from).collect();
    let grown = adjoin_root(&evaluator.field, &lifted, &approximate).map_err(fault)?;
    let root = evaluator.grow(grown);
    evaluator.chosen_roots.push((p, value, root.clone()));
    Ok(root)
}

enum Choice {
    NoRoot,
    Tie,
}

/// The isolating interval of the root of a squarefree polynomial nearest to a value.
fn nearest_root(p: &[Integer], value: &Rational) -> Result<Interval, Choice> {
    let roots = poly::isolate_roots(p);
    if roots.is_empty() {
        return Err(Choice::NoRoot);
    }
    let chain = poly::sturm_sequence(p);
    let bound = poly::root_bound(p);
    let lowest = Rational::from(-&bound).min(value.clone()) - 1u32;
    let below = poly::roots_between(&chain, &lowest, value);
    let mut left = below.checked_sub(1).map(|i| roots[i].clone());
    let mut right = roots.get(below).cloned();
    // The value may lie inside an isolating interval: cut it there.
    if let Some(left) = &mut left {
        left.1 = left.1.clone().min(value.clone());
    }
    if let Some(right) = &mut right {
        right.0 = right.0.clone().max(value.clone());
    }
    let (mut left, mut right) = match (left, right) {
        (Some(left), Some(right)) => (left, right),
        (Some(one), None) | (None, Some(one)) => return Ok(one),
        (None, None) => unreachable!("there is a root on one of the sides"),
    };
    if poly::value_at(p, value) == 0 {
        return Ok(left);
    }
    let common = poly::gcd(p, &reflected(p, value));
    if common.len() > 1 {
        let chain = poly::sturm_sequence(&common);
        let has = |i: &Interval| poly::roots_between(&chain, &i.0, &i.1) > 0;
        if has(&left) && has(&right) {
            return Err(Choice::Tie);
        }
    }
    let mut bits = 16;
    // The distances differ, so narrow enough intervals tell them apart.
    loop {
        poly::narrow_root(p, &mut left, bits);
        poly::narrow_root(p, &mut right, bits);
        let twice = Rational::from(value * 2u32);
        if Rational::from(&left.0 + &right.0) >= twice {
            return Ok(left);
        }
        if Rational::from(&left.1 + &right.1) < twice {
            return Ok(right);
        }
        bits *= 2;
    }
}

/// p(2v − x), cleared of denominators.
fn reflected(p: &[Integer], v: &Rational) -> Vec<Integer> {
    let argument = [Rational::from(v * 2u32), Rational::from(-1)];
    let mut result: Vec<Rational> = Vec::new();
    for c in p.iter().rev() {
        result = product(&result, &argument);
        if result.is_empty() {
            result.push(Rational::new());
        }
        result[0] += c;
    }
    cleared(&result)
}

fn cleared(p: &[Rational]) -> Vec<Integer> {
    let mut den = Integer::from(1);
    p.iter().for_each(|c| den.lcm_mut(c.denom()));
    p.iter()
        .map(|c| Rational::from(c * &den).into_numer_denom().0)
        .collect()
}

fn product(a: &[Rational], b: &[Rational]) -> Vec<Rational> {
    if a.is_empty() || b.is_empty() {
        return Vec::new();
    }
    charge_with(|| {
        let size = |c: &Rational| weight(c.numer()) + weight(c.denom());
        let longest = |p: &[Rational]| p.iter().map(size).max().unwrap_or(0);
        let terms = (a.len() * b.len()) as u64;
        // A product, and a sum with what is there.
        let once = gcd_cost(longest(a), longest(b));
        terms.saturating_mul(once.saturating_mul(3))
    });
    let mut result = vec![Rational::new(); a.len() + b.len() - 1];
    for (i, x) in a.iter().enumerate() {
        for (j, y) in b.iter().enumerate() {
            result[i + j] += Rational::from(x * y);
        }
    }
    result
}

fn trimmed(mut p: Vec<Rational>) -> Vec<Rational> {
    while p.last().is_some_and(|c| *c == 0) {
        p.pop();
    }
    p
}

/// The coefficients of a tree as a polynomial in x, constant term first.
fn rational_polynomial(
    evaluator: &mut Evaluator,
    node: &Node,
) -> Result<Vec<Rational>, ExpressionFault> {
    let checked = |p: Vec<Rational>| {
        if p.len() > LARGEST_DEGREE + 1 {
            return Err(ExpressionFault::new(
                &node.span,
                format!("the polynomial has degree {}", p.len() - 1),
                format!("polynomials of degree at most {LARGEST_DEGREE} are supported"),
            ));
        }
        let bits =
            |c: &Rational| (c.numer().significant_bits() + c.denom().significant_bits()) as usize;
        if p.iter().map(bits).sum::<usize>() > MOST_BITS {
            let help = "use shorter numbers or smaller exponents";
            return Err(ExpressionFault::new(
                &node.span,
                "the coefficients are too long",
                help,
            ));
        }
        Ok(trimmed(p))
    };
    match &node.kind {
        Kind::Name(name) if name == "x" => Ok(vec![Rational::new(), Rational::from(1)]),
        Kind::Negated(inner) => Ok(rational_polynomial(evaluator, inner)?
            .into_iter()
            .map(|c| -c)
            .collect()),
        Kind::Sum(terms) => {
            let mut total: Vec<Rational> = Vec::new();
            for (subtract, term) in terms {
                let term = rational_polynomial(evaluator, term)?;
                total.resize(total.len().max(term.len()), Rational::new());
                for (t, c) in total.iter_mut().zip(term) {
                    if *subtract { *t -= c } else { *t += c }
                }
            }
            checked(total)
        }
        Kind::Product(factors) => {
            let mut total = vec![Rational::from(1)];
            for (divide, part) in factors {
                let factor = rational_polynomial(evaluator, part)?;
                total = match (divide, &factor[..]) {
                    (false, _) => checked(product(&total, &factor))?,
                    (true, [c]) => total.iter().map(|t| Rational::from(t / c)).collect(),
                    (true, []) => {
                        let help = "the divisor must not be zero";
                        return Err(ExpressionFault::new(
                            &part.span,
                            "division by exact zero",
                            help,
                        ));
                    }
                    (true, _) => {
                        let help = "divide by numbers only, or multiply out";
                        return Err(ExpressionFault::new(
                            &part.span,
                            "this is no polynomial",
                            help,
                        ));
                    }
                };
            }
            Ok(total)
        }
        Kind::Power(base, exponent) => {
            let base = rational_polynomial(evaluator, base)?;
            if base.len() > 1 {
                let exponent_value = integer_exponent(evaluator, exponent)?;
                if exponent_value < 0 {
                    let help = "use exponents from 0 up in the polynomial";
                    return Err(ExpressionFault::new(
                        &exponent.span,
                        "this is no polynomial",
                        help,
                    ));
                }
                let mut total = vec![Rational::from(1)];
                for _ in 0..exponent_value {
                    total = checked(product(&total, &base))?;
                }
                return Ok(total);
            }
            constant(evaluator, node)
        }
        _ => constant(evaluator, node),
    }
}

/// A part without x.
fn constant(evaluator: &mut Evaluator, node: &Node) -> Result<Vec<Rational>, ExpressionFault> {
    let value = number(evaluator, node)?.to_rational().ok_or_else(|| {
        ExpressionFault::new(
            &node.span,
            "the coefficients of the polynomial must be rational",
            "write a polynomial with rational coefficients that has the same root",
        )
    })?;
    Ok(trimmed(vec![value]))
}
