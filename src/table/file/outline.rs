//! `outline`: a table by the lengths and headings of its sides, in a small field.
//!
//! Let N be the least common denominator of the headings in units of π. All directions have their cosines in
//! ℚ(cos(π/N)). When N is even their sines lie there too; when N is odd they are sin(π/N) times elements of
//! it, and sin(π/N) goes into the plane form. When the ordinates in units of the first that is not zero are
//! rational, and the square of that one and all abscissas too, the table is written over the rationals.

use super::read::{Drawn, Sheet};
use super::rings::WrittenRing;
use super::source::{Outcome, Value, array, number};
use crate::number::{Field, Real, Sign, poly};
use crate::table::expression::Evaluator;
use crate::table::shape::without_square;
use crate::table::{MOST_SIDES, Vector};
use rug::{Integer, Rational};
use std::ops::Range;
use toml::Spanned;

/// The sides as written.
struct Sides {
    lengths: Vec<Real>,
    /// In units of π, from 0 up to 2.
    headings: Vec<Rational>,
    spans: Vec<Range<usize>>,
}

/// Reads an outline, which must close exactly.
pub(super) fn outline(sheet: Sheet<'_>, key: Range<usize>, value: &Value) -> Outcome<Drawn> {
    let mut evaluator = sheet.evaluator(Field::rationals())?;
    let sides = sides(sheet, &mut evaluator, &key, value)?;
    let (directions, form) = directions(sheet, &mut evaluator, &sides)?;
    let mut corners = vec![Vector::new(0.into(), 0.into())];
    for (length, direction) in sides.lengths.iter().zip(&directions) {
        let lifted = |v: &Vector| Vector::new(evaluator.lift(&v.x), evaluator.lift(&v.y));
        let along = lifted(direction).times(&evaluator.lift(length));
        let last = lifted(&corners[corners.len() - 1]);
        corners.push(last.plus(&along));
    }
    let form = evaluator.lift(&form);
    let end = corners.pop().expect("pushed above");
    if !end.is_zero() {
        let message = format!("the outline does not close: {}", gap(&end, &form));
        let help = "change lengths or headings until the sides lead back to the beginning exactly";
        return sheet.source.fault(&key, message, help);
    }
    let (corners, form) = over_the_rationals(&corners, &form).unwrap_or((corners, form));
    Ok(Drawn {
        evaluator,
        rings: vec![WrittenRing {
            corners,
            spans: sides.spans,
            all: key,
            letters: None,
            letter_spans: Vec::new(),
        }],
        form,
        form_span: None,
        bases: Vec::new(),
        base_parameters: Vec::new(),
    })
}

fn sides(
    sheet: Sheet<'_>,
    evaluator: &mut Evaluator,
    key: &Range<usize>,
    value: &Value,
) -> Outcome<Sides> {
    let source = sheet.source;
    let help = "write a length and a heading in units of pi for each side, such as \
                `outline = [[\"1\", \"0\"], [\"1\", \"2/3\"], [\"1\", \"4/3\"]]`";
    let items = array(source, value, "`outline`", help)?;
    if items.len() < 3 || items.len() > MOST_SIDES {
        let message = format!(
            "a table has from 3 to {MOST_SIDES} sides, this outline has {}",
            items.len()
        );
        return source.fault(key, message, help);
    }
    let mut sides = Sides {
        lengths: Vec::new(),
        headings: Vec::new(),
        spans: items.iter().map(Spanned::span).collect(),
    };
    for (i, item) in items.iter().enumerate() {
        let what = format!("side {i} (counting from 0)");
        let pair = array(source, item, &what, help)?;
        let [length, heading] = pair else {
            let message = format!(
                "{what} must have a length and a heading, here are {}",
                pair.len()
            );
            return source.fault(&item.span(), message, help);
        };
        let what = format!("the length of side {i} (counting from 0)");
        let value = number(source, evaluator, length, &what)?;
        if value.sign() != Sign::Positive {
            let message = format!("{what} must be positive, it is {}", value.decimal(6));
            let help = "write a positive length; the heading gives the direction";
            return source.fault(&length.span(), message, help);
        }
        sides.lengths.push(value);
        let what = format!("the heading of side {i} (counting from 0)");
        let value = number(source, evaluator, heading, &what)?;
        let Some(turns) = value.to_rational() else {
            let message = format!("{what} must be rational: it is in units of pi");
            let help = "write a rational heading, or give the `corners` of the table";
            return source.fault(&heading.span(), message, help);
        };
        sides.headings.push(within_a_turn(turns));
    }
    Ok(sides)
}

/// A heading from 0 up to 2.
pub(super) fn within_a_turn(heading: Rational) -> Rational {
    let turns = Rational::from(&heading / 2u32).floor();
    heading - turns * 2u32
}

/// The unit vectors of the headings, second coordinates in units of √g, and g.
fn directions(
    sheet: Sheet<'_>,
    evaluator: &mut Evaluator,
    sides: &Sides,
) -> Outcome<(Vec<Vector>, Real)> {
    let mut order = Integer::from(1);
    let mut found = Vec::new();
    let cosine = |evaluator: &mut Evaluator, side: usize, turns: &Rational| {
        evaluator.cosine(turns).map_err(|fault| {
            let message = format!(
                "the heading of side {side} (counting from 0): {}",
                fault.message
            );
            let help = "use headings with a smaller common denominator";
            sheet.source.diagnostic(&sides.spans[side], message, help)
        })
    };
    for heading in &sides.headings {
        order.lcm_mut(heading.denom());
    }
    let half = |heading: &Rational| Rational::from(heading / 2u32);
    let quarter = Rational::from((1, 4));
    for (side, heading) in sides.headings.iter().enumerate() {
        let x = cosine(evaluator, side, &half(heading))?;
        // The sine, in the form 1.
        let y = if order.is_even() {
            cosine(evaluator, side, &(quarter.clone() - half(heading)))?
        } else {
            Real::from(0)
        };
        found.push(Vector::new(x, y));
    }
    if order.is_even() || order == 1 {
        return Ok((found, Real::from(1)));
    }
    // The field of the finest angle is that of all cosines, so its order is small.
    let finest = Rational::from((1, Integer::from(&order * 2u32)));
    let base = cosine(evaluator, sides.headings.len() - 1, &finest)?;
    let (unit, form) = without_square(Real::from(1) - &base * &base);
    // sin(aπ/N)/sin(π/N), by a recurrence.
    let twice = &base * Real::from(2);
    let mut ratios = vec![Real::from(0), Real::from(1)];
    for (direction, heading) in found.iter_mut().zip(&sides.headings) {
        let multiple = Rational::from(heading * &order).numer().to_usize();
        let multiple = multiple.expect("less than twice the order");
        while ratios.len() <= multiple {
            let next = &twice * &ratios[ratios.len() - 1] - &ratios[ratios.len() - 2];
            ratios.push(next);
        }
        direction.y = &ratios[multiple] * &unit;
    }
    Ok((found, form))
}

/// The same corners over the rationals, when that is possible by another form alone.
fn over_the_rationals(corners: &[Vector], form: &Real) -> Option<(Vec<Vector>, Real)> {
    let first = corners.iter().map(|c| &c.y).find(|y| !y.is_zero())?;
    let inverse = first.inverse()?;
    let form = Real::from((first * first * form).to_rational()?);
    let (unit, form) = without_square(form);
    let corners = corners
        .iter()
        .map(|c| {
            let y = Real::from((&c.y * &inverse).to_rational()?);
            Some(Vector::new(Real::from(c.x.to_rational()?), y * &unit))
        })
        .collect::<Option<_>>()?;
    Some((corners, form))
}

/// By how much the end of an outline misses its beginning.
fn gap(end: &Vector, form: &Real) -> String {
    let exact = |number: &Real| number.display_in("t");
    let second_exact = match form.to_rational() {
        Some(one) if one == 1 => exact(&end.y),
        _ => format!("({})·√({})", exact(&end.y), exact(form)),
    };
    let numbers = [&end.x, &end.y, form];
    let field = numbers
        .into_iter()
        .map(Real::field)
        .find(|f| !f.is_rational());
    let generator = field.map_or(String::new(), |field| {
        format!(
            ", where t = {} is a root of {}",
            field.generator().decimal(6),
            poly::display(field.minimal_polynomial(), "t")
        )
    });
    let second = crate::table::summary::root_decimal(&(&end.y * &end.y * form));
    let sign = if end.y.sign() == Sign::Negative {
        "-"
    } else {
        ""
    };
    format!(
        "its end misses its beginning by exactly ({}, {second_exact}){generator}; that is about ({}, {sign}{})",
        exact(&end.x),
        end.x.decimal(6),
        second
            .find('.')
            .map_or(&second[..], |point| &second[..second.len().min(point + 7)]),
    )
}
