//! Checking a certificate without trusting the program that made it.
//!
//! This module shares with the rest of the library exact numbers and the file format, nothing else. It reads a table from
//! the certificate, checks that it is a polygon with the triangulation that is stated, and then:
//!
//! - *An orbit is followed* for every word that is said to be in the language.
//! - *A language is complete* when the measures of its cylinders add up to 2·perimeter. The cylinders of different words
//!   are disjoint open sets of lines that enter the table, and all those lines together have that measure; a missing
//!   word's cylinder, being open, would leave a gap. The sum is proved without a single root: each measure is a sum of
//!   terms, each an element of the field times a length that its line alone determines. Line by line the elements are
//!   added up exactly, and they must cancel, except along the sides of the table, where they must give the sides.
//! - *A word is outside the language* when every way that its lines could take is closed by a refutation: corner images
//!   that should be on the left of the line, and others that should be on its right, with a point of their convex hulls
//!   in common. No line has one hull on its left and the other on its right, both strictly (Kirchberger, Math. Ann. 57
//!   (1903), has the converse: if there is no line at all, four of the points show it).
//!
//! Cost: for a language of words of length N about Σ p(n) cuts of cells in exact numbers, and N exact bounces for each
//! witness. Memory: one number of the field for each line along which the sum has not cancelled, about p(N).

pub(super) mod cells;
pub(super) mod plane;
mod trace;

use super::format::{End, Entry, Header, Kind, PLACES, Refutation, SCHEMA, Witness};
use crate::number::{Enclosure, Field, Real, Sign};
use cells::{Conditions, Line, Way};
use plane::{Plane, number, rational};
use rug::{Integer, Rational};
use std::collections::HashMap;
use std::io::BufRead;
use thiserror::Error;

/// What a certificate proves.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Verdict {
    /// The header: the table that it is about.
    pub header: Header,
    /// For a language: p(1), p(2), …, proved. Otherwise empty.
    pub complexity: Vec<u64>,
    /// Words proved to be in the language.
    pub inside: u64,
    /// Words proved to be outside.
    pub outside: u64,
}

/// Why a certificate was rejected.
#[derive(Debug, Error)]
pub enum Rejection {
    /// The file cannot be read.
    #[error("{0}")]
    Reading(#[from] std::io::Error),
    /// A line is not what the format says.
    #[error("line {line}: {reason}")]
    Line {
        /// Its number, from 1.
        line: u64,
        /// What is wrong.
        reason: String,
    },
    /// The table is none.
    #[error("line 1: the table is not valid: {0}")]
    Table(String),
    /// The measures do not add up.
    #[error(
        "the words are not complete: the measures of their cylinders do not add up to 2·perimeter ({lines} lines are left over)"
    )]
    Incomplete {
        /// How many lines have a sum that is not what it should be.
        lines: usize,
    },
}

/// Reads a certificate and checks all that it claims.
///
/// # Errors
/// The first fault found.
pub fn verify(input: impl BufRead) -> Result<Verdict, Rejection> {
    let mut lines = (1u64..).zip(input.lines());
    let fault = |line: u64, reason: &str| Rejection::Line {
        line,
        reason: reason.into(),
    };
    let (_, first) = lines.next().ok_or_else(|| fault(1, "the file is empty"))?;
    let header: Header = serde_json::from_str(&first?).map_err(|e| {
        let reason = format!("this is no certificate; `reboundary certify` makes one ({e})");
        fault(1, &reason)
    })?;
    if header.schema != SCHEMA {
        return Err(fault(1, &format!("the schema is not {SCHEMA}")));
    }
    if (header.kind == Kind::Language) != header.length.is_some_and(|length| length > 0) {
        return Err(fault(
            1,
            "a language, and nothing else, has a positive length",
        ));
    }
    let plane = Plane::read(&header)?;
    let mut verdict = Verdict {
        header,
        complexity: Vec::new(),
        inside: 0,
        outside: 0,
    };
    let mut language = Completeness::new(&plane);
    let mut ended = false;
    for (line, text) in lines {
        let text = text?;
        if ended {
            return Err(fault(line, "there is more after the end"));
        }
        let stated = verdict.inside + verdict.outside;
        if let Ok(End { entries }) = serde_json::from_str(&text) {
            if entries != stated {
                return Err(fault(
                    line,
                    &format!("{entries} entries are announced, {stated} are there"),
                ));
            }
            ended = true;
            continue;
        }
        let entry: Entry = parse(line, &text)?;
        let at_line = |reason: String| Rejection::Line { line, reason };
        let word = plane
            .word(&entry.word)
            .ok_or_else(|| fault(line, "the word has an unknown letter"))?;
        let inside = check_entry(&plane, &entry, &word).map_err(at_line)?;
        if let Some(length) = verdict.header.length {
            if word.len() != length || !inside {
                return Err(fault(
                    line,
                    "a language lists words of its length that are in it",
                ));
            }
            language
                .add(&plane, &word, entry.measure.as_deref())
                .map_err(at_line)?;
        } else if let (true, Some(stated)) = (inside, &entry.measure) {
            let ways = ways_of(&plane, &word);
            check_measure(&plane, &ways, stated).map_err(at_line)?;
        }
        if inside {
            verdict.inside += 1;
        } else {
            verdict.outside += 1;
        }
    }
    if !ended {
        return Err(fault(
            verdict.inside + verdict.outside + 1,
            "the file stops here: its end is missing",
        ));
    }
    if verdict.header.kind == Kind::Language {
        language.finish()?;
        verdict.complexity = language.complexity;
    }
    Ok(verdict)
}

/// Reads a number of the table's field as the format writes it.
pub fn read_number(field: &Field, text: &str) -> Option<Real> {
    number(field, text)
}

fn parse<T: serde::de::DeserializeOwned>(line: u64, text: &str) -> Result<T, Rejection> {
    serde_json::from_str(text).map_err(|e| Rejection::Line {
        line,
        reason: e.to_string(),
    })
}

/// Checks one word; true when it is in the language.
fn check_entry(plane: &Plane, entry: &Entry, word: &[usize]) -> Result<bool, String> {
    let inside = entry.prefix.is_none();
    let reached = entry.prefix.unwrap_or(word.len());
    if reached > word.len() || (!inside && reached == word.len()) {
        return Err("the prefix is not shorter than the word".into());
    }
    match &entry.witness {
        Some(witness) => check_witness(plane, witness, &word[..reached])?,
        None if reached == 0 => {}
        None => return Err("there is no orbit for the word".into()),
    }
    if inside {
        return if entry.refutations.is_empty() {
            Ok(true)
        } else {
            Err("a word of the language is refuted".into())
        };
    }
    check_refutations(plane, &entry.refutations, &word[..reached + 1])?;
    Ok(false)
}

fn check_witness(plane: &Plane, witness: &Witness, word: &[usize]) -> Result<(), String> {
    let start = rational(&witness.start).ok_or("the start is not a rational number")?;
    let aim: Option<Vec<Rational>> = witness.aim.iter().map(|c| rational(c)).collect();
    let aim = aim.ok_or("the aim cannot be read")?;
    let aim = [Real::from(aim[0].clone()), Real::from(aim[1].clone())];
    match trace::word(plane, witness.side, &start, &aim, word.len()) {
        Some(traced) if traced == word => Ok(()),
        Some(_) => Err("the orbit has another word".into()),
        None => Err("the orbit meets a corner, or its start is not valid".into()),
    }
}

/// Every way of the word must be closed by a refutation.
fn check_refutations(
    plane: &Plane,
    refutations: &[Refutation],
    word: &[usize],
) -> Result<(), String> {
    let mut open = vec![];
    let sound = |way: &Conditions| !refutations.iter().any(|r| refutes(plane, r, way));
    for (n, letter) in word.iter().enumerate() {
        open = match n {
            0 => Conditions::starts(plane, *letter),
            _ => open
                .iter()
                .flat_map(|way: &Conditions| way.longer(plane, *letter))
                .collect(),
        };
        open.retain(sound);
    }
    if open.is_empty() {
        Ok(())
    } else {
        Err(format!("{} ways of the word are not refuted", open.len()))
    }
}

/// True when the refutation is valid and about images that the lines of this way must pass as it says.
fn refutes(plane: &Plane, refutation: &Refutation, way: &Conditions) -> bool {
    let mut sums = [Real::from(0), Real::from(0), Real::from(0)];
    if refutation.pins.is_empty() {
        return false;
    }
    for pin in &refutation.pins {
        if !way.demand(&(pin.crossings, pin.corner, pin.left)) {
            return false;
        }
        let weight = number(&plane.field, &pin.weight);
        let Some(weight) = weight.filter(|w| w.sign() == Sign::Positive) else {
            return false;
        };
        let [x, y] = way.image(plane, pin.crossings, pin.corner);
        let weight = if pin.left { weight } else { -weight };
        sums[0] += &weight * &x;
        sums[1] += &weight * &y;
        sums[2] += weight;
    }
    sums.iter().all(Real::is_zero)
}

/// The ways of words of n + 1 letters.
fn longer(plane: &Plane, ways: &[Way], n: usize, letter: usize) -> Vec<Way> {
    let each = ways.iter();
    each.flat_map(|way| cells::longer(plane, way, n - 1, letter, |_, _| {}))
        .collect()
}

fn ways_of(plane: &Plane, word: &[usize]) -> Vec<Way> {
    let mut ways = Vec::new();
    for (n, letter) in word.iter().enumerate() {
        ways = match n {
            0 => cells::starts(plane, *letter),
            _ => longer(plane, &ways, n, *letter),
        };
    }
    ways
}

/// The stated measure is the exact one, cut off.
fn check_measure(plane: &Plane, ways: &[Way], stated: &str) -> Result<(), String> {
    let (whole, places) = stated
        .split_once('.')
        .ok_or("the measure is not a decimal")?;
    if places.len() != PLACES as usize {
        return Err(format!("the measure needs {PLACES} places"));
    }
    let digits: String = [whole, places].concat();
    if !digits.bytes().all(|b| b.is_ascii_digit()) {
        return Err("the measure is not a decimal".into());
    }
    let stated: Integer = digits.parse().map_err(|_| "the measure is not a decimal")?;
    let scale = Integer::from(Integer::u_pow_u(10, PLACES));
    // An exact decimal never settles: then both neighbours of the bounds are as good.
    for precision in [192, 512, 2048] {
        let sum = enclosed(plane, ways, precision);
        let cut = |bound: &rug::Float| {
            let exact = bound.to_rational().expect("finite") * &scale;
            Integer::from(exact.floor_ref())
        };
        let (low, high) = (cut(sum.lo()), cut(sum.hi()));
        if low == high || precision == 2048 {
            return if stated == low || stated == high {
                Ok(())
            } else {
                Err("the measure is another one".into())
            };
        }
    }
    unreachable!("the last precision decides")
}

fn enclosed(plane: &Plane, ways: &[Way], precision: u32) -> Enclosure {
    let mut sum = Enclosure::zero(precision);
    for (line, part) in ways.iter().flat_map(|way| way.cell.terms()) {
        let root = line
            .unit_square(plane)
            .enclosure_within(2 * precision)
            .sqrt();
        sum.add_assign(&root.mul(&part.enclosure_within(2 * precision)));
    }
    sum
}

/// The words of a language as they come: their order, their prefixes, and the sum of their measures.
struct Completeness {
    last: Vec<usize>,
    /// The ways of each prefix of the last word, by length.
    ways: Vec<Vec<Way>>,
    complexity: Vec<u64>,
    /// What is still missing from the whole, by the side that lines start on and the line.
    missing: HashMap<(usize, Line), Real>,
}

impl Completeness {
    fn new(plane: &Plane) -> Completeness {
        Completeness {
            last: Vec::new(),
            ways: Vec::new(),
            complexity: Vec::new(),
            missing: cells::whole(plane),
        }
    }

    fn add(&mut self, plane: &Plane, word: &[usize], measure: Option<&str>) -> Result<(), String> {
        if !self.last.is_empty() && self.last.as_slice() >= word {
            return Err("the words are not in the order of the letters, each once".into());
        }
        let shared = self
            .last
            .iter()
            .zip(word)
            .take_while(|(a, b)| a == b)
            .count();
        self.ways.truncate(shared);
        self.complexity.resize(word.len(), 0);
        for n in shared..word.len() {
            let ways = match n {
                0 => cells::starts(plane, word[0]),
                _ => longer(plane, &self.ways[n - 1], n, word[n]),
            };
            self.ways.push(ways);
            self.complexity[n] += 1;
        }
        let ways = &self.ways[word.len() - 1];
        check_measure(plane, ways, measure.ok_or("the measure is missing")?)?;
        for way in ways {
            for (line, part) in way.cell.terms() {
                let key = (way.start, line);
                let left = match self.missing.remove(&key) {
                    Some(left) => left - part,
                    None => -part,
                };
                if !left.is_zero() {
                    self.missing.insert(key, left);
                }
            }
        }
        self.last = word.to_vec();
        Ok(())
    }

    fn finish(&self) -> Result<(), Rejection> {
        if self.missing.is_empty() {
            Ok(())
        } else {
            Err(Rejection::Incomplete {
                lines: self.missing.len(),
            })
        }
    }
}
