//! Bad input on every option, closed pipes and signals: the exit code, the message, and nothing left behind.

mod program;

use program::{entries, place, polygon, program, run_in, text};
use std::io::{BufRead, BufReader};
use std::process::Stdio;

const COMMANDS: [&str; 8] = [
    "study",
    "table",
    "words",
    "complexity",
    "diagonals",
    "graph",
    "trace",
    "orbits",
];

/// What a command needs beside the table.
fn required(command: &str) -> &'static [&'static str] {
    match command {
        "words" => &["--length", "4"],
        "trace" => &["--start", "a@1/3", "--aim", "2,5"],
        _ => &[],
    }
}

/// Asserts that a command is refused: code 2, a message that holds `place_named`, no output, no file.
fn refused(arguments: &[&str], place_named: &str) {
    let place = place();
    let kept = place.path().join("kept");
    std::fs::write(&kept, "untouched").expect("written");
    let output = run_in(&place, arguments);
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(2), "{arguments:?}: {message}");
    assert!(message.contains(place_named), "{arguments:?}: {message}");
    assert!(message.starts_with("error"), "{arguments:?}: {message}");
    assert!(!message.contains("panicked"), "{arguments:?}: {message}");
    assert_eq!(text(&output.stdout), "", "{arguments:?}");
    assert_eq!(std::fs::read_to_string(&kept).expect("kept"), "untouched");
    assert_eq!(entries(place.path()), [kept], "{arguments:?}");
}

/// A command with its required options and more, which replace required ones of the same name.
fn refused_with(command: &str, more: &[&str], place_named: &str) {
    let table = polygon("square");
    let mut arguments = vec![command, &table];
    for pair in required(command).chunks(2) {
        if !more.contains(&pair[0]) {
            arguments.extend(pair);
        }
    }
    arguments.extend(more);
    refused(&arguments, place_named);
}

#[test]
fn tables_that_cannot_be_read_are_refused_by_every_command() {
    let crossed = format!(
        "{}/tests/bad_tables/sides-cross.toml",
        env!("CARGO_MANIFEST_DIR")
    );
    for command in COMMANDS {
        // A factor graph may come from other files too.
        refused(&[command], "<TABLE");
        refused(
            &[&[command, "nowhere.toml"], required(command)].concat(),
            "nowhere.toml",
        );
        // A study takes a folder of tables, but an empty one holds none.
        let told = match command {
            "study" => ".: this folder holds no table file",
            _ => ".: cannot read",
        };
        refused(&[&[command, "."], required(command)].concat(), told);
        refused(
            &[&[command, &crossed], required(command)].concat(),
            "sides-cross.toml:",
        );
        refused_with(command, &["--sideways"], "--sideways");
    }
    refused(&["bounce"], "bounce");
}

#[test]
fn bad_values_of_shared_options_are_refused_by_every_command() {
    for command in COMMANDS {
        refused_with(command, &["--out", "missing/result"], "missing");
        refused_with(command, &["--out", ""], "--out");
        if command != "study" {
            refused_with(command, &["--format", "xml"], "--format");
        }
        if !["table", "trace"].contains(&command) {
            for threads in ["0", "-1", "two", "1025", "4294967295"] {
                let option = format!("--threads={threads}");
                refused_with(command, &[&option], "--threads");
            }
        }
        if !["table", "trace", "orbits"].contains(&command) {
            for length in ["x", "100001", "1.5", "99999999999999999999999"] {
                refused_with(command, &["--length", length], "--length");
            }
            refused_with(command, &["--length=-1"], "--length");
        }
    }
}

/// Files where folders are, and folders where files should be.
#[test]
fn occupied_places_are_refused() {
    let table = polygon("square");
    for command in COMMANDS {
        let place = place();
        let folder = place.path().join("folder");
        let inside = folder.join("something");
        std::fs::create_dir(&folder).expect("made");
        std::fs::write(&inside, "untouched").expect("written");
        let arguments = [&[command, &table, "--out", "folder"], required(command)].concat();
        let output = run_in(&place, &arguments);
        let message = text(&output.stderr);
        assert_eq!(output.status.code(), Some(2), "{command}: {message}");
        assert!(message.contains("error: folder is"), "{command}: {message}");
        assert_eq!(entries(place.path()), [folder, inside.clone()], "{command}");
        assert_eq!(std::fs::read_to_string(inside).expect("kept"), "untouched");
    }
    refused_with("study", &["--out", "kept"], "kept");
}

#[test]
fn bad_values_of_study_are_refused() {
    for (more, named) in [
        (&["--length", "2"][..], "--length"),
        (&["--radii", "0"], "--radii"),
        (&["--radii", "65"], "--radii"),
        (&["--graph-order", "x"], "--graph-order"),
        (&["--graph-order", "100000"], "--graph-order"),
        (&["--graph-order", "18446744073709551615"], "--graph-order"),
        (&["--graph-order", "5", "--length", "5"], "--graph-order 5"),
        (&["--budget-memory", "lots"], "--budget-memory"),
        (&["--budget-memory", "G"], "--budget-memory"),
        (&["--budget-memory", "99999999999G"], "--budget-memory"),
        (
            &["--budget-memory", "1M", "--length", "100"],
            "--budget-memory",
        ),
    ] {
        refused_with("study", more, named);
    }
}

#[test]
fn bad_values_of_other_options_are_refused() {
    refused(&["words", &polygon("square")], "--length");
    refused_with(
        "words",
        &["--budget-memory", "1K", "--length", "9"],
        "--budget-memory",
    );
    refused_with("complexity", &["--route", "sideways"], "--route");
    refused_with("graph", &["--length", "0"], "--length");
    refused_with("graph", &["--radii", "0"], "--radii");
    for (option, value) in [
        ("--hits", "0"),
        ("--hits", "x"),
        ("--count", "x"),
        ("--seed", "x"),
        ("--seed", "99999999999999999999999"),
    ] {
        refused_with("orbits", &[option, value], option);
    }
    refused_with("orbits", &["--count=-1"], "--count");
}

#[test]
fn bad_launches_are_refused_with_their_place() {
    for (option, value, named) in [
        ("--start", "a", "--start:1:1"),
        ("--start", "q@1/3", "--start:1:1"),
        ("--start", "ab@1/3", "--start:1:1"),
        ("--start", "@1/3", "--start:1:1"),
        ("--start", "a@", "--start:1:3"),
        ("--start", "a@0", "--start:1:3"),
        ("--start", "a@1", "--start:1:3"),
        ("--start", "a@4/3", "--start:1:3"),
        ("--start", "a@1/0", "--start:1:"),
        ("--start", "a@1/", "--start:1:"),
        ("--aim", "2", "--aim:1:1"),
        ("--aim", "1,2,3", "--aim:1:1"),
        ("--aim", "0,0", "--aim:1:1"),
        ("--aim", ",1", "--aim:1:1"),
        ("--aim", "1,", "--aim:1:3"),
        ("--aim", "1,foo", "--aim:1:3"),
        ("--aim", "sqrt(-1),1", "--aim:1:"),
        ("--aim", "1,0", "the aim runs along"),
        ("--aim", "1,-1", "the aim points out"),
        ("--hits", "0", "--hits"),
    ] {
        refused_with("trace", &[option, value], named);
    }
    let table = polygon("square");
    refused(&["trace", &table, "--start", "a@1/3"], "--aim");
    refused(&["trace", &table, "--aim", "1,1"], "--start");
}

/// Reads one line and closes the pipe, as `head -1` does. Each output is far larger than a pipe holds.
#[test]
fn a_closed_pipe_ends_quietly() {
    let table = polygon("square");
    for command in [
        &["words", &table, "--length", "36"][..],
        &["words", &table, "--length", "24", "--format", "json"],
        &["orbits", &table, "--count", "20000", "--hits", "100"],
        &["graph", &table, "--length", "24", "--format", "graphml"],
        &["diagonals", &table, "--length", "70"],
        &[
            "trace",
            &table,
            "--start",
            "a@1/3",
            "--aim",
            "sqrt(2),1",
            "--hits",
            "200000",
        ],
    ] {
        let place = place();
        let mut child = program(&place, command)
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("the program starts");
        let mut line = String::new();
        let mut reader = BufReader::with_capacity(16, child.stdout.take().expect("piped"));
        if command[0] == "trace" {
            // One line holds it all: a few letters will do.
            assert!(!reader.fill_buf().expect("readable").is_empty());
        } else {
            reader.read_line(&mut line).expect("a line");
        }
        drop(reader);
        let output = child.wait_with_output().expect("it ends");
        assert_eq!(text(&output.stderr), "", "{command:?}");
        assert_eq!(output.status.code(), Some(0), "{command:?}");
    }
}

/// Starts work that takes minutes, interrupts it, and asserts code 3 and that the folder is as it was.
#[cfg(unix)]
fn interrupted(arguments: &[&str]) {
    use std::time::{Duration, Instant};
    let place = place();
    let kept = place.path().join("kept");
    std::fs::write(&kept, "untouched").expect("written");
    let child = program(&place, arguments)
        .stdout(Stdio::null())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts");
    // Long enough to have begun; its work is far from done.
    std::thread::sleep(Duration::from_millis(800));
    let id = child.id().to_string();
    let begun = Instant::now();
    let kill = std::process::Command::new("kill")
        .args(["-INT", &id])
        .status();
    assert!(
        kill.expect("kill is there").success(),
        "{arguments:?}: it had ended already"
    );
    let output = child.wait_with_output().expect("it ends");
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(3), "{arguments:?}: {message}");
    assert!(message.starts_with("stopped: a signal came"), "{message}");
    assert!(begun.elapsed() < Duration::from_secs(10), "{arguments:?}");
    assert_eq!(std::fs::read_to_string(&kept).expect("kept"), "untouched");
    assert_eq!(entries(place.path()), [kept], "{arguments:?}");
}

#[cfg(unix)]
#[test]
fn an_interrupted_run_leaves_nothing_behind() {
    let table = polygon("irrational-quadrilateral");
    for arguments in [
        &[
            "study",
            &table,
            "--length",
            "5000",
            "--budget-memory",
            "1000000G",
            "--out",
            "result",
        ][..],
        &["complexity", &table, "--length", "5000", "--out", "kept"],
        &[
            "words",
            &table,
            "--length",
            "5000",
            "--budget-memory",
            "1000000G",
            "--out",
            "kept",
        ],
        &["diagonals", &table, "--length", "5000", "--out", "kept"],
        &["orbits", &table, "--count", "1000000000", "--out", "kept"],
    ] {
        interrupted(arguments);
    }
}
