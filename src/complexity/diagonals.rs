//! Generalized diagonals, found by walking all fans of rays from all corners.
//!
//! A generalized diagonal is a segment of the unfolded table from a corner to a corner with no corner in
//! between; oriented ones are counted, so each segment counts once from either end. Its code is the
//! sequence of sides that it crosses. Segments along a side are not counted.
//!
//! Cost of finding all that cross at most n sides: about one fan step for each word of length n, so about
//! p(n) steps, in memory O(n). Counting takes fewer where `leaps` can be taken.

use super::counts::p_from_diagonals;
use super::leaps;
use crate::number::Tiers;
use crate::run::checkpoint::{Ledger, Unkept};
use crate::run::control::STEPS_PER_TICK;
use crate::run::parts::{self, Kept};
use crate::run::{Control, Stopped};
use crate::table::{CornerId, SideId, Vector};
use crate::unfold::engine::{AnyEngine, Engine, Leaping, Trail};
use crate::unfold::fan::{self, Fan, Step};
use crate::unfold::grove::Grove;
use crate::unfold::mesh::{Exit, Mesh, Wedge};
use crate::unfold::with_engine;
use rayon::prelude::*;

/// One oriented generalized diagonal.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagonal {
    /// Where it starts.
    pub start: CornerId,
    /// The corner at its end.
    pub end: CornerId,
    /// The sides that it crosses, in order.
    pub code: Vec<SideId>,
    /// The exact vector from its start to its end in the unfolded plane.
    pub displacement: Vector,
}

/// A fan on its own, with the path that led to it.
pub(super) struct Seed<E: Engine> {
    pub(super) corner: CornerId,
    pub(super) path: Vec<SideId>,
    pub(super) fan: Fan<E>,
}

/// Hears of each generalized diagonal.
pub(super) trait Listener<E: Engine>: Send {
    fn found(
        &mut self,
        engine: &E,
        trail: &mut Trail<E::Exact>,
        crossings: usize,
        ends: (CornerId, CornerId),
        apex: &E::Point,
    );
}

/// N(0), …, N(most): how many oriented generalized diagonals cross exactly n sides.
///
/// # Errors
/// When the control asks to stop.
pub fn count(
    engine: &AnyEngine,
    mesh: &Mesh,
    most: usize,
    control: &Control,
) -> Result<(Vec<u64>, Tiers), Stopped> {
    count_kept(engine, mesh, most, control, &Unkept)
}

/// The same; the counts of parts that the ledger knows are taken from there. The tiers tell of all parts.
///
/// # Errors
/// When the control asks to stop.
pub fn count_kept(
    engine: &AnyEngine,
    mesh: &Mesh,
    most: usize,
    control: &Control,
    ledger: &dyn Ledger,
) -> Result<(Vec<u64>, Tiers), Stopped> {
    with_engine!(engine, engine => {
        let depth = match engine.can_leap() {
            true => leaping_depth(engine, mesh, most, control)?,
            false => None,
        };
        match depth {
            Some(depth) => count_leaping(engine, mesh, most, depth, control, ledger),
            None => count_plain(engine, mesh, most, control, ledger),
        }
    })
}

/// The same in leaps of a given depth, at least 1 and at most `most`; [`count`] chooses the depth itself.
///
/// # Errors
/// When the control asks to stop.
///
/// # Panics
/// If the engine cannot leap.
pub fn count_leaping<E: Leaping>(
    engine: &E,
    mesh: &Mesh,
    most: usize,
    depth: usize,
    control: &Control,
    ledger: &dyn Ledger,
) -> Result<(Vec<u64>, Tiers), Stopped> {
    let grove = Grove::grow(engine, mesh, depth, control)?;
    let walk = |seed: &Seed<E>, counter: &mut Counter| {
        leaps::walk_seed(engine, mesh, &grove, most, control, seed, counter)
    };
    count_parts(engine, mesh, most, control, ledger, walk)
}

/// How far to leap on a walk of so many crossings; `None` when leaps would not pay.
///
/// Trees of depth m have about p(m) places. They should stay near the processor's caches, hence [`MOST_PLACES`], and
/// growing them costs Σ p(k) steps for k ≤ m, about (m/n)³·m/4 of the walk's own p(n) when p grows like n³; with
/// m ≤ n/12 that is a hundredth of the walk for the lengths in question.
///
/// # Errors
/// When the control asks to stop.
fn leaping_depth<E: Engine>(
    engine: &E,
    mesh: &Mesh,
    most: usize,
    control: &Control,
) -> Result<Option<usize>, Stopped> {
    let mut depth = most / 12;
    if depth < LEAST_DEPTH {
        return Ok(None);
    }
    // Look at doubling lengths, so that not much more is counted than needed.
    let mut looked = LEAST_DEPTH;
    loop {
        let reach = looked.min(depth);
        let (found, _) = count_with(engine, mesh, reach, control)?;
        let p = p_from_diagonals(mesh.side_count() as u64, &found, reach);
        if let Some(over) = p.iter().position(|words| *words > MOST_PLACES) {
            depth = over - 1;
            return Ok(Some(depth).filter(|depth| *depth >= LEAST_DEPTH));
        }
        if reach == depth {
            return Ok(Some(depth));
        }
        looked *= 2;
    }
}

/// Shorter leaps save little.
const LEAST_DEPTH: usize = 6;
/// About 130 bytes each, with branches, tips and sides: a grove of at most 17 megabytes, or twice that while it grows.
/// Measured: for p(2000) of the right isosceles triangle 2^15, 2^16 and 2^17 take the same time within a tenth, with
/// fewer questions and more cache misses; for the heptagonal triangle 2^17 is the fastest of them.
const MOST_PLACES: u64 = 1 << 17;

/// The same on a given engine, always step by step.
///
/// # Errors
/// When the control asks to stop.
pub fn count_with<E: Engine>(
    engine: &E,
    mesh: &Mesh,
    most: usize,
    control: &Control,
) -> Result<(Vec<u64>, Tiers), Stopped> {
    count_plain(engine, mesh, most, control, &Unkept)
}

fn count_plain<E: Engine>(
    engine: &E,
    mesh: &Mesh,
    most: usize,
    control: &Control,
    ledger: &dyn Ledger,
) -> Result<(Vec<u64>, Tiers), Stopped> {
    let walk = |seed: &Seed<E>, counter: &mut Counter| {
        walk_seed(engine, mesh, most, control, seed, counter)
    };
    count_parts(engine, mesh, most, control, ledger, walk)
}

fn count_parts<E: Engine>(
    engine: &E,
    mesh: &Mesh,
    most: usize,
    control: &Control,
    ledger: &dyn Ledger,
    walk: impl Fn(&Seed<E>, &mut Counter) -> Result<Tiers, Stopped> + Sync,
) -> Result<(Vec<u64>, Tiers), Stopped> {
    let new = || Counter(vec![0; most + 1]);
    let recall = |part| {
        // A checkpoint's version, table and options agree, so the length does too.
        parts::recall::<Counter>(ledger, part).filter(|(counter, _)| counter.0.len() == most + 1)
    };
    let keep = |part, counter: &Counter, tiers| parts::keep(ledger, part, counter, tiers);
    let (counters, tiers) = walk_fans(engine, mesh, most, control, new, (recall, keep), walk)?;
    let mut n = vec![0; most + 1];
    for counter in counters {
        for (sum, part) in n.iter_mut().zip(&counter.0) {
            *sum += part;
        }
    }
    Ok((n, tiers))
}

/// All oriented generalized diagonals that cross at most `most` sides, by number of crossings, then start
/// corner, then code.
///
/// Memory: `most` bytes and two exact numbers for each.
///
/// # Errors
/// When the control asks to stop.
pub fn list(
    engine: &AnyEngine,
    mesh: &Mesh,
    most: usize,
    control: &Control,
) -> Result<(Vec<Diagonal>, Tiers), Stopped> {
    let (lists, tiers) = with_engine!(engine, engine => {
        let no_ledger = (|_| None, |_, _: &Collector, _| {});
        let (lists, tiers) = walk_fans(engine, mesh, most, control, Collector::default, no_ledger, |seed, found| {
            walk_seed(engine, mesh, most, control, seed, found)
        })?;
        (lists, tiers)
    });
    let mut all: Vec<Diagonal> = lists.into_iter().flat_map(|c| c.0).collect();
    all.sort_by(|a, b| {
        (a.code.len(), a.start, &a.code, a.end).cmp(&(b.code.len(), b.start, &b.code, b.end))
    });
    Ok((all, tiers))
}

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

impl<E: Engine> Listener<E> for Counter {
    #[inline(always)]
    fn found(
        &mut self,
        _: &E,
        _: &mut Trail<E::Exact>,
        crossings: usize,
        _: (CornerId, CornerId),
        _: &E::Point,
    ) {
        self.0[crossings] += 1;
    }
}

#[derive(Default)]
struct Collector(Vec<Diagonal>);

impl<E: Engine> Listener<E> for Collector {
    fn found(
        &mut self,
        engine: &E,
        trail: &mut Trail<E::Exact>,
        crossings: usize,
        (start, end): (CornerId, CornerId),
        apex: &E::Point,
    ) {
        let origin = engine.place(&engine.home(Some(start)), start);
        self.0.push(Diagonal {
            start,
            end,
            code: trail.path()[..crossings].to_vec(),
            displacement: engine.displacement(trail, &origin, apex),
        });
    }
}

/// Fans to aim for when the work is divided.
const SEEDS: usize = 256;

/// Walks all fans; returns the listeners in a fixed order that does not depend on the number of threads. `recall` may know
/// the listener of a part from before; `keep` hears of each part that was walked to its end.
fn walk_fans<E: Engine, L: Listener<E>>(
    engine: &E,
    mesh: &Mesh,
    most: usize,
    control: &Control,
    new_listener: impl Fn() -> L + Sync,
    (recall, keep): (
        impl Fn(usize) -> Option<(L, Tiers)> + Sync,
        impl Fn(usize, &L, Tiers) + Sync,
    ),
    walk: impl Fn(&Seed<E>, &mut L) -> Result<Tiers, Stopped> + Sync,
) -> Result<(Vec<L>, Tiers), Stopped> {
    assert!(
        most <= engine.deepest(),
        "the engine must reach the last crossing"
    );
    let mut head = new_listener();
    let mut tiers = Tiers::default();
    let mut seeds = Vec::new();
    for wedge in mesh.wedges() {
        open_wedge(engine, wedge, most, &mut head, &mut seeds);
    }
    // A seed is stepped until its children have crossed a side or split; a few rounds give enough seeds.
    let mut round = 0;
    while !seeds.is_empty() && seeds.len() < SEEDS && round < most {
        control.tick(seeds.len() as u64)?;
        let mut next = Vec::new();
        for seed in seeds {
            let mut trail = trail_of(engine, &seed);
            let mut emit = |fan: Fan<E>, path: &[SideId]| {
                next.push(Seed {
                    corner: seed.corner,
                    path: path.to_vec(),
                    fan,
                })
            };
            advance(
                engine,
                mesh,
                most,
                seed.corner,
                seed.path.len(),
                &seed.fan,
                &mut trail,
                &mut head,
                &mut emit,
            );
            tiers.absorb(trail.tiers);
        }
        seeds = next;
        round += 1;
    }
    let walked: Vec<(L, Tiers)> = seeds
        .par_iter()
        .enumerate()
        .map(|(part, seed)| {
            if let Some(known) = recall(part) {
                return Ok(known);
            }
            let mut listener = new_listener();
            let tiers = walk(seed, &mut listener)?;
            keep(part, &listener, tiers);
            Ok((listener, tiers))
        })
        .collect::<Result<_, Stopped>>()?;
    let mut listeners = vec![head];
    for (listener, part) in walked {
        tiers.absorb(part);
        listeners.push(listener);
    }
    Ok((listeners, tiers))
}

pub(super) fn trail_of<E: Engine>(engine: &E, seed: &Seed<E>) -> Trail<E::Exact> {
    let mut trail = engine.trail(Some(seed.corner));
    for (crossing, side) in seed.path.iter().enumerate() {
        trail.cross(crossing, *side);
    }
    trail
}

/// Reports the inner edge on the right of a wedge as a diagonal without crossings, and starts its fan.
fn open_wedge<E: Engine, L: Listener<E>>(
    engine: &E,
    wedge: &Wedge,
    most: usize,
    listener: &mut L,
    seeds: &mut Vec<Seed<E>>,
) {
    let (pose, left, right) = fan::start(engine, wedge);
    if wedge.right_is_inner {
        let mut trail = engine.trail(Some(wedge.corner));
        listener.found(engine, &mut trail, 0, (wedge.corner, wedge.right), &right);
    }
    let (pose, gate, path) = match wedge.exit {
        Exit::Pass(gate) => (pose, gate, Vec::new()),
        Exit::Bounce(side, gate) if most > 0 => (engine.reflect(&pose, side), gate, vec![side]),
        Exit::Bounce(..) => return,
    };
    seeds.push(Seed {
        corner: wedge.corner,
        path,
        fan: Fan {
            pose,
            gate,
            left,
            right,
        },
    });
}

/// One step of a fan; what is left of it, after the exits, goes to `emit` with its path.
#[allow(clippy::too_many_arguments)]
fn advance<E: Engine, L: Listener<E>>(
    engine: &E,
    mesh: &Mesh,
    most: usize,
    start: CornerId,
    crossings: usize,
    fan: &Fan<E>,
    trail: &mut Trail<E::Exact>,
    listener: &mut L,
    emit: &mut impl FnMut(Fan<E>, &[SideId]),
) {
    let mut send =
        |trail: &mut Trail<E::Exact>, exit: Exit, left: E::Point, right: E::Point| match exit {
            Exit::Pass(gate) => emit(
                Fan {
                    gate,
                    left,
                    right,
                    ..*fan
                },
                &trail.path()[..crossings],
            ),
            Exit::Bounce(side, gate) if crossings < most => {
                trail.cross(crossings, side);
                let pose = engine.reflect(&fan.pose, side);
                emit(
                    Fan {
                        pose,
                        gate,
                        left,
                        right,
                    },
                    trail.path(),
                );
            }
            Exit::Bounce(..) => {}
        };
    match fan::step(engine, mesh, trail, fan) {
        Step::Through(exit) => send(trail, exit, fan.left, fan.right),
        Step::Split {
            apex,
            corner,
            left,
            right,
        } => {
            listener.found(engine, trail, crossings, (start, corner), &apex);
            send(trail, left, fan.left, apex);
            send(trail, right, apex, fan.right);
        }
    }
}

/// A fan on the stack with the number of sides crossed so far; the last of them is `side`.
struct Waiting<E: Engine> {
    fan: Fan<E>,
    crossings: u32,
    side: SideId,
}

/// Walks everything below a seed, depth first, on a flat stack.
fn walk_seed<E: Engine, L: Listener<E>>(
    engine: &E,
    mesh: &Mesh,
    most: usize,
    control: &Control,
    seed: &Seed<E>,
    listener: &mut L,
) -> Result<Tiers, Stopped> {
    let mut trail = trail_of(engine, seed);
    let root = seed.path.len();
    let mut stack: Vec<Waiting<E>> = vec![Waiting {
        fan: seed.fan,
        crossings: root as u32,
        side: SideId(0),
    }];
    let mut steps = 0u64;
    while let Some(Waiting {
        mut fan,
        crossings,
        side,
    }) = stack.pop()
    {
        let mut crossings = crossings as usize;
        if crossings > root {
            trail.cross(crossings - 1, side);
        }
        // One fan is followed in registers; only its splits touch the stack.
        loop {
            steps += 1;
            if steps.is_multiple_of(STEPS_PER_TICK) {
                control.tick(STEPS_PER_TICK)?;
            }
            let exit = match fan::step(engine, mesh, &mut trail, &fan) {
                Step::Through(exit) => exit,
                Step::Split {
                    apex,
                    corner,
                    left,
                    right,
                } => {
                    listener.found(engine, &mut trail, crossings, (seed.corner, corner), &apex);
                    let waiting = Fan { right: apex, ..fan };
                    match left {
                        // The part that stays in this copy keeps the path, so it can wait unchanged.
                        Exit::Pass(gate) => stack.push(Waiting {
                            fan: Fan { gate, ..waiting },
                            crossings: crossings as u32,
                            side: last_side(&trail, crossings),
                        }),
                        Exit::Bounce(side, gate) if crossings < most => stack.push(Waiting {
                            fan: Fan {
                                pose: engine.reflect(&fan.pose, side),
                                gate,
                                ..waiting
                            },
                            crossings: crossings as u32 + 1,
                            side,
                        }),
                        Exit::Bounce(..) => {}
                    }
                    fan.left = apex;
                    right
                }
            };
            match exit {
                Exit::Pass(gate) => fan.gate = gate,
                Exit::Bounce(side, gate) => {
                    if crossings == most {
                        break;
                    }
                    trail.cross(crossings, side);
                    crossings += 1;
                    fan.pose = engine.reflect(&fan.pose, side);
                    fan.gate = gate;
                }
            }
        }
    }
    control.tick(steps % STEPS_PER_TICK)?;
    Ok(trail.tiers)
}

fn last_side<X: crate::unfold::engine::ExactTrail>(trail: &Trail<X>, crossings: usize) -> SideId {
    crossings
        .checked_sub(1)
        .map_or(SideId(0), |last| trail.path()[last])
}
