//! Budgets, checkpoints and stats of the commands beside `complexity`: what is complete is written, and a run that was
//! killed and continued gives the same bytes.

mod program;

use program::{done, entries, place, polygon, program, run_in, text};
use std::fs;
use std::path::Path;
use std::process::{Output, Stdio};
use std::time::Duration;
use tempfile::TempDir;

/// Runs and kills a command, ever later, until it ends by itself.
fn killed_until_done(place: &TempDir, arguments: &[&str]) -> (Output, u64) {
    let mut kills = 0;
    loop {
        let mut child = program(place, arguments)
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("the program starts");
        std::thread::sleep(Duration::from_millis(40 + 17 * kills));
        if child.try_wait().expect("asked").is_none() {
            child.kill().expect("killed");
            kills += 1;
        }
        let output = child.wait_with_output().expect("it ends");
        if output.status.success() {
            return (output, kills);
        }
        assert_eq!(output.status.code(), None, "{}", text(&output.stderr));
    }
}

/// Every file below a folder with its bytes.
fn contents(folder: &Path) -> Vec<(String, Vec<u8>)> {
    let files = entries(folder).into_iter().filter(|path| path.is_file());
    files
        .map(|path| {
            let name = path
                .strip_prefix(folder)
                .expect("below")
                .display()
                .to_string();
            (name, fs::read(&path).expect("a file"))
        })
        .collect()
}

/// Alters one line of a checkpoint and tears the last.
fn damage(place: &TempDir) {
    let log = place.path().join("kept/parts.log");
    let mut bytes = fs::read(&log).expect("a log");
    let half = bytes.len() / 2;
    bytes[half] ^= 1;
    bytes.truncate(bytes.len() - 20);
    fs::write(&log, bytes).expect("written");
}

const RESUMED: [&str; 3] = ["--checkpoint", "kept", "--resume"];

#[test]
fn words_killed_again_and_again_give_the_same_bytes() {
    let table = polygon("square");
    let plain = [
        "words",
        &table,
        "--length",
        "26",
        "--format",
        "csv",
        "--exact-only",
    ];
    let expected = done(&plain);
    // Into a file: a pipe that nobody reads would fill, and the run would wait to be killed.
    let kept = [&plain[..], &["--out", "words.csv"], &RESUMED].concat();
    let place = place();
    let same = || {
        let found = fs::read(place.path().join("words.csv")).expect("a file");
        assert!(text(&found) == expected);
    };
    let (_, kills) = killed_until_done(&place, &kept);
    assert!(kills >= 3, "{kills} kills");
    same();
    let again = run_in(
        &place,
        &[&kept[..], &["--stats", "--threads", "3"]].concat(),
    );
    same();
    let told = text(&again.stderr);
    assert!(told.contains("parts from the checkpoint"), "{told}");
    assert!(told.contains("13 bytes a word"), "{told}");
    damage(&place);
    let mended = run_in(&place, &kept);
    assert!(text(&mended.stderr).contains("2 lines of the checkpoint are torn or altered"));
    same();
}

#[test]
fn a_study_killed_again_and_again_gives_the_same_bytes() {
    let table = polygon("regular-pentagon");
    let plain = ["study", &table, "--length", "16", "--exact-only", "--quiet"];
    let (place, other) = (place(), place());
    let at = |out| [&plain[..], &["--out", out]].concat();
    assert_eq!(run_in(&other, &at("found")).status.code(), Some(0));
    let expected = contents(&other.path().join("found"));
    let kept = [&at("found")[..], &RESUMED].concat();
    let (_, kills) = killed_until_done(&place, &kept);
    assert!(kills >= 3, "{kills} kills");
    let same = || {
        let found = contents(&place.path().join("found"));
        assert_eq!(found.len(), expected.len());
        for (found, expected) in found.iter().zip(&expected) {
            assert!(found == expected, "{} differs", found.0);
        }
    };
    same();
    damage(&place);
    let again = [&kept[..], &["--threads", "3", "--stats"]].concat();
    let mended = run_in(&place, &again);
    assert_eq!(mended.status.code(), Some(0), "{}", text(&mended.stderr));
    assert!(text(&mended.stderr).contains("parts from the checkpoint"));
    same();
}

#[test]
fn bundles_and_measures_continue_too() {
    let place = place();
    let letters = r#"
title = "Quay with two letters"
corners = [["0", "0"], ["3", "0"], ["3", "2"], ["0", "2"]]
sides = ["a", "b", "a", "b"]
"#;
    fs::write(place.path().join("quay.toml"), letters).expect("written");
    for table in ["quay.toml".to_string(), polygon("irrational-quadrilateral")] {
        let plain = ["words", &table, "--length", "14", "--format", "json"];
        let expected = text(&run_in(&place, &plain).stdout);
        let kept = [&plain[..], &["--checkpoint", "kept"]].concat();
        assert_eq!(text(&run_in(&place, &kept).stdout), expected);
        let log = place.path().join("kept/parts.log");
        let lines = fs::read_to_string(&log).expect("a log");
        // Every other part is gone.
        let some =
            |(i, line): (usize, &str)| (i == 0 || i % 2 == 1).then(|| line.to_string() + "\n");
        let halved: String = lines.lines().enumerate().filter_map(some).collect();
        fs::write(&log, halved).expect("written");
        let resumed = run_in(&place, &[&kept[..], &["--resume"]].concat());
        assert_eq!(text(&resumed.stderr), "");
        assert_eq!(text(&resumed.stdout), expected);
        let whole = fs::read_to_string(&log).expect("a log");
        assert_eq!(whole.lines().count(), lines.lines().count());
        fs::remove_dir_all(place.path().join("kept")).expect("removed");
    }
}

#[test]
fn checkpoints_of_other_commands_tables_and_options_are_refused() {
    let place = place();
    let (square, other) = (polygon("square"), polygon("legs-3-4"));
    let words = |table, length| [&["words", table, "--length", length][..], &RESUMED].concat();
    assert_eq!(run_in(&place, &words(&square, "6")).status.code(), Some(0));
    let before = fs::read(place.path().join("kept/parts.log")).expect("a log");
    let refused = |arguments: &[&str], reason: &str| {
        let output = run_in(&place, arguments);
        let message = text(&output.stderr);
        assert_eq!(output.status.code(), Some(2), "{arguments:?}: {message}");
        assert!(message.contains(reason), "{arguments:?}: {message}");
        assert_eq!(text(&output.stdout), "");
    };
    refused(&words(&other, "6"), "another table");
    refused(&words(&square, "7"), "`words --length 6`");
    refused(
        &[&words(&square, "6")[..], &["--exact-only"]].concat(),
        "--exact-only",
    );
    let study = ["study", &square, "--length", "6", "--out", "found"];
    refused(&[&study[..], &RESUMED].concat(), "`words --length 6`");
    assert!(!place.path().join("found").exists());
    refused(
        &["words", &square, "--length", "6", "--resume"],
        "--checkpoint",
    );
    refused(&[&study[..], &["--resume"]].concat(), "--checkpoint");
    for command in [
        &["words", &square, "--length", "6"][..],
        &study,
        &["graph", &square],
        &["diagonals", &square],
    ] {
        refused(
            &[command, &["--budget-time", "soon"]].concat(),
            "such as 5m",
        );
        refused(
            &[command, &["--budget-memory", "lots"]].concat(),
            "such as 4G",
        );
    }
    refused(
        &["diagonals", &square, "--distance", "2", "--stats"],
        "--stats",
    );
    assert_eq!(
        fs::read(place.path().join("kept/parts.log")).expect("a log"),
        before
    );
}

/// A number that stands between two texts of a message.
fn told(message: &str, before: &str, after: &str) -> usize {
    let (_, rest) = message
        .split_once(before)
        .unwrap_or_else(|| panic!("{message}"));
    let (number, _) = rest
        .split_once(after)
        .unwrap_or_else(|| panic!("{message}"));
    number.parse().unwrap_or_else(|_| panic!("{message}"))
}

fn stopped(output: &Output) -> String {
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(3), "{message}");
    assert!(message.contains("the time allowed was over"), "{message}");
    message
}

/// Nobody finishes this.
const FAR: [&str; 4] = ["--length", "5000", "--budget-time", "2s"];
/// The memory is no reason to refuse it.
const ROOM: [&str; 2] = ["--budget-memory", "1000000G"];

#[test]
fn a_time_budget_of_words_gives_shorter_words() {
    let table = polygon("irrational-quadrilateral");
    let place = place();
    let output = run_in(&place, &[&["words", &table][..], &FAR, &ROOM].concat());
    let message = stopped(&output);
    let length = told(
        &message,
        "the words of length ",
        " are complete, not those of 5000",
    );
    assert!(length >= 8);
    let expected = done(&["words", &table, "--length", &length.to_string()]);
    assert!(text(&output.stdout) == expected);
    let none = [
        "words",
        &table,
        "--length",
        "50",
        "--budget-time",
        "0",
        "--out",
        "words",
    ];
    let none = run_in(&place, &none);
    assert!(stopped(&none).contains("nothing was written"));
    assert!(entries(place.path()).is_empty());
}

#[test]
fn a_time_budget_of_a_study_gives_a_shorter_study() {
    let table = polygon("irrational-quadrilateral");
    let place = place();
    let far = [&["study", &table, "--out", "found"][..], &FAR, &ROOM].concat();
    let message = stopped(&run_in(&place, &far));
    let length = told(&message, "the study is complete to n = ", " of 5000");
    let read = |name: &str| fs::read(place.path().join(name)).expect("a file");
    let record: serde_json::Value =
        serde_json::from_slice(&read("found/study.json")).expect("JSON");
    assert_eq!(record["stop"], "time");
    assert_eq!(record["options"]["length"], length);
    let page = String::from_utf8(read("found/report.html")).expect("text");
    assert!(page.contains("stopped before it was complete"));
    let whole = [
        "study",
        &table,
        "--length",
        &length.to_string(),
        "--out",
        "whole",
    ];
    assert_eq!(run_in(&place, &whole).status.code(), Some(0));
    for (name, bytes) in contents(&place.path().join("whole")) {
        if name != "study.json" && name != "report.html" {
            assert!(read(&format!("found/{name}")) == bytes, "{name}");
        }
    }
    let none = ["study", &table, "--budget-time", "0", "--out", "none"];
    assert!(stopped(&run_in(&place, &none)).contains("nothing was written"));
    assert!(!place.path().join("none").exists());
}

#[test]
fn time_budgets_of_graphs_and_diagonals_give_shorter_ones() {
    let table = polygon("irrational-quadrilateral");
    let place = place();
    for command in ["graph", "diagonals"] {
        let json = ["--format", "json"];
        let far = run_in(&place, &[&[command, &table][..], &FAR, &json].concat());
        let message = stopped(&far);
        let found: serde_json::Value = serde_json::from_slice(&far.stdout).expect("JSON");
        assert_eq!(found["complete"], false);
        assert_eq!(found["length"], 5000);
        let to = found["complete_to"].as_u64().expect("a length").to_string();
        assert!(message.contains(&to), "{message}");
        let whole = [&[command, &table, "--length", &to][..], &json].concat();
        let whole: serde_json::Value = serde_json::from_str(&done(&whole)).expect("JSON");
        assert_eq!(whole["complete"], true);
        for list in ["orders", "by_crossings", "diagonals"] {
            assert_eq!(found.get(list), whole.get(list), "{command}, {list}");
        }
    }
}

#[test]
fn limits_that_suffice_and_stats_change_no_byte() {
    let table = polygon("legs-3-4");
    for command in [
        &["words", &table, "--length", "20", "--format", "csv"][..],
        &["graph", &table, "--length", "20"],
        &["diagonals", &table, "--length", "20"],
    ] {
        let expected = done(command);
        let limits = ["--budget-time", "1h", "--budget-memory", "100G"];
        assert_eq!(done(&[command, &limits].concat()), expected);
        let place = place();
        let output = run_in(&place, &[command, &["--stats"]].concat());
        assert_eq!(text(&output.stdout), expected);
        let told = text(&output.stderr);
        assert!(
            told.lines().all(|line| line.starts_with("stats: ")),
            "{told}"
        );
        assert!(told.contains("peak memory"), "{told}");
        assert!(told.contains("by floating point"), "{told}");
        assert_eq!(
            told.contains("13 bytes a word"),
            command[0] != "diagonals",
            "{told}"
        );
    }
    for command in ["graph", "diagonals"] {
        let plain = [command, &table, "--length", "12", "--format", "json"];
        let mut with: serde_json::Value =
            serde_json::from_str(&done(&[&plain[..], &["--stats"]].concat())).expect("JSON");
        let stats = with.as_object_mut().expect("an object").remove("stats");
        assert!(stats.expect("stats")["walks"][0]["steps"].as_u64() > Some(100));
        let without: serde_json::Value = serde_json::from_str(&done(&plain)).expect("JSON");
        assert_eq!(with, without);
    }
    let place = place();
    let study = |out, more: &[&str]| {
        let plain = ["study", &polygon("equilateral"), "--quiet", "--out", out];
        let output = run_in(&place, &[&plain[..], more].concat());
        assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
        contents(&place.path().join(out))
    };
    // Without a length it is chosen, under a limit too.
    let plain = study("one", &["--radii", "2"]);
    assert!(plain == study("two", &["--radii", "2", "--budget-time", "1h"]));
}
