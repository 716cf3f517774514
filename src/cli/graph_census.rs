//! The census of balls in the output of `graph`.

use super::fault::Fault;
use super::output::write_columns;
use crate::factor_graph::balls::{BallType, Census};
use crate::factor_graph::canonical::{Form, Kind};
use crate::figure::{Caption, SmallGraph, small_graphs_picture};
use crate::run::files::ResultFolder;
use serde::Serialize;
use std::io::{self, Write};

/// The file that tells a folder of these drawings.
pub const MARK: &str = "balls.csv";
/// Types drawn of each census.
const DRAWN: usize = 12;
/// The most characters of a code in text.
const LONGEST_CODE: usize = 72;

/// A census with its types spelled.
#[derive(Serialize)]
pub struct CensusRecord {
    order: usize,
    radius: usize,
    kind: Kind,
    words: u64,
    /// Words whose balls were looked at one by one.
    visited: u64,
    distance_to_line: f64,
    types: Vec<TypeRecord>,
}

#[derive(Serialize)]
struct TypeRecord {
    code: String,
    vertices: u16,
    arcs: usize,
    is_path: bool,
    count: u64,
}

impl CensusRecord {
    pub fn new(census: &Census, letters: &[char]) -> CensusRecord {
        let spelled = |t: &BallType| TypeRecord {
            code: t.form.code(letters),
            vertices: t.form.vertices,
            arcs: t.form.arcs.len(),
            is_path: t.is_path,
            count: t.count,
        };
        CensusRecord {
            order: census.order,
            radius: census.radius,
            kind: census.kind,
            words: census.words,
            visited: census.visited,
            distance_to_line: census.distance_to_line(),
            types: census.types.iter().map(spelled).collect(),
        }
    }
}

fn name(kind: Kind) -> &'static str {
    match kind {
        Kind::Plain => "plain",
        Kind::Oriented => "oriented",
        Kind::Labelled => "labelled",
    }
}

/// For people: the commonest types of each census.
pub fn write_text(all: &[CensusRecord], out: &mut dyn Write) -> io::Result<()> {
    for census in all {
        writeln!(
            out,
            "\nballs of radius {} in the {} factor graph of order {}: {} types, distance to the line {:.6}",
            census.radius,
            name(census.kind),
            census.order,
            census.types.len(),
            census.distance_to_line
        )?;
        let rows: Vec<Vec<String>> = census
            .types
            .iter()
            .take(DRAWN)
            .map(|t| {
                let share = format!("{:.6}", t.count as f64 / census.words as f64);
                let code = if t.is_path && census.kind != Kind::Labelled {
                    "path".to_string()
                } else if t.code.chars().count() > LONGEST_CODE {
                    let start: String = t.code.chars().take(LONGEST_CODE - 3).collect();
                    start + "..."
                } else {
                    t.code.clone()
                };
                vec![t.count.to_string(), share, code]
            })
            .collect();
        write_columns(out, &["words", "share", "type"], &rows)?;
        if census.types.len() > DRAWN {
            writeln!(out, "and {} more types", census.types.len() - DRAWN)?;
        }
    }
    Ok(())
}

/// A row for each type.
pub fn write_csv(all: &[CensusRecord], out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record([
        "order", "radius", "kind", "count", "is_path", "vertices", "arcs", "code",
    ])?;
    for census in all {
        for t in &census.types {
            csv.write_record([
                census.order.to_string(),
                census.radius.to_string(),
                name(census.kind).to_string(),
                t.count.to_string(),
                t.is_path.to_string(),
                t.vertices.to_string(),
                t.arcs.to_string(),
                t.code.clone(),
            ])?;
        }
    }
    csv.flush()
}

/// One sheet for each census: its commonest types.
pub fn write_drawings(all: &[Census], folder: &ResultFolder) -> Result<(), Fault> {
    for census in all {
        let drawn = census.types.iter().take(DRAWN).map(|t| SmallGraph {
            vertices: t.form.vertices as usize,
            arcs: drawn_arcs(&t.form),
            directed: census.kind != Kind::Plain,
            text: format!(
                "{} ({:.2} %)",
                t.count,
                100.0 * t.count as f64 / census.words as f64
            ),
        });
        let title = format!(
            "Balls of radius {}, {} factor graph of order {}",
            census.radius,
            name(census.kind),
            census.order
        );
        let description = format!(
            "The {} commonest of {} types, each with the number of words that have it. The word itself is the large dot.",
            census.types.len().min(DRAWN),
            census.types.len()
        );
        let graphs: Vec<SmallGraph> = drawn.collect();
        let svg = small_graphs_picture(&graphs, &Caption::new(title, description))
            .map_err(|e| Fault::Failed(e.to_string()))?;
        let file = format!("balls-{}-{}.svg", name(census.kind), census.radius);
        folder.write(&file, |out| out.write_all(svg.as_bytes()))?;
    }
    Ok(())
}

/// The arcs of a form. Those of a plain one get directions for the layout: the first half of the root's neighbours, and
/// what is found through them, to its left.
fn drawn_arcs(form: &Form) -> Vec<(usize, usize)> {
    let arcs = form.arcs.iter();
    let arcs: Vec<(usize, usize)> = arcs
        .map(|(from, to, _)| (*from as usize, *to as usize))
        .collect();
    if form.kind != Kind::Plain {
        return arcs;
    }
    let n = form.vertices as usize;
    let at_root = arcs.iter().filter(|(from, to)| *from == 0 && *to > 0);
    let half = at_root.count() / 2;
    // (distance from the root, to the left)
    let mut place = vec![None; n];
    place[0] = Some((0usize, false));
    let mut found = vec![0];
    let mut at = 0;
    while at < found.len() {
        let v = found[at];
        at += 1;
        let (distance, left) = place[v].unwrap_or_default();
        for &(a, b) in arcs.iter().filter(|(a, b)| *a == v || *b == v) {
            let next = if a == v { b } else { a };
            if place[next].is_none() {
                let left = if v == 0 { found.len() <= half } else { left };
                place[next] = Some((distance + 1, left));
                found.push(next);
            }
        }
    }
    let turned = |&(a, b): &(usize, usize)| {
        let ((da, left_a), (db, left_b)) =
            (place[a].unwrap_or_default(), place[b].unwrap_or_default());
        match (da < db, db < da) {
            (true, _) if left_b => (b, a),
            (_, true) if !left_a => (b, a),
            _ => (a, b),
        }
    };
    arcs.iter().map(turned).collect()
}
