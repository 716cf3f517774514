//! The flow in one direction on the copies of a table, as an exchange of intervals.
//!
//! The *height* of a point p of copy g is d × g(p), its *way* is d · g(p). The flow keeps the height inside a
//! copy and increases the way. Let z ↦ S·z + c be the reflection in side s. A point p of s is S·p + c, so g(p) and
//! (g·S)(p) differ by the vector g(c), and crossing s from copy g adds the constant −d × g(c) to the height and
//! −d · g(c) to the way. So the flow is followed by additions of tabulated numbers.
//!
//! A *cell* is a side of a copy by which the flow enters it, as an open interval of heights. Following a cell
//! through its copy cuts it at the heights of corners into *branches*; each branch leaves by one side, into
//! one other cell, by a translation. The branches of all cells form an interval exchange without flips.
//!
//! **Comparing heights.** Each height carries a floating-point value. All heights of cells and shifts are at most R
//! in absolute value, an addition is off by at most 2⁻⁵²·R and a tabulated value likewise, so after n
//! additions the value is off by less than (2n + 2)·2⁻⁵²·R. Differences above 10⁻⁹·R are trusted for
//! n ≤ [`MOST_ADDITIONS`]; the rest is decided in the field.

use crate::number::Real;
use crate::table::facts::{ReflectionGroup, facts};
use crate::table::{CornerId, SideId, Table, Vector};
use crate::unfold::Mesh;
use crate::unfold::group::FiniteGroup;
use crate::unfold::mesh::{Exit, GateId};
use std::cmp::Ordering;
use std::ops::Range;
use thiserror::Error;

/// Additions after which floating-point values of heights may no longer be trusted:
/// (2·10⁶ + 2)·2⁻⁵² is less than half of 10⁻⁹.
pub const MOST_ADDITIONS: usize = 1_000_000;

/// The largest group whose copies are tabulated.
const LARGEST_GROUP: u64 = 4096;

/// Why a direction cannot be followed.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum FlowFault {
    /// The direction is the zero vector.
    #[error("the aim is the zero vector, which has no direction")]
    ZeroAim,
    /// The reflection group is infinite, so the directions of an orbit are infinitely many.
    #[error(
        "an angle of this table is no rational multiple of π, so an orbit takes infinitely many directions"
    )]
    InfiniteGroup,
    /// The reflection group is larger than what is tabulated.
    #[error("the reflection group has {order} elements, and at most {LARGEST_GROUP} are followed")]
    LargeGroup {
        /// Its order.
        order: u64,
    },
}

/// An exact height or way with a floating-point value near it.
#[derive(Clone, Debug)]
pub struct Height {
    /// The number.
    pub exact: Real,
    /// Within the module's bound of it.
    pub near: f64,
}

impl Height {
    fn new(exact: Real) -> Height {
        let near = exact.to_f64();
        Height { exact, near }
    }

    /// The sum.
    pub fn plus(&self, other: &Height) -> Height {
        Height {
            exact: &self.exact + &other.exact,
            near: self.near + other.near,
        }
    }
}

/// A side of a copy by which the flow enters it.
#[derive(Clone, Debug)]
pub struct Cell {
    /// The copy: an element of the group.
    pub copy: usize,
    /// The side.
    pub side: SideId,
    /// The least height.
    pub low: Height,
    /// The greatest height.
    pub high: Height,
    /// Its branches, from low to high.
    pub branches: Range<usize>,
}

/// A part of a cell that leaves its copy by one side.
#[derive(Clone, Debug)]
pub struct Branch {
    /// The cell that it is a part of.
    pub cell: usize,
    /// The least height.
    pub low: Height,
    /// The greatest height.
    pub high: Height,
    /// The cell that it goes to; its side is the one hit.
    pub target: usize,
    /// What is added to the height.
    pub shift: Height,
    /// What is added to the way.
    pub way_shift: Real,
}

/// The flow in one direction.
#[derive(Debug)]
pub struct Flow {
    table: Table,
    direction: Vector,
    mesh: Mesh,
    mirrored: Vec<bool>,
    next: Vec<u16>,
    images: Vec<Vector>,
    heights: Vec<Height>,
    shifts: Vec<Height>,
    way_shifts: Vec<Real>,
    tolerance: f64,
    cells: Vec<Cell>,
    /// The cell of side s of copy g at g·k + s, when the flow enters there.
    cell_of: Vec<Option<u32>>,
    branches: Vec<Branch>,
}

impl Flow {
    /// Tabulates the flow in the direction of `aim` (of any length) and all its images under the group.
    ///
    /// Cost: |G|·k exact products, and as many sign decisions.
    ///
    /// # Errors
    /// For a zero vector and for a table with an infinite or very large reflection group.
    pub fn new(table: &Table, aim: &Vector) -> Result<Flow, FlowFault> {
        if aim.is_zero() {
            return Err(FlowFault::ZeroAim);
        }
        match facts(table).group {
            ReflectionGroup::Infinite => return Err(FlowFault::InfiniteGroup),
            ReflectionGroup::Finite { r } if 2 * r > LARGEST_GROUP => {
                return Err(FlowFault::LargeGroup { order: 2 * r });
            }
            ReflectionGroup::Finite { .. } => {}
        }
        let home = table.moved_to_origin();
        let group = FiniteGroup::generate(&home);
        let minus = |v: &Vector| v.times(&Real::from(-1));
        let heights: Vec<Height> = group
            .image
            .iter()
            .map(|v| Height::new(aim.cross(v)))
            .collect();
        let shifts: Vec<Height> = group
            .shift
            .iter()
            .map(|c| Height::new(aim.cross(&minus(c))))
            .collect();
        let way_shifts = group
            .shift
            .iter()
            .map(|c| aim.dot(&minus(c), table.form()))
            .collect();
        let largest = heights.iter().chain(&shifts).map(|h| h.near.abs());
        let mut flow = Flow {
            direction: aim.clone(),
            mesh: Mesh::new(&home),
            mirrored: group.mirrored,
            next: group.next,
            images: group.image,
            tolerance: 1e-9 * largest.fold(0.0, f64::max),
            heights,
            shifts,
            way_shifts,
            cells: Vec::new(),
            cell_of: Vec::new(),
            branches: Vec::new(),
            table: table.clone(),
        };
        flow.find_cells();
        for cell in 0..flow.cells.len() {
            flow.find_branches(cell);
        }
        Ok(flow)
    }

    fn find_cells(&mut self) {
        let k = self.table.sides();
        for copy in 0..self.mirrored.len() {
            for side in 0..k {
                let side = SideId(side as u8);
                let gate = self.mesh.gate_of_side(side);
                let (left, right) = self.mesh.ends(gate, self.mirrored[copy]);
                let (low, high) = (self.height(copy, right), self.height(copy, left));
                let enters = self.order(low, high) == Ordering::Less;
                let (low, high) = (low.clone(), high.clone());
                self.cell_of.push(enters.then_some(self.cells.len() as u32));
                if enters {
                    self.cells.push(Cell {
                        copy,
                        side,
                        low,
                        high,
                        branches: 0..0,
                    });
                }
            }
        }
    }

    /// Follows a cell through its copy. Parts with smaller heights, which have a corner on their left, are
    /// taken first, so that the branches come in order.
    fn find_branches(&mut self, index: usize) {
        let Cell {
            copy,
            side,
            low,
            high,
            ..
        } = self.cells[index].clone();
        let first = self.branches.len();
        let mut open = vec![(self.mesh.gate_of_side(side), low, high)];
        while let Some((gate, low, high)) = open.pop() {
            let entry = self.mesh.enter(gate, self.mirrored[copy]);
            let apex = self.height(copy, entry.apex).clone();
            let above = self.order(&apex, &high) == Ordering::Less;
            let below = self.order(&apex, &low) == Ordering::Greater;
            let mut parts = Vec::new();
            match (above, below) {
                // On or under the whole part: every line has the apex on its right.
                (true, false) => parts.push((entry.left, low, high)),
                (false, _) => parts.push((entry.right, low, high)),
                (true, true) => {
                    parts.push((entry.left, apex.clone(), high));
                    parts.push((entry.right, low, apex));
                }
            }
            for (exit, low, high) in parts {
                match exit {
                    Exit::Pass(gate) => open.push((gate, low, high)),
                    Exit::Bounce(side, _) => {
                        let branch = self.branch(index, copy, side, low, high);
                        self.branches.push(branch);
                    }
                }
            }
        }
        // A part that passes on may be overtaken by a lower one that has left already.
        let tolerance = self.tolerance;
        self.branches[first..].sort_by(|a, b| order(&a.low, &b.low, tolerance));
        self.cells[index].branches = first..self.branches.len();
    }

    fn branch(&self, cell: usize, copy: usize, side: SideId, low: Height, high: Height) -> Branch {
        let at = self.at(copy, side);
        let target = self.cell_of[self.at(self.next[at] as usize, side)]
            .expect("the flow enters the copy beyond a side that it leaves by");
        Branch {
            cell,
            low,
            high,
            target: target as usize,
            shift: self.shifts[at].clone(),
            way_shift: self.way_shifts[at].clone(),
        }
    }

    fn at(&self, copy: usize, side: SideId) -> usize {
        copy * self.table.sides() + side.0 as usize
    }

    /// The table.
    pub fn table(&self) -> &Table {
        &self.table
    }

    /// The direction, as it was given.
    pub fn direction(&self) -> &Vector {
        &self.direction
    }

    /// The number of copies: the order of the group.
    pub fn copies(&self) -> usize {
        self.mirrored.len()
    }

    /// The cells, by copy, then side.
    pub fn cells(&self) -> &[Cell] {
        &self.cells
    }

    /// The branches, by cell, then height.
    pub fn branches(&self) -> &[Branch] {
        &self.branches
    }

    /// The height of a corner of a copy.
    pub fn height(&self, copy: usize, corner: CornerId) -> &Height {
        &self.heights[copy * self.table.sides() + corner.0 as usize]
    }

    /// The way of a corner of a copy.
    pub fn way(&self, copy: usize, corner: CornerId) -> Real {
        let image = &self.images[copy * self.table.sides() + corner.0 as usize];
        self.direction.dot(image, self.table.form())
    }

    /// Compares two heights exactly.
    pub fn order(&self, a: &Height, b: &Height) -> Ordering {
        order(a, b, self.tolerance)
    }

    /// The mesh and the parity of a copy, for following single lines.
    pub(super) fn mesh(&self) -> &Mesh {
        &self.mesh
    }

    pub(super) fn is_mirrored(&self, copy: usize) -> bool {
        self.mirrored[copy]
    }

    /// Crossing a side: the next copy and what is added to height and way.
    pub(super) fn cross(&self, copy: usize, side: SideId) -> (usize, &Height, &Real) {
        let at = self.at(copy, side);
        (
            self.next[at] as usize,
            &self.shifts[at],
            &self.way_shifts[at],
        )
    }

    /// The cell by which the flow enters a copy through a side.
    pub(super) fn cell_at(&self, copy: usize, side: SideId) -> usize {
        self.cell_of[self.at(copy, side)].expect("the flow enters here") as usize
    }

    /// What the apex of the triangle beyond a gate does to the line at a height: the exit, or the corner when
    /// the line runs into it.
    pub(super) fn exit(
        &self,
        copy: usize,
        gate: GateId,
        height: &Height,
    ) -> Result<Exit, CornerId> {
        let entry = self.mesh.enter(gate, self.mirrored[copy]);
        match self.order(height, self.height(copy, entry.apex)) {
            Ordering::Equal => Err(entry.apex),
            Ordering::Less => Ok(entry.right),
            Ordering::Greater => Ok(entry.left),
        }
    }

    /// The direction of the table's orbits that run through a copy: g⁻¹d, of the length of d.
    ///
    /// Found from d = α·g(u) + β·g(v) for two sides u and v, since then g⁻¹d = α·u + β·v.
    pub fn table_direction(&self, copy: usize) -> Vector {
        let k = self.table.sides();
        let image = |i: usize| &self.images[copy * k + i];
        let (u, v) = (image(1).minus(image(0)), image(2).minus(image(1)));
        let scale = u.cross(&v);
        let alpha = &self.direction.cross(&v) / &scale;
        let beta = &u.cross(&self.direction) / &scale;
        let (first, second) = (self.table.side_vector(0), self.table.side_vector(1));
        first.times(&alpha).plus(&second.times(&beta))
    }
}

fn order(a: &Height, b: &Height, tolerance: f64) -> Ordering {
    let difference = a.near - b.near;
    if difference > tolerance {
        Ordering::Greater
    } else if difference < -tolerance {
        Ordering::Less
    } else {
        a.exact.cmp(&b.exact)
    }
}
