//! Exact orbits against the folding oracle, backwards in time, into corners and just past them, and round
//! their periods; the floating-point follower against the exact one.

mod oracle;
mod support;

use oracle::shapes::Random;
use oracle::{Point, lattice_table, random_polygon};
use reboundary::number::{Real, Sign};
use reboundary::orbit::ensemble::{StartLaw, sample};
use reboundary::orbit::line::{ExactLine, FloatLine, LineTables, WideLine, point_on};
use reboundary::orbit::trace::{StartFault, State, trace};
use reboundary::orbit::{Start, Step, TraceTables, Tracer};
use reboundary::table::expression::Evaluator;
use reboundary::table::{CornerId, SideId, Table, Vector};
use reboundary::unfold::Mesh;
use reboundary::unfold::mesh::Exit;
use rug::{Integer, Rational};
use support::{
    crooked, half_equilateral, integer_table, irrational_kite, irrational_l, l_of_three_squares,
    language, legs_three_and_four, named_tables, rational_table, regular_pentagon, unit_square,
};

fn start_of(side: usize, fraction: Real, aim: Vector) -> Start {
    Start {
        side: SideId(side as u8),
        fraction,
        aim,
    }
}

fn ratio(numerator: i64, denominator: i64) -> Real {
    Real::from(Rational::from((numerator, denominator)))
}

/// ±10^−places.
fn tiny(sign: i64, places: u32) -> Real {
    Real::from(Rational::from((
        Integer::from(sign),
        Integer::from(Integer::u_pow_u(10, places)),
    )))
}

/// The vector reflected across a side of the table.
fn mirrored(table: &Table, side: usize, vector: &Vector) -> Vector {
    let (axis, form) = (table.side_vector(side), table.form());
    let twice = &Real::from(2) * &vector.dot(&axis, form);
    let share = twice
        .checked_div(&axis.squared_length(form))
        .expect("a side has a length");
    axis.times(&share).minus(vector)
}

fn negative(vector: &Vector) -> Vector {
    vector.times(&Real::from(-1))
}

/// A quarter turn to the left, up to a positive factor.
fn quarter_turn(table: &Table, vector: &Vector) -> Vector {
    Vector::new(-(table.form() * &vector.y), vector.x.clone())
}

/// The orbit that comes into the state, followed backwards.
fn backwards(table: &Table, state: &State) -> Start {
    let side = state.side.0 as usize;
    let incoming = mirrored(table, side, &state.direction);
    start_of(side, state.fraction.clone(), negative(&incoming))
}

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

/// All states of an orbit, a periodic one continued round its period, and the corner that ended it.
fn states(tables: &TraceTables, start: Start, hits: usize) -> (Vec<State>, Option<Step>) {
    let mut tracer = Tracer::new(tables, start).expect("the start is good");
    let mut seen = vec![tracer.state()];
    while seen.len() < hits {
        match tracer.advance() {
            Step::Hit(_) => seen.push(tracer.state()),
            Step::Period(period) => {
                while seen.len() < hits {
                    seen.push(seen[seen.len() - period].clone());
                }
                return (seen, Some(Step::Period(period)));
            }
            corner => return (seen, Some(corner)),
        }
    }
    (seen, None)
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
