//! How long is a unit of work?
//!
//! Question: how many units that `number::effort` charges make a second, for table files whose time goes into different
//! things? The bound on reading a file is stated in seconds, so no kind of work may cost much more time for each unit
//! than the others: the last line compares the slowest rate with the one that the statement needs. Fair: the work is
//! real files, and counting is switched on as it is for every file.
//!
//! `cargo bench --bench effort`

use reboundary::number::effort::measured;
use reboundary::table::expression::MOST_WORK;
use reboundary::table::file::parse;
use std::time::Instant;

/// The promise of the documents.
const SECONDS: f64 = 60.0;

fn files() -> Vec<(&'static str, String)> {
    let triangle = |x: &str, y: &str| format!(r#"corners = [["0","0"], ["{x}","0"], ["0","{y}"]]"#);
    let long = |i: u32| format!("{}/{}", "123456789".repeat(60), 1000 + i);
    let wheel: Vec<String> = (0..200)
        .map(|i| {
            let angle = std::f64::consts::TAU * f64::from(i) / 200.0;
            let near = |x: f64| format!("{}{}", (x * 1e15) as i64, "7".repeat(300 + i as usize));
            format!(r#"["{}","{}"]"#, near(angle.cos()), near(angle.sin()))
        })
        .collect();
    let sums: Vec<String> = (0..60).map(long).collect();
    let mut files = vec![
        (
            "five square roots",
            triangle("sqrt(2)+sqrt(3)+sqrt(5)+sqrt(7)+sqrt(11)", "1"),
        ),
        (
            "roots in roots",
            triangle("sqrt(5+sqrt(4+sqrt(3+sqrt(2+sqrt(2)))))", "1"),
        ),
        (
            "sum of cosines",
            triangle("cos(pi/7)+cos(pi/11)", "cos(2*pi/5)"),
        ),
        ("regular 101-gon", "regular = 101".into()),
        (
            "root of degree 64",
            triangle("root(x^64-3*x^7+5*x-1, 1)", "1"),
        ),
        (
            "close to zero",
            triangle("((3-2*sqrt(2))^500)*((3-2*sqrt(2))^400)", "1"),
        ),
        (
            "200 long corners",
            format!("corners = [{}]", wheel.join(",")),
        ),
    ];
    let define = sums
        .iter()
        .enumerate()
        .map(|(i, s)| format!("n{i} = \"{s}\"\n"));
    let total: Vec<String> = (0..sums.len()).map(|i| format!("n{i}")).collect();
    let text = triangle(&total.join("+"), "1");
    files.push((
        "sum of long fractions",
        format!("{text}\n[define]\n{}", define.collect::<String>()),
    ));
    files
}

fn main() {
    let mut slowest = f64::INFINITY;
    for (name, text) in files() {
        let begun = Instant::now();
        let (read, units) = measured(|| parse("bench.toml", &text));
        let seconds = begun.elapsed().as_secs_f64();
        if let Err(fault) = read {
            panic!("{name}: {fault}");
        }
        let rate = units as f64 / seconds;
        println!(
            "{name:<24} {seconds:>8.3} s {units:>14} units {:>8.2} G units/s",
            rate / 1e9
        );
        // What is over at once tells nothing.
        if seconds > 0.02 {
            slowest = slowest.min(rate);
        }
    }
    println!(
        "a file's budget of {MOST_WORK} units is {:.0} s at the slowest of these rates, and {SECONDS} s are promised",
        MOST_WORK as f64 / slowest
    );
}
