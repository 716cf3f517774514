//! Orbits into corners and just past them, and the floating-point follower against the exact one close to them.

mod launch;
mod oracle;
mod support;

use launch::{backwards, mirrored, negative, quarter_turn, ratio, start_of, states, tiny};
use oracle::shapes::Random;
use reboundary::number::{Real, Sign};
use reboundary::orbit::line::{ExactLine, FloatLine, LineTables, WideLine, point_on};
use reboundary::orbit::{Start, Step, TraceTables, Tracer};
use reboundary::table::{CornerId, Table, Vector};
use reboundary::unfold::Mesh;
use reboundary::unfold::mesh::Exit;
use support::{
    crooked, half_equilateral, irrational_kite, irrational_l, l_of_three_squares, regular_pentagon,
    unit_square,
};

/// The first side that a ray from a corner meets, where, and the direction after the bounce; nothing when it
/// leaves the table at once or meets a corner first.
fn leave_corner(table: &Table, corner: usize, direction: &Vector) -> Option<Start> {
    let k = table.sides();
    let (next, back) = (
        table.side_vector(corner),
        negative(&table.side_vector((corner + k - 1) % k)),
    );
    let positive = |a: &Vector, b: &Vector| a.cross(b).sign() == Sign::Positive;
    let inside = if positive(&next, &back) {
        positive(&next, direction) && positive(direction, &back)
    } else {
        positive(&next, direction) || positive(direction, &back)
    };
    if !inside {
        return None;
    }
    let origin = table.corner(corner);
    let mut first: Option<(Real, usize, Real)> = None;
    for side in (0..k).filter(|s| *s != corner && *s != (corner + k - 1) % k) {
        let (axis, to) = (table.side_vector(side), table.corner(side).minus(origin));
        let across = direction.cross(&axis);
        if across.is_zero() {
            continue;
        }
        let time = to.cross(&axis).checked_div(&across).expect("not zero");
        let fraction = to.cross(direction).checked_div(&across).expect("not zero");
        let on_side = fraction.sign() != Sign::Negative && fraction <= Real::from(1);
        let sooner = first.as_ref().is_none_or(|(best, ..)| time < *best);
        if time.sign() == Sign::Positive && on_side && sooner {
            first = Some((time, side, fraction));
        }
    }
    let (_, side, fraction) = first?;
    let interior = fraction.sign() == Sign::Positive && fraction < Real::from(1);
    interior.then(|| start_of(side, fraction, mirrored(table, side, direction)))
}

/// Starts whose orbits run into a named corner after exactly the given number of letters.
fn aimed_at_corners(table: &Table, letters: usize, seed: u64) -> Vec<(Start, usize)> {
    let tables = TraceTables::new(table);
    let mut random = Random(seed);
    let mut found = Vec::new();
    for corner in 0..table.sides() {
        for _ in 0..12 {
            let mut coordinate = || random.below(2001) as i64 - 1000;
            let direction = Vector::new(coordinate().into(), coordinate().into());
            let Some(start) = leave_corner(table, corner, &direction) else {
                continue;
            };
            let (seen, end) = states(&tables, start, letters);
            if end.is_none() {
                found.push((backwards(table, seen.last().expect("a start")), corner));
            }
        }
    }
    assert!(found.len() >= table.sides(), "{}", table.title());
    found
}

/// Letters before the corner: few where the exact numbers grow with every hit.
fn corner_cases() -> Vec<(Table, usize)> {
    vec![
        (unit_square(), 1),
        (unit_square(), 400),
        (half_equilateral(), 150),
        (l_of_three_squares(), 7),
        (l_of_three_squares(), 300),
        (regular_pentagon(), 150),
        (irrational_l(), 100),
        (crooked(), 3),
        (crooked(), 60),
        (irrational_kite(), 25),
    ]
}

fn is_convex_corner(table: &Table, corner: usize) -> bool {
    let k = table.sides();
    let before = table.side_vector((corner + k - 1) % k);
    before.cross(&table.side_vector(corner)).sign() == Sign::Positive
}

/// Beyond the corner an orbit that was turned to the left has the corner on its right and meets side `corner`;
/// turned to the right it meets the side before. Every bounce exchanges left and right. The exact aim has
/// to be settled in the field, 10⁻³⁰ and 10⁻⁶⁰ by enclosures, 10⁻⁴⁰⁰ in
/// the field again, but for corners at the origin, where a tiny moment has a known sign.
#[test]
fn corners_are_hit_exactly_or_passed_on_the_right_side() {
    let mut deepest = 0;
    for (case, (table, letters)) in corner_cases().into_iter().enumerate() {
        let (tables, k) = (TraceTables::new(&table), table.sides());
        for (start, corner) in aimed_at_corners(&table, letters, case as u64) {
            let context = format!(
                "{}, {letters} letters to {corner}: {start:?}",
                table.title()
            );
            let mut exact = Tracer::new(&tables, start.clone()).expect("a good start");
            let end = loop {
                match exact.advance() {
                    Step::Hit(_) => {}
                    end => break end,
                }
            };
            assert_eq!(end, Step::Corner(CornerId(corner as u8)), "{context}");
            assert_eq!(exact.word().len(), letters, "{context}");
            assert_eq!(exact.advance(), end, "the same step comes again, {context}");
            assert!(exact.tiers.big >= 1, "{context}");
            if !is_convex_corner(&table, corner) {
                continue;
            }
            for (sign, places) in [(1, 30), (-1, 30), (1, 60), (-1, 60), (1, 400), (-1, 400)] {
                let turn = quarter_turn(&table, &start.aim).times(&tiny(sign, places));
                let near = Start {
                    aim: start.aim.plus(&turn),
                    ..start.clone()
                };
                let mut tracer = Tracer::new(&tables, near).expect("a good start");
                for _ in 0..letters {
                    let step = tracer.advance();
                    assert!(
                        matches!(step, Step::Hit(_)),
                        "{step:?}, {places}, {context}"
                    );
                }
                let turned_left_at_the_end = (sign > 0) == (letters % 2 == 1);
                let expected = if turned_left_at_the_end {
                    corner
                } else {
                    (corner + k - 1) % k
                };
                let word = tracer.word();
                assert_eq!(word[..letters], *exact.word(), "{places}, {context}");
                assert_eq!(
                    word[letters].0 as usize, expected,
                    "{sign}, {places}, {context}"
                );
                let (wide, big) = (tracer.tiers.integer, tracer.tiers.big);
                match places {
                    400 => deepest += usize::from(big >= 1),
                    _ => assert!(wide >= 1 && big == 0, "{places}, {context}"),
                }
            }
        }
    }
    assert!(deepest >= 100, "only {deepest} orbits asked the field");
}

/// What each follower said along one orbit, compared with the exact one.
#[derive(Debug, Default)]
struct Tally {
    decided: usize,
    open: usize,
}

/// Follows an orbit by the exact line alone and asks the other two at every corner passed.
fn compare_followers(table: &Table, start: &Start, hits: usize, tally: &mut Tally) {
    let (lines, mesh) = (LineTables::new(table), Mesh::new(table));
    let point = point_on(table, start.side.0 as usize, &start.fraction);
    let mut exact = ExactLine::new(&point, &start.aim);
    let mut wide = WideLine::from_exact(&exact);
    let mut float = FloatLine::from_wide(&wide, &lines);
    let mut gate = mesh.gate_of_side(start.side);
    for hit in 0..hits {
        let side = loop {
            let entry = mesh.enter(gate, false);
            let apex = entry.apex.0 as usize;
            let truth = exact.offset(&lines, apex).sign();
            let context = || format!("{}, hit {hit}, corner {apex}: {start:?}", table.title());
            match float.side_of(&lines, apex) {
                Some(sign) => assert_eq!(sign, truth, "floating point, {}", context()),
                None => tally.open += 1,
            }
            tally.decided += usize::from(float.side_of(&lines, apex).is_some());
            if let Some(sign) = wide.side_of(&lines, apex) {
                assert_eq!(sign, truth, "enclosures, {}", context());
            }
            let exit = match truth {
                Sign::Zero => return,
                Sign::Positive => entry.right,
                Sign::Negative => entry.left,
            };
            match exit {
                Exit::Pass(next) => gate = next,
                Exit::Bounce(side, next) => {
                    gate = next;
                    break side.0 as usize;
                }
            }
        };
        exact.bounce(&lines, side);
        wide.bounce(&lines, side);
        float.bounce(&lines, side);
    }
}

/// Aims turned by 10⁻¹² to 10⁻¹⁸ from a corner: close to what floating point can tell, on both sides of it.
#[test]
fn floating_point_never_contradicts_the_exact_follower() {
    let mut tally = Tally::default();
    for (case, (table, letters)) in corner_cases().into_iter().enumerate() {
        let mut random = Random(case as u64);
        for (start, _) in aimed_at_corners(&table, letters, 100 + case as u64) {
            for places in 12..=18 {
                let sign = 1 - 2 * random.below(2) as i64;
                let small = &tiny(sign, places) * &Real::from(1 + random.below(9) as i64);
                let turn = quarter_turn(&table, &start.aim).times(&small);
                let near = Start {
                    aim: start.aim.plus(&turn),
                    ..start.clone()
                };
                compare_followers(&table, &near, letters + 1, &mut tally);
            }
        }
    }
    assert!(tally.open >= 500, "{tally:?}");
    assert!(tally.decided >= 100_000, "{tally:?}");
}

/// A long orbit without renewal, in a table whose exact numbers stay short.
#[test]
fn floating_point_stays_sound_along_long_orbits() {
    for table in [l_of_three_squares(), regular_pentagon()] {
        let mut tally = Tally::default();
        let start = start_of(0, ratio(1, 3), {
            let side = table.side_vector(0);
            side.times(&ratio(1, 10))
                .plus(&quarter_turn(&table, &side).times(&ratio(1_000_003, 700_001)))
        });
        compare_followers(&table, &start, 5000, &mut tally);
        assert!(tally.decided >= 5000, "{}: {tally:?}", table.title());
    }
}
