//! Periodic words on tables with holes: complete, odd words whose axis runs into a hole included.

#![expect(
    clippy::mutable_key_type,
    reason = "the caches inside a field take no part in order or equality"
)]

mod support;

use reboundary::number::{Real, Sign};
use reboundary::orbit::periodic::{PeriodicWord, Wanted, periodic_words};
use reboundary::orbit::{Start, Step, TraceTables, Tracer};
use reboundary::run::Control;
use reboundary::table::{Ring, SideId, Table, Vector};
use reboundary::unfold::Mesh;
use reboundary::unfold::engine::{AnyEngine, Arithmetic};
use rug::Rational;
use std::collections::{BTreeMap, BTreeSet};
use support::{language, words};

type Corners<'a> = &'a [(i64, i64)];

/// A table with holes; corners are in units of 1/`scale`.
fn pierced(form: i64, scale: i64, outline: Corners, holes: &[Corners]) -> Table {
    let mut names = 'a'..='z';
    let mut ring = |corners: Corners| Ring {
        corners: corners
            .iter()
            .map(|&(x, y)| [x, y].map(|c| Real::from(Rational::from((c, scale)))))
            .map(|[x, y]| Vector::new(x, y))
            .collect(),
        letters: names.by_ref().take(corners.len()).collect(),
    };
    let outline = ring(outline);
    let holes = holes.iter().map(|h| ring(h)).collect();
    Table::with_holes("pierced", outline, holes, form.into()).expect("a good table")
}

/// An equilateral triangle of side 2 with a small hole; Fagnano's orbit joins (1, 0), (3/2, 1/2) and (1/2, 1/2), in units of
/// √3 upward, and runs into the hole at the middle of its upper part.
fn blocked_fagnano() -> Table {
    let outline = [(0, 0), (200, 0), (100, 100)];
    pierced(
        3,
        100,
        &outline,
        &[&[(97, 48), (97, 52), (103, 51), (102, 47)]],
    )
}

fn pierced_tables() -> Vec<Table> {
    vec![
        blocked_fagnano(),
        // A hole that leaves the axis alone and cuts the strip.
        pierced(
            3,
            100,
            &[(0, 0), (200, 0), (100, 100)],
            &[&[(97, 44), (97, 48), (103, 47)]],
        ),
        // Two holes: three beams round the axis.
        pierced(
            3,
            100,
            &[(0, 0), (200, 0), (100, 100)],
            &[
                &[(97, 48), (97, 53), (103, 51)],
                &[(60, 55), (61, 56), (60, 57)],
            ],
        ),
        pierced(
            1,
            1,
            &[(0, 0), (9, 0), (9, 7), (0, 7)],
            &[&[(3, 2), (3, 4), (5, 4), (5, 2)]],
        ),
        pierced(
            1,
            1,
            &[(0, 0), (8, 0), (0, 8)],
            &[&[(1, 1), (1, 3), (3, 1)]],
        ),
    ]
}

fn periodic(table: &Table, longest: usize) -> Vec<PeriodicWord> {
    let engine = AnyEngine::new(table, longest, Arithmetic::Tiered);
    let (mesh, wanted) = (Mesh::new(table), Wanted::All);
    periodic_words(table, &engine, &mesh, longest, wanted, &Control::new()).expect("not stopped")
}

fn letters(word: &[SideId]) -> Vec<u8> {
    word.iter().map(|s| s.0).collect()
}

fn root(word: &[u8]) -> &[u8] {
    let n = word.len();
    let period = (1..=n).find(|p| n.is_multiple_of(*p) && word == word[..*p].repeat(n / p));
    &word[..period.expect("the word itself")]
}

/// The least of all cyclic shifts of a word and of its reversal.
fn class_of(word: &[u8]) -> Vec<u8> {
    let reversed: Vec<u8> = word.iter().rev().copied().collect();
    let all =
        [word, &reversed[..]].map(|w| (0..w.len()).map(|i| [&w[i..], &w[..i]].concat()).min());
    all.into_iter().flatten().min().expect("a word has letters")
}

/// Follows an orbit until it is back; `None` when it meets a corner or is long.
fn closed<'a>(tables: &'a TraceTables, start: Start, most: usize) -> Option<Tracer<'a>> {
    let mut tracer = Tracer::new(tables, start).ok()?;
    loop {
        match tracer.advance() {
            Step::Period(_) => return Some(tracer),
            Step::Corner(_) => return None,
            Step::Hit(_) if tracer.word().len() > most => return None,
            Step::Hit(_) => {}
        }
    }
}

/// The lines of an orbit over one side in one direction, by moment, and those of the orbit run backward.
fn crossings(tables: &TraceTables, word: &PeriodicWord) -> BTreeSet<Real> {
    let table = tables.table();
    let (side, aim) = (word.word[0], word.closing.displacement.clone());
    let mut found = BTreeSet::new();
    let mut note = |start: &Start| {
        if start.side == side && start.aim == aim {
            let point = reboundary::orbit::line::point_on(table, side.0 as usize, &start.fraction);
            found.insert(aim.cross(&point.minus(table.corner(0))));
        }
    };
    let mut tracer = Tracer::new(tables, word.start(table)).expect("a start inside a side");
    loop {
        let state = tracer.state();
        let here = Start {
            side: state.side,
            fraction: state.fraction,
            aim: state.direction,
        };
        note(&reboundary::orbit::launch::backward(table, &here));
        note(&here);
        if !matches!(tracer.advance(), Step::Hit(_)) {
            return found;
        }
    }
}

/// On a line parallel to the middle of a strip, at a share of its breadth.
fn beside(table: &Table, word: &PeriodicWord, share: (i64, i64)) -> Start {
    let strip = &word.closing.strip;
    let moment = &strip.middle + &(&strip.breadth * &Real::from(Rational::from(share)));
    let direction = &word.closing.displacement;
    let side = word.word[0].0 as usize;
    let offset =
        |corner: usize| direction.cross(&table.corner(corner).minus(table.corner(0))) - &moment;
    let (first, second) = (offset(side), offset(table.after(side)));
    Start {
        side: word.word[0],
        fraction: &first / &(&first - &second),
        aim: direction.clone(),
    }
}

#[test]
fn an_axis_in_a_hole_leaves_a_strip_beside_it() {
    let table = blocked_fagnano();
    let found = periodic(&table, 3);
    let fagnano: Vec<&PeriodicWord> = found
        .iter()
        .filter(|w| letters(&w.word) == [0, 1, 2])
        .collect();
    // The upper part of the orbit is level at 1/2, and a line at height h above it comes back at h below it. The hole reaches
    // from 0.47 to 0.52, so h > 0.03. It stands in the way of the two other parts too, lines x + y = 1 and x - y = 1 that are
    // moved inward by 2h: on the hole x + y goes from 1.45 to 1.54 and x - y from 0.45 to 0.55, so h is not
    // between 0.225 and 0.275. The strip of the free triangle ends at its corners, where h is 1/2. The glide is 3 long,
    // which makes moments three times h.
    let thousandths = |n: i64| Real::from(Rational::from((n, 1000)));
    let ends: Vec<[Real; 2]> = fagnano
        .iter()
        .map(|w| {
            let (strip, axis) = (&w.closing.strip, w.closing.axis.clone().expect("odd"));
            let half = &strip.breadth * &Real::from(Rational::from((1, 2)));
            [
                &(&strip.middle - &axis) - &half,
                &(&strip.middle - &axis) + &half,
            ]
        })
        .collect();
    let expected = [[30, 225], [275, 500]].map(|ends| ends.map(|h| thousandths(3 * h)));
    assert_eq!(ends, expected);
    for word in fagnano {
        assert!(word.is_odd() && word.stable);
        assert_eq!(word.turns(), 2);
        assert_eq!(word.squared_length(&table), Real::from(9));
        assert_eq!(word.squared_orbit_length(&table), Real::from(36));
    }
}

/// Lines in a strip close with the word, lines just outside do not.
#[test]
fn strips_on_tables_with_holes_end_where_the_word_ends() {
    let mut beside_axis = 0;
    for table in pierced_tables() {
        let tables = TraceTables::new(&table);
        for word in periodic(&table, 7) {
            let turns = if word.is_odd() { 2 } else { 1 };
            let expected = word.word.repeat(turns);
            let inside = |share| {
                closed(&tables, beside(&table, &word, share), 2 * expected.len())
                    .is_some_and(|t| t.word() == expected)
            };
            let context = format!("{:?} {:?}", word.word, word.closing);
            assert!(
                inside((9999, 20_000)) && inside((-9999, 20_000)),
                "{context}"
            );
            assert!(
                !inside((10_001, 20_000)) && !inside((-10_001, 20_000)),
                "{context}"
            );
            let orbit = closed(&tables, word.start(&table), 4 * expected.len()).expect("it closes");
            assert_eq!(
                orbit.word().len(),
                word.word.len() * word.turns(),
                "{context}"
            );
            beside_axis += usize::from(word.turns() == 2);
        }
    }
    assert!(beside_axis >= 5, "only {beside_axis} strips beside an axis");
}

/// No strip is listed twice, not even run the other way.
#[test]
fn strips_are_different_orbits() {
    for table in pierced_tables() {
        let tables = TraceTables::new(&table);
        let mut lines: BTreeMap<Vec<u8>, BTreeSet<Real>> = BTreeMap::new();
        for word in periodic(&table, 8) {
            let known = lines.entry(letters(&word.word)).or_default();
            let crossings = crossings(&tables, &word);
            assert!(crossings.contains(&word.closing.strip.middle));
            assert!(known.is_disjoint(&crossings), "{:?} twice", word.word);
            known.extend(crossings);
        }
    }
}

/// A word is periodic exactly when all its powers are words: long powers decide (see the tests of tables without holes).
#[test]
fn periodic_words_with_holes_are_those_whose_powers_are_words() {
    for (table, longest, power) in [
        (blocked_fagnano(), 5, 44),
        (
            pierced(
                1,
                1,
                &[(0, 0), (8, 0), (0, 8)],
                &[&[(1, 1), (1, 3), (3, 1)]],
            ),
            5,
            40,
        ),
    ] {
        let language = language(&table, power);
        let mut expected = BTreeSet::new();
        for n in 1..=longest {
            for word in words(&language, n) {
                let long: Vec<u8> = word.iter().cycle().take(power).copied().collect();
                if root(&word) == word && language.find(&long).is_some() {
                    expected.insert(class_of(&word));
                }
            }
        }
        let found = periodic(&table, longest);
        let found: BTreeSet<Vec<u8>> = found.iter().map(|w| letters(&w.word)).collect();
        assert_eq!(found, expected);
    }
}

/// Tables whose corners lie on a lattice of reflections: rational directions close, and every closed orbit lies in exactly
/// one strip of the list.
#[test]
fn every_traced_closed_orbit_is_in_one_strip() {
    let longest = 9;
    let mut odd_beside = 0;
    for table in [
        &pierced_tables()[0],
        &pierced_tables()[2],
        &pierced_tables()[3],
    ] {
        let tables = TraceTables::new(table);
        let found = periodic(table, longest);
        let mut met = 0;
        for (p, q) in (-3..=3i64).flat_map(|p| (0..=3i64).map(move |q| (p, q))) {
            for numerator in 1..60i64 {
                let start = Start {
                    side: SideId(0),
                    fraction: Real::from(Rational::from((2 * numerator + 1, 127))),
                    aim: Vector::new(p.into(), q.into()),
                };
                let Some(orbit) = closed(&tables, start, 60) else {
                    continue;
                };
                let word = letters(orbit.word());
                let class = class_of(root(&word));
                if class.len() > longest {
                    continue;
                }
                met += 1;
                let holding: Vec<&PeriodicWord> = found
                    .iter()
                    .filter(|w| {
                        letters(&w.word) == class
                            && holds(table, &tables, w, orbit.word(), numerator, (p, q))
                    })
                    .collect();
                assert_eq!(holding.len(), 1, "{class:?} from {numerator}, aim {p}, {q}");
                odd_beside += usize::from(holding[0].turns() == 2);
            }
        }
        assert!(met >= 100, "only {met} closed orbits");
    }
    assert!(odd_beside >= 5, "only {odd_beside} orbits beside an axis");
}

/// Whether the orbit from that start crosses the first side of the word inside its strip, either way round.
fn holds(
    table: &Table,
    tables: &TraceTables,
    word: &PeriodicWord,
    orbit: &[SideId],
    numerator: i64,
    (p, q): (i64, i64),
) -> bool {
    let start = Start {
        side: SideId(0),
        fraction: Real::from(Rational::from((2 * numerator + 1, 127))),
        aim: Vector::new(p.into(), q.into()),
    };
    let mut tracer = Tracer::new(tables, start).expect("traced before");
    let (strip, direction) = (&word.closing.strip, &word.closing.displacement);
    for _ in 0..orbit.len() {
        let state = tracer.state();
        let here = Start {
            side: state.side,
            fraction: state.fraction.clone(),
            aim: state.direction,
        };
        for start in [
            reboundary::orbit::launch::backward(table, &here),
            here.clone(),
        ] {
            let parallel = direction.cross(&start.aim).is_zero()
                && direction.dot(&start.aim, table.form()).sign() == Sign::Positive;
            if start.side != word.word[0] || !parallel {
                continue;
            }
            let moment = direction.cross(&state.point.minus(table.corner(0)));
            let off = &moment - &strip.middle;
            let off = if off.sign() == Sign::Negative {
                -off
            } else {
                off
            };
            // Its word from here must be that of the strip.
            let follows = Tracer::new(tables, start).is_ok_and(|mut t| {
                while t.word().len() < word.word.len() && matches!(t.advance(), Step::Hit(_)) {}
                t.word() == word.word
            });
            if follows && off * Real::from(2) < strip.breadth {
                return true;
            }
        }
        tracer.advance();
    }
    false
}
