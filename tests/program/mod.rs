//! What the tests of the command line share: running the program in an empty folder.

// Each test program that includes this module uses a part of it.
#![allow(dead_code)]

use assert_cmd::cargo::cargo_bin;
use std::ffi::OsStr;
use std::path::{Path, PathBuf};
use std::process::{Command, Output};
use tempfile::TempDir;

/// A table of the project.
pub fn polygon(name: &str) -> String {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    folder.join(format!("{name}.toml")).display().to_string()
}

/// The program, to be run in a folder.
pub fn program(place: &TempDir, arguments: &[impl AsRef<OsStr>]) -> Command {
    let mut command = Command::new(cargo_bin("reboundary"));
    command.args(arguments).current_dir(place.path());
    command
}

/// Runs the program in a folder.
pub fn run_in(place: &TempDir, arguments: &[impl AsRef<OsStr>]) -> Output {
    program(place, arguments)
        .output()
        .expect("the program starts")
}

/// An empty folder.
pub fn place() -> TempDir {
    tempfile::tempdir().expect("a temporary folder")
}

pub fn text(bytes: &[u8]) -> String {
    String::from_utf8(bytes.to_vec()).expect("output in UTF-8")
}

/// Runs the program in an empty folder and asserts that it ends well, quietly, and leaves no file.
pub fn done(arguments: &[impl AsRef<OsStr>]) -> String {
    let place = place();
    let output = run_in(&place, arguments);
    let errors = text(&output.stderr);
    assert_eq!(output.status.code(), Some(0), "{errors}");
    assert_eq!(errors, "", "nothing on standard error");
    assert_eq!(entries(place.path()), Vec::<PathBuf>::new());
    text(&output.stdout)
}

/// The JSON object that a command prints.
pub fn json(arguments: &[impl AsRef<OsStr>]) -> serde_json::Value {
    serde_json::from_str(&done(arguments)).expect("one JSON value")
}

/// All files and folders below a folder, hidden ones included.
pub fn entries(folder: &Path) -> Vec<PathBuf> {
    let mut found = Vec::new();
    for entry in std::fs::read_dir(folder).expect("a folder") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            found.extend(entries(&path));
        }
        found.push(path);
    }
    found.sort();
    found
}

/// Numbers of a JSON array.
pub fn numbers(value: &serde_json::Value) -> Vec<i64> {
    let array = value
        .as_array()
        .unwrap_or_else(|| panic!("no array: {value}"));
    array
        .iter()
        .map(|v| v.as_i64().expect("a whole number"))
        .collect()
}
