//! Long orbits on tables with a finite group: the line on the copies against the line in the table, round periods.

mod support;

use reboundary::number::Real;
use reboundary::orbit::line::{ExactLine, point_on};
use reboundary::orbit::periodic::{Wanted, periodic_words};
use reboundary::orbit::surface::SurfaceLine;
use reboundary::orbit::trace::trace;
use reboundary::orbit::{Start, Step, TraceTables};
use reboundary::run::Control;
use reboundary::table::{SideId, Table, Vector};
use reboundary::unfold::group::FiniteGroup;
use rug::{Integer, Rational};
use support::*;

fn ratio(numerator: i64, denominator: i64) -> Real {
    Real::from(Rational::from((numerator, denominator)))
}

/// The same table with corner 0 elsewhere.
fn moved(table: &Table) -> Table {
    let by = Vector::new(ratio(3, 7), ratio(-22, 5));
    let corners = table.corners().iter().map(|c| c.plus(&by)).collect();
    let letters = table.letters().to_vec();
    Table::new("moved", corners, table.form().clone(), letters).expect("a table")
}

/// A generic orbit in the direction (p, q) of the unit square closes after 2(p + q) hits for coprime p, q, here thousands: the
/// table's copies decide, wherever corner 0 lies.
#[test]
fn long_periods_are_those_of_the_grid() {
    for table in [unit_square(), moved(&unit_square())] {
        let tables = TraceTables::new(&table);
        for (p, q) in [(2503i64, 4i64), (1009, 1013), (5000, 2501), (3, 140_002)] {
            let start = Start {
                side: SideId(0),
                fraction: ratio(1, 1_000_003),
                aim: Vector::new(p.into(), q.into()),
            };
            let period = 2 * (p + q) as usize;
            let orbit = trace(&tables, start, 2 * period).expect("a good start");
            assert_eq!(orbit.end, Some(Step::Period(period)), "{p}, {q}");
            assert_eq!(orbit.word.len(), period);
        }
    }
}

#[test]
fn where_corner_0_lies_does_not_matter() {
    for table in [l_of_three_squares(), half_equilateral(), right_isosceles()] {
        for (p, q) in [(1009, 613), (-377, 1234)] {
            let word = |table: &Table| {
                let start = Start {
                    side: SideId(0),
                    fraction: ratio(1, 1_000_003),
                    aim: Vector::new(p.into(), q.into()),
                };
                trace(&TraceTables::new(table), start, 12_000).expect("a good start")
            };
            assert_eq!(
                word(&moved(&table)),
                word(&table),
                "{} {p}, {q}",
                table.title()
            );
        }
    }
}

/// On the axis of an odd word the line returns after one turn, beside it after two, however near; on the strip of an even
/// word after one.
#[test]
fn a_line_on_the_copies_returns_with_its_period() {
    let near = Real::from(Rational::from((
        Integer::from(1),
        Integer::from(Integer::u_pow_u(10, 30)),
    )));
    let mut odd = 0;
    for table in [
        unit_square(),
        equilateral(),
        right_isosceles(),
        half_equilateral(),
        regular_pentagon(),
    ] {
        let table = if table.field().is_rational() {
            moved(&table)
        } else {
            table
        };
        let group = FiniteGroup::generate(&table.moved_to_origin());
        let (engine, mesh) = prepared(&table, 9);
        let found = periodic_words(&table, &engine, &mesh, 9, Wanted::All, &Control::new());
        for word in found.expect("not stopped") {
            let strip = &word.closing.strip;
            let is_odd = word.is_odd();
            odd += usize::from(is_odd);
            for (shift, turns) in [(Real::from(0), 1), (near.clone(), 1 + usize::from(is_odd))] {
                let moment = &strip.middle + &shift;
                let direction = &word.closing.displacement;
                let mut line = SurfaceLine::new(&group, table.sides(), direction, &moment);
                let mut returns = Vec::new();
                for crossed in 1..=2 * word.word.len() {
                    let side = word.word[crossed % word.word.len()];
                    if side == word.word[0] && line.would_return(side) {
                        returns.push(crossed);
                    }
                    line.cross(side);
                }
                let period = turns * word.word.len();
                let expected: Vec<usize> = (1..=2 * word.word.len() / period)
                    .map(|t| t * period)
                    .collect();
                assert_eq!(returns, expected, "{} {:?}", table.title(), word.word);
                if is_odd && !shift.is_zero() {
                    continue;
                }
                // The height is the moment of the line in the table, up to the orientation of the copy.
                let start = word.start(&table);
                let point = point_on(&table, start.side.0 as usize, &start.fraction);
                let first = ExactLine::new(&point.minus(table.corner(0)), direction).moment;
                assert_eq!(first, strip.middle);
            }
        }
    }
    assert!(odd >= 3, "only {odd} odd words");
}
