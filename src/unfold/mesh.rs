//! The triangulated table as a machine that an oriented line walks through.
//!
//! A *gate* is an edge of a triangle through which a line enters that triangle. Entering meets one new
//! corner V, the apex. A line with V on its left leaves through the edge between V and the right end of
//! the gate, a line with V on its right through the edge between the left end and V. In a mirrored copy
//! of the table left and right change places, which is why each gate has two entries, by parity.

use crate::table::triangulation::{Beyond, Triangle, triangulate};
use crate::table::{CornerId, LetterId, SideId, Table};

/// The index of a gate: edge j of triangle t is gate 3t + j.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub struct GateId(pub u16);

/// Where an exit edge leads.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Exit {
    /// Into the next triangle of the same copy, through this gate.
    Pass(GateId),
    /// Across a side into the reflected copy, re-entering through the gate of the same edge.
    Bounce(SideId, GateId),
}

/// What happens on entering a triangle.
#[derive(Clone, Copy, Debug)]
pub struct Entry {
    /// The new corner.
    pub apex: CornerId,
    /// Taken by lines that have the apex on their right: the edge from the gate's left end to the apex.
    pub left: Exit,
    /// Taken by lines that have the apex on their left: the edge from the apex to the gate's right end.
    pub right: Exit,
}

/// A corner seen from inside one of its triangles: the fan of rays that leave through the far edge.
#[derive(Clone, Copy, Debug)]
pub struct Wedge {
    /// Where the rays start.
    pub corner: CornerId,
    /// The corner on the left boundary ray.
    pub left: CornerId,
    /// The corner on the right boundary ray.
    pub right: CornerId,
    /// Where the rays go after the triangle.
    pub exit: Exit,
    /// True when the right boundary ray runs along an inner edge (and not along a side). Each inner edge
    /// is the right boundary of exactly one wedge at each of its ends.
    pub right_is_inner: bool,
}

/// The walking machine of a table.
#[derive(Clone, Debug)]
pub struct Mesh {
    /// Indexed by gate, then by parity (1 = mirrored).
    entries: Vec<[Entry; 2]>,
    /// The gate inside each side.
    sides: Vec<GateId>,
    /// Left and right end of each gate in an unmirrored copy.
    ends: Vec<(CornerId, CornerId)>,
    wedges: Vec<Wedge>,
    /// The letter of each side.
    letters: Vec<LetterId>,
    letter_count: usize,
    one_beam_a_word: bool,
}

impl Mesh {
    /// Triangulates a table and joins the triangles.
    pub fn new(table: &Table) -> Mesh {
        Mesh::from_triangles(&triangulate(table), table)
    }

    fn from_triangles(triangles: &[Triangle], table: &Table) -> Mesh {
        let k = table.sides();
        let gate = |t: usize, j: usize| GateId((3 * t + j % 3) as u16);
        let exit = |t: usize, j: usize| match triangles[t].beyond[j % 3] {
            Beyond::Side(side) => Exit::Bounce(side, gate(t, j)),
            Beyond::Edge(twin) => Exit::Pass(GateId(twin as u16)),
        };
        let mut entries = Vec::new();
        let mut ends = Vec::new();
        let mut wedges = Vec::new();
        let mut sides = vec![GateId(0); k];
        for (t, triangle) in triangles.iter().enumerate() {
            for j in 0..3 {
                let corner = |i: usize| triangle.corners[i % 3];
                let apex = corner(j + 2);
                let (after, before) = (exit(t, j + 1), exit(t, j + 2));
                entries.push([
                    Entry {
                        apex,
                        left: before,
                        right: after,
                    },
                    Entry {
                        apex,
                        left: after,
                        right: before,
                    },
                ]);
                ends.push((corner(j), corner(j + 1)));
                if let Beyond::Side(side) = triangle.beyond[j] {
                    sides[side.0 as usize] = gate(t, j);
                }
                wedges.push(Wedge {
                    corner: corner(j),
                    left: corner(j + 2),
                    right: corner(j + 1),
                    exit: exit(t, j + 1),
                    right_is_inner: matches!(triangle.beyond[j], Beyond::Edge(_)),
                });
            }
        }
        Mesh {
            entries,
            sides,
            ends,
            wedges,
            letters: (0..k).map(|s| table.letter_id(SideId(s as u8))).collect(),
            letter_count: table.letters().len(),
            one_beam_a_word: table.has_one_beam_a_word(),
        }
    }

    /// What happens on entering through a gate of a copy.
    #[inline(always)]
    pub fn enter(&self, gate: GateId, mirrored: bool) -> Entry {
        self.entries[gate.0 as usize][mirrored as usize]
    }

    /// The gate through which lines that start on a side enter the table.
    pub fn gate_of_side(&self, side: SideId) -> GateId {
        self.sides[side.0 as usize]
    }

    /// Left and right end of a gate as a line enters it, in a copy of the given parity.
    pub fn ends(&self, gate: GateId, mirrored: bool) -> (CornerId, CornerId) {
        let (left, right) = self.ends[gate.0 as usize];
        if mirrored {
            (right, left)
        } else {
            (left, right)
        }
    }

    /// All wedges: each triangle has three.
    pub fn wedges(&self) -> &[Wedge] {
        &self.wedges
    }

    /// The number of sides of the table.
    pub fn side_count(&self) -> usize {
        self.sides.len()
    }

    /// The letter of a side.
    #[inline(always)]
    pub fn letter(&self, side: SideId) -> LetterId {
        self.letters[side.0 as usize]
    }

    /// The number of letters.
    pub fn letter_count(&self) -> usize {
        self.letter_count
    }

    /// True when every word is one beam: see [`Table::has_one_beam_a_word`].
    pub fn has_one_beam_a_word(&self) -> bool {
        self.one_beam_a_word
    }
}
