//! The folder of a study: complete, well-formed, the same bytes for every number of threads.

mod program;

use program::{entries, numbers, place, polygon, run_in, text};
use quick_xml::events::Event;
use quick_xml::reader::Reader;
use serde_json::Value;
use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;

type Files = BTreeMap<String, String>;

/// Runs a study in an empty folder and reads its files.
fn study(table: &str, more: &[&str]) -> Files {
    let place = place();
    let output = run_in(
        &place,
        &[&["study", table, "--out", "result"], more].concat(),
    );
    let errors = text(&output.stderr);
    assert_eq!(output.status.code(), Some(0), "{errors}");
    assert_eq!(errors, "");
    assert!(text(&output.stdout).contains("Open result/report.html"));
    let folder = place.path().join("result");
    let files: Files = entries(&folder)
        .iter()
        .map(|path| {
            let name = path
                .strip_prefix(&folder)
                .expect("inside")
                .display()
                .to_string();
            (name, std::fs::read_to_string(path).expect("text"))
        })
        .collect();
    assert_eq!(
        entries(place.path()).len(),
        1 + files.len(),
        "nothing beside the folder"
    );
    files
}

fn record(files: &Files) -> Value {
    serde_json::from_str(&files["study.json"]).expect("study.json parses")
}

/// Elements by name, with the attributes of each; panics where the text is not well-formed.
fn elements(name: &str, text: &str) -> Vec<(String, BTreeMap<String, String>)> {
    let mut reader = Reader::from_str(text);
    reader.config_mut().check_end_names = true;
    let (mut found, mut depth) = (Vec::new(), 0i64);
    loop {
        let event = reader
            .read_event()
            .unwrap_or_else(|e| panic!("{name}: {e}"));
        let element = match &event {
            Event::Start(element) => {
                depth += 1;
                element
            }
            Event::Empty(element) => element,
            Event::End(_) => {
                depth -= 1;
                continue;
            }
            Event::Eof => break,
            _ => continue,
        };
        let attributes = element
            .attributes()
            .map(|a| {
                let a = a.unwrap_or_else(|e| panic!("{name}: {e}"));
                let value = a.value.to_string();
                (a.key.as_ref().to_string(), value)
            })
            .collect();
        let tag = element.name().as_ref().to_string();
        found.push((tag, attributes));
    }
    assert_eq!(depth, 0, "{name}: every element is closed");
    found
}

fn rows(files: &Files, name: &str) -> Vec<Vec<String>> {
    let lines = files[name].lines();
    lines
        .map(|line| line.split(',').map(String::from).collect())
        .collect()
}

#[test]
fn a_study_is_complete_and_consistent() {
    let file = polygon("legs-3-4");
    let files = study(&file, &["--length", "12", "--radii", "3"]);
    let names: BTreeSet<&str> = files.keys().map(String::as_str).collect();
    for name in [
        "report.html",
        "study.json",
        "complexity.csv",
        "factor-graphs.csv",
        "measures.csv",
        "diagonals.csv",
        "words.txt",
        "factor-graph.graphml",
        "table.svg",
        "growth.svg",
    ] {
        assert!(names.contains(name), "{name} of {names:?}");
    }
    let record = record(&files);
    assert_eq!(record["schema"], "reboundary-study/1");
    assert_eq!(record["stop"], "complete");
    assert_eq!(
        record["table_file"],
        std::fs::read_to_string(&file).expect("text")
    );
    // Legs 3 and 4: recomputed by an independent program.
    let p = [1, 3, 6, 10, 18, 30, 44, 61, 82, 110, 144, 183, 228];
    assert_eq!(numbers(&record["complexity"]["p"]), p);
    assert_eq!(numbers(&record["complexity"]["p_by_diagonals"]), p);
    assert_eq!(record["complexity"]["routes_agree"], true);
    let levels = record["measure"]["levels"].as_array().expect("levels");
    assert_eq!(levels.len(), 12);
    for level in levels {
        assert_eq!(level["holds"], true);
        let sum = level["sum"].as_str().expect("a decimal");
        assert!(sum.starts_with("24.0000000000") || sum.starts_with("23.9999999999"));
    }
    let words: Vec<&str> = files["words.txt"].lines().collect();
    assert_eq!(words.len(), 228);
    assert!(words.is_sorted());
    let complexity = rows(&files, "complexity.csv");
    assert_eq!(complexity.len(), 14);
    for (row, (n, p)) in complexity[1..].iter().zip(p.iter().enumerate()) {
        assert_eq!(row[..2], [n.to_string(), p.to_string()]);
        assert_eq!(row[5], p.to_string());
    }
    let graphs = rows(&files, "factor-graphs.csv");
    assert_eq!(graphs.len(), 12, "orders 1 to 11");
    assert_eq!(graphs[0].len(), 10, "three radii");
    assert_eq!(
        record["factor_graphs"].as_array().expect("orders").len(),
        11
    );
    let shown = numbers(&record["complexity"]["p"])[10];
    assert_eq!(
        record["cylinders"]["length"], 10,
        "the longest with at most 150 words"
    );
    assert_eq!(rows(&files, "measures.csv").len() as i64, 1 + shown);
}

#[test]
fn the_exported_graph_has_the_counted_vertices_and_arcs() {
    for (order, vertices, arcs) in [("5", 30, 44), ("11", 183, 228)] {
        let files = study(
            &polygon("legs-3-4"),
            &["--length", "12", "--graph-order", order],
        );
        let found = elements("graphml", &files["factor-graph.graphml"]);
        let of = |tag: &str| -> Vec<&BTreeMap<String, String>> {
            found.iter().filter(|e| e.0 == tag).map(|e| &e.1).collect()
        };
        let nodes: BTreeSet<&String> = of("node").iter().map(|n| &n["id"]).collect();
        assert_eq!(nodes.len(), vertices, "order {order}");
        assert_eq!(of("node").len(), vertices);
        assert_eq!(of("edge").len(), arcs, "order {order}");
        for edge in of("edge") {
            assert!(nodes.contains(&edge["source"]) && nodes.contains(&edge["target"]));
        }
    }
}

#[test]
fn pictures_and_report_need_nothing_from_elsewhere() {
    let place = place();
    // A title that would break markup.
    let table = place.path().join("quay.toml");
    let corners = r#"corners = [["0", "0"], ["3", "0"], ["0", "4"]]"#;
    let title = r#"title = "Quay <b> & \"so\" ]]> </svg>""#;
    std::fs::write(&table, format!("{title}\n{corners}\n")).expect("written");
    let files = study(&table.display().to_string(), &["--length", "8"]);
    let mut pictures = 0;
    for (name, text) in files.iter().filter(|(name, _)| name.ends_with(".svg")) {
        let found = elements(name, text);
        assert_eq!(found[0].0, "svg", "{name}");
        assert!(found.len() > 5, "{name} is no empty picture");
        pictures += 1;
    }
    assert!(pictures >= 6, "{pictures} pictures");
    let report = &files["report.html"];
    let others = report.replace("xmlns=\"http://www.w3.org/2000/svg\"", "");
    assert!(
        !others.contains("http"),
        "the report loads or links something"
    );
    // One script, inline, that asks nobody for anything.
    assert_eq!(others.matches("<script").count(), 1);
    for asking in [
        "fetch(",
        "XMLHttpRequest",
        "import(",
        "sendBeacon",
        "WebSocket",
    ] {
        assert!(!others.contains(asking), "the script has {asking}");
    }
    for loading in ["src=", "<link", "@import", "url(", "<iframe"] {
        let bare = others.replace("url(#", "").replace("src=\"data:", "");
        assert!(!bare.contains(loading), "the report has {loading}");
    }
    assert!(
        report.contains("Quay &lt;b&gt; &amp;"),
        "the title is escaped"
    );
    assert!(!report.contains("Quay <b>"));
}

#[test]
fn threads_change_no_byte() {
    for table in ["legs-3-4", "regular-pentagon"] {
        let arguments = |threads| ["--length", "11", "--threads", threads];
        let first = study(&polygon(table), &arguments("1"));
        for threads in ["2", "7"] {
            let other = study(&polygon(table), &arguments(threads));
            assert!(first.keys().eq(other.keys()));
            for (name, text) in &first {
                assert!(*text == other[name], "{table}, {name}, {threads} threads");
            }
        }
    }
}

#[test]
fn exact_only_changes_nothing_but_its_own_name() {
    for table in ["legs-3-4", "square", "cube-root-triangle"] {
        let fast = study(&polygon(table), &["--length", "10"]);
        let slow = study(&polygon(table), &["--length", "10", "--exact-only"]);
        assert!(fast.keys().eq(slow.keys()));
        for (name, text) in fast
            .iter()
            .filter(|(name, _)| !["study.json", "report.html"].contains(&&***name))
        {
            assert!(*text == slow[name], "{table}, {name}");
        }
        let (mut fast_record, mut slow_record) = (record(&fast), record(&slow));
        assert_eq!(fast_record["options"]["exact_only"], false);
        assert_eq!(slow_record["options"]["exact_only"], true);
        let decided = |record: &Value, tier: &str| {
            let decisions = &record["arithmetic"]["decisions"];
            let count = |walk: &str| decisions[walk][tier].as_u64().expect("a count");
            count("fans") + count("beams")
        };
        assert_eq!(
            decided(&slow_record, "float") + decided(&slow_record, "integer"),
            0
        );
        assert!(decided(&slow_record, "big") > 0);
        assert!(decided(&fast_record, "float") + decided(&fast_record, "integer") > 0);
        for record in [&mut fast_record, &mut slow_record] {
            record["options"]["exact_only"] = Value::Null;
            record["arithmetic"] = Value::Null;
            // Enclosures of distances depend on how these are computed; only their narrowness is promised.
            for level in record["measure"]["levels"].as_array_mut().expect("levels") {
                let width: f64 = level["width"]
                    .as_str()
                    .expect("text")
                    .parse()
                    .expect("a number");
                assert!(width < 1e-30, "{table}: {width}");
                level["width"] = Value::Null;
            }
        }
        for (field, value) in fast_record.as_object().expect("an object") {
            assert!(*value == slow_record[field], "{table}: {field}");
        }
        let (fast, slow) = (&fast["report.html"], &slow["report.html"]);
        assert_eq!(fast.lines().count(), slow.lines().count());
        for (line, other) in fast.lines().zip(slow.lines()).filter(|(a, b)| a != b) {
            let named = [
                "<th scope=\"row\">Arithmetic</th>",
                "with certainty to within",
                "Walking the fans took",
                "<pre>reboundary study",
            ];
            assert!(named.iter().any(|n| line.contains(n)), "{line}\n{other}");
        }
    }
}

#[test]
fn an_earlier_study_is_replaced_and_the_default_name_is_the_tables() {
    let place = place();
    let table = polygon("square");
    for length in ["6", "5"] {
        let output = run_in(&place, &["study", &table, "--length", length]);
        assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    }
    let folder = place.path().join("square-study");
    let words = |folder: &Path| std::fs::read_to_string(folder.join("words.txt")).expect("text");
    assert_eq!(words(&folder).lines().next().expect("a word").len(), 5);
    // A refused study leaves the earlier one alone.
    let refused = ["study", &table, "--length", "100", "--budget-memory", "1M"];
    assert_eq!(run_in(&place, &refused).status.code(), Some(2));
    assert_eq!(words(&folder).lines().next().expect("a word").len(), 5);
    let top: Vec<_> = std::fs::read_dir(place.path()).expect("a folder").collect();
    assert_eq!(top.len(), 1);
}

/// The graph order alone chooses the length, but no study is shorter than 3.
#[test]
fn a_graph_order_chooses_the_length() {
    for (order, length) in [("0", 3), ("1", 3), ("2", 3), ("7", 8)] {
        let record = record(&study(&polygon("square"), &["--graph-order", order]));
        assert_eq!(record["options"]["length"], length, "order {order}");
        assert_eq!(record["options"]["graph_order"].to_string(), order);
    }
}
