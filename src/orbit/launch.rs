//! From where an orbit is launched: inside the table, or backward in time.

use super::trace::Start;
use crate::number::{Real, Sign};
use crate::table::{CornerId, SideId, Table, Vector, orientation};
use crate::unfold::Isometry;
use thiserror::Error;

/// Why a point is not inside a table.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Error)]
pub enum PointFault {
    /// Outside.
    #[error("the starting point lies outside the table")]
    Outside,
    /// Inside a side.
    #[error("the starting point lies on a side of the table")]
    OnSide(SideId),
    /// At a corner.
    #[error("the starting point is corner {} of the table", .0.0)]
    OnCorner(CornerId),
    /// No direction to go in.
    #[error("the aim is the zero vector, which has no direction")]
    ZeroAim,
}

/// Where a ray from inside the table first meets the boundary.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum FirstHit {
    /// A side: the orbit goes on from there. The second value is the way to it, in lengths of the aim.
    Side(Start, Real),
    /// A corner: the orbit ends there.
    Corner(CornerId, Real),
}

/// Checks exactly that a point lies strictly inside a table.
///
/// On the boundary is found side by side. Otherwise the ray from the point along the first axis is followed: the
/// point is inside exactly when it crosses an odd number of sides, where a side counts with its lower end and
/// without its upper one.
///
/// # Errors
/// Where the point lies instead.
pub fn check_inside(table: &Table, point: &Vector) -> Result<(), PointFault> {
    let mut inside = false;
    for side in 0..table.sides() {
        let (a, b) = (table.corner(side), table.corner(table.after(side)));
        if point == a {
            return Err(PointFault::OnCorner(CornerId(side as u8)));
        }
        let turn = orientation(a, b, point);
        if turn == Sign::Zero {
            let form = Real::from(1);
            let between = a.minus(point).dot(&b.minus(point), &form);
            if point != b && between.sign() == Sign::Negative {
                return Err(PointFault::OnSide(SideId(side as u8)));
            }
        }
        let (a_above, b_above) = (a.y > point.y, b.y > point.y);
        let crosses = match (a_above, b_above) {
            (false, true) => turn == Sign::Positive,
            (true, false) => turn == Sign::Negative,
            _ => false,
        };
        inside ^= crosses;
    }
    if inside {
        Ok(())
    } else {
        Err(PointFault::Outside)
    }
}

/// Where the ray from a point inside the table first meets the boundary; every decision is exact.
///
/// # Errors
/// When the point is not inside, or the aim is zero.
pub fn first_hit(table: &Table, point: &Vector, aim: &Vector) -> Result<FirstHit, PointFault> {
    if aim.is_zero() {
        return Err(PointFault::ZeroAim);
    }
    check_inside(table, point)?;
    let form = table.form();
    let squared = aim.squared_length(form);
    let mut nearest: Option<FirstHit> = None;
    let mut offer = |hit: FirstHit| {
        if nearest.as_ref().is_none_or(|known| way(&hit) < way(known)) {
            nearest = Some(hit);
        }
    };
    for side in 0..table.sides() {
        let to_first = table.corner(side).minus(point);
        let to_second = table.corner(table.after(side)).minus(point);
        let (first, second) = (aim.cross(&to_first), aim.cross(&to_second));
        if first.is_zero() {
            let way = to_first.dot(aim, form) / &squared;
            if way.sign() == Sign::Positive {
                offer(FirstHit::Corner(CornerId(side as u8), way));
            }
        }
        if first.sign() == second.sign().flip() && !first.is_zero() {
            let along = table.side_vector(side);
            let way = &to_first.cross(&along) / &aim.cross(&along);
            if way.sign() == Sign::Positive {
                let start = Start {
                    side: SideId(side as u8),
                    fraction: &first / &(&first - &second),
                    aim: reflected(table, side, aim),
                };
                offer(FirstHit::Side(start, way));
            }
        }
    }
    Ok(nearest.expect("a ray from inside a bounded table meets its boundary"))
}

fn way(hit: &FirstHit) -> &Real {
    match hit {
        FirstHit::Side(_, way) | FirstHit::Corner(_, way) => way,
    }
}

/// A direction after bouncing off a side.
fn reflected(table: &Table, side: usize, direction: &Vector) -> Vector {
    let (a, b) = (table.corner(side), table.corner(table.after(side)));
    Isometry::reflection(a, b, table.form()).turn(direction, table.form())
}

/// The same orbit run backward: from the same point, along the segment that led there.
pub fn backward(table: &Table, start: &Start) -> Start {
    let came = reflected(table, start.side.0 as usize, &start.aim);
    Start {
        aim: came.times(&Real::from(-1)),
        ..start.clone()
    }
}
