//! Launches, limits and reversal of traced orbits, against the folding tracer of the oracle and against exact
//! arithmetic on lattices.

mod oracle;
mod support;

use assert_cmd::Command;
use oracle::fold::trace as fold;
use proptest::prelude::*;
use reboundary::number::Real;
use reboundary::orbit::launch::{FirstHit, PointFault, backward, check_inside, first_hit};
use reboundary::orbit::path::{Limits, Path, PathEnd, follow};
use reboundary::orbit::trace::trace;
use reboundary::orbit::{Start, Step, TraceTables, Tracer};
use reboundary::table::{CornerId, SideId, Table, Vector};
use rug::{Integer, Rational};
use support::*;

fn number(n: i64, d: i64) -> Real {
    Real::from(Rational::from((n, d)))
}

fn vector(x: (i64, i64), y: (i64, i64)) -> Vector {
    Vector::new(number(x.0, x.1), number(y.0, y.1))
}

fn letters(letters: usize) -> Limits {
    Limits {
        letters,
        squared_distance: None,
        gone: Real::from(0),
    }
}

fn path(tables: &TraceTables, start: &Start, limits: &Limits) -> Path {
    follow(tables, start.clone(), limits, true).expect("a good start")
}

/// Going on from the last hit with time reversed leads back through the same sides and points to the exact start.
#[test]
fn tracing_back_returns_to_the_exact_start() {
    for table in named_tables() {
        let tables = TraceTables::new(&table);
        for (n, (x, y)) in [(17, 5), (3, 11), (-4, 9), (8, 1)].into_iter().enumerate() {
            let side = SideId((n % table.sides()) as u8);
            let along = table.side_vector(side.0 as usize);
            // A bit to the left of the side, so that the aim leads into the table.
            let across = Vector::new(-&along.y, along.x.clone());
            let start = Start {
                side,
                fraction: number(31 + n as i64, 97),
                aim: along
                    .times(&number(x, 7))
                    .plus(&across.times(&number(y, 5))),
            };
            let there = path(&tables, &start, &letters(200));
            let last = there.states.last().expect("a start").clone();
            let end = Start {
                side: last.side,
                fraction: last.fraction.clone(),
                aim: last.direction.clone(),
            };
            let back = path(&tables, &backward(&table, &end), &letters(there.word.len()));
            let mut reversed = there.word.clone();
            reversed.reverse();
            assert_eq!(back.word, reversed, "{}", table.title());
            let home = back.states.last().expect("a start");
            assert_eq!(home.fraction, start.fraction, "{}", table.title());
            // It arrives along the first segment; turned round once more it is the start itself.
            let arrived = Start {
                side: home.side,
                fraction: home.fraction.clone(),
                aim: home.direction.clone(),
            };
            assert_eq!(
                backward(&table, &arrived).aim,
                start.aim,
                "{}",
                table.title()
            );
        }
    }
}

/// The path through a point inside: behind it lies a side, and the orbit from there meets the same sides.
#[test]
fn an_orbit_from_inside_is_that_from_the_side_behind() {
    for table in named_tables() {
        let tables = TraceTables::new(&table);
        let mut tried = 0;
        for (a, b) in (0..table.sides()).flat_map(|a| (0..3).map(move |b| (a, b))) {
            let corner = |i: usize| table.corner(i % table.sides());
            let centre = corner(a).plus(corner(a + 1)).plus(corner(a + 2));
            let point = centre.times(&number(1, 3));
            if check_inside(&table, &point).is_err() {
                continue;
            }
            let aim = vector((3 + b, 1), (7 - 5 * b, 2));
            let forward = first_hit(&table, &point, &aim).expect("inside");
            let behind = first_hit(&table, &point, &aim.times(&Real::from(-1))).expect("inside");
            let (FirstHit::Side(ahead, way), FirstHit::Side(start, way_back)) = (forward, behind)
            else {
                continue;
            };
            tried += 1;
            let start = backward(&table, &start);
            let back_to_aim = start.aim.cross(&aim);
            assert!(
                back_to_aim.is_zero(),
                "the side behind is left along the aim"
            );
            let whole = path(&tables, &start, &letters(30));
            let rest = path(&tables, &ahead, &letters(29));
            assert_eq!(whole.word[1..], rest.word, "{}", table.title());
            assert_eq!(whole.states[1..], rest.states, "{}", table.title());
            let chord = whole.states[1].point.minus(&whole.states[0].point);
            assert_eq!(chord, aim.times(&(way + way_back)), "{}", table.title());
        }
        assert!(tried > 0, "{}", table.title());
    }
}

#[test]
fn points_are_told_apart_exactly() {
    let table = l_of_three_squares();
    let tiny = Rational::from((Integer::from(1), Integer::from(10).pow_u(40)));
    let at = |x: Rational, y: Rational| check_inside(&table, &Vector::new(x.into(), y.into()));
    let one = || Rational::from(1);
    assert_eq!(at(one() - &tiny, one()), Ok(()));
    assert_eq!(at(one(), one() - &tiny), Ok(()));
    assert_eq!(at(one(), one()), Err(PointFault::OnCorner(CornerId(3))));
    assert_eq!(at(one() + &tiny, one()), Err(PointFault::OnSide(SideId(2))));
    assert_eq!(at(one() + &tiny, one() + &tiny), Err(PointFault::Outside));
    assert_eq!(at(one(), one() + &tiny), Err(PointFault::OnSide(SideId(3))));
    assert_eq!(at(-Rational::from(&tiny), one()), Err(PointFault::Outside));
    assert_eq!(
        at(Rational::from(3), Rational::from(0)),
        Err(PointFault::Outside)
    );
    // Level with corners on either side of the point.
    assert_eq!(at(Rational::from((1, 2)), one()), Ok(()));
    let zero = Vector::new(0.into(), 0.into());
    let inside = vector((1, 2), (1, 2));
    assert_eq!(first_hit(&table, &inside, &zero), Err(PointFault::ZeroAim));
    let corner = first_hit(&table, &inside, &vector((1, 1), (1, 1)));
    assert_eq!(corner, Ok(FirstHit::Corner(CornerId(3), number(1, 2))));
}

trait PowU {
    fn pow_u(self, exponent: u32) -> Integer;
}

impl PowU for Integer {
    fn pow_u(self, exponent: u32) -> Integer {
        let mut result = Integer::from(1);
        for _ in 0..exponent {
            result *= &self;
        }
        result
    }
}

/// A path of given length in the square: it crosses the lattice lines that its unfolding crosses.
#[test]
fn distances_are_compared_exactly() {
    let tables = TraceTables::new(&unit_square());
    let start = Start {
        side: SideId(0),
        fraction: number(1, 2),
        aim: vector((0, 1), (3, 1)),
    };
    // Up and down: hits at distance 0, 1, 2, …; in lengths of the aim a third of that.
    for (squared, hits) in [(1, 2), (16, 5), (15, 4), (17, 5)] {
        let limits = Limits {
            letters: usize::MAX,
            squared_distance: Some(number(squared, 9)),
            gone: Real::from(0),
        };
        let found = path(&tables, &start, &limits);
        assert_eq!(
            (found.word.len(), found.end),
            (hits, PathEnd::Distance),
            "{squared}"
        );
        assert_eq!(found.states.len(), hits);
        assert_eq!(found.period, (hits >= 3).then_some(2));
    }
    let limits = Limits {
        letters: usize::MAX,
        squared_distance: Some(number(16, 9)),
        gone: number(1, 1000),
    };
    assert_eq!(
        path(&tables, &start, &limits).word.len(),
        4,
        "what is gone counts"
    );
}

/// The word of a line in the square by sorting its crossings with the lattice, all exact. `None` at a lattice point.
fn square_word(x: &Rational, aim: (&Rational, &Rational), hits: usize) -> Option<Vec<u8>> {
    let mut crossings: Vec<(Rational, u8)> = Vec::new();
    for n in 1..=hits as i64 {
        // Horizontal lines y = n: sides c and a in turn.
        crossings.push((Rational::from(n) / aim.1, if n % 2 == 1 { 2 } else { 0 }));
        // Vertical lines x = n: sides b and d in turn.
        crossings.push((
            (Rational::from(n) - x) / aim.0,
            if n % 2 == 1 { 1 } else { 3 },
        ));
    }
    crossings.sort();
    crossings.truncate(hits);
    let distinct = crossings.windows(2).all(|w| w[0].0 < w[1].0);
    distinct.then(|| {
        [0].into_iter()
            .chain(crossings.into_iter().map(|c| c.1))
            .collect()
    })
}

/// Lines that pass a corner at 10⁻³⁰, 10⁻⁶⁰ and 10⁻¹⁰⁰ on either side, and those that meet it.
#[test]
fn orbits_that_graze_corners() {
    let tables = TraceTables::new(&unit_square());
    let x = Rational::from((1, 3));
    for (p, q) in [(1, 1), (2, 3), (5, 4), (7, 19), (60, 41)] {
        // The first lattice point on the line from (1/3, 0) to (p, q) is (p, q) when 3p − 1 and 3q have no
        // common factor that reaches another one; the exact word tells.
        for exponent in [0u32, 30, 60, 100] {
            for sign in [-1i64, 1] {
                let shift = match exponent {
                    0 => Rational::new(),
                    e => Rational::from((Integer::from(sign), Integer::from(10).pow_u(e))),
                };
                let aim = (Rational::from(p) - &x + shift, Rational::from(q));
                let start = Start {
                    side: SideId(0),
                    fraction: x.clone().into(),
                    aim: Vector::new(aim.0.clone().into(), aim.1.clone().into()),
                };
                let hits = (p + q + 3) as usize;
                let orbit = trace(&tables, start, hits + 1).expect("a good start");
                let found: Vec<u8> = orbit.word.iter().map(|s| s.0).collect();
                match square_word(&x, (&aim.0, &aim.1), hits) {
                    Some(word) => {
                        assert!(exponent > 0, "the line to ({p}, {q}) meets a corner");
                        assert_eq!(found, word, "({p}, {q}) {sign}·10^-{exponent}");
                        assert_eq!(orbit.end, None);
                    }
                    None => {
                        assert_eq!(exponent, 0, "({p}, {q}) {sign}·10^-{exponent}");
                        assert!(matches!(orbit.end, Some(Step::Corner(_))), "({p}, {q})");
                    }
                }
            }
        }
    }
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(60))]

    /// Random tables and starts, against the folding tracer, forward and from inside.
    #[test]
    fn random_starts_agree_with_folding(
        c in prop::array::uniform10(-9i64..10),
        corners in 3usize..6,
        start in (1i64..40, -20i64..20, 1i64..20),
    ) {
        let points: Vec<(i64, i64)> = c.chunks(2).take(corners).map(|p| (p[0], p[1])).collect();
        let vectors = points.iter().map(|p| Vector::new(p.0.into(), p.1.into())).collect();
        let default = reboundary::table::default_letters(corners);
        let Ok(table) = Table::new("random", vectors, 1.into(), default) else { return Ok(()); };
        let tables = TraceTables::new(&table);
        let rational = |r: &Real| r.to_rational().expect("a rational table");
        let flat: Vec<oracle::Point> =
            table.corners().iter().map(|v| (rational(&v.x), rational(&v.y))).collect();
        let along = table.side_vector(0);
        let across = Vector::new(-&along.y, along.x.clone());
        let aim = along.times(&number(start.1, 7)).plus(&across.times(&number(start.2, 5)));
        let fraction = number(start.0, 41);
        let launched = Start { side: SideId(0), fraction: fraction.clone(), aim: aim.clone() };
        let found = trace(&tables, launched.clone(), 40).expect("a good start");
        let velocity = (rational(&aim.x), rational(&aim.y));
        let expected = fold(&flat, 0, &rational(&fraction), (&velocity.0, &velocity.1), 40);
        let word: Vec<usize> = found.word.iter().map(|s| s.0 as usize).collect();
        if !matches!(found.end, Some(Step::Period(_))) {
            prop_assert_eq!(&word, &expected.sides);
        } else {
            prop_assert_eq!(&word[..], &expected.sides[..word.len()]);
        }
        // From the middle of the first chord.
        let mut tracer = Tracer::new(&tables, launched).expect("a good start");
        let first = tracer.state().point;
        if let Step::Hit(_) = tracer.advance() {
            let second = tracer.state();
            let middle = first.plus(&second.point).times(&number(1, 2));
            let hit = first_hit(&table, &middle, &aim);
            let Ok(FirstHit::Side(next, _)) = hit else {
                return Err(TestCaseError::fail(format!("{hit:?}")));
            };
            prop_assert_eq!(next.side, second.side);
            prop_assert_eq!(next.fraction, second.fraction);
            prop_assert_eq!(next.aim, second.direction);
        }
    }
}

fn reboundary(arguments: &[&str]) -> (String, String, Option<i32>) {
    let output = Command::cargo_bin("reboundary")
        .expect("the program")
        .args(arguments)
        .output()
        .expect("it runs");
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("UTF-8");
    (
        text(output.stdout),
        text(output.stderr),
        output.status.code(),
    )
}

#[test]
fn bad_launches_get_pointed_messages() {
    let square = "polygons/square.toml";
    for (arguments, says) in [
        (
            &["--from", "3/2,1/2", "--aim", "1,1"][..],
            "outside the table",
        ),
        (&["--from", "1,1/2", "--aim", "1,1"], "--start b@"),
        (&["--from", "1,1", "--aim", "1,1"], "corner 2"),
        (&["--from", "1/2", "--aim", "1,1"], "two coordinates"),
        (&["--from", "1/2,1/3", "--aim", "0,0"], "zero vector"),
        (&["--start", "a@1/2", "--aim", "1,0"], "along the side"),
        (&["--start", "a@1/2", "--aim", "1,-1"], "out of the table"),
        (
            &["--start", "a@1/2", "--aim", "1,-1", "--backward"],
            "out of the table",
        ),
        (&["--start", "z@1/2", "--aim", "1,1"], "not a side"),
        (&["--start", "a@1", "--aim", "1,1"], "strictly between"),
        (
            &["--start", "a@1/2", "--heading", "sqrt(2)"],
            "rational multiple",
        ),
        (
            &["--start", "a@1/2", "--aim", "1,1", "--distance", "0"],
            "positive",
        ),
        (&["--start", "a@1/2"], "--aim"),
        (&["--aim", "1,1"], "--start"),
        (
            &["--start", "a@1/2", "--from", "1/2,1/2", "--aim", "1,1"],
            "cannot be used with",
        ),
    ] {
        let (out, err, code) = reboundary(&[&["trace", square], arguments].concat());
        assert_eq!(code, Some(2), "{arguments:?}: {err}");
        assert!(err.contains(says), "{arguments:?}: {err}");
        assert_eq!(out, "", "{arguments:?}");
    }
}

#[test]
fn trace_writes_lines_pictures_and_random_starts() {
    let folder = tempfile::tempdir().expect("a folder");
    let (picture, unfolding) = (
        folder.path().join("orbit.svg"),
        folder.path().join("line.svg"),
    );
    let table = "polygons/regular-pentagon.toml";
    let arguments = [
        "trace", table, "--seed", "5", "--hits", "40", "--format", "jsonl",
    ];
    let paths = [
        "--picture",
        picture.to_str().expect("UTF-8"),
        "--unfolding",
        unfolding.to_str().expect("UTF-8"),
    ];
    let (lines, notes, code) = reboundary(&[&arguments[..], &paths].concat());
    assert_eq!(code, Some(0), "{notes}");
    let sides: String = lines
        .lines()
        .map(|line| {
            let hit: serde_json::Value = serde_json::from_str(line).expect("JSON");
            hit["side"].as_str().expect("a side").to_string()
        })
        .collect();
    assert_eq!(sides.len(), 40);
    for file in [picture, unfolding] {
        assert!(
            std::fs::read_to_string(file)
                .expect("written")
                .contains("<svg")
        );
    }
    let (word, _, _) = reboundary(&[
        "orbits", table, "--seed", "5", "--hits", "40", "--count", "1",
    ]);
    assert_eq!(word.trim(), sides);
    // The start that was told gives the same orbit.
    let told = notes.split("--start ").nth(1).expect("the start is told");
    let (start, aim) = told.trim().split_once(" --aim ").expect("and the aim");
    let (again, _, _) = reboundary(&[
        "trace", table, "--start", start, "--aim", aim, "--hits", "40",
    ]);
    assert_eq!(again.trim(), sides);
}

/// A ray along the line of a side that it has not reached runs into the side's corner.
#[test]
fn a_ray_along_the_line_of_a_side_meets_its_corner() {
    let table = support::l_of_three_squares();
    let half = Real::from(Rational::from((1, 2)));
    let (point, aim) = (
        Vector::new(half.clone(), 1.into()),
        Vector::new(1.into(), 0.into()),
    );
    // The corner at (1, 1), half a length of the aim away.
    let expected = FirstHit::Corner(CornerId(3), half);
    assert_eq!(first_hit(&table, &point, &aim), Ok(expected));
}
