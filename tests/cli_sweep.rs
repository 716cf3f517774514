//! `reboundary sweep` and the facts of `reboundary table`, as a user runs them.

use assert_cmd::Command;
use serde_json::Value;
use std::path::{Path, PathBuf};

fn polygon(name: &str) -> PathBuf {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    folder.join(format!("{name}.toml"))
}

fn reboundary() -> Command {
    Command::cargo_bin("reboundary").expect("the program")
}

/// Exit code, standard output, standard error of a sweep of the kite family.
fn sweep(out: &Path, arguments: &[&str]) -> (i32, String, String) {
    let output = reboundary()
        .arg("sweep")
        .arg(polygon("kite-family"))
        .args(arguments)
        .arg("--out")
        .arg(out)
        .output()
        .expect("it runs");
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("text");
    let code = output.status.code().expect("no signal");
    (code, text(output.stdout), text(output.stderr))
}

#[test]
fn a_sweep_writes_its_folder_and_keeps_what_is_finished() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("kites");
    let arguments = ["--set", "t=1..5/9", "--length", "10", "--route", "both"];
    let (code, stdout, stderr) = sweep(&out, &arguments);
    assert_eq!(code, 0, "{stderr}");
    assert!(stdout.contains("9 members\n"), "{stdout}");
    assert!(stderr.contains("1 of 9 members gives no table"), "{stderr}");
    let json = std::fs::read_to_string(out.join("sweep.json")).unwrap();
    let json: Value = serde_json::from_str(&json).unwrap();
    assert_eq!(json["schema"], "reboundary-sweep/1");
    assert_eq!(json["complete"], true);
    let rows = json["rows"].as_array().unwrap();
    assert_eq!(rows.len(), 9);
    for row in rows {
        let simple = row["settings"][0]["value"] != "2";
        assert_eq!(row["is_table"], simple);
        assert_eq!(row["fault"].is_null(), simple);
        if simple {
            assert_eq!(row["routes_agree"], true);
            assert_eq!(row["p"].as_array().unwrap().len(), 11);
        }
    }
    let (code, stdout, _) = sweep(&out, &arguments);
    assert_eq!(code, 0);
    assert!(stdout.contains("9 of them from before"), "{stdout}");
}

#[test]
fn bad_sweeps_are_refused() {
    let folder = tempfile::tempdir().unwrap();
    let out = folder.path().join("new");
    for (arguments, expected) in [
        (vec![], "--set"),
        (vec!["--set", "u=1..5/3"], "no parameter `u`"),
        (vec!["--set", "t=1..5"], "no count"),
        (vec!["--set", "t={}"], "empty"),
        (vec!["--set", "t=1", "--set", "t=2"], "set twice"),
        (vec!["--set", "t=1..5/3", "--diagonals", "99"], "N(99)"),
        (vec!["--set", "t=2"], "none of the 1 members gives a table"),
    ] {
        let (code, _, stderr) = sweep(&out, &arguments);
        assert_eq!(code, 2, "{arguments:?}: {stderr}");
        assert!(stderr.contains(expected), "{arguments:?}: {stderr}");
    }
    std::fs::write(folder.path().join("mine.txt"), "mine").unwrap();
    let (code, _, stderr) = sweep(folder.path(), &["--set", "t=1..5/3"]);
    assert_eq!(code, 2);
    assert!(stderr.contains("no earlier sweep"), "{stderr}");
}

#[test]
fn a_table_tells_its_surface_its_symmetries_and_the_field_of_its_walks() {
    let run = |name: &str, format: &str| {
        let output = reboundary()
            .args(["table", "--format", format])
            .arg(polygon(name))
            .output()
            .expect("it runs");
        assert!(output.status.success());
        String::from_utf8(output.stdout).expect("text")
    };
    let json: Value = serde_json::from_str(&run("golden-rectangle", "json")).unwrap();
    assert_eq!(json["field"]["degree"], 2);
    assert_eq!(json["field"]["polynomial_discriminant"], "20");
    assert_eq!(json["walk_field"]["degree"], 1);
    assert_eq!(json["surface"]["genus"], 1);
    assert_eq!(json["symmetries"].as_array().unwrap().len(), 3);
    assert_eq!(json["symmetries"][0]["letters"]["a"], "c");
    assert_eq!(json["angle_standing"][0]["kind"], "right");
    let text = run("regular-pentagon", "text");
    assert!(text.contains("genus 6, from 10 copies"), "{text}");
    assert!(text.contains("angle 3π/5, obtuse"), "{text}");
    assert!(text.contains("with angle 6π"), "{text}");
    let text = run("legs-3-4", "text");
    assert!(text.contains("symmetries       none"), "{text}");
    assert!(!text.contains("surface"), "{text}");
}
