//! Sweeps: rows against direct computation, members without a table, resuming.

mod support;

use reboundary::run::Control;
use reboundary::sweep::folder::{Family, Outcome, SweepFault, sweep};
use reboundary::sweep::member::{Request, Row};
use reboundary::sweep::range::{members, parse};
use reboundary::table::file::parse_with;
use serde_json::Value;
use std::fs;
use std::path::Path;
use support::p_by_beams;

/// A kite whose tail is at t: no table where t is the crossing point of the wings, nonconvex below it.
const KITE: &str = r#"title = "Kite"
corners = [["0", "0"], ["2", "-1"], ["t", "0"], ["2", "1"]]
[parameters]
t = "3"
"#;

fn request(length: usize) -> Request {
    Request {
        length,
        by_diagonals: true,
        by_beams: true,
        exact_only: false,
    }
}

fn run(folder: &Path, text: &str, values: &str, length: usize) -> Result<Outcome, SweepFault> {
    run_with(folder, text, values, length, &Control::new())
}

fn run_with(
    folder: &Path,
    text: &str,
    values: &str,
    length: usize,
    control: &Control,
) -> Result<Outcome, SweepFault> {
    let range = parse(values).unwrap();
    let family = Family {
        file: "kite.toml",
        text,
        names: vec![&range.name],
        members: members(std::slice::from_ref(&range)).unwrap(),
        request: request(length),
        shown_diagonals: vec![2],
    };
    sweep(folder, &family, control)
}

fn rows(folder: &Path) -> (bool, Vec<Row>) {
    let text = fs::read_to_string(folder.join("sweep.json")).unwrap();
    let json: Value = serde_json::from_str(&text).unwrap();
    let rows = serde_json::from_value(json["rows"].clone()).unwrap();
    (json["complete"].as_bool().unwrap(), rows)
}

#[test]
fn every_row_is_what_its_table_gives() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("kites");
    // 1, 3/2, 2, …, 5: at 2 the tail lies on the line of the wings.
    let outcome = run(&out, KITE, "t=1..5/9", 8).unwrap();
    assert_eq!((outcome.members, outcome.finished, outcome.kept), (9, 9, 0));
    assert_eq!((outcome.without_table, outcome.disagreeing), (1, 0));
    let (complete, rows) = rows(&out);
    assert!(complete);
    for row in &rows {
        let value = &row.settings[0].value;
        if value == "2" {
            assert!(!row.is_table && row.p.is_empty());
            assert!(row.fault.as_ref().is_some_and(|fault| !fault.is_empty()));
            continue;
        }
        let loaded = parse_with("kite.toml", KITE, &[row.settings[0].as_option()]);
        let table = loaded.unwrap().table;
        assert_eq!(row.p, p_by_beams(&table, 8), "t = {value}");
        assert_eq!(row.routes_agree, Some(true));
        assert_eq!(row.convex, Some(row.settings[0].approximate > 2.0));
        assert_eq!(row.diagonals.as_ref().unwrap().len(), 7);
    }
    let csv = fs::read_to_string(out.join("sweep.csv")).unwrap();
    assert_eq!(csv.lines().count(), 10);
    assert!(csv.starts_with("t,t_decimal,table,fault,"));
    for picture in ["words.svg", "diagonals.svg"] {
        assert!(
            fs::read_to_string(out.join(picture))
                .unwrap()
                .contains("<svg")
        );
    }
}

#[test]
fn finished_members_are_kept_until_the_table_or_the_request_changes() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("kites");
    assert_eq!(run(&out, KITE, "t=3..5/3", 6).unwrap().kept, 0);
    let first = fs::read(out.join("sweep.json")).unwrap();
    assert_eq!(run(&out, KITE, "t=3..5/3", 6).unwrap().kept, 3);
    assert_eq!(fs::read(out.join("sweep.json")).unwrap(), first);
    // A finer range shares three members.
    assert_eq!(run(&out, KITE, "t=3..5/5", 6).unwrap().kept, 3);
    // Another length, another table.
    assert_eq!(run(&out, KITE, "t=3..5/3", 7).unwrap().kept, 0);
    let other = KITE.replace("\"-1\"", "\"-2\"");
    assert_eq!(run(&out, &other, "t=3..5/3", 7).unwrap().kept, 0);
    // A broken member is computed again.
    assert_eq!(run(&out, &other, "t=3..5/3", 7).unwrap().kept, 3);
    fs::write(out.join("members/t=4.json"), "{").unwrap();
    let before = rows(&out).1;
    assert_eq!(run(&out, &other, "t=3..5/3", 7).unwrap().kept, 2);
    assert_eq!(rows(&out).1, before);
}

#[test]
fn a_stopped_sweep_says_so_and_continues_to_the_same_bytes() {
    let folder = tempfile::tempdir().unwrap();
    let (whole, stopped) = (folder.path().join("whole"), folder.path().join("stopped"));
    run(&whole, KITE, "t=3..5/9", 6).unwrap();
    // Three members are finished when the stop comes.
    run(&stopped, KITE, "t=3..5/3", 6).unwrap();
    let control = Control::new();
    control.stop();
    let outcome = run_with(&stopped, KITE, "t=3..5/9", 6, &control).unwrap();
    assert_eq!((outcome.members, outcome.finished, outcome.kept), (9, 3, 3));
    assert!(!rows(&stopped).0);
    let outcome = run(&stopped, KITE, "t=3..5/9", 6).unwrap();
    assert_eq!((outcome.finished, outcome.kept), (9, 3));
    for name in ["sweep.json", "sweep.csv", "words.svg", "diagonals.svg"] {
        let same = fs::read(whole.join(name)).unwrap() == fs::read(stopped.join(name)).unwrap();
        assert!(same, "{name}");
    }
}

#[test]
fn a_folder_of_something_else_is_left_alone() {
    let folder = tempfile::tempdir().unwrap();
    fs::write(folder.path().join("letters.txt"), "mine").unwrap();
    let refused = run(folder.path(), KITE, "t=3..5/3", 6);
    assert!(
        matches!(refused, Err(SweepFault::Occupied { .. })),
        "{refused:?}"
    );
    let nowhere = run(&folder.path().join("no/such"), KITE, "t=3..5/3", 6);
    assert!(matches!(nowhere, Err(SweepFault::System { .. })));
    let unknown = run(&folder.path().join("new"), KITE, "u=3..5/3", 6);
    assert!(matches!(unknown, Err(SweepFault::UnknownParameter { .. })));
    assert!(!folder.path().join("new").exists());
}
