//! Starts and aims of the command line: exact points, sides and directions.
//!
//! Their numbers may need a larger field than the table's. A [`Launcher`] reads them one after the other; in the
//! end it gives the table in the field that all of them need, and what brings each number there.
//!
//! What a command writes can be read here again. Numbers are written in powers of a generator of their field. When that
//! is the table's own field, its generator is `t`, as `reboundary table` tells it, and `t` is read as that. The generator
//! of a larger field is written out as `root(polynomial, value)`: see [`Lifter::generator`].

use super::fault::Fault;
use crate::number::{Field, Real, poly};
use crate::table::diagnostic::Diagnostic;
use crate::table::expression::Evaluator;
use crate::table::{SideId, Table, Vector};
use rug::{Integer, Rational};
use std::ops::Range;

/// Reads starts and aims.
pub struct Launcher<'a> {
    table: &'a Table,
    evaluator: Evaluator,
}

/// What brings numbers that a launcher read into the field that all of them need.
pub struct Lifter {
    evaluator: Evaluator,
    field: Field,
    generator: String,
}

impl Lifter {
    /// The generator of the final field as a launcher for the same table reads it.
    pub fn generator(&self) -> &str {
        &self.generator
    }

    /// A number that was read, in the final field.
    pub fn number(&self, number: &Real) -> Real {
        self.evaluator.lift(number).lifted_to(&self.field)
    }

    /// A vector that was read, in the final field.
    pub fn vector(&self, vector: &Vector) -> Vector {
        Vector::new(self.number(&vector.x), self.number(&vector.y))
    }
}

/// A fault at a place of an option's text.
pub fn fault(option: &str, text: &str, span: Range<usize>, message: String, help: &str) -> Fault {
    Fault::BadText(Box::new(Diagnostic {
        file: option.into(),
        source: text.into(),
        span,
        label: String::new(),
        context: Vec::new(),
        message,
        help: help.into(),
    }))
}

impl<'a> Launcher<'a> {
    /// A launcher for a table.
    pub fn new(table: &'a Table) -> Launcher<'a> {
        let mut evaluator = Evaluator::new(table.field().clone());
        if !table.field().is_rational() {
            evaluator.define_number("t", &table.field().generator());
        }
        Launcher { table, evaluator }
    }

    /// The table in the field of everything that was read, and what brings the numbers there.
    pub fn finish(self) -> (Table, Lifter) {
        let field = self.evaluator.field().clone();
        let lifter = Lifter {
            evaluator: self.evaluator,
            generator: generator(self.table.field(), &field),
            field: field.clone(),
        };
        let table = self.table.in_field(&field, |n| lifter.number(n));
        (table, lifter)
    }

    /// `LETTER@FRACTION`: a point inside a side.
    pub fn side_start(&mut self, text: &str) -> Result<(SideId, Real), Fault> {
        let help = "write LETTER@FRACTION, such as a@1/3: a third of the way along side a";
        let Some(at) = text.find('@') else {
            let message = "the start has no `@` between its side and its fraction".into();
            return Err(fault("--start", text, 0..text.len(), message, help));
        };
        let side = side_of(self.table, "--start", text, 0..at)?;
        let fraction = self.evaluate("--start", text, at + 1..text.len())?;
        if fraction <= Real::from(0) || fraction >= Real::from(1) {
            let message = format!(
                "the start must lie inside its side: {} is not strictly between 0 and 1",
                text[at + 1..].trim()
            );
            return Err(fault("--start", text, at + 1..text.len(), message, help));
        }
        Ok((side, fraction))
    }

    /// `X,Y`: a direction as a vector.
    pub fn aim(&mut self, text: &str) -> Result<Vector, Fault> {
        let help = "write a vector X,Y in the table's coordinates, such as 2,5 or sqrt(2),1";
        let aim = self.pair("--aim", "aim", text, help)?;
        if aim.is_zero() {
            let message = "the aim is the zero vector, which has no direction".into();
            return Err(fault("--aim", text, 0..text.len(), message, help));
        }
        Ok(aim)
    }

    /// `X,Y`: a point of the plane.
    pub fn point(&mut self, text: &str) -> Result<Vector, Fault> {
        let help = "write a point X,Y in the table's coordinates, such as 1/3,1/4";
        self.pair("--from", "starting point", text, help)
    }

    /// A rational multiple of π, the angle from the first axis, as a direction.
    pub fn heading(&mut self, text: &str) -> Result<Vector, Fault> {
        let help =
            "write the angle from the x axis in units of pi as a rational number, such as 1/5";
        let turns = self.evaluate("--heading", text, 0..text.len())?;
        let Some(turns) = turns.to_rational() else {
            let message = "the heading is not a rational multiple of pi".into();
            return Err(fault("--heading", text, 0..text.len(), message, help));
        };
        let whole = |e: crate::table::expression::ExpressionFault| {
            fault("--heading", text, 0..text.len(), e.message, &e.help)
        };
        let x = self.evaluator.evaluate(&format!("cos(({turns})*pi)"));
        let x = x.map_err(whole)?;
        let y = self.evaluator.evaluate(&format!("sin(({turns})*pi)"));
        let y = y.map_err(whole)?;
        // Second coordinates are in units of √g.
        let form = self.evaluator.lift(self.table.form());
        let root = self.evaluator.square_root(&form).map_err(whole)?;
        let y = self.evaluator.lift(&y);
        let y = y.checked_div(&root).expect("the form is positive");
        Ok(Vector::new(self.evaluator.lift(&x), y))
    }

    /// A positive number.
    pub fn positive(&mut self, option: &str, text: &str) -> Result<Real, Fault> {
        let value = self.evaluate(option, text, 0..text.len())?;
        if value <= Real::from(0) {
            let message = "a length must be positive".into();
            return Err(fault(
                option,
                text,
                0..text.len(),
                message,
                "write a positive number",
            ));
        }
        Ok(value)
    }

    fn pair(&mut self, option: &str, what: &str, text: &str, help: &str) -> Result<Vector, Fault> {
        let commas = top_level_commas(text);
        let [comma] = commas[..] else {
            let message = format!(
                "the {what} needs two coordinates, this has {}",
                commas.len() + 1
            );
            return Err(fault(option, text, 0..text.len(), message, help));
        };
        let x = self.evaluate(option, text, 0..comma)?;
        let y = self.evaluate(option, text, comma + 1..text.len())?;
        // The second number may have made the field larger.
        Ok(Vector::new(self.evaluator.lift(&x), y))
    }

    /// Evaluates a part of an option's text.
    fn evaluate(&mut self, option: &str, text: &str, part: Range<usize>) -> Result<Real, Fault> {
        self.evaluator.evaluate(&text[part.clone()]).map_err(|e| {
            let span = part.start + e.span.start..part.start + e.span.end;
            fault(option, text, span, e.message, &e.help)
        })
    }
}

/// The side that a part of an option's text names: its letter, and when sides share it which of them, counted from 1.
pub fn side_of(
    table: &Table,
    option: &str,
    text: &str,
    part: Range<usize>,
) -> Result<SideId, Fault> {
    let named = &text[part.clone()];
    let mut rest = named.chars();
    let sides = rest
        .next()
        .map_or(Vec::new(), |letter| table.sides_of_letter(letter));
    let which = Some(rest.as_str()).filter(|rest| !rest.is_empty());
    let count = sides.len();
    match (which, &sides[..]) {
        (None, [side]) => return Ok(*side),
        (None, [_, _, ..]) => {
            let message = format!("{count} sides have the letter `{named}`");
            let help = format!(
                "write which: `{named}1` to `{named}{count}`, in the order of the sides in `reboundary table`"
            );
            return Err(fault(option, text, part, message, &help));
        }
        (Some(which), [_, ..]) => {
            let index = which.parse::<usize>().ok().and_then(|w| w.checked_sub(1));
            if let Some(side) = index.and_then(|index| sides.get(index)) {
                return Ok(*side);
            }
        }
        (_, []) => {}
    }
    let known: Vec<String> = table.letters().iter().map(char::to_string).collect();
    let message = format!("`{named}` is not a side of this table");
    let help = format!("its sides are {}", known.join(", "));
    Err(fault(option, text, part, message, &help))
}

/// What [`side_of`] reads: the letter, with a number when sides share it.
pub fn side_name(table: &Table, side: SideId) -> String {
    let letter = table.letter(side);
    let sharing = table.sides_of_letter(letter);
    match sharing.iter().position(|s| *s == side) {
        Some(index) if sharing.len() > 1 => format!("{letter}{}", index + 1),
        _ => letter.to_string(),
    }
}

/// `t` for the table's own field, else the generator as a root.
fn generator(own: &Field, field: &Field) -> String {
    if field.is_rational() || field.same(own) {
        return "t".into();
    }
    let minimal = field.minimal_polynomial();
    let sturm = poly::sturm_sequence(minimal);
    // Ends because the roots of an irreducible polynomial are apart from each other.
    let mut places = 20;
    loop {
        let near = field.generator().decimal(places);
        let value = decimal_value(&near);
        // The generator is less than one unit of the last place away; the other roots must be more than two.
        let unit = Rational::from((
            Integer::from(2),
            Integer::from(Integer::u_pow_u(10, places as u32)),
        ));
        let (low, high) = (
            Rational::from(&value - &unit),
            Rational::from(&value + &unit),
        );
        if poly::roots_between(&sturm, &low, &high) == 1 {
            return format!("root({}, {near})", poly::display(minimal, "x"));
        }
        places *= 2;
    }
}

/// The number that a decimal stands for.
fn decimal_value(text: &str) -> Rational {
    let (whole, part) = text.split_once('.').unwrap_or((text, ""));
    let digits: Integer = format!("{whole}{part}").parse().expect("digits");
    Rational::from((
        digits,
        Integer::from(Integer::u_pow_u(10, part.len() as u32)),
    ))
}

/// Commas outside parentheses.
fn top_level_commas(text: &str) -> Vec<usize> {
    let mut depth = 0i32;
    let mut found = Vec::new();
    for (at, c) in text.char_indices() {
        match c {
            '(' => depth += 1,
            ')' => depth -= 1,
            ',' if depth == 0 => found.push(at),
            _ => {}
        }
    }
    found
}
