//! What each command prints, and that it prints the same whatever the number of threads.

mod program;
mod support;

use program::{done, entries, json, numbers, place, polygon, run_in, text};
use serde_json::Value;
use support::{coprime_below, language, legs_three_and_four, words};

/// p(n) = 4·A(n) − 4 for n ≥ 1 with A(n) = 1 + Σ (n + 1 − i)·φ(i), the number of balanced words: OEIS A005598; four
/// letters and N(n) = 4·φ(n + 2): recomputed by an independent program.
fn square_complexity(longest: u64) -> Vec<i64> {
    let balanced = |n: u64| 1 + (1..=n).map(|i| (n + 1 - i) * coprime_below(i)).sum::<u64>();
    std::iter::once(1)
        .chain((1..=longest).map(|n| 4 * balanced(n) as i64 - 4))
        .collect()
}

fn complexity(route: &str) -> Value {
    let square = polygon("square");
    json(&[
        "complexity",
        &square,
        "--length",
        "40",
        "--route",
        route,
        "--format",
        "json",
    ])
}

fn differences(values: &[i64]) -> Vec<i64> {
    values.windows(2).map(|w| w[1] - w[0]).collect()
}

#[test]
fn complexity_of_the_square_oeis_a005598_by_every_route() {
    let expected = square_complexity(40);
    let diagonals: Vec<i64> = (0..=38).map(|n| 4 * coprime_below(n + 2) as i64).collect();
    for (route, agree) in [
        ("both", Value::Bool(true)),
        ("beams", Value::Null),
        ("diagonals", Value::Null),
    ] {
        let found = complexity(route);
        assert_eq!(found["schema"], "reboundary-complexity/1");
        assert_eq!(found["length"], 40);
        assert_eq!(found["route"], route);
        assert_eq!(numbers(&found["p"]), expected, "{route}");
        let first = differences(&expected);
        assert_eq!(numbers(&found["first_difference"]), first, "{route}");
        assert_eq!(
            numbers(&found["second_difference"]),
            differences(&first),
            "{route}"
        );
        match route {
            "beams" => assert_eq!(found["diagonals"], Value::Null),
            _ => assert_eq!(numbers(&found["diagonals"]), diagonals),
        }
        assert_eq!(found["routes_agree"], agree, "{route}");
        assert_eq!(found["complete"], true);
        assert_eq!(found["complete_to"], 40);
    }
}

#[test]
fn complexity_as_text_and_csv_has_the_same_numbers() {
    let square = polygon("square");
    let csv = done(&["complexity", &square, "--length", "5", "--format", "csv"]);
    assert_eq!(
        csv,
        "n,p,s,b,diagonals\n0,1,3,5,4\n1,4,8,8,8\n2,12,16,8,8\n3,28,24,16,16\n4,52,40,,\n5,92,,,\n"
    );
    let text = done(&["complexity", &square, "--length", "5"]);
    assert!(
        text.contains("both routes agree for every n up to 5"),
        "{text}"
    );
    let cells = |line: &str| {
        line.split_whitespace()
            .map(String::from)
            .collect::<Vec<_>>()
    };
    assert_eq!(
        cells(text.lines().nth(4).expect("n = 2")),
        ["2", "12", "16", "8", "8"]
    );
}

#[test]
fn words_come_sorted_and_complete_in_every_format() {
    let table = polygon("legs-3-4");
    let expected: Vec<String> = words(&language(&legs_three_and_four(), 9), 9)
        .iter()
        .map(|w| w.iter().map(|s| (b'a' + s) as char).collect())
        .collect();
    // The file's legs lie the other way round than the support's: c and a change places.
    let mut expected: Vec<String> = expected
        .iter()
        .map(|w| {
            w.chars()
                .map(|c| match c {
                    'a' => 'c',
                    'c' => 'a',
                    c => c,
                })
                .collect()
        })
        .collect();
    expected.sort();
    let printed = done(&["words", &table, "--length", "9"]);
    let lines: Vec<&str> = printed.lines().collect();
    assert_eq!(lines, expected);
    let csv = done(&["words", &table, "--length", "9", "--format", "csv"]);
    let rows: Vec<&str> = csv.lines().collect();
    assert_eq!(rows[0], "word,measure");
    assert_eq!(rows.len(), 1 + expected.len());
    let rows_json = done(&["words", &table, "--length", "9", "--format", "json"]);
    let mut sum = 0.0;
    for ((row, line), word) in rows[1..].iter().zip(rows_json.lines()).zip(&expected) {
        let object: Value = serde_json::from_str(line).expect("JSON Lines");
        let measure = object["measure"].as_str().expect("a decimal");
        assert_eq!(object["word"], word.as_str());
        assert_eq!(*row, format!("{word},{measure}"));
        sum += measure.parse::<f64>().expect("a number");
    }
    assert!((sum - 24.0).abs() < 1e-12, "2·perimeter = 24, not {sum}");
}

#[test]
fn words_keep_the_order_of_the_letters_in_the_file() {
    let place = place();
    let file = place.path().join("quay.toml");
    let corners = r#"corners = [["0", "0"], ["1", "0"], ["0", "1"]]"#;
    std::fs::write(&file, format!("{corners}\nsides = [\"z\", \"ä\", \"a\"]\n")).expect("written");
    let output = run_in(&place, &["words", "quay.toml", "--length", "2"]);
    assert_eq!(text(&output.stdout), "zä\nza\näz\näa\naz\naä\n");
}

#[test]
fn graph_has_its_fields_for_every_order() {
    let table = polygon("right-isosceles");
    let arguments = [
        "graph", &table, "--length", "30", "--radii", "3", "--format", "json",
    ];
    let printed = done(&arguments);
    let found: Value = serde_json::from_str(&printed).expect("one JSON value");
    let orders = found["orders"].as_array().expect("orders");
    assert_eq!(orders.len(), 30);
    assert_eq!(printed.matches("\"order\":").count(), 30, "each field once");
    let p = numbers(&json(&["complexity", &table, "--length", "31", "--format", "json"])["p"]);
    for (order, n) in orders.iter().zip(1usize..) {
        assert_eq!(order["order"], n);
        assert_eq!(order["vertices"], p[n]);
        assert_eq!(order["arcs"], p[n + 1]);
        for field in ["left_special", "right_special", "bispecial", "unique_both"] {
            assert!(order[field].as_i64().expect(field) <= p[n], "{field}");
        }
        // The language is closed under reversal.
        assert_eq!(order["left_special"], order["right_special"]);
        let (special, both) = (&order["left_special"], &order["bispecial"]);
        let union = 2 * special.as_i64().expect("a count") - both.as_i64().expect("a count");
        assert_eq!(order["unique_both"], p[n] - union);
        assert_eq!(order["within_bound"], true);
        let balls = numbers(&order["path_balls"]);
        let shares = order["path_share"].as_array().expect("shares");
        assert_eq!(shares.len(), 3);
        for (balls, share) in balls.iter().zip(shares) {
            let share = share.as_f64().expect("a share");
            assert!((share - *balls as f64 / p[n] as f64).abs() < 1e-12);
        }
    }
    // Recomputed: 1824, 928, 468 of 2230 words of length 30.
    assert_eq!(numbers(&orders[29]["path_balls"]), [1824, 928, 468]);
    assert_eq!(orders[29]["vertices"], 2230);
    let csv = done(&[
        "graph", &table, "--length", "30", "--radii", "3", "--format", "csv",
    ]);
    assert_eq!(csv.lines().count(), 31);
    assert!(
        csv.lines()
            .last()
            .expect("a row")
            .ends_with(",1824,928,468")
    );
    let text = done(&["graph", &table, "--length", "30", "--radii", "3"]);
    assert_eq!(text.lines().count(), 32);
}

#[test]
fn diagonals_are_listed_with_exact_displacements() {
    let square = polygon("square");
    let found = json(&["diagonals", &square, "--length", "6", "--format", "json"]);
    let by_crossings: Vec<i64> = (0..=6).map(|n| 4 * coprime_below(n + 2) as i64).collect();
    assert_eq!(numbers(&found["by_crossings"]), by_crossings);
    let listed = found["diagonals"].as_array().expect("diagonals");
    assert_eq!(listed.len() as i64, by_crossings.iter().sum::<i64>());
    for diagonal in listed {
        let whole = |axis: &str| -> i64 {
            let exact = diagonal["displacement"][axis]["exact"]
                .as_str()
                .expect("exact");
            exact.parse().expect("a grid vector")
        };
        let (x, y) = (whole("x").unsigned_abs(), whole("y").unsigned_abs());
        // A grid vector without grid points inside crosses x − 1 + y − 1 lines.
        assert_eq!(support::gcd(x, y), 1);
        assert_eq!(diagonal["crossings"], x + y - 2);
        assert_eq!(
            diagonal["code"].as_str().expect("a code").len() as u64,
            x + y - 2
        );
        let length: f64 = diagonal["length"]
            .as_str()
            .expect("a length")
            .parse()
            .expect("a number");
        assert!((length * length - (x * x + y * y) as f64).abs() < 1e-9);
    }
    let csv = done(&["diagonals", &square, "--length", "6", "--format", "csv"]);
    assert_eq!(csv.lines().count(), 1 + listed.len());
    let text = done(&["diagonals", &square, "--length", "6"]);
    assert_eq!(text.lines().count(), 1 + listed.len());
}

#[test]
fn table_tells_proved_facts() {
    let found = json(&["table", &polygon("legs-3-4"), "--format", "json"]);
    assert_eq!(found["schema"], "reboundary-table/1");
    assert_eq!(found["convex"], true);
    assert_eq!(found["integrable"], false);
    assert_eq!(found["reflection_group_order"], Value::Null);
    assert!(
        found["area"]
            .as_str()
            .expect("a decimal")
            .starts_with("6.000")
    );
    assert!(
        found["perimeter"]
            .as_str()
            .expect("a decimal")
            .starts_with("12.000")
    );
    let text = done(&["table", &polygon("l-of-three-squares")]);
    assert!(text.contains("reflection group finite, order 4"), "{text}");
    assert!(text.contains("convex           no"), "{text}");
    let csv = done(&["table", &polygon("square"), "--format", "csv"]);
    assert_eq!(csv.lines().count(), 5);
}

/// From a third of side a along (2, 5): crossings of the grid lines in the order of their times, by hand:
/// y = 1 at t = 1/5, x = 1 at 1/3, y = 2 at 2/5, y = 3 at 3/5, y = 4 at 4/5, x = 2 at 5/6, y = 5 at 1.
#[test]
fn trace_prints_the_word_and_exact_hits() {
    let square = polygon("square");
    let launch = [
        "trace", &square, "--start", "a@1/3", "--aim", "2,5", "--hits", "8",
    ];
    assert_eq!(done(&launch), "acbacadc\n");
    let found = json(&[&launch[..], &["--format", "json"]].concat());
    assert_eq!(found["word"], "acbacadc");
    assert_eq!(found["end"]["kind"], "hits");
    let hits = found["hits"].as_array().expect("hits");
    assert_eq!(hits.len(), 8);
    // Time 1/5: x = 1/3 + 2/5 = 11/15 on y = 1. Time 1/3: y = 5/3, folded to 1/3.
    assert_eq!(hits[1]["point"]["x"]["exact"], "11/15");
    assert_eq!(hits[1]["point"]["y"]["exact"], "1");
    assert_eq!(hits[2]["point"]["y"]["exact"], "1/3");
    let csv = done(&[&launch[..], &["--format", "csv"]].concat());
    assert_eq!(csv.lines().count(), 9);
}

#[test]
fn trace_says_how_the_orbit_ends() {
    let square = polygon("square");
    let place = place();
    let launch = |start: &str, aim: &str, more: &[&str]| {
        let arguments = [
            "trace", &square, "--start", start, "--aim", aim, "--hits", "12",
        ];
        run_in(&place, &[&arguments[..], more].concat())
    };
    let periodic = launch("a@1/3", "1,1", &[]);
    assert_eq!(periodic.status.code(), Some(0));
    assert_eq!(text(&periodic.stdout), "abcdabcdabcd\n");
    assert!(
        text(&periodic.stderr).contains("after 4 hits"),
        "{periodic:?}"
    );
    let corner = launch("a@1/2", "1,2", &[]);
    assert_eq!(corner.status.code(), Some(0));
    assert_eq!(text(&corner.stdout), "a\n");
    assert!(
        text(&corner.stderr).contains("runs into corner 2"),
        "{corner:?}"
    );
    assert_eq!(text(&launch("a@1/2", "1,2", &["--quiet"]).stderr), "");
    let record = launch("a@1/2", "1,2", &["--quiet", "--format", "json"]);
    let record: Value = serde_json::from_slice(&record.stdout).expect("JSON");
    assert_eq!(record["end"]["kind"], "corner");
    assert_eq!(record["end"]["corner"], 2);
}

#[test]
fn orbits_depend_on_the_seed_alone() {
    let table = polygon("dart");
    let base = ["orbits", &table, "--count", "300", "--hits", "40"];
    let with = |more: &[&str]| done(&[&base[..], more].concat());
    let first = with(&["--seed", "7", "--threads", "1"]);
    assert_eq!(first.lines().count(), 300);
    assert!(first.lines().all(|word| word.len() == 40));
    for threads in ["1", "2", "7"] {
        assert_eq!(with(&["--seed", "7", "--threads", threads]), first);
    }
    assert_ne!(with(&["--seed", "8"]), first);
    // Fewer orbits are the first of many.
    let few = done(&[
        "orbits", &table, "--count", "20", "--hits", "40", "--seed", "7",
    ]);
    assert!(first.starts_with(&few));
    // The exact starts reproduce the words.
    let json = with(&["--seed", "7", "--format", "json"]);
    for (line, word) in json.lines().zip(first.lines()).take(5) {
        let orbit: Value = serde_json::from_str(line).expect("JSON Lines");
        let field = |value: &Value| value.as_str().expect("a string").to_string();
        assert_eq!(orbit["word"], word);
        let start = format!("{}@{}", field(&orbit["side"]), field(&orbit["fraction"]));
        let aim = format!("{},{}", field(&orbit["aim"][0]), field(&orbit["aim"][1]));
        let traced = done(&[
            "trace", &table, "--start", &start, "--aim", &aim, "--hits", "40",
        ]);
        assert_eq!(traced.trim_end(), word);
    }
    let csv = with(&["--seed", "7", "--format", "csv"]);
    assert_eq!(csv.lines().count(), 301);
}

#[test]
fn threads_and_exact_only_change_no_byte() {
    let table = polygon("cube-root-triangle");
    for command in [
        &["words", &table, "--length", "9", "--format", "csv"][..],
        &["complexity", &table, "--length", "14"],
        &["diagonals", &table, "--length", "7"],
        &["graph", &table, "--length", "10"],
    ] {
        let expected = done(&[command, &["--threads", "1"]].concat());
        for more in [
            &["--threads", "2"][..],
            &["--threads", "7"],
            &["--exact-only"],
        ] {
            assert_eq!(
                done(&[command, more].concat()),
                expected,
                "{command:?} {more:?}"
            );
        }
    }
}

#[test]
fn out_gets_what_standard_output_would_get() {
    let table = polygon("square");
    for command in [
        &["table", &table][..],
        &["words", &table, "--length", "5"],
        &["complexity", &table, "--length", "8"],
        &["diagonals", &table],
        &["graph", &table, "--length", "8"],
        &["graph", &table, "--length", "4", "--format", "graphml"],
        &["trace", &table, "--start", "a@1/3", "--aim", "2,5"],
        &["orbits", &table, "--count", "5"],
    ] {
        let place = place();
        let file = place.path().join("result");
        std::fs::write(&file, "old").expect("written");
        let output = run_in(&place, &[command, &["--out", "result", "--quiet"]].concat());
        assert_eq!(output.status.code(), Some(0), "{command:?}");
        assert_eq!(text(&output.stdout), "", "{command:?}");
        let expected = done(&[command, &["--quiet"]].concat());
        assert_eq!(
            std::fs::read_to_string(&file).expect("text"),
            expected,
            "{command:?}"
        );
        assert_eq!(entries(place.path()), [file], "{command:?}");
    }
}

#[test]
fn help_and_version_are_results() {
    assert!(done(&["--version"]).starts_with("reboundary "));
    let help = done(&["--help"]);
    for command in [
        "study",
        "table",
        "words",
        "complexity",
        "diagonals",
        "graph",
        "trace",
        "orbits",
    ] {
        assert!(help.contains(command), "{command}");
        assert!(
            done(&[command, "--help"]).contains("Usage: reboundary"),
            "{command}"
        );
    }
}
