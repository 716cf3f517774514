//! Zeros proved by the symmetry of a path: they must be there, and they must be right.
//!
//! In builds with debug assertions every such proof is checked against integers of any size where it is made; here
//! the walks of many tables that have such zeros are compared as a whole with the walks that use integers of any size
//! only.

mod oracle;
mod support;

use oracle::shapes::Random;
use reboundary::complexity::diagonals;
use reboundary::number::{Real, Tiers};
use reboundary::run::Control;
use reboundary::table::{Table, Vector, default_letters};
use reboundary::unfold::Mesh;
use reboundary::unfold::engine::{AnyEngine, Arithmetic};

fn counts(table: &Table, most: usize, arithmetic: Arithmetic) -> (Vec<u64>, Tiers) {
    let engine = AnyEngine::new(table, most, arithmetic);
    diagonals::count(&engine, &Mesh::new(table), most, &Control::new()).expect("nobody stops it")
}

fn table(corners: &[(i64, i64)], form: i64) -> Table {
    let corners: Vec<Vector> = corners
        .iter()
        .map(|&(x, y)| Vector::new(x.into(), y.into()))
        .collect();
    let letters = default_letters(corners.len());
    Table::new("", corners, Real::from(form), letters).expect("a table")
}

/// Compares the walks and returns the decisions of the fast one.
fn agree(table: &Table, most: usize) -> Tiers {
    let (fast, tiers) = counts(table, most, Arithmetic::Tiered);
    let (slow, slow_tiers) = counts(table, most, Arithmetic::BigOnly);
    assert_eq!(fast, slow, "{:?}", table.corners());
    assert_eq!(
        slow_tiers.total(),
        slow_tiers.big,
        "the slow twin takes no shortcut"
    );
    tiers
}

#[test]
fn right_triangles_have_half_turns() {
    let mut random = Random(11);
    for _ in 0..12 {
        let (a, b) = (2 + random.below(30) as i64, 2 + random.below(30) as i64);
        if a == b {
            continue;
        }
        let tiers = agree(&table(&[(0, 0), (a, 0), (0, b)], 1), 26);
        assert!(tiers.symmetry > 0, "legs {a} and {b}");
    }
}

#[test]
fn triangles_without_a_rational_angle_have_mirrors_and_translations() {
    let mut random = Random(12);
    let mut proved = 0;
    for _ in 0..12 {
        let (x, y) = (1 + random.below(8) as i64, 3 + random.below(9) as i64);
        proved += agree(&table(&[(0, 0), (9, 0), (x, y)], 1), 26).symmetry;
    }
    assert!(proved > 0);
}

#[test]
fn corners_of_60_and_45_degrees_beside_irrational_ones() {
    // Form 3: slopes of √3 are rational, so corner 0 has 60 or 30 degrees; the others are irrational.
    for corners in [
        &[(0, 0), (7, 0), (2, 2)],
        &[(0, 0), (7, 0), (6, 2)],
        &[(0, 0), (11, 0), (3, 1)],
    ] {
        agree(&table(corners, 3), 24);
    }
    // 45 degrees at corner 0: half-turns after four crossings.
    for corners in [&[(0, 0), (7, 0), (2, 2)], &[(0, 0), (9, 0), (4, 4)]] {
        let tiers = agree(&table(corners, 1), 24);
        assert!(tiers.symmetry > 0, "{corners:?}");
    }
}

#[test]
fn quadrilaterals_with_right_angles_symmetric_and_not() {
    for (corners, has_proofs) in [
        // Right trapezoids.
        ([(0, 0), (5, 0), (3, 4), (0, 4)], true),
        ([(0, 0), (7, 0), (2, 3), (0, 3)], true),
        // Two opposite right angles.
        ([(0, 0), (4, 0), (4, 2), (0, 4)], true),
        // Nonconvex, with one right angle.
        ([(0, 0), (6, 0), (1, 1), (0, 5)], true),
        // Kite, isosceles trapezoid, parallelogram: zeros from the symmetry of the table, not of the path.
        ([(0, 0), (3, -2), (7, 0), (3, 2)], false),
        ([(0, 0), (8, 0), (6, 3), (2, 3)], false),
        ([(0, 0), (5, 0), (7, 3), (2, 3)], false),
    ] {
        let tiers = agree(&table(&corners, 1), 14);
        assert!(tiers.symmetry > 0 || !has_proofs, "{corners:?}");
    }
}

#[test]
fn nearly_symmetric_tables_get_no_false_zero() {
    // A right angle off by 10⁻³⁰: floating point sees the same table, and no zero is left.
    let tiny = Real::from(rug::Rational::from((
        rug::Integer::from(1),
        rug::Integer::from(rug::Integer::u_pow_u(10, 30)),
    )));
    let corners = vec![
        Vector::new(0.into(), 0.into()),
        Vector::new(4.into(), 0.into()),
        Vector::new(tiny, 3.into()),
    ];
    let bent = Table::new("", corners, 1.into(), default_letters(3)).expect("a table");
    let right = table(&[(0, 0), (4, 0), (0, 3)], 1);
    let tiers = agree(&bent, 24);
    assert!(
        tiers.enclosure > 0,
        "differences of 10⁻³⁰ are beyond floating point"
    );
    assert_ne!(
        counts(&bent, 24, Arithmetic::Tiered).0,
        counts(&right, 24, Arithmetic::Tiered).0
    );
}
