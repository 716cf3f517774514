//! Segments from corner to corner in a direction.
//!
//! From each corner of each copy, the direction leads into at most a few triangles; the line from there is
//! followed exactly until its height is that of a corner it meets. Segments along sides of the table are not listed:
//! they lie on the boundary.

use super::flow::{Flow, Height, MOST_ADDITIONS};
use crate::number::{Real, Sign};
use crate::run::{Control, Stopped};
use crate::table::{CornerId, SideId, Vector};
use crate::unfold::mesh::{Exit, Wedge};
use std::cmp::Ordering;

/// A segment from corner to corner.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Saddle {
    /// Where it starts.
    pub start: CornerId,
    /// Where it ends.
    pub end: CornerId,
    /// The sides that it crosses, in order.
    pub code: Vec<SideId>,
    /// The vector from its start to its end in the unfolded plane, when it starts in the table itself.
    pub displacement: Vector,
}

/// The lines from the corners in one direction, each followed over a number of sides.
#[derive(Debug)]
pub struct Saddles {
    /// The segments, by number of sides crossed, then start, then code; each once.
    pub saddles: Vec<Saddle>,
    /// Lines that crossed `reach` sides without meeting a corner.
    pub open: usize,
    /// The most sides that a line was followed over.
    pub reach: usize,
    /// Where the segments cross the cells: cell and height.
    pub(super) cuts: Vec<(usize, Height)>,
}

impl Saddles {
    /// True when every line from a corner ends in a corner: the direction is completely periodic. On the compact
    /// surface of the copies, cutting along all these segments leaves strips of closed orbits.
    pub fn all_close(&self) -> bool {
        self.open == 0
    }
}

/// Follows the lines from all corners over at most `reach` sides.
///
/// Cost: one addition and one comparison in the field for each side and triangle on the way.
///
/// # Errors
/// When the control asks to stop.
///
/// # Panics
/// If `reach` is more than [`MOST_ADDITIONS`].
pub fn saddles(flow: &Flow, reach: usize, control: &Control) -> Result<Saddles, Stopped> {
    assert!(reach <= MOST_ADDITIONS, "heights stay comparable");
    let mut found = Saddles {
        saddles: Vec::new(),
        open: 0,
        reach,
        cuts: Vec::new(),
    };
    for copy in 0..flow.copies() {
        for wedge in flow.mesh().wedges() {
            if runs_along_edge(flow, copy, wedge) {
                let way = flow.way(copy, wedge.right) - flow.way(copy, wedge.corner);
                found.saddles.push(Saddle {
                    start: wedge.corner,
                    end: wedge.right,
                    code: Vec::new(),
                    displacement: table_vector(flow, copy, &way),
                });
            }
            if leads_into(flow, copy, wedge) {
                follow(flow, copy, wedge, reach, &mut found);
                control.tick(1)?;
            }
        }
    }
    // A direction on a mirror axis of the group appears in two copies.
    let key = |s: &Saddle| (s.code.len(), s.start, s.code.clone(), s.end);
    found.saddles.sort_by_key(key);
    found.saddles.dedup();
    Ok(found)
}

/// True when the inner edge on the right of the wedge runs in the direction.
fn runs_along_edge(flow: &Flow, copy: usize, wedge: &Wedge) -> bool {
    let (here, there) = (
        flow.height(copy, wedge.corner),
        flow.height(copy, wedge.right),
    );
    wedge.right_is_inner
        && flow.order(here, there) == Ordering::Equal
        && (flow.way(copy, wedge.right) - flow.way(copy, wedge.corner)).sign() == Sign::Positive
}

/// True when the direction points from the corner into the wedge.
fn leads_into(flow: &Flow, copy: usize, wedge: &Wedge) -> bool {
    let (left, right) = if flow.is_mirrored(copy) {
        (wedge.right, wedge.left)
    } else {
        (wedge.left, wedge.right)
    };
    let here = flow.height(copy, wedge.corner);
    flow.order(flow.height(copy, left), here) == Ordering::Greater
        && flow.order(flow.height(copy, right), here) == Ordering::Less
}

fn follow(flow: &Flow, copy: usize, wedge: &Wedge, reach: usize, found: &mut Saddles) {
    let mut at = copy;
    let mut height = flow.height(copy, wedge.corner).clone();
    let mut added = Real::from(0);
    let mut code = Vec::new();
    let first_cut = found.cuts.len();
    let mut exit = wedge.exit;
    loop {
        let gate = match exit {
            Exit::Pass(gate) => gate,
            Exit::Bounce(side, gate) => {
                if code.len() == reach {
                    found.cuts.truncate(first_cut);
                    found.open += 1;
                    return;
                }
                let (next, shift, way_shift) = flow.cross(at, side);
                height = height.plus(shift);
                added = &added + way_shift;
                at = next;
                code.push(side);
                found.cuts.push((flow.cell_at(at, side), height.clone()));
                gate
            }
        };
        match flow.exit(at, gate, &height) {
            Ok(next) => exit = next,
            Err(corner) => {
                let way = flow.way(at, corner) - &added - flow.way(copy, wedge.corner);
                let displacement = table_vector(flow, copy, &way);
                found.saddles.push(Saddle {
                    start: wedge.corner,
                    end: corner,
                    code,
                    displacement,
                });
                return;
            }
        }
    }
}

/// The vector in the direction of a copy's orbits along which the way grows by `way`.
pub(super) fn table_vector(flow: &Flow, copy: usize, way: &Real) -> Vector {
    let squared = flow.direction().squared_length(flow.table().form());
    flow.table_direction(copy).times(&(way / &squared))
}
