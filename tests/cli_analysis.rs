//! `compare`, `measures` and `special` as a user runs them, and bad input on each of their options.

mod program;

use program::{done, entries, json, numbers, place, polygon, program, run_in, text};
use std::collections::BTreeSet;

fn folder_of(names: &[(&str, &str)]) -> tempfile::TempDir {
    let place = place();
    for (name, content) in names {
        std::fs::write(place.path().join(name), content).expect("written");
    }
    place
}

/// Code 2, a message that says `named`, nothing printed, nothing written.
fn refused(arguments: &[&str], named: &str) {
    let place = place();
    let kept = place.path().join("kept");
    std::fs::write(&kept, "untouched").expect("written");
    let output = run_in(&place, arguments);
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(2), "{arguments:?}: {message}");
    assert!(message.contains(named), "{arguments:?}: {message}");
    assert!(message.starts_with("error"), "{arguments:?}: {message}");
    assert_eq!(text(&output.stdout), "", "{arguments:?}");
    assert_eq!(entries(place.path()), [kept], "{arguments:?}");
}

#[test]
fn compare_two_tables() {
    let (square, golden) = (polygon("square"), polygon("golden-rectangle"));
    let found = json(&[
        "compare", &square, &golden, "--length", "9", "--format", "json",
    ]);
    assert_eq!(found["schema"], "reboundary-compare/1");
    assert_eq!(
        (found["agree_to"].as_u64(), found["length"].as_u64()),
        (Some(9), Some(9))
    );
    assert!(found["first_difference"].is_null() && found["only_first"].is_null());
    assert_eq!(numbers(&found["p"][0])[..4], [1, 4, 12, 28]);
    let told = done(&["compare", &square, &golden, "--length", "9"]);
    assert!(
        told.contains("equal up to a renaming of letters, to length 9"),
        "{told}"
    );
    let rows = done(&[
        "compare", &square, &golden, "--length", "3", "--format", "csv",
    ]);
    assert_eq!(rows.lines().nth(4), Some("3,28,28,true"), "{rows}");
}

/// The square has aca, which is the heaviest of the words that the rhombus lacks; p(3) is 28 against 24.
#[test]
fn compare_lists_the_words_of_one_table_alone() {
    let (square, rhombus) = (polygon("square"), polygon("rhombus-60"));
    let base = ["compare", &square, &rhombus, "--length", "6", "--most", "2"];
    let found = json(&[&base[..], &["--format", "json", "--as-written"]].concat());
    assert_eq!(found["first_difference"], 3);
    assert_eq!(found["first_difference_of_p"], 3);
    let only = |which: &str| {
        let words = found[which]["words"].as_array().expect("a list");
        let probability =
            |w: &serde_json::Value| w["probability"].as_str().expect("a text").to_string();
        assert!(
            words
                .windows(2)
                .all(|w| probability(&w[0]) >= probability(&w[1]))
        );
        (
            found[which]["count"].as_u64().expect("a number"),
            words.len(),
        )
    };
    let (first, second) = (only("only_first"), only("only_second"));
    assert_eq!((first.1, second.1), (2, 2));
    assert_eq!(first.0 as i64 - second.0 as i64, 4, "p(3) is 28 and 24");
    let told = done(&base);
    assert!(told.contains("more"), "{told}");
}

#[test]
fn compare_under_a_given_renaming() {
    let place = folder_of(&[
        (
            "one.toml",
            "corners = [[\"0\",\"0\"],[\"1\",\"0\"],[\"0\",\"1\"]]\n",
        ),
        (
            "two.toml",
            "corners = [[\"0\",\"0\"],[\"1\",\"0\"],[\"0\",\"1\"]]\nsides = [\"y\", \"x\", \"c\"]\n",
        ),
    ]);
    let run = |more: &[&str]| {
        let base = [
            "compare", "one.toml", "two.toml", "--length", "8", "--format", "json",
        ];
        let output = run_in(&place, &[&base[..], more].concat());
        assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
        let found: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON");
        found["agree_to"].as_u64().expect("a number")
    };
    assert_eq!(run(&[]), 8);
    assert_eq!(run(&["--as-written"]), 0);
    assert_eq!(run(&["--rename", "a=y,b=x"]), 8, "c stays as it is");
    // The mirror image of the triangle; and a map that is no symmetry.
    assert_eq!(run(&["--rename", "a=c,b=x,c=y"]), 8);
    assert!(run(&["--rename", "a=x,b=y"]) < 8);
}

#[test]
fn compare_a_folder_in_classes() {
    let square = "corners = [[\"0\",\"0\"],[\"1\",\"0\"],[\"1\",\"1\"],[\"0\",\"1\"]]\n";
    let flat = "corners = [[\"0\",\"0\"],[\"7\",\"0\"],[\"7\",\"1\"],[\"0\",\"1\"]]\n";
    let kite = "corners = [[\"0\",\"0\"],[\"2\",\"-1\"],[\"3\",\"0\"],[\"2\",\"1\"]]\n";
    let place = folder_of(&[
        ("a.toml", square),
        ("b.toml", kite),
        ("c.toml", flat),
        ("d.toml", "regular = 3\n"),
        ("notes.txt", "no table"),
    ]);
    let output = run_in(
        &place,
        &["compare", ".", "--length", "7", "--format", "json"],
    );
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let found: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON");
    assert_eq!(found["tables"], 4);
    let members: Vec<Vec<String>> = found["classes"]
        .as_array()
        .expect("a list")
        .iter()
        .map(|class| {
            let members = class["members"].as_array().expect("a list").iter();
            let file = |m: &serde_json::Value| m["file"].as_str().expect("a name").to_string();
            members.map(file).collect()
        })
        .collect();
    assert_eq!(
        members,
        [
            vec!["./a.toml", "./c.toml"],
            vec!["./b.toml"],
            vec!["./d.toml"]
        ]
    );
    let counts = numbers(&found["classes_by_length"]);
    assert_eq!(counts[..2], [1, 2], "the triangle differs at once");
    assert_eq!(counts[7], 3);
    let told = run_in(&place, &["compare", ".", "--length", "7"]);
    assert!(
        text(&told.stdout).starts_with("4 tables, 3 classes"),
        "{}",
        text(&told.stdout)
    );
    let rows = text(&run_in(&place, &["compare", ".", "--format", "csv"]).stdout);
    assert_eq!(rows.lines().count(), 5, "{rows}");
}

#[test]
fn compare_refuses_bad_input() {
    let (square, rhombus) = (polygon("square"), polygon("rhombus-60"));
    let two = |more: &[&'static str], named: &str| {
        refused(&[&["compare", &square, &rhombus], more].concat(), named);
    };
    refused(&["compare"], "<TABLE>");
    refused(&["compare", &square], "name a second one");
    refused(&["compare", &square, "nowhere.toml"], "nowhere.toml");
    refused(&["compare", &square, "."], "no table file (*.toml)");
    two(&["--length", "0"], "at least 1");
    two(&["--length", "x"], "whole number");
    two(&["--most", "x"], "--most");
    two(&["--rename", "a"], "'a' is no pair of letters");
    two(&["--rename", "a=b,"], "'' is no pair");
    two(
        &["--rename", "z=a"],
        "'z' is no letter of the first table, whose letters are abcd",
    );
    two(&["--rename", "a=z"], "'z' is no letter of the second table");
    two(&["--rename", "a=b,a=c"], "named twice");
    two(&["--rename", "a=b,c=b"], "'a' and 'c' both become 'b'");
    two(&["--rename", "a=b", "--as-written"], "--as-written");
    two(&["--format", "xml"], "xml");
    two(&["--budget-memory", "1K"], "larger --budget-memory");
    two(&["--out", "missing/file"], "missing");
    refused(
        &["compare", &square, &rhombus, &square, "--rename", "a=b"],
        "two tables, not 3",
    );
}

/// Decimals of the same number of places, compared as they are read.
fn ordered(lower: &str, upper: &str) -> bool {
    let parse = |t: &str| t.parse::<f64>().expect("a number");
    parse(lower) <= parse(upper) && parse(upper) - parse(lower) < 1e-12
}

#[test]
fn measures_in_all_formats() {
    let square = polygon("square");
    let base = ["measures", &square, "--length", "4"];
    let rows = done(&[&base[..], &["--format", "csv"]].concat());
    let mut reader = csv::Reader::from_reader(rows.as_bytes());
    let rows: Vec<csv::StringRecord> = reader.records().map(|r| r.expect("a row")).collect();
    assert_eq!(rows.len(), 52);
    assert!(
        rows.iter()
            .all(|r| ordered(&r[1], &r[2]) && ordered(&r[3], &r[4]))
    );
    let sum: f64 = rows
        .iter()
        .map(|r| r[3].parse::<f64>().expect("a number"))
        .sum();
    assert!((sum - 1.0).abs() < 1e-12);
    let words: BTreeSet<&str> = rows.iter().map(|r| &r[0]).collect();
    assert_eq!(words.len(), 52);

    let lengths = done(&[&base[..], &["--format", "csv", "--rows", "lengths"]].concat());
    let second = lengths.lines().nth(2).expect("length 2");
    // √2 − 4/3, rounded outwards.
    assert!(second.contains(",0.0808802290397617"), "{second}");
    let blocks = done(
        &[
            &base[..],
            &["--format", "csv", "--rows", "blocks", "--blocks", "2"],
        ]
        .concat(),
    );
    assert_eq!(blocks.lines().count(), 1 + 4 + 3, "{blocks}");
    let found = json(&[&base[..], &["--format", "json", "--most", "3"]].concat());
    assert_eq!(found["schema"], "reboundary-measures/1");
    assert_eq!(found["heaviest"].as_array().map(Vec::len), Some(3));
    assert_eq!(found["heaviest"][0]["word"], "acac");
    assert_eq!(found["words"].as_array().map(Vec::len), Some(52));
    let told = done(&[&base[..], &["--blocks", "0", "--most", "0"]].concat());
    assert!(
        told.contains("0.080880229040") && !told.contains("blocks"),
        "{told}"
    );
}

#[test]
fn measures_draws_its_pictures() {
    let place = place();
    let square = polygon("square-two-letters");
    let arguments = ["measures", &square, "--length", "6", "--pictures", "drawn"];
    for _ in 0..2 {
        let output = program(&place, &arguments).output().expect("it starts");
        assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    }
    for name in ["distribution.svg", "blocks.svg"] {
        let svg = std::fs::read_to_string(place.path().join("drawn").join(name)).expect("drawn");
        assert!(svg.starts_with("<svg") && svg.contains("Square with two letters"));
    }
    assert_eq!(entries(place.path()).len(), 3);
}

#[test]
fn measures_refuses_bad_input() {
    let square = polygon("square");
    let with = |more: &[&'static str], named: &str| {
        let base = ["measures", &square, "--length", "4"];
        refused(&[&base[..], more].concat(), named);
    };
    refused(&["measures", &square], "--length");
    refused(&["measures", &square, "--length", "0"], "at least 1");
    with(&["--blocks", "x"], "whole number");
    with(&["--rows", "letters"], "letters");
    with(&["--most", "x"], "--most");
    with(&["--pictures", "kept"], "kept is there already");
    with(&["--pictures", "missing/folder"], "missing");
    with(&["--budget-memory", "1K"], "larger --budget-memory");
    with(&["--set", "t=1"], "t");
    with(&["--out", "."], "is a folder");
}

#[test]
fn special_in_all_formats() {
    let table = polygon("right-isosceles");
    let base = ["special", &table, "--length", "5"];
    let found = json(&[&base[..], &["--format", "json"]].concat());
    assert_eq!(found["schema"], "reboundary-special/1");
    assert_eq!(found["one_beam_a_word"], true);
    let growth = found["growth"].as_array().expect("a list");
    assert_eq!(growth.len(), 6);
    // p: 3, 6, 10, 18, 28, 38, 54 (recomputed by an independent program), so b(5) = 54 − 2·38 + 28 = 6.
    assert_eq!(growth[5]["second_difference"], 6);
    assert_eq!(growth[5]["diagonals"], 6);
    let bispecial = found["bispecial"].as_array().expect("a list");
    let listed = found["diagonals"].as_array().expect("a list");
    for row in bispecial.iter().filter(|row| row["length"] != 0) {
        let made_by = numbers(&row["diagonals"]);
        assert_eq!(
            made_by.len() as i64,
            row["multiplicity"].as_i64().expect("a number")
        );
        for diagonal in made_by {
            assert_eq!(listed[diagonal as usize]["code"], row["word"]);
        }
    }
    let right = found["right_special"].as_array().expect("a list");
    for row in right.iter().filter(|row| row["length"] != 0) {
        let (word, parent) = (
            row["word"].as_str().unwrap(),
            row["parent"].as_str().unwrap(),
        );
        assert_eq!(&word[1..], parent);
        assert!(row["letters"].as_str().unwrap().len() > 1);
    }
    for (rows, named) in [
        ("growth", "right special"),
        ("right", "(empty) then abc"),
        ("left", "(empty) after abc"),
        ("bispecial", "strength"),
    ] {
        let told = done(&[&base[..], &["--rows", rows]].concat());
        assert!(told.contains(named), "{told}");
        let csv = done(&[&base[..], &["--rows", rows, "--format", "csv"]].concat());
        assert!(csv.starts_with("length,"), "{csv}");
    }
    let csv = done(&[&base[..], &["--rows", "left", "--format", "csv"]].concat());
    assert_eq!(
        csv.lines().count() - 1,
        found["left_special"].as_array().unwrap().len()
    );
}

/// The tree that is drawn reaches the length where it has room; letters stand in the boxes.
#[test]
fn special_draws_its_tree() {
    let place = place();
    for (rows, name) in [("right", "right special"), ("left", "left special")] {
        let table = polygon("regular-pentagon");
        let arguments = ["special", &table, "--picture", "tree.svg", "--rows", rows];
        let output = run_in(&place, &arguments);
        assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
        let svg = std::fs::read_to_string(place.path().join("tree.svg")).expect("drawn");
        assert!(
            svg.contains(&format!("Tree of {name} words in Regular pentagon")),
            "{svg}"
        );
        assert!(svg.contains("of 8."), "drawn to a smaller length");
    }
}

#[test]
fn special_refuses_bad_input() {
    let square = polygon("square");
    let with = |more: &[&'static str], named: &str| {
        refused(&[&["special", &square], more].concat(), named);
    };
    refused(&["special"], "<TABLE>");
    with(&["--length", "0"], "at least 1");
    with(&["--length", "99999"], "from 1 to 99998");
    with(&["--rows", "middle"], "middle");
    with(&["--format", "svg"], "svg");
    with(&["--picture", "missing/tree.svg"], "missing");
    with(&["--picture", "."], "is a folder");
    with(&["--picture", "x.svg", "--out", "x.svg"], "different names");
    with(&["--budget-memory", "x"], "number of bytes");
    with(&["--set", "u"], "u");
}
