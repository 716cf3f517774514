//! Studies of many tables, stated bounds on the command line, LaTeX, picture sizes, the finished report.

mod program;

use program::{entries, json, place, polygon, run_in, text};
use serde_json::Value;
use std::fs;
use std::path::Path;

fn read(folder: &Path, name: &str) -> String {
    fs::read_to_string(folder.join(name)).unwrap_or_else(|e| panic!("{name}: {e}"))
}

fn index(folder: &Path) -> Value {
    serde_json::from_str(&read(folder, "index.json")).expect("index.json parses")
}

#[test]
fn a_folder_of_tables_is_studied_and_compared() {
    let place = place();
    let quay = place.path().join("quay");
    fs::create_dir(&quay).expect("a folder");
    for name in ["square", "legs-3-4"] {
        fs::copy(polygon(name), quay.join(format!("{name}.toml"))).expect("copied");
    }
    fs::write(quay.join("notes.txt"), "no table").expect("written");
    let arguments = [
        "study",
        "quay",
        "--length",
        "9",
        "--out",
        "all",
        "--claim",
        "p(n) <= 2*n^3 for n >= 3",
    ];
    let output = run_in(&place, &arguments);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let all = place.path().join("all");
    let index = index(&all);
    assert_eq!(
        (&index["schema"], &index["complete"]),
        (&"reboundary-studies/1".into(), &true.into())
    );
    let members = index["members"].as_array().expect("members");
    let folders: Vec<_> = members
        .iter()
        .map(|m| m["folder"].as_str().expect("a folder"))
        .collect();
    assert_eq!(folders, ["legs-3-4", "square"]);
    // OEIS A005598: p(9) = 4·A(9) − 4 for the square; legs 3 and 4 recomputed by an independent program.
    assert_eq!(
        members[1]["study"]["words"],
        4 * (1 + 9 + 8 + 7 * 2 + 6 * 2 + 5 * 4 + 4 * 2 + 3 * 6 + 2 * 4 + 6) - 4
    );
    assert_eq!(members[0]["study"]["words"], 110);
    let standing = |m: usize, id: &str| members[m]["study"]["standings"][id]["standing"].clone();
    assert_eq!(
        (standing(0, "cubic_bounds"), standing(1, "cubic_bounds")),
        ("not_decided".into(), "proved".into())
    );
    assert_eq!(
        (standing(0, "claim_1"), standing(1, "claim_1")),
        ("computed".into(), "computed".into())
    );
    let page = read(&all, "index.html");
    assert!(page.contains("href=\"square/report.html\"") && page.contains("not decided"));
    let csv = read(&all, "index.csv");
    assert_eq!(csv.lines().count(), 3);
    assert!(csv.starts_with("file,folder,fault,title,length,p,quotient,common_length"));
    // The studies are those that one table would give.
    let alone = [
        "study",
        "quay/square.toml",
        "--length",
        "9",
        "--out",
        "alone",
        "--claim",
        "p(n) <= 2*n^3 for n >= 3",
    ];
    assert_eq!(run_in(&place, &alone).status.code(), Some(0));
    let alone = place.path().join("alone");
    for file in entries(&alone) {
        let name = file.file_name().expect("a name").to_str().expect("text");
        assert!(
            read(&alone, name) == read(&all.join("square"), name),
            "{name}"
        );
    }
    // Again, with other threads: the same bytes.
    let first: Vec<_> = entries(&all)
        .iter()
        .filter(|f| f.is_file())
        .map(|f| fs::read(f).expect("read"))
        .collect();
    let output = run_in(&place, &[&arguments[..], &["--threads", "1"]].concat());
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let second: Vec<_> = entries(&all)
        .iter()
        .filter(|f| f.is_file())
        .map(|f| fs::read(f).expect("read"))
        .collect();
    assert!(first == second);
}

#[test]
fn one_bad_table_does_not_lose_the_others() {
    let place = place();
    fs::write(
        place.path().join("broken.toml"),
        "corners = [[\"0\", \"0\"], [\"1\", \"0\"]]\n",
    )
    .expect("written");
    let square = polygon("square");
    let output = run_in(
        &place,
        &[
            "study",
            "broken.toml",
            &square,
            "missing.toml",
            &square,
            "--length",
            "6",
            "--out",
            "all",
            "--quiet",
        ],
    );
    assert_eq!(output.status.code(), Some(2));
    let errors = text(&output.stderr);
    assert!(
        errors.contains("2 of 4 tables were not studied"),
        "{errors}"
    );
    assert!(
        errors.contains("broken.toml") && errors.contains("missing.toml"),
        "{errors}"
    );
    let all = place.path().join("all");
    let index = index(&all);
    assert_eq!(index["complete"], true);
    let members = index["members"].as_array().expect("members");
    let studied: Vec<bool> = members.iter().map(|m| m["study"].is_object()).collect();
    assert_eq!(studied, [false, true, false, true]);
    assert_eq!(members[3]["folder"], "square-2");
    assert!(
        members[0]["fault"]
            .as_str()
            .expect("why")
            .contains("broken.toml")
    );
    assert!(read(&all, "index.html").contains("Tables that were not studied"));
    assert!(all.join("square/report.html").is_file() && all.join("square-2/report.html").is_file());
    assert!(!all.join("broken").exists());
}

#[test]
fn places_that_are_not_ours_are_left_alone() {
    let place = place();
    let square = polygon("square");
    fs::create_dir(place.path().join("taken")).expect("a folder");
    fs::write(place.path().join("taken/letter.txt"), "keep me").expect("written");
    fs::create_dir(place.path().join("empty")).expect("a folder");
    for (arguments, part) in [
        (
            vec!["study", &square, &square, "--out", "taken"],
            "is there already",
        ),
        (
            vec!["study", &square, &square, "--out", "no/where"],
            "there is no folder",
        ),
        (vec!["study", "empty"], "holds no table file"),
        (
            vec!["study", &square, &square, "--budget-time", "5m"],
            "--budget-time is for the study of one table",
        ),
        (
            vec!["study", &square, &square, "--checkpoint", "kept"],
            "--checkpoint is for the study of one table",
        ),
        (
            vec!["study", &square, "--claim", "p(n) <= 0.07 n^3"],
            "--claim:1:14",
        ),
        (
            vec!["study", &square, "--claim", "p(n) <= x"],
            "`x` is no name",
        ),
        (
            vec!["study", &square, "--format", "word"],
            "possible values: html, latex",
        ),
        (
            vec!["study", &square, "--pictures", "poster"],
            "possible values: screen, column, page",
        ),
        (
            vec!["complexity", &square, "--claim", "p(n)"],
            "a comparison is missing",
        ),
        (
            vec!["complexity", &square, "--claim", ""],
            "ends where a value should stand",
        ),
    ] {
        let output = run_in(&place, &arguments);
        let errors = text(&output.stderr);
        assert_eq!(output.status.code(), Some(2), "{arguments:?}: {errors}");
        assert!(errors.contains(part), "{arguments:?}: {errors}");
        assert_eq!(text(&output.stdout), "");
    }
    assert_eq!(
        entries(place.path()).len(),
        3,
        "{:?}",
        entries(place.path())
    );
}

#[test]
fn claims_have_a_standing_and_leave_the_exit_code() {
    let square = polygon("square");
    let found = json(&[
        "complexity",
        &square,
        "--length",
        "12",
        "--format",
        "json",
        "--claim",
        "p(n) <= 0.6*n^3 for n >= 7",
        "--claim",
        "p(n) <= 0.6*n^3 for n >= 6",
        "--claim",
        "N(n) <= 2 for n >= 99",
    ]);
    let claims = found["claims"].as_array().expect("claims");
    let standings: Vec<_> = claims
        .iter()
        .map(|c| c["standing"].as_str().expect("a standing"))
        .collect();
    assert_eq!(standings, ["violated", "violated", "not_decided"]);
    // p(7) = 212 > 205.8; p(6) = 140 > 129.6, OEIS A005598.
    let first = &claims[0]["first_violation"];
    assert_eq!(
        (&first["n"], &first["left"], &first["right"]),
        (&7.into(), &"212".into(), &"1029/5".into())
    );
    assert_eq!(claims[1]["first_violation"]["n"], 6);
    assert_eq!(claims[2]["holds"], Value::Null);
    let place = place();
    let output = run_in(
        &place,
        &[
            "complexity",
            &square,
            "--length",
            "6",
            "--format",
            "csv",
            "--claim",
            "p(n) >= 1",
        ],
    );
    assert_eq!(output.status.code(), Some(0));
    assert!(text(&output.stdout).ends_with("6,140,,,\n"));
    assert!(text(&output.stderr).starts_with("computed: p(n) >= 1"));
}

#[test]
fn a_study_writes_latex_and_pictures_of_a_size() {
    let place = place();
    let table = polygon("square-two-letters");
    let arguments = [
        "study",
        &table,
        "--length",
        "17",
        "--out",
        "s",
        "--format",
        "latex",
        "--pictures",
        "column",
    ];
    let output = run_in(&place, &arguments);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let folder = place.path().join("s");
    let tex = read(&folder, "tables.tex");
    for rule in ["\\toprule", "\\midrule", "\\bottomrule"] {
        // Standings, counts, windows, factor graphs; a long table has its head twice.
        let expected = if rule == "\\bottomrule" { 4 } else { 8 };
        assert_eq!(tex.matches(rule).count(), expected, "{rule}");
    }
    assert!(
        tex.is_ascii(),
        "every character of the verdict has its formula"
    );
    let mut depth = 0i32;
    let mut escaped = false;
    for c in tex.chars() {
        match c {
            '{' if !escaped => depth += 1,
            '}' if !escaped => depth -= 1,
            _ => {}
        }
        assert!(depth >= 0);
        escaped = c == '\\' && !escaped;
    }
    assert_eq!(depth, 0);
    // Every row of a table has as many cells as its head.
    for table in tex.split("\\begin{longtable}").skip(1) {
        let rows = table
            .lines()
            .filter(|l| l.ends_with("\\\\") && !l.starts_with("\\caption"));
        let mut counts: Vec<_> = rows
            .map(|row| row.replace("\\&", "").matches('&').count())
            .collect();
        counts.dedup();
        assert_eq!(counts.len(), 1, "{table}");
    }
    let svg = read(&folder, "growth.svg");
    assert!(svg.contains("width=\"88.00mm\""), "{}", &svg[..200]);
    // The page shows pictures in pixels whatever the files are.
    let report = read(&folder, "report.html");
    assert!(!report.contains("88.00mm"));
    assert!(report.contains("--pictures column --format latex"));
}

#[test]
fn the_report_is_a_finished_document() {
    let place = place();
    let output = run_in(
        &place,
        &[
            "study",
            &polygon("right-isosceles"),
            "--length",
            "20",
            "--out",
            "s",
        ],
    );
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let folder = place.path().join("s");
    let report = read(&folder, "report.html");
    // Every link leads somewhere: inside the page, or to a file of the folder.
    for link in report.split("href=\"").skip(1) {
        let target = link.split('"').next().expect("a target");
        match target.strip_prefix('#') {
            Some(id) => assert!(report.contains(&format!("id=\"{id}\"")), "{target}"),
            None => assert!(folder.join(target).is_file(), "{target}"),
        }
    }
    let place_of = |part: &str| report.find(part).unwrap_or_else(|| panic!("no {part}"));
    assert!(
        place_of("<nav") < place_of("id=\"standings\"")
            && place_of("id=\"standings\"") < place_of("id=\"table\"")
    );
    for part in [
        "prefers-color-scheme: dark",
        "@media print",
        "aria-label=\"Contents\"",
        "scope=\"col\"",
        "scope=\"row\"",
        "<caption>",
        "role=\"img\"",
        "Figure 1.",
        "id=\"sources\"",
        "SHA-256 of the table file",
        "checked exactly",
        "2/(3π²)",
        "figure-diagonals",
    ] {
        assert!(report.contains(part), "{part}");
    }
    // Pictures are named for screen readers, each in a figure with a caption.
    assert_eq!(
        report.matches("<figure").count(),
        report.matches("<figcaption").count()
    );
    assert_eq!(
        report.matches("<figure").count(),
        report.matches("role=\"img\"").count()
    );
    let record: Value = serde_json::from_str(&read(&folder, "study.json")).expect("JSON");
    let sum = record["hashes"]["words"].as_str().expect("a sum");
    assert!(report.contains(sum) && sum.len() == 64);
    let verdict = record["verdict"].as_array().expect("statements");
    let proved = verdict
        .iter()
        .find(|s| s["id"] == "cubic_bounds")
        .expect("a statement");
    assert_eq!(
        proved["theorem"]["hypotheses"]
            .as_array()
            .expect("hypotheses")
            .len(),
        3
    );
    let csv = read(&folder, "growth.csv");
    assert_eq!(
        csv.lines().count(),
        1 + record["growth"]["windows"]
            .as_array()
            .expect("windows")
            .len()
    );
}
