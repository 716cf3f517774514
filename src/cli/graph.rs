//! `reboundary graph`.

use super::arguments::{GraphFormat, GraphOptions};
use super::fault::Fault;
use super::output::{emit, read_table, write_columns, write_json};
use super::stats::Stats;
use super::work::Work;
use crate::factor_graph::census::{GraphCounts, count_graphs};
use crate::factor_graph::criterion::{LineFigures, line_figures};
use crate::factor_graph::export::write_graphml;
use crate::language::Language;
use crate::language::tree::BYTES_PER_WORD;
use crate::language::walk::{self, GrowthFault};
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::io::{self, Write};
use std::time::Instant;

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
    complete: bool,
    complete_to: usize,
    orders: Vec<Order<'a>>,
    #[serde(skip_serializing_if = "Option::is_none")]
    stats: Option<&'a Stats>,
}

pub fn run(options: &GraphOptions) -> Result<(), Fault> {
    let mut work = Work::begin(options.limits.budget(), options.common.quiet)?;
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let table = &loaded.table;
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, options.length + 1, options.exactness.arithmetic());
    let mut done = None;
    let mut stopped = false;
    for order in work.lengths(options.length) {
        match stage(&mut work, (&engine, &mesh), order, options.radii) {
            Ok(stage) => done = Some((order, stage)),
            Err(GrowthFault::Stopped(_)) => {
                stopped = true;
                break;
            }
            Err(fault) => return Err(fault.into()),
        }
    }
    work.stats.bytes_per_word = Some(BYTES_PER_WORD);
    work.end(&engine);
    let in_json = options.format == GraphFormat::Json;
    if options.stats && (done.is_none() || !in_json) {
        work.stats.tell();
    }
    let complete_to = done.as_ref().map(|(order, _)| *order);
    if let Some((order, (language, graphs))) = done {
        let told = (options.stats && in_json).then_some(&work.stats);
        emit(options.out.as_deref(), |out| match options.format {
            GraphFormat::Text => {
                writeln!(out, "{}", table.title())?;
                let (header, rows) = rows(&graphs, options.radii);
                let header: Vec<&str> = header.iter().map(String::as_str).collect();
                write_columns(out, &header, &rows)
            }
            GraphFormat::Csv => write_csv(&graphs, options.radii, out),
            GraphFormat::Graphml => write_graphml(&language, order, table.letters(), out),
            GraphFormat::Json => {
                let record = GraphRecord {
                    schema: "reboundary-graph/1",
                    title: table.title().into(),
                    length: options.length,
                    radii: options.radii,
                    complete: order == options.length,
                    complete_to: order,
                    orders: graphs.iter().map(Order::new).collect(),
                    stats: told,
                };
                write_json(out, &record)
            }
        })?;
    }
    let what = |n| format!("the graphs are complete to order {n} of {}", options.length);
    match stopped {
        true => Err(work.stopped(complete_to.map(what))),
        false => Ok(()),
    }
}

/// The language and its graphs up to an order.
fn stage(
    work: &mut Work,
    (engine, mesh): (&AnyEngine, &Mesh),
    order: usize,
    radii: usize,
) -> Result<(Language, Vec<GraphCounts>), GrowthFault> {
    let language = work.walk("language", order + 1, None, |control, _| {
        walk::grow(engine, mesh, order + 1, control)
    })?;
    work.progress.begin("factor graphs", None);
    let begun = Instant::now();
    let graphs = count_graphs(&language, 1, radii);
    work.control.tick(0)?;
    work.stats
        .add("factor graphs", order, begun.elapsed(), 0, None);
    Ok((language, graphs))
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
