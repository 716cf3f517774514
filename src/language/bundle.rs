//! The walk when a word is a *bundle* of beams: sides share letters, or the table has holes.
//!
//! The orbits of one word may hit different sides with the same letters, or pass holes on different sides. Each
//! such way is a beam with a convex cell of its own; the cells of one word are disjoint, so measures add up. A
//! node of the walk is a word with all its beams. Stepping it steps every beam and groups the parts by letter;
//! the groups are the longer words, in the order of the letters, so the walk stays depth first and
//! lexicographic.
//!
//! **Trails.** Beams of one word have paths of their own, and exact answers depend on the path. A few trails
//! are kept, each for one *lane*; a part inherits the lane of its beam, a second part of one beam and letter
//! takes the next. A trail may hold another beam's path when its turn comes. So each beam has a number that no
//! other beam of the subtree has, each lane remembers the numbers of the beams whose crossings its trail holds,
//! and the path is renewed from the last crossing of a common ancestor: equal numbers mean equal paths.
//!
//! **Memory.** The bundles of the words on the way down and of their unvisited siblings: O(longest) bundles for
//! each letter. A bundle has at most as many beams as there are cells of that length, so when all sides share
//! one letter a level is one bundle.

use super::tree::WordId;
use super::walk::{Part, SUBTREES, Visit, Visitor, joined, sides_by_letter, walk_seeds};
use crate::number::Tiers;
use crate::run::control::STEPS_PER_TICK;
use crate::run::{Control, Stopped};
use crate::table::{LetterId, SideId};
use crate::unfold::Mesh;
use crate::unfold::beam::{self, Front, Spread};
use crate::unfold::engine::{Engine, Trail};

/// One beam of a word.
struct Strand<E: Engine> {
    start: SideId,
    front: Front<E>,
    /// Where its cell lies in the bundle's points.
    from: usize,
    to: usize,
    /// The side crossed last; the starting side before any crossing.
    side: SideId,
    /// Which beam of the word's prefix it comes from.
    parent: u32,
    lane: u32,
    number: u64,
}

/// A word of which only the last letter is written, with all its beams.
struct Bundle<E: Engine> {
    letter: LetterId,
    crossings: usize,
    strands: Vec<Strand<E>>,
    points: Vec<E::Point>,
}

impl<E: Engine> Bundle<E> {
    fn cell(&self, strand: &Strand<E>) -> &[E::Point] {
        &self.points[strand.from..strand.to]
    }
}

/// A bundle that can be followed on its own: with the sides crossed by each of its beams.
pub(super) struct Seed<E: Engine> {
    bundle: Bundle<E>,
    paths: Vec<Vec<SideId>>,
}

impl<E: Engine> Seed<E> {
    /// The letters of its word, those of any of its beams.
    pub(super) fn word(&self, mesh: &Mesh) -> Vec<u8> {
        let start = self.bundle.strands[0].start;
        let sides = [start].into_iter().chain(self.paths[0].iter().copied());
        sides.map(|side| mesh.letter(side).0).collect()
    }
}

/// Lanes with trails of their own; more beams than that share them.
const LANES: u32 = 32;

/// A beam on the way down, as its descendants need it: parent, number and last side.
#[derive(Clone, Copy)]
struct Ancestor {
    parent: u32,
    number: u64,
    side: SideId,
}

/// A trail and the numbers of the beams whose crossings it holds, first to last.
struct Lane<E: Engine> {
    trail: Trail<E::Exact>,
    numbers: Vec<u64>,
}

/// The trails of a subtree.
struct Lanes<'a, E: Engine> {
    engine: &'a E,
    /// The paths of the beams of the root.
    roots: &'a [Vec<SideId>],
    lanes: Vec<Lane<E>>,
    /// The beams of the present word and of its prefixes longer than the root, by crossings past the root's.
    chain: Vec<Vec<Ancestor>>,
}

impl<'a, E: Engine> Lanes<'a, E> {
    fn new(engine: &'a E, roots: &'a [Vec<SideId>]) -> Lanes<'a, E> {
        Lanes {
            engine,
            roots,
            lanes: Vec::new(),
            chain: Vec::new(),
        }
    }

    /// Makes a bundle the present word, `depth` crossings past the root.
    fn descend(&mut self, depth: usize, bundle: &Bundle<E>) {
        self.chain.truncate(depth);
        self.chain.push(
            bundle
                .strands
                .iter()
                .map(|s| Ancestor {
                    parent: s.parent,
                    number: s.number,
                    side: s.side,
                })
                .collect(),
        );
    }

    /// The trail of a beam of the present word, brought to its path.
    fn trail(&mut self, index: usize, lane: u32) -> &mut Trail<E::Exact> {
        let depth = self.chain.len() - 1;
        while self.lanes.len() <= lane as usize {
            self.lanes.push(Lane {
                trail: self.engine.trail(None),
                numbers: Vec::new(),
            });
        }
        let lane = &mut self.lanes[lane as usize];
        // Up to an ancestor whose path the trail holds.
        let mut missing = Vec::new();
        let mut at = index;
        let mut level = depth;
        loop {
            let ancestor = self.chain[level][at];
            if lane.numbers.get(level) == Some(&ancestor.number) {
                break;
            }
            missing.push(ancestor);
            if level == 0 {
                break;
            }
            at = ancestor.parent as usize;
            level -= 1;
        }
        let crossed = self.roots.first().map_or(0, Vec::len);
        lane.numbers.truncate(depth + 1 - missing.len());
        for ancestor in missing.into_iter().rev() {
            let level = lane.numbers.len();
            if level == 0 {
                for (crossing, side) in self.roots[at].iter().enumerate() {
                    lane.trail.cross(crossing, *side);
                }
            } else {
                lane.trail.cross(crossed + level - 1, ancestor.side);
            }
            lane.numbers.push(ancestor.number);
        }
        &mut lane.trail
    }

    fn tiers(&self) -> Tiers {
        let mut tiers = Tiers::default();
        for lane in &self.lanes {
            tiers.absorb(lane.trail.tiers);
        }
        tiers
    }
}

/// The words that a bundle goes on to, in the order of their letters.
fn step<E: Engine>(
    mesh: &Mesh,
    lanes: &mut Lanes<'_, E>,
    bundle: &Bundle<E>,
    next_number: &mut u64,
    out: &mut Spread<E>,
) -> Vec<Bundle<E>> {
    let mut longer: Vec<Bundle<E>> = Vec::new();
    let engine = lanes.engine;
    let mut lanes_used = bundle.strands.len() as u32;
    for (index, strand) in bundle.strands.iter().enumerate() {
        let trail = lanes.trail(index, strand.lane);
        let cell = bundle.cell(strand);
        beam::spread(engine, mesh, trail, &strand.front, cell, out);
        let mut last = None;
        for piece in &out.pieces {
            let letter = mesh.letter(piece.side);
            let at = match longer.iter().position(|word| word.letter == letter) {
                Some(at) => at,
                None => {
                    longer.push(Bundle {
                        letter,
                        crossings: bundle.crossings + 1,
                        strands: Vec::new(),
                        points: Vec::new(),
                    });
                    longer.len() - 1
                }
            };
            let word = &mut longer[at];
            let lane = if last == Some(letter) {
                lanes_used += 1;
                (lanes_used - 1) % LANES
            } else {
                strand.lane
            };
            last = Some(letter);
            let from = word.points.len();
            word.points
                .extend_from_slice(&out.points[piece.start..piece.end]);
            *next_number += 1;
            word.strands.push(Strand {
                start: strand.start,
                front: Front {
                    pose: engine.reflect(&strand.front.pose, piece.side),
                    gate: piece.gate,
                    lefts: piece.lefts,
                },
                from,
                to: word.points.len(),
                side: piece.side,
                parent: index as u32,
                lane,
                number: *next_number,
            });
        }
    }
    longer.sort_by_key(|word| word.letter);
    longer
}

/// Shows all beams of a word, which becomes the present word `depth` crossings past the root.
fn show<E: Engine, V: Visitor<E>>(
    lanes: &mut Lanes<'_, E>,
    depth: usize,
    bundle: &Bundle<E>,
    parent: WordId,
    visitor: &mut V,
) {
    lanes.descend(depth, bundle);
    let engine = lanes.engine;
    for (index, strand) in bundle.strands.iter().enumerate() {
        let visit = Visit {
            engine,
            length: bundle.crossings + 1,
            start: strand.start,
            letter: bundle.letter,
            first: index == 0,
            lefts: strand.front.lefts,
            cell: bundle.cell(strand),
            cut: true,
            parent,
        };
        visitor.visit(&visit, lanes.trail(index, strand.lane));
    }
}

/// The words of length 1.
fn letters<E: Engine>(engine: &E, mesh: &Mesh) -> Vec<Seed<E>> {
    let mut seeds: Vec<Seed<E>> = Vec::new();
    for side in sides_by_letter(mesh) {
        let letter = mesh.letter(side);
        if seeds.last().is_none_or(|seed| seed.bundle.letter != letter) {
            seeds.push(Seed {
                bundle: Bundle {
                    letter,
                    crossings: 0,
                    strands: Vec::new(),
                    points: Vec::new(),
                },
                paths: Vec::new(),
            });
        }
        let seed = seeds.last_mut().expect("pushed above");
        let (front, cell) = beam::start(engine, mesh, side);
        let index = seed.bundle.strands.len();
        seed.bundle.points.extend(cell);
        seed.bundle.strands.push(Strand {
            start: side,
            front,
            from: 2 * index,
            to: 2 * index + 2,
            side,
            parent: 0,
            lane: index as u32 % LANES,
            number: index as u64,
        });
        seed.paths.push(Vec::new());
    }
    seeds
}

/// The walk of [`walk_beams`](super::walk::walk_beams) over bundles; `recall` and `keep` as there.
pub(super) fn walk<E: Engine, V: Visitor<E>>(
    engine: &E,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
    new_visitor: impl Fn(Part) -> V + Sync,
    (recall, keep): (
        impl Fn(usize) -> Option<(V, Tiers)> + Sync,
        impl Fn(usize, &V, Tiers) + Sync,
    ),
) -> Result<(Vec<V>, Tiers), Stopped> {
    let mut tiers = Tiers::default();
    let mut head = new_visitor(Part::Head);
    if longest == 0 {
        return Ok((vec![head], tiers));
    }
    let (mut seeds, split) = divide(
        engine, mesh, longest, SUBTREES, control, &mut head, &mut tiers,
    )?;
    if split >= longest {
        seeds.clear();
    }
    let walk = |seed: &Seed<E>, visitor: &mut V| {
        walk_subtree(engine, mesh, longest, control, seed, visitor)
    };
    let subtrees = walk_seeds(&seeds, &new_visitor, walk, (recall, keep))?;
    Ok(joined(head, tiers, subtrees))
}

/// Follows all words level by level until there are enough. Returns them with their length.
pub(super) fn divide<E: Engine, V: Visitor<E>>(
    engine: &E,
    mesh: &Mesh,
    longest: usize,
    enough: usize,
    control: &Control,
    visitor: &mut V,
    tiers: &mut Tiers,
) -> Result<(Vec<Seed<E>>, usize), Stopped> {
    let mut seeds = letters(engine, mesh);
    for seed in &seeds {
        show(
            &mut Lanes::new(engine, &seed.paths),
            0,
            &seed.bundle,
            0,
            visitor,
        );
    }
    let mut length = 1;
    let mut out = Spread::default();
    // One bundle alone may have very many beams, and then there is nothing to divide.
    while length < longest && seeds.len() < enough && length < MOST_LEVELS {
        let mut next = Vec::new();
        for (parent, seed) in (0..).zip(&seeds) {
            control.tick(seed.bundle.strands.len() as u64)?;
            let mut lanes = Lanes::new(engine, &seed.paths);
            lanes.descend(0, &seed.bundle);
            let mut number = seed.bundle.strands.len() as u64;
            for bundle in step(mesh, &mut lanes, &seed.bundle, &mut number, &mut out) {
                show(&mut lanes, 1, &bundle, parent, visitor);
                let path = |strand: &Strand<E>| {
                    let mut path = seed.paths[strand.parent as usize].clone();
                    path.push(strand.side);
                    path
                };
                next.push(Seed {
                    paths: bundle.strands.iter().map(path).collect(),
                    bundle: renumbered(bundle),
                });
            }
            tiers.absorb(lanes.tiers());
        }
        seeds = next;
        length += 1;
    }
    let strands = seeds.iter().map(|seed| seed.bundle.strands.len() as u64);
    control.tick(strands.sum())?;
    Ok((seeds, length))
}

/// The most levels that are walked one by one: paths are copied there.
const MOST_LEVELS: usize = 16;

/// A bundle as the root of a subtree.
fn renumbered<E: Engine>(mut bundle: Bundle<E>) -> Bundle<E> {
    for (index, strand) in bundle.strands.iter_mut().enumerate() {
        strand.parent = 0;
        strand.lane = index as u32 % LANES;
        strand.number = index as u64;
    }
    bundle
}

/// Walks the words below a seed, depth first.
pub(super) fn walk_subtree<E: Engine, V: Visitor<E>>(
    engine: &E,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
    seed: &Seed<E>,
    visitor: &mut V,
) -> Result<Tiers, Stopped> {
    let root = seed.bundle.crossings;
    let mut lanes = Lanes::new(engine, &seed.paths);
    lanes.descend(0, &seed.bundle);
    let mut number = seed.bundle.strands.len() as u64;
    let mut out = Spread::default();
    let mut stack = step(mesh, &mut lanes, &seed.bundle, &mut number, &mut out);
    stack.reverse();
    // Words seen so far, by crossings.
    let mut seen: Vec<WordId> = vec![0; longest];
    seen[root] = 1;
    let mut beams = 0u64;
    while let Some(bundle) = stack.pop() {
        let parent = seen[bundle.crossings - 1] - 1;
        show(
            &mut lanes,
            bundle.crossings - root,
            &bundle,
            parent,
            visitor,
        );
        seen[bundle.crossings] += 1;
        if bundle.crossings + 1 < longest {
            let longer = step(mesh, &mut lanes, &bundle, &mut number, &mut out);
            stack.extend(longer.into_iter().rev());
        }
        beams += bundle.strands.len() as u64;
        if beams >= STEPS_PER_TICK {
            control.tick(beams)?;
            beams = 0;
        }
    }
    control.tick(beams)?;
    Ok(lanes.tiers())
}
