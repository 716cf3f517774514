//! `words --format stored` and `ask` as a user runs them, and wrong input on every option.

mod program;

use program::{done, entries, place, polygon, program, run_in, text};
use std::io::Write;
use std::process::Stdio;
use tempfile::TempDir;

/// A folder with a stored language of the right isosceles triangle to length 8.
fn shelf() -> TempDir {
    let place = place();
    let table = polygon("right-isosceles");
    let arguments = [
        "words",
        &table,
        "--length",
        "8",
        "--format",
        "stored",
        "--out",
        "words.lang",
        "--quiet",
    ];
    let output = run_in(&place, &arguments);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    assert_eq!(text(&output.stdout) + &text(&output.stderr), "");
    assert_eq!(entries(place.path()).len(), 1, "the file alone");
    place
}

/// The answer to a question, on standard output alone.
fn ask(place: &TempDir, question: &[&str]) -> String {
    let output = run_in(place, &[&["ask", "words.lang"], question].concat());
    let errors = text(&output.stderr);
    assert_eq!(output.status.code(), Some(0), "{question:?}: {errors}");
    assert_eq!(errors, "", "{question:?}");
    text(&output.stdout)
}

/// Asserts that a question is refused: code 2, a message that holds `named`, no output, no file.
fn refused(place: &TempDir, question: &[&str], named: &str) {
    let before = entries(place.path());
    let output = run_in(place, &[&["ask", "words.lang"], question].concat());
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(2), "{question:?}: {message}");
    assert!(message.contains(named), "{question:?}: {message}");
    assert!(message.starts_with("error"), "{question:?}: {message}");
    assert!(!message.contains("panicked"), "{question:?}: {message}");
    assert_eq!(text(&output.stdout), "", "{question:?}");
    assert_eq!(entries(place.path()), before, "{question:?}");
}

#[test]
fn the_words_come_back_as_they_are_printed() {
    let place = shelf();
    let table = polygon("right-isosceles");
    for length in 0..=8 {
        let length = length.to_string();
        let printed = done(&["words", &table, "--length", &length]);
        assert_eq!(ask(&place, &["--list", "--length", &length]), printed);
        assert_eq!(ask(&place, &["--match", "*", "--length", &length]), printed);
    }
    let csv = ask(&place, &["--list", "--format", "csv"]);
    let lines: Vec<&str> = csv.lines().collect();
    assert_eq!(lines[0], "word");
    let printed = done(&["words", &table, "--length", "8"]);
    assert_eq!(lines[1..], printed.lines().collect::<Vec<_>>());
}

/// p of the right isosceles triangle: 3, 6, 10, 18, 28, 38, 54, 74 (recomputed by an independent program).
#[test]
fn facts_and_counts() {
    let place = shelf();
    let facts = ask(&place, &["--format", "json"]);
    let facts: serde_json::Value = serde_json::from_str(&facts).expect("one object");
    assert_eq!(facts["schema"], "reboundary-stored/1");
    assert_eq!(facts["words"], 74);
    let p = program::numbers(&facts["complexity"]);
    assert_eq!(p, [1, 3, 6, 10, 18, 28, 38, 54, 74]);
    let file = std::fs::read_to_string(polygon("right-isosceles")).expect("a table file");
    assert_eq!(facts["table"], file.as_str());
    assert_eq!(
        facts["bytes"],
        std::fs::metadata(place.path().join("words.lang"))
            .unwrap()
            .len()
    );
    let csv = ask(&place, &["--format", "csv"]);
    assert!(
        csv.starts_with("n,p\n0,1\n1,3\n") && csv.ends_with("8,74\n"),
        "{csv}"
    );
    assert!(ask(&place, &[]).contains("all words up to length 8, 74 of that length"));
    let counted = ask(
        &place,
        &["--count", "", "a", "--length", "5", "--format", "csv"],
    );
    let listed = ask(&place, &["--list", "--length", "5"]);
    let begins = listed.lines().filter(|word| word.starts_with('a')).count();
    assert_eq!(counted, format!("word,length,words\n,5,28\na,5,{begins}\n"));
}

#[test]
fn questions_about_words() {
    let place = shelf();
    let listed = ask(&place, &["--list", "--length", "4"]);
    let words: Vec<&str> = listed.lines().collect();
    let word = words[5];
    assert_eq!(
        ask(&place, &["--contains", word]),
        format!("{word} is in the language\n")
    );
    // No orbit hits a side twice in a row.
    assert_eq!(
        ask(&place, &["--contains", "abb", "--format", "json"]),
        "{\"word\":\"abb\",\"in_language\":false,\"longest_prefix\":\"ab\"}\n"
    );
    assert_eq!(
        ask(&place, &["--place", word, "aa", "--format", "csv"]),
        format!("word,index\n{word},5\naa,\n")
    );
    let five = ask(&place, &["--list", "--length", "5"]);
    let after: String = five
        .lines()
        .filter_map(|longer| longer.strip_prefix(word))
        .collect();
    assert_eq!(
        ask(&place, &["--after", word, "aa", "--format", "csv"]),
        format!("word,letters\n{word},{after}\naa,\n")
    );
    assert!(ask(&place, &["--after", "aa"]).contains("not in the language"));
    // From a file and from standard input; empty lines say nothing.
    std::fs::write(place.path().join("list.txt"), "ab\n\n aa \r\n").expect("written");
    let expected = "word,in_language,longest_prefix\nab,true,ab\naa,false,a\n";
    let question = ["--contains", "--format", "csv", "--words"];
    assert_eq!(
        ask(&place, &[&question[..], &["list.txt"]].concat()),
        expected
    );
    let all = [&["ask", "words.lang"], &question[..], &["-"]].concat();
    let mut child = program(&place, &all)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .spawn()
        .expect("started");
    let mut input = child.stdin.take().expect("piped");
    input.write_all(b"ab\n\naa\n").expect("taken");
    drop(input);
    let output = child.wait_with_output().expect("ended");
    assert_eq!(text(&output.stdout), expected);
}

#[test]
fn questions_about_lengths() {
    let place = shelf();
    let listed = ask(&place, &["--list", "--length", "6"]);
    let words: Vec<&str> = listed.lines().collect();
    let picked = ["--nth", "0", "--nth", "37", "--length", "6"];
    assert_eq!(
        ask(&place, &picked),
        format!("{}\n{}\n", words[0], words[37])
    );
    assert_eq!(
        ask(&place, &["--nth", "3", "--length", "6", "--format", "json"]),
        format!("{{\"index\":3,\"word\":\"{}\"}}\n", words[3])
    );
    let drawn = ask(&place, &["--random", "200", "--length", "6", "--seed", "4"]);
    assert_eq!(
        drawn,
        ask(&place, &["--random", "200", "--length", "6", "--seed", "4"])
    );
    assert_ne!(drawn, ask(&place, &["--random", "200", "--length", "6"]));
    assert_eq!(drawn.lines().count(), 200);
    assert!(drawn.lines().all(|word| words.contains(&word)));
    assert_eq!(ask(&place, &["--random", "0"]), "");
    let matched = ask(&place, &["--match", "a*b.", "--length", "6"]);
    let expected = words
        .iter()
        .filter(|w| w.starts_with('a') && w[4..].starts_with('b'));
    assert_eq!(
        matched.lines().collect::<Vec<_>>(),
        expected.copied().collect::<Vec<_>>()
    );
    assert!(!matched.is_empty());
    // The special words are as many as the factor graph says.
    let graph = program::json(&[
        "graph",
        &polygon("right-isosceles"),
        "--length",
        "7",
        "--format",
        "json",
    ]);
    for order in graph["orders"].as_array().expect("orders") {
        let n = order["order"].to_string();
        for (side, field) in [
            ("left", "left_special"),
            ("right", "right_special"),
            ("both", "bispecial"),
        ] {
            let found = ask(&place, &["--special", side, "--length", &n]);
            assert_eq!(found.lines().count() as u64, order[field], "{n} {side}");
        }
    }
    let special = ask(
        &place,
        &["--special", "both", "--length", "0", "--format", "csv"],
    );
    assert_eq!(special, "word,left,right\n,abc,abc\n");
}

#[test]
fn output_goes_to_a_file() {
    let place = shelf();
    assert_eq!(ask(&place, &["--list", "--out", "l8.txt"]), "");
    let written = std::fs::read_to_string(place.path().join("l8.txt")).expect("written");
    assert_eq!(written, ask(&place, &["--list"]));
}

#[test]
fn wrong_questions_are_refused() {
    let place = shelf();
    for (question, named) in [
        (&["abc"][..], "--contains"),
        (&["--contains"], "--words"),
        (&["--after"], "--words"),
        (&["--count"], "--words"),
        (&["--place"], "--words"),
        (&["--contains", "abx"], "the word `abx`: `x` is no letter"),
        (&["--contains", "ababababa"], "length 9 is too long"),
        (&["--place", "ababababa"], "length 9 is too long"),
        (&["--count", "a", "--length", "9"], "9"),
        (&["--contains", "a", "--length", "3"], "--length"),
        (&["--contains", "--after", "a"], "--after"),
        (&["--contains", "--list"], "--list"),
        (&["--contains", "a", "--words", "list.txt"], "--words"),
        (&["--contains", "--words", "nowhere.txt"], "nowhere.txt"),
        (&["--words", "nowhere.txt"], "--contains"),
        (&["--list", "abc"], "--list"),
        (&["--list", "--length", "9"], "up to length 8"),
        (&["--list", "--length=-1"], "--length"),
        (&["--list", "--length", "x"], "--length"),
        (&["--length", "3"], "--length"),
        (&["--nth", "74"], "no word 74"),
        (&["--nth", "0", "--nth", "74"], "no word 74"),
        (&["--nth=-1"], "--nth"),
        (&["--nth", "1.5"], "--nth"),
        (&["--nth", "1", "--length", "9"], "up to length 8"),
        (&["--random", "many"], "--random"),
        (&["--random", "1", "--seed", "x"], "--seed"),
        (&["--seed", "1"], "--random"),
        (&["--match", "a+"], "`+` is no letter"),
        (&["--match", "a\\"], "cannot end"),
        (&["--match", "a", "--length", "9"], "up to length 8"),
        (&["--special", "top"], "--special"),
        (&["--special", "left", "--length", "8"], "at most 7"),
        (&["--list", "--format", "xml"], "--format"),
        (&["--list", "--format", "stored"], "--format"),
        (&["--list", "--out", "missing/file"], "missing"),
        (&["--list", "--out", "."], "folder"),
        (&["--backwards"], "--backwards"),
    ] {
        refused(&place, question, named);
    }
    // Where in a file the word stands; a file for the output is then not made.
    std::fs::write(place.path().join("list.txt"), "ab\nxx\n").expect("written");
    let question = ["--contains", "--words", "list.txt", "--out", "answers.txt"];
    refused(&place, &question, "list.txt, line 2: `x`");
}

#[test]
fn wrong_files_are_refused() {
    let place = shelf();
    let whole = std::fs::read(place.path().join("words.lang")).expect("written");
    let mut altered = whole.clone();
    let middle = altered.len() / 2;
    altered[middle] ^= 1;
    let mut other = whole.clone();
    other[8] = 9;
    for (bytes, named) in [
        (&altered[..], "damaged: its checksum"),
        (&whole[..whole.len() - 3], "damaged: its end"),
        (&whole[..20], "damaged: its end"),
        (&other, "layout 9"),
        (b"title = \"no language\"", "is no stored language"),
        (b"", "is no stored language"),
    ] {
        // A new file, not an altered one.
        std::fs::remove_file(place.path().join("words.lang")).expect("removed");
        std::fs::write(place.path().join("words.lang"), bytes).expect("written");
        refused(&place, &["--list"], named);
    }
    std::fs::remove_file(place.path().join("words.lang")).expect("removed");
    refused(&place, &[], "cannot read words.lang");
    std::fs::create_dir(place.path().join("words.lang")).expect("made");
    refused(&place, &[], "is no stored language");
}

#[test]
fn storing_needs_a_place() {
    let table = polygon("square");
    for (more, named) in [
        (&["--format", "stored"][..], "--out FILE"),
        (&["--format", "stored", "--out", "missing/file"], "missing"),
        (&["--format", "stored", "--out", "."], "folder"),
        (
            &["--format", "stored", "--out", "x", "--budget-memory", "1"],
            "--budget-memory",
        ),
    ] {
        let place = place();
        let arguments = [&["words", &table, "--length", "6"], more].concat();
        let output = run_in(&place, &arguments);
        let message = text(&output.stderr);
        assert_eq!(output.status.code(), Some(2), "{more:?}: {message}");
        assert!(message.contains(named), "{more:?}: {message}");
        assert_eq!(entries(place.path()), Vec::<std::path::PathBuf>::new());
    }
}
