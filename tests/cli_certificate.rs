//! `locate`, `certify` and `verify` as their users see them.

mod program;

use program::{done, entries, json, place, polygon, program, run_in, text};
use std::io::Write;
use std::process::Stdio;

/// Runs the program and returns its exit code and what it says on standard error.
fn refused(arguments: &[&str]) -> (Option<i32>, String) {
    let place = place();
    let output = run_in(&place, arguments);
    assert_eq!(text(&output.stdout), "", "{arguments:?}");
    assert!(
        entries(place.path()).is_empty(),
        "nothing is left half-written"
    );
    (output.status.code(), text(&output.stderr))
}

#[test]
fn a_word_of_the_unit_triangle() {
    // Legs 1, hypotenuse √2. From a (the leg on the x axis) to b (the hypotenuse) and back to neither: the lines from a to
    // b have measure |a| + |b| − |c| = √2, from b to c likewise (crossed strings in a triangle).
    let table = polygon("right-isosceles");
    let found = json(&["locate", &table, "ab", "--format", "json"]);
    assert_eq!(found["word"], "ab");
    assert_eq!(found["in_language"], true);
    let exact = serde_json::json!([{ "coefficient": "1", "radicand": "2" }]);
    assert_eq!(found["measure_exact"], exact);
    assert!(
        found["measure"]
            .as_str()
            .unwrap()
            .starts_with("1.41421356237309504880")
    );
    assert_eq!(found["left_extensions"], serde_json::json!(["b", "c"]));
    assert!(found["longest_prefix"].is_null());
}

#[test]
fn the_orbit_that_is_offered_has_the_word() {
    for (name, word) in [
        ("legs-3-4", "abcabcb"),
        ("regular-pentagon", "acebd"),
        ("dart", "acab"),
        ("heptagonal-triangle", "abcacba"),
    ] {
        let table = polygon(name);
        let found = json(&["locate", &table, word, "--format", "json"]);
        let reached = match found["longest_prefix"].as_str() {
            Some(prefix) => prefix.to_string(),
            None => word.to_string(),
        };
        let orbit = |key: &str| found["orbit"][key].as_str().unwrap().to_string();
        let (start, aim) = (orbit("start"), orbit("aim"));
        let hits = reached.len().to_string();
        let traced = done(&[
            "trace", &table, "--start", &start, "--aim", &aim, "--hits", &hits, "--quiet",
        ]);
        assert_eq!(traced.trim(), reached, "{name}");
    }
}

/// m(w) diagonals have the code w (Cassaigne, Hubert, Troubetzkoy, Ann. Inst. Fourier 52 (2002), for convex tables).
#[test]
fn bispecial_words_come_with_their_diagonals() {
    let table = polygon("right-isosceles");
    let words = done(&["words", &table, "--length", "7"]);
    let mut arguments = vec!["locate", &table, "--format", "json"];
    arguments.extend(words.lines());
    let mut seen = 0;
    for line in done(&arguments).lines() {
        let found: serde_json::Value = serde_json::from_str(line).unwrap();
        let diagonals = found["diagonals"].as_array().unwrap().len() as i64;
        assert_eq!(found["multiplicity"].as_i64(), Some(diagonals), "{found}");
        seen += diagonals;
    }
    // N(7) from the difference of p, by the other command.
    let counts = json(&["complexity", &table, "--length", "9", "--format", "json"]);
    assert_eq!(Some(seen), counts["diagonals"][7].as_i64());
}

#[test]
fn many_words_from_standard_input() {
    let table = polygon("square");
    let words = done(&["words", &table, "--length", "6"]);
    let place = place();
    let mut child = program(
        &place,
        &["locate", &table, "--words", "-", "--format", "csv"],
    )
    .stdin(Stdio::piped())
    .stdout(Stdio::piped())
    .spawn()
    .unwrap();
    let mut input = child.stdin.take().unwrap();
    write!(input, "{words}\naa\n\nabcd\n").unwrap();
    drop(input);
    let output = child.wait_with_output().unwrap();
    assert!(output.status.success());
    let rows: Vec<String> = text(&output.stdout).lines().map(String::from).collect();
    let count = words.lines().count();
    assert_eq!(rows.len(), 1 + count + 2);
    assert!(rows[0].starts_with("word,in_language,measure,longest_prefix"));
    assert!(rows[1..=count].iter().all(|row| row.contains(",true,")));
    assert_eq!(rows[count + 1], "aa,false,,a,,,,");
    assert!(rows[count + 2].starts_with("abcd,true,"));
}

#[test]
fn certificates_of_a_language_and_of_answers() {
    let table = polygon("golden-rectangle");
    let place = place();
    let run = |arguments: &[&str]| {
        let output = run_in(&place, arguments);
        assert!(output.status.success(), "{}", text(&output.stderr));
        text(&output.stdout)
    };
    run(&[
        "certify",
        &table,
        "language.cert",
        "--length",
        "6",
        "--quiet",
    ]);
    let found = run(&[
        "verify",
        "language.cert",
        "--table",
        &table,
        "--format",
        "json",
    ]);
    let found: serde_json::Value = serde_json::from_str(&found).unwrap();
    assert_eq!(found["accepted"], true);
    // Those of the square (OEIS A005598): rectangles have its words.
    assert_eq!(found["p"], serde_json::json!([4, 12, 28, 52, 92, 140]));
    let said = run(&["verify", "language.cert"]);
    assert!(said.starts_with("accepted: the language of"), "{said}");
    assert_eq!(
        run(&["verify", "language.cert", "--format", "csv"])
            .lines()
            .count(),
        7
    );

    run(&[
        "locate",
        &table,
        "abab",
        "aab",
        "abcdabcdb",
        "--certificate",
        "answers.cert",
        "--quiet",
    ]);
    let said = run(&["verify", "answers.cert"]);
    assert!(
        said.contains("1 are in the language") && said.contains("2 are not"),
        "{said}"
    );

    let square = polygon("square");
    let output = run_in(&place, &["verify", "language.cert", "--table", &square]);
    assert_eq!(output.status.code(), Some(2));
    assert!(text(&output.stderr).contains("it is about another table"));
}

#[test]
fn the_certificate_does_not_depend_on_threads() {
    let table = polygon("regular-pentagon");
    let place = place();
    let mut files = Vec::new();
    for threads in ["1", "2", "7"] {
        let file = format!("{threads}.cert");
        let output = run_in(
            &place,
            &[
                "certify",
                &table,
                &file,
                "--length",
                "4",
                "--threads",
                threads,
                "--quiet",
            ],
        );
        assert!(output.status.success());
        files.push(std::fs::read(place.path().join(file)).unwrap());
    }
    assert!(files[0] == files[1] && files[0] == files[2]);
}

#[test]
fn pictures_are_drawn_for_words_and_for_others() {
    let place = place();
    for (word, told) in [
        ("abcab", "Corridor of abcab in"),
        ("abcbcbcbcb", "abcbcbcbcb is no word"),
    ] {
        let file = format!("{word}.svg");
        let output = run_in(
            &place,
            &["locate", &polygon("legs-3-4"), word, "--picture", &file],
        );
        assert!(output.status.success(), "{}", text(&output.stderr));
        let svg = std::fs::read_to_string(place.path().join(&file)).unwrap();
        assert!(svg.contains(told));
    }
}

#[test]
fn wrong_input_is_pointed_at() {
    let table = polygon("square");
    for (arguments, told) in [
        (
            vec!["locate", &table, "axb"],
            "the word `axb`: letter 2, `x`, is not a side of this table; its sides are a, b, c, d",
        ),
        (vec!["locate", &table, ""], "a word has from 1 to"),
        (vec!["locate", &table], "WORD"),
        (
            vec!["locate", &table, "ab", "cd", "--picture", "x.svg"],
            "--picture draws one word",
        ),
        (
            vec!["locate", &table, "--words", "missing.txt"],
            "cannot read missing.txt",
        ),
        (
            vec!["locate", &table, "ab", "--words", "missing.txt"],
            "cannot be used with",
        ),
        (vec!["locate", "missing.toml", "ab"], "missing.toml"),
        (
            vec!["locate", &table, "ab", "--picture", "no/such/x.svg"],
            "no/such",
        ),
        (
            vec!["locate", &table, "ab", "--certificate", "no/such/x"],
            "no/such",
        ),
        (
            vec!["certify", &table, "x.cert", "--length", "0"],
            "at least 1",
        ),
        (vec!["certify", &table, "no/such/x.cert"], "no/such"),
        (vec!["verify", "missing.cert"], "cannot read missing.cert"),
        (vec!["verify", &table], "is rejected: line 1"),
    ] {
        let (code, errors) = refused(&arguments);
        assert_eq!(code, Some(2), "{arguments:?}: {errors}");
        assert!(errors.contains(told), "{arguments:?}: {errors}");
    }
}

#[test]
fn a_bad_word_in_a_file_is_named_by_its_line() {
    let place = place();
    std::fs::write(place.path().join("words.txt"), "ab\nba\n\nbq\n").unwrap();
    let table = polygon("square");
    for more in [vec![], vec!["--certificate", "x.cert"]] {
        let mut arguments = vec![
            "locate",
            &table,
            "--words",
            "words.txt",
            "--out",
            "answers.txt",
        ];
        arguments.extend(more);
        let output = run_in(&place, &arguments);
        assert_eq!(output.status.code(), Some(2));
        assert!(text(&output.stderr).contains("words.txt, line 4: letter 2, `q`"));
        // Neither the output nor the certificate is there.
        assert_eq!(entries(place.path()).len(), 1);
    }
}
