//! Words that are bundles of beams: sides that share letters, and holes.

mod oracle;
mod support;

use oracle::{Domain, Point};
use reboundary::complexity::counts::p_from_diagonals;
use reboundary::language::measure::measure;
use reboundary::language::walk::{Visit, Visitor, walk_beams};
use reboundary::number::Real;
use reboundary::orbit::{Start, TraceTables, Tracer, trace::Step};
use reboundary::run::Control;
use reboundary::table::facts::totient;
use reboundary::table::{Ring, SideId, Table, Vector, default_letters};
use reboundary::unfold::engine::{Arithmetic, Engine, Trail};
use reboundary::unfold::with_engine;
use rug::Rational;
use std::collections::BTreeSet;

/// A table with rational corners as the crate and as the oracle have it.
struct Case {
    name: String,
    table: Table,
    domain: Domain,
    letters: Vec<u8>,
}

fn points(corners: &[(i64, i64)]) -> Vec<Point> {
    corners.iter().map(|&(x, y)| (x.into(), y.into())).collect()
}

/// The outline counterclockwise, holes clockwise, letters as indices in order of first appearance.
fn case(name: &str, outline: Vec<Point>, holes: Vec<Vec<Point>>, letters: &[u8]) -> Case {
    let domain = Domain::with_holes(&outline, &holes);
    let all = default_letters(255);
    let mut given = letters.iter().map(|&l| all[l as usize]);
    let mut ring = |corners: &Vec<Point>| Ring {
        corners: corners
            .iter()
            .map(|(x, y)| Vector::new(x.clone().into(), y.clone().into()))
            .collect(),
        letters: given.by_ref().take(corners.len()).collect(),
    };
    let outline = ring(&outline);
    let holes = holes.iter().map(ring).collect();
    let table = Table::with_holes(name, outline, holes, 1.into());
    Case {
        name: name.into(),
        table: table.unwrap_or_else(|fault| panic!("{name}: {fault}")),
        domain,
        letters: letters.to_vec(),
    }
}

const SQUARE: [(i64, i64); 4] = [(0, 0), (1, 0), (1, 1), (0, 1)];

fn merged_square() -> Case {
    case(
        "square, opposite sides alike",
        points(&SQUARE),
        vec![],
        &[0, 1, 0, 1],
    )
}

fn cases() -> Vec<Case> {
    let one_to = |n: u8| (0..n).collect::<Vec<u8>>();
    let frame = points(&[(0, 0), (5, 0), (5, 5), (0, 5)]);
    let hole = points(&[(1, 2), (2, 3), (4, 3), (3, 1)]);
    vec![
        merged_square(),
        case("square, all sides alike", points(&SQUARE), vec![], &[0; 4]),
        case(
            "square, neighbours alike",
            points(&SQUARE),
            vec![],
            &[0, 0, 1, 1],
        ),
        case(
            "L with three letters",
            points(&[(0, 0), (2, 0), (2, 1), (1, 1), (1, 2), (0, 2)]),
            vec![],
            &[0, 1, 0, 2, 0, 1],
        ),
        case(
            "crooked with two letters",
            points(&[(0, 0), (7, 1), (3, 2), (5, 6), (1, 5)]),
            vec![],
            &[0, 1, 1, 0, 1],
        ),
        case(
            "square in a square",
            points(&[(0, 0), (3, 0), (3, 3), (0, 3)]),
            vec![points(&[(1, 1), (1, 2), (2, 2), (2, 1)])],
            &one_to(8),
        ),
        case(
            "annulus with right angles",
            points(&[(0, 0), (5, 0), (5, 4), (3, 4), (3, 6), (0, 6)]),
            vec![points(&[(1, 1), (1, 3), (2, 3), (2, 2), (4, 2), (4, 1)])],
            &one_to(12),
        ),
        // All corners have right angles, and yet the reflection group is infinite.
        case(
            "turned square in a square",
            points(&[(0, 0), (10, 0), (10, 10), (0, 10)]),
            vec![points(&[(4, 3), (3, 5), (5, 6), (6, 4)])],
            &one_to(8),
        ),
        case(
            "crooked hole",
            frame.clone(),
            vec![hole.clone()],
            &one_to(8),
        ),
        case(
            "crooked hole, letters shared",
            frame.clone(),
            vec![hole],
            &[0, 1, 0, 1, 2, 2, 0, 2],
        ),
        case(
            "two triangular holes",
            frame,
            vec![
                points(&[(1, 1), (1, 2), (2, 1)]),
                points(&[(4, 4), (4, 2), (3, 4)]),
            ],
            &[0, 1, 2, 3, 4, 4, 5, 4, 5, 6],
        ),
    ]
}

fn levels(table: &Table, longest: usize, arithmetic: Arithmetic) -> Vec<BTreeSet<Vec<u8>>> {
    let language = support::language_by(table, longest, arithmetic);
    (0..=longest)
        .map(|n| {
            let words = support::words(&language, n);
            assert!(
                words.is_sorted_by(|a, b| a < b),
                "lexicographic, each word once"
            );
            words.into_iter().collect()
        })
        .collect()
}

#[test]
fn words_agree_with_the_oracle() {
    for case in cases() {
        let longest = if case.domain.corners.len() > 8 { 4 } else { 5 };
        let sides = oracle::languages_in(&case.domain, longest);
        let expected = oracle::lettered(&sides, &case.letters);
        for arithmetic in [Arithmetic::Tiered, Arithmetic::BigOnly] {
            let found = levels(&case.table, longest, arithmetic);
            assert_eq!(found, expected, "{}", case.name);
        }
    }
}

#[test]
fn random_polygons_with_shared_letters_agree_with_the_oracle() {
    for seed in 0..40 {
        let corners = oracle::random_polygon(seed, 3 + seed as usize % 4, seed % 2 == 0);
        let letters = match corners.len() {
            3 => vec![0, 1, 0],
            4 => vec![0, 1, 1, 0],
            5 => vec![0, 1, 0, 1, 1],
            _ => vec![0, 1, 2, 0, 1, 2],
        };
        let case = case(&format!("seed {seed}"), corners, vec![], &letters);
        let expected = oracle::lettered(&oracle::languages_in(&case.domain, 4), &letters);
        assert_eq!(
            levels(&case.table, 4, Arithmetic::Tiered),
            expected,
            "{}",
            case.name
        );
    }
}

#[test]
fn merged_square_complexity_oeis_a005598() {
    // A(n) = 1 + Σ_{i=1..n} (n+1−i)·φ(i): OEIS A005598, the number of balanced words over two letters.
    let longest = 60;
    let p = support::p_by_beams(&merged_square().table, longest);
    for n in 0..=longest as u64 {
        let a = 1 + (1..=n).map(|i| (n + 1 - i) * totient(i)).sum::<u64>();
        assert_eq!(p[n as usize], a, "n = {n}");
    }
}

#[test]
fn words_are_letter_images_of_the_words_with_letters_of_their_own() {
    // The bundle walk against the walk that has one beam a word: longer words than the oracle reaches.
    for (corners, letters) in [
        (vec![(0, 0), (4, 0), (0, 3)], vec![0, 1, 0]),
        (
            vec![(0, 0), (2, 0), (2, 1), (1, 1), (1, 2), (0, 2)],
            vec![0, 1, 0, 1, 2, 2],
        ),
        (
            vec![(0, 0), (7, 1), (3, 2), (5, 6), (1, 5)],
            vec![0, 1, 2, 1, 0],
        ),
    ] {
        let k = corners.len() as u8;
        let own: Vec<u8> = (0..k).collect();
        let apart = case("apart", points(&corners), vec![], &own);
        let shared = case("shared", points(&corners), vec![], &letters);
        let longest = 11;
        let expected =
            oracle::lettered(&levels(&apart.table, longest, Arithmetic::Tiered), &letters);
        assert_eq!(levels(&shared.table, longest, Arithmetic::Tiered), expected);
    }
}

/// Beams per length, words or not.
#[derive(Default)]
struct Beams(Vec<u64>);

impl<E: Engine> Visitor<E> for Beams {
    fn visit(&mut self, visit: &Visit<'_, E>, trail: &mut Trail<E::Exact>) {
        assert!(trail.path().len() >= visit.length - 1);
        if self.0.len() <= visit.length {
            self.0.resize(visit.length + 1, 0);
        }
        self.0[visit.length] += 1;
    }
}

#[test]
fn generalized_diagonals_count_the_beams() {
    // The second difference of the number of beams is the number of generalized diagonals, with holes and
    // shared letters too: every beam is one convex cell, cut by the corners that it meets.
    for case in cases() {
        let longest = 9;
        let (engine, mesh) = support::prepared(&case.table, longest);
        let parts = with_engine!(&engine, engine => {
            walk_beams(engine, &mesh, longest, &Control::new(), |_| Beams::default()).unwrap().0
        });
        let mut beams = vec![1];
        beams.resize(longest + 1, 0);
        for part in parts {
            for (sum, more) in beams.iter_mut().zip(&part.0) {
                *sum += more;
            }
        }
        let n = support::diagonal_counts(&case.table, longest - 2);
        let sides = case.table.sides() as u64;
        assert_eq!(beams, p_from_diagonals(sides, &n, longest), "{}", case.name);
    }
}

#[test]
fn diagonals_with_holes_agree_with_the_oracle() {
    for case in cases() {
        let most = if case.domain.corners.len() > 8 { 2 } else { 3 };
        let expected = oracle::diagonals_in(&case.domain, most);
        let found = support::diagonal_counts(&case.table, most);
        let found: Vec<usize> = found.into_iter().map(|n| n as usize).collect();
        assert_eq!(found, expected, "{}", case.name);
    }
}

#[test]
fn measures_of_bundles_fill_the_phase_space() {
    for case in cases() {
        let longest = 7;
        let (engine, mesh) = support::prepared(&case.table, longest);
        let found = measure(&case.table, &engine, &mesh, longest, 3, &Control::new()).unwrap();
        assert!(
            found.levels.iter().all(|level| level.holds),
            "{}",
            case.name
        );
        // One measure for each word, and together 2·perimeter.
        let language = support::language(&case.table, 3);
        assert_eq!(found.kept.len(), language.count(3), "{}", case.name);
        let sum: f64 = found.kept.iter().map(|m| m.to_f64()).sum();
        assert!((sum - found.whole.to_f64()).abs() < 1e-9, "{}", case.name);
    }
}

#[test]
fn long_words_do_not_depend_on_the_tier_or_the_threads() {
    let all = cases();
    for case in [&all[0], &all[4], &all[7], &all[9]] {
        let longest = 9;
        let fast = support::language_by(&case.table, longest, Arithmetic::Tiered);
        let slow = support::language_by(&case.table, longest, Arithmetic::BigOnly);
        assert_eq!(fast, slow, "{}", case.name);
        let pool = rayon::ThreadPoolBuilder::new()
            .num_threads(3)
            .build()
            .unwrap();
        let threads = pool.install(|| support::language(&case.table, longest));
        assert_eq!(fast, threads, "{}", case.name);
    }
}

#[test]
fn orbits_with_holes_are_those_of_the_fold_and_their_words_belong_to_the_language() {
    let mut random = oracle::shapes::Random(7);
    for case in cases() {
        let tables = TraceTables::new(&case.table);
        let longest = 6;
        let words = levels(&case.table, longest, Arithmetic::Tiered);
        let mut traced = 0;
        while traced < 60 {
            let side = random.below(case.domain.corners.len() as u64) as usize;
            let fraction = Rational::from((1 + random.below(96), 97));
            let mut part = || Rational::from(random.below(41) as i64 - 20);
            let aim = (part(), part());
            if oracle::cross(&case.domain.side_vector(side), &aim) <= 0 {
                continue;
            }
            traced += 1;
            let expected = oracle::trace_in(&case.domain, side, &fraction, (&aim.0, &aim.1), 40);
            let start = Start {
                side: SideId(side as u8),
                fraction: Real::from(fraction),
                aim: Vector::new(Real::from(aim.0), Real::from(aim.1)),
            };
            let mut tracer = Tracer::new(&tables, start).unwrap();
            let mut word = vec![side];
            for point in &expected.points[1..] {
                match tracer.advance() {
                    Step::Hit(side) => word.push(side.0 as usize),
                    Step::Corner(_) => panic!("{}: an early corner", case.name),
                    Step::Period(_) => break,
                }
                let at = tracer.state().point;
                assert_eq!(
                    at,
                    Vector::new(point.0.clone().into(), point.1.clone().into())
                );
            }
            assert_eq!(word, expected.sides[..word.len()], "{}", case.name);
            let letters: Vec<u8> = expected.sides.iter().map(|&s| case.letters[s]).collect();
            for factor in letters.windows(longest) {
                assert!(words[longest].contains(factor), "{}", case.name);
            }
        }
    }
}
