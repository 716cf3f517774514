//! Checkpoints and budgets: a run that was killed and continued gives the same bytes; what cannot be believed is not.

mod program;

use program::{done, json, numbers, place, polygon, program, run_in, text};
use reboundary::run::checkpoint::{Checkpoint, CheckpointFault, Identity, Ledger};
use std::fs;
use std::path::Path;
use std::process::Stdio;
use std::time::Duration;
use tempfile::TempDir;

fn identity() -> Identity {
    Identity {
        version: "1".into(),
        table: "square".into(),
        options: "--length 9".into(),
    }
}

/// A folder with a checkpoint of three parts, and the bytes of its log.
fn three_parts() -> (TempDir, Vec<u8>) {
    let folder = place();
    let checkpoint = Checkpoint::open(folder.path(), &identity(), false).expect("begun");
    let walk = checkpoint.walk("beams", 9);
    for part in 0..3 {
        assert_eq!(walk.recall(part), None);
        walk.keep(part, &counts(part));
    }
    assert!(checkpoint.failure().is_none());
    drop(checkpoint);
    let log = fs::read(folder.path().join("parts.log")).expect("a log");
    (folder, log)
}

fn counts(part: usize) -> Vec<u64> {
    vec![part as u64, u64::MAX, 7]
}

/// Which of the three parts are recalled; those that are must be right.
fn recalled(folder: &Path) -> Result<Vec<usize>, CheckpointFault> {
    let checkpoint = Checkpoint::open(folder, &identity(), true)?;
    let walk = checkpoint.walk("beams", 9);
    let known = |part: &usize| match walk.recall(*part) {
        Some(found) => {
            assert_eq!(found, counts(*part));
            true
        }
        None => false,
    };
    let found = (0..3).filter(known).collect();
    assert_eq!(checkpoint.walk("beams", 8).recall(0), None);
    assert_eq!(checkpoint.walk("diagonals", 9).recall(0), None);
    Ok(found)
}

#[test]
fn finished_parts_come_back() {
    let (folder, _) = three_parts();
    assert_eq!(recalled(folder.path()).expect("opened"), [0, 1, 2]);
    // Opening writes the log anew; nothing is lost by that.
    assert_eq!(recalled(folder.path()).expect("opened"), [0, 1, 2]);
}

#[test]
fn a_log_torn_at_any_byte_gives_only_right_parts() {
    let (folder, log) = three_parts();
    let path = folder.path().join("parts.log");
    let first_line = log.iter().position(|byte| *byte == b'\n').expect("lines");
    let mut most = 0;
    for length in first_line..log.len() {
        fs::write(&path, &log[..length]).expect("written");
        let found = recalled(folder.path()).expect("opened");
        assert_eq!(found, (0..found.len()).collect::<Vec<_>>());
        most = most.max(found.len());
        // What was torn is gone from the log, so that the next line is not lost with it.
        let checkpoint = Checkpoint::open(folder.path(), &identity(), true).expect("opened");
        assert_eq!(checkpoint.rejected(), 0);
        checkpoint.walk("beams", 9).keep(2, &counts(2));
        drop(checkpoint);
        assert!(recalled(folder.path()).expect("opened").contains(&2));
    }
    assert_eq!(most, 3, "a line is whole without its end of line");
    fs::write(&path, &log[..first_line - 1]).expect("written");
    assert!(matches!(
        recalled(folder.path()),
        Err(CheckpointFault::Foreign { .. })
    ));
}

#[test]
fn an_altered_byte_anywhere_costs_its_line_and_nothing_else() {
    let (folder, log) = three_parts();
    let path = folder.path().join("parts.log");
    let first_line = log.iter().position(|byte| *byte == b'\n').expect("lines");
    for at in 0..log.len() {
        for change in [1u8, 0x80] {
            let mut altered = log.clone();
            altered[at] ^= change;
            fs::write(&path, &altered).expect("written");
            let found = recalled(folder.path());
            if at < first_line {
                assert!(
                    matches!(found, Err(CheckpointFault::Foreign { .. })),
                    "byte {at}"
                );
            } else if at > first_line {
                let line = log[..at].iter().filter(|byte| **byte == b'\n').count() - 1;
                let found = found.expect("opened");
                // An end of line that is altered joins two lines; both are lost.
                let joined = log[at] == b'\n';
                assert!(!found.contains(&line), "byte {at}: {found:?}");
                assert!(found.len() >= if joined { 1 } else { 2 }, "byte {at}");
            }
        }
    }
}

#[test]
fn lines_of_another_run_are_not_believed() {
    let (folder, log) = three_parts();
    let other = place();
    let mut identity = identity();
    identity.table = "kite".into();
    drop(Checkpoint::open(other.path(), &identity, false).expect("begun"));
    let path = other.path().join("parts.log");
    let mut mixed = fs::read(&path).expect("a log");
    let first_line = log.iter().position(|byte| *byte == b'\n').expect("lines");
    mixed.extend_from_slice(&log[first_line + 1..]);
    fs::write(&path, mixed).expect("written");
    let checkpoint = Checkpoint::open(other.path(), &identity, true).expect("opened");
    assert_eq!(checkpoint.rejected(), 3);
    assert_eq!(checkpoint.walk("beams", 9).recall(0), None);
    drop((folder, checkpoint));
}

#[test]
fn a_checkpoint_in_use_or_of_something_else_is_refused_with_the_reason() {
    let (folder, _) = three_parts();
    let again = Checkpoint::open(folder.path(), &identity(), false);
    assert!(matches!(again, Err(CheckpointFault::NotAsked { .. })));
    let open = Checkpoint::open(folder.path(), &identity(), true).expect("opened");
    assert!(matches!(
        recalled(folder.path()),
        Err(CheckpointFault::InUse { .. })
    ));
    drop(open);
    let with = |version: &str, table: &str, options: &str| Identity {
        version: version.into(),
        table: table.into(),
        options: options.into(),
    };
    for (other, reason) in [
        (
            with("2", "square", "--length 9"),
            "version 1 of the program",
        ),
        (with("1", "kite", "--length 9"), "another table"),
        (with("1", "square", "--length 8"), "`--length 9`"),
    ] {
        let fault = Checkpoint::open(folder.path(), &other, true).expect_err("foreign");
        assert!(fault.to_string().contains(reason), "{fault}");
    }
    assert_eq!(recalled(folder.path()).expect("untouched"), [0, 1, 2]);
    let filled = place();
    fs::write(filled.path().join("letter"), "dear harbour").expect("written");
    let fault = Checkpoint::open(filled.path(), &identity(), true);
    assert!(matches!(fault, Err(CheckpointFault::Occupied { .. })));
}

/// Work of a few seconds without optimization: big integers only.
const LONG: &str = "44";

fn long_work(table: &str) -> Vec<&str> {
    let format = ["--format", "json", "--exact-only"];
    [&["complexity", table, "--length", LONG][..], &format].concat()
}

#[test]
fn killed_again_and_again_it_gives_the_same_bytes() {
    let table = polygon("square");
    let expected = done(&long_work(&table));
    let place = place();
    let kept = [
        &long_work(&table)[..],
        &["--checkpoint", "kept", "--resume"],
    ]
    .concat();
    let mut kills = 0;
    let output = loop {
        let mut child = program(&place, &kept)
            .stdout(Stdio::piped())
            .stderr(Stdio::piped())
            .spawn()
            .expect("the program starts");
        // Ever later, so that every part gets its time on a slow machine too.
        std::thread::sleep(Duration::from_millis(40 + 17 * kills));
        if child.try_wait().expect("asked").is_none() {
            child.kill().expect("killed");
            kills += 1;
        }
        let output = child.wait_with_output().expect("it ends");
        if output.status.success() {
            break output;
        }
        assert_eq!(output.status.code(), None, "{}", text(&output.stderr));
    };
    assert_eq!(text(&output.stdout), expected);
    assert!(kills >= 3, "{kills} kills");
    // Everything is kept: another number of threads finds the same parts, and takes no step of their walks.
    let more = [&kept[..], &["--threads", "3", "--stats"]].concat();
    let again = run_in(&place, &more);
    let again: serde_json::Value = serde_json::from_slice(&again.stdout).expect("JSON");
    assert!(again["stats"]["recalled_parts"].as_u64() >= Some(200));
    // Altered parts are computed again.
    let log = place.path().join("kept/parts.log");
    let mut bytes = fs::read(&log).expect("a log");
    let half = bytes.len() / 2;
    bytes[half] ^= 1;
    bytes.truncate(bytes.len() - 40);
    fs::write(&log, bytes).expect("written");
    let mended = run_in(&place, &kept);
    assert!(text(&mended.stderr).contains("2 lines of the checkpoint are torn or altered"));
    assert_eq!(text(&mended.stdout), expected);
}

#[test]
fn bundles_and_single_routes_continue_too() {
    let ring = place();
    let letters = r#"
title = "Quay with two letters"
corners = [["0", "0"], ["3", "0"], ["3", "2"], ["0", "2"]]
sides = ["a", "b", "a", "b"]
"#;
    fs::write(ring.path().join("quay.toml"), letters).expect("written");
    for (table, route) in [
        ("quay.toml".to_string(), "beams"),
        (polygon("legs-3-4"), "beams"),
        (polygon("legs-3-4"), "diagonals"),
    ] {
        let plain = ["complexity", &table, "--length", "30", "--route", route];
        let expected = run_in(&ring, &plain);
        assert_eq!(expected.status.code(), Some(0));
        let kept = [&plain[..], &["--checkpoint", "kept"]].concat();
        let first = run_in(&ring, &kept);
        assert_eq!(text(&first.stdout), text(&expected.stdout));
        let log = ring.path().join("kept/parts.log");
        let lines = fs::read_to_string(&log).expect("a log");
        let count = lines.lines().count();
        assert!(count > 100, "{count} lines");
        // A third of the parts are gone.
        let some: Vec<&str> = lines.lines().take(2 * count / 3).collect();
        fs::write(&log, some.join("\n") + "\n").expect("written");
        let resumed = run_in(&ring, &[&kept[..], &["--resume"]].concat());
        assert_eq!(text(&resumed.stderr), "");
        assert_eq!(text(&resumed.stdout), text(&expected.stdout));
        assert_eq!(
            fs::read_to_string(&log).expect("a log").lines().count(),
            count
        );
        fs::remove_dir_all(ring.path().join("kept")).expect("removed");
    }
}

#[test]
fn a_kept_part_is_used_as_it_stands() {
    // Without this, a run that computed everything again would pass the tests above.
    let table = polygon("square");
    let place = place();
    let plain = ["complexity", &table, "--length", "20", "--route", "beams"];
    let stats = ["--checkpoint", "kept", "--stats", "--format", "json"];
    let first = run_in(&place, &[&plain[..], &stats].concat());
    let again = run_in(&place, &[&plain[..], &stats, &["--resume"]].concat());
    let steps = |output: &std::process::Output| -> (i64, u64) {
        let value: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON");
        let walk = &value["stats"]["walks"][0];
        let big = value["stats"]["recalled_parts"].as_u64().expect("a number");
        (walk["steps"].as_i64().expect("a number"), big)
    };
    let ((all, none), (few, recalled)) = (steps(&first), steps(&again));
    assert_eq!(none, 0);
    assert!(recalled >= 200 && few * 4 < all, "{few} of {all} steps");
}

fn refused(place: &TempDir, arguments: &[&str], reason: &str) {
    let output = run_in(place, arguments);
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(2), "{arguments:?}: {message}");
    assert!(message.starts_with("error"), "{message}");
    assert!(message.contains(reason), "{arguments:?}: {message}");
    assert_eq!(text(&output.stdout), "");
}

#[test]
fn another_table_or_option_is_refused_by_the_program() {
    let place = place();
    let (square, other) = (polygon("square"), polygon("legs-3-4"));
    let run = |table, length| {
        [
            "complexity",
            table,
            "--checkpoint",
            "kept",
            "--length",
            length,
        ]
    };
    assert_eq!(run_in(&place, &run(&square, "12")).status.code(), Some(0));
    let before = fs::read(place.path().join("kept/parts.log")).expect("a log");
    refused(&place, &run(&square, "12"), "add --resume");
    let resume = |table, length| [&run(table, length)[..], &["--resume"]].concat();
    refused(&place, &resume(&other, "12"), "another table");
    refused(&place, &resume(&square, "13"), "`--length 12 --route both`");
    let exact = [&resume(&square, "12")[..], &["--exact-only"]].concat();
    refused(&place, &exact, "--exact-only");
    let beams = [&resume(&square, "12")[..], &["--route", "beams"]].concat();
    refused(&place, &beams, "--route beams");
    refused(&place, &["complexity", &square, "--resume"], "--checkpoint");
    let deep = ["complexity", &square, "--checkpoint", "no/such/folder"];
    refused(&place, &deep, "no/such/folder");
    let after = fs::read(place.path().join("kept/parts.log")).expect("a log");
    assert_eq!(before, after);
    assert_eq!(
        run_in(&place, &resume(&square, "12")).status.code(),
        Some(0)
    );
}

/// Asserts that a stopped run gave the beginning of what a whole run gives.
fn is_a_beginning(output: &std::process::Output, table: &str, reason: &str) {
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(3), "{message}");
    assert!(message.starts_with("stopped: "), "{message}");
    assert!(message.contains(reason), "{message}");
    let found: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON");
    assert_eq!(found["complete"], false);
    assert_eq!(found["length"], 5000);
    assert_eq!(found["routes_agree"], true);
    let to = found["complete_to"].as_u64().expect("a length").to_string();
    assert!(message.contains(&format!("n = {to} of 5000")), "{message}");
    let whole = json(&[
        "complexity",
        table,
        "--length",
        &to,
        "--route",
        "diagonals",
        "--format",
        "json",
    ]);
    assert_eq!(numbers(&found["p"]), numbers(&whole["p"]));
    assert_eq!(numbers(&found["diagonals"]), numbers(&whole["diagonals"]));
}

#[test]
fn a_time_budget_gives_what_is_complete() {
    let table = polygon("irrational-quadrilateral");
    let place = place();
    let arguments = [
        "complexity",
        &table,
        "--length",
        "5000",
        "--format",
        "json",
        "--budget-time",
        "2s",
    ];
    let begun = std::time::Instant::now();
    let output = run_in(&place, &arguments);
    assert!(begun.elapsed() < Duration::from_secs(20));
    is_a_beginning(&output, &table, "the time allowed was over");
    let none = run_in(
        &place,
        &[
            "complexity",
            &table,
            "--length",
            "5000",
            "--budget-time",
            "0",
        ],
    );
    assert_eq!(none.status.code(), Some(3));
    assert!(text(&none.stderr).contains("nothing was written"));
    for wrong in ["soon", "1e3", "1d", ""] {
        let arguments = ["complexity", &table, "--budget-time", wrong];
        refused(&place, &arguments, "such as 5m");
    }
}

#[test]
fn a_budget_that_suffices_changes_nothing() {
    let table = polygon("regular-pentagon");
    let plain = ["complexity", &table, "--length", "30"];
    let budget = ["--budget-time", "1h", "--budget-memory", "100G"];
    assert_eq!(done(&plain), done(&[&plain[..], &budget].concat()));
}

#[cfg(target_os = "linux")]
#[test]
fn a_memory_budget_stops() {
    let table = polygon("irrational-quadrilateral");
    let place = place();
    let output = run_in(
        &place,
        &[
            "complexity",
            &table,
            "--length",
            "5000",
            "--budget-memory",
            "1K",
        ],
    );
    let message = text(&output.stderr);
    assert_eq!(output.status.code(), Some(3), "{message}");
    assert!(
        message.contains("more memory was used than allowed"),
        "{message}"
    );
}

#[cfg(unix)]
#[test]
fn a_signal_gives_what_is_complete_when_there_is_a_budget() {
    let table = polygon("irrational-quadrilateral");
    let place = place();
    let arguments = [
        "complexity",
        &table,
        "--length",
        "5000",
        "--format",
        "json",
        "--budget-time",
        "1h",
    ];
    let child = program(&place, &arguments)
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts");
    std::thread::sleep(Duration::from_millis(1500));
    let id = child.id().to_string();
    let kill = std::process::Command::new("kill")
        .args(["-INT", &id])
        .status();
    assert!(kill.expect("kill is there").success());
    let output = child.wait_with_output().expect("it ends");
    is_a_beginning(&output, &table, "a signal came");
}

#[test]
fn stats_tell_steps_and_tiers_and_leave_the_result_alone() {
    let table = polygon("legs-3-4");
    let plain = ["complexity", &table, "--length", "25", "--format", "json"];
    let mut with = json(&[&plain[..], &["--stats"]].concat());
    let stats = with.as_object_mut().expect("an object").remove("stats");
    let stats = stats.expect("stats");
    let without = json(&plain);
    assert_eq!(with, without);
    assert_eq!(without.get("stats"), None);
    let walks = stats["walks"].as_array().expect("walks");
    assert_eq!(walks.len(), 2);
    assert_eq!(walks[0]["walk"], "diagonals");
    // Every word of at least one letter is a beam here.
    let words: i64 = numbers(&without["p"]).iter().skip(1).sum();
    let steps = walks[1]["steps"].as_i64().expect("a number");
    assert_eq!(steps, words, "{stats}");
    for walk in walks {
        let tiers = walk["decisions"].as_object().expect("tiers");
        let sum: u64 = tiers.values().filter_map(|v| v.as_u64()).sum();
        assert!(
            sum > walk["steps"].as_u64().expect("a number") / 2,
            "{walk}"
        );
    }
    let exact = json(&[&plain[..], &["--stats", "--exact-only"]].concat());
    let tiers = &exact["stats"]["walks"][1]["decisions"];
    assert_eq!(tiers["float"], 0);
    assert!(tiers["big"].as_u64() > Some(0));
    let place = place();
    let text_form = run_in(&place, &["complexity", &table, "--length", "25", "--stats"]);
    assert_eq!(
        text(&text_form.stdout),
        done(&["complexity", &table, "--length", "25"])
    );
    let told = text(&text_form.stderr);
    assert!(
        told.lines().all(|line| line.starts_with("stats: ")),
        "{told}"
    );
    assert!(told.contains("peak memory"), "{told}");
}
