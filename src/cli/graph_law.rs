//! The labelled limit in the output of `graph`.

use super::arguments::GraphOptions;
use super::fault::Fault;
use super::language_source::{Loaded, read_words};
use super::output::write_columns;
use crate::factor_graph::export::spell;
use crate::factor_graph::labelled::{
    Law, Settling, Subsequence, block_frequencies, settling, total_variation,
};
use crate::language::{WordId, measure};
use crate::run::Control;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::io::{self, Write};

/// The laws of one radius.
#[derive(Serialize)]
pub struct LawRecord {
    radius: usize,
    /// The blocks of 2r + 1 letters; all lists of shares follow them.
    blocks: Vec<String>,
    /// Shares at the largest order.
    shares: Vec<f64>,
    /// Exact invariant measures of the blocks, rounded; null unless the language is a table's.
    measures: Option<Vec<f64>>,
    /// Block frequencies in the long words given; null without.
    frequencies: Option<Vec<f64>>,
    /// Share of places of the long words whose block is not in the language.
    strange: Option<f64>,
    orders: Vec<LawOrder>,
    /// (N₀, greatest total variation between the laws of two orders ≥ N₀).
    spread: Vec<(usize, f64)>,
    /// Two subsequences at different laws; empty when the laws are not apart.
    subsequences: Vec<Subsequence>,
}

#[derive(Serialize)]
struct LawOrder {
    order: usize,
    /// Total variation to the law of the largest order.
    to_last: f64,
    /// … to the invariant measure.
    to_measure: Option<f64>,
    /// … to the block frequencies.
    to_frequencies: Option<f64>,
    /// … to the law of the first or the last letters, whichever is farther.
    drift: f64,
}

/// Computes the laws of every radius for which the words are long enough.
pub fn laws(
    options: &GraphOptions,
    loaded: &Loaded,
    control: &Control,
) -> Result<Vec<LawRecord>, Fault> {
    let longest = loaded.language.longest() - 1;
    let texts = match &options.frequencies {
        Some(path) => Some(read_words(path, &loaded.letters)?),
        None => None,
    };
    let mut records = Vec::new();
    for radius in 0..=options.radii {
        if 2 * radius + 1 > longest {
            break;
        }
        let found = settling(&loaded.language, longest, radius);
        let measures = measures(options, loaded, 2 * radius + 1, control)?;
        let frequencies = texts
            .as_ref()
            .map(|texts| block_frequencies(&loaded.language, texts, 2 * radius + 1));
        records.push(record(loaded, &found, measures, frequencies));
    }
    Ok(records)
}

/// The invariant measures of all words of a length, their sum scaled to 1.
fn measures(
    options: &GraphOptions,
    loaded: &Loaded,
    block: usize,
    control: &Control,
) -> Result<Option<Vec<f64>>, Fault> {
    let Some(table) = &loaded.table else {
        return Ok(None);
    };
    let engine = AnyEngine::new(table, block, options.exactness.arithmetic());
    let found = measure::measure(table, &engine, &Mesh::new(table), block, block, control)?;
    let whole = found.whole.to_f64();
    Ok(Some(
        found.kept.iter().map(|m| m.to_f64() / whole).collect(),
    ))
}

fn record(
    loaded: &Loaded,
    found: &Settling,
    measures: Option<Vec<f64>>,
    frequencies: Option<(Vec<f64>, f64)>,
) -> LawRecord {
    let language = &loaded.language;
    let block = 2 * found.radius + 1;
    let last = found.laws.last().map(Law::shares).unwrap_or_default();
    let (frequencies, strange) = match frequencies {
        Some((shares, strange)) => (Some(shares), Some(strange)),
        None => (None, None),
    };
    let order = |law: &Law| {
        let shares = law.shares();
        let to = |other: &Vec<f64>| total_variation(&shares, other);
        LawOrder {
            order: law.order,
            to_last: to(&last),
            to_measure: measures.as_ref().map(to),
            // Strange blocks are a part of the other law that this one lacks.
            to_frequencies: frequencies
                .as_ref()
                .map(|f| to(f) + strange.unwrap_or(0.0) / 2.0),
            drift: law.drift(language, found.radius),
        }
    };
    let orders = found.laws.iter().map(order).collect();
    let words = 0..language.count(block) as WordId;
    LawRecord {
        radius: found.radius,
        blocks: words
            .map(|w| spell(language, block, w, &loaded.letters))
            .collect(),
        shares: last,
        measures,
        frequencies,
        strange,
        orders,
        spread: found.spread.clone(),
        subsequences: found.subsequences.clone(),
    }
}

/// The most blocks shown in text.
const SHOWN: usize = 12;

/// For people.
pub fn write_text(all: &[LawRecord], out: &mut dyn Write) -> io::Result<()> {
    for law in all {
        let n = law.orders.last().map_or(0, |o| o.order);
        writeln!(
            out,
            "\nlaw of the {} letters round a uniform vertex of order {n}",
            2 * law.radius + 1
        )?;
        let mut order: Vec<usize> = (0..law.blocks.len()).collect();
        order.sort_by(|a, b| law.shares[*b].total_cmp(&law.shares[*a]));
        let mut columns = vec![("share", &law.shares)];
        columns.extend(law.measures.as_ref().map(|m| ("measure", m)));
        columns.extend(law.frequencies.as_ref().map(|f| ("frequency", f)));
        let rows: Vec<Vec<String>> = order
            .iter()
            .take(SHOWN)
            .map(|i| {
                let mut row = vec![law.blocks[*i].clone()];
                row.extend(
                    columns
                        .iter()
                        .map(|(_, values)| format!("{:.6}", values[*i])),
                );
                row
            })
            .collect();
        let mut header = vec!["block"];
        header.extend(columns.iter().map(|(name, _)| *name));
        write_columns(out, &header, &rows)?;
        if law.blocks.len() > SHOWN {
            writeln!(out, "and {} more blocks", law.blocks.len() - SHOWN)?;
        }
        if let Some(last) = law.orders.last() {
            if let Some(distance) = last.to_measure {
                writeln!(
                    out,
                    "total variation to the invariant measure: {distance:.6}"
                )?;
            }
            if let Some(distance) = last.to_frequencies {
                writeln!(
                    out,
                    "total variation to the block frequencies: {distance:.6}"
                )?;
            }
        }
        for (start, spread) in &law.spread {
            writeln!(
                out,
                "laws of two orders >= {start} differ by at most {spread:.6}"
            )?;
        }
        for s in &law.subsequences {
            let listed: Vec<String> = s.orders.iter().map(usize::to_string).collect();
            writeln!(
                out,
                "near the law of order {}: orders {}",
                s.at,
                listed.join(" ")
            )?;
        }
    }
    Ok(())
}

/// A row for each radius and order.
pub fn write_csv(all: &[LawRecord], out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    csv.write_record([
        "radius",
        "order",
        "to_last",
        "to_measure",
        "to_frequencies",
        "drift",
    ])?;
    let cell = |value: Option<f64>| value.map_or(String::new(), |v| v.to_string());
    for law in all {
        for o in &law.orders {
            csv.write_record([
                law.radius.to_string(),
                o.order.to_string(),
                o.to_last.to_string(),
                cell(o.to_measure),
                cell(o.to_frequencies),
                o.drift.to_string(),
            ])?;
        }
    }
    csv.flush()
}
