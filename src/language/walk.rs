//! The depth-first walk over all beams of a table.
//!
//! In a polygon without holes whose sides have letters of their own, a beam after n − 1 crossings is a word of
//! length n. In other tables a word is a bundle of beams, which `bundle` walks; then the beams
//! of one word are visited one after another, and the first of them is marked. The walk visits the words of a subtree in
//! lexicographic order, so a visitor that appends what it sees to a list per length gets every level in
//! order. Only the beams on the way down and their unvisited siblings are in memory: O(longest · k) cells.
//!
//! **Parallelism.** The words of a short length, chosen from the number of words alone, are found first;
//! their subtrees are then walked by any number of threads, and their results joined in order. So nothing
//! depends on the number of threads.

use super::bundle;
use super::tree::{Language, LanguageFault, WordId};
use crate::number::Tiers;
use crate::run::checkpoint::{Ledger, Unkept};
use crate::run::control::STEPS_PER_TICK;
use crate::run::parts::{self, Kept, take};
use crate::run::{Control, Stopped};
use crate::table::{LetterId, SideId};
use crate::unfold::beam::{self, Front, Spread};
use crate::unfold::engine::AnyEngine;
use crate::unfold::engine::{Engine, Trail};
use crate::unfold::{Mesh, with_engine};
use rayon::prelude::*;
use thiserror::Error;

/// A word with its beam, or with one beam of its bundle, as a visitor sees it.
#[derive(Debug)]
pub struct Visit<'a, E: Engine> {
    /// The engine that placed the corner images.
    pub engine: &'a E,
    /// Length of the word, at least 1.
    pub length: usize,
    /// The side that the lines start on.
    pub start: SideId,
    /// The word's last letter.
    pub letter: LetterId,
    /// True for the first beam of a word, the only one when a word is one beam. Others follow at once.
    pub first: bool,
    /// How many of the cell's corner images are left ones.
    pub lefts: usize,
    /// The beam's cell: see [`beam`].
    pub cell: &'a [E::Point],
    /// False when the word is one beam with the same cell as the word without its last letter.
    pub cut: bool,
    /// The word without its last letter, by its number among the words of that length in this part of
    /// the walk. A subtree's root has number 0.
    pub parent: WordId,
}

/// Sees every word of a part of the language, in lexicographic order of the letters.
pub trait Visitor<E: Engine>: Send {
    /// Called for each beam of each word. The trail holds the word's crossings.
    fn visit(&mut self, visit: &Visit<'_, E>, trail: &mut Trail<E::Exact>);
}

/// Which part of a divided walk a visitor sees.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Part {
    /// The short words, level by level.
    Head,
    /// The words below one short word, depth first: the last word seen of each shorter length is a prefix
    /// of the present one.
    Subtree,
}

/// A beam with everything it needs to be followed on its own.
pub(super) struct Seed<E: Engine> {
    start: SideId,
    path: Vec<SideId>,
    front: Front<E>,
    cell: Vec<E::Point>,
}

impl<E: Engine> Seed<E> {
    /// The letters of its word.
    pub(super) fn word(&self, mesh: &Mesh) -> Vec<u8> {
        let sides = [self.start].into_iter().chain(self.path.iter().copied());
        sides.map(|side| mesh.letter(side).0).collect()
    }
}

/// Subtrees to aim for when the work is divided.
pub(super) const SUBTREES: usize = 256;

/// Walks all words of length 1 … `longest`. The first visitor sees the words up to the length where the
/// work is divided, level by level; each other visitor sees one subtree, its root excluded.
///
/// # Errors
/// When the control asks to stop.
///
/// # Panics
/// If the engine was prepared for fewer crossings.
pub fn walk_beams<E: Engine, V: Visitor<E>>(
    engine: &E,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
    new_visitor: impl Fn(Part) -> V + Sync,
) -> Result<(Vec<V>, Tiers), Stopped> {
    let no_ledger = (|_| None, |_, _: &V, _| {});
    walk_kept(engine, mesh, longest, control, new_visitor, no_ledger)
}

/// The same walk. `recall` may know the visitor of a subtree from before; `keep` hears of each that was walked to
/// its end.
fn walk_kept<E: Engine, V: Visitor<E>>(
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
    assert!(
        longest <= engine.deepest() + 1,
        "the engine must reach the longest word"
    );
    if !mesh.has_one_beam_a_word() {
        return bundle::walk(engine, mesh, longest, control, new_visitor, (recall, keep));
    }
    let mut tiers = Tiers::default();
    let mut head = new_visitor(Part::Head);
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

/// Walks the subtree of each seed, or recalls it, on any number of threads.
pub(super) fn walk_seeds<S: Sync, V: Send>(
    seeds: &[S],
    new_visitor: &(impl Fn(Part) -> V + Sync),
    walk: impl Fn(&S, &mut V) -> Result<Tiers, Stopped> + Sync,
    (recall, keep): (
        impl Fn(usize) -> Option<(V, Tiers)> + Sync,
        impl Fn(usize, &V, Tiers) + Sync,
    ),
) -> Result<Vec<(V, Tiers)>, Stopped> {
    let subtree = |(part, seed): (usize, &S)| {
        if let Some(known) = recall(part) {
            return Ok(known);
        }
        let mut visitor = new_visitor(Part::Subtree);
        let tiers = walk(seed, &mut visitor)?;
        keep(part, &visitor, tiers);
        Ok((visitor, tiers))
    };
    seeds.par_iter().enumerate().map(subtree).collect()
}

/// The visitors of the head and of the subtrees in order, with the sum of the tiers.
pub(super) fn joined<V>(head: V, mut tiers: Tiers, subtrees: Vec<(V, Tiers)>) -> (Vec<V>, Tiers) {
    let mut visitors = vec![head];
    for (visitor, part) in subtrees {
        tiers.absorb(part);
        visitors.push(visitor);
    }
    (visitors, tiers)
}

/// The walk whose subtrees a ledger knows or keeps.
pub(super) fn walk_in_ledger<E: Engine, V: Visitor<E> + Kept>(
    engine: &E,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
    new_visitor: impl Fn(Part) -> V + Sync,
    ledger: &dyn Ledger,
) -> Result<(Vec<V>, Tiers), Stopped> {
    let recall = |part| parts::recall(ledger, part);
    let keep = |part, visitor: &V, tiers| parts::keep(ledger, part, visitor, tiers);
    walk_kept(engine, mesh, longest, control, new_visitor, (recall, keep))
}

/// All sides in the order of their letters.
pub(super) fn sides_by_letter(mesh: &Mesh) -> Vec<SideId> {
    let mut sides: Vec<SideId> = (0..mesh.side_count()).map(|s| SideId(s as u8)).collect();
    sides.sort_by_key(|side| (mesh.letter(*side), *side));
    sides
}

/// Follows all beams level by level until there are enough, showing them to the visitor. Returns them with
/// their word length.
pub(super) fn divide<E: Engine, V: Visitor<E>>(
    engine: &E,
    mesh: &Mesh,
    longest: usize,
    enough: usize,
    control: &Control,
    visitor: &mut V,
    tiers: &mut Tiers,
) -> Result<(Vec<Seed<E>>, usize), Stopped> {
    let mut length = 1;
    let mut seeds = Vec::new();
    if longest == 0 {
        return Ok((seeds, 0));
    }
    let mut trail = engine.trail(None);
    for side in sides_by_letter(mesh) {
        let (front, cell) = beam::start(engine, mesh, side);
        visitor.visit(
            &Visit {
                engine,
                length: 1,
                start: side,
                letter: mesh.letter(side),
                first: true,
                lefts: front.lefts,
                cell: &cell,
                cut: true,
                parent: 0,
            },
            &mut trail,
        );
        seeds.push(Seed {
            start: side,
            path: Vec::new(),
            front,
            cell: cell.to_vec(),
        });
    }
    let mut out = Spread::default();
    while length < longest && seeds.len() < enough {
        control.tick(seeds.len() as u64)?;
        let mut longer = Vec::new();
        for (parent, seed) in (0..).zip(&seeds) {
            let mut trail = engine.trail(None);
            for (crossing, side) in seed.path.iter().enumerate() {
                trail.cross(crossing, *side);
            }
            beam::spread(engine, mesh, &mut trail, &seed.front, &seed.cell, &mut out);
            for piece in &out.pieces {
                let cell = &out.points[piece.start..piece.end];
                trail.cross(length - 1, piece.side);
                visitor.visit(
                    &Visit {
                        engine,
                        length: length + 1,
                        start: seed.start,
                        letter: mesh.letter(piece.side),
                        first: true,
                        lefts: piece.lefts,
                        cell,
                        cut: piece.cut,
                        parent,
                    },
                    &mut trail,
                );
                let mut path = seed.path.clone();
                path.push(piece.side);
                longer.push(Seed {
                    start: seed.start,
                    path,
                    front: Front {
                        pose: engine.reflect(&seed.front.pose, piece.side),
                        gate: piece.gate,
                        lefts: piece.lefts,
                    },
                    cell: cell.to_vec(),
                });
            }
            tiers.absorb(trail.tiers);
        }
        seeds = longer;
        length += 1;
    }
    control.tick(seeds.len() as u64)?;
    Ok((seeds, length))
}

/// A beam on the stack; its cell is at the top of the point stack when its turn comes.
struct Waiting<E: Engine> {
    front: Front<E>,
    edges: usize,
    crossings: usize,
    side: SideId,
    cut: bool,
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
    let mut trail = engine.trail(None);
    for (crossing, side) in seed.path.iter().enumerate() {
        trail.cross(crossing, *side);
    }
    let root = seed.path.len();
    let mut points: Vec<E::Point> = Vec::new();
    let mut stack: Vec<Waiting<E>> = Vec::new();
    let mut out = Spread::default();
    let mut steps = 0u64;
    // Words seen so far, by crossings.
    let mut seen: Vec<WordId> = vec![0; longest];
    seen[root] = 1;
    beam::spread(engine, mesh, &mut trail, &seed.front, &seed.cell, &mut out);
    push_pieces(engine, &seed.front, root, &out, &mut stack, &mut points);
    while let Some(waiting) = stack.pop() {
        let start = points.len() - waiting.edges;
        let cell = &points[start..];
        trail.cross(waiting.crossings - 1, waiting.side);
        let length = waiting.crossings + 1;
        visitor.visit(
            &Visit {
                engine,
                length,
                start: seed.start,
                letter: mesh.letter(waiting.side),
                first: true,
                lefts: waiting.front.lefts,
                cell,
                cut: waiting.cut,
                parent: seen[waiting.crossings - 1] - 1,
            },
            &mut trail,
        );
        seen[waiting.crossings] += 1;
        if length < longest {
            beam::spread(engine, mesh, &mut trail, &waiting.front, cell, &mut out);
            points.truncate(start);
            push_pieces(
                engine,
                &waiting.front,
                waiting.crossings,
                &out,
                &mut stack,
                &mut points,
            );
        } else {
            points.truncate(start);
        }
        steps += 1;
        if steps.is_multiple_of(STEPS_PER_TICK) {
            control.tick(STEPS_PER_TICK)?;
        }
    }
    control.tick(steps % STEPS_PER_TICK)?;
    Ok(trail.tiers)
}

/// Puts the parts of a beam on the stack, the last letter first, so that the first comes off first.
fn push_pieces<E: Engine>(
    engine: &E,
    front: &Front<E>,
    crossings: usize,
    out: &Spread<E>,
    stack: &mut Vec<Waiting<E>>,
    points: &mut Vec<E::Point>,
) {
    for piece in out.pieces.iter().rev() {
        points.extend_from_slice(&out.points[piece.start..piece.end]);
        stack.push(Waiting {
            front: Front {
                pose: engine.reflect(&front.pose, piece.side),
                gate: piece.gate,
                lefts: piece.lefts,
            },
            edges: piece.end - piece.start,
            crossings: crossings + 1,
            side: piece.side,
            cut: piece.cut,
        });
    }
}

/// Collects letters and parents per length: entry n − 1 for length n.
#[derive(Default)]
struct Grower {
    levels: Vec<GrownLevel>,
}

/// Levels are kept as their sizes, and for each word its letter and how much its parent's number is above that of the
/// word before, in 16 bits, four words in one number.
impl Kept for Grower {
    fn write(&self, out: &mut Vec<u64>) -> bool {
        out.push(self.levels.len() as u64);
        for (letters, parents) in &self.levels {
            out.push(letters.len() as u64);
            let mut before = 0;
            for (letters, parents) in letters.chunks(4).zip(parents.chunks(4)) {
                let mut packed = 0;
                for (place, (letter, parent)) in letters.iter().zip(parents).enumerate() {
                    let Ok(rise) = u8::try_from(parent - before) else {
                        // Words without extensions; a billiard has none.
                        return false;
                    };
                    before = *parent;
                    packed |= u64::from(u16::from_le_bytes([*letter, rise])) << (16 * place);
                }
                out.push(packed);
            }
        }
        true
    }

    fn read(numbers: &mut &[u64]) -> Option<Grower> {
        let mut levels = Vec::new();
        for _ in 0..take(numbers)? {
            let size = usize::try_from(take(numbers)?).ok()?;
            let (packed, rest) = numbers.split_at_checked(size.div_ceil(4))?;
            *numbers = rest;
            let mut level = GrownLevel::default();
            let mut parent = 0;
            for place in 0..size {
                let bits = (packed[place / 4] >> (16 * (place % 4))) as u16;
                let [letter, rise] = bits.to_le_bytes();
                parent += WordId::from(rise);
                level.0.push(letter);
                level.1.push(parent);
            }
            levels.push(level);
        }
        Some(Grower { levels })
    }
}

impl<E: Engine> Visitor<E> for Grower {
    #[inline]
    fn visit(&mut self, visit: &Visit<'_, E>, _: &mut Trail<E::Exact>) {
        if !visit.first {
            return;
        }
        let n = visit.length;
        if self.levels.len() < n {
            self.levels.resize_with(n, Default::default);
        }
        self.levels[n - 1].0.push(visit.letter.0);
        self.levels[n - 1].1.push(visit.parent);
    }
}

/// Why a language was not grown.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum GrowthFault {
    /// Asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// The levels are no language; for a billiard that would be a mistake in the walk.
    #[error(transparent)]
    Language(#[from] LanguageFault),
}

/// All words of a table up to a length.
///
/// Cost: Σ p(n) beam steps; memory [`BYTES_PER_WORD`](super::tree::BYTES_PER_WORD) a word.
///
/// # Errors
/// When the control asks to stop, or a level has more than 2³² words.
pub fn grow(
    engine: &AnyEngine,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
) -> Result<(Language, Tiers), GrowthFault> {
    grow_kept(engine, mesh, longest, control, &Unkept)
}

/// The same; parts that the ledger knows are taken from there. The tiers tell of all parts.
///
/// # Errors
/// As [`grow`].
pub fn grow_kept(
    engine: &AnyEngine,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
    ledger: &dyn Ledger,
) -> Result<(Language, Tiers), GrowthFault> {
    with_engine!(engine, engine => grow_with(engine, mesh, longest, control, ledger))
}

fn grow_with<E: Engine>(
    engine: &E,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
    ledger: &dyn Ledger,
) -> Result<(Language, Tiers), GrowthFault> {
    let (growers, tiers) = walk_in_ledger(
        engine,
        mesh,
        longest,
        control,
        |_| Grower::default(),
        ledger,
    )?;
    let levels = join(growers.into_iter().map(|g| g.levels).collect())?;
    Ok((Language::from_levels(mesh.letter_count(), levels)?, tiers))
}

/// Letters and parents of one level.
type GrownLevel = (Vec<u8>, Vec<WordId>);

/// Joins the levels of the head with those of the subtrees, turning parents counted within a subtree into
/// parents counted within their level.
fn join(parts: Vec<Vec<GrownLevel>>) -> Result<Vec<GrownLevel>, LanguageFault> {
    let mut parts = parts.into_iter();
    let mut levels = parts.next().unwrap_or_default();
    let split = levels.len();
    for (root, part) in parts.enumerate() {
        let mut base = root;
        for (n, (letters, parents)) in part.into_iter().enumerate().skip(split) {
            if levels.len() <= n {
                levels.push(Default::default());
            }
            let level = &mut levels[n];
            let start = level.0.len();
            if start + letters.len() >= WordId::MAX as usize {
                return Err(LanguageFault::TooManyWords { length: n + 1 });
            }
            level.0.extend_from_slice(&letters);
            level.1.extend(parents.iter().map(|p| p + base as WordId));
            base = start;
        }
    }
    Ok(levels)
}

/// Counts words per length: entry n for length n.
#[derive(Default)]
struct Counter(Vec<u64>);

impl Kept for Counter {
    fn write(&self, out: &mut Vec<u64>) -> bool {
        out.extend(&self.0);
        true
    }

    fn read(numbers: &mut &[u64]) -> Option<Counter> {
        Some(Counter(std::mem::take(numbers).to_vec()))
    }
}

impl<E: Engine> Visitor<E> for Counter {
    #[inline]
    fn visit(&mut self, visit: &Visit<'_, E>, _: &mut Trail<E::Exact>) {
        if self.0.len() <= visit.length {
            self.0.resize(visit.length + 1, 0);
        }
        self.0[visit.length] += u64::from(visit.first);
    }
}

/// p(0), …, p(longest) by walking all beams without storing words.
///
/// Cost: Σ p(n) beam steps; memory independent of p.
///
/// # Errors
/// When the control asks to stop.
pub fn count(
    engine: &AnyEngine,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
) -> Result<(Vec<u64>, Tiers), Stopped> {
    count_kept(engine, mesh, longest, control, &Unkept)
}

/// The same; the counts of parts that the ledger knows are taken from there. The tiers tell of all parts.
///
/// # Errors
/// When the control asks to stop.
pub fn count_kept(
    engine: &AnyEngine,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
    ledger: &dyn Ledger,
) -> Result<(Vec<u64>, Tiers), Stopped> {
    let new = |_| Counter::default();
    let (counters, tiers) = with_engine!(engine, engine => {
        walk_in_ledger(engine, mesh, longest, control, new, ledger)?
    });
    let mut p = vec![0; longest + 1];
    p[0] = 1;
    for counter in counters {
        for (sum, part) in p.iter_mut().zip(&counter.0) {
            *sum += part;
        }
    }
    Ok((p, tiers))
}
