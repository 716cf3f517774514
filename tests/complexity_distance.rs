//! Generalized diagonals by geometric length, against lattice counts and the list by crossings.

mod support;

use assert_cmd::Command;
use reboundary::complexity::by_distance::list_within;
use reboundary::complexity::diagonals::Diagonal;
use reboundary::number::Real;
use reboundary::run::Control;
use reboundary::table::Table;
use reboundary::unfold::Mesh;
use reboundary::unfold::engine::Arithmetic;
use support::*;

fn within(table: &Table, squared: i64, arithmetic: Arithmetic) -> Vec<Diagonal> {
    let squared = Real::from(squared);
    list_within(
        table,
        &Mesh::new(table),
        &squared,
        arithmetic,
        &Control::new(),
    )
    .expect("unstopped")
}

/// From a corner of the unit square the diagonals lead to the lattice points (p, q) with p, q ≥ 1 without a common
/// factor.
#[test]
fn diagonals_of_the_square_are_primitive_lattice_vectors() {
    for squared in [1, 2, 4, 5, 10, 100, 1000, 4225] {
        let mut expected = 0;
        for p in 1..=70u64 {
            for q in 1..=70u64 {
                if gcd(p, q) == 1 && (p * p + q * q) as i64 <= squared {
                    expected += 4;
                }
            }
        }
        let found = within(&unit_square(), squared, Arithmetic::Tiered);
        assert_eq!(found.len(), expected, "L² = {squared}");
        let lengths: Vec<Real> = found
            .iter()
            .map(|d| d.displacement.squared_length(&Real::from(1)))
            .collect();
        assert!(lengths.is_sorted());
        // A vector (p, q) crosses p + q − 2 sides.
        for d in &found {
            let sum = d.displacement.x.abs() + d.displacement.y.abs();
            assert_eq!(sum, Real::from(d.code.len() as i64 + 2));
        }
    }
}

fn sorted(mut list: Vec<Diagonal>) -> Vec<String> {
    list.sort_by(|a, b| (a.start, &a.code, a.end).cmp(&(b.start, &b.code, b.end)));
    list.iter().map(|d| format!("{d:?}")).collect()
}

/// Long lists by crossings, cut at the length: no diagonal within it crosses more sides than were walked.
#[test]
fn the_list_by_crossings_has_the_same_short_diagonals() {
    for (table, squared, most) in [
        (equilateral(), 90, 24),
        (right_isosceles(), 20, 24),
        (half_equilateral(), 80, 30),
        (legs_three_and_four(), 90, 14),
        (l_of_three_squares(), 20, 12),
        (crooked(), 150, 14),
        (regular_pentagon(), 9, 9),
        (irrational_kite(), 30, 10),
        (irrational_l(), 30, 12),
    ] {
        let limit = Real::from(squared);
        let found = within(&table, squared, Arithmetic::Tiered);
        assert!(found.len() >= 4, "{}: {}", table.title(), found.len());
        let crossings = found.iter().map(|d| d.code.len()).max().unwrap_or(0);
        assert!(crossings < most, "{}: {crossings} crossings", table.title());
        let expected = diagonals(&table, most)
            .into_iter()
            .filter(|d| d.displacement.squared_length(table.form()) <= limit)
            .collect();
        assert_eq!(sorted(found), sorted(expected), "{}", table.title());
    }
}

/// The length itself belongs to the list: exact comparisons, whatever the arithmetic of the fans.
#[test]
fn lengths_are_compared_exactly() {
    let table = irrational_l();
    let some = within(&table, 30, Arithmetic::Tiered);
    for d in [&some[some.len() / 2], &some[some.len() - 1]] {
        let squared = d.displacement.squared_length(table.form());
        let tiny = Real::from(rug::Rational::from((1, 1u64 << 60)));
        let mesh = Mesh::new(&table);
        let list = |squared: &Real| {
            list_within(&table, &mesh, squared, Arithmetic::BigOnly, &Control::new())
                .expect("unstopped")
        };
        assert!(list(&squared).contains(d));
        assert!(!list(&(&squared - &tiny)).contains(d));
    }
}

/// More crossings than are tried first: diagonals that run up a thin table.
#[test]
fn many_crossings_are_walked() {
    let table = integer_table("thin", 1, &[(0, 0), (1, 0), (1, 300), (0, 300)]);
    let found = within(&table, 90_400, Arithmetic::Tiered);
    let crossings = found.iter().map(|d| d.code.len()).max().unwrap_or(0);
    assert!(crossings > 1, "{crossings}");
    let flat = integer_table("flat", 1, &[(0, 0), (300, 0), (300, 1), (0, 1)]);
    let up = within(&flat, 90_401 + 400 * 400, Arithmetic::Tiered);
    // To (300, q): q − 1 horizontal sides are crossed.
    let most = up.iter().map(|d| d.code.len()).max().unwrap_or(0);
    assert_eq!(
        most,
        400 - 1,
        "from (0, 0) to (300, 400) and a little beyond"
    );
}

#[test]
fn the_command_counts_in_both_orders() {
    let run = |arguments: &[&str]| {
        let output = Command::cargo_bin("reboundary")
            .expect("the program")
            .args(arguments)
            .output();
        let output = output.expect("it runs");
        let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("UTF-8");
        (
            text(output.stdout),
            text(output.stderr),
            output.status.code(),
        )
    };
    let square = "polygons/square.toml";
    let (out, err, code) = run(&["diagonals", square, "--distance", "20", "--format", "json"]);
    assert_eq!(code, Some(0), "{err}");
    let record: serde_json::Value = serde_json::from_str(&out).expect("JSON");
    let count = record["count"].as_u64().expect("a count");
    let crossings = record["by_crossings"].as_array().expect("counts");
    assert_eq!(
        crossings
            .iter()
            .map(|n| n.as_u64().expect("a count"))
            .sum::<u64>(),
        count
    );
    let lengths = record["by_distance"].as_array().expect("counts");
    assert_eq!(lengths.last().and_then(|n| n.as_u64()), Some(count));
    // The square is no generic table, but it has the published constant: a third of the primitive vectors of a
    // quadrant, π/4·L²·6/π² of them, ends at each other corner.
    for pair in record["pairs"].as_array().expect("right-angled") {
        let (seen, published) = (
            pair["count"].as_f64().unwrap(),
            pair["published"].as_f64().unwrap(),
        );
        assert!(
            (seen / published - 1.0).abs() < 0.1,
            "{seen} beside {published}"
        );
    }
    for (arguments, says) in [
        (&["--distance", "-1"][..], "positive"),
        (&["--distance", "x"], "unknown name"),
        (&["--distance", "3", "--length", "4"], "cannot be used with"),
    ] {
        let (_, err, code) = run(&[&["diagonals", square], arguments].concat());
        assert_eq!(code, Some(2), "{err}");
        assert!(err.contains(says), "{arguments:?}: {err}");
    }
}
