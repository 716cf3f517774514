//! From the text of a table file to a table.

use super::faults::{self, Layout};
use crate::number::Real;
use crate::number::adjoin::AdjoinFault;
use crate::table::diagnostic::Diagnostic;
use crate::table::expression::Evaluator;
use crate::table::{MOST_SIDES, Table, Vector, default_letters, shape};
use rug::{Integer, Rational};
use std::ops::Range;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

type Value<'i> = Spanned<DeValue<'i>>;
pub(super) type Outcome<T> = Result<T, Box<Diagnostic>>;

const SHAPES: [&str; 3] = ["corners", "triangle", "regular"];
const KEYS: [&str; 7] = [
    "title", "about", "corners", "triangle", "regular", "sides", "form",
];
const RESERVED: [&str; 4] = ["define", "parameters", "outline", "holes"];

/// The text that spans point into.
#[derive(Clone, Copy)]
pub(super) struct Source<'a> {
    pub(super) file: &'a str,
    pub(super) text: &'a str,
}

impl Source<'_> {
    pub(super) fn fault<T>(
        self,
        span: &Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) -> Outcome<T> {
        Err(self.diagnostic(span, message, help))
    }

    pub(super) fn diagnostic(
        self,
        span: &Range<usize>,
        message: impl Into<String>,
        help: impl Into<String>,
    ) -> Box<Diagnostic> {
        Box::new(Diagnostic {
            file: self.file.into(),
            source: self.text.into(),
            span: span.clone(),
            label: String::new(),
            context: Vec::new(),
            message: message.into(),
            help: help.into(),
        })
    }
}

/// Reads and checks a table.
pub(super) fn table(file: &str, text: &str, stem: &str) -> Outcome<Table> {
    let source = Source { file, text };
    let document = DeTable::parse(text).map_err(|e| {
        let message = format!("this is not valid TOML: {}", e.message());
        let help = "check the quotes, brackets and commas here; a line reads `key = value`";
        source.diagnostic(&e.span().unwrap_or(0..0), message, help)
    })?;
    let document = document.into_inner();
    check_keys(source, &document)?;
    let title = title(source, &document, stem)?;
    let chosen: Vec<&str> = SHAPES
        .into_iter()
        .filter(|key| document.contains_key(*key))
        .collect();
    if let Some((key, _)) = document.get_key_value("form")
        && let [only] = chosen[..]
        && only != "corners"
    {
        let message = format!("`form` goes with `corners`, not with `{}`", chosen[0]);
        let help = format!(
            "remove this line: `{}` chooses the plane form itself",
            chosen[0]
        );
        return source.fault(&key.span(), message, help);
    }
    let get = |key: &str| document.get(key).expect("a key that is there");
    match chosen[..] {
        ["corners"] => corners(source, &document, &title),
        ["triangle"] => triangle(source, get("triangle"), &document, &title),
        ["regular"] => regular(source, get("regular"), &document, &title),
        [] => source.fault(
            &(0..0),
            "the file describes no table",
            "add `corners = [[\"0\", \"0\"], ...]`, `triangle = [\"1\", \"2\", \"4\"]` or `regular = 7`",
        ),
        _ => {
            let mut keys: Vec<_> =
                chosen.iter().filter_map(|key| document.get_key_value(*key)).map(|(k, _)| k).collect();
            keys.sort_by_key(|key| key.span().start);
            let names: Vec<String> = keys.iter().map(|key| format!("`{}`", key.get_ref())).collect();
            source.fault(
                &keys[1].span(),
                format!("{} describe the table more than once", names.join(" and ")),
                "keep exactly one of `corners`, `triangle` and `regular`",
            )
        }
    }
}

fn check_keys(source: Source, document: &DeTable) -> Outcome<()> {
    let mut keys: Vec<_> = document.keys().collect();
    keys.sort_by_key(|key| key.span().start);
    for key in keys {
        let name = key.get_ref().as_ref();
        if RESERVED.contains(&name) {
            let message = format!("`{name}` is reserved and not supported in this version");
            let help = match name {
                "outline" => "write the corners themselves: `corners = [[\"0\", \"0\"], ...]`",
                "holes" => "only tables without holes can be read",
                _ => "write the values out in `corners`",
            };
            return source.fault(&key.span(), message, help);
        }
        if !KEYS.contains(&name) {
            let help = match nearest_key(name) {
                Some(known) => format!("did you mean `{known}`?"),
                None => format!("known keys are {}", KEYS.join(", ")),
            };
            return source.fault(&key.span(), format!("unknown key `{name}`"), help);
        }
    }
    Ok(())
}

/// The known key within two edits, if there is one.
fn nearest_key(name: &str) -> Option<&'static str> {
    let lower = name.to_lowercase();
    let nearest = KEYS
        .into_iter()
        .min_by_key(|key| edit_distance(key, &lower))?;
    (edit_distance(nearest, &lower) <= 2).then_some(nearest)
}

fn edit_distance(a: &str, b: &str) -> usize {
    let b: Vec<char> = b.chars().collect();
    let mut row: Vec<usize> = (0..=b.len()).collect();
    for (i, c) in a.chars().enumerate() {
        let mut diagonal = row[0];
        row[0] = i + 1;
        for (j, d) in b.iter().enumerate() {
            let replaced = diagonal + usize::from(c != *d);
            diagonal = row[j + 1];
            row[j + 1] = replaced.min(row[j] + 1).min(diagonal + 1);
        }
    }
    row[b.len()]
}

fn kind(value: &DeValue) -> &'static str {
    match value {
        DeValue::String(_) => "a string",
        DeValue::Integer(_) => "an integer",
        DeValue::Float(_) => "a floating-point number",
        DeValue::Boolean(_) => "a truth value",
        DeValue::Datetime(_) => "a date or time",
        DeValue::Array(_) => "an array",
        DeValue::Table(_) => "a table of keys",
    }
}

fn title(source: Source, document: &DeTable, stem: &str) -> Outcome<String> {
    if let Some(about) = document.get("about")
        && about.get_ref().as_str().is_none()
    {
        let message = format!(
            "`about` must be a string, this is {}",
            kind(about.get_ref())
        );
        return source.fault(&about.span(), message, "write the text in quotes");
    }
    let Some(value) = document.get("title") else {
        return Ok(stem.into());
    };
    let Some(text) = value.get_ref().as_str() else {
        let message = format!(
            "`title` must be a string, this is {}",
            kind(value.get_ref())
        );
        return source.fault(&value.span(), message, "write the title in quotes");
    };
    if text.chars().any(char::is_control) {
        let message = "the title holds a line break or another control character";
        return source.fault(
            &value.span(),
            message,
            "write it on one line; longer text goes into `about`",
        );
    }
    Ok(text.to_string())
}

/// The exact number in a value.
fn number(source: Source, evaluator: &mut Evaluator, value: &Value, what: &str) -> Outcome<Real> {
    let span = value.span();
    match value.get_ref() {
        DeValue::Integer(integer) => {
            let digits = integer.as_str().replace('_', "");
            match Integer::from_str_radix(&digits, integer.radix() as i32) {
                Ok(value) => Ok(Real::from(value)),
                Err(_) => source.fault(&span, "this integer cannot be read", "write it in quotes"),
            }
        }
        DeValue::String(text) => evaluator.evaluate(text).map_err(|fault| {
            let inside = place_in_string(source.text, &span, text, &fault.span);
            source.diagnostic(&inside, format!("{what}: {}", fault.message), fault.help)
        }),
        DeValue::Float(float) => {
            let written = source.text.get(span.clone()).unwrap_or(float.as_str());
            let finite = written.chars().any(|c| c.is_ascii_digit());
            let help = if finite {
                format!(
                    "write it in quotes, as the exact decimal \"{}\"",
                    written.replace('_', "")
                )
            } else {
                "write a finite number in quotes".into()
            };
            let message = format!("{what} is a floating-point number, which is not exact");
            source.fault(&span, message, help)
        }
        other => {
            let message = format!("{what} must be a number, this is {}", kind(other));
            source.fault(
                &span,
                message,
                "write an exact expression in quotes, such as \"3/4\"",
            )
        }
    }
}

/// Where a part of a string's content stands in the file: exact when the string is written without
/// escapes, the whole string otherwise.
fn place_in_string(
    text: &str,
    string: &Range<usize>,
    content: &str,
    part: &Range<usize>,
) -> Range<usize> {
    let raw = &text[string.clone()];
    let mut quotes = if raw.starts_with("\"\"\"") || raw.starts_with("'''") {
        3
    } else {
        1
    };
    // A line break right after three quotes is not part of the string.
    if quotes == 3 {
        let rest = &raw[3..];
        quotes += if rest.starts_with("\r\n") {
            2
        } else {
            usize::from(rest.starts_with('\n'))
        };
    }
    let start = string.start + quotes;
    if raw.get(quotes..quotes + content.len()) != Some(content) {
        return string.clone();
    }
    if part.is_empty() {
        // The end of the text, or an empty string: show the closing quote.
        return start + part.start..start + part.start + 1;
    }
    start + part.start..start + part.end
}

fn array<'v, 'i>(
    source: Source,
    value: &'v Value<'i>,
    what: &str,
    help: &str,
) -> Outcome<&'v [Value<'i>]> {
    match value.get_ref() {
        DeValue::Array(items) => Ok(items),
        other => source.fault(
            &value.span(),
            format!("{what} must be an array, this is {}", kind(other)),
            help,
        ),
    }
}

fn corners(source: Source, document: &DeTable, title: &str) -> Outcome<Table> {
    let (key, value) = document.get_key_value("corners").expect("checked before");
    let example = "write `corners = [[\"0\", \"0\"], [\"1\", \"0\"], [\"0\", \"1\"]]`";
    let items = array(source, value, "`corners`", example)?;
    // Before the numbers are evaluated: the count bounds the work.
    if items.len() < 3 || items.len() > MOST_SIDES {
        let message = format!(
            "a table has from 3 to {MOST_SIDES} corners, this one has {}",
            items.len()
        );
        return source.fault(
            &key.span(),
            message,
            "write one pair of coordinates for each corner",
        );
    }
    let mut evaluator = Evaluator::default();
    let mut numbers = Vec::new();
    for (i, item) in items.iter().enumerate() {
        let help = "write a pair of numbers, such as `[\"1\", \"1/2\"]`";
        let what = format!("corner {i} (counting from 0)");
        let pair = array(source, item, &what, help)?;
        if pair.len() != 2 {
            let message = format!("{what} must have 2 coordinates, here are {}", pair.len());
            return source.fault(&item.span(), message, help);
        }
        for (name, coordinate) in ["first", "second"].into_iter().zip(pair) {
            let what = format!("the {name} coordinate of corner {i} (counting from 0)");
            numbers.push(number(source, &mut evaluator, coordinate, &what)?);
        }
    }
    let form_span = document.get("form").map(Spanned::span);
    numbers.push(match document.get("form") {
        Some(form) => number(source, &mut evaluator, form, "the plane form")?,
        None => Real::from(1),
    });
    let sides = letters(source, document, items.len())?;
    evaluator.finish(&mut numbers);
    let form = numbers.pop().expect("pushed last");
    let points: Vec<Vector> = numbers
        .chunks(2)
        .map(|pair| Vector::new(pair[0].clone(), pair[1].clone()))
        .collect();
    let layout = Layout {
        corners: items.iter().map(Spanned::span).collect(),
        all: key.span(),
        form: form_span,
        letters: sides.letters.clone(),
        letter_spans: sides.spans,
    };
    Table::new(title, points, form, sides.letters)
        .map_err(|fault| faults::diagnostic(source, &layout, &fault))
}

fn shaped(
    source: Source,
    value: &Value,
    document: &DeTable,
    title: &str,
    shape: Result<shape::Shape, AdjoinFault>,
) -> Outcome<Table> {
    let shape = shape.map_err(|fault| {
        let help = "the field of its cosines is too large; choose angles with a smaller common denominator";
        source.diagnostic(&value.span(), format!("this shape cannot be used: {fault}"), help)
    })?;
    let sides = letters(source, document, shape.corners.len())?;
    let layout = Layout {
        corners: vec![value.span(); shape.corners.len()],
        all: value.span(),
        form: None,
        letters: sides.letters.clone(),
        letter_spans: sides.spans,
    };
    Table::new(title, shape.corners, shape.form, sides.letters)
        .map_err(|fault| faults::diagnostic(source, &layout, &fault))
}

fn triangle(source: Source, value: &Value, document: &DeTable, title: &str) -> Outcome<Table> {
    let help = "write three numbers, such as `triangle = [\"1\", \"2\", \"4\"]`: the angles are in proportion \
                to them";
    let items = array(source, value, "`triangle`", help)?;
    if items.len() != 3 {
        let message = format!("a triangle has 3 angles, here are {}", items.len());
        return source.fault(&value.span(), message, help);
    }
    let mut proportions: [Rational; 3] = Default::default();
    let mut evaluator = Evaluator::default();
    for (i, item) in items.iter().enumerate() {
        let what = format!("the angle at corner {i} (counting from 0)");
        let angle = number(source, &mut evaluator, item, &what)?;
        proportions[i] = match angle.to_rational() {
            Some(value) if value > 0 => value,
            Some(_) => {
                let help = "write three positive numbers";
                return source.fault(&item.span(), format!("{what} must be positive"), help);
            }
            None => {
                let message = format!("{what} must be in a rational proportion to the others");
                let help = "write rational numbers, or give the `corners` of the triangle";
                return source.fault(&item.span(), message, help);
            }
        };
    }
    shaped(
        source,
        value,
        document,
        title,
        shape::triangle(&proportions),
    )
}

fn regular(source: Source, value: &Value, document: &DeTable, title: &str) -> Outcome<Table> {
    let count = number(
        source,
        &mut Evaluator::default(),
        value,
        "the number of corners",
    )?;
    let whole = count
        .to_rational()
        .filter(|c| c.is_integer())
        .and_then(|c| c.numer().to_u32());
    match whole.filter(|k| (3..=MOST_SIDES as u32).contains(k)) {
        Some(k) => shaped(source, value, document, title, shape::regular(k)),
        None => source.fault(
            &value.span(),
            "the number of corners of a regular polygon is out of range",
            format!("write an integer from 3 to {MOST_SIDES}, such as `regular = 7`"),
        ),
    }
}

/// The letters of the sides and where they stand.
struct Sides {
    letters: Vec<char>,
    /// Empty when the letters are the default ones.
    spans: Vec<Range<usize>>,
}

fn letters(source: Source, document: &DeTable, count: usize) -> Outcome<Sides> {
    let Some(value) = document.get("sides") else {
        return Ok(Sides {
            letters: default_letters(count),
            spans: Vec::new(),
        });
    };
    let help = "write one character for each side, such as `sides = [\"a\", \"b\", \"c\"]`";
    let items = array(source, value, "`sides`", help)?;
    let mut sides = Sides {
        letters: Vec::new(),
        spans: Vec::new(),
    };
    for (i, item) in items.iter().enumerate() {
        let Some(text) = item.get_ref().as_str() else {
            let message = format!(
                "the letter of side {i} must be a string, this is {}",
                kind(item.get_ref())
            );
            return source.fault(&item.span(), message, help);
        };
        let mut characters = text.chars();
        let (Some(letter), None) = (characters.next(), characters.next()) else {
            let message = format!(
                "the letter of side {i} must be one character, this is {}",
                text.chars().count()
            );
            return source.fault(&item.span(), message, help);
        };
        if !is_letter(letter) {
            let message = format!(
                "`{}` cannot be the letter of side {i}",
                letter.escape_debug()
            );
            let help = "choose a printable character that is no space, comma or quote";
            return source.fault(&item.span(), message, help);
        }
        sides.letters.push(letter);
        sides.spans.push(item.span());
    }
    if sides.letters.len() != count {
        let message = format!("{} letters for {count} sides", sides.letters.len());
        return source.fault(&value.span(), message, help);
    }
    Ok(sides)
}

/// Printable, and not one of the characters that separate words.
fn is_letter(c: char) -> bool {
    // What Debug escapes is not printable, or joins the character before.
    let printable = c == '\\' || c.escape_debug().count() == 1;
    printable && !c.is_whitespace() && !",\"'`".contains(c)
}
