//! `reboundary graph`.

use super::arguments::{BallKind, GraphFormat, GraphOptions};
use super::fault::Fault;
use super::graph_census::{self, CensusRecord};
use super::graph_law::{self, LawRecord};
use super::graph_structure::{self, StructureRecord};
use super::language_source::{self, Completeness, Loaded};
use super::output::{emit, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::factor_graph::balls::{Census, census};
use crate::factor_graph::canonical::{KINDS, Kind};
use crate::factor_graph::census::{GraphCounts, count_graphs};
use crate::factor_graph::criterion::{LineFigures, line_figures};
use crate::factor_graph::export::write_graphml;
use crate::factor_graph::listing;
use crate::factor_graph::view::GraphView;
use crate::run::files::ResultFolder;
use serde::Serialize;
use std::io::{self, Write};

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
    orders: Vec<Order<'a>>,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    census: Vec<CensusRecord>,
    #[serde(skip_serializing_if = "Vec::is_empty")]
    law: Vec<LawRecord>,
    #[serde(skip_serializing_if = "Option::is_none")]
    structure: Option<StructureRecord>,
}

pub fn run(options: &GraphOptions) -> Result<(), Fault> {
    check_sections(options)?;
    let folder = match &options.drawings {
        Some(path) => Some(ResultFolder::new(path, graph_census::MARK)?),
        None => None,
    };
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
    let census = match options.census {
        true => census(
            &GraphView::new(language, length),
            options.radii,
            &kinds(&options.kind),
        ),
        false => Vec::new(),
    };
    let laws = match options.law {
        true => graph_law::laws(options, &loaded, &control)?,
        false => Vec::new(),
    };
    let structure = options
        .structure
        .then(|| graph_structure::structure(language, length));
    drop(progress);
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
                length,
                radii: options.radii,
                orders: graphs.iter().map(Order::new).collect(),
                census: spelled,
                law: laws,
                structure,
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
