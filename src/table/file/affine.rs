//! `base`: an affine image of the table of another file.
//!
//! The image is made by `mirror` (second coordinates change their sign), then `stretch` (both coordinates times
//! positive numbers), then `turn` (a rotation, in units of π, about the origin). With the plane form g of the
//! base the rotation by θ takes (x, y) to (cx − σy, (σ/g)x + cy), where c = cos θ and σ = √g·sin θ.

use super::outline::within_a_turn;
use super::read::{Chain, Drawn, Sheet};
use super::rings::WrittenRing;
use super::source::{Outcome, Value, array, kind, number};
use super::{BaseFile, LoadedTable, TableFileError, load_in};
use crate::number::{Real, Sign};
use crate::table::expression::{Evaluator, ExpressionFault};
use crate::table::{SideId, Vector};
use rug::Rational;
use std::path::Path;
use toml::de::{DeTable, DeValue};

/// The keys that go with `base`.
pub(super) const MAPS: [&str; 3] = ["mirror", "stretch", "turn"];

/// The most files that may stand on each other.
const LONGEST_CHAIN: usize = 16;

/// Reads the base and maps it.
pub(super) fn base(sheet: Sheet<'_>, value: &Value, chain: &Chain) -> Outcome<Drawn> {
    let base = base_file(sheet, value, chain)?;
    let table = &base.table;
    let mut evaluator = sheet.evaluator(table.field().clone())?;
    let mirrored = mirror(sheet)?;
    let stretch = stretch(sheet, &mut evaluator)?;
    let turn = turn(sheet, &mut evaluator, table.form())?;
    let form = evaluator.lift(table.form());
    let map = |corner: &Vector| {
        let (x, y) = (evaluator.lift(&corner.x), evaluator.lift(&corner.y));
        let y = if mirrored { -y } else { y };
        let [by_x, by_y] = stretch.each_ref().map(|factor| evaluator.lift(factor));
        let (x, y) = (x * by_x, y * by_y);
        let Some((cosine, sigma)) = &turn else {
            return Vector::new(x, y);
        };
        let (cosine, sigma) = (evaluator.lift(cosine), evaluator.lift(sigma));
        let slope = &sigma / &form;
        Vector::new(&cosine * &x - sigma * &y, slope * x + cosine * y)
    };
    let rings = table
        .rings()
        .map(|ring| WrittenRing {
            corners: ring.clone().map(|i| map(table.corner(i))).collect(),
            spans: vec![value.span(); ring.len()],
            all: value.span(),
            letters: Some(ring.map(|i| table.letter(SideId(i as u8))).collect()),
            letter_spans: Vec::new(),
        })
        .collect();
    Ok(Drawn {
        evaluator,
        rings,
        form,
        form_span: None,
        bases: bases_of(&base),
        base_parameters: base.parameters,
    })
}

/// The base's file and those that it stands on.
fn bases_of(base: &LoadedTable) -> Vec<BaseFile> {
    let mut bases = vec![BaseFile {
        name: base.file_name.clone(),
        text: base.text.clone(),
    }];
    bases.extend(base.bases.iter().cloned());
    bases
}

/// The files that a text stands on, the nearest first, as far as they can be followed without reading any number.
pub(super) fn named_bases(file: &str, text: &str) -> Vec<BaseFile> {
    let mut found: Vec<BaseFile> = Vec::new();
    let (mut file, mut text) = (file.to_string(), text.to_string());
    while found.len() < LONGEST_CHAIN {
        let Ok(document) = DeTable::parse(&text) else {
            break;
        };
        let named = document
            .get_ref()
            .get("base")
            .and_then(|value| value.get_ref().as_str().map(str::to_owned));
        let Some(named) = named else { break };
        let path = Path::new(&file)
            .parent()
            .unwrap_or(Path::new(""))
            .join(named);
        let Ok(next) = super::read_text(&path) else {
            break;
        };
        file = path.display().to_string();
        text.clone_from(&next);
        found.push(BaseFile {
            name: file.clone(),
            text: next,
        });
    }
    found
}

fn base_file(sheet: Sheet<'_>, value: &Value, chain: &Chain) -> Outcome<LoadedTable> {
    let source = sheet.source;
    let help =
        "write the path of a table file relative to this one, such as `base = \"square.toml\"`";
    let Some(name) = value.get_ref().as_str() else {
        let message = format!("`base` must be a string, this is {}", kind(value.get_ref()));
        return source.fault(&value.span(), message, help);
    };
    if name.trim().is_empty() {
        return source.fault(&value.span(), "`base` names no file", help);
    }
    let folder = Path::new(source.file).parent().unwrap_or(Path::new(""));
    let path = folder.join(name);
    let place = match path.canonicalize() {
        Ok(place) => place,
        Err(reason) => {
            let message = format!("cannot read the base table {}: {reason}", path.display());
            return source.fault(&value.span(), message, help);
        }
    };
    if let Some(at) = chain.iter().position(|link| link.place == place) {
        let mut names: Vec<&str> = chain[at..].iter().map(|link| link.name.as_str()).collect();
        names.push(names[0]);
        let message = format!("this table stands on itself: {}", names.join(" → "));
        let help = "let one of these files give its corners";
        return source.fault(&value.span(), message, help);
    }
    if chain.len() == LONGEST_CHAIN {
        let message = format!("more than {LONGEST_CHAIN} tables stand on each other");
        return source.fault(&value.span(), message, "give the corners of this table");
    }
    match load_in(&path, sheet.names.for_base(), chain) {
        Ok(loaded) => Ok(loaded),
        Err(TableFileError::Fault(mut fault)) => {
            // A fault in a setting stands on the command line.
            if fault.file != "--set" {
                fault.message = format!("in the base table of {}: {}", source.file, fault.message);
            }
            Err(fault)
        }
        Err(other) => {
            let message = format!("the base table cannot be used: {other}");
            source.fault(&value.span(), message, help)
        }
    }
}

fn get<'a>(document: &'a DeTable<'a>, key: &str) -> Option<&'a Value<'a>> {
    document.get(key)
}

fn mirror(sheet: Sheet<'_>) -> Outcome<bool> {
    match get(sheet.document, "mirror") {
        None => Ok(false),
        Some(value) => match value.get_ref() {
            DeValue::Boolean(mirror) => Ok(*mirror),
            other => {
                let message = format!("`mirror` must be true or false, this is {}", kind(other));
                sheet
                    .source
                    .fault(&value.span(), message, "write `mirror = true`")
            }
        },
    }
}

fn stretch(sheet: Sheet<'_>, evaluator: &mut Evaluator) -> Outcome<[Real; 2]> {
    let mut factors = [Real::from(1), Real::from(1)];
    let Some(value) = get(sheet.document, "stretch") else {
        return Ok(factors);
    };
    let help = "write two positive numbers, such as `stretch = [\"1\", \"sqrt(2)\"]`; `mirror = true` mirrors";
    let items = array(sheet.source, value, "`stretch`", help)?;
    if items.len() != 2 {
        let message = format!("`stretch` must have 2 numbers, here are {}", items.len());
        return sheet.source.fault(&value.span(), message, help);
    }
    for ((factor, item), name) in factors.iter_mut().zip(items).zip(["first", "second"]) {
        let what = format!("the {name} number of `stretch`");
        *factor = number(sheet.source, evaluator, item, &what)?;
        if factor.sign() != Sign::Positive {
            let message = format!("{what} must be positive, it is {}", factor.decimal(6));
            return sheet.source.fault(&item.span(), message, help);
        }
    }
    Ok(factors)
}

/// cos θ and √g·sin θ, unless the turn is a whole one.
fn turn(sheet: Sheet<'_>, evaluator: &mut Evaluator, form: &Real) -> Outcome<Option<(Real, Real)>> {
    let Some(value) = get(sheet.document, "turn") else {
        return Ok(None);
    };
    let angle = number(sheet.source, evaluator, value, "`turn`")?;
    let Some(angle) = angle.to_rational().map(within_a_turn) else {
        let message = "`turn` must be rational: it is in units of pi";
        let help = "write a rational number, such as `turn = \"1/4\"`";
        return sheet.source.fault(&value.span(), message, help);
    };
    if angle == 0 {
        return Ok(None);
    }
    let fault = |fault: ExpressionFault| {
        let message = format!("`turn`: {}", fault.message);
        let help = "turn by an angle with a smaller denominator";
        sheet.source.diagnostic(&value.span(), message, help)
    };
    let half = Rational::from(&angle / 2u32);
    let cosine = evaluator.cosine(&half).map_err(fault)?;
    let sigma = if *form == Real::from(1) {
        let quarter = Rational::from((1, 4));
        evaluator.cosine(&(quarter - half)).map_err(fault)?
    } else {
        let square = evaluator.lift(form) * (Real::from(1) - &cosine * &cosine);
        let root = evaluator.square_root(&square).map_err(fault)?;
        if angle < 1 { root } else { -root }
    };
    Ok(Some((evaluator.lift(&cosine), sigma)))
}
