//! The structure of factor graphs in the output of `graph`.

use super::output::write_columns;
use crate::factor_graph::reduced::{Evolution, Structure, evolution, reduce};
use crate::factor_graph::spectrum::{Diameter, MOST_FOR_DIAMETER, Spectrum, diameter, spectrum};
use crate::factor_graph::view::GraphView;
use crate::language::Language;
use rayon::prelude::*;
use serde::Serialize;
use std::io::{self, Write};

/// Branches, components and cycles of every order; spectrum and diameter of the largest.
#[derive(Serialize)]
pub struct StructureRecord {
    orders: Vec<Structure>,
    /// From each order to the next, as far as the words reach.
    evolution: Vec<Evolution>,
    /// Of the largest order.
    diameter: Diameter,
    /// Of the largest order.
    spectrum: Spectrum,
}

/// Computes it for the orders 1 … `longest`.
pub fn structure(language: &Language, longest: usize) -> StructureRecord {
    let orders: Vec<Structure> = (1..=longest)
        .into_par_iter()
        .map(|order| {
            let graph = GraphView::new(language, order);
            reduce(&graph).structure(&graph)
        })
        .collect();
    let graph = GraphView::new(language, longest);
    let connected = orders.last().is_some_and(|s| s.strong_components == 1);
    StructureRecord {
        evolution: (1..longest)
            .map(|order| evolution(language, order))
            .collect(),
        diameter: diameter(&graph, connected, MOST_FOR_DIAMETER),
        spectrum: spectrum(&graph, &reduce(&graph)),
        orders,
    }
}

const HEADER: [&str; 12] = [
    "order",
    "special",
    "branches",
    "shortest_branch",
    "longest_branch",
    "mean_branch",
    "bare_cycles",
    "components",
    "strong_components",
    "largest_strong",
    "independent_cycles",
    "shortest_cycle",
];

fn cells(s: &Structure) -> Vec<String> {
    let whole = |value: Option<usize>| value.map_or(String::new(), |v| v.to_string());
    vec![
        s.order.to_string(),
        s.special.to_string(),
        s.branches.to_string(),
        whole(s.shortest_branch),
        whole(s.longest_branch),
        s.mean_branch.map_or(String::new(), |m| format!("{m:.4}")),
        s.bare_cycles.to_string(),
        s.components.to_string(),
        s.strong_components.to_string(),
        s.largest_strong.to_string(),
        s.independent_cycles.to_string(),
        whole(s.shortest_cycle),
    ]
}

/// For people.
pub fn write_text(record: &StructureRecord, out: &mut dyn Write) -> io::Result<()> {
    writeln!(out, "\nbranches between special words, components, cycles")?;
    let rows: Vec<Vec<String>> = record.orders.iter().map(cells).collect();
    let short = HEADER.map(|name| name.trim_end_matches("_components"));
    write_columns(out, &short, &rows)?;
    writeln!(out, "\nspecial words from one order to the next")?;
    let rows: Vec<Vec<String>> = record
        .evolution
        .iter()
        .map(|e| {
            let counts = [
                e.right_ends,
                e.right_goes_on,
                e.right_splits,
                e.left_ends,
                e.left_goes_on,
                e.left_splits,
                e.strong,
                e.neutral,
                e.weak,
            ];
            let mut row = vec![e.order.to_string()];
            row.extend(counts.iter().map(u64::to_string));
            row.push(e.second_difference.to_string());
            row
        })
        .collect();
    let header = [
        "order",
        "right_ends",
        "right_goes_on",
        "right_splits",
        "left_ends",
        "left_goes_on",
        "left_splits",
        "strong",
        "neutral",
        "weak",
        "b",
    ];
    write_columns(out, &header, &rows)?;
    let range = |(low, high): (usize, usize)| match low == high {
        true => low.to_string(),
        false => format!("from {low} to {high}"),
    };
    let d = &record.diameter;
    writeln!(out, "\ndiameter: {}", range((d.lower, d.upper)))?;
    if let Some(directed) = d.directed {
        writeln!(out, "with directions: {}", range(directed))?;
    }
    let s = &record.spectrum;
    let moments: Vec<String> = s.moments.iter().map(|m| format!("{m:.4}")).collect();
    writeln!(
        out,
        "spectral moments 0 to {}: {}",
        moments.len() - 1,
        moments.join(" ")
    )?;
    let line: Vec<String> = s.line_moments.iter().map(u64::to_string).collect();
    writeln!(out, "those of the line: {}", line.join(" "))?;
    let distances = [
        ("factor graph", s.distance),
        ("reduced graph", s.reduced_distance),
    ];
    for (what, distance) in distances {
        match distance {
            Some(d) => writeln!(out, "{what}: distance to the arcsine law {d:.6}")?,
            None => writeln!(
                out,
                "{what}: too large, or empty, for eigenvalues; see the moments"
            )?,
        }
    }
    Ok(())
}

/// A row for each order.
pub fn write_csv(record: &StructureRecord, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record(HEADER)?;
    for s in &record.orders {
        csv.write_record(cells(s))?;
    }
    csv.flush()
}
