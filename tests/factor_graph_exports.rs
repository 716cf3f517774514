//! Exported graphs, opened by general-purpose readers and measured again.

use petgraph::algo::{connected_components, tarjan_scc};
use petgraph::dot::dot_parser::ParseFromDot;
use petgraph::graph::{DiGraph, NodeIndex};
use quick_xml::Reader;
use quick_xml::events::Event;
use reboundary::factor_graph::export::write_graphml;
use reboundary::factor_graph::listing::{write_adjacency, write_dot, write_edges};
use reboundary::language::Language;
use reboundary::reference::file::{Reference, load};
use std::collections::{BTreeMap, HashMap};
use std::path::Path;

fn demo(name: &str, longest: usize) -> (Reference, Language) {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-data/reference");
    let reference = load(&path.join(name), &[]).unwrap_or_else(|fault| panic!("{name}: {fault}"));
    let language = reference
        .rule
        .language(longest, 1 << 20)
        .expect("a language");
    (reference, language)
}

/// What is measured again: vertices, arcs, components, strong components, and the law of (in, out) degrees.
#[derive(Debug, PartialEq)]
struct Measured {
    vertices: usize,
    arcs: usize,
    components: usize,
    strong_components: usize,
    degrees: BTreeMap<(usize, usize), usize>,
    /// Words with the letters of their arcs, sorted.
    words: BTreeMap<String, String>,
}

fn measure(graph: &DiGraph<String, String>) -> Measured {
    let mut degrees = BTreeMap::new();
    let mut words = BTreeMap::new();
    for v in graph.node_indices() {
        let into = graph.edges_directed(v, petgraph::Incoming).count();
        let out = graph.edges(v).count();
        *degrees.entry((into, out)).or_default() += 1;
        let mut letters: Vec<&str> = graph.edges(v).map(|e| e.weight().as_str()).collect();
        letters.sort_unstable();
        words.insert(graph[v].clone(), letters.concat());
    }
    Measured {
        vertices: graph.node_count(),
        arcs: graph.edge_count(),
        components: connected_components(graph),
        strong_components: tarjan_scc(graph).len(),
        degrees,
        words,
    }
}

/// The same from the words themselves, without any file.
fn expected(language: &Language, order: usize, letters: &[char]) -> Measured {
    let spell = |n: usize, w: u32| -> String {
        language
            .word(n, w)
            .iter()
            .map(|a| letters[*a as usize])
            .collect()
    };
    let mut graph = DiGraph::new();
    let mut number: HashMap<String, NodeIndex> = HashMap::new();
    for w in 0..language.count(order) as u32 {
        let word = spell(order, w);
        number.insert(word.clone(), graph.add_node(word));
    }
    for w in 0..language.count(order + 1) as u32 {
        let arc: Vec<char> = spell(order + 1, w).chars().collect();
        let (from, to): (String, String) =
            (arc[..order].iter().collect(), arc[1..].iter().collect());
        graph.add_edge(number[&from], number[&to], arc[order].to_string());
    }
    measure(&graph)
}

fn text(write: impl FnOnce(&mut Vec<u8>) -> std::io::Result<()>) -> String {
    let mut out = Vec::new();
    write(&mut out).expect("written");
    String::from_utf8(out).expect("text")
}

/// DOT through petgraph's own parser.
fn from_dot(dot: &str) -> DiGraph<String, String> {
    let bare = |value: &str| value.trim_matches('"').to_string();
    let parsed: petgraph::graph::Graph<_, _> = ParseFromDot::try_from(dot).expect("DOT");
    parsed.map(
        |_, node: &petgraph::dot::dot_parser::DotNodeWeight| {
            let label = node.attr.elems.iter().find(|(key, _)| *key == "label");
            bare(label.expect("a word").1)
        },
        |_, arc: &petgraph::dot::dot_parser::DotAttrList| {
            bare(
                arc.elems
                    .iter()
                    .find(|(key, _)| *key == "label")
                    .expect("a letter")
                    .1,
            )
        },
    )
}

/// GraphML by its elements, keys resolved by their names.
fn from_graphml(xml: &str) -> DiGraph<String, String> {
    let mut reader = Reader::from_str(xml);
    let mut names: HashMap<String, String> = HashMap::new();
    let mut graph = DiGraph::new();
    let mut number: HashMap<String, NodeIndex> = HashMap::new();
    let (mut open, mut data) = (None, String::new());
    enum Open {
        Node(NodeIndex),
        Edge(petgraph::graph::EdgeIndex),
    }
    loop {
        match reader.read_event().expect("XML") {
            Event::Eof => return graph,
            Event::Start(e) | Event::Empty(e) => {
                let attribute = |name: &str| {
                    let found = e.attributes().flatten().find(|a| a.key.as_ref() == name);
                    found.map(|a| a.value.to_string())
                };
                match e.name().as_ref() {
                    "key" => {
                        names.insert(
                            attribute("id").expect("id"),
                            attribute("attr.name").expect("name"),
                        );
                    }
                    "graph" => assert_eq!(attribute("edgedefault").as_deref(), Some("directed")),
                    "node" => {
                        let v = graph.add_node(String::new());
                        number.insert(attribute("id").expect("id"), v);
                        open = Some(Open::Node(v));
                    }
                    "edge" => {
                        let end = |name| number[&attribute(name).expect("an end")];
                        let edge = graph.add_edge(end("source"), end("target"), String::new());
                        open = Some(Open::Edge(edge));
                    }
                    "data" => data = names[&attribute("key").expect("key")].clone(),
                    _ => {}
                }
            }
            Event::Text(value) => {
                let value = (*value).to_string();
                match (&open, data.as_str()) {
                    (Some(Open::Node(v)), "word") => graph[*v] = value,
                    (Some(Open::Edge(e)), "letter") => graph[*e] = value,
                    _ => {}
                }
            }
            Event::End(_) => data.clear(),
            _ => {}
        }
    }
}

fn from_edges(table: &str) -> DiGraph<String, String> {
    let mut graph = DiGraph::new();
    let mut number: HashMap<String, NodeIndex> = HashMap::new();
    let mut rows = csv::Reader::from_reader(table.as_bytes());
    for row in rows.records() {
        let row = row.expect("a row");
        let mut end = |id: &str, word: &str| {
            let add = || graph.add_node(word.to_string());
            *number.entry(id.to_string()).or_insert_with(add)
        };
        let (from, to) = (end(&row[0], &row[3]), end(&row[1], &row[4]));
        graph.add_edge(from, to, row[2].to_string());
    }
    graph
}

fn from_adjacency(json: &str) -> DiGraph<String, String> {
    let value: serde_json::Value = serde_json::from_str(json).expect("JSON");
    let list = |value: &serde_json::Value| value.as_array().expect("a list").clone();
    let mut graph = DiGraph::new();
    let words = list(&value["words"]);
    let nodes: Vec<NodeIndex> = words
        .iter()
        .map(|w| graph.add_node(w.as_str().expect("a word").into()))
        .collect();
    for (v, targets) in list(&value["successors"]).iter().enumerate() {
        for (target, letter) in list(targets).iter().zip(list(&value["letters"][v])) {
            let target = nodes[target.as_u64().expect("a number") as usize];
            graph.add_edge(nodes[v], target, letter.as_str().expect("a letter").into());
        }
    }
    graph
}

#[test]
fn every_format_is_read_back_with_the_same_measures() {
    for (name, order) in [
        ("bell-buoy.toml", 20),
        ("ebb-and-flood.toml", 12),
        ("net-counts.toml", 9),
        ("flag-hoist.toml", 8),
        ("lock-gates.toml", 25),
        ("silted-lock.toml", 6),
    ] {
        let (reference, language) = demo(name, order + 1);
        let letters = &reference.letters;
        let wanted = expected(&language, order, letters);
        assert_eq!(wanted.vertices, language.count(order));
        let dot = text(|out| write_dot(&language, order, letters, out));
        assert_eq!(measure(&from_dot(&dot)), wanted, "{name}: DOT");
        let xml = text(|out| write_graphml(&language, order, letters, out));
        assert_eq!(measure(&from_graphml(&xml)), wanted, "{name}: GraphML");
        let edges = text(|out| write_edges(&language, order, letters, out));
        assert_eq!(measure(&from_edges(&edges)), wanted, "{name}: edges");
        let lists = text(|out| write_adjacency(&language, order, letters, out));
        assert_eq!(
            measure(&from_adjacency(&lists)),
            wanted,
            "{name}: adjacency"
        );
    }
}

/// Letters that DOT, XML and CSV must escape.
#[test]
fn odd_letters_survive() {
    let letters = ['"', '\\', '<', ',', '&'];
    let word: Vec<u8> = (0..60u32).map(|i| ((i * i + i / 7) % 5) as u8).collect();
    let language = Language::from_factors(5, [&word[..]], 3).expect("a language");
    let wanted = expected(&language, 2, &letters);
    let edges = text(|out| write_edges(&language, 2, &letters, out));
    assert_eq!(measure(&from_edges(&edges)), wanted);
    let lists = text(|out| write_adjacency(&language, 2, &letters, out));
    assert_eq!(measure(&from_adjacency(&lists)), wanted);
    let dot = text(|out| write_dot(&language, 2, &letters, out));
    assert!(dot.contains("label=\"\\\"\\\\\""), "{dot}");
}
