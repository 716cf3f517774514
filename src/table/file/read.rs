//! From the text of a table file to a table.

use super::faults::{self, Layout};
use super::rings::{self, WrittenRing};
use super::source::{Outcome, Source, Value, array, kind, number};
use crate::number::Real;
use crate::number::adjoin::AdjoinFault;
use crate::table::expression::Evaluator;
use crate::table::{MOST_SIDES, Ring, Table, shape};
use rug::Rational;
use std::ops::Range;
use toml::de::DeTable;

const SHAPES: [&str; 3] = ["corners", "triangle", "regular"];
const KEYS: [&str; 8] = [
    "title", "about", "corners", "triangle", "regular", "sides", "form", "holes",
];
const RESERVED: [&str; 3] = ["define", "parameters", "outline"];

/// An outline that has been read, with the evaluator whose field holds it.
struct Drawn {
    evaluator: Evaluator,
    ring: WrittenRing,
    form: Real,
    form_span: Option<Range<usize>>,
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
    let drawn = match chosen[..] {
        ["corners"] => corners(source, &document),
        ["triangle"] => triangle(source, get("triangle")),
        ["regular"] => regular(source, get("regular")),
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
    }?;
    complete(source, &document, &title, drawn)
}

/// Adds letters and holes to an outline, brings all numbers into one field, and checks the table.
fn complete(source: Source, document: &DeTable, title: &str, drawn: Drawn) -> Outcome<Table> {
    let Drawn {
        mut evaluator,
        mut ring,
        form,
        form_span,
    } = drawn;
    rings::read_letters(source, document, &mut ring, 0)?;
    let mut rings = vec![ring];
    rings.extend(rings::holes(source, &mut evaluator, document)?);
    rings::check_total(source, &rings)?;
    rings::complete_letters(&mut rings);
    rings::lift(&evaluator, &mut rings);
    let form = evaluator.lift(&form);
    let plain = |ring: &WrittenRing| Ring {
        corners: ring.corners.clone(),
        letters: ring.letters.clone().expect("letters are complete"),
    };
    let holes = rings[1..].iter().map(plain).collect();
    Table::with_holes(title, plain(&rings[0]), holes, form).map_err(|fault| {
        let layout = Layout {
            rings: &rings,
            form: form_span,
        };
        faults::diagnostic(source, &layout, &fault)
    })
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

fn corners(source: Source, document: &DeTable) -> Outcome<Drawn> {
    let (key, value) = document.get_key_value("corners").expect("checked before");
    let mut evaluator = Evaluator::default();
    let ring = rings::corners(source, &mut evaluator, &key.span(), value, 0)?;
    let form = match document.get("form") {
        Some(form) => number(source, &mut evaluator, form, "the plane form")?,
        None => Real::from(1),
    };
    Ok(Drawn {
        evaluator,
        ring,
        form,
        form_span: document.get("form").map(Value::span),
    })
}

/// A shape that the program draws, in a field of its own.
fn shaped(
    source: Source,
    value: &Value,
    shape: Result<shape::Shape, AdjoinFault>,
) -> Outcome<Drawn> {
    let shape = shape.map_err(|fault| {
        let help = "the field of its cosines is too large; choose angles with a smaller common denominator";
        source.diagnostic(&value.span(), format!("this shape cannot be used: {fault}"), help)
    })?;
    let numbers = shape.corners.iter().flat_map(|c| [&c.x, &c.y]);
    let field = numbers
        .chain([&shape.form])
        .map(Real::field)
        .find(|field| !field.is_rational())
        .cloned();
    Ok(Drawn {
        evaluator: field.map_or_else(Evaluator::default, Evaluator::new),
        ring: WrittenRing {
            spans: vec![value.span(); shape.corners.len()],
            corners: shape.corners,
            all: value.span(),
            letters: None,
            letter_spans: Vec::new(),
        },
        form: shape.form,
        form_span: None,
    })
}

fn triangle(source: Source, value: &Value) -> Outcome<Drawn> {
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
    shaped(source, value, shape::triangle(&proportions))
}

fn regular(source: Source, value: &Value) -> Outcome<Drawn> {
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
        Some(k) => shaped(source, value, shape::regular(k)),
        None => source.fault(
            &value.span(),
            "the number of corners of a regular polygon is out of range",
            format!("write an integer from 3 to {MOST_SIDES}, such as `regular = 7`"),
        ),
    }
}
