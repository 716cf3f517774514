//! Ensembles: their laws, their statistics beside exact values, and long orbits against an exact follower.

mod support;

use assert_cmd::Command;
use rayon::prelude::*;
use reboundary::language::measure::measure;
use reboundary::number::{Real, Sign};
use reboundary::orbit::law::{Ensemble, Law};
use reboundary::orbit::line::{ExactLine, LineTables, point_on};
use reboundary::orbit::statistics::{PathMeter, Statistics, orbit_shares};
use reboundary::orbit::trace::trace;
use reboundary::orbit::{Start, Step, TraceTables, Tracer};
use reboundary::run::Control;
use reboundary::table::facts::{facts, mean_chord};
use reboundary::table::{LetterId, SideId, Table, Vector};
use reboundary::unfold::Mesh;
use reboundary::unfold::mesh::Exit;
use rug::Rational;
use support::*;

fn number(n: i64, d: i64) -> Real {
    Real::from(Rational::from((n, d)))
}

/// Follows an orbit in the field alone, without floating point.
fn exact_orbit(table: &Table, start: &Start, letters: usize) -> (Vec<SideId>, Option<Step>) {
    let (lines, mesh) = (LineTables::new(table), Mesh::new(table));
    let point = point_on(table, start.side.0 as usize, &start.fraction);
    let first = ExactLine::new(&point, &start.aim);
    let (mut line, mut gate) = (first.clone(), mesh.gate_of_side(start.side));
    let mut word = vec![start.side];
    while word.len() < letters {
        let (side, next) = loop {
            let entry = mesh.enter(gate, false);
            let exit = match line.offset(&lines, entry.apex.0 as usize).sign() {
                Sign::Zero => return (word, Some(Step::Corner(entry.apex))),
                Sign::Positive => entry.right,
                Sign::Negative => entry.left,
            };
            match exit {
                Exit::Pass(next) => gate = next,
                Exit::Bounce(side, next) => break (side, next),
            }
        };
        line.bounce(&lines, side.0 as usize);
        if side == start.side && line.same(&first) {
            let period = word.len();
            return (word, Some(Step::Period(period)));
        }
        gate = next;
        word.push(side);
    }
    (word, None)
}

/// Past 4096 hits an orbit of a table with a finite group is followed on the surface of the copies.
#[test]
fn long_orbits_agree_with_exact_arithmetic() {
    let cut = |a: i64, b: i64| {
        let corners = [(0, 0), (a, 0), (a, b - 9), (a - 9, b), (0, b)];
        integer_table("rectangle with a cut corner", 1, &corners)
    };
    let mut ends = [0; 3];
    for (table, aims) in [
        (
            unit_square(),
            vec![(3001, 2000), (1000, 4099), (4409, 1201)],
        ),
        (right_isosceles(), vec![(1, 5003), (2003, 1999)]),
        (half_equilateral(), vec![(-1, 4001), (17, 2500)]),
        (l_of_three_squares(), vec![(1201, 4003)]),
        (regular_pentagon(), vec![(-7, 3)]),
        // A direction on a mirror axis of the group, with long periods, odd turns and corners.
        (cut(2999, 1801), vec![(1, 1), (-1, 1)]),
        (cut(4001, 2503), vec![(1, 1)]),
    ] {
        let tables = TraceTables::new(&table);
        for (x, y) in aims {
            for fraction in [number(1, 3), number(3, 7), number(1, 2)] {
                let start = Start {
                    side: SideId(0),
                    fraction,
                    aim: Vector::new(x.into(), y.into()),
                };
                let Ok(found) = trace(&tables, start.clone(), 12_000) else {
                    continue;
                };
                let (word, end) = exact_orbit(&table, &start, 12_000);
                let what = format!("{} {x},{y} {}", table.title(), start.fraction);
                assert_eq!(found.end, end, "{what}");
                assert!(found.word == word, "{what}");
                if word.len() > 4096 {
                    ends[match end {
                        None => 0,
                        Some(Step::Corner(_)) => 1,
                        _ => 2,
                    }] += 1;
                }
            }
        }
    }
    assert!(
        ends.iter().all(|n| *n > 0),
        "every end after 4096 hits: {ends:?}"
    );
}

/// What the tracer says of an exact state is the same on the surface.
#[test]
fn states_of_long_orbits_are_exact() {
    let table = right_isosceles();
    let tables = TraceTables::new(&table);
    let start = Start {
        side: SideId(0),
        fraction: number(1, 3),
        aim: Vector::new(number(7919, 1), number(10_007, 1)),
    };
    let mut tracer = Tracer::new(&tables, start.clone()).expect("a start");
    for _ in 0..5000 {
        assert!(matches!(tracer.advance(), Step::Hit(_)));
    }
    let state = tracer.state();
    let form = table.form();
    assert_eq!(
        state.direction.squared_length(form),
        start.aim.squared_length(form)
    );
    let back = Start {
        side: state.side,
        fraction: state.fraction,
        aim: state.direction,
    };
    let back = reboundary::orbit::launch::backward(&table, &back);
    let home = trace(&tables, back, 5001).expect("a start").word;
    assert_eq!(*home.last().expect("letters"), SideId(0));
    assert!(home.iter().rev().eq(tracer.word()));
}

fn letters_of(table: &Table, word: &[SideId]) -> Vec<LetterId> {
    word.iter().map(|s| table.letter_id(*s)).collect()
}

fn statistics(table: &Table, seed: u64, orbits: u64, letters: usize, blocks: usize) -> Statistics {
    let tables = TraceTables::new(table);
    let ensemble = Ensemble::new(&tables, Law::Cosine);
    let meter = PathMeter::new(table);
    let shares: Vec<_> = (0..orbits)
        .into_par_iter()
        .map(|index| {
            let sample = ensemble
                .sample(seed, index, letters)
                .expect("random starts are good");
            assert_eq!(sample.word.len(), letters);
            let length = meter.path_length(&sample.start, &sample.word);
            orbit_shares(&letters_of(table, &sample.word), blocks, length)
        })
        .collect();
    let mut statistics = Statistics::default();
    shares.into_iter().for_each(|s| statistics.add(s));
    statistics
}

/// Largest |z| of the mean chord and all blocks of up to two letters.
fn largest_z(table: &Table, statistics: &Statistics) -> f64 {
    let (engine, mesh) = prepared(table, 2);
    let all = language(table, 2);
    let chord = statistics.chord().expect("many orbits");
    // In the unit of the meter.
    let unit = 10f64.powi(PathMeter::new(table).order());
    let mut largest = chord.z(mean_chord(table, &facts(table)) / unit).abs();
    for n in 1..=2 {
        let measures = measure(table, &engine, &mesh, n, n, &Control::new()).expect("measured");
        for (word, exact) in words(&all, n).into_iter().zip(&measures.kept) {
            let block: Vec<LetterId> = word.into_iter().map(LetterId).collect();
            let exact = exact.to_f64() / measures.whole.to_f64();
            largest = largest.max(
                statistics
                    .block(&block)
                    .expect("many orbits")
                    .z(exact)
                    .abs(),
            );
        }
        let met = statistics.blocks().filter(|b| b.len() == n);
        assert!(met.count() <= all.count(n), "no block outside the language");
    }
    largest
}

#[test]
fn frequencies_and_chords_fit_the_measures_for_20_seeds() {
    for table in [unit_square(), right_isosceles(), crooked(), irrational_l()] {
        for seed in 0..20 {
            let z = largest_z(&table, &statistics(&table, seed, 400, 40, 2));
            assert!(z < 5.0, "{} seed {seed}: {z}", table.title());
        }
    }
}

/// The z-scores notice a law that is not the invariant measure.
#[test]
fn frequencies_of_another_law_do_not_fit() {
    let table = unit_square();
    let tables = TraceTables::new(&table);
    let aim = Vector::new(1.into(), 9.into());
    let ensemble = Ensemble::new(&tables, Law::Direction(aim));
    let meter = PathMeter::new(&table);
    let mut statistics = Statistics::default();
    for index in 0..400 {
        let sample = ensemble
            .sample(1, index, 40)
            .expect("random starts are good");
        let length = meter.path_length(&sample.start, &sample.word);
        statistics.add(orbit_shares(&letters_of(&table, &sample.word), 2, length));
    }
    assert!(largest_z(&table, &statistics) > 20.0);
}

fn every_word_is_in_the_language(orbits: u64) {
    for (table, letters) in [
        (crooked(), 14),
        (regular_pentagon(), 12),
        (l_of_three_squares(), 12),
    ] {
        let all = language(&table, letters);
        let tables = TraceTables::new(&table);
        let ensemble = Ensemble::new(&tables, Law::Cosine);
        let misses = (0..orbits)
            .into_par_iter()
            .filter(|index| {
                let word = ensemble.sample(3, *index, letters).expect("a sample").word;
                let word: Vec<u8> = word.iter().map(|s| s.0).collect();
                all.find(&word).is_none()
            })
            .count();
        assert_eq!(misses, 0, "{}", table.title());
    }
}

#[test]
fn every_emitted_word_is_in_the_language() {
    every_word_is_in_the_language(3000);
}

#[test]
#[ignore = "a million words: seconds in a release build"]
fn a_million_emitted_words_are_in_the_language() {
    every_word_is_in_the_language(1_000_000);
}

/// Under one direction the starts are uniform across the table: in the square the width of a side is a component of
/// the direction.
#[test]
fn one_direction_takes_sides_by_their_width() {
    let tables = TraceTables::new(&unit_square());
    let aim = Vector::new(1.into(), 3.into());
    let ensemble = Ensemble::new(&tables, Law::Direction(aim.clone()));
    let mut counts = [0u32; 4];
    for index in 0..4000 {
        let sample = ensemble.sample(11, index, 3).expect("a sample");
        assert_eq!(sample.start.aim, aim);
        counts[sample.start.side.0 as usize] += 1;
    }
    // Bottom 3, left 1; six standard deviations are about 165.
    assert_eq!((counts[1], counts[2]), (0, 0));
    assert!(counts[0].abs_diff(3000) < 165, "{counts:?}");
}

#[test]
fn a_grid_and_a_point_are_what_they_say() {
    let table = l_of_three_squares();
    let tables = TraceTables::new(&table);
    let grid = Ensemble::new(
        &tables,
        Law::Grid {
            places: 3,
            directions: 4,
        },
    );
    assert_eq!(grid.count(), Some(72));
    let starts: Vec<Start> = (0..72)
        .map(|i| grid.sample(0, i, 1).expect("a sample").start)
        .collect();
    for (i, start) in starts.iter().enumerate() {
        assert_eq!(start.side, SideId((i / 12) as u8));
        assert_eq!(start.fraction, number(2 * (i as i64 / 4 % 3) + 1, 6));
        let side = table.side_vector(i / 12);
        let cosine = side.dot(&start.aim, table.form()).to_f64()
            / (side.squared_length(table.form()).to_f64()
                * start.aim.squared_length(table.form()).to_f64())
            .sqrt();
        assert!(
            (cosine - (-0.75 + 0.5 * (i % 4) as f64)).abs() < 1e-8,
            "{cosine}"
        );
    }
    let point = Law::Point {
        side: SideId(2),
        fraction: number(1, 7),
    };
    let point = Ensemble::new(&tables, point);
    for index in 0..50 {
        let start = point.sample(5, index, 4).expect("a sample").start;
        assert_eq!((start.side, start.fraction), (SideId(2), number(1, 7)));
    }
    // A bad start of a list is told.
    let bad = Start {
        aim: Vector::new(0.into(), 0.into()),
        ..starts[0].clone()
    };
    let list = Ensemble::new(&tables, Law::List(vec![starts[0].clone(), bad]));
    assert_eq!(list.count(), Some(2));
    assert!(list.sample(0, 0, 5).is_ok());
    assert!(list.sample(0, 1, 5).is_err());
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
fn orbits_are_reproducible_and_traced_again_from_their_rows() {
    let folder = tempfile::tempdir().expect("a folder");
    let file = folder.path().join("starts.csv");
    let file = file.to_str().expect("UTF-8");
    let base = ["orbits", "polygons/dart.toml", "--hits", "30"];
    let run = |more: &[&str]| reboundary(&[&base[..], more].concat());
    let csv = ["--count", "40", "--seed", "9", "--format", "csv"];
    let (one, _, _) = run(&[&csv[..], &["--threads", "1"]].concat());
    let (three, _, _) = run(&[&csv[..], &["--threads", "3"]].concat());
    assert_eq!(one, three);
    std::fs::write(file, &one).expect("written");
    let (again, told, code) = run(&["--starts", file, "--format", "csv"]);
    assert_eq!(code, Some(0), "{told}");
    assert_eq!(again, one);
    let statistics = folder.path().join("statistics.csv");
    let path = statistics.to_str().expect("UTF-8");
    let (_, told, code) = run(&["--count", "300", "--statistics", path, "--blocks", "2"]);
    assert_eq!(code, Some(0), "{told}");
    let rows = std::fs::read_to_string(&statistics).expect("written");
    // A header, the mean chord, p(1) + p(2) blocks.
    let p = p_by_beams(&crooked_dart(), 2);
    assert_eq!(rows.lines().count() as u64, 2 + p[1] + p[2]);
}

/// The table of `polygons/dart.toml`.
fn crooked_dart() -> Table {
    let path = std::path::Path::new("polygons/dart.toml");
    reboundary::table::file::load(path).expect("a table").table
}

#[test]
fn bad_laws_get_pointed_messages() {
    let folder = tempfile::tempdir().expect("a folder");
    let write = |name: &str, text: &str| {
        let path = folder.path().join(name);
        std::fs::write(&path, text).expect("written");
        path.to_str().expect("UTF-8").to_string()
    };
    let short = write("short.csv", "side,fraction,aim_x\na,1/2,1\n");
    let out = write(
        "out.csv",
        "side,fraction,aim_x,aim_y\na,1/2,1,1\na,1/2,1,-1\n",
    );
    let letter = write(
        "letter.csv",
        "side,fraction,aim_x,aim_y\na,1/2,1,1\nq,1/2,1,1\n",
    );
    let nowhere = folder.path().join("nowhere.csv");
    for (arguments, says) in [
        (&["--grid", "2"][..], "PxQ"),
        (&["--grid", "2x3", "--count", "25"], "24 starts"),
        (&["--aim", "0,0"], "zero vector"),
        (&["--start", "a@2"], "strictly between"),
        (&["--start", "a@1/2", "--aim", "1,1"], "cannot be used with"),
        (&["--starts", &short], "no column `aim_y`"),
        (&["--starts", &out], "start 1"),
        (&["--starts", &letter], "row 2"),
        (
            &["--starts", nowhere.to_str().expect("UTF-8")],
            "nowhere.csv",
        ),
        (
            &["--statistics", "x.csv", "--count", "1"],
            "at least two orbits",
        ),
        (&["--hits", "0"], "at least 1"),
    ] {
        let (_, err, code) = reboundary(&[&["orbits", "polygons/square.toml"], arguments].concat());
        assert_eq!(code, Some(2), "{arguments:?}: {err}");
        assert!(err.contains(says), "{arguments:?}: {err}");
    }
}

/// A start that runs into a corner is drawn again: the orbit keeps its letters.
#[test]
fn random_starts_into_corners_are_drawn_again() {
    let table = unit_square();
    let tables = TraceTables::new(&table);
    let one = Real::from(1);
    let direction = |x: &Real| Law::Direction(Vector::new(x.clone(), one.clone()));
    let mut met = 0;
    for index in 0..40 {
        // Where the first draw starts does not depend on the aim, but for the side.
        let first = Ensemble::new(&tables, direction(&(&one / &Real::from(2))));
        let drawn = first.sample(4, index, 1).expect("a sample").start;
        let to_corner = &one - &drawn.fraction;
        let law = Ensemble::new(&tables, direction(&to_corner));
        let sample = law.sample(4, index, 12).expect("a sample");
        assert_eq!(sample.word.len(), 12);
        let straight = Start {
            side: SideId(0),
            fraction: drawn.fraction.clone(),
            aim: Vector::new(to_corner.clone(), one.clone()),
        };
        let orbit = reboundary::orbit::trace::trace(&tables, straight, 12).expect("a good start");
        assert_eq!(
            orbit.end,
            Some(reboundary::orbit::Step::Corner(
                reboundary::table::CornerId(2)
            ))
        );
        met += usize::from(
            law.sample(4, index, 1).expect("a sample").start.fraction == drawn.fraction
                && sample.start.fraction != drawn.fraction,
        );
    }
    assert!(met >= 5, "only {met} starts were drawn again");
}

/// Fractions are odd multiples of 2⁻³², and aims are of unit length in the true plane, however wide the second unit.
#[test]
fn starts_are_dyadic_and_aims_of_unit_length() {
    for places in [0u32, 3, 12, 40] {
        let form = Real::from(rug::Integer::from(rug::Integer::u_pow_u(10, places)));
        let corners =
            [(0, 0), (5, 0), (5, 1), (0, 1)].map(|(x, y)| Vector::new(x.into(), y.into()));
        let table = Table::new(
            "wide",
            corners.to_vec(),
            form.clone(),
            vec!['a', 'b', 'c', 'd'],
        );
        let table = table.expect("a table");
        let tables = TraceTables::new(&table);
        let ensemble = Ensemble::new(&tables, Law::Cosine);
        for index in 0..50 {
            let start = ensemble.sample(8, index, 1).expect("a sample").start;
            let scaled = &start.fraction * &Real::from(rug::Integer::from(1) << 32);
            let numerator = scaled.to_rational().expect("a rational");
            assert!(numerator.is_integer() && numerator.numer().is_odd());
            let squared = start.aim.squared_length(&form).to_f64();
            assert!((squared - 1.0).abs() < 1e-7, "form 1e{places}: {squared}");
        }
    }
}

/// Tables of any size, and stretched one way: the z-scores are those of floating point that holds them.
#[test]
fn statistics_do_not_depend_on_the_size_of_the_table() {
    let power = |places: i32| reboundary::orbit::statistics::power_of_ten(places);
    let square = |x: &Real, y: &Real| {
        let zero = Real::from(0);
        let corners = [(&zero, &zero), (x, &zero), (x, y), (&zero, y)];
        let corners = corners
            .map(|(x, y)| Vector::new(x.clone(), y.clone()))
            .to_vec();
        Table::new("stretched", corners, 1.into(), vec!['a', 'b', 'c', 'd']).expect("a table")
    };
    let one = Real::from(1);
    let expected = statistics(&square(&one, &one), 3, 60, 30, 1)
        .chord()
        .expect("many orbits");
    for places in [-400, -200, -160, 160, 200, 400] {
        let size = power(places);
        let table = square(&size, &size);
        assert_eq!(PathMeter::new(&table).order(), places);
        let found = statistics(&table, 3, 60, 30, 1)
            .chord()
            .expect("many orbits");
        assert!((found.mean / expected.mean - 1.0).abs() < 1e-12, "{places}");
        if places.abs() > 200 {
            continue;
        }
        // Stretched one way: the mean chord π·area/perimeter is π/2 of the short side, up to 1 ∓ 10⁻¹⁶⁰. Few orbits run
        // lengthwise, so the bound is loose.
        for table in [square(&size, &one), square(&one, &size)] {
            assert_eq!(PathMeter::new(&table).order(), places.min(0));
            let found = statistics(&table, 3, 400, 20, 1)
                .chord()
                .expect("many orbits");
            let share = found.mean / std::f64::consts::FRAC_PI_2;
            assert!((0.5..2.0).contains(&share), "{places}: {share}");
            assert!(found.standard_error > 0.0);
        }
    }
    assert!(!PathMeter::new(&square(&power(200), &power(-200))).fits());
}
