//! Corners, holes and letters of a table file.

use super::source::{Outcome, Source, Value, array, kind, number};
use crate::number::Real;
use crate::table::diagnostic::Diagnostic;
use crate::table::expression::Evaluator;
use crate::table::{MOST_SIDES, Vector, default_letters};
use std::ops::Range;
use toml::Spanned;
use toml::de::{DeTable, DeValue};

/// A ring as it stands in the file.
#[derive(Clone, Debug)]
pub(super) struct WrittenRing {
    /// The corners.
    pub(super) corners: Vec<Vector>,
    /// The span of each corner.
    pub(super) spans: Vec<Range<usize>>,
    /// The span of the whole ring.
    pub(super) all: Range<usize>,
    /// The letters, when the file names them.
    pub(super) letters: Option<Vec<char>>,
    /// The span of each letter that the file names.
    pub(super) letter_spans: Vec<Range<usize>>,
}

/// " of hole 1" for corners and sides of holes, nothing for those of the outline.
pub(super) fn of_ring(ring: usize) -> String {
    match ring.checked_sub(1) {
        None => String::new(),
        Some(hole) => format!(" of hole {hole}"),
    }
}

/// Reads pairs of coordinates; `ring` 0 is the outline, others are holes.
pub(super) fn corners(
    source: Source,
    evaluator: &mut Evaluator,
    key: &Range<usize>,
    value: &Value,
    ring: usize,
) -> Outcome<WrittenRing> {
    let example = "write `corners = [[\"0\", \"0\"], [\"1\", \"0\"], [\"0\", \"1\"]]`";
    let items = array(source, value, "`corners`", example)?;
    // Before the numbers are evaluated: the count bounds the work.
    if items.len() < 3 || items.len() > MOST_SIDES {
        let what = match ring.checked_sub(1) {
            None => "a table".to_string(),
            Some(hole) => format!("hole {hole} (counting from 0): a hole"),
        };
        let message = format!(
            "{what} has from 3 to {MOST_SIDES} corners, this one has {}",
            items.len()
        );
        return source.fault(
            key,
            message,
            "write one pair of coordinates for each corner",
        );
    }
    let mut corners = Vec::new();
    for (i, item) in items.iter().enumerate() {
        let help = "write a pair of numbers, such as `[\"1\", \"1/2\"]`";
        let what = format!("corner {i}{} (counting from 0)", of_ring(ring));
        let pair = array(source, item, &what, help)?;
        if pair.len() != 2 {
            let message = format!("{what} must have 2 coordinates, here are {}", pair.len());
            return source.fault(&item.span(), message, help);
        }
        let x = number(
            source,
            evaluator,
            &pair[0],
            &format!("the first coordinate of {what}"),
        )?;
        let y = number(
            source,
            evaluator,
            &pair[1],
            &format!("the second coordinate of {what}"),
        )?;
        corners.push(Vector::new(x, y));
    }
    Ok(WrittenRing {
        corners,
        spans: items.iter().map(Spanned::span).collect(),
        all: key.clone(),
        letters: None,
        letter_spans: Vec::new(),
    })
}

/// Reads `[[holes]]`; the first of them has this number among the rings.
pub(super) fn holes(
    source: Source,
    evaluator: &mut Evaluator,
    document: &DeTable,
    first: usize,
) -> Outcome<Vec<WrittenRing>> {
    let Some((key, value)) = document.get_key_value("holes") else {
        return Ok(Vec::new());
    };
    let example = "write each hole as `[[holes]]` with a line `corners = [...]` below it";
    let items = array(source, value, "`holes`", example)?;
    let mut holes: Vec<WrittenRing> = Vec::new();
    for (hole, item) in (first - 1..).zip(items) {
        let DeValue::Table(table) = item.get_ref() else {
            let message = format!(
                "hole {hole} (counting from 0) must be a table of keys, this is {}",
                kind(item.get_ref())
            );
            return source.fault(&item.span(), message, example);
        };
        let mut keys: Vec<_> = table.keys().collect();
        keys.sort_by_key(|key| key.span().start);
        if let Some(unknown) = keys
            .iter()
            .find(|k| !["corners", "sides"].contains(&k.get_ref().as_ref()))
        {
            let message = format!(
                "unknown key `{}` in hole {hole} (counting from 0)",
                unknown.get_ref()
            );
            let help = "a hole has `corners` and, if you like, `sides`";
            return source.fault(&unknown.span(), message, help);
        }
        let Some((corners_key, corners_value)) = table.get_key_value("corners") else {
            let message = format!("hole {hole} (counting from 0) has no `corners`");
            let span = if item.span().is_empty() {
                key.span()
            } else {
                item.span()
            };
            return source.fault(&span, message, example);
        };
        let total = |holes: &[WrittenRing]| holes.iter().map(|h| h.corners.len()).sum::<usize>();
        let mut ring = corners(
            source,
            evaluator,
            &corners_key.span(),
            corners_value,
            hole + 1,
        )?;
        read_letters(source, table, &mut ring, hole + 1)?;
        holes.push(ring);
        if total(&holes) > MOST_SIDES {
            let message = format!("the holes together have more than {MOST_SIDES} corners");
            return source.fault(
                &corners_key.span(),
                message,
                "use fewer holes or fewer corners",
            );
        }
    }
    Ok(holes)
}

/// Reads `sides`, the letters of a ring, when they are there.
pub(super) fn read_letters(
    source: Source,
    table: &DeTable,
    ring: &mut WrittenRing,
    number: usize,
) -> Outcome<()> {
    let Some(value) = table.get("sides") else {
        return Ok(());
    };
    let count = ring.corners.len();
    let of = of_ring(number);
    let help = "write one character for each side, such as `sides = [\"a\", \"b\", \"c\"]`";
    let items = array(source, value, "`sides`", help)?;
    let mut letters = Vec::new();
    for (i, item) in items.iter().enumerate() {
        let Some(text) = item.get_ref().as_str() else {
            let message = format!(
                "the letter of side {i}{of} must be a string, this is {}",
                kind(item.get_ref())
            );
            return source.fault(&item.span(), message, help);
        };
        let mut characters = text.chars();
        let (Some(letter), None) = (characters.next(), characters.next()) else {
            let message = format!(
                "the letter of side {i}{of} must be one character, this is {}",
                text.chars().count()
            );
            return source.fault(&item.span(), message, help);
        };
        if !is_letter(letter) {
            let message = format!(
                "`{}` cannot be the letter of side {i}{of}",
                letter.escape_debug()
            );
            let help = "choose a printable character that is no space, comma or quote";
            return source.fault(&item.span(), message, help);
        }
        letters.push(letter);
    }
    if letters.len() != count {
        let message = format!("{} letters for {count} sides{of}", letters.len());
        return source.fault(&value.span(), message, help);
    }
    ring.letter_spans = items.iter().map(Spanned::span).collect();
    ring.letters = Some(letters);
    Ok(())
}

/// Gives the rings without letters the first default letters that the file does not name.
pub(super) fn complete_letters(rings: &mut [WrittenRing]) {
    let named: Vec<char> = rings
        .iter()
        .flat_map(|r| r.letters.iter().flatten().copied())
        .collect();
    let mut free = default_letters(usize::MAX)
        .into_iter()
        .filter(|letter| !named.contains(letter));
    for ring in rings.iter_mut().filter(|ring| ring.letters.is_none()) {
        ring.letters = Some(free.by_ref().take(ring.corners.len()).collect());
    }
}

/// The fault of a table with too many corners in all, found before letters are given out.
pub(super) fn check_total(source: Source, rings: &[WrittenRing]) -> Outcome<()> {
    let count: usize = rings.iter().map(|ring| ring.corners.len()).sum();
    if count <= MOST_SIDES {
        return Ok(());
    }
    let last = &rings[rings.len() - 1];
    let found: Box<Diagnostic> = source.diagnostic(
        &last.all,
        format!(
            "the table and its holes can have at most {MOST_SIDES} corners, these have {count}"
        ),
        "use fewer holes or fewer corners",
    );
    Err(found)
}

/// All numbers of the rings, to be brought into one field together.
pub(super) fn lift(evaluator: &Evaluator, rings: &mut [WrittenRing]) {
    let lifted = |number: &Real| evaluator.lift(number);
    for corner in rings.iter_mut().flat_map(|ring| &mut ring.corners) {
        *corner = Vector::new(lifted(&corner.x), lifted(&corner.y));
    }
}

/// Printable, and not one of the characters that separate words.
fn is_letter(c: char) -> bool {
    // What Debug escapes is not printable, or joins the character before.
    let printable = c == '\\' || c.escape_debug().count() == 1;
    printable && !c.is_whitespace() && !",\"'`".contains(c)
}
