//! Periodic words, against the language, against traced orbits, and against published statements.

mod support;

use proptest::prelude::*;
use reboundary::number::{Real, Sign};
use reboundary::orbit::periodic::{
    PeriodicWord, Wanted, is_balanced, letter_class, periodic_words,
};
use reboundary::orbit::{Start, Step, TraceTables, Tracer};
use reboundary::run::Control;
use reboundary::table::facts::squared_area;
use reboundary::table::{Ring, SideId, Table, Vector};
use reboundary::unfold::Mesh;
use reboundary::unfold::engine::{AnyEngine, Arithmetic};
use rug::Rational;
use rug::ops::Pow;
use std::collections::BTreeSet;
use support::*;

fn periodic_by(
    table: &Table,
    longest: usize,
    wanted: Wanted,
    arithmetic: Arithmetic,
) -> Vec<PeriodicWord> {
    let engine = AnyEngine::new(table, longest, arithmetic);
    let mesh = Mesh::new(table);
    periodic_words(table, &engine, &mesh, longest, wanted, &Control::new())
        .expect("nobody stops it")
}

fn periodic(table: &Table, longest: usize) -> Vec<PeriodicWord> {
    periodic_by(table, longest, Wanted::All, Arithmetic::Tiered)
}

/// The least of all cyclic shifts of a word and of its reversal, one by one.
fn class_of(word: &[u8]) -> Vec<u8> {
    let mut reversed = word.to_vec();
    reversed.reverse();
    let shifts =
        |w: &[u8]| -> Vec<Vec<u8>> { (0..w.len()).map(|i| [&w[i..], &w[..i]].concat()).collect() };
    let all = [shifts(word), shifts(&reversed)].concat();
    all.into_iter().min().expect("a word has shifts")
}

fn is_primitive(word: &[u8]) -> bool {
    (1..word.len())
        .all(|p| !word.len().is_multiple_of(p) || word != word[..p].repeat(word.len() / p))
}

fn letters(word: &[SideId]) -> Vec<u8> {
    word.iter().map(|s| s.0).collect()
}

fn classes(found: &[PeriodicWord]) -> BTreeSet<Vec<u8>> {
    found.iter().map(|w| letters(&w.word)).collect()
}

/// Follows the orbit that a periodic word promises and checks that it closes exactly, with that word.
fn check_by_tracing(tables: &TraceTables, word: &PeriodicWord) {
    let start = word.start(tables.table());
    let mut tracer = Tracer::new(tables, start).expect("a start inside the first side");
    let expected = word.word.repeat(word.turns());
    while let Step::Hit(_) = tracer.advance() {
        assert!(
            tracer.word().len() <= expected.len(),
            "{:?} closes",
            word.word
        );
    }
    assert_eq!(tracer.word(), expected);
    assert_eq!(tracer.advance(), Step::Period(expected.len()));
}

/// A word is periodic only if all its powers are words of the language, and then (Galperin, Krüger,
/// Troubetzkoy, Comm. Math. Phys. 169 (1995), from memory) it is. Here powers up to a length decide, so the
/// length must be large against that of the word.
fn classes_by_powers(table: &Table, longest: usize, power_length: usize) -> BTreeSet<Vec<u8>> {
    let language = language(table, power_length);
    let mut found = BTreeSet::new();
    for n in 1..=longest {
        for word in words(&language, n) {
            let power: Vec<u8> = word.iter().cycle().take(power_length).copied().collect();
            if is_primitive(&word) && language.find(&power).is_some() {
                found.insert(class_of(&word));
            }
        }
    }
    found
}

#[test]
fn the_periodic_words_are_those_whose_powers_are_words() {
    for (table, longest, power_length) in [
        (unit_square(), 10, 70),
        (equilateral(), 12, 90),
        (right_isosceles(), 12, 90),
        (half_equilateral(), 12, 90),
        (legs_three_and_four(), 10, 90),
        (l_of_three_squares(), 6, 40),
        (crooked(), 6, 44),
        (regular_pentagon(), 6, 40),
        (irrational_kite(), 6, 44),
    ] {
        let found = periodic(&table, longest);
        let expected = classes_by_powers(&table, longest, power_length);
        assert_eq!(classes(&found), expected, "{}", table.title());
        assert_eq!(
            found.len(),
            expected.len(),
            "{}: one of each class",
            table.title()
        );
    }
}

#[test]
fn each_periodic_word_is_traced_back_to_its_start() {
    for table in named_tables() {
        let tables = TraceTables::new(&table);
        for word in periodic(&table, 14) {
            check_by_tracing(&tables, &word);
        }
    }
}

/// Lines just inside the strip follow the word (twice, for an odd one), lines just outside do not.
#[test]
fn strips_end_where_the_word_ends() {
    for table in named_tables() {
        let tables = TraceTables::new(&table);
        for word in periodic(&table, 10) {
            let side = word.word[0].0 as usize;
            let strip = &word.closing.strip;
            let turns = if word.is_odd() { 2 } else { 1 };
            let expected = word.word.repeat(turns);
            for (share, inside) in [
                (9999, true),
                (-9999, true),
                (10_001, false),
                (-10_001, false),
            ] {
                let share = Real::from(Rational::from((share, 20_000)));
                let moment = &strip.middle + &(&strip.breadth * &share);
                let direction = &word.closing.displacement;
                let offset = |corner: usize| {
                    direction.cross(&table.corner(corner).minus(table.corner(0))) - &moment
                };
                let (first, second) = (offset(side), offset(table.after(side)));
                let start = Start {
                    side: word.word[0],
                    fraction: &first / &(&first - &second),
                    aim: direction.clone(),
                };
                let Ok(mut tracer) = Tracer::new(&tables, start) else {
                    assert!(!inside, "{} {:?}", table.title(), word.word);
                    continue;
                };
                while tracer.word().len() <= 2 * expected.len() {
                    if !matches!(tracer.advance(), Step::Hit(_)) {
                        break;
                    }
                }
                assert_eq!(
                    tracer.word() == expected,
                    inside,
                    "{} {:?}",
                    table.title(),
                    word.word
                );
            }
        }
    }
}

/// Reflected copies of the unit square fill the torus of side 2. For coprime p, q ≥ 1 the direction (p, q)
/// closes after 2(p + q) hits; the images of the corners lie on two closed lines, which leave two strips, and
/// turning the orbit round exchanges them. So there are φ(m) classes with 2m letters for m ≥ 2, and two with
/// two letters, for the directions along the sides. All are even and none balanced.
#[test]
fn classes_of_the_square_by_lattice_count() {
    let found = periodic(&unit_square(), 40);
    for n in 1..=40usize {
        let count = found.iter().filter(|w| w.word.len() == n).count();
        let expected = match n {
            2 => 2,
            _ if n % 2 == 1 => 0,
            _ => coprime_below(n as u64 / 2) as usize,
        };
        assert_eq!(count, expected, "length {n}");
    }
    for word in &found {
        assert!(!word.stable);
        // The strip has length 2√(p² + q²) and width 1/√(p² + q²), or 2 and 1.
        assert_eq!(word.area_over_root_form(), Real::from(2));
    }
}

/// Fagnano's orbit joins the feet of the altitudes: it exists exactly in acute triangles. Its length is
/// 8·area²/(product of the sides), from memory; here squared.
#[test]
fn fagnano_exists_exactly_in_acute_triangles() {
    let mut seen = [0; 2];
    for x in -3..=9i64 {
        for y in 1..=6i64 {
            let table = integer_table("triangle", 1, &[(0, 0), (6, 0), (x, y)]);
            let squares: Vec<i64> = vec![36, (x - 6) * (x - 6) + y * y, x * x + y * y];
            let acute = (0..3).all(|i| squares[i] < squares[(i + 1) % 3] + squares[(i + 2) % 3]);
            let found = periodic(&table, 3);
            let fagnano = found.iter().find(|w| letters(&w.word) == [0, 1, 2]);
            assert_eq!(fagnano.is_some(), acute, "apex {x}, {y}");
            seen[usize::from(acute)] += 1;
            if let Some(word) = fagnano {
                assert!(word.stable && word.is_odd());
                let area = squared_area(&table, &reboundary::table::facts::facts(&table));
                let product: i64 = squares.iter().product();
                let expected = Real::from(64) * &area * &area / Real::from(product);
                assert_eq!(word.squared_length(&table), expected);
            }
        }
    }
    assert!(seen.iter().all(|s| *s > 10), "both kinds occur: {seen:?}");
}

/// Right triangles have no stable periodic orbit (Hooper, Geom. Dedicata 125 (2007), from memory).
#[test]
fn right_triangles_have_no_stable_word_to_length_60_hooper() {
    for (p, q) in [(3, 4), (1, 1), (1, 2), (2, 3), (1, 5), (7, 5)] {
        let table = integer_table("right triangle", 1, &[(0, 0), (p, 0), (0, q)]);
        let found = periodic_by(&table, 60, Wanted::Stable, Arithmetic::Tiered);
        assert_eq!(found.len(), 0, "legs {p} and {q}");
        assert!(!periodic(&table, 12).is_empty(), "legs {p} and {q}");
    }
}

/// Stable words of one table are still there after a small change, others are lost by some small change.
#[test]
fn stability_is_what_it_says() {
    let moved = |table: &Table, shifts: &[(i64, i64)], size: i64| {
        let corners = table
            .corners()
            .iter()
            .zip(shifts)
            .map(|(c, (dx, dy))| {
                let part = |n: i64| Real::from(Rational::from((n, size)));
                Vector::new(&c.x + &part(*dx), &c.y + &part(*dy))
            })
            .collect();
        table_of("moved", corners, table.form().clone())
    };
    let shifts = [(3, 1), (-2, 5), (1, -4), (2, 2), (-3, 1), (4, -1)];
    for table in [
        equilateral(),
        unit_square(),
        crooked(),
        integer_table("acute", 1, &[(0, 0), (6, 0), (2, 5)]),
    ] {
        let size = 1_000_000;
        let before = periodic(&table, 12);
        let after = classes(&periodic(&moved(&table, &shifts, size), 12));
        for word in before {
            assert_eq!(
                after.contains(&letters(&word.word)),
                word.stable,
                "{} {:?}",
                table.title(),
                word.word
            );
        }
    }
}

#[test]
fn stable_only_finds_the_stable_ones() {
    for table in named_tables() {
        let all = periodic(&table, 14);
        let expected: Vec<PeriodicWord> = all.into_iter().filter(|w| w.stable).collect();
        let found = periodic_by(&table, 14, Wanted::Stable, Arithmetic::Tiered);
        assert_eq!(found, expected, "{}", table.title());
    }
}

#[test]
fn big_integers_alone_give_the_same() {
    for table in named_tables() {
        let found = periodic_by(&table, 12, Wanted::All, Arithmetic::BigOnly);
        assert_eq!(found, periodic(&table, 12), "{}", table.title());
    }
}

/// A square whose opposite sides share letters: orbits between opposite sides become powers of one letter.
#[test]
fn classes_of_letters_when_sides_share_them() {
    let corners = unit_square().corners().to_vec();
    let table = Table::new("shared", corners, 1.into(), vec!['a', 'b', 'a', 'b']).unwrap();
    let found = periodic(&table, 6);
    assert_eq!(found.len(), 5, "words of sides are those of the square");
    let classes: BTreeSet<Vec<u8>> = found
        .iter()
        .map(|w| letter_class(&table, &w.word).iter().map(|l| l.0).collect())
        .collect();
    // ac, bd, abcd, abcadc, abdcbd: directions 0, ∞, 1, 2 and 1/2.
    let expected = [vec![0], vec![1], vec![0, 1], vec![0, 0, 1], vec![0, 1, 1]];
    assert_eq!(classes, expected.into_iter().collect());
}

/// Round holes too, every orbit that is found closes; the strips between a hole and the outline are among them.
#[test]
fn orbits_pass_holes() {
    let ring = |corners: &[(i64, i64)], letters: &str| Ring {
        corners: corners
            .iter()
            .map(|&(x, y)| Vector::new(x.into(), y.into()))
            .collect(),
        letters: letters.chars().collect(),
    };
    let outline = ring(&[(0, 0), (9, 0), (9, 7), (0, 7)], "abcd");
    let hole = ring(&[(3, 2), (3, 4), (5, 4), (5, 2)], "efgh");
    let table = Table::with_holes("square hole", outline, vec![hole], 1.into()).unwrap();
    let tables = TraceTables::new(&table);
    let found = periodic(&table, 8);
    for word in &found {
        check_by_tracing(&tables, word);
    }
    let vertical: Vec<(usize, String)> = found
        .iter()
        .filter(|w| w.word.len() == 2 && w.closing.displacement.x.is_zero())
        .map(|w| (w.word.len(), w.squared_width(&table).to_string()))
        .collect();
    // From bottom to top left (3) and right (4) of the hole, and below and above it (2 each).
    let widths = [9, 16, 4, 4].map(|w: i64| (2, w.to_string()));
    let sorted = |mut list: Vec<(usize, String)>| {
        list.sort();
        list
    };
    assert_eq!(sorted(vertical), sorted(widths.to_vec()));
}

#[test]
fn balance_is_counted_by_places() {
    let word = |letters: &[u8]| letters.iter().map(|l| SideId(*l)).collect::<Vec<_>>();
    assert!(is_balanced(&word(&[0, 1, 2, 0, 1, 2])));
    assert!(!is_balanced(&word(&[0, 2])));
    assert!(!is_balanced(&word(&[0, 1, 2, 1])));
}

/// Orbits of lattice tables in rational directions all close. Every one that is traced belongs to a class that
/// the search found, and its direction is that of the class.
#[test]
fn traced_rational_directions_are_among_the_classes() {
    let longest = 40;
    for table in [
        unit_square(),
        right_isosceles(),
        equilateral(),
        half_equilateral(),
        l_of_three_squares(),
    ] {
        let deep = if table.sides() == 6 { 24 } else { longest };
        let known = classes(&periodic(&table, deep));
        let tables = TraceTables::new(&table);
        let mut closed = BTreeSet::new();
        for (p, q) in (-5..=5i64).flat_map(|p| (0..=5i64).map(move |q| (p, q))) {
            for numerator in 1..24i64 {
                let start = Start {
                    side: SideId(0),
                    fraction: Real::from(Rational::from((2 * numerator + 1, 97))),
                    aim: Vector::new(p.into(), q.into()),
                };
                let Ok(mut tracer) = Tracer::new(&tables, start) else {
                    continue;
                };
                let period = loop {
                    match tracer.advance() {
                        Step::Hit(_) if tracer.word().len() > 4000 => {
                            panic!("a rational direction closes")
                        }
                        Step::Hit(_) => {}
                        Step::Corner(_) => break None,
                        Step::Period(n) => break Some(n),
                    }
                };
                let Some(period) = period else { continue };
                let word = letters(&tracer.word()[..period]);
                // An orbit beside the axis of an odd word closes after two turns.
                let half = &word[..period / 2];
                let root = if is_primitive(&word) { &word[..] } else { half };
                assert!(is_primitive(root));
                if root.len() <= deep {
                    assert!(
                        known.contains(&class_of(root)),
                        "{} {root:?}",
                        table.title()
                    );
                    closed.insert(class_of(root));
                }
            }
        }
        assert!(
            closed.len() >= 5,
            "{}: {} classes met",
            table.title(),
            closed.len()
        );
    }
}

/// The strip of an odd word is that of the word doubled: its area is that over two turns.
#[test]
fn the_area_of_an_odd_word_is_over_two_turns() {
    let found = periodic(&equilateral(), 3);
    let fagnano = found
        .iter()
        .find(|w| w.is_odd())
        .expect("the altitude feet");
    let breadth = &fagnano.closing.strip.breadth;
    assert_eq!(fagnano.area_over_root_form(), breadth + breadth);
    let even = found.iter().find(|w| !w.is_odd());
    assert!(even.is_none_or(|w| w.area_over_root_form() == w.closing.strip.breadth));
}

/// Sides that floating point takes for parallel: the orbits between them do not close.
#[test]
fn nearly_parallel_sides_give_no_strip() {
    let tilt = Real::from(Rational::from((
        rug::Integer::from(1),
        rug::Integer::from(10).pow(20),
    )));
    let one = Real::from(1);
    let corners = [
        (0.into(), 0.into()),
        (1.into(), 0.into()),
        (one.clone(), one.clone()),
        (0.into(), &one + &tilt),
    ];
    let corners = corners
        .map(|(x, y): (Real, Real)| Vector::new(x, y))
        .to_vec();
    let table = table_of("tilted", corners, one);
    let found = classes(&periodic(&table, 2));
    assert_eq!(found, [vec![1, 3]].into_iter().collect());
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(24))]

    /// Random quadrilaterals with integer corners, convex or not: powers and search agree, and the orbits close.
    #[test]
    fn random_quadrilaterals(c in prop::array::uniform8(-9i64..10)) {
        let corners: Vec<Vector> = c.chunks(2).map(|p| Vector::new(p[0].into(), p[1].into())).collect();
        let letters_of = reboundary::table::default_letters(4);
        let Ok(table) = Table::new("random", corners, 1.into(), letters_of) else { return Ok(()); };
        let found = periodic(&table, 6);
        let tables = TraceTables::new(&table);
        for word in &found {
            check_by_tracing(&tables, word);
            prop_assert_eq!(word.closing.strip.breadth.sign(), Sign::Positive);
        }
        let by_powers = classes_by_powers(&table, 6, 40);
        // Letters are numbered as in the file, sides of a table given clockwise the other way round.
        for word in &found {
            let word: Vec<u8> = letter_class(&table, &word.word).iter().map(|l| l.0).collect();
            prop_assert!(by_powers.contains(&word), "{:?}", word);
        }
    }
}
