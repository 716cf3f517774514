//! What the tests of single orbits share: starts, reflections, and all states of an orbit.

// Each test program that includes this module uses a part of it.
#![allow(dead_code)]

use reboundary::number::Real;
use reboundary::orbit::trace::State;
use reboundary::orbit::{Start, Step, TraceTables, Tracer};
use reboundary::table::{SideId, Table, Vector};
use rug::{Integer, Rational};

pub fn start_of(side: usize, fraction: Real, aim: Vector) -> Start {
    Start {
        side: SideId(side as u8),
        fraction,
        aim,
    }
}

pub fn ratio(numerator: i64, denominator: i64) -> Real {
    Real::from(Rational::from((numerator, denominator)))
}

/// ±10^−places.
pub fn tiny(sign: i64, places: u32) -> Real {
    Real::from(Rational::from((
        Integer::from(sign),
        Integer::from(Integer::u_pow_u(10, places)),
    )))
}

/// The vector reflected across a side of the table.
pub fn mirrored(table: &Table, side: usize, vector: &Vector) -> Vector {
    let (axis, form) = (table.side_vector(side), table.form());
    let twice = &Real::from(2) * &vector.dot(&axis, form);
    let share = twice
        .checked_div(&axis.squared_length(form))
        .expect("a side has a length");
    axis.times(&share).minus(vector)
}

pub fn negative(vector: &Vector) -> Vector {
    vector.times(&Real::from(-1))
}

/// A quarter turn to the left, up to a positive factor.
pub fn quarter_turn(table: &Table, vector: &Vector) -> Vector {
    Vector::new(-(table.form() * &vector.y), vector.x.clone())
}

/// The orbit that comes into the state, followed backwards.
pub fn backwards(table: &Table, state: &State) -> Start {
    let side = state.side.0 as usize;
    let incoming = mirrored(table, side, &state.direction);
    start_of(side, state.fraction.clone(), negative(&incoming))
}

/// All states of an orbit, a periodic one continued round its period, and the corner that ended it.
pub fn states(tables: &TraceTables, start: Start, hits: usize) -> (Vec<State>, Option<Step>) {
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
