//! Published and independently recomputed complexities, by beams and by fans.

mod support;

use reboundary::table::Table;
use support::{
    coprime_below, diagonal_counts, equilateral, half_equilateral, integer_table,
    l_of_three_squares, language, legs_three_and_four, p_by_beams, p_by_fans, regular_pentagon,
    right_isosceles, unit_square, words,
};

/// Checks p(1), p(2), … by both routes.
fn assert_complexity(table: &Table, expected: &[u64]) {
    let beams = p_by_beams(table, expected.len());
    let fans = p_by_fans(table, expected.len());
    assert_eq!(
        (beams[0], fans[0]),
        (1, 1),
        "the empty word: {}",
        table.title()
    );
    assert_eq!(&beams[1..], expected, "by beams: {}", table.title());
    assert_eq!(&fans[1..], expected, "by fans: {}", table.title());
}

/// A(n) = 1 + Σ_{i=1..n} (n+1−i)·φ(i), the number of balanced words: OEIS A005598.
fn balanced_words(n: u64) -> u64 {
    1 + (1..=n).map(|i| (n + 1 - i) * coprime_below(i)).sum::<u64>()
}

/// The first terms of OEIS A005598 [from memory], so that the formula above is not its own witness.
#[test]
fn balanced_words_start_as_oeis_a005598() {
    let first: Vec<u64> = (0..=12).map(balanced_words).collect();
    assert_eq!(first, [1, 2, 4, 8, 14, 24, 36, 54, 76, 104, 136, 178, 224]);
}

/// p(n) = 4·A(n) − 4, A as in OEIS A005598: Mignosi, Theoret. Comput. Sci. 82 (1991); Berstel and Pocchiola,
/// Int. J. Algebra Comput. 3 (1993).
#[test]
fn square_complexity_oeis_a005598() {
    let expected: Vec<u64> = (1..=40).map(|n| 4 * balanced_words(n) - 4).collect();
    assert_complexity(&unit_square(), &expected);
}

/// The same numbers for every rectangle (same sources): a thin one, and one with side ratio √2.
#[test]
fn rectangle_complexity_is_that_of_the_square() {
    let expected: Vec<u64> = (1..=25).map(|n| 4 * balanced_words(n) - 4).collect();
    let corners = [(0, 0), (97, 0), (97, 5), (0, 5)];
    assert_complexity(&integer_table("97 by 5", 1, &corners), &expected);
    let corners = [(0, 0), (1, 0), (1, 1), (0, 1)];
    assert_complexity(&integer_table("1 by root 2", 2, &corners), &expected);
}

/// Opposite sides of the square given one letter: p(n) = A(n), OEIS A005598.
#[test]
fn square_with_two_letters_oeis_a005598() {
    let language = language(&unit_square(), 20);
    for n in 0..=20 {
        let merged: std::collections::BTreeSet<Vec<u8>> = words(&language, n)
            .iter()
            .map(|w| w.iter().map(|side| side % 2).collect())
            .collect();
        assert_eq!(merged.len() as u64, balanced_words(n as u64), "length {n}");
    }
}

/// N(n) = 4·φ(n+2): the lattice points that are visible from a corner.
#[test]
fn square_diagonals_are_totients() {
    let expected: Vec<u64> = (0..=60).map(|n| 4 * coprime_below(n + 2)).collect();
    assert_eq!(diagonal_counts(&unit_square(), 60), expected);
}

/// Recomputed by an independent program.
#[test]
fn equilateral_complexity_recomputed() {
    let expected = [
        3, 6, 12, 18, 30, 42, 60, 78, 108, 138, 174, 210, 264, 318, 384, 450, 534, 618, 714, 810,
    ];
    assert_complexity(&equilateral(), &expected);
}

/// N(2m − 3) = 3·φ(m) for m ≥ 2 and nothing else; recomputed by an independent program.
#[test]
fn equilateral_diagonals_are_totients() {
    let expected: Vec<u64> = (0..=60)
        .map(|n| {
            if n % 2 == 1 {
                3 * coprime_below((n + 3) / 2)
            } else {
                0
            }
        })
        .collect();
    assert_eq!(diagonal_counts(&equilateral(), 60), expected);
}

/// Recomputed by an independent program.
#[test]
fn right_isosceles_complexity_recomputed() {
    let expected = [
        3, 6, 10, 18, 28, 38, 54, 74, 96, 122, 156, 194, 240, 286, 340, 402, 474, 550, 638, 734,
    ];
    assert_complexity(&right_isosceles(), &expected);
}

/// Recomputed by an independent program.
#[test]
fn angles_30_60_90_complexity_recomputed() {
    let expected = [
        3, 6, 10, 16, 24, 36, 52, 70, 92, 118, 150, 184, 224, 270, 322, 380, 446, 518, 600, 690,
    ];
    assert_complexity(&half_equilateral(), &expected);
}

/// Recomputed by an independent program.
#[test]
fn regular_pentagon_complexity_recomputed() {
    let expected = [
        5, 20, 50, 100, 190, 300, 460, 660, 930, 1220, 1610, 2060, 2620, 3240,
    ];
    assert_complexity(&regular_pentagon(), &expected);
}

/// Recomputed by an independent program.
#[test]
fn legs_three_and_four_complexity_recomputed() {
    let expected = [3, 6, 10, 18, 30, 44, 61, 82, 110, 144, 183, 228, 282, 340];
    assert_complexity(&legs_three_and_four(), &expected);
}

/// Recomputed by an independent program.
#[test]
fn l_of_three_squares_complexity_recomputed() {
    let expected = [6, 22, 60, 124, 224, 364, 560, 808, 1136, 1516];
    assert_complexity(&l_of_three_squares(), &expected);
}

/// p(n)/n³ and its extrapolation 2·p(n)/n³ − p(n/2)/(n/2)³, which a term in n² does not disturb.
fn cubic_ratio(table: &Table, n: usize) -> (f64, f64) {
    assert_eq!(
        p_by_beams(table, 60),
        p_by_fans(table, 60),
        "{}",
        table.title()
    );
    let p = p_by_fans(table, n);
    let ratio = |n: usize| p[n] as f64 / (n as f64).powi(3);
    (ratio(n), 2.0 * ratio(n) - ratio(n / 2))
}

/// The limits of p(n)/n³ of tables that tile, derived from lattice counts (existence: Cassaigne, Hubert,
/// Troubetzkoy, Ann. Inst. Fourier 52 (2002) 835–847). At n = 600 the exact lattice counts are 1.0101 times
/// the limit for the equilateral triangle and 1.0050 for the square, so 1 percent is reached a little later.
#[test]
fn cubic_limits_of_the_tables_that_tile() {
    let square_of_pi = std::f64::consts::PI.powi(2);
    for (table, limit) in [
        (unit_square(), 4.0 / square_of_pi),
        (equilateral(), 3.0 / (4.0 * square_of_pi)),
        (right_isosceles(), 2.0 / (3.0 * square_of_pi)),
        (half_equilateral(), 19.0 / (30.0 * square_of_pi)),
    ] {
        let (ratio, extrapolated) = cubic_ratio(&table, 640);
        let error = ratio / limit - 1.0;
        assert!(error.abs() < 0.01, "{}: {error}", table.title());
        let error = extrapolated / limit - 1.0;
        assert!(
            error.abs() < 3e-4,
            "{}: {error} extrapolated",
            table.title()
        );
    }
}

/// About 1.0041, recomputed by an independent program.
#[test]
fn cubic_limit_of_the_regular_pentagon_recomputed() {
    let (_, extrapolated) = cubic_ratio(&regular_pentagon(), 600);
    assert!((extrapolated - 1.0041).abs() < 1.5e-3, "{extrapolated}");
}
