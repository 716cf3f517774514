//! `reboundary graph`.

use super::arguments::{GraphFormat, GraphOptions};
use super::fault::Fault;
use super::language_source::{self, Completeness, Loaded};
use super::output::{emit, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::factor_graph::census::{GraphCounts, count_graphs};
use crate::factor_graph::criterion::{LineFigures, line_figures};
use crate::factor_graph::export::write_graphml;
use serde::Serialize;
use std::io::{self, Write};

#[derive(Serialize)]
struct Order<'a> {
    #[serde(flatten)]
    counts: &'a GraphCounts,
    growth: f64,
    path_share: Vec<f64>,
    branch_free_share: Vec<f64>,
    bound: Vec<f64>,
    within_bound: bool,
}

impl Order<'_> {
    fn new(counts: &GraphCounts) -> Order<'_> {
        // The order stands in the counts already; a JSON object names each field once.
        let LineFigures {
            order: _,
            growth,
            path_share,
            branch_free_share,
            bound,
            within_bound,
        } = line_figures(counts);
        Order {
            counts,
            growth,
            path_share,
            branch_free_share,
            bound,
            within_bound,
        }
    }
}

#[derive(Serialize)]
struct GraphRecord<'a> {
    schema: &'static str,
    title: String,
    source: &'a Completeness,
    length: usize,
    radii: usize,
    orders: Vec<Order<'a>>,
}

pub fn run(options: &GraphOptions) -> Result<(), Fault> {
    let control = interruptible_control();
    let quiet = options.common.quiet;
    let progress = Progress::new(&control, quiet);
    let loaded = language_source::load(
        &options.source,
        &options.settings,
        options.exactness,
        options.length,
        quiet,
        &control,
        &progress,
    )?;
    let (language, letters) = (&loaded.language, &loaded.letters);
    let length = language.longest() - 1;
    progress.begin("factor graphs", None);
    let graphs = count_graphs(language, 1, options.radii);
    drop(progress);
    emit(options.out.as_deref(), |out| match options.format {
        GraphFormat::Text => {
            writeln!(out, "{}", loaded.title)?;
            write_standing(&loaded, out)?;
            let (header, rows) = rows(&graphs, options.radii);
            let header: Vec<&str> = header.iter().map(String::as_str).collect();
            write_columns(out, &header, &rows)
        }
        GraphFormat::Csv => write_csv(&graphs, options.radii, out),
        GraphFormat::Graphml => write_graphml(language, length, letters, out),
        GraphFormat::Json => {
            let orders = graphs.iter().map(Order::new);
            write_json(
                out,
                &GraphRecord {
                    schema: "reboundary-graph/1",
                    title: loaded.title.clone(),
                    source: &loaded.completeness,
                    length,
                    radii: options.radii,
                    orders: orders.collect(),
                },
            )
        }
    })
}

/// What a reader must know about the counts below.
fn write_standing(loaded: &Loaded, out: &mut dyn Write) -> io::Result<()> {
    let standing = &loaded.completeness;
    if let Some(trusted) = standing.trusted_to {
        writeln!(
            out,
            "lower bounds: the factors of a finite text; up to length {trusted} every word was seen in both halves of it"
        )?;
    }
    if !standing.bi_extendable {
        writeln!(
            out,
            "some words have no extension on one side: the bound (6r-4) s(n)/p(n) does not apply"
        )?;
    }
    Ok(())
}

fn rows(graphs: &[GraphCounts], radii: usize) -> (Vec<String>, Vec<Vec<String>>) {
    let mut header: Vec<String> = [
        "order",
        "vertices",
        "arcs",
        "left_special",
        "right_special",
        "bispecial",
        "unique_both",
    ]
    .map(String::from)
    .to_vec();
    header.extend((1..=radii).map(|r| format!("path_balls_{r}")));
    let rows = graphs
        .iter()
        .map(|g| {
            let mut row = vec![
                g.order as u64,
                g.vertices,
                g.arcs,
                g.left_special,
                g.right_special,
                g.bispecial,
                g.unique_both,
            ];
            row.extend(&g.path_balls);
            row.iter().map(u64::to_string).collect()
        })
        .collect();
    (header, rows)
}

fn write_csv(graphs: &[GraphCounts], radii: usize, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    let (header, rows) = rows(graphs, radii);
    csv.write_record(header)?;
    for row in rows {
        csv.write_record(row)?;
    }
    csv.flush()
}
