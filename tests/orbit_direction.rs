//! Single directions: published complexities, and the other routes to the same words, segments and strips.

mod support;

use reboundary::number::{Real, Sign};
use reboundary::orbit::direction::exchange::{
    ExchangeFault, Interval, Transversal, interval_exchange,
};
use reboundary::orbit::direction::language::direction_language;
use reboundary::orbit::direction::prefixes::prefixes;
use reboundary::orbit::direction::saddles::saddles;
use reboundary::orbit::direction::strips::strips;
use reboundary::orbit::direction::{Flow, FlowFault};
use reboundary::orbit::periodic::{Wanted, periodic_words};
use reboundary::orbit::{Step, TraceTables, Tracer};
use reboundary::run::Control;
use reboundary::table::expression::Evaluator;
use reboundary::table::facts::area_over_root_form;
use reboundary::table::{LetterId, SideId, Table, Vector};
use std::collections::BTreeSet;
use support::*;

/// A table written in the field of an aim, with the aim.
fn aimed(table: &Table, x: &str, y: &str) -> (Table, Vector) {
    let mut evaluator = Evaluator::new(table.field().clone());
    let x = evaluator.evaluate(x).expect("an expression");
    let y = evaluator.evaluate(y).expect("an expression");
    let field = evaluator.field().clone();
    let lift = |n: &Real| evaluator.lift(n).lifted_to(&field);
    let aim = Vector::new(lift(&x), lift(&y));
    (table.in_field(&field, lift), aim)
}

fn flow(table: &Table, x: &str, y: &str) -> Flow {
    let (table, aim) = aimed(table, x, y);
    Flow::new(&table, &aim).expect("a direction of a table with a finite group")
}

fn finite_tables() -> Vec<Table> {
    vec![
        unit_square(),
        equilateral(),
        right_isosceles(),
        half_equilateral(),
        l_of_three_squares(),
        regular_pentagon(),
        irrational_l(),
    ]
}

/// Hubert, Bull. Soc. Math. France 123 (1995) 257–270: p(n) = r(k − 2)n + 2r from some n on, in a direction
/// without periodic coding, for a convex k-gon whose angles have common denominator r.
#[test]
fn complexity_of_a_direction_hubert_1995() {
    let cases = [
        (unit_square(), 2, 4),
        (equilateral(), 3, 3),
        (right_isosceles(), 4, 3),
        (half_equilateral(), 6, 3),
        (regular_pentagon(), 5, 5),
    ];
    for (table, r, k) in cases {
        for (x, y) in [
            ("sqrt(2)+1", "sqrt(7)"),
            ("sqrt(2)", "3"),
            ("-root(x^3-2, 1.26)", "1"),
        ] {
            let flow = flow(&table, x, y);
            let language = direction_language(&flow, 120, &Control::new()).expect("a language");
            for n in 100..=120 {
                let expected = r * (k - 2) * n + 2 * r;
                assert_eq!(
                    language.count(n),
                    expected,
                    "{} {x},{y} n = {n}",
                    table.title()
                );
            }
        }
    }
}

/// The unfolding in one starting direction after the other finds the same words as the flow on all copies.
#[test]
fn words_are_those_that_start_in_the_directions_of_the_orbit() {
    for table in finite_tables() {
        for (x, y) in [("sqrt(3)+1", "2"), ("3", "1"), ("1", "0")] {
            let flow = flow(&table, x, y);
            let longest = 9;
            let language = direction_language(&flow, longest, &Control::new()).expect("a language");
            let mut expected: Vec<BTreeSet<Vec<u8>>> = vec![BTreeSet::new(); longest + 1];
            for copy in 0..flow.copies() {
                let aim = flow.table_direction(copy);
                for (n, words) in expected.iter_mut().enumerate().skip(1) {
                    let found =
                        prefixes(flow.table(), &aim, n, &Control::new()).expect("unstopped");
                    words.extend(found.words.iter().map(|w| w.iter().map(|l| l.0).collect()));
                }
            }
            for (n, expected) in expected.iter().enumerate().skip(1) {
                let found: BTreeSet<Vec<u8>> = words(&language, n).into_iter().collect();
                assert_eq!(found, *expected, "{} {x},{y} n = {n}", table.title());
                assert_eq!(found.len(), language.count(n), "no word twice");
            }
        }
    }
}

#[test]
fn words_of_a_direction_are_words_of_the_table() {
    for table in finite_tables() {
        let all = language(&table, 8);
        let some = direction_language(&flow(&table, "sqrt(2)", "1"), 8, &Control::new());
        for word in words(&some.expect("a language"), 8) {
            assert!(all.find(&word).is_some(), "{} {word:?}", table.title());
        }
    }
}

/// Counts of `prefixes` are those of its words, and each word is the beginning of one that is a letter longer.
#[test]
fn prefixes_form_a_tree_on_tables_with_infinite_groups() {
    for table in [legs_three_and_four(), crooked(), irrational_kite()] {
        let aim = Vector::new(2.into(), 3.into());
        let all = language(&table, 7);
        let longest = prefixes(&table, &aim, 7, &Control::new()).expect("unstopped");
        for n in 0..=7 {
            let found = prefixes(&table, &aim, n, &Control::new()).expect("unstopped");
            let beginnings: BTreeSet<Vec<LetterId>> =
                longest.words.iter().map(|w| w[..n].to_vec()).collect();
            let words: BTreeSet<Vec<LetterId>> = found.words.iter().cloned().collect();
            assert_eq!(words, beginnings, "{} n = {n}", table.title());
            assert_eq!(longest.counts[n], words.len() as u64);
            for word in &words {
                let letters: Vec<u8> = word.iter().map(|s| s.0).collect();
                assert!(all.find(&letters).is_some(), "{} {word:?}", table.title());
            }
        }
    }
}

fn sum<'a>(values: impl Iterator<Item = &'a Real>) -> Real {
    values.fold(Real::from(0), |sum, v| sum + v)
}

/// Domains and images both tile the transversal, and the permutation is that of the images.
fn check_exchange(intervals: &[Interval], what: &str) {
    let total = sum(intervals.iter().map(|i| &i.length));
    let mut end = Real::from(0);
    for interval in intervals {
        assert_eq!(interval.left, end, "{what}: domains tile");
        end = &end + &interval.length;
    }
    assert_eq!(end, total);
    let mut by_image: Vec<&Interval> = intervals.iter().collect();
    by_image.sort_by_key(|i| i.image_place);
    let mut end = Real::from(0);
    for (place, interval) in by_image.iter().enumerate() {
        assert_eq!(interval.image_place, place);
        assert_eq!(interval.image_left, end, "{what}: images tile");
        end = &end + &interval.length;
    }
}

#[test]
fn exchanges_tile_their_transversal() {
    for table in finite_tables() {
        for (x, y) in [("sqrt(2)", "1"), ("2", "1"), ("0", "1")] {
            let flow = flow(&table, x, y);
            let sides = (0..table.sides()).map(|s| Transversal::Side(SideId(s as u8)));
            for transversal in sides.chain([Transversal::AllSides]) {
                match interval_exchange(&flow, transversal, &Control::new()) {
                    Ok(found) => {
                        let what = format!("{} {x},{y} {transversal:?}", table.title());
                        check_exchange(&found, &what);
                        let width: Real = match transversal {
                            Transversal::Side(side) => {
                                let cells = flow.cells().iter().filter(|c| c.side == side);
                                cells.fold(Real::from(0), |s, c| s + &c.high.exact - &c.low.exact)
                            }
                            _ => continue,
                        };
                        assert_eq!(sum(found.iter().map(|i| &i.length)), width, "{what}");
                    }
                    Err(fault) => {
                        assert_eq!(fault, ExchangeFault::NeverEntered);
                        assert_eq!(x, "0", "only along a side");
                    }
                }
            }
        }
    }
}

/// Keane, Math. Z. 141 (1975): under his condition an exchange of d intervals has (d − 1)n + 1 words of length n.
/// The words are counted as the gaps between the points whose first n places meet a division point.
#[test]
fn exchanges_have_keanes_complexity() {
    for (table, x, y) in [
        (unit_square(), "sqrt(2)", "1"),
        (equilateral(), "sqrt(2)", "1"),
        (right_isosceles(), "sqrt(3)", "2"),
        (half_equilateral(), "sqrt(2)", "1"),
        (l_of_three_squares(), "sqrt(2)", "1"),
        (regular_pentagon(), "sqrt(3)", "1"),
    ] {
        let flow = flow(&table, x, y);
        let cell = &flow.cells()[0];
        let transversal = Transversal::Cell {
            side: cell.side,
            copy: cell.copy,
        };
        let intervals = interval_exchange(&flow, transversal, &Control::new()).expect("entered");
        let d = intervals.len();
        assert!(d >= 3, "{}", table.title());
        let back = |point: &Real| -> Real {
            let from = intervals
                .iter()
                .rfind(|i| i.image_left <= *point && *point < &i.image_left + &i.length);
            let from = from.expect("images tile");
            point - &from.image_left + &from.left
        };
        let mut fresh: Vec<Real> = intervals[1..].iter().map(|i| i.left.clone()).collect();
        let mut points: Vec<Real> = Vec::new();
        for n in 1..=10 {
            points.extend(fresh.iter().cloned());
            points.sort();
            points.dedup();
            assert_eq!(
                points.len() + 1,
                (d - 1) * n + 1,
                "{} n = {n}",
                table.title()
            );
            fresh = fresh.iter().map(back).collect();
        }
    }
}

/// d × v = 0 for some direction of the orbit of d, with the same orientation.
fn in_orbit(flow: &Flow, v: &Vector) -> bool {
    (0..flow.copies()).any(|copy| {
        let d = flow.table_direction(copy);
        d.cross(v).is_zero() && d.dot(v, flow.table().form()).sign() == Sign::Positive
    })
}

#[test]
fn saddles_are_the_generalized_diagonals_in_the_directions() {
    for table in finite_tables() {
        let most = 7;
        for (x, y) in [("1", "0"), ("0", "1"), ("1", "2"), ("3", "1"), ("1", "1")] {
            let flow = flow(&table, x, y);
            let found = saddles(&flow, 40, &Control::new()).expect("unstopped");
            let mut short: Vec<_> = found
                .saddles
                .iter()
                .filter(|s| s.code.len() <= most)
                .map(|s| {
                    (
                        s.code.clone(),
                        s.start,
                        s.end,
                        s.displacement.x.to_string(),
                        s.displacement.y.to_string(),
                    )
                })
                .collect();
            short.sort();
            let mut expected: Vec<_> = diagonals(&table, most)
                .into_iter()
                .filter(|d| in_orbit(&flow, &d.displacement))
                .map(|d| {
                    (
                        d.code,
                        d.start,
                        d.end,
                        d.displacement.x.to_string(),
                        d.displacement.y.to_string(),
                    )
                })
                .collect();
            expected.sort();
            assert_eq!(short, expected, "{} {x},{y}", table.title());
        }
    }
}

#[test]
fn strips_fill_all_copies_and_are_the_periodic_words() {
    let longest = 16;
    let mut checked = 0;
    for table in finite_tables() {
        let engine = prepared(&table, longest);
        let periodic = periodic_words(
            &table,
            &engine.0,
            &engine.1,
            longest,
            Wanted::All,
            &Control::new(),
        )
        .expect("unstopped");
        for (x, y) in [
            ("1", "0"),
            ("0", "1"),
            ("1", "2"),
            ("3", "1"),
            ("1", "1"),
            ("2", "3"),
        ] {
            let flow = flow(&table, x, y);
            let segments = saddles(&flow, 300, &Control::new()).expect("unstopped");
            let Some(found) = strips(&flow, &segments) else {
                continue;
            };
            checked += 1;
            let what = format!("{} {x},{y}", table.title());
            // Area over √g: breadth · |t|/|d| for each strip; for odd words both turns.
            let tables = TraceTables::new(flow.table());
            let form = flow.table().form();
            let mut area = Real::from(0);
            for strip in &found {
                let aim = &strip.start.aim;
                let ratio = strip.displacement.dot(aim, form) / aim.squared_length(form);
                let turns = if strip.word.len() % 2 == 1 { 2 } else { 1 };
                area += &strip.breadth * &ratio * Real::from(turns * strip.copies as i64);
                let mut tracer = Tracer::new(&tables, strip.start.clone()).expect("a start");
                while let Step::Hit(_) = tracer.advance() {
                    assert!(tracer.word().len() <= strip.word.len(), "{what}");
                }
                assert_eq!(tracer.word(), strip.word, "{what}");
                assert_eq!(tracer.advance(), Step::Period(strip.word.len()), "{what}");
            }
            let expected = area_over_root_form(flow.table()) * Real::from(flow.copies() as i64);
            assert_eq!(area, expected, "{what}");
            let class = |word: &[SideId]| -> Vec<SideId> {
                let mut reversed = word.to_vec();
                reversed.reverse();
                [word.to_vec(), reversed]
                    .iter()
                    .flat_map(|w| {
                        (0..w.len())
                            .map(|i| [&w[i..], &w[..i]].concat())
                            .collect::<Vec<_>>()
                    })
                    .min()
                    .expect("a word has shifts")
            };
            let short: BTreeSet<Vec<SideId>> = found
                .iter()
                .filter(|s| s.word.len() <= longest)
                .map(|s| class(&s.word))
                .collect();
            let back = |v: &Vector| v.times(&Real::from(-1));
            let among: BTreeSet<Vec<SideId>> = periodic
                .iter()
                .filter(|w| {
                    let t = &w.closing.displacement;
                    in_orbit(&flow, t) || in_orbit(&flow, &back(t))
                })
                .map(|w| w.word.clone())
                .collect();
            assert_eq!(short, among, "{what}");
            for strip in found.iter().filter(|s| s.word.len() <= longest) {
                let same = periodic
                    .iter()
                    .find(|w| w.word == class(&strip.word))
                    .expect("found");
                assert_eq!(
                    same.squared_width(&table),
                    strip.squared_width(&flow),
                    "{what}"
                );
                assert_eq!(
                    same.squared_length(&table),
                    strip.displacement.squared_length(form),
                    "{what}"
                );
            }
        }
    }
    assert!(checked >= 25, "{checked} periodic directions");
}

#[test]
fn directions_that_cannot_be_followed_are_refused() {
    let zero = Vector::new(0.into(), 0.into());
    assert_eq!(
        Flow::new(&unit_square(), &zero).err(),
        Some(FlowFault::ZeroAim)
    );
    let aim = Vector::new(1.into(), 2.into());
    assert_eq!(
        Flow::new(&legs_three_and_four(), &aim).err(),
        Some(FlowFault::InfiniteGroup)
    );
    let flow = Flow::new(&unit_square(), &Vector::new(1.into(), 0.into())).expect("a flow");
    let never = interval_exchange(&flow, Transversal::Side(SideId(0)), &Control::new());
    assert_eq!(never.err(), Some(ExchangeFault::NeverEntered));
}

/// A line from a corner passes the next one at 10⁻¹²: only an exact comparison tells that it goes on.
#[test]
fn lines_that_nearly_meet_a_corner_go_on() {
    let aim = Vector::new(1_000_000_000_000i64.into(), 1.into());
    let flow = Flow::new(&unit_square(), &aim).expect("a flow");
    let found = saddles(&flow, 50, &Control::new()).expect("not stopped");
    assert_eq!(found.saddles, []);
    assert!(found.open > 0);
}

/// Round a hole orbits that pass it on different sides may share a word; each is a strip of its own.
#[test]
fn strips_round_a_hole_fill_all_copies() {
    let file = concat!(
        env!("CARGO_MANIFEST_DIR"),
        "/polygons/square-in-square.toml"
    );
    let table = reboundary::table::file::load(std::path::Path::new(file))
        .expect("a table")
        .table;
    for (x, y) in [
        ("1", "0"),
        ("1", "1"),
        ("1", "2"),
        ("2", "1"),
        ("1", "3"),
        ("3", "2"),
    ] {
        let flow = flow(&table, x, y);
        let segments = saddles(&flow, 300, &Control::new()).expect("unstopped");
        let found = strips(&flow, &segments).expect("a periodic direction");
        let tables = TraceTables::new(flow.table());
        let form = flow.table().form();
        let mut area = Real::from(0);
        for strip in &found {
            let aim = &strip.start.aim;
            let ratio = strip.displacement.dot(aim, form) / aim.squared_length(form);
            let turns = if strip.word.len() % 2 == 1 { 2 } else { 1 };
            area += &strip.breadth * &ratio * Real::from(turns * strip.copies as i64);
            let mut tracer = Tracer::new(&tables, strip.start.clone()).expect("a start");
            let period = loop {
                match tracer.advance() {
                    Step::Hit(_) => assert!(tracer.word().len() <= strip.word.len()),
                    Step::Period(period) => break period,
                    Step::Corner(corner) => panic!("{corner:?}"),
                }
            };
            assert_eq!(period, strip.word.len(), "{x},{y}: {:?}", strip.word);
        }
        // Four copies (the group of a right-angled table has order 4) of nine squares less one.
        assert_eq!(area, Real::from(4 * 8), "{x},{y}");
    }
    // Above and below the hole from wall to wall, and on its left and right from a wall to the hole.
    let flow = flow(&table, "1", "0");
    let segments = saddles(&flow, 300, &Control::new()).expect("unstopped");
    let found = strips(&flow, &segments).expect("a periodic direction");
    let words: Vec<Vec<u8>> = found
        .iter()
        .map(|strip| strip.word.iter().map(|side| side.0).collect())
        .collect();
    assert_eq!(words, [vec![1, 3], vec![1, 3], vec![1, 6], vec![3, 4]]);
    let one = Real::from(1);
    assert!(
        found
            .iter()
            .all(|s| s.breadth == one && s.copies == found[0].copies)
    );
    assert_ne!(found[0].start.fraction, found[1].start.fraction);
}
