//! From the text of a table file to a table.

use super::BaseFile;
use super::affine;
use super::faults::{self, Layout};
use super::names::{Names, Parameter};
use super::outline;
use super::rings::{self, WrittenRing};
use super::source::{Outcome, Source, Value, array, kind, number};
use crate::number::adjoin::AdjoinFault;
use crate::number::{Field, Real};
use crate::table::expression::Evaluator;
use crate::table::facts::facts;
use crate::table::summary::summary;
use crate::table::triangulation::triangulate;
use crate::table::{MOST_SIDES, Ring, Table, shape};
use rug::Rational;
use std::ops::Range;
use std::path::PathBuf;
use toml::Spanned;
use toml::de::DeTable;

const SHAPES: [&str; 5] = ["corners", "triangle", "regular", "outline", "base"];
const KEYS: [&str; 15] = [
    "title",
    "about",
    "corners",
    "triangle",
    "regular",
    "outline",
    "base",
    "mirror",
    "stretch",
    "turn",
    "sides",
    "form",
    "holes",
    "define",
    "parameters",
];

/// A file that is being read.
#[derive(Clone, Debug)]
pub(crate) struct Link {
    /// Where it is.
    pub(crate) place: PathBuf,
    /// Its name as given.
    pub(crate) name: String,
    /// The names of its parameters, once they are read.
    pub(crate) parameters: Vec<String>,
}

/// The files that are being read, the outermost first.
pub(super) type Chain = Vec<Link>;

/// A parsed file with its names.
#[derive(Clone, Copy)]
pub(super) struct Sheet<'a> {
    pub(super) source: Source<'a>,
    pub(super) document: &'a DeTable<'a>,
    pub(super) names: &'a Names,
}

impl Sheet<'_> {
    /// An evaluator that starts in a field and knows the names of the file.
    pub(super) fn evaluator(&self, field: Field) -> Outcome<Evaluator> {
        self.names.evaluator(self.source, self.document, field)
    }
}

/// An outline, perhaps with holes, that has been read, with the evaluator whose field holds it.
pub(super) struct Drawn {
    pub(super) evaluator: Evaluator,
    pub(super) rings: Vec<WrittenRing>,
    pub(super) form: Real,
    pub(super) form_span: Option<Range<usize>>,
    /// The files that it stands on, the nearest first.
    pub(super) bases: Vec<BaseFile>,
    /// The parameters of those files that settings can reach.
    pub(super) base_parameters: Vec<Parameter>,
}

/// What a file gives.
pub(super) struct Reading {
    pub(super) table: Table,
    pub(super) parameters: Vec<Parameter>,
    pub(super) bases: Vec<BaseFile>,
}

/// Reads and checks a table.
pub(super) fn table(
    file: &str,
    text: &str,
    stem: &str,
    settings: &[String],
    chain: &Chain,
) -> Outcome<Reading> {
    let source = Source { file, text };
    let document = DeTable::parse(text).map_err(|e| {
        let message = format!("this is not valid TOML: {}", e.message());
        let help = "check the quotes, brackets and commas here; a line reads `key = value`";
        source.diagnostic(&e.span().unwrap_or(0..0), message, help)
    })?;
    let document = document.into_inner();
    check_keys(source, &document)?;
    let title = title(source, &document, stem)?;
    let (own, outer) = chain.split_last().expect("the file that is read");
    let names = Names::read(source, &document, settings, outer)?;
    let mut chain = outer.to_vec();
    chain.push(Link {
        parameters: names.parameters().into_iter().map(|p| p.name).collect(),
        ..own.clone()
    });
    let sheet = Sheet {
        source,
        document: &document,
        names: &names,
    };
    let shape = shape_key(&document);
    let mut drawn = source.affordable(&shape, "reading this shape", || draw(sheet, &chain))?;
    let bases = std::mem::take(&mut drawn.bases);
    let mut parameters = names.parameters();
    let reached = std::mem::take(&mut drawn.base_parameters);
    parameters.extend(reached.into_iter().filter(|p| !names.has(&p.name)));
    let table = source.affordable(&shape, "checking these corners", || {
        complete(sheet, &title, drawn)
    })?;
    Ok(Reading {
        table,
        parameters,
        bases,
    })
}

/// The place of the first shape.
fn shape_key(document: &DeTable) -> Range<usize> {
    let keys = document.keys();
    let shapes = keys.filter(|key| SHAPES.contains(&key.get_ref().as_ref()));
    shapes
        .map(Spanned::span)
        .min_by_key(|span| span.start)
        .unwrap_or(0..0)
}

/// See [`super::rehearse`].
pub(super) fn rehearse(file: &str, text: &str, table: &Table) -> Outcome<()> {
    let source = Source { file, text };
    let shape = DeTable::parse(text).map_or(0..0, |document| shape_key(document.get_ref()));
    source.affordable(&shape, "proving the facts about this table", || {
        triangulate(table);
        summary(table, &facts(table));
        Ok(())
    })
}

/// Reads the one shape of the file.
fn draw(sheet: Sheet<'_>, chain: &Chain) -> Outcome<Drawn> {
    let Sheet {
        source, document, ..
    } = sheet;
    let mut chosen: Vec<_> = SHAPES
        .into_iter()
        .filter_map(|shape| document.get_key_value(shape))
        .collect();
    chosen.sort_by_key(|(key, _)| key.span().start);
    let [(key, value)] = chosen[..] else {
        if chosen.is_empty() {
            let help = "add `corners = [[\"0\", \"0\"], ...]`, `triangle = [\"1\", \"2\", \"4\"]`, `regular = 7`, `outline = ...` or `base = ...`";
            return source.fault(&(0..0), "the file describes no table", help);
        }
        let names: Vec<String> = chosen
            .iter()
            .map(|(key, _)| format!("`{}`", key.get_ref()))
            .collect();
        let message = format!("{} describe the table more than once", names.join(" and "));
        let known: Vec<String> = SHAPES.iter().map(|shape| format!("`{shape}`")).collect();
        let help = format!("keep exactly one of {}", known.join(", "));
        return source.fault(&chosen[1].0.span(), message, help);
    };
    let shape = key.get_ref().as_ref();
    if let Some((form, _)) = document.get_key_value("form")
        && shape != "corners"
    {
        let message = format!("`form` goes with `corners`, not with `{shape}`");
        let help = format!("remove this line: `{shape}` chooses the plane form itself");
        return source.fault(&form.span(), message, help);
    }
    let keys = document
        .keys()
        .find(|k| affine::MAPS.contains(&k.get_ref().as_ref()));
    if let Some(map) = keys.filter(|_| shape != "base") {
        let message = format!("`{}` goes with `base`, not with `{shape}`", map.get_ref());
        let help = "write the shape into a file of its own and name that as `base`";
        return source.fault(&map.span(), message, help);
    }
    match shape {
        "corners" => corners(sheet, key.span(), value),
        "triangle" => triangle(sheet, value),
        "regular" => regular(sheet, value),
        "outline" => outline::outline(sheet, key.span(), value),
        "base" => affine::base(sheet, value, chain),
        _ => unreachable!("one of the shapes"),
    }
}

/// Adds letters and holes to an outline, brings all numbers into one field, and checks the table.
fn complete(sheet: Sheet<'_>, title: &str, drawn: Drawn) -> Outcome<Table> {
    let Sheet {
        source, document, ..
    } = sheet;
    let Drawn {
        mut evaluator,
        mut rings,
        form,
        form_span,
        ..
    } = drawn;
    rings::read_letters(source, document, &mut rings[0], 0)?;
    let first = rings.len();
    rings.extend(rings::holes(source, &mut evaluator, document, first)?);
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

fn corners(sheet: Sheet<'_>, key: Range<usize>, value: &Value) -> Outcome<Drawn> {
    let Sheet {
        source, document, ..
    } = sheet;
    let mut evaluator = sheet.evaluator(Field::rationals())?;
    let ring = rings::corners(source, &mut evaluator, &key, value, 0)?;
    let form = match document.get("form") {
        Some(form) => number(source, &mut evaluator, form, "the plane form")?,
        None => Real::from(1),
    };
    Ok(Drawn {
        evaluator,
        rings: vec![ring],
        form,
        form_span: document.get("form").map(Value::span),
        bases: Vec::new(),
        base_parameters: Vec::new(),
    })
}

/// A shape that the program draws, in a field of its own.
fn shaped(
    sheet: Sheet<'_>,
    value: &Value,
    shape: Result<shape::Shape, AdjoinFault>,
) -> Outcome<Drawn> {
    let shape = shape.map_err(|fault| {
        let help = "the field of its cosines is too large; choose angles with a smaller common denominator";
        sheet.source.diagnostic(&value.span(), format!("this shape cannot be used: {fault}"), help)
    })?;
    let numbers = shape.corners.iter().flat_map(|c| [&c.x, &c.y]);
    let field = numbers
        .chain([&shape.form])
        .map(Real::field)
        .find(|field| !field.is_rational())
        .cloned();
    Ok(Drawn {
        evaluator: sheet.evaluator(field.unwrap_or_else(Field::rationals))?,
        rings: vec![WrittenRing {
            spans: vec![value.span(); shape.corners.len()],
            corners: shape.corners,
            all: value.span(),
            letters: None,
            letter_spans: Vec::new(),
        }],
        form: shape.form,
        form_span: None,
        bases: Vec::new(),
        base_parameters: Vec::new(),
    })
}

fn triangle(sheet: Sheet<'_>, value: &Value) -> Outcome<Drawn> {
    let source = sheet.source;
    let help = "write three numbers, such as `triangle = [\"1\", \"2\", \"4\"]`: the angles are in proportion \
                to them";
    let items = array(source, value, "`triangle`", help)?;
    if items.len() != 3 {
        let message = format!("a triangle has 3 angles, here are {}", items.len());
        return source.fault(&value.span(), message, help);
    }
    let mut proportions: [Rational; 3] = Default::default();
    let mut evaluator = sheet.evaluator(Field::rationals())?;
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
    shaped(sheet, value, shape::triangle(&proportions))
}

fn regular(sheet: Sheet<'_>, value: &Value) -> Outcome<Drawn> {
    let source = sheet.source;
    let count = number(
        source,
        &mut sheet.evaluator(Field::rationals())?,
        value,
        "the number of corners",
    )?;
    let whole = count
        .to_rational()
        .filter(|c| c.is_integer())
        .and_then(|c| c.numer().to_u32());
    match whole.filter(|k| (3..=MOST_SIDES as u32).contains(k)) {
        Some(k) => shaped(sheet, value, shape::regular(k)),
        None => source.fault(
            &value.span(),
            "the number of corners of a regular polygon is out of range",
            format!("write an integer from 3 to {MOST_SIDES}, such as `regular = 7`"),
        ),
    }
}
