//! The first return of a flow to a transversal, as an interval exchange.
//!
//! A transversal is a set of cells, laid end to end on one line in the order of copies and sides. The flow comes back
//! to it everywhere but at finitely many points (it keeps lengths, and the lengths are finite), and the return is
//! a translation on each of finitely many intervals; so following them ends.

use super::flow::{Flow, Height};
use crate::number::Real;
use crate::run::{Control, Stopped};
use crate::table::SideId;
use std::cmp::Ordering;
use thiserror::Error;

/// Where the flow is watched.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Transversal {
    /// Every side of every copy by which the flow enters.
    AllSides,
    /// One side, in every copy that the flow enters by it.
    Side(SideId),
    /// One side of one copy.
    Cell {
        /// The side.
        side: SideId,
        /// The copy.
        copy: usize,
    },
}

/// Why there is no interval exchange.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum ExchangeFault {
    /// Asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// The flow enters nowhere on the transversal.
    #[error("the flow never enters there: the direction runs along the side or leaves through it")]
    NeverEntered,
}

/// One interval of an exchange.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Interval {
    /// The copy that its cell belongs to.
    pub copy: usize,
    /// The sides hit from the start to the return, both included.
    pub code: Vec<SideId>,
    /// Its left end on the line.
    pub left: Real,
    /// Its length, as a difference of heights.
    pub length: Real,
    /// The left end of its image on the line.
    pub image_left: Real,
    /// The place of its image from the left, from 0: the permutation.
    pub image_place: usize,
}

/// An interval under way.
struct Part {
    /// Its left end in the cell that it started in, with that cell.
    start: (usize, Height),
    /// Where it is now.
    cell: usize,
    low: Height,
    high: Height,
    code: Vec<SideId>,
}

/// The interval exchange of the first return, from left to right.
///
/// # Errors
/// When the control asks to stop, and when the flow never enters the transversal.
pub fn interval_exchange(
    flow: &Flow,
    transversal: Transversal,
    control: &Control,
) -> Result<Vec<Interval>, ExchangeFault> {
    let on = |cell: usize| {
        let cell = &flow.cells()[cell];
        match transversal {
            Transversal::AllSides => true,
            Transversal::Side(side) => cell.side == side,
            Transversal::Cell { side, copy } => cell.side == side && cell.copy == copy,
        }
    };
    // Where each cell begins on the line.
    let mut total = Real::from(0);
    let mut offsets: Vec<Option<Real>> = vec![None; flow.cells().len()];
    let mut open = Vec::new();
    for (index, cell) in flow.cells().iter().enumerate().filter(|(i, _)| on(*i)) {
        offsets[index] = Some(&total - &cell.low.exact);
        total = &total + &(&cell.high.exact - &cell.low.exact);
        open.push(Part {
            start: (index, cell.low.clone()),
            cell: index,
            low: cell.low.clone(),
            high: cell.high.clone(),
            code: vec![cell.side],
        });
    }
    if open.is_empty() {
        return Err(ExchangeFault::NeverEntered);
    }
    let place = |cell: usize, height: &Real| {
        let offset = offsets[cell].as_ref().expect("a cell of the transversal");
        offset + height
    };
    let mut intervals = Vec::new();
    while let Some(part) = open.pop() {
        control.tick(1)?;
        for next in follow(flow, &part) {
            if on(next.cell) {
                let (cell, left) = &next.start;
                intervals.push(Interval {
                    copy: flow.cells()[*cell].copy,
                    left: place(*cell, &left.exact),
                    length: &next.high.exact - &next.low.exact,
                    image_left: place(next.cell, &next.low.exact),
                    code: next.code,
                    image_place: 0,
                });
            } else {
                open.push(next);
            }
        }
    }
    intervals.sort_by(|a, b| a.left.cmp(&b.left));
    let mut by_image: Vec<usize> = (0..intervals.len()).collect();
    by_image.sort_by(|a, b| intervals[*a].image_left.cmp(&intervals[*b].image_left));
    for (place, index) in by_image.into_iter().enumerate() {
        intervals[index].image_place = place;
    }
    Ok(intervals)
}

/// The parts of a part after one crossing.
fn follow(flow: &Flow, part: &Part) -> Vec<Part> {
    let mut parts = Vec::new();
    for branch in &flow.branches()[flow.cells()[part.cell].branches.clone()] {
        let greater = |a: &Height, b: &Height| flow.order(a, b) == Ordering::Greater;
        let low = if greater(&branch.low, &part.low) {
            &branch.low
        } else {
            &part.low
        };
        let high = if greater(&part.high, &branch.high) {
            &branch.high
        } else {
            &part.high
        };
        if !greater(high, low) {
            continue;
        }
        let (cell, start) = &part.start;
        let moved = Height {
            exact: &low.exact - &part.low.exact,
            near: low.near - part.low.near,
        };
        let mut code = part.code.clone();
        code.push(flow.cells()[branch.target].side);
        parts.push(Part {
            start: (*cell, start.plus(&moved)),
            cell: branch.target,
            low: low.plus(&branch.shift),
            high: high.plus(&branch.shift),
            code,
        });
    }
    parts
}
