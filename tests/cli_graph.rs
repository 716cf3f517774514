//! `graph` as a user runs it: every source of a language, every section, every format, and wrong input.

mod program;

use program::{entries, place, polygon, run_in, text};
use serde_json::Value;

fn reference(name: &str) -> String {
    format!(
        "{}/demo-data/reference/{name}.toml",
        env!("CARGO_MANIFEST_DIR")
    )
}

fn output(arguments: &[&str]) -> String {
    program::done(arguments)
}

fn json(arguments: &[&str]) -> Value {
    let all = [arguments, &["--format", "json"]].concat();
    serde_json::from_str(&output(&all)).expect("JSON")
}

#[test]
fn a_reference_gives_its_counts_and_says_what_it_is() {
    let path = reference("bell-buoy");
    let found = json(&[
        "graph",
        "--reference",
        &path,
        "--length",
        "50",
        "--radii",
        "3",
    ]);
    assert_eq!(found["source"]["kind"], "substitution");
    assert_eq!(found["source"]["complete"], true);
    assert_eq!(found["source"]["bi_extendable"], true);
    let last = &found["orders"][49];
    // Recomputed: 49, 43, 39 of 51 words have path balls.
    assert_eq!(last["vertices"], 51);
    assert_eq!(last["path_balls"], serde_json::json!([49, 43, 39]));
    let distance = last["distance_to_line"][0].as_f64().expect("a number");
    assert!((distance - 2.0 / 51.0).abs() < 1e-12);
}

#[test]
fn words_give_the_counts_of_the_table_that_they_come_from() {
    let place = place();
    let square = polygon("square");
    let words = output(&["words", &square, "--length", "8"]);
    std::fs::write(place.path().join("words.txt"), words).expect("written");
    let found = run_in(
        &place,
        &["graph", "--words", "words.txt", "--format", "csv"],
    );
    let direct = output(&["graph", &square, "--length", "7", "--format", "csv"]);
    assert_eq!(text(&found.stdout), direct);
}

#[test]
fn orbits_give_lower_bounds_in_every_format() {
    let place = place();
    let square = polygon("square");
    let mut all = Vec::new();
    for format in ["text", "json", "csv"] {
        let orbits = [
            "orbits", &square, "--count", "300", "--hits", "40", "--seed", "5", "--format", format,
        ];
        std::fs::write(place.path().join(format), output(&orbits)).expect("written");
        let found = run_in(
            &place,
            &[
                "graph", "--orbits", format, "--length", "10", "--format", "json",
            ],
        );
        let mut value: Value = serde_json::from_str(&text(&found.stdout)).expect("JSON");
        value["title"] = Value::Null;
        all.push(value);
    }
    assert!(all[0] == all[1] && all[1] == all[2]);
    let source = &all[0]["source"];
    assert_eq!(
        (&source["complete"], &source["kind"]),
        (&false.into(), &"orbits".into())
    );
    let trusted = source["trusted_to"].as_u64().expect("a length");
    assert!((2..=11).contains(&trusted), "{source}");
    let exact = json(&["graph", &square, "--length", "10"]);
    for n in 0..10 {
        let of = |v: &Value| v["orders"][n]["vertices"].as_u64().expect("a count");
        assert!(of(&all[0]) <= of(&exact));
        if (n as u64) < trusted {
            assert_eq!(of(&all[0]), of(&exact), "order {}", n + 1);
        }
    }
    let told = run_in(&place, &["graph", "--orbits", "text", "--length", "10"]);
    assert!(text(&told.stdout).contains("lower bounds"));
}

#[test]
fn sections_stand_in_json_text_and_csv() {
    let path = reference("ebb-and-flood");
    let base = [
        "graph",
        "--reference",
        &path,
        "--length",
        "12",
        "--radii",
        "2",
    ];
    let all = [&base[..], &["--census", "--law", "--structure"]].concat();
    let found = json(&all);
    let census = found["census"].as_array().expect("a census");
    assert_eq!(census.len(), 6);
    for one in census {
        let types = one["types"].as_array().expect("types");
        let sum: u64 = types
            .iter()
            .map(|t| t["count"].as_u64().expect("a count"))
            .sum();
        assert_eq!(Some(sum), one["words"].as_u64());
    }
    assert_eq!(found["law"].as_array().expect("laws").len(), 3);
    assert_eq!(
        found["structure"]["orders"]
            .as_array()
            .expect("orders")
            .len(),
        12
    );
    assert_eq!(
        found["structure"]["evolution"]
            .as_array()
            .expect("steps")
            .len(),
        11
    );
    assert_eq!(found["structure"]["diameter"]["lower"], 10);
    let shown = output(&all);
    for part in [
        "balls of radius 2",
        "law of the 5 letters",
        "diameter: 10",
        "spectral moments",
    ] {
        assert!(shown.contains(part), "{part}");
    }
    for (section, column) in [
        ("--census", "code"),
        ("--law", "drift"),
        ("--structure", "largest_strong"),
    ] {
        let table = output(&[&base[..], &[section, "--format", "csv"]].concat());
        assert!(
            table.lines().next().expect("a header").contains(column),
            "{section}"
        );
    }
    let plain = output(
        &[
            &base[..],
            &["--census", "--kind", "plain", "--format", "csv"],
        ]
        .concat(),
    );
    assert!(plain.contains("plain") && !plain.contains("oriented"));
}

/// The invariant measure of the square's sides is uniform, and so is the law on all words, by symmetry.
#[test]
fn the_law_of_a_table_stands_beside_its_measure() {
    let place = place();
    let square = polygon("square");
    let orbits = output(&[
        "orbits", &square, "--aim", "3,2", "--count", "40", "--hits", "60", "--seed", "1",
    ]);
    std::fs::write(place.path().join("orbits"), orbits).expect("written");
    let arguments = [
        "graph",
        &square,
        "--length",
        "14",
        "--radii",
        "1",
        "--law",
        "--frequencies",
        "orbits",
    ];
    let found = run_in(&place, &[&arguments[..], &["--format", "json"]].concat());
    let found: Value = serde_json::from_str(&text(&found.stdout)).expect("JSON");
    let letters = &found["law"][0];
    for i in 0..4 {
        assert_eq!(letters["shares"][i], 0.25);
        assert!((letters["measures"][i].as_f64().expect("a measure") - 0.25).abs() < 1e-12);
    }
    // One direction of slope 2/3 has its own law.
    let last = &letters["orders"].as_array().expect("orders")[13];
    assert!(last["to_frequencies"].as_f64().expect("a distance") > 0.05);
    assert_eq!(found["law"][1]["strange"], 0.0);
}

#[test]
fn one_graph_in_every_format() {
    let path = reference("bell-buoy");
    let base = ["graph", "--reference", &path, "--length", "3"];
    let of = |format: &str| output(&[&base[..], &["--format", format]].concat());
    assert!(of("dot").starts_with("digraph order3 {\n  v0 [label=\"001\""));
    assert_eq!(of("edges").lines().count(), 6);
    let lists: Value = serde_json::from_str(&of("adjacency")).expect("JSON");
    assert_eq!(
        lists["words"],
        serde_json::json!(["001", "010", "100", "101"])
    );
    assert_eq!(
        lists["successors"],
        serde_json::json!([[1], [2, 3], [0], [1]])
    );
    assert!(of("graphml").contains("<graphml"));
}

#[test]
fn drawings_are_a_folder_of_sheets() {
    let place = place();
    let path = reference("lock-gates");
    let run = |more: &[&str]| {
        let base = [
            "graph",
            "--reference",
            &path,
            "--length",
            "9",
            "--radii",
            "2",
            "--census",
        ];
        run_in(
            &place,
            &[&base[..], &["--drawings", "sheets"], more].concat(),
        )
    };
    for _ in 0..2 {
        assert_eq!(run(&[]).status.code(), Some(0));
    }
    let files = entries(&place.path().join("sheets"));
    assert_eq!(files.len(), 7, "{files:?}");
    let sheet =
        std::fs::read_to_string(place.path().join("sheets/balls-plain-2.svg")).expect("a sheet");
    assert!(sheet.contains("<title>Balls of radius 2, plain factor graph of order 9</title>"));
}

#[test]
fn wrong_input_is_refused_with_what_to_write() {
    let place = place();
    let file = |name: &str, content: &str| {
        std::fs::write(place.path().join(name), content).expect("written")
    };
    file("words", "abab\nbaba\n");
    file("empty", "");
    file("short", "a\n");
    file("spaced", "a b\n");
    file("broken.toml", "[substitution]\n0 = \"01\"\n");
    file("object", "{\"a\": 1}\n");
    file("table", "a,b\n1,2\n");
    let square = polygon("square");
    let golden = reference("flag-hoist");
    let buoy = reference("bell-buoy");
    let before = entries(place.path());
    let cases: [(&[&str], &str); 18] = [
        (&["graph"], "--words <FILE>"),
        (
            &["graph", &square, "--words", "words"],
            "cannot be used with",
        ),
        (&["graph", "--words", "none"], "cannot read this file"),
        (&["graph", "--words", "empty"], "write one word a line"),
        (&["graph", "--words", "short"], "at least 2 letters"),
        (&["graph", "--sequence", "spaced"], "line 1"),
        (&["graph", "--words", "words", "--length", "4"], "at most 3"),
        (
            &["graph", "--words", "words", "--set", "t=1"],
            "--set goes with",
        ),
        (&["graph", "--orbits", "object"], "no `word`"),
        (&["graph", "--orbits", "table"], "no column `word`"),
        (&["graph", "--reference", "broken.toml"], "`1` is no letter"),
        (
            &["graph", "--reference", &golden, "--length", "300"],
            "smaller --length",
        ),
        (
            &["graph", "--reference", &buoy, "--kind", "plain"],
            "--census",
        ),
        (
            &["graph", "--reference", &buoy, "--census", "--kind", "round"],
            "plain",
        ),
        (
            &[
                "graph",
                "--reference",
                &buoy,
                "--law",
                "--census",
                "--format",
                "csv",
            ],
            "CSV holds one",
        ),
        (
            &["graph", "--reference", &buoy, "--law", "--format", "dot"],
            "one factor graph",
        ),
        (
            &[
                "graph",
                "--reference",
                &buoy,
                "--law",
                "--frequencies",
                "words",
            ],
            "`a` is no letter",
        ),
        (
            &["graph", "--reference", &buoy, "--census", "--drawings", "."],
            ".",
        ),
    ];
    for (arguments, message) in cases {
        let output = run_in(&place, arguments);
        let told = text(&output.stderr);
        assert_eq!(output.status.code(), Some(2), "{arguments:?}: {told}");
        assert!(told.contains(message), "{arguments:?}: {told}");
        assert_eq!(text(&output.stdout), "", "{arguments:?}");
        assert_eq!(entries(place.path()), before, "{arguments:?}");
    }
}
