//! The value of a tree.

use super::parser::{Kind, Node};
use super::{Evaluator, ExpressionFault, LARGEST_EXPONENT, MOST_BITS, root};
use crate::number::adjoin::{AdjoinFault, Adjoined, adjoin_root};
use crate::number::cosine;
use crate::number::effort::{charge_with, gcd_cost, weight};
use crate::number::{Field, Real, Sign};
use rug::{Integer, Rational};
use std::ops::Range;

/// The functions, for messages.
pub(super) const FUNCTIONS: [&str; 5] = ["sqrt", "cos", "sin", "tan", "root"];

/// A number, or a rational multiple of π, which is good for an angle only.
#[derive(Clone, Debug)]
pub(super) enum Value {
    Number(Real),
    Angle(Rational),
}

type Outcome<T> = Result<T, ExpressionFault>;

/// The value of a tree that must be a number.
pub(super) fn number(evaluator: &mut Evaluator, node: &Node) -> Outcome<Real> {
    match value(evaluator, node)? {
        Value::Number(number) => Ok(evaluator.lift(&number)),
        Value::Angle(_) => Err(ExpressionFault::new(
            &node.span,
            "`pi` is transcendental and lies in no number field",
            "use `pi` inside `cos`, `sin` or `tan` only, or write an exact approximation, such as `355/113`",
        )),
    }
}

/// The value of a tree, which may be an angle.
pub(super) fn value(evaluator: &mut Evaluator, node: &Node) -> Outcome<Value> {
    let span = &node.span;
    match &node.kind {
        Kind::Number(value) => Ok(Value::Number(Real::from(value.clone()))),
        Kind::Name(name) if name == "pi" => Ok(Value::Angle(Rational::from(1))),
        Kind::Name(name) => match evaluator.names.get(name) {
            Some(Value::Number(number)) => Ok(Value::Number(evaluator.lift(number))),
            Some(Value::Angle(part)) => Ok(Value::Angle(part.clone())),
            None => Err(unknown_name(evaluator, name, span)),
        },
        Kind::Negated(inner) => Ok(match value(evaluator, inner)? {
            Value::Number(number) => Value::Number(-number),
            Value::Angle(part) => Value::Angle(-part),
        }),
        Kind::Sum(terms) => sum(evaluator, terms),
        Kind::Product(factors) => product(evaluator, factors),
        Kind::Power(base, exponent) => {
            let exponent = integer_exponent(evaluator, exponent)?;
            let base_value = number(evaluator, base)?;
            power(&base_value, exponent, span, &base.span).map(Value::Number)
        }
        Kind::Call {
            name,
            name_span,
            arguments,
        } => call(evaluator, name, name_span, arguments, span).map(Value::Number),
    }
}

fn unknown_name(evaluator: &Evaluator, name: &str, span: &Range<usize>) -> ExpressionFault {
    let defined: Vec<String> = evaluator.names.keys().map(|n| format!("`{n}`")).collect();
    let help = match name {
        "x" => "`x` stands only in the polynomial of `root(polynomial, value)`".to_string(),
        _ if FUNCTIONS.contains(&name) => {
            format!("write its argument in parentheses: `{name}(...)`")
        }
        _ if name.eq_ignore_ascii_case("pi") => "write `pi`".to_string(),
        _ if !defined.is_empty() => format!(
            "known are {}, `pi` and the functions {}",
            defined.join(", "),
            FUNCTIONS.join(", ")
        ),
        _ => format!("known are `pi` and the functions {}", FUNCTIONS.join(", ")),
    };
    ExpressionFault::new(span, format!("unknown name `{name}`"), help)
}

fn sum(evaluator: &mut Evaluator, terms: &[(bool, Node)]) -> Outcome<Value> {
    let mut total: Option<Value> = None;
    for (subtract, node) in terms {
        let term = match (value(evaluator, node)?, subtract) {
            (Value::Number(x), true) => Value::Number(-x),
            (Value::Angle(x), true) => Value::Angle(-x),
            (term, false) => term,
        };
        total = Some(match (total, term) {
            (None, term) => term,
            (Some(Value::Number(a)), Value::Number(b)) => Value::Number(bounded(
                evaluator.lift(&a) + evaluator.lift(&b),
                &node.span,
            )?),
            (Some(Value::Angle(a)), Value::Angle(b)) => Value::Angle(a + b),
            // Zero is a multiple of π too.
            (Some(Value::Number(a)), Value::Angle(b)) if a.is_zero() => Value::Angle(b),
            (Some(Value::Angle(a)), Value::Number(b)) if b.is_zero() => Value::Angle(a),
            (Some(_), _) => {
                return Err(ExpressionFault::new(
                    &node.span,
                    "a multiple of `pi` and another number cannot be added exactly",
                    "write the angle as one rational multiple of `pi`, such as `(1/2 + 1/7)*pi`",
                ));
            }
        });
    }
    Ok(total.expect("a sum has terms"))
}

fn product(evaluator: &mut Evaluator, factors: &[(bool, Node)]) -> Outcome<Value> {
    let mut total: Option<Value> = None;
    for (divide, node) in factors {
        let factor = value(evaluator, node)?;
        let Some(before) = total.take() else {
            total = Some(factor);
            continue;
        };
        total = Some(match (before, factor, divide) {
            (Value::Number(a), Value::Number(b), false) => Value::Number(bounded(
                evaluator.lift(&a) * evaluator.lift(&b),
                &node.span,
            )?),
            (Value::Number(a), Value::Number(b), true) => {
                let (a, b) = (evaluator.lift(&a), evaluator.lift(&b));
                Value::Number(bounded(a * inverse(&b, &node.span)?, &node.span)?)
            }
            (Value::Angle(a), Value::Number(b), false)
            | (Value::Number(b), Value::Angle(a), false) => {
                Value::Angle(a * rational_part(&b, &node.span)?)
            }
            (Value::Angle(a), Value::Number(b), true) => {
                let b = inverse(&evaluator.lift(&b), &node.span)?;
                Value::Angle(a * rational_part(&b, &node.span)?)
            }
            (Value::Angle(a), Value::Angle(b), true) if b != 0 => Value::Number(Real::from(a / b)),
            (_, Value::Angle(_), _) => {
                return Err(ExpressionFault::new(
                    &node.span,
                    "only a rational multiple of `pi` is exact",
                    "use `pi` inside `cos`, `sin` or `tan` only, times a rational number",
                ));
            }
        });
    }
    Ok(total.expect("a product has factors"))
}

fn rational_part(number: &Real, span: &Range<usize>) -> Outcome<Rational> {
    number.to_rational().ok_or_else(|| {
        ExpressionFault::new(
            span,
            "an irrational multiple of `pi` has no algebraic cosine or sine",
            "multiply `pi` by a rational number, such as `2/7`",
        )
    })
}

fn inverse(number: &Real, span: &Range<usize>) -> Outcome<Real> {
    number.inverse().ok_or_else(|| {
        ExpressionFault::new(
            span,
            "division by exact zero",
            "the divisor must not be zero",
        )
    })
}

/// The longest coordinate or denominator, in bits.
fn bits(number: &Real) -> usize {
    let longest = number
        .coordinates()
        .iter()
        .map(Integer::significant_bits)
        .max();
    longest
        .unwrap_or(0)
        .max(number.denominator().significant_bits()) as usize
}

/// Refuses a number that would make later steps slow; brings a rational one back to ℚ.
fn bounded(number: Real, span: &Range<usize>) -> Outcome<Real> {
    if bits(&number) * number.coordinates().len() > MOST_BITS {
        return Err(too_long(span));
    }
    Ok(match number.to_rational() {
        Some(value) => Real::from(value),
        None => number,
    })
}

fn too_long(span: &Range<usize>) -> ExpressionFault {
    ExpressionFault::new(
        span,
        format!("the exact value of this is longer than {MOST_BITS} bits"),
        "use shorter numbers or smaller exponents",
    )
}

pub(super) fn integer_exponent(evaluator: &mut Evaluator, node: &Node) -> Outcome<i32> {
    let exponent = number(evaluator, node)?;
    let whole = exponent
        .to_rational()
        .filter(|e| e.is_integer())
        .ok_or_else(|| {
            ExpressionFault::new(
                &node.span,
                "an exponent must be an integer",
                "write `sqrt(a)` for `a^(1/2)`, and `root(x^3 - 2, 1.26)` for other roots",
            )
        })?;
    let limit = LARGEST_EXPONENT as i32;
    whole
        .numer()
        .to_i32()
        .filter(|e| (-limit..=limit).contains(e))
        .ok_or_else(|| {
            ExpressionFault::new(
                &node.span,
                "the exponent is too large",
                format!("write one from -{LARGEST_EXPONENT} to {LARGEST_EXPONENT}"),
            )
        })
}

fn power(
    base: &Real,
    exponent: i32,
    span: &Range<usize>,
    base_span: &Range<usize>,
) -> Outcome<Real> {
    let size = exponent.unsigned_abs();
    let trivial = bits(base) <= 1 && base.field().is_rational();
    if !trivial && bits(base) * base.coordinates().len() * size as usize > MOST_BITS {
        return Err(too_long(span));
    }
    let result = bounded(base.pow(size), span)?;
    if exponent < 0 {
        bounded(inverse(&result, base_span)?, span)
    } else {
        Ok(result)
    }
}

fn call(
    evaluator: &mut Evaluator,
    name: &str,
    name_span: &Range<usize>,
    arguments: &[Node],
    span: &Range<usize>,
) -> Outcome<Real> {
    if !FUNCTIONS.contains(&name) {
        let message = format!("unknown function `{name}`");
        let help = match name {
            _ if name == "pi" || evaluator.names.contains_key(name) => {
                format!("write `{name}*(...)` for a product")
            }
            "cbrt" => "write `root(x^3 - 2, 1.26)` for the cube root of 2".to_string(),
            _ => format!("known functions are {}", FUNCTIONS.join(", ")),
        };
        return Err(ExpressionFault::new(name_span, message, help));
    }
    let expected = if name == "root" { 2 } else { 1 };
    if arguments.len() != expected {
        let message = format!(
            "`{name}` takes {expected} argument{}, not {}",
            if expected == 1 { "" } else { "s" },
            arguments.len()
        );
        let help = match name {
            "root" => {
                "write `root(x^3 - 2, 1.26)`: a polynomial in x and a value near the root".into()
            }
            _ => format!("write `{name}(...)` with one expression inside"),
        };
        return Err(ExpressionFault::new(span, message, help));
    }
    match name {
        "sqrt" => {
            let argument = number(evaluator, &arguments[0])?;
            square_root(evaluator, &argument, &arguments[0].span)
        }
        "root" => root::nearest(evaluator, &arguments[0], &arguments[1], span),
        _ => {
            let turns = angle(evaluator, name, &arguments[0])? / 2u32;
            trigonometric(evaluator, name, &turns, span)
        }
    }
}

/// The argument of a trigonometric function as a multiple of π.
fn angle(evaluator: &mut Evaluator, function: &str, node: &Node) -> Outcome<Rational> {
    match value(evaluator, node)? {
        Value::Angle(part) => Ok(part),
        Value::Number(number) if number.is_zero() => Ok(Rational::new()),
        Value::Number(_) => Err(ExpressionFault::new(
            &node.span,
            format!("the argument of `{function}` must be a rational multiple of `pi`"),
            format!("write for example `{function}(2/7*pi)`"),
        )),
    }
}

fn trigonometric(
    evaluator: &mut Evaluator,
    name: &str,
    turns: &Rational,
    span: &Range<usize>,
) -> Outcome<Real> {
    let quarter = Rational::from((1, 4));
    match name {
        "cos" => cosine(evaluator, turns, span),
        "sin" => cosine(evaluator, &Rational::from(&quarter - turns), span),
        _ => {
            // tan t = sin 2t / (1 + cos 2t): often in a smaller field than sin t.
            let double = Rational::from(turns * 2u32);
            let sine = cosine(evaluator, &Rational::from(&quarter - &double), span)?;
            let below = cosine(evaluator, &double, span)? + Real::from(1);
            let inverse = below.inverse().ok_or_else(|| {
                let help = "the tangent has a pole at odd multiples of `pi/2`";
                ExpressionFault::new(span, "this tangent is infinite", help)
            })?;
            bounded(evaluator.lift(&sine) * inverse, span)
        }
    }
}

/// What the user reads when a field cannot be had.
pub(super) fn adjoin_fault(fault: &AdjoinFault, span: &Range<usize>) -> ExpressionFault {
    let help = "use numbers of lower degree, or a plane form (`form = ...`) that takes a root out of the \
                coordinates";
    ExpressionFault::new(span, fault.to_string(), help)
}

/// cos(2π·turns), growing the field if need be.
pub(super) fn cosine(
    evaluator: &mut Evaluator,
    turns: &Rational,
    span: &Range<usize>,
) -> Outcome<Real> {
    let fault = |fault: AdjoinFault| adjoin_fault(&fault, span);
    let (negative, p, q) = cosine::reduced_angle(turns).map_err(fault)?;
    let generator = twice_cosine(evaluator, q).map_err(fault)?;
    let half = Rational::from((if negative { -1 } else { 1 }, 2));
    bounded(
        cosine::multiple_angle(&generator, p) * Real::from(half),
        span,
    )
}

/// 2cos(2π/q) in the evaluator's field, grown if need be.
fn twice_cosine(evaluator: &mut Evaluator, q: u32) -> Result<Real, AdjoinFault> {
    if cosine::cosine_degree(q) == 1 {
        return Ok(cosine::generator_of(&Field::rationals(), q));
    }
    let known = evaluator
        .cosines
        .iter()
        .find(|(known, _)| known.is_multiple_of(q));
    if let Some((known, generator)) = known {
        return Ok(cosine::multiple_angle(generator, known / q));
    }
    let extends = |known: u32| q.is_multiple_of(known);
    let generator = if evaluator.field.is_rational() || evaluator.pure_cosine.is_some_and(extends) {
        let field = cosine::cosine_field(q)?;
        let generator = field.generator();
        let old_generator = match evaluator.pure_cosine {
            Some(known) => cosine::multiple_angle(&generator, q / known),
            None => evaluator.field.generator(),
        };
        let grown = Adjoined {
            field,
            old_generator,
            root: generator,
        };
        let generator = evaluator.grow(grown);
        evaluator.pure_cosine = Some(q);
        generator
    } else {
        let polynomial = relative_polynomial(evaluator, q)?;
        let approximate = |bits: u32| cosine::twice_cosine_enclosure(1, q, bits);
        let grown = adjoin_root(&evaluator.field, &polynomial, &approximate)?;
        evaluator.grow(grown)
    };
    evaluator.cosines.insert(q, generator.clone());
    Ok(generator)
}

/// A polynomial over the evaluator's field with the root 2cos(2π/q), of small degree: the field grows by
/// the cosines of divisors of q first, so that each step is small.
///
/// - q prime: the minimal polynomial.
/// - q = pᵉ: V_p(x) = 2cos(2π/pᵉ⁻¹), of degree p.
/// - q = q₁q₂ coprime, 1/q ≡ i/q₁ + j/q₂: with u = 2cos(2πi/q₁) and v = 2cos(2πj/q₂) the two numbers
///   2cos(a ± b) have sum uv and product u² + v² − 4.
fn relative_polynomial(evaluator: &mut Evaluator, q: u32) -> Result<Vec<Real>, AdjoinFault> {
    let prime = (2..)
        .find(|p| q.is_multiple_of(*p))
        .expect("q is more than 1");
    let mut part = prime;
    while q.is_multiple_of(part * prime) {
        part *= prime;
    }
    let rest = q / part;
    if rest == 1 && part == prime {
        return Ok(cosine::minimal_polynomial(q)
            .into_iter()
            .map(Real::from)
            .collect());
    }
    if rest == 1 {
        let below = twice_cosine(evaluator, part / prime)?;
        let mut polynomial = cosine::multiple_angle_polynomial(prime);
        polynomial[0] -= below;
        return Ok(polynomial);
    }
    let i = (0..part)
        .find(|i| (i * rest) % part == 1 % part)
        .expect("coprime parts");
    let j = (0..rest)
        .find(|j| (j * part) % rest == 1 % rest)
        .expect("coprime parts");
    twice_cosine(evaluator, part)?;
    let v = cosine::multiple_angle(&twice_cosine(evaluator, rest)?, j);
    // Looked up again, since the second may have grown the field.
    let u = cosine::multiple_angle(&twice_cosine(evaluator, part)?, i);
    let product = &u * &u + &v * &v - Real::from(4);
    Ok(vec![product, -(u * v), Real::from(1)])
}

/// The square root of a number that is not negative.
pub(super) fn square_root(
    evaluator: &mut Evaluator,
    argument: &Real,
    span: &Range<usize>,
) -> Outcome<Real> {
    match argument.sign() {
        Sign::Zero => return Ok(Real::from(0)),
        Sign::Negative => {
            return Err(ExpressionFault::new(
                span,
                format!(
                    "the square root of a negative number ({}) is not real",
                    argument.decimal(6)
                ),
                "write a number that is at least 0",
            ));
        }
        Sign::Positive => {}
    }
    if let Some(value) = argument.to_rational()
        && value.numer().is_perfect_square()
        && value.denom().is_perfect_square()
    {
        let root = |n: &Integer| Integer::from(n.sqrt_ref());
        return Ok(Real::from(Rational::from((
            root(value.numer()),
            root(value.denom()),
        ))));
    }
    if let Some((_, root)) = evaluator
        .square_roots
        .iter()
        .find(|(known, _)| known == argument)
    {
        return Ok(root.clone());
    }
    if let Some(root) = from_known_roots(evaluator, argument) {
        return Ok(root);
    }
    if !evaluator.field.is_rational() && bits(argument) * evaluator.field.degree() > MOST_BITS / 2 {
        return Err(too_long(span));
    }
    let polynomial = [-argument, Real::from(0), Real::from(1)];
    let approximate = |bits: u32| argument.enclosure_within(2 * bits + 8).sqrt();
    let grown = adjoin_root(&evaluator.field, &polynomial, &approximate)
        .map_err(|fault| adjoin_fault(&fault, span))?;
    let argument = match argument.to_rational() {
        Some(value) => Real::from(value),
        None => crate::number::adjoin::embed(argument, &grown.old_generator),
    };
    let root = evaluator.grow(grown);
    evaluator.square_roots.push((argument, root.clone()));
    Ok(root)
}

/// The square root of a positive rational number that is a square times a product of rational numbers whose
/// roots are known: √n = √(nΠa)·Π√a / Πa.
fn from_known_roots(evaluator: &Evaluator, argument: &Real) -> Option<Real> {
    let wanted = argument.to_rational()?;
    let known: Vec<(Rational, &Real)> = evaluator
        .square_roots
        .iter()
        .filter_map(|(a, root)| Some((a.to_rational()?, root)))
        .collect();
    // Each known root at least doubled the degree, or was found here and not kept: there are few.
    for subset in 1..1u32 << known.len().min(8) {
        let chosen = || {
            let members = known.iter().enumerate();
            members
                .filter(move |(i, _)| subset >> i & 1 == 1)
                .map(|(_, k)| k)
        };
        charge_with(|| {
            let size = |a: &Rational| weight(a.numer()) + weight(a.denom());
            let whole = chosen().map(|(a, _)| size(a)).sum::<u64>() + size(&wanted);
            gcd_cost(whole, whole)
        });
        let product = chosen().fold(Rational::from(1), |p, (a, _)| p * a);
        let square = Rational::from(&product * &wanted);
        if square.numer().is_perfect_square() && square.denom().is_perfect_square() {
            let root = |n: &Integer| Integer::from(n.sqrt_ref());
            let outside = Rational::from((root(square.numer()), root(square.denom()))) / product;
            return Some(chosen().fold(Real::from(outside), |r, (_, root)| r * *root));
        }
    }
    None
}
