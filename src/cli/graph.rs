//! `reboundary graph`.

use super::arguments::{GraphFormat, GraphOptions};
use super::fault::Fault;
use super::output::{emit, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use super::words::total_words;
use crate::factor_graph::census::{GraphCounts, count_graphs};
use crate::factor_graph::criterion::{LineFigures, line_figures};
use crate::factor_graph::export::write_graphml;
use crate::language::walk;
use crate::study::results::check_memory;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
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
    length: usize,
    radii: usize,
    orders: Vec<Order<'a>>,
}

pub fn run(options: &GraphOptions) -> Result<(), Fault> {
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let (mesh, length) = (Mesh::new(table), options.length);
    let engine = AnyEngine::new(table, length + 1, options.exactness.arithmetic());
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    progress.begin("counting", None);
    let words = total_words(table, &engine, &mesh, length + 1, &control)?;
    check_memory(words, length + 1, options.budget_memory)?;
    progress.begin("language", Some(words));
    let (language, _) = walk::grow(&engine, &mesh, length + 1, &control)?;
    progress.begin("factor graphs", None);
    let graphs = count_graphs(&language, 1, options.radii);
    drop(progress);
    emit(options.out.as_deref(), |out| match options.format {
        GraphFormat::Text => {
            writeln!(out, "{}", table.title())?;
            let (header, rows) = rows(&graphs, options.radii);
            let header: Vec<&str> = header.iter().map(String::as_str).collect();
            write_columns(out, &header, &rows)
        }
        GraphFormat::Csv => write_csv(&graphs, options.radii, out),
        GraphFormat::Graphml => write_graphml(&language, length, table.letters(), out),
        GraphFormat::Json => {
            let orders = graphs.iter().map(Order::new);
            write_json(
                out,
                &GraphRecord {
                    schema: "reboundary-graph/1",
                    title: table.title().into(),
                    length,
                    radii: options.radii,
                    orders: orders.collect(),
                },
            )
        }
    })
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
