//! Counting generalized diagonals in leaps.
//!
//! The walk of [`diagonals`](super::diagonals) asks every corner on the way of a fan, about p(n) in all, to find about
//! s(n) diagonals. Where linear parts are tabulated a [`Grove`] knows which corners can cut anything in the next m
//! crossings, so a fan asks only about log m of them. The fans, the diagonals and the counts are the same.
//!
//! Both boundary rays of a fan stay in one beam of the grove between cuts, so the fan is at one place of one tree. A
//! cut by the tree's branch that misses the fan costs at most two orientations, like a step of the plain walk.

use super::diagonals::{Listener, Seed, trail_of};
use crate::number::{Sign, Tiers};
use crate::run::control::STEPS_PER_TICK;
use crate::run::{Control, Stopped};
use crate::table::SideId;
use crate::unfold::engine::{Engine, ExactTrail, Leaping, Trail};
use crate::unfold::fan::{self, Fan, Step};
use crate::unfold::grove::{Edge, Grove, Place};
use crate::unfold::mesh::{Exit, Mesh};

/// A fan in a tree: the copy at the root with the crossings up to it, the place, and the boundary rays.
struct Fanned<E: Engine> {
    root: E::Pose,
    crossings: u32,
    place: Place,
    left: E::Point,
    right: E::Point,
}

// Derived copies would ask the engine itself to be copied.
impl<E: Engine> Clone for Fanned<E> {
    fn clone(&self) -> Fanned<E> {
        *self
    }
}

impl<E: Engine> Copy for Fanned<E> {}

/// What the walk of one seed shares.
struct Walk<'a, E: Leaping, L> {
    engine: &'a E,
    grove: &'a Grove<E::Ahead>,
    most: usize,
    seed: &'a Seed<E>,
    listener: &'a mut L,
    trail: Trail<E::Exact>,
}

/// Walks everything below a seed, depth first, on flat stacks.
pub(super) fn walk_seed<E: Leaping, L: Listener<E>>(
    engine: &E,
    mesh: &Mesh,
    grove: &Grove<E::Ahead>,
    most: usize,
    control: &Control,
    seed: &Seed<E>,
    listener: &mut L,
) -> Result<Tiers, Stopped> {
    let mut walk = Walk {
        engine,
        grove,
        most,
        seed,
        listener,
        trail: trail_of(engine, seed),
    };
    let mut fans = vec![];
    let mut stack = Vec::new();
    walk.leave_copy(mesh, &mut fans);
    let mut steps = 0u64;
    for (fan, side) in fans {
        // The seed's copy is left by different sides.
        walk.trail.cross(seed.path.len(), side);
        stack.push(fan);
        while let Some(fan) = stack.pop() {
            walk.follow(fan, &mut stack, control, &mut steps)?;
        }
    }
    control.tick(steps % STEPS_PER_TICK)?;
    Ok(walk.trail.tiers)
}

impl<E: Leaping, L: Listener<E>> Walk<'_, E, L> {
    /// Follows the seed to the sides of its copy, triangle by triangle.
    fn leave_copy(&mut self, mesh: &Mesh, out: &mut Vec<(Fanned<E>, SideId)>) {
        let crossings = self.seed.path.len();
        let mut open = vec![self.seed.fan];
        while let Some(fan) = open.pop() {
            let mut send = |exit: Exit, left: E::Point, right: E::Point| match exit {
                Exit::Pass(gate) => open.push(Fan {
                    gate,
                    left,
                    right,
                    ..fan
                }),
                Exit::Bounce(side, _) if crossings < self.most => {
                    let fanned = Fanned {
                        root: self.engine.reflect(&fan.pose, side),
                        crossings: crossings as u32 + 1,
                        place: self.grove.root(side),
                        left,
                        right,
                    };
                    out.push((fanned, side));
                }
                Exit::Bounce(..) => {}
            };
            match fan::step(self.engine, mesh, &mut self.trail, &fan) {
                Step::Through(exit) => send(exit, fan.left, fan.right),
                Step::Split {
                    apex,
                    corner,
                    left,
                    right,
                } => {
                    send(left, fan.left, apex);
                    send(right, apex, fan.right);
                    let ends = (self.seed.corner, corner);
                    self.listener
                        .found(self.engine, &mut self.trail, crossings, ends, &apex);
                }
            }
        }
    }

    /// Follows one fan to its end; the left parts of its cuts wait on the stack.
    #[inline(always)]
    fn follow(
        &mut self,
        mut fan: Fanned<E>,
        stack: &mut Vec<Fanned<E>>,
        control: &Control,
        steps: &mut u64,
    ) -> Result<(), Stopped> {
        let engine = self.engine;
        loop {
            *steps += 1;
            if steps.is_multiple_of(STEPS_PER_TICK) {
                control.tick(STEPS_PER_TICK)?;
            }
            match fan.place.get() {
                Ok(number) => {
                    let branch = self.grove.branch(number);
                    let ahead = u32::from(branch.edge.to);
                    let crossings = (fan.crossings + ahead) as usize;
                    if crossings > self.most {
                        return Ok(());
                    }
                    self.arrive(fan.crossings, branch.edge);
                    let apex = engine.place_ahead(&fan.root, &branch.apex, ahead, branch.corner);
                    // In an unmirrored copy lines with the apex on their right go the first way.
                    let mirrored = usize::from(engine.is_mirrored(&fan.root));
                    let [apex_right, apex_left] =
                        [branch.beyond[mirrored], branch.beyond[1 - mirrored]];
                    if engine.turn_from_origin(&mut self.trail, &fan.right, &apex) != Sign::Positive
                    {
                        fan.place = apex_right;
                    } else if engine.turn_from_origin(&mut self.trail, &fan.left, &apex)
                        != Sign::Negative
                    {
                        fan.place = apex_left;
                    } else {
                        let ends = (self.seed.corner, branch.corner);
                        self.listener
                            .found(engine, &mut self.trail, crossings, ends, &apex);
                        stack.push(Fanned {
                            place: apex_right,
                            right: apex,
                            ..fan
                        });
                        fan.left = apex;
                        fan.place = apex_left;
                    }
                }
                Err(number) => {
                    let tip = self.grove.tip(number);
                    let crossings = fan.crossings + u32::from(tip.edge.to);
                    if crossings as usize > self.most {
                        return Ok(());
                    }
                    self.arrive(fan.crossings, tip.edge);
                    fan.root =
                        engine.leap(&fan.root, tip.element, &tip.ahead, u32::from(tip.edge.to));
                    fan.crossings = crossings;
                    fan.place = self.grove.root(tip.side);
                }
            }
        }
    }

    /// Records the crossings of an edge, when decisions look at them.
    #[inline(always)]
    fn arrive(&mut self, crossings: u32, edge: Edge) {
        if <E::Exact as ExactTrail>::NEEDS_PATH {
            let from = crossings as usize + usize::from(edge.from);
            self.trail.cross_all(from, self.grove.sides(edge));
        }
    }
}
