//! All beams of a few crossings, as trees that a narrow fan leaps through.
//!
//! A fan is cut about once on its way from a split to the next, but a plain walk asks every corner on the way. The
//! tree of a side holds the beams that enter the table through it, up to a number of crossings, and of them only the
//! places where a corner image cuts a beam: where nothing cuts, no fan in the beam can be cut either, so nothing is
//! asked. The lines of a typical beam are cut about 3·ln m times in m crossings, because p(n) grows like n³ and cells
//! share their measure about evenly; so m crossings cost O(log m) questions instead of m.
//!
//! The trees are those of unmirrored copies; in a mirrored copy left and right change places. They hold positions as
//! seen from the copy at the root, so one grove serves all linear parts: see [`Leaping`].
//!
//! Memory: about 130 bytes for each word of the length m. Cost of growing: Σ p(n), n ≤ m, steps of beams.

use super::beam::{self, Meeting};
use super::engine::{Engine, Leaping, Trail};
use super::mesh::{Exit, GateId, Mesh};
use crate::number::Sign;
use crate::run::{Control, Stopped};
use crate::table::{CornerId, SideId};

/// A place in a tree: a [`Branch`] or a [`Tip`].
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Place(u32);

const TIP: u32 = 1 << 31;

impl Place {
    /// The branch or the tip with its number.
    #[inline(always)]
    pub fn get(self) -> Result<usize, usize> {
        if self.0 & TIP == 0 {
            Ok(self.0 as usize)
        } else {
            Err((self.0 & !TIP) as usize)
        }
    }
}

/// A corner image that cuts a beam.
#[derive(Clone, Copy, Debug)]
pub struct Branch<A> {
    /// Where it is, seen from the root's copy.
    pub apex: A,
    /// Where lines go on in an unmirrored tree: with the apex on their right, then on their left.
    pub beyond: [Place; 2],
    /// The sides crossed since the branch before.
    pub edge: Edge,
    /// The corner that it is an image of.
    pub corner: CornerId,
}

/// The crossings between one place and the next.
#[derive(Clone, Copy, Debug)]
pub struct Edge {
    /// Where they are listed.
    start: u32,
    /// Crossings from the root to the place before.
    pub from: u16,
    /// Crossings from the root to here.
    pub to: u16,
}

/// The end of a beam of full length: a leap into the copy there.
#[derive(Clone, Copy, Debug)]
pub struct Tip<A> {
    /// The translation of the copy, seen from the root's.
    pub ahead: A,
    /// The sides crossed since the last branch.
    pub edge: Edge,
    /// The linear part of the copy, seen from the root's.
    pub element: u16,
    /// The side through which the copy is entered.
    pub side: SideId,
}

/// A tree for each side.
#[derive(Debug)]
pub struct Grove<A> {
    roots: Vec<Place>,
    branches: Vec<Branch<A>>,
    tips: Vec<Tip<A>>,
    sides: Vec<SideId>,
}

impl<A: Copy> Grove<A> {
    /// Grows the trees up to so many crossings, at least 1.
    ///
    /// # Errors
    /// When the control asks to stop.
    ///
    /// # Panics
    /// If the engine cannot leap or does not reach so far.
    pub fn grow<E: Leaping<Ahead = A>>(
        engine: &E,
        mesh: &Mesh,
        depth: usize,
        control: &Control,
    ) -> Result<Grove<A>, Stopped> {
        assert!(engine.can_leap() && (1..=engine.deepest()).contains(&depth));
        let mut grove = Grove {
            roots: Vec::new(),
            branches: Vec::new(),
            tips: Vec::new(),
            sides: Vec::new(),
        };
        for side in (0..mesh.side_count()).map(|side| SideId(side as u8)) {
            let (front, cell) = beam::start(engine, mesh, side);
            let mut grower = Grower {
                engine,
                mesh,
                depth,
                control,
                grove: &mut grove,
                trail: engine.trail(None),
            };
            let beam = Beam {
                pose: front.pose,
                gate: front.gate,
                crossings: 0,
                cell: cell.to_vec(),
                lefts: front.lefts,
            };
            let root = grower.grow(beam, 0)?;
            grove.roots.push(root);
        }
        Ok(grove)
    }

    /// The root of the tree of a side.
    #[inline(always)]
    pub fn root(&self, side: SideId) -> Place {
        self.roots[side.0 as usize]
    }

    /// A branch.
    #[inline(always)]
    pub fn branch(&self, number: usize) -> &Branch<A> {
        &self.branches[number]
    }

    /// A tip.
    #[inline(always)]
    pub fn tip(&self, number: usize) -> &Tip<A> {
        &self.tips[number]
    }

    /// The sides of an edge.
    #[inline(always)]
    pub fn sides(&self, edge: Edge) -> &[SideId] {
        let start = edge.start as usize;
        &self.sides[start..start + (edge.to - edge.from) as usize]
    }

    /// The number of branches and tips.
    pub fn size(&self) -> usize {
        self.branches.len() + self.tips.len()
    }
}

struct Grower<'a, E: Leaping> {
    engine: &'a E,
    mesh: &'a Mesh,
    depth: usize,
    control: &'a Control,
    grove: &'a mut Grove<E::Ahead>,
    trail: Trail<E::Exact>,
}

/// A beam about to enter a triangle.
struct Beam<E: Engine> {
    pose: E::Pose,
    gate: GateId,
    crossings: usize,
    cell: Vec<E::Point>,
    lefts: usize,
}

impl<E: Leaping> Grower<'_, E> {
    /// The tree of a beam; `from` crossings lead to the place before.
    fn grow(&mut self, mut beam: Beam<E>, from: usize) -> Result<Place, Stopped> {
        let engine = self.engine;
        loop {
            let mirrored = engine.is_mirrored(&beam.pose);
            let entry = self.mesh.enter(beam.gate, mirrored);
            let apex = engine.place(&beam.pose, entry.apex);
            let cell = (&beam.cell[..], beam.lefts);
            let (right, left) = match beam::meet(engine, &mut self.trail, cell, &apex) {
                Meeting::Whole(sign) => {
                    let exit = match sign {
                        Sign::Positive => entry.right,
                        _ => entry.left,
                    };
                    match self.follow(&mut beam, exit) {
                        Some(side) => return Ok(self.tip(&beam, side, from)),
                        None => continue,
                    }
                }
                Meeting::Cut(right, left) => (right, left),
            };
            self.control.tick(1)?;
            let number = self.grove.branches.len();
            let here = Place(number as u32);
            let branch = Branch {
                apex: engine.point_ahead(&apex),
                beyond: [here; 2],
                edge: self.edge(from, beam.crossings),
                corner: entry.apex,
            };
            self.grove.branches.push(branch);
            for (way, ((cell, lefts), exit)) in [(right, entry.left), (left, entry.right)]
                .into_iter()
                .enumerate()
            {
                let mut part = Beam {
                    cell,
                    lefts,
                    ..beam
                };
                let place = match self.follow(&mut part, exit) {
                    Some(side) => self.tip(&part, side, beam.crossings),
                    None => self.grow(part, beam.crossings)?,
                };
                self.grove.branches[number].beyond[way] = place;
            }
            return Ok(here);
        }
    }

    /// Takes a beam through an exit; tells the side when it has all its crossings.
    fn follow(&mut self, beam: &mut Beam<E>, exit: Exit) -> Option<SideId> {
        match exit {
            Exit::Pass(gate) => beam.gate = gate,
            Exit::Bounce(side, gate) => {
                self.trail.cross(beam.crossings, side);
                beam.crossings += 1;
                beam.pose = self.engine.reflect(&beam.pose, side);
                beam.gate = gate;
                if beam.crossings == self.depth {
                    return Some(side);
                }
            }
        }
        None
    }

    fn tip(&mut self, beam: &Beam<E>, side: SideId, from: usize) -> Place {
        let (element, ahead) = self.engine.pose_ahead(&beam.pose);
        let tip = Tip {
            ahead,
            edge: self.edge(from, beam.crossings),
            element,
            side,
        };
        self.grove.tips.push(tip);
        Place(TIP | (self.grove.tips.len() - 1) as u32)
    }

    fn edge(&mut self, from: usize, to: usize) -> Edge {
        let start = self.grove.sides.len() as u32;
        self.grove
            .sides
            .extend_from_slice(&self.trail.path()[from..to]);
        Edge {
            start,
            from: from as u16,
            to: to as u16,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::file::load;
    use crate::unfold::engine::{AnyEngine, Arithmetic};
    use std::path::Path;

    /// All tips below a place, with the crossings that lead there.
    fn tips_below<A: Copy>(
        grove: &Grove<A>,
        place: Place,
        path: &[SideId],
    ) -> Vec<(Tip<A>, Vec<SideId>)> {
        let longer = |edge: Edge| [path, grove.sides(edge)].concat();
        match place.get() {
            Err(number) => {
                let tip = *grove.tip(number);
                vec![(tip, longer(tip.edge))]
            }
            Ok(number) => {
                let branch = grove.branch(number);
                let path = longer(branch.edge);
                let below = |place: &Place| tips_below(grove, *place, &path);
                branch.beyond.iter().flat_map(below).collect()
            }
        }
    }

    /// Two leaps lead where their crossings lead one by one: `apart` tells how far two corner images are apart.
    fn check<E: Leaping>(engine: &E, mesh: &Mesh, apart: impl Fn(&E::Point, &E::Point) -> f64) {
        const DEPTH: usize = 5;
        let grove = Grove::grow(engine, mesh, DEPTH, &Control::new()).expect("not stopped");
        // A binary tree for each side.
        assert_eq!(grove.branches.len() + mesh.side_count(), grove.tips.len());
        let mut mirrored = 0;
        for side in (0..mesh.side_count()).map(|s| SideId(s as u8)) {
            for (first, start) in tips_below(&grove, grove.root(side), &[]).iter().step_by(3) {
                assert_eq!(start.last(), Some(&first.side));
                let below = tips_below(&grove, grove.root(first.side), &[]);
                for (second, rest) in below.iter().step_by(5) {
                    let crossings = start.iter().chain(rest);
                    let stepped = crossings.fold(engine.home(None), |p, s| engine.reflect(&p, *s));
                    let n = DEPTH as u32;
                    let half = engine.leap(&engine.home(None), first.element, &first.ahead, n);
                    mirrored += u32::from(engine.is_mirrored(&half));
                    let landed = engine.leap(&half, second.element, &second.ahead, n);
                    assert_eq!(engine.is_mirrored(&landed), engine.is_mirrored(&stepped));
                    for corner in (0..mesh.side_count()).map(|c| CornerId(c as u8)) {
                        let points = [landed, stepped].map(|pose| engine.place(&pose, corner));
                        assert!(apart(&points[0], &points[1]) < 1e-12, "{points:?}");
                    }
                }
            }
        }
        assert!(mirrored > 20, "an odd number of crossings mirrors");
    }

    #[test]
    fn leaps_lead_where_steps_lead() {
        for name in [
            "equilateral",
            "right-isosceles",
            "l-of-three-squares",
            "regular-pentagon",
            "right-pi-7",
            "dart",
        ] {
            let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("polygons/{name}.toml"));
            let table = load(&path).expect("a table of the shelf").table;
            let mesh = Mesh::new(&table);
            match AnyEngine::new(&table, 20, Arithmetic::Tiered) {
                AnyEngine::Lattice(engine) => {
                    check(&*engine, &mesh, |a, b| if a == b { 0.0 } else { 1.0 });
                }
                AnyEngine::Filtered(engine) if engine.can_leap() => {
                    check(&*engine, &mesh, |a, b| {
                        assert_eq!(a.name, b.name);
                        (a.at[0] - b.at[0]).hypot(a.at[1] - b.at[1])
                    });
                }
                AnyEngine::Filtered(_) => assert_eq!(name, "dart", "an infinite group"),
            }
        }
    }
}
