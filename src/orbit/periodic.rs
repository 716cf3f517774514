//! All periodic words of a table up to a length, with proof that none is missing.
//!
//! **When a word is periodic.** Let w = w₁…w_n be the sides hit on one turn. Unfold an orbit that starts on
//! side w₁, crosses w₂, …, w_n and comes back to w₁: the copy of the table beyond is P(table) for an isometry
//! P, the product of n reflections. The orbit is periodic with code w exactly when its line L belongs to the
//! beam of w₁…w_n w₁ and P maps L to itself, keeping its orientation. Since the start point moves forward
//! along L:
//!
//! - *n even*: P keeps orientation, so it is the translation by a vector t in the direction of L. All lines in
//!   the direction t qualify; those inside the beam form a strip, found exactly from the corner images that
//!   bound the beam.
//! - *n odd*: P is a glide reflection, and L is its axis, taken in the direction of the glide. Lines near by
//!   close after two turns; their strip reaches as far to both sides as the nearest corner image allows,
//!   because P reflects the corner images of the first turn in the axis to those of the second.
//!
//! **Odd words on a table with holes.** A word of sides is then a bundle of beams, and P depends on the word alone. A line
//! parallel to the axis, at signed distance h from it, comes back after one turn at −h, so it closes after two turns
//! with the code ww exactly when h is in some beam's interval of distances and −h in some beam's. A simple polygon has one
//! beam for w, an interval with h and −h holds 0, and so the axis is there too. With holes h and −h may lie in two
//! beams, on two sides of a hole that stands in the way of the axis. So the search keeps, for every odd word, the
//! intervals of all its beams, and pairs them afterwards: beams i ≠ j give the strip I(i) ∩ −I(j), which is the same set of
//! orbits as its mirror image I(j) ∩ −I(i) one turn later. Beams share no line, so at most one of them holds the axis.
//! No word longer than w has to be looked at.
//!
//! A turn of a power u^m with m > 1 adds nothing else. Let the product for u^m be a translation by t ≠ 0, or a glide
//! along t, that keeps a line L. The product Q for u is then no rotation (its power would fix a point). If Q is a
//! translation it is one along t and keeps L. If Q is a glide, L is its axis when m is odd; when m is even Q² keeps L, so
//! L closes after two turns of u.
//!
//! **The search** walks all beams, so it is complete. A class under cyclic shift is met at its least rotation
//! only: every prefix of a least rotation is a *prenecklace* (no cyclic shift of it can begin with a smaller
//! prefix), and other prefixes are not followed. With the period rule of Fredricksen, Kessler and Maiorana that
//! test costs one comparison a letter. A word is primitive and its own least rotation exactly when the
//! period is the whole word.
//!
//! **Stability.** An even word survives every small change of the table exactly when each side occurs as often
//! at odd as at even places; an odd word, which doubled has this property, always does (Galperin, Stepin,
//! Vorobets, Russian Math. Surveys 47 (1992)). For then P is a translation whatever the angles are.
//!
//! **Words of sides.** All of this is about words of sides. When sides share a letter, several of them may have one
//! class of letters: [`letter_class`].
//! On a table with holes one word may have several strips; each is an entry of its own, and a strip that is another one
//! run backward is left out.
//!
//! Cost: one beam step for each prenecklace of the language, roughly p(1) + … + p(n) divided by n; an exact
//! test for the words whose angles may close, linear in n for a finite reflection group and quadratic
//! otherwise.

mod closing;
mod holes;

pub use closing::{Closing, Strip};

use super::trace::Start;
use crate::number::Real;
use crate::run::control::STEPS_PER_TICK;
use crate::run::{Control, Stopped};
use crate::table::{LetterId, SideId, Table, Vector};
use crate::unfold::beam::{self, Front, Spread};
use crate::unfold::engine::{AnyEngine, Engine, Trail};
use crate::unfold::{Mesh, with_engine};
use closing::{Closer, Gliding, Returned};
use rayon::prelude::*;

/// A class of periodic words under cyclic shift and reversal; on a table with holes one of its strips.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct PeriodicWord {
    /// The least word of the class, in the order of the sides.
    pub word: Vec<SideId>,
    /// Where its orbits run, exactly.
    pub closing: Closing,
    /// True when every small change of the table keeps it.
    pub stable: bool,
}

impl PeriodicWord {
    /// True for an odd number of hits.
    pub fn is_odd(&self) -> bool {
        self.word.len() % 2 == 1
    }

    /// Turns of the word after which the orbit of [`PeriodicWord::start`] closes: one, or two for an odd word in a
    /// strip beside its axis (only on a table with holes).
    pub fn turns(&self) -> usize {
        let beside = |axis: &Real| *axis != self.closing.strip.middle;
        1 + usize::from(self.closing.axis.as_ref().is_some_and(beside))
    }

    /// The start of one of its orbits: the middle of its strip. That is the axis of an odd word, unless a hole is in
    /// the way.
    pub fn start(&self, table: &Table) -> Start {
        let side = self.word[0].0 as usize;
        let origin = table.corner(0);
        let direction = &self.closing.displacement;
        let offset = |corner: usize| {
            direction.cross(&table.corner(corner).minus(origin)) - &self.closing.strip.middle
        };
        let (first, second) = (offset(side), offset(table.after(side)));
        Start {
            side: self.word[0],
            fraction: &first / &(&first - &second),
            aim: direction.clone(),
        }
    }

    /// The square of the length of the orbit of [`PeriodicWord::start`], until it closes.
    pub fn squared_orbit_length(&self, table: &Table) -> Real {
        &self.squared_length(table) * &Real::from((self.turns() * self.turns()) as i64)
    }

    /// The square of the way for one turn of the word.
    pub fn squared_length(&self, table: &Table) -> Real {
        self.closing.displacement.squared_length(table.form())
    }

    /// The square of the strip's width. For an odd word the strip is that of the word doubled.
    pub fn squared_width(&self, table: &Table) -> Real {
        let breadth = &self.closing.strip.breadth;
        &(breadth * breadth) * table.form() / self.squared_length(table)
    }

    /// The area of the strip over one turn (two turns for an odd word), divided by √g.
    pub fn area_over_root_form(&self) -> Real {
        let turns = if self.is_odd() { 2 } else { 1 };
        &self.closing.strip.breadth * &Real::from(turns)
    }

    /// A point of the line that [`PeriodicWord::start`] follows, where it leaves the first side.
    pub fn start_point(&self, table: &Table) -> Vector {
        super::line::point_on(table, self.word[0].0 as usize, &self.start(table).fraction)
    }
}

/// Which words are wanted.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Wanted {
    /// All of them.
    #[default]
    All,
    /// Those that survive every small change of the table.
    Stable,
}

/// All classes of primitive periodic words with at most `longest` letters, by length, then in the order of
/// their least words.
///
/// # Errors
/// When the control asks to stop.
///
/// # Panics
/// If the engine was prepared for fewer than `longest` crossings, or for another table.
pub fn periodic_words(
    table: &Table,
    engine: &AnyEngine,
    mesh: &Mesh,
    longest: usize,
    wanted: Wanted,
    control: &Control,
) -> Result<Vec<PeriodicWord>, Stopped> {
    let mut found = with_engine!(engine, engine => {
        assert!(longest <= engine.deepest(), "the engine must reach the return to the first side");
        let search = Search {
            engine,
            mesh,
            longest,
            wanted,
            control,
            closer: Closer::new(table),
            holes: table.holes() > 0,
        };
        search.run()?
    });
    found.sort_by(|a, b| {
        let place = |w: &PeriodicWord| (w.closing.strip.middle.clone(), w.turns());
        let key = |w: &PeriodicWord| (w.word.len(), w.word.clone());
        key(a).cmp(&key(b)).then_with(|| place(a).cmp(&place(b)))
    });
    if table.holes() > 0 {
        return Ok(holes::without_reversals(table, found));
    }
    Ok(found)
}

/// A prenecklace with its beam.
struct Node<E: Engine> {
    front: Front<E>,
    /// Letters of the word.
    letters: usize,
    /// The last letter.
    side: SideId,
    /// The length of the shortest prefix of which the word is a prefix of a power.
    period: usize,
    /// Corner images of the cell; they are at the top of the point stack when the node's turn comes.
    edges: usize,
}

/// A prenecklace on its own.
struct Seed<E: Engine> {
    word: Vec<SideId>,
    front: Front<E>,
    period: usize,
    cell: Vec<E::Point>,
}

/// Subtrees to aim for when the work is divided.
const SUBTREES: usize = 256;

struct Search<'a, E: Engine> {
    engine: &'a E,
    mesh: &'a Mesh,
    longest: usize,
    wanted: Wanted,
    control: &'a Control,
    closer: Closer,
    /// Words may have several beams.
    holes: bool,
}

/// What one walker keeps.
struct Walker<E: Engine> {
    trail: Trail<E::Exact>,
    out: Spread<E>,
    word: Vec<SideId>,
    found: Found,
}

/// What walkers bring back.
#[derive(Default)]
struct Found {
    words: Vec<PeriodicWord>,
    /// On a table with holes: how the beams of odd words lie beside their axes.
    glidings: Vec<(Vec<SideId>, Gliding)>,
}

impl Found {
    fn append(&mut self, mut other: Found) {
        self.words.append(&mut other.words);
        self.glidings.append(&mut other.glidings);
    }
}

impl<E: Engine> Search<'_, E> {
    fn run(&self) -> Result<Vec<PeriodicWord>, Stopped> {
        let mut found = Found::default();
        let mut seeds: Vec<Seed<E>> = (0..self.mesh.side_count())
            .map(|side| {
                let side = SideId(side as u8);
                let (front, cell) = beam::start(self.engine, self.mesh, side);
                Seed {
                    word: vec![side],
                    front,
                    period: 1,
                    cell: cell.to_vec(),
                }
            })
            .collect();
        // Words of `longest` + 1 letters show the return; none is longer.
        let mut letters = 1;
        while letters <= self.longest && !seeds.is_empty() && seeds.len() < SUBTREES {
            self.control.tick(seeds.len() as u64)?;
            let mut longer = Vec::new();
            for seed in &seeds {
                let mut walker = self.walker(&seed.word);
                self.follow(&mut walker, seed.period, &seed.front, &seed.cell, |child| {
                    longer.push(Seed {
                        word: child.word.to_vec(),
                        front: child.front,
                        period: child.period,
                        cell: child.cell.to_vec(),
                    })
                });
                found.append(walker.found);
            }
            seeds = longer;
            letters += 1;
        }
        let parts: Vec<Found> = seeds
            .par_iter()
            .map(|seed| self.walk(seed))
            .collect::<Result<_, Stopped>>()?;
        parts.into_iter().for_each(|part| found.append(part));
        found.words.extend(holes::beside_axes(found.glidings));
        Ok(found.words)
    }

    fn walker(&self, word: &[SideId]) -> Walker<E> {
        let mut trail = self.engine.trail(None);
        for (crossing, side) in word[1..].iter().enumerate() {
            trail.cross(crossing, *side);
        }
        Walker {
            trail,
            out: Spread::default(),
            word: word.to_vec(),
            found: Found::default(),
        }
    }

    /// Everything below a seed, depth first.
    fn walk(&self, seed: &Seed<E>) -> Result<Found, Stopped> {
        let mut walker = self.walker(&seed.word);
        let mut points: Vec<E::Point> = seed.cell.clone();
        let mut stack = vec![Node {
            front: seed.front,
            letters: seed.word.len(),
            side: seed.word[seed.word.len() - 1],
            period: seed.period,
            edges: seed.cell.len(),
        }];
        let mut cell: Vec<E::Point> = Vec::new();
        let mut steps = 0u64;
        while let Some(node) = stack.pop() {
            cell.clear();
            cell.extend(points.drain(points.len() - node.edges..));
            walker.word.truncate(node.letters - 1);
            walker.word.push(node.side);
            if node.letters > 1 {
                walker.trail.cross(node.letters - 2, node.side);
            }
            if node.letters <= self.longest {
                self.follow(&mut walker, node.period, &node.front, &cell, |child| {
                    points.extend_from_slice(child.cell);
                    stack.push(Node {
                        front: child.front,
                        letters: child.word.len(),
                        side: child.word[child.word.len() - 1],
                        period: child.period,
                        edges: child.cell.len(),
                    });
                });
            }
            steps += 1;
            if steps.is_multiple_of(STEPS_PER_TICK) {
                self.control.tick(STEPS_PER_TICK)?;
            }
        }
        self.control.tick(steps % STEPS_PER_TICK)?;
        Ok(walker.found)
    }

    /// Takes a prenecklace one letter further: tests the return to the first side, and hands on the longer
    /// prenecklaces that may still be needed.
    fn follow(
        &self,
        walker: &mut Walker<E>,
        period: usize,
        front: &Front<E>,
        cell: &[E::Point],
        mut hand_on: impl FnMut(Child<'_, E>),
    ) {
        let letters = walker.word.len();
        let (engine, mesh) = (self.engine, self.mesh);
        beam::spread(
            engine,
            mesh,
            &mut walker.trail,
            front,
            cell,
            &mut walker.out,
        );
        // The rest of the walker is used while its pieces are read.
        let out = std::mem::take(&mut walker.out);
        for piece in &out.pieces {
            let due = walker.word[letters - period];
            if piece.side < due {
                continue;
            }
            let longer_period = if piece.side == due {
                period
            } else {
                letters + 1
            };
            let pose = engine.reflect(&front.pose, piece.side);
            let part = &out.points[piece.start..piece.end];
            walker.trail.cross(letters - 1, piece.side);
            if period == letters && piece.side == walker.word[0] {
                self.test(walker, &pose, piece.lefts, part);
            }
            if letters < self.longest {
                walker.word.push(piece.side);
                hand_on(Child {
                    word: &walker.word,
                    front: Front {
                        pose,
                        gate: piece.gate,
                        lefts: piece.lefts,
                    },
                    period: longer_period,
                    cell: part,
                });
                walker.word.pop();
            }
        }
        walker.out = out;
    }

    /// The walker's word is primitive and its own least rotation, and the cell is that of its return.
    fn test(&self, walker: &mut Walker<E>, pose: &E::Pose, lefts: usize, cell: &[E::Point]) {
        let word = &walker.word;
        let stable = word.len() % 2 == 1 || is_balanced(word);
        if self.wanted == Wanted::Stable && !stable {
            return;
        }
        if !self.closer.may_close(word) || least_rotation_of_reversed(word) < *word {
            return;
        }
        let returned = self.closer.close(
            self.engine,
            &mut walker.trail,
            word.len() % 2 == 1,
            pose,
            (&cell[..lefts], &cell[lefts..]),
        );
        let closing = match returned {
            None => return,
            Some(Returned::Closed(closing)) => Some(closing),
            Some(Returned::Gliding(gliding)) => {
                let closing = gliding.axis_closing();
                if self.holes {
                    walker.found.glidings.push((word.clone(), gliding));
                }
                closing
            }
        };
        if let Some(closing) = closing {
            walker.found.words.push(PeriodicWord {
                word: word.clone(),
                closing,
                stable,
            });
        }
    }
}

/// A longer prenecklace, as it is handed on.
struct Child<'a, E: Engine> {
    word: &'a [SideId],
    front: Front<E>,
    period: usize,
    cell: &'a [E::Point],
}

/// The class of a word of sides as a word of letters: the shortest word of which its spelling is a power, at its least
/// cyclic shift, forward or backward.
pub fn letter_class(table: &Table, word: &[SideId]) -> Vec<LetterId> {
    let spelled: Vec<LetterId> = word.iter().map(|s| table.letter_id(*s)).collect();
    let n = spelled.len();
    let root = (1..=n)
        .find(|p| n.is_multiple_of(*p) && (*p..n).all(|i| spelled[i] == spelled[i - p]))
        .unwrap_or(n);
    let forward = &spelled[..root];
    let backward: Vec<LetterId> = forward.iter().rev().copied().collect();
    least_rotation(forward).min(least_rotation(&backward))
}

/// True when each side occurs as often at odd as at even places.
pub fn is_balanced(word: &[SideId]) -> bool {
    let mut excess = std::collections::BTreeMap::new();
    for (place, side) in word.iter().enumerate() {
        *excess.entry(side).or_insert(0i64) += if place % 2 == 0 { 1 } else { -1 };
    }
    excess.values().all(|e| *e == 0)
}

/// The least cyclic shift of the word read backwards.
fn least_rotation_of_reversed(word: &[SideId]) -> Vec<SideId> {
    let reversed: Vec<SideId> = word.iter().rev().copied().collect();
    least_rotation(&reversed)
}

fn least_rotation<T: Ord + Copy>(word: &[T]) -> Vec<T> {
    let twice = [word, word].concat();
    (0..word.len())
        .map(|shift| &twice[shift..shift + word.len()])
        .min()
        .unwrap_or(&[])
        .to_vec()
}
