//! Factor graphs as DOT, as a list of edges and as lists of successors, written word by word.
//!
//! Vertices are numbered in the order of their words; every format names them by these numbers and gives the word,
//! the numbers of extensions, and the letter of each arc as attributes. DOT is that of Graphviz
//! (<https://graphviz.org/doc/info/lang.html>): all attribute values are quoted, `"` and `\` escaped.

use super::export::spell;
use crate::language::{Language, WordId};
use serde::ser::{SerializeMap, SerializeSeq};
use serde::{Serialize, Serializer};
use std::io::{self, Write};

/// Writes Γ_order as DOT.
///
/// # Errors
/// Those of the writer.
///
/// # Panics
/// Unless the language reaches length `order + 1`.
pub fn write_dot(
    language: &Language,
    order: usize,
    letters: &[char],
    out: &mut dyn Write,
) -> io::Result<()> {
    let left = language.left_extension_counts(order);
    let right = language.right_extension_counts(order);
    writeln!(out, "digraph order{order} {{")?;
    for v in 0..language.count(order) {
        let word = quoted(&spell(language, order, v as WordId, letters));
        writeln!(
            out,
            "  v{v} [label={word}, left_extensions=\"{}\", right_extensions=\"{}\"];",
            left[v], right[v]
        )?;
    }
    for arc in 0..language.count(order + 1) as WordId {
        let (from, to) = ends(language, order, arc);
        let letter = letters[language.last_letter(order + 1, arc) as usize];
        let letter = quoted(&letter.to_string());
        writeln!(out, "  v{from} -> v{to} [label={letter}];")?;
    }
    writeln!(out, "}}")
}

fn quoted(text: &str) -> String {
    format!("\"{}\"", text.replace('\\', "\\\\").replace('"', "\\\""))
}

fn ends(language: &Language, order: usize, arc: WordId) -> (WordId, WordId) {
    (
        language.prefix(order + 1, arc),
        language.suffix(order + 1, arc),
    )
}

/// Writes the arcs of Γ_order as CSV: source, target, letter, source_word, target_word.
///
/// # Errors
/// Those of the writer.
///
/// # Panics
/// Unless the language reaches length `order + 1`.
pub fn write_edges(
    language: &Language,
    order: usize,
    letters: &[char],
    out: &mut dyn Write,
) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(["source", "target", "letter", "source_word", "target_word"])?;
    for arc in 0..language.count(order + 1) as WordId {
        let (from, to) = ends(language, order, arc);
        let letter = letters[language.last_letter(order + 1, arc) as usize];
        csv.write_record([
            from.to_string(),
            to.to_string(),
            letter.to_string(),
            spell(language, order, from, letters),
            spell(language, order, to, letters),
        ])?;
    }
    csv.flush()
}

/// Writes Γ_order as one JSON object: `order`, `words`, and for each word its `successors` (numbers of words) and the
/// `letters` of the arcs to them.
///
/// # Errors
/// Those of the writer.
///
/// # Panics
/// Unless the language reaches length `order + 1`.
pub fn write_adjacency(
    language: &Language,
    order: usize,
    letters: &[char],
    out: &mut dyn Write,
) -> io::Result<()> {
    let mut json = serde_json::Serializer::new(&mut *out);
    let mut map = json.serialize_map(Some(5))?;
    map.serialize_entry("schema", "reboundary-adjacency/1")?;
    map.serialize_entry("order", &order)?;
    let vertices = language.count(order) as WordId;
    map.serialize_entry(
        "words",
        &Each(vertices, |v| spell(language, order, v, letters)),
    )?;
    let arcs = |v| language.extensions(order, v);
    map.serialize_entry(
        "successors",
        &Each(vertices, |v| {
            let targets = arcs(v).map(|arc| language.suffix(order + 1, arc));
            targets.collect::<Vec<WordId>>()
        }),
    )?;
    map.serialize_entry(
        "letters",
        &Each(vertices, |v| {
            let labels = arcs(v).map(|arc| letters[language.last_letter(order + 1, arc) as usize]);
            labels.collect::<Vec<char>>()
        }),
    )?;
    SerializeMap::end(map)?;
    out.write_all(b"\n")
}

/// A list that is made while it is written.
struct Each<F>(WordId, F);

impl<T: Serialize, F: Fn(WordId) -> T> Serialize for Each<F> {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        let mut list = serializer.serialize_seq(Some(self.0 as usize))?;
        for v in 0..self.0 {
            list.serialize_element(&(self.1)(v))?;
        }
        list.end()
    }
}
