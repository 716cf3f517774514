//! Orbits of tables and aims that floating point cannot hold: words and starts depend on no size.

mod oracle;
mod support;

use reboundary::number::Real;
use reboundary::orbit::ensemble::{StartLaw, sample};
use reboundary::orbit::trace::trace;
use reboundary::orbit::{Start, TraceTables};
use reboundary::table::{SideId, Table, Vector};
use rug::{Integer, Rational};
use support::{crooked, half_equilateral, unit_square};

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

/// 10^−places.
fn tiny(places: u32) -> Real {
    Real::from(Rational::from((
        Integer::from(1),
        Integer::from(Integer::u_pow_u(10, places)),
    )))
}

/// A table and a factor for its coordinates.
fn scaled(table: &Table, factor: &Real) -> Table {
    let corners = table.corners().iter().map(|c| c.times(factor)).collect();
    Table::new("", corners, table.form().clone(), table.letters().to_vec()).unwrap()
}

#[test]
fn no_size_of_table_or_aim_changes_a_word() {
    for (name, table) in [
        ("crooked", crooked()),
        ("half equilateral", half_equilateral()),
        ("square", unit_square()),
    ] {
        let aim = Vector::new(1.into(), 2.into());
        let word = |table: &Table, aim: Vector| {
            let orbit =
                trace(&TraceTables::new(table), start_of(0, ratio(1, 3), aim), 120).unwrap();
            (orbit.word, format!("{:?}", orbit.end))
        };
        let expected = word(&table, aim.clone());
        for table_places in [0, 150, 317, 400] {
            for aim_places in [0, 180, 322, 400] {
                let small = scaled(&table, &tiny(table_places));
                let large = scaled(&table, &tiny(table_places).inverse().unwrap());
                for scaled in [small, large] {
                    for factor in [tiny(aim_places), tiny(aim_places).inverse().unwrap()] {
                        let found = word(&scaled, aim.times(&factor));
                        assert_eq!(
                            found, expected,
                            "{name} 1e±{table_places}, aim 1e±{aim_places}"
                        );
                    }
                }
            }
        }
    }
}

#[test]
fn the_law_of_starts_does_not_depend_on_the_size_of_the_table() {
    let table = crooked();
    let draws = |table: &Table| -> Vec<Start> {
        let (tables, law) = (TraceTables::new(table), StartLaw::new(table));
        (0..20)
            .map(|i| sample(&tables, &law, 7, i, 30).start)
            .collect()
    };
    let expected = draws(&table);
    for factor in [tiny(400), tiny(400).inverse().unwrap()] {
        for (found, expected) in draws(&scaled(&table, &factor)).iter().zip(&expected) {
            assert_eq!(
                (found.side, &found.fraction, &found.aim),
                (expected.side, &expected.fraction, &expected.aim)
            );
        }
    }
}
