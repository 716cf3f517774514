//! `reboundary graph`.

use super::arguments::{BallKind, GraphFormat, GraphOptions};
use super::fault::Fault;
use super::graph_census::{self, CensusRecord};
use super::graph_law::{self, LawRecord};
use super::graph_structure::{self, StructureRecord};
use super::language_source::{self, Completeness, Loaded};
use super::output::{emit, write_columns, write_json};
use super::stats::Stats;
use super::work::{Work, time_only};
use crate::factor_graph::balls::{Census, census};
use crate::factor_graph::canonical::{KINDS, Kind};
use crate::factor_graph::census::{GraphCounts, count_graphs};
use crate::factor_graph::criterion::{LineFigures, line_figures};
use crate::factor_graph::export::write_graphml;
use crate::factor_graph::listing;
use crate::factor_graph::view::GraphView;
use crate::language::tree::BYTES_PER_WORD;
use crate::run::files::ResultFolder;
use serde::Serialize;
use std::io::{self, Write};
use std::time::Instant;

#[derive(Serialize)]
struct Order<'a> {
    #[serde(flatten)]
    counts: &'a GraphCounts,
    growth: f64,
    /// Total variation between the balls and those of the line: 1 − `path_share`.
    distance_to_line: Vec<f64>,
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
            distance_to_line: path_share.iter().map(|share| 1.0 - share).collect(),
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
    complete: bool,
    complete_to: usize,
    orders: Vec<Order<'a>>,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    census: Vec<CensusRecord>,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    law: Vec<LawRecord>,
    #[serde(skip_serializing_if = "Option::is_none")]
    structure: Option<StructureRecord>,
    #[serde(skip_serializing_if = "Option::is_none")]
    stats: Option<&'a Stats>,
}

/// What is known of the graphs up to one order.
struct Stage {
    loaded: Loaded,
    graphs: Vec<GraphCounts>,
    census: Vec<Census>,
    laws: Vec<LawRecord>,
    structure: Option<StructureRecord>,
}

pub fn run(options: &GraphOptions) -> Result<(), Fault> {
    check_sections(options)?;
    let folder = match &options.drawings {
        Some(path) => Some(ResultFolder::new(path, graph_census::MARK)?),
        None => None,
    };
    let mut work = Work::begin(time_only(options.limits.budget_time), options.common.quiet)?;
    // A table's language can be had for shorter words first; the others are read at once.
    let orders = match options.source.table {
        Some(_) => {
            let longest = options.length.unwrap_or(language_source::DEFAULT_ORDER);
            work.lengths(longest).into_iter().map(Some).collect()
        }
        None => vec![options.length],
    };
    let asked = orders[orders.len() - 1];
    let mut done = None;
    let mut stop = None;
    for order in orders {
        match stage(&mut work, options, order) {
            Ok(stage) => done = Some(stage),
            Err(fault) => {
                stop = Some(fault);
                break;
            }
        }
    }
    work.stats.bytes_per_word = Some(BYTES_PER_WORD);
    work.end(done.as_ref().and_then(|stage| stage.loaded.signs));
    let in_json = options.format == GraphFormat::Json;
    if options.stats && (done.is_none() || !in_json) {
        work.stats.tell();
    }
    let complete_to = done
        .as_ref()
        .map(|stage| stage.loaded.language.longest() - 1);
    if let Some(stage) = done {
        let told = (options.stats && in_json).then_some(&work.stats);
        write(options, stage, folder, asked, told)?;
    }
    let what = |n| {
        let asked = asked.unwrap_or(n);
        format!("the graphs are complete to order {n} of {asked}")
    };
    match stop {
        Some(Fault::Stopped(_)) => Err(work.stopped(complete_to.map(what))),
        Some(fault) => Err(fault),
        None => Ok(()),
    }
}

/// The language and all that is asked of its graphs, up to an order.
fn stage(work: &mut Work, options: &GraphOptions, order: Option<usize>) -> Result<Stage, Fault> {
    let timer = work
        .stats
        .begin("language", order.unwrap_or(0), work.control.done());
    let loaded = language_source::load(options, order, work);
    let tiers = loaded.as_ref().ok().and_then(|loaded| loaded.tiers);
    work.stats.end(timer, work.control.done(), tiers);
    let loaded = loaded?;
    let language = &loaded.language;
    let order = language.longest() - 1;
    work.progress.begin("factor graphs", None);
    let begun = Instant::now();
    let graphs = count_graphs(language, 1, options.radii);
    work.control.tick(0)?;
    let census = match options.census {
        true => census(
            &GraphView::new(language, order),
            options.radii,
            &kinds(&options.kind),
        ),
        false => Vec::new(),
    };
    work.control.tick(0)?;
    let laws = match options.law {
        true => graph_law::laws(options, &loaded, &work.control)?,
        false => Vec::new(),
    };
    let structure = options
        .structure
        .then(|| graph_structure::structure(language, order));
    work.control.tick(0)?;
    work.stats
        .add("factor graphs", order, begun.elapsed(), 0, None);
    Ok(Stage {
        loaded,
        graphs,
        census,
        laws,
        structure,
    })
}

fn write(
    options: &GraphOptions,
    stage: Stage,
    folder: Option<ResultFolder>,
    asked: Option<usize>,
    stats: Option<&Stats>,
) -> Result<(), Fault> {
    let Stage {
        loaded,
        graphs,
        census,
        laws,
        structure,
    } = stage;
    let (language, letters) = (&loaded.language, &loaded.letters);
    let length = language.longest() - 1;
    let record = |c: &Census| CensusRecord::new(c, letters);
    let spelled: Vec<CensusRecord> = census.iter().map(record).collect();
    if let Some(folder) = folder {
        graph_census::write_drawings(&census, &folder)?;
        folder.write(graph_census::MARK, |out| {
            graph_census::write_csv(&spelled, out)
        })?;
        folder.finish()?;
    }
    emit(options.out.as_deref(), |out| match options.format {
        GraphFormat::Text => {
            writeln!(out, "{}", loaded.title)?;
            write_standing(&loaded, out)?;
            let (header, rows) = rows(&graphs, options.radii);
            let header: Vec<&str> = header.iter().map(String::as_str).collect();
            write_columns(out, &header, &rows)?;
            graph_census::write_text(&spelled, out)?;
            graph_law::write_text(&laws, out)?;
            match &structure {
                Some(record) => graph_structure::write_text(record, out),
                None => Ok(()),
            }
        }
        GraphFormat::Csv if options.census => graph_census::write_csv(&spelled, out),
        GraphFormat::Csv if options.law => graph_law::write_csv(&laws, out),
        GraphFormat::Csv if options.structure => structure
            .as_ref()
            .map_or(Ok(()), |record| graph_structure::write_csv(record, out)),
        GraphFormat::Csv => write_csv(&graphs, options.radii, out),
        GraphFormat::Graphml => write_graphml(language, length, letters, out),
        GraphFormat::Dot => listing::write_dot(language, length, letters, out),
        GraphFormat::Edges => listing::write_edges(language, length, letters, out),
        GraphFormat::Adjacency => listing::write_adjacency(language, length, letters, out),
        GraphFormat::Json => write_json(
            out,
            &GraphRecord {
                schema: "reboundary-graph/1",
                title: loaded.title.clone(),
                source: &loaded.completeness,
                length: asked.unwrap_or(length),
                radii: options.radii,
                complete: asked.is_none_or(|asked| asked == length),
                complete_to: length,
                orders: graphs.iter().map(Order::new).collect(),
                census: spelled,
                law: laws,
                structure,
                stats,
            },
        ),
    })
}

/// A CSV file has one header, and the formats of one graph have no room for more.
fn check_sections(options: &GraphOptions) -> Result<(), Fault> {
    let asked: Vec<&str> = [
        ("--census", options.census),
        ("--law", options.law),
        ("--structure", options.structure),
    ]
    .into_iter()
    .filter_map(|(name, asked)| asked.then_some(name))
    .collect();
    let most = match options.format {
        GraphFormat::Text | GraphFormat::Json => 3,
        GraphFormat::Csv => 1,
        // The drawings are a result of their own.
        _ => usize::from(options.drawings.is_some()),
    };
    if asked.len() <= most {
        return Ok(());
    }
    let text = match options.format {
        GraphFormat::Csv => {
            "CSV holds one of --census, --law and --structure; ask for one of them, or for --format json"
        }
        _ => {
            "this format holds one factor graph and nothing beside it; ask for --census, --law and --structure with --format text, json or csv"
        }
    };
    Err(Fault::BadInput(text.into()))
}

/// The kinds asked for, all without a wish.
fn kinds(wished: &[BallKind]) -> Vec<Kind> {
    let kind = |wish: BallKind| match wish {
        BallKind::Plain => Kind::Plain,
        BallKind::Oriented => Kind::Oriented,
        BallKind::Labelled => Kind::Labelled,
    };
    let named = |k: &Kind| wished.is_empty() || wished.iter().any(|w| kind(*w) == *k);
    KINDS.into_iter().filter(named).collect()
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
