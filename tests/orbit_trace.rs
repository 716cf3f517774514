//! Exact orbits against the folding oracle, backwards in time, and round their periods.

mod launch;
mod oracle;
mod support;

use launch::{backwards, mirrored, negative, quarter_turn, ratio, start_of, states, tiny};
use oracle::shapes::Random;
use oracle::{Point, lattice_table, random_polygon};
use reboundary::number::{Real, Sign};
use reboundary::orbit::ensemble::{StartLaw, sample};
use reboundary::orbit::line::point_on;
use reboundary::orbit::trace::{StartFault, trace};
use reboundary::orbit::{Start, Step, TraceTables, Tracer};
use reboundary::table::expression::Evaluator;
use reboundary::table::{CornerId, SideId, Table, Vector};
use rug::Rational;
use support::{
    crooked, half_equilateral, integer_table, irrational_kite, l_of_three_squares, language,
    legs_three_and_four, named_tables, rational_table, regular_pentagon, unit_square,
};

/// A random start with a short aim; short aims on lattice tables meet corners and close up.
fn random_start(random: &mut Random, table: &Table) -> Start {
    loop {
        let side = random.below(table.sides() as u64) as usize;
        let short = random.below(2) == 0;
        let denominator = 2 + random.below(if short { 3 } else { 30 }) as i64;
        let numerator = 1 + random.below(denominator as u64 - 1) as i64;
        let mut coordinate = || match short {
            true => random.below(7) as i64 - 3,
            false => random.below(41) as i64 - 20,
        };
        let mut aim = Vector::new(coordinate().into(), coordinate().into());
        match table.side_vector(side).cross(&aim).sign() {
            Sign::Zero => continue,
            Sign::Negative => aim = negative(&aim),
            Sign::Positive => {}
        }
        return start_of(side, ratio(numerator, denominator), aim);
    }
}

fn rational(value: &Real) -> Rational {
    value.to_rational().expect("a rational table")
}

#[test]
fn sides_points_and_corners_are_those_of_the_folding_oracle() {
    let (mut corners_met, mut periods_met, mut nonconvex) = (0, 0, 0);
    for seed in 0..48u64 {
        let (sides, convex) = (3 + seed as usize % 5, seed % 2 == 0);
        let polygon = match seed % 6 {
            4 => lattice_table(&[(0, 0), (1, 0), (1, 1), (0, 1)]),
            5 => lattice_table(&[(0, 0), (2, 0), (2, 1), (1, 1), (1, 2), (0, 2)]),
            _ => random_polygon(seed, sides, convex),
        };
        let table = rational_table("random", 1, &polygon);
        nonconvex += usize::from(!oracle::is_convex(&polygon));
        let tables = TraceTables::new(&table);
        let mut random = Random(seed);
        for _ in 0..4 {
            let start = random_start(&mut random, &table);
            let (seen, end) = states(&tables, start.clone(), 200);
            let aim = (rational(&start.aim.x), rational(&start.aim.y));
            let expected = oracle::trace(
                &polygon,
                start.side.0 as usize,
                &rational(&start.fraction),
                (&aim.0, &aim.1),
                200,
            );
            let context = format!("seed {seed}, {start:?}");
            let sides: Vec<usize> = seen.iter().map(|s| s.side.0 as usize).collect();
            assert_eq!(sides, expected.sides, "{context}");
            let points: Vec<Point> = seen
                .iter()
                .map(|s| (rational(&s.point.x), rational(&s.point.y)))
                .collect();
            assert_eq!(points, expected.points, "{context}");
            let corner = match end {
                Some(Step::Corner(CornerId(corner))) => Some(corner as usize),
                _ => None,
            };
            assert_eq!(corner, expected.corner, "{context}");
            // Without questions to the exact follower between the hits.
            let orbit = trace(&tables, start, 200).expect("the start is good");
            let word: Vec<usize> = orbit.word.iter().map(|s| s.0 as usize).collect();
            assert_eq!(word, expected.sides[..word.len()], "{context}");
            assert_eq!(orbit.end, end, "{context}");
            corners_met += usize::from(corner.is_some());
            periods_met += usize::from(matches!(end, Some(Step::Period(_))));
        }
    }
    assert!(corners_met >= 10, "only {corners_met} orbits meet a corner");
    assert!(periods_met >= 10, "only {periods_met} orbits close up");
    assert!(nonconvex >= 10, "only {nonconvex} tables are not convex");
}

#[test]
fn an_orbit_reversed_comes_back_to_its_exact_start() {
    for (seed, table) in named_tables().into_iter().enumerate() {
        let tables = TraceTables::new(&table);
        let mut random = Random(seed as u64);
        for _ in 0..4 {
            let start = random_start(&mut random, &table);
            let mut tracer = Tracer::new(&tables, start.clone()).expect("the start is good");
            while tracer.word().len() < 120 && matches!(tracer.advance(), Step::Hit(_)) {}
            let word = tracer.word().to_vec();
            let back = backwards(&table, &tracer.state());
            let mut tracer = Tracer::new(&tables, back).expect("the reversed start is good");
            for _ in 1..word.len() {
                tracer.advance();
            }
            let context = format!("{}, {start:?}", table.title());
            let mut reversed = tracer.word().to_vec();
            reversed.reverse();
            assert_eq!(reversed, word, "{context}");
            let end = tracer.state();
            assert_eq!(end.fraction, start.fraction, "{context}");
            assert_eq!(
                end.point,
                point_on(&table, start.side.0 as usize, &start.fraction),
                "{context}"
            );
            if word.len() > 1 {
                let incoming = mirrored(&table, start.side.0 as usize, &end.direction);
                assert_eq!(negative(&incoming), start.aim, "{context}");
            }
        }
    }
}

fn gcd(a: i64, b: i64) -> i64 {
    support::gcd(a as u64, b as u64) as i64
}

/// Unfolded, the direction (q, p) crosses lines of the unit grid, and the orbit is at its start again, with
/// its direction, when both coordinates have moved by even numbers; for coprime q and p, of whatever
/// parities, that first happens after (2q, 2p), which crosses 2q + 2p lines. From a fraction 1/(p + 1) it meets
/// no corner, because it would need a fraction that is a multiple of 1/p.
#[test]
fn square_periods_are_those_of_the_grid() {
    let table = unit_square();
    let tables = TraceTables::new(&table);
    for p in 1..=12 {
        for q in (0..=12).filter(|q| gcd(*q, p) == 1) {
            let aim = Vector::new(q.into(), p.into());
            let orbit = trace(&tables, start_of(0, ratio(1, p + 1), aim), 1000).expect("good");
            let period = 2 * (p + q) as usize;
            assert_eq!(
                orbit.end,
                Some(Step::Period(period)),
                "direction ({q}, {p})"
            );
            assert_eq!(orbit.word.len(), period, "direction ({q}, {p})");
        }
    }
}

/// From 1/p, direction (q, p) meets the grid point (m, n) with m = (n·q + 1)/p for the least n that makes it
/// whole, having crossed n − 1 and m − 1 lines since its start.
#[test]
fn square_corners_are_those_of_the_grid() {
    let table = unit_square();
    let tables = TraceTables::new(&table);
    for p in 2..=12 {
        for q in (1..=12).filter(|q| gcd(*q, p) == 1) {
            let n = (1..)
                .find(|n| (n * q + 1) % p == 0)
                .expect("q is a unit modulo p");
            let m = (n * q + 1) / p;
            let aim = Vector::new(q.into(), p.into());
            let orbit = trace(&tables, start_of(0, ratio(1, p), aim), 1000).expect("good");
            // Corners by the parities of the grid point.
            let corner = match (m % 2, n % 2) {
                (0, 0) => 0,
                (1, 0) => 1,
                (1, _) => 2,
                _ => 3,
            };
            assert_eq!(
                orbit.end,
                Some(Step::Corner(CornerId(corner))),
                "({q}, {p})"
            );
            assert_eq!(orbit.word.len() as i64, 1 + (n - 1) + (m - 1), "({q}, {p})");
        }
    }
}

/// The foot of the perpendicular from a corner of a triangle on the opposite side, as a fraction.
fn foot(table: &Table, side: usize) -> Real {
    let axis = table.side_vector(side);
    let to = table
        .corner((side + 2) % table.sides())
        .minus(table.corner(side));
    let form = table.form();
    to.dot(&axis, form)
        .checked_div(&axis.squared_length(form))
        .expect("a side has a length")
}

/// The altitude-foot orbit (Fagnano; existence exactly in acute triangles, from memory). Its three sides close
/// up at once; a parallel orbit next to it comes back on its other side and closes up after six.
#[test]
fn altitude_feet_give_a_periodic_orbit() {
    for corners in [
        [(0, 0), (6, 0), (2, 5)],
        [(0, 0), (10, 1), (4, 9)],
        [(-3, 0), (4, -1), (0, 4)],
        [(0, 0), (1000, 0), (1, 1000)],
    ] {
        let table = integer_table("acute", 1, &corners);
        let tables = TraceTables::new(&table);
        let aim =
            point_on(&table, 1, &foot(&table, 1)).minus(&point_on(&table, 0, &foot(&table, 0)));
        let orbit = trace(&tables, start_of(0, foot(&table, 0), aim.clone()), 1000).expect("good");
        assert_eq!(orbit.end, Some(Step::Period(3)), "{corners:?}");
        assert_eq!(orbit.word, [0, 1, 2].map(SideId), "{corners:?}");
        for places in [7, 20, 40] {
            let beside = &foot(&table, 0) + &tiny(1, places);
            let orbit = trace(&tables, start_of(0, beside, aim.clone()), 1000).expect("good");
            assert_eq!(orbit.end, Some(Step::Period(6)), "{corners:?}, {places}");
            assert_eq!(orbit.word, [0, 1, 2, 0, 1, 2].map(SideId), "{corners:?}");
            // Turned by the least angle it is no period of three or six any more.
            let turned = aim.plus(&quarter_turn(&table, &aim).times(&tiny(1, places)));
            let orbit = trace(&tables, start_of(0, foot(&table, 0), turned), 60).expect("good");
            assert_eq!(orbit.end, None, "{corners:?}, {places}");
            assert_eq!(
                orbit.word[..6],
                [0, 1, 2, 0, 1, 2].map(SideId),
                "{corners:?}"
            );
        }
    }
    let obtuse = integer_table("obtuse", 1, &[(0, 0), (10, 0), (-1, 2)]);
    assert!(
        foot(&obtuse, 0).sign() == Sign::Negative,
        "the foot is outside"
    );
}

/// Direction (√2, 1) in the unit square from 1/3: the vertical grid line x = m is met before the horizontal
/// line y = n exactly when (m − 1/3)² < 2n², in integers (3m − 1)² < 18n². The table is over the rationals, the
/// orbit over the field of √2.
#[test]
fn an_aim_in_a_larger_field_crosses_the_grid_in_the_right_order() {
    let table = unit_square();
    let mut evaluator = Evaluator::new(table.field().clone());
    let root = evaluator.evaluate("sqrt(2)").expect("a number");
    let field = evaluator.field().clone();
    assert_eq!(field.degree(), 2);
    let lift = |number: &Real| evaluator.lift(number).lifted_to(&field);
    let table = table.in_field(&field, lift);
    let start = start_of(0, lift(&ratio(1, 3)), Vector::new(root, lift(&1.into())));
    let orbit = trace(&TraceTables::new(&table), start, 10_000).expect("good");
    let (mut m, mut n) = (1i64, 1i64);
    let mut expected = vec![0];
    while expected.len() < 10_000 {
        let side = if (3 * m - 1).pow(2) < 18 * n * n {
            m += 1;
            if m % 2 == 0 { 1 } else { 3 }
        } else {
            n += 1;
            if n % 2 == 0 { 2 } else { 0 }
        };
        expected.push(side);
    }
    let word: Vec<u8> = orbit.word.iter().map(|s| s.0).collect();
    assert_eq!(word, expected);
    assert_eq!(orbit.end, None, "an irrational slope never closes up");
}

#[test]
fn starts_that_lead_nowhere_are_refused() {
    let table = unit_square();
    let tables = TraceTables::new(&table);
    let fault = |fraction: Real, x: i64, y: i64| {
        let start = start_of(0, fraction, Vector::new(x.into(), y.into()));
        Tracer::new(&tables, start).expect_err("a bad start")
    };
    let half = || ratio(1, 2);
    for outside in [ratio(0, 1), ratio(1, 1), ratio(-1, 2), ratio(3, 2)] {
        assert!(matches!(
            fault(outside, 1, 1),
            StartFault::NotInsideSide { .. }
        ));
    }
    assert_eq!(fault(half(), 0, 0), StartFault::ZeroAim);
    assert_eq!(fault(half(), -3, 0), StartFault::AlongSide);
    assert_eq!(fault(half(), 1, -1), StartFault::OutOfTable);
}

/// The same seed and index give the same orbit; all factors of its word are in the complete language.
#[test]
fn words_of_random_orbits_are_in_the_language() {
    for (table, longest) in [
        (unit_square(), 16),
        (half_equilateral(), 16),
        (legs_three_and_four(), 14),
        (l_of_three_squares(), 10),
        (crooked(), 8),
        (regular_pentagon(), 9),
        (irrational_kite(), 9),
    ] {
        let language = language(&table, longest);
        let (tables, law) = (TraceTables::new(&table), StartLaw::new(&table));
        for index in 0..150 {
            let orbit = sample(&tables, &law, 11, index, 60);
            let word: Vec<u8> = orbit.word.iter().map(|s| s.0).collect();
            assert_eq!(word.len(), 60);
            assert_eq!(word[0], orbit.start.side.0);
            for factor in word.windows(longest) {
                let found = language.find(factor);
                assert!(found.is_some(), "{}: {factor:?}", table.title());
            }
            let again = sample(&tables, &law, 11, index, 60);
            assert_eq!((again.start, again.word), (orbit.start, orbit.word));
        }
    }
}
