//! Beams: all oriented lines with one itinerary.
//!
//! Lines that cross the same gates of the unfolded table are those with every left gate end on their left
//! and every right gate end on their right. In the dual plane of lines that is an open convex cell: each
//! corner image is a line there, so an edge of the cell is a corner image and a vertex of the cell is an
//! oriented line through two of them.
//!
//! **Representation.** `cell` lists the corner images that are edges of the cell, in cyclic order: first
//! the left ones from the farthest to the nearest, then the right ones from the farthest to the nearest.
//! The vertices are the oriented lines
//!
//! - between neighbours on one side: from the nearer to the farther;
//! - from the nearest left to the farthest right, the *rightmost* line (most clockwise);
//! - from the nearest right to the farthest left, the *leftmost* line.
//!
//! **One step.** Entering a triangle meets its apex V. Past the gate, every line of the beam stays
//! between the leftmost and the rightmost line: a line crosses the rightmost one somewhere between its
//! two corner images, hence before the gate, and is on its left from there on; likewise for the leftmost.
//! So if V is on or to the right of the rightmost line, the whole beam has V on its right; if V is on or
//! to the left of the leftmost line, on its left. Otherwise V cuts the cell: along each chain of vertices
//! the side of V changes once, and each part keeps the edges that have a vertex strictly on its side,
//! with V as a new edge between its two ends. All predicates are orientations of three corner images.
//!
//! Cost of a step: at most two orientations without a cut; with a cut, at most one for each edge of the
//! cell more. Cells have few edges (about four on average).

use super::engine::{Engine, Trail};
use super::mesh::{Exit, GateId, Mesh};
use crate::number::Sign;
use crate::table::SideId;

/// A set of lines about to enter a copy of the table.
#[derive(Debug)]
pub struct Front<E: Engine + ?Sized> {
    /// The copy.
    pub pose: E::Pose,
    /// The gate through which the lines enter.
    pub gate: GateId,
    /// How many of the cell's corner images are left ones.
    pub lefts: usize,
}

/// A part of a beam that leaves the copy through a side.
#[derive(Clone, Copy, Debug)]
pub struct Piece {
    /// The side.
    pub side: SideId,
    /// The gate through which the reflected copy is entered.
    pub gate: GateId,
    /// How many of the cell's corner images are left ones.
    pub lefts: usize,
    /// Where the part's cell begins in [`Spread::points`].
    pub start: usize,
    /// Where it ends.
    pub end: usize,
    /// False when the part is the whole beam, unchanged.
    pub cut: bool,
}

/// Scratch space for one step through a copy; holds the result until the next step.
#[derive(Debug)]
pub struct Spread<E: Engine + ?Sized> {
    /// The parts, in order of their letters, and for one letter of their sides.
    pub pieces: Vec<Piece>,
    /// The cells of the parts.
    pub points: Vec<E::Point>,
    open: Vec<Open>,
}

/// A part that is still inside the copy.
#[derive(Clone, Copy, Debug)]
struct Open {
    gate: GateId,
    lefts: usize,
    start: usize,
    end: usize,
    cut: bool,
}

impl<E: Engine> Default for Spread<E> {
    fn default() -> Spread<E> {
        Spread {
            pieces: Vec::new(),
            points: Vec::new(),
            open: Vec::new(),
        }
    }
}

/// The beam of all lines that enter the table through a side: its front and its two-edged cell.
pub fn start<E: Engine>(engine: &E, mesh: &Mesh, side: SideId) -> (Front<E>, [E::Point; 2]) {
    let pose = engine.home(None);
    let gate = mesh.gate_of_side(side);
    let (left, right) = mesh.ends(gate, engine.is_mirrored(&pose));
    let cell = [engine.place(&pose, left), engine.place(&pose, right)];
    (
        Front {
            pose,
            gate,
            lefts: 1,
        },
        cell,
    )
}

/// Follows a beam through one copy of the table, from the gate that it enters to the sides that it hits.
///
/// In a simple polygon a side is reached through one sequence of triangles, so there is at most one part
/// for each side. With holes there may be several: one for each way past the holes.
pub fn spread<E: Engine>(
    engine: &E,
    mesh: &Mesh,
    trail: &mut Trail<E::Exact>,
    front: &Front<E>,
    cell: &[E::Point],
    out: &mut Spread<E>,
) {
    let mirrored = engine.is_mirrored(&front.pose);
    out.pieces.clear();
    out.points.clear();
    out.open.clear();
    out.points.extend_from_slice(cell);
    out.open.push(Open {
        gate: front.gate,
        lefts: front.lefts,
        start: 0,
        end: cell.len(),
        cut: false,
    });
    while let Some(part) = out.open.pop() {
        let entry = mesh.enter(part.gate, mirrored);
        let apex = engine.place(&front.pose, entry.apex);
        let here = &out.points[part.start..part.end];
        match side_of_apex(engine, trail, here, part.lefts, &apex) {
            Some(Sign::Positive) => out.send(part, entry.right),
            Some(_) => out.send(part, entry.left),
            None => {
                let (apex_right, apex_left) = cut(engine, trail, &mut out.points, &part, &apex);
                out.send(apex_right, entry.left);
                out.send(apex_left, entry.right);
            }
        }
    }
    out.pieces
        .sort_unstable_by_key(|piece| (mesh.letter(piece.side), piece.side));
}

impl<E: Engine> Spread<E> {
    /// Takes a part through an exit: it is finished at a side, or goes on in the next triangle.
    #[inline(always)]
    fn send(&mut self, part: Open, exit: Exit) {
        match exit {
            Exit::Pass(gate) => self.open.push(Open { gate, ..part }),
            Exit::Bounce(side, gate) => self.pieces.push(Piece {
                side,
                gate,
                lefts: part.lefts,
                start: part.start,
                end: part.end,
                cut: part.cut,
            }),
        }
    }
}

/// A cell that one corner cut: its corner images, and how many of them are left ones.
pub type CutCell<E> = (Vec<<E as Engine>::Point>, usize);

/// What meeting one corner image does to a beam: all its lines have it on one side, or it cuts the cell, and the
/// parts have it on the right and on the left.
pub enum Meeting<E: Engine> {
    /// Negative: all lines have the apex on their right.
    Whole(Sign),
    /// The part with the apex on its right, then the one with the apex on its left.
    Cut(CutCell<E>, CutCell<E>),
}

/// Meets one corner image; [`spread`] does this for all of a copy at once, without allocating.
pub fn meet<E: Engine>(
    engine: &E,
    trail: &mut Trail<E::Exact>,
    (cell, lefts): (&[E::Point], usize),
    apex: &E::Point,
) -> Meeting<E> {
    if let Some(sign) = side_of_apex(engine, trail, cell, lefts, apex) {
        return Meeting::Whole(match sign {
            Sign::Positive => Sign::Positive,
            _ => Sign::Negative,
        });
    }
    let mut points = cell.to_vec();
    let part = Open {
        gate: GateId(0),
        lefts,
        start: 0,
        end: cell.len(),
        cut: false,
    };
    let (right, left) = cut(engine, trail, &mut points, &part, apex);
    let taken = |part: Open| (points[part.start..part.end].to_vec(), part.lefts);
    Meeting::Cut(taken(right), taken(left))
}

/// The side on which every line of the cell has the apex, or `None` when the apex cuts the cell.
#[inline(always)]
fn side_of_apex<E: Engine>(
    engine: &E,
    trail: &mut Trail<E::Exact>,
    cell: &[E::Point],
    lefts: usize,
    apex: &E::Point,
) -> Option<Sign> {
    let rightmost = engine.turn(trail, &cell[lefts - 1], &cell[lefts], apex);
    if rightmost != Sign::Positive {
        return Some(Sign::Negative);
    }
    let leftmost = engine.turn(trail, &cell[cell.len() - 1], &cell[0], apex);
    if leftmost != Sign::Negative {
        return Some(Sign::Positive);
    }
    None
}

/// Cuts a cell by the apex; appends both new cells to the pool. Returns the part with the apex on its
/// right, then the part with the apex on its left.
fn cut<E: Engine>(
    engine: &E,
    trail: &mut Trail<E::Exact>,
    points: &mut Vec<E::Point>,
    part: &Open,
    apex: &E::Point,
) -> (Open, Open) {
    let (start, lefts, end) = (part.start, part.lefts, part.end);
    let rights = end - start - lefts;
    // Chain of left images l₀ (farthest) … and its inner vertices (l_j, l_{j+1}): the leftmost line
    // before l₀ has the apex on its right, the rightmost line after the last on its left.
    let (left_until, left_from) = split_chain(
        engine,
        trail,
        &points[start..start + lefts],
        apex,
        Sign::Negative,
    );
    // Chain of right images r₀ (farthest) …: the rightmost line comes before r₀, the leftmost after.
    let (right_until, right_from) = split_chain(
        engine,
        trail,
        &points[start + lefts..end],
        apex,
        Sign::Positive,
    );

    let first = points.len();
    points.extend_from_within(start..start + left_until);
    points.push(*apex);
    points.extend_from_within(start + lefts + right_from..end);
    let second = points.len();
    points.push(*apex);
    points.extend_from_within(start + left_from..start + lefts);
    points.extend_from_within(start + lefts..start + lefts + right_until);
    let apex_right = Open {
        gate: part.gate,
        lefts: left_until,
        start: first,
        end: second,
        cut: true,
    };
    debug_assert!(rights >= 1 && right_until >= 1 && right_from < rights);
    let apex_left = Open {
        lefts: 1 + lefts - left_from,
        start: second,
        end: points.len(),
        ..apex_right
    };
    (apex_right, apex_left)
}

/// Where the side of the apex changes along a chain whose first vertex has it on side `before`. Edges
/// 0 … until−1 have a vertex strictly on that side, edges from … have one strictly on the other side.
#[inline]
fn split_chain<E: Engine>(
    engine: &E,
    trail: &mut Trail<E::Exact>,
    chain: &[E::Point],
    apex: &E::Point,
    before: Sign,
) -> (usize, usize) {
    for j in 0..chain.len() - 1 {
        let side = engine.turn(trail, &chain[j + 1], &chain[j], apex);
        if side == Sign::Zero {
            return (j + 1, j + 1);
        }
        if side != before {
            return (j + 1, j);
        }
    }
    (chain.len(), chain.len() - 1)
}

// Derived copies would ask the engine itself to be copied.
impl<E: Engine> Clone for Front<E> {
    fn clone(&self) -> Front<E> {
        *self
    }
}

impl<E: Engine> Copy for Front<E> {}
