//! The slow oracle against published numbers, against its own definition, and against random orbits.

mod oracle;

use oracle::shapes::Random;
use oracle::{
    Point, diagonals, is_convex, is_table, languages, lattice_table, random_polygon, trace,
};
use rug::Rational;
use std::collections::BTreeSet;

const SQUARE: [(i32, i32); 4] = [(0, 0), (1, 0), (1, 1), (0, 1)];
const L_OF_THREE_SQUARES: [(i32, i32); 6] = [(0, 0), (2, 0), (2, 1), (1, 1), (1, 2), (0, 2)];
/// A nonconvex table in general position.
const CROOKED: [(i32, i32); 5] = [(0, 0), (7, 1), (3, 2), (5, 6), (1, 5)];

fn counts(corners: &[Point], longest: usize) -> Vec<usize> {
    languages(corners, longest)
        .iter()
        .map(BTreeSet::len)
        .collect()
}

fn totient(n: usize) -> usize {
    (1..=n).filter(|&m| gcd(m, n) == 1).count()
}

fn gcd(a: usize, b: usize) -> usize {
    if b == 0 { a } else { gcd(b, a % b) }
}

/// OEIS A005598: A(n) = 1 + Σ_{i=1..n} (n+1−i)·φ(i), the number of balanced words of length n.
fn balanced_words(n: usize) -> usize {
    1 + (1..=n).map(|i| (n + 1 - i) * totient(i)).sum::<usize>()
}

/// Words of the square: p(n) = 4·A(n) − 4 (Mignosi, Theoret. Comput. Sci. 82 (1991); Berstel and Pocchiola,
/// Int. J. Algebra Comput. 3 (1993)).
#[test]
fn square_complexity_oeis_a005598() {
    let p = counts(&lattice_table(&SQUARE), 8);
    let expected: Vec<usize> = (1..=8).map(|n| 4 * balanced_words(n) - 4).collect();
    assert_eq!(expected[..4], [4, 12, 28, 52]);
    assert_eq!(p[1..], expected);
}

/// Every rectangle has the square's numbers (same sources), whatever its sides.
#[test]
fn rectangle_complexity_is_that_of_the_square() {
    let p = counts(&lattice_table(&[(0, 0), (97, 0), (97, 5), (0, 5)]), 6);
    let expected: Vec<usize> = (1..=6).map(|n| 4 * balanced_words(n) - 4).collect();
    assert_eq!(p[1..], expected);
}

/// Opposite sides of the square given one letter: p(n) = A(n), OEIS A005598.
#[test]
fn square_with_two_letters_oeis_a005598() {
    for (n, words) in languages(&lattice_table(&SQUARE), 7).iter().enumerate() {
        let merged: BTreeSet<Vec<u8>> = words
            .iter()
            .map(|w| w.iter().map(|s| s % 2).collect())
            .collect();
        assert_eq!(merged.len(), balanced_words(n), "length {n}");
    }
}

/// N(n) = 4·φ(n+2) for the square: the lattice points visible from a corner.
#[test]
fn square_diagonals_are_totients() {
    let found = diagonals(&lattice_table(&SQUARE), 7);
    let expected: Vec<usize> = (0..=7).map(|n| 4 * totient(n + 2)).collect();
    assert_eq!(found, expected);
}

/// Recomputed by an independent program, as are the next two.
#[test]
fn right_isosceles_complexity_recomputed() {
    let p = counts(&lattice_table(&[(0, 0), (1, 0), (0, 1)]), 9);
    assert_eq!(p[1..], [3, 6, 10, 18, 28, 38, 54, 74, 96]);
}

#[test]
fn legs_three_and_four_complexity_recomputed() {
    let p = counts(&lattice_table(&[(0, 0), (4, 0), (0, 3)]), 9);
    assert_eq!(p[1..], [3, 6, 10, 18, 30, 44, 61, 82, 110]);
}

#[test]
fn l_of_three_squares_complexity_recomputed() {
    let p = counts(&lattice_table(&L_OF_THREE_SQUARES), 5);
    assert_eq!(p[1..], [6, 22, 60, 124, 224]);
}

/// Words of length two are the ordered pairs of sides of which parts see each other. In this dart with the
/// reflex corner (2, 1), sides 0 and 1 face away from each other and all other pairs see each other.
#[test]
fn dart_has_the_pairs_of_sides_counted_by_hand() {
    let dart = lattice_table(&[(0, 0), (2, 1), (4, 0), (2, 4)]);
    let words = &languages(&dart, 2)[2];
    let expected: BTreeSet<Vec<u8>> = (0..4u8)
        .flat_map(|a| (0..4u8).map(move |b| vec![a, b]))
        .filter(|w| w[0] != w[1] && *w != [0, 1] && *w != [1, 0])
        .collect();
    assert_eq!(*words, expected);
}

/// A U-shaped table: the pairs of corners that see each other through the interior, listed by hand. Corners 4
/// and 6, 5 and 3 see each other outside only; 0 and 3 are joined by a line through the reflex corner 5.
#[test]
fn inner_diagonals_of_a_u_counted_by_hand() {
    let u = [
        (0, 0),
        (6, 0),
        (6, 4),
        (4, 4),
        (4, 2),
        (2, 2),
        (2, 4),
        (0, 4),
    ];
    let pairs = [
        (0, 4),
        (0, 5),
        (0, 6),
        (1, 3),
        (1, 4),
        (1, 5),
        (2, 4),
        (5, 7),
    ];
    assert_eq!(diagonals(&lattice_table(&u), 0), [2 * pairs.len()]);
}

/// p(n+2) − 2p(n+1) + p(n) = N(n) for n ≥ 1: Cassaigne, Hubert, Troubetzkoy, Ann. Inst. Fourier 52 (2002)
/// 835–847 for convex tables; the crate claims it for all simple polygons, so it is tried on those too.
#[test]
fn second_difference_counts_the_diagonals() {
    let mut tables = vec![
        lattice_table(&L_OF_THREE_SQUARES),
        lattice_table(&CROOKED),
        lattice_table(&[(0, 0), (4, 0), (0, 3)]),
    ];
    for seed in 0..15 {
        tables.push(random_polygon(seed, 3 + seed as usize % 5, seed % 3 == 0));
    }
    for table in &tables {
        let p = counts(table, 6);
        let n = diagonals(table, 4);
        for length in 1..=4 {
            let second = p[length + 2] + p[length] - 2 * p[length + 1];
            assert_eq!(second, n[length], "length {length} of {table:?}");
        }
    }
}

/// An orbit run backwards is an orbit, a piece of an orbit is an orbit piece, and an orbit piece that meets no
/// corner has neighbours that go on.
#[test]
fn languages_are_factorial_reversible_prolongable() {
    for table in &small_tables() {
        let found = languages(table, 5);
        assert_eq!(found[0], BTreeSet::from([Vec::new()]));
        assert_eq!(found[1].len(), table.len());
        for n in 1..=5 {
            for word in &found[n] {
                let reversed: Vec<u8> = word.iter().rev().copied().collect();
                assert!(found[n].contains(&reversed), "{word:?} in {table:?}");
                assert!(found[n - 1].contains(&word[1..]), "{word:?} in {table:?}");
                assert!(
                    found[n - 1].contains(&word[..n - 1]),
                    "{word:?} in {table:?}"
                );
            }
            let heads: BTreeSet<&[u8]> = found[n].iter().map(|w| &w[..n - 1]).collect();
            let tails: BTreeSet<&[u8]> = found[n].iter().map(|w| &w[1..]).collect();
            assert_eq!(heads.len(), found[n - 1].len(), "length {n} of {table:?}");
            assert_eq!(tails.len(), found[n - 1].len(), "length {n} of {table:?}");
        }
    }
}

/// Random orbits are sound but incomplete evidence: each of their words must be in the language. Run both
/// ways, enough of them find the whole language of length 4 in these tables without thin passages.
#[test]
fn random_orbits_stay_in_the_language_and_fill_it() {
    for corners in [&SQUARE[..], &CROOKED, &L_OF_THREE_SQUARES] {
        let table = lattice_table(corners);
        let found = languages(&table, 6);
        let mut random = Random(2024);
        let mut short = BTreeSet::new();
        for _ in 0..5000 {
            let orbit = random_orbit(&mut random, &table, 6);
            let word: Vec<u8> = orbit.sides.iter().map(|&s| s as u8).collect();
            assert!(found[word.len()].contains(&word), "{word:?} in {table:?}");
            for piece in word.windows(4) {
                short.insert(piece.to_vec());
                short.insert(piece.iter().rev().copied().collect());
            }
        }
        assert_eq!(short, found[4], "{table:?}");
    }
}

/// Relabelling the corners cyclically relabels the words; a mirror image or another scale changes nothing.
#[test]
fn languages_follow_the_symmetries_of_the_description() {
    for table in &small_tables() {
        let k = table.len() as u8;
        let found = &languages(table, 4)[4];
        let mut turned = table.clone();
        turned.rotate_left(1);
        let relabelled: BTreeSet<Vec<u8>> = languages(&turned, 4)[4]
            .iter()
            .map(|w| w.iter().map(|s| (s + 1) % k).collect())
            .collect();
        assert_eq!(*found, relabelled, "{table:?}");

        let scaled_mirror: Vec<Point> = table
            .iter()
            .rev()
            .map(|(x, y)| (Rational::from(x * -7), Rational::from(y * 7)))
            .collect();
        // Corner i is now corner k − 1 − i, so side i is now side k − 2 − i.
        let mirrored: BTreeSet<Vec<u8>> = languages(&scaled_mirror, 4)[4]
            .iter()
            .map(|w| w.iter().map(|s| (2 * k - 2 - s) % k).collect())
            .collect();
        assert_eq!(*found, mirrored, "{table:?}");
    }
}

/// Straight up and down between two sides of the square, and a diagonal bounce with points known by hand.
#[test]
fn traces_in_the_square_by_hand() {
    let square = lattice_table(&SQUARE);
    let (half, third) = (Rational::from((1, 2)), Rational::from((1, 3)));
    let (zero, one) = (Rational::new(), Rational::from(1));
    let up = trace(&square, 0, &half, (&zero, &one), 5);
    assert_eq!(up.sides, [0, 2, 0, 2, 0]);
    assert_eq!(up.corner, None);

    let slanted = trace(&square, 0, &third, (&one, &one), 5);
    assert_eq!(slanted.sides, [0, 1, 2, 3, 0]);
    let two_thirds = Rational::from((2, 3));
    assert_eq!(slanted.points[1], (one.clone(), two_thirds.clone()));
    assert_eq!(slanted.points[2], (two_thirds, one.clone()));
    assert_eq!(slanted.points[3], (zero.clone(), third.clone()));
    assert_eq!(slanted.points[4], slanted.points[0]);

    let two = Rational::from(2);
    let to_corner = trace(&square, 0, &half, (&one, &two), 5);
    assert_eq!((to_corner.sides, to_corner.corner), (vec![0], Some(2)));
}

/// A trace grazing a reflex corner ends there, though the straight line could go on.
#[test]
fn trace_ends_at_a_grazed_corner() {
    let l_shape = lattice_table(&L_OF_THREE_SQUARES);
    let one = Rational::from(1);
    let left = Rational::from(-1);
    // From (3/2, 0) … the direction (−1, 2) goes through the reflex corner (1, 1).
    let orbit = trace(
        &l_shape,
        0,
        &Rational::from((3, 4)),
        (&left, &Rational::from(2)),
        4,
    );
    assert_eq!((orbit.sides, orbit.corner), (vec![0], Some(3)));
    // From (1, 0) straight up: along side 3, so that the reflex corner is met first.
    let orbit = trace(
        &l_shape,
        0,
        &Rational::from((1, 2)),
        (&Rational::new(), &one),
        4,
    );
    assert_eq!((orbit.sides, orbit.corner), (vec![0], Some(3)));
}

/// The random tables are tables, are as convex as asked, don't change from run to run, and cover what they
/// promise: collinear corners that aren't neighbours, right-angled shapes, tiny angles, big fractions.
#[test]
fn random_polygons_are_tables_of_every_kind() {
    let (mut aligned, mut right_angled, mut sharp, mut fractions) = (0, 0, 0, 0);
    for seed in 0..150 {
        let (k, convex) = (3 + seed as usize % 6, seed % 2 == 0);
        for convex in [convex, !convex] {
            let table = random_polygon(seed, k, convex);
            assert_eq!(table, random_polygon(seed, k, convex));
            assert_eq!(table.len(), k);
            assert!(is_table(&table), "seed {seed}: {table:?}");
            assert_eq!(
                is_convex(&table),
                convex || k == 3,
                "seed {seed}: {table:?}"
            );
            aligned += has_aligned_corners(&table) as usize;
            right_angled += (k >= 6 && is_right_angled(&table)) as usize;
            sharp += has_sharp_corner(&table) as usize;
            fractions += table.iter().any(|c| *c.0.denom() > 10_000) as usize;
        }
    }
    for (kind, count) in [
        ("aligned", aligned),
        ("right-angled", right_angled),
        ("sharp", sharp),
        ("fractions", fractions),
    ] {
        assert!(count >= 5, "{kind}: {count}");
    }
}

#[test]
fn broken_polygons_are_not_tables() {
    let bow_tie = [(0, 0), (2, 2), (2, 0), (0, 2)];
    let clockwise = [(0, 0), (0, 1), (1, 0)];
    let straight = [(0, 0), (1, 0), (2, 0), (0, 2)];
    let touching = [(0, 0), (4, 0), (4, 4), (2, 0), (0, 4)];
    let folded_back = [(0, 0), (4, 0), (2, 0), (2, 3)];
    for corners in [&bow_tie[..], &clockwise, &straight, &touching, &folded_back] {
        assert!(!is_table(&lattice_table(corners)), "{corners:?}");
    }
    assert!(is_table(&lattice_table(&CROOKED)));
}

fn small_tables() -> Vec<Vec<Point>> {
    let mut tables = vec![lattice_table(&CROOKED), lattice_table(&L_OF_THREE_SQUARES)];
    for seed in 100..108 {
        tables.push(random_polygon(seed, 3 + seed as usize % 5, seed % 2 == 0));
    }
    tables
}

fn random_orbit(random: &mut Random, table: &[Point], hits: usize) -> oracle::Trace {
    let side = random.below(table.len() as u64) as usize;
    let fraction = Rational::from((1 + random.below(9_999), 10_000));
    let axis = oracle::between(&table[side], &table[(side + 1) % table.len()]);
    loop {
        let mut number = || Rational::from(random.below(20_001)) - 10_000u32;
        let aim = (number(), number());
        if oracle::cross(&axis, &aim) > 0 {
            return trace(table, side, &fraction, (&aim.0, &aim.1), hits);
        }
    }
}

fn has_aligned_corners(table: &[Point]) -> bool {
    let k = table.len();
    let aligned = |a: usize, b: usize, c: usize| {
        let (u, v) = (
            oracle::between(&table[a], &table[b]),
            oracle::between(&table[a], &table[c]),
        );
        oracle::cross(&u, &v).is_zero()
    };
    (0..k).any(|a| (a + 1..k).any(|b| (b + 1..k).any(|c| aligned(a, b, c))))
}

fn is_right_angled(table: &[Point]) -> bool {
    let k = table.len();
    (0..k).all(|i| {
        let to_next = oracle::between(&table[i], &table[(i + 1) % k]);
        let to_previous = oracle::between(&table[i], &table[(i + k - 1) % k]);
        oracle::dot(&to_next, &to_previous).is_zero()
    })
}

/// An angle below 1/20 radian, by its tangent.
fn has_sharp_corner(table: &[Point]) -> bool {
    let k = table.len();
    (0..k).any(|i| {
        let to_next = oracle::between(&table[i], &table[(i + 1) % k]);
        let to_previous = oracle::between(&table[i], &table[(i + k - 1) % k]);
        let (sine, cosine) = (
            oracle::cross(&to_next, &to_previous).abs(),
            oracle::dot(&to_next, &to_previous),
        );
        cosine > 0 && sine * 20u32 < cosine
    })
}
