//! The bound on reading a table file: files made to be slow, each of which is read or refused within the stated time.
//!
//! The documents promise a minute on an ordinary machine. The tests allow five: they run beside each other on machines that
//! may be busy, without full optimization. What is refused is refused everywhere, because work is counted and
//! not timed.

use reboundary::number::effort::{Exhausted, measured, within};
use reboundary::table::expression::{Evaluator, MOST_WORK};
use reboundary::table::file::{LARGEST_FILE, LoadedTable, TableFileError, load, parse, rehearse};
use std::time::{Duration, Instant};

const ALLOWED: Duration = Duration::from_secs(300);

/// Reads a text and does what every command does first, within the bound.
fn read(name: &str, text: &str) -> Result<LoadedTable, String> {
    let begun = Instant::now();
    let result = parse(&format!("{name}.toml"), text)
        .and_then(|loaded| rehearse(&loaded).map(|()| loaded))
        .map_err(|fault| fault.to_string());
    let taken = begun.elapsed();
    assert!(taken < ALLOWED, "{name}: {taken:?}");
    result
}

fn triangle(x: &str, y: &str) -> String {
    format!(r#"corners = [["0","0"], ["{x}","0"], ["0","{y}"]]"#)
}

/// Refused for its work, at a place, with advice.
fn too_much(name: &str, text: &str) {
    let message = read(name, text).expect_err(name);
    assert!(
        message.contains("more work than one table file may cause"),
        "{name}: {message}"
    );
    assert!(
        message.contains(&format!("{name}.toml:1:")),
        "a place: {message}"
    );
    assert!(message.contains("help: use "), "advice: {message}");
}

/// A number of n digits, without a pattern that arithmetic could use.
fn digits(n: usize, seed: u64) -> String {
    let mut state = seed;
    let next = |state: &mut u64| {
        *state = state
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1);
        char::from(b'1' + (*state >> 60) as u8 % 9)
    };
    (0..n).map(|_| next(&mut state)).collect()
}

fn list(corners: impl Iterator<Item = (String, String)>) -> String {
    let pairs: Vec<String> = corners.map(|(x, y)| format!(r#"["{x}","{y}"]"#)).collect();
    format!("corners = [{}]", pairs.join(","))
}

/// Corners on a wide circle, with digits behind that keep every number long.
fn wheel(corners: usize, long: usize) -> String {
    list((0..corners).map(|i| {
        let angle = std::f64::consts::TAU * i as f64 / corners as f64;
        let near = |x: f64, seed| format!("{}{}", (x * 1e15) as i64, digits(long, seed));
        (
            near(angle.cos(), i as u64),
            near(angle.sin(), 1000 + i as u64),
        )
    }))
}

#[test]
fn fields_of_large_degree_are_read() {
    for (name, x, degree) in [
        ("five-roots", "sqrt(2)+sqrt(3)+sqrt(5)+sqrt(7)+sqrt(11)", 32),
        (
            "root-in-root",
            "sqrt(5+sqrt(4+sqrt(3+sqrt(2+sqrt(2)))))",
            32,
        ),
        ("root-64", "root(x^64 - 3*x^7 + 5*x - 1, 1)", 64),
        ("cosines", "cos(pi/7) + cos(pi/11) + cos(2*pi/5)", 30),
        ("cosine-127", "cos(pi/127)", 63),
        (
            "degree-24",
            "sqrt(2) + sqrt(3) + cos(pi/7) + cos(2*pi/5)",
            24,
        ),
    ] {
        let table = read(name, &triangle(x, "1"))
            .unwrap_or_else(|e| panic!("{e}"))
            .table;
        assert_eq!(table.field().degree(), degree, "{name}");
    }
}

#[test]
fn what_takes_too_long_is_refused_at_its_place() {
    let long = digits(400, 7);
    let x = format!("root({long}*x^40 - {long}1*x^3 - {long}7, 1)");
    too_much("long-coefficients", &triangle(&x, "1"));
    let terms: Vec<String> = (1..60)
        .map(|i| format!("{}*x^{i}", digits(50, i)))
        .collect();
    let x = format!("root({} - {}, 1)", terms.join(" + "), digits(50, 99));
    too_much("dense-polynomial", &triangle(&x, "1"));
}

/// The whole budget goes: half a minute.
#[test]
fn a_tower_of_nested_roots_ends() {
    let x = "sqrt(6+sqrt(5+sqrt(4+sqrt(3+sqrt(2+sqrt(2))))))";
    too_much("tower", &triangle(x, "1"));
}

#[test]
fn corners_with_long_coordinates_end() {
    assert_eq!(read("wheel", &wheel(255, 100)).unwrap().table.sides(), 255);
    // Longer ones may be refused; either way it ends.
    match read("long-wheel", &wheel(255, 980)) {
        Ok(read) => assert_eq!(read.table.sides(), 255),
        Err(message) => assert!(message.contains("more work"), "{message}"),
    }
    let many = read("many", &wheel(5000, 3)).unwrap_err();
    assert!(
        many.contains("from 3 to 255 corners, this one has 5000"),
        "{many}"
    );
    let comb = list((0..255).map(|i| match i {
        0 => ("0".into(), "-1".into()),
        254 => ("254".into(), "-1".into()),
        _ => (i.to_string(), if i % 2 == 0 { "0" } else { "1000" }.into()),
    }));
    assert_eq!(read("comb", &comb).unwrap().table.sides(), 255);
    let sums = list((0..255).map(|i| {
        let sum = |from: u64| {
            let parts: Vec<String> = (0..100)
                .map(|j| format!("1/{}", digits(9, from + j)))
                .collect();
            parts.join("+")
        };
        (sum(i * 1000), sum(i * 1000 + 500))
    }));
    assert!(sums.len() < LARGEST_FILE);
    let crossed = read("sums", &sums).unwrap_err();
    assert!(
        crossed.contains("cross") || crossed.contains("more work"),
        "{crossed}"
    );
}

#[test]
fn towers_of_exponents_end() {
    for (name, x, told) in [
        ("power", "9^9^9", "exponent is too large"),
        (
            "power-of-power",
            "((9^999)^999)^999",
            "longer than 65536 bits",
        ),
        (
            "root-power",
            "((1+sqrt(2))^999)^999",
            "longer than 65536 bits",
        ),
        (
            "power-in-root",
            "root(x^(2^20) - 2, 1)",
            "exponent is too large",
        ),
        ("close", "(3-2*sqrt(2))^300", ""),
    ] {
        match read(name, &triangle(x, "1")) {
            Ok(_) => assert_eq!(told, "", "{name}"),
            Err(message) => assert!(
                !told.is_empty() && message.contains(told),
                "{name}: {message}"
            ),
        }
    }
    let names: String = (1..64)
        .map(|i| format!("n{i} = \"n{0}*n{0}+n{0}\"\n", i - 1))
        .collect();
    let doubling = format!("{}\n[define]\nn0 = \"3/7\"\n{names}", triangle("n63", "1"));
    assert!(
        read("doubling", &doubling)
            .unwrap_err()
            .contains("longer than 65536 bits")
    );
}

#[test]
fn files_that_are_too_large_are_not_read() {
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("ten-megabytes.toml");
    std::fs::write(&path, vec![b'#'; 10 << 20]).expect("written");
    let begun = Instant::now();
    assert!(matches!(load(&path), Err(TableFileError::TooLarge { .. })));
    assert!(begun.elapsed() < Duration::from_secs(5));
}

/// The count is of the work and not of the time: twice the same.
#[test]
fn work_is_counted_the_same_each_time() {
    let text = triangle("sqrt(2)+sqrt(3)", "root(x^3-2, 1)");
    let count = || measured(|| parse("twice.toml", &text).map(|read| read.table.sides())).1;
    let first = count();
    assert_eq!(first, count());
    assert!(first > 1_000_000 && first < MOST_WORK, "{first}");
    // A budget just below is not enough, one of that size is.
    let with = |budget| within(budget, || parse("twice.toml", &text).is_ok());
    assert_eq!(with(first), Ok(true));
    assert!(matches!(with(first - 1), Ok(false) | Err(Exhausted)));
}

/// After an end of the budget the evaluator and the rest of the process work as before.
#[test]
fn an_evaluator_survives_the_end_of_its_budget() {
    let mut evaluator = Evaluator::default();
    evaluator.define("a", "3/7").unwrap();
    let long = digits(400, 3);
    let fault = evaluator
        .evaluate(&format!("a*root({long}*x^40 - {long}9*x^3 - {long}1, 1)"))
        .unwrap_err();
    assert!(fault.message.contains("more work"), "{fault}");
    assert_eq!(evaluator.evaluate("a*7").unwrap(), 3.into());
    assert_eq!(evaluator.evaluate("sqrt(2)*sqrt(2)").unwrap(), 2.into());
}
