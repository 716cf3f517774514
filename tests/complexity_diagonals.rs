//! Lists of generalized diagonals against lattices, and the laws that lists obey.

mod oracle;
mod support;

use reboundary::complexity::counts::{Counts, first_disagreement, p_from_diagonals};
use reboundary::complexity::diagonals::Diagonal;
use reboundary::number::Real;
use reboundary::table::{CornerId, SideId, Table};
use rug::Rational;
use std::collections::{BTreeMap, BTreeSet};
use support::{
    diagonal_counts, diagonals, gcd, named_tables, p_by_beams, rational_table, unit_square,
};

fn tables() -> Vec<Table> {
    let mut tables = named_tables();
    for seed in 500..530 {
        let corners = oracle::random_polygon(seed, 3 + seed as usize % 6, seed % 3 == 0);
        tables.push(rational_table(&format!("seed {seed}"), 1, &corners));
    }
    tables
}

fn code_bytes(diagonal: &Diagonal) -> Vec<u8> {
    diagonal.code.iter().map(|side| side.0).collect()
}

/// The sides that the segment from (0, 0) to (a, b) crosses in the square unfolded to the unit grid, a and b
/// coprime: the vertical line x = j is side 1 for odd j and side 3 for even j, the horizontal line y = j side 2
/// for odd j and side 0 for even j. Lines are met in the order of j/a and j/b, without ties.
fn grid_code(a: u64, b: u64) -> Vec<u8> {
    let vertical = (1..a).map(|j| (j * b, if j % 2 == 1 { 1 } else { 3 }));
    let horizontal = (1..b).map(|j| (j * a, if j % 2 == 1 { 2 } else { 0 }));
    let mut crossings: Vec<(u64, u8)> = vertical.chain(horizontal).collect();
    crossings.sort();
    crossings.into_iter().map(|(_, side)| side).collect()
}

/// The corner of the unit square at the lattice point: corners are counted round.
fn grid_corner(x: u64, y: u64) -> u8 {
    match (x % 2, y % 2) {
        (0, 0) => 0,
        (1, 0) => 1,
        (1, 1) => 2,
        _ => 3,
    }
}

/// From each corner, one diagonal for each primitive vector into its quadrant. The three other corners see the
/// grid of the first one turned by quarter turns, which renames side s to s + 1 and corner c to c + 1.
#[test]
fn square_diagonals_are_the_primitive_vectors() {
    let most = 40;
    let mut expected = BTreeSet::new();
    for a in 1..=most + 1 {
        for b in (1..=most + 2 - a).filter(|b| gcd(a, *b) == 1) {
            for turn in 0..4u8 {
                let code: Vec<u8> = grid_code(a, b)
                    .iter()
                    .map(|side| (side + turn) % 4)
                    .collect();
                let end = (grid_corner(a, b) + turn) % 4;
                let (x, y) = (a as i64, b as i64);
                let vector = [(x, y), (-y, x), (-x, -y), (y, -x)][turn as usize];
                expected.insert((turn, end, code, vector));
            }
        }
    }
    let listed = diagonals(&unit_square(), most as usize);
    let coordinate = |value: &Real| {
        let value = value.to_rational().expect("rational");
        assert_eq!(*value.denom(), 1);
        value.numer().to_i64().expect("small")
    };
    let found: BTreeSet<_> = listed
        .iter()
        .map(|d| {
            let vector = (coordinate(&d.displacement.x), coordinate(&d.displacement.y));
            (d.start.0, d.end.0, code_bytes(d), vector)
        })
        .collect();
    assert_eq!(found.len(), listed.len(), "no diagonal twice");
    assert_eq!(found, expected);
    // N(n) = 4·φ(n+2), by counting the primitive vectors with a + b = n + 2.
    for n in 0..=most {
        let of_length = listed.iter().filter(|d| d.code.len() as u64 == n).count() as u64;
        assert_eq!(of_length, 4 * support::coprime_below(n + 2));
    }
}

/// Unfolded, the equilateral triangle of side 2 covers the lattice of x + y√−3 with x + y even. From a corner the
/// diagonals within its angle are the primitive vectors: squared lengths 4(a² + ab + b²) with coprime a, b ≥ 1, and
/// a step over the grid of three directions crosses 2(a + b) − 3 sides.
#[test]
fn equilateral_diagonals_are_the_primitive_vectors() {
    let most = 31;
    let mut expected: BTreeMap<(usize, u64), usize> = BTreeMap::new();
    for a in 1..=most {
        for b in (1..=most).filter(|b| gcd(a, *b) == 1 && 2 * (a + b) - 3 <= most) {
            let crossed = (2 * (a + b) - 3) as usize;
            *expected
                .entry((crossed, 4 * (a * a + a * b + b * b)))
                .or_default() += 3;
        }
    }
    let table = support::equilateral();
    let mut found: BTreeMap<(usize, u64), usize> = BTreeMap::new();
    for diagonal in diagonals(&table, most as usize) {
        let squared = diagonal
            .displacement
            .squared_length(table.form())
            .to_rational();
        let squared = squared.expect("rational").numer().to_u64().expect("small");
        *found.entry((diagonal.code.len(), squared)).or_default() += 1;
    }
    assert_eq!(found, expected);
}

/// The same segment from its other end: ends exchanged, code reversed, same length. Its displacement is turned by
/// the unfolding, so only the length is compared.
#[test]
fn each_diagonal_is_listed_from_both_ends() {
    for table in tables() {
        let listed = diagonals(&table, 7);
        let squared = |d: &Diagonal| d.displacement.squared_length(table.form());
        let by_ends: BTreeMap<(CornerId, CornerId, Vec<SideId>), Real> = listed
            .iter()
            .map(|d| ((d.start, d.end, d.code.clone()), squared(d)))
            .collect();
        assert_eq!(
            by_ends.len(),
            listed.len(),
            "no diagonal twice: {}",
            table.title()
        );
        for diagonal in &listed {
            let reversed = diagonal.code.iter().rev().copied().collect();
            let back = by_ends.get(&(diagonal.end, diagonal.start, reversed));
            assert_eq!(
                back,
                Some(&squared(diagonal)),
                "{diagonal:?} of {}",
                table.title()
            );
            assert!(squared(diagonal) > Real::from(0));
        }
    }
}

/// By number of crossings, then start, code and end; and as many as are counted.
#[test]
fn lists_are_sorted_and_complete() {
    for table in tables() {
        let listed = diagonals(&table, 6);
        let key = |d: &Diagonal| (d.code.len(), d.start, d.code.clone(), d.end);
        assert!(
            listed.is_sorted_by(|a, b| key(a) < key(b)),
            "{}",
            table.title()
        );
        let mut n = vec![0; 7];
        for diagonal in &listed {
            n[diagonal.code.len()] += 1;
        }
        assert_eq!(n, diagonal_counts(&table, 6), "{}", table.title());
        let shorter = diagonals(&table, 3);
        assert_eq!(shorter, listed[..shorter.len()], "{}", table.title());
        assert_eq!(shorter.len() as u64, n[..=3].iter().sum::<u64>());
    }
}

/// Without crossings: from corner to corner inside the table, so with the displacement between the corners, and never
/// along a side.
#[test]
fn diagonals_without_crossings_join_the_corners_themselves() {
    for table in tables() {
        let k = table.sides() as u8;
        for diagonal in diagonals(&table, 0) {
            let (start, end) = (diagonal.start.0, diagonal.end.0);
            assert!(
                (start + 1) % k != end && (end + 1) % k != start,
                "{}",
                table.title()
            );
            let straight = table
                .corner(end as usize)
                .minus(table.corner(start as usize));
            assert_eq!(diagonal.displacement, straight, "{}", table.title());
        }
    }
}

/// In a convex table every two corners that are no neighbours see each other: N(0) = k(k − 3).
#[test]
fn convex_tables_have_all_inner_diagonals() {
    for seed in 900..930 {
        let k = 3 + seed as usize % 6;
        let corners = oracle::random_polygon(seed, k, true);
        let table = rational_table(&format!("seed {seed}"), 1, &corners);
        assert_eq!(
            diagonal_counts(&table, 0),
            [(k * (k - 3)) as u64],
            "seed {seed}"
        );
    }
}

/// p(2) = 2k + N(0), which is where the second route starts; p(2) here by beams.
#[test]
fn words_of_length_two_from_inner_diagonals() {
    for table in tables() {
        let expected = 2 * table.sides() as u64 + diagonal_counts(&table, 0)[0];
        assert_eq!(p_by_beams(&table, 2)[2], expected, "{}", table.title());
    }
}

/// b(n) = N(n) for n ≥ 1: Cassaigne, Hubert, Troubetzkoy, Ann. Inst. Fourier 52 (2002) 835–847 for convex tables; here
/// also nonconvex ones and irrational angles.
#[test]
fn second_differences_count_the_diagonals() {
    for table in tables() {
        let counts = Counts::from_p(p_by_beams(&table, 11));
        let n: Vec<i64> = diagonal_counts(&table, 9)
            .iter()
            .map(|n| *n as i64)
            .collect();
        assert_eq!(counts.second_difference[1..], n[1..], "{}", table.title());
    }
}

/// A count that is wrong by one in one place shows at the length where it first matters.
#[test]
fn a_wrong_count_makes_the_routes_disagree() {
    let table = support::crooked();
    let beams = p_by_beams(&table, 10);
    let honest = diagonal_counts(&table, 8);
    let sides = table.sides() as u64;
    assert_eq!(
        first_disagreement(&beams, &p_from_diagonals(sides, &honest, 10)),
        None
    );
    for at in 0..=8 {
        let mut wrong = honest.clone();
        wrong[at] += 1;
        let fans = p_from_diagonals(sides, &wrong, 10);
        assert_eq!(first_disagreement(&beams, &fans), Some(at + 2));
    }
}

/// Diagonals in a rectangle are stretched diagonals of the square: same codes, coordinates times the sides.
#[test]
fn rectangles_stretch_the_square() {
    let (width, height) = (Rational::from((7, 3)), Rational::from((2, 5)));
    let zero = Rational::new();
    let corners = [
        (zero.clone(), zero.clone()),
        (width.clone(), zero.clone()),
        (width.clone(), height.clone()),
        (zero, height.clone()),
    ];
    let rectangle = diagonals(&rational_table("rectangle", 1, &corners), 12);
    let square = diagonals(&unit_square(), 12);
    assert_eq!(rectangle.len(), square.len());
    for (stretched, plain) in rectangle.iter().zip(&square) {
        assert_eq!((stretched.start, stretched.end), (plain.start, plain.end));
        assert_eq!(stretched.code, plain.code);
        assert_eq!(
            stretched.displacement.x,
            &plain.displacement.x * &Real::from(width.clone())
        );
        assert_eq!(
            stretched.displacement.y,
            &plain.displacement.y * &Real::from(height.clone())
        );
    }
}
